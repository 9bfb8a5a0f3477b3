//! Which files and folders are models, and where their plans and notes lie.
//!
//! Names are bytes: they need not be UTF-8 and may hold anything but `/`. Nothing inside a model ever forms a path.

use std::cmp::Ordering;
use std::ffi::{OsStr, OsString};
use std::fmt;
use std::os::unix::ffi::{OsStrExt, OsStringExt};
use std::path::{Path, PathBuf};
use std::sync::Arc;

use globset::{GlobBuilder, GlobSet, GlobSetBuilder};

use crate::model::escape::Plain;
use crate::model::read::{FILE, FOLDER, is_folder_name, is_part};
use crate::store::folder::OWN;

const MODEL: &[u8] = FILE.as_bytes();
const PLAN: &[u8] = b".plan.toml";
const NOTE: &[u8] = b".note.md";
const RELEASE: &[u8] = b".release.toml";

/// A model of a watched folder, by its path. Ordered by the bytes of the path below the folder, which come in one spelling only:
/// comparing parts of paths is what a folder of thousands would be busy with.
///
/// A model keeps its plan when it is divided into parts, so whether it is a file or a folder does not tell it from another.
#[derive(Clone)]
pub struct ModelPath {
    root: Arc<Path>,
    relative: Arc<Path>,
    form: Form,
}

/// As what a model lies on disk.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Form {
    /// As a file, `NAME.model.toml`.
    File,
    /// As a folder of parts, `NAME.model`.
    Folder,
}

impl PartialEq for ModelPath {
    fn eq(&self, other: &Self) -> bool {
        self.cmp(other) == Ordering::Equal
    }
}

impl Eq for ModelPath {}

impl Ord for ModelPath {
    fn cmp(&self, other: &Self) -> Ordering {
        let same_root = || Arc::ptr_eq(&self.root, &other.root);
        let below = self.relative.as_os_str().as_bytes().cmp(other.relative.as_os_str().as_bytes());
        below.then_with(|| if same_root() { Ordering::Equal } else { self.root.cmp(&other.root) })
    }
}

impl PartialOrd for ModelPath {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl ModelPath {
    /// The model at `relative` under `root`; `None` where no model can be: by its name, or because the path leads elsewhere.
    #[must_use]
    pub fn new(root: &Arc<Path>, relative: &Path) -> Option<Self> {
        let inside = relative.components().all(|part| matches!(part, std::path::Component::Normal(_)));
        let entered = relative.parent().is_none_or(|folder| folder.iter().all(is_searched));
        let name = relative.file_name()?;
        let form = if is_folder_name(name) { Form::Folder } else { Form::File };
        if !(inside && entered && (form == Form::Folder || is_model(name))) {
            return None;
        }
        // Put together again, so that there is one spelling of it: `a//b` and `a/./b` are `a/b`.
        let mut relative: PathBuf = relative.components().collect();
        if form == Form::Folder {
            relative.as_mut_os_string().push(&FILE[FOLDER.len()..]);
        }
        Some(Self { root: root.clone(), relative: relative.into(), form })
    }

    /// The model that something written at an absolute path under `root` concerns, and the part of it, if it is one in parts.
    #[must_use]
    pub fn concerned(root: &Arc<Path>, path: &Path) -> Option<(Self, Option<OsString>)> {
        if let Some(folder) = path.parent().filter(|folder| folder.file_name().is_some_and(is_folder_name)) {
            let part = path.file_name().filter(|name| is_part(name))?;
            return Some((Self::under(root, folder)?, Some(part.to_owned())));
        }
        Self::under(root, path).filter(|model| model.form == Form::File).map(|model| (model, None))
    }

    /// The same model in a form.
    #[must_use]
    pub fn lying(&self, form: Form) -> Self {
        Self { form, ..self.clone() }
    }

    /// The model that an absolute path leads to, if it lies under `root`.
    #[must_use]
    pub fn under(root: &Arc<Path>, path: &Path) -> Option<Self> {
        Self::new(root, path.strip_prefix(root).ok()?)
    }

