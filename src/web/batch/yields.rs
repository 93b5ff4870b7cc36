//! The yield of a phase: worked out by one person, checked by a second who types what came out.

use super::super::field::{Entry, Field};
use super::super::form::{self, Form, Typed};
use super::super::page::Shell;
use super::super::record::Record;
use super::super::reply::Outcome;
use super::super::show;
use super::super::table::{Cell, Table};
use super::super::visit::Visit;
use super::forms::with_words;
use crate::acts;
use crate::acts::batch::Loaded;
use crate::acts::batch::yields::Entered;
use crate::domain::act::Act;
use crate::domain::batch::yields::NewYield;
use crate::domain::batch::{PhaseYield, yield_of};
use crate::domain::failure::Failure;
use crate::domain::master::TheoreticalYield;
use crate::domain::typed::NumberRule;

/// Place of the phase, counted from 0, with its name and theory.
struct Asked {
    loaded: Loaded,
    at: usize,
    name: String,
    theory: TheoreticalYield,
}

fn asked(visit: &Visit) -> Result<Asked, Failure> {
    let id = visit.id("id")?;
    let at = usize::try_from(visit.id("phase")? - 1).unwrap_or(usize::MAX);
    let loaded = visit.read(|reader| Loaded::of(reader, id))?;
    let missing = || Failure::missing("yield of a phase with this number");
    let phase = loaded.record.content.phase(at).ok_or_else(missing)?;
    let (name, theory) = (phase.name.clone(), phase.theory.clone().ok_or_else(missing)?);
    Ok(Asked { loaded, at, name, theory })
}

impl Asked {
    fn path(&self) -> String {
        format!("/batches/{}/yields/{}", self.loaded.record.id, self.at + 1)
    }

    fn found(&self) -> Option<&PhaseYield> {
        yield_of(&self.loaded.yields, self.at)
    }

    fn form(&self, visit: &Visit) -> Result<Form, Failure> {
        let unit = &self.theory.unit;
        let seen = self.found().map_or(0, |found| found.id);
        let field = |name: &str, label: &str, hint: &str| {
            Field::new(name, &format!("{label}, {unit}"), Entry::Decimal).width(12).hint(hint)
        };
        let form = Form::new(visit, &self.path(), "Record the yield")?
            .field(field("actual", "Actual yield", "What is good."))
            .field(field("samples", "Samples", "Empty means none."))
            .field(field("rejects", "Rejects", "Empty means none."))
            .field(field("waste", "Known waste", "Empty means none."))
            .hide("seen", seen.to_string());
        let asks = visit.form.get("deviation").is_some();
        let form = if asks { with_words(form, "deviation") } else { form };
        Ok(if self.found().is_some() { form.quiet() } else { form })
    }

    fn check_form(&self, visit: &Visit) -> Result<Form, Failure> {
        Ok(Form::new(visit, &format!("{}/check", self.path()), "Checked: the calculation is right")?.field(
            Field::new("percent", "Yield that you worked out, %", Entry::Decimal)
                .width(12)
                .hint("100 × actual ÷ theoretical; one decimal is enough."),
        ))
    }

    fn lead(&self) -> String {
        let theoretical = (self.loaded.record.content.size * self.theory.per_size_unit).normalize();
        format!(
            "Theoretical yield {theoretical}\u{202f}{}; {} to {}\u{202f}% of it is allowed.",
            self.theory.unit, self.theory.least_percent, self.theory.most_percent
        )
    }
}

/// What can be accounted for, with the parts it is made of beside the actual yield.
fn accountable(one: &PhaseYield) -> Cell {
    let parts =
        format!("samples {}, rejects {}, waste {}\u{202f}{}", one.samples, one.rejects, one.waste, one.unit);
    Cell::noted(format!("{}\u{202f}%", one.accountable_percent), parts)
}

fn table(visit: &Visit, yields: &[&PhaseYield]) -> Table {
    let heads = ["When", "Actual#", "Theoretical#", "Yield#", "Accountable", "Limits", "By", "Checked by"];
    Table::new("Oldest first; the last one counts", &heads, "No yield is recorded yet.").rows(
        yields.iter().map(|one| {
            let with = |value: rust_decimal::Decimal| Cell::number(format!("{value}\u{202f}{}", one.unit));
            let percent = |value: rust_decimal::Decimal| Cell::number(format!("{value}\u{202f}%"));
            let limits = match one.deviation_number {
                Some(number) => Cell::Link {
                    path: format!("/deviations/{}", one.deviation.unwrap_or_default()),
                    words: format!("{}, deviation {number}", one.verdict.words()),
                    note: one.limits.clone(),
                },
                None => Cell::noted(one.verdict.words(), one.limits.clone()),
            };
            vec![
                Cell::text(show::instant(&one.at, visit.at.zone)),
                with(one.actual),
                with(one.theoretical),
                percent(one.percent),
                accountable(one),
                limits,
                Cell::text(&one.by),
                Cell::or_missing(one.checked.as_ref().map(|(by, _)| by.clone()), "not checked yet"),
            ]
        }),
    )
}

