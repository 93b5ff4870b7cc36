//! What several tests of one lot suggest when they are read together: fifteen rules over its ages.
//!
//! A rule says "suggests" and never "is"; it names the values and ages it used and what was missing. Nothing is
//! stored: a suggestion is worked out from the records whenever it is shown.

pub mod facts;
pub mod threshold;

use facts::LotFacts;

use crate::science::warning_rules::{self, Finding, Level, Rule, Settings};

/// What one rule says of a lot.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Suggestion {
    /// `R1` to `R15`.
    pub rule: &'static str,
    pub name: &'static str,
    pub level: SuggestionLevel,
    /// Begins with "suggests"; empty where nothing is suggested.
    pub suggests: &'static str,
    /// "F now 0.78 at 12.0 months".
    pub evidence: Vec<String>,
    pub missing: Vec<&'static str>,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum SuggestionLevel {
    NotEvaluable,
    Quiet,
    Note,
    Watch,
    Fail,
}

impl SuggestionLevel {
    pub fn words(self) -> &'static str {
        match self {
            SuggestionLevel::NotEvaluable => "Not evaluable",
            SuggestionLevel::Quiet => "Nothing found",
            SuggestionLevel::Note => "Note",
            SuggestionLevel::Watch => "Watch",
            SuggestionLevel::Fail => "Limit or label missed",
        }
    }
}

/// All rules on one arm of a lot, R1 to R15.
pub fn of_arm(facts: &LotFacts, arm: i64, settings: &Settings) -> Vec<Suggestion> {
    warning_rules::all(&facts.lot(arm), settings).into_iter().map(suggestion).collect()
}

fn suggestion(finding: Finding) -> Suggestion {
    let (rule, name) = named(finding.rule);
    let level = match finding.level {
        Level::NotEvaluable => SuggestionLevel::NotEvaluable,
        Level::Quiet => SuggestionLevel::Quiet,
        Level::Note => SuggestionLevel::Note,
        Level::Watch => SuggestionLevel::Watch,
        Level::Fail => SuggestionLevel::Fail,
    };
    let evidence = finding.evidence.iter().map(|one| {
        let at = one.age_days.map(|days| format!(" at {:.1} months", days / 30.4375)).unwrap_or_default();
        format!("{} {}{at}", one.name, crate::domain::trend::words::significant(one.value, 3))
    });
    Suggestion {
        rule,
        name,
        level,
        suggests: finding.suggests,
        evidence: evidence.collect(),
        missing: finding.missing,
    }
}

fn named(rule: Rule) -> (&'static str, &'static str) {
    match rule {
        Rule::R1 => ("R1", "Early caking"),
        Rule::R2 => ("R2", "Delayed collapse"),
        Rule::R3 => ("R3", "Flocculated or deflocculated"),
        Rule::R4 => ("R4", "Particle growth"),
        Rule::R5 => ("R5", "Ripening or aggregation"),
        Rule::R6 => ("R6", "Viscosity loss explains settling"),
        Rule::R7 => ("R7", "Why the thickener failed"),
        Rule::R8 => ("R8", "Preservative at risk"),
        Rule::R9 => ("R9", "Water loss looks like stability"),
        Rule::R10 => ("R10", "Assay scatter from poor resuspension"),
        Rule::R11 => ("R11", "Label shake too short"),
        Rule::R12 => ("R12", "pH drift with assay or colour"),
        Rule::R13 => ("R13", "Orientation or closure"),
        Rule::R14 => ("R14", "Point passes, bound does not"),
        Rule::R15 => ("R15", "Implausible reading"),
    }
}

#[cfg(test)]
mod tests {
    use super::facts::{LotFacts, ReadingFact, ResultFact};
    use super::*;
    use crate::domain::method::TestKind;

    fn result(sample: i64, days: i64, test: &str, kind: TestKind, value: &str) -> ResultFact {
        ResultFact {
            arm: 1,
            condition: 1,
            place: "25 °C/60 % RH upright".to_string(),
            orientation: "upright".to_string(),
            is_labelled: true,
            is_accelerated: false,
            sample,
            days,
            test: test.to_string(),
            kind,
            method_version: 1,
            value: Some(value.parse().unwrap()),
            qualifier: "=".to_string(),
            detail: r#"{"values":[{"of":"1","value":"0.80"},{"of":"2","value":"0.81"}]}"#.to_string(),
        }
    }

    /// A bed that packs: F falls below 85 % of the first while the count of inversions doubles over two pulls.
    fn packing(has_counts: bool) -> LotFacts {
        let mut facts = LotFacts::default();
        for (place, (f, n)) in
            [("0.95", "4"), ("0.94", "5"), ("0.90", "7"), ("0.78", "11")].into_iter().enumerate()
        {
            let (sample, days) = (place as i64, place as i64 * 91);
            facts.results.push(result(sample, days, "sedimentation", TestKind::Sedimentation, f));
            if has_counts {
                facts.results.push(result(sample, days, "redispersibility", TestKind::Redispersibility, n));
            }
        }
        facts
    }

    fn of<'a>(found: &'a [Suggestion], rule: &str) -> &'a Suggestion {
        found.iter().find(|one| one.rule == rule).unwrap()
    }

    #[test]
    fn a_packing_bed_suggests_caking_with_its_evidence() {
        let found = of_arm(&packing(true), 1, &Settings::default());
        let caking = of(&found, "R1");
        assert_eq!((caking.level, caking.name), (SuggestionLevel::Watch, "Early caking"));
        assert!(caking.suggests.starts_with("suggests"));
        assert!(caking.evidence.contains(&"F now 0.780 at 9.0 months".to_string()), "{:?}", caking.evidence);
        // Inversions are known, what the label says is not.
        assert_eq!(of(&found, "R11").level, SuggestionLevel::NotEvaluable);
    }

    #[test]
    fn f_alone_never_suggests_caking_and_what_is_missing_is_named() {
        let found = of_arm(&packing(false), 1, &Settings::default());
        assert_eq!(of(&found, "R1").level, SuggestionLevel::NotEvaluable);
        assert_eq!(of(&found, "R1").missing, ["shake count missing"]);
        assert_eq!(found.len(), 15);
    }

    #[test]
    fn residue_makes_it_grave_and_orientations_are_compared_by_their_containers() {
        let mut facts = packing(true);
        let residue = |sample| ReadingFact {
            sample,
            field: "residue".to_string(),
            typed: "a ring on the base".to_string(),
            value: None,
        };
        facts.readings.push(residue(3));
        let mut inverted = result(9, 273, "sedimentation", TestKind::Sedimentation, "0.50");
        inverted.orientation = "inverted".to_string();
        inverted.arm = 2;
        inverted.detail = r#"{"values":[{"of":"3","value":"0.50"},{"of":"4","value":"0.51"}]}"#.to_string();
        facts.results.push(inverted);
        let found = of_arm(&facts, 1, &Settings::default());
        assert_eq!(of(&found, "R1").level, SuggestionLevel::Fail);
        assert_eq!(of(&found, "R13").level, SuggestionLevel::Watch);
    }
}
