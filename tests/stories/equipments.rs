//! Equipment: clean, checked, calibrated, in service, or not used.

use supernate::acts;
use supernate::domain::act::Act;
use supernate::domain::failure::Failure;
use supernate::domain::reason::Reason;

use crate::support::{Lab, world};

fn vessel(lab: &Lab, fields: &[(&str, &str)]) -> String {
    let mut all = vec![
        ("code", "V-03"),
        ("name", "mixing vessel, 500 L"),
        ("class", "mixing vessel"),
        ("location", "room 4"),
        ("clean_hold_days", "7"),
        ("campaign_days", "0"),
    ];
    all.retain(|(name, _)| !fields.iter().any(|(other, _)| other == name));
    all.extend_from_slice(fields);
    lab.manager().does("/equipment/new", "/equipment/new", &all).location.unwrap()
}

fn event(lab: &Lab, who: &str, path: &str, slug: &str, fields: &[(&str, &str)]) -> crate::support::Seen {
    let page = format!("{path}/{slug}");
    lab.person(who).submits(&page, &page, fields)
}

/// What a step would be told.
fn used(lab: &Lab, path: &str, lot: i64) -> Result<(), String> {
    let id: i64 = path.rsplit('/').next().unwrap().parse().unwrap();
    let done =
        lab.app.db.change(&lab.actor("bea.skelton"), Act::RecordEquipmentEvent, &Reason::none(), |change| {
            acts::equipment::use_inside(change, id, lot)
        });
    match done {
        Ok(()) => Ok(()),
        Err(Failure::Refused(refusal)) => Err(refusal.sentence),
        Err(other) => panic!("{other}"),
    }
}

#[test]
fn a_vessel_is_cleaned_checked_used_and_dirty_until_it_is_cleaned_again() {
    let lab = Lab::new();
    let path = vessel(&lab, &[("needs_clean_check", "yes")]);
    let (first, second) =
        (world::lot_for_market(&lab, "TW-104-0640", "UK"), world::lot_for_market(&lab, "TW-104-0641", "UK"));
    let never = used(&lab, &path, first).unwrap_err();
    assert!(never.starts_with("V-03 has no cleaning on record."), "{never}");
    lab.auditor().sees("/history", "V-03 has no cleaning on record.");

    assert_eq!(event(&lab, "bea.skelton", &path, "cleaned", &[("note", "agent 3, hot")]).status, 303);
    let unchecked = used(&lab, &path, first).unwrap_err();
    assert!(unchecked.starts_with("V-03 was cleaned and nobody has checked it."), "{unchecked}");
    let own = event(&lab, "bea.skelton", &path, "checked-clean", &[]);
    assert_eq!(own.status, 403);
    assert!(own.text().contains("You cleaned V-03 yourself. A second person checks it."), "{}", own.text());
    assert_eq!(event(&lab, "maren.oddy", &path, "checked-clean", &[("note", "dry, no residue")]).status, 303);
    let twice = event(&lab, "otis.vane", &path, "checked-clean", &[]);
    assert!(twice.text().contains("There is no unchecked cleaning of V-03 to check."), "{}", twice.text());
    lab.operator().sees(&path, "clean until 8 Dec 2026");

    assert_eq!(used(&lab, &path, first), Ok(()));
    assert_eq!(used(&lab, &path, first), Ok(()), "the same lot goes on");
    let dirty = used(&lab, &path, second).unwrap_err();
    assert!(dirty.starts_with("V-03 is dirty since its use in TW-104-0640 on 1 Dec 2026."), "{dirty}");
    lab.operator().sees("/equipment", "dirty since its use in TW-104-0640 on 1 Dec 2026");
    let page = event(&lab, "bea.skelton", &path, "used", &[("lot", "TW-104-0641")]);
    assert_eq!(page.status, 409);
    assert!(page.text().contains("V-03 is dirty since its use in TW-104-0640"), "{}", page.text());

    event(&lab, "bea.skelton", &path, "cleaned", &[]);
    event(&lab, "maren.oddy", &path, "checked-clean", &[]);
    lab.later_days(8);
    let held = used(&lab, &path, second).unwrap_err();
    assert!(held.starts_with("V-03 was cleaned on 1 Dec 2026 and stays clean for 7 days unused."), "{held}");
}

