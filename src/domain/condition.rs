//! Storage conditions: the catalogue of the published guidelines, and conditions of a site's own.

use chrono::NaiveDate;
use rust_decimal::Decimal;

use super::refusal::NamedReason;

/// What a condition is used for in a stability programme.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Use {
    LongTerm,
    Intermediate,
    Accelerated,
    /// Long-term where 30/65 or 30/35 is chosen, else intermediate.
    LongTermOrIntermediate,
    /// Long-term in the refrigerator, or the excursion of a frozen lot.
    Excursion,
    InUse,
    Other,
}

impl Use {
    pub const ALL: [Use; 7] = [
        Use::LongTerm,
        Use::Intermediate,
        Use::Accelerated,
        Use::LongTermOrIntermediate,
        Use::Excursion,
        Use::InUse,
        Use::Other,
    ];

    /// As stored in `condition.use`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            Use::LongTerm => "long-term",
            Use::Intermediate => "intermediate",
            Use::Accelerated => "accelerated",
            Use::LongTermOrIntermediate => "long-term or intermediate",
            Use::Excursion => "excursion",
            Use::InUse => "in use",
            Use::Other => "other",
        }
    }

    pub fn from_words(words: &str) -> Use {
        Use::ALL.into_iter().find(|found| found.words() == words).unwrap_or(Use::Other)
    }
}

/// How the humidity of a condition is to be kept.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum HumidityRule {
    Within,
    NotMoreThan,
    /// No humidity is asked for, as at 5 °C.
    None,
}

impl HumidityRule {
    pub const ALL: [HumidityRule; 3] = [HumidityRule::Within, HumidityRule::NotMoreThan, HumidityRule::None];

    /// As stored in `condition.humidity_rule`.
    pub fn words(self) -> &'static str {
        match self {
            HumidityRule::Within => "within",
            HumidityRule::NotMoreThan => "not more than",
            HumidityRule::None => "none",
        }
    }

    pub fn from_words(words: &str) -> Option<HumidityRule> {
        HumidityRule::ALL.into_iter().find(|rule| rule.words() == words)
    }
}

/// A condition to be added: set points with tolerances, in °C and % RH.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewCondition {
    pub code: String,
    pub temperature_c: Decimal,
    pub temperature_tolerance_c: Decimal,
    pub humidity_percent: Option<Decimal>,
    pub humidity_tolerance_percent: Option<Decimal>,
    pub humidity_rule: HumidityRule,
    pub used_for: Use,
    pub least_months: Option<u32>,
    /// The guideline's clause, or why a site needs it.
    pub source: String,
}

impl NewCondition {
    /// `25 °C/60 % RH`, `5 °C`, `40 °C/at most 25 % RH`, with no-break spaces.
    pub fn name(&self) -> String {
        let temperature = format!("{}\u{a0}°C", self.temperature_c).replace('-', "\u{2212}");
        match (self.humidity_rule, self.humidity_percent) {
            (HumidityRule::None, _) | (_, None) => temperature,
            (HumidityRule::Within, Some(humidity)) => format!("{temperature}/{humidity}\u{a0}%\u{a0}RH"),
            (HumidityRule::NotMoreThan, Some(humidity)) => {
                format!("{temperature}/at\u{a0}most {humidity}\u{a0}%\u{a0}RH")
            }
        }
    }
}

