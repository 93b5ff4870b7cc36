//! Making a lot: step by step at a tablet, by people who check each other, resumed, corrected, closed.

use supernate::domain::instrument::EventKind;

use crate::support::batches::{Floor, balance_event};
use crate::support::{Lab, world};

use super::verification::{tampered, verify};

/// req_U6, req_U8: from the approved version to the closed record, every entry with its own act and time.
#[test]
fn a_lot_is_made_from_start_to_closed_record() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let choose = lab.operator().sees("/batches/new", "F-104 version 1");
    assert!(choose.text().replace('\u{202f}', " ").contains("500 L"));
    let before = lab.operator().get(&format!("/batches/new?formulation_version={}&size=500", floor.version));
    assert!(before.text().contains("40.00"), "{}", before.text());
    let record = floor.starts("TW-104-0720");
    lab.operator().sees(&record, "Next: 1.1 Weigh the hydroxide.");
    lab.operator().sees("/batches", "1 lot is in the making.");
    lab.auditor().sees("/lots/1", "in the making");

    floor.dispenses(&record);
    lab.operator().sees(&record, "Next: 2.1 Hydrate the gum.");
    floor.compounds(&record);
    lab.operator().sees(&record, "Next: the yield of “Compounding”");
    floor.yields(&record, 2, "496", "99.2");
    floor.fills(&record);
    floor.yields(&record, 3, "4930", "98.6");
    lab.operator().sees(&record, "All steps are done. The record can be closed.");
    lab.operator().signs(&record, &format!("{record}/close"), &[]);

    let page = lab.auditor().sees(&record, "The record is closed. QA reviews it with the lot.");
    assert!(page.text().contains("Written by me and complete"));
    lab.auditor().sees("/batches", "TW-104-0720");
    let whole = lab.auditor().sees(&format!("{record}/record"), "No value was changed");
    let text = whole.text().replace('\u{202f}', " ");
    for words in ["41.44 kg", "balance BAL-7", "98.60 %", "1350 rpm", "in MV-2", "weight set W-3"] {
        assert!(text.contains(words), "{words}: {text}");
    }
    let refused = lab.operator().get(&format!("{record}/steps/3"));
    assert!(refused.text().contains("The record BR-TW-104-0720 is closed"), "{}", refused.text());
    let report = verify(&tampered(&lab, "select 1;").0, None);
    assert!(report.findings.is_empty(), "{:?}", report.findings);
}

/// req_I3: five entries of one step are five rows with five times.
#[test]
fn every_entry_has_its_own_act_and_its_own_time() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let record = floor.starts("TW-104-0720");
    let (bea, balance) = (lab.operator(), floor.balance.to_string());
    floor.begins(&record, 2);
    for net in ["0.500", "0.400", "0.300", "0.450", "0.350"] {
        lab.later_minutes(1);
        let fields = [("material_lot", "ML-2"), ("balance", &*balance), ("net", net)];
        floor.does(&bea, &record, 2, "weighing", &fields);
    }
    let entries = lab.app.db.read(|reader| supernate::store::batch::entry::of_record(reader, 1)).unwrap();
    let mut times: Vec<&str> = entries.iter().map(|one| one.at.as_str()).collect();
    times.dedup();
    assert_eq!((entries.len(), times.len()), (6, 6));
    let seen = bea.sees(&format!("{record}/steps/2"), "Weighed so far");
    assert!(seen.text().replace('\u{202f}', " ").contains("2 kg"), "{}", seen.text());
    floor.does(&bea, &record, 2, "end", &[]);
    let lot =
        lab.app.db.read(|reader| supernate::store::material_lot::by_scan(reader, "ML-2")).unwrap().unwrap();
    assert_eq!(lot.facts.balance, "23.000".parse().unwrap());
}

