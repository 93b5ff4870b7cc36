//! Editing the arms, ages and tests of a protocol draft.

use super::super::field::{Entry, Field};
use super::super::form::{self, Form, Typed};
use super::super::reply::Outcome;
use super::super::visit::Visit;
use super::version::{Loaded, load, path};
use crate::acts;
use crate::acts::version::Written;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::protocol::generator::{ages_from_text, ages_text};
use crate::domain::protocol::{
    Arm, LimitsDo, Orientation, PlannedAge, PlannedTest, Programme, ProtocolContent,
};
use crate::domain::role::Role;
use crate::domain::typed::NumberRule;
use crate::domain::version::{VersionRefusal, VersionState, Versioned};
use crate::store;

/// Rows that are offered beyond those that are filled.
const SPARE_ROWS: usize = 2;
const LEAD: &str = "One row for each condition and orientation. Ages are months, such as 0, 3, 6, or days, such as \
                    0 d, 7 d, 14 d. Empty a row's condition to take the arm away, a test's code to take it away.";

/// Choices of the selects of the page.
struct Choices {
    conditions: Vec<(String, String)>,
    methods: Vec<(String, String)>,
    specifications: Vec<(String, String)>,
}

fn choices(visit: &Visit, presentation: i64) -> Result<Choices, Failure> {
    visit.read(|reader| {
        let conditions = store::condition::all(reader)?;
        let methods = store::method::approved_versions(reader)?;
        Ok(Choices {
            conditions: conditions.into_iter().map(|one| (one.id.to_string(), one.name)).collect(),
            methods: methods
                .into_iter()
                .map(|one| (one.id.to_string(), format!("{} version {}: {}", one.code, one.number, one.name)))
                .collect(),
            specifications: super::specification_choices(reader, Some(presentation))?,
        })
    })
}

/// A draft of this person's role, or the refusal that says why it cannot be edited.
pub(super) fn editable(visit: &Visit) -> Result<(i64, Loaded), Failure> {
    visit.needs_role(&[Role::LabManager], Act::DraftProtocolVersion)?;
    let id = visit.id("id")?;
    let loaded = visit.read(|reader| load(reader, id))?;
    if loaded.version.state != VersionState::Draft {
        return Err(VersionRefusal::VersionFrozen.into());
    }
    Ok((id, loaded))
}

fn tick(is_ticked: bool) -> &'static str {
    if is_ticked { "yes" } else { "" }
}

fn arms_form(visit: &Visit, id: i64, loaded: &Loaded) -> Result<Form, Failure> {
    let choices = choices(visit, loaded.protocol.presentation)?;
    let content = &loaded.content;
    let programmes = Programme::ALL.map(|programme| (programme.words(), programme.words()));
    let arms: Vec<Vec<Field>> =
        (0..content.arms.len() + SPARE_ROWS).map(|at| arm_row(at, content.arms.get(at), &choices)).collect();
    let tests: Vec<Vec<Field>> = (0..content.tests.len() + SPARE_ROWS)
        .map(|at| test_row(at, content.tests.get(at), &choices))
        .collect();
    let heads = [
        "Condition",
        "Orientation",
        "Beyond a limit",
        "Labelled",
        "Contingent",
        "Ages",
        "Days before",
        "Days after",
    ];
    let form = Form::new(visit, &format!("{}/arms", path(id)), "Save the draft")?
        .field(Field::new("reason", "Why this version", Entry::Text).value(loaded.version.reason.clone()))
        .field(
            Field::new("programme", "Programme", Entry::Select)
                .choices(programmes)
                .value(content.programme.words()),
        )
        .field(
            Field::new("specification_version", "Specification version", Entry::Select)
                .choices(choices.specifications.clone())
                .value(content.specification_version.to_string()),
        )
        .grid("Arms", &heads, arms)
        .grid("Tests, in bench order", &["Test code", "Title", "Method version", "For information"], tests)
        .field(count("spare", "Spare containers in each arm", content.spare_containers))
        .field(count("retain", "Retained containers in each arm", content.retain_containers))
        .field(
            count("follow_through", "Followed unopened in each arm", content.follow_through_containers).hint(
                "Weighed at loading, then weighed, measured and photographed at each age; never opened.",
            ),
        );
    Ok(reasons(form, content).hide("seen", loaded.version.digest()))
}

/// What a protocol gives reasons for, and what it promises.
fn reasons(form: Form, content: &ProtocolContent) -> Form {
    form.field(
        Field::new("why_no_intermediate", "Why there is no contingent intermediate arm", Entry::Text)
            .value(content.why_no_intermediate.clone().unwrap_or_default())
            .hint("Only for long-term 25/60 without one."),
    )
    .field(
        Field::new("worst_orientation", "Which orientation is the worst, and why", Entry::Text)
            .value(content.worst_orientation.clone().unwrap_or_default())
            .hint("Only for a routine study in one orientation."),
    )
    .field(
        Field::new("trend_promise", "Trend: good lots that may ever see a false action, %", Entry::Decimal)
            .width(8)
            .value(content.trend_promise_percent.map(|percent| percent.to_string()).unwrap_or_default())
            .hint("Spread over the planned pulls of an arm. Empty: each pull is judged at 1 %."),
    )
}

