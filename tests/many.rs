//! Many models: a start over current plans solves nothing, and a checkout plans what it changed, once each.

#![expect(clippy::unwrap_used, clippy::panic, reason = "a test that cannot go on has failed")]

#[expect(dead_code, reason = "shared with a measurement of more models")]
#[path = "support/crowd.rs"]
mod crowd;

use crowd::{Crowd, Keeper, aim};

const MODELS: usize = 300;
/// Every so many-th is changed by the checkout.
const EVERY: usize = 5;

#[test]
fn a_start_solves_nothing_and_a_checkout_plans_each_changed_model_once() {
    let crowd = Crowd::new(MODELS, EVERY);
    crowd.plan();
    let outputs = crowd.outputs();
    let mut keeper = Keeper::start(&crowd.root());
    keeper.wait("a word of each", |told| told.len() == MODELS);
    assert_eq!(keeper.solves(), 0, "{:#?}", keeper.told);
    assert!(keeper.told.values().all(|objects| objects.len() == 1 && objects[0]["standing"] == "current"));
    assert_eq!(crowd.outputs(), outputs);

    keeper.told.clear();
    crowd.switch("second");
    keeper.wait("a word of each changed", |told| told.len() == MODELS.div_ceil(EVERY));
    crowd.save_mark();
    keeper.wait("the mark", |told| told.contains_key("mark.model.toml"));
    keeper.told.remove("mark.model.toml");
    for (number, model) in crowd.models.iter().enumerate() {
        let told: Vec<_> = keeper.told.get(model).into_iter().flatten().map(|object| object["aim"].as_f64()).collect();
        let expected = if number % EVERY == 0 { vec![Some(aim(number, true))] } else { vec![] };
        assert_eq!(told, expected, "{model}");
    }
}
