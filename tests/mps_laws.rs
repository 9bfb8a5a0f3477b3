//! Laws of MPS files in and out, on models and texts drawn at random.
#![expect(clippy::panic, reason = "helpers of tests fail the test")]

use std::collections::{BTreeMap, BTreeSet};

use millreeve::lp::mps::{read, write};
use millreeve::lp::{Program, Sense, build, keys};
use millreeve::model::{Activity, Aim, Bound, Horizon, Limit, Model, Name, Resource, Term, Value};
use proptest::prelude::*;
use proptest::sample::{Index, select};

fn number() -> impl Strategy<Value = f64> {
    prop_oneof![
        3 => (-40_i32..40).prop_map(f64::from),
        3 => (-4000_i32..4000).prop_map(|n| f64::from(n) / 100.0),
        1 => -1e6..1e6_f64,
    ]
}

/// A number of a size that a coefficient may have even when it is a product of two.
fn coefficient() -> impl Strategy<Value = f64> {
    number().prop_map(|number| if number.abs() < 1e-3 { 0.0 } else { number })
}

/// Two bounds in order, either of them perhaps infinite.
fn bounds() -> impl Strategy<Value = (f64, f64)> {
    (number(), number(), any::<[bool; 2]>()).prop_map(|(one, other, [below, above])| {
        let (least, most) = (one.min(other), one.max(other));
        (if below { least } else { f64::NEG_INFINITY }, if above { most } else { f64::INFINITY })
    })
}

/// Names few enough to meet in rows, columns and labels; some look like what writing makes of others.
fn name() -> impl Strategy<Value = &'static str> {
    select(&["kiln", "aim", "resources", "at_least", "_x2e_", "_x5f_x2e_", "A_x20_B", "A_x2e_B", "плитка"][..])
}

fn ours(text: &str) -> Name {
    Name::new(text).unwrap_or_else(|error| panic!("{text}: {error}"))
}

fn label() -> impl Strategy<Value = Option<String>> {
    let labels = &["kiln", "aim", ".", "_x2e_", "A B", "A.B", "Kiln, north", "resources.kiln", "'MARKER'"][..];
    proptest::option::of(select(labels).prop_map(str::to_owned))
}

fn named<T: std::fmt::Debug>(thing: impl Strategy<Value = T>) -> impl Strategy<Value = BTreeMap<Name, T>> {
    proptest::collection::btree_map(name().prop_map(ours), thing, 0..6)
}

fn resource() -> impl Strategy<Value = Resource> {
    (label(), bounds(), coefficient()).prop_map(|(label, (at_least, capacity), cost)| Resource {
        label,
        unit: None,
        capacity: Value::Every(capacity),
        at_least: Value::Every(at_least),
        cost: Value::Every(cost),
        ..Resource::default()
    })
}

fn activity() -> impl Strategy<Value = Activity> {
    let uses = named(coefficient().prop_map(Value::Every));
    let tags = proptest::collection::btree_set(select(&["wet", "dry"][..]), 0..3);
    (label(), [coefficient(), coefficient()], uses, bounds(), tags, any::<bool>()).prop_map(
        |(label, [price, cost], uses, (at_least, at_most), tags, prospect)| Activity {
            label,
            unit: None,
            price: Value::Every(price),
            cost: Value::Every(cost),
            uses,
            at_least: Value::Every(at_least),
            at_most: Value::Every(at_most),
            tags: tags.into_iter().map(ours).collect(),
            prospect,
            ..Activity::default()
        },
    )
}

fn terms() -> impl Strategy<Value = BTreeMap<Term, Value>> {
    let term = prop_oneof![
        4 => name().prop_map(|name| Term::Activity(ours(name))),
        1 => select(&["wet", "dry"][..]).prop_map(|tag| Term::Tag(ours(tag))),
        1 => Just(Term::All),
    ];
    proptest::collection::btree_map(term, coefficient().prop_map(Value::Every), 0..5)
}

fn limit() -> impl Strategy<Value = Limit> {
    let bound = prop_oneof![
        bounds().prop_map(|(least, most)| Bound::Between(Value::Every(least), Value::Every(most))),
        coefficient().prop_map(|number| Bound::Equals(Value::Every(number))),
    ];
    (label(), terms(), proptest::option::of(terms()), bound).prop_map(|(label, terms, per, bound)| Limit {
        label,
        terms,
        per,
        bound,
        ..Limit::default()
    })
}

fn model() -> impl Strategy<Value = Model> {
    let parts = (named(resource()), named(activity()), named(limit()));
    (any::<bool>(), number(), parts).prop_map(|(maximise, constant, (resources, activities, limits))| Model {
        title: Some("tiles".to_owned()),
        currency: None,
        aim: if maximise { Aim::Maximise } else { Aim::Minimise },
        constant,
        materials: [].into(),
        horizon: Horizon::single(),
        resources,
        activities,
        limits,
    })
}

/// A number as text, so that numbers can be sorted and compared to the bit.
fn told(number: f64) -> String {
    format!("{:?}", number + 0.0)
}

/// Whether some number of the program is of a size that no model holds: writing copes, reading refuses it or takes it as 0.
fn is_out_of_reach(program: &Program) -> bool {
    let mut entries =
        program.columns.iter().flat_map(|column| column.entries.iter().map(|entry| entry.1).chain([column.aim]));
    entries.any(|value| value != 0.0 && !(1e-9..=1e15).contains(&value.abs()))
}

