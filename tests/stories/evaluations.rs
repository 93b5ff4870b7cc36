//! What the results of all lots say: the list, one series, and why something is not evaluable.

use supernate::cli::evaluate::{self, Args, ReplicateChoice};

use crate::support::aged::{Aged, DAYS, Series};
use crate::support::{Lab, Scratch};

const THREE: [Series<'static>; 3] = [
    ("TW-104-0640", &["100.1", "99.6", "99.1", "98.4", "97.9"]),
    ("TW-104-0641", &["100.0", "99.5", "98.9", "98.5", "97.8"]),
    ("TW-104-0642", &["100.2", "99.3", "99.1", "98.4", "97.9"]),
];

/// The same results as a file, evaluated by the command.
fn by_command(series: &[Series<'_>]) -> serde_json::Value {
    let start: chrono::DateTime<chrono::Utc> = DAYS[0].1.parse().unwrap();
    let mut text = "lot,test,age_days,value,lower_limit,upper_limit\n".to_string();
    for (number, values) in series {
        for ((_, day), value) in DAYS.iter().zip(*values) {
            let day: chrono::DateTime<chrono::Utc> = day.parse().unwrap();
            text.push_str(&format!("{number},Assay,{},{value},95.0,105.0\n", (day - start).num_days()));
        }
    }
    let folder = Scratch::new();
    let file = folder.0.join("assay.csv");
    std::fs::write(&file, text).unwrap();
    let args = Args { file, json: true, replicates: ReplicateChoice::Mean, expiry_months: None };
    serde_json::from_str(&evaluate::run(&args).unwrap()).unwrap()
}

#[test]
fn a_series_page_says_what_the_lots_support_with_the_digits_of_the_command() {
    let lab = Lab::new();
    let aged = Aged::with_assay(&lab, &THREE);
    let arm = aged.arm("TW-104-0640", 1);
    let page = format!("/evaluations/{arm}/assay");
    let manager = lab.manager();
    let list = manager.sees("/evaluations", "TW-104");
    assert!(list.links().contains(&page), "{:?}", list.links());
    let seen = manager.sees(&page, "one line for all lots: neither slopes");
    let text = seen.text();
    let json = by_command(&THREE);
    let found = &json["series"][0];
    assert_eq!(found["pooling"]["model"], "common_line");
    let months = found["shelf_life"]["months"].as_f64().unwrap();
    let whole = found["shelf_life"]["months_floor"].as_u64().unwrap();
    assert!(text.contains(&format!("{whole} months, exactly {months:.4} months")), "{text}");
    for test in ["slopes", "intercepts"] {
        let p = found["pooling"][test]["p"].as_f64().unwrap();
        let f = found["pooling"][test]["f"].as_f64().unwrap();
        assert!(text.contains(&format!("{f:.4} {p:.4}")), "{test} {f:.4} {p:.4}: {text}");
    }
    for words in [
        "The data support",
        "With 12 months of data on every lot never more than 24 months may be proposed",
        "Can the lots be pooled? Level 0.25",
        "shown, does not decide",
        "dashed: two-sided 95 % confidence limit of the mean",
        "shaded: 95 % prediction band",
        "The 15 numbers behind this chart",
        "one more result stays inside to",
        "15 of the results are not signed by QA yet",
        "never taken from a computation",
    ] {
        assert!(text.contains(words), "{words}: {text}");
    }
}

#[test]
fn what_cannot_be_evaluated_says_what_it_needs_and_what_was_left_out() {
    let lab = Lab::new();
    let aged = Aged::with_assay(&lab, &[("TW-104-0640", &["100.1"])]);
    let arm = aged.arm("TW-104-0640", 1);
    let manager = lab.manager();
    manager.sees("/evaluations", "not evaluable: needs two more ages");
    let page = manager.sees(&format!("/evaluations/{arm}/assay"), "Not evaluable: needs two more ages.");
    assert!(page.text().contains("The number behind this chart"), "{}", page.text());
    lab.clock(DAYS[1].1);
    aged.reads("TW-104-0640", 1, "3 months", "99.6");
    manager.sees("/evaluations", "not evaluable: needs one more age");
    let path = format!("/evaluations/{arm}/assay");
    assert_eq!(manager.get(&format!("{path}?scale=cube")).status, 400);
    assert_eq!(manager.get(&format!("{path}?replicates=some")).status, 400);
    assert_eq!(manager.get(&format!("{path}?wish=more")).status, 400);
    assert_eq!(manager.get(&format!("/evaluations/{arm}/ph")).status, 404);
    assert_eq!(manager.get("/evaluations/999/assay").status, 404);
    assert_eq!(manager.get("/evaluations?presentation=999").status, 404);
    let off = manager.sees(&format!("{path}?scale=logit"), "choose another scale");
    assert!(off.text().contains("Not evaluable"), "{}", off.text());
}

#[test]
fn a_site_without_studies_says_so() {
    let lab = Lab::new();
    lab.manager().sees("/evaluations", "No lot is on study yet");
}

/// What a manager answers about the first condition of the site, with every lot chosen.
const ANSWERS: [(&str, &str); 10] = [
    ("storage", "room"),
    ("accelerated", "none"),
    ("accelerated_why", "the accelerated arm of older lots was unchanged"),
    ("intermediate", "not-tested"),
    ("little_change", ""),
    ("statistics", "yes"),
    ("supporting_data", "yes"),
    ("supporting_why", "three pilot lots followed for 24 months"),
    ("intermediate_why", ""),
    ("little_change_why", ""),
];

/// The address of the page with these answers and lots.
fn asked(arm: i64, lots: &[(i64, &str)], changed: &[(&str, &str)]) -> String {
    let mut fields: Vec<(String, String)> = vec![("arm".to_string(), arm.to_string())];
    for (name, value) in ANSWERS {
        let value = changed.iter().find(|(other, _)| *other == name).map_or(value, |(_, value)| value);
        fields.push((name.to_string(), value.to_string()));
    }
    for (lot, why) in lots {
        match why.is_empty() {
            true => fields.push((format!("lot.{lot}"), "yes".to_string())),
            false => fields.push((format!("why.{lot}"), why.to_string())),
        }
    }
    format!("/conclusions/new?{}", crate::support::form_body(&fields))
}

fn lots_of(lab: &Lab) -> Vec<i64> {
    let mut lots: Vec<i64> = lab
        .app
        .db
        .read(|reader| supernate::store::lot::before(reader, None, 9))
        .unwrap()
        .iter()
        .map(|lot| lot.id)
        .collect();
    lots.sort_unstable();
    lots
}

#[test]
fn req_e2_a_conclusion_is_signed_with_its_answers_and_knows_whether_its_inputs_still_stand() {
    let lab = Lab::new();
    let aged = Aged::with_assay(&lab, &THREE);
    let arm = aged.arm("TW-104-0640", 1);
    let manager = lab.manager();
    let first = format!("/conclusions/new?arm={arm}");
    assert!(manager.get("/evaluations").links().contains(&first));
    manager.sees(&first, "accelerated: no result yet.");
    let every: Vec<(i64, &str)> = lots_of(&lab).into_iter().map(|lot| (lot, "")).collect();
    let page = asked(arm, &every, &[]);
    manager.sees(&page, "30 results of the chosen lots are not signed by QA yet");
    aged.signs_all();
    let seen = manager.sees(&page, "So at most twice X, and not more than X + 12: 24 months.");
    for words in [
        "Accelerated: no significant change over six months.",
        "X, the long-term data that every chosen lot has: 12 months.",
        "At most 24 months may be proposed. The cap of the tree binds: 24 months.",
    ] {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    let sign = |fields: &[(&str, &str)]| {
        let mut all = fields.to_vec();
        all.extend([("user_name", "maren.oddy"), ("password", crate::support::PASSWORD)]);
        manager.submits(&page, "/conclusions/new", &all)
    };
    let long = sign(&[("months", "25"), ("physical_why", "two older lots stand at 36 months")]);
    assert_eq!(long.status, 409, "{}", long.text());
    let text = long.text();
    assert!(
        text.contains("25 months are more than may be proposed: at most 24. The cap of the tree binds"),
        "{text}"
    );
    let bare = sign(&[("months", "24")]);
    assert!(
        bare.status == 409 && bare.text().contains("reach beyond the 12 months of data"),
        "{}",
        bare.text()
    );
    assert_eq!(sign(&[("months", "many")]).status, 422);
    let done = sign(&[("months", "24"), ("physical_why", "two older lots stand at 36 months")]);
    assert_eq!(done.status, 303, "{}", done.text());
    let to = done.location.unwrap();
    let signed = manager.sees(&to, "Concluded by me from the recorded findings");
    let text = signed.text();
    for words in [
        "24 months proposed for TW TW-104",
        "are those that were signed; computed again they give the same numbers",
        "three pilot lots followed for 24 months",
        "leaf N2 of the tree",
        "never taken from a computation",
    ] {
        assert!(text.contains(words), "{words}: {text}");
    }
    let report = crate::verification::verify(&lab.folder.0, None);
    assert!(report.holds(), "{:?}", report.findings);
    lab.auditor().sees("/evaluations", "The cap of the tree binds: 24 months.");
    lab.clock("2028-06-01T09:00:00Z");
    aged.reads("TW-104-0640", 1, "18 months", "97.0");
    let changed = manager.sees(&to, "The records have changed since");
    assert!(changed.text().contains("Assay: 1 results have come since"), "{}", changed.text());
}

#[test]
fn a_conclusion_is_refused_with_the_reason_that_stands_in_the_way() {
    let lab = Lab::new();
    let aged = Aged::with_assay(&lab, &THREE);
    aged.signs_all();
    let arm = aged.arm("TW-104-0640", 1);
    let manager = lab.manager();
    let lots = lots_of(&lab);
    let every: Vec<(i64, &str)> = lots.iter().map(|lot| (*lot, "")).collect();
    let none: Vec<(i64, &str)> =
        lots.iter().map(|lot| (*lot, "the filling line stood still that day")).collect();
    let short = [(lots[0], ""), (lots[1], ""), (lots[2], "bad")];
    for (page, words) in [
        (asked(arm, &none, &[]), "No lot is chosen"),
        (asked(arm, &short, &[]), "Lot TW-104-0642 is left out without a reason"),
        (asked(arm, &every, &[("little_change", "yes")]), "is your judgement: say what you saw"),
        (asked(arm, &every, &[("supporting_data", "")]), "without supporting data nothing beyond"),
        (asked(arm, &every, &[("supporting_why", "yes")]), "Name the supporting data"),
        (asked(arm, &every, &[("storage", "")]), "have no answer yet"),
        (
            asked(arm, &every, &[("accelerated", "after-3-months")]),
            "asks for the intermediate condition: answer what it shows",
        ),
    ] {
        let seen = manager.sees(&page, words);
        assert!(!seen.html().contains("Sign this conclusion"), "{words}");
    }
    let other = aged.arm("TW-104-0640", 3);
    manager.sees(&asked(other, &every, &[]), "A shelf life rests on long-term data");
    let two = [(lots[0], ""), (lots[1], ""), (lots[2], "its cap was of another maker")];
    manager.sees(&asked(arm, &two, &[]), "At most 24 months may be proposed");
    assert_eq!(manager.get("/conclusions/new?arm=1&wish=more").status, 400);
    assert_eq!(manager.get("/conclusions/new").status, 404);
    assert_eq!(manager.get("/conclusions/9").status, 404);
    assert_eq!(lab.analyst().get(&asked(arm, &every, &[])).status, 403);
}

/// A second version of the bench's formulation, and a lot made to it.
fn lot_of_second_version(lab: &Lab, number: &str) -> i64 {
    use supernate::acts;
    use supernate::domain::lot::{NewLot, Scale};
    use supernate::domain::version::Versioned;
    use supernate::store;
    let db = &lab.app.db;
    let known = db.read(store::lot::approved_formulations).unwrap();
    let version = if known.len() > 1 {
        known.iter().map(|(id, _)| *id).max().unwrap()
    } else {
        let first =
            db.read(|reader| store::version::get(reader, Versioned::Formulation, known[0].0)).unwrap();
        let mut content: supernate::domain::formulation::FormulationContent =
            serde_json::from_str(&first.content).unwrap();
        content.ingredients[1].quantity = "0.55".parse().unwrap();
        let author = lab.actor("tomas.reyle");
        let id = acts::formulation::draft(db, &author, first.parent, "more gum against settling", &content)
            .unwrap();
        crate::support::world::approve(lab, Versioned::Formulation, id, "tomas.reyle", "ada.whitlock");
        id
    };
    let lot = db.read(|reader| store::lot::before(reader, None, 1)).unwrap().remove(0);
    let new = NewLot {
        number: number.to_string(),
        presentation: lot.presentation,
        formulation_version: version,
        made_on: lot.made_on.unwrap(),
        size: None,
        size_unit: None,
        scale: Scale::Production,
        container_closure: "PET bottle, PP cap".to_string(),
        bulk_lot: None,
    };
    acts::lot::make(db, &lab.actor("bea.skelton"), &new).unwrap()
}

#[test]
fn a_formulation_version_is_compared_with_another_on_stability() {
    let lab = Lab::new();
    let mut aged = Aged::new(&lab, &["TW-104-0640", "TW-104-0641"]);
    for number in ["TW-104-0701", "TW-104-0702"] {
        let lot = lot_of_second_version(&lab, number);
        aged.studies.push((number.to_string(), crate::support::world::study_of(&lab, lot, &[])));
    }
    let arm = aged.arm("TW-104-0640", 1);
    let rows: [Series<'_>; 4] = [
        ("TW-104-0640", &["100.1", "99.6", "99.1", "98.4"]),
        ("TW-104-0641", &["100.0", "99.5", "98.9", "98.5"]),
        ("TW-104-0701", &["100.0", "99.9", "99.8", "99.9"]),
        ("TW-104-0702", &["100.2", "100.1", "99.9", "99.9"]),
    ];
    for (place, (age, day)) in DAYS.iter().enumerate().take(4) {
        lab.clock(day);
        for (number, values) in rows {
            aged.reads(number, 1, age, values[place]);
        }
    }
    let page = format!("/evaluations/{arm}/assay");
    let formulator = lab.formulator();
    let one = formulator.sees(&page, "lots of several formulation versions stand together");
    let path = format!("{page}/versions");
    assert!(one.links().contains(&path), "{:?}", one.links());
    let seen = formulator.sees(&path, "F-1 version 2 against F-1 version 1. They change at another rate");
    for words in
        ["Rate of change per month", "Level at time zero", "Each version by itself", "95 % confidence"]
    {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    assert_eq!(formulator.get(&format!("{path}?one=99")).status, 404);
    let alone = formulator.sees(&format!("{page}?version=1"), "The data support");
    assert!(alone.text().contains("made to F-1 version 2"), "what is left out is named: {}", alone.text());
    formulator.sees("/evaluations/1/density/versions", "F-1 version 2 against F-1 version 1");
}

/// Decision B17: imported results are charted and computed, and no signed conclusion rests on them.
#[test]
fn imported_results_are_computed_and_barred_from_a_conclusion() {
    let lab = Lab::new();
    let manager = lab.manager();
    crate::imports::imports(&manager, "zno.csv", &crate::imports::zno());
    let list = manager.sees("/evaluations", "imported, not observed here");
    let page = list.links().into_iter().find(|link| link.starts_with("/evaluations/")).expect("a series");
    let seen = manager.sees(&page, "no signed conclusion can rest on them");
    assert!(seen.text().contains("Ring with a dot: imported"), "{}", seen.text());
    assert!(!list.html().contains("/conclusions/new"), "nothing to conclude is offered");
    let arm: i64 = page.split('/').nth(2).unwrap().parse().unwrap();
    let lots = lots_of(&lab);
    let every: Vec<(i64, &str)> = lots.iter().map(|lot| (*lot, "")).collect();
    let barred = manager.sees(&asked(arm, &every, &[]), "These results were imported, not observed here.");
    assert!(!barred.html().contains("Sign this conclusion"));
}
