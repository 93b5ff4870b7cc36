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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::trend::history::{Entry, HistoryLot};

    /// Six lots of six pulls, falling by 0.1 a month with a small fixed scatter.
    fn history() -> History {
        let entry = |lot: i64, at: i64| Entry {
            result: lot * 10 + at,
            days: at * 91,
            value: Decimal::new(1000 - 3 * at + (lot * 7 + at * at * 3) % 5 - 2, 1),
        };
        let lot = |lot: i64| HistoryLot {
            lot,
            number: format!("L{lot}"),
            entries: (0..6).map(|at| entry(lot, at)).collect(),
        };
        History {
            lots: (1..=6).map(lot).collect(),
            own: (0..3).map(|at| entry(9, at)).collect(),
            ..History::default()
        }
    }

    fn case<'a>(history: &'a History, seen: Seen) -> Case<'a> {
        Case {
            history,
            scale: Scale::AsMeasured,
            days: 273,
            seen,
            levels: TrendLevels::of_promise(None, 0),
            decimals: 1,
            unit: "%",
            life: None,
        }
    }

    fn exactly(text: &str) -> Seen {
        Seen::Exactly(text.parse().unwrap())
    }

    #[test]
    fn what_has_no_number_is_not_evaluable_and_says_why() {
        let history = history();
        let bounds = History { has_bounds: true, ..history.clone() };
        let table = [
            (&history, Seen::Nothing, "needs a reportable value"),
            (&history, Seen::Words, "needs numbers: grades have an order but no distance"),
            (&history, Seen::Interval, "needs counts known exactly"),
            (&bounds, exactly("99.0"), "needs values known exactly: some of the history"),
        ];
        for (history, seen, words) in table {
            let verdicts = judge(&case(history, seen));
            assert_eq!(verdicts.len(), 1, "{words}");
            assert_eq!(verdicts[0].verdict, TrendVerdict::NotEvaluable);
            assert!(verdicts[0].needs.as_ref().unwrap().starts_with(words), "{:?}", verdicts[0].needs);
            assert_eq!(verdicts[0].flag.as_ref().unwrap().level, FlagLevel::Context);
        }
    }

    /// A value known only to lie above a bound stands out where its bound does, and is not judged elsewhere.
    #[test]
    fn a_bound_stands_out_or_is_not_judged() {
        let history = history();
        let of = |seen: Seen| judge(&case(&history, seen)).remove(0);
        assert_eq!(of(Seen::Above(Decimal::from(120))).verdict, TrendVerdict::Action);
        assert_eq!(of(Seen::Below(Decimal::from(80))).verdict, TrendVerdict::Action);
        let inside = of(Seen::Above(Decimal::from(98)));
        assert_eq!(inside.verdict, TrendVerdict::NotEvaluable);
        assert!(inside.needs.unwrap().contains("values known exactly"));
    }

    #[test]
    fn alert_is_a_mark_action_an_exception_and_in_trend_no_flag() {
        let history = history();
        let of = |value: &str| {
            let found = judge(&case(&history, exactly(value))).remove(0);
            (found.verdict, found.flag.map(|flag| flag.level))
        };
        let band = judge(&case(&history, exactly("99.0")))[0].band.unwrap();
        let alert = format!("{:.3}", (band.upper + band.action_upper) / 2.0);
        assert_eq!(of("99.1"), (TrendVerdict::InTrend, None));
        assert_eq!(of(&alert), (TrendVerdict::Alert, Some(FlagLevel::Mark)));
        assert_eq!(of("105"), (TrendVerdict::Action, Some(FlagLevel::Exception)));
    }

    /// Counts are judged on their logarithm: doubling means the same everywhere, so the unit does not matter.
    #[test]
    fn counts_are_judged_on_the_logarithm_and_zero_is_not() {
        let mut counts = history();
        let count = |entry: &mut Entry| entry.value = Decimal::from(5 + entry.result % 3);
        counts.lots.iter_mut().flat_map(|lot| &mut lot.entries).for_each(count);
        counts.own.iter_mut().for_each(count);
        let of = |value: &str| judge(&Case { scale: Scale::Ln, ..case(&counts, exactly(value)) }).remove(0);
        assert_eq!(of("6").verdict, TrendVerdict::InTrend);
        assert_eq!(of("40").verdict, TrendVerdict::Action);
        assert!(of("6").band.unwrap().lower > 0.0);
        counts.own[0].value = Decimal::ZERO;
        let zero = judge(&Case { scale: Scale::Ln, ..case(&counts, exactly("6")) }).remove(0);
        assert!(zero.needs.unwrap().contains("values above zero"));
    }

    /// A history that the method's resolution makes constant says only whether the result lies on its line.
    #[test]
    fn a_constant_history_says_whether_the_result_lies_on_its_line() {
        let mut constant = history();
        constant
            .lots
            .iter_mut()
            .flat_map(|lot| &mut lot.entries)
            .for_each(|one| one.value = Decimal::from(7));
        constant.own.iter_mut().for_each(|one| one.value = Decimal::from(7));
        for (value, words) in [("7.0", "lies on the line of the history, 7.00"), ("7.1", "lies off the line")]
        {
            let found = judge(&case(&constant, exactly(value))).remove(0);
            assert_eq!(found.verdict, TrendVerdict::NotEvaluable);
            assert!(found.sentence.contains(words), "{}", found.sentence);
        }
    }

    #[test]
    fn an_early_warning_names_what_it_lacks() {
        let history = history();
        let started_on = NaiveDate::from_ymd_opt(2026, 12, 1).unwrap();
        let life = Life { lower: Some(Decimal::from(95)), upper: None, expires_on: None, started_on };
        let of = |life: Life| {
            let found = judge(&Case { life: Some(life), ..case(&history, exactly("99.1")) });
            found.into_iter().find(|one| one.rule == "HS").unwrap()
        };
        assert!(of(life.clone()).needs.unwrap().contains("no shelf life is assigned"));
        assert_eq!(of(Life { lower: None, ..life.clone() }).needs.unwrap(), "needs a shelf-life limit");
        let past = Life { expires_on: Some(started_on), ..life.clone() };
        assert!(of(past).needs.unwrap().contains("this one lies after it"));
        let fine = of(Life { expires_on: NaiveDate::from_ymd_opt(2028, 12, 1), ..life });
        assert_eq!(fine.verdict, TrendVerdict::NoWarning, "{}", fine.sentence);
        assert!(fine.flag.is_none());
    }
}
