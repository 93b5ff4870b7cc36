//! A method version: how a test is done, what is read, what is reported.

pub mod preset;
pub mod rule;

use rust_decimal::Decimal;
use serde::{Deserialize, Serialize};

/// The kinds of test the bench knows (job.md: five tests, the as-stored sediment, and numeric tests).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum TestKind {
    Appearance,
    AsStoredSediment,
    Redispersibility,
    Ph,
    Viscosity,
    Sedimentation,
    Numeric,
}

impl TestKind {
    pub const ALL: [TestKind; 7] = [
        TestKind::Appearance,
        TestKind::AsStoredSediment,
        TestKind::Redispersibility,
        TestKind::Ph,
        TestKind::Viscosity,
        TestKind::Sedimentation,
        TestKind::Numeric,
    ];

    /// Stored in the table `method`, used in forms.
    pub fn code(self) -> &'static str {
        match self {
            TestKind::Appearance => "appearance",
            TestKind::AsStoredSediment => "as-stored-sediment",
            TestKind::Redispersibility => "redispersibility",
            TestKind::Ph => "ph",
            TestKind::Viscosity => "viscosity",
            TestKind::Sedimentation => "sedimentation",
            TestKind::Numeric => "numeric",
        }
    }

    pub fn words(self) -> &'static str {
        match self {
            TestKind::Appearance => "appearance by grades",
            TestKind::AsStoredSediment => "as-stored sediment",
            TestKind::Redispersibility => "redispersibility",
            TestKind::Ph => "pH",
            TestKind::Viscosity => "viscosity",
            TestKind::Sedimentation => "sedimentation after shaking",
            TestKind::Numeric => "numeric test",
        }
    }

    pub fn from_code(code: &str) -> Option<TestKind> {
        TestKind::ALL.into_iter().find(|kind| kind.code() == code)
    }
}

/// Stages of one container, in this order; passing on closes a stage (decision A4).
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Stage {
    BeforeDisturbance,
    Redispersion,
    AfterRedispersion,
}

impl Stage {
    pub const ALL: [Stage; 3] = [Stage::BeforeDisturbance, Stage::Redispersion, Stage::AfterRedispersion];

    /// As stored in `stage_loss`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            Stage::BeforeDisturbance => "before disturbance",
            Stage::Redispersion => "redispersion",
            Stage::AfterRedispersion => "after redispersion",
        }
    }

    pub fn from_words(words: &str) -> Option<Stage> {
        Stage::ALL.into_iter().find(|stage| stage.words() == words)
    }
}

/// At which level single values stand side by side (decision A6).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Level {
    Reading,
    Preparation,
    Container,
}

/// What becomes of the replicates (decision A6).
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Reportable {
    /// Each container is judged; the one value, where there is one container, is the result.
    EachContainer,
    /// The worst container judges: the highest (counts of inversions) or the lowest value.
    Worst { highest: bool },
    /// The mean, if range and relative standard deviation stay within; beyond, there is no reportable value.
    Mean { range_at_most: Option<Decimal>, rsd_percent_at_most: Option<Decimal> },
}

/// How a value is rounded once, for judging and reporting.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Rounding {
    pub halves: Halves,
    pub to: RoundTo,
}

/// Where a half goes. Away from zero by default; to even where the site names ASTM E29.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Halves {
    AwayFromZero,
    ToEven,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum RoundTo {
    Decimals(u32),
    /// Nearest 10, nearest 100.
    Nearest(u32),
    SignificantFigures(u32),
}

/// The content of a method version.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct MethodContent {
    pub stage: Stage,
    pub unit: String,
    /// Decimals the instrument or scale shows; fewer typed is asked about, more are kept as typed.
    pub reading_decimals: u32,
    pub rounding: Rounding,
    pub replicates: u32,
    pub level: Level,
    pub reportable: Reportable,
    /// Readings outside are impossible and refused.
    pub possible_least: Decimal,
    pub possible_most: Decimal,
    /// Two readings of the same thing differ by no more than this (for soft checks); none stated: no such
    /// check.
    pub repeatability: Option<Decimal>,
    /// A second qualified person checks before QA (decision A8).
    pub needs_check: bool,
    /// A second person reads blind; both values are kept and must agree within this.
    pub second_reader_tolerance: Option<Decimal>,
    /// Limits and earlier values stay hidden until recorded (decision A15).
    pub hides_limits: bool,
    pub is_repeatable_on_container: bool,
    pub containers_needed: u32,
    pub ml_needed: Option<Decimal>,
    pub needs_unopened: bool,
    pub may_share_after: bool,
    pub test_within_days: u32,
    pub hands_on_minutes: u32,
    /// Kinds of instrument a reading names, as in the register: "pH meter", "viscometer", "balance".
    pub instruments: Vec<String>,
    pub settings: Settings,
}

