//! One formulation version: content, sum, signatures, the lots made to it.

use super::super::form::Form;
use super::super::page::Shell;
use super::super::part::Trail;
use super::super::record::Record;
use super::super::reply::Outcome;
use super::super::show;
use super::super::table::{Cell, Table};
use super::super::version as versions;
use super::super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::formulation::{FormulationContent, PHYSICAL, is_sum_off, sum_words};
use crate::domain::moment::date_shown;
use crate::domain::subject::{Kind, Subject};
use crate::domain::version::{VersionState, Versioned};
use crate::store;
use crate::store::formulation::{Formulation, Lot};
use crate::store::version::Version;

const OF: Versioned = Versioned::Formulation;

pub fn version(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let version = visit.read(|reader| store::version::get(reader, OF, id))?;
    let form = versions::next_form(visit, OF, &version, &format!("/formulation-versions/{id}"))?;
    version_page(200, visit, &version, form)
}

pub fn sign(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let path = format!("/formulation-versions/{id}");
    versions::sign(visit, OF, id, &path, &acts::formulation::check, |status, form| {
        let version = visit.read(|reader| store::version::get(reader, OF, id))?;
        version_page(status, visit, &version, Some(form))
    })
}

fn ingredients(content: &FormulationContent) -> Table {
    let heads = ["Ingredient", "Code", "Function", "Quantity#"];
    let caption = format!("Quantities per {}", content.quantity_basis);
    let empty = "No ingredient is recorded: an imported version names its formulation only.";
    Table::new(&caption, &heads, empty).rows(content.ingredients.iter().map(|one| {
        vec![
            Cell::link(format!("/materials/{}", one.material), &one.name),
            Cell::text(&one.material_code),
            Cell::text(&one.function),
            Cell::number(one.words()),
        ]
    }))
}

fn made_to(lots: &[Lot], version: &Version) -> Table {
    let empty = if version.is_approved() {
        "No lot is made to it yet."
    } else {
        "No lot is made to it: only an approved version can be made."
    };
    let rows = lots.iter().filter(|lot| lot.formulation_version == version.id).map(|lot| {
        vec![
            Cell::link(format!("/lots/{}", lot.id), &lot.number),
            Cell::or_missing(lot.made_on.map(date_shown), "not stated"),
        ]
    });
    Table::new("The version is locked by these lots", &["Lot", "Made on"], empty).rows(rows)
}

fn state_words(version: &Version) -> &'static str {
    match version.state {
        VersionState::Draft => "Draft — not signed",
        VersionState::SignedByAuthor => "Signed by the author — not approved",
        VersionState::Approved => "Approved",
        VersionState::Imported => "Imported, not approved here",
    }
}

fn attention(version: &Version, content: &FormulationContent) -> &'static str {
    if version.state == VersionState::Draft && is_sum_off(content) {
        "Look at the sum before signing: "
    } else {
        ""
    }
}

fn physical_facts(content: &FormulationContent) -> Vec<(String, String)> {
    let values = content.physical.values();
    PHYSICAL
        .iter()
        .zip(values)
        .map(|((_, label), value)| {
            (label.to_string(), value.map_or("not stated".to_string(), |value| value.to_string()))
        })
        .collect()
}

/// What else can be done with the version: change the draft, compare with the one before.
fn with_links(
    record: Record,
    visit: &Visit,
    version: &Version,
    owner: &Formulation,
    all: &[Version],
) -> Record {
    let before = all.iter().find(|other| other.number < version.number);
    let record = match before {
        Some(before) => record.quiet_link_if(
            true,
            format!("/formulations/{}/compare?old={}&new={}", owner.id, before.id, version.id),
            &format!("Compare with version {}", before.number),
        ),
        None => record,
    };
    let may_write = visit.may(Act::DraftFormulationVersion) && version.state == VersionState::Draft;
    record.quiet_link_if(may_write, format!("/formulation-versions/{}/edit", version.id), "Change the draft")
}

fn version_page(status: u16, visit: &Visit, version: &Version, form: Option<Form>) -> Outcome {
    let (owner, all, lots, lines) = visit.read(|reader| {
        Ok((
            store::formulation::get(reader, version.parent)?,
            store::version::of_parent(reader, OF, version.parent)?,
            store::formulation::lots(reader, version.parent)?,
            store::trail::of_subject(reader, Subject::new(Kind::FormulationVersion, version.id))?,
        ))
    })?;
    if version.state == VersionState::Imported {
        return imported_page(status, visit, version, &owner, (&lots, Trail::of(&lines, visit.at.zone)));
    }
    let content: FormulationContent = version.read()?;
    let title = format!("{} version {}", owner.code, version.number);
    let mut shell = Shell::of(visit, &title)
        .crumb("/formulations", "Formulations")
        .crumb(format!("/formulations/{}", owner.id), owner.code.as_str())
        .print(state_words(version), &version.digest());
    if let Some(form) = &form {
        shell = shell.with_errors(form);
    }
    let lead = format!("{}{}.", attention(version, &content), sum_words(&content));
    let record = Record::new(shell, lead)
        .fact("State", state_words(version))
        .fact("Why it exists", &version.reason)
        .fact(
            "Written by",
            format!("{}, {}", version.author_name, show::instant(&version.written_at, visit.at.zone)),
        )
        .fact("Dosage form", &content.dosage_form)
        .fact("Intended state", content.intended_state.words());
    let note = signing_note(visit, version)?;
    let record = with_links(record, visit, version, &owner, &all).table("Ingredients", ingredients(&content));
    super::super::master::sections(record, visit, version, &content)
        .more_facts("Physical data", physical_facts(&content))
        .form("Next step", note, form)
        .signatures(versions::signatures(visit, OF, version)?)
        .table("Lots made to this version", made_to(&lots, version))
        .trail(Trail::of(&lines, visit.at.zone))
        .show_with(status)
}

/// What an imported formulation is: a name under which results stand, and nothing more.
fn imported_page(
    status: u16,
    visit: &Visit,
    version: &Version,
    owner: &Formulation,
    (lots, trail): (&[Lot], Trail),
) -> Outcome {
    let from = visit.read(|reader| store::formulation::import_of(reader, version.id))?;
    let shell = Shell::of(visit, &format!("{} (imported)", owner.code))
        .crumb("/formulations", "Formulations")
        .crumb(format!("/formulations/{}", owner.id), owner.code.as_str());
    let lead = "A formulation as the imported file names it, not observed here. Its recipe is not recorded and nobody \
         signed it here; its results can be read and charted. No lot, protocol, release or conclusion can rest on it.";
    let mut record = Record::new(shell, lead.to_string()).fact("Name in the file", &owner.name).fact(
        "Imported by",
        format!("{}, {}", version.author_name, show::instant(&version.written_at, visit.at.zone)),
    );
    if let Some((import, file)) = from {
        record = record.fact("File", &file).quiet_link_if(true, format!("/imports/{import}"), "The import");
    }
    let rows = lots.iter().filter(|lot| lot.formulation_version == version.id).map(|lot| {
        vec![
            Cell::link(format!("/lots/{}", lot.id), &lot.number),
            Cell::or_missing(lot.made_on.map(date_shown), "not stated"),
        ]
    });
    let table = Table::new("As the file names them", &["Lot", "Made on"], "No lot came with it.").rows(rows);
    record.table("Its imported lots", table).trail(trail).show_with(status)
}

fn signing_note(visit: &Visit, version: &Version) -> Result<&'static str, Failure> {
    let is_author = visit.actor()?.account == version.author;
    Ok(if is_author {
        "Signing freezes the version. A second person approves it."
    } else {
        "You approve what stands above."
    })
}
