//! The lab manager's week: what is late or closing, seven days, who has what, and the weeks to come.

mod assign;
mod days;
mod lists;

use askama::Template;
use chrono::{Datelike, NaiveDate};

use super::page::Shell;
use super::part::StatusMark;
use super::pull::left_words;
use super::reply::{Outcome, page};
use super::route::{Route, get, post};
use super::show;
use super::study::one::mark;
use super::visit::Visit;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::moment::{date_shown, plus_days, until_shown};
use crate::domain::protocol::cost::minutes_words;
use crate::domain::week;
use crate::domain::working_days::WorkingDays;
use crate::store;
use crate::store::open_pull::{Counts, Line, Show};
use crate::store::week::{DaySum, OpenCylinder, PersonDay};

pub const ROUTES: &[Route] = &[
    get("/week", the_week),
    get("/week/pulls", lists::pulls),
    get("/week/assign", assign::show),
    post("/week/assign", &[Act::AssignPull], assign::assign),
    get("/week/days", days::show),
    post("/week/days", &[Act::SetWorkingDays], days::set),
    get("/week/list", lists::print_list),
    get("/week/calendar.ics", lists::calendar),
];

/// Rows of the first block, and of the days together; more are one link away.
const MOST_ROWS: usize = 50;

/// A pull as a row of the week.
pub(super) struct Row<'a> {
    pub pull: &'a Line,
    pub window_first: String,
    pub window_last: String,
    pub until: String,
    pub complete: usize,
    pub tests: usize,
    pub needed: usize,
    pub is_short: bool,
    pub status: StatusMark,
    pub with: &'a str,
    pub minutes: String,
    /// Of the whole pull, for the list that goes along to the chambers.
    pub containers: usize,
}

/// What is still to be done and until when: taking it, or testing it.
fn until(pull: &Line, today: NaiveDate) -> String {
    if let (Some(on), Some(days)) = (pull.facts.happened_on, pull.test_within_days) {
        let last = plus_days(on, days);
        let words = until_shown(today, last).replace("closes", "ends");
        return format!("taken {}, to be tested by {}, {words}", date_shown(on), date_shown(last));
    }
    left_words(&pull.facts, today)
}

pub(super) fn row(pull: &Line, today: NaiveDate) -> Row<'_> {
    let progress = pull.facts.progress;
    let (window_first, window_last) = pull.facts.window().map(|window| window.ends()).unwrap_or_default();
    let containers = pull.facts.containers_needed;
    let needed = containers.saturating_sub(usize::try_from(pull.containers_taken).unwrap_or_default());
    Row {
        pull,
        window_first,
        window_last,
        until: until(pull, today),
        complete: progress.complete,
        tests: progress.tests,
        needed,
        is_short: i64::try_from(needed).unwrap_or_default() > pull.containers_left,
        status: mark(&pull.facts, today),
        with: pull.assigned_name.as_deref().unwrap_or_default(),
        minutes: minutes_words(pull.minutes),
        containers,
    }
}

struct DayView<'a> {
    heading: String,
    sum: String,
    /// A closed day on which something falls, or more to do than there is stated time.
    warning: String,
    is_open: bool,
    rows: Vec<Row<'a>>,
    readings: Vec<String>,
}

struct PersonView {
    name: String,
    /// Time, and where it is over the stated hours, by how much.
    cells: Vec<(String, Option<String>)>,
    total: String,
}

/// Everything the page asks the store, in one snapshot.
struct Facts {
    counts: Counts,
    to_check: usize,
    in_making: usize,
    urgent: Vec<Line>,
    pulls: Vec<Line>,
    sums: Vec<DaySum>,
    people: Vec<PersonDay>,
    coming: Vec<(usize, u32)>,
    cylinders: Vec<OpenCylinder>,
    working: WorkingDays,
    next: Option<(NaiveDate, i64, String)>,
}

