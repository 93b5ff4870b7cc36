//! Instruments, qualifications, and stops that QA lifts for a day.

use supernate::domain::instrument::may_use;
use supernate::domain::method::TestKind;
use supernate::domain::qualification::may_test;
use supernate::domain::refusal::Refusal;
use supernate::store;

use crate::support::{Lab, world};

fn ph_meter(lab: &Lab) -> String {
    let fields = [
        ("code", "PH-02"),
        ("name", "pH meter, bench 2"),
        ("kind", "pH meter"),
        ("needs_daily_check", "yes"),
    ];
    let page = lab.manager().does("/instruments/new", "/instruments/new", &fields);
    page.location.unwrap()
}

fn number(path: &str) -> i64 {
    path.rsplit('/').next().unwrap().parse().unwrap()
}

/// What stops the instrument now; `usable` where nothing does.
fn stop_of(lab: &Lab, path: &str) -> String {
    let today = lab.now().date();
    let facts = lab.app.db.read(|reader| store::instrument::facts(reader, number(path), today)).unwrap();
    match may_use(&facts, today) {
        Ok(()) => "usable".to_string(),
        Err(refusal) => Refusal::from(refusal).name,
    }
}

fn calibrate(lab: &Lab, path: &str, on: &str, due: &str) {
    let action = format!("{path}/calibration");
    lab.manager().does(
        &action,
        &action,
        &[("performed_on", on), ("due_on", due), ("outcome", "within"), ("reference", "certificate 118")],
    );
}

#[test]
fn an_instrument_is_usable_with_its_calibration_and_the_check_of_the_day() {
    let lab = Lab::new();
    let path = ph_meter(&lab);
    assert_eq!(stop_of(&lab, &path), "CalibrationMissing");
    calibrate(&lab, &path, "1 dec 2026", "1 jun 2027");
    assert_eq!(stop_of(&lab, &path), "DailyCheckMissing");

    let check = format!("{path}/daily-check");
    let fields = [
        ("buffer.1", "4.01"),
        ("buffer.2", "7.00"),
        ("slope_percent", "98.6"),
        ("reference", "lots B-11, B-12"),
    ];
    let outside: Vec<_> = fields.iter().copied().chain([("outcome", "outside")]).collect();
    lab.analyst().does(&check, &check, &outside);
    assert_eq!(stop_of(&lab, &path), "DailyCheckFailed");
    let within: Vec<_> = fields.iter().copied().chain([("outcome", "within")]).collect();
    lab.analyst().does(&check, &check, &within);
    assert_eq!(stop_of(&lab, &path), "usable");
    let page = lab.auditor().sees(&path, "may be used");
    assert!(page.text().contains("buffers 4.01, 7.00; slope 98.6 %; lots B-11, B-12; within limits"));

    lab.later_days(1);
    assert_eq!(stop_of(&lab, &path), "DailyCheckMissing");
    lab.later_days(200);
    assert_eq!(stop_of(&lab, &path), "CalibrationOverdue");
}

#[test]
fn out_of_service_stops_until_it_is_back_and_both_say_why() {
    let lab = Lab::new();
    let path = ph_meter(&lab);
    let out = format!("{path}/out-of-service");
    let short = lab.analyst().submits(&out, &out, &[("note", "broken")]);
    assert_eq!(short.status, 409);
    assert!(short.text().contains("Say why, in at least ten characters."));
    lab.analyst().does(&out, &out, &[("note", "electrode broken, sent for repair")]);
    assert_eq!(stop_of(&lab, &path), "InstrumentOutOfService");
    lab.manager().sees("/instruments", "out of service since 1 Dec 2026");
    let back = format!("{path}/in-service");
    lab.manager().does(&back, &back, &[("note", "new electrode, certificate 119")]);
    assert_eq!(stop_of(&lab, &path), "CalibrationMissing");
}

#[test]
fn a_check_with_every_fault_comes_back_with_all_its_sentences_and_values() {
    let lab = Lab::new();
    let check = format!("{}/daily-check", ph_meter(&lab));
    let seen = lab.analyst().submits(
        &check,
        &check,
        &[("performed_on", "soon"), ("buffer.1", "four"), ("buffer.2", "7,00"), ("slope_percent", "980")],
    );
    assert_eq!(seen.status, 422);
    let text = seen.text();
    for words in [
        "“soon” is not a date",
        "“four” is not a number",
        "980 cannot be",
        "Outcome: choose one",
        "weight set is empty",
    ] {
        assert!(text.contains(words), "{words}: {text}");
    }
    assert!(seen.html().contains("value=\"7,00\"") && seen.html().contains("value=\"four\""));
    let few = lab.analyst().submits(
        &check,
        &check,
        &[("buffer.1", "4.01"), ("slope_percent", "98"), ("outcome", "within"), ("reference", "lot B-11")],
    );
    assert_eq!(few.status, 409);
    assert!(few.text().contains("needs at least two buffers"));
}

