//! Conditions, chambers, studies and their containers and pulls.

use supernate::domain::method::TestKind;
use supernate::store;

use crate::support::{Lab, PASSWORD, world};

pub const OWN_CONDITION: [(&str, &str); 8] = [
    ("code", "21/45"),
    ("temperature_c", "21"),
    ("temperature_tolerance_c", "2"),
    ("humidity_percent", "45"),
    ("humidity_tolerance_percent", "5"),
    ("use", "other"),
    ("source", "customer contract 7"),
    ("reason", "the customer ships by unheated van"),
];

/// req_A1: the catalogue is there from the start; a condition outside it needs a reason and QA's signature.
#[test]
fn a_condition_outside_the_catalogue_is_signed_by_qa() {
    let lab = Lab::new();
    let list = lab.manager().sees("/conditions", "ICH Q1A(R2) 2.2.7.1, general case");
    assert_eq!(list.links().iter().filter(|path| path.starts_with("/conditions/")).count(), 9);
    assert_eq!(lab.manager().get("/conditions/new").status, 403);
    let mut wrong = OWN_CONDITION.to_vec();
    wrong.extend([("user_name", "ada.whitlock"), ("password", "not my password at all")]);
    let refused = lab.reviewer().submits("/conditions/new", "/conditions/new", &wrong);
    assert_eq!(refused.status, 409);
    let mut faulty = wrong.clone();
    faulty.retain(|(name, _)| *name != "reason" && *name != "temperature_c");
    let faulty = lab.reviewer().submits("/conditions/new", "/conditions/new", &faulty);
    assert_eq!(faulty.status, 422);
    assert!(faulty.text().contains("Temperature is empty") && faulty.text().contains("Say why"));
    let made = lab.reviewer().signs("/conditions/new", "/conditions/new", &OWN_CONDITION);
    assert!(made.text().contains("outside, signed by QA") && made.text().contains("Ada Whitlock"));
    let again =
        [OWN_CONDITION.to_vec(), vec![("user_name", "ada.whitlock"), ("password", PASSWORD)]].concat();
    let again = lab.reviewer().submits("/conditions/new", "/conditions/new", &again);
    assert_eq!(again.status, 409);
    assert!(again.text().contains("There is a condition 21/45 already"));
}

#[test]
fn a_chamber_keeps_one_condition_and_warns_when_its_qualification_is_overdue() {
    let lab = Lab::new();
    lab.manager().sees("/chambers", "No chamber is listed yet");
    let fields = [
        ("code", "CH-04"),
        ("name", "Walk-in chamber"),
        ("condition", "1"),
        ("location", "cellar"),
        ("qualification_due_on", "1 Dec 2026"),
    ];
    let made = lab.manager().does("/chambers/new", "/chambers/new", &fields);
    assert!(made.text().contains("25 °C/60 % RH") && !made.text().contains("▲"));
    lab.later_days(1);
    lab.manager().sees("/chambers", "▲ overdue");
    let again = lab.manager().submits("/chambers/new", "/chambers/new", &fields);
    assert_eq!(again.status, 409);
    assert!(again.text().contains("There is a chamber CH-04 already"));
}

const KINDS: [TestKind; 2] = [TestKind::Redispersibility, TestKind::Ph];

/// Starts a study through the pages, as the lab manager does, and answers with its path.
fn starts(lab: &Lab, lot: i64, protocol: i64) -> String {
    let choose = lab.manager().sees(&format!("/studies/new?lot={lot}"), "Step 2 of 3");
    assert!(choose.html().contains("SP-104 version 1"));
    let page = format!("/studies/new/check?lot={lot}&protocol_version={protocol}");
    lab.manager().sees(&page, "Nothing is made yet");
    lab.manager().does(&page, "/studies/new/check", &[]).location.unwrap()
}

