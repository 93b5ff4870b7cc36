//! Corrections, two browsers on one reading, and the script's way of recording.

use axum::body::Body;
use axum::http::{Request, header};
use supernate::domain::method::TestKind;
use supernate::store;

use crate::benches::{PH, at_bench, page, records};
use crate::support::{Lab, Person, Seen, form_body, world};

fn standing(lab: &Lab, test: i64, field: &str) -> String {
    let readings = lab.app.db.read(|reader| store::reading::of_test(reader, test)).unwrap();
    let standing = supernate::domain::reading::standing(&readings);
    standing.iter().find(|one| one.key.name() == field).map(|one| one.shown()).unwrap_or_default()
}

#[test]
fn a_change_needs_a_reason_and_stays_visible() {
    let lab = Lab::new();
    world::instrument(&lab, "PH-03", "pH meter");
    let (_, tests, label) = at_bench(&lab, &[TestKind::Ph]);
    let (analyst, page) = (lab.analyst(), page(tests[0], &label));
    records(&analyst, &page, &PH);
    let asked = records(&analyst, &page, &[("reading.0.1.value", "6.38")]);
    assert_eq!(asked.status, 422);
    assert!(asked.text().contains("6.83 is recorded already. Say why it becomes 6.38"), "{}", asked.text());
    assert!(asked.html().contains("id=\"reading.0.1.value-why\"><legend>"), "the reason box is open");
    let emptied = records(&analyst, &page, &[("reading.0.1.value", "")]);
    assert_eq!(emptied.status, 422);
    assert!(emptied.text().contains("6.83 is recorded and stays"), "{}", emptied.text());
    let changed = [("reading.0.1.value", "6.38"), ("reading.0.1.value-why", "mistyped")];
    assert_eq!(records(&analyst, &page, &changed).status, 303);
    let seen = analyst.sees(&page, "Corrections");
    assert!(seen.html().contains("<td class=\"was\">6.83</td><td class=\"is\">6.38</td>"), "{}", seen.html());
    assert!(seen.text().contains("mistyped"));
    let unread = [("reading.0.1.value.unread", "the electrode was cracked")];
    assert_eq!(records(&analyst, &page, &unread).status, 303);
    assert_eq!(standing(&lab, tests[0], "reading.0.1.value"), "could not be read: the electrode was cracked");
}

#[test]
fn a_correction_after_completion_makes_the_next_version_and_judges_the_first_value_too() {
    let lab = Lab::new();
    world::instrument(&lab, "PH-03", "pH meter");
    let (_, tests, label) = at_bench(&lab, &[TestKind::Ph]);
    let (analyst, page, action) = (lab.analyst(), page(tests[0], &label), format!("/tests/{}", tests[0]));
    let outside = [
        ("reading.0.1.value", "7.83"),
        ("reading.0.1.temperature_c", "22.0"),
        ("reading.0.2.value", "7.81"),
        ("reading.0.2.temperature_c", "22.1"),
    ];
    records(&analyst, &page, &outside);
    analyst.does(&page, &action, &[("then", "complete")]);
    analyst.sees(&page, "investigation 1 opened");
    let new =
        records(&analyst, &page, &[("reading.0.1.value", "6.83"), ("reading.0.1.value-why", "mistyped")]);
    assert_eq!(new.status, 303, "{}", new.text());
    let also =
        records(&analyst, &page, &[("reading.0.2.value", "6.81"), ("reading.0.2.value-why", "mistyped")]);
    assert_eq!(also.status, 303, "{}", also.text());
    let results = lab.app.db.read(|reader| store::result::of_test(reader, tests[0])).unwrap();
    let versions: Vec<(i64, &str)> =
        results.iter().map(|result| (result.version, result.verdict.as_str())).collect();
    assert_eq!(versions[0], (3, "conforms"));
    assert_eq!(versions.last(), Some(&(1, "out of specification")));
    let flags = lab.app.db.read(|reader| store::flag::of_test(reader, tests[0])).unwrap();
    assert!(flags.iter().any(|flag| flag.version == 3 && flag.kind == "first value outside"), "{flags:?}");
    let investigations = lab.app.db.read(store::investigation::all).unwrap();
    assert_eq!(investigations.len(), 1);
}

