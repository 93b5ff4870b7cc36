//! The places a test has for readings: made from its method version and the containers, the same for page and rule.

pub mod field;

use rust_decimal::Decimal;

use super::label::short_label;
use super::method::{Grade, Level, MethodContent, Settings, Stage};
use super::reading::{Said, shown};
use super::typed::{NumberRule, count, number};

/// A container that gives readings.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Container {
    pub id: i64,
    pub label: String,
}

/// Which reading of a test: container (where each container is read by itself), replicate, field.
#[derive(Clone, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct SlotKey {
    pub container: Option<i64>,
    pub replicate: u32,
    pub field: String,
}

impl SlotKey {
    /// The name of its box in a form: `reading.<container or 0>.<replicate>.<field>`.
    pub fn name(&self) -> String {
        format!("reading.{}.{}.{}", self.container.unwrap_or(0), self.replicate, self.field)
    }
}

/// What a slot accepts.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Accepts {
    /// A decimal within what is possible.
    Number { least: Decimal, most: Decimal },
    /// A whole number; a count that has a cap may also be "more than the cap".
    Count { least: i64, most: i64, is_capped: bool },
    /// One of the grades, each with its anchor sentence.
    Grade(Vec<Grade>),
    /// Free words.
    Words,
    /// A setting that must be as the method states it, such as the spindle.
    Setting(String),
}

/// One place for a reading.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Slot {
    pub key: SlotKey,
    /// What is read, in words: `pH`, `temperature`.
    pub title: String,
    pub unit: String,
    /// Which container, replicate or cylinder, in words: `bottle TW-07`, `reading 2`.
    pub column: String,
    pub accepts: Accepts,
    /// Decimals of the instrument or scale; `None` where the method does not state them.
    pub decimals: Option<u32>,
    /// The test is complete only when it is filled.
    pub is_required: bool,
    /// Minutes after shaking at which it is due.
    pub due_minute: Option<u32>,
    /// When in the life of the container it is read.
    pub stage: Stage,
}

impl Slot {
    /// `pH, pH units, reading 2`.
    pub fn label(&self) -> String {
        let unit = if self.unit.is_empty() { String::new() } else { format!(", {}", self.unit) };
        let column = if self.column.is_empty() { String::new() } else { format!(", {}", self.column) };
        format!("{}{unit}{column}", self.title)
    }

    /// `pH, reading 2`: for the history, where the unit stands beside the value.
    pub fn short(&self) -> String {
        if self.column.is_empty() { self.title.clone() } else { format!("{}, {}", self.title, self.column) }
    }

    /// A value as a person reads it: a grade by its word.
    pub fn shown(&self, qualifier: &str, typed: &str) -> String {
        let Accepts::Grade(grades) = &self.accepts else { return shown(qualifier, typed) };
        let grade = grades.iter().find(|grade| qualifier == "words" && grade.code == typed);
        grade.map_or_else(|| shown(qualifier, typed), |grade| grade.word.clone())
    }

    /// Reads what was typed, or says in a sentence why it cannot be recorded.
    pub fn read(&self, text: &str) -> Result<Said, String> {
        if let Some(sentence) = self.bound_fault(text) {
            return Err(sentence);
        }
        match &self.accepts {
            Accepts::Number { least, most } => {
                let rule = NumberRule { least: *least, most: *most, ..self.number_rule() };
                number(text, &rule).map(Said::Number).map_err(|fault| fault.to_string())
            }
            Accepts::Count { least, most, .. } => {
                let rule = NumberRule {
                    least: Decimal::from(*least),
                    most: Decimal::from(*most),
                    ..self.number_rule()
                };
                count(text, &rule).map(Said::Number).map_err(|fault| fault.to_string())
            }
            Accepts::Grade(grades) => match grades.iter().find(|grade| grade.code == text.trim()) {
                Some(grade) => Ok(Said::Words(grade.code.clone())),
                None => Err(format!("{}: choose one of the listed grades.", self.label())),
            },
            Accepts::Words => self.words(text),
            Accepts::Setting(wanted) if text.trim() == wanted => Ok(Said::Words(wanted.clone())),
            Accepts::Setting(wanted) => Err(format!(
                "{}: this method reads with {wanted}, and “{}” is not comparable with it. Set {wanted} and read again.",
                self.label(),
                text.trim()
            )),
        }
    }

    fn number_rule(&self) -> NumberRule {
        let rule = NumberRule::any(&self.label());
        if self.unit.is_empty() { rule } else { rule.unit(&self.unit) }
    }

    fn words(&self, text: &str) -> Result<Said, String> {
        let text = text.trim();
        match text.chars().count() {
            0 => Err(format!("{} is empty. Write what was seen.", self.label())),
            1..=1000 => Ok(Said::Words(text.to_string())),
            length => Err(format!("{} has {length} characters; at most 1000 fit. Shorten it.", self.label())),
        }
    }
}

