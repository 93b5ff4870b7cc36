//! Stages, appearance, the counter of inversions, viscosity.

use supernate::domain::method::TestKind;
use supernate::store;

use crate::benches::{at_bench, page, records};
use crate::support::{Lab, Person, Seen};

fn counts(person: &Person<'_>, page: &str, test: i64, fields: &[(&str, &str)]) -> Seen {
    person.submits(page, &format!("/tests/{test}/inversions"), fields)
}

const APPEARANCE: [(&str, &str); 4] = [
    ("reading.0.1.clarity", "1"),
    ("reading.0.1.caking", "0"),
    ("reading.0.1.colour", "match"),
    ("reading.0.1.remarks", "a thin clear layer on top"),
];

#[test]
fn stages_open_in_order_and_the_worst_bottle_judges() {
    let lab = Lab::new();
    let (sample, tests, label) = at_bench(&lab, &[TestKind::Appearance, TestKind::Redispersibility]);
    let (analyst, turns) = (lab.analyst(), page(tests[1], &label));
    analyst.sees(&format!("/samples/{sample}?label={label}"), "opens when appearance by grades is finished");
    let early = analyst.sees(&turns, "comes after appearance by grades, which is still open");
    assert!(!early.html().contains("data-counter"));

    let seen = analyst.sees(&page(tests[0], &label), "Print reads through it with a soft edge.");
    assert!(!seen.text().contains("Caking: none"), "the limit stays hidden: {}", seen.text());
    assert_eq!(records(&analyst, &page(tests[0], &label), &APPEARANCE).status, 303);

    let shown = analyst.sees(&turns, "uniform after more than 10 and at most 15");
    assert!(!shown.text().contains("at most 10 "), "{}", shown.text());
    let fault =
        counts(&analyst, &turns, tests[1], &[("inversions", "12.5"), ("seconds", "x"), ("end", "uniform")]);
    assert_eq!(fault.status, 422);
    assert!(fault.text().contains("is a count") && fault.text().contains("“x” is not a number"));
    assert!(fault.html().contains("value=\"12.5\""));
    for (replicate, end, inversions) in [("1", "uniform", "10"), ("2", "uniform", "15"), ("3", "capped", "")]
    {
        let seen = counts(
            &analyst,
            &format!("{turns}&container={replicate}"),
            tests[1],
            &[("inversions", inversions), ("end", end), ("residue", "none")],
        );
        assert_eq!(seen.status, 303, "{}", seen.text());
    }
    analyst.sees(&turns, "more than 100");
    let readings = lab.app.db.read(|reader| store::reading::of_test(reader, tests[1])).unwrap();
    let every: Vec<_> = readings.iter().filter(|one| one.key.field == "inversions").collect();
    let intervals: Vec<_> = every.iter().map(|one| one.inspected_every).collect();
    assert_eq!(intervals, [Some(5), Some(5), None], "a censored count is no interval");
    assert_eq!(every[0].shown(), "10 (more than 5, at most 10)");
    analyst.does(&turns, &format!("/tests/{}", tests[1]), &[("then", "complete")]);
    let seen = analyst.sees(&turns, "out of specification");
    assert!(seen.text().contains("Investigation 1"), "{}", seen.text());

    let late = records(&analyst, &page(tests[0], &label), &[("then", "complete")]);
    assert_eq!(late.status, 303, "what was recorded in time can be completed later: {}", late.text());
}

#[test]
fn a_stage_that_was_passed_is_lost_with_its_reason() {
    let lab = Lab::new();
    let (sample, tests, label) = at_bench(&lab, &[TestKind::AsStoredSediment, TestKind::Redispersibility]);
    let analyst = lab.analyst();
    let (path, action) = (format!("/samples/{sample}"), format!("/samples/{sample}/stages"));
    let short = analyst.submits(&path, &action, &[("stage", "before disturbance"), ("why", "late")]);
    assert_eq!(short.status, 422);
    let why = "the bottle was shaken in transport";
    let seen = analyst.does(&path, &action, &[("stage", "before disturbance"), ("why", why)]);
    assert!(seen.text().contains("lost, because the bottle was shaken in transport"), "{}", seen.text());
    let refused = analyst.sees(&page(tests[0], &label), "was closed as lost");
    assert!(!refused.html().contains("data-record-each"));
    assert!(analyst.get(&page(tests[1], &label)).html().contains("data-counter"));
    assert!(seen.text().contains("closed a stage"), "{}", seen.text());
}

