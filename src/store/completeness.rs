//! What the rows show of a lot's record, and what people stated on it.

use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Reader};
use crate::domain::batch::{Entry, EntryKind, standing, yield_of};
use crate::domain::completeness::statement::{NewAnswer, NewElsewhere};
use crate::domain::completeness::{
    Answer as Statement, AnswerKind, Elsewhere, Evidence, ExecutedRecord, Packed, Proof, Settled,
};
use crate::domain::master::StepKind;
use crate::domain::moment::{date_from_stored, date_shown};
use crate::domain::packaging::LABEL;
use crate::domain::review::SampleState;

/// Everything that decides whether the record of a lot is complete. What was done in the bulk lot it was filled from
/// counts as its own.
pub fn evidence(reader: &Reader<'_>, lot: i64) -> Answer<Evidence> {
    let found = super::lot::get(reader, lot)?;
    let bulk_lot = found.bulk_lot;
    let lots: Vec<i64> = bulk_lot.into_iter().chain([lot]).collect();
    let mut evidence = Evidence {
        lot_path: format!("/lots/{lot}"),
        is_decided: found.decision.is_some(),
        is_imported: found.imported.is_some(),
        elsewhere: elsewhere(reader, lot)?,
        packaging: packaging(reader, lot)?,
        files: files(reader, lot)?,
        samples: samples(reader, lot)?,
        investigations: investigations(reader, lot)?,
        answers: answers(reader, lot)?,
        lot_number: found.number,
        container_closure: found.container_closure,
        ..Evidence::default()
    };
    for lot in lots {
        for (id, code, name) in super::equipment::of_lot(reader, lot)? {
            evidence.equipment.push(Proof::new(format!("{code}, {name}"), format!("/equipment/{id}")));
        }
        for one in super::stock::of_lot(reader, lot)? {
            let words = format!("{} {}", one.number, one.material);
            evidence.material_lots.push(Proof::new(words, format!("/material-lots/{}", one.material_lot)));
        }
    }
    evidence.record = match executed(reader, lot)? {
        None => bulk_lot.map(|bulk| executed(reader, bulk)).transpose()?.flatten(),
        own => own,
    };
    Ok(evidence)
}

/// What the executed record of a lot holds, where it was carried out here.
fn executed(reader: &Reader<'_>, lot: i64) -> Answer<Option<ExecutedRecord>> {
    let Some(record) = super::batch::of_lot(reader, lot)? else { return Ok(None) };
    let entries = super::batch::entry::of_record(reader, record.id)?;
    let yields = super::batch::yields::of_record(reader, record.id)?;
    let steps = record.content.steps();
    let standing = standing(&entries);
    let kind_of = |number: usize| steps.iter().find(|one| one.number == number).map(|one| one.step.kind);
    let ended = |kind: StepKind| {
        let done = |one: &&&Entry| one.kind == EntryKind::Ended && kind_of(one.step) == Some(kind);
        standing.iter().filter(done).count()
    };
    let of_kind = |kind: EntryKind| standing.iter().filter(|one| one.kind == kind).count();
    let phases: Vec<usize> = (0..record.content.master.phases.len())
        .filter(|at| record.content.phase(*at).is_some_and(|phase| phase.theory.is_some()))
        .collect();
    let worked_out: Vec<_> = phases.iter().filter_map(|phase| yield_of(&yields, *phase)).collect();
    let mut people: Vec<i64> = entries.iter().map(|one| one.account).collect();
    people.sort_unstable();
    people.dedup();
    Ok(Some(ExecutedRecord {
        path: format!("/batches/{}/record", record.id),
        is_closed: record.is_closed,
        from_to: from_to(&entries),
        weighings: of_kind(EntryKind::Weighing),
        values: of_kind(EntryKind::Value),
        clearances: ended(StepKind::LineClearance),
        samplings: ended(StepKind::Sample),
        examinations: 0,
        phases: phases.len(),
        yields: worked_out.len(),
        checked_yields: worked_out.iter().filter(|one| one.checked.is_some()).count(),
        people: people.len(),
        number: record.number,
    }))
}

