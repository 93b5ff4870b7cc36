//! What a method must be before it is written down, and before it is signed.

use super::{Attribute, Component, Formula, Input, MethodContent, Reportable, Settings, TestKind};
use crate::domain::formula::{self, FormulaRefusal};
use crate::domain::refusal::NamedReason;

/// Why a method or its content cannot be taken as it is.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum MethodRefusal {
    #[error("The code {0} belongs to another method already. Choose a code of its own.")]
    CodeTaken(String),
    #[error("This content is for another kind of test than the method.")]
    KindDiffers,
    #[error("The least possible reading, {0}, is not below the greatest, {1}. Exchange or correct them.")]
    PossibleRangeEmpty(rust_decimal::Decimal, rust_decimal::Decimal),
    #[error("At least one replicate is read. Write how many.")]
    ReplicatesMissing,
    #[error("{0}: the lower end is not below the upper one. Exchange or correct them.")]
    WindowEmpty(&'static str),
    #[error("An appearance grades at least one attribute. Add one with its grades.")]
    AttributesMissing,
    #[error("This version has no such grade. Choose one of the listed grades.")]
    GradeUnknown,
    #[error("“{0}” has fewer than two grades. Add the grades it is chosen from.")]
    GradesMissing(String),
    #[error("“{0}” stands twice. Each code is used once.")]
    CodeDoubled(String),
    #[error(
        "The code “{0}” is not written in small letters, digits, - or _, beginning with a letter. Rewrite it."
    )]
    CodeUnwritable(String),
    #[error("The minute that is reported, {0}, is not among the planned readings. Add it or report another.")]
    ReportMinuteNotPlanned(u32),
    #[error("A formula needs inputs. Add what is typed at the bench.")]
    InputsMissing,
    #[error("Components are read as values of their own; a formula belongs to a test without components.")]
    FormulaWithComponents,
    #[error("A total needs components. Add them, or take the total away.")]
    TotalWithoutComponents,
    #[error("Appearance is reported per container, not as a mean. Choose another reportable rule.")]
    MeanOfGrades,
    #[error(
        "A mean is reported only while the values agree. State the greatest range or RSD, or report each."
    )]
    MeanWithoutSpread,
    #[error("{0}")]
    Example(FormulaRefusal),
}

impl NamedReason for MethodRefusal {
    fn field(&self) -> Option<String> {
        let name = match self {
            MethodRefusal::CodeTaken(_) => "code",
            MethodRefusal::PossibleRangeEmpty(..) => "possible_least",
            MethodRefusal::ReplicatesMissing => "replicates",
            MethodRefusal::ReportMinuteNotPlanned(_) => "report_at_minute",
            MethodRefusal::TotalWithoutComponents => "has_total",
            MethodRefusal::MeanOfGrades => "reportable",
            MethodRefusal::MeanWithoutSpread => "range_at_most",
            MethodRefusal::FormulaWithComponents | MethodRefusal::InputsMissing => "formula",
            MethodRefusal::Example(refusal) => return refusal.field(),
            _ => return None,
        };
        Some(name.to_string())
    }
}

/// May this content be written for a method of this kind?
///
/// Refuses in this order: kind, possible range, replicates, a mean without a greatest spread (req_O10), then
/// what belongs to the kind. A worked example that does not reproduce yet may be written; see
/// [`may_be_signed`].
pub fn may_be_written(kind: TestKind, content: &MethodContent) -> Result<(), MethodRefusal> {
    if content.settings.kind() != kind {
        return Err(MethodRefusal::KindDiffers);
    }
    let (least, most) = (content.possible_least, content.possible_most);
    if least >= most {
        return Err(MethodRefusal::PossibleRangeEmpty(least, most));
    }
    if content.replicates == 0 {
        return Err(MethodRefusal::ReplicatesMissing);
    }
    let unbounded = Reportable::Mean { range_at_most: None, rsd_percent_at_most: None };
    if content.replicates > 1 && content.reportable == unbounded {
        return Err(MethodRefusal::MeanWithoutSpread);
    }
    settings_hold(content)
}

