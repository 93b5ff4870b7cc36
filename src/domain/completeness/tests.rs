use super::statement::{CompletenessRefusal, NewAnswer, may_answer, may_refer};
use super::*;

fn sample(is_settled: bool) -> Settled {
    Settled { words: "sample TW-104-R1".to_string(), path: "/review/1".to_string(), is_settled }
}

fn record() -> ExecutedRecord {
    ExecutedRecord {
        number: "BR-7".to_string(),
        path: "/batches/7".to_string(),
        is_closed: true,
        from_to: "1 to 3 Dec 2026".to_string(),
        weighings: 5,
        values: 9,
        clearances: 2,
        samplings: 1,
        examinations: 1,
        phases: 3,
        yields: 3,
        checked_yields: 3,
        people: 3,
    }
}

fn packed(is_label: bool, is_checked: bool) -> Packed {
    Packed { name: "label version 3".to_string(), path: "/packaging/1".to_string(), is_label, is_checked }
}

fn whole() -> Evidence {
    Evidence {
        lot_number: "TW-104".to_string(),
        lot_path: "/lots/1".to_string(),
        record: Some(record()),
        equipment: vec![Proof::new("V-03", "/equipment/1")],
        material_lots: vec![Proof::new("ML-0042", "/material-lots/1")],
        container_closure: "PET bottle, PP cap".to_string(),
        packaging: vec![packed(true, true), packed(false, true)],
        files: 1,
        samples: vec![sample(true)],
        ..Evidence::default()
    }
}

fn state(evidence: &Evidence, number: u8) -> String {
    match &judge(evidence)[usize::from(number) - 1].state {
        ItemState::Present(_) => "present".to_string(),
        ItemState::NotApplicable(why) => format!("not applicable: {why}"),
        ItemState::Missing { why, .. } => format!("missing: {why}"),
    }
}

fn missing_numbers(evidence: &Evidence) -> Vec<u8> {
    judge(evidence).iter().filter(|item| item.is_missing()).map(|item| item.number).collect()
}

#[test]
fn a_whole_record_lacks_nothing_and_an_empty_one_says_what() {
    assert_eq!(missing_numbers(&whole()), Vec::<u8>::new());
    assert!(state(&whole(), 12).starts_with("not applicable: No deviation"));
    let empty = Evidence { container_closure: "PET bottle".to_string(), ..Evidence::default() };
    assert_eq!(missing_numbers(&empty), [1, 2, 3, 4, 5, 6, 7, 8, 10, 11, 13]);
    assert_eq!(
        missing(&judge(&empty))[6],
        "(7) actual yield and percentage of the theoretical yield at each phase"
    );
}

#[test]
fn a_record_kept_elsewhere_holds_what_is_not_here_but_no_result_and_no_sample() {
    let elsewhere = Elsewhere {
        reference: "BR-2026-11".to_string(),
        place: "archive, room 2".to_string(),
        why: "made before this program".to_string(),
        by: "Maren Oddy".to_string(),
    };
    let evidence = Evidence {
        elsewhere: Some(elsewhere),
        container_closure: "PET bottle".to_string(),
        ..Evidence::default()
    };
    assert_eq!(missing_numbers(&evidence), [5, 10]);
    let tested = Evidence { samples: vec![sample(true)], ..evidence };
    assert_eq!(missing_numbers(&tested), Vec::<u8>::new());
    assert_eq!(may_refer(&tested), Ok(()));
    let refused = may_refer(&whole()).unwrap_err();
    assert_eq!(
        refused.to_string(),
        "TW-104 has its executed record BR-7 here. There is none elsewhere to refer to."
    );
}

