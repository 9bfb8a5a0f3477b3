//! Laws of reading, tried on models and texts made at random.

use std::collections::{BTreeMap, BTreeSet};

use millreeve::model::meaning::Meaning;
use millreeve::model::{Activity, Aim, Bound, Limit, Model, Name, Resource, Term, Value, write};
use proptest::collection::{btree_map, btree_set, vec};
use proptest::option;
use proptest::prelude::*;

use super::{TILEWORKS, good, read};

fn name() -> impl Strategy<Value = Name> {
    "[a-zA-Z0-9_é瓦-]{1,6}".prop_map(|text| Name::new(&text).unwrap())
}

fn text() -> impl Strategy<Value = Option<String>> {
    option::of(prop_oneof![any::<String>(), Just("\u{202e}\u{e0041}\"\\\r\n\t\u{7f}".to_owned())])
}

fn amount() -> impl Strategy<Value = f64> {
    prop_oneof![
        (-1_000_000..1_000_000i32).prop_map(f64::from),
        -1e15..1e15f64,
        (-1.0..1.0f64).prop_map(|x| x * 1e-6),
        Just(0.0),
        Just(1e15),
        Just(0.1 + 0.2),
    ]
}

fn rate() -> impl Strategy<Value = Value> {
    amount().prop_map(|x| Value::Every(if x.abs() < 1e-9 { 0.0 } else { x }))
}

fn value() -> impl Strategy<Value = Value> {
    amount().prop_map(Value::Every)
}

fn bounds(low: f64) -> impl Strategy<Value = (Value, Value)> {
    (option::of(amount()), option::of(amount())).prop_map(move |(a, b)| {
        let (a, b) = match (a, b) {
            (Some(a), Some(b)) => (a.min(b), a.max(b)),
            (a, b) => (a.unwrap_or(low), b.unwrap_or(f64::INFINITY)),
        };
        (Value::Every(a), Value::Every(b.max(a)))
    })
}

fn resource() -> impl Strategy<Value = Resource> {
    (text(), text(), bounds(f64::NEG_INFINITY), value()).prop_map(|(label, unit, (at_least, capacity), cost)| {
        Resource { label, unit, capacity, at_least, cost, ..Resource::default() }
    })
}

fn activity(resources: Vec<Name>, minimise: bool) -> impl Strategy<Value = Activity> {
    let uses = vec(rate(), resources.len()).prop_flat_map(move |rates| {
        let all: Vec<(Name, Value)> = resources.clone().into_iter().zip(rates).collect();
        let most = all.len();
        proptest::sample::subsequence(all, 0..=most)
    });
    (text(), text(), (value(), value()), uses, bounds(0.0), btree_set(name(), 0..3), any::<(bool, bool)>()).prop_map(
        move |(label, unit, (price, cost), uses, (at_least, at_most), tags, (prospect, free))| Activity {
            label,
            unit,
            price: if minimise { Value::Every(0.0) } else { price },
            cost,
            uses: uses.into_iter().collect(),
            at_least: match (prospect, free) {
                (true, false) => Value::Every(0.0),
                (_, true) => Value::Every(f64::NEG_INFINITY),
                _ => at_least,
            },
            at_most: if prospect { Value::Every(f64::INFINITY) } else { at_most },
            tags,
            prospect,
            ..Activity::default()
        },
    )
}

fn limit(terms: Vec<Term>) -> impl Strategy<Value = Limit> {
    let sum = move |least: usize| {
        let terms = terms.clone();
        vec(rate(), terms.len()).prop_flat_map(move |rates| {
            let all: Vec<(Term, Value)> = terms.clone().into_iter().zip(rates).collect();
            let most = all.len();
            proptest::sample::subsequence(all, least.min(most)..=most)
                .prop_map(|sum| sum.into_iter().collect::<BTreeMap<_, _>>())
        })
    };
    let bound = prop_oneof![
        bounds(f64::NEG_INFINITY).prop_map(|(low, high)| Bound::Between(low, high)),
        value().prop_map(Bound::Equals),
    ];
    (text(), sum(0), option::of(sum(1)), bound).prop_map(|(label, terms, per, bound)| Limit {
        label,
        terms,
        per,
        bound,
        ..Limit::default()
    })
}

