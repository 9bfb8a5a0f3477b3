//! An edited text read by its edited tables alone: always what reading the whole makes of it.

use std::ops::Range;
use std::path::Path;

use millreeve::model::Model;
use millreeve::model::read::{Before, Blocks, again, text_and_blocks};
use proptest::collection::vec;
use proptest::prelude::*;

use super::{TILEWORKS, WEEKS, edited, edited_weeks};

fn path() -> &'static Path {
    Path::new("works.model.toml")
}

fn whole(text: &str) -> Option<(Model, Blocks)> {
    text_and_blocks(path(), text.as_bytes()).ok()
}

/// What reading makes of `new` by what differs from `old`.
fn in_part(old: &str, new: &str) -> Option<(Model, Blocks)> {
    let (model, blocks) = whole(old).unwrap();
    again(path(), new.as_bytes(), Before { bytes: old.as_bytes(), blocks: &blocks, model: &model })
}

#[test]
fn edits_within_tables_are_read_alone() {
    for (from, to) in [
        ("price    = 21.0", "price    = 2.5"),
        ("price    = 21.0", "price    = 21.0 # agreed"),
        ("kiln = 0.020", "kiln = 0.0205, glaze_line = 1e-3"),
        ("at_least = 500\n", ""),
        ("terms    = { wall_tile = 1.0 }", "terms    = { wall_tile = 1.0, \"tag:small\" = 2 }"),
    ] {
        let new = edited(from, to);
        assert_eq!(in_part(TILEWORKS, &new), whole(&new), "{to}");
        assert!(in_part(TILEWORKS, &new).is_some(), "{to}");
    }
    let windows = TILEWORKS.replace('\n', "\r\n");
    let new = format!("\u{feff}{}", edited("price    = 21.0", "price    = 2.5").replace('\n', "\r\n"));
    assert_eq!(in_part(&windows, &new), whole(&new));
    assert!(in_part(&windows, &new).is_some());
}

#[test]
fn edits_within_tables_of_several_periods_are_read_alone() {
    for (from, to) in [
        ("capacity = { per_day = 22 }", "capacity = { per_day = 21.5, \"2027-W02\" = 60 }"),
        ("capacity = [60, 48, 54]", "capacity = [60, 48, 50]"),
        ("lead     = 1", "lead     = 2"),
        ("opening  = 20", "opening  = 22"),
        ("price = 34, at_least = 5", "price = 35, at_least = 5"),
        ("worth = 30", "worth = 0"),
        ("\"materials.slip.purchase.1\" = 0.5", "\"materials.slip.purchase.2\" = 0.5"),
        ("over     = \"all\"", "over     = [\"2027-W03\"]"),
    ] {
        let new = edited_weeks(from, to);
        assert_eq!(in_part(WEEKS, &new), whole(&new), "{to}");
        assert!(in_part(WEEKS, &new).is_some(), "{to}");
    }
}