impl Slot {
    /// “<0.05” and “>100” are bounds and no readings; each box says what is done in their place (screen_U52).
    fn bound_fault(&self, text: &str) -> Option<String> {
        let text = text.trim();
        let is_less = text.starts_with(['<', '≤']);
        if !is_less && !text.starts_with(['>', '≥']) {
            return None;
        }
        let label = self.label();
        match &self.accepts {
            Accepts::Count { most, is_capped: true, .. } if !is_less => {
                Some(format!("{label}: press “More than {most}, not uniform” in place of “{text}”."))
            }
            Accepts::Number { .. } | Accepts::Count { .. } => Some(format!(
                "{label}: “{text}” says {} and is no reading. Type the number that was shown; where none was \
                 shown, use “Could not be read” and write “{text}” there with the reason.",
                if is_less { "less than" } else { "more than" }
            )),
            _ => None,
        }
    }
}

/// All slots of a test, column by column, in bench order.
///
/// `containers` are those that were pulled; a sample without containers of its own numbers them.
pub fn slots(title: &str, content: &MethodContent, containers: &[Container], word: &str) -> Vec<Slot> {
    let fields = field::fields(title, content);
    columns(content, containers, word)
        .into_iter()
        .flat_map(|(container, replicate, column)| {
            fields.iter().map(move |field| Slot {
                key: SlotKey { container, replicate, field: field.code.clone() },
                title: field.title.clone(),
                unit: field.unit.clone(),
                column: column.clone(),
                accepts: field.accepts.clone(),
                decimals: field.decimals,
                is_required: field.is_required,
                due_minute: field.due_minute,
                stage: field.stage.unwrap_or(content.stage),
            })
        })
        .collect()
}

/// (container, replicate, words) of each column.
fn columns(content: &MethodContent, containers: &[Container], word: &str) -> Vec<(Option<i64>, u32, String)> {
    let replicates = content.replicates.max(1);
    if content.level != Level::Container {
        let name = match content.settings {
            Settings::Sedimentation { .. } => "cylinder",
            _ if content.level == Level::Preparation => "preparation",
            _ => "reading",
        };
        return (1..=replicates).map(|replicate| (None, replicate, format!("{name} {replicate}"))).collect();
    }
    let wanted = content.containers_needed.max(1);
    let word = match content.settings {
        Settings::Sedimentation { .. } => &format!("cylinder of {word}"),
        _ => word,
    };
    let repeat = |replicate: u32| match replicates {
        1 => String::new(),
        _ => format!(", reading {replicate}"),
    };
    if containers.is_empty() {
        let each = |at: u32| {
            (1..=replicates).map(move |replicate| {
                (None, (at - 1) * replicates + replicate, format!("{word} {at}{}", repeat(replicate)))
            })
        };
        return (1..=wanted).flat_map(each).collect();
    }
    let taken = containers.iter().take(wanted as usize);
    taken
        .flat_map(|container| {
            (1..=replicates).map(move |replicate| {
                (
                    Some(container.id),
                    replicate,
                    format!("{word} {}{}", short_label(&container.label), repeat(replicate)),
                )
            })
        })
        .collect()
}

/// `30 min`, `2 h`, `7 d`.
pub fn minutes_words(minutes: u32) -> String {
    match minutes {
        0..=119 => format!("{minutes} min"),
        _ if minutes.is_multiple_of(1440) => format!("{} d", minutes / 1440),
        _ if minutes.is_multiple_of(60) => format!("{} h", minutes / 60),
        _ => format!("{} h {} min", minutes / 60, minutes % 60),
    }
}

/// The slot of an unspecified component named by its relative retention time, such as `unspecified@0.85`.
pub fn unspecified(content: &MethodContent, field: &str, replicate: u32) -> Option<Slot> {
    let Settings::Numeric { components, .. } = &content.settings else { return None };
    let component = components.iter().find(|component| component.is_unspecified)?;
    let time = field.strip_prefix("unspecified@")?;
    let rule = NumberRule { most_decimals: 3, ..NumberRule::between("time", 0, 100) };
    number(time, &rule).ok()?;
    Some(Slot {
        key: SlotKey { container: None, replicate, field: field.to_string() },
        title: format!("{} at relative retention time {time}", component.title),
        unit: content.unit.clone(),
        column: format!("reading {replicate}"),
        accepts: Accepts::Number { least: content.possible_least, most: content.possible_most },
        decimals: Some(content.reading_decimals),
        is_required: false,
        due_minute: None,
        stage: content.stage,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_bound_is_no_reading_and_each_box_says_what_to_do() {
        let of = |kind| {
            let content = super::super::method::preset::of(kind);
            slots("Test", &content, &[], "bottle").into_iter().next().unwrap()
        };
        use super::super::method::TestKind::{Ph, Redispersibility};
        let said = |kind, text: &str| of(kind).read(text).unwrap_err();
        assert!(said(Ph, "<4.0").contains("“<4.0” says less than and is no reading"));
        assert!(said(Ph, "> 10").contains("says more than"));
        assert!(said(Redispersibility, ">100").contains("press “More than 100, not uniform”"));
        assert!(said(Redispersibility, "≤5").contains("says less than"));
    }

    #[test]
    fn minutes_have_words() {
        let table = [(0, "0 min"), (30, "30 min"), (120, "2 h"), (150, "2 h 30 min"), (10_080, "7 d")];
        for (minutes, words) in table {
            assert_eq!(minutes_words(minutes), words);
        }
    }
}
