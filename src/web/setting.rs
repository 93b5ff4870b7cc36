//! The site's settings.

use super::field::{Entry, Field};
use super::form::{self, Form};
use super::reply::Outcome;
use super::route::{Route, get, post};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::role::Role;
use crate::domain::setting::{ALL, Setting};
use crate::store;

pub const ROUTES: &[Route] = &[
    get("/settings", page),
    post("/settings", &[Act::ChangeSetting], change),
    get("/settings/clock", clock_page),
    post("/settings/clock", &[Act::ConfirmClock], confirm_clock),
];

const LEAD: &str = "What holds at this site. Each change stands in the history with its reason. The thresholds of \
                    suggestions have their own page, /settings/suggestions.";

/// The value of a setting that holds now.
pub fn value(visit: &Visit, setting: Setting) -> Result<i64, Failure> {
    Ok(setting.value(visit.read(|reader| store::setting::get(reader, setting.name))?.as_deref()))
}

fn settings_form(visit: &Visit) -> Result<Form, Failure> {
    visit.needs_role(&[Role::Administrator], Act::ChangeSetting)?;
    let mut form = Form::new(visit, "/settings", "Change the settings")?;
    for setting in ALL {
        let value = value(visit, setting)?.to_string();
        let field = Field::new(setting.name, setting.label, Entry::Count).hint(setting.hint).width(4);
        form = form.field(field.value(value));
    }
    Ok(form.field(Field::new("reason", "Why", Entry::Text).hint("At least ten characters.")))
}

fn page(visit: &Visit) -> Outcome {
    form::show(visit, "Settings", LEAD, settings_form(visit)?)
}

fn change(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Settings",
        LEAD,
        settings_form(visit)?,
        |typed| {
            let values: Vec<Option<i64>> =
                ALL.iter().map(|setting| typed.count(setting.name, 0, 100_000)).collect();
            let reason = typed.reason("reason")?;
            let values = values.into_iter().collect::<Option<Vec<i64>>>()?;
            Some((ALL.into_iter().zip(values).collect::<Vec<_>>(), reason))
        },
        |actor, (values, reason)| acts::setting::change(visit.db(), actor, &values, &reason),
        |_| "/settings".to_string(),
    )
}

fn clock_form(visit: &Visit) -> Result<Form, Failure> {
    visit.needs_role(&[Role::Administrator], Act::ConfirmClock)?;
    let why = Field::new("reason", "How the clock was checked", Entry::Text).hint("At least ten characters.");
    Ok(Form::new(visit, "/settings/clock", "The clock is right")?.field(why))
}

fn clock_lead(visit: &Visit) -> String {
    format!("The computer's clock shows {}. Compare it with a clock you trust.", visit.at.shown())
}

fn clock_page(visit: &Visit) -> Outcome {
    form::show(visit, "Confirm the clock", &clock_lead(visit), clock_form(visit)?)
}

fn confirm_clock(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Confirm the clock",
        &clock_lead(visit),
        clock_form(visit)?,
        |typed| typed.reason("reason"),
        |actor, reason| {
            acts::setting::confirm_clock(visit.db(), actor, &reason)?;
            if let Some(guard) = &visit.app.guard {
                guard.confirm(visit.at.utc, std::time::Instant::now());
            }
            Ok(())
        },
        |()| "/settings".to_string(),
    )
}
