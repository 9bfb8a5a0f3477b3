//! Chains of edits over the whole language: what a kind promises of the last basis is found, and the one plan does not depend on the way.

#![expect(clippy::unwrap_used, clippy::panic, reason = "helpers of tests fail the test")]

#[path = "support/promise.rs"]
mod promise;
#[path = "support/random_language.rs"]
mod random_language;
#[path = "support/random_language_edit.rs"]
mod random_language_edit;
#[path = "support/rng.rs"]
mod rng;
#[path = "support/solve.rs"]
mod support;
#[path = "support/told.rs"]
mod told;

use std::fmt::Write as _;

use millreeve::edits::{Kind, LastPlan, Renames, apply, compare};
use millreeve::lp::{Difference, Program, build};
use millreeve::model::{Bound, Limit, Model};
use millreeve::plan::last::last_plan;
use millreeve::solver::message::{Optimum, Outcome};
use millreeve::solver::session::Session;
use promise::promise_kept;
use rng::Rng;
use support::{least, same, size, solve};
use told::told;

const CHAINS: u64 = 250;
const EDITS: usize = 8;

/// What a plan shows of an outcome: aim and levels in 10 digits, whether it is exact, whether there are ties.
fn shown(outcome: &Outcome) -> String {
    let digits = |number: f64| if number.abs() <= 1e-9 { "0".to_owned() } else { format!("{number:.9e}") };
    match outcome {
        Outcome::Optimal(optimum) => {
            let mut text = format!("{} {} {}", digits(optimum.aim), optimum.exact, optimum.levels_unique);
            for level in &optimum.levels {
                let _ = write!(text, " {}", digits(*level));
            }
            text
        }
        Outcome::Infeasible(_) => "no plan".to_owned(),
        Outcome::Unbounded(_) => "no end".to_owned(),
        other => panic!("{other:?}"),
    }
}

fn optimum(outcome: &Outcome) -> Option<&Optimum> {
    if let Outcome::Optimal(optimum) = outcome { Some(optimum) } else { None }
}

fn last_of(model: &Model, program: &Program, outcome: &Outcome) -> Option<LastPlan> {
    optimum(outcome).map(|optimum| last_plan(&model.horizon, program, &optimum.basis.named(program)))
}

#[test]
fn chains_of_edits_keep_their_promises_and_come_to_the_one_plan() {
    let mut promised = [0; 4];
    let mut starts = [0; 4];
    let mut rolled = 0;
    let mut detours = 0;
    for seed in 0..CHAINS {
        let mut model = random_language::model(seed);
        let mut rng = Rng::new(!seed);
        let mut session = Session::default();
        let mut program = build(&model);
        let mut outcome = solve(&mut session, &program).outcome;
        for step in 0..EDITS {
            let edited = random_language_edit::edit(&mut rng, &model);
            let after = build(&edited);
            let answer = solve(&mut session, &after);
            let cold = solve(&mut Session::default(), &after).outcome;
            let edits = compare(&model, &edited);
            let case =
                || format!("seed {seed}, step {step}:\n{}\n{:?}\n{model:?}\n{edited:?}", told(&edits), answer.account);
            assert_eq!(shown(&answer.outcome), shown(&cold), "{}", case());
            assert!(!edits.is_empty() || no_number_differs(&program, &after), "{}", case());
            if let Some(before) = optimum(&outcome) {
                let mut again = Session::remembered(program.clone(), &before.basis.named(&program), Some(1_000));
                assert_eq!(shown(&solve(&mut again, &after).outcome), shown(&cold), "after a restart, {}", case());
            }
            let renamed = !Renames::between(&model, &edited).is_empty();
            if let Some(last) = last_of(&model, &program, &outcome)
                && !renamed
                && answer.account.primal_infeasible.is_some()
            {
                let kept = last.kept(&edits);
                assert!(promise_kept(kept, &answer.account), "{kept:?} was promised, {}", case());
                promised[kept as usize] += 1;
                starts[answer.account.start as usize] += 1;
                let roll = edits.iter().any(|edit| edit.kind == Kind::HorizonRolled);
                rolled += usize::from(roll);
                detours += usize::from(!answer.account.detours.is_empty());
            }
            (model, program, outcome) = (edited, after, answer.outcome);
        }
    }
    assert!(promised.iter().all(|&count| count >= 50), "too few of a kind: {promised:?}");
    assert!(starts[..3].iter().all(|&count| count >= 50), "too few of a start: {starts:?}");
    assert!(rolled >= 30, "only {rolled} rolled horizons were started from the last basis");
    assert!(detours * 20 < starts.iter().sum::<usize>(), "{detours} detours, starts {starts:?}");
}

