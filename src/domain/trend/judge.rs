//! From history, earlier pulls and one result to the verdicts H, HL and HS.

use chrono::NaiveDate;
use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;
use serde_json::{Value, json};

use super::history::{History, Numbers, Scale, months};
use super::words::{self, Spoken};
use super::{Band, NewVerdict, TrendLevels, TrendVerdict};
use crate::domain::judgement::{FlagLevel, NewFlag, ResultQualifier, flag_kind};
use crate::science::regression::Point;
use crate::science::trend::context::{self, RULES, Rule as ContextRule};
use crate::science::trend::early_warning;
use crate::science::trend::history_screen::{Finding, screen, without};
use crate::science::trend::lot_trend;
use crate::science::trend::single_result::{self, Forecast, Rule};
use crate::science::trend::{Levels, Needs};

/// The judged value.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Seen {
    Exactly(Decimal),
    Above(Decimal),
    Below(Decimal),
    /// A count seen only between two inspections.
    Interval,
    /// Grades: they have an order and no distance.
    Words,
    /// No reportable value.
    Nothing,
}

impl Seen {
    pub fn of(value: Option<Decimal>, qualifier: ResultQualifier, is_interval: bool) -> Seen {
        match (qualifier, value) {
            (ResultQualifier::Equal, Some(_)) if is_interval => Seen::Interval,
            (ResultQualifier::Equal, Some(value)) => Seen::Exactly(value),
            (ResultQualifier::Above, Some(value)) => Seen::Above(value),
            (ResultQualifier::Below, Some(value)) => Seen::Below(value),
            (ResultQualifier::Words, _) => Seen::Words,
            _ => Seen::Nothing,
        }
    }
}

/// Until when, and within which limits, the lot's mean should stay.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Life {
    pub lower: Option<Decimal>,
    pub upper: Option<Decimal>,
    /// The lot's expiry from the assigned shelf life; none where none is assigned.
    pub expires_on: Option<NaiveDate>,
    pub started_on: NaiveDate,
}

/// One result to be judged.
#[derive(Clone, Debug)]
pub struct Case<'a> {
    pub history: &'a History,
    pub scale: Scale,
    /// The judged pull's age, from time zero to the day it was taken.
    pub days: i64,
    pub seen: Seen,
    pub levels: TrendLevels,
    /// Decimals that the method reports.
    pub decimals: u32,
    pub unit: &'a str,
    /// Asked on arms of the labelled condition alone.
    pub life: Option<Life>,
}

/// All verdicts on one result: H (or A), HL, and HS where it is asked. A result that has no number has only the
/// first, not evaluable.
pub fn judge(case: &Case<'_>) -> Vec<NewVerdict> {
    let missing = match case.seen {
        Seen::Nothing => Some("a reportable value"),
        Seen::Words => Some("numbers: grades have an order but no distance, so no forecast is made of them"),
        Seen::Interval => Some("counts known exactly: this one was seen only between two inspections"),
        Seen::Exactly(_) | Seen::Above(_) | Seen::Below(_) if case.history.has_bounds => {
            Some("values known exactly: some of the history are known only as bounds")
        }
        _ => None,
    };
    if let Some(needs) = missing {
        return vec![not_evaluable(case, "H", needs.to_string())];
    }
    match Numbers::of(case.history, case.scale, case.days) {
        None => vec![not_evaluable(case, "H", "values above zero on a logarithmic scale".to_string())],
        Some(numbers) => Judge::new(case, numbers).all(),
    }
}

fn not_evaluable(case: &Case<'_>, rule: &'static str, needs: String) -> NewVerdict {
    let needs = format!("needs {}", needs.trim_start_matches("needs "));
    let sentence = words::not_evaluable(rule, &needs);
    let flag = (rule == "H" || rule == "A").then(|| NewFlag {
        kind: flag_kind::NOT_EVALUABLE,
        level: FlagLevel::Context,
        sentence: sentence.clone(),
        numbers: json!({ "rule": rule, "needs": needs }),
    });
    NewVerdict {
        rule,
        verdict: TrendVerdict::NotEvaluable,
        sentence,
        needs: Some(needs),
        band: None,
        degrees_of_freedom: None,
        probability: None,
        levels: (rule != "HS").then_some(case.levels),
        month: None,
        detail: json!({ "scale": case.scale.words() }),
        flag,
    }
}

/// The band of a forecast in the unit of the test; `None` where a limit is no number.
pub fn band(numbers: &Numbers, forecast: &Forecast, levels: &TrendLevels) -> Option<Band> {
    let alert = forecast.limits(levels.alert)?;
    let action = forecast.limits(levels.action)?;
    let back = |y: f64| Some(numbers.back(y)).filter(|value| value.is_finite());
    Some(Band {
        lower: back(alert.lower)?,
        centre: back(alert.centre)?,
        upper: back(alert.upper)?,
        action_lower: back(action.lower)?,
        action_upper: back(action.upper)?,
    })
}

/// The forecast for an age.
pub fn forecast(numbers: &Numbers, days: i64) -> Result<Forecast, Needs> {
    single_result::forecast(&numbers.slices(), &numbers.own, months(days))
}

