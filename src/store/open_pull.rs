//! The pulls that still ask for work: their lists and their counts, from one derived row each.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::{Answer, Day, Reader};
use crate::domain::moment::{date_from_stored, date_stored, plus_days};
use crate::domain::pull::{Event, Progress, PullFacts};

/// A pull as a list of work shows it.
#[derive(Clone, Debug)]
pub struct Line {
    pub pull: i64,
    pub study: i64,
    words: Words,
    pub containers_taken: i64,
    /// Containers of the arm that still stand in the chamber.
    pub containers_left: i64,
    /// Who has it.
    pub assigned_name: Option<String>,
    /// Hands-on minutes of its tests, from their methods.
    pub minutes: u32,
    pub test_within_days: Option<i64>,
    /// What its status and its window need. A rule asks the records themselves.
    pub facts: PullFacts,
}

const PARTS: usize = 16;

/// The parts of a stored line in one text, and where each ends.
#[derive(Clone, Debug)]
struct Words {
    text: String,
    ends: [u16; PARTS],
}

impl Words {
    fn new(text: String) -> Words {
        let place = |at: usize| u16::try_from(at).unwrap_or(u16::MAX);
        let mut ends = [place(text.len()); PARTS];
        for (end, at) in ends.iter_mut().zip(memchr::memchr_iter(0x1f, text.as_bytes())) {
            *end = place(at);
        }
        Words { text, ends }
    }

    fn part(&self, number: usize) -> &str {
        let start = if number == 0 { 0 } else { usize::from(self.ends[number - 1]) + 1 };
        self.text.get(start..usize::from(self.ends[number])).unwrap_or_default()
    }

    fn number(&self, part: usize) -> Option<i64> {
        self.part(part).parse().ok()
    }
}

impl Line {
    pub fn lot_number(&self) -> &str {
        self.words.part(0)
    }

    pub fn product_words(&self) -> &str {
        self.words.part(1)
    }

    pub fn container_word(&self) -> &str {
        self.words.part(2)
    }

    pub fn study_number(&self) -> &str {
        self.words.part(3)
    }

    /// Condition and orientation.
    pub fn condition(&self) -> &str {
        self.words.part(4)
    }

    /// Empty where no chamber is named.
    pub fn chamber_code(&self) -> &str {
        self.words.part(5)
    }

    pub fn age_text(&self) -> &str {
        self.words.part(6)
    }

    /// Of the pull and of its sample: `ST-031-P07`.
    pub fn number(&self) -> &str {
        self.words.part(7)
    }

    /// Hexadecimal.
    pub fn uuid(&self) -> &str {
        self.words.part(8)
    }
}

/// Which pulls a list of work shows; each is one range of an index.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Show {
    /// To take, and the window has closed.
    Late,
    /// To take, and the window closes today or tomorrow.
    Closing,
    /// To take, due within seven days from today or with an open window, and not late.
    Week,
    /// Taken, and not all tests have their result.
    InTest,
    /// To take, and the last day for it is tomorrow or before.
    UrgentToTake,
    /// In testing, and the last day for it is tomorrow or before.
    UrgentInTest,
    /// To take, due in the 28 days after the week.
    Coming,
    /// Everything that is to be taken.
    ToTake,
}

impl Show {
    /// Whether its list goes by the due date; the others go by the last day.
    pub fn is_by_due_date(self) -> bool {
        matches!(self, Show::Week | Show::Coming | Show::ToTake)
    }
}

/// The place in a list after which it goes on: paging by key.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct After {
    pub on: String,
    pub pull: i64,
}

impl After {
    /// The place of a pull in a list.
    pub fn of(pull: &Line, show: Show) -> After {
        After { on: day_of(pull, show).map(date_stored).unwrap_or_default(), pull: pull.pull }
    }

    /// `2026-12-08.17`, for an address.
    pub fn text(&self) -> String {
        format!("{}.{}", self.on, self.pull)
    }

    pub fn from_text(text: &str) -> Option<After> {
        let (on, pull) = text.split_once('.')?;
        Some(After { on: on.to_string(), pull: pull.parse().ok()? })
    }
}

/// The day a list goes by.
fn day_of(pull: &Line, show: Show) -> Option<NaiveDate> {
    let facts = &pull.facts;
    match (facts.happened_on, pull.test_within_days) {
        _ if show.is_by_due_date() => facts.due_on,
        (Some(on), days) => Some(plus_days(on, days.unwrap_or(0))),
        _ => facts.latest_on.or(facts.due_on),
    }
}

