//! Samples: receiving one, and its tests in bench order.

use askama::Template;

use super::bench::{part_standing, place};
use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::page::Shell;
use super::pairs::encoded;
use super::part::{StatusMark, Trail};
use super::reply::{Outcome, page_with, see};
use super::route::{Route, get, post};
use super::show;
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::label::{labelled, short_label};
use crate::domain::method::Stage;
use crate::domain::moment::date_shown;
use crate::domain::reason::Reason;
use crate::domain::sample::{NewSample, Purpose};
use crate::domain::specification::TestLimits;
use crate::domain::stage::{StageLoss, may_close};
use crate::domain::status::Status;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::bench::BenchSample;

pub const ROUTES: &[Route] = &[
    get("/samples/new", new_page),
    post("/samples/new", &[Act::ReceiveSample], receive),
    get("/samples/{id}", sample).at_bench(),
    post("/samples/{id}/label", &[Act::RecordReadings], check_label).at_bench(),
    post("/samples/{id}/stages", &[Act::CloseStage], close_stage).at_bench(),
];

const LEAD: &str =
    "Count it, look at it, and choose what is asked of it. A stability pull makes its own sample.";

fn new_page(visit: &Visit) -> Outcome {
    visit.knows_query(&["lot"])?;
    match visit.query.get("lot").and_then(|text| text.parse::<i64>().ok()) {
        Some(lot) => form::show(visit, "Receive a sample", LEAD, receipt_form(visit, lot)?),
        None => form::show(visit, "Receive a sample", "Of which lot?", lot_form(visit)?),
    }
}

/// Without a lot in the address: its number first, then the tests of its presentation.
fn lot_form(visit: &Visit) -> Result<Form, Failure> {
    Ok(Form::new(visit, "/samples/new", "Go on")?
        .field(Field::new("lot_number", "Lot number", Entry::Text).width(20).hint("As on the label.")))
}

fn receipt_form(visit: &Visit, lot: i64) -> Result<Form, Failure> {
    let (lot, specified) = visit.read(|reader| {
        let lot = store::lot::get(reader, lot)?;
        let version = store::specification::approved_of(reader, lot.presentation)?;
        let content: Option<crate::domain::specification::SpecificationContent> =
            version.map(|version| version.read()).transpose()?;
        Ok((lot, content))
    })?;
    let purposes = Purpose::RECEIVED.map(|purpose| (purpose.words(), purpose.words()));
    let form = Form::new(visit, "/samples/new", "Receive it")?
        .hide("lot", lot.id.to_string())
        .heading(&format!("Lot {}", lot.number), &lot.presentation_words)
        .field(Field::new("purpose", "Purpose", Entry::Radios).choices(purposes))
        .field(Field::new("containers", &format!("Number, {}s", lot.container_word), Entry::Count).width(4))
        .field(
            Field::new("condition", "Condition on receipt", Entry::Text)
                .hint("Seals, damage, temperature on arrival."),
        )
        .field(Field::new("handed_over_by", "Handed over by", Entry::Text).width(20))
        .field(
            Field::new("received_on", "Received on", Entry::Date)
                .width(12)
                .value(date_shown(visit.at.date())),
        )
        .heading("Tests", "Of the approved specification, by the approved version of each method.");
    let tests = specified.map(|content| content.tests).unwrap_or_default();
    Ok(tests.iter().fold(form, |form, limits| {
        form.field(Field::new(&test_field(limits), &limits.title, Entry::Tick).value("yes"))
    }))
}

fn test_field(limits: &TestLimits) -> String {
    format!("test.{}", limits.test)
}

fn receive(visit: &Visit) -> Outcome {
    let Some(lot) = visit.form.get("lot").and_then(|text| text.parse::<i64>().ok()) else {
        return find_lot(visit);
    };
    let form = receipt_form(visit, lot)?;
    let offered: Vec<String> =
        form.fields().filter_map(|field| field.name.strip_prefix("test.").map(str::to_string)).collect();
    form::submit_page(
        visit,
        "Receive a sample",
        LEAD,
        form,
        |typed| typed_sample(typed, lot, &offered),
        |actor, new| acts::sample::receive(visit.db(), actor, &new),
        |id| format!("/samples/{id}"),
    )
}

