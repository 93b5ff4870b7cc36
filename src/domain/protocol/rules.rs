//! What a protocol must hold before it is signed: every fault by name, in a fixed order.

use super::super::condition::Use;
use super::super::refusal::NamedReason;
use super::{Arm, LimitsDo, Orientation, Programme, ProtocolContent};

/// What is known of the things a protocol names.
#[derive(Clone, Debug, Default)]
pub struct ProtocolFacts {
    pub conditions: Vec<ConditionFact>,
    /// Method versions that are approved.
    pub approved_methods: Vec<i64>,
    pub is_specification_approved: bool,
    pub is_specification_of_presentation: bool,
    /// Tests that have a row in the bound specification.
    pub tests_with_limits: Vec<String>,
}

#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ConditionFact {
    pub id: i64,
    pub code: String,
    pub name: String,
    pub used_for: Use,
}

#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum ProtocolRefusal {
    #[error("The protocol has no arm. Add a condition with its ages.")]
    NoArms,
    #[error("The protocol has no test. Add at least one.")]
    NoTests,
    #[error("The specification version is not approved. A protocol binds an approved one.")]
    SpecificationNotApproved,
    #[error("The specification belongs to another presentation. Bind one of this presentation.")]
    SpecificationOfOtherPresentation,
    #[error("{0}: its method version is not approved. Bind an approved one.")]
    MethodNotApproved(String),
    #[error(
        "{0} has no limit in the bound specification. Add the limit there, or mark the test as information."
    )]
    TestWithoutLimit(String),
    #[error("{0} stands twice. Keep one arm for each condition and orientation.")]
    ArmDoubled(String),
    #[error("{0} has no ages. Add them, or take the arm away.")]
    ArmWithoutAges(String),
    #[error("{arm} names the test {test}, which the protocol does not plan.")]
    TestNotPlanned { arm: String, test: String },
    #[error("{arm}, {age}: no test is ticked. Tick at least one, or take the age away.")]
    AgeWithoutTests { arm: String, age: String },
    #[error("{0} is accelerated and has fewer than 3 ages. It needs 0, 3 and 6 months.")]
    TooFewAccelerated(String),
    #[error("{0} is intermediate and has fewer than 4 ages. It needs 0, 6, 9 and 12 months.")]
    TooFewIntermediate(String),
    #[error(
        "A primary study of a suspension keeps containers upright and inverted or horizontal. {0} has only one of them."
    )]
    OrientationMissing(String),
    #[error("A routine study in one orientation says which was the worst and why. Fill that in.")]
    WorstOrientationNotStated,
    #[error("Long-term 25/60 without a contingent 30/65 arm needs a reason. Add the arm, or state why not.")]
    IntermediateMissing,
    #[error("Long-term {0} has no intermediate condition. Take the contingent arm away.")]
    IntermediateNotAsked(String),
    #[error("{0}: the last age is never taken early. Set its days before to 0.")]
    LastPointEarly(String),
}

impl NamedReason for ProtocolRefusal {}

/// Every fault of a protocol, in the order of [`ProtocolRefusal`]; empty when it may be signed.
pub fn faults(content: &ProtocolContent, facts: &ProtocolFacts) -> Vec<ProtocolRefusal> {
    let mut found = Vec::new();
    if content.arms.is_empty() {
        found.push(ProtocolRefusal::NoArms);
    }
    if content.tests.is_empty() {
        found.push(ProtocolRefusal::NoTests);
    }
    if !facts.is_specification_approved {
        found.push(ProtocolRefusal::SpecificationNotApproved);
    }
    if !facts.is_specification_of_presentation {
        found.push(ProtocolRefusal::SpecificationOfOtherPresentation);
    }
    test_faults(content, facts, &mut found);
    arm_faults(content, facts, &mut found);
    age_faults(content, facts, &mut found);
    orientation_faults(content, facts, &mut found);
    intermediate_faults(content, facts, &mut found);
    for arm in &content.arms {
        let is_early = arm.ages.last().and_then(|age| age.window).is_some_and(|(before, _)| before > 0);
        if is_early {
            found.push(ProtocolRefusal::LastPointEarly(arm_words(arm, facts)));
        }
    }
    found
}