fn settings_hold(content: &MethodContent) -> Result<(), MethodRefusal> {
    match &content.settings {
        Settings::Appearance { attributes } => {
            if matches!(content.reportable, Reportable::Mean { .. }) {
                return Err(MethodRefusal::MeanOfGrades);
            }
            attributes_hold(attributes)
        }
        Settings::Ph { temperature_least_c, temperature_most_c, slope_least_percent, slope_most_percent } => {
            window("The temperature window", temperature_least_c < temperature_most_c)?;
            window("The slope window", slope_least_percent < slope_most_percent)
        }
        Settings::Viscosity { torque_least_percent, torque_most_percent, .. } => {
            window("The torque window", torque_least_percent < torque_most_percent)
        }
        Settings::Sedimentation { planned_minutes, report_at_minute, .. } => {
            if !planned_minutes.contains(report_at_minute) {
                return Err(MethodRefusal::ReportMinuteNotPlanned(*report_at_minute));
            }
            Ok(())
        }
        Settings::Numeric { inputs, formula, components, has_total } => {
            numeric_holds(inputs, formula.as_ref(), components, *has_total)
        }
        Settings::AsStoredSediment | Settings::Redispersibility { .. } => Ok(()),
    }
}

fn window(what: &'static str, holds: bool) -> Result<(), MethodRefusal> {
    if holds { Ok(()) } else { Err(MethodRefusal::WindowEmpty(what)) }
}

fn attributes_hold(attributes: &[Attribute]) -> Result<(), MethodRefusal> {
    if attributes.is_empty() {
        return Err(MethodRefusal::AttributesMissing);
    }
    codes_hold(attributes.iter().map(|attribute| attribute.code.as_str()))?;
    for attribute in attributes {
        if attribute.grades.len() < 2 {
            return Err(MethodRefusal::GradesMissing(attribute.title.clone()));
        }
        let mut seen: Vec<&str> = Vec::new();
        for grade in &attribute.grades {
            if seen.contains(&grade.code.as_str()) {
                let code = format!("{}, grade {}", attribute.title, grade.code);
                return Err(MethodRefusal::CodeDoubled(code));
            }
            seen.push(&grade.code);
        }
    }
    Ok(())
}

fn numeric_holds(
    inputs: &[Input],
    formula: Option<&Formula>,
    components: &[Component],
    has_total: bool,
) -> Result<(), MethodRefusal> {
    codes_hold(inputs.iter().map(|input| input.code.as_str()))?;
    codes_hold(components.iter().map(|component| component.code.as_str()))?;
    if formula.is_some() && inputs.is_empty() {
        return Err(MethodRefusal::InputsMissing);
    }
    if formula.is_some() && !components.is_empty() {
        return Err(MethodRefusal::FormulaWithComponents);
    }
    if has_total && components.is_empty() {
        return Err(MethodRefusal::TotalWithoutComponents);
    }
    Ok(())
}

/// Codes name fields of readings: small letters, digits, `-`, `_`, from a letter on, each once.
fn codes_hold<'a>(codes: impl Iterator<Item = &'a str>) -> Result<(), MethodRefusal> {
    let mut seen: Vec<&str> = Vec::new();
    for code in codes {
        let is_sign = |c: char| c.is_ascii_lowercase() || c.is_ascii_digit() || c == '-' || c == '_';
        if !code.starts_with(|c: char| c.is_ascii_lowercase()) || !code.chars().all(is_sign) {
            return Err(MethodRefusal::CodeUnwritable(code.to_string()));
        }
        if seen.contains(&code) {
            return Err(MethodRefusal::CodeDoubled(code.to_string()));
        }
        seen.push(code);
    }
    Ok(())
}

