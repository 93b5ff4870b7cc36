//! What a lot was made from and in, its deviations and its retains: the middle part of its page.

use askama::Template;

use super::show;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::domain::deviation::DeviationClass;
use crate::domain::failure::Failure;
use crate::store;
use crate::store::deviation::Deviation;
use crate::store::stock::Dispensed;

/// Tables of a lot's page; those without a row are left out.
#[derive(Clone, Debug, Template)]
#[template(path = "lot/parts.html")]
pub struct Parts {
    tables: Vec<(&'static str, Table)>,
}

impl askama::filters::HtmlSafe for Parts {}

impl Parts {
    pub fn of(visit: &Visit, lot: i64) -> Result<Parts, Failure> {
        let (deviations, dispensed, equipment, retains) = visit.read(|reader| {
            Ok((
                store::deviation::of_lot(reader, lot)?,
                store::stock::of_lot(reader, lot)?,
                store::equipment::of_lot(reader, lot)?,
                store::retain::of_lot(reader, lot)?,
            ))
        })?;
        let tables = [
            ("Deviations", deviations_table(&deviations)),
            ("Made from", made_from(&dispensed)),
            ("Made in", made_in(&equipment)),
            ("Retains", super::retain::table(&retains, visit)),
        ];
        Ok(Parts { tables: tables.into_iter().filter(|(_, table)| !table.rows.is_empty()).collect() })
    }
}

/// The deviations of a lot, open ones said so.
pub fn deviations_table(found: &[Deviation]) -> Table {
    let heads = ["Number#", "What happened", "Class", "State"];
    Table::new("Oldest first", &heads, "No deviation was opened.").rows(found.iter().map(|one| {
        vec![
            Cell::link(format!("/deviations/{}", one.id), one.facts.number.to_string()),
            Cell::text(&one.title),
            Cell::text(one.facts.class.map_or("not classified yet", DeviationClass::words)),
            Cell::text(if one.facts.is_closed { "closed" } else { "open: blocks the release" }),
        ]
    }))
}

fn made_from(found: &[Dispensed]) -> Table {
    let heads = ["Material lot", "Material", "Taken#"];
    Table::new("What was dispensed, less what was brought back", &heads, "").rows(found.iter().map(|one| {
        vec![
            Cell::link(format!("/material-lots/{}", one.material_lot), &one.number),
            Cell::text(&one.material),
            Cell::number(show::with_unit(&one.quantity.normalize().to_string(), &one.unit)),
        ]
    }))
}

fn made_in(found: &[(i64, String, String)]) -> Table {
    Table::new("In the order of first use", &["Equipment", "What it is"], "").rows(
        found
            .iter()
            .map(|(id, code, name)| vec![Cell::link(format!("/equipment/{id}"), code), Cell::text(name)]),
    )
}