fn find_lot(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Receive a sample",
        "Of which lot?",
        lot_form(visit)?,
        |typed| {
            let number = typed.text("lot_number", 60)?;
            let found = visit.read(|reader| store::lot::by_number(reader, &number)).ok()?;
            if found.is_none() {
                typed.fault("lot_number", format!("There is no lot {number}. Check the label."));
            }
            found
        },
        |_, lot| Ok(lot.id),
        |id| format!("/samples/new?lot={id}"),
    )
}

fn typed_sample(typed: &mut Typed<'_>, lot: i64, offered: &[String]) -> Option<NewSample> {
    let purpose = typed.choice("purpose");
    let containers = typed.count("containers", 1, 10_000);
    let condition = typed.text("condition", 300);
    let handed_over_by = typed.text("handed_over_by", 120);
    let received_on = typed.date("received_on");
    let tests = offered.iter().filter(|test| typed.tick(&format!("test.{test}"))).cloned().collect();
    Some(NewSample {
        lot,
        purpose: Purpose::from_words(&purpose?)?,
        containers: containers?,
        condition_on_receipt: condition?,
        handed_over_by: handed_over_by?,
        received_on: received_on?,
        tests,
    })
}

struct StageBlock {
    title: String,
    lost: Vec<String>,
    tasks: Vec<Task>,
}

struct Task {
    path: String,
    is_link: bool,
    name: String,
    note: String,
    status: StatusMark,
}

#[derive(Template)]
#[template(path = "sample/sample.html")]
struct SamplePage {
    shell: Shell,
    sample: BenchSample,
    place: String,
    receipt: Vec<(&'static str, String)>,
    labels: String,
    label: String,
    wrong_label: String,
    submission: String,
    asks_label: bool,
    stages: Vec<StageBlock>,
    close: Option<Form>,
    files: super::attachment::Files,
    trail: Trail,
}

fn sample(visit: &Visit) -> Outcome {
    visit.knows_query(&["label"])?;
    sample_page(200, visit, visit.id("id")?, None)
}

fn sample_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let (sample, receipt, lines) = visit.read(|reader| {
        Ok((
            store::bench::sample(reader, id)?,
            store::sample::receipt(reader, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Sample, id))?,
        ))
    })?;
    let asked = visit.form.get("label").or_else(|| visit.query.get("label"));
    let label = asked.unwrap_or_default().trim().to_string();
    let is_right = labelled(&label, &sample.number, &sample.containers).is_some();
    let wrong_label = match label.is_empty() || is_right {
        true => String::new(),
        false => format!("“{label}” is not a label of this sample. Take the right one and scan again."),
    };
    let mut shell = Shell::of(visit, &format!("Sample {}", sample.number)).crumb("/bench", "Bench").bench();
    if !wrong_label.is_empty() {
        shell.has_errors = true;
        shell.errors.push(("code".to_string(), wrong_label.clone()));
    }
    let mut close = close_form(visit, &sample)?;
    if let Some(failed) = failed {
        shell = shell.with_errors(&failed);
        close = Some(failed);
    }
    let is_open = sample.tests.iter().any(|test| !test.is_complete());
    let status = if wrong_label.is_empty() { status } else { 409 };
    let page = SamplePage {
        submission: acts::secret::token()?,
        place: place(&sample),
        receipt: receipt_facts(&sample, receipt),
        labels: sample.containers.iter().map(|one| short_label(&one.label)).collect::<Vec<_>>().join(", "),
        asks_label: is_open && !is_right && visit.may(Act::RecordReadings),
        stages: Stage::ALL
            .into_iter()
            .filter_map(|stage| stage_block(&sample, stage, &label, is_right))
            .collect(),
        files: super::attachment::Files::of(visit, Subject::new(Kind::Sample, id))?,
        trail: Trail::of(&lines, visit.at.zone),
        shell,
        sample,
        label,
        wrong_label,
        close,
    };
    page_with(status, &page)
}

/// A right label leads to the tasks; a wrong one is noted in the sample's history.
fn check_label(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    visit.read(|reader| store::bench::sample(reader, id))?;
    super::reading::knows(visit, &["form_token", "submission", "label"])?;
    let label = visit.form.get("label").unwrap_or_default().trim();
    match acts::reading::check_label(visit.db(), visit.actor()?, id, label) {
        Ok(()) => see(format!("/samples/{id}?label={}", encoded(label))),
        Err(Failure::Refused(_)) => sample_page(409, visit, id, None),
        Err(other) => Err(other),
    }
}

