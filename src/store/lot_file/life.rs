//! What became of the lot: decisions, distribution, studies, containers and pulls.

use super::{Query, of_family};

pub(super) const QUERIES: &[Query] = &[
    Query {
        name: "lot_decisions",
        title: "Release and rejection",
        numeric: &["shelf_life_months"],
        sql: of_family!(
            "select d.id, l.number as lot, d.decision, d.decided_on, d.expires_on, s.months as shelf_life_months,
                 s.storage_statement, s.market, g.signer_name as signed_by, d.act
             from lot_decision d
             join lot l on l.id = d.lot
             left join shelf_life_assignment s on s.id = d.shelf_life_assignment
             join signature g on g.id = d.signature
             where d.lot in (select id from family)
             order by d.id"
        ),
    },
    Query {
        name: "evaluation_conclusions",
        title: "Conclusions on shelf life",
        numeric: &["proposed_months"],
        sql: of_family!(
            "select c.id, l.number as lot, c.months as proposed_months,
                 json_extract(c.content, '$.condition') as condition,
                 json_extract(c.content, '$.binds') as binds, coalesce(m.left_out_because, 'chosen') as part,
                 c.inputs_digest, a.full_name as concluded_by, a.at as concluded_at, c.act
             from evaluation_conclusion_lot m
             join evaluation_conclusion c on c.id = m.conclusion
             join lot l on l.id = m.lot
             join trail_act a on a.id = c.act
             where m.lot in (select id from family)
             order by c.id"
        ),
    },
    Query {
        name: "lot_distributions",
        title: "Distribution",
        numeric: &[],
        sql: of_family!(
            "select x.id, l.number as lot, x.first_on, x.markets, x.act
             from lot_distribution x join lot l on l.id = x.lot
             where x.lot in (select id from family)
             order by x.id"
        ),
    },
    Query {
        name: "studies",
        title: "Studies",
        numeric: &[],
        sql: of_family!(
            "select s.id, s.number, l.number as lot, s.programme, p.code as protocol, v.number as protocol_version,
                 e.code as specification, w.number as specification_version, s.started_on, s.rule_set,
                 a.full_name as started_by, s.act
             from study s
             join lot l on l.id = s.lot
             left join protocol_version v on v.id = s.protocol_version
             left join protocol p on p.id = v.protocol
             left join specification_version w on w.id = s.specification_version
             left join specification e on e.id = w.specification
             join trail_act a on a.id = s.act
             where s.lot in (select id from family)
             order by s.id"
        ),
    },
    Query {
        name: "amendments",
        title: "Amendments",
        numeric: &[],
        sql: of_family!(
            "select m.id, s.number as study, p.code as protocol, v.number as protocol_version, m.why,
                 a.full_name as amended_by, a.at as amended_at, m.act
             from study_amendment m
             join study s on s.id = m.study
             join protocol_version v on v.id = m.protocol_version
             join protocol p on p.id = v.protocol
             join trail_act a on a.id = m.act
             where s.lot in (select id from family)
             order by m.id"
        ),
    },
    Query {
        name: "arms",
        title: "Arms",
        numeric: &[],
        sql: of_family!(
            "select m.id, s.number as study, m.position, c.name as condition, m.orientation, h.code as chamber,
                 m.limits_do, m.is_labelled_condition, m.is_contingent, m.container_text, t.why as triggered_because,
                 m.act
             from study_arm m
             join study s on s.id = m.study
             join condition c on c.id = m.condition
             left join chamber h on h.id = m.chamber
             left join arm_trigger t on t.study_arm = m.id
             where s.lot in (select id from family)
             order by s.id, m.position"
        ),
    },
    Query {
        name: "containers",
        title: "Containers on study",
        numeric: &[],
        sql: of_family!(
            "select c.id, s.number as study, m.position as arm, c.number, c.label, c.purpose, c.act
             from container c
             join study_arm m on m.id = c.study_arm
             join study s on s.id = m.study
             where s.lot in (select id from family)
             order by c.id"
        ),
    },
    Query {
        name: "container_events",
        title: "What became of the containers",
        numeric: &[],
        sql: of_family!(
            "select e.id, c.label as container, e.kind, x.number as sample, w.full_name as witness, e.note,
                 a.full_name as recorded_by, a.at as recorded_at, e.act
             from container_event e
             join container c on c.id = e.container
             join study_arm m on m.id = c.study_arm
             join study s on s.id = m.study
             left join sample x on x.pull = e.pull and e.pull is not null
             left join account w on w.id = e.witness
             join trail_act a on a.id = e.act
             where s.lot in (select id from family)
             order by e.id"
        ),
    },
    Query {
        name: "pulls",
        title: "Planned pulls",
        numeric: &[],
        sql: of_family!(
            "select p.id, s.number as study, m.position as arm, x.number as sample, p.age_text as age, p.due_on,
                 p.earliest_on, p.latest_on, p.test_within_days, p.containers_needed, p.is_last, p.act
             from pull p
             join study_arm m on m.id = p.study_arm
             join study s on s.id = m.study
             left join sample x on x.pull = p.id
             where s.lot in (select id from family)
             order by s.id, m.position, p.id"
        ),
    },
    Query {
        name: "pull_events",
        title: "What became of the pulls",
        numeric: &[],
        sql: of_family!(
            "select e.id, x.number as sample, e.kind, e.happened_at, e.happened_on, e.identity_by, e.note,
                 a.full_name as recorded_by, a.at as recorded_at, a.reason, e.act
             from pull_event e
             join pull p on p.id = e.pull
             join study_arm m on m.id = p.study_arm
             join study s on s.id = m.study
             left join sample x on x.pull = p.id
             join trail_act a on a.id = e.act
             where s.lot in (select id from family)
             order by e.id"
        ),
    },
];
