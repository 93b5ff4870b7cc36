//! How a lot settles, flows and pours: cylinders over its ages, settling curves, flow models, bounds for the patient.

use askama::Template;
use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;

use super::page::Shell;
use super::reply::{Outcome, page};
use super::route::{Route, get};
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::domain::flow::{self, SpeedReading};
use crate::domain::formulation::FormulationContent;
use crate::domain::series::{ArmWords, SeriesPoint};
use crate::domain::settling::{self, Analysis, Curve, Volume};
use crate::report::chart::{Chart, Drawn};
use crate::report::cylinder::{Strip, of_points};
use crate::report::settling as words;
use crate::store;
use crate::store::Answer;

pub const ROUTES: &[Route] = &[get("/lots/{id}/settling", one)];

#[derive(Template)]
#[template(path = "settling/lot.html")]
struct SettlingPage {
    shell: Shell,
    lead: String,
    arms: Vec<ArmPart>,
}

/// One arm of the lot.
struct ArmPart {
    condition: String,
    strip: Option<Strip>,
    charts: Vec<Drawn>,
    curves: Option<Table>,
    flows: Vec<Table>,
    poured: Vec<String>,
}

/// The arms of a lot with their points, over all its studies.
pub fn arms_of_lot(reader: &store::Reader<'_>, lot: i64) -> Answer<Vec<(ArmWords, Vec<SeriesPoint>)>> {
    let mut arms = Vec::new();
    for study in store::lot::studies(reader, lot)? {
        arms.extend(store::series::arms_of_study(reader, study.id)?);
    }
    Ok(arms)
}

/// The cylinder strips of a lot's arms, where any cylinder was read.
pub fn strips(arms: &[(ArmWords, Vec<SeriesPoint>)], clarities: &[(i64, u8)]) -> Vec<(String, Strip)> {
    let strip = |(words, points): &(ArmWords, Vec<SeriesPoint>)| {
        let cylinders = of_points(points, clarities, true);
        (!cylinders.is_empty()).then(|| (words.condition.clone(), Strip::of(&cylinders)))
    };
    arms.iter().filter_map(strip).collect()
}

fn one(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (lot, arms, clarities, volumes, speeds) = visit.read(|reader| {
        Ok((
            store::lot::get(reader, id)?,
            arms_of_lot(reader, id)?,
            store::series::clarities_of_lot(reader, id)?,
            store::settling::volumes(reader, id)?,
            store::settling::speeds(reader, id)?,
        ))
    })?;
    let dissolved = serde_json::from_str::<FormulationContent>(&lot.formulation_content)
        .ok()
        .and_then(|content| content.physical.dissolved_percent);
    let seen = Seen { clarities: &clarities, volumes: &volumes, speeds: &speeds, dissolved };
    let parts: Vec<ArmPart> = arms.iter().filter_map(|(arm, points)| seen.part(arm, points)).collect();
    let lead = if parts.is_empty() {
        "Nothing of its settling was read on a study yet: sedimentation, as-stored sediment or viscosity."
    } else {
        "How it stands, settles, flows and pours, arm by arm. Bounds and fits are decision support."
    };
    let shell = Shell::of(visit, &format!("How {} settles", lot.number))
        .crumb("/lots", "Lots")
        .crumb(format!("/lots/{id}"), lot.number.as_str());
    page(&SettlingPage { shell, lead: lead.to_string(), arms: parts })
}

/// What was read of a lot, beside its points.
struct Seen<'a> {
    clarities: &'a [(i64, u8)],
    volumes: &'a [Volume],
    speeds: &'a [SpeedReading],
    dissolved: Option<Decimal>,
}

