//! MPS files in and out: published instances, held against the solver's own reader.
#![expect(clippy::float_cmp, reason = "numbers are read, not computed")]
#![expect(clippy::unwrap_used, clippy::panic, reason = "helpers of tests fail the test")]

#[path = "support/highs_reader.rs"]
mod highs_reader;
#[path = "support/instances.rs"]
mod instances;

use std::fs;
use std::io::Write as _;

use highs_reader::Listing;
use instances::netlib;
use millreeve::lp::mps::{Layout, Reading, names, read, write};
use millreeve::lp::{Program, Sense, build};
use millreeve::model::Model;

/// Rows (without the objective) and columns of Netlib instances that have an optimum: table in the readme of Netlib's lp/data,
/// which counts the objective row too.
const OPTIMAL: [(&str, usize, usize); 16] = [
    ("25fv47", 821, 1571),
    ("80bau3b", 2262, 9799),
    ("adlittle", 56, 97),
    ("afiro", 27, 32),
    ("bandm", 305, 472),
    ("e226", 223, 282),
    ("etamacro", 400, 688),
    ("greenbea", 2392, 5405),
    ("israel", 174, 142),
    ("perold", 625, 1376),
    ("scrs8", 490, 1169),
    ("shell", 536, 1775),
    ("stair", 356, 467),
    ("standata", 359, 1075),
    ("standgub", 361, 1184),
    ("standmps", 467, 1075),
];

/// Instances of Netlib's lp/infeas.
const INFEASIBLE: [&str; 11] =
    ["woodinfe", "klein1", "forest6", "bgetam", "galenet", "box1", "ex72a", "cplex1", "refinery", "vol1", "gams10am"];

fn instances() -> impl Iterator<Item = &'static str> {
    OPTIMAL.map(|(name, ..)| name).into_iter().chain(INFEASIBLE)
}

fn reading(name: &str) -> Reading {
    let text = fs::read_to_string(netlib(name)).unwrap();
    read(&text).unwrap_or_else(|error| panic!("{name}: {error}"))
}

/// The program behind a model, by the names the file gives: those of `highs_reader`, escaped.
fn listing(program: &Program) -> Listing {
    let plain = |key: &str| key.split_once('.').unwrap().1.to_owned();
    let mut listing =
        Listing { maximise: program.sense == Sense::Maximise, offset: program.offset, ..Listing::default() };
    for row in &program.rows {
        listing.rows.insert(plain(row.key.as_str()), [row.lower, row.upper]);
    }
    for column in &program.columns {
        let name = plain(column.key.as_str());
        for &(row, value) in &column.entries {
            listing.entries.insert((name.clone(), plain(program.rows[row.0].key.as_str())), value);
        }
        listing.columns.insert(name, [column.lower, column.upper, column.aim]);
    }
    listing
}

/// The same listing with each name as ours.
fn escaped(listing: Listing) -> Listing {
    let ours = |name: String| names::escape(&name).to_string();
    Listing {
        maximise: listing.maximise,
        offset: listing.offset,
        columns: listing.columns.into_iter().map(|(name, it)| (ours(name), it)).collect(),
        rows: listing.rows.into_iter().map(|(name, it)| (ours(name), it)).collect(),
        entries: listing.entries.into_iter().map(|((column, row), it)| ((ours(column), ours(row)), it)).collect(),
    }
}

#[test]
fn instances_have_the_rows_and_columns_published() {
    for (name, rows, columns) in OPTIMAL {
        let model = reading(name).model;
        assert_eq!((model.limits.len(), model.activities.len()), (rows, columns), "{name}");
    }
}

#[test]
fn instances_read_as_the_solver_reads_them() {
    for name in instances() {
        let solver = highs_reader::read(&netlib(name)).unwrap_or_else(|| panic!("the solver refuses {name}"));
        let ours = listing(&build(&reading(name).model));
        assert!(ours == escaped(solver), "{name}");
    }
}

#[test]
fn instances_survive_being_written() {
    for name in instances() {
        let first = reading(name).model;
        let text = write(&first).unwrap();
        let second = read(&text).unwrap_or_else(|error| panic!("{name}: {error}"));
        assert_eq!(second.layout, Layout::Free);
        assert!(build(&second.model) == build(&first), "{name}");
        assert!(second.model == first, "{name}: labels or title differ");
    }
}

#[test]
fn the_solver_reads_what_is_written() {
    let folder = tempfile::tempdir().unwrap();
    for name in ["e226", "forest6", "perold", "standgub", "vol1"] {
        let model = reading(name).model;
        let path = folder.path().join(name).with_extension("mps");
        fs::File::create(&path).unwrap().write_all(write(&model).unwrap().as_bytes()).unwrap();
        let solver = highs_reader::read(&path).unwrap();
        assert!(listing(&build(&model)) == escaped(solver), "{name}");
    }
}

/// The objective's right-hand side is the negative of the constant: -7.113 there adds 7.113.
#[test]
fn the_constant_of_e226_is_the_negative_of_what_its_objective_row_says() {
    let model: Model = reading("e226").model;
    assert!(model.constant == 7.113);
}

/// Its fuel row has the coefficient -.9999E-9, below what a model may hold; none of the Netlib instances has one.
#[test]
fn a_coefficient_too_small_for_a_model_is_refused_where_it_stands() {
    let text = fs::read_to_string(netlib("gas11")).unwrap();
    let error = read(&text).unwrap_err();
    assert_eq!(error.to_string(), "line 593: coefficient `-.9999E-9` is smaller than 1e-9");
}

/// Instances that the solver tests its own reader with: whole numbers, quadratic terms and numbers that are none.
#[test]
fn what_is_no_linear_program_is_refused() {
    for (name, told) in [
        ("flugpl", "line 41: column `ANM1` is marked in line 40 as whole numbers, which this version does not plan"),
        ("qjh", "line 13: section `QSECTION` states quadratic terms, which this version does not plan"),
        ("nan0", "line 8: `nan` is not a number"),
        ("warnings", "line 12: no row is named `R11`"),
        ("garbage", "line 2: `dvhfalkmnthry6v54y76m87yq,x,^%(^%(T&*)(lksz` is no section of an MPS file"),
    ] {
        let text = fs::read_to_string(netlib(name)).unwrap();
        assert_eq!(read(&text).unwrap_err().to_string(), told, "{name}");
    }
}
