//! Conditions, chambers, studies and their containers and pulls.

use crate::support::{Lab, PASSWORD};

const OWN_CONDITION: [(&str, &str); 8] = [
    ("code", "21/45"),
    ("temperature_c", "21"),
    ("temperature_tolerance_c", "2"),
    ("humidity_percent", "45"),
    ("humidity_tolerance_percent", "5"),
    ("use", "other"),
    ("source", "customer contract 7"),
    ("reason", "the customer ships by unheated van"),
];

/// req_A1: the catalogue is there from the start; a condition outside it needs a reason and QA's signature.
#[test]
fn a_condition_outside_the_catalogue_is_signed_by_qa() {
    let lab = Lab::new();
    let list = lab.manager().sees("/conditions", "ICH Q1A(R2) 2.2.7.1, general case");
    assert_eq!(list.links().iter().filter(|path| path.starts_with("/conditions/")).count(), 9);
    assert_eq!(lab.manager().get("/conditions/new").status, 403);
    let mut wrong = OWN_CONDITION.to_vec();
    wrong.extend([("user_name", "ada.whitlock"), ("password", "not my password at all")]);
    let refused = lab.reviewer().submits("/conditions/new", "/conditions/new", &wrong);
    assert_eq!(refused.status, 409);
    let mut faulty = wrong.clone();
    faulty.retain(|(name, _)| *name != "reason" && *name != "temperature_c");
    let faulty = lab.reviewer().submits("/conditions/new", "/conditions/new", &faulty);
    assert_eq!(faulty.status, 422);
    assert!(faulty.text().contains("Temperature is empty") && faulty.text().contains("Say why"));
    let made = lab.reviewer().signs("/conditions/new", "/conditions/new", &OWN_CONDITION);
    assert!(made.text().contains("outside, signed by QA") && made.text().contains("Ada Whitlock"));
    let again =
        [OWN_CONDITION.to_vec(), vec![("user_name", "ada.whitlock"), ("password", PASSWORD)]].concat();
    let again = lab.reviewer().submits("/conditions/new", "/conditions/new", &again);
    assert_eq!(again.status, 409);
    assert!(again.text().contains("There is a condition 21/45 already"));
}

#[test]
fn a_chamber_keeps_one_condition_and_warns_when_its_qualification_is_overdue() {
    let lab = Lab::new();
    lab.manager().sees("/chambers", "No chamber is listed yet");
    let fields = [
        ("code", "CH-04"),
        ("name", "Walk-in chamber"),
        ("condition", "1"),
        ("location", "cellar"),
        ("qualification_due_on", "1 Dec 2026"),
    ];
    let made = lab.manager().does("/chambers/new", "/chambers/new", &fields);
    assert!(made.text().contains("25 °C/60 % RH") && !made.text().contains("▲"));
    lab.later_days(1);
    lab.manager().sees("/chambers", "▲ overdue");
    let again = lab.manager().submits("/chambers/new", "/chambers/new", &fields);
    assert_eq!(again.status, 409);
    assert!(again.text().contains("There is a chamber CH-04 already"));
}
