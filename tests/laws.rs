//! Laws that every linear program obeys, over random models. A failing case is named by its seed.
//!
//! Duality, complementary slackness, parametric concavity and pricing out: Dantzig, *Linear Programming and Extensions*, 1963;
//! the 100 % rules: Bradley, Hax & Magnanti, *Applied Mathematical Programming*, 1977, ch. 3.

#![expect(clippy::unwrap_used, clippy::panic, reason = "helpers of tests fail the test")]

#[path = "support/random.rs"]
mod random;
#[path = "support/rng.rs"]
mod rng;
#[path = "support/solve.rs"]
mod support;

use millreeve::lp::{Column, Key, Program, Row, RowIndex, build};
use millreeve::solver::message::{Optimum, Outcome, Start};
use millreeve::solver::session::Session;
use rng::Rng;
use support::{at_most, least, same, size, solve};

const INF: f64 = f64::INFINITY;

/// A random program with all that a law needs: a session that has solved it, and more random numbers.
struct Case {
    program: Program,
    session: Session,
    outcome: Outcome,
    rng: Rng,
}

impl Case {
    fn new(seed: u64) -> Self {
        let program = build(&random::model(seed));
        let mut session = Session::default();
        let outcome = solve(&mut session, &program).outcome;
        Self { program, session, outcome, rng: Rng::new(!seed) }
    }

    /// What the program comes to.
    fn least(&self) -> f64 {
        least(&self.program, &self.outcome)
    }

    fn optimum(&self) -> Option<&Optimum> {
        if let Outcome::Optimal(optimum) = &self.outcome { Some(optimum) } else { None }
    }

    fn size(&self) -> f64 {
        self.optimum().map_or(1.0, |optimum| size(&self.program, optimum))
    }

    /// What the program comes to once it is edited, solved from the last basis.
    fn edited(&mut self, edit: impl FnOnce(&mut Program, &mut Rng)) -> f64 {
        let edited = self.edit(edit);
        least(&edited, &solve(&mut self.session, &edited).outcome)
    }

    fn edit(&mut self, edit: impl FnOnce(&mut Program, &mut Rng)) -> Program {
        let mut edited = self.program.clone();
        edit(&mut edited, &mut self.rng);
        edited
    }

    /// A row, with which of its bounds is finite; both where they are one.
    fn bounded_row(&mut self) -> Option<usize> {
        let bounded: Vec<usize> = (0..self.program.rows.len())
            .filter(|&at| {
                let row = &self.program.rows[at];
                row.lower >= row.upper || row.lower.is_infinite() != row.upper.is_infinite()
            })
            .collect();
        (!bounded.is_empty()).then(|| *self.rng.pick(&bounded))
    }
}

/// Moves the one bound that a row has; both where they are one.
fn move_bound(program: &mut Program, row: usize, by: f64) {
    let row = &mut program.rows[row];
    row.lower += by;
    row.upper += by;
}

/// Holds a law over random programs; the law answers whether the case says anything.
fn law(cases: u64, enough: u64, law: impl Fn(&mut Case) -> Result<bool, String>) {
    let mut told = 0;
    for seed in 0..cases {
        let mut case = Case::new(seed);
        match law(&mut case) {
            Ok(says) => told += u64::from(says),
            Err(fault) => panic!("seed {seed}: {fault}\n{:?}\n{:?}", case.program, case.outcome),
        }
    }
    assert!(told >= enough, "only {told} cases say anything");
}

fn holds(true_so: bool, fault: impl FnOnce() -> String) -> Result<(), String> {
    if true_so { Ok(()) } else { Err(fault()) }
}

fn new_column(program: &Program, rng: &mut Rng, aim: f64) -> Column {
    let mut entries = Vec::new();
    for at in 0..program.rows.len() {
        if rng.below(3) > 0 {
            entries.push((RowIndex(at), f64::from(u8::try_from(1 + rng.below(4)).unwrap())));
        }
    }
    Column { key: Key::new("activities.zz_new"), lower: 0.0, upper: INF, aim, entries }
}

