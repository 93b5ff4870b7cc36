//! The whole record on one page, for reading and for paper: what was asked, what was done, changed values with a mark
//! and a footnote (X4).

use askama::Template;

use super::super::master::{scaling, step_notes};
use super::super::page::Shell;
use super::super::part::Signatures;
use super::super::reply::{Outcome, page_with};
use super::super::show;
use super::super::table::Table;
use super::super::visit::Visit;
use super::close::state_words;
use super::record::next_words;
use super::step::is_hidden;
use crate::acts::batch::Loaded;
use crate::domain::batch::{Entry, EntryKind, Verdict, standing, yield_of};
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::subject::Kind;
use crate::store;

struct Line {
    at: String,
    what: String,
    value: String,
    is_outside: bool,
    limits: String,
    by: String,
    note: String,
    /// The footnote of a changed value.
    mark: Option<usize>,
}

struct StepPart {
    words: String,
    instruction: String,
    asks: String,
    lines: Vec<Line>,
}

struct PhasePart {
    name: String,
    steps: Vec<StepPart>,
    yielded: String,
}

#[derive(Template)]
#[template(path = "batch/whole.html")]
struct WholePage {
    shell: Shell,
    lead: String,
    id: i64,
    number: String,
    facts: Vec<(String, String)>,
    digest: String,
    amounts: Table,
    computed: Vec<(String, String)>,
    phases: Vec<PhasePart>,
    footnotes: Vec<String>,
    deviations: Vec<String>,
    events: Vec<String>,
    signatures: Signatures,
}

/// Collects the footnotes while the record is walked.
struct Walk<'a> {
    visit: &'a Visit,
    loaded: &'a Loaded,
    footnotes: Vec<String>,
}

impl Walk<'_> {
    /// What an entry was before, each time, as one footnote.
    fn footnote(&mut self, one: &Entry, is_masked: bool) -> Option<usize> {
        let mut parts = Vec::new();
        let mut at = one;
        while let Some(was) = at.supersedes.and_then(|id| self.loaded.entries.iter().find(|one| one.id == id))
        {
            let value = if is_masked { "hidden".to_string() } else { was.shown() };
            let when = show::instant(&was.at, self.visit.at.zone);
            let changed = show::instant(&at.at, self.visit.at.zone);
            let why = at.reason.clone().unwrap_or_default();
            parts.push(format!(
                "was {value}, recorded by {} {when}; changed by {} {changed} because: {why}",
                was.by, at.by
            ));
            at = was;
        }
        if parts.is_empty() {
            return None;
        }
        self.footnotes.push(format!("{}: {}", one.label(), parts.join("; ")));
        Some(self.footnotes.len())
    }

    fn line(&mut self, one: &Entry, hides: bool) -> Line {
        let is_masked = hides && one.kind == EntryKind::Weighing;
        let mut notes = Vec::new();
        if !one.weighed.balance.is_empty() {
            if !is_masked && !one.weighed.gross.is_empty() {
                notes.push(format!("gross {}, tare {}", one.weighed.gross, one.weighed.tare));
            }
            notes.push(format!("balance {}: {}", one.weighed.balance, one.weighed.balance_check));
            if !is_masked && !one.weighed.formula.is_empty() {
                notes.push(one.weighed.formula.clone());
            }
        }
        notes.extend(one.equipment_code.iter().map(|code| format!("in {code}")));
        notes.extend(one.deviation_number.iter().map(|number| format!("deviation {number}")));
        if one.happened_at.is_some() && one.supersedes.is_none() {
            let entered = show::instant(&one.at, self.visit.at.zone);
            let why = one.reason.clone().unwrap_or_default();
            notes.push(format!("entered late, {entered}, because {why}"));
        }
        let run = if one.run > 1 { format!(" (run {})", one.run) } else { String::new() };
        Line {
            at: show::instant(one.instant(), self.visit.at.zone),
            what: format!("{}{run}", one.label()),
            value: if is_masked { "hidden".to_string() } else { one.shown() },
            is_outside: one.verdict == Verdict::Outside && !is_masked,
            limits: if one.limits == "no limit" || is_masked { String::new() } else { one.limits.clone() },
            by: one.by.clone(),
            note: notes.join("; "),
            mark: self.footnote(one, is_masked),
        }
    }

    fn step(&mut self, number: usize, account: i64) -> Result<StepPart, Failure> {
        let facts = self.loaded.facts(number)?;
        let hides = is_hidden(&facts, account);
        let step = facts.planned.step;
        let own: Vec<&Entry> = standing(facts.entries).into_iter().filter(|one| one.step == number).collect();
        let lines = own.into_iter().map(|one| self.line(one, hides)).collect();
        Ok(StepPart {
            words: facts.planned.words(),
            instruction: step.instruction.clone(),
            asks: step_notes(step).join("; "),
            lines,
        })
    }
}

