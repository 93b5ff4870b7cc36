//! Versions declared alike, and results that a person left out of the history.

use rusqlite::named_params;

use crate::domain::trend::declare::{AlikeKind, ExclusionFacts, NewEquivalence, PairFacts};
use crate::domain::trend::history::Alike;
use crate::store::door::Change;
use crate::store::{Answer, Reader};

/// The pairs that count as alike now.
pub fn pairs(reader: &Reader<'_>) -> Answer<Alike> {
    let rows = reader.all(
        "select e.kind, e.one, e.other
         from trend_equivalence e
         where e.state = 'declared' and not exists (
             select 1 from trend_equivalence later
             where later.kind = e.kind and later.one = e.one and later.other = e.other and later.id > e.id)",
        [],
        |row| Ok((row.get::<_, String>(0)?, (row.get(1)?, row.get(2)?))),
    )?;
    let mut alike = Alike::default();
    for (kind, pair) in rows {
        match AlikeKind::from_words(&kind) {
            Some(AlikeKind::FormulationVersion) => alike.formulations.push(pair),
            Some(AlikeKind::MethodVersion) => alike.methods.push(pair),
            None => {}
        }
    }
    Ok(alike)
}

/// A declaration as it is shown.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Equivalence {
    pub id: i64,
    pub kind: String,
    pub one: i64,
    pub other: i64,
    pub one_words: String,
    pub other_words: String,
    pub state: String,
    pub why: String,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
    pub is_newest: bool,
}

/// All declarations, the newest first.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<Equivalence>> {
    reader.all(
        "select e.id, e.kind, e.one, e.other,
             case e.kind when 'formulation version'
                 then (select f.code || ' version ' || v.number from formulation_version v
                     join formulation f on f.id = v.formulation where v.id = e.one)
                 else (select m.code || ' version ' || v.number from method_version v
                     join method m on m.id = v.method where v.id = e.one) end,
             case e.kind when 'formulation version'
                 then (select f.code || ' version ' || v.number from formulation_version v
                     join formulation f on f.id = v.formulation where v.id = e.other)
                 else (select m.code || ' version ' || v.number from method_version v
                     join method m on m.id = v.method where v.id = e.other) end,
             e.state, e.why, a.full_name, a.at,
             not exists (select 1 from trend_equivalence later
                 where later.kind = e.kind and later.one = e.one and later.other = e.other and later.id > e.id)
         from trend_equivalence e join trail_act a on a.id = e.act
         order by e.id desc",
        [],
        |row| {
            Ok(Equivalence {
                id: row.get(0)?,
                kind: row.get(1)?,
                one: row.get(2)?,
                other: row.get(3)?,
                one_words: row.get::<_, Option<String>>(4)?.unwrap_or_default(),
                other_words: row.get::<_, Option<String>>(5)?.unwrap_or_default(),
                state: row.get(6)?,
                why: row.get(7)?,
                by: row.get(8)?,
                at: row.get(9)?,
                is_newest: row.get(10)?,
            })
        },
    )
}

pub fn insert(change: &Change<'_>, new: &NewEquivalence) -> Answer<i64> {
    let (one, other) = new.pair();
    change.insert(
        "insert into trend_equivalence (kind, one, other, state, why) values (:kind, :one, :other, :state, :why)",
        named_params! {
            ":kind": new.kind.words(),
            ":one": one,
            ":other": other,
            ":state": new.state(),
            ":why": new.why.trim(),
        },
    )
}

/// The text that was signed under a declaration; `None` where there is none.
pub fn canonical_of(reader: &Reader<'_>, id: i64) -> Answer<Option<String>> {
    let found = reader.maybe(
        "select kind, one, other, state, why from trend_equivalence where id = :id",
        named_params! { ":id": id },
        |row| {
            Ok((
                row.get::<_, String>(0)?,
                row.get(1)?,
                row.get(2)?,
                row.get::<_, String>(3)?,
                row.get::<_, String>(4)?,
            ))
        },
    )?;
    Ok(found.and_then(|(kind, one, other, state, why)| {
        let kind = AlikeKind::from_words(&kind)?;
        let new = NewEquivalence { kind, one, other, is_declared: state == "declared", why };
        Some(new.canonical())
    }))
}