/// Bad input of the issue: wrong scan, wrong or expired material, a weight out of range.
#[test]
fn a_weighing_with_the_wrong_thing_is_refused_with_what_to_do() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    world::material_lot(&lab, 2, "ML-3", "25.000", "2028-06-30");
    let short = world::material_lot(&lab, 2, "ML-4", "25.000", "2026-12-02");
    world::release_material_lot(&lab, short);
    let record = floor.starts("TW-104-0720");
    let (bea, balance) = (lab.operator(), floor.balance.to_string());
    floor.begins(&record, 2);
    let page = format!("{record}/steps/2");
    let weigh = |lot: &str, net: &str, more: &[(&str, &str)]| {
        let mut fields = vec![("material_lot", lot), ("balance", &*balance), ("net", net)];
        fields.extend_from_slice(more);
        floor.tries(&bea, &record, 2, "weighing", &fields)
    };
    let unknown = weigh("ML-99", "2.000", &[]);
    assert_eq!(unknown.status, 409);
    assert!(unknown.text().contains("There is no material lot “ML-99”. Scan its label again"));
    assert!(unknown.html().contains("value=\"2.000\""), "what was typed is kept");
    let wrong = weigh("ML-1", "2.000", &[]);
    assert!(wrong.text().contains("ML-1 is magnesium hydroxide, and the step asks for xanthan gum"));
    let quarantined = weigh("ML-3", "2.000", &[]);
    assert!(quarantined.text().contains("ML-3 is in quarantine"), "{}", quarantined.text());
    let typed = weigh("ML-2", "2.0005", &[]);
    assert!(typed.text().contains("finer than the balance's step"), "{}", typed.text());
    let odd = weigh("ML-2", "", &[("gross", "2.500"), ("tare", "0.600"), ("net", "2.000")]);
    assert!(odd.text().contains("Gross 2.500 less tare 0.600 is 1.900"), "{}", odd.text());
    let below = weigh("ML-2", "-1", &[]);
    assert!(below.text().contains("A net weight is more than 0"));
    let above = weigh("ML-2", "2.021", &[]);
    assert_eq!(above.status, 409);
    assert!(above.text().contains("Take out what is too much and weigh again"), "{}", above.text());
    assert!(above.html().contains("name=\"weigh_deviation\""));
    for path in ["/material-lots", &page] {
        assert_eq!(lab.operator().get(path).status, 200);
    }
    lab.auditor().sees("/history", "There is no material lot “ML-99”");
    let entries = lab.app.db.read(|reader| supernate::store::batch::entry::of_record(reader, 1)).unwrap();
    assert_eq!(entries.len(), 1, "nothing was recorded but the start");

    lab.later_days(2);
    balance_event(&lab, floor.balance, EventKind::DailyCheck);
    let expired = weigh("ML-4", "2.000", &[]);
    assert!(expired.text().contains("ML-4 expired on 2 Dec 2026"), "{}", expired.text());
    // It stays in: said, with a deviation in the same act.
    let words = [("weigh_deviation", "The scoop slipped and the drum could not be opened again.")];
    let kept = weigh("ML-2", "2.021", &words);
    assert_eq!(kept.status, 303, "{}", kept.text());
    lab.reviewer().sees(&page, "Deviation 1");
    lab.reviewer().sees("/deviations/1", "weighed above its tolerance");
}

/// sec_S51 in the page: the doer does not check, the second person weighs before the first figure is shown.
#[test]
fn a_second_person_weighs_in_blind_and_the_doer_never_checks() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let record = floor.starts("TW-104-0720");
    let (bea, maren, balance) = (lab.operator(), lab.manager(), floor.balance.to_string());
    floor.begins(&record, 1);
    let page = format!("{record}/steps/1");
    let look = bea.sees(&format!("{page}?material_lot=ML-1"), "Corrected for its assay and water");
    assert!(look.text().replace('\u{202f}', " ").contains("= 41.44 kg"), "{}", look.text());
    let fields = [("material_lot", "ML-1"), ("balance", &*balance), ("gross", "46.94"), ("tare", "5.50")];
    floor.does(&bea, &record, 1, "weighing", &fields);
    floor.does(&bea, &record, 1, "end", &[]);
    bea.sees(&page, "You did a part of 1.1 Weigh the hydroxide. Another person checks it.");
    let form = maren.get(&page);
    for path in [page.clone(), format!("{record}/record")] {
        let seen = maren.get(&path);
        assert!(
            !seen.html().contains("41.44") && !seen.html().contains("46.94"),
            "{path} shows the first figure"
        );
    }
    lab.auditor().sees("/history", "weighed from ML-1 on BAL-7");
    assert!(!form.html().contains("/check\""), "first weigh, then check");
    let own: Vec<(String, String)> = bea.get(&page).form(&format!("{page}/note"));
    let own: Vec<_> = own.into_iter().filter(|(name, _)| name != "note").collect();
    let refused = bea.posts(&format!("{page}/check"), &own);
    assert_eq!(refused.status, 403, "{}", refused.text());

    let (entry, second) = floor.second_form(&maren, &record);
    let (on, net) = (format!("balance.{entry}"), format!("net.{entry}"));
    let apart = floor.does(&maren, &record, 1, &second, &[(&on, &balance), (&net, "41.39")]);
    let seen = maren.get(&apart.location.unwrap());
    assert!(seen.text().contains("Outside its limits"), "{}", seen.text());
    assert!(!seen.html().contains("/check\""), "what lies outside is answered first");
    let answers = seen.html();
    let at = answers.find("/answers/").unwrap() + "/answers/".len();
    let id: String = answers[at..].chars().take_while(char::is_ascii_digit).collect();
    let words = [(&*format!("described.{id}"), "The drum stood against the frame at the second weighing.")];
    floor.does(&maren, &record, 1, &format!("answers/{id}"), &words);
    floor.does(&maren, &record, 1, "check", &[]);
    lab.operator().sees(&record, "checked by Maren Oddy");
}

