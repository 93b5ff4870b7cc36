//! The formulator's rack: development lots side by side, barred from official evaluation.

use supernate::acts;
use supernate::domain::lot::{NewLot, Scale};
use supernate::domain::method::TestKind;
use supernate::domain::sample::{NewSample, Purpose};
use supernate::store;

use crate::settlings::settles;
use crate::support::{Lab, world};

const KINDS: [TestKind; 1] = [TestKind::Sedimentation];

fn laboratory_lot(lab: &Lab, number: &str, scale: Scale) -> i64 {
    let presentation = world::first_presentation(lab);
    let new = NewLot {
        number: number.to_string(),
        presentation,
        formulation_version: lab.app.db.read(store::lot::approved_formulations).unwrap()[0].0,
        made_on: lab.now().date(),
        size: None,
        size_unit: None,
        scale,
        container_closure: "100 mL cylinder bottle".to_string(),
        bulk_lot: None,
    };
    acts::lot::make(&lab.app.db, &lab.actor("maren.oddy"), &new).unwrap()
}

/// A look at a lot: a development sample whose cylinder is read over a day.
fn looks(lab: &Lab, lot: i64, volumes: [&str; 5]) {
    let analyst = lab.actor("rafe.tolland");
    let new = NewSample {
        lot,
        purpose: Purpose::Development,
        containers: 1,
        condition_on_receipt: "as it stood".to_string(),
        handed_over_by: "Tomas Reyle".to_string(),
        received_on: analyst.at.date(),
        tests: vec!["sedimentation".to_string()],
    };
    let sample = acts::sample::receive(&lab.app.db, &analyst, &new).unwrap();
    settles(lab, sample, volumes);
}

#[test]
fn development_lots_stand_side_by_side_and_take_part_in_nothing_official() {
    let lab = Lab::new();
    let formulator = lab.formulator();
    formulator.sees("/rack", "No rack is put up yet");
    let presentation = world::first_presentation(&lab);
    world::approved_specification(&lab, presentation, &KINDS);
    world::qualify(&lab, "rafe.tolland", world::approved_method(&lab, KINDS[0]));
    let (first, second) = (
        laboratory_lot(&lab, "D-0001", Scale::Laboratory),
        laboratory_lot(&lab, "D-0002", Scale::Laboratory),
    );
    let pilot = laboratory_lot(&lab, "P-0001", Scale::Pilot);
    let typed = [("code", "R-1"), ("title", "Two gums"), ("started_on", "1 Dec 2026")];
    let ahead = [("code", "R-1"), ("title", "Two gums"), ("started_on", "2 Dec 2026")];
    let refused = formulator.submits("/rack/new", "/rack/new", &ahead);
    assert!(refused.status == 409 && refused.text().contains("Time zero lies ahead"), "{}", refused.text());
    let empty = formulator.submits("/rack/new", "/rack/new", &[("code", ""), ("title", "")]);
    assert_eq!(empty.status, 422);
    let rack = formulator.does("/rack/new", "/rack/new", &typed);
    assert!(rack.text().contains("No lot stands on it yet"), "{}", rack.text());
    let page = rack.location.unwrap();
    let put = format!("{page}/lots");
    for lot in [first, second] {
        formulator.does(&page, &put, &[("lot", &lot.to_string())]);
    }
    let no_choice = formulator.submits(&page, &put, &[("lot", &pilot.to_string())]);
    assert_eq!(no_choice.status, 422, "a pilot lot is not among the choices");
    let twice = acts::rack::put(&lab.app.db, &lab.actor("tomas.reyle"), 1, first).unwrap_err();
    assert!(twice.to_string().contains("stands on rack R-1 already"), "{twice}");
    looks(&lab, first, ["99.5", "95.0", "88.0", "84.0", "82.0"]);
    looks(&lab, second, ["99.5", "98.0", "97.0", "96.0", "95.0"]);
    let seen = formulator.sees(&page, "D-0002 stands best.");
    let text = seen.text();
    let best = text.find("1. D-0002").expect("the better lot first");
    assert!(text[best..].contains("2. D-0001") && text.contains("needs three looks"), "{text}");
    assert!(seen.html().contains("sedimentation ratio 0.95, clear"), "cylinders are drawn");
    assert!(
        text.contains("nothing here takes part in an official evaluation") || text.contains("Development:")
    );
    lab.auditor().sees("/history", "put a lot on a rack");
    assert_eq!(lab.analyst().get("/rack/new").status, 403);
    // On a study of its own it is named among what was left out, and nothing is computed from it.
    let study = world::study_of(&lab, first, &KINDS);
    let pull = world::pull(&lab, study, 1, "Initial");
    let sample = world::take(&lab, &pull);
    settles(&lab, sample, ["99.5", "95.0", "88.0", "84.0", "82.0"]);
    let official = lab.manager().sees(
        &format!("/evaluations/{}/sedimentation", pull.study_arm),
        "a development lot takes no part in an official evaluation",
    );
    assert!(official.text().contains("Not evaluable: no result takes part"), "{}", official.text());
}
