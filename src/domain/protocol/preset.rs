//! What a new protocol starts from: the usual arms of its programme, every test at every age.

use super::super::age::Age;
use super::rules::ConditionFact;
use super::{Arm, LimitsDo, Orientation, PlannedAge, PlannedTest, Programme, generator};

/// The usual arms of a programme, over the catalogue's conditions; a condition that is not there is left out.
///
/// Primary and development: 25/60 to 36 months, contingent 30/65, 40/75, each upright and inverted. Commitment
/// and ongoing: 25/60 inverted alone (requirement C11: the worst orientation, to be stated). Common practice.
pub fn arms(programme: Programme, conditions: &[ConditionFact], tests: &[PlannedTest]) -> Vec<Arm> {
    use Orientation::{Inverted, Upright};
    let codes: Vec<String> = tests.iter().map(|test| test.test.clone()).collect();
    let arm = |code: &str, orientation: Orientation, ages: Vec<Age>| {
        let condition = conditions.iter().find(|condition| condition.code == code)?;
        Some(Arm {
            condition: condition.id,
            orientation,
            limits_do: LimitsDo::OutOfSpecification,
            is_labelled_condition: code == "25/60",
            is_contingent: false,
            ages: ages.into_iter().map(|age| planned(age, &codes)).collect(),
        })
    };
    let long_term = |orientation| arm("25/60", orientation, generator::long_term(36));
    if matches!(programme, Programme::Commitment | Programme::Ongoing) {
        return long_term(Inverted).into_iter().collect();
    }
    let mut arms = Vec::new();
    for orientation in [Upright, Inverted] {
        arms.extend(long_term(orientation));
        let intermediate = arm("30/65", orientation, generator::intermediate());
        arms.extend(intermediate.map(|arm| Arm { is_contingent: true, ..arm }));
        let accelerated = arm("40/75", orientation, generator::accelerated());
        arms.extend(accelerated.map(|arm| Arm { limits_do: LimitsDo::SignificantChange, ..arm }));
    }
    arms
}

/// An age with every test, in the site's default window.
pub fn planned(age: Age, tests: &[String]) -> PlannedAge {
    PlannedAge { age, tests: tests.to_vec(), window: None }
}
