//! Recorded runs of the program, as people see them. `TRYCMD=overwrite` records them again.

#[test]
fn the_program_says_what_is_recorded() {
    trycmd::TestCases::new().env("COLUMNS", "100").case("tests/commands/*.trycmd");
}