#[test]
fn tables_put_in_taken_out_and_renamed_are_read_alone() {
    for (from, to) in [
        ("[activities.terrace_slab]", "[activities.garden_slab]"),
        (
            "[activities.terrace_slab]",
            "[activities.step]\nprice = 9\nuses = { kiln = 0.01 }\n\n[activities.terrace_slab]",
        ),
        ("[activities.terrace_slab]", "# New this year.\n[activities.step]\n[activities.terrace_slab]"),
        (
            "[activities.terrace_slab]",
            "[resources.saw]\n[activities.step]\nuses = { saw = 1 }\n[activities.terrace_slab]",
        ),
        (SLAB, ""),
        (SLAB, "# Terrace slabs are given up.\n"),
        (SLAB, "[limits.least]\nterms = { \"activities.*\" = 1 }\nat_least = 10\n"),
        ("[limits.small_batch]", "[limits.batch_of_small]"),
        ("over     = \"each\"\n", "over     = \"each\"\n[activities.last]\ntags = [\"small\", \"last\"]\n"),
        ("tags     = [\"glazed\"]\n", ""),
        ("tags     = [", "tags     = [\"new\", "),
        ("[resources.glaze_line]", "[resources.spare]\n\n[resources.glaze_line]"),
    ] {
        let new = edited(from, to);
        assert!(in_part(TILEWORKS, &new).is_some(), "{to}");
        assert_eq!(in_part(TILEWORKS, &new), whole(&new), "{to}");
        // And back again, from what was read in part.
        assert_eq!(in_part(&new, TILEWORKS), whole(TILEWORKS), "{to}");
    }
    let offcut = "[materials.offcut]\nsale     = { price = 5, at_most = 10 }\ndiscard  = { cost = 8, at_most = 5 }\n";
    let unused = WEEKS.replace(", offcut = 0.001", "").replace(", \"materials.offcut.discard\" = 2", "");
    for (old, from, to) in [
        (WEEKS, ", { price = [36, 37, 36], at_most = 30 }]", "]"),
        (WEEKS, "[materials.offcut]", "[materials.glaze]\npurchase = { price = [3, 4, 3] }\n[materials.offcut]"),
        (&*unused, offcut, ""),
        (
            &*unused,
            "stock    = { cost = 0.4, at_least = 2, at_most = 60 }\nclosing  = { at_least = 10, worth = 30 }\n",
            "closing = 1\n",
        ),
    ] {
        assert!(old.contains(from), "{from}");
        let new = old.replacen(from, to, 1);
        assert!(in_part(old, &new).is_some(), "{to}");
        assert_eq!(in_part(old, &new), whole(&new), "{to}");
    }
    // It is still drawn, or still summed.
    for kept in [WEEKS.replace(", offcut = 0.001", ""), WEEKS.replace(", \"materials.offcut.discard\" = 2", "")] {
        assert_eq!(in_part(&kept, &kept.replace(offcut, "")), None);
    }
}

#[test]
fn a_section_without_tables_may_be_spelt_otherwise_and_is_left_to_reading_the_whole() {
    let old = TILEWORKS.replace("currency =", "materials = {}\ncurrency =");
    let new = old.replace("[activities.terrace_slab]", "[materials.slip]\n[activities.terrace_slab]");
    assert_eq!((in_part(&old, &new), whole(&new)), (None, None));
}

/// A table of the tileworks that no other refers to.
const SLAB: &str = "[activities.terrace_slab]\nprospect = true\nprice    = 34.0\nuses     = { kiln = 0.045, press = 0.02, dryer = 1 }\n";

#[test]
fn what_limits_ask_of_materials_and_resources_is_left_to_reading_the_whole() {
    for (from, to) in [
        ("surge    = { at_most = { per_day = 2 }, cost = [60, 70, 60] }\n", ""),
        (", late = { cost = 2, at_most = 300 }", ""),
        ("stock    = { cost = 0.05, at_most = [1500, 1500, 1800] }\nclosing  = 400", ""),
        ("days     = [5, 4, 4.5]", "days     = [5, 4, 5]"),
        ("capacity = [60, 48, 54]", "capacity = [60, 48]"),
        ("uses     = { kiln = 0.016", "uses     = { kiln = { \"2027-W04\" = 1 }"),
    ] {
        assert_eq!(in_part(WEEKS, &edited_weeks(from, to)), None, "{to}");
    }
}

