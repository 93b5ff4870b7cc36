//! How the lot was made: its executed record, what it was made from and in, deviations, counts, retains, certificates.

use super::{Query, of_family};

pub(super) const QUERIES: &[Query] = &[
    Query {
        name: "batch_records",
        title: "Executed record",
        numeric: &[],
        sql: of_family!(
            "select b.id, b.number, l.number as lot, b.digest, a.full_name as started_by, a.at as started_at, b.act
             from batch_record b join lot l on l.id = b.lot join trail_act a on a.id = b.act
             where b.lot in (select id from family)
             order by b.id"
        ),
    },
    Query {
        name: "step_entries",
        title: "Entries of the executed record; one that supersedes another is a correction",
        numeric: &["step", "run", "value"],
        sql: of_family!(
            "select e.id, b.number as record, e.step, e.run, e.kind, e.name, e.point, e.typed, e.value, e.unit,
                 e.verdict, e.limits, e.detail, m.number as material_lot, q.code as equipment, i.code as instrument,
                 d.number as deviation, e.supersedes, coalesce(e.happened_at, a.at) as done_at, p.full_name as done_by,
                 a.at as entered_at, a.reason, e.act
             from batch_record b
             join step_entry e on e.record = b.id
             join trail_act a on a.id = e.act
             join account p on p.id = e.account
             left join material_lot m on m.id = e.material_lot
             left join equipment q on q.id = e.equipment
             left join instrument i on i.id = e.instrument
             left join deviation d on d.id = e.deviation
             where b.lot in (select id from family)
             order by e.id"
        ),
    },
    Query {
        name: "phase_yields",
        title: "Yields",
        numeric: &["phase", "actual", "samples", "rejects", "waste", "theoretical", "percent", "accountable_percent"],
        sql: of_family!(
            "select y.id, b.number as record, y.phase, y.actual, y.samples, y.rejects, y.waste, y.unit, y.theoretical,
                 y.percent, y.accountable_percent, y.verdict, y.limits, d.number as deviation,
                 p.full_name as worked_out_by, k.full_name as checked_by, y.act
             from batch_record b
             join phase_yield y on y.record = b.id
             join account p on p.id = y.account
             left join deviation d on d.id = y.deviation
             left join phase_yield_check c on c.phase_yield = y.id
             left join account k on k.id = c.account
             where b.lot in (select id from family)
             order by y.id"
        ),
    },
    Query {
        name: "stock_entries",
        title: "Materials dispensed and brought back",
        numeric: &["quantity", "balance"],
        sql: of_family!(
            "select e.id, l.number as lot, m.number as material_lot, t.name as material, m.supplier, m.supplier_lot,
                 m.expires_on, e.kind, e.quantity, m.unit, e.balance, e.why, a.full_name as recorded_by, a.at, e.act
             from stock_entry e
             join lot l on l.id = e.lot
             join material_lot m on m.id = e.material_lot
             join material t on t.id = m.material
             join trail_act a on a.id = e.act
             where e.lot in (select id from family)
             order by e.id"
        ),
    },
    Query {
        name: "equipment_uses",
        title: "Equipment used",
        numeric: &[],
        sql: of_family!(
            "select e.id, l.number as lot, q.code, q.name, q.class, e.happened_on, p.full_name as used_by, e.act
             from equipment_event e
             join equipment q on q.id = e.equipment
             join lot l on l.id = e.lot
             join account p on p.id = e.account
             where e.lot in (select id from family)
             order by e.id"
        ),
    },
    Query {
        name: "deviations",
        title: "Deviations",
        numeric: &[],
        sql: of_family!(
            "select d.id, d.number, l.number as lot, d.title, d.described, d.occurred_on, d.step_words as step,
                 m.number as material_lot, q.code as equipment, a.full_name as opened_by, a.at as opened_at, d.act
             from deviation d
             join lot l on l.id = d.lot
             join trail_act a on a.id = d.act
             left join material_lot m on m.id = d.material_lot
             left join equipment q on q.id = d.equipment
             where d.lot in (select id from family)
             order by d.id"
        ),
    },
    Query {
        name: "deviation_entries",
        title: "Working records of the deviations",
        numeric: &[],
        sql: of_family!(
            "select e.id, d.number as deviation, e.kind, e.class, e.text, o.number as other_lot, s.number as study,
                 a.full_name as written_by, a.at, e.act
             from deviation d
             join deviation_entry e on e.deviation = d.id
             join trail_act a on a.id = e.act
             left join lot o on o.id = e.other_lot
             left join study s on s.id = e.study
             where d.lot in (select id from family)
             order by e.id"
        ),
    },
    Query {
        name: "packaging_counts",
        title: "Containers and labels counted",
        numeric: &["count"],
        sql: of_family!(
            "select e.id, l.number as lot, i.kind as item_kind, i.name as item, e.kind, e.count, e.supersedes, e.why,
                 a.full_name as counted_by, a.at, e.act
             from packaging_item i
             join lot l on l.id = i.lot
             join packaging_entry e on e.item = i.id
             join trail_act a on a.id = e.act
             where i.lot in (select id from family)
             order by e.id"
        ),
    },
    Query {
        name: "packaging_checks",
        title: "Reconciliations checked",
        numeric: &["issued", "accounted", "percent", "least_percent", "most_percent"],
        sql: of_family!(
            "select c.id, l.number as lot, i.name as item, c.issued, c.accounted, c.percent, i.least_percent,
                 i.most_percent, d.number as deviation, p.full_name as checked_by, c.act
             from packaging_item i
             join lot l on l.id = i.lot
             join packaging_check c on c.item = i.id
             join account p on p.id = c.account
             left join deviation d on d.id = c.deviation
             where i.lot in (select id from family)
             order by c.id"
        ),
    },
    Query {
        name: "retains",
        title: "Retains and what happened to them",
        numeric: &["containers", "quantity", "test_quantity"],
        sql: of_family!(
            "select r.id, r.number, l.number as lot, r.containers, r.quantity, r.unit, r.test_quantity, r.location,
                 r.stored_on, e.kind as event, e.happened_on, e.is_changed, e.note, coalesce(e.act, r.act) as act
             from retain r
             join lot l on l.id = r.lot
             left join retain_event e on e.retain = r.id
             where r.lot in (select id from family)
             order by r.id, e.id"
        ),
    },
    Query {
        name: "completeness_statements",
        title: "What was stated on the thirteen items, and on a record kept elsewhere",
        numeric: &["item"],
        sql: of_family!(
            "select c.id, l.number as lot, c.item, c.answer, c.text, a.full_name as stated_by, a.at, c.act
             from completeness_answer c join lot l on l.id = c.lot join trail_act a on a.id = c.act
             where c.lot in (select id from family)
             union all
             select e.id, l.number, null, 'kept elsewhere', e.reference || ', ' || e.place || ': ' || e.why,
                 a.full_name,
                 a.at, e.act
             from record_elsewhere e join lot l on l.id = e.lot join trail_act a on a.id = e.act
             where e.lot in (select id from family)
             order by 8"
        ),
    },
    Query {
        name: "certificates",
        title: "Certificates of analysis",
        numeric: &["version"],
        sql: of_family!(
            "select c.id, l.number as lot, c.version, c.why, c.content, a.full_name as signed_by, a.at as signed_at,
                 c.act
             from certificate c join lot l on l.id = c.lot join trail_act a on a.id = c.act
             where c.lot in (select id from family)
             order by c.id"
        ),
    },
    Query {
        name: "blank_sheets",
        title: "Blank sheets",
        numeric: &[],
        sql: of_family!(
            "select s.id, s.number, l.number as lot, s.purpose, p.full_name as given_to, e.kind as event, e.text,
                 a.full_name as recorded_by, a.at, coalesce(e.act, s.act) as act
             from blank_sheet s
             join lot l on l.id = s.lot
             join account p on p.id = s.issued_to
             left join blank_sheet_event e on e.blank_sheet = s.id
             left join trail_act a on a.id = e.act
             where s.lot in (select id from family)
             order by s.id, e.id"
        ),
    },
];
