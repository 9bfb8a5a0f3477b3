//! What is said about each fault of values by period, materials and tiers, word for word.

use super::edited_weeks;
use super::faults::told_of;

/// What is said when each part of the works is replaced by another.
fn told(edits: &[(&str, &str)]) -> String {
    told_of(edits.iter().map(|(from, to)| edited_weeks(from, to)))
}

#[test]
fn values_by_period() {
    let told = told(&[
        ("capacity = [60, 48, 54]", "capacity = [60, 48]"),
        ("capacity = [60, 48, 54]", "capacity = [60]"),
        ("capacity = [60, 48, 54]", "capacity = []"),
        ("capacity = [60, 48, 54]", "capacity = [60, \"48\", nan]"),
        ("capacity = [60, 48, 54]", "capacity = { \"2027-W01\" = 60, \"2027-W02\" = 48 }"),
        ("capacity = [60, 48, 54]", "capacity = { each = 60, \"2027-W2\" = 48 }"),
        ("capacity = [60, 48, 54]", "capacity = { each = 60, march = 48 }"),
        ("capacity = [60, 48, 54]", "capacity = { eech = 60 }"),
        ("capacity = [60, 48, 54]", "capacity = { each = [60, 48, 54] }"),
        ("capacity = [60, 48, 54]", "capacity = { each = 60, per_day = 12 }"),
        ("capacity = [60, 48, 54]", "capacity = { per_day = inf }"),
        ("capacity = [60, 48, 54]", "capacity = { per_day = 1e15 }"),
        ("capacity = [60, 48, 54]", "capacity = {}"),
        ("kiln = 0.016", "kiln = { per_day = 0.016 }"),
        ("kiln = 0.016", "kiln = [0.016, 1e-12, 0.016]"),
        ("change_at_most = 800", "change_at_most = { per_day = -2 }"),
        ("days     = [5, 4, 4.5]\n", ""),
        ("days     = [5, 4, 4.5]", "days = [5, 4]"),
        (
            "periods  = [\"2027-W01\", \"2027-W02\", \"2027-W03\"]",
            "periods = [\"2027-W01\", \"2027-W01\", \"2027-W03\"]",
        ),
        ("periods  = [\"2027-W01\", \"2027-W02\", \"2027-W03\"]\ndays     = [5, 4, 4.5]", "days = 5"),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn bounds_by_period() {
    let told = told(&[
        ("at_least = [0, 200, 200]", "at_least = [0, 200, 2200]"),
        ("at_least = { each = 40, \"2027-W02\" = 30 }", "at_least = { each = 40, \"2027-W02\" = 100 }"),
        ("at_least = [0, 200, 200]\nat_most  = 2000", "at_most = [5, -1, 5]"),
        ("prospect = true", "prospect = true\nat_least = [0, 0, 1]"),
        ("at_least = 5, at_most = 60", "at_least = 65, at_most = 60"),
        ("at_least = [800, 900, 900], at_most = 1200", "at_least = [800, 900, 900], at_most = [800, 899, 900]"),
        ("at_least = 2, at_most = 60", "at_least = 2, at_most = 1"),
        ("closing  = { at_least = 10", "closing  = { at_least = 61"),
        ("closing  = 400", "closing  = 1801"),
        ("at_most  = [0.4, 0.4, 0.5]", "at_most  = [0.4, 0.4, 0.5]\nat_least = 0.45"),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn materials() {
    let told = told(&[
        ("opening  = 20", "opening  = [20, 20, 20]"),
        ("opening  = 20", "opening  = -20"),
        ("opening  = 20", "openning = 20"),
        ("purchase = [{", "purchase = [7, {"),
        ("sale     = { price = 5, at_most = 10 }", "sale = 5"),
        ("sale     = { price = 5, at_most = 10 }", "sale = { cost = 5 }"),
        ("sale     = { price = 5, at_most = 10 }", "sale = { price = 5, late = true }"),
        ("sale     = { price = 5, at_most = 10 }", "sale = { price = 5, late = { at_least = 3 } }"),
        ("sale     = { price = 5, at_most = 10 }", "sale = { price = 5, at_most = -1 }"),
        ("sale     = { price = 5, at_most = 10 }", "sale = { price = 5, at_least = inf }"),
        ("discard  = { cost = 8, at_most = 5 }", "discard  = 5"),
        ("discard  = { cost = 8, at_most = 5 }", "discard  = { price = 8 }"),
        ("closing  = 400", "closing  = [400, 400, 400]"),
        ("closing  = 400", "closing  = { at_most = 400 }"),
        ("closing  = 400", "closing  = -1"),
        ("stock    = { cost = 0.4, at_least = 2, at_most = 60 }", "stock = 60"),
        ("stock    = { cost = 0.4, at_least = 2, at_most = 60 }", "stock = { cost = 0.4, safety = 2 }"),
        ("draws    = { slip = 0.022 }", "draws    = { slib = 0.022 }"),
        ("draws    = { slip = 0.022 }", "draws    = { sand = 0.022 }"),
        ("makes    = { floor_stock = 1, offcut = 0.001 }", "makes    = { floor_stok = 1 }"),
        ("makes    = { floor_stock = 1, offcut = 0.001 }", "makes    = \"floor_stock\""),
        ("lead     = 1", "lead     = 1.5"),
        ("lead     = 1", "lead     = -1"),
        ("lead     = 1", "lead     = [1, 1, 2]"),
        ("lead     = 1", "lead     = 1001"),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn tiers() {
    let told = told(&[
        ("{ at_most = 16, cost = 95 }", "{ at_most = 16, cost = 195 }"),
        ("cost = 95 }, { at_most = [24, 20, 24], cost = 140 }", "cost = 95 }, { at_most = 24, cost = [140, 90, 140] }"),
        ("surge    = { at_most = { per_day = 2 }, cost = [60, 70, 60] }", "surge = { atmost = 2 }"),
        ("surge    = { at_most = { per_day = 2 }, cost = [60, 70, 60] }", "surge = 10"),
        ("surge    = { at_most = { per_day = 2 }, cost = [60, 70, 60] }", "surge = { at_most = -2 }"),
        ("price = [36, 37, 36], at_most", "price = [36, 33, 36], at_most"),
        ("price = [36, 37, 36], at_most", "at_most"),
        ("price = 16.5", "price = 21.5"),
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn what_a_limit_sums() {
    let terms = "terms    = { \"materials.slip.purchase\" = 1, \"materials.slip.purchase.1\" = 0.5 }";
    let told = |wrong: &[&str]| told_of(wrong.iter().map(|to| edited_weeks(terms, &format!("terms = {{ {to} }}"))));
    let told = told(&[
        "\"materials.slib.purchase\" = 1",
        "\"materials.sand.purchase\" = 1",
        "\"materials.slip\" = 1",
        "slip = 1",
        "\"materials.slip.bought\" = 1",
        "\"materials.slip.purchase.3\" = 1",
        "\"materials.slip.purchase.0\" = 1",
        "\"materials.slip.purchase.01\" = 1",
        "\"materials.slip.purchase.1.price\" = 1",
        "\"materials.slip.sale\" = 1",
        "\"materials.offcut.sale.2\" = 1",
        "\"materials.offcut.sale.late\" = 1",
        "\"materials.floor_stock.sale.2.late\" = 1",
        "\"materials.offcut.stock\" = 1",
        "\"resources.klin.surge\" = 1",
        "\"resources.kiln.surge.x\" = 1",
        "\"resources.kiln.surge.3\" = 1",
        "\"resources.kiln.capacity\" = 1",
        "materials.slip.purchase = 1",
    ]);
    insta::assert_snapshot!(told);
}

#[test]
fn limits_over_periods() {
    let told = told(&[
        ("over     = \"all\"", "over = \"2027-W01\""),
        ("over     = \"all\"", "over = \"every\""),
        ("over     = \"all\"", "over = []"),
        ("over     = \"all\"", "over = [1]"),
        ("over     = \"all\"", "over = [\"2027-W4\"]"),
        ("over     = \"all\"", "over = { each = true }"),
        ("at_least = 60\n", "at_least = [60, 50, 60]\n"),
        ("at_most  = 50", "equals = { per_day = 3 }"),
    ]);
    insta::assert_snapshot!(told);
}
