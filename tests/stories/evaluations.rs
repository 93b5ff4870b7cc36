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
