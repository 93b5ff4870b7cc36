//! The thirteen items of a lot's record, and what an open one does to its release.

use supernate::domain::sample::Purpose;

use crate::support::samples::Bench;
use crate::support::{Lab, PASSWORD, Seen, world};

/// A lot with reviewed release results and an assigned shelf life; nothing else is recorded of it.
fn tested(lab: &Lab) -> i64 {
    let bench = Bench::new(lab);
    bench.assigns_shelf_life();
    lab.later_days(2);
    let lot = bench.lot_made_on("TW-104-0640", "2026-12-02".parse().unwrap());
    let sample = bench.ready(lot, Purpose::Release);
    let (qa, page) = (lab.reviewer(), format!("/review/{sample}"));
    qa.does(&page, &format!("{page}/agree"), &[]);
    qa.signs("/review/sign", "/review/sign", &[]);
    lot
}

fn states(lab: &Lab, lot: i64, item: &str, answer: &str, text: &str) -> Seen {
    let page = format!("/lots/{lot}/completeness");
    let fields = [("item", item), ("answer", answer), ("text", text)];
    lab.manager().submits(&page, &page, &fields)
}

fn releases(lab: &Lab, lot: i64, fields: &[(&str, &str)]) -> Seen {
    let page = format!("/lots/{lot}/decision");
    let mut all = vec![("user_name", "ada.whitlock"), ("password", PASSWORD)];
    all.extend_from_slice(fields);
    lab.reviewer().submits(&page, &format!("/lots/{lot}/release"), &all)
}