#[test]
fn heights_that_cannot_be_are_refused_and_the_ratio_is_exact() {
    let lab = Lab::new();
    let (_, tests, label) = at_bench(&lab, &[TestKind::AsStoredSediment]);
    let (analyst, page) = (lab.analyst(), page(tests[0], &label));
    let heights = |base: &'static str, bed: &'static str| {
        [
            ("reading.0.1.base_mm", base),
            ("reading.0.1.bed_top_mm", bed),
            ("reading.0.1.fill_line_mm", "82.0"),
            ("reading.0.1.days_undisturbed", "30"),
        ]
    };
    let refused = records(&analyst, &page, &heights("5.0", "2.0"));
    assert_eq!(refused.status, 409);
    assert!(refused.text().contains("The top of the bed lies below the base"), "{}", refused.text());
    assert!(lab.app.db.read(|reader| store::reading::of_test(reader, tests[0])).unwrap().is_empty());
    assert_eq!(records(&analyst, &page, &heights("2.0", "60.0")).status, 303);
    analyst.does(&page, &format!("/tests/{}", tests[0]), &[("then", "complete")]);
    let results = lab.app.db.read(|reader| store::result::of_test(reader, tests[0])).unwrap();
    assert_eq!(results[0].value.unwrap(), "0.725".parse().unwrap());
}

#[test]
fn a_wrong_spindle_is_refused_and_a_torque_outside_its_window_is_named() {
    let lab = Lab::new();
    crate::support::world::instrument(&lab, "VI-01", "viscometer");
    let (_, tests, label) = at_bench(&lab, &[TestKind::Viscosity]);
    let (analyst, page) = (lab.analyst(), page(tests[0], &label));
    let mut fields: Vec<(String, &str)> = Vec::new();
    for replicate in 1..=2 {
        for (field, text) in
            [("value", "1020"), ("torque_percent", "51.0"), ("temperature_c", "20.1"), ("rest_minutes", "5")]
        {
            fields.push((format!("reading.0.{replicate}.{field}"), text));
        }
    }
    fn borrowed<'a>(fields: &'a [(String, &'a str)]) -> Vec<(&'a str, &'a str)> {
        fields.iter().map(|(name, text)| (name.as_str(), *text)).collect()
    }
    let page_now = analyst.get(&page);
    let form = page_now.form(&format!("/tests/{}", tests[0]));
    for filled in [("setting.spindle", "2"), ("setting.speed_rpm", "60")] {
        assert!(form.contains(&(filled.0.to_string(), filled.1.to_string())), "{form:?}");
    }
    fields.push(("setting.spindle".to_string(), "3"));
    let refused = records(&analyst, &page, &borrowed(&fields));
    assert_eq!(refused.status, 422);
    assert!(
        refused.text().contains("this method reads with 2, and “3” is not comparable"),
        "{}",
        refused.text()
    );
    fields.pop();
    fields[1].1 = "94.5";
    assert_eq!(records(&analyst, &page, &borrowed(&fields)).status, 303);
    let readings = lab.app.db.read(|reader| store::reading::of_test(reader, tests[0])).unwrap();
    let of = |field: &str| readings.iter().filter(|one| one.key.field == field).count();
    assert_eq!((of("spindle"), of("speed_rpm"), of("value")), (2, 2, 2), "each replicate has what was set");
    assert!(!analyst.get(&page).html().contains("name=\"setting.spindle\""), "set once");
    let asked = analyst.sees(&page, "Torque 94.5 % in reading 1 lies above the method’s 90 %");
    assert!(!asked.text().contains("in reading 2 lies"), "{}", asked.text());
    let torque = readings.iter().find(|one| one.key.field == "torque_percent").unwrap().id.to_string();
    let questions = format!("/tests/{}/questions", tests[0]);
    analyst.does(&page, &questions, &[("answer", &torque)]);
    analyst.does(&page, &format!("/tests/{}", tests[0]), &[("then", "complete")]);
    analyst.sees(&page, "Torque 94.5 % in reading 1 lies above the method’s 90 %");
}
