//! A repository with two hundred commits: the plan is verified after each edit, and again from clones of the history.

use std::fmt::Write as _;

use crate::git::{git, git_done};
use crate::rng::Rng;
use crate::support::Works;

const COMMITS: usize = 200;
const MODELS: usize = 6;
const RESOURCES: usize = 5;

/// A model that its edits go through. Numbers are drawn, so that hardly any two plans are equally good.
struct Draft {
    activities: Vec<Activity>,
    capacities: Vec<f64>,
    /// How much of the first activity must be made; more than can be at times.
    promised: Option<f64>,
    title: usize,
    /// Whether a name is misspelt.
    faulty: bool,
}

struct Activity {
    number: usize,
    price: f64,
    at_most: Option<f64>,
    uses: Vec<(usize, f64)>,
}

impl Activity {
    fn drawn(rng: &mut Rng, number: usize) -> Self {
        let uses = (0..RESOURCES).filter(|_| rng.below(3) > 0).map(|resource| (resource, 0.0)).collect::<Vec<_>>();
        let uses = if uses.is_empty() { vec![(number % RESOURCES, 0.0)] } else { uses };
        let uses = uses.into_iter().map(|(resource, _)| (resource, rng.between(0.01, 0.09))).collect();
        let at_most = (rng.below(2) == 0).then(|| rng.between(200.0, 3000.0));
        Self { number, price: rng.between(5.0, 50.0), at_most, uses }
    }
}

impl Draft {
    fn drawn(rng: &mut Rng) -> Self {
        Self {
            activities: (0..5 + rng.below(12)).map(|number| Activity::drawn(rng, number)).collect(),
            capacities: (0..RESOURCES).map(|_| rng.between(60.0, 200.0)).collect(),
            promised: None,
            title: 0,
            faulty: false,
        }
    }

    /// One edit of any kind. What the last one spoilt is mended first.
    fn edit(&mut self, rng: &mut Rng) {
        let next = self.activities.iter().map(|activity| activity.number).max().unwrap_or(0) + 1;
        let at = rng.below(self.activities.len());
        if self.faulty || self.promised.is_some_and(|promised| promised > 1e4) {
            (self.faulty, self.promised) = (false, None);
            return;
        }
        match rng.below(12) {
            0..3 => self.activities[at].price = rng.between(5.0, 50.0),
            3..5 => self.capacities[rng.below(RESOURCES)] = rng.between(60.0, 200.0),
            5 => self.activities[at].uses[0].1 = rng.between(0.01, 0.09),
            6 => self.activities.push(Activity::drawn(rng, next)),
            7 if self.activities.len() > 3 => drop(self.activities.remove(at)),
            8 => self.activities[at].at_most = Some(rng.between(200.0, 3000.0)),
            9 => self.promised = Some(if rng.below(2) == 0 { 1e5 } else { rng.between(1.0, 20.0) }),
            10 => self.faulty = true,
            _ => self.title += 1,
        }
    }

    fn text(&self) -> String {
        let mut text = format!("format = 1\ntitle = \"Works {}\"\ncurrency = \"EUR\"\n", self.title);
        for (number, capacity) in self.capacities.iter().enumerate() {
            let _ = write!(text, "[resources.r{number}]\ncapacity = {capacity:.2}\n");
        }
        for activity in &self.activities {
            let uses: Vec<_> =
                activity.uses.iter().map(|(resource, rate)| format!("r{resource} = {rate:.4}")).collect();
            let _ = write!(
                text,
                "[activities.a{}]\nprice = {:.2}\nuses = {{ {} }}\n",
                activity.number,
                activity.price,
                uses.join(", ")
            );
            if let Some(most) = activity.at_most {
                let _ = writeln!(text, "{} = {most:.1}", if self.faulty { "at_mots" } else { "at_most" });
            }
        }
        if let Some(promised) = self.promised {
            let first = self.activities[0].number;
            let _ = write!(text, "[limits.promised]\nterms = {{ a{first} = 1 }}\nat_least = {promised:.2}\n");
        }
        text
    }
}

#[test]
fn two_hundred_commits_verify_one_by_one_and_from_clones() {
    let mut rng = Rng::new(20_270_104);
    let works = Works::with(&[]);
    git_done(&works, &["init", "--quiet", "--initial-branch", "main"]);
    let mut drafts: Vec<Draft> = (0..MODELS).map(|_| Draft::drawn(&mut rng)).collect();
    let name = |model: usize| format!("line{}/works{model}.model.toml", model % 2);
    for (model, draft) in drafts.iter().enumerate() {
        works.save(&name(model), draft.text());
    }
    let models: Vec<usize> = (0..MODELS).collect();
    let (mut faulty, mut held) = (Vec::new(), 0);
    for number in 0..COMMITS {
        if number > 0 {
            let model = *rng.pick(&models);
            drafts[model].edit(&mut rng);
            works.save(&name(model), drafts[model].text());
        }
        works.run(&["once", "."]);
        let (_, text, err) = works.run(&["verify", "."]);
        let wrong: Vec<_> = drafts.iter().enumerate().filter(|(_, draft)| bad(draft)).map(|(model, _)| model).collect();
        let amiss = |line: &&str| line.starts_with("./") && line.contains(".model.toml: ") && !as_it_should_be(line);
        let told: Vec<&str> = text.lines().filter(amiss).collect();
        assert_eq!(told.len(), wrong.len(), "commit {number}: {text}{err}");
        assert!(told.iter().all(|line| line.contains("model faulty")), "commit {number}: {text}");
        faulty.push(wrong.len());
        held += text.matches(": held, as it should be: ").count();
        git_done(&works, &["add", "--all"]);
        git_done(&works, &["commit", "--quiet", "--allow-empty", "-m", &format!("Edit {number}")]);
    }
    // The history goes through the troubles that plans can have.
    assert!(held > 5 && faulty.iter().sum::<usize>() > 5, "{held} held, faulty: {faulty:?}");
    let commits = git_done(&works, &["rev-list", "--reverse", "HEAD"]);
    let commits: Vec<&str> = commits.lines().collect();
    assert_eq!(commits.len(), COMMITS);
    let clone = Works::with(&[]);
    git_done(&clone, &["clone", "--quiet", works.root().to_str().unwrap(), "."]);
    for (number, commit) in commits.iter().enumerate().filter(|(number, _)| number % 10 == 9) {
        assert_eq!(git(&clone, &["checkout", "--quiet", commit]).0, 0);
        let (status, text, objects) = clone.verify();
        assert_eq!(objects.len(), MODELS, "commit {number}: {text}");
        assert_eq!(status, i32::from(faulty[number] > 0), "commit {number}: {text}");
    }
}

/// Whether a model cannot be read: a misspelling shows only where there is something to misspell.
fn bad(draft: &Draft) -> bool {
    draft.faulty && draft.activities.iter().any(|activity| activity.at_most.is_some())
}

fn as_it_should_be(line: &str) -> bool {
    line.ends_with(": verified") || line.contains(", as it should be: ")
}