#[test]
fn qa_lifts_one_stop_for_one_day_by_signature() {
    let lab = Lab::new();
    let path = ph_meter(&lab);
    calibrate(&lab, &path, "1 nov 2026", "30 nov 2026");
    assert_eq!(stop_of(&lab, &path), "CalibrationOverdue");
    let id = number(&path).to_string();
    let page = format!("/overrides/new?instrument={id}");
    let fields =
        [("stop", "calibration"), ("reason", "Checked against two buffers today, both within 0.02 units")];
    lab.reviewer().signs(&page, "/overrides/new", &fields);
    assert_eq!(stop_of(&lab, &path), "DailyCheckMissing");
    let shown = lab.auditor().sees(&path, "calibration of PH-02");
    assert!(shown.text().contains("Stop lifted by me, for the stated reason"));
    assert!(!shown.text().contains("does not match"));
    lab.later_days(1);
    assert_eq!(stop_of(&lab, &path), "CalibrationOverdue");

    let refused = lab.manager().get("/overrides/new");
    assert_eq!(refused.status, 403);
    let wrong = [fields[0], fields[1], ("user_name", "ada.whitlock"), ("password", "not my password")];
    let seen = lab.reviewer().submits(&page, "/overrides/new", &wrong);
    assert_eq!(seen.status, 409);
    assert!(seen.html().contains("both within 0.02 units"), "the reason is kept");
}

#[test]
fn a_code_is_never_used_twice() {
    let lab = Lab::new();
    ph_meter(&lab);
    let fields = [("code", "ph-02"), ("name", "another"), ("kind", "pH meter")];
    let seen = lab.manager().submits("/instruments/new", "/instruments/new", &fields);
    assert_eq!(seen.status, 409);
    assert!(seen.text().contains("Codes are never used twice"));
    assert_eq!(lab.manager().get("/instruments/1/no-such-page").status, 404);
}

/// Decision A10: person × method version, with an end date; a stop is lifted for one day by QA.
#[test]
fn a_person_is_qualified_for_a_method_version_until_a_day() {
    let lab = Lab::new();
    let method = world::approved_method(&lab, TestKind::Ph);
    let rafe = lab.actor("rafe.tolland").account;
    let may = || {
        let today = lab.now().date();
        let facts =
            lab.app.db.read(|reader| store::qualification::facts(reader, rafe, method, today)).unwrap();
        may_test(&facts, today).map_err(|refusal| Refusal::from(refusal).name)
    };
    assert_eq!(may(), Err("NotQualified".to_string()));
    let (person, version) = (rafe.to_string(), method.to_string());
    let fields = [
        ("account", &*person),
        ("method_version", &*version),
        ("starts_on", "1 dec 2026"),
        ("ends_on", "31 dec 2026"),
        ("reference", "training record 14"),
    ];
    lab.manager().does("/qualifications/new", "/qualifications/new", &fields);
    assert_eq!(may(), Ok(()));
    lab.auditor().sees("/qualifications", "training record 14");
    lab.clock("2027-01-01T09:00:00Z");
    assert_eq!(may(), Err("QualificationEnded".to_string()));
    let lifts = [
        ("stop", "qualification"),
        ("account", &*person),
        ("method_version", &*version),
        ("reason", "Renewal test done today, result within limits, papers follow"),
    ];
    lab.reviewer().signs("/overrides/new", "/overrides/new", &lifts);
    assert_eq!(may(), Ok(()));
    lab.auditor().sees("/overrides", "qualification of Rafe Tolland for M-PH version 1");

    let own = [("account", &*lab.actor("maren.oddy").account.to_string()), fields[1], fields[3], fields[4]];
    let late: Vec<_> = own
        .iter()
        .copied()
        .filter(|(name, _)| *name != "ends_on")
        .chain([("ends_on", "1 dec 2027")])
        .collect();
    let seen = lab.manager().submits("/qualifications/new", "/qualifications/new", &late);
    assert_eq!(seen.status, 409);
    assert!(seen.text().contains("recorded by somebody else"));
}
