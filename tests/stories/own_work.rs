//! Nobody signs, checks or decides on own work: a page says so and who could, and the attempt stays in the trail
//! (screen_U76).

use supernate::domain::sample::Purpose;

use crate::support::samples::Bench;
use crate::support::{Lab, PASSWORD, Person, Seen, world};

/// The analyst is given the QA reviewer's role as well.
fn analyst_also_reviews(lab: &Lab) {
    let page = format!("/people/{}", lab.actor("rafe.tolland").account);
    let roles =
        [("role.analyst", "yes"), ("role.QA-reviewer", "yes"), ("reason", "stands in for the reviewer")];
    lab.administrator().does(&page, &format!("{page}/roles"), &roles);
}

/// Sends what another person's form holds, under one's own session.
fn sends_as(
    person: &Person<'_>,
    other: &Person<'_>,
    page: &str,
    action: &str,
    fields: &[(&str, &str)],
) -> Seen {
    let mut pairs = person.get("/me").form("/sign-out");
    let own = |name: &str| name == "form_token" || name == "submission";
    pairs.extend(other.get(page).form(action).into_iter().filter(|(name, _)| !own(name)));
    pairs.retain(|(name, _)| !fields.iter().any(|(given, _)| given == name));
    pairs.extend(fields.iter().map(|(name, value)| (name.to_string(), value.to_string())));
    if !pairs.iter().any(|(name, _)| name == "submission") {
        pairs.push(("submission".to_string(), format!("{:064}", action.len())));
    }
    person.posts(action, &pairs)
}

/// The newest act of the trail is the refused attempt, and nothing was written by it.
fn is_noted(lab: &Lab, code: &str, sentence: &str) {
    let newest =
        lab.app.db.read(|reader| supernate::store::trail::before(reader, None, 1)).unwrap().remove(0);
    assert_eq!((newest.code.as_str(), newest.outcome.as_str()), (code, "denied"));
    assert!(newest.detail.unwrap_or_default().contains(sentence));
    let changed = lab.app.db.read(|reader| supernate::store::trail::changes_of(reader, newest.act)).unwrap();
    assert_eq!(changed, [], "a refused act writes nothing");
}

#[test]
fn the_author_does_not_approve() {
    let lab = Lab::new();
    let product = world::product(&lab, "TW");
    world::approved_formulation(&lab, product);
    let draft = "/formulations/1/draft";
    let made = lab.formulator().does(draft, draft, &[("reason", "less xanthan, thinner at rest")]);
    let second = made.location.clone().unwrap();
    let sign = format!("{second}/sign");
    lab.formulator().signs(&second, &sign, &[]);
    let signing = [("user_name", "tomas.reyle"), ("password", PASSWORD)];
    let refused = sends_as(&lab.formulator(), &lab.reviewer(), &second, &sign, &signing);
    assert_eq!(refused.status, 403, "{}", refused.text());
    for words in ["This is your own work", "The author cannot approve", "Ada Whitlock", "Lena Marsh"] {
        assert!(refused.text().contains(words), "{words}: {}", refused.text());
    }
    assert!(!refused.text().contains("no part in the work: Tomas"), "{}", refused.text());
    is_noted(&lab, "SignFormulationVersion", "The author cannot approve");
    lab.reviewer().sees(&second, "— refused: The author cannot approve");
    lab.reviewer().signs(&second, &sign, &[]);
}

#[test]
fn nobody_signs_or_decides_on_a_lot_they_tested() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    bench.assigns_shelf_life();
    lab.later_days(2);
    let lot = bench.lot_made_on("TW-104-0640", "2026-12-02".parse().unwrap());
    crate::support::world::record_elsewhere(&lab, lot);
    let sample = bench.ready(lot, Purpose::Release);
    let (qa, page) = (lab.reviewer(), format!("/review/{sample}"));
    qa.does(&page, &format!("{page}/agree"), &[]);
    qa.signs("/review/sign", "/review/sign", &[]);
    analyst_also_reviews(&lab);
    let decision = format!("/lots/{lot}/decision");
    let refused = lab.analyst().submits(
        &decision,
        &format!("/lots/{lot}/release"),
        &[("user_name", "rafe.tolland"), ("password", PASSWORD)],
    );
    assert_eq!(refused.status, 403, "{}", refused.text());
    assert!(refused.text().contains("Ada Whitlock, Per Lindqvist"), "{}", refused.text());
    is_noted(&lab, "DecideLot", "You read or checked something of TW-104-0640");
    qa.sees(&decision, "TW-104-0640 is not decided on.");
    qa.sees(&decision, "decided on a lot — refused");
    qa.signs(&decision, &format!("/lots/{lot}/release"), &[("is_reviewed", "yes")]);
}