#[test]
fn what_concerns_other_tables_or_is_faulty_is_left_to_reading_the_whole() {
    for (from, to) in [
        ("title ", "label "),
        ("[activities.terrace_slab]", "[activities.floor_tile.uses]"),
        ("[activities.terrace_slab]", "[activities.trim]"),
        ("[activities.terrace_slab]", "[activities.trim]\n[activities.terrace_slab]"),
        ("[activities.terrace_slab]", "[activities.floor_tile]\n[activities.terrace_slab]"),
        ("[activities.terrace_slab]", "[activities.new]\nuses = { kilm = 1 }\n[activities.terrace_slab]"),
        ("[activities.terrace_slab]", "[activities.new.uses]\nkiln = 1\n[activities.terrace_slab]"),
        ("[activities.terrace_slab]", "[[activities.new]]\n[activities.terrace_slab]"),
        ("[activities.terrace_slab]", "[materials.new]\n[activities.terrace_slab]"),
        ("[activities.terrace_slab]", "spare = 1\n[activities.terrace_slab]"),
        ("[activities.terrace_slab]", "limits = {}\n[activities.terrace_slab]"),
        ("[activities.terrace_slab]\n", ""),
        // Others refer to them.
        ("[activities.wall_tile]", "[activities.step]"),
        ("[resources.dryer]", "[resources.drier]"),
        ("tags     = [\"glazed\", \"small\"]\n", ""),
        ("price    = 21.0", "price    = -"),
        ("price    = 21.0", "price    = 21.0\nprice = 21.0"),
        ("price    = 21.0", "price    = 1e16"),
        ("price    = 21.0", "label    = \"\"\"\n"),
        ("kiln = 0.020", "kilm = 0.020"),
    ] {
        assert_eq!(in_part(TILEWORKS, &edited(from, to)), None, "{to}");
    }
}

#[test]
fn a_text_in_which_brackets_mislead_has_no_blocks() {
    let (_, blocks) = whole(TILEWORKS).unwrap();
    assert_ne!(blocks, Blocks::default());
    for (from, to) in [
        ("[activities.terrace_slab]", "[ activities.terrace_slab]"),
        ("[activities.terrace_slab]", "  [activities.terrace_slab]"),
        ("[activities.terrace_slab]", "[activities.\"terrace_slab\"]"),
        ("price    = 17.5", "price    = 17.5\nlabel = \"\"\"\n[activities.terrace_slab]\n\"\"\""),
    ] {
        let (_, blocks) = whole(&edited(from, to)).unwrap();
        assert_eq!(blocks, Blocks::default(), "{to}");
    }
}

