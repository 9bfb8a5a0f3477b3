//! What crosses the pipe comes out as it went in, and what is no message never does harm.

use std::time::Duration;

use proptest::prelude::*;

use super::frame::{FrameError, LARGEST, SMALL};
use super::*;
use crate::lp::difference::AddedColumn;
use crate::lp::{Column, Difference, Key, Row, RowIndex, Sense};
use crate::solver::basis::{Basis, NamedBasis, Position};
use crate::solver::message::{Account, Conflict, Growth, Known, Last, ModelKey, Optimum, Outcome, Ranges, Rule, Start};
use crate::solver::proof::Proof;

/// Any number by its bits: infinities, −0, the smallest and every NaN as well.
fn number() -> impl Strategy<Value = f64> {
    let special = prop::sample::select(vec![f64::INFINITY, f64::NEG_INFINITY, -0.0, 0.0, 5e-324, f64::NAN, 1e308]);
    prop_oneof![any::<u64>().prop_map(f64::from_bits), special]
}

fn numbers() -> impl Strategy<Value = Vec<f64>> {
    prop::collection::vec(number(), 0..5)
}

fn key() -> impl Strategy<Value = Key> {
    ".{0,12}".prop_map(|text| Key::new(&text))
}

fn pairs() -> impl Strategy<Value = Vec<(f64, f64)>> {
    prop::collection::vec((number(), number()), 0..4)
}

fn row() -> impl Strategy<Value = Row> {
    (key(), number(), number()).prop_map(|(key, lower, upper)| Row { key, lower, upper })
}

fn sense() -> impl Strategy<Value = Sense> {
    prop::sample::select(vec![Sense::Maximise, Sense::Minimise])
}

fn program() -> impl Strategy<Value = Program> {
    let rows = prop::collection::vec(row(), 1..5);
    (sense(), number(), rows).prop_flat_map(|(sense, offset, rows)| {
        let entries = prop::collection::vec(((0..rows.len()).prop_map(RowIndex), number()), 0..4);
        let column = (key(), number(), number(), number(), entries)
            .prop_map(|(key, lower, upper, aim, entries)| Column { key, lower, upper, aim, entries });
        prop::collection::vec(column, 0..5).prop_map(move |columns| Program {
            sense,
            offset,
            columns,
            rows: rows.clone(),
        })
    })
}

fn difference() -> impl Strategy<Value = Difference> {
    let added = (key(), number(), number(), number(), prop::collection::vec((key(), number()), 0..3))
        .prop_map(|(key, lower, upper, aim, entries)| AddedColumn { key, lower, upper, aim, entries });
    let columns = (prop::collection::vec(added, 0..3), prop::collection::vec(key(), 0..3));
    let rows = (prop::collection::vec(row(), 0..3), prop::collection::vec(key(), 0..3));
    let changed = (
        prop::collection::vec((key(), number()), 0..3),
        prop::collection::vec((key(), number(), number()), 0..3),
        prop::collection::vec((key(), key(), number()), 0..3),
    );
    (prop::option::of(sense()), prop::option::of(number()), columns, rows, changed).prop_map(
        |(sense, offset, (added_columns, removed_columns), (added_rows, removed_rows), (aims, bounds, entries))| {
            Difference {
                sense,
                offset,
                added_columns,
                removed_columns,
                added_rows,
                removed_rows,
                aims,
                column_bounds: bounds.clone(),
                row_bounds: bounds,
                entries,
            }
        },
    )
}

fn position() -> impl Strategy<Value = Position> {
    prop::sample::select(vec![Position::Basic, Position::AtLower, Position::AtUpper, Position::AtZero])
}

fn order() -> impl Strategy<Value = Order> {
    let named = || prop::collection::vec((key(), position()), 0..4);
    let last =
        (program(), named(), named(), any::<Option<usize>>()).prop_map(|(program, columns, rows, cold_pivots)| Last {
            program,
            basis: NamedBasis { columns, rows },
            cold_pivots,
        });
    let whole = (program(), prop::option::of(last))
        .prop_map(|(program, last)| Task::Whole(Box::new(program), last.map(Box::new)));
    let task = prop_oneof![whole, difference().prop_map(|difference| Task::Change(Box::new(difference)))];
    let solve = (".{0,9}", task, any::<u64>()).prop_map(|(model, task, limit)| {
        Order::Solve(Box::new(Request { model: ModelKey(model), task, time_limit: Duration::from_nanos(limit) }))
    });
    prop_oneof![1 => Just(Order::Interrupt), 9 => solve]
}

