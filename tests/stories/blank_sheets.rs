//! Blank sheets for a network failure: given out, returned or voided, transcribed, verified by a second person.

use crate::support::{Lab, Seen, world};

fn given(lab: &Lab) -> String {
    world::lot(lab, "TW-104-0640");
    let rafe = lab.actor("rafe.tolland").account.to_string();
    let fields =
        [("purpose", "pH of the release sample"), ("lot", "TW-104-0640"), ("issued_to", rafe.as_str())];
    lab.manager().does("/blank-sheets/new", "/blank-sheets/new", &fields).location.unwrap()
}

fn records(lab: &Lab, who: &str, path: &str, kind: &str, text: &str) -> Seen {
    lab.person(who).submits(path, &format!("{path}/events"), &[("kind", kind), ("text", text)])
}

#[test]
fn a_sheet_comes_back_is_transcribed_and_a_second_person_verifies_it() {
    let lab = Lab::new();
    let path = given(&lab);
    let seen = lab.analyst().sees(&path, "pH of the release sample: given out.");
    assert!(seen.html().contains("class=\"write\""), "boxes to write in");
    lab.manager().sees("/blank-sheets", "1 of 1 are not accounted for yet.");
    let early = records(&lab, "rafe.tolland", &path, "verified", "compared line by line");
    assert_eq!(early.status, 409);
    assert!(early.text().contains("Sheet 1 is given out. That cannot come next."), "{}", early.text());
    assert_eq!(records(&lab, "rafe.tolland", &path, "returned", "binder 3, page 12").status, 303);
    let where_to = "entered late in sample TW-104-0640-R1";
    assert_eq!(records(&lab, "rafe.tolland", &path, "transcribed", where_to).status, 303);
    let own = records(&lab, "rafe.tolland", &path, "verified", "compared line by line");
    assert_eq!(own.status, 403);
    assert!(own.text().contains("You transcribed sheet 1 yourself."), "{}", own.text());
    let short = records(&lab, "ilse.brandt", &path, "verified", "fine");
    assert_eq!(short.status, 409);
    assert!(short.text().contains("Say in at least ten characters"), "{}", short.text());
    assert_eq!(records(&lab, "ilse.brandt", &path, "verified", "all 12 lines agree").status, 303);
    lab.manager().sees("/blank-sheets", "All 1 are accounted for: verified or voided.");
    lab.auditor().sees("/history", "sheet 1 verified: all 12 lines agree");
}

#[test]
fn a_sheet_without_a_purpose_or_holder_is_not_given_out_and_a_voided_one_says_why() {
    let lab = Lab::new();
    let path = given(&lab);
    let none = lab.manager().submits("/blank-sheets/new", "/blank-sheets/new", &[("lot", "TW-9")]);
    assert_eq!(none.status, 422);
    for words in ["What it is for is empty", "There is no lot TW-9", "Given to: choose one of the listed."] {
        assert!(none.text().contains(words), "{words}: {}", none.text());
    }
    let rafe = lab.actor("rafe.tolland").account.to_string();
    let short = [("purpose", "pH"), ("issued_to", rafe.as_str())];
    let short = lab.manager().submits("/blank-sheets/new", "/blank-sheets/new", &short);
    assert!(
        short.text().contains("Say what the sheet is for in at least ten characters"),
        "{}",
        short.text()
    );
    assert_eq!(records(&lab, "rafe.tolland", &path, "voided", "the network came back at once").status, 303);
    lab.manager().sees(&path, "voided the network came back at once Rafe Tolland");
    let pairs = lab.analyst().get("/me").form("/sign-out");
    assert_eq!(lab.analyst().posts("/blank-sheets/new", &pairs).status, 403);
}
