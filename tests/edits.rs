//! Edits of models: the kind each is given, what the kind promises of the last basis, and the answer from there.

#![expect(clippy::unwrap_used, clippy::panic, reason = "helpers of tests fail the test")]

#[path = "support/promise.rs"]
mod promise;
#[path = "support/random.rs"]
mod random;
#[path = "support/random_edit.rs"]
mod random_edit;
#[path = "support/rng.rs"]
mod rng;
#[path = "support/solve.rs"]
mod support;
#[path = "support/tileworks.rs"]
mod tileworks;
#[path = "support/told.rs"]
mod told;

use millreeve::edits::{LastPlan, Renames, compare};
use millreeve::lp::{Program, build};
use millreeve::model::{Activity, Bound, Limit, Model, Name, Term};
use millreeve::plan::last;
use millreeve::solver::message::{Optimum, Outcome};
use millreeve::solver::session::Session;
use promise::promise_kept;
use rng::Rng;
use support::{least, same, size, solve};
use tileworks::{ROWS, Row, tileworks};
use told::told;

fn last_plan(model: &Model, program: &Program, optimum: &Optimum) -> LastPlan {
    last::last_plan(&model.horizon, program, &optimum.basis.named(program))
}

/// Each row of the table of kinds, on a small tileworks.
#[test]
fn every_kind_of_edit_starts_as_it_promises() {
    let model = tileworks();
    let program = build(&model);
    for Row { what, edit, kinds, kept, start, most_pivots } in ROWS {
        let mut session = Session::default();
        let Outcome::Optimal(first) = solve(&mut session, &program).outcome else { panic!("no plan") };
        let mut edited = model.clone();
        edit(&mut edited);
        let edits = compare(&model, &edited);
        assert_eq!(edits.iter().map(|edit| edit.kind).collect::<Vec<_>>(), kinds, "{what}");
        assert_eq!(last_plan(&model, &program, &first).kept(&edits), kept, "{what}");
        let after = build(&edited);
        let answer = solve(&mut session, &after);
        let account = answer.account;
        assert!(promise_kept(kept, &account), "{what}: {account:?}");
        assert_eq!(account.start, start, "{what}: {account:?}");
        assert!(account.pivots <= most_pivots, "{what}: {account:?}");
        assert!(account.detours.is_empty(), "{what}: {account:?}");
        let cold = solve(&mut Session::default(), &after).outcome;
        let (warm, cold) = (least(&after, &answer.outcome), least(&after, &cold));
        assert!(same(warm, cold, 1.0), "{what}: {warm} and {cold}");
    }
}

const CHAINS: u64 = 1000;
const EDITS: usize = 8;

/// Chains of edits: the answer from the last basis is that from nothing, and what a kind promises is found.
#[test]
fn random_edits_keep_what_their_kinds_promise() {
    let mut promised = [0; 4];
    let mut starts = [0; 4];
    for seed in 0..CHAINS {
        let mut model = random::model(seed);
        let mut rng = Rng::new(!seed);
        let mut session = Session::default();
        let mut last = optimal(&model, &solve(&mut session, &build(&model)).outcome);
        for step in 0..EDITS {
            let edited = random_edit::edit(&mut rng, &model);
            let program = build(&edited);
            let answer = solve(&mut session, &program);
            let account = &answer.account;
            let edits = compare(&model, &edited);
            let case = || {
                let (from, to) = (build(&model), &program);
                format!("seed {seed}, step {step}:\n{}\n{account:?}\n{from:?}\n{to:?}", told(&edits))
            };
            let cold = solve(&mut Session::default(), &program).outcome;
            let scale = if let Outcome::Optimal(optimum) = &cold { size(&program, optimum) } else { 1.0 };
            let (warm, cold) = (least(&program, &answer.outcome), least(&program, &cold));
            assert!(same(warm, cold, scale), "{warm} and {cold}, {}", case());
            // A rename is wording to who renames the last basis as well; here it is a withdrawal and a new activity.
            let renamed = !Renames::between(&model, &edited).is_empty();
            // Where the model before has no plan, the answer starts from the last plan there was, of which nothing is promised.
            if let Some(last) = &last
                && !renamed
                && account.primal_infeasible.is_some()
                && !account.by_name
            {
                let kept = last.kept(&edits);
                assert!(promise_kept(kept, account), "{kept:?} was promised, {last:?}, {}", case());
                promised[kept as usize] += 1;
                starts[account.start as usize] += 1;
            }
            last = optimal(&edited, &answer.outcome);
            model = edited;
        }
    }
    assert!(promised.iter().all(|&count| count >= 50), "too few of a kind: {promised:?}");
    assert!(starts[..3].iter().all(|&count| count >= 50), "too few of a start: {starts:?}");
}

/// What stands at a bound in a model's plan, where there is one.
fn optimal(model: &Model, outcome: &Outcome) -> Option<LastPlan> {
    let Outcome::Optimal(optimum) = outcome else { return None };
    Some(last_plan(model, &build(model), optimum))
}

/// On the way from the last basis an activity is held at 0 before its own promise is let go: a contradiction that the edited model
/// does not have.
#[test]
fn an_activity_withdrawn_with_its_promise_leaves_a_plan() {
    let edited = tileworks();
    let mut model = edited.clone();
    let roof = Activity { price: 5.0.into(), ..edited.activities["roof"].clone() };
    let term = Term::Activity(Name::new("slate").unwrap());
    let bound = Bound::Between(5.0.into(), f64::INFINITY.into());
    model.activities.insert(Name::new("slate").unwrap(), roof);
    let promise = Limit { terms: [(term, 1.0.into())].into(), bound, ..Limit::default() };
    model.limits.insert(Name::new("slate_promised").unwrap(), promise);

    let mut session = Session::default();
    let before = build(&model);
    assert!(least(&before, &solve(&mut session, &before).outcome).is_finite());
    let after = build(&edited);
    let answer = solve(&mut session, &after);
    let cold = solve(&mut Session::default(), &after);
    assert!(same(least(&after, &answer.outcome), least(&after, &cold.outcome), 1.0), "{answer:?}");
}