/// The first fault refuses.
pub fn may_be_signed(content: &ProtocolContent, facts: &ProtocolFacts) -> Result<(), ProtocolRefusal> {
    faults(content, facts).into_iter().next().map_or(Ok(()), Err)
}

/// `25 °C/60 % RH, upright`.
pub fn arm_words(arm: &Arm, facts: &ProtocolFacts) -> String {
    let condition = fact(arm, facts).map_or("a condition", |condition| condition.name.as_str());
    format!("{condition}, {}", arm.orientation.words())
}

fn fact<'a>(arm: &Arm, facts: &'a ProtocolFacts) -> Option<&'a ConditionFact> {
    facts.conditions.iter().find(|condition| condition.id == arm.condition)
}

fn test_faults(content: &ProtocolContent, facts: &ProtocolFacts, found: &mut Vec<ProtocolRefusal>) {
    for test in &content.tests {
        if !facts.approved_methods.contains(&test.method_version) {
            found.push(ProtocolRefusal::MethodNotApproved(test.title.clone()));
        }
    }
    for test in &content.tests {
        if !test.is_information && !facts.tests_with_limits.contains(&test.test) {
            found.push(ProtocolRefusal::TestWithoutLimit(test.title.clone()));
        }
    }
}

fn arm_faults(content: &ProtocolContent, facts: &ProtocolFacts, found: &mut Vec<ProtocolRefusal>) {
    for (place, arm) in content.arms.iter().enumerate() {
        let is_same = |other: &Arm| {
            (other.condition, other.orientation, other.limits_do)
                == (arm.condition, arm.orientation, arm.limits_do)
        };
        if content.arms[..place].iter().any(is_same) {
            found.push(ProtocolRefusal::ArmDoubled(arm_words(arm, facts)));
        }
    }
    for arm in content.arms.iter().filter(|arm| arm.ages.is_empty()) {
        found.push(ProtocolRefusal::ArmWithoutAges(arm_words(arm, facts)));
    }
}

fn age_faults(content: &ProtocolContent, facts: &ProtocolFacts, found: &mut Vec<ProtocolRefusal>) {
    for arm in &content.arms {
        for planned in &arm.ages {
            for test in &planned.tests {
                if !content.tests.iter().any(|known| known.test == *test) {
                    let (arm, test) = (arm_words(arm, facts), test.clone());
                    found.push(ProtocolRefusal::TestNotPlanned { arm, test });
                }
            }
            if planned.tests.is_empty() {
                let (arm, age) = (arm_words(arm, facts), planned.age.words());
                found.push(ProtocolRefusal::AgeWithoutTests { arm, age });
            }
        }
    }
    for arm in content.arms.iter().filter(|arm| !arm.ages.is_empty()) {
        let used_for = fact(arm, facts).map(|condition| condition.used_for);
        if used_for == Some(Use::Accelerated) && arm.ages.len() < 3 {
            found.push(ProtocolRefusal::TooFewAccelerated(arm_words(arm, facts)));
        }
        let is_intermediate = used_for == Some(Use::Intermediate) || arm.is_contingent;
        if is_intermediate && arm.ages.len() < 4 {
            found.push(ProtocolRefusal::TooFewIntermediate(arm_words(arm, facts)));
        }
    }
}

/// Requirement C11. In-use arms are handled by the user, so they stand as the user keeps them.
fn orientation_faults(content: &ProtocolContent, facts: &ProtocolFacts, found: &mut Vec<ProtocolRefusal>) {
    let kept: Vec<&Arm> = content.arms.iter().filter(|arm| arm.limits_do != LimitsDo::InUse).collect();
    if content.programme == Programme::Primary {
        let mut seen = Vec::new();
        for arm in kept {
            if seen.contains(&arm.condition) {
                continue;
            }
            seen.push(arm.condition);
            let stands = |orientation| {
                let is_it =
                    |other: &Arm| other.condition == arm.condition && other.orientation == orientation;
                content.arms.iter().any(is_it)
            };
            let is_whole = stands(Orientation::Upright)
                && (stands(Orientation::Inverted) || stands(Orientation::Horizontal));
            if !is_whole {
                let name = fact(arm, facts).map_or("A condition".to_string(), |found| found.name.clone());
                found.push(ProtocolRefusal::OrientationMissing(name));
            }
        }
        return;
    }
    let is_routine = matches!(content.programme, Programme::Ongoing | Programme::Commitment);
    let has_one = kept.windows(2).all(|pair| pair[0].orientation == pair[1].orientation);
    if is_routine && has_one && !kept.is_empty() && content.worst_orientation.is_none() {
        found.push(ProtocolRefusal::WorstOrientationNotStated);
    }
}