fn count(name: &str, label: &str, value: u32) -> Field {
    Field::new(name, label, Entry::Count).width(4).value(value.to_string())
}

fn arm_row(at: usize, arm: Option<&Arm>, choices: &Choices) -> Vec<Field> {
    let name = |field: &str| format!("arm.{}.{field}", at + 1);
    let label = |words: &str| format!("{words}, arm {}", at + 1);
    let window = arm.and_then(|arm| arm.ages.first()).and_then(|age| age.window);
    let days = |days: Option<u32>| days.map(|days| days.to_string()).unwrap_or_default();
    let orientations = Orientation::ALL.map(|one| (one.words(), one.words()));
    let limits_do = LimitsDo::ALL.map(|one| (one.words(), one.words()));
    vec![
        Field::new(&name("condition"), &label("Condition"), Entry::Select)
            .choices(choices.conditions.clone())
            .value(arm.map(|arm| arm.condition.to_string()).unwrap_or_default()),
        Field::new(&name("orientation"), &label("Orientation"), Entry::Select)
            .choices(orientations)
            .value(arm.map(|arm| arm.orientation.words()).unwrap_or_default()),
        Field::new(&name("limits_do"), &label("What a value beyond a limit does"), Entry::Select)
            .choices(limits_do)
            .value(arm.map(|arm| arm.limits_do.words()).unwrap_or_default()),
        Field::new(&name("labelled"), &label("Labelled condition"), Entry::Tick)
            .value(tick(arm.is_some_and(|arm| arm.is_labelled_condition))),
        Field::new(&name("contingent"), &label("Contingent"), Entry::Tick)
            .value(tick(arm.is_some_and(|arm| arm.is_contingent))),
        Field::new(&name("ages"), &label("Ages"), Entry::Text).width(20).value(
            arm.map(|arm| ages_text(&arm.ages.iter().map(|age| age.age).collect::<Vec<_>>()))
                .unwrap_or_default(),
        ),
        Field::new(&name("before"), &label("Days before the due date"), Entry::Count)
            .width(4)
            .value(days(window.map(|(before, _)| before))),
        Field::new(&name("after"), &label("Days after the due date"), Entry::Count)
            .width(4)
            .value(days(window.map(|(_, after)| after))),
    ]
}

fn test_row(at: usize, test: Option<&PlannedTest>, choices: &Choices) -> Vec<Field> {
    let name = |field: &str| format!("test.{}.{field}", at + 1);
    let label = |words: &str| format!("{words}, test {}", at + 1);
    vec![
        Field::new(&name("code"), &label("Code"), Entry::Text)
            .width(12)
            .value(test.map(|test| test.test.clone()).unwrap_or_default()),
        Field::new(&name("title"), &label("Title"), Entry::Text)
            .width(20)
            .value(test.map(|test| test.title.clone()).unwrap_or_default()),
        Field::new(&name("method"), &label("Method version"), Entry::Select)
            .choices(choices.methods.clone())
            .value(test.map(|test| test.method_version.to_string()).unwrap_or_default()),
        Field::new(&name("information"), &label("For information"), Entry::Tick)
            .value(tick(test.is_some_and(|test| test.is_information))),
    ]
}

pub(super) fn arms_page(visit: &Visit) -> Outcome {
    let (id, loaded) = editable(visit)?;
    form::show(visit, "Arms and tests", LEAD, arms_form(visit, id, &loaded)?)
}

pub(super) fn write_arms(visit: &Visit) -> Outcome {
    let (id, loaded) = editable(visit)?;
    form::submit_page(
        visit,
        "Arms and tests",
        LEAD,
        arms_form(visit, id, &loaded)?,
        |typed| {
            let reason = typed.text("reason", 200);
            let content = read(typed, &loaded.content);
            Some((reason?, content?, typed.raw("seen")))
        },
        |actor, (reason, content, seen)| {
            let written = Written { reason, content: acts::protocol::written(&content)? };
            acts::version::rewrite(visit.db(), actor, Versioned::Protocol, id, &written, &seen)
        },
        |()| path(id),
    )
}

