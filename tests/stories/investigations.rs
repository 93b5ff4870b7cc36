//! Investigations: opened by a result out of specification, concluded by signature.

use supernate::domain::method::TestKind;
use supernate::store;

use crate::benches::{page, records};
use crate::support::{Lab, PASSWORD, world};

pub fn opened(lab: &Lab) -> String {
    world::instrument(lab, "PH-03", "pH meter");
    let lot = world::lot_for_market(lab, "TW-640", "GB");
    world::lot_for_market(lab, "TW-641", "GB");
    let (_, tests) = world::release_sample(lab, lot, &[TestKind::Ph]);
    let page = page(tests[0], "TW-640-R1");
    let outside = [
        ("reading.0.1.value", "7.83"),
        ("reading.0.1.temperature_c", "22.0"),
        ("reading.0.2.value", "7.81"),
        ("reading.0.2.temperature_c", "22.1"),
        ("then", "complete"),
    ];
    assert_eq!(records(&lab.analyst(), &page, &outside).status, 303);
    "/investigations/1".to_string()
}

#[test]
fn an_investigation_is_a_working_record_and_is_concluded_by_signature() {
    let lab = Lab::new();
    let path = opened(&lab);
    lab.manager().sees("/investigations", "7.82 pH units, above 7.20");
    let (manager, qa) = (lab.manager(), lab.reviewer());
    let steering = format!("{path}/steering");
    let otis = lab.actor("otis.vane").account.to_string();
    manager.does(&path, &steering, &[("account", &otis)]);
    let ends = format!("{path}/conclusion");
    let conclusion = [
        ("conclusion", "The second buffer was stale; the readings do not stand."),
        ("user_name", "ada.whitlock"),
        ("password", PASSWORD),
    ];
    let early = qa.submits(&path, &ends, &conclusion);
    assert_eq!(early.status, 409);
    assert!(early.text().contains("No finding is recorded yet"), "{}", early.text());

    let entries = format!("{path}/entries");
    let finding = [("kind", "finding"), ("text", "buffer 7.00 was opened nine weeks ago"), ("other_lot", "")];
    lab.analyst().does(&path, &entries, &finding);
    let none = manager.submits(&path, &entries, &[("kind", "other lot considered"), ("text", "same meter")]);
    assert_eq!(none.status, 409);
    let own = [("kind", "other lot considered"), ("text", "same meter"), ("other_lot", "TW-640")];
    assert_eq!(manager.submits(&path, &entries, &own).status, 409);
    let other = [("kind", "other lot considered"), ("text", "same meter"), ("other_lot", "TW-641")];
    manager.does(&path, &entries, &other);

    assert!(!manager.get(&path).html().contains("Sign the conclusion"));
    let wrong = qa.submits(&path, &ends, &[conclusion[0], conclusion[1], ("password", "not the one at all")]);
    assert_eq!(wrong.status, 409);
    assert!(wrong.html().contains("The second buffer was stale"), "what was typed stays");
    let seen = qa.signs(&path, &ends, &[conclusion[0]]);
    assert!(seen.text().contains("Concluded by me from the recorded findings"), "{}", seen.text());
    assert!(!seen.text().contains("does not match"), "{}", seen.text());
    assert!(!seen.html().contains(&format!("action=\"{entries}\"")));
    let late = lab.app.db.read(|reader| store::investigation::get(reader, 1)).unwrap();
    assert!(late.is_concluded && late.clock_due_on.is_none());
}
