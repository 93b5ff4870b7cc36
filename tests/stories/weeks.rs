//! The lab manager's week.

use chrono::NaiveDate;
use supernate::domain::method::TestKind;
use supernate::domain::moment::plus_days;
use supernate::domain::pull::Event;
use supernate::store;
use supernate::store::open_pull::{Show, counts, list};
use supernate::store::pull::Pull;

use crate::support::{Lab, Seen, world};

const KINDS: [TestKind; 2] = [TestKind::Redispersibility, TestKind::Ph];

/// The rows of the tables of a page that lead to a pull, by the pull.
fn pulls_on(page: &Seen) -> Vec<String> {
    let mut links: Vec<String> =
        page.links().into_iter().filter(|path| path.starts_with("/pulls/") && !path.contains('#')).collect();
    links.sort();
    links
}

#[test]
fn an_idle_week_says_what_comes_next() {
    let lab = Lab::new();
    lab.manager().sees("/week", "Nothing is due. No study has a pull ahead");
    lab.manager().sees("/week/list", "Nothing is to be taken");
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    for arm in [1, 3, 4, 6] {
        world::take(&lab, &world::pull(&lab, study, arm, "Initial"));
    }
    lab.later_days(20);
    let page = lab.manager().sees("/week", "0 pulls this week");
    assert!(page.text().contains("4 are in testing"), "{}", page.text());
}

/// Screen 15a: each count leads to exactly its rows.
#[test]
fn the_counts_of_the_week_lead_to_exactly_their_rows() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    world::study(&lab, "TW-104-0641", &KINDS);
    let page = lab.manager().sees("/week", "8 pulls this week . 0 are late .");
    assert!(page.text().contains("Week from Tuesday 1 December"), "{}", page.text());
    assert_eq!(pulls_on(&lab.manager().get("/week/pulls?show=week")).len(), 8);
    world::take(&lab, &world::pull(&lab, study, 1, "Initial"));
    lab.later_days(3);
    let page =
        lab.manager().sees("/week", "7 pulls this week . 0 are late . 7 windows close today or tomorrow");
    assert!(page.text().contains("1 is in testing"), "{}", page.text());
    lab.later_days(1);
    let page = lab.manager().sees("/week", "0 pulls this week . 7 are late . 0 windows close");
    assert!(page.text().contains("1 day late"), "{}", page.text());
    for (list, rows) in [("late", 7), ("closing", 0), ("week", 0), ("testing", 1), ("coming", 0)] {
        let listed = pulls_on(&lab.manager().get(&format!("/week/pulls?show={list}")));
        assert_eq!(listed.len(), rows, "{list}");
    }
    assert_eq!(lab.manager().get("/week/pulls?show=other").status, 404);
    lab.analyst().sees("/week/list", "TW-104-0641");
}

/// The lists, counted a second time from the facts of every pull.
#[test]
fn the_lists_agree_with_the_facts_of_every_pull() {
    let lab = Lab::new();
    let first = world::study(&lab, "TW-104-0640", &KINDS);
    lab.later_days(40);
    let second = world::study(&lab, "TW-104-0641", &KINDS);
    world::take(&lab, &world::pull(&lab, first, 1, "Initial"));
    let because = [("because", "the power failed over the week")];
    let missed = format!("/pulls/{}", world::pull(&lab, first, 3, "Initial").id);
    lab.manager().does(&missed, &format!("{missed}/miss"), &because);
    let cancelled = format!("/pulls/{}", world::pull(&lab, second, 1, "12 months").id);
    let because = [("cancelled_because", "the customer ended the study")];
    lab.reviewer().does(&cancelled, &format!("{cancelled}/cancel"), &because);
    for days in [0, 3, 4, 49, 50, 51, 52, 58, 59, 60, 330, 800, 1200] {
        let today = plus_days(lab.now().date(), days);
        let all = lab.app.db.read(|reader| {
            let mut all = store::pull::of_study(reader, first)?;
            all.extend(store::pull::of_study(reader, second)?);
            Ok(all)
        });
        let all = all.unwrap();
        for show in [
            Show::Late,
            Show::Closing,
            Show::Week,
            Show::Coming,
            Show::ToTake,
            Show::InTest,
            Show::UrgentToTake,
            Show::UrgentInTest,
        ] {
            let expected: Vec<&Pull> = all.iter().filter(|pull| is_on(show, pull, today)).collect();
            let count = lab.app.db.read(|reader| counts(reader, today)).unwrap().of(show);
            let list = lab.app.db.read(|reader| list(reader, show, today, None, 500)).unwrap();
            let count = match show {
                Show::Coming => {
                    Some(lab.app.db.read(|reader| store::open_pull::count(reader, show, today)).unwrap())
                }
                _ => count,
            };
            assert_eq!(count.unwrap_or(list.len()), expected.len(), "{show:?} on {today}");
            assert_eq!(list.len(), expected.len(), "{show:?} on {today}");
            assert!(list.iter().all(|line| expected.iter().any(|pull| pull.id == line.pull)), "{show:?}");
        }
    }
}