fn yield_words(visit: &Visit, loaded: &Loaded, at: usize) -> String {
    let Some(found) = yield_of(&loaded.yields, at) else { return String::new() };
    let unit = &found.unit;
    let checked = match &found.checked {
        Some((by, at)) => format!("checked by {by}, {}", show::instant(at, visit.at.zone)),
        None => "not checked yet".to_string(),
    };
    let deviation = found.deviation_number.map(|number| format!(", deviation {number}")).unwrap_or_default();
    format!(
        "Yield: actual {} {unit} of theoretical {} {unit}, {} % ({}, {}{deviation}); with {} {unit} samples, {} {unit} \
         rejects, {} {unit} waste accountable {} %. Worked out by {}, {}; {checked}.",
        found.actual,
        found.theoretical,
        found.percent,
        found.limits,
        found.verdict.words(),
        found.samples,
        found.rejects,
        found.waste,
        found.accountable_percent,
        found.by,
        show::instant(&found.at, visit.at.zone)
    )
}

fn facts(visit: &Visit, loaded: &Loaded) -> Vec<(String, String)> {
    let content = &loaded.record.content;
    vec![
        ("Lot".to_string(), loaded.record.lot_number.clone()),
        ("Product".to_string(), content.product.clone()),
        ("Presentation".to_string(), content.presentation.clone()),
        ("Batch size".to_string(), format!("{}\u{202f}{}", content.size, content.size_unit)),
        ("Copied from".to_string(), content.formulation.clone()),
        ("Digest of the formulation version".to_string(), show::digest(&content.formulation_digest)),
        (
            "Started".to_string(),
            format!(
                "{}, {}",
                loaded.record.started_by,
                show::instant(&loaded.record.started_at, visit.at.zone)
            ),
        ),
    ]
}

/// Every phase with its steps, and the footnotes of what was changed.
fn walked(visit: &Visit, loaded: &Loaded, account: i64) -> Result<(Vec<PhasePart>, Vec<String>), Failure> {
    let content = &loaded.record.content;
    let mut walk = Walk { visit, loaded, footnotes: Vec::new() };
    let mut phases = Vec::new();
    for (at, phase) in content.master.phases.iter().enumerate() {
        let numbers = content.steps().into_iter().filter(|one| one.phase == at).map(|one| one.number);
        let steps = numbers.map(|number| walk.step(number, account)).collect::<Result<_, Failure>>()?;
        phases.push(PhasePart { name: phase.name.clone(), steps, yielded: yield_words(visit, loaded, at) });
    }
    Ok((phases, walk.footnotes))
}

pub fn page(visit: &Visit) -> Outcome {
    visit.knows_query(&[])?;
    let (id, account) = (visit.id("id")?, visit.actor()?.account);
    let (loaded, deviations, events, signed, canonical) = visit.read(|reader| {
        let loaded = Loaded::of(reader, id)?;
        let deviations = store::deviation::of_lot(reader, loaded.record.lot)?;
        let signed = store::signature::of(reader, Kind::BatchRecord, id)?;
        let canonical = store::batch::canonical(reader, id, signed.last().map(|one| one.act))?;
        Ok((loaded, deviations, store::batch::events(reader, id)?, signed, canonical))
    })?;
    let content = &loaded.record.content;
    let (phases, footnotes) = walked(visit, &loaded, account)?;
    let title = format!("Whole record {}", loaded.record.number);
    let lead = match footnotes.len() {
        0 => format!("{} No value was changed since it was recorded.", next(&loaded)),
        count => format!(
            "{} {} changed since recorded: each has a mark and a footnote.",
            next(&loaded),
            show::counted(count, "value was", "values were")
        ),
    };
    let whole = WholePage {
        shell: Shell::of(visit, &title)
            .crumb("/batches", "Batches")
            .crumb(format!("/batches/{id}"), loaded.record.number.as_str())
            .print(&state_words(&loaded), &loaded.record.digest),
        lead,
        id,
        number: loaded.record.number.clone(),
        facts: facts(visit, &loaded),
        digest: show::digest(&loaded.record.digest),
        amounts: scaling::table(&content.scaled, &content.master),
        computed: scaling::facts(&content.scaled),
        phases,
        footnotes,
        deviations: deviations
            .iter()
            .map(|one| format!("Deviation {}: {}. {}", one.facts.number, one.title, one.described))
            .collect(),
        events: events
            .into_iter()
            .map(|one| {
                format!(
                    "{} by {}, {}{}",
                    one.kind,
                    one.by,
                    show::instant(&one.at, visit.at.zone),
                    one.why.map(|why| format!(": {why}")).unwrap_or_default()
                )
            })
            .collect(),
        signatures: Signatures::of(&signed, &sha256_hex(canonical.as_bytes()), visit.at.zone),
    };
    page_with(200, &whole)
}

fn next(loaded: &Loaded) -> String {
    match loaded.record.is_closed {
        true => "The record is closed.".to_string(),
        false => next_words(&loaded.record.content, &loaded.entries, &loaded.yields),
    }
}