#[test]
fn two_browsers_on_one_reading_lose_nothing() {
    let lab = Lab::new();
    world::instrument(&lab, "PH-03", "pH meter");
    let (_, tests, label) = at_bench(&lab, &[TestKind::Ph]);
    let (page, action) = (page(tests[0], &label), format!("/tests/{}", tests[0]));
    let (one, other) = (lab.analyst(), lab.second_analyst());
    let with = |person: &Person<'_>, text: &str| {
        let mut pairs = person.get(&page).form(&action);
        pairs.retain(|(name, _)| name != "reading.0.1.value");
        pairs.push(("reading.0.1.value".to_string(), text.to_string()));
        pairs
    };
    let (first, second) = (with(&one, "6.83"), with(&other, "6.38"));
    assert_eq!(one.posts(&action, &first).status, 303);
    let conflict = other.posts(&action, &second);
    assert_eq!(conflict.status, 409);
    let text = conflict.text();
    assert!(
        text.contains("Recorded by Rafe Tolland") && text.contains("6.83") && text.contains("6.38"),
        "{text}"
    );
    assert_eq!(standing(&lab, tests[0], "reading.0.1.value"), "6.83");
    let mut again = conflict.form(&action);
    again.push(("reading.0.1.value-why".to_string(), "re-read".to_string()));
    assert_eq!(
        other.posts(&action, &again).status,
        303,
        "with the new version and a reason it is a correction"
    );
    assert_eq!(standing(&lab, tests[0], "reading.0.1.value"), "6.38");
}

fn script(person: &Person<'_>, path: &str, pairs: &[(String, String)]) -> (Seen, serde_json::Value) {
    let request = Request::builder()
        .method("POST")
        .uri(path)
        .header("sec-fetch-site", "same-origin")
        .header(header::ACCEPT, "application/json")
        .header(header::CONTENT_TYPE, "application/x-www-form-urlencoded")
        .header(header::COOKIE, format!("__Host-sid={}", person.token()))
        .body(Body::from(form_body(pairs)))
        .unwrap();
    let seen = person.lab.send(request);
    let json = serde_json::from_slice(&seen.body).unwrap_or_default();
    (seen, json)
}

#[test]
fn the_script_records_one_value_at_a_time_and_a_repeat_gets_the_same_answer() {
    let lab = Lab::new();
    world::instrument(&lab, "PH-03", "pH meter");
    let (_, tests, label) = at_bench(&lab, &[TestKind::Ph]);
    let (analyst, action) = (lab.analyst(), format!("/tests/{}", tests[0]));
    let mut hidden = analyst.get(&page(tests[0], &label)).form(&action);
    hidden.retain(|(name, _)| !name.starts_with("reading."));
    let send = |hidden: &[(String, String)], fields: &[(&str, &str)]| {
        let mut pairs = hidden.to_vec();
        pairs.extend(fields.iter().map(|(name, text)| (name.to_string(), text.to_string())));
        script(&analyst, &action, &pairs)
    };
    let take = |hidden: &mut Vec<(String, String)>, told: &serde_json::Value| {
        for name in ["submission", "version"] {
            let Some(text) = told[name].as_str() else { continue };
            hidden.retain(|(known, _)| known != name);
            hidden.push((name.to_string(), text.to_string()));
        }
    };
    let (seen, told) = send(&hidden, &[("reading.0.1.value", "6.8")]);
    assert_eq!((seen.status, told["saved"].as_str()), (200, Some("09:00:00")), "{told}");
    assert_eq!(told["hints"][0]["name"], "reading.0.1.value");
    let (_, again) = send(&hidden, &[("reading.0.1.value", "6.8")]);
    assert_eq!(again, told, "byte for byte the same request gives the same answer");
    take(&mut hidden, &told);
    let (seen, refused) = send(&hidden, &[("reading.0.2.value", "68.1")]);
    assert_eq!(seen.status, 422);
    assert!(refused["errors"][0]["text"].as_str().unwrap().contains("cannot be"), "{refused}");
    take(&mut hidden, &refused);
    let (_, told) = send(&hidden, &[("reading.0.2.value", "6.81")]);
    assert_eq!(told["calculated"][0]["id"], "mean.value");
    assert_eq!(told["calculated"][0]["text"], "6.805");
    take(&mut hidden, &told);
    let (seen, told) = send(&hidden, &[("reading.0.1.value", "6.80"), ("reading.0.1.value-why", "mistyped")]);
    assert_eq!(seen.status, 200, "{told}");
    assert_eq!(standing(&lab, tests[0], "reading.0.1.value"), "6.80");
    let readings = lab.app.db.read(|reader| store::reading::of_test(reader, tests[0])).unwrap();
    assert_eq!(readings.len(), 3);
    assert_eq!(readings[2].answer.as_deref(), Some("changed after hint"));
}