fn read(typed: &mut Typed<'_>, old: &ProtocolContent) -> Option<ProtocolContent> {
    let programme = typed.choice("programme").and_then(|words| Programme::from_words(&words));
    let specification_version = typed.record("specification_version");
    // Every row is read before the first fault counts, so that all faults show at once.
    let tests: Vec<Option<PlannedTest>> =
        rows(typed, old.tests.len(), "test", "code").into_iter().map(|at| read_test(typed, at)).collect();
    let tests: Option<Vec<PlannedTest>> = tests.into_iter().collect();
    let planned = tests.clone().unwrap_or_else(|| old.tests.clone());
    let arms: Vec<Option<Arm>> = rows(typed, old.arms.len(), "arm", "condition")
        .into_iter()
        .map(|at| read_arm(typed, at, old, &planned))
        .collect();
    let spare = typed.count("spare", 0, 200);
    let retain = typed.count("retain", 0, 200);
    let follow_through = typed.count("follow_through", 0, 200);
    let why_no_intermediate = typed.maybe_text("why_no_intermediate", 300);
    let worst_orientation = typed.maybe_text("worst_orientation", 300);
    let promise = typed.maybe_decimal("trend_promise", &NumberRule::between("The promise", 0, 20).unit("%"));
    Some(ProtocolContent {
        programme: programme?,
        specification_version: specification_version?,
        arms: arms.into_iter().collect::<Option<Vec<Arm>>>()?,
        tests: tests?,
        spare_containers: u32::try_from(spare?).ok()?,
        retain_containers: u32::try_from(retain?).ok()?,
        follow_through_containers: u32::try_from(follow_through?).ok()?,
        why_no_intermediate: why_no_intermediate?,
        worst_orientation: worst_orientation?,
        trend_promise_percent: promise?.map(|percent| percent.value).filter(|percent| !percent.is_zero()),
    })
}

/// The rows of a grid whose key field holds something.
fn rows(typed: &Typed<'_>, filled: usize, grid: &str, key: &str) -> Vec<usize> {
    (1..=filled + SPARE_ROWS).filter(|at| !typed.raw(&format!("{grid}.{at}.{key}")).is_empty()).collect()
}

fn read_test(typed: &mut Typed<'_>, at: usize) -> Option<PlannedTest> {
    let code = typed.text(&format!("test.{at}.code"), 40);
    let title = typed.text(&format!("test.{at}.title"), 80);
    let method_version = typed.record(&format!("test.{at}.method"));
    let is_information = typed.tick(&format!("test.{at}.information"));
    Some(PlannedTest { test: code?, title: title?, method_version: method_version?, is_information })
}

fn read_arm(typed: &mut Typed<'_>, at: usize, old: &ProtocolContent, tests: &[PlannedTest]) -> Option<Arm> {
    let name = |field: &str| format!("arm.{at}.{field}");
    let condition = typed.record(&name("condition"));
    let orientation = typed.choice(&name("orientation")).and_then(|words| Orientation::from_words(&words));
    let limits_do = typed.choice(&name("limits_do")).and_then(|words| LimitsDo::from_words(&words));
    let ages = match ages_from_text(&typed.raw(&name("ages"))) {
        Ok(ages) => Some(ages),
        Err(fault) => {
            typed.fault(&name("ages"), fault.to_string());
            None
        }
    };
    let before = typed.maybe_count(&name("before"), 0, 60);
    let after = typed.maybe_count(&name("after"), 0, 60);
    let (before, after) = (before?, after?);
    let window = match (before, after) {
        (None, None) => None,
        (before, after) => Some((small(before), small(after))),
    };
    let (condition, orientation, ages) = (condition?, orientation?, ages?);
    let before_it = old.arms.iter().find(|arm| arm.condition == condition && arm.orientation == orientation);
    let last = ages.len().saturating_sub(1);
    let planned = ages.into_iter().enumerate().map(|(place, age)| PlannedAge {
        age,
        tests: kept_tests(before_it, age, old, tests),
        // The last point is never early.
        window: window.map(|(before, after)| (if place == last { 0 } else { before }, after)),
    });
    Some(Arm {
        condition,
        orientation,
        limits_do: limits_do?,
        is_labelled_condition: typed.tick(&name("labelled")),
        is_contingent: typed.tick(&name("contingent")),
        ages: planned.collect(),
    })
}

fn small(days: Option<i64>) -> u32 {
    days.and_then(|days| u32::try_from(days).ok()).unwrap_or(0)
}

/// A new age gets every test; a known age keeps what was ticked, and gets the tests that are new.
fn kept_tests(
    arm: Option<&Arm>,
    age: crate::domain::age::Age,
    old: &ProtocolContent,
    tests: &[PlannedTest],
) -> Vec<String> {
    let known = arm.and_then(|arm| arm.ages.iter().find(|planned| planned.age == age));
    let is_new = |code: &String| !old.tests.iter().any(|test| test.test == *code);
    let is_ticked = |code: &String| known.is_none_or(|known| known.tests.contains(code));
    tests.iter().map(|test| test.test.clone()).filter(|code| is_new(code) || is_ticked(code)).collect()
}