fn no_number_differs(before: &Program, after: &Program) -> bool {
    Difference::between(before, after).is_empty()
}

/// Edits made one after another, each alone, lead to the edited model: at the end stands the program of that.
#[test]
fn edits_made_one_by_one_lead_to_the_edited_model() {
    let mut made = 0;
    for seed in 0..CHAINS {
        let mut model = random_language::model(seed);
        let mut rng = Rng::new(seed ^ 0xABCD);
        for step in 0..EDITS {
            let edited = random_language_edit::edit(&mut rng, &model);
            let edits = compare(&model, &edited);
            let mut way = model.clone();
            for edit in &edits {
                apply(&mut way, edit, &edited);
                made += 1;
            }
            let renamed = !Renames::between(&model, &edited).is_empty();
            assert!(
                renamed || no_number_differs(&build(&way), &build(&edited)),
                "seed {seed}, step {step}:\n{}\n{model:?}\n{way:?}\n{edited:?}",
                told(&edits)
            );
            model = edited;
        }
    }
    assert!(made >= 2_000, "{made} edits only");
}

/// One unit more of a material at hand is worth what its balance says: the worth of its row turned round, as the row counts what is
/// missing. From there on the aim bends downwards, so it is never more.
#[test]
fn a_unit_more_at_hand_is_worth_what_the_balance_says() {
    let mut told = 0;
    for seed in 0..CHAINS {
        let model = random_language::model(seed);
        let program = build(&model);
        let mut session = Session::default();
        let outcome = solve(&mut session, &program).outcome;
        let Some(optimum) = optimum(&outcome) else { continue };
        let first = model.horizon.periods().next().unwrap();
        for name in model.materials.keys() {
            let key = millreeve::lp::keys::balance_key(name, &model.horizon, first);
            let worth = program.sense.sign() * optimum.worths[program.row(&key).unwrap().0];
            for by in [0.01, 1.0] {
                let mut more = model.clone();
                more.materials.get_mut(name).unwrap().opening += by;
                let more = build(&more);
                let after = solve(&mut session, &more).outcome;
                let gained = least(&program, &outcome) - least(&more, &after);
                let slip = 1e-7 * size(&program, optimum);
                assert!(gained <= by * worth + slip, "seed {seed}: {by} more of {name} gained {gained}, not {worth}");
                told += usize::from(same(gained, by * worth, 1e2 * size(&program, optimum)) && worth != 0.0);
            }
        }
    }
    assert!(told >= 80, "only {told} cases say anything");
}

/// A limit that counts a number twice, by name and by tag, adds the decimals as they are written.
#[test]
fn a_limit_over_all_periods_is_the_sum_of_those_over_each() {
    for seed in 0..200 {
        let mut model = random_language::model(seed);
        let mut draw = random_language::Draw { rng: &mut Rng::new(seed), coarse: true };
        let Limit { terms, .. } = draw.limit(&model);
        let free = || Bound::Between(f64::NEG_INFINITY.into(), f64::INFINITY.into());
        let limit = |over| Limit { terms: terms.clone(), bound: free(), over, ..Limit::default() };
        model.limits.clear();
        model.limits.insert(random_language::name("each"), limit(millreeve::model::Over::Each));
        model.limits.insert(random_language::name("whole"), limit(millreeve::model::Over::All));
        let program = build(&model);
        let of = |at: usize| program.rows[at].key.as_str().starts_with("limits.each");
        for column in &program.columns {
            let whole = column.entries.iter().filter(|entry| program.rows[entry.0.0].key.as_str() == "limits.whole");
            let each: f64 = column.entries.iter().filter(|entry| of(entry.0.0)).map(|entry| entry.1).sum();
            let whole: f64 = whole.map(|entry| entry.1).sum();
            assert!(same(each, whole, 1.0), "seed {seed}: {} in {}", column.key, whole);
        }
    }
}
