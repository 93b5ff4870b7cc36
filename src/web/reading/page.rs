//! What a test page shows, from what was loaded.

use askama::Template;

use super::boxes::{Cell, Grid, Said, grid};
use super::counter::{Counter, counter};
use super::load::{Late, Loaded};
use super::take::{all_slots, takes_unspecified};
use crate::domain::act::Act;
use crate::domain::failure::{Failure, Stale};
use crate::domain::instrument::{EventKind, may_use};
use crate::domain::method::Settings;
use crate::domain::reading::{Reading, standing};
use crate::domain::stage::part_words;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::web::bench::{place, standing as test_standing};
use crate::web::page::Shell;
use crate::web::pairs::encoded;
use crate::web::part::{StatusMark, Trail};
use crate::web::reply::{Outcome, page_with};
use crate::web::sedimentation::{Cylinders, cylinders};
use crate::web::show;
use crate::web::trend::{TrendPart, is_told_by_verdict};
use crate::web::visit::Visit;

/// One instrument to choose from.
pub struct InstrumentChoice {
    id: i64,
    words: String,
    state: String,
    is_usable: bool,
    is_chosen: bool,
}

/// A value that drew a question.
struct Asked {
    reading: i64,
    value: String,
    sentence: String,
    target: String,
}

struct ResultRow {
    version: i64,
    component: String,
    shown: String,
    verdict: String,
    is_out: bool,
    by: String,
    at: String,
}

struct ChangeRow {
    label: String,
    was: String,
    is: String,
    by: String,
    at: String,
    why: String,
}

struct ReadRow {
    label: String,
    shown: String,
    by: String,
    at: String,
}

#[derive(Template)]
#[template(path = "reading/test.html")]
struct TestPage<'a> {
    shell: Shell,
    loaded: &'a Loaded,
    place: String,
    part: String,
    status: StatusMark,
    submission: String,
    session: String,
    late: Late,
    wrong_label: String,
    asks_label: bool,
    refusals: Vec<String>,
    kind: String,
    instruments: Vec<InstrumentChoice>,
    chosen: String,
    grid: Option<Grid>,
    /// A completed test shows its result; its boxes open for a correction.
    folds_grid: bool,
    counter: Option<Counter>,
    cylinders: Option<Cylinders>,
    asks_unspecified: bool,
    unspecified: (String, String),
    can_complete: bool,
    questions: Vec<Asked>,
    results: Vec<ResultRow>,
    flags: Vec<(bool, String)>,
    trend: TrendPart,
    changes: Vec<ChangeRow>,
    read: Vec<ReadRow>,
    stale: Option<Stale>,
    saved: String,
    trail: Trail,
}

/// The part of the address that is kept from page to page.
pub fn query(visit: &Visit, loaded: &Loaded) -> String {
    let asked = |name: &str| visit.form.get(name).or_else(|| visit.query.get(name)).unwrap_or_default();
    let mut parts = vec![format!("label={}", encoded(&loaded.label))];
    for name in ["instrument", "session", "cylinder", "container"] {
        let text = asked(name);
        if !text.is_empty() {
            parts.push(format!("{name}={}", encoded(text)));
        }
    }
    format!("?{}", parts.join("&"))
}

/// The test page, with what came back from a submit.
pub fn test_page(status: u16, visit: &Visit, loaded: &Loaded, said: &Said, stale: Option<Stale>) -> Outcome {
    let refusals = loaded.refusals();
    let needs_instrument = !loaded.test.content.instruments.is_empty() && loaded.instrument.is_none();
    let is_ready = refusals.is_empty() && loaded.may_read && loaded.is_label_right && !needs_instrument;
    let slots = all_slots(loaded, &said.form);
    let is_cylinder = matches!(loaded.test.content.settings, Settings::Sedimentation { .. });
    let shows_grid = is_ready && !is_cylinder && (loaded.is_open() || !loaded.readings.is_empty());
    let lines = visit
        .read(|reader| store::trail::of_subject(reader, Subject::new(Kind::Sample, loaded.sample.id)))?;
    let page = TestPage {
        shell: shell(visit, loaded, said),
        place: place(&loaded.sample),
        part: part(loaded),
        status: StatusMark::of(test_standing(&loaded.sample, &loaded.test).0),
        submission: crate::acts::secret::token()?,
        session: kept(visit, "session"),
        late: loaded.late.clone(),
        wrong_label: wrong_label(loaded),
        asks_label: refusals.is_empty() && loaded.may_read && !loaded.is_label_right,
        kind: loaded.test.content.instruments.first().cloned().unwrap_or_default(),
        instruments: if refusals.is_empty() && loaded.is_label_right {
            instruments(loaded)
        } else {
            Vec::new()
        },
        chosen: loaded.instrument.map(|id| id.to_string()).unwrap_or_default(),
        grid: shows_grid.then(|| grid(loaded, &slots, said)),
        folds_grid: !loaded.is_open() && said.form.get("form_token").is_none(),
        counter: if is_ready { counter(visit, loaded, said)? } else { None },
        cylinders: if is_ready && is_cylinder { Some(cylinders(visit, loaded, said)?) } else { None },
        asks_unspecified: is_ready && loaded.is_open() && takes_unspecified(&loaded.test.content.settings),
        unspecified: typed_unspecified(said),
        can_complete: is_ready && loaded.is_open() && visit.may(Act::CompleteTest),
        questions: if is_ready { questions(loaded) } else { Vec::new() },
        results: results(loaded, visit),
        flags: flags(loaded),
        trend: TrendPart::of(&loaded.verdicts),
        changes: changes(loaded, visit),
        read: read_rows(loaded, visit, &refusals),
        saved: saved_words(loaded, visit),
        trail: Trail::of(&lines, visit.at.zone),
        refusals,
        stale,
        loaded,
    };
    page_with(status, &page)
}