fn new_row(program: &mut Program, rng: &mut Rng) {
    let row = RowIndex(program.rows.len());
    for column in &mut program.columns {
        if rng.below(2) > 0 {
            column.entries.push((row, f64::from(u8::try_from(1 + rng.below(4)).unwrap())));
        }
    }
    let upper = rng.between(0.0, 30.0);
    program.rows.push(Row { key: Key::new("resources.zz_new"), lower: -INF, upper });
}

#[test]
fn a_new_activity_never_hurts() {
    law(1000, 600, |case| {
        let before = case.least();
        let after = case.edited(|program, rng| {
            let aim = rng.between(-12.0, 12.0);
            program.columns.push(new_column(program, rng, aim));
        });
        holds(at_most(after, before, case.size()), || format!("{before} became {after}")).map(|()| true)
    });
}

#[test]
fn a_new_constraint_never_helps() {
    law(1000, 600, |case| {
        let before = case.least();
        let after = case.edited(new_row);
        holds(at_most(before, after, case.size()), || format!("{before} became {after}")).map(|()| true)
    });
}

/// An aim to be small is convex in the right-hand side, and a worth is a slope of it that it never falls below.
#[test]
fn returns_to_a_capacity_diminish_and_its_worth_bounds_them() {
    law(1000, 150, |case| {
        let Some(row) = case.bounded_row() else { return Ok(false) };
        let Some((worth, now)) = case.optimum().map(|optimum| (optimum.worths[row], case.least())) else {
            return Ok(false);
        };
        let slope = case.program.sense.sign() * worth;
        let by = case.rng.between(0.1, 8.0);
        let less = case.edited(|program, _| move_bound(program, row, -by));
        let more = case.edited(|program, _| move_bound(program, row, by));
        let size = case.size().max(by * slope.abs());
        holds(at_most(now - slope * by, less, size), || format!("{by} less: {now} at {slope} became {less}"))?;
        holds(at_most(now + slope * by, more, size), || format!("{by} more: {now} at {slope} became {more}"))?;
        holds(at_most(2.0 * now, less + more, size), || format!("{less}, {now}, {more} bend the wrong way"))?;
        Ok(true)
    });
}

/// An aim to be small is concave in a price, its slope is the level, and the level never rises with its own cost.
#[test]
fn the_aim_bends_with_a_price_by_the_level() {
    law(1000, 200, |case| {
        let at = case.rng.below(case.program.columns.len());
        let sign = case.program.sense.sign();
        let Some((level, now)) = case.optimum().map(|optimum| (optimum.levels[at], case.least())) else {
            return Ok(false);
        };
        let by = case.rng.between(0.1, 5.0);
        let mut ends = Vec::new();
        for step in [-by, by] {
            let moved = case.edit(|program, _| program.columns[at].aim += sign * step);
            let outcome = solve(&mut case.session, &moved).outcome;
            let moved_level = if let Outcome::Optimal(optimum) = &outcome { Some(optimum.levels[at]) } else { None };
            ends.push((least(&moved, &outcome), moved_level));
        }
        let [(cheap, low), (dear, high)] = ends[..] else { return Ok(false) };
        let size = case.size().max(by * level.abs());
        holds(at_most(cheap, now - by * level, size), || format!("cheaper: {now} at {level} became {cheap}"))?;
        holds(at_most(dear, now + by * level, size), || format!("dearer: {now} at {level} became {dear}"))?;
        holds(at_most(cheap + dear, 2.0 * now, size), || format!("{cheap}, {now}, {dear} bend the wrong way"))?;
        holds(low.is_none_or(|low| at_most(level, low, 1.0)), || format!("cheaper: {level} became {low:?}"))?;
        holds(high.is_none_or(|high| at_most(high, level, 1.0)), || format!("dearer: {level} became {high:?}"))?;
        Ok(true)
    });
}