/// The days of the first and the last entry.
fn from_to(entries: &[Entry]) -> String {
    let on = |one: &Entry| one.instant().get(..10).and_then(date_from_stored).map(date_shown);
    let (first, last) = (entries.first().and_then(on), entries.last().and_then(on));
    match (first, last) {
        (Some(first), Some(last)) if first != last => format!("{first} to {last}"),
        (Some(first), _) => first,
        _ => String::new(),
    }
}

/// The reference to a record kept elsewhere that counts.
fn elsewhere(reader: &Reader<'_>, lot: i64) -> Answer<Option<Elsewhere>> {
    reader.maybe(
        "select e.reference, e.place, e.why, a.full_name
         from record_elsewhere e join trail_act a on a.id = e.act
         where e.lot in (:lot, (select bulk_lot from lot where id = :lot))
         order by e.lot = :lot desc, e.id desc
         limit 1",
        named_params! { ":lot": lot },
        |row| Ok(Elsewhere { reference: row.get(0)?, place: row.get(1)?, why: row.get(2)?, by: row.get(3)? }),
    )
}

fn packaging(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Packed>> {
    let items = super::packaging::of_lot(reader, lot)?;
    let packed = items.into_iter().map(|item| Packed {
        path: format!("/packaging/{}", item.id),
        is_label: item.kind == LABEL,
        is_checked: item.facts.is_checked(),
        name: item.facts.name,
    });
    Ok(packed.collect())
}

fn files(reader: &Reader<'_>, lot: i64) -> Answer<usize> {
    let count = reader.one(
        "count of files",
        "select count(*) from attachment where kind = 'lot' and subject = :lot",
        named_params! { ":lot": lot },
        |row| row.get::<_, u32>(0),
    )?;
    Ok(count as usize)
}

fn samples(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Settled>> {
    let ids: Vec<i64> = reader.all(
        "select id from sample where lot = :lot and purpose in ('release', 'in-process', 'bulk hold') order by id",
        named_params! { ":lot": lot },
        |row| row.get(0),
    )?;
    let found = super::review::facts::many(reader, &ids)?;
    let one = |sample: super::review::facts::ReviewSample| Settled {
        words: format!("sample {}", sample.facts.number),
        path: format!("/review/{}", sample.head.sample),
        is_settled: sample.facts.state() == SampleState::Signed,
    };
    Ok(found.into_iter().map(one).collect())
}

fn investigations(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Settled>> {
    let deviations = super::deviation::of_lot(reader, lot)?.into_iter().map(|one| Settled {
        words: format!("deviation {}", one.facts.number),
        path: format!("/deviations/{}", one.id),
        is_settled: one.facts.is_closed,
    });
    let investigations = super::investigation::of_lot(reader, lot)?.into_iter().map(|one| Settled {
        words: format!("investigation {}", one.number),
        path: format!("/investigations/{}", one.id),
        is_settled: one.is_concluded,
    });
    Ok(deviations.chain(investigations).collect())
}

/// The newest statement on each item.
fn answers(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Statement>> {
    reader.all(
        "select c.item, c.answer, c.text, a.full_name
         from completeness_answer c join trail_act a on a.id = c.act
         where c.lot = :lot
             and c.id = (select max(id) from completeness_answer where lot = c.lot and item = c.item)
         order by c.item",
        named_params! { ":lot": lot },
        |row| {
            let kind: String = row.get(1)?;
            Ok(Statement {
                item: row.get(0)?,
                kind: AnswerKind::from_words(&kind).unwrap_or(AnswerKind::Withdrawn),
                text: row.get(2)?,
                by: row.get(3)?,
            })
        },
    )
}

pub fn insert_answer(change: &Change<'_>, lot: i64, new: &NewAnswer) -> Answer<i64> {
    change.insert(
        "insert into completeness_answer (lot, item, answer, text) values (:lot, :item, :answer, :text)",
        named_params! {
            ":lot": lot,
            ":item": new.item,
            ":answer": new.kind.words(),
            ":text": new.text,
        },
    )
}

pub fn insert_elsewhere(change: &Change<'_>, lot: i64, new: &NewElsewhere) -> Answer<i64> {
    change.insert(
        "insert into record_elsewhere (lot, reference, place, why) values (:lot, :reference, :place, :why)",
        named_params! {
            ":lot": lot,
            ":reference": new.reference,
            ":place": new.place,
            ":why": new.why,
        },
    )
}
