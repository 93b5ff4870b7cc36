//! Stating the closed days of the site and the bench time of its people.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::protocol::cost::minutes_words;
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::domain::working_days::{
    CLOSED_DATES, CLOSED_WEEKDAYS, MINUTES_A_DAY, WEEKDAYS, WorkingDays, may_be_set,
};
use crate::store;
use crate::store::door::{Change, Db};

/// States them anew; what stays as it is leaves no row. Refuses as [`may_be_set`].
pub fn set(db: &Db, actor: &Actor, new: &WorkingDays, reason: &Reason) -> Result<(), Failure> {
    db.change(actor, Act::SetWorkingDays, reason, |change| {
        may_be_set(new)?;
        let was = store::setting::working_days(change)?;
        let mut told = Vec::new();
        if was.weekdays_stored() != new.weekdays_stored() {
            store::setting::set(change, CLOSED_WEEKDAYS, &new.weekdays_stored())?;
            told.push(format!("closed on {}", weekday_words(new)));
        }
        if was.dates_stored() != new.dates_stored() {
            store::setting::set(change, CLOSED_DATES, &new.dates_stored())?;
            let dates: Vec<String> = new.closed_dates.iter().map(|day| date_shown(*day)).collect();
            told.push(format!(
                "closed dates {}",
                if dates.is_empty() { "none".into() } else { dates.join(", ") }
            ));
        }
        told.extend(minutes(change, &was, new)?);
        change.concerns(Kind::Site, 1)?;
        change.tell(if told.is_empty() { "nothing differed".to_string() } else { told.join("; ") });
        Ok(())
    })
}

fn weekday_words(days: &WorkingDays) -> String {
    let closed = WEEKDAYS.iter().filter(|(day, _)| days.closed_weekdays.contains(day));
    let words: Vec<&str> = closed.map(|(_, words)| *words).collect();
    if words.is_empty() { "no weekday".to_string() } else { words.join(", ") }
}

/// One setting an account; what was stated and is no longer becomes empty.
fn minutes(change: &Change<'_>, was: &WorkingDays, new: &WorkingDays) -> Result<Vec<String>, Failure> {
    let mut told = Vec::new();
    let of = |days: &WorkingDays, account: i64| {
        days.minutes_a_day.iter().find(|(known, _)| *known == account).map(|(_, minutes)| *minutes)
    };
    let mut accounts: Vec<i64> =
        was.minutes_a_day.iter().chain(&new.minutes_a_day).map(|(account, _)| *account).collect();
    accounts.sort_unstable();
    accounts.dedup();
    for account in accounts {
        let (before, after) = (of(was, account), of(new, account));
        if before == after {
            continue;
        }
        let stored = after.map(|minutes| minutes.to_string()).unwrap_or_default();
        store::setting::set(change, &format!("{MINUTES_A_DAY}{account}"), &stored)?;
        let name = store::account::get(change, account)?.full_name;
        told.push(match after {
            Some(minutes) => format!("{name} {} a day", minutes_words(minutes)),
            None => format!("{name} no stated time"),
        });
    }
    Ok(told)
}