/// The bound that a multiplier leans on, for an aim to be small; 0 where it leans on nothing.
fn leant_on(multiplier: f64, lower: f64, upper: f64) -> f64 {
    if multiplier.abs() <= 1e-9 { 0.0 } else { multiplier * if multiplier > 0.0 { lower } else { upper } }
}

#[test]
fn worths_and_gains_add_up_to_the_aim() {
    law(1000, 200, |case| {
        let Some(optimum) = case.optimum() else { return Ok(false) };
        let sign = case.program.sense.sign();
        let rows =
            case.program.rows.iter().zip(&optimum.worths).map(|(r, worth)| leant_on(sign * worth, r.lower, r.upper));
        let columns =
            case.program.columns.iter().zip(&optimum.gains).map(|(c, gain)| leant_on(sign * gain, c.lower, c.upper));
        let sum = rows.chain(columns).sum::<f64>() + sign * case.program.offset;
        holds(same(sum, sign * optimum.aim, case.size()), || format!("{sum} is not the aim")).map(|()| true)
    });
}

#[test]
fn what_has_slack_is_worth_nothing() {
    law(1000, 200, |case| {
        let Some(optimum) = case.optimum() else { return Ok(false) };
        let inside = |value: f64, lower: f64, upper: f64| value > lower + 1e-7 && value < upper - 1e-7;
        for ((row, sum), worth) in case.program.rows.iter().zip(&optimum.sums).zip(&optimum.worths) {
            let idle = !inside(*sum, row.lower, row.upper) || worth.abs() <= 1e-9;
            holds(idle, || format!("{} has slack and is worth {worth}", row.key))?;
        }
        for ((column, level), gain) in case.program.columns.iter().zip(&optimum.levels).zip(&optimum.gains) {
            let settled = !inside(*level, column.lower, column.upper) || gain.abs() <= 1e-9 * (1.0 + column.aim.abs());
            holds(settled, || format!("{} lies inside its bounds and would gain {gain}", column.key))?;
        }
        Ok(true)
    });
}

#[test]
fn a_new_activity_pays_above_its_break_even_only() {
    law(1000, 200, |case| {
        let before = case.least();
        let Some(optimum) = case.optimum().cloned() else { return Ok(false) };
        let new = new_column(&case.program, &mut case.rng, 0.0);
        let charged: f64 = new.entries.iter().map(|&(row, rate)| rate * optimum.worths[row.0]).sum();
        let sign = case.program.sense.sign();
        // Dearer is better for an aim to be large, cheaper for one to be small.
        let mut with_aim = |aim: f64| case.edited(|program, _| program.columns.push(Column { aim, ..new.clone() }));
        let at_break_even = with_aim(charged);
        let beyond = with_aim(charged - sign * 0.01);
        let short = with_aim(charged + sign * 0.01);
        let size = case.size();
        holds(same(at_break_even, before, size), || format!("at {charged}: {before} became {at_break_even}"))?;
        holds(same(short, before, size), || format!("short of {charged}: {before} became {short}"))?;
        if optimum.worths_unique {
            holds(beyond < before - 1e-9, || format!("beyond {charged}: {before} became {beyond}"))?;
        }
        Ok(true)
    });
}

/// Shares of the moves allowed one at a time, together at most one.
fn shares(rng: &mut Rng, count: usize) -> Vec<f64> {
    let raw: Vec<f64> = (0..count).map(|_| rng.share()).collect();
    let sum: f64 = raw.iter().sum();
    raw.into_iter().map(|share| 0.999 * share / sum).collect()
}

/// A share of the way to one end of a range; not far where there is no end.
fn moved(now: f64, range: (f64, f64), share: f64, rng: &mut Rng) -> f64 {
    let end = if rng.below(2) > 0 { range.0 } else { range.1 };
    let room = if end.is_finite() { end - now } else { 10.0_f64.copysign(end) };
    now + share * room
}

