//! The part of the form that belongs to the kind of test.

use rust_decimal::Decimal;

use super::super::field::{Entry, Field};
use super::super::form::{Form, Typed};
use super::super::rows::{decimal, whole};
use super::super::visit::Visit;
use super::grid;
use crate::domain::method::{InterfaceRead, Settings, TestKind};

fn number(name: &str, label: &str, value: Decimal) -> Field {
    Field::new(name, label, Entry::Decimal).width(8).value(value.to_string())
}

fn count(name: &str, label: &str, value: u32) -> Field {
    Field::new(name, label, Entry::Count).width(8).value(value.to_string())
}

const READS: [(InterfaceRead, &str, &str); 3] = [
    (InterfaceRead::FallingBoundary, "falling", "the falling boundary of the liquid above"),
    (InterfaceRead::RisingBed, "rising", "the top of the rising bed"),
    (InterfaceRead::Both, "both", "both"),
];

pub fn part(visit: &Visit, form: Form, settings: &Settings) -> Form {
    match settings {
        Settings::Appearance { attributes } => grid::grades(visit, form, attributes),
        Settings::AsStoredSediment => form,
        Settings::Redispersibility { cap, beat_per_minute, inspect_every, instruction } => form
            .heading("Counting", "")
            .field(
                count("cap", "Counted up to, inversions", *cap)
                    .hint("Beyond it: “more than N, not uniform”."),
            )
            .field(count("beat_per_minute", "Beat, per minute", *beat_per_minute))
            .field(count("inspect_every", "Inspected after every, inversions", *inspect_every))
            .field(Field::new("instruction", "How it is turned", Entry::Long).value(instruction)),
        Settings::Ph { temperature_least_c, temperature_most_c, slope_least_percent, slope_most_percent } => {
            form.heading("pH", "")
                .field(number("temperature_least_c", "Sample temperature at least, °C", *temperature_least_c))
                .field(number("temperature_most_c", "Sample temperature at most, °C", *temperature_most_c))
                .field(number("slope_least_percent", "Slope of the day at least, %", *slope_least_percent))
                .field(number("slope_most_percent", "Slope of the day at most, %", *slope_most_percent))
        }
        Settings::Viscosity { .. } => viscosity(form, settings),
        Settings::Sedimentation { planned_minutes, report_at_minute, reads, vessel_ml } => {
            let planned = planned_minutes.iter().map(u32::to_string).collect::<Vec<_>>().join(", ");
            let read = READS.iter().find(|(known, _, _)| known == reads).map_or("", |(_, code, _)| code);
            form.heading("The cylinder", "")
                .field(
                    Field::new("planned_minutes", "Read at, minutes after shaking", Entry::Text)
                        .value(planned)
                        .hint("Such as 10, 30, 60, 1440."),
                )
                .field(count("report_at_minute", "Reported at minute", *report_at_minute))
                .field(
                    Field::new("reads", "Which boundary is read", Entry::Select)
                        .choices(READS.map(|(_, code, words)| (code, words)))
                        .value(read),
                )
                .field(number("vessel_ml", "Vessel holds, mL", *vessel_ml))
        }
        Settings::Numeric { inputs, formula, components, has_total } => {
            grid::numeric(visit, form, inputs, formula.as_ref(), components, *has_total)
        }
    }
}

fn viscosity(form: Form, settings: &Settings) -> Form {
    let Settings::Viscosity {
        spindle,
        speed_rpm,
        torque_least_percent,
        torque_most_percent,
        temperature_c,
        temperature_tolerance_c,
        rest_minutes,
    } = settings
    else {
        return form;
    };
    form.heading("Viscosity", "Values are comparable only at equal settings.")
        .field(Field::new("spindle", "Spindle", Entry::Text).width(12).value(spindle))
        .field(number("speed_rpm", "Speed, rpm", *speed_rpm))
        .field(number("torque_least_percent", "Torque at least, %", *torque_least_percent))
        .field(number("torque_most_percent", "Torque at most, %", *torque_most_percent))
        .field(number("temperature_c", "Sample temperature, °C", *temperature_c))
        .field(number("temperature_tolerance_c", "Within, °C", *temperature_tolerance_c))
        .field(count("rest_minutes", "Rest before reading, minutes", *rest_minutes))
}

