//! Laws of reading, tried on models and texts made at random.

use millreeve::model::meaning::Meaning;
use millreeve::model::{Model, Name, Term, write};
use proptest::collection::vec;
use proptest::prelude::*;

use super::models::model;
use super::{TILEWORKS, WEEKS, good, read};

/// The blocks of a text: what stands before the first table, and each table.
fn blocks(text: &str) -> Vec<String> {
    let mut blocks = vec![String::new()];
    for line in text.lines() {
        if line.starts_with('[') {
            blocks.push(String::new());
        }
        if let Some(last) = blocks.last_mut() {
            *last += line;
            *last += "\n";
        }
    }
    blocks
}

/// The text with its tables, and the lines in each, in another order, and with comments, blanks and line ends of another kind.
fn shuffled(text: &str, order: &[usize], windows: bool) -> String {
    let mut blocks = blocks(text);
    let mut next = order.iter().cycle().copied();
    let mut key = || next.next().unwrap_or(0);
    for (at, block) in blocks.iter_mut().enumerate() {
        let mut lines: Vec<_> = block.lines().map(|line| format!("  {line}\t # {}", key())).collect();
        let from = usize::from(at > 0);
        lines[from..].sort_by_cached_key(|_| key());
        *block = format!("# again\n\n{}\n", lines.join("\n"));
    }
    blocks[1..].sort_by_cached_key(|_| key());
    let text = blocks.concat();
    if windows { text.replace('\n', "\r\n") } else { text }
}

/// Every number behind an equals sign, as the span of its digits.
fn numbers(text: &str) -> Vec<std::ops::Range<usize>> {
    let mut found = Vec::new();
    let mut at = 0;
    for line in text.split_inclusive('\n') {
        let from = line.find(" = ").filter(|_| !line.starts_with('#')).unwrap_or(line.len());
        let mut quoted = false;
        let mut start = None;
        for (place, sign) in line.char_indices().skip(from) {
            quoted ^= sign == '"';
            let digit = !quoted && matches!(sign, '0'..='9' | '.' | '-' | '_');
            let begins = digit && line[..place].ends_with([' ', '[']);
            match start {
                None if begins => start = Some(place),
                Some(first) if !digit => {
                    found.push(at + first..at + place);
                    start = None;
                }
                _ => {}
            }
        }
        at += line.len();
    }
    found
}

/// What counts of a model, to be compared.
#[derive(Debug, PartialEq)]
struct Sense {
    /// Without texts and tags.
    model: Model,
    /// For each sum of a limit, its tags by the activities that carry them.
    groups: Vec<Vec<String>>,
}

impl Sense {
    fn of(model: &Model) -> Self {
        let mut rest = wordless(model);
        rest.activities.values_mut().for_each(|activity| activity.tags.clear());
        let mut groups = Vec::new();
        for sum in rest.limits.values_mut().flat_map(|limit| std::iter::once(&mut limit.terms).chain(&mut limit.per)) {
            let mut told = Vec::new();
            sum.retain(|term, value| {
                let Term::Tag(tag) = term else { return true };
                let carriers = model.activities.iter().filter(|(_, activity)| activity.tags.contains(tag));
                told.push(format!("{value:?} {:?}", carriers.map(|(name, _)| name).collect::<Vec<_>>()));
                false
            });
            told.sort();
            groups.push(told);
        }
        Self { model: rest, groups }
    }
}

/// A model without texts that decide nothing.
fn wordless(model: &Model) -> Model {
    let mut model = model.clone();
    model.title = None;
    model.currency = model.currency.filter(|text| !text.is_empty());
    for resource in model.resources.values_mut() {
        (resource.label, resource.unit) = (None, None);
    }
    for activity in model.activities.values_mut() {
        (activity.label, activity.unit) = (None, None);
    }
    for material in model.materials.values_mut() {
        (material.label, material.unit) = (None, None);
    }
    for limit in model.limits.values_mut() {
        limit.label = None;
    }
    model
}

/// A model in which every tag is called otherwise, so that they also come in another order.
fn tagged_otherwise(model: &Model) -> Model {
    let otherwise = |tag: &Name| Name::new(&tag.as_str().chars().rev().collect::<String>()).unwrap();
    let mut model = model.clone();
    for activity in model.activities.values_mut() {
        activity.tags = activity.tags.iter().map(otherwise).collect();
    }
    for sum in model.limits.values_mut().flat_map(|limit| std::iter::once(&mut limit.terms).chain(&mut limit.per)) {
        let terms = std::mem::take(sum).into_iter();
        *sum = terms
            .map(|(term, value)| (if let Term::Tag(tag) = term { Term::Tag(otherwise(&tag)) } else { term }, value))
            .collect();
    }
    model
}

