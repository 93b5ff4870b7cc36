//! Cases of the kinds of test that are more than one number.

use super::*;

fn caking() -> Attribute {
    let grade = |code: &str, word: &str| Grade {
        code: code.to_string(),
        word: word.to_string(),
        anchor: format!("anchor of {word}"),
        photo: None,
    };
    Attribute {
        is_after_shake: false,
        code: "caking".to_string(),
        title: "Caking".to_string(),
        grades: vec![grade("0", "none"), grade("1", "slight"), grade("3", "hard cake")],
    }
}

fn appearance() -> MethodContent {
    method(Settings::Appearance { attributes: vec![caking()] }, Reportable::EachContainer, "", 0)
}

#[test]
fn appearance_conforms_or_names_the_attribute_and_grade() {
    let allowed = vec![("caking".to_string(), vec!["0".to_string(), "1".to_string()])];
    let limits = limits(Limit::Grades(allowed), Way::Rounding);
    let graded = |code: &str| ReadingValue {
        qualifier: Qualifier::Words,
        value: None,
        ..reading(0, 1, "caking", code)
    };
    let good = one(&appearance(), Some(&limits), &[graded("1")]);
    assert_eq!((good.verdict, good.shown.as_str()), (Verdict::Conforms, "conforms"));
    assert_eq!(good.detail["limit"], "Caking: none or slight");
    let bad = one(&appearance(), Some(&limits), &[graded("3")]);
    assert_eq!(bad.verdict, Verdict::OutOfSpecification);
    assert_eq!(bad.shown, "does not conform (Caking: hard cake (3))");
    assert_eq!(bad.flags[0].sentence, "Caking: hard cake (3), not none (0) or slight (1).");
    let corrected = ReadingValue { first_typed: Some(("3".to_string(), None)), ..graded("0") };
    assert_eq!(kinds(&one(&appearance(), Some(&limits), &[corrected])), ["first value outside"]);
    assert_eq!(one(&appearance(), Some(&limits), &[]).verdict, Verdict::NoReportableValue);
    let unlimited = one(&appearance(), None, &[graded("3")]);
    assert_eq!((unlimited.verdict, unlimited.shown.as_str()), (Verdict::NoLimit, "Caking: hard cake (3)"));
}

#[test]
fn the_sediment_ratio_is_exact() {
    let mut method = method(Settings::AsStoredSediment, Reportable::EachContainer, "", 2);
    method.replicates = 1;
    let heights = |base: &str, top: &str, fill: &str| {
        [
            reading(1, 1, "base_mm", base),
            reading(1, 1, "bed_top_mm", top),
            reading(1, 1, "fill_line_mm", fill),
            reading(1, 1, "days_undisturbed", "90"),
        ]
    };
    let judged = one(&method, None, &heights("2.0", "60.5", "80.0"));
    assert_eq!((judged.value, judged.shown.as_str()), (Some(d("0.75")), "0.75"));
    let third = one(&method, None, &heights("0", "20", "60"));
    assert_eq!(third.value.unwrap().round_dp(4), d("0.3333"));
    let upside_down = one(&method, None, &heights("60", "20", "80"));
    assert_eq!(upside_down.verdict, Verdict::NoReportableValue);
    assert!(upside_down.detail["not_read"][0]["why"].as_str().unwrap().contains("do not go up"));
    let missing = one(&method, None, &heights("2.0", "60.5", "80.0")[..2]);
    assert_eq!(missing.detail["not_read"][0]["why"], "the fill line was not read");
}

#[test]
fn f_is_taken_at_the_reporting_minute_and_judged_on_first_volumes_too() {
    let settings = Settings::Sedimentation {
        planned_minutes: vec![30, 60],
        report_at_minute: 60,
        reads: InterfaceRead::FallingBoundary,
        vessel_ml: d("120"),
    };
    let method = method(settings, Reportable::Worst { highest: false }, "", 2);
    let limits = limits(between(Some("0.85"), None), Way::Rounding);
    let mut readings = vec![
        reading(1, 1, "total_ml", "100"),
        reading(1, 1, "sediment_ml@30", "95"),
        reading(1, 1, "sediment_ml@60", "91"),
        reading(2, 1, "total_ml", "98"),
        reading(2, 1, "sediment_ml@60", "87"),
    ];
    let judged = one(&method, Some(&limits), &readings);
    assert_eq!((judged.shown.as_str(), judged.verdict), ("0.89", Verdict::Conforms));
    readings[4] = first(readings[4].clone(), "78");
    let judged = one(&method, Some(&limits), &readings);
    assert_eq!(kinds(&judged), ["first value outside"]);
    assert!(judged.flags[0].sentence.starts_with("bottle 02: first recorded 0.80, below 0.85"));
    readings[2] = reading(1, 1, "sediment_ml@60", "112");
    let judged = one(&method, Some(&limits), &readings);
    assert!(kinds(&judged).contains(&"high sedimentation ratio"));
}