fn facts(visit: &Visit, today: NaiveDate) -> Result<Facts, Failure> {
    let last = plus_days(today, week::DAYS - 1);
    visit.read(|reader| {
        // What the counts say is empty is not asked for.
        let counts = store::open_pull::counts(reader, today)?;
        let some = |count: usize| MOST_ROWS.min(count);
        Ok(Facts {
            counts,
            to_check: store::check::count_waiting(reader)?,
            in_making: store::batch::open_count(reader)?,
            urgent: match some(counts.urgent) {
                0 => Vec::new(),
                most => store::open_pull::urgent(reader, today, most)?,
            },
            pulls: match some(counts.week) {
                0 => Vec::new(),
                most => store::open_pull::list(reader, Show::Week, today, None, most as i64)?,
            },
            sums: store::week::days(reader, today, last)?,
            people: store::week::people(reader, today, last)?,
            coming: store::week::weeks(reader, week::coming_weeks(today))?,
            cylinders: match counts.in_test {
                0 => Vec::new(),
                _ => store::week::cylinders(reader, visit.at.zone)?,
            },
            working: store::setting::working_days(reader)?,
            next: if counts.is_idle() { store::week::next(reader, last)? } else { None },
        })
    })
}

#[derive(Template)]
#[template(path = "week/week.html")]
struct WeekPage<'a> {
    shell: Shell,
    week: String,
    late: String,
    closing: String,
    in_test: String,
    to_check: String,
    /// Lots in the making; empty without one.
    in_making: String,
    may_assign: bool,
    may_set_days: bool,
    is_idle: bool,
    next: Option<(String, i64, String)>,
    urgent: Vec<Row<'a>>,
    days: Vec<DayView<'a>>,
    day_heads: Vec<String>,
    people: Vec<PersonView>,
    /// Days, pulls, bench time, closed days among them.
    coming: Vec<(String, usize, String, String)>,
    is_cut: bool,
    is_urgent_cut: bool,
}

fn the_week(visit: &Visit) -> Outcome {
    let today = visit.at.date();
    let facts = facts(visit, today)?;
    let Counts { week: in_week, late, closing, in_test, .. } = facts.counts;
    let days = days(&facts, today);
    let pulls = |count: usize| show::counted(count, "pull", "pulls");
    let are = |count: usize, words: &str| match count {
        1 => format!("1 {}", words.replacen("are", "is", 1)),
        count => format!("{count} {words}"),
    };
    let title = format!("Week from {}", week::day_words(today));
    page(&WeekPage {
        shell: Shell::of(visit, &title),
        week: format!("{} this week", pulls(in_week)),
        late: are(late, "are late"),
        closing: match closing {
            1 => "1 window closes today or tomorrow".to_string(),
            count => format!("{count} windows close today or tomorrow"),
        },
        in_test: are(in_test, "are in testing"),
        to_check: match facts.to_check {
            1 => "1 result waits for a check".to_string(),
            count => format!("{count} results wait for a check"),
        },
        in_making: match facts.in_making {
            0 => String::new(),
            1 => "1 lot is in the making".to_string(),
            count => format!("{count} lots are in the making"),
        },
        may_assign: visit.may(Act::AssignPull),
        may_set_days: visit.may(Act::SetWorkingDays),
        is_idle: facts.counts.is_idle(),
        next: facts.next.clone().map(|(on, pull, number)| (date_shown(on), pull, number)),
        urgent: facts.urgent.iter().map(|pull| row(pull, today)).collect(),
        days,
        day_heads: week::days(today).into_iter().map(week::short_day).collect(),
        people: people(&facts.people, &facts.working, today),
        coming: coming(&facts.coming, &facts.working, today),
        is_cut: in_week > facts.pulls.len(),
        is_urgent_cut: facts.counts.urgent > facts.urgent.len(),
    })
}

