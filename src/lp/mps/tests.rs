//! What single lines of a file mean.
#![expect(clippy::float_cmp, reason = "numbers are read, not computed")]

use super::*;
use crate::lp::build;
use crate::model::{Aim, Bound, Model};

/// A file with two rows and two columns; `more` follows its COLUMNS.
fn file(more: &str) -> String {
    format!("NAME t\nROWS\n N COST\n L KILN\n E B.1\nCOLUMNS\n    X COST 2 KILN 1\n    Y KILN 3 B.1 -1\n{more}ENDATA\n")
}

fn model(more: &str) -> Model {
    let reading = read(&file(more)).unwrap_or_else(|error| panic!("{more}: {error}"));
    assert_eq!(reading.warnings, Warnings::default(), "{more}");
    reading.model
}

fn error(more: &str) -> String {
    read(&file(more)).unwrap_err().to_string()
}

fn warning(more: &str) -> (Model, String) {
    let Reading { model, warnings, .. } = read(&file(more)).unwrap();
    let [Warning { line, message }] = &warnings.reported[..] else { panic!("{warnings:?}") };
    (model, format!("line {line}: {message}"))
}

fn row(model: &Model, name: &str) -> [f64; 2] {
    let program = build(model);
    let row = program.rows.iter().find(|row| row.key.as_str() == format!("limits.{name}")).unwrap();
    [row.lower, row.upper]
}

fn column(model: &Model, name: &str) -> [f64; 2] {
    let program = build(model);
    let column = program.columns.iter().find(|column| column.key.as_str() == format!("activities.{name}")).unwrap();
    [column.lower, column.upper]
}

const INF: f64 = f64::INFINITY;

#[test]
fn columns_become_activities_and_rows_limits() {
    let model = model("RHS\n    RHS KILN 12 COST 5\n");
    assert_eq!((model.title.as_deref(), model.aim), (Some("t"), Aim::Minimise));
    assert!(model.constant == -5.0);
    assert_eq!(model.activities["X"].cost, 2.0.into());
    assert_eq!(model.activities["X"].label, None);
    assert_eq!(model.limits["B_x2e_1"].label.as_deref(), Some("B.1"));
    assert_eq!(model.limits["B_x2e_1"].bound, Bound::Equals(0.0.into()));
    assert_eq!(model.limits["KILN"].bound, Bound::Between((-INF).into(), 12.0.into()));
}

#[test]
fn the_sense_may_stand_beside_its_section_or_below() {
    for sense in ["OBJSENSE MAX\n", "OBJSENSE\n    MAXIMISE\n", "OBJSENSE\n    Maximize\n"] {
        let model = read(&file("").replace("ROWS", &format!("{sense}ROWS"))).unwrap().model;
        assert_eq!(model.aim, Aim::Maximise, "{sense}");
        assert_eq!((&model.activities["X"].price, &model.activities["X"].cost), (&2.0.into(), &0.0.into()));
    }
    let told = read(&file("").replace("ROWS", "OBJSENSE\n    MOST\nROWS")).unwrap_err().to_string();
    assert_eq!(told, "line 3: `MOST` is no sense of an objective");
}

#[test]
fn the_objective_may_be_named() {
    let two = file("").replace(" N COST\n", " N OTHER\n N COST\n");
    let Reading { model, warnings, .. } = read(&two.replace("ROWS", "OBJNAME\n    COST\nROWS")).unwrap();
    assert_eq!(model.activities["X"].cost, 2.0.into());
    assert_eq!(warnings.reported[0].message, "row `OTHER` is free and not the objective; it is left out");
    assert_eq!(read(&two).unwrap().model.activities["X"].cost, 0.0.into());
    let told = read(&two.replace("ROWS", "OBJNAME KILN\nROWS")).unwrap_err().to_string();
    assert_eq!(told, "line 2: row `KILN` is held by bounds and cannot be the objective");
}

#[test]
fn bounds_mean_what_their_kinds_say() {
    for (line, bounds) in [
        ("LO BND X 2", [2.0, INF]),
        ("UP BND X 2", [0.0, 2.0]),
        ("UP X 2", [0.0, 2.0]),
        ("UP BND X 0", [0.0, 0.0]),
        ("FX BND X -2", [-2.0, -2.0]),
        ("FR BND X", [-INF, INF]),
        ("FR X", [-INF, INF]),
        ("FR X 0", [-INF, INF]),
        ("MI BND X", [-INF, INF]),
        ("MI BND X 0", [-INF, INF]),
        ("PL BND X", [0.0, INF]),
        ("LO BND X -1e30", [-INF, INF]),
        ("UP BND X Inf", [0.0, INF]),
        ("UP BND X -2\n LO BND X -7", [-7.0, -2.0]),
        ("MI BND X\n UP BND X 2", [-INF, 2.0]),
    ] {
        assert_eq!(column(&model(&format!("BOUNDS\n {line}\n")), "X"), bounds, "{line}");
    }
    let (model, told) = warning("BOUNDS\n UP BND X -2\n");
    assert_eq!(column(&model, "X"), [-INF, -2.0]);
    assert_eq!(told, "line 10: the upper bound of column `X` is negative, so it has no lower bound");
}