#[test]
fn prices_moved_by_all_of_their_ranges_together_leave_the_levels() {
    law(1000, 100, |case| {
        let Some(optimum) = case.optimum().cloned() else { return Ok(false) };
        let Some(ranges) = optimum.ranges else { return Ok(false) };
        let edited = case.edit(|program, rng| {
            let shares = shares(rng, program.columns.len());
            for ((column, range), share) in program.columns.iter_mut().zip(&ranges.aims).zip(shares) {
                column.aim = moved(column.aim, *range, share, rng);
            }
        });
        let answer = solve(&mut case.session, &edited);
        let Outcome::Optimal(after) = answer.outcome else { return Err(format!("{:?}", answer.outcome)) };
        holds(answer.account.start == Start::None, || format!("{:?}", answer.account))?;
        let levels = optimum.levels.iter().zip(&after.levels).all(|(a, b)| same(*a, *b, 1.0));
        holds(levels, || format!("levels became {:?}", after.levels)).map(|()| true)
    });
}

#[test]
fn bounds_moved_by_all_of_their_ranges_together_leave_the_worths() {
    law(1000, 100, |case| {
        let Some(optimum) = case.optimum().cloned() else { return Ok(false) };
        let Some(ranges) = optimum.ranges else { return Ok(false) };
        let edited = case.edit(|program, rng| {
            let shares = shares(rng, program.rows.len());
            let rows = program.rows.iter_mut().zip(&ranges.bounds).zip(&optimum.sums).zip(shares);
            for (((row, range), sum), share) in rows {
                if row.lower.is_infinite() && row.upper.is_infinite() {
                    continue;
                }
                let one = row.lower >= row.upper;
                // The range is that of the bound that binds, or of the nearest where none does.
                let upper = row.upper - sum <= sum - row.lower;
                if one {
                    row.upper = moved(row.upper, *range, share, rng);
                    row.lower = row.upper;
                } else if upper {
                    row.upper = moved(row.upper, *range, share, rng).max(row.lower);
                } else {
                    row.lower = moved(row.lower, *range, share, rng).min(row.upper);
                }
            }
        });
        let answer = solve(&mut case.session, &edited);
        let Outcome::Optimal(after) = answer.outcome else { return Err(format!("{:?}", answer.outcome)) };
        holds(answer.account.start == Start::None, || format!("{:?}", answer.account))?;
        let worths = optimum.worths.iter().zip(&after.worths).all(|(a, b)| same(*a, *b, 1.0));
        holds(worths, || format!("worths became {:?}", after.worths)).map(|()| true)
    });
}

#[test]
fn the_unit_of_a_row_changes_its_worth_alone() {
    law(1000, 600, |case| {
        let row = case.rng.below(case.program.rows.len());
        let times = *case.rng.pick(&[0.25, 3.0, 60.0, 1000.0]);
        let edited = case.edit(|program, _| {
            program.rows[row].lower *= times;
            program.rows[row].upper *= times;
            for (at, value) in program.columns.iter_mut().flat_map(|column| &mut column.entries) {
                if at.0 == row {
                    *value *= times;
                }
            }
        });
        let outcome = solve(&mut case.session, &edited).outcome;
        let (before, after) = (case.least(), least(&edited, &outcome));
        holds(same(before, after, case.size()), || format!("times {times}: {before} became {after}"))?;
        if let (Some(before), Outcome::Optimal(after)) = (case.optimum(), outcome)
            && before.worths_unique
        {
            let (was, is) = (before.worths[row], after.worths[row] * times);
            holds(same(was, is, 1.0), || format!("times {times}: worth {was} became {is}"))?;
        }
        Ok(true)
    });
}

