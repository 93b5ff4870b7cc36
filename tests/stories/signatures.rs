//! A signature belongs to its content: one character of a signed record changed in the file, and the page says so and
//! verification names it (screen_U70, requirement P1).

use supernate::domain::method::TestKind;
use supernate::domain::sample::Purpose;

use crate::support::samples::Bench;
use crate::support::{Lab, world};
use crate::verification::{tampered, verify};

/// What is changed in the file, the page that shows the signature, and the signed record's kind.
type Case<'a> = (&'a str, String, &'a str);

fn each_is_told_and_named(lab: &Lab, cases: &[Case<'_>]) {
    let untouched = verify(&lab.folder.0, None);
    assert_eq!(untouched.findings, []);
    assert_eq!(untouched.recomputed, untouched.signatures, "every signature is computed again");
    for (sql, page, kind) in cases {
        let before = lab.reviewer().get(page);
        assert!(before.status == 200 && before.text().contains("Signed"), "{page}: {}", before.text());
        assert!(!before.text().contains("Signature does not match"), "{page}: {}", before.text());
        let folder = tampered(lab, sql);
        let report = verify(&folder.0, None);
        let named = |finding: &supernate::store::verify::Finding| {
            finding.record.as_ref().is_some_and(|(table, _)| table == kind)
                && finding.sentence.contains("signed is not what stands there")
        };
        assert!(report.findings.iter().any(named), "{sql}: {:?}", report.findings);
        let seen = Lab::over(folder);
        let seen = seen.reviewer().get(page);
        assert_eq!(seen.status, 200, "{page}");
        assert!(seen.text().contains("Signature does not match this content"), "{sql}: {}", seen.text());
    }
}

#[test]
fn a_changed_sample_lot_decision_or_version_breaks_its_signature_on_its_page() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    bench.assigns_shelf_life();
    lab.later_days(2);
    let lot = bench.lot_made_on("TW-104-0640", "2026-12-02".parse().unwrap());
    crate::support::world::record_elsewhere(&lab, lot);
    let other = bench.lot_made_on("TW-104-0641", "2026-12-02".parse().unwrap());
    let sample = bench.ready(lot, Purpose::Release);
    let (qa, page) = (lab.reviewer(), format!("/review/{sample}"));
    qa.does(&page, &format!("{page}/agree"), &[]);
    qa.signs("/review/sign", "/review/sign", &[]);
    qa.signs(&format!("/lots/{lot}/decision"), &format!("/lots/{lot}/release"), &[("is_reviewed", "yes")]);
    let reject = format!("/lots/{other}/reject");
    qa.signs(&reject, &reject, &[("reason", "the bulk tank was left open over night")]);
    each_is_told_and_named(
        &lab,
        &[
            ("update reading set typed = '99.7', value = '99.7' where id = 1", page.clone(), "sample"),
            ("update result set shown = '98.9' where id = 1", page.clone(), "sample"),
            ("update result_check set why = 'x' where id = 1", page, "sample"),
            (
                "update lot_decision set expires_on = '2028-12-30' where decision = 'released'",
                format!("/lots/{lot}/decision"),
                "lot",
            ),
            (
                "update signature set statement = replace(statement, 'tank', 'tanc') where meaning = 'rejection'",
                format!("/lots/{other}/decision"),
                "lot",
            ),
            (
                "update formulation_version set content = replace(content, 'xanthan', 'xanthen') where id = 1",
                "/formulation-versions/1".to_string(),
                "formulation_version",
            ),
            (
                "update method_version set reason = reason || '.' where id = 1",
                "/method-versions/1".to_string(),
                "method_version",
            ),
            (
                "update specification_version set content = replace(content, '97.0', '96.0') where id = 1",
                "/specification-versions/1".to_string(),
                "specification_version",
            ),
        ],
    );
}

#[test]
fn a_changed_protocol_condition_or_conclusion_breaks_its_signature_on_its_page() {
    let lab = Lab::new();
    let investigation = crate::investigations::opened(&lab);
    let otis = lab.actor("otis.vane").account.to_string();
    lab.manager().does(&investigation, &format!("{investigation}/steering"), &[("account", &otis)]);
    let finding = [("kind", "finding"), ("text", "buffer 7.00 was opened nine weeks ago"), ("other_lot", "")];
    lab.analyst().does(&investigation, &format!("{investigation}/entries"), &finding);
    let conclusion = [("conclusion", "The second buffer was stale; the readings do not stand.")];
    lab.reviewer().signs(&investigation, &format!("{investigation}/conclusion"), &conclusion);
    let made = lab.reviewer().signs("/conditions/new", "/conditions/new", &crate::studies::OWN_CONDITION);
    let condition = made.location.clone().unwrap();
    world::study(&lab, "TW-104-0640", &[TestKind::Ph]);
    each_is_told_and_named(
        &lab,
        &[
            (
                "update investigation_entry set text = replace(text, 'nine', 'nina') where kind = 'finding'",
                investigation.clone(),
                "investigation",
            ),
            (
                "update investigation_entry set text = replace(text, 'stale', 'stole') where kind = 'conclusion'",
                investigation,
                "investigation",
            ),
            (
                "update condition set temperature_c = '22' where code = '21/45'",
                condition.clone(),
                "condition",
            ),
            (
                "update trail_act set reason = 'another reason than this' where act = 'AddCondition' and reason is not null",
                condition,
                "condition",
            ),
            (
                "update protocol_version set reason = reason || '.' where id = 1",
                "/protocol-versions/1".to_string(),
                "protocol_version",
            ),
        ],
    );
}