fn optimum() -> impl Strategy<Value = Optimum> {
    let basis = (prop::collection::vec(position(), 0..4), prop::collection::vec(position(), 0..4))
        .prop_map(|(columns, rows)| Basis { columns, rows });
    let flags = || prop::collection::vec(any::<bool>(), 0..4);
    let known = prop::option::of((flags(), flags()).prop_map(|(worths, gains)| Known { worths, gains }));
    let told = (basis, any::<[bool; 3]>(), known, prop::option::of(pairs()), prop::option::of((pairs(), pairs())));
    (number(), [numbers(), numbers(), numbers(), numbers()], told, [number(), number(), number(), number()]).prop_map(
        |(
            aim,
            [levels, sums, gains, worths],
            (basis, [exact, levels_unique, worths_unique], known, spans, ranges),
            proof,
        )| {
            let [primal, dual, slackness, gap] = proof;
            Optimum {
                aim,
                levels,
                sums,
                gains,
                worths,
                basis,
                exact,
                levels_unique,
                spans,
                worths_unique,
                known,
                ranges: ranges.map(|(aims, bounds)| Ranges { aims, bounds }),
                proof: Proof { primal, dual, slackness, gap },
            }
        },
    )
}

fn word() -> impl Strategy<Value = Word> {
    let rule = (key(), any::<[bool; 2]>(), number()).prop_map(|(key, [is_row, upper], bound)| Rule {
        key,
        is_row,
        upper,
        bound,
    });
    let conflict = (prop::collection::vec(rule, 0..3), any::<[bool; 2]>())
        .prop_map(|(rules, [proven, minimal])| Outcome::Infeasible(Conflict { rules, proven, minimal }));
    let growth = (prop::collection::vec((key(), number()), 0..3), any::<bool>())
        .prop_map(|(rates, proven)| Outcome::Unbounded(Growth { rates, proven }));
    let outcome = prop_oneof![
        optimum().prop_map(|optimum| Outcome::Optimal(Box::new(optimum))),
        conflict,
        growth,
        ".{0,20}".prop_map(Outcome::Undecided),
        Just(Outcome::Interrupted),
        Just(Outcome::Forgotten),
        ".{0,20}".prop_map(Outcome::Lost),
    ];
    let start = prop::sample::select(vec![Start::None, Start::Primal, Start::Dual, Start::Cold]);
    let account = (start, any::<[usize; 2]>(), any::<[Option<usize>; 3]>(), any::<bool>(), any::<[u32; 3]>());
    let account = account.prop_map(|(start, [pivots, exact_pivots], counts, capped, times)| Account {
        start,
        pivots,
        primal_infeasible: counts[0],
        dual_infeasible: counts[1],
        capped,
        by_name: !capped,
        cold_pivots: counts[2],
        detours: vec!["numerical trouble".into(); usize::from(capped)],
        exact_pivots,
        time: Duration::from_micros(times[0].into()),
        settling: Duration::from_micros(times[1].into()),
        reading: Duration::from_micros(times[2].into()),
    });
    let answer = (outcome, account).prop_map(|(outcome, account)| Word::Answer(Box::new(Answer { outcome, account })));
    prop_oneof![1 => any::<usize>().prop_map(|pivots| Word::Progress(Progress { pivots })), 9 => answer]
}

