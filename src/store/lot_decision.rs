//! Decisions on lots: what they rest on, the rows, and the text that is signed.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::lot_review::LotReview;
use super::review::facts::ReviewSample;
use super::{Answer, Day, Reader};
use crate::domain::specification::Limit;

/// A decision as it is shown.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LotDecision {
    pub id: i64,
    pub lot: i64,
    pub decision: String,
    pub decided_on: NaiveDate,
    pub shelf_life_assignment: Option<i64>,
    pub expires_on: Option<NaiveDate>,
    pub signature: i64,
    pub act: i64,
    pub statement: Option<String>,
}

const SELECT: &str =
    "select d.id, d.lot, d.decision, d.decided_on, d.shelf_life_assignment, d.expires_on, d.signature,
        d.act, g.statement
    from lot_decision d join signature g on g.id = d.signature";

fn from_row(row: &Row<'_>) -> rusqlite::Result<LotDecision> {
    Ok(LotDecision {
        id: row.get(0)?,
        lot: row.get(1)?,
        decision: row.get(2)?,
        decided_on: row.get::<_, Day>(3)?.0,
        shelf_life_assignment: row.get(4)?,
        expires_on: row.get::<_, Option<Day>>(5)?.map(|day| day.0),
        signature: row.get(6)?,
        act: row.get(7)?,
        statement: row.get(8)?,
    })
}

/// All decisions on a lot, oldest first; the newest counts.
pub fn of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Vec<LotDecision>> {
    reader.all(&format!("{SELECT} where d.lot = :lot order by d.id"), named_params! { ":lot": lot }, from_row)
}

/// What is about to be decided, as it is signed and stored.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewDecision {
    pub lot: i64,
    pub decision: &'static str,
    pub decided_on: NaiveDate,
    pub shelf_life_assignment: Option<i64>,
    pub expires_on: Option<NaiveDate>,
    /// Why, for a rejection.
    pub statement: Option<String>,
}

pub fn insert(change: &Change<'_>, new: &NewDecision, signature: i64) -> Answer<i64> {
    change.insert(
        "insert into lot_decision (lot, decision, decided_on, shelf_life_assignment, expires_on, signature)
         values (:lot, :decision, :decided_on, :assignment, :expires_on, :signature)",
        named_params! {
            ":lot": new.lot,
            ":decision": new.decision,
            ":decided_on": Day(new.decided_on),
            ":assignment": new.shelf_life_assignment,
            ":expires_on": new.expires_on.map(Day),
            ":signature": signature,
        },
    )
}

/// The text of a decision that is signed: the lot, what was decided, the expiry with the assignment it comes
/// from, the reason, and each release sample with the digest that its reviewer signed, as of an act.
///
/// A release is signed over what was looked through as well.
pub fn canonical(
    reader: &Reader<'_>,
    new: &NewDecision,
    review: Option<&LotReview>,
    up_to_act: i64,
) -> Answer<String> {
    let (number, digest) = reader.one(
        "lot with this number",
        "select number, formulation_digest from lot where id = :lot",
        named_params! { ":lot": new.lot },
        |row| Ok((row.get::<_, String>(0)?, row.get::<_, String>(1)?)),
    )?;
    let mut lines = vec![
        serde_json::json!(["lot", number, digest]),
        serde_json::json!(["decision", new.decision, new.decided_on.to_string(), new.statement]),
        serde_json::json!(["expiry", new.shelf_life_assignment, new.expires_on.map(|day| day.to_string())]),
    ];
    let signed = reader.all(
        "select s.number, g.digest
         from sample s
         join signature g on g.kind = 'sample' and g.subject = s.id and g.meaning = 'review'
         where s.lot = :lot and s.purpose = 'release' and g.act <= :act
         order by g.id",
        named_params! { ":lot": new.lot, ":act": up_to_act },
        |row| Ok(serde_json::json!(["reviewed", row.get::<_, String>(0)?, row.get::<_, String>(1)?])),
    )?;
    lines.extend(signed);
    lines.extend(
        review.map(|one| serde_json::json!(["looked through", one.up_to_act, one.corrections, one.digest])),
    );
    Ok(lines.iter().map(|line| format!("{line}\n")).collect())
}

/// The text that a signature under a lot went over, from the rows as they are; `None` for another signature.
pub fn canonical_of_signature(reader: &Reader<'_>, signature: i64) -> Answer<Option<String>> {
    let found = reader.maybe(
        &format!("{SELECT} where d.signature = :signature"),
        named_params! { ":signature": signature },
        from_row,
    )?;
    let Some(found) = found else { return super::certificate::canonical_of_signature(reader, signature) };
    let decision = if found.decision == "released" { "released" } else { "rejected" };
    let new = NewDecision {
        lot: found.lot,
        decision,
        decided_on: found.decided_on,
        shelf_life_assignment: found.shelf_life_assignment,
        expires_on: found.expires_on,
        statement: found.statement,
    };
    let review = super::lot_review::under(reader, signature)?;
    canonical(reader, &new, review.as_ref(), found.act).map(Some)
}

/// The release samples of a lot with the facts of their review.
pub fn release_samples(reader: &Reader<'_>, lot: i64) -> Answer<Vec<ReviewSample>> {
    let ids: Vec<i64> = reader.all(
        "select id from sample where lot = :lot and purpose = 'release' order by id",
        named_params! { ":lot": lot },
        |row| row.get(0),
    )?;
    super::review::facts::many(reader, &ids)
}

/// A latest release result of a lot.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ReleaseResult {
    pub sample: i64,
    pub number: String,
    pub test: String,
    pub title: String,
    pub component: String,
    pub shown: String,
    pub unit: String,
    pub verdict: String,
}

pub fn release_results(reader: &Reader<'_>, lot: i64) -> Answer<Vec<ReleaseResult>> {
    reader.all(
        "select s.id, s.number, t.test, t.title, r.component, r.shown, r.unit, r.verdict
         from sample s
         join sample_test t on t.sample = s.id
         join result r on r.sample_test = t.id
         where s.lot = :lot and s.purpose = 'release'
         and r.version = (select max(version) from result where sample_test = t.id)
         order by s.id, t.position, r.id",
        named_params! { ":lot": lot },
        |row| {
            Ok(ReleaseResult {
                sample: row.get(0)?,
                number: row.get(1)?,
                test: row.get(2)?,
                title: row.get(3)?,
                component: row.get(4)?,
                shown: row.get(5)?,
                unit: row.get(6)?,
                verdict: row.get(7)?,
            })
        },
    )
}

/// Titles of the tests with a release limit in the presentation's approved specification that have no result.
pub fn tests_missing(
    reader: &Reader<'_>,
    presentation: i64,
    results: &[ReleaseResult],
) -> Answer<Vec<String>> {
    let Some(version) = super::specification::approved_of(reader, presentation)? else {
        return Ok(vec!["every test: the presentation has no approved specification".to_string()]);
    };
    let content: crate::domain::specification::SpecificationContent = version.read()?;
    let is_limited = |limit: &Limit| match limit {
        Limit::None => false,
        Limit::Between { lower, upper } => lower.is_some() || upper.is_some(),
        Limit::Grades(_) | Limit::Components(_) => true,
    };
    let missing = content
        .tests
        .iter()
        .filter(|limits| is_limited(&limits.release))
        .filter(|limits| !results.iter().any(|result| result.test == limits.test));
    Ok(missing.map(|limits| limits.title.clone()).collect())
}