/// Decision A16 and requirement A2.
fn intermediate_faults(content: &ProtocolContent, facts: &ProtocolFacts, found: &mut Vec<ProtocolRefusal>) {
    let code = |arm: &Arm| fact(arm, facts).map_or("", |condition| condition.code.as_str()).to_string();
    let has_intermediate = content.arms.iter().any(|arm| arm.is_contingent && code(arm) == "30/65");
    let is_long_term = |arm: &&Arm| !arm.is_contingent && arm.limits_do != LimitsDo::InUse;
    let long_term: Vec<String> = content.arms.iter().filter(is_long_term).map(code).collect();
    if long_term.iter().any(|code| code == "25/60")
        && !has_intermediate
        && content.why_no_intermediate.is_none()
    {
        found.push(ProtocolRefusal::IntermediateMissing);
    }
    let alone = long_term.iter().find(|code| ["30/65", "30/35", "30/75"].contains(&code.as_str()));
    if let Some(code) = alone.filter(|_| content.arms.iter().any(|arm| arm.is_contingent)) {
        found.push(ProtocolRefusal::IntermediateNotAsked(code.clone()));
    }
}

#[cfg(test)]
mod tests {
    use super::super::{PlannedAge, PlannedTest, generator};
    use super::*;
    use crate::domain::age::Age;

    const CONDITIONS: [(i64, &str, Use); 4] = [
        (1, "25/60", Use::LongTerm),
        (2, "30/65", Use::LongTermOrIntermediate),
        (3, "40/75", Use::Accelerated),
        (4, "30/75", Use::LongTerm),
    ];

    fn facts() -> ProtocolFacts {
        let conditions = CONDITIONS.map(|(id, code, used_for)| ConditionFact {
            id,
            code: code.to_string(),
            name: code.to_string(),
            used_for,
        });
        ProtocolFacts {
            conditions: conditions.to_vec(),
            approved_methods: vec![11],
            is_specification_approved: true,
            is_specification_of_presentation: true,
            tests_with_limits: vec!["ph".to_string()],
        }
    }

    fn arm(condition: i64, orientation: Orientation, ages: Vec<Age>) -> Arm {
        let planned = |age| PlannedAge { age, tests: vec!["ph".to_string()], window: None };
        Arm {
            condition,
            orientation,
            limits_do: LimitsDo::OutOfSpecification,
            is_labelled_condition: condition == 1,
            is_contingent: false,
            ages: ages.into_iter().map(planned).collect(),
        }
    }

    fn contingent(orientation: Orientation) -> Arm {
        Arm { is_contingent: true, ..arm(2, orientation, generator::intermediate()) }
    }

    fn primary() -> ProtocolContent {
        use Orientation::{Inverted, Upright};
        let mut arms = Vec::new();
        for orientation in [Upright, Inverted] {
            arms.push(arm(1, orientation, generator::long_term(36)));
            arms.push(contingent(orientation));
            arms.push(arm(3, orientation, generator::accelerated()));
        }
        ProtocolContent {
            programme: Programme::Primary,
            specification_version: 5,
            arms,
            tests: vec![PlannedTest {
                test: "ph".to_string(),
                title: "pH".to_string(),
                method_version: 11,
                is_information: false,
            }],
            spare_containers: 2,
            retain_containers: 1,
            follow_through_containers: 0,
            why_no_intermediate: None,
            worst_orientation: None,
            trend_promise_percent: None,
        }
    }

    fn names(content: &ProtocolContent, facts: &ProtocolFacts) -> Vec<String> {
        let name = |fault: &ProtocolRefusal| {
            format!("{fault:?}").chars().take_while(|c| c.is_alphanumeric()).collect::<String>()
        };
        faults(content, facts).iter().map(name).collect()
    }

