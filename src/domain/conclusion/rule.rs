//! What a conclusion must be before it is signed.

use super::cap::NoLeaf;
use crate::domain::refusal::NamedReason;

/// What is known when a conclusion is about to be signed.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Facts {
    pub is_imported: bool,
    /// The labelled condition, or a long-term one.
    pub is_long_term: bool,
    /// Lots chosen, and the lots of development studies where the condition has no other.
    pub chosen: usize,
    pub development: Vec<String>,
    /// Lots left out without a reason: number of the record and of the lot.
    pub without_reason: Vec<(i64, String)>,
    /// Tests with a shelf-life limit that cannot be evaluated, with what they need.
    pub not_evaluable: Vec<(String, String)>,
    /// Results of the chosen lots that QA has not signed.
    pub unsigned: usize,
    /// The answer about the accelerated condition that the data suggest, if any, and whether the one given has words.
    pub suggested_accelerated: Option<&'static str>,
    pub accelerated: String,
    pub accelerated_why: String,
    pub suggested_intermediate: Option<&'static str>,
    pub intermediate: String,
    pub intermediate_why: String,
    pub is_little_change: bool,
    pub little_change_why: String,
    pub has_supporting_data: bool,
    pub supporting_why: String,
    pub no_leaf: Option<NoLeaf>,
    /// The most that may be proposed, and what binds.
    pub most_months: u64,
    pub binds: String,
    pub covered_months: f64,
    pub proposed_months: u32,
    pub physical_why: String,
}

/// Words shorter than this explain nothing.
const SHORTEST_WORDS: usize = 10;

#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum ConclusionRefusal {
    #[error(
        "These results were imported, not observed here. They can be read and computed; no signed \
         conclusion rests on them."
    )]
    ImportedBarred,
    #[error("A shelf life rests on long-term data. Conclude from the labelled condition.")]
    NotLongTerm,
    #[error("No lot is chosen. Choose at least one.")]
    NoLotChosen,
    #[error(
        "{0} is a development lot. Development lots take no part in an official evaluation; leave it \
         out."
    )]
    DevelopmentBarred(String),
    #[error(
        "Lot {1} is left out without a reason. Say why in at least {SHORTEST_WORDS} characters, or \
         choose it."
    )]
    LotWithoutReason(i64, String),
    #[error(
        "{test} cannot be evaluated: {needs}. A conclusion speaks for every test that has a \
         shelf-life limit."
    )]
    TestNotEvaluable { test: String, needs: String },
    #[error(
        "{0} results of the chosen lots are not signed by QA yet. A conclusion rests on signed \
         results only."
    )]
    ResultsNotSigned(usize),
    #[error(
        "The data suggest another answer for the accelerated condition. Say why yours holds, in at \
         least {SHORTEST_WORDS} characters."
    )]
    AcceleratedUnexplained,
    #[error(
        "The data suggest another answer for the intermediate condition. Say why yours holds, in at \
         least {SHORTEST_WORDS} characters."
    )]
    IntermediateUnexplained,
    #[error(
        "“Little or no change” is your judgement: say what you saw, in at least {SHORTEST_WORDS} \
         characters."
    )]
    LittleChangeUnexplained,
    #[error("Name the supporting data, in at least {SHORTEST_WORDS} characters.")]
    SupportUnexplained,
    #[error(
        "A significant change at the accelerated condition asks for the intermediate condition: \
         answer what it shows."
    )]
    IntermediateNotAnswered,
    #[error(
        "With some change and without supporting data nothing beyond the long-term data is proposed. \
         Answer again."
    )]
    NothingBeyondData,
    #[error("Some questions about storage and conditions have no answer yet. Answer them all.")]
    QuestionsOpen,
    #[error("{proposed} months are more than may be proposed: at most {most}. {binds}")]
    ProposalTooLong { proposed: u32, most: u64, binds: String },
    #[error(
        "{proposed} months reach beyond the {covered} months of data. Physical attributes (caking, \
         redispersion, viscosity) need a written reason for that, in at least {SHORTEST_WORDS} characters."
    )]
    PhysicalUnjustified { proposed: u32, covered: String },
}

impl NamedReason for ConclusionRefusal {
    fn field(&self) -> Option<String> {
        use ConclusionRefusal::*;
        let name = match self {
            ProposalTooLong { .. } => "months",
            PhysicalUnjustified { .. } => "physical_why",
            _ => return None,
        };
        Some(name.to_string())
    }
}

fn explains(words: &str) -> bool {
    words.trim().chars().count() >= SHORTEST_WORDS
}

/// May this conclusion be signed? Refuses in this order: imported, not long-term, a development lot, no lot, a lot left
/// out without a reason, the answers (accelerated, intermediate, little change, supporting data, no leaf), a test that
/// cannot be evaluated, results not signed, more months than may be proposed (E3), physical attributes beyond the data.
pub fn may_conclude(facts: &Facts) -> Result<(), ConclusionRefusal> {
    lots_stand(facts)?;
    answers_stand(facts)?;
    if let Some((test, needs)) = facts.not_evaluable.first() {
        return Err(ConclusionRefusal::TestNotEvaluable { test: test.clone(), needs: needs.clone() });
    }
    if facts.unsigned > 0 {
        return Err(ConclusionRefusal::ResultsNotSigned(facts.unsigned));
    }
    let proposed = facts.proposed_months;
    if u64::from(proposed) > facts.most_months {
        let binds = facts.binds.clone();
        return Err(ConclusionRefusal::ProposalTooLong { proposed, most: facts.most_months, binds });
    }
    if f64::from(proposed) > facts.covered_months && !explains(&facts.physical_why) {
        let covered = format!("{}", (facts.covered_months * 100.0).round() / 100.0);
        return Err(ConclusionRefusal::PhysicalUnjustified { proposed, covered });
    }
    Ok(())
}