#[test]
fn a_study_makes_its_containers_and_pulls_at_time_zero() {
    let lab = Lab::new();
    let lot = world::lot(&lab, "TW-104-0640");
    world::chambers(&lab);
    let protocol = world::approved_protocol(&lab, &KINDS);
    let path = starts(&lab, lot, protocol);
    let page = lab.manager().sees(&path, "Study ST-001");
    let id: i64 = path.rsplit('/').next().unwrap().parse().unwrap();
    let db = &lab.app.db;
    let pulls = db.read(|reader| store::pull::of_study(reader, id)).unwrap();
    // Two orientations of 25/60 with 8 ages and of 40/75 with 3; the contingent arms wait for their trigger.
    assert_eq!(pulls.len(), 22);
    assert!(page.text().contains("22 of 22 pulls still ask for work"));
    let containers = db.read(|reader| store::container::of_study(reader, id)).unwrap();
    let needed = pulls[0].facts.containers_needed;
    assert_eq!(containers.len(), needed * 2 * (8 + 4 + 3) + 6 * 3);
    let first = world::pull(&lab, id, 1, "6 months");
    assert_eq!(first.facts.due_on, "2027-06-01".parse().ok());
    assert_eq!(first.facts.window().unwrap().words(), "1–8 Jun 2027");
    assert_eq!(first.facts.progress.tests, 2);
    lab.manager().sees(&format!("{path}/labels"), &containers[0].label);
    lab.auditor().sees(&path, "started a study");
    let again = lab.manager().submits(
        &format!("/studies/new/check?lot={lot}&protocol_version={protocol}"),
        "/studies/new/check",
        &[("number", "st-001")],
    );
    assert_eq!(again.status, 409);
    assert!(again.text().contains("A study number is never used twice"));
}

#[test]
fn a_study_is_refused_on_a_wrong_chamber_a_future_day_and_a_draft() {
    let lab = Lab::new();
    let lot = world::lot(&lab, "TW-104-0640");
    let protocol = world::approved_protocol(&lab, &KINDS);
    let page = format!("/studies/new/check?lot={lot}&protocol_version={protocol}");
    let without = lab.manager().submits(&page, "/studies/new/check", &[]);
    assert_eq!(without.status, 409);
    assert!(without.text().contains("has no chamber"), "{}", without.text());
    world::chambers(&lab);
    let ahead = lab.manager().submits(&page, "/studies/new/check", &[("started_on", "2 Dec 2026")]);
    assert_eq!(ahead.status, 409);
    assert!(ahead.text().contains("Time zero lies ahead"));
    lab.manager().does("/protocols/1", "/protocols/1/draft", &[("reason", "one more age is needed")]);
    let draft = format!("/studies/new/check?lot={lot}&protocol_version={}", protocol + 1);
    let refused = lab.manager().submits(&draft, "/studies/new/check", &[]);
    assert_eq!(refused.status, 409);
    assert!(refused.text().contains("This protocol version is draft"));
    assert_eq!(lab.analyst().get(&page).status, 403);
}

#[test]
fn an_overdue_chamber_warns_before_and_after_the_study_starts() {
    let lab = Lab::new();
    lab.clock("2030-07-01T09:00:00Z");
    let lot = world::lot(&lab, "TW-104-0640");
    world::chambers(&lab);
    let protocol = world::approved_protocol(&lab, &KINDS);
    let page = format!("/studies/new/check?lot={lot}&protocol_version={protocol}");
    lab.manager().sees(&page, "The qualification of chamber CH-25/60 was due on 30 Jun 2030");
    let study = lab.manager().does(&page, "/studies/new/check", &[]);
    assert!(study.text().contains("▲ The qualification of chamber CH-25/60"));
}