/// The range of the index that a list walks in its order, `o`. The plus signs keep it on that index: a list of fifty
/// never sorts what stands behind it.
fn range(show: Show) -> &'static str {
    match show {
        Show::Late => {
            "o.stage = 'to take' and o.latest_on < :today and +o.due_on < :today
             and (o.latest_on, o.pull) > (:after_on, :after_pull) order by o.latest_on, o.pull limit :limit"
        }
        Show::Closing => {
            "o.stage = 'to take' and o.latest_on between :today and :tomorrow and +o.due_on <= :tomorrow
             and (o.latest_on, o.pull) > (:after_on, :after_pull) order by o.latest_on, o.pull limit :limit"
        }
        Show::InTest => {
            "o.stage = 'in test' and (o.latest_on, o.pull) > (:after_on, :after_pull)
             order by o.latest_on, o.pull limit :limit"
        }
        Show::Week => {
            "o.stage = 'to take' and o.due_on <= :week_end and +o.latest_on >= :today
             and (o.due_on, o.pull) > (:after_on, :after_pull) order by o.due_on, o.pull limit :limit"
        }
        Show::Coming => {
            "o.stage = 'to take' and o.due_on > :week_end and o.due_on <= :coming_end
             and (o.due_on, o.pull) > (:after_on, :after_pull) order by o.due_on, o.pull limit :limit"
        }
        Show::ToTake => {
            "o.stage = 'to take' and (o.due_on, o.pull) > (:after_on, :after_pull)
             order by o.due_on, o.pull limit :limit"
        }
        Show::UrgentToTake => {
            "o.stage = 'to take' and o.latest_on <= :tomorrow and +o.due_on <= :tomorrow
             and (o.latest_on, o.pull) > (:after_on, :after_pull) order by o.latest_on, o.pull limit :limit"
        }
        Show::UrgentInTest => {
            "o.stage = 'in test' and o.latest_on <= :tomorrow and +o.due_on <= :tomorrow
             and (o.latest_on, o.pull) > (:after_on, :after_pull) order by o.latest_on, o.pull limit :limit"
        }
    }
}

fn dates(today: NaiveDate) -> [Day; 4] {
    [0, 1, 6, 34].map(|days| Day(plus_days(today, days)))
}

const LINE: &str = "select l.words, l.state, coalesce(k.containers_left, 0), g.full_name
    from open_pull o
    cross join open_line l on l.pull = o.pull
    left join arm_stock k on k.study_arm = l.study_arm
    left join account g on g.id = l.account
    where :today || :tomorrow || :week_end || :coming_end is not null and ";

/// The pulls of a list from a place on: by their last day or, where the list goes by it, their due date.
pub fn list(
    reader: &Reader<'_>,
    show: Show,
    today: NaiveDate,
    after: Option<&After>,
    limit: i64,
) -> Answer<Vec<Line>> {
    let [today, tomorrow, week_end, coming_end] = dates(today);
    let params = named_params! {
        ":today": today,
        ":tomorrow": tomorrow,
        ":week_end": week_end,
        ":coming_end": coming_end,
        ":after_on": after.map(|after| after.on.as_str()).unwrap_or_default(),
        ":after_pull": after.map_or(0, |after| after.pull),
        ":limit": limit,
    };
    reader.all(&format!("{LINE}{}", range(show)), params, from_row)
}

/// What is to be taken or tested by tomorrow or before, the last day that comes first on top.
pub fn urgent(reader: &Reader<'_>, today: NaiveDate, limit: usize) -> Answer<Vec<Line>> {
    let most = i64::try_from(limit).unwrap_or(i64::MAX);
    let mut lines = list(reader, Show::UrgentToTake, today, None, most)?;
    lines.extend(list(reader, Show::UrgentInTest, today, None, most)?);
    lines.sort_by_key(|line| (day_of(line, Show::UrgentToTake), line.pull));
    lines.truncate(limit);
    Ok(lines)
}