fn is_on(show: Show, pull: &Pull, today: NaiveDate) -> bool {
    let (due_on, latest_on) = (pull.facts.due_on.unwrap(), pull.facts.latest_on.unwrap());
    let (tomorrow, week_end) = (plus_days(today, 1), plus_days(today, 6));
    let is_to_take = pull.facts.event.is_none();
    match show {
        Show::Late => is_to_take && latest_on < today,
        Show::Closing => is_to_take && latest_on >= today && latest_on <= tomorrow && due_on <= tomorrow,
        Show::Week => is_to_take && due_on <= week_end && latest_on >= today,
        Show::Coming => is_to_take && due_on > week_end && due_on <= plus_days(today, 34),
        Show::ToTake => is_to_take,
        Show::InTest => pull.facts.event == Some(Event::Pulled),
        Show::UrgentToTake => is_to_take && latest_on <= tomorrow && due_on <= tomorrow,
        Show::UrgentInTest => {
            pull.facts.event == Some(Event::Pulled) && due_on <= tomorrow && tested_by(pull) <= tomorrow
        }
    }
}

fn tested_by(pull: &Pull) -> NaiveDate {
    plus_days(pull.facts.happened_on.unwrap(), pull.test_within_days.unwrap_or(0))
}

/// screen_U96: windows close at the site's midnight, which in summer is 23:00 UTC.
#[test]
fn a_window_closes_at_the_sites_midnight() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    let pull = world::pull(&lab, study, 1, "6 months");
    assert_eq!(pull.facts.window().unwrap().words(), "1–8 Jun 2027");
    let path = format!("/pulls/{}", pull.id);
    lab.clock("2027-06-08T22:59:00Z");
    lab.manager().sees(&path, "closes today 23:59");
    let is_listed =
        |list: &str| pulls_on(&lab.manager().get(&format!("/week/pulls?show={list}"))).contains(&path);
    assert!(is_listed("closing") && !is_listed("late"));
    lab.clock("2027-06-08T23:00:00Z");
    lab.manager().sees(&path, "1 day late");
    assert!(is_listed("late") && !is_listed("closing"));
    lab.clock("2027-05-31T22:59:00Z");
    lab.manager().sees(&path, "opens in 1 day");
    lab.clock("2027-05-31T23:00:00Z");
    lab.manager().sees(&path, "closes in 7 days");
}

#[test]
fn the_week_says_who_has_what_and_how_long_it_takes() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    let pull = world::pull(&lab, study, 1, "Initial");
    let ilse = lab.actor("ilse.brandt").account.to_string();
    let path = format!("/pulls/{}", pull.id);
    lab.manager().does(&path, &format!("{path}/assign"), &[("account", &ilse)]);
    let page = lab.manager().sees("/week", "Who has what");
    let minutes = supernate::domain::protocol::cost::minutes_words(pull.minutes);
    assert!(pull.minutes > 0 && page.text().contains(&format!("Ilse Brandt {minutes}")), "{}", page.text());
    let all = supernate::domain::protocol::cost::minutes_words(pull.minutes * 4);
    assert!(page.text().contains(&format!("Tuesday 1 December 4 pulls, about {all}")), "{}", page.text());
}

#[test]
fn several_pulls_are_given_to_a_person_with_one_form() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    let pulls = [1, 3].map(|arm| world::pull(&lab, study, arm, "Initial"));
    let ilse = lab.actor("ilse.brandt").account.to_string();
    let names = pulls.iter().map(|pull| format!("pull.{}", pull.id)).collect::<Vec<_>>();
    let page = "/week/assign";
    let none = lab.manager().submits(page, page, &[("account", &ilse)]);
    assert_eq!(none.status, 409, "{}", none.text());
    assert!(none.text().contains("No pull is chosen"), "{}", none.text());
    let given = [("account", ilse.as_str()), (&names[0], "yes"), (&names[1], "yes")];
    let week = lab.manager().does(page, page, &given);
    let minutes = supernate::domain::protocol::cost::minutes_words(pulls[0].minutes + pulls[1].minutes);
    assert!(week.text().contains(&format!("Ilse Brandt {minutes}")), "{}", week.text());
    for pull in &pulls {
        lab.auditor().sees(&format!("/pulls/{}", pull.id), "to Ilse Brandt");
    }
    let later = world::pull(&lab, study, 1, "12 months");
    let unknown = [("account", ilse.as_str()), (&format!("pull.{}", later.id), "yes")];
    assert_eq!(lab.manager().submits(page, page, &unknown).status, 400);
}

