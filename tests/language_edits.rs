//! Every key of the language: how an edit of it is told, of which kind it is, what that promises of the last basis, and that it is found.

#![expect(clippy::unwrap_used, clippy::panic, reason = "helpers of tests fail the test")]

#[path = "support/promise.rs"]
mod promise;
#[path = "language_edits/rows.rs"]
mod rows;
#[path = "support/solve.rs"]
mod support;
#[path = "language_edits/weeks.rs"]
mod weeks;

use millreeve::edits::{Edit, Renames, compare};
use millreeve::lp::build;
use millreeve::plan::last::last_plan;
use millreeve::solver::message::{Answer, Outcome};
use millreeve::solver::session::Session;
use promise::promise_kept;
use rows::{ROWS, Row};
use support::{least, same, size, solve};
use weeks::weeks;

fn line(edit: &Edit) -> String {
    let side = |text: &Option<String>| text.clone().unwrap_or_else(|| "nothing".to_owned());
    format!("{}: {} → {} ({:?})", edit.address, side(&edit.old), side(&edit.new), edit.kind)
}

#[test]
fn every_key_is_told_and_keeps_what_its_kind_promises() {
    let mut faults = Vec::new();
    for row in ROWS {
        if let Err(fault) = check(&row) {
            faults.push(format!("{}: {fault}", row.what));
        }
    }
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

fn check(Row { edit, told, kept, .. }: &Row) -> Result<(), String> {
    let holds = |so: bool, fault: &dyn Fn() -> String| if so { Ok(()) } else { Err(fault()) };
    let model = weeks();
    let program = build(&model);
    let mut session = Session::default();
    let Outcome::Optimal(first) = solve(&mut session, &program).outcome else { panic!("no plan") };
    let mut edited = model.clone();
    edit(&mut edited);
    let edits = compare(&model, &edited);
    let lines: Vec<String> = edits.iter().map(line).collect();
    holds(lines == *told, &|| format!("{lines:#?}"))?;
    let last = last_plan(&model.horizon, &program, &first.basis.named(&program));
    holds(last.kept(&edits) == *kept, &|| format!("promises {:?}", last.kept(&edits)))?;
    let after = build(&edited);
    let Answer { outcome, account } = solve(&mut session, &after);
    // A rename is wording to who renames the last basis as well; here everything has another name.
    let renamed = !Renames::between(&model, &edited).is_empty();
    holds(renamed || promise_kept(*kept, &account) && (account.by_name || account.detours.is_empty()), &|| {
        format!("{account:?}")
    })?;
    let cold = solve(&mut Session::default(), &after).outcome;
    let size = if let Outcome::Optimal(optimum) = &cold { size(&after, optimum) } else { 1.0 };
    let (warm, cold) = (least(&after, &outcome), least(&after, &cold));
    holds(same(warm, cold, size) && warm.is_finite(), &|| format!("{warm} and {cold}"))
}