fn lots_stand(facts: &Facts) -> Result<(), ConclusionRefusal> {
    if facts.is_imported {
        return Err(ConclusionRefusal::ImportedBarred);
    }
    if !facts.is_long_term {
        return Err(ConclusionRefusal::NotLongTerm);
    }
    if let Some(lot) = facts.development.first() {
        return Err(ConclusionRefusal::DevelopmentBarred(lot.clone()));
    }
    if facts.chosen == 0 {
        return Err(ConclusionRefusal::NoLotChosen);
    }
    match facts.without_reason.first() {
        Some((id, lot)) => Err(ConclusionRefusal::LotWithoutReason(*id, lot.clone())),
        None => Ok(()),
    }
}

fn answers_stand(facts: &Facts) -> Result<(), ConclusionRefusal> {
    let differs =
        |suggested: Option<&str>, given: &str| suggested.is_some_and(|suggested| suggested != given);
    if differs(facts.suggested_accelerated, &facts.accelerated) && !explains(&facts.accelerated_why) {
        return Err(ConclusionRefusal::AcceleratedUnexplained);
    }
    if differs(facts.suggested_intermediate, &facts.intermediate) && !explains(&facts.intermediate_why) {
        return Err(ConclusionRefusal::IntermediateUnexplained);
    }
    if facts.is_little_change && !explains(&facts.little_change_why) {
        return Err(ConclusionRefusal::LittleChangeUnexplained);
    }
    if facts.has_supporting_data && !explains(&facts.supporting_why) {
        return Err(ConclusionRefusal::SupportUnexplained);
    }
    match facts.no_leaf {
        Some(NoLeaf::IntermediateNotTested) => Err(ConclusionRefusal::IntermediateNotAnswered),
        Some(NoLeaf::NoSupportingData) => Err(ConclusionRefusal::NothingBeyondData),
        Some(NoLeaf::Unanswered) => Err(ConclusionRefusal::QuestionsOpen),
        None => Ok(()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn good() -> Facts {
        Facts {
            is_long_term: true,
            chosen: 3,
            suggested_accelerated: Some("none"),
            accelerated: "none".to_string(),
            suggested_intermediate: Some("not-tested"),
            intermediate: "not-tested".to_string(),
            is_little_change: true,
            little_change_why: "flat within the method's spread".to_string(),
            has_supporting_data: true,
            supporting_why: "three pilot lots of 24 months".to_string(),
            most_months: 24,
            binds: "The cap binds.".to_string(),
            covered_months: 12.0,
            proposed_months: 24,
            physical_why: "two older lots stand at 36 months".to_string(),
            ..Facts::default()
        }
    }

    /// The reasons in their order: each case has everything that follows wrong too.
    #[test]
    fn req_e3_refusals_come_in_the_documented_order() {
        assert_eq!(may_conclude(&good()), Ok(()));
        let none = String::new;
        let table: Vec<(&str, Facts)> = vec![
            ("Imported", Facts { is_imported: true, is_long_term: false, ..good() }),
            ("NotLongTerm", Facts { is_long_term: false, chosen: 0, ..good() }),
            ("DevelopmentBarred", Facts { development: vec!["D".to_string()], chosen: 0, ..good() }),
            ("NoLotChosen", Facts { chosen: 0, accelerated: none(), ..good() }),
            ("LotWithoutReason", Facts { without_reason: vec![(7, "A".to_string())], ..good() }),
            (
                "AcceleratedUnexplained",
                Facts { accelerated: "after-3-months".to_string(), unsigned: 1, ..good() },
            ),
            ("IntermediateUnexplained", Facts { intermediate: "none".to_string(), unsigned: 1, ..good() }),
            ("LittleChangeUnexplained", Facts { little_change_why: none(), unsigned: 1, ..good() }),
            ("SupportUnexplained", Facts { supporting_why: "yes".to_string(), unsigned: 1, ..good() }),
            ("IntermediateNotAnswered", Facts { no_leaf: Some(NoLeaf::IntermediateNotTested), ..good() }),
            ("NothingBeyondData", Facts { no_leaf: Some(NoLeaf::NoSupportingData), ..good() }),
            ("QuestionsOpen", Facts { no_leaf: Some(NoLeaf::Unanswered), unsigned: 2, ..good() }),
            (
                "TestNotEvaluable",
                Facts {
                    not_evaluable: vec![("pH".to_string(), "needs one more age".to_string())],
                    unsigned: 1,
                    ..good()
                },
            ),
            ("ResultsNotSigned", Facts { unsigned: 1, proposed_months: 99, ..good() }),
            ("ProposalTooLong", Facts { proposed_months: 25, physical_why: none(), ..good() }),
            ("PhysicalUnjustified", Facts { physical_why: none(), ..good() }),
        ];
        for (name, facts) in table {
            let refused = may_conclude(&facts).unwrap_err();
            assert!(format!("{refused:?}").starts_with(name), "{name}: {refused:?}");
        }
        let within = Facts { proposed_months: 12, physical_why: none(), ..good() };
        assert_eq!(may_conclude(&within), Ok(()));
    }
}
