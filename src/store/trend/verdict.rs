//! Trend verdicts as rows.

use rusqlite::{Row, named_params};

use crate::domain::trend::NewVerdict;
use crate::store::door::Change;
use crate::store::{Answer, Day, Reader};

/// A verdict as stored.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Verdict {
    pub id: i64,
    pub sample_test: i64,
    pub title: String,
    pub unit: String,
    pub component: String,
    pub version: i64,
    pub rule: String,
    pub verdict: String,
    pub sentence: String,
    pub age_days: i64,
    pub band: Option<[String; 5]>,
    pub degrees_of_freedom: Option<String>,
    pub probability: Option<String>,
    pub month: Option<i64>,
    pub history: Option<i64>,
    pub history_digest: Option<String>,
    pub forecast: Option<i64>,
    /// JSON.
    pub detail: String,
    pub act: i64,
}

const SELECT: &str =
    "select v.id, t.id, t.title, r.unit, r.component, r.version, v.rule, v.verdict, v.sentence,
        v.age_days, v.lower, v.centre, v.upper, v.action_lower, v.action_upper, v.degrees_of_freedom,
        v.probability, v.month, v.history, h.digest, v.forecast, v.detail, v.act
    from sample_test t
    join result r on r.sample_test = t.id
    join trend_verdict v on v.result = r.id
    left join trend_history h on h.id = v.history";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Verdict> {
    let text = |at: usize| row.get::<_, Option<String>>(at);
    let limits = [text(10)?, text(11)?, text(12)?, text(13)?, text(14)?];
    let band = match limits {
        [Some(lower), Some(centre), Some(upper), Some(action_lower), Some(action_upper)] => {
            Some([lower, centre, upper, action_lower, action_upper])
        }
        _ => None,
    };
    Ok(Verdict {
        id: row.get(0)?,
        sample_test: row.get(1)?,
        title: row.get(2)?,
        unit: row.get(3)?,
        component: row.get(4)?,
        version: row.get(5)?,
        rule: row.get(6)?,
        verdict: row.get(7)?,
        sentence: row.get(8)?,
        age_days: row.get(9)?,
        band,
        degrees_of_freedom: row.get(15)?,
        probability: row.get(16)?,
        month: row.get(17)?,
        history: row.get(18)?,
        history_digest: row.get(19)?,
        forecast: row.get(20)?,
        detail: row.get(21)?,
        act: row.get(22)?,
    })
}

/// What a verdict rests on and when it was given.
#[derive(Clone, Copy, Debug)]
pub struct Ground {
    pub result: i64,
    pub age_days: i64,
    pub history: i64,
    pub forecast: Option<i64>,
    pub judged_on: chrono::NaiveDate,
}

pub fn insert(change: &Change<'_>, ground: &Ground, new: &NewVerdict) -> Answer<i64> {
    let number = |value: Option<f64>| value.map(|value| value.to_string());
    let band =
        |pick: fn(&crate::domain::trend::Band) -> f64| new.band.as_ref().map(|band| pick(band).to_string());
    change.insert(
        "insert into trend_verdict (result, rule, verdict, sentence, age_days, needs, lower, centre, upper,
             action_lower, action_upper, degrees_of_freedom, probability, alert_level, action_level, month, history,
             forecast, judged_on, detail)
         values (:result, :rule, :verdict, :sentence, :days, :needs, :lower, :centre, :upper, :action_lower,
             :action_upper, :df, :probability, :alert, :action, :month, :history, :forecast, :judged_on, :detail)",
        named_params! {
            ":result": ground.result,
            ":rule": new.rule,
            ":verdict": new.verdict.words(),
            ":sentence": new.sentence,
            ":days": ground.age_days,
            ":needs": new.needs,
            ":lower": band(|band| band.lower),
            ":centre": band(|band| band.centre),
            ":upper": band(|band| band.upper),
            ":action_lower": band(|band| band.action_lower),
            ":action_upper": band(|band| band.action_upper),
            ":df": number(new.degrees_of_freedom),
            ":probability": number(new.probability),
            ":alert": number(new.levels.map(|levels| levels.alert)),
            ":action": number(new.levels.map(|levels| levels.action)),
            ":month": new.month.and_then(|month| i64::try_from(month).ok()),
            ":history": ground.history,
            ":forecast": ground.forecast,
            ":judged_on": Day(ground.judged_on),
            ":detail": new.detail.to_string(),
        },
    )
}

/// All verdicts on a test, the newest version first.
pub fn of_test(reader: &Reader<'_>, sample_test: i64) -> Answer<Vec<Verdict>> {
    reader.all(
        &format!("{SELECT} where t.id = :test order by r.version desc, r.id, v.id"),
        named_params! { ":test": sample_test },
        from_row,
    )
}

/// The verdicts on the newest results of a sample, in bench order.
pub fn of_sample(reader: &Reader<'_>, sample: i64) -> Answer<Vec<Verdict>> {
    reader.all(
        &format!(
            "{SELECT} where t.sample = :sample
                 and r.version = (select max(version) from result where sample_test = t.id)
             order by t.position, r.id, v.id"
        ),
        named_params! { ":sample": sample },
        from_row,
    )
}