/// Any model that reading lets through.
fn model() -> impl Strategy<Value = Model> {
    let head = (text(), text(), any::<bool>(), amount(), btree_map(name(), resource(), 0..4), btree_set(name(), 0..4));
    let body = head.prop_flat_map(|(title, currency, minimise, constant, resources, names)| {
        let used: Vec<Name> = resources.keys().cloned().collect();
        let activities: Vec<_> = names.into_iter().map(|name| (Just(name), activity(used.clone(), minimise))).collect();
        (Just((title, currency, minimise, constant, resources)), activities)
    });
    body.prop_flat_map(|(head, activities)| {
        let tags: BTreeSet<Name> = activities.iter().flat_map(|(_, activity)| activity.tags.clone()).collect();
        let mut terms: Vec<Term> = activities.iter().map(|(name, _)| Term::Activity(name.clone())).collect();
        terms.extend(tags.into_iter().map(Term::Tag));
        terms.push(Term::All);
        (Just(head), Just(activities), btree_map(name(), limit(terms), 0..3))
    })
    .prop_map(|((title, currency, minimise, constant, resources), activities, limits)| Model {
        title: title.map(|text| text.chars().take(900).collect()),
        currency,
        aim: if minimise { Aim::Minimise } else { Aim::Maximise },
        constant,
        resources,
        activities: activities.into_iter().collect(),
        limits,
        ..Model::default()
    })
}

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

/// Every number of the tileworks, as the span of its digits.
fn numbers(text: &str) -> Vec<std::ops::Range<usize>> {
    let mut found = Vec::new();
    let mut at = 0;
    for line in text.split_inclusive('\n') {
        if line.contains('=') && !line.contains('"') || line.contains("floor_tile\" = ") {
            for (sign, _) in line.match_indices("= ") {
                let rest = &line[sign + 2..];
                let length = rest.find(|c: char| !matches!(c, '0'..='9' | '.' | '-' | '_')).unwrap_or(rest.len());
                if length > 0 {
                    found.push(at + sign + 2..at + sign + 2 + length);
                }
            }
        }
        at += line.len();
    }
    found
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
        changes in vec((0..TILEWORKS.len(), 0..4usize, "[\\[\\]{}=.,\"'#\\n0-9a-z\u{0}-\u{1f}é]{0,3}"), 1..8),
    ) {
        let mut bytes = TILEWORKS.as_bytes().to_vec();
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
    fn order_comments_and_layout_mean_nothing(order in vec(0..1000usize, 7..60), windows: bool) {
        let text = shuffled(TILEWORKS, &order, windows);
        let reading = good(&text);
        let first = good(TILEWORKS);
        prop_assert_eq!(Meaning::of(&reading.model), Meaning::of(&first.model));
        prop_assert_eq!(reading.model, first.model);
    }

    #[test]
    fn every_number_means_something(which in 0..1000usize, to in 1..100_000u32) {
        let spans = numbers(TILEWORKS);
        prop_assert!(spans.len() > 30);
        let span = spans[which % spans.len()].clone();
        let old: f64 = TILEWORKS[span.clone()].replace('_', "").parse().unwrap();
        prop_assume!((old - f64::from(to)).abs() > 0.0);
        let text = format!("{}{to}{}", &TILEWORKS[..span.start], &TILEWORKS[span.end..]);
        // A bound may now contradict another, and another format is another file; then there is no meaning to compare.
        if let Ok(reading) = read(text.as_bytes()) {
            prop_assert_ne!(Meaning::of(&reading.model), Meaning::of(&good(TILEWORKS).model));
        }
    }

    #[test]
    fn models_that_differ_in_more_than_words_differ_in_meaning(one in model(), other in model()) {
        let wordless = |mut model: Model| {
            model.title = None;
            model.currency = model.currency.filter(|text| !text.is_empty());
            for resource in model.resources.values_mut() {
                (resource.label, resource.unit) = (None, None);
            }
            for activity in model.activities.values_mut() {
                (activity.label, activity.unit) = (None, None);
            }
            for limit in model.limits.values_mut() {
                limit.label = None;
            }
            model
        };
        let same = Meaning::of(&one) == Meaning::of(&other);
        prop_assert_eq!(same, wordless(one.clone()) == wordless(other));
        prop_assert_eq!(Meaning::of(&one), Meaning::of(&wordless(one)));
    }
}
