//! The places a test has for readings: made from its method version and the containers, the same for page and rule.

use rust_decimal::Decimal;

use super::label::short_label;
use super::method::{Grade, Level, MethodContent, Settings};
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
}

/// The supernatant's grades (decision A14).
pub const CLARITY: [(&str, &str, &str); 4] = [
    ("0", "clear", "Print reads through it."),
    ("1", "slightly hazy", "Print reads through it, its edges are soft."),
    ("2", "hazy", "Print is seen but cannot be read."),
    ("3", "cloudy", "Print is not seen."),
];

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

/// What is read of each column of a test.
struct Field {
    code: String,
    title: String,
    unit: String,
    accepts: Accepts,
    decimals: Option<u32>,
    is_required: bool,
    due_minute: Option<u32>,
}

impl Field {
    fn number(code: &str, title: &str, unit: &str, least: Decimal, most: Decimal) -> Field {
        Field {
            code: code.to_string(),
            title: title.to_string(),
            unit: unit.to_string(),
            accepts: Accepts::Number { least, most },
            decimals: None,
            is_required: true,
            due_minute: None,
        }
    }

    fn count(code: &str, title: &str, unit: &str, most: i64) -> Field {
        let accepts = Accepts::Count { least: 0, most, is_capped: false };
        Field { accepts, ..Field::number(code, title, unit, Decimal::ZERO, Decimal::ZERO) }
    }

    fn words(code: &str, title: &str) -> Field {
        Field { accepts: Accepts::Words, is_required: false, ..Field::count(code, title, "", 0) }
    }

    fn decimals(self, decimals: u32) -> Field {
        Field { decimals: Some(decimals), ..self }
    }
}

/// All slots of a test, column by column, in bench order.
///
/// `containers` are those that were pulled; a sample without containers of its own numbers them.
pub fn slots(title: &str, content: &MethodContent, containers: &[Container], word: &str) -> Vec<Slot> {
    let fields = fields(title, content);
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

fn fields(title: &str, content: &MethodContent) -> Vec<Field> {
    let (least, most) = (content.possible_least, content.possible_most);
    let value = Field::number("value", title, &content.unit, least, most).decimals(content.reading_decimals);
    match &content.settings {
        Settings::Appearance { attributes } => attributes
            .iter()
            .map(|attribute| Field {
                accepts: Accepts::Grade(attribute.grades.clone()),
                is_required: true,
                ..Field::words(&attribute.code, &attribute.title)
            })
            .chain([Field::words("remarks", "Remarks")])
            .collect(),
        Settings::AsStoredSediment => sediment_fields(content),
        Settings::Redispersibility { cap, .. } => vec![
            Field {
                accepts: Accepts::Count { least: 0, most: i64::from(*cap), is_capped: true },
                ..Field::count("inversions", "Inversions to uniform", "", i64::from(*cap))
            },
            Field { is_required: false, ..Field::count("seconds", "Time taken", "s", 36_000) },
            Field::words("residue", "Residue on the base"),
        ],
        Settings::Ph { .. } => vec![value, temperature()],
        Settings::Viscosity { spindle, speed_rpm, .. } => vec![
            setting("spindle", "Spindle", spindle),
            setting("speed_rpm", "Speed, rpm", &speed_rpm.normalize().to_string()),
            value,
            Field::number("torque_percent", "Torque", "%", Decimal::ZERO, Decimal::ONE_HUNDRED),
            temperature(),
            Field::count("rest_minutes", "Rest before reading", "min", 10_000),
        ],
        Settings::Sedimentation { planned_minutes, vessel_ml, .. } => {
            cylinder_fields(planned_minutes, *vessel_ml, content.reading_decimals)
        }
        Settings::Numeric { inputs, components, .. } if !inputs.is_empty() || !components.is_empty() => {
            inputs
                .iter()
                .map(|input| {
                    Field::number(&input.code, &input.label, &input.unit, least, most)
                        .decimals(input.decimals)
                })
                .chain(components.iter().filter(|component| !component.is_unspecified).map(|component| {
                    Field::number(&component.code, &component.title, &content.unit, least, most)
                        .decimals(content.reading_decimals)
                }))
                .collect()
        }
        Settings::Numeric { .. } => vec![value],
    }
}

fn setting(code: &str, title: &str, wanted: &str) -> Field {
    Field { accepts: Accepts::Setting(wanted.to_string()), is_required: true, ..Field::words(code, title) }
}

/// Water is liquid at the bench: a reading outside −20 to 120 °C is no temperature of a sample.
fn temperature() -> Field {
    Field::number("temperature_c", "Temperature", "°C", Decimal::from(-20), Decimal::from(120))
}

fn sediment_fields(content: &MethodContent) -> Vec<Field> {
    let height = |code: &str, title: &str| {
        Field::number(code, title, "mm", content.possible_least, content.possible_most)
            .decimals(content.reading_decimals)
    };
    vec![
        height("base_mm", "Base"),
        height("bed_top_mm", "Top of the bed"),
        height("fill_line_mm", "Fill line"),
        Field::count("days_undisturbed", "Days undisturbed", "d", 10_000),
    ]
}

fn cylinder_fields(planned_minutes: &[u32], vessel_ml: Decimal, decimals: u32) -> Vec<Field> {
    let clarity: Vec<Grade> = CLARITY
        .iter()
        .map(|(code, word, anchor)| Grade {
            code: code.to_string(),
            word: word.to_string(),
            anchor: anchor.to_string(),
        })
        .collect();
    let millilitres = |code: &str, title: &str| {
        Field::number(code, title, "mL", Decimal::ZERO, vessel_ml).decimals(decimals)
    };
    let mut fields = vec![millilitres("total_ml", "Total volume")];
    for minute in planned_minutes {
        let due_minute = Some(*minute);
        let after = minutes_words(*minute);
        fields.push(Field {
            due_minute,
            ..millilitres(&format!("sediment_ml@{minute}"), &format!("Sediment volume at {after}"))
        });
        let title = format!("Supernatant at {after}");
        fields.push(Field {
            accepts: Accepts::Grade(clarity.clone()),
            is_required: true,
            due_minute,
            ..Field::words(&format!("clarity@{minute}"), &title)
        });
    }
    fields
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
