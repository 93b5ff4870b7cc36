//! Settings of the site: what may be set, within which bounds, and what holds where nothing is set.

use super::refusal::NamedReason;

/// One setting: a whole number with a unit.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Setting {
    /// As stored and used in forms.
    pub name: &'static str,
    /// With its unit.
    pub label: &'static str,
    pub hint: &'static str,
    pub default: i64,
    pub least: i64,
    pub most: i64,
}

/// Minutes without a request after which a session ends.
pub const IDLE_MINUTES: Setting = Setting {
    name: "session.idle-minutes",
    label: "Idle time before sign-out, minutes",
    hint: "5 to 30 (NIST SP 800-63B, level 2).",
    default: 30,
    least: 5,
    most: 30,
};

/// The same at the bench, which is a shared place.
pub const BENCH_IDLE_MINUTES: Setting = Setting {
    name: "bench.idle-minutes",
    label: "Idle time at the bench, minutes",
    hint: "5 to 30; 15 is common practice at a shared tablet.",
    default: 15,
    least: 5,
    most: 30,
};

const WINDOW_HINT: &str =
    "Whole days. A protocol may state its own; a running study keeps what it has until it is amended.";

const WINDOW_DAYS: &str = "0 to 31 whole days.";

/// A default window: days after the due date; never before it (decision A11, common practice).
const fn window(name: &'static str, label: &'static str, hint: &'static str, default: i64) -> Setting {
    Setting { name, label, hint, default, least: 0, most: 31 }
}

/// The default windows by age, young to old; [`super::window::Defaults`] reads them.
pub const WINDOWS: [Setting; 5] = [
    window("window.days-3", "Window of ages up to 3 days in use, days after the due date", WINDOW_HINT, 0),
    window("window.days-28", "Window of 4 to 28 days, days after the due date", WINDOW_DAYS, 1),
    window("window.months-2", "Window of 1 and 2 months, days after the due date", WINDOW_DAYS, 3),
    window("window.months-12", "Window of 3 to 12 months, days after the due date", WINDOW_DAYS, 7),
    window("window.later", "Window of later ages, days after the due date", WINDOW_DAYS, 14),
];

/// The level of the tests that decide whether lots are pooled.
pub const POOLING_PERCENT: Setting = Setting {
    name: "evaluation.pooling-percent",
    label: "Level of the tests for pooling lots, %",
    hint: "25 (ICH Q1E 2003, appendix B). Each conclusion keeps the level it was made with.",
    default: 25,
    least: 1,
    most: 50,
};

/// Days from production to release up to which the shelf life starts with the release (req_L11).
pub const LIFE_FROM_RELEASE_DAYS: Setting = Setting {
    name: "expiry.release-days",
    label: "Shelf life counts from the release up to so many days after production, days",
    hint: "30 by EMA CPMP/QWP/072/96; later releases count from production. 0: always from production.",
    default: 30,
    least: 0,
    most: 30,
};

pub const ALL: [Setting; 9] = [
    IDLE_MINUTES,
    BENCH_IDLE_MINUTES,
    WINDOWS[0],
    WINDOWS[1],
    WINDOWS[2],
    WINDOWS[3],
    WINDOWS[4],
    POOLING_PERCENT,
    LIFE_FROM_RELEASE_DAYS,
];

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum SettingRefusal {
    #[error("{label}: {value} is outside {least} to {most}. Choose a value inside.")]
    SettingOutside { name: String, label: String, value: i64, least: i64, most: i64 },
}

impl NamedReason for SettingRefusal {
    fn field(&self) -> Option<String> {
        let SettingRefusal::SettingOutside { name, .. } = self;
        Some(name.clone())
    }
}

impl Setting {
    /// The value that holds: the stored one, or the default where none is stored or it is no number.
    pub fn value(&self, stored: Option<&str>) -> i64 {
        stored.and_then(|text| text.parse().ok()).unwrap_or(self.default)
    }

    /// Refuses a value outside the bounds.
    pub fn may_be(&self, value: i64) -> Result<(), SettingRefusal> {
        if (self.least..=self.most).contains(&value) {
            return Ok(());
        }
        Err(SettingRefusal::SettingOutside {
            name: self.name.to_string(),
            label: self.label.to_string(),
            value,
            least: self.least,
            most: self.most,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn bounds_hold_and_defaults_stand_in() {
        for (value, good) in [(4, false), (5, true), (30, true), (31, false)] {
            assert_eq!(IDLE_MINUTES.may_be(value).is_ok(), good, "{value}");
        }
        assert_eq!(IDLE_MINUTES.value(None), 30);
        assert_eq!(BENCH_IDLE_MINUTES.value(Some("10")), 10);
    }
}