#[test]
fn a_late_entry_states_when_it_was_read_and_why() {
    let lab = Lab::new();
    world::instrument(&lab, "PH-03", "pH meter");
    let (_, tests, label) = at_bench(&lab, &[TestKind::Ph]);
    let analyst = lab.analyst();
    let late = |at: &str, why: &str| {
        let page =
            format!("/tests/{}?label={label}&late_on=1 Dec 2026&late_at={at}&late_why={why}", tests[0]);
        records(&analyst, &page.replace(' ', "%20"), &[("reading.0.1.value", "6.83")])
    };
    assert_eq!(late("11:00", "the network was down").status, 409, "the time has not come");
    assert_eq!(late("noon", "the network was down").status, 422);
    assert_eq!(late("08:15", "the network was down").status, 303);
    let readings = lab.app.db.read(|reader| store::reading::of_test(reader, tests[0])).unwrap();
    assert_eq!(readings[0].read_at.as_deref(), Some("2026-12-01T08:15:00.000Z"));
    assert_eq!(readings[0].reason.as_deref(), Some("the network was down"));
}

#[test]
fn a_second_reader_reads_blind_and_a_third_decides() {
    use supernate::domain::method::preset;
    let lab = Lab::new();
    let mut content = preset::of(TestKind::AsStoredSediment);
    content.second_reader_tolerance = Some("1.0".parse().unwrap());
    world::method_with(&lab, "M-AS-STORED-SEDIMENT", "as-stored sediment", content);
    let (_, tests, label) = at_bench(&lab, &[TestKind::AsStoredSediment]);
    let (page, action) = (page(tests[0], &label), format!("/tests/{}", tests[0]));
    let heights = |reader: &str, bed: &str| {
        [("base_mm", "2.0"), ("bed_top_mm", bed), ("fill_line_mm", "82.0"), ("days_undisturbed", "30")]
            .map(|(field, text)| (format!("reading.0.1.{reader}{field}"), text.to_string()))
    };
    let reads = |person: &Person<'_>, reader: &str, bed: &str| {
        let fields = heights(reader, bed);
        let borrowed: Vec<_> = fields.iter().map(|(name, text)| (name.as_str(), text.as_str())).collect();
        records(person, &page, &borrowed)
    };
    let (first, second) = (lab.analyst(), lab.second_analyst());
    assert_eq!(reads(&first, "", "61.3").status, 303);
    let alone = first.submits(&page, &action, &[("then", "complete")]);
    assert_eq!(alone.status, 409);
    assert!(alone.text().contains("This method asks for a second reader"), "{}", alone.text());
    assert_eq!(reads(&first, "second:", "61.3").status, 400, "the first reader has no second box");
    let blind = second.sees(&page, "Top of the bed, second reader");
    assert!(!blind.html().contains("61.3"), "{}", blind.text());
    assert_eq!(reads(&second, "second:", "63.0").status, 303);
    let apart = second.submits(&page, &action, &[("then", "complete")]);
    assert_eq!(apart.status, 409);
    assert!(apart.text().contains("A third reading decides"), "{}", apart.text());
}
