//! The rules of review as tables, and the planted exception that must never be missed.

use proptest::prelude::*;

use super::exception::{FoundFlag, RecordFacts, exceptions};
use super::*;

fn test(title: &str, version: Option<i64>, is_checked: Option<bool>) -> TestFacts {
    TestFacts {
        sample_test: 1,
        title: title.to_string(),
        version,
        is_checked,
        needs_check: true,
        performers: vec![4],
    }
}

fn ready() -> SampleFacts {
    SampleFacts {
        number: "ST-031-P07".to_string(),
        tests: vec![test("pH", Some(1), Some(true))],
        checkers: vec![5],
        ..SampleFacts::default()
    }
}

fn with_exception(answer: Option<&str>) -> SampleFacts {
    let record = RecordFacts { corrections: 1, ..RecordFacts::default() };
    let answers: Vec<(String, String)> =
        answer.map(|text| ("corrections 1".to_string(), text.to_string())).into_iter().collect();
    SampleFacts { exceptions: exceptions(&[], &record, &answers), ..ready() }
}

#[test]
fn agreeing_is_refused_in_the_documented_order() {
    let number = || "ST-031-P07".to_string();
    let imported = SampleFacts { is_imported: true, ..ready() };
    let open = SampleFacts { tests: vec![test("pH", None, None)], ..ready() };
    let back = SampleFacts { tests: vec![test("pH", Some(1), Some(false))], ..ready() };
    let unchecked = SampleFacts { tests: vec![test("pH", Some(1), None)], ..ready() };
    let signed = SampleFacts { is_signed: true, ..ready() };
    let changed = SampleFacts { is_signed: true, is_changed_after_signing: true, ..ready() };
    let open_sentence = "1 correction.".to_string();
    let own_work = || ReviewRefusal::OwnWork { number: number(), took_part: vec![4, 5] };
    let table = [
        (imported, 4, Err(ReviewRefusal::ImportedNotSigned(number()))),
        (open, 4, Err(ReviewRefusal::TestsNotIn("pH".to_string()))),
        (back, 4, Err(ReviewRefusal::TestsNotIn("pH".to_string()))),
        (unchecked, 4, Err(ReviewRefusal::TestsNotChecked("pH".to_string()))),
        (ready(), 4, Err(own_work())),
        (ready(), 5, Err(own_work())),
        (signed, 8, Err(ReviewRefusal::SignedAlready(number()))),
        (with_exception(None), 8, Err(ReviewRefusal::ExceptionsUnanswered(open_sentence))),
        (with_exception(Some("fine")), 8, Ok(())),
        (changed, 8, Ok(())),
        (ready(), 8, Ok(())),
    ];
    for (facts, reviewer, expected) in table {
        assert_eq!(may_agree(&facts, reviewer), expected, "{facts:?}");
    }
}

#[test]
fn screen_u74_u75_a_list_is_signed_whole_or_refused_by_name() {
    let number = || "ST-031-P07".to_string();
    let many = vec![ready(); MOST_SIGNED + 1];
    let mixed = vec![ready(), with_exception(Some("fine"))];
    let alone = vec![with_exception(Some("fine"))];
    let why = "the correction is a slip of the key";
    let table: [(&[SampleFacts], &str, Result<(), ReviewRefusal>); 7] = [
        (&[], why, Err(ReviewRefusal::NothingToSign)),
        (&many, why, Err(ReviewRefusal::TooManyAtOnce)),
        (&mixed, why, Err(ReviewRefusal::ExceptionsSignedAlone(number()))),
        (&alone, "too short", Err(ReviewRefusal::StatementTooShort)),
        (&alone, why, Ok(())),
        (&many[1..], "", Ok(())),
        (&[with_exception(None)], why, Err(ReviewRefusal::ExceptionsUnanswered("1 correction.".to_string()))),
    ];
    for (list, statement, expected) in table {
        assert_eq!(may_sign(list, 8, statement), expected);
    }
}

#[test]
fn tests_are_sent_back_by_name_and_with_a_reason() {
    let facts = ready();
    let why = "the temperature is missing";
    assert_eq!(may_send_back(&facts, &[], why), Err(ReviewRefusal::NoTestNamed));
    assert!(matches!(may_send_back(&facts, &[9], why), Err(ReviewRefusal::TestsNotIn(_))));
    assert_eq!(may_send_back(&facts, &[1], "why"), Err(ReviewRefusal::WhyTooShort));
    assert_eq!(may_send_back(&facts, &[1], why), Ok(()));
}

#[test]
fn the_queue_has_three_parts() {
    let waiting = SampleFacts { tests: vec![test("pH", Some(1), None)], ..ready() };
    let early = SampleFacts { tests: vec![test("pH", None, None)], ..with_exception(None) };
    let table = [
        (ready(), Some(Part::WithoutExceptions)),
        (with_exception(None), Some(Part::WithExceptions)),
        (with_exception(Some("answered")), Some(Part::WithExceptions)),
        (early, Some(Part::WithExceptions)),
        (waiting, Some(Part::WaitingForOthers)),
        (SampleFacts { is_signed: true, ..ready() }, None),
        (SampleFacts { is_imported: true, ..ready() }, None),
    ];
    for (facts, expected) in table {
        assert_eq!(facts.part(), expected, "{facts:?}");
    }
}

fn any_test() -> impl Strategy<Value = TestFacts> {
    (any::<bool>(), prop_oneof![Just(None), Just(Some(true)), Just(Some(false))], any::<bool>()).prop_map(
        |(is_in, is_checked, needs_check)| TestFacts {
            version: is_in.then_some(1),
            is_checked: is_checked.filter(|_| is_in),
            needs_check,
            ..test("any", None, None)
        },
    )
}

fn any_flag() -> impl Strategy<Value = FoundFlag> {
    (1_i64..1000, prop_oneof![Just("exception"), Just("mark"), Just("context")]).prop_map(|(id, level)| {
        FoundFlag { id, kind: "spread".to_string(), level: level.to_string(), ..FoundFlag::default() }
    })
}

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::with_cases(200) })]

    /// screens 15c: a planted result outside its limit stands in the first part in all of 200 cases.
    #[test]
    fn a_planted_exception_is_never_among_those_without(
        tests in prop::collection::vec(any_test(), 1..8),
        mut flags in prop::collection::vec(any_flag(), 0..6),
        place in any::<prop::sample::Index>(),
        corrections in 0_usize..3,
        is_changed in any::<bool>(),
    ) {
        let planted = FoundFlag {
            id: 5000,
            kind: "out of specification".to_string(),
            level: "exception".to_string(),
            ..FoundFlag::default()
        };
        flags.insert(place.index(flags.len() + 1), planted);
        let record = RecordFacts { corrections, ..RecordFacts::default() };
        let facts = SampleFacts {
            is_signed: is_changed,
            is_changed_after_signing: is_changed,
            tests,
            exceptions: exceptions(&flags, &record, &[]),
            ..ready()
        };
        prop_assert_eq!(facts.part(), Some(Part::WithExceptions));
        prop_assert!(facts.exceptions.first().is_some_and(|one| one.flag == Some(5000)));
        prop_assert!(may_agree(&facts, 8).is_err(), "it cannot be agreed to without an answer");
    }
}
