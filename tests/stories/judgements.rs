//! Judging: what the approved specification says of what was read.

use supernate::domain::judgement::{Qualifier, ReadingValue, Verdict, judge};
use supernate::domain::method::TestKind;
use supernate::domain::specification::LimitSet;
use supernate::store;

use crate::support::{Lab, world};

fn reading(replicate: u32, typed: &str) -> ReadingValue {
    ReadingValue {
        container: None,
        container_label: String::new(),
        replicate,
        field: "value".to_string(),
        typed: typed.to_string(),
        value: typed.parse().ok(),
        qualifier: Qualifier::Equal,
        first_typed: None,
    }
}

/// req_O1, req_O10: the limits of a specification judge the mean, and name a single value outside.
#[test]
fn req_o10_the_mean_is_inside_and_the_single_value_outside_is_named() {
    let lab = Lab::new();
    let version = world::approved_method(&lab, TestKind::Ph);
    let limits = world::test_limits(&lab, TestKind::Ph);
    let method = lab.app.db.read(|reader| store::method::version(reader, version)).unwrap();
    assert!(method.is_approved);
    let judged = judge(
        &method.content,
        Some(&limits),
        LimitSet::ShelfLife,
        None,
        &[reading(1, "7.47"), reading(2, "7.52")],
    );
    assert_eq!((judged[0].verdict, judged[0].shown.as_str()), (Verdict::Conforms, "7.50"));
    assert_eq!(
        judged[0].flags[0].sentence,
        "reading 2: 7.52 pH units, above 7.50; the reported 7.50 is within."
    );
}

#[test]
fn every_kind_of_method_is_written_signed_and_approved() {
    let lab = Lab::new();
    for kind in TestKind::ALL {
        let id = world::approved_method(&lab, kind);
        assert_eq!(world::approved_method(&lab, kind), id);
    }
    world::approved_degradation_method(&lab);
    let all = lab.app.db.read(store::method::approved_versions).unwrap();
    assert_eq!(all.len(), TestKind::ALL.len() + 1);
}
