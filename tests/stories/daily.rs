//! Days at the bench: what a study asks of pull after pull, and what comes back to it.

use supernate::domain::age::Age;
use supernate::domain::method::{MethodContent, TestKind, preset};
use supernate::domain::protocol::{Arm, LimitsDo, Orientation, PlannedAge};
use supernate::domain::pull::Event;
use supernate::domain::reason::Reason;
use supernate::domain::role::Role;
use supernate::domain::specification::{Limit, SpecificationContent, TestLimits, Way};
use supernate::store;
use supernate::store::bench::BenchSample;

use crate::benches::{page, records};
use crate::support::{Lab, Person, Seen, world};

const SEDIMENT: [TestKind; 1] = [TestKind::AsStoredSediment];

fn sample_of(lab: &Lab, sample: i64) -> BenchSample {
    lab.app.db.read(|reader| store::bench::sample(reader, sample)).unwrap()
}

fn label_of(sample: &BenchSample) -> String {
    sample.containers.first().map_or(sample.number.clone(), |first| first.label.clone())
}

/// Reads a bed of this height, of a fill of 100 mm, in every container, and completes the test.
fn reads_bed(person: &Person<'_>, sample: &BenchSample, bed_mm: &str) -> Seen {
    let test = &sample.tests[0];
    let text = |field: &str| match field {
        "base_mm" => "0.0".to_string(),
        "bed_top_mm" => bed_mm.to_string(),
        "fill_line_mm" => "100.0".to_string(),
        _ => "30".to_string(),
    };
    let slots = sample.slots(test);
    let fields: Vec<(String, String)> =
        slots.iter().map(|slot| (slot.key.name(), text(&slot.key.field))).collect();
    let fields: Vec<(&str, &str)> =
        fields.iter().map(|(name, text)| (name.as_str(), text.as_str())).collect();
    let page = page(test.id, &label_of(sample));
    let seen = records(person, &page, &fields);
    assert_eq!(seen.status, 303, "{}", seen.text());
    answers_questions(person, sample.tests[0].id, &page);
    let seen = records(person, &page, &[("then", "complete")]);
    assert_eq!(seen.status, 303, "{}", seen.text());
    seen
}

/// "It is right" to everything that was asked.
fn answers_questions(person: &Person<'_>, test: i64, page: &str) {
    let action = format!("/tests/{test}/questions");
    loop {
        let rows = person.lab.app.db.read(|reader| store::reading::of_test(reader, test)).unwrap();
        let standing = supernate::domain::reading::standing(&rows);
        let Some(asked) = standing.into_iter().find(|one| one.has_open_question()) else { return };
        let mut pairs = person.get(page).form(&action);
        pairs.retain(|(name, _)| name != "answer");
        pairs.push(("answer".to_string(), asked.id.to_string()));
        assert_eq!(person.posts(&action, &pairs).status, 303);
    }
}

fn flags_of(lab: &Lab, test: i64) -> Vec<String> {
    let flags = lab.app.db.read(|reader| store::flag::of_test(reader, test)).unwrap();
    flags.into_iter().map(|flag| flag.sentence).collect()
}

/// Four ages of one arm, pulled on their days: three give no forecast, the fourth is judged against the three.
#[test]
fn the_trend_speaks_once_a_study_has_enough_ages() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &SEDIMENT);
    world::qualify(&lab, "rafe.tolland", world::approved_method(&lab, SEDIMENT[0]));
    let ages = [
        ("Initial", "2026-12-01T09:00:00Z", "97.0", "needs"),
        ("3 months", "2027-03-01T09:00:00Z", "96.1", "needs"),
        ("6 months", "2027-06-01T09:00:00Z", "95.0", "needs"),
        ("9 months", "2027-09-01T09:00:00Z", "70.0", "Trend action: 0.70 lies outside"),
    ];
    for (age, clock, bed_mm, words) in ages {
        lab.clock(clock);
        let sample = sample_of(&lab, world::take(&lab, &world::pull(&lab, study, 1, age)));
        reads_bed(&lab.analyst(), &sample, bed_mm);
        let flags = flags_of(&lab, sample.tests[0].id);
        let trend = flags.iter().find(|sentence| sentence.contains(words));
        assert!(trend.is_some(), "{age}: {flags:?}");
    }
}

