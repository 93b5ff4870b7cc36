//! What several tests suggest together, as the lot's page and the review show it; and its thresholds.

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form};
use super::reply::Outcome;
use super::route::{Route, get, post};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::role::Role;
use crate::domain::suggestion::threshold::{ALL, settings};
use crate::domain::suggestion::{Suggestion, SuggestionLevel, of_arm};
use crate::store::{self, Answer, Reader};

pub const ROUTES: &[Route] =
    &[get("/settings/suggestions", page), post("/settings/suggestions", &[Act::ChangeSetting], change)];

/// One rule in words.
#[derive(Clone, Debug)]
pub struct Line {
    rule: &'static str,
    name: &'static str,
    place: String,
    level: &'static str,
    suggests: &'static str,
    evidence: String,
    missing: String,
    is_raised: bool,
}

/// The section of suggestions.
#[derive(Clone, Debug, Template)]
#[template(path = "part/suggestions.html")]
pub struct Suggestions {
    speaking: Vec<Line>,
    silent: Vec<Line>,
    /// The arm whose silent rules are listed.
    first: String,
}

impl askama::filters::HtmlSafe for Suggestions {}

impl Suggestions {
    /// Of a lot as it stands; `None` where it has no result on a study.
    pub fn of(reader: &Reader<'_>, lot: i64) -> Answer<Option<Suggestions>> {
        let facts = store::suggestion::of_lot(reader, lot)?;
        if facts.results.is_empty() {
            return Ok(None);
        }
        let stored = store::setting::of_prefix(reader, "suggest.")?;
        let settings = settings(&stored);
        let mut shown = Suggestions { speaking: Vec::new(), silent: Vec::new(), first: String::new() };
        let arms = facts.arms();
        for (at, (arm, place)) in arms.iter().enumerate() {
            let place_words = if arms.len() > 1 { place.as_str() } else { "" };
            for one in of_arm(&facts, *arm, &settings) {
                match (one.level > SuggestionLevel::Quiet, at) {
                    // Orientations are compared once, not by each of them.
                    (true, _) if at == 0 || one.rule != "R13" => shown.speaking.push(line(&one, place_words)),
                    (false, 0) => shown.silent.push(line(&one, place_words)),
                    _ => {}
                }
            }
            if at == 0 {
                shown.first = place.clone();
            }
        }
        shown.speaking.sort_by_key(|line| !line.is_raised);
        Ok(Some(shown))
    }
}

fn line(one: &Suggestion, place: &str) -> Line {
    let evidence = one.evidence.join("; ");
    Line {
        rule: one.rule,
        name: one.name,
        place: place.to_string(),
        level: one.level.words(),
        suggests: one.suggests,
        evidence: if evidence.is_empty() { evidence } else { format!("{evidence}.") },
        missing: one.missing.join("; "),
        is_raised: one.level >= SuggestionLevel::Watch,
    }
}

const LEAD: &str =
    "From which values on the rules R1 to R15 speak. Each change stands in the history with its reason.";

fn settings_form(visit: &Visit) -> Result<Form, Failure> {
    visit.needs_role(&[Role::Administrator], Act::ChangeSetting)?;
    let stored = visit.read(|reader| store::setting::of_prefix(reader, "suggest."))?;
    let mut form = Form::new(visit, "/settings/suggestions", "Change the thresholds")?;
    for threshold in &ALL {
        let setting = threshold.setting;
        let found = stored.iter().find(|(name, _)| name == setting.name);
        let value = setting.value(found.map(|(_, value)| value.as_str()));
        let range = format!("{} to {}; {} if nothing is set.", setting.least, setting.most, setting.default);
        form = form.field(
            Field::new(setting.name, setting.label, Entry::Count)
                .hint(&range)
                .width(4)
                .value(value.to_string()),
        );
    }
    Ok(form.field(Field::new("reason", "Why", Entry::Text).hint("At least ten characters.")))
}

fn page(visit: &Visit) -> Outcome {
    form::show(visit, "Thresholds of suggestions", LEAD, settings_form(visit)?)
}

fn change(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Thresholds of suggestions",
        LEAD,
        settings_form(visit)?,
        |typed| {
            let values: Vec<Option<i64>> =
                ALL.iter().map(|one| typed.count(one.setting.name, 0, 100_000)).collect();
            let reason = typed.reason("reason")?;
            let values = values.into_iter().collect::<Option<Vec<i64>>>()?;
            Some((ALL.iter().map(|one| one.setting).zip(values).collect::<Vec<_>>(), reason))
        },
        |actor, (values, reason)| acts::setting::change(visit.db(), actor, &values, &reason),
        |_| "/settings/suggestions".to_string(),
    )
}
