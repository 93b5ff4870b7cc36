//! Why something is not done in a step: one sentence a person can act on for each reason.

use crate::domain::refusal::NamedReason;

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum StepRefusal {
    #[error("The record {0} is closed. QA can open it again, with a reason, until the lot is decided on.")]
    RecordClosed(String),
    #[error("The lot is {0}, so nothing is added to its record.")]
    LotDecided(String),
    #[error("{step} opens when {before} is done. Finish that first, or skip it as the record allows.")]
    StepNotOpen { step: String, before: String },
    #[error("{step} opens when the yield of “{phase}” is recorded. Record that first.")]
    YieldNotRecorded { step: String, phase: String },
    #[error("{0} has been started. Go on from where it stands.")]
    StepStarted(String),
    #[error("{0} has not been started. Start it first.")]
    StepNotStarted(String),
    #[error("{0} has ended. A value of it is corrected, with a reason.")]
    StepEnded(String),
    #[error("{0} is done. It is repeated only as the record allows, or under a signed deviation.")]
    StepDone(String),
    #[error("{0} was skipped.")]
    StepSkipped(String),
    #[error("You checked {0}, so you do no part of it. Another person goes on.")]
    CheckerDoes(String, i64),
    #[error("{0} weighs nothing.")]
    NothingToWeigh(String),
    #[error("Choose the {0} it is done in.")]
    EquipmentMissing(String),
    #[error("{code} is a {is}, and the step asks for a {wanted}. Choose one of these.")]
    EquipmentOfOtherClass { code: String, is: String, wanted: String },
    #[error("There is no material lot “{0}”. Scan its label again, or type the number on it.")]
    MaterialLotUnknown(String),
    #[error("Choose the balance it was weighed on.")]
    BalanceMissing,
    #[error("{code} is a {is}. A weighing is made on a balance.")]
    NotABalance { code: String, is: String },
    #[error("{number} has no assay on record, and this amount is corrected for it. Have it recorded first.")]
    AssayMissing { number: String },
    #[error(
        "{weighed} is above {limit}. Take out what is too much and weigh again. If it cannot be taken out, say what \
         happened: that opens a deviation."
    )]
    WeightAboveLimit { weighed: String, limit: String },
    #[error("Weighed so far is {weighed}, and {limit} is asked for. Weigh the rest, or say what happened.")]
    WeightBelowLimit { weighed: String, limit: String },
    #[error(
        "Nothing of {0} is weighed yet. Weigh it; if it is not to go in, the step is skipped under a deviation."
    )]
    NothingWeighed(String),
    #[error("{0} is recorded. To change it, correct it with a reason.")]
    ValueRecorded(String),
    #[error("These are not recorded yet: {0}.")]
    ValuesMissing(String),
    #[error("These lie outside their limits and no deviation answers them yet: {0}.")]
    OutsideUnanswered(String),
    #[error(
        "It has run {minutes} min of at least {least}. Wait, or say what happened: that opens a deviation."
    )]
    TooEarly { minutes: i64, least: u32 },
    #[error(
        "It has run {minutes} min and may run at most {most}. Say what happened: that opens a deviation."
    )]
    TooLate { minutes: i64, most: u32 },
    #[error("The line stands still. Record that it runs again first.")]
    LineStands,
    #[error("The line runs. Only a running line stops, and only one that stands runs again.")]
    LineRuns,
    #[error("Confirm that the agitation is on before filling starts.")]
    AgitationOff,
    #[error("{0} is not checked: it is not finished, or no check is asked for.")]
    NothingToCheck(String),
    #[error("You did a part of {0}. Another person checks it.")]
    CheckerIsDoer(String, Vec<i64>),
    #[error("This step is weighed a second time in blind. Weigh first; then check.")]
    SecondWeighingMissing,
    #[error("The record does not let {0} be skipped. Name a deviation that QA has signed to go on under.")]
    SkipNeedsDeviation(String),
    #[error("The record does not let {0} be repeated. Name a deviation that QA has signed to go on under.")]
    RepeatNeedsDeviation(String),
    #[error("{0} is not done yet, so there is nothing to repeat. Finish it first.")]
    NothingToRepeat(String),
    #[error("Deviation {0} is not signed by QA to go on under, or belongs to another lot.")]
    DeviationNotSigned(i64),
    #[error(
        "Nothing lies outside its limits, so nothing needs words here. Leave the box empty, or write a note."
    )]
    NothingOutside,
    #[error("An earlier time lies after the start of the record and not after now.")]
    TimeNotPossible,
    #[error("Say why it is entered late, in at least ten characters.")]
    LateReasonMissing,
    #[error("This entry was corrected already. Correct the newest one.")]
    EntrySuperseded,
    #[error("Only weighings, values and notes are corrected. Other entries stand as they are.")]
    EntryNotCorrectable,
    #[error(
        "{0} was recorded by another person. Who recorded it corrects it, or who has not checked the step."
    )]
    CorrectedByChecker(String, i64),
    #[error("These are not done: {0}.")]
    StepsOpen(String),
    #[error("These phases have no yield that a second person has checked: {0}.")]
    YieldsOpen(String),
    #[error("The record is open already.")]
    RecordOpen,
}

impl NamedReason for StepRefusal {
    fn field(&self) -> Option<String> {
        use StepRefusal::*;
        let name = match self {
            EquipmentMissing(_) | EquipmentOfOtherClass { .. } => "equipment",
            MaterialLotUnknown(_) | AssayMissing { .. } => "material_lot",
            BalanceMissing | NotABalance { .. } => "balance",
            WeightAboveLimit { .. } => "net",
            WeightBelowLimit { .. } | TooEarly { .. } | TooLate { .. } | NothingOutside => "end_deviation",
            AgitationOff => "agitation",
            SkipNeedsDeviation(_) => "skip_deviation",
            RepeatNeedsDeviation(_) => "repeat_deviation",
            _ => return None,
        };
        Some(name.to_string())
    }

    fn took_part(&self) -> Option<Vec<i64>> {
        match self {
            StepRefusal::CheckerIsDoer(_, doers) => Some(doers.clone()),
            StepRefusal::CheckerDoes(_, account) | StepRefusal::CorrectedByChecker(_, account) => {
                Some(vec![*account])
            }
            _ => None,
        }
    }

    fn is_noted(&self) -> bool {
        use StepRefusal::*;
        matches!(
            self,
            RecordClosed(_)
                | LotDecided(_)
                | StepNotOpen { .. }
                | YieldNotRecorded { .. }
                | MaterialLotUnknown(_)
                | WeightAboveLimit { .. }
                | TooEarly { .. }
                | TooLate { .. }
                | SkipNeedsDeviation(_)
                | RepeatNeedsDeviation(_)
        )
    }
}