impl Seen<'_> {
    fn part(&self, arm: &ArmWords, points: &[SeriesPoint]) -> Option<ArmPart> {
        let all = settling::curves(self.volumes);
        let curves: Vec<&Curve> = all.iter().filter(|curve| curve.arm == arm.arm).collect();
        let analyses: Vec<Result<Analysis, &'static str>> =
            curves.iter().map(|curve| settling::analyse(curve)).collect();
        let cylinders = of_points(points, self.clarities, false);
        let part = ArmPart {
            condition: arm.condition.clone(),
            strip: (!cylinders.is_empty()).then(|| Strip::of(&cylinders)),
            charts: words::charts(arm.arm, &arm.condition, &curves).iter().map(Chart::drawn).collect(),
            curves: (!curves.is_empty()).then(|| table(&curves, &analyses)),
            flows: self.flows(arm.arm),
            poured: self.poured(points, &curves, &analyses),
        };
        let is_empty = part.strip.is_none() && part.curves.is_none() && part.poured.is_empty();
        (!is_empty || !part.flows.is_empty()).then_some(part)
    }

    /// From the newest as-stored ratio and the newest settling curve of the arm.
    fn poured(
        &self,
        points: &[SeriesPoint],
        curves: &[&Curve],
        analyses: &[Result<Analysis, &'static str>],
    ) -> Vec<String> {
        let stored =
            points.iter().filter(|point| point.test == "as-stored-sediment" && point.value.is_some());
        let Some(newest) = stored.max_by_key(|point| point.age_months) else { return Vec::new() };
        let rate = curves.iter().zip(analyses).max_by_key(|(curve, _)| curve.age_months);
        let rate =
            rate.and_then(|(_, found)| found.as_ref().ok()).and_then(|found| found.first_rate_per_hour);
        let share = self.dissolved.and_then(|percent| (percent / Decimal::ONE_HUNDRED).to_f64());
        let found = settling::poured(newest.value.unwrap_or_default(), share.unwrap_or(0.0), rate);
        let Some(found) = found else {
            return vec![
                "The as-stored ratio or the dissolved share allows no bound on what is poured.".to_string(),
            ];
        };
        let mut sentences = vec![format!("At {}:", newest.age)];
        sentences.extend(words::poured(&found, share.is_some(), &newest.shown));
        sentences
    }

    /// The flow models of each sample and spindle with several speeds.
    fn flows(&self, arm: i64) -> Vec<Table> {
        let own: Vec<&SpeedReading> = self.speeds.iter().filter(|one| one.arm == arm).collect();
        let mut keys: Vec<(i64, String)> = own.iter().map(|one| (one.sample, one.spindle.clone())).collect();
        keys.sort();
        keys.dedup();
        let mut tables = Vec::new();
        for (sample, spindle) in keys {
            let readings: Vec<SpeedReading> = own
                .iter()
                .filter(|one| one.sample == sample && one.spindle == spindle)
                .map(|one| (*one).clone())
                .collect();
            let mut speeds: Vec<Decimal> = readings.iter().map(|one| one.speed_rpm).collect();
            speeds.sort();
            speeds.dedup();
            if speeds.len() > 1 {
                tables.push(flow_table(&readings, &spindle, speeds.len()));
            }
        }
        tables
    }
}

fn table(curves: &[&Curve], analyses: &[Result<Analysis, &'static str>]) -> Table {
    let heads =
        ["Age", "Cylinders#", "Stands still", "First rate", "Slows to half", "Compression", "Late collapse"];
    let rows = curves.iter().zip(analyses).map(|(curve, found)| {
        words::row(curve, found)
            .into_iter()
            .enumerate()
            .map(|(at, words)| if at == 1 { Cell::number(words) } else { Cell::text(words) })
            .collect()
    });
    Table::new("What each curve shows", &heads, "").rows(rows)
}

fn flow_table(readings: &[SpeedReading], spindle: &str, speeds: usize) -> Table {
    let age = readings.first().map(|one| one.age.clone()).unwrap_or_default();
    let thinning = flow::thinning_index(readings)
        .map(|index| format!("; thinning index {index:.2} (slow against ten times faster)"))
        .unwrap_or_default();
    let caption = format!(
        "Flow at {age}, spindle {spindle}, {speeds} speeds{thinning}. R² is of the stress, so models \
         compare; the speed stands for the shear rate"
    );
    let heads = ["Model", "R²#", "Flow index#", "Yield, share of the lowest stress#", "To know"];
    match flow::fits(readings) {
        Err(needs) => Table::new(&caption, &heads, &format!("{caption}. Not evaluable: {needs}.")),
        Ok(fits) => Table::new(&caption, &heads, "").rows(fits.into_iter().map(|fit| {
            vec![
                Cell::text(fit.model),
                Cell::number(format!("{:.4}", fit.r_squared)),
                Cell::number_or_missing(fit.index.map(|index| format!("{index:.3}")), "1"),
                Cell::number_or_missing(fit.yield_share.map(|share| format!("{share:.3}")), "none"),
                Cell::text(fit.note),
            ]
        })),
    }
}