    /// The watched folder.
    #[must_use]
    pub fn root(&self) -> &Path {
        &self.root
    }

    /// The same, shared.
    #[must_use]
    pub fn shared_root(&self) -> Arc<Path> {
        self.root.clone()
    }

    /// The path below the watched folder by which it is known: that of a file, whatever it lies there as.
    #[must_use]
    pub fn relative(&self) -> &Path {
        &self.relative
    }

    /// The path below the watched folder as people see it.
    #[must_use]
    pub fn seen(&self) -> PathBuf {
        match self.form {
            Form::File => self.relative.to_path_buf(),
            Form::Folder => self.relative.with_file_name(OsString::from_vec([self.stem(), FOLDER.as_bytes()].concat())),
        }
    }

    /// The whole path.
    #[must_use]
    pub fn full(&self) -> PathBuf {
        self.root.join(self.seen())
    }

    /// Where its plan lies.
    #[must_use]
    pub fn plan(&self) -> PathBuf {
        self.beside(PLAN)
    }

    /// Where its note lies.
    #[must_use]
    pub fn note(&self) -> PathBuf {
        self.beside(NOTE)
    }

    /// Where its release lies, if people have pinned one.
    #[must_use]
    pub fn release(&self) -> PathBuf {
        self.beside(RELEASE)
    }

    /// The model's name, `NAME` of `NAME.model.toml`, as text. Not escaped.
    #[must_use]
    pub fn name(&self) -> String {
        String::from_utf8_lossy(self.stem()).into_owned()
    }

    fn stem(&self) -> &[u8] {
        let name = self.relative.file_name().unwrap_or_default().as_bytes();
        name.strip_suffix(MODEL).unwrap_or(name)
    }

    fn beside(&self, suffix: &[u8]) -> PathBuf {
        self.root.join(&self.relative).with_file_name(OsString::from_vec([self.stem(), suffix].concat()))
    }
}

impl fmt::Display for ModelPath {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}", Plain(&self.seen().to_string_lossy()))
    }
}

impl fmt::Debug for ModelPath {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{:?}", self.seen())
    }
}

/// Whether a file of this name is a model. Editors' and tools' leavings (`.x`, `#x#`, `x~`, `x.swp`, `x.bak` …) are none.
#[must_use]
pub fn is_model(name: &OsStr) -> bool {
    stem(name, MODEL).is_some()
}

/// Whether a file of this name is a plan or a note.
#[must_use]
pub fn is_output(name: &OsStr) -> bool {
    stem(name, PLAN).is_some() || stem(name, NOTE).is_some()
}

/// What lies beside a model.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Beside {
    /// Its plan.
    Plan,
    /// Its note.
    Note,
    /// Its release.
    Release,
}

/// The name of the model that a file of this name lies beside, and as what.
#[must_use]
pub fn model_beside(name: &OsStr) -> Option<(OsString, Beside)> {
    let kinds = [(PLAN, Beside::Plan), (NOTE, Beside::Note), (RELEASE, Beside::Release)];
    let (stem, kind) = kinds.into_iter().find_map(|(suffix, kind)| Some((stem(name, suffix)?, kind)))?;
    Some((OsString::from_vec([stem, MODEL].concat()), kind))
}

/// The name of the file that would be the same model as a folder of this name.
#[must_use]
pub fn file_of_folder(name: &OsStr) -> Option<OsString> {
    is_folder_name(name).then(|| [name, OsStr::new(&FILE[FOLDER.len()..])].into_iter().collect())
}

/// Whether something written at a path below the watched folder may concern a model.
#[must_use]
pub fn may_concern(below: &Path) -> bool {
    let Some(name) = below.file_name() else { return false };
    is_model(name) || (is_part(name) && below.parent().and_then(Path::file_name).is_some_and(is_folder_name))
}

/// Whether models are looked for in a folder of this name. A folder that is a model holds parts, and no further models.
#[must_use]
pub fn is_searched(name: &OsStr) -> bool {
    is_entered(name) && !is_folder_name(name)
}