/// screen_U68: a wrong label is a hard stop and nothing is recorded.
#[test]
fn a_pull_takes_exactly_the_containers_that_were_scanned() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    let other = world::study(&lab, "TW-104-0641", &KINDS);
    let pull = world::pull(&lab, study, 1, "Initial");
    let path = format!("/pulls/{}", pull.id);
    let take = format!("{path}/take");
    let labels = world::labels(&lab, &pull);
    assert!(labels.len() >= 3);
    let foreign = world::labels(&lab, &world::pull(&lab, other, 1, "Initial"))[0].clone();
    let wrong = lab.analyst().submits(&path, &take, &[("container.1", foreign.as_str())]);
    assert_eq!(wrong.status, 409);
    assert!(wrong.text().contains("is the label of ST-002"), "{}", wrong.text());
    let unknown = lab.analyst().submits(&path, &take, &[("container.1", "0000")]);
    assert!(unknown.text().contains("“0000” is not the label of a container of this pull"));
    let named: Vec<String> = (1..=labels.len()).map(|place| format!("container.{place}")).collect();
    let mut fields: Vec<(&str, &str)> =
        named.iter().map(String::as_str).zip(labels.iter().map(String::as_str)).collect();
    let partial = lab.analyst().submits(&path, &take, &fields[..1]);
    assert!(partial.text().contains("say why it is a partial pull"), "{}", partial.text());
    lab.analyst().sees(&path, "No container has been taken");
    let code = labels[0][labels[0].len() - 4..].to_lowercase();
    fields[0].1 = &code;
    let taken = lab.analyst().does(&path, &take, &fields);
    assert!(taken.text().contains("In progress") && taken.text().contains(&labels[0]));
    let again = lab.analyst().posts(&take, &taken_form(&lab, &path, &fields));
    assert_eq!(again.status, 409);
    let page = lab.manager().sees(&format!("/studies/{study}"), "Sample ledger");
    assert!(page.text().contains(&format!("pulled for {}", pull.number)));
}

/// The fields of a take form that was opened before somebody else took the pull.
fn taken_form(lab: &Lab, path: &str, fields: &[(&str, &str)]) -> Vec<(String, String)> {
    let mut pairs: Vec<(String, String)> = fields
        .iter()
        .map(|(name, value)| (name.to_string(), value.to_string()))
        .chain([("taken_on".to_string(), "1 Dec 2026".to_string()), ("why".to_string(), String::new())])
        .collect();
    let more = lab.analyst().get(path).form(&format!("{path}/more"));
    pairs.extend(more.into_iter().filter(|(name, _)| name == "form_token" || name == "submission"));
    pairs
}

#[test]
fn a_pull_is_missed_by_the_manager_cancelled_by_qa_and_given_to_a_person() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    let pull = world::pull(&lab, study, 1, "Initial");
    let path = format!("/pulls/{}", pull.id);
    let ilse = lab.actor("ilse.brandt").account.to_string();
    let given = lab.manager().does(&path, &format!("{path}/assign"), &[("account", &ilse)]);
    assert!(given.text().contains("With Ilse Brandt"));
    let short = lab.manager().submits(&path, &format!("{path}/miss"), &[("because", "forgot")]);
    assert_eq!(short.status, 422);
    let because = [("because", "the power failed over the week")];
    let missed = lab.manager().does(&path, &format!("{path}/miss"), &because);
    assert!(missed.text().contains("Missed"));
    assert!(!missed.text().contains("Take the pull"));
    let later = world::pull(&lab, study, 1, "3 months");
    let path = format!("/pulls/{}", later.id);
    assert!(!lab.manager().get(&path).text().contains("It was missed, because"));
    assert!(!lab.manager().get(&path).text().contains("It is cancelled, because"));
    let because = [("cancelled_because", "the customer ended the study")];
    let cancelled = lab.reviewer().does(&path, &format!("{path}/cancel"), &because);
    assert!(cancelled.text().contains("cancelled on 1 Dec 2026"), "{}", cancelled.text());
    assert!(cancelled.text().contains("the customer ended the study"));
}

