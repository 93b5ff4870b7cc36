//! Two versions of a method side by side: the fields in which they differ.

use super::super::record::Record;
use super::super::reply::Outcome;
use super::super::show;
use super::super::table::{Cell, Table};
use super::super::visit::Visit;
use crate::domain::failure::Failure;
use crate::domain::version::{Versioned, parts_that_differ};
use crate::store;
use crate::store::version::Version;

/// Where two versions of a method are compared.
pub(super) fn path(method: i64, old: &Version, new: &Version) -> String {
    format!("/methods/{method}/compare?old={}&new={}", old.id, new.id)
}

fn asked(visit: &Visit, name: &str, method: i64) -> Result<Version, Failure> {
    let id = visit.query.get(name).and_then(|text| text.parse().ok());
    let id = id.ok_or_else(|| Failure::BadRequest("Name the two versions to compare.".to_string()))?;
    let version = visit.read(|reader| store::version::get(reader, Versioned::Method, id))?;
    if version.parent == method { Ok(version) } else { Err(Failure::missing("such version of it")) }
}

/// `Settings, speed rpm` as the head of a line.
fn capitalised(words: &str) -> String {
    let mut letters = words.chars();
    letters.next().map_or(String::new(), |first| first.to_uppercase().collect::<String>() + letters.as_str())
}

/// `?old=…&new=…`.
pub(super) fn compare(visit: &Visit) -> Outcome {
    visit.knows_query(&["old", "new"])?;
    let id = visit.id("id")?;
    let method = visit.read(|reader| store::method::get(reader, id))?;
    let (old, new) = (asked(visit, "old", id)?, asked(visit, "new", id)?);
    let parts = parts_that_differ(&old.content, &new.content).unwrap_or_default();
    let lead = format!(
        "{} between version {} ({}) and version {} ({}).",
        show::counted(parts.len(), "difference", "differences"),
        old.number,
        old.state.words(),
        new.number,
        new.state.words()
    );
    let heads = ["Field", &format!("Version {}", old.number), &format!("Version {}", new.number)];
    let table = Table::new("Only what differs", &heads, "The two versions have the same content.").rows(
        parts
            .into_iter()
            .map(|(what, was, is)| vec![Cell::text(capitalised(&what)), Cell::Was(was), Cell::Is(is)]),
    );
    let reasons = [&old, &new].map(|one| format!("Version {}: {}", one.number, one.reason)).to_vec();
    let title = format!("{}: versions {} and {}", method.code, old.number, new.number);
    let shell = super::shell(visit, &title)
        .crumb("/methods", "Methods")
        .crumb(format!("/methods/{id}"), &method.code);
    Record::new(shell, lead).table("", table).sentences("Why each exists", reasons).show()
}
