//! Netlib programs

#[path = "support/instances.rs"]
mod instances;

use millreeve::lp::{build, mps};
use millreeve::solver::{message::Outcome, session::Session, stop::Stop};
use std::time::Duration;

#[test]
fn probe() {
    for (name, optimum) in [
        ("25fv47", 5501.8458882867447945812325883916),
        ("80bau3b", 987224.19240909025757911711738799),
        ("adlittle", 225494.96316238038228101176621492),
        ("afiro", -464.75314285714285714285714285714),
        ("bandm", -158.62801845012064052174123768736),
        ("e226", -18.751929066370549102605687681285 + 7.113),
        ("etamacro", -755.7152333749133350792583667773),
        ("greenbea", -72555248.129845987457557870574845),
        ("israel", -896644.82186304572966200464196045),
        ("perold", -9380.7552782351606734833270386511),
        ("scrs8", 904.29695380079143579923107948844),
        ("shell", 1208825346.0),
        ("stair", -251.26695119296330352803637106304),
        ("standata", 1257.6995),
        ("standgub", 1257.6995),
        ("standmps", 1406.0175),
    ] {
        let text = std::fs::read_to_string(instances::netlib(name)).unwrap();
        let program = build(&mps::read(&text).unwrap().model);
        let mut session = Session::default();
        let t = std::time::Instant::now();
        let answer = session.solve(program, Duration::from_secs(60), &Stop::default());
        match answer.outcome {
            Outcome::Optimal(o) => eprintln!(
                "{name}: {} rel {:.1e} proof {:?} unique {} {} ranges {} pivots {} detours {:?} {:?}",
                o.aim,
                (o.aim - optimum).abs() / optimum.abs(),
                o.proof,
                o.levels_unique,
                o.worths_unique,
                o.ranges.is_some(),
                answer.account.pivots,
                answer.account.detours,
                t.elapsed()
            ),
            other => eprintln!("{name}: {other:?} {:?}", answer.account),
        }
    }
    for name in ["bgetam", "box1", "ex72a", "forest6", "galenet", "gas11", "klein1", "refinery", "vol1", "woodinfe"] {
        let Ok(text) = std::fs::read_to_string(instances::netlib(name)) else {
            eprintln!("{name}: none");
            continue;
        };
        let Ok(reading) = mps::read(&text) else {
            eprintln!("{name}: refused");
            continue;
        };
        let program = build(&reading.model);
        let mut session = Session::default();
        let answer = session.solve(program, Duration::from_secs(60), &Stop::default());
        match answer.outcome {
            Outcome::Infeasible(c) => eprintln!(
                "{name}: infeasible, {} rules, proven {} {:?}",
                c.rules.len(),
                c.proven,
                answer.account.detours
            ),
            Outcome::Unbounded(c) => eprintln!(
                "{name}: unbounded, {} rates, proven {} {:?}",
                c.rates.len(),
                c.proven,
                answer.account.detours
            ),
            other => eprintln!("{name}: {other:?} {:?}", answer.account),
        }
    }
}
