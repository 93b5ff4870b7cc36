//! Two versions side by side: ingredient × (old, new, change in percent).

use super::super::page::Shell;
use super::super::record::Record;
use super::super::reply::Outcome;
use super::super::show;
use super::super::table::{Cell, Table};
use super::super::visit::Visit;
use crate::domain::failure::Failure;
use crate::domain::formulation::compare::{Difference, compare as differences};
use crate::domain::version::Versioned;
use crate::store;
use crate::store::version::Version;

fn asked(visit: &Visit, name: &str, formulation: i64) -> Result<Version, Failure> {
    let id = visit.query.get(name).and_then(|text| text.parse().ok());
    let Some(id) = id else {
        return Err(Failure::BadRequest(
            "Tick one version in each of the two columns, then compare.".to_string(),
        ));
    };
    let version = visit.read(|reader| store::version::get(reader, Versioned::Formulation, id))?;
    if version.parent == formulation { Ok(version) } else { Err(Failure::missing("such version of it")) }
}

fn cells(line: &Difference) -> Vec<Cell> {
    let (was, is) = (line.was.clone(), line.is.clone());
    let why = if was.is_none() && is.is_none() { "not stated" } else { "not in it" };
    vec![
        Cell::text(&line.what),
        was.map_or_else(|| Cell::Missing(why.to_string()), Cell::Was),
        is.map_or_else(|| Cell::Missing(why.to_string()), Cell::Is),
        Cell::number(&line.change),
    ]
}

/// `?old=…&new=…`, and `&show=all` for the lines that are the same too.
pub fn compare(visit: &Visit) -> Outcome {
    visit.knows_query(&["old", "new", "show"])?;
    let id = visit.id("id")?;
    let owner = visit.read(|reader| store::formulation::get(reader, id))?;
    let (old, new) = (asked(visit, "old", id)?, asked(visit, "new", id)?);
    let all = differences(&old.read()?, &new.read()?);
    let shows_all = visit.query.get("show") == Some("all");
    let different = all.iter().filter(|line| !line.is_same()).count();
    let lead = format!(
        "{} between version {} ({}) and version {} ({}).",
        show::counted(different, "difference", "differences"),
        old.number,
        old.state.words(),
        new.number,
        new.state.words()
    );
    let heads = ["What", &format!("Version {}", old.number), &format!("Version {}", new.number), "Change#"];
    let caption = if shows_all { "Every line" } else { "Only what differs" };
    let table = Table::new(caption, &heads, "The two versions have the same content.")
        .rows(all.iter().filter(|line| shows_all || !line.is_same()).map(cells));
    let path = format!("/formulations/{id}/compare?old={}&new={}", old.id, new.id);
    let reasons = vec![
        format!("Version {}: {}", old.number, old.reason),
        format!("Version {}: {}", new.number, new.reason),
    ];
    let title = format!("{}: versions {} and {}", owner.code, old.number, new.number);
    let shell = Shell::of(visit, &title)
        .crumb("/formulations", "Formulations")
        .crumb(format!("/formulations/{id}"), owner.code.as_str());
    Record::new(shell, lead)
        .quiet_link_if(!shows_all, format!("{path}&show=all"), "Show all")
        .quiet_link_if(shows_all, path, "Show only what differs")
        .table("", table)
        .sentences("Why each exists", reasons)
        .show()
}