#[test]
fn the_last_point_is_never_early_and_other_points_need_a_reason() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    lab.clock("2029-11-30T10:00:00Z");
    let last = world::pull(&lab, study, 1, "36 months");
    let named: Vec<String> =
        (1..=last.facts.containers_needed).map(|place| format!("container.{place}")).collect();
    let labels = world::labels(&lab, &last);
    let mut fields: Vec<(&str, &str)> =
        named.iter().map(String::as_str).zip(labels.iter().map(String::as_str)).collect();
    fields.push(("why", "the analyst is away tomorrow"));
    let path = format!("/pulls/{}", last.id);
    let early = lab.analyst().submits(&path, &format!("{path}/take"), &fields);
    assert_eq!(early.status, 409);
    assert!(early.text().contains("The last point of an arm is never taken early"), "{}", early.text());
    lab.clock("2029-12-01T10:00:00Z");
    lab.analyst().does(&path, &format!("{path}/take"), &fields);
}

/// Decision A16: the contingent arm is placed at time zero and gets its pulls when it is triggered.
#[test]
fn a_contingent_arm_gets_its_pulls_when_it_is_triggered() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    lab.later_days(100);
    let arms = lab.app.db.read(|reader| store::study::arms(reader, study)).unwrap();
    let arm = arms.iter().find(|arm| arm.is_contingent).unwrap();
    assert!(arm.containers > 0);
    let path = format!("/studies/{study}");
    let fields = [("arm", arm.id.to_string()), ("reason", "viscosity fell at 40/75, 3 months".to_string())];
    let fields: Vec<(&str, &str)> = fields.iter().map(|(name, value)| (*name, value.as_str())).collect();
    let page = lab.manager().does(&path, &format!("{path}/trigger"), &fields);
    assert!(page.text().contains("26 of 26 pulls"), "{}", page.text());
    assert!(page.text().contains("triggered a contingent arm"));
    let again = lab.manager().submits(&path, &format!("{path}/trigger"), &fields);
    assert_eq!(again.status, 422);
    let pulls = lab.app.db.read(|reader| store::pull::of_study(reader, study)).unwrap();
    let numbers: Vec<&str> =
        pulls.iter().filter(|pull| pull.study_arm == arm.id).map(|pull| pull.number.as_str()).collect();
    assert_eq!(numbers, ["ST-001-P23", "ST-001-P24", "ST-001-P25", "ST-001-P26"]);
}

#[test]
fn the_ledger_says_what_became_of_every_container_and_never_falls_below_zero() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    let container = lab.app.db.read(|reader| store::container::of_study(reader, study)).unwrap().remove(0);
    let path = format!("/containers/{}", container.id);
    let events = format!("{path}/events");
    let broken = [("kind", "broken"), ("note", "fell from the shelf")];
    lab.analyst().does(&path, &events, &broken);
    let twice = lab.analyst().submits(&path, &events, &broken);
    assert_eq!(twice.status, 409);
    assert!(twice.text().contains("has left its chamber already"));
    let own = lab.actor("rafe.tolland").account.to_string();
    let fields = |witness: &str| {
        [("kind", "destroyed"), ("note", "swept up and burnt"), ("witness", witness)]
            .map(|(name, value)| (name.to_string(), value.to_string()))
    };
    let submit = |witness: &str| {
        let fields = fields(witness);
        let fields: Vec<(&str, &str)> =
            fields.iter().map(|(name, value)| (name.as_str(), value.as_str())).collect();
        lab.analyst().submits(&path, &events, &fields)
    };
    assert!(submit("").text().contains("A destruction needs a witness"));
    assert!(submit(&own).text().contains("The witness is another person"));
    assert_eq!(submit(&lab.actor("ilse.brandt").account.to_string()).status, 303);
    lab.manager().sees(&format!("/studies/{study}"), "destroyed, seen by Ilse Brandt");
    let arms = lab.app.db.read(|reader| store::study::arms(reader, study)).unwrap();
    assert_eq!(arms[0].containers_left, arms[0].containers - 1);
}