#[test]
fn each_item_is_missing_for_its_own_reason() {
    let with = |change: &dyn Fn(&mut ExecutedRecord)| {
        let mut changed = record();
        change(&mut changed);
        Evidence { record: Some(changed), ..whole() }
    };
    let open =
        Settled { words: "deviation 3".to_string(), path: "/deviations/3".to_string(), is_settled: false };
    let table = [
        (1, with(&|record| record.is_closed = false), "The record is not closed yet."),
        (2, Evidence { equipment: vec![], ..whole() }, "No equipment is recorded"),
        (3, Evidence { material_lots: vec![], ..whole() }, "No material lot is recorded"),
        (4, with(&|record| record.weighings = 0), "No weighing is recorded."),
        (5, Evidence { samples: vec![], ..whole() }, "No sample was received for release."),
        (5, Evidence { samples: vec![sample(false)], ..whole() }, "These samples are not reviewed"),
        (6, with(&|record| record.clearances = 0), "No line clearance is recorded."),
        (7, with(&|record| record.phases = 0), "The master record states no theoretical yield."),
        (7, with(&|record| record.yields = 2), "1 of 3 phases have no yield yet."),
        (7, with(&|record| record.checked_yields = 1), "2 of 3 yields are not checked"),
        (
            8,
            Evidence { packaging: vec![packed(true, true), packed(false, false)], ..whole() },
            "These counts are",
        ),
        (8, Evidence { packaging: vec![packed(false, true)], ..whole() }, "No label is counted"),
        (8, Evidence { files: 0, ..whole() }, "No specimen of the label"),
        (9, Evidence { container_closure: " ".to_string(), ..whole() }, "The lot does not say"),
        (11, with(&|record| record.people = 1), "Only 1 took part."),
        (12, Evidence { investigations: vec![open], ..whole() }, "These are open."),
        (13, with(&|record| record.examinations = 0), "No examination of the packed product"),
    ];
    for (number, evidence, words) in table {
        let found = state(&evidence, number);
        assert!(found.starts_with(&format!("missing: {words}")), "{number}: {found}");
    }
}

#[test]
fn a_statement_counts_only_where_a_person_may_state_it() {
    use AnswerKind::*;
    let bulk = Evidence { packaging: vec![], files: 0, ..whole() };
    let open = Evidence { packaging: vec![packed(true, false)], ..whole() };
    let new = |item: u8, kind| NewAnswer { item, kind, text: "a bulk lot, not packed".to_string() };
    let lot = || "TW-104".to_string();
    use CompletenessRefusal::*;
    let table = [
        (new(8, NotApplicable), bulk.clone(), Ok(())),
        (new(8, Present), bulk.clone(), Ok(())),
        (new(7, NotApplicable), bulk.clone(), Ok(())),
        (new(8, NotApplicable), Evidence { is_imported: true, ..bulk.clone() }, Err(RecordOfImported(lot()))),
        (new(8, NotApplicable), Evidence { is_decided: true, ..bulk.clone() }, Err(RecordDecided(lot()))),
        (new(14, Present), bulk.clone(), Err(NoSuchItem)),
        (new(12, NotApplicable), bulk.clone(), Err(AppliesAlways(12))),
        (new(7, Present), bulk.clone(), Err(NotStated(7))),
        (new(8, NotApplicable), open, Err(OpenInItsRecord(8))),
        (NewAnswer { text: "bulk".into(), ..new(8, NotApplicable) }, bulk.clone(), Err(StatementTooShort)),
    ];
    for (new, evidence, expected) in table {
        assert_eq!(may_answer(&new, &evidence), expected, "{new:?}");
    }
    let answer =
        |kind| Answer { item: 8, kind, text: "a bulk lot".to_string(), by: "Maren Oddy".to_string() };
    let said = |kind| Evidence { answers: vec![answer(kind)], ..bulk.clone() };
    assert_eq!(state(&said(NotApplicable), 8), "not applicable: a bulk lot (Maren Oddy)");
    assert_eq!(state(&said(Present), 8), "present");
    assert!(state(&said(Withdrawn), 8).starts_with("missing"));
    let open = Evidence { packaging: vec![packed(true, false)], ..said(NotApplicable) };
    assert!(state(&open, 8).starts_with("missing"), "an open count is not talked away");
}