#[test]
fn who_took_the_readings_does_not_conclude_their_investigation() {
    let lab = Lab::new();
    let path = crate::investigations::opened(&lab);
    let otis = lab.actor("otis.vane").account.to_string();
    lab.manager().does(&path, &format!("{path}/steering"), &[("account", &otis)]);
    let finding = [("kind", "finding"), ("text", "buffer 7.00 was opened nine weeks ago"), ("other_lot", "")];
    lab.analyst().does(&path, &format!("{path}/entries"), &finding);
    analyst_also_reviews(&lab);
    let ends = format!("{path}/conclusion");
    let fields = [
        ("conclusion", "The second buffer was stale; the readings do not stand."),
        ("user_name", "rafe.tolland"),
        ("password", PASSWORD),
    ];
    let refused = lab.analyst().submits(&path, &ends, &fields);
    assert_eq!(refused.status, 403, "{}", refused.text());
    is_noted(&lab, "ConcludeInvestigation", "You took part in the readings");
    lab.reviewer().sees(&path, "concluded an investigation — refused");
}

/// A label of another sample is noted, though the form comes back with its sentence.
#[test]
fn a_wrong_label_at_the_bench_is_noted() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &[supernate::domain::method::TestKind::Ph]);
    let pull = world::pull(&lab, study, 1, "Initial");
    let page = format!("/pulls/{}", pull.id);
    let fields = [("container.1", "TW-999-0001"), ("why", "taken for this story")];
    let refused = lab.analyst().submits(&page, &format!("{page}/take"), &fields);
    assert_eq!(refused.status, 409, "{}", refused.text());
    is_noted(&lab, "RecordPull", "TW-999-0001");
    lab.manager().sees(&page, "took a pull — refused");
}

/// The identity check before any number is a form of its own: opening a page writes nothing, a wrong label typed
/// there stands in the sample's history (screen_U68).
#[test]
fn a_wrong_label_before_any_number_is_noted_and_a_right_one_opens_the_test() {
    let lab = Lab::new();
    let (sample, tests, label) =
        crate::benches::at_bench(&lab, &[supernate::domain::method::TestKind::Appearance]);
    let (test, of_sample) = (format!("/tests/{}", tests[0]), format!("/samples/{sample}"));
    let analyst = lab.analyst();
    for page in [&test, &of_sample] {
        let check = format!("{page}/label");
        analyst.get(page);
        let before = lab.app.db.read(supernate::store::trail::head).unwrap();
        analyst.get(&format!("{page}?label=TW-999-R1"));
        analyst.submits(page, &check, &[("label", "")]);
        assert_eq!(lab.app.db.read(supernate::store::trail::head).unwrap(), before);
        let wrong = analyst.submits(page, &check, &[("label", "TW-999-R1")]);
        assert_eq!(wrong.status, 409, "{}", wrong.text());
        assert!(wrong.text().contains("“TW-999-R1” is not a label of"), "{}", wrong.text());
        assert!(!wrong.html().contains("data-record-each"));
        is_noted(&lab, "RecordReadings", "TW-999-R1");
        let right = analyst.submits(page, &check, &[("label", &label)]);
        let wanted = format!("{page}?label={}", label.replace('-', "%2D"));
        assert_eq!(
            (right.status, right.location.as_deref()),
            (303, Some(wanted.as_str())),
            "{}",
            right.text()
        );
    }
    lab.manager().sees(&of_sample, "recorded readings — refused");
    assert!(analyst.get(&format!("{test}?label={label}")).html().contains("data-record-each"));
}
