//! What a verdict says, in sentences. Limits are rounded outward, with as many decimals as it takes for the
//! shown numbers to tell the same story as the exact ones.

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;

use super::history::Scale;
use super::judge::{Case, Life, Seen};
use super::{Band, TrendLevels, TrendVerdict};
use crate::domain::moment::plus_months;
use crate::science::trend::early_warning::Warning;
use crate::science::trend::lot_trend::LotTrend;

/// What rule H or A found.
pub(super) struct Spoken {
    pub verdict: TrendVerdict,
    pub band: Band,
    pub p: f64,
    pub rule: &'static str,
    pub is_weak: bool,
}

pub(super) fn not_evaluable(rule: &str, needs: &str) -> String {
    let what = match rule {
        "HL" => "Trend of the lot",
        "HS" => "Early warning",
        _ => "Trend",
    };
    format!("{what} not evaluable: {needs}.")
}

/// `p 0.034`, `p < 0.0001`.
pub fn probability(p: f64) -> String {
    if p < 0.0001 { "p < 0.0001".to_string() } else { format!("p {}", significant(p, 2)) }
}

/// So many significant digits, without an exponent.
pub fn significant(value: f64, digits: i32) -> String {
    if value == 0.0 || !value.is_finite() {
        return "0".to_string();
    }
    let decimals = (digits - 1 - value.abs().log10().floor() as i32).clamp(0, 12);
    format!("{value:.*}", decimals as usize)
}

/// Lower limit rounded down, upper rounded up; with more decimals where the value would seem to lie elsewhere.
pub fn shown_band(value: Option<Decimal>, lower: f64, upper: f64, decimals: u32) -> (String, String) {
    let value = value.and_then(|value| value.to_f64());
    let is_outside = |lower: f64, upper: f64| value.is_some_and(|value| value < lower || value > upper);
    let wanted = is_outside(lower, upper);
    let mut places = decimals;
    loop {
        let scale = 10f64.powi(places as i32);
        let (low, high) = ((lower * scale).floor() / scale, (upper * scale).ceil() / scale);
        if is_outside(low, high) == wanted || places >= decimals + 6 {
            return (format!("{low:.*}", places as usize), format!("{high:.*}", places as usize));
        }
        places += 1;
    }
}

/// At least the method's decimals, at most two more.
fn shown_value(value: Decimal, decimals: u32) -> String {
    let value = value.round_dp(decimals + 2).normalize();
    let places = value.scale().max(decimals) as usize;
    format!("{value:.places$}")
}

/// `95 %`, `99.36 %`.
fn confidence(level: f64) -> String {
    let text = format!("{:.2}", 100.0 * (1.0 - level));
    format!("{} %", text.trim_end_matches('0').trim_end_matches('.'))
}

fn promised(levels: &TrendLevels) -> String {
    match levels.promise {
        None => String::new(),
        Some((percent, planned)) => {
            format!(" Promised for the lot: {percent} % false actions over {planned} planned pulls.")
        }
    }
}

pub(super) fn result(case: &Case<'_>, value: Decimal, found: &Spoken) -> String {
    let Band { lower, upper, action_lower, action_upper, .. } = found.band;
    let (head, low, high, level) = match found.verdict {
        TrendVerdict::Action => ("Trend action", action_lower, action_upper, case.levels.action),
        TrendVerdict::Alert => ("Trend alert", lower, upper, case.levels.alert),
        _ => ("In trend", lower, upper, case.levels.alert),
    };
    let side = if found.verdict == TrendVerdict::InTrend { "within" } else { "outside" };
    let sign = match case.seen {
        Seen::Above(_) => ">",
        Seen::Below(_) => "<",
        _ => "",
    };
    let (low, high) = shown_band(Some(value), low, high, case.decimals + 1);
    let weak = if found.is_weak { " Weak: with so few only a gross difference is found." } else { "" };
    format!(
        "{head}: {sign}{} lies {side} {low} to {high}, the {} forecast from {} (rule {}, {}).{weak}{}",
        shown_value(value, case.decimals),
        confidence(level),
        case.history.words(),
        found.rule,
        probability(found.p),
        promised(&case.levels),
    )
}