/// A text with the value of one line from a line of the same key in another text; without the line where there is none.
fn exchanged(text: &str, other: &str, which: usize, from: usize) -> String {
    let key = |line: &str| line.split_once(" = ").map(|(key, _)| key.trim_end().to_owned());
    let lines: Vec<&str> = text.lines().collect();
    let keyed: Vec<usize> = (0..lines.len()).filter(|&at| key(lines[at]).is_some()).collect();
    let at = keyed[which % keyed.len()];
    let others: Vec<&str> = other.lines().filter(|line| key(line) == key(lines[at])).collect();
    let new = if others.is_empty() { "" } else { others[from % others.len()] };
    let lines = lines.iter().enumerate().map(|(place, &line)| if place == at { new } else { line });
    lines.fold(String::new(), |text, line| text + line + "\n")
}

proptest! {
    #[test]
    fn a_written_model_reads_back_the_same(model in model()) {
        let text = write::model(&model);
        match read(text.as_bytes()) {
            Ok(reading) => prop_assert_eq!(reading.model, model),
            Err(faults) => prop_assert!(false, "{}\n{}", faults.terminal(false), text),
        }
    }

    #[test]
    fn any_text_is_answered(text in any::<String>(), bytes in vec(any::<u8>(), 0..200)) {
        let _ = read(text.as_bytes());
        let _ = read(&bytes);
    }

    #[test]
    fn a_good_model_with_bytes_changed_is_answered(
        changes in vec((0..WEEKS.len(), 0..4usize, "[\\[\\]{}=.,\"'#\\n0-9a-z\u{0}-\u{1f}é]{0,3}"), 1..8),
    ) {
        let mut bytes = WEEKS.as_bytes().to_vec();
        for (at, gone, new) in changes {
            let from = at.min(bytes.len());
            let to = (from + gone).min(bytes.len());
            bytes.splice(from..to, new.bytes());
        }
        if let Err(faults) = read(&bytes) {
            for fault in &faults.reported {
                prop_assert!(fault.terminal(false).to_string().len() <= 2048);
                let place = fault.place.as_ref().map_or((1, 1), |place| (place.line, place.column));
                prop_assert!(place.0 >= 1 && place.1 >= 1);
            }
            prop_assert!(!faults.reported.is_empty());
        }
    }

    #[test]
    fn order_comments_and_layout_mean_nothing(order in vec(0..1000usize, 7..60), windows: bool, weeks: bool) {
        let works = if weeks { WEEKS } else { TILEWORKS };
        let text = shuffled(works, &order, windows);
        let reading = good(&text);
        let first = good(works);
        prop_assert_eq!(Meaning::of(&reading.model), Meaning::of(&first.model));
        prop_assert_eq!(reading.model, first.model);
    }

    #[test]
    fn every_number_means_something(which in 0..1000usize, to in 1..100_000u32, weeks: bool) {
        let works = if weeks { WEEKS } else { TILEWORKS };
        let spans = numbers(works);
        prop_assert!(spans.len() > 30);
        let span = spans[which % spans.len()].clone();
        let old: f64 = works[span.clone()].replace('_', "").parse().unwrap();
        prop_assume!((old - f64::from(to)).abs() > 0.0);
        let text = format!("{}{to}{}", &works[..span.start], &works[span.end..]);
        // A bound may now contradict another, and another format is another file; then there is no meaning to compare.
        if let Ok(reading) = read(text.as_bytes()) {
            prop_assert_ne!(Meaning::of(&reading.model), Meaning::of(&good(works).model));
        }
    }

    #[test]
    fn models_that_differ_in_more_than_words_differ_in_meaning(one in model(), other in model()) {
        let same = Meaning::of(&one) == Meaning::of(&other);
        prop_assert_eq!(same, Sense::of(&one) == Sense::of(&other));
        prop_assert_eq!(Meaning::of(&one), Meaning::of(&wordless(&one)));
        prop_assert_eq!(Meaning::of(&one), Meaning::of(&tagged_otherwise(&one)));
    }

    #[test]
    fn one_line_that_says_something_else_means_something_else(one in model(), other in model(), which: usize, from: usize) {
        let text = write::model(&one);
        let edited = exchanged(&text, &write::model(&other), which, from);
        // Most exchanges refer to what is not there, or contradict something; then there is no meaning to compare.
        if let Ok(reading) = read(edited.as_bytes()) {
            let same = Meaning::of(&reading.model) == Meaning::of(&one);
            prop_assert_eq!(same, Sense::of(&reading.model) == Sense::of(&one), "{}\n{}", text, edited);
        }
    }
}