#[test]
fn the_unit_of_an_activity_changes_its_level_and_gain_alone() {
    law(1000, 600, |case| {
        let at = case.rng.below(case.program.columns.len());
        let times = *case.rng.pick(&[0.25, 3.0, 60.0, 1000.0]);
        let edited = case.edit(|program, _| {
            let column = &mut program.columns[at];
            column.lower /= times;
            column.upper /= times;
            column.aim *= times;
            for (_, value) in &mut column.entries {
                *value *= times;
            }
        });
        let outcome = solve(&mut case.session, &edited).outcome;
        let (before, after) = (case.least(), least(&edited, &outcome));
        holds(same(before, after, case.size()), || format!("times {times}: {before} became {after}"))?;
        if let (Some(before), Outcome::Optimal(after)) = (case.optimum(), outcome) {
            let (was, is) = (before.levels[at], after.levels[at] * times);
            holds(!before.levels_unique || same(was, is, 1.0), || format!("times {times}: level {was} became {is}"))?;
            let (was, is) = (before.gains[at] * times, after.gains[at]);
            holds(!before.worths_unique || same(was, is, times), || format!("times {times}: gain {was} became {is}"))?;
        }
        Ok(true)
    });
}

#[test]
fn returns_to_scale_are_constant() {
    law(1000, 600, |case| {
        let times = *case.rng.pick(&[0.125, 0.7, 3.0, 100.0]);
        let sign = case.program.sense.sign();
        let offset = sign * case.program.offset;
        let after = case.edited(|program, _| {
            for row in &mut program.rows {
                row.lower *= times;
                row.upper *= times;
            }
            for column in &mut program.columns {
                column.lower *= times;
                column.upper *= times;
            }
        });
        let (before, after) = (times * (case.least() - offset), after - offset);
        holds(same(before, after, case.size() * times.max(1.0)), || format!("times {times}: {before} and {after}"))?;
        Ok(true)
    });
}

#[test]
fn a_row_said_twice_changes_nothing() {
    law(1000, 600, |case| {
        let row = case.rng.below(case.program.rows.len());
        let before = case.least();
        let after = case.edited(|program, _| {
            let twin = RowIndex(program.rows.len());
            let said = program.rows[row].clone();
            program.rows.push(Row { key: Key::new("resources.zz_twin"), ..said });
            for column in &mut program.columns {
                let value = column.entries.iter().find(|entry| entry.0.0 == row).map(|entry| entry.1);
                column.entries.extend(value.map(|value| (twin, value)));
            }
        });
        holds(same(before, after, case.size()), || format!("{before} became {after}")).map(|()| true)
    });
}

/// Bounds split with the twin, so that the two together are held as the one was.
#[test]
fn an_activity_split_in_two_changes_nothing() {
    law(1000, 600, |case| {
        let at = case.rng.below(case.program.columns.len());
        let before = case.least();
        let after = case.edited(|program, _| {
            let column = &mut program.columns[at];
            (column.lower, column.upper) = (column.lower / 2.0, column.upper / 2.0);
            let twin = Column { key: Key::new("activities.zz_twin"), ..column.clone() };
            program.columns.push(twin);
        });
        holds(same(before, after, case.size()), || format!("{before} became {after}")).map(|()| true)
    });
}

#[test]
fn frozen_decisions_never_help_and_cost_nothing_where_they_were_right() {
    law(1000, 200, |case| {
        let before = case.least();
        let Some(levels) = case.optimum().map(|optimum| optimum.levels.clone()) else { return Ok(false) };
        let at = case.rng.below(levels.len());
        let freeze = |level: f64| {
            move |program: &mut Program, _: &mut Rng| {
                let column = &mut program.columns[at];
                let level = level.clamp(column.lower, column.upper);
                (column.lower, column.upper) = (level, level);
            }
        };
        let right = case.edited(freeze(levels[at]));
        let other = case.edited(freeze(levels[at] + 1.0));
        let size = case.size();
        holds(same(before, right, size), || format!("frozen where it was: {before} became {right}"))?;
        holds(at_most(before, other, size), || format!("frozen elsewhere: {before} became {other}"))?;
        Ok(true)
    });
}
