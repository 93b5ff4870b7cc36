//! Labels to print: what stands on them in words, and the same number as QR code and as Code 128.

use askama::Template;

use super::page::Shell;
use super::reply::{Outcome, page};
use super::route::{Route, get};
use super::show;
use super::visit::Visit;
use crate::domain::moment::date_shown;
use crate::report::code::{Code, bars, qr};
use crate::store;

pub const ROUTES: &[Route] = &[
    get("/material-lots/{id}/label", material_lot),
    get("/equipment/{id}/label", equipment),
    get("/lots/{id}/label", lot),
    get("/studies/{id}/labels/codes", study),
];

/// One label.
struct Label {
    /// What a scan gives.
    code: String,
    lines: Vec<String>,
    qr: Option<Code>,
    bars: Option<Code>,
}

impl Label {
    fn new(code: &str, lines: Vec<String>) -> Label {
        Label { code: code.to_string(), lines, qr: qr(code), bars: bars(code) }
    }
}

#[derive(Template)]
#[template(path = "label/labels.html")]
struct LabelsPage {
    shell: Shell,
    labels: Vec<Label>,
}

fn show_labels(shell: Shell, labels: Vec<Label>) -> Outcome {
    page(&LabelsPage { shell, labels })
}

fn material_lot(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let lot = visit.read(|reader| store::material_lot::get(reader, id))?;
    let facts = &lot.facts;
    let days = [("Retest", facts.retest_on), ("Expires", facts.expires_on)];
    let mut lines = vec![
        format!("{} ({})", facts.material_name, lot.material_code),
        format!("{} lot {}", lot.supplier, lot.supplier_lot),
        format!("Received {}", date_shown(lot.received_on)),
    ];
    lines.extend(days.iter().filter_map(|(what, day)| day.map(|day| format!("{what} {}", date_shown(day)))));
    let shell = Shell::of(visit, &format!("Label of {}", facts.number))
        .crumb("/material-lots", "Material lots")
        .crumb(format!("/material-lots/{id}"), &facts.number);
    show_labels(shell, vec![Label::new(&facts.number, lines)])
}

fn equipment(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let facts = visit.read(|reader| store::equipment::facts(reader, id))?;
    let lines = vec![facts.name.clone(), facts.class.clone(), facts.location.clone()];
    let shell = Shell::of(visit, &format!("Label of {}", facts.code))
        .crumb("/equipment", "Equipment")
        .crumb(format!("/equipment/{id}"), &facts.code);
    show_labels(shell, vec![Label::new(&facts.code, lines)])
}

/// The label of a packed container: a specimen of it belongs into the batch record (21 CFR 211.188 (b)(8)).
fn lot(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let lot = visit.read(|reader| store::lot::get(reader, id))?;
    let expiry = lot
        .expires_on
        .map_or("Expiry: not decided yet".to_string(), |day| format!("Use by {}", date_shown(day)));
    let lines = vec![
        format!("{} {}", lot.product_code, lot.product_name),
        lot.presentation_words.clone(),
        format!("Lot {}", lot.number),
        expiry,
    ];
    let shell = Shell::of(visit, &format!("Label of {}", lot.number))
        .crumb("/lots", "Lots")
        .crumb(format!("/lots/{id}"), &lot.number);
    show_labels(shell, vec![Label::new(&lot.number, lines)])
}

fn study(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (study, containers) =
        visit.read(|reader| Ok((store::study::get(reader, id)?, store::container::of_study(reader, id)?)))?;
    let labels = containers.iter().map(|one| {
        let lines = vec![
            format!("Lot {}", one.lot_number),
            format!("{}, {}", one.condition_name, one.orientation),
            format!("Kept for: {}", one.purpose),
        ];
        Label::new(&one.label, lines)
    });
    let title = format!("Labels of {}, with codes", study.number);
    let lead = show::counted(containers.len(), "container", "containers");
    let shell = Shell::of(visit, &title)
        .crumb("/studies", "Studies")
        .crumb(format!("/studies/{id}"), &study.number)
        .crumb(format!("/studies/{id}/labels"), lead);
    show_labels(shell, labels.collect())
}
