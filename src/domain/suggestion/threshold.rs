//! The thresholds of the rules as settings of the site: whole numbers in stated units. Defaults are common practice.

use crate::domain::setting::Setting;
use crate::science::warning_rules::Settings;

/// One threshold: the setting, what a whole number of it stands for, and where it goes.
#[derive(Clone, Copy)]
pub struct Threshold {
    pub setting: Setting,
    per: f64,
    put: fn(&mut Settings) -> &mut f64,
}

const HINT: &str = "Common practice; the firing rate on clean lots is measured with the defaults.";

const fn threshold(
    name: &'static str,
    label: &'static str,
    per: f64,
    range: (i64, i64, i64),
    put: fn(&mut Settings) -> &mut f64,
) -> Threshold {
    let (default, least, most) = range;
    Threshold { setting: Setting { name, label, hint: HINT, default, least, most }, per, put }
}

/// All thresholds, rule by rule.
pub const ALL: [Threshold; 27] = [
    threshold("suggest.r1-f", "R1: F at or below this share of the first, %", 100.0, (85, 10, 100), |s| {
        &mut s.caking_f_share
    }),
    threshold(
        "suggest.r1-inversions",
        "R1: inversions at or above this share of the first, %",
        100.0,
        (150, 100, 1000),
        |s| &mut s.caking_inversion_share,
    ),
    threshold("suggest.r1-more", "R1: and at least so many inversions more", 1.0, (3, 0, 100), |s| {
        &mut s.caking_inversions_more
    }),
    threshold("suggest.r2-drop", "R2: drop of F in one interval, hundredths", 100.0, (20, 1, 100), |s| {
        &mut s.collapse_drop
    }),
    threshold("suggest.r2-share", "R2: share of the whole loss, %", 100.0, (50, 1, 100), |s| {
        &mut s.collapse_share
    }),
    threshold("suggest.r2-before", "R2: F before the drop, hundredths", 100.0, (80, 1, 110), |s| {
        &mut s.collapse_before
    }),
    threshold("suggest.r3-zeta", "R3: zeta potential that counts as charged, mV", 1.0, (25, 1, 200), |s| {
        &mut s.charged_zeta
    }),
    threshold(
        "suggest.r3-inversions",
        "R3: inversions up to which redispersion is easy",
        1.0,
        (10, 1, 200),
        |s| &mut s.easy_inversions,
    ),
    threshold(
        "suggest.r4-watch",
        "R4: growth that is watched, % of the first",
        100.0,
        (110, 101, 1000),
        |s| &mut s.growth_watch,
    ),
    threshold("suggest.r4-fail", "R4: strong growth, % of the first", 100.0, (150, 101, 1000), |s| {
        &mut s.growth_fail
    }),
    threshold("suggest.r5-zeta", "R5: share of the zeta potential lost, %", 100.0, (30, 1, 100), |s| {
        &mut s.zeta_loss
    }),
    threshold("suggest.r5-spread", "R5: spread of sizes, % of the first", 100.0, (150, 101, 1000), |s| {
        &mut s.spread_share
    }),
    threshold(
        "suggest.r6-viscosity",
        "R6: viscosity at or below this share of the first, %",
        100.0,
        (80, 1, 100),
        |s| &mut s.thinning_share,
    ),
    threshold(
        "suggest.r6-factor",
        "R6: predicted and observed rate apart, % at most",
        100.0,
        (200, 100, 1000),
        |s| &mut s.rate_factor,
    ),
    threshold("suggest.r7-logs", "R7: growth of counts, tenths of a log", 10.0, (10, 1, 60), |s| {
        &mut s.microbial_logs
    }),
    threshold("suggest.r9-assay", "R9: rise of the assay, tenths of a percent", 10.0, (30, 1, 500), |s| {
        &mut s.assay_rise
    }),
    threshold("suggest.r9-weight", "R9: loss of weight, tenths of a percent", 10.0, (10, 1, 500), |s| {
        &mut s.weight_loss
    }),
    threshold("suggest.r10-share", "R10: scatter, % of the first", 100.0, (200, 100, 2000), |s| {
        &mut s.scatter_share
    }),
    threshold(
        "suggest.r10-least",
        "R10: and at least so many tenths of a percent",
        10.0,
        (30, 1, 500),
        |s| &mut s.scatter_least,
    ),
    threshold(
        "suggest.r10-apart",
        "R10: top and bottom apart, tenths of a percent",
        10.0,
        (50, 1, 500),
        |s| &mut s.top_bottom,
    ),
    threshold("suggest.r10-first", "R10: first assay below so many % of theory", 1.0, (90, 10, 100), |s| {
        &mut s.first_assay
    }),
    threshold("suggest.r11-label", "R11: share of the label that is watched, %", 100.0, (80, 1, 100), |s| {
        &mut s.label_share
    }),
    threshold("suggest.r12-ph", "R12: change of pH, hundredths", 100.0, (50, 1, 500), |s| &mut s.ph_change),
    threshold(
        "suggest.r13-sds",
        "R13: difference of the orientations, tenths of the pooled sd",
        10.0,
        (20, 1, 100),
        |s| &mut s.arm_sds,
    ),
    threshold(
        "suggest.r13-level",
        "R13: and by chance less often than so many per thousand",
        1000.0,
        (10, 1, 100),
        |s| &mut s.arm_level,
    ),
    threshold("suggest.r15-f", "R15: largest F, hundredths", 100.0, (110, 100, 200), |s| &mut s.largest_f),
    threshold("suggest.r15-rise", "R15: rise of F without shaking, hundredths", 100.0, (5, 1, 100), |s| {
        &mut s.f_rise
    }),
];

/// The thresholds that hold; `stored` are (name, value) of the site's settings.
pub fn settings(stored: &[(String, String)]) -> Settings {
    let mut settings = Settings::default();
    for threshold in &ALL {
        let found = stored.iter().find(|(name, _)| name == threshold.setting.name);
        let value = threshold.setting.value(found.map(|(_, value)| value.as_str()));
        *(threshold.put)(&mut settings) = value as f64 / threshold.per;
    }
    settings
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_defaults_are_those_of_the_rules_and_a_stored_one_counts() {
        assert_eq!(settings(&[]), Settings::default());
        let stored = [("suggest.r12-ph".to_string(), "30".to_string())];
        assert_eq!(settings(&stored).ph_change, 0.3);
        let mut names: Vec<&str> = ALL.iter().map(|one| one.setting.name).collect();
        names.dedup();
        assert_eq!(names.len(), ALL.len());
    }
}
