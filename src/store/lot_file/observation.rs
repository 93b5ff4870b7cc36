//! What was observed, judged, corrected, checked and signed.

use super::{Query, of_family};

pub(super) const QUERIES: &[Query] = &[
    Query {
        name: "samples",
        title: "Samples",
        numeric: &[],
        sql: of_family!(
            "select s.id, s.number, s.purpose, l.number as lot, st.number as study, m.position as arm,
                 c.name as condition, m.orientation, p.age_text as age, s.limit_set, s.containers,
                 s.condition_on_receipt, s.handed_over_by, s.received_on, s.act
             from sample s
             join lot l on l.id = s.lot
             left join pull p on p.id = s.pull
             left join study_arm m on m.id = p.study_arm
             left join study st on st.id = m.study
             left join condition c on c.id = m.condition
             where s.lot in (select id from family)
             order by st.id, m.position, p.id, s.id"
        ),
    },
    Query {
        name: "tests",
        title: "Tests asked of the samples",
        numeric: &[],
        sql: of_family!(
            "select t.id, s.number as sample, t.position, t.test, t.title, m.code as method,
                 v.number as method_version, t.act
             from sample_test t
             join sample s on s.id = t.sample
             join method_version v on v.id = t.method_version
             join method m on m.id = v.method
             where s.lot in (select id from family)
             order by s.id, t.position"
        ),
    },
    Query {
        name: "readings",
        title: "Readings",
        numeric: &["value"],
        sql: of_family!(
            "select r.id, s.number as sample, t.test, t.title, c.label as container, r.replicate, r.field, r.typed,
                 r.value, r.qualifier, i.code as instrument, a.full_name as read_by, a.at as recorded_at, r.read_at,
                 r.due_at, r.inspected_every, r.hints, r.hint_answer, r.supersedes, n.id as superseded_by,
                 case when r.supersedes is null then null else a.reason end as reason, r.act
             from reading r
             join sample_test t on t.id = r.sample_test
             join sample s on s.id = t.sample
             left join container c on c.id = r.container
             left join instrument i on i.id = r.instrument
             left join reading n on n.supersedes = r.id
             join trail_act a on a.id = r.act
             where s.lot in (select id from family)
             order by s.id, t.position, r.id"
        ),
    },
    Query {
        name: "corrections",
        title: "Corrections, was and is",
        numeric: &[],
        sql: of_family!(
            "select r.id, s.number as sample, t.title, c.label as container, r.replicate, r.field, o.typed as was,
                 r.typed as \"is\", a.reason, a.full_name as corrected_by, a.at as corrected_at,
                 b.full_name as first_read_by, b.at as first_recorded_at, r.act
             from reading r
             join reading o on o.id = r.supersedes
             join sample_test t on t.id = r.sample_test
             join sample s on s.id = t.sample
             left join container c on c.id = r.container
             join trail_act a on a.id = r.act
             join trail_act b on b.id = o.act
             where s.lot in (select id from family)
             order by r.id"
        ),
    },
    Query {
        name: "results",
        title: "Results",
        numeric: &["value", "sd", "n"],
        sql: of_family!(
            "select r.id, s.number as sample, t.test, t.title, r.component, r.version, r.value, r.qualifier, r.shown,
                 coalesce(json_extract(r.detail, '$.limit'), 'no limit') as limits, r.unit, r.verdict, r.sd, r.n,
                 case when r.version = (select max(version) from result where sample_test = r.sample_test)
                     then 1 else 0 end as is_newest,
                 case when r.imported is null then 0 else 1 end as is_imported, r.import_line, r.detail,
                 a.full_name as completed_by, a.at as completed_at, r.act
             from result r
             join sample_test t on t.id = r.sample_test
             join sample s on s.id = t.sample
             join trail_act a on a.id = r.act
             where s.lot in (select id from family)
             order by s.id, t.position, r.version, r.id"
        ),
    },
    Query {
        name: "flags",
        title: "What the judgement found",
        numeric: &[],
        sql: of_family!(
            "select f.id, s.number as sample, t.title, r.version, f.kind, f.level, f.sentence, f.numbers, f.act
             from flag f
             join result r on r.id = f.result
             join sample_test t on t.id = r.sample_test
             join sample s on s.id = t.sample
             where s.lot in (select id from family)
             order by f.id"
        ),
    },
    Query {
        name: "trend_verdicts",
        title: "Trend verdicts",
        numeric: &["lower", "centre", "upper", "degrees_of_freedom", "probability"],
        sql: of_family!(
            "select v.id, s.number as sample, t.title, r.component, r.version, v.rule, v.verdict, v.sentence, v.lower,
                 v.centre, v.upper, v.action_lower, v.action_upper, v.degrees_of_freedom, v.probability, v.alert_level,
                 v.action_level, v.needs, h.digest as history_digest, v.judged_on, v.detail, v.act
             from trend_verdict v
             join result r on r.id = v.result
             join sample_test t on t.id = r.sample_test
             join sample s on s.id = t.sample
             left join trend_history h on h.id = v.history
             where s.lot in (select id from family)
             order by s.id, t.position, v.id"
        ),
    },
    Query {
        name: "trend_forecasts",
        title: "Forecasts sealed before their readings",
        numeric: &[],
        sql: of_family!(
            "select f.id, s.number as sample, t.title, f.component, a.at as sealed_at, e.days_late, f.digest,
                 f.content, f.act
             from trend_forecast f
             join trend_seal e on e.id = f.seal
             join sample_test t on t.id = f.sample_test
             join sample s on s.id = t.sample
             join trail_act a on a.id = f.act
             where s.lot in (select id from family) and exists (select 1 from reading where sample_test = t.id)
             order by s.id, t.position, f.id"
        ),
    },
    Query {
        name: "trend_exclusions",
        title: "Results left out of the history of later verdicts",
        numeric: &[],
        sql: of_family!(
            "select x.id, s.number as sample, t.title, x.component, x.state, x.why, a.full_name as decided_by,
                 a.at as decided_at, x.act
             from trend_exclusion x
             join sample_test t on t.id = x.sample_test
             join sample s on s.id = t.sample
             join trail_act a on a.id = x.act
             where s.lot in (select id from family)
             order by x.id"
        ),
    },
    Query {
        name: "stage_losses",
        title: "Stages passed on without their readings",
        numeric: &[],
        sql: of_family!(
            "select x.id, s.number as sample, c.label as container, x.stage, x.why, a.full_name as closed_by,
                 a.at as closed_at, x.act
             from stage_loss x
             join sample s on s.id = x.sample
             left join container c on c.id = x.container
             join trail_act a on a.id = x.act
             where s.lot in (select id from family)
             order by x.id"
        ),
    },
    Query {
        name: "investigations",
        title: "Investigations",
        numeric: &[],
        sql: of_family!(
            "select i.id, i.number, s.number as sample, t.title, i.first_known_at, p.full_name as steered_by,
                 i.clock_due_on, e.kind, e.text, l.number as other_lot, a.full_name as written_by, a.at as written_at,
                 coalesce(e.act, i.act) as act
             from investigation i
             join result r on r.id = i.result
             join sample_test t on t.id = r.sample_test
             join sample s on s.id = t.sample
             left join account p on p.id = i.steered_by
             left join investigation_entry e on e.investigation = i.id
             left join lot l on l.id = e.other_lot
             left join trail_act a on a.id = e.act
             where s.lot in (select id from family)
             order by i.id, e.id"
        ),
    },
    Query {
        name: "checks",
        title: "Laboratory checks",
        numeric: &[],
        sql: of_family!(
            "select c.id, s.number as sample, t.title, c.version, c.verdict, c.why, a.full_name as checked_by,
                 a.at as checked_at, c.act
             from result_check c
             join sample_test t on t.id = c.sample_test
             join sample s on s.id = t.sample
             join trail_act a on a.id = c.act
             where s.lot in (select id from family)
             order by c.id"
        ),
    },
    Query {
        name: "answers",
        title: "Answers to exceptions",
        numeric: &[],
        sql: of_family!(
            "select x.id, s.number as sample, x.about, f.sentence, x.answer, a.full_name as answered_by,
                 a.at as answered_at, x.act
             from exception_answer x
             join sample s on s.id = x.sample
             left join flag f on f.id = x.flag
             join trail_act a on a.id = x.act
             where s.lot in (select id from family)
             order by x.id"
        ),
    },
    Query {
        name: "reviews",
        title: "Decisions of the review",
        numeric: &[],
        sql: of_family!(
            "select d.id, s.number as sample, d.decision, d.content_digest, d.why, a.full_name as decided_by,
                 a.at as decided_at, d.act
             from review_decision d
             join sample s on s.id = d.sample
             join trail_act a on a.id = d.act
             where s.lot in (select id from family)
             order by d.id"
        ),
    },
    Query {
        name: "signatures",
        title: "Signatures",
        numeric: &[],
        sql: of_family!(
            "select g.id, replace(g.kind, '_', ' ') as record, coalesce(s.number, g.subject) as number, g.meaning,
                 g.signer_name as signed_by, a.role, a.at as signed_at, a.offset_minutes, g.statement, g.digest, g.act
             from signature g
             join trail_act a on a.id = g.act
             left join sample s on g.kind = 'sample' and s.id = g.subject
             where (g.kind = 'lot' and g.subject in (select id from family))
                 or (g.kind = 'sample' and s.lot in (select id from family))
                 or (g.kind = 'deviation' and g.subject in (
                     select id from deviation where lot in (select id from family)))
                 or (g.kind = 'batch_record' and g.subject in (
                     select id from batch_record where lot in (select id from family)))
                 or (g.kind = 'formulation_version' and g.subject in (
                     select formulation_version from lot where id in (select id from family)))
                 or (g.kind = 'protocol_version' and g.subject in (
                     select protocol_version from study where lot in (select id from family)
                     union
                     select m.protocol_version from study_amendment m join study y on y.id = m.study
                     where y.lot in (select id from family)))
                 or (g.kind = 'specification_version' and g.subject in (
                     select specification_version from study where lot in (select id from family)
                     union
                     select specification_version from sample where lot in (select id from family)))
                 or (g.kind = 'method_version' and g.subject in (
                     select t.method_version from sample_test t join sample x on x.id = t.sample
                     where x.lot in (select id from family)))
                 or (g.kind = 'shelf_life_assignment' and g.subject in (
                     select shelf_life_assignment from lot_decision where lot in (select id from family)))
                 or (g.kind = 'investigation' and g.subject in (
                     select i.id from investigation i
                     join result r on r.id = i.result
                     join sample_test t on t.id = r.sample_test
                     join sample x on x.id = t.sample
                     where x.lot in (select id from family)))
                 or (g.kind = 'evaluation_conclusion' and g.subject in (
                     select conclusion from evaluation_conclusion_lot where lot in (select id from family)))
             order by g.id"
        ),
    },
    Query {
        name: "attachments",
        title: "Attachments",
        numeric: &["size_bytes"],
        sql: of_family!(
            "select x.id, replace(x.kind, '_', ' ') as record, x.subject, x.file_name, x.media_type, x.size_bytes,
                 x.sha256, x.about, k.ratio as measured_ratio, a.full_name as attached_by, a.at as attached_at, x.act
             from attachment x
             left join photo_mark k on k.attachment = x.id
             join trail_act a on a.id = x.act
             where (x.kind = 'lot' and x.subject in (select id from family))
                 or (x.kind = 'study' and x.subject in (select id from study where lot in (select id from family)))
                 or (x.kind = 'sample' and x.subject in (select id from sample where lot in (select id from family)))
                 or (x.kind = 'sample_test' and x.subject in (
                     select t.id from sample_test t join sample s on s.id = t.sample
                     where s.lot in (select id from family)))
                 or (x.kind = 'investigation' and x.subject in (
                     select i.id from investigation i
                     join result r on r.id = i.result
                     join sample_test t on t.id = r.sample_test
                     join sample s on s.id = t.sample
                     where s.lot in (select id from family)))
             order by x.id, k.id"
        ),
    },
];
