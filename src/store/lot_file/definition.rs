//! What the lot rests on: its identity, and the versions it was made and tested by.

use super::{Query, of_family};

pub(super) const QUERIES: &[Query] = &[
    Query {
        name: "lots",
        title: "Identity",
        numeric: &["size", "fill_ml"],
        sql: of_family!(
            "select l.id, l.number, d.code as product_code, d.name as product, d.dosage_form, c.name as customer,
                 p.code as presentation, p.strength, p.pack, p.container_word, p.fill_ml, p.market, p.permeability,
                 f.code as formulation, v.number as formulation_version, l.formulation_digest, l.made_on, l.size,
                 l.size_unit, l.scale, l.container_closure, b.number as bulk_lot, i.file_name as imported_from,
                 a.full_name as recorded_by, a.at as recorded_at, l.act
             from lot l
             join presentation p on p.id = l.presentation
             join product d on d.id = p.product
             left join customer c on c.id = d.customer
             join formulation_version v on v.id = l.formulation_version
             join formulation f on f.id = v.formulation
             left join lot b on b.id = l.bulk_lot
             left join import i on i.id = l.imported
             join trail_act a on a.id = l.act
             where l.id in (select id from family)
             order by l.id"
        ),
    },
    Query {
        name: "formulation_versions",
        title: "Formulation",
        numeric: &[],
        sql: of_family!(
            "select v.id, f.code, f.name, v.number, v.reason, v.content,
                 case when v.imported is null then 0 else 1 end as is_imported,
                 a.full_name as written_by, a.at as written_at, v.act
             from formulation_version v
             join formulation f on f.id = v.formulation
             join trail_act a on a.id = v.act
             where v.id in (select formulation_version from lot where id in (select id from family))
             order by v.id"
        ),
    },
    Query {
        name: "specification_versions",
        title: "Specifications",
        numeric: &[],
        sql: of_family!(
            "select v.id, s.code, v.number, v.reason, v.content, a.full_name as written_by, a.at as written_at, v.act
             from specification_version v
             join specification s on s.id = v.specification
             join trail_act a on a.id = v.act
             where v.id in (
                 select specification_version from study where lot in (select id from family)
                 union
                 select specification_version from sample where lot in (select id from family))
             order by v.id"
        ),
    },
    Query {
        name: "protocol_versions",
        title: "Protocols",
        numeric: &[],
        sql: of_family!(
            "select v.id, p.code, p.title, v.number, v.reason, v.content, a.full_name as written_by,
                 a.at as written_at, v.act
             from protocol_version v
             join protocol p on p.id = v.protocol
             join trail_act a on a.id = v.act
             where v.id in (
                 select protocol_version from study where lot in (select id from family)
                 union
                 select m.protocol_version from study_amendment m join study s on s.id = m.study
                 where s.lot in (select id from family))
             order by v.id"
        ),
    },
    Query {
        name: "method_versions",
        title: "Methods",
        numeric: &[],
        sql: of_family!(
            "select v.id, m.code, m.name, m.kind, v.number, v.reason, v.content, a.full_name as written_by,
                 a.at as written_at, v.act
             from method_version v
             join method m on m.id = v.method
             join trail_act a on a.id = v.act
             where v.id in (
                 select t.method_version from sample_test t join sample s on s.id = t.sample
                 where s.lot in (select id from family))
             order by v.id"
        ),
    },
    Query {
        name: "instruments",
        title: "Instruments used, with their events",
        numeric: &[],
        sql: of_family!(
            "select e.id, i.code, i.name, i.kind, e.kind as event, e.performed_on, e.due_on, e.detail, e.act
             from instrument i
             left join instrument_event e on e.instrument = i.id
             where i.id in (
                 select r.instrument from reading r
                 join sample_test t on t.id = r.sample_test
                 join sample s on s.id = t.sample
                 where s.lot in (select id from family) and r.instrument is not null)
             order by i.code, e.id"
        ),
    },
    Query {
        name: "qualifications",
        title: "Qualifications of those who tested",
        numeric: &[],
        sql: of_family!(
            "select q.id, p.full_name, m.code as method, v.number as method_version, q.starts_on, q.ends_on,
                 q.reference, q.act
             from qualification q
             join account p on p.id = q.account
             join method_version v on v.id = q.method_version
             join method m on m.id = v.method
             where q.account in (
                 select a.account from reading r
                 join sample_test t on t.id = r.sample_test
                 join sample s on s.id = t.sample
                 join trail_act a on a.id = r.act
                 where s.lot in (select id from family))
             and q.method_version in (
                 select t.method_version from sample_test t join sample s on s.id = t.sample
                 where s.lot in (select id from family))
             order by p.full_name, m.code, q.id"
        ),
    },
];