#[test]
fn the_calendar_file_has_one_event_for_each_pull_to_take() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    world::take(&lab, &world::pull(&lab, study, 1, "Initial"));
    let file = lab.manager().get("/week/calendar.ics");
    assert_eq!(file.status, 200);
    let text = file.html();
    assert_eq!(text.matches("BEGIN:VEVENT").count(), 21);
    let dates = |name: &str| -> Vec<String> {
        let lines = text.split("\r\n").filter_map(|line| line.strip_prefix(name));
        lines.map(str::to_string).collect()
    };
    let (starts, ends) = (dates("DTSTART;VALUE=DATE:"), dates("DTEND;VALUE=DATE:"));
    assert_eq!((starts.len(), ends.len()), (21, 21));
    assert!(starts.iter().zip(&ends).all(|(start, end)| start < end));
    assert!(text.split("\r\n").all(|line| line.len() <= 75));
}

#[test]
fn a_long_list_is_paged_by_key() {
    let lab = Lab::new();
    for number in 0..14 {
        world::study(&lab, &format!("TW-104-{number:04}"), &KINDS);
    }
    let first = lab.manager().sees("/week/pulls?show=week", "56 pulls in all");
    let more = first.links().into_iter().find(|path| path.contains("after=")).unwrap();
    let second = lab.manager().get(&more);
    let (first, second) = (pulls_on(&first), pulls_on(&second));
    assert_eq!((first.len(), second.len()), (50, 6));
    assert!(second.iter().all(|path| !first.contains(path)));
}

/// Screens 15a: the sums of a day stand against the stated hours, and a closed day with something on it is marked.
#[test]
fn closed_days_and_stated_hours_stand_beside_the_sums() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    let pull = world::pull(&lab, study, 1, "Initial");
    let ilse = lab.actor("ilse.brandt").account;
    let path = format!("/pulls/{}", pull.id);
    lab.manager().does(&path, &format!("{path}/assign"), &[("account", &ilse.to_string())]);
    let hours = format!("hours.{ilse}");
    let why = ("reason", "hours agreed for the winter");
    let bad = [("dates", "25 Dec 2026\n31 Feb 2027\nEaster"), (hours.as_str(), "25"), why];
    let seen = lab.manager().submits("/week/days", "/week/days", &bad);
    assert_eq!(seen.status, 422, "{}", seen.text());
    for words in ["“31 Feb 2027” is not a date", "“Easter” is not a date", "Hours"] {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    let all = ["monday", "tuesday", "wednesday", "thursday", "friday", "saturday", "sunday"];
    let mut closed: Vec<(&str, &str)> = all.iter().map(|day| (*day, "yes")).collect();
    closed.push(why);
    let refused = lab.manager().submits("/week/days", "/week/days", &closed);
    assert_eq!(refused.status, 409, "{}", refused.text());
    assert_eq!(lab.analyst().get("/week/days").status, 403);

    let good =
        [("saturday", "yes"), ("sunday", "yes"), ("dates", "25 Dec 2026"), (hours.as_str(), "0.1"), why];
    let seen = lab.manager().does("/week/days", "/week/days", &good);
    let over = supernate::domain::protocol::cost::minutes_words(pull.minutes - 6);
    assert!(seen.text().contains(&format!("over by {over}")), "{}", seen.text());
    assert!(seen.text().contains("of 6 min stated"), "{}", seen.text());
    assert!(seen.text().contains("Saturday 5 December closed"), "{}", seen.text());
    assert!(seen.text().contains("Fri 25"), "the closed day of a coming week: {}", seen.text());
    lab.auditor()
        .sees("/history", "closed on Saturday, Sunday; closed dates 25 Dec 2026; Ilse Brandt 6 min a day");
    let kept = lab.manager().get("/week/days").form("/week/days");
    assert!(kept.contains(&(hours.clone(), "0.1".to_string())), "{kept:?}");

    lab.clock("2026-12-05T09:00:00Z");
    lab.manager().sees("/week", "Saturday 5 December");
    let lot = world::lot(&lab, "TW-104-0641");
    let check = format!("/studies/new/check?lot={lot}&protocol_version=1");
    lab.manager().sees(&check, "Initial: due on a closed day, 5 Dec 2026; its window has open days.");
}