fn yield_page(status: u16, visit: &Visit, asked: &Asked, failed: Option<Form>) -> Outcome {
    let account = visit.actor()?.account;
    let mut shell = Shell::of(visit, &format!("Yield of {}", asked.name))
        .crumb("/batches", "Batches")
        .crumb(format!("/batches/{}", asked.loaded.record.id), asked.loaded.record.number.as_str())
        .bench();
    if let Some(form) = &failed {
        shell = shell.with_errors(form);
    }
    let of_phase: Vec<&PhaseYield> = asked.loaded.yields.iter().filter(|one| one.phase == asked.at).collect();
    let is_open = !asked.loaded.record.is_closed && asked.loaded.record.lot_decision.is_none();
    let (mut record_form, mut check_form) = (None, None);
    if is_open && visit.may(Act::RecordYield) {
        record_form = Some(asked.form(visit)?);
    }
    let is_others = asked.found().is_some_and(|found| found.checked.is_none() && found.account != account);
    if is_open && is_others && visit.may(Act::CheckYield) {
        check_form = Some(asked.check_form(visit)?);
    }
    match failed {
        Some(form) if form.action.ends_with("/check") => check_form = Some(form),
        Some(form) => record_form = Some(form),
        None => {}
    }
    let heading = if of_phase.is_empty() { "Record it" } else { "Record it again" };
    Record::new(shell, asked.lead())
        .table("", table(visit, &of_phase))
        .form("Check it", "Work it out from the figures above, then type what came out.", check_form)
        .form(heading, "", record_form)
        .show_with(status)
}

pub fn page(visit: &Visit) -> Outcome {
    visit.knows_query(&[])?;
    yield_page(200, visit, &asked(visit)?, None)
}

fn typed_yield(typed: &mut Typed<'_>) -> Option<Entered> {
    let rule = |label: &str| NumberRule::between(label, -10_000_000, 100_000_000);
    let actual = typed.decimal("actual", &rule("Actual yield"));
    let mut part = |name: &str, label: &str| {
        typed
            .maybe_decimal(name, &rule(label))
            .map(|found| found.map(|number| number.value).unwrap_or_default())
    };
    let (samples, rejects, waste) =
        (part("samples", "Samples"), part("rejects", "Rejects"), part("waste", "Known waste"));
    let described = Some(typed.raw("deviation")).filter(|text| !text.is_empty());
    let seen = typed.raw("seen").parse().unwrap_or_default();
    let figures = NewYield { actual: actual?.value, samples: samples?, rejects: rejects?, waste: waste? };
    Some(Entered { figures, described, seen })
}

pub fn record(visit: &Visit) -> Outcome {
    let found = asked(visit)?;
    let record = found.loaded.record.id;
    form::submit(
        visit,
        found.form(visit)?,
        typed_yield,
        |actor, entered| acts::batch::yields::record(visit.db(), actor, record, found.at, &entered),
        |_| found.path(),
        |status, mut form| {
            if status == 409 && form.stale.is_none() && wants_words(&form) {
                form = with_words(form, "deviation");
            }
            let fresh = asked(visit)?;
            let seen = fresh.found().map_or(0, |one| one.id).to_string();
            form.hidden.retain(|(name, _)| name != "seen");
            yield_page(status, visit, &fresh, Some(form.hide("seen", seen)))
        },
    )
}

/// A refusal that words would lift.
fn wants_words(form: &Form) -> bool {
    form.refusal.as_ref().is_some_and(|sentence| sentence.contains("opens a deviation"))
        || form.fields().any(|field| field.name == "deviation")
}

pub fn check(visit: &Visit) -> Outcome {
    let found = asked(visit)?;
    let record = found.loaded.record.id;
    form::submit(
        visit,
        found.check_form(visit)?,
        |typed| typed.decimal("percent", &NumberRule::between("Yield", 0, 1000)).map(|number| number.value),
        |actor, percent| acts::batch::yields::check(visit.db(), actor, record, found.at, percent),
        |()| format!("/batches/{record}"),
        |status, form| yield_page(status, visit, &found, Some(form)),
    )
}