/// What is written out in full tells numbers apart by all but the bits of a NaN; those are compared as bytes.
fn crosses<T: Serialize + DeserializeOwned + Sound + std::fmt::Debug>(message: &T) -> Result<(), TestCaseError> {
    let mut pipe = Vec::new();
    let bytes = encode(message).unwrap();
    frame::write(&mut pipe, &bytes).unwrap();
    let come = frame::read(&mut pipe.as_slice(), LARGEST).unwrap().unwrap();
    let decoded: T = decode(&come).unwrap();
    prop_assert_eq!(format!("{decoded:?}"), format!("{message:?}"));
    prop_assert_eq!(encode(&decoded).unwrap(), bytes);
    Ok(())
}

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn orders_cross_bit_for_bit(order in order()) {
        crosses(&order)?;
    }

    #[test]
    fn words_cross_bit_for_bit(word in word()) {
        crosses(&word)?;
    }

    #[test]
    fn garbage_is_an_error_or_a_message_but_never_harm(bytes in prop::collection::vec(any::<u8>(), 0..200)) {
        let _ = decode::<Order>(&bytes);
        let _ = decode::<Word>(&bytes);
        let _ = meet(&mut bytes.as_slice());
        let mut rest = bytes.as_slice();
        while let Ok(Some(_)) = frame::read(&mut rest, LARGEST) {}
    }

    #[test]
    fn a_cut_message_is_none_and_a_changed_one_does_no_harm(order in order(), at in any::<prop::sample::Index>(), bit in 0..8_u32) {
        let mut bytes = encode(&order).unwrap();
        let at = at.index(bytes.len());
        prop_assert!(decode::<Order>(&bytes[..at]).is_err());
        bytes[at] ^= 1_u8 << bit;
        if let Ok(Order::Solve(request)) = decode(&bytes)
            && let Task::Whole(program, _) = request.task
        {
            prop_assert!(has_its_rows(&program));
        }
    }
}

#[test]
fn a_frame_is_whole_or_an_error_and_takes_no_more_memory_than_comes() {
    let mut pipe = Vec::new();
    frame::write(&mut pipe, b"one").unwrap();
    frame::write(&mut pipe, b"").unwrap();
    for length in 1..pipe.len() {
        let mut cut = &pipe[..length];
        let mut read = || frame::read(&mut cut, LARGEST);
        let outcome = if length < 7 { read() } else { read().and_then(|_| read()) };
        match length {
            7 => assert!(matches!(outcome, Ok(None))),
            _ => assert!(matches!(outcome, Err(FrameError::Cut)), "cut to {length}"),
        }
    }
    // It claims to be the largest there is, and ends after a byte.
    let claim = [&u32::try_from(LARGEST).unwrap().to_le_bytes()[..], b"x"].concat();
    assert!(matches!(frame::read(&mut claim.as_slice(), LARGEST), Err(FrameError::Cut)));
    assert!(matches!(frame::read(&mut claim.as_slice(), SMALL), Err(FrameError::TooLarge(LARGEST))));
    assert!(matches!(frame::read(&mut [0xff; 4].as_slice(), LARGEST), Err(FrameError::TooLarge(_))));
    // A list that claims more than there is of it: of an order to solve, the model's name.
    let mut order = vec![0];
    order.extend([0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0x7f]);
    assert!(matches!(decode::<Order>(&order), Err(WireError::Garbled)));
}

#[test]
fn who_is_no_worker_of_this_release_is_told_apart() {
    let mut greeting = Vec::new();
    greet(&mut greeting).unwrap();
    meet(&mut greeting.as_slice()).unwrap();
    let greeted = |body: &[u8]| {
        let mut pipe = Vec::new();
        frame::write(&mut pipe, body).unwrap();
        meet(&mut pipe.as_slice()).unwrap_err()
    };
    assert!(matches!(greeted(b"hello"), WireError::Stranger));
    assert!(matches!(greeted(MAGIC), WireError::Stranger));
    assert!(matches!(meet(&mut b"".as_slice()), Err(WireError::Stranger)));
    assert!(matches!(meet(&mut b"usage: something else".as_slice()), Err(WireError::Stranger)));
    let newer = greeted(&[MAGIC, &(VERSION + 1).to_le_bytes(), b"9.9.9"].concat());
    let theirs = VERSION + 1;
    let told =
        format!("what answered is millreeve 9.9.9 and speaks version {theirs}; this is {BUILD} and speaks {VERSION}");
    assert_eq!(newer.to_string(), told);
    let same_words = greeted(&[MAGIC, &VERSION.to_le_bytes(), b"0.0.1"].concat());
    assert!(matches!(same_words, WireError::OtherVersion { version: VERSION, .. }));
}