fn coming(
    sums: &[(usize, u32)],
    working: &WorkingDays,
    today: NaiveDate,
) -> Vec<(String, usize, String, String)> {
    let week = |((first, last), (pulls, minutes)): ((NaiveDate, NaiveDate), &(usize, u32))| {
        let window = crate::domain::window::Window { earliest_on: first, latest_on: last };
        // Closed weekdays come every week; what is worth a word are the single days.
        let closed = working.closed_between(first, last).into_iter();
        let closed =
            closed.filter(|day| !working.closed_weekdays.contains(&day.weekday())).map(week::short_day);
        let closed = closed.collect::<Vec<_>>().join(", ");
        (window.words(), *pulls, minutes_words(*minutes), closed)
    };
    week::coming_weeks(today).into_iter().zip(sums).map(week).collect()
}

/// `3 h 20 min of 6 h stated`, and what to look at: a closed day, or too little time.
fn day_sum(pulls: usize, minutes: u32, day: NaiveDate, working: &WorkingDays) -> (String, String) {
    let is_closed = working.is_closed(day);
    let stated = working.minutes_on(day);
    let of = stated.filter(|_| !is_closed).map(|stated| format!(" of {} stated", minutes_words(stated)));
    let sum = match pulls {
        0 if is_closed => "closed".to_string(),
        0 => "no pulls".to_string(),
        pulls => format!(
            "{}, about {}{}",
            show::counted(pulls, "pull", "pulls"),
            minutes_words(minutes),
            of.unwrap_or_default()
        ),
    };
    let over = stated.map(|stated| minutes.saturating_sub(stated)).filter(|over| *over > 0);
    let warning = match (pulls, is_closed, over) {
        (0, ..) => String::new(),
        (_, true, _) => "the site is closed".to_string(),
        (_, false, Some(over)) => format!("over by {}", minutes_words(over)),
        _ => String::new(),
    };
    (sum, warning)
}

fn days(facts: &Facts, today: NaiveDate) -> Vec<DayView<'_>> {
    week::days(today)
        .into_iter()
        .map(|day| {
            let sum = facts.sums.iter().find(|sum| sum.on == day);
            let (pulls, minutes) = sum.map_or((0, 0), |sum| (sum.pulls, sum.minutes));
            let (sum, warning) = day_sum(pulls, minutes, day, &facts.working);
            let is_on = |pull: &&Line| pull.facts.due_on.map(|due| week::day_of(due, today)) == Some(day);
            DayView {
                heading: week::day_words(day),
                sum,
                warning,
                is_open: day == today,
                rows: facts.pulls.iter().filter(is_on).map(|pull| row(pull, today)).collect(),
                readings: readings(&facts.cylinders, day, today),
            }
        })
        .collect()
}

/// The cylinder readings planned for a day; what was due before today and is not read stands under today.
fn readings(cylinders: &[OpenCylinder], day: NaiveDate, today: NaiveDate) -> Vec<String> {
    let mut found = Vec::new();
    for open in cylinders {
        for (minute, at) in open.cylinder.to_read() {
            if at.date().max(today) == day {
                let what = format!("{} {}", open.sample_number, open.label);
                found.push((at.stored(), format!("{} ({}), {what}", at.shown(), week::minute_words(minute))));
            }
        }
    }
    found.sort();
    found.into_iter().map(|(_, words)| words).collect()
}

fn people(lines: &[PersonDay], working: &WorkingDays, today: NaiveDate) -> Vec<PersonView> {
    let mut accounts: Vec<(i64, String)> =
        lines.iter().map(|line| (line.account, line.full_name.clone())).collect();
    accounts.dedup();
    accounts
        .into_iter()
        .map(|(account, name)| {
            let own: Vec<&PersonDay> = lines.iter().filter(|line| line.account == account).collect();
            let cell = |day: NaiveDate| match own.iter().find(|line| line.on == day) {
                Some(line) => {
                    let stated = working.minutes_of(account, day);
                    let over =
                        stated.map(|stated| line.minutes.saturating_sub(stated)).filter(|over| *over > 0);
                    (minutes_words(line.minutes), over.map(|over| format!("over by {}", minutes_words(over))))
                }
                None => ("–".to_string(), None),
            };
            PersonView {
                name,
                cells: week::days(today).into_iter().map(cell).collect(),
                total: minutes_words(own.iter().map(|line| line.minutes).sum()),
            }
        })
        .collect()
}