/// What is sent back asks for work again: the pull in the week, the test by method and in its session.
#[test]
fn a_pull_whose_test_is_sent_back_is_in_testing_again() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &SEDIMENT);
    let method = world::approved_method(&lab, SEDIMENT[0]);
    for person in ["rafe.tolland", "ilse.brandt"] {
        world::qualify(&lab, person, method);
    }
    let sample = sample_of(&lab, world::take(&lab, &world::pull(&lab, study, 1, "Initial")));
    let session = format!("/bench/session?method={method}");
    lab.manager().sees("/week", "1 is in testing . 0 results wait for a check");
    lab.analyst().sees(&session, &sample.number);
    reads_bed(&lab.analyst(), &sample, "97.0");
    lab.manager().sees("/week", "0 are in testing . 1 result waits for a check");
    lab.analyst().sees(&session, "No sample at the bench waits for this method");

    let check = format!("/checks/{}", sample.tests[0].id);
    let why = [("why", "the fill line is not that of the photograph")];
    lab.second_analyst().does(&check, &format!("{check}/send-back"), &why);
    lab.manager().sees("/week", "1 is in testing . 0 results wait for a check");
    lab.analyst().sees("/bench", "1 test open");
    lab.analyst().sees(&session, "Sent back");
    let page = page(sample.tests[0].id, &label_of(&sample));
    let again = records(&lab.analyst(), &page, &[("then", "complete")]);
    assert_eq!(again.status, 303, "{}", again.text());
    lab.manager().sees("/week", "0 are in testing . 1 result waits for a check");
    lab.second_analyst().does(&check, &check, &[]);
    lab.manager().sees("/week", "0 are in testing . 0 results wait for a check");
}

#[test]
fn more_containers_are_taken_with_a_reason_and_stand_in_the_ledger() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &SEDIMENT);
    let pull = world::pull(&lab, study, 1, "Initial");
    let sample = world::take(&lab, &pull);
    let before = sample_of(&lab, sample).containers.len();
    let next = world::labels(&lab, &pull)[0].clone();
    let (path, more) = (format!("/pulls/{}", pull.id), format!("/pulls/{}/more", pull.id));
    let short = lab.analyst().submits(&path, &more, &[("more.1", &next), ("why_more", "again")]);
    assert_eq!(short.status, 409, "{}", short.text());
    assert!(short.text().contains("Say why more containers are taken"), "{}", short.text());
    let why = ("why_more", "the first bottle broke on the bench");
    let wrong = lab.analyst().submits(&path, &more, &[("more.1", "ZZ99-0001"), why]);
    assert_eq!(wrong.status, 409, "{}", wrong.text());
    let seen = lab.analyst().does(&path, &more, &[("more.1", &next), why]);
    assert!(seen.text().contains(&next), "{}", seen.text());
    assert_eq!(sample_of(&lab, sample).containers.len(), before + 1);
    assert_eq!(world::pull(&lab, study, 1, "Initial").facts.event, Some(Event::Pulled));
    lab.auditor().sees(&path, "the first bottle broke on the bench");
}

#[test]
fn the_readings_of_a_started_cylinder_stand_in_the_week() {
    let lab = Lab::new();
    let kinds = [TestKind::Sedimentation];
    let study = world::study(&lab, "TW-104-0640", &kinds);
    world::qualify(&lab, "rafe.tolland", world::approved_method(&lab, kinds[0]));
    let sample = sample_of(&lab, world::take(&lab, &world::pull(&lab, study, 1, "Initial")));
    let (test, analyst) = (sample.tests[0].id, lab.analyst());
    let page = page(test, &label_of(&sample));
    let action = format!("/tests/{test}/cylinders");
    let started = analyst.submits(&page, &action, &[("total_ml", "100.0")]);
    assert_eq!(started.status, 303, "{}", started.text());
    let week = lab.manager().sees("/week", "Cylinder readings planned:");
    assert!(week.text().contains(&format!("(10 min), {}", sample.number)), "{}", week.text());
    // Before its allowed minute a reading has no button that can be seen; then it has.
    let waiting = analyst.get(&page).html();
    assert!(waiting.contains("hidden data-open-at=") && waiting.contains("Read now"), "{waiting}");
    let closed = waiting.matches("hidden data-open-at=").count();
    lab.later_minutes(9);
    let open = analyst.get(&page).html().matches("hidden data-open-at=").count();
    assert_eq!(open + 1, closed, "the reading at 10 min may be taken from minute 9 on");
}