/// sec_S51 in SQL: the file itself refuses a checker who is a doer, and an entry in a closed record.
#[test]
fn the_database_refuses_a_checker_who_is_a_doer() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let record = floor.starts("TW-104-0720");
    floor.begins(&record, 2);
    let db = &lab.app.db;
    let insert = |who: &str, kind: supernate::domain::batch::EntryKind| {
        let actor = lab.actor(who);
        let act = supernate::domain::act::Act::CheckStep;
        db.change(&actor, act, &supernate::domain::reason::Reason::none(), |change| {
            let new = supernate::domain::batch::NewEntry::of(2, 1, kind);
            supernate::store::batch::entry::insert(change, 1, &new)
        })
    };
    use supernate::domain::batch::EntryKind::{Checked, Ended};
    let refused = format!("{:?}", insert("bea.skelton", Checked).unwrap_err());
    assert!(refused.contains("the checker is a doer of the step"), "{refused}");
    insert("maren.oddy", Checked).unwrap();
    let refused = format!("{:?}", insert("maren.oddy", Ended).unwrap_err());
    assert!(refused.contains("the doer is a checker of the step"), "{refused}");
}

/// Steps open in order, also by address; two people at once on different steps are fine, on the same one they are told.
#[test]
fn a_step_out_of_order_is_refused_and_the_same_step_twice_is_a_conflict() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let record = floor.starts("TW-104-0720");
    let (bea, maren) = (lab.operator(), lab.manager());
    let page = bea.get(&format!("{record}/steps/3"));
    assert!(page.text().contains("It opens when 1.1 Weigh the hydroxide is done."), "{}", page.text());
    let mut forged = bea.get(&format!("{record}/steps/1")).form(&format!("{record}/steps/1/start"));
    forged.push(("equipment".to_string(), floor.vessel.to_string()));
    let refused = bea.posts(&format!("{record}/steps/3/start"), &forged);
    assert_eq!(refused.status, 409);
    assert!(refused.text().contains("2.1 Hydrate the gum opens when 1.1 Weigh the hydroxide is done"));
    lab.auditor().sees("/history", "2.1 Hydrate the gum opens when");

    // Two tablets: one at each weighing.
    floor.begins(&record, 1);
    floor.does(&maren, &record, 2, "start", &[]);
    // Two tablets at the same step: the second is shown what the first recorded.
    let path = format!("{record}/steps/2/end");
    let stale = maren.get(&format!("{record}/steps/2")).form(&path);
    let balance = floor.balance.to_string();
    let fields = [("material_lot", "ML-2"), ("balance", &*balance), ("net", "2.000")];
    floor.does(&bea, &record, 2, "weighing", &fields);
    let conflict = maren.posts(&path, &stale);
    assert_eq!(conflict.status, 409);
    assert!(conflict.text().contains("Changed by Bea Skelton"), "{}", conflict.text());
    let again = conflict.form(&path);
    assert_eq!(maren.posts(&path, &again).status, 303, "sent again, it means what is shown");
}