pub(super) fn on_the_line(case: &Case<'_>, sentence: &str, value: Decimal, line: f64) -> String {
    let places = case.decimals as usize + 1;
    let shown = format!("{line:.places$}");
    let is_on = format!("{:.places$}", value.to_f64().unwrap_or_default()) == shown;
    let side = if is_on { "on" } else { "off" };
    format!("{} This result lies {side} the line of the history, {shown}.", sentence)
}

pub(super) fn lot_trend(case: &Case<'_>, verdict: TrendVerdict, found: &LotTrend) -> String {
    let slope = match case.scale {
        Scale::AsMeasured => {
            format!("{}\u{202f}{}", significant(found.slope, 3), case.unit).trim_end().to_string()
        }
        Scale::Ln => format!("{}\u{202f}%", significant(100.0 * found.slope.exp_m1(), 3)),
    };
    let lots = case.history.lots.len();
    let says = match verdict {
        TrendVerdict::InTrend => "In trend: the lot changes like its history",
        TrendVerdict::Alert => "Lot’s trend, alert: it changes otherwise than its history",
        _ => "Lot’s trend, action: it changes otherwise than its history",
    };
    format!("{says}, by {slope} a month; {lots} other lots (rule HL, {}).", probability(found.p))
}

/// What an early warning means, in plain words.
pub(super) fn outlook(case: &Case<'_>, life: &Life, expiry: f64, warning: &Warning) -> String {
    let limits = match (life.lower, life.upper) {
        (Some(lower), Some(upper)) => format!("outside {lower} to {upper}"),
        (Some(lower), None) => format!("below {lower}"),
        (None, Some(upper)) => format!("above {upper}"),
        (None, None) => "outside".to_string(),
    };
    let probability = match warning.probability {
        p if p > 0.995 => "more than 99 %".to_string(),
        p if p < 0.005 => "less than 1 %".to_string(),
        p => format!("{:.0} %", 100.0 * p),
    };
    let verdict = TrendVerdict::from(warning.state);
    let unit = if case.unit.is_empty() { String::new() } else { format!("\u{202f}{}", case.unit) };
    let at_expiry = format!("{limits}{unit} at expiry, {expiry:.1} months");
    if verdict == TrendVerdict::NoWarning {
        return format!(
            "No early warning: {probability} probable that the lot’s mean lies {at_expiry} (rule HS)."
        );
    }
    let month = warning.month.map(|month| {
        let on = plus_months(life.started_on, u32::try_from(month).unwrap_or_default());
        format!("; more likely outside than inside from month {month}, {}", on.format("%B %Y"))
    });
    format!(
        "{} out before expiry: {probability} probable that the lot’s mean lies {at_expiry}{} (rule HS). Computed \
         from this lot and {} others; it is no result and no out of specification.",
        if verdict == TrendVerdict::VeryLikely { "Very likely" } else { "Likely" },
        month.unwrap_or_default(),
        case.history.lots.len(),
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn shown_limits_tell_what_the_exact_ones_tell() {
        let value = |text: &str| Some(text.parse::<Decimal>().unwrap());
        assert_eq!(shown_band(None, 96.912, 99.208, 1), ("96.9".to_string(), "99.3".to_string()));
        // 96.94 lies outside 96.95 to 99.2 and must not stand inside 96.9 to 99.2.
        assert_eq!(shown_band(value("96.94"), 96.95, 99.2, 1).0, "96.95");
        assert_eq!(shown_band(value("96.9"), 96.95, 99.2, 1).0, "96.95");
        assert_eq!(shown_band(value("97"), 96.95, 99.2, 1).0, "96.9");
    }

    #[test]
    fn probabilities_have_two_digits_or_are_very_small() {
        assert_eq!(probability(0.0341), "p 0.034");
        assert_eq!(probability(0.00004), "p < 0.0001");
        assert_eq!(probability(1.0), "p 1.0");
        assert_eq!((confidence(0.05), confidence(0.00639)), ("95 %".to_string(), "99.36 %".to_string()));
        assert_eq!(significant(-0.16042, 3), "-0.160");
    }
}
