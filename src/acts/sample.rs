//! Receiving a sample.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::sample::{NewSample, NewSampleTest, ReceiptFacts, SampleRefusal, may_receive};
use crate::domain::specification::SpecificationContent;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::Reader;
use crate::store::door::Db;

/// Receives a sample with the tests asked of it, in bench order.
///
/// Refuses in the order of [`may_receive`], then a test without an approved method version.
pub fn receive(db: &Db, actor: &Actor, new: &NewSample) -> Result<i64, Failure> {
    db.change(actor, Act::ReceiveSample, &Reason::none(), |change| {
        let lot = store::lot::get(change, new.lot)?;
        let specification = store::specification::approved_of(change, lot.presentation)?;
        may_receive(ReceiptFacts {
            is_lot_imported: lot.imported.is_some(),
            has_specification: specification.is_some(),
            test_count: new.tests.len(),
            is_in_future: new.received_on > change.actor().at.date(),
        })?;
        let Some(specification) = specification else { return Err(SampleRefusal::NoSpecification.into()) };
        let tests = tests(change, &specification.read()?, &new.tests)?;
        let number = store::sample::next_number(change, &lot.number, new.purpose.letter())?;
        let id = store::sample::insert_received(change, &number, new, specification.id)?;
        for (position, test) in tests.iter().enumerate() {
            store::sample::insert_test(change, id, position, test)?;
        }
        change.concerns(Kind::Sample, id)?;
        change.concerns(Kind::Lot, new.lot)?;
        let tests = if tests.len() == 1 { "1 test".to_string() } else { format!("{} tests", tests.len()) };
        change.tell(format!("{number}, {}: {tests}", new.purpose.words()));
        Ok(id)
    })
}

/// The chosen tests with the newest approved version of their methods: by stage, then as the specification lists.
fn tests(
    reader: &Reader<'_>,
    content: &SpecificationContent,
    wanted: &[String],
) -> Result<Vec<NewSampleTest>, Failure> {
    let mut tests = Vec::new();
    for limits in content.tests.iter().filter(|limits| wanted.contains(&limits.test)) {
        let Some(version) = store::method::newest_approved(reader, limits.method)? else {
            return Err(SampleRefusal::NoApprovedMethod(limits.title.clone()).into());
        };
        tests.push(NewSampleTest {
            test: limits.test.clone(),
            title: limits.title.clone(),
            method_version: version.id,
            stage: version.content.stage,
        });
    }
    tests.sort_by_key(|test| test.stage);
    Ok(tests)
}
