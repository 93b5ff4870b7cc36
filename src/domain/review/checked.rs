//! "What was checked": every rule with its result, so that nothing found is not mistaken for nothing looked at.

/// What the rules were asked of.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct CheckedFacts {
    pub has_pull: bool,
    /// How the container was identified at the pull: "scan", "typed characters".
    pub identity_by: Option<String>,
    pub outside_window: Option<String>,
    pub tested_late: Option<String>,
    pub lost_stages: usize,
    pub readings: usize,
    /// Instrument codes with the days on which their calibration was over.
    pub overdue_instruments: Vec<String>,
    pub instruments: usize,
    /// People and methods without a qualification on the day they read.
    pub unqualified: Vec<String>,
    pub people: usize,
    /// Latest results, those with a limit, and those that conform.
    pub results: usize,
    pub limited: usize,
    pub conforming: usize,
    pub spread_flags: usize,
    pub single_flags: usize,
    pub trend_flags: usize,
    pub not_evaluable: usize,
    pub corrections: usize,
    pub hints: usize,
    pub hints_kept: usize,
    pub to_check: usize,
    pub checked: usize,
    pub photos: usize,
}

/// One rule and what it found.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Rule {
    pub is_raised: bool,
    pub sentence: String,
}

/// All rules in the order of the work.
pub fn rules(facts: &CheckedFacts) -> Vec<Rule> {
    let mut rules = Vec::new();
    let mut say = |is_raised: bool, sentence: String| rules.push(Rule { is_raised, sentence });
    if facts.has_pull {
        say(facts.outside_window.is_some(), window(facts));
        say(facts.identity_by.is_none(), identity(facts));
    }
    say(facts.tested_late.is_some(), tested(facts));
    say(facts.lost_stages > 0, stages(facts.lost_stages));
    let (overdue, unqualified) = (&facts.overdue_instruments, &facts.unqualified);
    say(!overdue.is_empty(), register("Instruments in calibration", facts.instruments, overdue));
    say(!unqualified.is_empty(), register("Analysts qualified", facts.people, unqualified));
    say(facts.spread_flags > 0, flags("Spread of replicates within the method", facts.spread_flags));
    say(facts.single_flags > 0, flags("Single and first values within limits", facts.single_flags));
    say(facts.conforming < facts.limited, limits(facts));
    say(facts.trend_flags > 0, trend(facts));
    say(facts.corrections > 0, counted_rule("Corrections", facts.corrections));
    say(facts.hints_kept > 0, hints(facts));
    say(facts.checked < facts.to_check, second_check(facts));
    say(false, counted_rule("Photos and files", facts.photos));
    rules
}

fn window(facts: &CheckedFacts) -> String {
    match &facts.outside_window {
        Some(words) => format!("Pulled in its window: no, {words}"),
        None => "Pulled in its window".to_string(),
    }
}

fn identity(facts: &CheckedFacts) -> String {
    match &facts.identity_by {
        Some(words) => format!("Right container: confirmed by {words}"),
        None => "Right container: its label was not confirmed at the pull".to_string(),
    }
}

fn tested(facts: &CheckedFacts) -> String {
    match &facts.tested_late {
        Some(words) => format!("Tested in time: no, {words}"),
        None => "Tested in time".to_string(),
    }
}

fn stages(lost: usize) -> String {
    match lost {
        0 => "Stages in order, none passed over".to_string(),
        1 => "Stages in order: 1 passed over".to_string(),
        many => format!("Stages in order: {many} passed over"),
    }
}

fn register(what: &str, of: usize, faults: &[String]) -> String {
    if faults.is_empty() {
        format!("{what}: {of} of {of}")
    } else {
        format!("{what}: not {}", faults.join(", "))
    }
}

fn flags(what: &str, count: usize) -> String {
    if count == 0 { what.to_string() } else { format!("{what}: {count} not") }
}