#[test]
fn a_formula_gives_the_single_values() {
    let input = |code: &str| Input {
        code: code.to_string(),
        label: code.to_string(),
        unit: "mg".to_string(),
        decimals: 1,
    };
    let settings = Settings::Numeric {
        inputs: vec![input("found"), input("taken")],
        formula: Some(Formula {
            expression: "found × 100 ÷ taken".to_string(),
            example_inputs: Vec::new(),
            example_result: d("0"),
        }),
        components: Vec::new(),
        has_total: false,
    };
    let method = method(settings, mean_within(Some("2.0"), None), "%", 1);
    let limits = limits(between(Some("95.0"), Some("105.0")), Way::Rounding);
    let readings = [
        reading(0, 1, "found", "98.2"),
        reading(0, 1, "taken", "100.0"),
        reading(0, 2, "found", "99.4"),
        reading(0, 2, "taken", "100.5"),
    ];
    let judged = one(&method, Some(&limits), &readings);
    assert_eq!((judged.shown.as_str(), judged.verdict), ("98.6", Verdict::Conforms));
    let zero = [reading(0, 1, "found", "98.2"), reading(0, 1, "taken", "0")];
    let judged = one(&method, Some(&limits), &zero);
    assert_eq!(judged.verdict, Verdict::NoReportableValue);
    assert!(judged.detail["not_read"][0]["why"].as_str().unwrap().contains("divides by 0"));
}

fn degradation() -> MethodContent {
    let component = |code: &str, title: &str, is_unspecified: bool| Component {
        code: code.to_string(),
        title: title.to_string(),
        is_unspecified,
        reporting_threshold: Some(d("0.05")),
    };
    let settings = Settings::Numeric {
        inputs: Vec::new(),
        formula: None,
        components: vec![
            component("a", "Degradation product A", false),
            component("unspecified", "Unspecified", true),
        ],
        has_total: true,
    };
    method(settings, Reportable::EachContainer, "%", 2)
}

#[test]
fn components_have_a_threshold_limits_of_their_own_and_a_total() {
    let range = |upper: &str| Range { lower: None, upper: Some(d(upper)) };
    let limits = limits(
        Limit::Components(vec![
            ("a".to_string(), range("0.20")),
            ("unspecified".to_string(), range("0.10")),
            ("total".to_string(), range("0.30")),
        ]),
        Way::Rounding,
    );
    let judge =
        |readings: &[ReadingValue]| judge(&degradation(), Some(&limits), LimitSet::ShelfLife, None, readings);
    let shown = |judged: &[Judged]| -> Vec<(String, String, Verdict)> {
        judged.iter().map(|one| (one.component.clone(), one.shown.clone(), one.verdict)).collect()
    };
    let found = judge(&[
        reading(0, 1, "a", "0.184"),
        reading(0, 1, "unspecified@1.20", "0.044"),
        reading(0, 1, "unspecified@0.85", "0.12"),
    ]);
    let expected = [
        ("a", "0.18", Verdict::Conforms),
        ("unspecified@0.85", "0.12", Verdict::OutOfSpecification),
        ("unspecified@1.20", "<0.05", Verdict::Conforms),
        // 0.184 + 0.12 = 0.304, which rounds to 0.30: the unrounded sum is rounded once.
        ("total", "0.30", Verdict::Conforms),
    ];
    let expected: Vec<_> =
        expected.map(|(code, shown, verdict)| (code.to_string(), shown.to_string(), verdict)).to_vec();
    assert_eq!(shown(&found), expected);
    assert_eq!(found[1].flags[0].sentence, "Unspecified, relative retention time 0.85: 0.12 %, above 0.10.");
    let clean = judge(&[reading(0, 1, "a", "<0.05")]);
    assert_eq!(clean[0].shown, "<0.05");
    assert_eq!((clean[1].component.as_str(), clean[1].shown.as_str()), ("total", "<0.05"));
    let unread = judge(&[]);
    assert!(unread.iter().all(|one| one.verdict == Verdict::NoReportableValue));
}

#[test]
fn limits_and_results_read_together() {
    let words = |limit: &Limit| limit::limit_words(limit, Some(&degradation()));
    assert_eq!(words(&between(Some("6.00"), Some("7.50"))), "6.00 to 7.50");
    assert_eq!(words(&between(None, Some("20"))), "at most 20");
    assert_eq!(words(&Limit::None), "no limit");
    let range = Range { lower: None, upper: Some(d("0.20")) };
    assert_eq!(
        words(&Limit::Components(vec![("a".to_string(), range)])),
        "Degradation product A: at most 0.20"
    );
    assert_eq!(limit::result_words("6.83", "pH units", "6.00 to 7.50"), "6.83 (6.00 to 7.50) pH units");
}
