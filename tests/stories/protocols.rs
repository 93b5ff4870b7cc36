//! Protocols: arms, ages, tests, and the rules before a signature.

use supernate::domain::method::TestKind;
use supernate::domain::protocol::ProtocolContent;
use supernate::domain::version::Versioned;
use supernate::store;

use crate::support::{Lab, Seen, world};

const KINDS: [TestKind; 2] = [TestKind::Redispersibility, TestKind::Ph];

/// The lab manager adds a protocol through the page and answers with the path of its draft.
fn adds(lab: &Lab, programme: &str) -> String {
    let presentation = world::first_presentation(lab);
    let specification = world::approved_specification(lab, presentation, &KINDS);
    let (presentation, specification) = (presentation.to_string(), specification.to_string());
    let fields = [
        ("code", "SP-104"),
        ("title", "Primary stability"),
        ("presentation", presentation.as_str()),
        ("programme", programme),
        ("specification_version", specification.as_str()),
    ];
    let path = lab.manager().does("/protocols/new", "/protocols/new", &fields).location.unwrap();
    assert!(path.starts_with("/protocol-versions/"), "{path}");
    path
}

fn content(lab: &Lab, path: &str) -> ProtocolContent {
    let id = path.rsplit('/').next().unwrap().parse().unwrap();
    let read = |reader: &store::Reader<'_>| store::version::get(reader, Versioned::Protocol, id)?.read();
    lab.app.db.read(read).unwrap()
}

fn changes(lab: &Lab, path: &str, page: &str, fields: &[(&str, &str)]) -> Seen {
    let page = format!("{path}/{page}");
    lab.manager().submits(&page, &page, fields)
}

#[test]
fn a_protocol_starts_from_the_usual_arms_and_is_approved_by_a_second_person() {
    let lab = Lab::new();
    lab.manager().sees("/protocols", "No protocol is written yet");
    let path = adds(&lab, "primary");
    let page = lab.manager().sees(&path, "25 °C/60 % RH, inverted");
    assert!(page.text().contains("contingent: placed at time zero"), "{}", page.text());
    assert!(!page.text().contains("Before it can be signed"), "{}", page.text());
    assert_eq!(content(&lab, &path).arms.len(), 6);
    let sign = format!("{path}/sign");
    lab.manager().signs(&path, &sign, &[]);
    assert!(!lab.manager().get(&path).text().contains("Approve this version"));
    let approved = lab.reviewer().signs(&path, &sign, &[]);
    assert!(approved.text().contains("Primary stability: approved"));
    let frozen = lab.manager().get(&format!("{path}/arms"));
    assert_eq!(frozen.status, 409);
    lab.auditor().sees("/protocols/1", "approved a protocol version");
}

/// Each rule is named on the page and refuses the signature.
#[test]
fn a_protocol_with_a_fault_is_not_signed() {
    let lab = Lab::new();
    let path = adds(&lab, "primary");
    // Arm 2 is the contingent 30/65 upright; both contingent arms go.
    let changed = changes(&lab, &path, "arms", &[("arm.2.condition", ""), ("arm.5.condition", "")]);
    assert_eq!(changed.status, 303, "{}", changed.text());
    let page = lab.manager().sees(&path, "Long-term 25/60 without a contingent 30/65 arm needs a reason");
    let mut fields = page.form(&format!("{path}/sign"));
    fields.retain(|(name, _)| name != "user_name" && name != "password");
    fields.push(("user_name".to_string(), "maren.oddy".to_string()));
    fields.push(("password".to_string(), crate::support::PASSWORD.to_string()));
    let refused = lab.manager().posts(&format!("{path}/sign"), &fields);
    assert_eq!(refused.status, 409);
    assert!(refused.text().contains("needs a reason"));
    let why = [("why_no_intermediate", "the product is sold refrigerated in the warm months")];
    assert_eq!(changes(&lab, &path, "arms", &why).status, 303);
    lab.manager().signs(&path, &format!("{path}/sign"), &[]);
}