/// req_L1: a parameter outside its range stands, is answered by a deviation, and a mistyped one is corrected was → is.
#[test]
fn what_lies_outside_is_answered_and_what_was_mistyped_is_corrected() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let record = floor.starts("TW-104-0720");
    floor.dispenses(&record);
    floor.begins(&record, 3);
    let bea = lab.operator();
    let page = format!("{record}/steps/3");
    let odd = floor.tries(&bea, &record, 3, "values/1", &[("reading.1", "fast")]);
    assert_eq!(odd.status, 422);
    assert!(odd.text().contains("“fast” is not a number"), "{}", odd.text());
    floor.does(&bea, &record, 3, "values/1", &[("reading.1", "135")]);
    let seen = bea.sees(&page, "Outside its limits");
    let entry = entry_of(&seen.html(), "/entries/");
    let correct = format!("{page}/entries/{entry}");
    let short = bea.submits(&correct, &correct, &[("is", "1350"), ("reason", "oops")]);
    assert_eq!(short.status, 422);
    bea.does(&correct, &correct, &[("is", "1350"), ("picked", "mistyped")]);
    assert!(!bea.get(&page).text().contains("Outside its limits"));

    floor.does(&bea, &record, 3, "values/2", &[("reading.2", "8.71")]);
    lab.later_minutes(40);
    let held = floor.tries(&bea, &record, 3, "end", &[]);
    assert_eq!(held.status, 409);
    assert!(held.text().contains("no deviation answers them yet: pH 8.71"), "{}", held.text());
    let id = entry_of(&bea.get(&page).html(), "/answers/");
    let words = [(&*format!("described.{id}"), "The pH rose after the second strewing; adjusted with acid.")];
    floor.does(&bea, &record, 3, &format!("answers/{id}"), &words);
    floor.does(&bea, &record, 3, "end", &[]);

    let whole = lab.reviewer().sees(&format!("{record}/record"), "1 value was changed since recorded");
    assert!(whole.text().replace('\u{202f}', " ").contains("Speed: was 135 rpm, recorded by Bea Skelton"));
    assert!(whole.text().contains("because: mistyped") && whole.text().contains("[1]"));
    lab.reviewer().sees("/deviations/1", "pH outside limits");
}

fn entry_of(html: &str, before: &str) -> String {
    let at = html.find(before).unwrap_or_else(|| panic!("no {before}")) + before.len();
    html[at..].chars().take_while(char::is_ascii_digit).collect()
}

/// Times are measured from the acts: too early and too late need words, and open a deviation.
#[test]
fn a_step_that_ran_too_short_or_too_long_needs_words() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let record = floor.starts("TW-104-0720");
    floor.dispenses(&record);
    let bea = lab.operator();
    floor.begins(&record, 3);
    floor.does(&bea, &record, 3, "values/1", &[("reading.1", "1350")]);
    floor.does(&bea, &record, 3, "values/2", &[("reading.2", "8.0")]);
    lab.later_minutes(12);
    let early = floor.tries(&bea, &record, 3, "end", &[]);
    assert!(early.text().contains("It has run 12 min of at least 30"), "{}", early.text());
    lab.later_minutes(100);
    let late = floor.tries(&bea, &record, 3, "end", &[]);
    assert!(late.text().contains("It has run 112 min and may run at most 90"), "{}", late.text());
    let words = [("end_deviation", "The transfer pump was blocked; the gum went on stirring meanwhile.")];
    floor.does(&bea, &record, 3, "end", &words);
    lab.reviewer().sees("/deviations/1", "ended outside limits");
    lab.auditor().sees("/history", "ended after 112 min, deviation 1");
}

/// Interrupted in the evening, resumed in the morning: nothing is lost, and the day's check of the balance is asked anew.
#[test]
fn a_lot_is_resumed_the_next_day_without_loss() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let record = floor.starts("TW-104-0720");
    let (bea, balance) = (lab.operator(), floor.balance.to_string());
    floor.begins(&record, 2);
    let fields = [("material_lot", "ML-2"), ("balance", &*balance), ("net", "1.200")];
    floor.does(&bea, &record, 2, "weighing", &fields);
    lab.later_days(1);
    let seen = bea.sees(&format!("{record}/steps/2"), "Weighed so far");
    assert!(seen.text().replace('\u{202f}', " ").contains("1.2 kg"), "{}", seen.text());
    let unchecked = floor.tries(&bea, &record, 2, "weighing", &[("net", "0.800"), fields[0], fields[1]]);
    assert_eq!(unchecked.status, 409);
    assert!(unchecked.text().contains("BAL-7 has no daily check today"), "{}", unchecked.text());
    balance_event(&lab, floor.balance, EventKind::DailyCheck);
    floor.does(&bea, &record, 2, "weighing", &[("net", "0.800"), fields[0], fields[1]]);
    floor.does(&bea, &record, 2, "end", &[]);
}