fn kept(visit: &Visit, name: &str) -> String {
    visit.form.get(name).or_else(|| visit.query.get(name)).unwrap_or_default().to_string()
}

fn typed_unspecified(said: &Said) -> (String, String) {
    let get = |name: &str| said.form.get(name).unwrap_or_default().to_string();
    (get("unspecified_time"), get("unspecified_value"))
}

fn shell(visit: &Visit, loaded: &Loaded, said: &Said) -> Shell {
    let sample = &loaded.sample;
    let mut shell = Shell::of(visit, &loaded.test.title)
        .crumb("/bench", "Bench")
        .crumb(format!("/samples/{}{}", sample.id, query(visit, loaded)), sample.number.clone())
        .bench();
    let wrong = wrong_label(loaded);
    if !wrong.is_empty() {
        shell.errors.push(("code".to_string(), wrong));
    }
    shell.errors.extend(said.errors.iter().cloned());
    shell.has_errors = !shell.errors.is_empty();
    shell
}

fn wrong_label(loaded: &Loaded) -> String {
    if loaded.label.is_empty() || loaded.is_label_right {
        return String::new();
    }
    format!(
        "“{}” is not a label of sample {}. Take the right one and scan again.",
        loaded.label, loaded.sample.number
    )
}

fn part(loaded: &Loaded) -> String {
    let content = &loaded.test.content;
    match content.settings {
        Settings::Appearance { .. } => {
            content.stages().into_iter().map(part_words).collect::<Vec<_>>().join(", then ")
        }
        _ => content.stage.words().to_string(),
    }
}

fn instruments(loaded: &Loaded) -> Vec<InstrumentChoice> {
    let today = loaded.now.date();
    let choice = |facts: &crate::domain::instrument::InstrumentFacts| {
        let usable = may_use(facts, today);
        let check = facts.check_of(today).map(|check| check.words(EventKind::DailyCheck));
        InstrumentChoice {
            id: facts.id,
            words: format!("{} {}", facts.code, facts.name),
            is_usable: usable.is_ok(),
            state: usable.err().map(|why| why.to_string()).or(check).unwrap_or_default(),
            is_chosen: loaded.instrument == Some(facts.id),
        }
    };
    loaded.instruments.iter().map(choice).collect()
}

fn questions(loaded: &Loaded) -> Vec<Asked> {
    standing(&loaded.readings)
        .into_iter()
        .filter(|reading| reading.has_open_question() && loaded.is_open())
        .map(|reading| Asked {
            reading: reading.id,
            value: reading.shown(),
            sentence: reading.questions.iter().map(|one| one.sentence.clone()).collect::<Vec<_>>().join(" "),
            target: reading.key.name(),
        })
        .collect()
}

fn results(loaded: &Loaded, visit: &Visit) -> Vec<ResultRow> {
    use crate::domain::judgement::limit::component_title;
    loaded
        .results
        .iter()
        .map(|result| ResultRow {
            version: result.version,
            component: match result.component.is_empty() {
                true => loaded.test.title.clone(),
                false => component_title(&result.component, Some(&loaded.test.content)),
            },
            shown: show::with_unit(&result.shown, &result.unit),
            is_out: result.verdict == "out of specification" || result.verdict == "outside in-use limit",
            verdict: result.verdict.clone(),
            by: result.by.clone(),
            at: show::instant(&result.at, visit.at.zone),
        })
        .collect()
}