/// A release sample of one test by a method of this content.
fn sample_with(lab: &Lab, method: i64, test: &str, limit: Limit) -> (BenchSample, String) {
    use supernate::domain::sample::{NewSample, Purpose};
    use supernate::domain::version::Versioned;
    let db = &lab.app.db;
    let lot = world::lot_for_market(lab, "TW-640", "GB");
    let presentation = db.read(|reader| store::lot::get(reader, lot)).unwrap().presentation;
    let version = db.read(|reader| store::method::version(reader, method)).unwrap();
    let limits = TestLimits {
        test: test.to_string(),
        title: version.name.clone(),
        method: version.method,
        unit: version.content.unit.clone(),
        release: limit.clone(),
        shelf_life: limit,
        in_use: Limit::None,
        way: Way::Rounding,
    };
    let content = SpecificationContent { tests: vec![limits] };
    let manager = lab.actor("maren.oddy");
    let id = supernate::acts::specification::add(db, &manager, "SP-640", presentation, &content).unwrap();
    world::approve(lab, Versioned::Specification, id, "maren.oddy", "ada.whitlock");
    for person in ["rafe.tolland", "ilse.brandt", "otis.vane"] {
        world::qualify(lab, person, method);
    }
    let new = NewSample {
        lot,
        purpose: Purpose::Release,
        containers: 2,
        condition_on_receipt: "seals whole".to_string(),
        handed_over_by: "Bea Skelton".to_string(),
        received_on: lab.now().date(),
        tests: vec![test.to_string()],
    };
    let id = supernate::acts::sample::receive(db, &lab.actor("rafe.tolland"), &new).unwrap();
    let sample = sample_of(lab, id);
    let path = page(sample.tests[0].id, &sample.number);
    (sample, path)
}

#[test]
fn a_peak_without_a_name_is_recorded_by_its_relative_retention_time() {
    let lab = Lab::new();
    let limits = Limit::Components(vec![
        ("a".to_string(), world::range("", "0.50")),
        ("unspecified".to_string(), world::range("", "0.20")),
        ("total".to_string(), world::range("", "1.00")),
    ]);
    let method = world::approved_degradation_method(&lab);
    let (sample, path) = sample_with(&lab, method, "degradation", limits);
    let (test, analyst) = (sample.tests[0].id, lab.analyst());
    let half = records(&analyst, &path, &[("unspecified_time", "0.85"), ("unspecified_value", "<0.05")]);
    assert_eq!(half.status, 422);
    assert!(half.text().contains("“<0.05” says less than and is no reading"), "{}", half.text());
    for (time, value) in [("0.85", "0.31"), ("1.20", "0.12")] {
        let fields = [("unspecified_time", time), ("unspecified_value", value)];
        assert_eq!(records(&analyst, &path, &fields).status, 303);
    }
    let rest = records(&analyst, &path, &[("reading.0.1.a", "0.20")]);
    assert_eq!(rest.status, 303, "{}", rest.text());
    answers_questions(&analyst, test, &path);
    let done = records(&analyst, &path, &[("then", "complete")]);
    assert_eq!(done.status, 303, "{}", done.text());
    let results = lab.app.db.read(|reader| store::result::of_test(reader, test)).unwrap();
    let of = |component: &str| {
        let found = results.iter().find(|result| result.component == component);
        found.map(|result| (result.shown.as_str(), result.verdict.as_str()))
    };
    assert_eq!(of("unspecified@0.85"), Some(("0.31", "out of specification")), "{results:?}");
    assert_eq!(of("unspecified@1.20"), Some(("0.12", "conforms")));
    assert_eq!(of("total"), Some(("0.63", "conforms")));
}

fn read_twice() -> MethodContent {
    let mut content = preset::of(TestKind::Numeric);
    content.unit = "%".to_string();
    content.replicates = 1;
    content.reading_decimals = 1;
    content.second_reader_tolerance = Some("0.5".parse().unwrap());
    content
}

