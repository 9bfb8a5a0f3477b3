//! Every key of the language: how an edit of it is told, of which kind it is, what that promises of the last basis, and that it is found.

#![expect(clippy::unwrap_used, clippy::panic, reason = "helpers of tests fail the test")]

#[path = "support/promise.rs"]
mod promise;
#[path = "support/solve.rs"]
mod support;
#[path = "support/weeks.rs"]
mod weeks;

use millreeve::edits::{Edit, compare};
use millreeve::lp::build;
use millreeve::plan::last::last_plan;
use millreeve::solver::message::Outcome;
use millreeve::solver::session::Session;
use promise::promise_kept;
use support::{least, same, size, solve};
use weeks::{ROWS, Row, weeks};

fn line(edit: &Edit) -> String {
    let side = |text: &Option<String>| text.clone().unwrap_or_else(|| "nothing".to_owned());
    format!("{}: {} → {} ({:?})", edit.address, side(&edit.old), side(&edit.new), edit.kind)
}

#[test]
fn every_key_is_told_and_keeps_what_its_kind_promises() {
    let model = weeks();
    let program = build(&model);
    for Row { what, edit, told, kept } in ROWS {
        let mut session = Session::default();
        let Outcome::Optimal(first) = solve(&mut session, &program).outcome else { panic!("no plan") };
        let mut edited = model.clone();
        edit(&mut edited);
        let edits = compare(&model, &edited);
        assert_eq!(edits.iter().map(line).collect::<Vec<_>>(), told, "{what}");
        let last = last_plan(&model.horizon, &program, &first.basis.named(&program));
        assert_eq!(last.kept(&edits), kept, "{what}");
        let after = build(&edited);
        let answer = solve(&mut session, &after);
        let account = answer.account;
        assert!(promise_kept(kept, &account), "{what}: {account:?}");
        assert!(account.detours.is_empty(), "{what}: {account:?}");
        let cold = solve(&mut Session::default(), &after).outcome;
        let size = if let Outcome::Optimal(optimum) = &cold { size(&after, optimum) } else { 1.0 };
        let (warm, cold) = (least(&after, &answer.outcome), least(&after, &cold));
        assert!(same(warm, cold, size) && warm.is_finite(), "{what}: {warm} and {cold}");
    }
}