/// What the rule asks of a pair.
pub fn facts(reader: &Reader<'_>, new: &NewEquivalence) -> Answer<PairFacts> {
    let (one, other) = new.pair();
    let sql = match new.kind {
        AlikeKind::FormulationVersion => {
            "select f.product = g.product,
                 (select count(distinct subject) from signature
                     where kind = 'formulation_version' and subject in (:one, :other) and meaning = 'approval') = 2
             from formulation_version v
             join formulation f on f.id = v.formulation
             join formulation_version w on w.id = :other
             join formulation g on g.id = w.formulation
             where v.id = :one"
        }
        AlikeKind::MethodVersion => {
            "select m.kind = n.kind and json_extract(v.content, '$.unit') = json_extract(w.content, '$.unit'),
                 (select count(distinct subject) from signature
                     where kind = 'method_version' and subject in (:one, :other) and meaning = 'approval') = 2
             from method_version v
             join method m on m.id = v.method
             join method_version w on w.id = :other
             join method n on n.id = w.method
             where v.id = :one"
        }
    };
    let found = reader.maybe(sql, named_params! { ":one": one, ":other": other }, |row| {
        Ok((row.get::<_, bool>(0)?, row.get::<_, bool>(1)?))
    })?;
    let (is_comparable, are_approved) = found.unwrap_or_default();
    let alike = pairs(reader)?;
    let known = match new.kind {
        AlikeKind::FormulationVersion => alike.formulations,
        AlikeKind::MethodVersion => alike.methods,
    };
    Ok(PairFacts { is_comparable, are_approved, is_declared_now: known.contains(&(one, other)) })
}

/// Approved versions to choose from, as (number, words), by their words.
pub fn choices(reader: &Reader<'_>, kind: AlikeKind) -> Answer<Vec<(i64, String)>> {
    let sql = match kind {
        AlikeKind::FormulationVersion => {
            "select v.id, p.code || ', ' || f.code || ' version ' || v.number
             from formulation_version v
             join formulation f on f.id = v.formulation
             join product p on p.id = f.product
             where exists (select 1 from signature
                 where kind = 'formulation_version' and subject = v.id and meaning = 'approval')
             order by p.code, f.code, v.number"
        }
        AlikeKind::MethodVersion => {
            "select v.id, m.code || ' ' || m.name || ' version ' || v.number
             from method_version v
             join method m on m.id = v.method
             where exists (select 1 from signature
                 where kind = 'method_version' and subject = v.id and meaning = 'approval')
             order by m.code, v.number"
        }
    };
    reader.all(sql, [], |row| Ok((row.get(0)?, row.get(1)?)))
}

/// A decision to leave a result out, or to take it back.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Exclusion {
    pub component: String,
    pub state: String,
    pub why: String,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

/// The decisions about a test's results, the newest first.
pub fn exclusions(reader: &Reader<'_>, sample_test: i64) -> Answer<Vec<Exclusion>> {
    reader.all(
        "select x.component, x.state, x.why, a.full_name, a.at
         from trend_exclusion x join trail_act a on a.id = x.act
         where x.sample_test = :test
         order by x.id desc",
        named_params! { ":test": sample_test },
        |row| {
            Ok(Exclusion {
                component: row.get(0)?,
                state: row.get(1)?,
                why: row.get(2)?,
                by: row.get(3)?,
                at: row.get(4)?,
            })
        },
    )
}

/// What the rule asks of a result.
pub fn exclusion_facts(reader: &Reader<'_>, sample_test: i64, component: &str) -> Answer<ExclusionFacts> {
    let params = named_params! { ":test": sample_test, ":component": component };
    let imported: Option<bool> = reader.maybe(
        "select r.imported is not null from result r
         where r.sample_test = :test and r.component = :component order by r.version desc limit 1",
        params,
        |row| row.get(0),
    )?;
    let state: Option<String> = reader.maybe(
        "select x.state from trend_exclusion x
         where x.sample_test = :test and x.component = :component order by x.id desc limit 1",
        params,
        |row| row.get(0),
    )?;
    Ok(ExclusionFacts {
        has_result: imported.is_some(),
        is_imported: imported.unwrap_or_default(),
        is_left_out: state.as_deref() == Some("left out"),
    })
}

pub fn insert_exclusion(
    change: &Change<'_>,
    sample_test: i64,
    component: &str,
    leaves_out: bool,
    why: &str,
) -> Answer<i64> {
    change.insert(
        "insert into trend_exclusion (sample_test, component, state, why) values (:test, :component, :state, :why)",
        named_params! {
            ":test": sample_test,
            ":component": component,
            ":state": if leaves_out { "left out" } else { "taken back" },
            ":why": why.trim(),
        },
    )
}
