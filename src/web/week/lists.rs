//! The rows behind the counts of the week, the printed pull list and the calendar file.

use askama::Template;
use chrono::NaiveDate;

use super::super::page::Shell;
use super::super::reply::{Outcome, Reply, page};
use super::super::show;
use super::super::visit::Visit;
use super::{Row, row};
use crate::domain::failure::Failure;
use crate::domain::week;
use crate::report::calendar;
use crate::store;
use crate::store::open_pull::{After, Line, Show};

const PAGE: i64 = 50;
/// Events of the calendar file and lines of the printed list.
const MOST: i64 = 1000;

/// The lists a count can lead to: the word in the address, the heading, the rows.
const LISTS: [(&str, &str, Show); 5] = [
    ("week", "Pulls this week", Show::Week),
    ("late", "Late pulls", Show::Late),
    ("closing", "Windows that close today or tomorrow", Show::Closing),
    ("testing", "Pulls in testing", Show::InTest),
    ("coming", "Pulls of the four weeks after", Show::Coming),
];

#[derive(Template)]
#[template(path = "week/pulls.html")]
struct PullsPage<'a> {
    shell: Shell,
    lead: String,
    rows: Vec<Row<'a>>,
    next: Option<String>,
}

pub(super) fn pulls(visit: &Visit) -> Outcome {
    visit.knows_query(&["show", "after"])?;
    let asked = visit.query.get("show").unwrap_or("week");
    let Some((word, heading, list)) = LISTS.into_iter().find(|(word, ..)| *word == asked) else {
        return Err(Failure::missing("list with this name"));
    };
    let today = visit.at.date();
    let after = visit.query.get("after").and_then(After::from_text);
    let (count, mut found) = visit.read(|reader| {
        let counts = store::open_pull::counts(reader, today)?;
        Ok((
            counts.of(list).unwrap_or_default(),
            store::open_pull::list(reader, list, today, after.as_ref(), PAGE + 1)?,
        ))
    })?;
    let has_more = found.len() as i64 > PAGE;
    found.truncate(PAGE as usize);
    let last = found.last().filter(|_| has_more);
    let next = last.map(|pull| format!("/week/pulls?show={word}&after={}", After::of(pull, list).text()));
    page(&PullsPage {
        shell: Shell::of(visit, heading).crumb("/week", "Week"),
        lead: format!(
            "{} in all, {} on top.",
            show::counted(count, "pull", "pulls"),
            if list.is_by_due_date() { "the first due" } else { "the last day that comes first" }
        ),
        rows: found.iter().map(|pull| row(pull, today)).collect(),
        next,
    })
}

fn due(visit: &Visit, list: Show) -> Result<Vec<Line>, Failure> {
    let today = visit.at.date();
    visit.read(|reader| store::open_pull::list(reader, list, today, None, MOST))
}

#[derive(Template)]
#[template(path = "week/list.html")]
struct ListPage<'a> {
    shell: Shell,
    days: Vec<(String, Vec<Row<'a>>)>,
}

/// One table a day, by chamber: what to take along when going to the chambers.
pub(super) fn print_list(visit: &Visit) -> Outcome {
    let today = visit.at.date();
    let mut found = due(visit, Show::Late)?;
    found.extend(due(visit, Show::Week)?);
    let on = |pull: &Line| pull.facts.due_on.map_or(today, |due_on| week::day_of(due_on, today));
    found.sort_by(|one, other| {
        (on(one), one.chamber_code(), one.lot_number(), one.pull).cmp(&(
            on(other),
            other.chamber_code(),
            other.lot_number(),
            other.pull,
        ))
    });
    let mut days: Vec<(NaiveDate, Vec<Row<'_>>)> = Vec::new();
    for pull in &found {
        match days.last_mut() {
            Some((day, rows)) if *day == on(pull) => rows.push(row(pull, today)),
            _ => days.push((on(pull), vec![row(pull, today)])),
        }
    }
    let days = days.into_iter().map(|(day, rows)| (week::day_words(day), rows)).collect();
    page(&ListPage { shell: Shell::of(visit, "Pull list").crumb("/week", "Week"), days })
}

fn event(pull: &Line) -> Option<calendar::Event> {
    let window = pull.facts.window()?;
    Some(calendar::Event {
        uid: format!("pull-{}@supernate", pull.uuid()),
        summary: format!(
            "Pull {}: {}, {}, {}",
            pull.number(),
            pull.lot_number(),
            pull.condition(),
            pull.age_text()
        ),
        place: pull.chamber_code().to_string(),
        first_on: window.earliest_on,
        last_on: window.latest_on,
    })
}

pub(super) fn calendar(visit: &Visit) -> Outcome {
    let events: Vec<calendar::Event> = due(visit, Show::ToTake)?.iter().filter_map(event).collect();
    let name = format!("{}: pulls", visit.app.site.name);
    Ok(Reply::File {
        media_type: "text/calendar; charset=utf-8",
        name: "pulls.ics".to_string(),
        bytes: calendar::calendar(&name, visit.at.utc, &events).into_bytes(),
        is_attachment: true,
    })
}
