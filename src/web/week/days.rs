//! Closed days of the site and stated bench time, as the lab manager keeps them.

use super::super::field::{Entry, Field};
use super::super::form::{self, Form, Typed};
use super::super::pull::people_at_bench;
use super::super::reply::Outcome;
use super::super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::reason::Reason;
use crate::domain::role::Role;
use crate::domain::typed::{NumberRule, date};
use crate::domain::working_days::{WEEKDAYS, WorkingDays};
use crate::store;

const TITLE: &str = "Closed days and bench time";
const LEAD: &str = "The week marks pulls that fall on a closed day and says where a day holds more than its people \
     have time for. Nothing here moves a due date or a window.";

fn hours_name(account: &str) -> String {
    format!("hours.{account}")
}

fn days_form(visit: &Visit) -> Result<Form, Failure> {
    visit.needs_role(&[Role::LabManager], Act::SetWorkingDays)?;
    let now = visit.read(store::setting::working_days)?;
    let mut form = Form::new(visit, "/week/days", "State them")?.heading("Closed every week", "");
    for (day, words) in WEEKDAYS {
        let is_closed = now.closed_weekdays.contains(&day);
        let field = Field::new(&words.to_lowercase(), words, Entry::Tick);
        form = form.field(field.value(if is_closed { "yes" } else { "" }));
    }
    let dates: Vec<String> = now.closed_dates.iter().map(|day| date_shown(*day)).collect();
    form = form
        .heading("Closed on single days", "")
        .field(
            Field::new("dates", "Dates", Entry::Long)
                .value(dates.join("\n"))
                .hint("One a line, such as 25 Dec 2026."),
        )
        .heading(
            "At the bench",
            "Hours of an open day that a person has for pulls and tests. Empty: not compared.",
        );
    for (account, name) in people_at_bench(visit)? {
        let known = now.minutes_a_day.iter().find(|(known, _)| known.to_string() == account);
        let hours = known.map(|(_, minutes)| (rust_decimal::Decimal::from(*minutes) / MINUTES).normalize());
        let field = Field::new(&hours_name(&account), &format!("{name}, hours"), Entry::Decimal).width(4);
        form = form.field(field.value(hours.map(|hours| hours.to_string()).unwrap_or_default()));
    }
    Ok(form.field(Field::new("reason", "Why", Entry::Text).hint("At least ten characters.")))
}

const MINUTES: rust_decimal::Decimal = rust_decimal::Decimal::from_parts(60, 0, 0, false, 0);

pub(super) fn show(visit: &Visit) -> Outcome {
    form::show(visit, TITLE, LEAD, days_form(visit)?)
}

/// Each line a date; every line that is none is named.
fn typed_dates(typed: &mut Typed<'_>) -> Option<Vec<chrono::NaiveDate>> {
    let text = typed.raw("dates");
    let lines = text.split(['\n', ',', ';']).map(str::trim).filter(|line| !line.is_empty());
    let (mut days, mut faults) = (Vec::new(), Vec::new());
    for line in lines {
        match date(line, "Dates") {
            Ok(day) => days.push(day),
            Err(fault) => faults.push(fault.to_string()),
        }
    }
    if !faults.is_empty() {
        typed.fault("dates", faults.join(" "));
        return None;
    }
    days.sort_unstable();
    days.dedup();
    Some(days)
}

fn typed_days(typed: &mut Typed<'_>, accounts: &[String]) -> Option<(WorkingDays, Reason)> {
    let closed = WEEKDAYS.into_iter().filter(|(_, words)| typed.tick(&words.to_lowercase()));
    let closed_weekdays = closed.map(|(day, _)| day).collect();
    let closed_dates = typed_dates(typed);
    let mut minutes_a_day = Vec::new();
    let mut is_whole = true;
    for account in accounts {
        let rule = NumberRule { most_decimals: 2, ..NumberRule::between("Hours", 0, 24) };
        match typed.maybe_decimal(&hours_name(account), &rule) {
            Some(Some(hours)) => {
                let minutes = u32::try_from((hours.value * MINUTES).round()).unwrap_or_default();
                minutes_a_day.extend(account.parse().ok().map(|account: i64| (account, minutes)));
            }
            Some(None) => {}
            None => is_whole = false,
        }
    }
    let reason = typed.reason("reason")?;
    let days = WorkingDays { closed_weekdays, closed_dates: closed_dates?, minutes_a_day };
    is_whole.then_some((days, reason))
}

pub(super) fn set(visit: &Visit) -> Outcome {
    let form = days_form(visit)?;
    let accounts: Vec<String> = people_at_bench(visit)?.into_iter().map(|(account, _)| account).collect();
    form::submit_page(
        visit,
        TITLE,
        LEAD,
        form,
        |typed| typed_days(typed, &accounts),
        |actor, (days, reason)| acts::working_days::set(visit.db(), actor, &days, &reason),
        |()| "/week".to_string(),
    )
}