/// May this content be signed or approved? As [`may_be_written`]; then the worked example must reproduce.
pub fn may_be_signed(kind: TestKind, content: &MethodContent) -> Result<(), MethodRefusal> {
    may_be_written(kind, content)?;
    let Settings::Numeric { inputs, formula: Some(formula), .. } = &content.settings else { return Ok(()) };
    formula::example_reproduces(formula, inputs, content.rounding.halves).map_err(MethodRefusal::Example)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::method::preset;
    use rust_decimal::Decimal;

    fn assay() -> MethodContent {
        let mut content = preset::of(TestKind::Numeric);
        content.settings = Settings::Numeric {
            inputs: vec![Input {
                code: "found".to_string(),
                label: "Found".to_string(),
                unit: "mg".to_string(),
                decimals: 1,
            }],
            formula: Some(Formula {
                expression: "found × 2".to_string(),
                example_inputs: vec![("found".to_string(), Decimal::from(50))],
                example_result: Decimal::from(100),
            }),
            components: Vec::new(),
            has_total: false,
        };
        content
    }

    #[test]
    fn every_kind_begins_with_a_content_that_may_be_written() {
        for kind in TestKind::ALL {
            assert_eq!(may_be_written(kind, &preset::of(kind)), Ok(()), "{kind:?}");
        }
        let other = preset::of(TestKind::Ph);
        assert_eq!(may_be_written(TestKind::Viscosity, &other), Err(MethodRefusal::KindDiffers));
    }

    /// A formula is approved only when its stored worked example reproduces.
    #[test]
    fn the_worked_example_must_reproduce_before_signing() {
        assert_eq!(may_be_signed(TestKind::Numeric, &assay()), Ok(()));
        let mut wrong = assay();
        if let Settings::Numeric { formula: Some(formula), .. } = &mut wrong.settings {
            formula.example_result = Decimal::from(99);
        }
        assert_eq!(may_be_written(TestKind::Numeric, &wrong), Ok(()));
        let refusal = may_be_signed(TestKind::Numeric, &wrong).unwrap_err();
        assert!(refusal.to_string().contains("gives 100, not 99"), "{refusal}");
    }

    #[test]
    fn reasons_come_one_by_one() {
        type Spoil = fn(&mut MethodContent);
        let table: [(Spoil, MethodRefusal); 6] = [
            (
                |content| {
                    content.reportable = Reportable::Mean { range_at_most: None, rsd_percent_at_most: None };
                },
                MethodRefusal::MeanWithoutSpread,
            ),
            (
                |content| content.possible_most = content.possible_least,
                MethodRefusal::PossibleRangeEmpty(Decimal::ZERO, Decimal::ZERO),
            ),
            (|content| content.replicates = 0, MethodRefusal::ReplicatesMissing),
            (
                |content| {
                    let again = inputs(content)[0].clone();
                    inputs(content).push(again);
                },
                MethodRefusal::CodeDoubled("found".to_string()),
            ),
            (
                |content| inputs(content)[0].code = "1st".to_string(),
                MethodRefusal::CodeUnwritable("1st".to_string()),
            ),
            (|content| inputs(content).clear(), MethodRefusal::InputsMissing),
        ];
        for (spoil, expected) in table {
            let mut content = assay();
            content.possible_least = Decimal::ZERO;
            spoil(&mut content);
            assert_eq!(may_be_written(TestKind::Numeric, &content), Err(expected));
        }
    }

    fn inputs(content: &mut MethodContent) -> &mut Vec<Input> {
        match &mut content.settings {
            Settings::Numeric { inputs, .. } => inputs,
            _ => panic!("a numeric test"),
        }
    }

    #[test]
    fn settings_of_each_kind_must_hold() {
        let mut appearance = preset::of(TestKind::Appearance);
        appearance.settings = Settings::Appearance { attributes: Vec::new() };
        assert_eq!(may_be_written(TestKind::Appearance, &appearance), Err(MethodRefusal::AttributesMissing));
        let mut cylinder = preset::of(TestKind::Sedimentation);
        if let Settings::Sedimentation { report_at_minute, .. } = &mut cylinder.settings {
            *report_at_minute = 7;
        }
        let refusal = may_be_written(TestKind::Sedimentation, &cylinder);
        assert_eq!(refusal, Err(MethodRefusal::ReportMinuteNotPlanned(7)));
        let mut ph = preset::of(TestKind::Ph);
        if let Settings::Ph { temperature_least_c, temperature_most_c, .. } = &mut ph.settings {
            *temperature_least_c = *temperature_most_c;
        }
        assert_eq!(
            may_be_written(TestKind::Ph, &ph),
            Err(MethodRefusal::WindowEmpty("The temperature window"))
        );
    }
}