/// req_I15: what was done earlier is entered with its time and the reason, and marked as late.
#[test]
fn a_late_entry_keeps_both_times_and_its_reason() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let record = floor.starts("TW-104-0720");
    floor.dispenses(&record);
    floor.begins(&record, 3);
    lab.later_minutes(35);
    let bea = lab.operator();
    let page = format!("{record}/steps/3?late_on=1+Dec+2026&late_at=09:05&late_why=the+tablet+was+charging");
    let action = format!("{record}/steps/3/values/1");
    bea.does(&page, &action, &[("reading.1", "1350")]);
    let seen = bea.sees(&format!("{record}/steps/3"), "entered late");
    assert!(seen.text().contains("because the tablet was charging") && seen.text().contains("09:05"));
    let future =
        format!("{record}/steps/3?late_on=1+Dec+2026&late_at=23:50&late_why=the+tablet+was+charging");
    let action = format!("{record}/steps/3/values/2");
    let refused = bea.submits(&future, &action, &[("reading.2", "8.0")]);
    assert_eq!(refused.status, 409);
    assert!(refused.text().contains("lies after the start of the record and not after now"));
    let why = format!("{record}/steps/3?late_on=1+Dec+2026&late_at=09:06&late_why=no");
    let refused = bea.submits(&why, &action, &[("reading.2", "8.0")]);
    assert!(refused.text().contains("Say why it is entered late"), "{}", refused.text());
}

/// A step is skipped or repeated as the record allows, or under a deviation that QA signed to go on under.
#[test]
fn skipping_and_repeating_follow_the_record_or_a_signed_deviation() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let record = floor.starts("TW-104-0720");
    let bea = lab.operator();
    let why = ("skip_reason", "gum is in the premix already");
    let held = floor.tries(&bea, &record, 1, "skip", &[("skip_reason", "there is none in the house")]);
    assert_eq!(held.status, 409);
    assert!(held.text().contains("Name a deviation that QA has signed to go on under"), "{}", held.text());
    floor.does(&bea, &record, 2, "skip", &[why]);
    bea.sees(&record, "Skipped");

    let described = "The hydroxide was weighed on paper while the network was down for an hour.";
    let lot = [
        ("lot", "TW-104-0720"),
        ("title", "Weighed on paper"),
        ("described", described),
        ("occurred_on", "1 Dec 2026"),
    ];
    bea.does("/deviations/new", "/deviations/new", &lot);
    let number = [("skip_reason", "weighed on paper, sheet 12"), ("skip_deviation", "1")];
    let unsigned = floor.tries(&bea, &record, 1, "skip", &number);
    assert!(unsigned.text().contains("Deviation 1 is not signed by QA"), "{}", unsigned.text());
    let entry = [("kind", "classified"), ("class", "minor"), ("text", "paper is accepted here")];
    lab.reviewer().does("/deviations/1", "/deviations/1/entries", &entry);
    let go_on = [("text", "work goes on, sheet 12 is attached")];
    lab.reviewer().signs("/deviations/1", "/deviations/1/continuation", &go_on);
    floor.does(&bea, &record, 1, "skip", &number);

    floor.compounds(&record);
    let again = [("repeat_reason", "the viscosity was low, so once more")];
    floor.does(&bea, &record, 3, "repeat", &again);
    bea.sees(&record, "run 2");
    let made_up = floor.tries(&bea, &record, 4, "repeat", &again);
    assert!(made_up.text().contains("The record does not let 2.2 Make up be repeated"), "{}", made_up.text());
}