    fn changed(change: impl FnOnce(&mut ProtocolContent)) -> Vec<String> {
        let mut content = primary();
        change(&mut content);
        names(&content, &facts())
    }

    #[test]
    fn a_whole_primary_protocol_has_no_fault() {
        assert_eq!(faults(&primary(), &facts()), Vec::new());
        assert_eq!(may_be_signed(&primary(), &facts()), Ok(()));
    }

    /// req_A2, req_A19, req_C11, decision A16: each rule by its name.
    #[test]
    fn each_fault_has_its_name() {
        let information = |content: &mut ProtocolContent| {
            content.tests.push(PlannedTest {
                test: "smell".to_string(),
                title: "Smell".to_string(),
                method_version: 11,
                is_information: true,
            });
        };
        assert_eq!(changed(information), Vec::<String>::new());
        assert_eq!(changed(|content| content.arms.clear()), ["NoArms"]);
        assert_eq!(changed(|content| content.tests[0].method_version = 12), ["MethodNotApproved"]);
        let unlimited = |content: &mut ProtocolContent| {
            information(content);
            content.tests[1].is_information = false;
        };
        assert_eq!(changed(unlimited), ["TestWithoutLimit"]);
        assert_eq!(changed(|content| content.arms.push(content.arms[0].clone())), ["ArmDoubled"]);
        assert_eq!(changed(|content| content.arms[0].ages.clear()), ["ArmWithoutAges"]);
        let unplanned = |content: &mut ProtocolContent| content.arms[0].ages[0].tests = vec!["smell".into()];
        assert_eq!(changed(unplanned), ["TestNotPlanned"]);
        assert_eq!(changed(|content| content.arms[0].ages[0].tests.clear()), ["AgeWithoutTests"]);
        assert_eq!(changed(|content| content.arms[2].ages.truncate(2)), ["TooFewAccelerated"]);
        assert_eq!(changed(|content| content.arms[1].ages.truncate(3)), ["TooFewIntermediate"]);
        assert_eq!(changed(|content| content.arms.truncate(5)), ["OrientationMissing"]);
        let early = |content: &mut ProtocolContent| content.arms[0].ages[7].window = Some((2, 7));
        assert_eq!(changed(early), ["LastPointEarly"]);
        assert_eq!(changed(|content| content.arms[0].ages[6].window = Some((2, 7))), Vec::<String>::new());
    }

    #[test]
    fn the_specification_is_approved_and_of_the_presentation() {
        let unbound = ProtocolFacts {
            is_specification_approved: false,
            is_specification_of_presentation: false,
            ..facts()
        };
        let found = names(&primary(), &unbound);
        assert_eq!(found, ["SpecificationNotApproved", "SpecificationOfOtherPresentation"]);
    }

    #[test]
    fn the_intermediate_arm_belongs_to_25_60_and_not_to_30_65() {
        let without = |content: &mut ProtocolContent| content.arms.retain(|arm| !arm.is_contingent);
        assert_eq!(changed(without), ["IntermediateMissing"]);
        let stated = |content: &mut ProtocolContent| {
            without(content);
            content.why_no_intermediate = Some("the pack is impermeable".to_string());
        };
        assert_eq!(changed(stated), Vec::<String>::new());
        let warm = |content: &mut ProtocolContent| {
            without(content);
            for arm in content.arms.iter_mut().filter(|arm| arm.condition == 1) {
                arm.condition = 4;
            }
        };
        assert_eq!(changed(warm), Vec::<String>::new());
        let both = |content: &mut ProtocolContent| {
            for arm in content.arms.iter_mut().filter(|arm| arm.condition == 1) {
                arm.condition = 4;
            }
        };
        assert_eq!(changed(both), ["IntermediateNotAsked"]);
    }

    #[test]
    fn a_routine_study_in_one_orientation_says_which_was_the_worst() {
        let routine = |content: &mut ProtocolContent| {
            content.programme = Programme::Ongoing;
            content.arms.retain(|arm| arm.orientation == Orientation::Inverted);
        };
        assert_eq!(changed(routine), ["WorstOrientationNotStated"]);
        let stated = |content: &mut ProtocolContent| {
            routine(content);
            content.worst_orientation = Some("inverted: the seal is wetted".to_string());
        };
        assert_eq!(changed(stated), Vec::<String>::new());
    }
}
