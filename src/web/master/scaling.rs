//! The scaling table: one batch size, every amount with how it came about.

use rust_decimal::Decimal;

use super::super::page::Shell;
use super::super::record::Record;
use super::super::reply::Outcome;
use super::super::table::{Cell, Table};
use super::super::visit::Visit;
use crate::domain::failure::Failure;
use crate::domain::formulation::FormulationContent;
use crate::domain::master::MasterRecord;
use crate::domain::master::rule::MasterRefusal;
use crate::domain::master::scale::{Scaled, scale};
use crate::domain::version::Versioned;
use crate::store;

/// All amounts of a batch size with their formulas.
pub fn table(scaled: &Scaled, master: &MasterRecord) -> Table {
    let caption = format!(
        "Amounts for {}\u{202f}{}: each rounded once to the balance's step, halves away from zero",
        scaled.size, scaled.size_unit
    );
    let heads = ["Ingredient", "Computed", "Unrounded#", "Rounded to#", "Target#", "Tolerance"];
    Table::new(&caption, &heads, "Nothing to weigh.").rows(scaled.amounts.iter().map(|one| {
        let unit = |value: Decimal| format!("{value}\u{202f}{}", one.unit);
        let tolerance = master.ingredient(one.material).map(|row| row.tolerance.words(&row.unit));
        vec![
            Cell::text(&one.name),
            Cell::text(&one.formula),
            Cell::number_or_missing(one.exact.map(|exact| unit(exact.normalize())), "not known before"),
            Cell::number(unit(one.rounding_step)),
            Cell::number_or_missing(one.target.map(unit), "made up"),
            Cell::or_missing(tolerance, "none"),
        ]
    }))
}

/// What follows from the amounts, as facts.
pub fn facts(scaled: &Scaled) -> Vec<(String, String)> {
    let or = |value: Option<String>| value.unwrap_or("not computed: a density is missing".to_string());
    vec![
        ("Sum check".to_string(), scaled.sum.clone()),
        (
            "Density, computed without contraction".to_string(),
            or(scaled.density_g_per_ml.map(|value| format!("{value}\u{202f}g/mL"))),
        ),
        (
            "Solids by volume".to_string(),
            or(scaled.solid_volume_percent.map(|value| format!("{value}\u{202f}%"))),
        ),
    ]
}

pub fn page(visit: &Visit) -> Outcome {
    visit.knows_query(&["size"])?;
    let id = visit.id("id")?;
    let (version, owner) = visit.read(|reader| {
        let version = store::version::get(reader, Versioned::Formulation, id)?;
        let owner = store::formulation::get(reader, version.parent)?;
        Ok((version, owner))
    })?;
    let content: FormulationContent = version.read()?;
    let Some(master) = &content.master else { return Err(MasterRefusal::MasterMissing.into()) };
    let asked = visit.query.get("size").and_then(|text| text.parse::<Decimal>().ok());
    let Some(size) = asked.or(master.batch_sizes.first().copied()) else {
        return Err(Failure::missing("batch size of this version"));
    };
    let title = format!("{} version {}: {size} {}", owner.code, version.number, master.size_unit);
    let shell = Shell::of(visit, &title)
        .crumb("/formulations", "Formulations")
        .crumb(format!("/formulation-versions/{id}"), format!("version {}", version.number));
    let sizes = |record: Record| {
        master.batch_sizes.iter().filter(|other| **other != size).fold(record, |record, other| {
            let words = format!("{other} {}", master.size_unit);
            record.quiet_link_if(true, format!("/formulation-versions/{id}/scaling?size={other}"), &words)
        })
    };
    match scale(&content, master, size) {
        Ok(scaled) => sizes(Record::new(shell, format!("{}.", scaled.sum)))
            .table("", table(&scaled, master))
            .more_facts("Computed", facts(&scaled))
            .show(),
        Err(fault) => sizes(Record::new(shell, fault.to_string())).show(),
    }
}