struct Judge<'a> {
    case: &'a Case<'a>,
    numbers: Numbers,
}

impl<'a> Judge<'a> {
    fn new(case: &'a Case<'a>, numbers: Numbers) -> Judge<'a> {
        Judge { case, numbers }
    }

    fn all(&self) -> Vec<NewVerdict> {
        let mut verdicts = vec![self.result()];
        if let Seen::Exactly(value) = self.case.seen
            && let Some(y) = self.numbers.scaled(self.numbers.judged(value))
        {
            let mut so_far = self.numbers.own.clone();
            so_far.push(Point { x: months(self.case.days), y });
            verdicts.push(self.lot_trend(&so_far));
            verdicts.extend(self.case.life.as_ref().map(|life| self.outlook(life, &so_far)));
        }
        verdicts
    }

    /// H, or A where there is no history.
    fn result(&self) -> NewVerdict {
        let rule = if self.numbers.lots.len() < 2 { "A" } else { "H" };
        match self.judged(rule) {
            Ok(verdict) => verdict,
            Err(Needs::Variance) => self.without_variance(rule),
            Err(needs) => not_evaluable(self.case, rule, needs.to_string()),
        }
    }

    fn judged(&self, rule: &'static str) -> Result<NewVerdict, Needs> {
        let case = self.case;
        let found = forecast(&self.numbers, case.days)?;
        let levels = case.levels.levels();
        let scaled = |value: Decimal| self.numbers.scaled(value).ok_or(Needs::FiniteNumbers);
        let (value, judgement) = match case.seen {
            Seen::Above(bound) => (bound, found.judge_bound(scaled(bound)?, true, levels)?),
            Seen::Below(bound) => (bound, found.judge_bound(scaled(bound)?, false, levels)?),
            Seen::Exactly(value) => {
                let value = self.numbers.judged(value);
                (value, found.judge(scaled(value)?, levels)?)
            }
            _ => return Err(Needs::ExactValues),
        };
        let band = band(&self.numbers, &found, &case.levels).ok_or(Needs::FiniteNumbers)?;
        let verdict = TrendVerdict::from(judgement.verdict);
        let spoken = Spoken { verdict, band, p: judgement.p, rule, is_weak: found.weak };
        let sentence = words::result(case, value, &spoken);
        let mut detail = self.detail(&found, value, levels);
        detail["value"] = json!(value);
        Ok(NewVerdict {
            rule,
            verdict,
            flag: out_of_trend(flag_kind::OUT_OF_TREND, verdict, &sentence, &detail),
            sentence,
            needs: None,
            band: Some(band),
            degrees_of_freedom: Some(judgement.df),
            probability: Some(judgement.p),
            levels: Some(case.levels),
            month: None,
            detail,
        })
    }

    /// Constant or exactly linear history: whether this result lies on the line can still be said.
    fn without_variance(&self, rule: &'static str) -> NewVerdict {
        let mut verdict = not_evaluable(self.case, rule, Needs::Variance.to_string());
        let all: Vec<Point> = self.numbers.lots.iter().flatten().chain(&self.numbers.own).copied().collect();
        let line = crate::science::regression::Line::fit(&all).ok();
        if let (Some(line), Seen::Exactly(value)) = (line, self.case.seen) {
            let at = self.numbers.back(line.at(months(self.case.days)));
            verdict.sentence = words::on_the_line(self.case, &verdict.sentence, value, at);
            if let Some(flag) = &mut verdict.flag {
                flag.sentence = verdict.sentence.clone();
            }
        }
        verdict
    }

    /// What stands beside the verdict: the published rules, the screen of the history, the weights.
    fn detail(&self, found: &Forecast, value: Decimal, levels: Levels) -> Value {
        let slices = self.numbers.slices();
        let y = self.numbers.scaled(value).unwrap_or_default();
        let new = Point { x: months(self.case.days), y };
        let context: Vec<Value> = RULES
            .map(|rule| match context::test(rule, &slices, &self.numbers.own, new) {
                Ok(test) => json!({ "rule": letter(rule), "p": test.p }),
                Err(needs) => json!({ "rule": letter(rule), "needs": needs.to_string() }),
            })
            .to_vec();
        let mut detail = json!({ "scale": self.case.scale.words(), "weak": found.weak, "context": context });
        if found.rule == Rule::H {
            detail["levels_equal"] = json!(found.levels_equal);
            detail["slopes_equal"] = json!(found.slopes_equal);
            detail["unusual_lots"] = json!(found.unusual_lots);
            let findings = screen(&slices, 0.01);
            if !findings.is_empty() {
                detail["screen"] = self.screened(&slices, &findings, new, levels);
            }
        }
        detail
    }

    /// Gross errors in the history: named, and what the verdict would be without them. The verdict stands as it
    /// is until a person has left them out.
    fn screened(&self, slices: &[&[Point]], findings: &[Finding], new: Point, levels: Levels) -> Value {
        let named: Vec<Value> = findings
            .iter()
            .map(|finding| {
                let lot = self.case.history.lots.get(finding.lot);
                let age = self.numbers.lots.get(finding.lot).and_then(|lot| lot.get(finding.result));
                json!({ "lot": lot.map(|lot| lot.number.clone()), "months": age.map(|age| age.x), "p": finding.p })
            })
            .collect();
        let cleaned = without(slices, findings);
        let cleaned: Vec<&[Point]> = cleaned.iter().map(Vec::as_slice).collect();
        let judged = single_result::forecast(&cleaned, &self.numbers.own, new.x)
            .and_then(|forecast| forecast.judge(new.y, levels));
        let verdict = judged.as_ref().map(|one| TrendVerdict::from(one.verdict).words());
        json!({ "results": named, "without": verdict.unwrap_or("not evaluable"), "p": judged.ok().map(|one| one.p) })
    }

    fn lot_trend(&self, so_far: &[Point]) -> NewVerdict {
        let levels = Levels::default();
        match lot_trend::judge(&self.numbers.slices(), so_far, levels) {
            Err(needs) => not_evaluable(self.case, "HL", needs.to_string()),
            Ok(found) => {
                let verdict = TrendVerdict::from(found.verdict);
                let sentence = words::lot_trend(self.case, verdict, &found);
                let detail = json!({ "scale": self.case.scale.words(), "slope": found.slope });
                NewVerdict {
                    rule: "HL",
                    verdict,
                    flag: out_of_trend(flag_kind::LOT_TREND, verdict, &sentence, &detail),
                    sentence,
                    needs: None,
                    band: None,
                    degrees_of_freedom: Some(found.df),
                    probability: Some(found.p),
                    levels: Some(TrendLevels::of_promise(None, 0)),
                    month: None,
                    detail,
                }
            }
        }
    }

    fn outlook(&self, life: &Life, so_far: &[Point]) -> NewVerdict {
        let missing = |needs: &str| not_evaluable(self.case, "HS", needs.to_string());
        if life.lower.is_none() && life.upper.is_none() {
            return missing("a shelf-life limit");
        }
        let Some(expires_on) = life.expires_on else {
            return missing("an expiry: no shelf life is assigned to this lot");
        };
        let expiry = months((expires_on - life.started_on).num_days());
        if months(self.case.days) > expiry {
            return missing("a pull before expiry: this one lies after it");
        }
        match early_warning::outlook(&self.numbers.slices(), so_far, expiry) {
            Err(needs) => missing(&needs.to_string()),
            Ok(outlook) => {
                let limit = |limit: Option<Decimal>| limit.and_then(|limit| self.numbers.scaled(limit));
                let (lower, upper) = (limit(life.lower), limit(life.upper));
                self.warned(life, expiry, &outlook, outlook.warning(lower, upper), (lower, upper))
            }
        }
    }

    fn warned(
        &self,
        life: &Life,
        expiry: f64,
        outlook: &early_warning::Outlook,
        warning: early_warning::Warning,
        limits: (Option<f64>, Option<f64>),
    ) -> NewVerdict {
        let verdict = TrendVerdict::from(warning.state);
        let sentence = words::outlook(self.case, life, expiry, &warning);
        let result = limits.0.map_or(0.0, |limit| outlook.below(limit, expiry).result)
            + limits.1.map_or(0.0, |limit| outlook.above(limit, expiry).result);
        let detail = json!({
            "scale": self.case.scale.words(),
            "expiry_months": expiry,
            "lower": life.lower,
            "upper": life.upper,
            "one_result_outside": result.min(1.0),
            "stray": outlook.stray,
        });
        let level = match verdict {
            TrendVerdict::VeryLikely => Some(FlagLevel::Exception),
            TrendVerdict::Likely => Some(FlagLevel::Mark),
            _ => None,
        };
        let kind = flag_kind::EARLY_WARNING;
        NewVerdict {
            rule: "HS",
            verdict,
            flag: level.map(|level| NewFlag {
                kind,
                level,
                sentence: sentence.clone(),
                numbers: detail.clone(),
            }),
            sentence,
            needs: None,
            band: None,
            degrees_of_freedom: None,
            probability: Some(warning.probability),
            levels: None,
            month: warning.month,
            detail,
        }
    }
}

/// Alert: a mark. Action: an exception (decision A13).
fn out_of_trend(
    kind: &'static str,
    verdict: TrendVerdict,
    sentence: &str,
    detail: &Value,
) -> Option<NewFlag> {
    let level = match verdict {
        TrendVerdict::Action => FlagLevel::Exception,
        TrendVerdict::Alert => FlagLevel::Mark,
        _ => return None,
    };
    Some(NewFlag { kind, level, sentence: sentence.to_string(), numbers: detail.clone() })
}

fn letter(rule: ContextRule) -> &'static str {
    match rule {
        ContextRule::A => "A",
        ContextRule::B => "B",
        ContextRule::C => "C",
        ContextRule::D => "D",
        ContextRule::E => "E",
    }
}

/// Whether a value lies outside the band's alert limits.
pub fn is_outside(band: &Band, value: Decimal) -> bool {
    value.to_f64().is_some_and(|value| value < band.lower || value > band.upper)
}