/// Records readings of the sample's only test at the bench, as the first analyst: those in these places.
fn reads(lab: &Lab, sample: i64, label: &str, places: std::ops::Range<usize>) {
    use supernate::acts::reading::How;
    use supernate::domain::reading::{Entry, Said};
    use supernate::domain::reason::Reason;
    use supernate::domain::typed::Number;
    let (db, actor) = (&lab.app.db, lab.actor("rafe.tolland"));
    let found = || db.read(|reader| store::bench::sample(reader, sample)).unwrap();
    let test = found().tests[0].clone();
    for (place, slot) in
        found().slots(&test).into_iter().enumerate().filter(|(place, _)| places.contains(place))
    {
        let text = if slot.key.field == "declared" { "40.00".to_string() } else { format!("39.5{place}") };
        let value: rust_decimal::Decimal = text.parse().unwrap();
        let said = Said::Number(Number { text, value, decimals: 2 });
        let seen = found().readings.iter().map(|(_, reading)| reading.id).max().unwrap_or_default();
        let how = How { sample_test: test.id, label: label.to_string(), seen, ..How::default() };
        supernate::acts::reading::record(db, &actor, &how, &[Entry { slot, said }], &Reason::none()).unwrap();
    }
}

/// The week's index of open pulls follows what happens at the bench.
#[test]
fn a_pull_asks_for_work_until_every_test_has_its_result() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &[TestKind::Numeric]);
    world::qualify(&lab, "rafe.tolland", world::approved_method(&lab, TestKind::Numeric));
    let pull = world::pull(&lab, study, 1, "Initial");
    let label = world::labels(&lab, &pull)[0].clone();
    let sample = world::take(&lab, &pull);
    let now = || {
        let found = world::pull(&lab, study, 1, "Initial");
        let other = world::pull(&lab, study, 3, "Initial");
        assert_eq!(other.facts.progress.started, 0);
        let in_test =
            lab.app.db.read(|reader| store::open_pull::counts(reader, lab.now().date())).unwrap().in_test;
        (found.facts.progress.started, found.facts.progress.complete, in_test)
    };
    assert_eq!(now(), (0, 0, 1));
    reads(&lab, sample, &label, 0..1);
    assert_eq!(now(), (1, 0, 1));
    reads_rest_and_completes(&lab, sample, &label);
    assert_eq!(now(), (1, 1, 0));
    lab.manager().sees(&format!("/pulls/{}", pull.id), "Waiting for check");
    lab.manager().sees(&format!("/studies/{study}"), "21 of 22 pulls still ask for work");
}

fn reads_rest_and_completes(lab: &Lab, sample: i64, label: &str) {
    let (db, actor) = (&lab.app.db, lab.actor("rafe.tolland"));
    reads(lab, sample, label, 1..100);
    let found = db.read(|reader| store::bench::sample(reader, sample)).unwrap();
    let test = found.tests[0].id;
    for reading in supernate::domain::reading::standing(&found.readings_of(test)) {
        if reading.has_open_question() {
            supernate::acts::reading::keep(db, &actor, test, reading.id).unwrap();
        }
    }
    supernate::acts::result::complete(db, &actor, test).unwrap();
}

/// Decision A11: the default windows are the site's setting; a running study keeps what it started with.
#[test]
fn the_sites_default_windows_hold_for_studies_that_start_after() {
    let lab = Lab::new();
    let first = world::study(&lab, "TW-104-0640", &KINDS);
    let own = [("window.months-12", "10"), ("reason", "agreed with the customer in writing")];
    lab.administrator().does("/settings", "/settings", &own);
    let lot = world::lot(&lab, "TW-104-0641");
    let second = world::study_of(&lab, lot, &KINDS);
    let window = |study: i64| world::pull(&lab, study, 1, "6 months").facts.window().unwrap().words();
    assert_eq!(window(first), "1–8 Jun 2027");
    assert_eq!(window(second), "1–11 Jun 2027");
    lab.manager().sees("/protocol-versions/1", "−0/+10 d");
    let most = [("window.later", "32"), ("reason", "agreed with the customer in writing")];
    let refused = lab.administrator().submits("/settings", "/settings", &most);
    assert_eq!(refused.status, 409);
    assert!(refused.text().contains("32 is outside 0 to 31"), "{}", refused.text());
}
