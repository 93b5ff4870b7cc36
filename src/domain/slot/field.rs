//! What is read of each column of a test, by the kind of its method.

use rust_decimal::Decimal;

use super::{Accepts, minutes_words};
use crate::domain::method::{Attribute, Grade, MethodContent, Settings, Stage};
use crate::domain::stage::part_words;

/// The field of the remarks of the second part of an appearance.
pub const REMARKS_AFTER_SHAKE: &str = "remarks_after_shake";

/// The supernatant's grades (decision A14).
pub const CLARITY: [(&str, &str, &str); 4] = [
    ("0", "clear", "Print reads through it."),
    ("1", "slightly hazy", "Print reads through it, its edges are soft."),
    ("2", "hazy", "Print is seen but cannot be read."),
    ("3", "cloudy", "Print is not seen."),
];

/// What is read of each column of a test.
pub(super) struct Field {
    pub code: String,
    pub title: String,
    pub unit: String,
    pub accepts: Accepts,
    pub decimals: Option<u32>,
    pub is_required: bool,
    pub due_minute: Option<u32>,
    /// Where it is not the method's own stage.
    pub stage: Option<Stage>,
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
            stage: None,
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

/// The fields of one column, in bench order.
pub(super) fn fields(title: &str, content: &MethodContent) -> Vec<Field> {
    let (least, most) = (content.possible_least, content.possible_most);
    let value = Field::number("value", title, &content.unit, least, most).decimals(content.reading_decimals);
    match &content.settings {
        Settings::Appearance { attributes } => appearance_fields(content, attributes),
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

/// Every part closes with its own remarks. Where there are two parts, each title says its part.
fn appearance_fields(content: &MethodContent, attributes: &[Attribute]) -> Vec<Field> {
    let stages = content.stages();
    let part = |stage: Stage| {
        let titled = |title: &str| match stages.len() {
            1 => title.to_string(),
            _ => format!("{title} ({})", part_words(stage)),
        };
        let remarks = if stages.first() == Some(&stage) { "remarks" } else { REMARKS_AFTER_SHAKE };
        let of_part = attributes.iter().filter(move |one| content.stage_of(one) == stage);
        let mut fields: Vec<Field> = of_part
            .map(|attribute| Field {
                accepts: Accepts::Grade(attribute.grades.clone()),
                is_required: true,
                stage: Some(stage),
                ..Field::words(&attribute.code, &titled(&attribute.title))
            })
            .collect();
        fields.push(Field { stage: Some(stage), ..Field::words(remarks, &titled("Remarks")) });
        fields
    };
    stages.iter().flat_map(|stage| part(*stage)).collect()
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
            photo: None,
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