fn receipt_facts(sample: &BenchSample, receipt: store::sample::Receipt) -> Vec<(&'static str, String)> {
    let mut facts = vec![("Purpose", sample.purpose.clone())];
    if let Some(count) = receipt.containers {
        facts.push(("Number", format!("{count} {}", sample.container_word)));
    }
    facts.extend(receipt.received_on.map(|day| ("Received on", show::date(&day))));
    facts.extend(receipt.handed_over_by.map(|name| ("Handed over by", name)));
    facts.extend(receipt.condition.map(|words| ("Condition on receipt", words)));
    facts
}

fn stage_block(sample: &BenchSample, stage: Stage, label: &str, is_right: bool) -> Option<StageBlock> {
    let of_stage = sample.tests.iter().filter(|test| test.content.stages().contains(&stage));
    let tasks: Vec<Task> = of_stage
        .map(|test| {
            let (status, note) = part_standing(sample, test, stage);
            let query = if is_right { format!("?label={}", encoded(label)) } else { String::new() };
            Task {
                path: format!("/tests/{}{query}", test.id),
                is_link: status != Status::CannotStartYet,
                name: acts::stage::part_title(test, stage),
                note,
                status: StatusMark::of(status),
            }
        })
        .collect();
    let container = |id: Option<i64>| match sample.containers.iter().find(|one| Some(one.id) == id) {
        Some(one) => format!("{}: ", one.label),
        None => String::new(),
    };
    let lost = sample
        .losses
        .iter()
        .filter(|loss| loss.stage == stage)
        .map(|loss| format!("{}lost, because {}", container(loss.container), loss.why))
        .collect();
    (!tasks.is_empty()).then(|| StageBlock { title: super::failure::capital(stage.words()), lost, tasks })
}

/// "Pass on": shown while a stage has something open.
fn close_form(visit: &Visit, sample: &BenchSample) -> Result<Option<Form>, Failure> {
    let tests = acts::stage::tests_of(sample);
    let open: Vec<(&str, &str)> = Stage::ALL
        .into_iter()
        .filter(|stage| may_close(&tests, &sample.losses, *stage, None).is_ok())
        .map(|stage| (stage.words(), stage.words()))
        .collect();
    if open.is_empty() || !visit.may(Act::CloseStage) {
        return Ok(None);
    }
    let containers: Vec<(String, String)> =
        sample.containers.iter().map(|one| (one.id.to_string(), one.label.clone())).collect();
    let mut form = Form::new(visit, &format!("/samples/{}/stages", sample.id), "Close it as lost")?
        .field(Field::new("stage", "Stage", Entry::Select).choices(open))
        .quiet();
    if !containers.is_empty() {
        form = form.field(
            Field::new("container", &format!("Which {}", sample.container_word), Entry::Select)
                .hint("Leave it open for all of the sample.")
                .choices(containers),
        );
    }
    Ok(Some(form.field(Field::new("why", "Lost, because", Entry::Text).hint("At least ten characters."))))
}

fn close_stage(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let sample = visit.read(|reader| store::bench::sample(reader, id))?;
    let Some(form) = close_form(visit, &sample)? else {
        return Err(Failure::Denied(Act::CloseStage)).or_else(|denied| nothing_open(visit, denied));
    };
    let has_containers = !sample.containers.is_empty();
    form::submit(
        visit,
        form,
        |typed| {
            let stage = typed.choice("stage");
            let container = if has_containers { typed.maybe_record("container") } else { Some(None) };
            let why = typed.reason("why");
            Some((Stage::from_words(&stage?)?, container?, why?))
        },
        |actor, (stage, container, why): (Stage, Option<i64>, Reason)| {
            let text = why.text().unwrap_or_default().to_string();
            let loss = StageLoss { container, stage, why: text };
            acts::stage::close(visit.db(), actor, id, &loss, &why)
        },
        |_| format!("/samples/{id}"),
        |status, form| sample_page(status, visit, id, Some(form)),
    )
}

/// A person without the role is denied by the act itself; with it, nothing was open.
fn nothing_open(visit: &Visit, denied: Failure) -> Outcome {
    if !visit.may(Act::CloseStage) {
        return Err(denied);
    }
    Err(crate::domain::stage::StageRefusal::NothingOpen("all".to_string()).into())
}