/// Whether anything in a folder of this name is heeded.
#[must_use]
pub fn is_entered(name: &OsStr) -> bool {
    name != OWN && name != ".git"
}

fn stem<'a>(name: &'a OsStr, suffix: &[u8]) -> Option<&'a [u8]> {
    let stem = name.as_bytes().strip_suffix(suffix)?;
    (!stem.is_empty() && !stem.starts_with(b".") && !stem.starts_with(b"#")).then_some(stem)
}

/// Paths that are left out, by glob.
#[derive(Clone, Debug)]
pub struct Ignore(GlobSet);

/// A glob that cannot be read.
#[derive(Debug, thiserror::Error)]
#[error("cannot read the glob `{}` in `ignore`: {}", Plain(.glob), Plain(.message))]
pub struct IgnoreError {
    glob: String,
    message: String,
}

impl Ignore {
    /// Reads globs; `*` stays within a folder, `**` does not.
    ///
    /// # Errors
    /// Names the glob that cannot be read.
    pub fn new(globs: &[String]) -> Result<Self, IgnoreError> {
        let error =
            |glob: &str, error: globset::Error| IgnoreError { glob: glob.to_owned(), message: error.to_string() };
        let mut set = GlobSetBuilder::new();
        for glob in globs {
            set.add(GlobBuilder::new(glob).literal_separator(true).build().map_err(|e| error(glob, e))?);
        }
        set.build().map(Self).map_err(|e| error("", e))
    }