fn from_row(row: &Row<'_>) -> rusqlite::Result<Line> {
    let words = Words::new(row.get(0)?);
    let mut state = row.get_ref(1)?.as_str()?;
    let mut count = || count_of(&mut state);
    let (containers_taken, minutes) = (count(), count());
    let progress = Progress {
        tests: count(),
        started: count(),
        complete: count(),
        checked: count(),
        sent_back: count(),
        out_of_specification: count(),
    };
    let happened_on = date_from_stored(state);
    Ok(Line {
        pull: words.number(13).unwrap_or_default(),
        study: words.number(14).unwrap_or_default(),
        test_within_days: words.number(15),
        containers_taken: i64::try_from(containers_taken).unwrap_or_default(),
        containers_left: row.get(2)?,
        assigned_name: row.get(3)?,
        minutes: u32::try_from(minutes).unwrap_or_default(),
        // An open pull is neither imported nor signed.
        facts: PullFacts {
            event: happened_on.map(|_| Event::Pulled),
            happened_on,
            due_on: date_from_stored(words.part(9)),
            earliest_on: date_from_stored(words.part(10)),
            latest_on: date_from_stored(words.part(11)),
            containers_needed: words.number(12).and_then(|count| count.try_into().ok()).unwrap_or_default(),
            progress,
            ..PullFacts::default()
        },
        words,
    })
}

/// Takes one count and the space after it from the start of a stored state.
fn count_of(state: &mut &str) -> usize {
    let digits = state.bytes().take_while(u8::is_ascii_digit).count();
    let (number, rest) = state.split_at(digits);
    *state = rest.strip_prefix(' ').unwrap_or(rest);
    number.bytes().fold(0, |sum, digit| sum * 10 + usize::from(digit - b'0'))
}

/// How many rows the lists have without a limit.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Counts {
    pub late: usize,
    pub closing: usize,
    pub week: usize,
    pub in_test: usize,
    pub urgent: usize,
}

impl Counts {
    /// Nothing to take this week, nothing late, nothing in testing.
    pub fn is_idle(&self) -> bool {
        self.week + self.late + self.closing + self.in_test == 0
    }

    /// Of one list; none for those that no page counts by themselves.
    pub fn of(&self, show: Show) -> Option<usize> {
        match show {
            Show::Late => Some(self.late),
            Show::Closing => Some(self.closing),
            Show::Week => Some(self.week),
            Show::InTest => Some(self.in_test),
            Show::Coming | Show::ToTake | Show::UrgentToTake | Show::UrgentInTest => None,
        }
    }
}

/// All counts in one statement, from the sums by day.
pub fn counts(reader: &Reader<'_>, today: NaiveDate) -> Answer<Counts> {
    let [today, tomorrow, week_end, _] = dates(today);
    let count = |row: &Row<'_>, at: usize| -> rusqlite::Result<usize> {
        Ok(usize::try_from(row.get::<_, Option<i64>>(at)?.unwrap_or_default()).unwrap_or_default())
    };
    reader.one(
        "counts",
        // A last day never comes before its due date: what is late is due before today, what closes by tomorrow
        // is due by then. So the week is all that is due by its end, less what is late.
        "select
            (select sum(pulls) from open_day where stage = 'to take' and latest_on < :today),
            (select sum(pulls) from open_day
             where stage = 'to take' and latest_on between :today and :tomorrow),
            (select sum(pulls) from open_due where stage = 'to take' and due_on <= :week_end),
            (select sum(pulls) from open_due where stage = 'in test'),
            (select sum(pulls) from open_day
             where stage = 'in test' and +due_on <= :tomorrow and latest_on <= :tomorrow)",
        named_params! { ":today": today, ":tomorrow": tomorrow, ":week_end": week_end },
        |row| {
            let (late, closing) = (count(row, 0)?, count(row, 1)?);
            Ok(Counts {
                late,
                closing,
                week: count(row, 2)?.saturating_sub(late),
                in_test: count(row, 3)?,
                // What is to be taken by tomorrow or before is either late or closing.
                urgent: late + closing + count(row, 4)?,
            })
        },
    )
}

/// How many rows a list has without a limit.
pub fn count(reader: &Reader<'_>, show: Show, today: NaiveDate) -> Answer<usize> {
    if let Some(count) = counts(reader, today)?.of(show) {
        return Ok(count);
    }
    let [_, _, week_end, coming_end] = dates(today);
    let count: i64 = reader.one(
        "count",
        "select coalesce(sum(pulls), 0) from open_due
         where stage = 'to take' and due_on > :week_end and due_on <= :coming_end",
        named_params! { ":week_end": week_end, ":coming_end": coming_end },
        |row| row.get(0),
    )?;
    Ok(usize::try_from(count).unwrap_or_default())
}