/// Filling: agitation on, a stop beyond its limit, a sample after every stop, each judged by itself.
#[test]
fn filling_asks_for_agitation_and_a_sample_after_every_stop() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let record = floor.starts("TW-104-0720");
    floor.dispenses(&record);
    floor.compounds(&record);
    floor.yields(&record, 2, "496", "99.2");
    let (bea, maren) = (lab.operator(), lab.manager());
    floor.begins(&record, 6);
    floor.does(&bea, &record, 6, "values/1", &[("reading.1", "conforms")]);
    floor.does(&bea, &record, 6, "end", &[]);
    floor.does(&maren, &record, 6, "check", &[]);
    let line = floor.line.to_string();
    let still = floor.tries(&bea, &record, 7, "start", &[("equipment", &line)]);
    assert!(still.text().contains("Confirm that the agitation is on"), "{}", still.text());
    floor.begins(&record, 7);
    floor.does(&bea, &record, 7, "values/1", &[("reading.1", "100.2")]);
    floor.does(&bea, &record, 7, "stop", &[("stop_why", "caps ran out")]);
    lab.later_minutes(22);
    let page = format!("{record}/steps/7");
    bea.sees(&page, "The line stands");
    floor.does(&bea, &record, 7, "resume", &[]);
    let seen = bea.sees(&page, "after stop 1");
    assert!(seen.text().contains("Outside its limits"), "22 min of at most 15: {}", seen.text());
    let id = entry_of(&seen.html(), "/answers/");
    let words =
        [(&*format!("described.{id}"), "Caps ran out; the bulk was stirred on, twenty bottles thrown away.")];
    floor.does(&bea, &record, 7, &format!("answers/{id}"), &words);
    let missing = floor.tries(&bea, &record, 7, "end", &[]);
    assert!(missing.text().contains("Fill volume, middle, Fill volume, end, Fill volume, after stop 1"));
    for (at, volume) in [("2", "100.6"), ("3", "100.1"), ("4", "98.2")] {
        floor.does(&bea, &record, 7, &format!("values/{at}"), &[(&*format!("reading.{at}"), volume)]);
    }
    let seen = bea.sees(&page, "Outside its limits");
    assert!(
        seen.text().replace('\u{202f}', " ").contains("98.2 mL"),
        "the one after the stop is judged by itself"
    );
}

/// req_U9: an impossible yield is refused, one outside its limits opens a deviation, and a second person works it out.
#[test]
fn a_yield_is_judged_and_worked_out_twice() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let record = floor.starts("TW-104-0720");
    let page = format!("{record}/yields/2");
    let (bea, maren) = (lab.operator(), lab.manager());
    let early = bea.submits(&page, &page, &[("actual", "496")]);
    assert!(early.text().contains("has steps that are not done"), "{}", early.text());
    floor.dispenses(&record);
    floor.compounds(&record);
    for (actual, words) in
        [("-3", "not less than 0"), ("4960", "half as much again"), ("much", "is not a number")]
    {
        let refused = bea.submits(&page, &page, &[("actual", actual)]);
        assert!(matches!(refused.status, 409 | 422), "{actual}");
        assert!(refused.text().contains(words), "{words}: {}", refused.text());
    }
    let low = bea.submits(&page, &page, &[("actual", "470"), ("waste", "4")]);
    assert_eq!(low.status, 409);
    assert!(low.text().contains("94.00 % lies outside"), "{}", low.text());
    let words = "The transfer hose came off and about twenty-five litres ran into the drain.";
    bea.does(&page, &page, &[("actual", "470"), ("waste", "4"), ("deviation", words)]);
    lab.reviewer().sees("/deviations/1", "Compounding: yield 94.00 %");
    assert!(!bea.get(&page).html().contains("/check\""));
    let check = format!("{page}/check");
    let mut own = bea.get(&page).form(&page);
    own.retain(|(name, _)| name == "form_token" || name == "submission");
    own.push(("percent".to_string(), "94.0".to_string()));
    assert_eq!(bea.posts(&check, &own).status, 403);
    let other = maren.submits(&page, &check, &[("percent", "97.1")]);
    assert!(other.text().contains("the record has another"), "{}", other.text());
    maren.does(&page, &check, &[("percent", "94.0")]);
    bea.sees(&record, "checked by Maren Oddy");
}

