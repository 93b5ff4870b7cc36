//! Amending a running study: a newer protocol version for the pulls that are still to be taken.

use supernate::acts;
use supernate::acts::version::Written;
use supernate::domain::age::Age;
use supernate::domain::method::TestKind;
use supernate::domain::protocol::{PlannedAge, ProtocolContent};
use supernate::domain::version::Versioned;
use supernate::store;

use crate::support::{Lab, world};

const KINDS: [TestKind; 2] = [TestKind::Redispersibility, TestKind::Ph];

/// The next version of a protocol version, changed by the closure; a draft.
fn next_version(lab: &Lab, of: i64, change: impl FnOnce(&mut ProtocolContent)) -> i64 {
    let db = &lab.app.db;
    let before = db.read(|reader| store::version::get(reader, Versioned::Protocol, of)).unwrap();
    let mut content: ProtocolContent = before.read().unwrap();
    change(&mut content);
    let written = Written {
        reason: "ages agreed with the customer".to_string(),
        content: acts::protocol::written(&content).unwrap(),
    };
    let author = lab.actor("maren.oddy");
    acts::version::draft(db, &author, Versioned::Protocol, before.parent, &written).unwrap()
}

fn approve(lab: &Lab, version: i64) {
    world::approve(lab, Versioned::Protocol, version, "maren.oddy", "ada.whitlock");
}

/// What the file holds of one pull: its row, its sample, its tests.
fn bytes_of(lab: &Lab, pull: i64) -> String {
    let file = lab.folder.0.join("supernate.sqlite");
    let connection = rusqlite::Connection::open(file).unwrap();
    let sql = "select group_concat(quote(p.id) || quote(p.uuid) || quote(p.due_on) || quote(p.earliest_on)
            || quote(p.latest_on) || quote(p.containers_needed) || quote(s.number)
            || quote(s.specification_version) || quote(t.test) || quote(t.method_version) || quote(t.act))
        from pull p join sample s on s.pull = p.id join sample_test t on t.sample = s.id where p.id = ?1";
    connection.query_row(sql, [pull], |row| row.get(0)).unwrap()
}

/// The first arm: no 9 months, pH no more at 6, a wider window at 12, one more age at 30.
fn changes(content: &mut ProtocolContent) {
    let arm = &mut content.arms[0];
    arm.ages.retain(|planned| planned.age != Age::Months(9));
    for planned in &mut arm.ages {
        match planned.age {
            Age::Months(0) | Age::Months(6) => planned.tests.retain(|test| test != "ph"),
            Age::Months(12) => planned.window = Some((2, 9)),
            _ => {}
        }
    }
    let tests = vec!["ph".to_string()];
    let at = arm.ages.iter().position(|planned| planned.age == Age::Months(36)).unwrap();
    arm.ages.insert(at, PlannedAge { age: Age::Months(30), tests, window: None });
}

/// Decision A12, screens 15f: only pulls not yet taken change, and the page lists each row before.
#[test]
fn an_amendment_changes_the_pulls_to_come_and_leaves_taken_ones_byte_equal() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    let taken = world::pull(&lab, study, 1, "Initial");
    world::take(&lab, &taken);
    let before = bytes_of(&lab, taken.id);
    let (page, amend) = (format!("/studies/{study}"), format!("/studies/{study}/amend"));
    assert_eq!(lab.manager().get(&amend).status, 404, "there is no newer version yet");
    let version = next_version(&lab, 1, changes);
    assert_eq!(lab.manager().get(&amend).status, 404, "a draft is not applied");
    approve(&lab, version);
    let offered = lab.manager().sees(&page, "Amend to the newer protocol version");
    assert!(offered.links().contains(&amend));
    assert!(!lab.analyst().get(&page).links().contains(&amend));
    assert_eq!(lab.analyst().get(&amend).status, 403);
    let rows = lab.manager().sees(&amend, "From version 1 of its protocol to version 2: 4 rows change.");
    for words in ["left out", "window 1–8 Dec 2027", "window 29 Nov–10 Dec 2027", "not in the plan"] {
        assert!(rows.text().contains(words), "{words}: {}", rows.text());
    }
    assert_eq!(lab.manager().submits(&amend, &amend, &[("reason", "short")]).status, 422);
    let seen = lab.manager().does(&amend, &amend, &[("reason", "the customer asked for 30 months")]);
    assert!(seen.text().contains("SP-104 version 2") && seen.text().contains("Maren Oddy"));
    assert!(seen.text().contains("the customer asked for 30 months"));
    assert_eq!(bytes_of(&lab, taken.id), before);
    let pulls = lab.app.db.read(|reader| store::amendment::standing(reader, study)).unwrap();
    let at = |age: &str| pulls.iter().find(|pull| pull.arm_position == 1 && pull.age_text == age).unwrap();
    assert_eq!(at("6 months").tests.len(), 1);
    assert_eq!(at("12 months").window.unwrap().words(), "29 Nov–10 Dec 2027");
    assert!(at("30 months").is_open && !at("9 months").is_open && !at("Initial").is_open);
    assert_eq!(at("Initial").tests.len(), 2, "a taken pull keeps its tests");

    assert_eq!(lab.manager().get(&amend).status, 404, "the study follows the newest version now");
    lab.auditor().sees(&page, "amended a study");
}