    /// Whether a path relative to the watched folder is left out.
    #[must_use]
    pub fn covers(&self, relative: &Path) -> bool {
        self.0.is_match(relative)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn root() -> Arc<Path> {
        Arc::from(Path::new("/works"))
    }

    #[test]
    fn a_model_has_one_spelling_and_a_place_in_order() {
        let at = |root: &str, below: &str| ModelPath::new(&Arc::from(Path::new(root)), Path::new(below)).unwrap();
        let same = [at("/works", "a/b.model.toml"), at("/works", "a//./b.model.toml")];
        assert!(same[0] == same[1] && same[0].cmp(&same[1]) == Ordering::Equal);
        assert_eq!(same[1].relative().as_os_str(), "a/b.model.toml");
        let mut models = [at("/b", "n.model.toml"), at("/a", "n.model.toml"), at("/b", "m.model.toml")];
        models.sort();
        assert_eq!(
            models.map(|model| model.full()),
            ["/b/m", "/a/n", "/b/n"].map(|stem| PathBuf::from(format!("{stem}.model.toml")))
        );
    }

    #[test]
    fn models_are_told_from_what_editors_leave() {
        for good in [
            "a.model.toml",
            "a b (copy).model.toml",
            "-x.model.toml",
            "a.model.toml.model.toml",
            "a\n\u{1b}.model.toml",
        ] {
            assert!(is_model(OsStr::new(good)), "{good:?}");
        }
        assert!(is_model(OsStr::from_bytes(b"\xff\xfe.model.toml")));
        let bad = [
            ".model.toml",
            ".a.model.toml",
            "#a.model.toml",
            "#a.model.toml#",
            ".#a.model.toml",
            "a.model.toml~",
            "a.model.toml.swp",
            "a.model.toml.bak",
            "a.model.toml.orig",
            "a.plan.toml",
            "a.toml",
            "model.toml",
            "a.model.TOML",
            "",
        ];
        for bad in bad {
            assert!(!is_model(OsStr::new(bad)), "{bad:?}");
        }
    }

    #[test]
    fn a_folder_of_parts_is_the_model_that_a_file_of_its_name_would_be() {
        let at = |below: &str| ModelPath::new(&root(), Path::new(below));
        let (file, folder) = (at("north/tile.model.toml").unwrap(), at("north/tile.model/").unwrap());
        assert!(file == folder && file.cmp(&folder) == Ordering::Equal);
        assert_eq!((folder.relative(), folder.name()), (file.relative(), file.name()));
        assert_eq!(
            (folder.to_string().as_str(), file.to_string().as_str()),
            ("north/tile.model", "north/tile.model.toml")
        );
        assert_eq!(folder.plan(), Path::new("/works/north/tile.plan.toml"));
        assert_eq!(folder.full(), Path::new("/works/north/tile.model"));
        assert_eq!(folder.lying(Form::File).full(), Path::new("/works/north/tile.model.toml"));
        for bad in [".model", "a/.x.model", "#x.model", "tile.model/inner.model.toml", "tile.model/inner.model"] {
            assert_eq!(at(bad), None, "{bad}");
        }
    }

    #[test]
    fn what_is_written_concerns_the_model_or_one_of_its_parts() {
        let told = |path: &str| {
            let concerned = ModelPath::concerned(&root(), Path::new(path));
            assert_eq!(may_concern(Path::new(path).strip_prefix("/works").unwrap()), concerned.is_some(), "{path}");
            concerned.map(|(model, part)| (model.to_string(), part.map(|part| part.into_string().unwrap())))
        };
        let part = |model: &str, part: &str| Some((model.to_owned(), Some(part.to_owned())));
        assert_eq!(told("/works/a/m.model.toml"), Some(("a/m.model.toml".to_owned(), None)));
        assert_eq!(told("/works/m.model/uses.csv"), part("m.model", "uses.csv"));
        assert_eq!(told("/works/a/m.model/x.model.toml"), part("a/m.model", "x.model.toml"));
        for none in ["m.model", "m.model/.x.toml", "m.model/x.md", "m.model/deep/x.toml", "m.plan.toml", "x.csv"] {
            assert_eq!(told(&format!("/works/{none}")), None, "{none}");
        }
    }

    #[test]
    fn plans_and_notes_lie_beside_their_model() {
        let model = ModelPath::new(&root(), Path::new("north/tile.x.model.toml")).unwrap();
        assert_eq!(model.plan(), Path::new("/works/north/tile.x.plan.toml"));
        assert_eq!(model.note(), Path::new("/works/north/tile.x.note.md"));
        assert_eq!(model.release(), Path::new("/works/north/tile.x.release.toml"));
        assert_eq!(model.name(), "tile.x");
        assert_eq!(model_beside(OsStr::new("tile.x.plan.toml")), Some(("tile.x.model.toml".into(), Beside::Plan)));
        let odd = ModelPath::new(&root(), Path::new(OsStr::from_bytes(b"a\n\xff.model.toml"))).unwrap();
        assert_eq!(odd.plan().as_os_str().as_bytes(), b"/works/a\n\xff.plan.toml");
        assert_eq!(odd.to_string(), "a\\u{a}\u{fffd}.model.toml");
    }

    #[test]
    fn no_path_leads_out_of_the_folder_or_into_what_is_not_entered() {
        for bad in [
            "../a.model.toml",
            "/a.model.toml",
            ".git/a.model.toml",
            "x/.millreeve/a.model.toml",
            "x/../../a.model.toml",
        ] {
            assert_eq!(ModelPath::new(&root(), Path::new(bad)), None, "{bad}");
        }
        assert_eq!(ModelPath::under(&root(), Path::new("/elsewhere/a.model.toml")), None);
        assert!(ModelPath::under(&root(), Path::new("/works/.hidden/a.model.toml")).is_some());
    }

    #[test]
    fn globs_leave_paths_out() {
        let ignore = Ignore::new(&["old/**".to_owned(), "*.sync-conflict-*".to_owned()]).unwrap();
        assert!(
            ignore.covers(Path::new("old/a.model.toml")) && ignore.covers(Path::new("a.sync-conflict-7.model.toml"))
        );
        assert!(!ignore.covers(Path::new("x/a.sync-conflict-7.model.toml")));
        assert!(Ignore::new(&["[".to_owned()]).unwrap_err().to_string().contains("`[`"));
    }
}