#[test]
fn two_readers_who_differ_need_a_third() {
    let lab = Lab::new();
    let method = world::method_with(&lab, "AS-02", "Assay by two readers", read_twice());
    let (sample, path) = sample_with(&lab, method, "assay", world::between("95.0", "105.0"));
    let test = sample.tests[0].id;
    let first = "reading.0.1.value";
    assert_eq!(records(&lab.analyst(), &path, &[(first, "99.0")]).status, 303);
    let blind = lab.second_analyst().get(&path);
    assert!(!blind.text().contains("99.0"), "the second reader is blind: {}", blind.text());
    let second = "reading.0.1.second:value";
    assert_eq!(records(&lab.second_analyst(), &path, &[(second, "101.2")]).status, 303);
    let open = records(&lab.analyst(), &path, &[("then", "complete")]);
    assert_eq!(open.status, 409, "{}", open.text());
    assert!(open.text().contains("third"), "{}", open.text());
    let third = "reading.0.1.third:value";
    let otis = lab.actor("otis.vane").account;
    let reason = Reason::given("reads at the bench while a colleague is away").unwrap();
    let roles = [Role::LabManager, Role::Analyst];
    supernate::acts::account::grant_roles(&lab.app.db, &lab.actor("nell.farrow"), otis, &roles, &reason)
        .unwrap();
    let seen = records(&lab.person("otis.vane"), &path, &[(third, "99.4")]);
    assert_eq!(seen.status, 303, "{}", seen.text());
    let done = records(&lab.analyst(), &path, &[("then", "complete")]);
    assert_eq!(done.status, 303, "{}", done.text());
    let results = lab.app.db.read(|reader| store::result::of_test(reader, test)).unwrap();
    assert_eq!(results.len(), 1, "{results:?}");
    lab.reviewer().sees(&format!("/review/{}", sample.id), "99.4");
}

/// An approved protocol whose seventh arm is in use, upright, at the condition of the first.
fn protocol_in_use(lab: &Lab) {
    use supernate::domain::version::Versioned;
    let (db, manager) = (&lab.app.db, lab.actor("maren.oddy"));
    let presentation = world::first_presentation(lab);
    let new = supernate::acts::protocol::NewProtocol {
        presentation,
        code: "SP-104".to_string(),
        title: "Primary stability and use".to_string(),
        programme: supernate::domain::protocol::Programme::Primary,
        specification_version: world::approved_specification(
            lab,
            presentation,
            &[TestKind::Redispersibility],
        ),
    };
    let id = supernate::acts::protocol::add(db, &manager, &new).unwrap();
    let version = db.read(|reader| store::version::get(reader, Versioned::Protocol, id)).unwrap();
    let mut content: supernate::domain::protocol::ProtocolContent = version.read().unwrap();
    let age = |days: u32| PlannedAge {
        age: Age::Days(days),
        tests: content.tests.iter().map(|test| test.test.clone()).collect(),
        window: None,
    };
    let arm = Arm {
        condition: content.arms[0].condition,
        orientation: Orientation::Upright,
        limits_do: LimitsDo::InUse,
        is_labelled_condition: false,
        is_contingent: false,
        ages: vec![age(0), age(7)],
    };
    content.arms.push(arm);
    let written = supernate::acts::version::Written {
        reason: "the opened bottle is followed".to_string(),
        content: supernate::acts::protocol::written(&content).unwrap(),
    };
    supernate::acts::version::rewrite(db, &manager, Versioned::Protocol, id, &written, &version.digest())
        .unwrap();
    world::approve(lab, Versioned::Protocol, id, "maren.oddy", "ada.whitlock");
}

/// Decision A7: what is outside an in-use limit is no OOS; it opens an in-use failure record for QA.
#[test]
fn a_bottle_outside_its_in_use_limit_opens_its_own_record() {
    let lab = Lab::new();
    protocol_in_use(&lab);
    let study = world::study(&lab, "TW-104-0640", &[TestKind::Redispersibility]);
    let pulls = lab.app.db.read(|reader| store::pull::of_study(reader, study)).unwrap();
    let pull = pulls.iter().find(|pull| pull.arm_position == 7).expect("an in-use pull");
    world::qualify(&lab, "rafe.tolland", world::approved_method(&lab, TestKind::Redispersibility));
    let sample = sample_of(&lab, world::take(&lab, pull));
    let (test, analyst) = (&sample.tests[0], lab.analyst());
    let path = page(test.id, &label_of(&sample));
    for slot in sample.slots(test).iter().filter(|slot| slot.key.field == "inversions") {
        let container = slot.key.container.unwrap();
        let one = format!("{path}&container={container}");
        let fields = [("inversions", "35"), ("end", "uniform")];
        let seen = analyst.submits(&one, &format!("/tests/{}/inversions", test.id), &fields);
        assert_eq!(seen.status, 303, "{}", seen.text());
    }
    answers_questions(&analyst, test.id, &path);
    let done = records(&analyst, &path, &[("then", "complete")]);
    assert_eq!(done.status, 303, "{}", done.text());
    let results = lab.app.db.read(|reader| store::result::of_test(reader, test.id)).unwrap();
    assert_eq!(results[0].verdict, "outside in-use limit", "{results:?}");
    let seen = analyst.sees(&path, "outside in-use limit");
    assert!(seen.text().contains("Investigation 1"), "{}", seen.text());
    lab.reviewer().sees("/investigations", "35");
}