/// Of the newest version: whether it is an exception, and its sentence; what the trend says stands by itself.
fn flags(loaded: &Loaded) -> Vec<(bool, String)> {
    let newest = loaded.results.first().map(|result| result.version);
    let is_said = |kind: &str| !loaded.verdicts.is_empty() && is_told_by_verdict(kind);
    let of_newest = loaded.flags.iter().filter(|flag| Some(flag.version) == newest && !is_said(&flag.kind));
    of_newest.map(|flag| (flag.level == "exception", flag.sentence.clone())).collect()
}

fn label_of(loaded: &Loaded, reading: &Reading) -> String {
    match loaded.sample.slots(&loaded.test).into_iter().find(|slot| slot.key == reading.key) {
        Some(slot) => slot.label(),
        None => format!("{}, reading {}", reading.key.field.replace(':', " reader: "), reading.key.replicate),
    }
}

/// A value as a person reads it: a grade by its word, a count with its interval.
fn shown_of(loaded: &Loaded, reading: &Reading) -> String {
    match loaded.sample.slots(&loaded.test).into_iter().find(|slot| slot.key == reading.key) {
        Some(slot) if reading.qualifier == "words" => slot.shown(&reading.qualifier, &reading.typed),
        _ => reading.shown(),
    }
}

fn changes(loaded: &Loaded, visit: &Visit) -> Vec<ChangeRow> {
    let was = |id: i64| {
        let was = loaded.readings.iter().find(|one| one.id == id)?;
        Some(shown_of(loaded, was))
    };
    loaded
        .readings
        .iter()
        .filter(|reading| reading.supersedes.is_some() && !reading.is_answer())
        .map(|reading| ChangeRow {
            label: label_of(loaded, reading),
            was: reading.supersedes.and_then(was).unwrap_or_default(),
            is: shown_of(loaded, reading),
            by: reading.by.clone(),
            at: show::instant(&reading.at, visit.at.zone),
            why: reading.reason.clone().unwrap_or_default(),
        })
        .collect()
}

/// What is recorded, for people who only look. Without the label nobody sees numbers of an open test.
fn read_rows(loaded: &Loaded, visit: &Visit, refusals: &[String]) -> Vec<ReadRow> {
    if loaded.may_read && loaded.is_open() && refusals.is_empty() {
        return Vec::new();
    }
    let hides_first = loaded.test.content.second_reader_tolerance.is_some() && loaded.is_open();
    standing(&loaded.readings)
        .into_iter()
        .filter(|reading| !hides_first || reading.account == loaded.account)
        .map(|reading| ReadRow {
            label: label_of(loaded, reading),
            shown: shown_of(loaded, reading),
            by: reading.by.clone(),
            at: show::instant(reading.read_instant(), visit.at.zone),
        })
        .collect()
}

fn saved_words(loaded: &Loaded, visit: &Visit) -> String {
    let newest = loaded.readings.last();
    let at = newest.and_then(|one| crate::domain::moment::Moment::from_stored(&one.at, visit.at.zone));
    at.map(|at| format!("All saved {}", at.clock_shown()))
        .unwrap_or_else(|| "Nothing recorded yet".to_string())
}

/// The hidden fields that each form of the page carries.
impl TestPage<'_> {
    /// The one instrument there is to read with, where nothing is left to choose.
    fn only_instrument(&self) -> Option<String> {
        let [one] = &self.instruments[..] else { return None };
        let words = [one.words.clone(), one.state.clone()];
        let words = words.into_iter().filter(|words| !words.is_empty()).collect::<Vec<_>>().join(": ");
        (one.is_usable && one.is_chosen).then_some(words)
    }

    fn can_choose(&self) -> bool {
        self.instruments.iter().any(|one| one.is_usable)
    }

    fn hidden(&self) -> Vec<(&'static str, String)> {
        vec![
            ("form_token", self.shell.form_token.clone()),
            ("submission", self.submission.clone()),
            ("label", self.loaded.label.clone()),
            ("session", self.session.clone()),
        ]
    }

    fn recording(&self) -> Vec<(&'static str, String)> {
        let mut hidden = self.hidden();
        hidden.push(("version", self.loaded.seen().to_string()));
        hidden.push(("instrument", self.chosen.clone()));
        if !self.late.is_empty() {
            hidden.push(("late_on", self.late.on.clone()));
            hidden.push(("late_at", self.late.at.clone()));
            hidden.push(("late_why", self.late.why.clone()));
        }
        hidden
    }
}

/// A fault of the page itself, never of the person.
pub type Made<T> = Result<T, Failure>;