#[test]
fn a_missing_item_blocks_the_release_until_the_record_is_here_or_stated_elsewhere() {
    let lab = Lab::new();
    let lot = tested(&lab);
    let page = format!("/lots/{lot}/completeness");
    let seen = lab.reviewer().sees(&page, "9 of the thirteen items of TW-104-0640 are missing.");
    let words = [
        "(1) Dates of each significant step missing There is no executed record here.",
        "(2) Major equipment and lines used missing No equipment is recorded",
        "(5) In-process and laboratory control results present sample TW-104-0640-R1",
        "(9) Description of containers and closures present PET bottle, PP cap",
        "(12) Investigations made not applicable No deviation and no investigation was opened.",
    ];
    for words in words {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    let decision = format!("/lots/{lot}/decision");
    lab.reviewer().sees(&decision, "Release is not possible now. The record of TW-104-0640 lacks: (1) dates");

    let refer = format!("/lots/{lot}/record-elsewhere");
    let none = lab.manager().submits(&page, &refer, &[("reference", ""), ("place", ""), ("why", "old")]);
    assert_eq!(none.status, 422);
    for words in
        ["executed record is empty", "Where it is kept is empty", "Say why in at least 10 characters"]
    {
        assert!(none.text().contains(words), "{words}: {}", none.text());
    }
    let fields = [
        ("reference", "BR-2026-011"),
        ("place", "paper archive, room 2"),
        ("why", "carried out on paper before this program"),
    ];
    let complete = lab.manager().does(&page, &refer, &fields);
    assert!(complete.text().contains("The record of TW-104-0640 is complete"), "{}", complete.text());
    assert!(complete.text().contains("in the executed record BR-2026-011, paper archive, room 2"));

    let unticked = releases(&lab, lot, &[]);
    assert_eq!(unticked.status, 409);
    assert!(unticked.text().contains("Look through the corrections and the history of the lot, then tick"));
    let stale = releases(&lab, lot, &[("is_reviewed", "yes"), ("up_to_act", "3")]);
    assert_eq!(stale.status, 409);
    assert!(stale.text().contains("Something was recorded on TW-104-0640 since this page was shown."));
    assert_eq!(releases(&lab, lot, &[("is_reviewed", "yes")]).status, 303);
    let released = lab.reviewer().sees(&decision, "Records kept until 3 Dec 2031");
    assert!(!released.text().contains("does not match"), "{}", released.text());
    lab.auditor().sees(&format!("/lots/{lot}/file"), "kept elsewhere BR-2026-011, paper archive, room 2");
    let late = lab.manager().get(&page);
    assert!(
        !late.html().contains("<form method=\"post\" action=\"/lots/1/"),
        "nothing is stated after the decision"
    );
    let files = lab.folder.0.join("files");
    let report = lab
        .app
        .db
        .read(|reader| Ok(supernate::store::verify::run(reader, &files, None, &mut |_, _| ())))
        .unwrap();
    assert!(report.findings.is_empty() && report.recomputed == report.signatures, "{report:?}");
}

#[test]
fn an_open_deviation_blocks_the_release_and_a_closed_one_is_listed() {
    let lab = Lab::new();
    let lot = tested(&lab);
    world::record_elsewhere(&lab, lot);
    let what = [
        ("title", "Cap torque low"),
        ("described", "The torque of the caps fell for the last 200 bottles."),
        ("lot", "TW-104-0640"),
    ];
    let deviation = lab.operator().does("/deviations/new", "/deviations/new", &what).location.unwrap();
    let decision = format!("/lots/{lot}/decision");
    lab.reviewer().sees(&decision, "These deviations are open: 1. QA closes them first.");
    lab.reviewer()
        .sees(&format!("/lots/{lot}/completeness"), "missing These are open. QA closes them first.");
    let talked = states(&lab, lot, "12", "withdrawn", "it is only a small thing");
    assert_eq!(talked.status, 409);
    assert!(talked.text().contains("Item 12 is open in its own record."), "{}", talked.text());
    let lines = [
        vec![("kind", "classified"), ("class", "minor")],
        vec![("kind", "cause")],
        vec![("kind", "other lots assessed")],
        vec![("kind", "not added to stability")],
    ];
    for mut fields in lines {
        fields.push(("text", "the clutch of the capper was worn"));
        lab.manager().does(&deviation, &format!("{deviation}/entries"), &fields);
    }
    let text = [("text", "the bottles were sorted out and capped again")];
    lab.reviewer().signs(&deviation, &format!("{deviation}/closure"), &text);
    lab.reviewer().sees(&format!("/lots/{lot}/completeness"), "(12) Investigations made present deviation 1");
    assert_eq!(releases(&lab, lot, &[("is_reviewed", "yes")]).status, 303);
}

#[test]
fn a_statement_on_an_item_is_refused_where_it_cannot_be_made() {
    let lab = Lab::new();
    let lot = tested(&lab);
    let table = [
        ("12", "not applicable", "nothing was investigated", 409, "Item 12 applies to every lot."),
        ("7", "present", "in the old record book", 409, "Item 7 is read from what was recorded here."),
        ("8", "not applicable", "a bulk", 409, "Say where it stands, or why it does not apply"),
        ("99", "present", "in the old record book", 422, "Item: choose one of the listed."),
        ("8", "", "in the old record book", 422, "Statement: choose one of the listed."),
    ];
    for (item, answer, text, status, words) in table {
        let seen = states(&lab, lot, item, answer, text);
        assert_eq!(seen.status, status, "{words}: {}", seen.text());
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
        assert!(seen.html().contains(text), "what was typed is kept");
    }
    let why = "a bulk lot, filled and labelled later";
    assert_eq!(states(&lab, lot, "8", "not applicable", why).status, 303);
    let page = format!("/lots/{lot}/completeness");
    lab.reviewer().sees(&page, "not applicable a bulk lot, filled and labelled later (Maren Oddy)");
    assert_eq!(states(&lab, lot, "8", "withdrawn", "it was labelled after all").status, 303);
    lab.reviewer().sees(&page, "missing No label is counted for this lot.");
    let analyst = lab.analyst().get("/me").form("/sign-out");
    assert_eq!(lab.analyst().posts(&page, &analyst).status, 403);
}

#[test]
fn counted_labels_with_a_specimen_and_used_equipment_and_material_are_read_from_their_records() {
    let lab = Lab::new();
    let lot = tested(&lab);
    let page = format!("/lots/{lot}/packaging");
    let item = lab.operator().does(&page, &page, &[("kind", "label"), ("name", "label version 3")]);
    let item = item.location.unwrap();
    for (kind, count) in [("issued", "100"), ("used", "100")] {
        lab.operator().does(&item, &format!("{item}/counts"), &[("kind", kind), ("count", count)]);
    }
    let completeness = format!("/lots/{lot}/completeness");
    lab.reviewer().sees(&completeness, "These counts are not reconciled and checked by a second person yet.");
    lab.manager().does(&item, &format!("{item}/check"), &[]);
    lab.reviewer().sees(&completeness, "No specimen of the label is attached to the lot.");
    let vessel = world::clean_equipment(&lab, "V-03", "mixing vessel");
    let used = format!("/equipment/{vessel}/used");
    lab.operator().does(&used, &used, &[("lot", "TW-104-0640")]);
    lab.reviewer()
        .sees(&completeness, "(2) Major equipment and lines used present V-03, mixing vessel, 500 L");
}
