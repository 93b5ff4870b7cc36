//! A laboratory with something on every list, for the walk over all pages.

use std::path::PathBuf;

use supernate::acts;
use supernate::domain::method::TestKind;
use supernate::domain::sample::Purpose;

use super::support::samples::Bench;
use super::support::{Lab, world};

pub fn data(name: &str) -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/numbers/data/suspensions").join(name)
}

pub const ZNO: &str = "zno_aloe_weloensis_sedimentation.csv";
pub const TACROLIMUS: &str = "tacrolimus_cjhp2017.csv";

/// The filled laboratory, and addresses that no link leads to: pages behind a typed label.
pub struct Filled {
    pub lab: Lab,
    pub behind_a_label: Vec<String>,
}

pub fn filled() -> Filled {
    let lab = Lab::new();
    for name in [ZNO, TACROLIMUS] {
        let bytes = std::fs::read(data(name)).unwrap();
        acts::import::import(&lab.app.db, &lab.actor("maren.oddy"), name, &bytes).unwrap();
    }
    world::instrument(&lab, "PH-03", "pH meter");
    world::instrument(&lab, "V-2", "viscometer");
    let study = world::study(&lab, "TW-104-0617", &[TestKind::Ph, TestKind::Redispersibility]);
    world::take(&lab, &world::pull(&lab, study, 1, "Initial"));
    let lot = world::lot_for_market(&lab, "TW-640", "GB");
    let (sample, tests) = world::release_sample(&lab, lot, &TestKind::ALL);
    let mut behind_a_label: Vec<String> =
        tests.iter().map(|test| format!("/tests/{test}?label=TW-640-R1")).collect();
    behind_a_label.push(format!("/samples/{sample}?label=TW-640-R1"));
    reviewed(&lab);
    Filled { lab, behind_a_label }
}

/// Samples in every state of check and review.
fn reviewed(lab: &Lab) {
    let bench = Bench::new(lab);
    let lot = bench.lot("TW-104-0640");
    bench.ready(lot, Purpose::Release);
    bench.outside(lot, Purpose::Release);
    let corrected = bench.ready(lot, Purpose::RetainCheck);
    bench.corrects("rafe.tolland", corrected, "assay", 1, "100.4");
    let agreed = bench.ready(lot, Purpose::RetainCheck);
    let page = format!("/review/{agreed}");
    lab.reviewer().does(&page, &format!("{page}/agree"), &[]);
    let waiting = bench.receives(lot, Purpose::Complaint, &["assay", "density"]);
    bench.completes("rafe.tolland", waiting, "assay", &["99.6", "100.2"]);
}
