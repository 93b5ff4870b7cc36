//! Conditions: the catalogue, and adding one outside it.

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::page::Shell;
use super::part::{Signatures, Trail};
use super::reply::{Outcome, page};
use super::route::{Route, get, post};
use super::visit::Visit;
use crate::acts;
use crate::acts::signature::Approval;
use crate::domain::act::Act;
use crate::domain::condition::{HumidityRule, NewCondition, Use};
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::role::Role;
use crate::domain::signature::Meaning;
use crate::domain::subject::{Kind, Subject};
use crate::domain::typed::NumberRule;
use crate::store;
use crate::store::condition::Condition;

pub const ROUTES: &[Route] = &[
    get("/conditions", list),
    get("/conditions/new", new_page),
    post("/conditions/new", &[Act::AddCondition], add),
    get("/conditions/{id}", one),
];

#[derive(Template)]
#[template(path = "condition/list.html")]
struct ConditionsPage {
    shell: Shell,
    rows: Vec<Row>,
    may_add: bool,
}

struct Row {
    id: i64,
    code: String,
    name: String,
    tolerance: String,
    used_for: &'static str,
    least: String,
    source: String,
    is_own: bool,
}

fn row(condition: Condition) -> Row {
    let temperature = condition.temperature_tolerance_c.map(|within| format!("±{within}\u{a0}°C"));
    let humidity = condition.humidity_tolerance_percent.map(|within| format!("±{within}\u{a0}%\u{a0}RH"));
    Row {
        id: condition.id,
        code: condition.code,
        name: condition.name,
        tolerance: temperature.into_iter().chain(humidity).collect::<Vec<_>>().join(", "),
        used_for: condition.used_for.words(),
        least: condition.least_months.map_or("not stated".to_string(), |least| format!("{least} months")),
        source: condition.source,
        is_own: !condition.is_in_catalogue,
    }
}

fn list(visit: &Visit) -> Outcome {
    let rows = visit.read(store::condition::all)?.into_iter().map(row).collect();
    let shell = Shell::of(visit, "Conditions").crumb("/definitions", "Definitions");
    page(&ConditionsPage { shell, rows, may_add: visit.may(Act::AddCondition) })
}

#[derive(Template)]
#[template(path = "condition/condition.html")]
struct ConditionPage {
    shell: Shell,
    row: Row,
    signatures: Signatures,
    trail: Trail,
}

fn one(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (condition, signed, text, lines) = visit.read(|reader| {
        Ok((
            store::condition::get(reader, id)?,
            store::signature::of(reader, Kind::Condition, id)?,
            store::condition::canonical_of(reader, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Condition, id))?,
        ))
    })?;
    let shell = Shell::of(visit, &condition.name).crumb("/conditions", "Conditions");
    let digest = sha256_hex(text.unwrap_or_default().as_bytes());
    let signatures = Signatures::of(&signed, &digest, visit.at.zone);
    page(&ConditionPage { shell, row: row(condition), signatures, trail: Trail::of(&lines, visit.at.zone) })
}

const LEAD: &str = "The catalogue holds the conditions of the published guidelines. A condition outside it needs \
                    a reason and the signature of QA.";

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    visit.needs_role(&[Role::QaReviewer], Act::AddCondition)?;
    let rules = HumidityRule::ALL.map(|rule| (rule.words(), rule.words()));
    Ok(Form::new(visit, "/conditions/new", "Add the condition")?
        .field(Field::new("code", "Code", Entry::Text).width(8).hint("Short, such as 21/45."))
        .field(Field::new("temperature_c", "Temperature, °C", Entry::Decimal).width(8))
        .field(Field::new("temperature_tolerance_c", "Tolerance, ± °C", Entry::Decimal).width(8))
        .field(Field::new("humidity_rule", "Humidity", Entry::Select).choices(rules).value("within"))
        .field(Field::new("humidity_percent", "Humidity, % RH", Entry::Decimal).width(8))
        .field(Field::new("humidity_tolerance_percent", "Tolerance, ± % RH", Entry::Decimal).width(8))
        .field(
            Field::new("use", "Used for", Entry::Select)
                .choices(Use::ALL.map(|one| (one.words(), one.words()))),
        )
        .field(
            Field::new("source", "Where it comes from", Entry::Text).hint("A clause, a market, a contract."),
        )
        .field(
            Field::new("reason", "Why no condition of the catalogue serves", Entry::Text)
                .hint("At least ten characters; it stands in the history."),
        )
        .signature(Meaning::Approval.words()))
}

fn new_page(visit: &Visit) -> Outcome {
    form::show(visit, "New condition", LEAD, new_form(visit)?)
}

struct Typing {
    new: NewCondition,
    reason: Reason,
    user_name: String,
    password: String,
}

fn read(typed: &mut Typed<'_>) -> Option<Typing> {
    let code = typed.text("code", 16);
    let temperature = typed.decimal("temperature_c", &NumberRule::between("Temperature", -90, 90).unit("°C"));
    let within =
        typed.decimal("temperature_tolerance_c", &NumberRule::between("Tolerance", 0, 20).unit("°C"));
    let rule = typed.choice("humidity_rule").and_then(|words| HumidityRule::from_words(&words));
    let humidity =
        typed.maybe_decimal("humidity_percent", &NumberRule::between("Humidity", 0, 100).unit("%"));
    let humidity_within =
        typed.maybe_decimal("humidity_tolerance_percent", &NumberRule::between("Tolerance", 0, 50).unit("%"));
    let used_for = typed.choice("use").map(|words| Use::from_words(&words));
    let source = typed.text("source", 120);
    let reason = typed.reason("reason");
    let new = NewCondition {
        code: code?,
        temperature_c: temperature?.value.normalize(),
        temperature_tolerance_c: within?.value.normalize(),
        humidity_percent: humidity?.map(|number| number.value.normalize()),
        humidity_tolerance_percent: humidity_within?.map(|number| number.value.normalize()),
        humidity_rule: rule?,
        used_for: used_for?,
        least_months: None,
        source: source?,
    };
    let password = typed.visit.form.get("password")?.to_string();
    Some(Typing { new, reason: reason?, user_name: typed.raw("user_name"), password })
}

fn add(visit: &Visit) -> Outcome {
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    form::submit_page(
        visit,
        "New condition",
        LEAD,
        new_form(visit)?,
        read,
        |actor, typing| {
            let signed = acts::signature::authenticate::<Approval>(
                db,
                secrets,
                actor,
                &typing.user_name,
                &typing.password,
            )?;
            acts::condition::add(db, actor, &typing.new, &typing.reason, &signed)
        },
        |id| format!("/conditions/{id}"),
    )
}