/// What a program says, without its names: each column as its bounds, aim and entries, each bounded side of a row for itself.
///
/// Columns are told apart by their place in the order given, rows by the entries they have in those columns.
fn said(program: &Program, order: &[usize]) -> (Sense, String, Vec<[String; 3]>, Vec<String>) {
    let columns = order.iter().map(|&at| &program.columns[at]);
    let columns = columns.map(|column| [column.lower, column.upper, column.aim].map(told)).collect();
    let mut sides = Vec::new();
    for (at, row) in program.rows.iter().enumerate() {
        let entries: Vec<_> = order
            .iter()
            .enumerate()
            .filter_map(|(place, &column)| {
                let entry = program.columns[column].entries.iter().find(|(row, _)| row.0 == at);
                entry.map(|entry| (place, told(entry.1)))
            })
            .collect();
        sides.extend(row.lower.is_finite().then(|| format!("{} <= {entries:?}", told(row.lower))));
        sides.extend(row.upper.is_finite().then(|| format!("{entries:?} <= {}", told(row.upper))));
    }
    sides.sort();
    (program.sense, told(program.offset), columns, sides)
}

/// The names of a file's columns, in its order.
fn columns_of(text: &str) -> Vec<String> {
    let mut names: Vec<String> = Vec::new();
    let lines = text.lines().skip_while(|line| *line != "COLUMNS").skip(1).take_while(|line| line.starts_with(' '));
    for name in lines.filter_map(|line| line.split_whitespace().next()) {
        if names.last().is_none_or(|last| last != name) {
            names.push(name.to_owned());
        }
    }
    names
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 512, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn a_model_written_and_read_is_the_same_program(model in model()) {
        let program = build(&model);
        prop_assume!(!is_out_of_reach(&program));
        let text = write(&model).unwrap();
        let back = read(&text).unwrap_or_else(|error| panic!("{error}\n{text}")).model;
        let again = build(&back);
        // Writing keeps the order of the columns; reading sorts them by their own names.
        let names = columns_of(&text);
        prop_assert_eq!(names.iter().collect::<BTreeSet<_>>().len(), program.columns.len());
        let label = |name: &Name| back.activities[name].label.clone().unwrap_or_else(|| name.to_string());
        let places: BTreeMap<String, usize> = back
            .activities
            .keys()
            .map(|name| {
                let key = keys::activity_key(name, &back.horizon, back.horizon.periods().next().unwrap());
                let spelt = if label(name).contains(' ') { name.to_string() } else { label(name) };
                (spelt, again.column(&key).unwrap().0)
            })
            .collect();
        let order: Vec<_> = names.iter().map(|name| places[name]).collect();
        let first: Vec<_> = (0..program.columns.len()).collect();
        prop_assert_eq!(said(&again, &order), said(&program, &first), "{}", text);
        // From here on nothing changes any more, names included.
        let third = read(&write(&back).unwrap()).unwrap().model;
        prop_assert_eq!(build(&third), again);
    }

    #[test]
    fn a_damaged_file_is_read_or_refused(edits in proptest::collection::vec((any::<Index>(), any::<Index>(), edit()), 1..6)) {
        let mut lines: Vec<String> = SAMPLE.lines().map(str::to_owned).collect();
        for (line, place, edit) in edits {
            let at = line.index(lines.len());
            match edit {
                Edit::Drop => drop(lines.remove(at)),
                Edit::Repeat => lines.insert(place.index(lines.len()), lines[at].clone()),
                Edit::Put(text) => {
                    let starts: Vec<_> = lines[at].char_indices().map(|(start, _)| start).chain([lines[at].len()]).collect();
                    lines[at].insert_str(starts[place.index(starts.len())], &text);
                }
                Edit::Cut => {
                    let kept = lines[at].chars().count();
                    lines[at] = lines[at].chars().take(place.index(kept + 1)).collect();
                }
            }
            if lines.is_empty() {
                lines.push(String::new());
            }
        }
        let damaged = lines.join("\n");
        match read(&damaged) {
            Ok(reading) => {
                let text = write(&reading.model).unwrap();
                prop_assert_eq!(build(&read(&text).unwrap().model), build(&reading.model), "{}", text);
            }
            Err(error) => {
                prop_assert!(error.line <= damaged.lines().count().max(1));
                prop_assert!(error.to_string().len() < 2048);
            }
        }
    }

    #[test]
    fn any_text_is_read_or_refused(text in any::<String>()) {
        prop_assert!(read(&text).is_err());
        let _ = read(&format!("ROWS\n N COST\nCOLUMNS\n {text}\nENDATA"));
    }
}

#[derive(Clone, Debug)]
enum Edit {
    Drop,
    Repeat,
    Put(String),
    Cut,
}

fn edit() -> impl Strategy<Value = Edit> {
    let words =
        &[" ", "\t", "-", "1e30", "D+03", "nan", "$", "'MARKER'", "é", "\u{0}", "_x20_", " FR ", "RHS", "*", "0", "\r"]
            [..];
    prop_oneof![
        1 => Just(Edit::Drop),
        1 => Just(Edit::Repeat),
        1 => Just(Edit::Cut),
        4 => prop_oneof![select(words).prop_map(str::to_owned), any::<char>().prop_map(String::from)].prop_map(Edit::Put),
    ]
}

/// In both layouts at once.
const SAMPLE: &str = "\
NAME          TILES
OBJSENSE
    MAX
ROWS
 N  COST
 N  SPARE
 L  KILN
 G  PRESS
 E  MIX.1
COLUMNS
    FLOOR     COST               1.5   KILN                1.
    FLOOR     PRESS               1.   MIX.1              -1.
    WALL      COST            2.5D+0   KILN               0.5
    WALL      SPARE              -1.   MIX.1               1.
    SLAB      KILN                2.
RHS
    RHS       COST               -7.   KILN               12.
    RHS       PRESS               2.
RANGES
    RNG       KILN                4.   MIX.1              -2.
BOUNDS
 UP BND       FLOOR              40.
 LO BND       WALL               -5.
 FR BND       SLAB
ENDATA
";