/// An arm that the study does not have needs a study of its own; a pull taken meanwhile asks for another look.
#[test]
fn an_amendment_is_refused_for_other_arms_and_for_rows_that_changed() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    let amend = format!("/studies/{study}/amend");
    let version = next_version(&lab, 1, changes);
    approve(&lab, version);
    let mut fields = lab.manager().get(&amend).form(&amend);
    fields.retain(|(name, _)| name != "reason");
    fields.push(("reason".to_string(), "the customer asked for 30 months".to_string()));
    let pull = world::pull(&lab, study, 1, "Initial");
    world::take(&lab, &pull);
    let late = lab.manager().posts(&amend, &fields);
    assert_eq!(late.status, 409);
    assert!(late.text().contains("The rows changed since this page was opened"), "{}", late.text());
    let other = next_version(&lab, version, |content| {
        content.arms.retain(|arm| !arm.is_contingent);
        content.why_no_intermediate = Some("no significant change is expected".to_string());
    });
    approve(&lab, other);
    let refused = lab.manager().submits(&amend, &amend, &[("reason", "fewer arms are enough for us")]);
    assert_eq!(refused.status, 409);
    assert!(refused.text().contains("The new version has other arms than the study"), "{}", refused.text());
}

/// An amended study verifies, its lot file holds both plans, and a pull leads to the one planned in its place.
#[test]
fn an_amended_study_verifies_and_stands_in_the_lot_file() {
    let lab = Lab::new();
    let study = world::study(&lab, "TW-104-0640", &KINDS);
    let old = world::pull(&lab, study, 1, "12 months");
    let amend = format!("/studies/{study}/amend");
    approve(&lab, next_version(&lab, 1, changes));
    lab.manager().does(&amend, &amend, &[("reason", "the customer asked for 30 months")]);
    let (new, number) =
        lab.app.db.read(|reader| store::amendment::successor(reader, old.id)).unwrap().expect("a successor");
    let page = lab.analyst().sees(&format!("/pulls/{}", old.id), &format!("planned {number} in its place"));
    assert!(page.links().contains(&format!("/pulls/{new}")), "{:?}", page.links());
    lab.analyst().sees(&format!("/pulls/{new}"), &format!("in place of {}", old.number));

    assert_eq!(super::verification::verify(&lab.folder.0, None).findings, []);
    let lot = lab.app.db.read(|reader| store::study::get(reader, study)).unwrap().lot;
    let file = lab.auditor().sees(&format!("/lots/{lot}/file"), "the customer asked for 30 months");
    for words in [old.number.as_str(), number.as_str(), "Systems", "SQLite 3."] {
        assert!(file.text().contains(words), "{words}");
    }
    let made = acts::lot_file::make(&lab.app.db, &lab.actor("ines.caro"), lot, &lab.folder.0, false).unwrap();
    let archive = lab.folder.0.join("lot.zip");
    std::fs::write(&archive, &made.bytes).unwrap();
    let checked = acts::lot_file::check(&archive, Some(&made.digest)).unwrap();
    assert!(checked.files > 10 && checked.findings.is_empty(), "{checked:?}");
}
