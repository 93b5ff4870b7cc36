//! Starting a study: lot, protocol, then a check page that shows all of it before anything is made.

use askama::Template;

use super::super::field::{Entry, Field};
use super::super::form::{self, Form, Typed};
use super::super::page::Shell;
use super::super::reply::{Outcome, page, page_with};
use super::super::visit::Visit;
use crate::acts;
use crate::acts::study::Prepared;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::protocol::cost::minutes_words;
use crate::domain::role::Role;
use crate::domain::study::{NewStudy, PlannedArm};
use crate::domain::working_days::WorkingDays;
use crate::store;

#[derive(Template)]
#[template(path = "study/choose.html")]
struct ChoosePage {
    shell: Shell,
    lead: String,
    action: &'static str,
    lot: Option<i64>,
    field: Field,
    button: &'static str,
    is_empty: bool,
}

/// First the lot, then one of the approved protocols of its presentation.
pub(super) fn choose_page(visit: &Visit) -> Outcome {
    visit.needs_role(&[Role::LabManager], Act::StartStudy)?;
    visit.knows_query(&["lot"])?;
    let asked = visit.query.get("lot").and_then(|text| text.parse::<i64>().ok());
    let shell = Shell::of(visit, "Start a study").crumb("/studies", "Studies");
    let Some(id) = asked else {
        let lots = visit.read(|reader| store::lot::before(reader, None, 200))?;
        let lots = lots.into_iter().filter(|lot| lot.imported.is_none());
        let choices = lots.map(|lot| {
            (lot.id.to_string(), format!("{}: {}, {}", lot.number, lot.product_name, lot.presentation_words))
        });
        let field = Field::new("lot", "Lot", Entry::Select).choices(choices);
        return page(&ChoosePage {
            shell,
            lead: "Step 1 of 3: which lot goes on study?".to_string(),
            action: "/studies/new",
            lot: None,
            is_empty: field.choices.is_empty(),
            field,
            button: "Go on to the protocol",
        });
    };
    let (lot, protocols) = visit.read(|reader| {
        let lot = store::lot::get(reader, id)?;
        let protocols = store::protocol::approved_of(reader, lot.presentation)?;
        Ok((lot, protocols))
    })?;
    let choices = protocols.into_iter().map(|(id, words)| (id.to_string(), words));
    let field = Field::new("protocol_version", "Protocol version", Entry::Select)
        .choices(choices)
        .hint("Approved versions of the lot's presentation.");
    page(&ChoosePage {
        shell,
        lead: format!("Step 2 of 3: which protocol does lot {} follow?", lot.number),
        action: "/studies/new/check",
        lot: Some(id),
        is_empty: field.choices.is_empty(),
        field,
        button: "Go on to the check page",
    })
}

#[derive(Template)]
#[template(path = "study/check.html")]
struct CheckPage {
    shell: Shell,
    lead: String,
    warnings: Vec<String>,
    arms: Vec<ArmPreview>,
    pulls: usize,
    containers: u32,
    minutes: String,
    container_word: String,
    form: Form,
}

struct ArmPreview {
    words: String,
    is_contingent: bool,
    containers: u32,
    rows: Vec<(String, String, String, u32, String)>,
    /// Ages whose window has no open day, or whose due day is a closed one.
    closed: Vec<String>,
}

/// `12 months is due on a closed day`, and what is left of its window.
fn closed_words(pull: &crate::domain::study::PlannedPull, working: &WorkingDays) -> Option<String> {
    let (first, last) = (pull.window.earliest_on, pull.window.latest_on);
    let closed = working.closed_between(first, last);
    let is_all = first.iter_days().take_while(|day| *day <= last).count() == closed.len();
    let (age, due) = (pull.age.words(), date_shown(pull.due_on));
    match (is_all, working.is_closed(pull.due_on)) {
        (true, _) => Some(format!("{age}: every day of its window is closed ({}).", pull.window.words())),
        (false, true) => Some(format!("{age}: due on a closed day, {due}; its window has open days.")),
        _ => None,
    }
}

fn asked_study(visit: &Visit) -> Result<NewStudy, Failure> {
    let number = |name: &str| {
        let text = visit.form.get(name).or_else(|| visit.query.get(name)).unwrap_or_default();
        text.parse::<i64>()
            .map_err(|_| Failure::missing(format!("{} with this number", name.replace('_', " "))))
    };
    Ok(NewStudy {
        number: visit.read(store::study::next_number)?,
        lot: number("lot")?,
        protocol_version: number("protocol_version")?,
        started_on: visit.at.date(),
        chambers: Vec::new(),
    })
}

