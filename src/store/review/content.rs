//! The canonical text of a sample: what a reviewer signs, exact as of any act.

use rusqlite::types::ValueRef;
use rusqlite::{Row, named_params};

use crate::domain::digest::hex;
use crate::store::{Answer, Reader};

/// The parts of the text in their order. Each query takes `:sample` and `:act`, and all its rows are insert-only,
/// so the text as of an act never changes afterwards.
const PARTS: [(&str, &str); 12] = [
    (
        "sample",
        "select s.number, s.purpose, l.number, l.formulation_version, l.formulation_digest,
             s.specification_version, s.limit_set, s.containers, s.condition_on_receipt, s.handed_over_by,
             s.received_on, st.number, c.code, a.orientation, a.limits_do, p.age_text, p.due_on, p.earliest_on,
             p.latest_on
         from sample s
         join lot l on l.id = s.lot
         left join pull p on p.id = s.pull
         left join study_arm a on a.id = p.study_arm
         left join study st on st.id = a.study
         left join condition c on c.id = a.condition
         where s.id = :sample and s.act <= :act",
    ),
    (
        "pull event",
        "select e.id, e.kind, e.happened_at, e.happened_on, e.identity_by, e.note, e.act
         from sample s join pull_event e on e.pull = s.pull
         where s.id = :sample and e.act <= :act order by e.id",
    ),
    (
        "container",
        "select e.id, c.label, e.kind, e.witness, e.note, e.act
         from sample s
         join container_event e on e.pull = s.pull
         join container c on c.id = e.container
         where s.id = :sample and e.act <= :act order by e.id",
    ),
    (
        "test",
        "select t.id, t.position, t.test, t.title, t.method_version, t.act
         from sample_test t where t.sample = :sample and t.act <= :act order by t.id",
    ),
    (
        "stage loss",
        "select x.id, x.container, x.stage, x.why, x.act
         from stage_loss x where x.sample = :sample and x.act <= :act order by x.id",
    ),
    (
        "reading",
        "select r.id, r.sample_test, r.container, r.replicate, r.field, r.typed, r.value, r.qualifier, r.read_at,
             r.due_at, r.inspected_every, r.instrument, r.hints, r.hint_answer, r.supersedes, a.account, a.at,
             a.reason, r.act
         from sample_test t
         join reading r on r.sample_test = t.id
         join trail_act a on a.id = r.act
         where t.sample = :sample and r.act <= :act order by r.id",
    ),
    (
        "attachment",
        "select x.id, x.file_name, x.media_type, x.size_bytes, x.sha256, x.about, x.act
         from attachment x
         where ((x.kind = 'sample' and x.subject = :sample)
             or (x.kind = 'sample_test' and x.subject in (select id from sample_test where sample = :sample)))
         and x.act <= :act order by x.id",
    ),
    (
        "result",
        "select r.id, r.sample_test, r.version, r.component, r.value, r.qualifier, r.shown, r.unit, r.verdict,
             r.detail, r.sd, r.n, r.imported, r.act
         from sample_test t join result r on r.sample_test = t.id
         where t.sample = :sample and r.act <= :act order by r.id",
    ),
    (
        "flag",
        "select f.id, f.result, f.kind, f.level, f.sentence, f.numbers, f.act
         from sample_test t
         join result r on r.sample_test = t.id
         join flag f on f.result = r.id
         where t.sample = :sample and f.act <= :act order by f.id",
    ),
    (
        "investigation",
        "select i.id, i.number, i.result, i.first_known_at, i.act
         from sample_test t
         join result r on r.sample_test = t.id
         join investigation i on i.result = r.id
         where t.sample = :sample and i.act <= :act order by i.id",
    ),
    (
        "check",
        "select c.id, c.sample_test, c.version, c.verdict, c.why, c.account, c.act
         from sample_test t join result_check c on c.sample_test = t.id
         where t.sample = :sample and c.act <= :act order by c.id",
    ),
    (
        "answer",
        "select x.id, x.flag, x.about, x.answer, x.account, x.act
         from exception_answer x where x.sample = :sample and x.act <= :act order by x.id",
    ),
];

/// The text of everything recorded about a sample up to and with an act (`None`: up to now): one line a record,
/// each a JSON array that begins with the kind of the record.
///
/// Missing where there is no such sample.
pub(in crate::store) fn text(reader: &Reader<'_>, sample: i64, up_to_act: Option<i64>) -> Answer<String> {
    let act = up_to_act.unwrap_or(i64::MAX);
    let mut text = String::new();
    for (name, sql) in PARTS {
        let lines =
            reader.all(sql, named_params! { ":sample": sample, ":act": act }, |row| Ok(line(name, row)))?;
        for fields in lines {
            text.push_str(&fields?.to_string());
            text.push('\n');
        }
    }
    if text.is_empty() {
        return Err(crate::domain::failure::Failure::missing("sample with this number"));
    }
    Ok(text)
}

/// The columns of a row in their order.
fn line(name: &str, row: &Row<'_>) -> Answer<serde_json::Value> {
    let mut fields = vec![serde_json::Value::from(name)];
    for column in 0..row.as_ref().column_count() {
        fields.push(match row.get_ref(column)? {
            ValueRef::Null => serde_json::Value::Null,
            ValueRef::Integer(value) => value.into(),
            ValueRef::Real(value) => value.into(),
            ValueRef::Text(bytes) => String::from_utf8_lossy(bytes).into_owned().into(),
            ValueRef::Blob(bytes) => hex(bytes).into(),
        });
    }
    Ok(serde_json::Value::Array(fields))
}