/// Reads the part of the kind; every fault stands at its field.
pub fn read(typed: &mut Typed<'_>, kind: TestKind) -> Option<Settings> {
    match kind {
        TestKind::Appearance => grid::read_grades(typed),
        TestKind::AsStoredSediment => Some(Settings::AsStoredSediment),
        TestKind::Redispersibility => {
            let cap = whole(typed, "cap", 1, 10_000);
            let beat_per_minute = whole(typed, "beat_per_minute", 1, 300);
            let inspect_every = whole(typed, "inspect_every", 1, 1000);
            let instruction = typed.text("instruction", 600);
            Some(Settings::Redispersibility {
                cap: cap?,
                beat_per_minute: beat_per_minute?,
                inspect_every: inspect_every?,
                instruction: instruction?,
            })
        }
        TestKind::Ph => {
            let temperature_least_c = decimal(typed, "temperature_least_c", "Sample temperature at least");
            let temperature_most_c = decimal(typed, "temperature_most_c", "Sample temperature at most");
            let slope_least_percent = decimal(typed, "slope_least_percent", "Slope of the day at least");
            let slope_most_percent = decimal(typed, "slope_most_percent", "Slope of the day at most");
            Some(Settings::Ph {
                temperature_least_c: temperature_least_c?,
                temperature_most_c: temperature_most_c?,
                slope_least_percent: slope_least_percent?,
                slope_most_percent: slope_most_percent?,
            })
        }
        TestKind::Viscosity => read_viscosity(typed),
        TestKind::Sedimentation => read_sedimentation(typed),
        TestKind::Numeric => grid::read_numeric(typed),
    }
}

fn read_viscosity(typed: &mut Typed<'_>) -> Option<Settings> {
    let spindle = typed.text("spindle", 40);
    let speed_rpm = decimal(typed, "speed_rpm", "Speed");
    let torque_least_percent = decimal(typed, "torque_least_percent", "Torque at least");
    let torque_most_percent = decimal(typed, "torque_most_percent", "Torque at most");
    let temperature_c = decimal(typed, "temperature_c", "Sample temperature");
    let temperature_tolerance_c = decimal(typed, "temperature_tolerance_c", "Within");
    let rest_minutes = whole(typed, "rest_minutes", 0, 10_000);
    Some(Settings::Viscosity {
        spindle: spindle?,
        speed_rpm: speed_rpm?,
        torque_least_percent: torque_least_percent?,
        torque_most_percent: torque_most_percent?,
        temperature_c: temperature_c?,
        temperature_tolerance_c: temperature_tolerance_c?,
        rest_minutes: rest_minutes?,
    })
}

fn read_sedimentation(typed: &mut Typed<'_>) -> Option<Settings> {
    let planned_minutes = read_minutes(typed);
    let report_at_minute = whole(typed, "report_at_minute", 1, 100_000);
    let reads = typed.choice("reads");
    let vessel_ml = decimal(typed, "vessel_ml", "Vessel holds");
    let reads = reads.and_then(|code| READS.iter().find(|(_, known, _)| *known == code).map(|found| found.0));
    Some(Settings::Sedimentation {
        planned_minutes: planned_minutes?,
        report_at_minute: report_at_minute?,
        reads: reads?,
        vessel_ml: vessel_ml?,
    })
}

/// `10, 30, 60`: whole minutes, each once, in rising order.
fn read_minutes(typed: &mut Typed<'_>) -> Option<Vec<u32>> {
    let text = typed.text("planned_minutes", 400)?;
    let read: Result<Vec<u32>, _> = text.split([',', ';']).map(|part| part.trim().parse::<u32>()).collect();
    match read {
        Ok(mut minutes) if !minutes.contains(&0) => {
            minutes.sort_unstable();
            minutes.dedup();
            Some(minutes)
        }
        _ => {
            typed.fault(
                "planned_minutes",
                "Write whole minutes with commas between them, such as 10, 30, 60.",
            );
            None
        }
    }
}