fn check_form(visit: &Visit, new: &NewStudy, prepared: &Prepared) -> Result<Form, Failure> {
    visit.needs_role(&[Role::LabManager], Act::StartStudy)?;
    let chambers = visit.read(store::chamber::all)?;
    let mut form = Form::new(visit, "/studies/new/check", "Start the study")?
        .field(Field::new("number", "Study number", Entry::Text).width(12).value(new.number.clone()))
        .field(
            Field::new("started_on", "Time zero", Entry::Date)
                .width(12)
                .value(date_shown(new.started_on))
                .hint("The day the containers are placed; all due dates count calendar months from it."),
        )
        .hide("lot", new.lot.to_string())
        .hide("protocol_version", new.protocol_version.to_string());
    for (place, arm) in (1..).zip(&prepared.facts.arms) {
        let fitting = chambers.iter().filter(|chamber| chamber.condition == arm.condition);
        let choices: Vec<(String, String)> = fitting
            .map(|chamber| (chamber.id.to_string(), format!("{}, {}", chamber.code, chamber.location)))
            .collect();
        let only = if choices.len() == 1 { choices[0].0.clone() } else { String::new() };
        let hint =
            if choices.is_empty() { "No chamber keeps this condition; add one under Chambers." } else { "" };
        let label = format!("Chamber for {}", arm.words);
        form = form.field(
            Field::new(&format!("chamber.{place}"), &label, Entry::Select)
                .choices(choices)
                .value(only)
                .hint(hint),
        );
    }
    Ok(form)
}

fn preview(planned: &PlannedArm, words: &str, working: &WorkingDays) -> ArmPreview {
    let row = |pull: &crate::domain::study::PlannedPull| {
        (
            pull.age.words(),
            date_shown(pull.due_on),
            pull.window.words(),
            pull.cost.containers,
            minutes_words(pull.cost.minutes),
        )
    };
    ArmPreview {
        words: words.to_string(),
        is_contingent: planned.arm.is_contingent,
        containers: planned.container_count(),
        rows: planned.pulls.iter().map(row).collect(),
        closed: planned.pulls.iter().filter_map(|pull| closed_words(pull, working)).collect(),
    }
}

fn show(status: u16, visit: &Visit, prepared: &Prepared, form: Form) -> Outcome {
    let shell = Shell::of(visit, "Check before the study starts")
        .crumb("/studies", "Studies")
        .crumb(format!("/lots/{}", prepared.lot.id), prepared.lot.number.clone())
        .with_errors(&form);
    let planned = prepared.plan.iter().filter(|arm| !arm.arm.is_contingent).flat_map(|arm| &arm.pulls);
    let minutes = planned.clone().map(|pull| pull.cost.minutes).sum();
    let working = visit.read(store::setting::working_days)?;
    let names = prepared.facts.arms.iter().map(|arm| arm.words.as_str());
    let page = CheckPage {
        shell,
        lead: format!("Step 3 of 3: lot {} on its protocol. Nothing is made yet.", prepared.lot.number),
        warnings: prepared.warnings.clone(),
        pulls: planned.count(),
        containers: prepared.plan.iter().map(PlannedArm::container_count).sum(),
        minutes: minutes_words(minutes),
        arms: prepared.plan.iter().zip(names).map(|(arm, words)| preview(arm, words, &working)).collect(),
        container_word: prepared.lot.container_word.clone(),
        form,
    };
    page_with(status, &page)
}

/// With the chambers that are chosen by themselves, so that the page warns before the study starts.
fn prepared(visit: &Visit, new: &NewStudy) -> Result<Prepared, Failure> {
    let today = visit.at.date();
    visit.read(|reader| {
        let first = acts::study::prepare(reader, new, today)?;
        let chambers = store::chamber::all(reader)?;
        let only = |condition: i64| {
            let mut fitting = chambers.iter().filter(|chamber| chamber.condition == condition);
            fitting.next().filter(|_| fitting.next().is_none()).map(|chamber| chamber.id)
        };
        let chosen = first.facts.arms.iter().map(|arm| only(arm.condition)).collect();
        acts::study::prepare(reader, &NewStudy { chambers: chosen, ..new.clone() }, today)
    })
}

pub(super) fn check_page(visit: &Visit) -> Outcome {
    visit.knows_query(&["lot", "protocol_version"])?;
    let new = asked_study(visit)?;
    let prepared = prepared(visit, &new)?;
    let form = check_form(visit, &new, &prepared)?;
    show(200, visit, &prepared, form)
}

fn read(typed: &mut Typed<'_>, new: &NewStudy, arms: usize) -> Option<NewStudy> {
    let number = typed.text("number", 20);
    let started_on = typed.date("started_on");
    let chambers: Vec<Option<Option<i64>>> =
        (1..=arms).map(|place| typed.maybe_record(&format!("chamber.{place}"))).collect();
    let chambers: Option<Vec<Option<i64>>> = chambers.into_iter().collect();
    Some(NewStudy { number: number?, started_on: started_on?, chambers: chambers?, ..new.clone() })
}

pub(super) fn start(visit: &Visit) -> Outcome {
    let new = asked_study(visit)?;
    let prepared = prepared(visit, &new)?;
    form::submit(
        visit,
        check_form(visit, &new, &prepared)?,
        |typed| read(typed, &new, prepared.facts.arms.len()),
        |actor, new| acts::study::start(visit.db(), actor, &new),
        |id| format!("/studies/{id}"),
        |status, form| show(status, visit, &prepared, form),
    )
}