#[test]
fn bounds_that_make_no_linear_program_are_refused() {
    for (line, told) in [
        ("BV BND X", "bound BV makes column `X` whole numbers, which this version does not plan"),
        ("UI BND X 4", "bound UI makes column `X` whole numbers, which this version does not plan"),
        ("SC BND X 4", "bound SC makes column `X` none or at least so much, which this version does not plan"),
        ("UQ BND X 4", "`UQ` is no kind of bound"),
        ("UP BND X -1e30", "bound UP of column `X` leaves it no value"),
        ("FX BND X 1e30", "bound FX of column `X` leaves it no value"),
        ("UP BND Z 4", "no column is named `Z`"),
        ("UP BND X four", "`four` is not a number"),
        ("UP BND X 4\n UP BND X 5", "the upper bound of column `X` is given twice, in lines 10 and 11"),
    ] {
        let line_number = 9 + line.lines().count();
        assert_eq!(error(&format!("BOUNDS\n {line}\n")), format!("line {line_number}: {told}"));
    }
}

#[test]
fn ranges_widen_rows_by_their_kind_and_sign() {
    let with = |kind: &str, right: &str, range: &str| {
        let text = file(&format!("RHS\n RHS KILN {right}\nRANGES\n RNG KILN {range}\n"));
        read(&text.replace(" L KILN", &format!(" {kind} KILN"))).map(|reading| row(&reading.model, "KILN"))
    };
    for (kind, range, bounds) in [
        ("L", "4", [6.0, 10.0]),
        ("L", "-4", [6.0, 10.0]),
        ("G", "4", [10.0, 14.0]),
        ("G", "-4", [10.0, 14.0]),
        ("E", "4", [10.0, 14.0]),
        ("E", "-4", [6.0, 10.0]),
        ("E", "0", [10.0, 10.0]),
        ("L", "1e30", [-INF, 10.0]),
        ("E", "1e30", [10.0, INF]),
    ] {
        assert_eq!(with(kind, "10", range).unwrap(), bounds, "{kind} {range}");
    }
    let told = with("L", "1e30", "4").unwrap_err().to_string();
    assert_eq!(told, "line 12: the right-hand side of row `KILN` leaves its sum no value");
    let told = with("L", "-1e15", "1e15").unwrap_err().to_string();
    assert_eq!(told, "line 12: the range of row `KILN` reaches beyond 1e15");
}

#[test]
fn what_is_left_out_is_said() {
    let (model, told) = warning("RHS\n A KILN 4\n B KILN 5\n B B.1 5\n");
    assert_eq!(row(&model, "KILN"), [-INF, 4.0]);
    assert_eq!(row(&model, "B_x2e_1"), [0.0, 0.0]);
    assert_eq!(told, "line 11: of RHS only the first set, `A`, is used; `B` is left out");
    let (model, told) = warning("RHS\n KILN 1e30\n");
    assert!(!model.limits.contains_key("KILN"));
    assert_eq!(told, "line 10: nothing holds row `KILN`; it is left out");
}

#[test]
fn a_thing_said_twice_names_both_lines() {
    for (old, new, told) in [
        (" E B.1\n", " E B.1\n L KILN\n", "line 6: row `KILN` is given twice, in lines 4 and 6"),
        (
            "    Y KILN 3",
            "    X KILN 2\n    Y KILN 3",
            "line 8: the entry of column `X` in row `KILN` is given twice, in lines 7 and 8",
        ),
        ("ENDATA", "    X B.1 4\nENDATA", "line 9: column `X` starts again, after it ended in line 7"),
        ("ENDATA", "ROWS\nENDATA", "line 9: section ROWS stands twice, in lines 2 and 9"),
        (
            "ENDATA",
            "RHS\n KILN 1\n R KILN 2\nENDATA",
            "line 11: the right-hand side of row `KILN` is given twice, in lines 10 and 11",
        ),
    ] {
        assert_eq!(read(&file("").replacen(old, new, 1)).unwrap_err().to_string(), told);
    }
}

#[test]
fn names_with_blanks_are_read_in_fixed_layout_and_come_back() {
    let text = "\
NAME          TILES
ROWS
 N  COST
 L  KILN DAY
COLUMNS
    FLOOR 30  COST               1.5   KILN DAY            1.
    X         KILN DAY            2.
RHS
              KILN DAY           12.
ENDATA
";
    let first = read(text).unwrap();
    assert_eq!(first.layout, Layout::Fixed);
    assert_eq!(first.model.activities["FLOOR_x20_30"].label.as_deref(), Some("FLOOR 30"));
    let second = read(&write(&first.model).unwrap()).unwrap();
    assert_eq!(second.layout, Layout::Free);
    assert_eq!(second.model, first.model);
}

#[test]
fn the_error_shown_is_that_of_the_layout_that_gets_further() {
    let text = "NAME\nROWS\n N  COST\n L  KILN DAY\nCOLUMNS\n    X         KILL DAY            2.\nENDATA\n";
    assert_eq!(read(text).unwrap_err().to_string(), "line 6: no row is named `KILL DAY`");
    assert_eq!(error("RHS\n KILL 1\n"), "line 10: no row is named `KILL`");
}

#[test]
fn a_file_cut_short_is_refused() {
    let whole = file("");
    let cut = whole.trim_end().trim_end_matches("ENDATA");
    assert_eq!(read(cut).unwrap_err().to_string(), "line 8: the file ends without ENDATA");
    assert_eq!(read("").unwrap_err().to_string(), "line 1: the file ends without ENDATA");
}

#[test]
fn messages_stay_short_and_plain() {
    let long = format!("{}\u{1b}[2J", "x".repeat(1_000_000));
    let told = error(&format!("RHS\n {long} 1\n"));
    assert!(told.len() < 120, "{}", told.len());
    assert_eq!(error("RHS\n \u{1b}[2J 1\n"), "line 10: no row is named `\\u{1b}[2J`");
}
