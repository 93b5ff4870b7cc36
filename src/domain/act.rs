//! Everything a person can do to a record, and which roles may do it.
//!
//! The whole policy is this one table; `tests/house/policy.txt` is its golden copy. What depends on the
//! record (checker is not the doer, approver is not the author) is a rule of the noun, not a role.

use super::role::Role;

/// Who may do an act.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Allowed {
    /// Any signed-in person who holds one of these roles.
    Roles(&'static [Role]),
    /// Any signed-in person, for acts on their own account.
    Anyone,
    /// The program itself: the console account or the clock. Never a person.
    System,
}

macro_rules! acts {
    ($($(#[$doc:meta])* $name:ident, $words:literal, $allowed:expr;)*) => {
        #[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
        pub enum Act { $($(#[$doc])* $name,)* }

        impl Act {
            pub const ALL: &'static [Act] = &[$(Act::$name,)*];

            /// The stable name stored in the trail.
            pub fn code(self) -> &'static str {
                match self { $(Act::$name => stringify!($name),)* }
            }

            /// What was done, in the past tense, as the history says it.
            pub fn words(self) -> &'static str {
                match self { $(Act::$name => $words,)* }
            }

            pub fn allowed(self) -> Allowed {
                use Allowed::*;
                use Role::*;
                match self { $(Act::$name => $allowed,)* }
            }
        }
    };
}

acts! {
    SetUpSite, "set up the site", System;
    ChangeSchema, "changed the schema", System;
    IssueFirstCode, "issued the code for the first administrator", System;
    ReportMisuse, "reported repeated failed passwords", System;
    ChangeSetting, "changed a setting", Roles(&[Administrator]);
    ConfirmClock, "confirmed the clock", Roles(&[Administrator]);

    SignIn, "signed in", Anyone;
    SignOut, "signed out", Anyone;
    SetPasswordByCode, "set a password with a code", Anyone;
    ChangePassword, "changed own password", Anyone;
    EndSession, "ended a session", Anyone;
    CreateAccount, "created an account", Roles(&[Administrator]);
    GrantRoles, "changed the roles of an account", Roles(&[Administrator]);
    DisableAccount, "disabled an account", Roles(&[Administrator]);
    EnableAccount, "enabled an account", Roles(&[Administrator]);
    IssueResetCode, "issued a code to set a password", Roles(&[Administrator]);

    AddCustomer, "added a customer", Roles(&[LabManager, QaReviewer]);
    AddProduct, "added a product", Roles(&[Formulator, LabManager, QaReviewer]);
    AddPresentation, "added a presentation", Roles(&[Formulator, LabManager, QaReviewer]);
    AddMaterial, "added a material", Roles(&[Formulator, LabManager]);
    AddFormulation, "added a formulation", Roles(&[Formulator]);
    DraftFormulationVersion, "wrote a formulation version", Roles(&[Formulator]);
    SignFormulationVersion, "signed a formulation version", Roles(&[Formulator, QaReviewer]);
    AddMethod, "added a method", Roles(&[LabManager]);
    DraftMethodVersion, "wrote a method version", Roles(&[LabManager]);
    ApproveMethodVersion, "approved a method version", Roles(&[LabManager, QaReviewer]);
    DraftSpecificationVersion, "wrote a specification version", Roles(&[LabManager, QaReviewer]);
    ApproveSpecificationVersion, "approved a specification version", Roles(&[QaReviewer]);
    AssignShelfLife, "assigned a shelf life", Roles(&[QaReviewer]);
    AddInstrument, "added an instrument", Roles(&[LabManager]);
    RecordInstrumentEvent, "recorded an instrument event", Roles(&[Analyst, LabManager]);
    QualifyPerson, "qualified a person for a method", Roles(&[LabManager]);
    OverrideStop, "overrode a stop", Roles(&[QaReviewer]);

    ReceiveMaterialLot, "received a material lot", Roles(&[ProductionOperator, LabManager]);
    RecordMaterialAssay, "recorded the assay of a material lot", Roles(&[Analyst, LabManager, QaReviewer]);
    SignMaterialStatus, "signed the status of a material lot", Roles(&[QaReviewer]);
    MoveStock, "moved stock of a material lot", Roles(&[ProductionOperator, LabManager]);
    AddEquipment, "added a piece of equipment", Roles(&[LabManager]);
    RecordEquipmentEvent, "recorded an equipment event", Roles(&[ProductionOperator, LabManager]);
    OpenDeviation, "opened a deviation", Roles(&[ProductionOperator, Analyst, LabManager, QaReviewer]);
    WriteDeviation, "wrote in a deviation", Roles(&[ProductionOperator, Analyst, LabManager, QaReviewer]);
    CloseDeviation, "decided on a deviation", Roles(&[QaReviewer]);

    CountPackaging, "counted containers or labels", Roles(&[ProductionOperator, LabManager]);
    CheckPackaging, "checked a reconciliation", Roles(&[ProductionOperator, LabManager, QaReviewer]);
    KeepRetain, "recorded a retain", Roles(&[ProductionOperator, Analyst, LabManager]);
    RecordRetainEvent, "recorded a retain event", Roles(&[Analyst, LabManager, QaReviewer]);

    StateCompleteness, "stated an item of a lot's record", Roles(&[ProductionOperator, LabManager, QaReviewer]);
    StateRecordElsewhere, "stated where a lot's record is kept", Roles(&[LabManager, QaReviewer]);

    IssueBlankSheet, "gave out a blank sheet", Roles(&[LabManager, QaReviewer]);
    RecordBlankSheet, "accounted for a blank sheet", Roles(&[ProductionOperator, Analyst, LabManager, QaReviewer]);
    SignCertificate, "signed a certificate of analysis", Roles(&[QaReviewer]);

    MakeLot, "recorded a lot", Roles(&[ProductionOperator, LabManager]);
    StartBatchRecord, "started a batch record", Roles(&[ProductionOperator, LabManager]);
    RecordStep, "recorded a step", Roles(&[ProductionOperator, LabManager]);
    CorrectStep, "corrected an entry of a step", Roles(&[ProductionOperator, LabManager]);
    CheckStep, "checked a step", Roles(&[ProductionOperator, LabManager]);
    SkipStep, "skipped a step", Roles(&[ProductionOperator, LabManager]);
    RepeatStep, "repeated a step", Roles(&[ProductionOperator, LabManager]);
    RecordYield, "recorded a yield", Roles(&[ProductionOperator, LabManager]);
    CheckYield, "checked a yield", Roles(&[ProductionOperator, LabManager]);
    CloseBatchRecord, "closed a batch record", Roles(&[ProductionOperator, LabManager]);
    ReopenBatchRecord, "opened a batch record again", Roles(&[QaReviewer]);
    RecordDistribution, "recorded the distribution of a lot", Roles(&[QaReviewer]);
    DecideLot, "decided on a lot", Roles(&[QaReviewer]);
    ReceiveSample, "received a sample", Roles(&[Analyst, LabManager, ProductionOperator]);

    AddCondition, "added a condition", Roles(&[QaReviewer]);
    AddChamber, "added a chamber", Roles(&[LabManager]);
    DraftProtocolVersion, "wrote a protocol version", Roles(&[LabManager]);
    ApproveProtocolVersion, "approved a protocol version", Roles(&[LabManager, QaReviewer]);
    StartStudy, "started a study", Roles(&[LabManager]);
    AmendStudy, "amended a study", Roles(&[LabManager]);
    TriggerArm, "triggered a contingent arm", Roles(&[LabManager, QaReviewer]);
    RecordContainer, "recorded a container", Roles(&[Analyst, LabManager]);
    SetWorkingDays, "stated closed days and bench time", Roles(&[LabManager]);
    AssignPull, "assigned a pull", Roles(&[LabManager]);
    RecordPull, "took a pull", Roles(&[Analyst, LabManager]);
    MissPull, "recorded a pull as missed", Roles(&[LabManager]);
    CancelPull, "cancelled a pull", Roles(&[QaReviewer]);

    CloseStage, "closed a stage", Roles(&[Analyst]);
    RecordReadings, "recorded readings", Roles(&[Analyst]);
    CorrectReading, "corrected a reading", Roles(&[Analyst]);
    CompleteTest, "completed a test", Roles(&[Analyst]);
    AttachFile, "attached a file", Roles(&[Formulator, ProductionOperator, Analyst, LabManager, QaReviewer]);
    MarkPhoto, "measured a photo", Roles(&[Analyst, LabManager, QaReviewer]);
    RecordInvestigationEntry, "wrote in an investigation", Roles(&[Analyst, LabManager, QaReviewer]);
    ConcludeInvestigation, "concluded an investigation", Roles(&[QaReviewer]);

    CheckResult, "checked a result", Roles(&[Analyst, LabManager]);
    SendBackResult, "sent a result back", Roles(&[Analyst, LabManager, QaReviewer]);
    AnswerException, "answered an exception", Roles(&[QaReviewer]);
    DecideReview, "decided on a pull", Roles(&[QaReviewer]);
    SignPulls, "signed pulls", Roles(&[QaReviewer]);

    DeclareAlike, "declared versions one history", Roles(&[QaReviewer]);
    LeaveOutOfTrend, "decided on a result in the history", Roles(&[QaReviewer]);
    SealForecast, "sealed forecasts", System;
    StartRack, "put up a rack", Roles(&[Formulator]);
    PutOnRack, "put a lot on a rack", Roles(&[Formulator]);
    ConcludeEvaluation, "concluded an evaluation", Roles(&[LabManager, QaReviewer]);

    ExportLotFile, "exported a lot file", Roles(&[Formulator, LabManager, QaReviewer, Auditor]);
    ImportResults, "imported results", Roles(&[LabManager]);
}

impl Act {
    /// The role among `roles` that permits this act, the one to be stored with it.
    pub fn role_for(self, roles: &[Role]) -> Option<Role> {
        match self.allowed() {
            Allowed::Roles(allowed) => allowed.iter().copied().find(|role| roles.contains(role)),
            Allowed::Anyone => roles.first().copied(),
            Allowed::System => None,
        }
    }

    /// The roles that may do this act, in words, for the page that refuses it.
    pub fn who_may(self) -> String {
        match self.allowed() {
            Allowed::Roles(roles) => roles.iter().map(|role| role.code()).collect::<Vec<_>>().join(", "),
            Allowed::Anyone => "any signed-in person".to_string(),
            Allowed::System => "the program itself".to_string(),
        }
    }

    pub fn from_code(code: &str) -> Option<Act> {
        Act::ALL.iter().copied().find(|act| act.code() == code)
    }
}

/// The role × act matrix as text: one line per act, `x` where the role may do it.
pub fn matrix() -> String {
    let mut text = String::new();
    let heads: Vec<&str> = Role::ALL.iter().map(|role| role.code()).collect();
    text.push_str(&format!("{:<28} {}\n", "act", heads.join(" | ")));
    for act in Act::ALL {
        let cells: Vec<String> = Role::ALL
            .iter()
            .map(|role| {
                let mark = if act.role_for(&[*role]).is_some() { "x" } else { "." };
                format!("{mark:^width$}", width = role.code().len())
            })
            .collect();
        text.push_str(&format!("{:<28} {}\n", act.code(), cells.join(" | ")));
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn auditor_only_exports_and_administrator_touches_no_record() {
        for act in Act::ALL {
            let Allowed::Roles(roles) = act.allowed() else { continue };
            if roles.contains(&Role::Auditor) {
                assert_eq!(*act, Act::ExportLotFile);
            }
            if roles.contains(&Role::Administrator) {
                assert_eq!(roles.len(), 1, "{act:?}");
            }
        }
    }

    #[test]
    fn codes_lead_back_to_their_acts() {
        for act in Act::ALL {
            assert_eq!(Act::from_code(act.code()), Some(*act));
        }
    }
}