#[test]
fn a_campaign_lets_lots_of_one_product_follow_and_calibration_and_service_stop() {
    let lab = Lab::new();
    let path =
        vessel(&lab, &[("campaign_days", "3"), ("needs_calibration", "yes"), ("needs_clean_check", "")]);
    let first = world::lot(&lab, "TW-104-0640");
    let (second, other) = (world::lot(&lab, "TW-104-0641"), world::lot_for_market(&lab, "TW-330-0001", "UK"));
    event(&lab, "bea.skelton", &path, "cleaned", &[]);
    let none = used(&lab, &path, first).unwrap_err();
    assert!(none.starts_with("V-03 has no calibration on record."), "{none}");
    let short = event(&lab, "maren.oddy", &path, "calibrated", &[("due_on", "1 Dec 2026")]);
    assert!(short.text().contains("Say until when the calibration holds"), "{}", short.text());
    assert_eq!(event(&lab, "maren.oddy", &path, "calibrated", &[("due_on", "3 Dec 2026")]).status, 303);
    assert_eq!(used(&lab, &path, first), Ok(()));
    lab.later_days(1);
    assert_eq!(used(&lab, &path, second), Ok(()), "the same product within the campaign");
    assert!(used(&lab, &path, other).unwrap_err().starts_with("V-03 is dirty since its use in TW-104-0641"));
    lab.later_days(2);
    let ended = used(&lab, &path, second).unwrap_err();
    assert!(ended.starts_with("The calibration of V-03 ended on 3 Dec 2026."), "{ended}");
    let why = event(&lab, "bea.skelton", &path, "out-of-service", &[("note", "leaks")]);
    assert!(why.text().contains("Say why, in at least ten characters."), "{}", why.text());
    event(&lab, "bea.skelton", &path, "out-of-service", &[("note", "seal of the shaft leaks")]);
    let out = used(&lab, &path, second).unwrap_err();
    assert!(out.starts_with("V-03 is out of service since 4 Dec 2026."), "{out}");
    lab.operator().sees(&path, "out of service since 4 Dec 2026");
}

#[test]
fn faulty_events_and_taken_codes_come_back_with_their_sentences() {
    let lab = Lab::new();
    let path = vessel(&lab, &[]);
    let taken = [
        ("code", "v-03"),
        ("name", "another"),
        ("class", "sieve"),
        ("location", "room 1"),
        ("clean_hold_days", "7"),
        ("campaign_days", "0"),
    ];
    let seen = lab.manager().submits("/equipment/new", "/equipment/new", &taken);
    assert_eq!(seen.status, 409);
    assert!(seen.text().contains("The code v-03 is in the register already."), "{}", seen.text());
    let bad = [("code", ""), ("clean_hold_days", "a week"), ("class", "kettle")];
    let seen = lab.manager().submits("/equipment/new", "/equipment/new", &bad);
    assert_eq!(seen.status, 422);
    for words in ["as on its label is empty", "“a week” is not a number", "Class: choose one of the listed."]
    {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    let ahead = event(&lab, "bea.skelton", &path, "cleaned", &[("happened_on", "2 Dec 2026")]);
    assert!(ahead.text().contains("This day is still to come."), "{}", ahead.text());
    event(&lab, "bea.skelton", &path, "cleaned", &[]);
    let lotless = event(&lab, "bea.skelton", &path, "used", &[]);
    assert!(lotless.text().contains("Name the lot it was used in."), "{}", lotless.text());
    assert_eq!(lab.operator().get(&format!("{path}/polished")).status, 404);
    let label = lab.operator().sees(&format!("{path}/label"), "mixing vessel, 500 L");
    assert!(label.html().contains("QR code of V-03"));
    let study_label = lab.operator().get("/find?q=V-03");
    assert_eq!(study_label.location.as_deref(), Some(path.as_str()));
}