fn limits(facts: &CheckedFacts) -> String {
    let without = facts.results.saturating_sub(facts.limited);
    let rest = if without == 0 { String::new() } else { format!(", {without} without a limit") };
    format!("Within limits: {} of {}{rest}", facts.conforming, facts.limited)
}

fn trend(facts: &CheckedFacts) -> String {
    let rest = match facts.not_evaluable {
        0 => String::new(),
        count => format!(", {count} not evaluable"),
    };
    format!("Out of trend: {}{rest}", facts.trend_flags)
}

fn counted_rule(what: &str, count: usize) -> String {
    if count == 0 { format!("{what}: none") } else { format!("{what}: {count}") }
}

fn hints(facts: &CheckedFacts) -> String {
    match (facts.hints, facts.hints_kept) {
        (0, _) => "Questions at the bench: none".to_string(),
        (hints, kept) => format!("Questions at the bench: {hints}, kept as read {kept}"),
    }
}

fn second_check(facts: &CheckedFacts) -> String {
    match facts.to_check {
        0 => "Check by a second person: no method asks for it".to_string(),
        of => format!("Checked by a second person: {} of {of}", facts.checked),
    }
}

/// "9 of 11 checks raised nothing."
pub fn summary(rules: &[Rule]) -> String {
    let quiet = rules.iter().filter(|rule| !rule.is_raised).count();
    format!("{quiet} of {} checks raised nothing.", rules.len())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_rule_says_what_it_found_also_when_it_found_nothing() {
        let clean = CheckedFacts {
            has_pull: true,
            identity_by: Some("scan".to_string()),
            readings: 9,
            instruments: 2,
            people: 1,
            results: 7,
            limited: 6,
            conforming: 6,
            to_check: 7,
            checked: 7,
            ..CheckedFacts::default()
        };
        let rules = rules(&clean);
        assert_eq!(rules.len(), 14);
        assert!(rules.iter().all(|rule| !rule.is_raised), "{rules:?}");
        assert_eq!(summary(&rules), "14 of 14 checks raised nothing.");
        let sentences: Vec<&str> = rules.iter().map(|rule| rule.sentence.as_str()).collect();
        assert!(sentences.contains(&"Within limits: 6 of 6, 1 without a limit"), "{sentences:?}");
    }

    #[test]
    fn whatever_is_wrong_raises_its_own_rule_alone() {
        let clean = || CheckedFacts {
            has_pull: true,
            identity_by: Some("scan".to_string()),
            ..CheckedFacts::default()
        };
        let faults: [(&str, CheckedFacts); 13] = [
            ("window", CheckedFacts { outside_window: Some("late".to_string()), ..clean() }),
            ("container", CheckedFacts { identity_by: None, ..clean() }),
            ("in time", CheckedFacts { tested_late: Some("late".to_string()), ..clean() }),
            ("Stages", CheckedFacts { lost_stages: 1, ..clean() }),
            ("calibration", CheckedFacts { overdue_instruments: vec!["PH-2".to_string()], ..clean() }),
            ("qualified", CheckedFacts { unqualified: vec!["R. T.".to_string()], ..clean() }),
            ("Spread", CheckedFacts { spread_flags: 1, ..clean() }),
            ("first values", CheckedFacts { single_flags: 1, ..clean() }),
            ("limits", CheckedFacts { results: 2, limited: 2, conforming: 1, ..clean() }),
            ("trend", CheckedFacts { trend_flags: 1, ..clean() }),
            ("Corrections", CheckedFacts { corrections: 2, ..clean() }),
            ("Questions", CheckedFacts { hints: 2, hints_kept: 1, ..clean() }),
            ("second person", CheckedFacts { to_check: 2, checked: 1, ..clean() }),
        ];
        for (words, facts) in faults {
            let raised: Vec<String> =
                rules(&facts).into_iter().filter(|rule| rule.is_raised).map(|rule| rule.sentence).collect();
            assert_eq!(raised.len(), 1, "{words}: {raised:?}");
            assert!(raised[0].contains(words), "{words}: {raised:?}");
        }
    }
}