/// The rows of the catalogue: requirements A1 (general case), A4 (semi-permeable packs), A7 (refrigerated),
/// A8 (frozen) and A9 (zone IVb), from ICH Q1A(R2) 2.2.7.1 to 2.2.7.6 and WHO TRS 1010 annex 10.
pub fn catalogue() -> Vec<NewCondition> {
    use HumidityRule::{None as NoHumidity, NotMoreThan, Within};
    use Use::*;
    let general = "ICH Q1A(R2) 2.2.7.1, general case";
    let semi = "ICH Q1A(R2) 2.2.7.3, semi-permeable container";
    [
        ("25/60", 25, 2, Some((60, 5)), Within, LongTerm, Some(12), general),
        ("30/65", 30, 2, Some((65, 5)), Within, LongTermOrIntermediate, Some(6), general),
        ("40/75", 40, 2, Some((75, 5)), Within, Accelerated, Some(6), general),
        ("25/40", 25, 2, Some((40, 5)), Within, LongTerm, Some(12), semi),
        ("30/35", 30, 2, Some((35, 5)), Within, LongTerm, Some(12), semi),
        ("40/25", 40, 2, Some((25, 0)), NotMoreThan, Accelerated, Some(6), semi),
        ("5", 5, 3, None, NoHumidity, LongTerm, Some(12), "ICH Q1A(R2) 2.2.7.4, refrigerated"),
        ("-20", -20, 5, None, NoHumidity, LongTerm, Some(12), "ICH Q1A(R2) 2.2.7.5, frozen"),
        ("30/75", 30, 2, Some((75, 5)), Within, LongTerm, Some(12), "WHO TRS 1010 annex 10, zone IVb"),
    ]
    .into_iter()
    .map(|(code, temperature, tolerance, humidity, humidity_rule, used_for, least_months, source)| {
        let whole = |value: i64| Decimal::from(value);
        NewCondition {
            code: code.to_string(),
            temperature_c: whole(temperature),
            temperature_tolerance_c: whole(tolerance),
            humidity_percent: humidity.map(|(percent, _)| whole(percent)),
            humidity_tolerance_percent: humidity
                .filter(|_| humidity_rule == Within)
                .map(|(_, within)| whole(within)),
            humidity_rule,
            used_for,
            least_months,
            source: source.to_string(),
        }
    })
    .collect()
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum ConditionRefusal {
    #[error("There is a condition {0} already. Use that one, or choose another code.")]
    ConditionCodeTaken(String),
    #[error("A humidity rule needs its humidity in % RH. Fill it in, or choose “none”.")]
    HumidityMissing,
    #[error("Without a humidity rule there is no humidity to keep. Empty the field, or choose “within”.")]
    HumidityNotAsked,
}

impl NamedReason for ConditionRefusal {
    fn field(&self) -> Option<String> {
        let name = match self {
            ConditionRefusal::ConditionCodeTaken(_) => "code",
            _ => "humidity_percent",
        };
        Some(name.to_string())
    }
}

/// Refuses in this order: code taken, humidity missing, humidity not asked for.
pub fn may_add(new: &NewCondition, is_code_taken: bool) -> Result<(), ConditionRefusal> {
    if is_code_taken {
        return Err(ConditionRefusal::ConditionCodeTaken(new.code.clone()));
    }
    match (new.humidity_rule, new.humidity_percent) {
        (HumidityRule::None, Some(_)) => Err(ConditionRefusal::HumidityNotAsked),
        (HumidityRule::Within | HumidityRule::NotMoreThan, None) => Err(ConditionRefusal::HumidityMissing),
        _ => Ok(()),
    }
}

/// The canonical text of a condition outside the catalogue: what QA signs.
pub fn canonical(new: &NewCondition, reason: &str, decided_on: NaiveDate) -> String {
    let humidity = new.humidity_percent.map_or("none".to_string(), |percent| percent.to_string());
    let within = new.humidity_tolerance_percent.map_or("none".to_string(), |percent| percent.to_string());
    format!(
        "condition {}\nname {}\ntemperature {} within {}\nhumidity {} {humidity} within {within}\nuse {}\nsource {}\n\
         reason {reason}\non {decided_on}",
        new.code,
        new.name(),
        new.temperature_c,
        new.temperature_tolerance_c,
        new.humidity_rule.words(),
        new.used_for.words(),
        new.source,
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    fn row(code: &str) -> NewCondition {
        catalogue().into_iter().find(|row| row.code == code).unwrap()
    }

    /// req_A1, req_A4, req_A7, req_A8, req_A9: the rows of the catalogue.
    #[test]
    fn the_catalogue_has_the_rows_of_the_guidelines() {
        let table = [
            ("25/60", "25\u{a0}°C/60\u{a0}%\u{a0}RH", "2", Some("5"), "long-term", Some(12)),
            ("30/65", "30\u{a0}°C/65\u{a0}%\u{a0}RH", "2", Some("5"), "long-term or intermediate", Some(6)),
            ("40/75", "40\u{a0}°C/75\u{a0}%\u{a0}RH", "2", Some("5"), "accelerated", Some(6)),
            ("25/40", "25\u{a0}°C/40\u{a0}%\u{a0}RH", "2", Some("5"), "long-term", Some(12)),
            ("30/35", "30\u{a0}°C/35\u{a0}%\u{a0}RH", "2", Some("5"), "long-term", Some(12)),
            ("40/25", "40\u{a0}°C/at\u{a0}most 25\u{a0}%\u{a0}RH", "2", None, "accelerated", Some(6)),
            ("5", "5\u{a0}°C", "3", None, "long-term", Some(12)),
            ("-20", "\u{2212}20\u{a0}°C", "5", None, "long-term", Some(12)),
            ("30/75", "30\u{a0}°C/75\u{a0}%\u{a0}RH", "2", Some("5"), "long-term", Some(12)),
        ];
        assert_eq!(catalogue().len(), table.len());
        for (code, name, tolerance, humidity, used_for, months) in table {
            let row = row(code);
            assert_eq!(row.name(), name);
            assert_eq!(row.temperature_tolerance_c.to_string(), tolerance, "{code}");
            assert_eq!(row.humidity_tolerance_percent.map(|h| h.to_string()).as_deref(), humidity, "{code}");
            assert_eq!((row.used_for.words(), row.least_months), (used_for, months), "{code}");
            assert_eq!(may_add(&row, false), Ok(()), "{code}");
        }
    }

    #[test]
    fn a_condition_is_refused_for_its_first_fault() {
        let asked = NewCondition { humidity_percent: None, ..row("25/60") };
        let unasked = NewCondition { humidity_percent: Some(Decimal::TEN), ..row("5") };
        assert_eq!(may_add(&asked, true), Err(ConditionRefusal::ConditionCodeTaken("25/60".to_string())));
        assert_eq!(may_add(&asked, false), Err(ConditionRefusal::HumidityMissing));
        assert_eq!(may_add(&unasked, false), Err(ConditionRefusal::HumidityNotAsked));
    }
}