#[test]
fn ages_windows_and_kept_containers_are_edited_and_every_fault_is_said_at_once() {
    let lab = Lab::new();
    let path = adds(&lab, "primary");
    let faulty = [("arm.1.ages", "0, three"), ("arm.3.ages", "6, 0"), ("spare", "many")];
    let seen = changes(&lab, &path, "arms", &faulty);
    assert_eq!(seen.status, 422);
    for sentence in ["“three” is not an age", "out of order", "“many” is not a number"] {
        assert!(seen.text().contains(sentence), "{}", seen.text());
    }
    assert!(seen.html().contains("value=\"0, three\""));
    let good = [
        ("arm.1.ages", "0, 3, 6, 9, 12, 18, 24, 36, 48"),
        ("arm.1.before", "2"),
        ("arm.1.after", "5"),
        ("spare", "4"),
    ];
    assert_eq!(changes(&lab, &path, "arms", &good).status, 303);
    let content = content(&lab, &path);
    assert_eq!(content.spare_containers, 4);
    let windows: Vec<_> = content.arms[0].ages.iter().map(|age| age.window).collect();
    assert_eq!((windows[0], windows[8]), (Some((2, 5)), Some((0, 5))));
    assert_eq!(content.arms[0].ages[8].tests.len(), 2);
    lab.manager().sees(&path, "48 months");
}

#[test]
fn the_matrix_says_what_each_test_costs_and_keeps_what_is_ticked() {
    let lab = Lab::new();
    let path = adds(&lab, "primary");
    let page = lab.manager().sees(&format!("{path}/matrix"), "Tick what is done at each age");
    let mut pairs = page.form(&format!("{path}/matrix"));
    assert!(pairs.iter().any(|(name, _)| name == "tick.1.2.2"));
    pairs.retain(|(name, _)| name != "tick.1.2.2");
    assert_eq!(lab.manager().posts(&format!("{path}/matrix"), &pairs).status, 303);
    let after = content(&lab, &path);
    let left = after.arms[0].ages[1].tests.clone();
    assert_eq!(left.len(), 1);
    assert_eq!(after.arms[0].ages[2].tests.len(), 2);
    // Editing the arms keeps the untouched tick.
    assert_eq!(changes(&lab, &path, "arms", &[("retain", "2")]).status, 303);
    assert_eq!(content(&lab, &path).arms[0].ages[1].tests, left);
    // The page was opened before the change above: the old form is stale.
    let stale = lab.manager().posts(&format!("{path}/matrix"), &renewed(&pairs, &page));
    assert_eq!(stale.status, 409, "{}", stale.text());
}

/// The same form sent anew, under another submission key.
fn renewed(pairs: &[(String, String)], page: &Seen) -> Vec<(String, String)> {
    let mut pairs = pairs.to_vec();
    for (name, value) in &mut pairs {
        if name == "submission" {
            *value = format!("{}{}", &value[1..], &value[..1]);
        }
    }
    assert_eq!(page.status, 200);
    pairs
}

#[test]
fn a_routine_protocol_names_the_worst_orientation() {
    let lab = Lab::new();
    let path = adds(&lab, "ongoing");
    lab.manager().sees(&path, "says which was the worst and why");
    let fields = [
        ("worst_orientation", "inverted, because the seal is wetted"),
        ("why_no_intermediate", "the registered storage is 25/60 alone"),
    ];
    assert_eq!(changes(&lab, &path, "arms", &fields).status, 303);
    let page = lab.manager().get(&path);
    assert!(!page.text().contains("Before it can be signed"), "{}", page.text());
    let doubled = lab.manager().submits(
        "/protocols/new",
        "/protocols/new",
        &[
            ("code", "sp-104"),
            ("title", "Again"),
            ("presentation", "1"),
            ("programme", "primary"),
            ("specification_version", "1"),
        ],
    );
    assert_eq!(doubled.status, 409);
    assert!(doubled.text().contains("There is a protocol sp-104 already"));
}