/// One edit of a text, whatever comes of it.
#[derive(Clone, Debug)]
enum Slip {
    /// Another number behind the equals sign of a line.
    Number(usize, f64),
    /// A sign put in somewhere.
    Sign(usize, char),
    /// A line taken out.
    Gone(usize),
    /// A line put in again after another.
    Copied(usize, usize),
    /// Two lines in each other's place.
    Swapped(usize, usize),
    /// A table taken out.
    TableGone(usize),
    /// A table put in before another.
    TableAdded(usize, &'static str),
    /// A table under another name.
    TableRenamed(usize, &'static str),
}

impl Slip {
    fn made(&self, text: &str) -> String {
        let mut lines: Vec<String> = text.split_inclusive('\n').map(str::to_owned).collect();
        let count = lines.len().max(1);
        match *self {
            Self::Number(at, number) => {
                let numbered: Vec<usize> = (0..lines.len()).filter(|&at| lines[at].contains(" = ")).collect();
                if let Some(&at) = numbered.get(at % numbered.len().max(1)) {
                    let key = lines[at].split(" = ").next().unwrap_or_default().to_owned();
                    lines[at] = format!("{key} = {number}\n");
                }
            }
            Self::Sign(at, sign) => {
                let mut text = text.to_owned();
                text.insert(text.floor_char_boundary(at % (text.len() + 1)), sign);
                return text;
            }
            Self::Gone(at) => {
                lines.splice(at % count..(at % count + 1).min(lines.len()), []);
            }
            Self::Copied(from, to) => {
                let line = lines.get(from % count).cloned().unwrap_or_default();
                lines.insert(to % (lines.len() + 1), line);
            }
            Self::Swapped(a, b) if !lines.is_empty() => lines.swap(a % count, b % count),
            Self::Swapped(..) => {}
            Self::TableGone(at) => {
                if let Some(table) = table(&lines, at) {
                    lines.drain(table);
                }
            }
            Self::TableAdded(at, text) => {
                let place = table(&lines, at).map_or(lines.len(), |table| table.start);
                lines.insert(place, text.to_owned());
            }
            Self::TableRenamed(at, name) => {
                if let Some(table) = table(&lines, at) {
                    let section = lines[table.start].split('.').next().unwrap_or_default().to_owned();
                    lines[table.start] = format!("{section}.{name}]\n");
                }
            }
        }
        lines.concat()
    }
}

/// The lines of one of the tables of a text.
fn table(lines: &[String], at: usize) -> Option<Range<usize>> {
    let starts: Vec<usize> = (0..lines.len()).filter(|&at| lines[at].starts_with('[')).collect();
    let at = at.checked_rem(starts.len())?;
    Some(starts[at]..starts.get(at + 1).copied().unwrap_or(lines.len()))
}

/// Tables that may be put in; some of what they refer to is only there once others were put in too.
const TABLES: [&str; 9] = [
    "[activities.step]\nprice = 9\nuses = { kiln = 0.01 }\ntags = [\"glazed\", \"stepped\"]\n\n",
    "[activities.step]\nprice = 8\nuses = { saw = 0.01 }\n",
    "[activities.body]\ntags = [\"pressed\", \"small\"]\ndraws = { clay = 1 }\nmakes = { slip = 0.5 }\n",
    "[resources.saw]\ncapacity = 12\nsurge = { at_most = 3, cost = 10 }\n\n",
    "# Bought since spring.\n[materials.clay]\npurchase = { price = 12 }\nstock = { cost = 0.1 }\n",
    "[materials.offcut]\nsale = { price = 5 }\n",
    "[limits.stepped]\nterms = { \"tag:stepped\" = 1, floor_tile = 1 }\nat_most = 9000\n",
    "[limits.sawn]\nterms = { \"resources.saw.surge.1\" = 1 }\nat_most = 2\n",
    "[limits.clay]\nterms = { \"materials.clay.purchase\" = 1 }\nat_most = 20\n",
];

fn slip() -> impl Strategy<Value = Slip> {
    let sign =
        prop::sample::select(vec!['[', ']', '"', '\'', '=', '#', '\n', '\r', '\\', '{', '}', ',', '.', '0', 'a']);
    let name = prop::sample::select(vec!["step", "saw", "clay", "trim", "kiln"]);
    prop_oneof![
        4 => (any::<usize>(), (0..2000).prop_map(|n| f64::from(n) / 8.0)).prop_map(|(at, number)| Slip::Number(at, number)),
        2 => (any::<usize>(), sign).prop_map(|(at, sign)| Slip::Sign(at, sign)),
        1 => any::<usize>().prop_map(Slip::Gone),
        1 => any::<(usize, usize)>().prop_map(|(from, to)| Slip::Copied(from, to)),
        1 => any::<(usize, usize)>().prop_map(|(a, b)| Slip::Swapped(a, b)),
        2 => any::<usize>().prop_map(Slip::TableGone),
        4 => (any::<usize>(), prop::sample::select(TABLES.to_vec())).prop_map(|(at, text)| Slip::TableAdded(at, text)),
        1 => (any::<usize>(), name).prop_map(|(at, name)| Slip::TableRenamed(at, name)),
    ]
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(2000))]

    #[test]
    fn in_part_or_as_a_whole_a_text_says_the_same(slips in vec(vec(slip(), 1..3), 1..6), weeks: bool) {
        let mut old = if weeks { WEEKS } else { TILEWORKS }.to_owned();
        let (mut model, mut blocks) = whole(&old).unwrap();
        for slips in slips {
            let new = slips.iter().fold(old.clone(), |text, slip| slip.made(&text));
            let part = again(path(), new.as_bytes(), Before { bytes: old.as_bytes(), blocks: &blocks, model: &model });
            let whole = whole(&new);
            if part.is_some() {
                prop_assert_eq!(&part, &whole, "{}", new);
            }
            // The next edit starts from what was read in part, as that of a running daemon does.
            if let Some(read) = part.or(whole) {
                (old, model, blocks) = (new, read.0, read.1);
            }
        }
    }
}
