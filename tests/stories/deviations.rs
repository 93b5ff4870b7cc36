//! Deviations: opened by whoever sees it, worked on, let go on, closed by QA.

use crate::support::{Lab, PASSWORD, Seen, world};

const WHAT: [(&str, &str); 3] = [
    ("title", "Mixer stopped"),
    ("described", "The mixer stopped for ten minutes during hydration of the gum."),
    ("lot", "TW-104-0640"),
];

fn opened(lab: &Lab) -> String {
    world::lot(lab, "TW-104-0640");
    lab.operator().does("/deviations/new", "/deviations/new", &WHAT).location.unwrap()
}

fn line(lab: &Lab, path: &str, kind: &str, text: &str, fields: &[(&str, &str)]) -> Seen {
    let mut all = vec![("kind", kind), ("text", text)];
    all.extend_from_slice(fields);
    lab.manager().submits(path, &format!("{path}/entries"), &all)
}

fn decides(lab: &Lab, who: &str, path: &str, what: &str) -> Seen {
    let fields = [
        ("text", "the hydration time was met after the restart"),
        ("user_name", who),
        ("password", PASSWORD),
    ];
    lab.person(who).submits(path, &format!("{path}/{what}"), &fields)
}

#[test]
fn a_deviation_is_opened_classified_assessed_and_closed_by_qa() {
    let lab = Lab::new();
    let path = opened(&lab);
    let seen = lab.reviewer().sees(&path, "Deviation 1: Mixer stopped");
    assert!(
        seen.text().contains("Before QA can close it: its class, the cause, the assessment of other lots")
    );
    world::lot_for_market(&lab, "TW-104-0639", "UK");
    let refused = |words: &str| {
        let seen = decides(&lab, "ada.whitlock", &path, "closure");
        assert_eq!(seen.status, 409);
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    };
    refused("Deviation 1 is not classified yet.");
    line(&lab, &path, "classified", "the hydration time was met", &[("class", "minor")]);
    refused("No cause is written yet in deviation 1.");
    line(&lab, &path, "cause", "a loose plug of the mixer", &[]);
    refused("Other lots are not assessed yet in deviation 1.");
    line(&lab, &path, "other lot considered", "made in the same week", &[("other_lot", "TW-104-0639")]);
    line(&lab, &path, "other lots assessed", "only this lot was mixing then", &[]);
    refused("“Add this lot to stability?” has no answer yet in deviation 1.");
    line(&lab, &path, "not added to stability", "gum and time were as planned", &[]);
    lab.reviewer().sees(&path, "Nothing is missing: QA can close it.");
    let went_on = decides(&lab, "per.lindqvist", &path, "continuation");
    assert_eq!(went_on.status, 303, "{}", went_on.text());
    lab.operator().sees(&path, "open, work goes on");
    assert_eq!(decides(&lab, "ada.whitlock", &path, "closure").status, 303);
    let closed = lab.auditor().sees(&path, "closed");
    for words in ["Assessed and closed by me", "Work goes on under this deviation", "(lot TW-104-0639)"] {
        assert!(closed.text().contains(words), "{words}: {}", closed.text());
    }
    assert!(!closed.text().contains("does not match"), "{}", closed.text());
    let files = lab.folder.0.join("files");
    let report = lab
        .app
        .db
        .read(|reader| Ok(supernate::store::verify::run(reader, &files, None, &mut |_, _| ())))
        .unwrap();
    assert!(report.findings.is_empty() && report.recomputed == report.signatures, "{report:?}");
    lab.auditor().sees("/deviations", "none is open here");
    lab.auditor().sees("/lots/1", "deviation 1");

    // Sent by hand while the page offers no such form.
    let mut pairs = lab.manager().get("/me").form("/sign-out");
    pairs.push(("submission".to_string(), "5".repeat(64)));
    for (name, value) in [("kind", "cause"), ("text", "it was the fuse after all")] {
        pairs.push((name.to_string(), value.to_string()));
    }
    let late = lab.manager().posts(&format!("{path}/entries"), &pairs);
    assert_eq!(late.status, 409, "{}", late.text());
    assert!(late.text().contains("Deviation 1 is closed. What comes up later opens a new one."));
}

