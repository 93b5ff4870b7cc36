//! How a lot settles, flows and pours: its cylinders over its ages, curves, and bounds for the patient.

use supernate::domain::method::TestKind;
use supernate::store;

use crate::benches::{page, records};
use crate::support::{Lab, world};

const KINDS: [TestKind; 1] = [TestKind::Sedimentation];

/// The planned minutes after shaking, and the volume in a cylinder of 100 mL at each.
const MINUTES: [i64; 5] = [10, 30, 60, 120, 1440];
const FALL: [&str; 5] = ["99.5", "95.0", "88.0", "74.0", "60.0"];

/// Fills every cylinder of a sample's sedimentation test with 100 mL, reads it over a day and completes the test.
pub fn settles(lab: &Lab, sample: i64, volumes: [&str; 5]) {
    let analyst = lab.analyst();
    let sample = lab.app.db.read(|reader| store::bench::sample(reader, sample)).unwrap();
    let test = sample.tests.iter().find(|test| test.test == "sedimentation").unwrap();
    let label = sample.containers.first().map_or(sample.number.clone(), |first| first.label.clone());
    let slots = sample.slots(test);
    let totals: Vec<_> = slots.iter().filter(|slot| slot.key.field == "total_ml").collect();
    let page = page(test.id, &label);
    for (number, _) in (1..).zip(&totals) {
        let here = format!("{page}&cylinder={number}");
        analyst.does(&here, &format!("/tests/{}/cylinders", test.id), &[("total_ml", "100.0")]);
    }
    let mut passed = 0;
    for (minute, ml) in MINUTES.iter().zip(volumes) {
        lab.later_minutes(minute - passed);
        passed = *minute;
        for (number, total) in (1..).zip(&totals) {
            let name = |field: &str| total.key.name().replace("total_ml", &format!("{field}@{minute}"));
            let (volume, clarity) = (name("sediment_ml"), name("clarity"));
            let here = format!("{page}&cylinder={number}");
            let seen = records(&analyst, &here, &[(&volume, ml), (&clarity, "0")]);
            assert_eq!(seen.status, 303, "{minute}: {}", seen.text());
        }
    }
    let done = analyst.submits(&page, &format!("/tests/{}", test.id), &[("then", "complete")]);
    assert_eq!(done.status, 303, "{}", done.text());
}

#[test]
fn a_lot_shows_its_cylinders_curves_and_what_is_poured() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    world::qualify(&lab, "rafe.tolland", world::approved_method(&lab, KINDS[0]));
    let lot = lab.app.db.read(|reader| store::study::get(reader, study)).unwrap().lot;
    let analyst = lab.analyst();
    analyst.sees(&format!("/lots/{lot}/settling"), "Nothing of its settling was read on a study yet");
    let sample = world::take(&lab, &world::pull(&lab, study, 1, "Initial"));
    settles(&lab, sample, FALL);
    let seen = analyst.sees(&format!("/lots/{lot}/settling"), "How TW-104-0640 settles");
    let text = seen.text();
    for words in [
        "F 0.60",
        "Settling after shaking",
        "10 min",
        "% of the height an hour",
        "by 1 day",
        "Sediment volume after shaking, 25 °C/60 % RH",
        "The 6 numbers behind this chart",
    ] {
        assert!(text.contains(words) || text.contains(&words.replace(' ', "\u{a0}")), "{words}: {text}");
    }
    let lot_page = analyst.sees(&format!("/lots/{lot}"), "Cylinders over its ages");
    assert!(lot_page.html().contains("Initial: sedimentation ratio 0.60, clear"), "{}", lot_page.text());
    lab.manager().sees(&format!("/lots/{lot}/file"), "Cylinders over the ages");
    assert_eq!(analyst.get("/lots/999/settling").status, 404);
}
