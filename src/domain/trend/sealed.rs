//! Forecasts that are sealed before a reading is made, so that it can be proved that they were.

use serde::{Deserialize, Serialize};

use super::history::{History, Numbers, Scale};
use super::judge::{band, forecast};
use super::{Band, TrendLevels};
use crate::domain::digest::sha256_hex;

/// The forecast of one test and component at the pull's planned age. Its canonical text is digested and kept.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct SealedForecast {
    pub test: String,
    pub component: String,
    /// Planned age, in days after time zero.
    pub days: i64,
    /// `H` or `A`; empty where no forecast could be made.
    pub rule: String,
    pub alert_level: f64,
    pub action_level: f64,
    pub band: Option<Band>,
    pub degrees_of_freedom: Option<f64>,
    /// What a forecast would have needed.
    pub needs: Option<String>,
    /// Digest of the history it rests on.
    pub history: String,
}

/// What is forecast.
#[derive(Clone, Copy, Debug)]
pub struct Planned<'a> {
    pub test: &'a str,
    pub component: &'a str,
    pub days: i64,
    pub scale: Scale,
    pub levels: TrendLevels,
}

impl SealedForecast {
    /// Makes the forecast from the history as it stands.
    pub fn of(history: &History, planned: &Planned<'_>) -> SealedForecast {
        let found = made(history, planned);
        let needs = found.as_ref().err().cloned();
        let found = found.ok();
        SealedForecast {
            test: planned.test.to_string(),
            component: planned.component.to_string(),
            days: planned.days,
            rule: found.as_ref().map(|(rule, _, _)| rule.to_string()).unwrap_or_default(),
            alert_level: planned.levels.alert,
            action_level: planned.levels.action,
            band: found.as_ref().map(|(_, band, _)| *band),
            degrees_of_freedom: found.map(|(_, _, df)| df),
            needs,
            history: history.digest(),
        }
    }

    /// The text that is stored and digested.
    pub fn canonical(&self) -> String {
        serde_json::to_string(self).unwrap_or_default()
    }

    pub fn digest(&self) -> String {
        sha256_hex(self.canonical().as_bytes())
    }

    /// Reads what [`SealedForecast::canonical`] wrote.
    pub fn read(text: &str) -> Option<SealedForecast> {
        serde_json::from_str(text).ok()
    }
}

fn made(history: &History, planned: &Planned<'_>) -> Result<(&'static str, Band, f64), String> {
    if history.has_bounds {
        return Err("needs values known exactly: some of the history are known only as bounds".to_string());
    }
    let numbers = Numbers::of(history, planned.scale, planned.days)
        .ok_or_else(|| "needs values above zero on a logarithmic scale".to_string())?;
    let found = forecast(&numbers, planned.days).map_err(|needs| needs.to_string())?;
    let band = band(&numbers, &found, &planned.levels).ok_or_else(|| "needs finite limits".to_string())?;
    Ok((if numbers.lots.len() < 2 { "A" } else { "H" }, band, found.mixture.df()))
}

/// How the forecast of a judged result was sealed.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Sealing {
    BeforeReading { days_late: i64 },
    NotBeforeReading,
}

impl Sealing {
    pub fn words(self) -> String {
        match self {
            Sealing::BeforeReading { days_late: 0 } => {
                "Forecast sealed when the window opened, before the reading.".to_string()
            }
            Sealing::BeforeReading { days_late: 1 } => {
                "Forecast sealed 1 day late, before the reading.".to_string()
            }
            Sealing::BeforeReading { days_late } => {
                format!("Forecast sealed {days_late} days late, before the reading.")
            }
            Sealing::NotBeforeReading => "Forecast not sealed before the reading.".to_string(),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::trend::history::{Entry, HistoryLot};

    fn history() -> History {
        let entries = |shift: i64| {
            let entry = |place: i64| Entry {
                result: shift * 10 + place,
                days: place * 91,
                value: rust_decimal::Decimal::new(1000 - 2 * place + shift + (place * place * shift) % 3, 1),
            };
            (0..6).map(entry).collect()
        };
        let lot = |lot: i64| HistoryLot { lot, number: format!("L{lot}"), entries: entries(lot) };
        History { lots: (1..=4).map(lot).collect(), ..History::default() }
    }

    #[test]
    fn a_sealed_forecast_reads_back_and_its_digest_tells_any_difference() {
        let levels = TrendLevels::of_promise(None, 0);
        let planned = Planned { test: "assay", component: "", days: 91, scale: Scale::AsMeasured, levels };
        let sealed = SealedForecast::of(&history(), &planned);
        let band = sealed.band.unwrap();
        assert!(band.action_lower < band.lower && band.lower < band.centre && band.centre < band.upper);
        assert_eq!(SealedForecast::read(&sealed.canonical()).as_ref(), Some(&sealed));
        let mut fewer = history();
        fewer.lots.pop();
        assert_ne!(SealedForecast::of(&fewer, &planned).digest(), sealed.digest());
        let late = Planned { days: 4000, ..planned };
        assert_eq!(
            SealedForecast::of(&history(), &late).needs.as_deref(),
            Some("needs a history that reaches 131.4 months")
        );
    }
}