/// A corrected weight moves the ledger with it; the first figure stays readable.
#[test]
fn a_corrected_weight_moves_the_ledger_with_it() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let record = floor.starts("TW-104-0720");
    let (bea, balance) = (lab.operator(), floor.balance.to_string());
    floor.begins(&record, 2);
    floor.does(
        &bea,
        &record,
        2,
        "weighing",
        &[("material_lot", "ML-2"), ("balance", &balance), ("net", "1.990")],
    );
    let holds = || {
        let found = lab.app.db.read(|reader| supernate::store::material_lot::by_scan(reader, "ML-2"));
        found.unwrap().unwrap().facts.balance.normalize().to_string()
    };
    let page = format!("{record}/steps/2");
    for (is, left) in [("1.890", "23.11"), ("1.995", "23.005")] {
        let html = bea.get(&page).html();
        let at = html.rfind("/entries/").unwrap() + "/entries/".len();
        let entry: String = html[at..].chars().take_while(char::is_ascii_digit).collect();
        let correct = format!("{page}/entries/{entry}");
        bea.does(&correct, &correct, &[("net", is), ("reason", "the display was read upside down")]);
        assert_eq!(holds(), left);
    }
    let whole = lab.auditor().get(&format!("{record}/record")).text();
    assert!(whole.contains("was 1.890") && whole.contains("was 1.990"), "{whole}");
}

/// A closed record takes nothing more; QA opens it again with a reason; a decided lot stays as it is.
#[test]
fn a_closed_record_is_opened_again_only_by_qa_with_a_reason() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    let record = floor.makes("TW-104-0720");
    let step = format!("{record}/steps/3/note");
    let late = lab.operator().posts(&step, &lab.operator().get("/lots/new").form("/lots/new")[..2]);
    assert_ne!(late.status, 303);
    let reopen = format!("{record}/reopen");
    let short = lab.reviewer().submits(&record, &reopen, &[("reason", "again")]);
    assert_eq!(short.status, 422);
    lab.reviewer().does(&record, &reopen, &[("reason", "the note on the hold was forgotten")]);
    floor.does(&lab.operator(), &record, 5, "note", &[("note", "The lid was changed at 14:10.")]);
    lab.operator().signs(&record, &format!("{record}/close"), &[]);
    lab.auditor().sees(&format!("{record}/record"), "reopened by Ada Whitlock");
}

/// A lot is started only from an approved master record, in one of its sizes, under a new number.
#[test]
fn a_lot_is_started_only_as_the_master_record_allows() {
    let lab = Lab::new();
    let floor = Floor::new(&lab);
    floor.starts("TW-104-0720");
    let page = format!("/batches/new?formulation_version={}&size=500", floor.version);
    let presentation = floor.presentation.to_string();
    let fields =
        [("number", "TW-104-0720"), ("presentation", &*presentation), ("container_closure", "bottle")];
    let twice = lab.operator().submits(&page, "/batches/new", &fields);
    assert!(twice.text().contains("There is a lot TW-104-0720 already"), "{}", twice.text());
    let other = lab.operator().get(&format!("/batches/new?formulation_version={}&size=700", floor.version));
    assert_eq!(other.status, 409);
    assert!(other.text().contains("The master record has the batch sizes 500 L"), "{}", other.text());
    assert_eq!(lab.analyst().get("/batches/new").status, 403);
}

/// From the first step to the release: what was made here is complete without a reference to paper.
#[test]
fn a_small_lot_goes_from_its_start_to_its_release() {
    let lab = Lab::new();
    let bench = crate::support::samples::Bench::new(&lab);
    bench.assigns_shelf_life();
    lab.later_days(1);
    let product =
        lab.app.db.read(|reader| supernate::store::lot::product_of_presentation(reader, bench.presentation));
    let floor = Floor::of(&lab, product.unwrap(), bench.presentation);
    let record = floor.makes("TW-104-0720");
    let found =
        lab.app.db.read(|reader| supernate::store::lot::by_number(reader, "TW-104-0720")).unwrap().unwrap();
    let page = format!("/lots/{}/decision", found.id);
    let qa = lab.reviewer();
    qa.sees(&page, "Release is not possible now.");
    let sample = bench.ready(found.id, supernate::domain::sample::Purpose::Release);
    let review = format!("/review/{sample}");
    qa.does(&review, &format!("{review}/agree"), &[]);
    qa.signs("/review/sign", "/review/sign", &[]);
    floor.completes_the_record(found.id);
    let released = qa.signs(&page, &format!("/lots/{}/release", found.id), &[("is_reviewed", "yes")]);
    assert!(released.text().contains("TW-104-0720 is released."), "{}", released.text());
    qa.sees(&record, "The lot is released. Nothing is added to its record.");
    let note = lab.operator().get(&format!("{record}/steps/3"));
    assert!(
        note.text().contains("The lot is released, so nothing is added to its record"),
        "{}",
        note.text()
    );
}
