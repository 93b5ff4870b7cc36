//! False alarms expected and found, in the sentence that a reviewer reads.

use crate::science::trend::promise::Tally;

/// What was judged in a period.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct JudgedFacts {
    pub judged: u32,
    /// Sums of the levels the results were judged at.
    pub expected_actions: f64,
    pub expected_alerts: f64,
    pub actions: u32,
    pub alerts: u32,
    /// All were judged at the usual levels, 1 % and 5 %.
    pub is_usual: bool,
}

/// The two lines, and whether more actions came than is ordinary.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Kept {
    pub actions: String,
    pub alerts: String,
    pub is_out: bool,
}

/// "300 results judged at 1 %: 3.0 false actions expected, 5 found; up to 8 is ordinary (99 %)."
pub fn kept(facts: &JudgedFacts) -> Kept {
    let actions = Tally::expecting(facts.judged, facts.expected_actions, facts.actions);
    let alerts = Tally::expecting(facts.judged, facts.expected_alerts, facts.alerts);
    let level =
        |percent: &str| if facts.is_usual { percent.to_string() } else { "their own levels".to_string() };
    Kept {
        actions: sentence(&actions, &level("1 %"), "action"),
        alerts: sentence(&alerts, &level("5 %"), "alert"),
        is_out: actions.stands_out() || alerts.stands_out(),
    }
}

fn sentence(tally: &Tally, level: &str, what: &str) -> String {
    let results =
        if tally.judged == 1 { "1 result".to_string() } else { format!("{} results", tally.judged) };
    format!(
        "{results} judged at {level}: {:.1} false {what}s expected, {} found; up to {} is ordinary (99 %).",
        tally.expected, tally.found, tally.ordinary
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Poisson, mean 3: P(≤ 8) = 0.996; mean 15: P(≤ 25) = 0.994 (table of the Poisson distribution).
    #[test]
    fn the_line_of_a_year_of_three_hundred_results() {
        let facts = JudgedFacts {
            judged: 300,
            expected_actions: 3.0,
            expected_alerts: 15.0,
            actions: 5,
            alerts: 26,
            is_usual: true,
        };
        let kept = kept(&facts);
        assert_eq!(
            kept.actions,
            "300 results judged at 1 %: 3.0 false actions expected, 5 found; up to 8 is ordinary (99 %)."
        );
        assert!(
            kept.alerts.contains("15.0 false alerts expected, 26 found; up to 25 is ordinary"),
            "{}",
            kept.alerts
        );
        assert!(kept.is_out);
    }
}