impl MethodContent {
    /// The stage at which a field is read: a part of an appearance may come after the label shake.
    pub fn stage_of(&self, attribute: &Attribute) -> Stage {
        if attribute.is_after_shake { Stage::AfterRedispersion } else { self.stage }
    }

    /// The stages at which the test is read, in order: two for an appearance as stored and after the label shake.
    pub fn stages(&self) -> Vec<Stage> {
        let Settings::Appearance { attributes } = &self.settings else { return vec![self.stage] };
        let mut stages: Vec<Stage> = attributes.iter().map(|attribute| self.stage_of(attribute)).collect();
        stages.sort_unstable();
        stages.dedup();
        if stages.is_empty() { vec![self.stage] } else { stages }
    }
}

impl MethodContent {
    /// A grade by the codes of its attribute and its own.
    pub fn grade_mut(&mut self, attribute: &str, grade: &str) -> Option<&mut Grade> {
        let Settings::Appearance { attributes } = &mut self.settings else { return None };
        let found = attributes.iter_mut().find(|one| one.code == attribute)?;
        found.grades.iter_mut().find(|one| one.code == grade)
    }

    /// This content with the reference photographs of another one, where both have the grade: a form of words has
    /// no place for them.
    pub fn with_photos_of(mut self, before: &MethodContent) -> MethodContent {
        let Settings::Appearance { attributes } = &before.settings else { return self };
        for attribute in attributes {
            for grade in &attribute.grades {
                if let Some(same) = self.grade_mut(&attribute.code, &grade.code) {
                    same.photo.clone_from(&grade.photo);
                }
            }
        }
        self
    }
}

/// What is special to a kind of test.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Settings {
    Appearance {
        attributes: Vec<Attribute>,
    },
    AsStoredSediment,
    Redispersibility {
        cap: u32,
        beat_per_minute: u32,
        inspect_every: u32,
        instruction: String,
    },
    Ph {
        temperature_least_c: Decimal,
        temperature_most_c: Decimal,
        slope_least_percent: Decimal,
        slope_most_percent: Decimal,
    },
    Viscosity {
        spindle: String,
        speed_rpm: Decimal,
        torque_least_percent: Decimal,
        torque_most_percent: Decimal,
        temperature_c: Decimal,
        temperature_tolerance_c: Decimal,
        rest_minutes: u32,
    },
    Sedimentation {
        planned_minutes: Vec<u32>,
        report_at_minute: u32,
        reads: InterfaceRead,
        vessel_ml: Decimal,
    },
    Numeric {
        inputs: Vec<Input>,
        formula: Option<Formula>,
        components: Vec<Component>,
        has_total: bool,
    },
}

impl Settings {
    pub fn kind(&self) -> TestKind {
        match self {
            Settings::Appearance { .. } => TestKind::Appearance,
            Settings::AsStoredSediment => TestKind::AsStoredSediment,
            Settings::Redispersibility { .. } => TestKind::Redispersibility,
            Settings::Ph { .. } => TestKind::Ph,
            Settings::Viscosity { .. } => TestKind::Viscosity,
            Settings::Sedimentation { .. } => TestKind::Sedimentation,
            Settings::Numeric { .. } => TestKind::Numeric,
        }
    }
}

/// Which boundary a cylinder reading follows (decision A14).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum InterfaceRead {
    FallingBoundary,
    RisingBed,
    Both,
}

/// One attribute of an appearance, with its grades in order.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Attribute {
    /// Short name used as the reading's field: `clarity`, `caking`, `colour`.
    pub code: String,
    pub title: String,
    /// Graded after the label shake; the others are graded at the method's own stage (decision A4).
    #[serde(default, skip_serializing_if = "is_false")]
    pub is_after_shake: bool,
    pub grades: Vec<Grade>,
}

/// Left out of the document, so that versions from before the field stay the same text.
fn is_false(value: &bool) -> bool {
    !*value
}

/// A grade with the sentence that anchors it.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Grade {
    pub code: String,
    pub word: String,
    pub anchor: String,
    /// SHA-256 of its reference photograph, so that the version's signature covers the picture (decision A15).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub photo: Option<String>,
}

/// A typed input of a numeric test, such as the sample weight.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Input {
    /// The name used in the formula and as the reading's field.
    pub code: String,
    pub label: String,
    pub unit: String,
    pub decimals: u32,
}

/// A formula in exact decimals with its worked example; approved only when the example reproduces.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Formula {
    /// `+ - * / ( )`, numbers and input codes.
    pub expression: String,
    /// Input code and value, in the order of the inputs.
    pub example_inputs: Vec<(String, Decimal)>,
    pub example_result: Decimal,
}

/// One component of a multi-component result.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Component {
    /// Field and limit key: a name, or `unspecified`.
    pub code: String,
    pub title: String,
    /// Unspecified components are named by relative retention time when they are read.
    pub is_unspecified: bool,
    /// Below it a component is reported as "<threshold" and left out of the total.
    pub reporting_threshold: Option<Decimal>,
}