#[test]
fn who_opened_it_does_not_decide_on_it() {
    let lab = Lab::new();
    world::lot(&lab, "TW-104-0640");
    let path = lab.reviewer().does("/deviations/new", "/deviations/new", &WHAT).location.unwrap();
    line(&lab, &path, "classified", "the hydration time was met", &[("class", "major")]);
    let own = decides(&lab, "ada.whitlock", &path, "continuation");
    assert_eq!(own.status, 403);
    assert!(own.text().contains("You opened deviation 1 yourself."), "{}", own.text());
    assert_eq!(decides(&lab, "per.lindqvist", &path, "continuation").status, 303);
    let pairs = lab.operator().get("/me").form("/sign-out");
    assert_eq!(lab.operator().posts(&format!("{path}/closure"), &pairs).status, 403);
}

#[test]
fn every_fault_of_a_deviation_has_its_sentence() {
    let lab = Lab::new();
    let path = opened(&lab);
    let bad = [("lot", "TW-999"), ("material_lot", "ML-9"), ("equipment", "V-9"), ("occurred_on", "soon")];
    let seen = lab.operator().submits("/deviations/new", "/deviations/new", &bad);
    assert_eq!(seen.status, 422);
    let words = [
        "In a few words is empty",
        "where and when is empty",
        "There is no lot TW-999",
        "There is no material lot ML-9",
        "There is no equipment V-9",
        "“soon” is not a date",
    ];
    for words in words {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    let open = |change: &[(&str, &str)]| {
        let mut fields = WHAT.to_vec();
        fields.retain(|(name, _)| !change.iter().any(|(other, _)| other == name));
        fields.extend_from_slice(change);
        lab.operator().submits("/deviations/new", "/deviations/new", &fields)
    };
    assert!(open(&[("described", "it stopped")]).text().contains("Describe what happened in at least 20"));
    assert!(open(&[("occurred_on", "2 Dec 2026")]).text().contains("The day it happened lies ahead."));
    assert!(open(&[("lot", "")]).text().contains("Say what it concerns: a lot, a material lot"));

    let table = [
        ("classified", "the hydration time was met", vec![], "Choose the class: minor, major or critical."),
        ("other lot considered", "made in the same week", vec![], "Name the lot that was considered."),
        (
            "other lot considered",
            "made in the same week",
            vec![("other_lot", "TW-104-0640")],
            "That is the lot of this deviation. Name another one.",
        ),
        ("added to stability", "on a study from now on", vec![], "Name the study the lot was added to."),
        ("cause", "a plug", vec![], "Write at least ten characters; this line is kept."),
    ];
    for (kind, text, fields, words) in table {
        let seen = line(&lab, &path, kind, text, &fields);
        assert_eq!(seen.status, 409, "{words}: {}", seen.text());
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
}

#[test]
fn a_deviation_of_a_material_lot_or_a_vessel_starts_from_their_pages() {
    let lab = Lab::new();
    let material = world::material(&lab, "M-01", "xanthan gum", "suspending agent");
    let lot = world::material_lot(&lab, material, "ML-0042", "25", "2027-12-01");
    let vessel = world::clean_equipment(&lab, "V-03", "mixing vessel");
    let page = format!("/deviations/new?material_lot={lot}&equipment={vessel}");
    let text = "One drum came with a broken seal and stood beside the vessel.";
    let fields = [("title", "Seal of a drum broken"), ("described", text)];
    let seen = lab.operator().does(&page, "/deviations/new", &fields);
    assert!(seen.text().contains("Material lot ML-0042"), "{}", seen.text());
    assert!(seen.text().contains("Equipment V-03"), "{}", seen.text());
    assert!(seen.text().contains("the cause, the assessment of other lots."), "no stability without a lot");
    let path = seen.location.unwrap();
    let stability = [("kind", "not added to stability"), ("text", "there is no lot here")];
    let refused = lab.manager().submits(&path, &format!("{path}/entries"), &stability);
    assert_eq!(refused.status, 422);
}
