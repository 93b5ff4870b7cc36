//! How the trend of one test at one pull was judged: verdicts, forecasts, the history used and left out.

use super::remark::{component_words, context_table, remarks};
use super::{detail, words};
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::trend::history::{History, months};
use crate::domain::trend::words::{probability, shown_band, significant};
use crate::store;
use crate::store::bench::BenchSample;
use crate::store::trend::alike::Exclusion;
use crate::store::trend::forecast::Sealed;
use crate::store::trend::verdict::Verdict;
use crate::web::bench::place;
use crate::web::field::{Entry, Field};
use crate::web::form::{self, Form};
use crate::web::page::Shell;
use crate::web::record::Record;
use crate::web::reply::Outcome;
use crate::web::show;
use crate::web::table::{Cell, Table};
use crate::web::visit::Visit;

struct Loaded {
    sample: BenchSample,
    title: String,
    decimals: u32,
    verdicts: Vec<Verdict>,
    sealed: Vec<Sealed>,
    exclusions: Vec<Exclusion>,
    /// Of the newest first verdict of each component.
    histories: Vec<(String, History)>,
}

fn load(visit: &Visit, id: i64) -> Result<Loaded, Failure> {
    visit.read(|reader| {
        let sample = store::bench::of_test(reader, id)?;
        let verdicts = store::trend::verdict::of_test(reader, id)?;
        let newest = verdicts.first().map(|one| one.version);
        let mut histories = Vec::new();
        for one in verdicts
            .iter()
            .filter(|one| Some(one.version) == newest && matches!(one.rule.as_str(), "H" | "A"))
        {
            let Some(row) = one.history else { continue };
            histories.extend(store::trend::history(reader, row)?.map(|found| (one.component.clone(), found)));
        }
        let test = sample.test(id).ok_or_else(|| Failure::missing("test with this number"))?;
        Ok(Loaded {
            title: test.title.clone(),
            decimals: crate::domain::trend::reported_decimals(&test.content),
            sealed: store::trend::forecast::of_test(reader, id)?,
            exclusions: store::trend::alike::exclusions(reader, id)?,
            verdicts,
            histories,
            sample,
        })
    })
}

pub(super) fn one(visit: &Visit) -> Outcome {
    visit.knows_query(&[])?;
    let id = visit.id("id")?;
    test_page(200, visit, id, None)
}

fn test_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let loaded = load(visit, id)?;
    let form = match failed {
        Some(failed) => Some(failed),
        None if visit.may(Act::LeaveOutOfTrend) && !loaded.verdicts.is_empty() => {
            Some(history_form(visit, id, &loaded)?)
        }
        None => None,
    };
    let sample = &loaded.sample;
    let mut shell = Shell::of(visit, &format!("Trend of {}", loaded.title))
        .crumb("/trend", "Trend")
        .crumb(format!("/lots/{}", sample.lot), sample.lot_number.clone());
    if let Some(form) = &form {
        shell = shell.with_errors(form);
    }
    let lead = format!(
        "Lot {}, {}. Nothing is removed by a rule: a person leaves a result out, with a reason.",
        sample.lot_number,
        place(sample)
    );
    let mut record = Record::new(shell, lead)
        .quiet_link_if(true, format!("/samples/{}", sample.id), "The sample at the bench")
        .quiet_link_if(visit.may(Act::DecideReview), format!("/review/{}", sample.id), "Its review")
        .table("Verdicts", verdict_table(&loaded))
        .table("Forecasts", forecast_table(visit, &loaded));
    for (component, history) in &loaded.histories {
        let part = if component.is_empty() { String::new() } else { format!(": {component}") };
        record = record
            .table(&format!("Lots used{part}"), used_table(history))
            .table(&format!("Left out{part}"), left_table(history));
    }
    record = record
        .table("Beside the verdict", context_table(&loaded.verdicts))
        .sentences("What else the numbers say", remarks(&loaded.verdicts, &loaded.sealed));
    if !loaded.exclusions.is_empty() {
        record = record.table("Decisions about this result", exclusion_table(visit, &loaded.exclusions));
    }
    let note = "It stays as it is, on every page and chart; later verdicts do not use it.";
    record.form("This result in the history of later ones", note, form).show_with(status)
}

fn verdict_table(loaded: &Loaded) -> Table {
    let heads = ["Rule", "Verdict", "What it says", "Probability#", "ν#", "Version#", "Entry"];
    let empty = "No verdict yet: it is given when the test is completed. A sample without a pull has no age and none.";
    Table::new("The newest version first", &heads, empty).rows(loaded.verdicts.iter().map(|one| {
        let rule = match one.rule.as_str() {
            "H" => "H, this result",
            "A" => "A, this result by its own lot",
            "HL" => "HL, the lot’s trend",
            _ => "HS, early warning",
        };
        let number = |text: &Option<String>| text.as_ref().and_then(|text| text.parse::<f64>().ok());
        let probability = number(&one.probability).map(|p| {
            if one.rule == "HS" {
                significant(p, 3)
            } else {
                probability(p).trim_start_matches("p ").to_string()
            }
        });
        vec![
            Cell::noted(rule, &one.component),
            Cell::text(words(&one.verdict)),
            Cell::text(&one.sentence),
            Cell::number_or_missing(probability, "none"),
            Cell::number_or_missing(number(&one.degrees_of_freedom).map(|df| format!("{df:.0}")), "none"),
            Cell::number(one.version.to_string()),
            Cell::link(format!("/history/{}", one.act), one.act.to_string()),
        ]
    }))
}

/// The forecast as it was sealed and as it was at the verdict, both shown.
fn forecast_table(visit: &Visit, loaded: &Loaded) -> Table {
    let heads =
        ["Forecast", "Age, months#", "Median#", "Alert outside", "Action outside", "History", "Digest"];
    let empty = "No forecast was sealed before the reading, and none could be made at the verdict.";
    let mut rows = Vec::new();
    for one in &loaded.sealed {
        let late = if one.days_late == 0 { String::new() } else { format!(", {} days late", one.days_late) };
        let head = format!("sealed {}{late}", show::instant(&one.sealed_at, visit.at.zone));
        let cells = match (&one.forecast.band, &one.forecast.needs) {
            (Some(band), _) => {
                limits(loaded, [band.lower, band.centre, band.upper, band.action_lower, band.action_upper])
            }
            (None, needs) => none(needs.clone().unwrap_or_default()),
        };
        rows.push(forecast_row(
            head,
            &one.component,
            one.forecast.days,
            cells,
            &one.forecast.history,
            &one.digest,
        ));
    }
    for one in loaded.verdicts.iter().filter(|one| matches!(one.rule.as_str(), "H" | "A")) {
        let Some(band) = &one.band else { continue };
        let mut numbers = [0.0; 5];
        for (place, text) in band.iter().enumerate() {
            numbers[place] = text.parse().unwrap_or_default();
        }
        let sealed = detail(one)["sealed"].as_str().unwrap_or_default().to_string();
        let digest = one.history_digest.clone().unwrap_or_default();
        let head = format!("at the verdict on version {}", one.version);
        let mut row = forecast_row(head, &one.component, one.age_days, limits(loaded, numbers), &digest, "");
        row[6] = Cell::text(sealed);
        rows.push(row);
    }
    Table::new("Hidden until the reading is recorded", &heads, empty).rows(rows)
}

fn forecast_row(
    head: String,
    component: &str,
    days: i64,
    cells: [Cell; 3],
    history: &str,
    digest: &str,
) -> Vec<Cell> {
    let [centre, alert, action] = cells;
    let short = |hex: &str| hex.chars().take(12).collect::<String>();
    vec![
        Cell::noted(head, component),
        Cell::number(format!("{:.1}", months(days))),
        centre,
        alert,
        action,
        Cell::text(short(history)),
        Cell::text(short(digest)),
    ]
}

fn limits(loaded: &Loaded, numbers: [f64; 5]) -> [Cell; 3] {
    let [lower, centre, upper, action_lower, action_upper] = numbers;
    let places = loaded.decimals + 1;
    let pair = |lower: f64, upper: f64| {
        let (low, high) = shown_band(None, lower, upper, places);
        Cell::text(format!("{low} to {high}"))
    };
    [
        Cell::number(format!("{centre:.*}", places as usize)),
        pair(lower, upper),
        pair(action_lower, action_upper),
    ]
}

fn none(needs: String) -> [Cell; 3] {
    [Cell::Missing(needs), Cell::Missing("none".to_string()), Cell::Missing("none".to_string())]
}

fn used_table(history: &History) -> Table {
    let heads = ["Lot", "Results#", "Ages, months"];
    let empty =
        "No other lot with the same presentation, condition, orientation, method and formulation version.";
    let ages = |entries: &[crate::domain::trend::history::Entry]| {
        entries.iter().map(|entry| format!("{:.1}", months(entry.days))).collect::<Vec<_>>().join(", ")
    };
    let others = history.lots.iter().map(|lot| {
        vec![
            Cell::link(format!("/lots/{}", lot.lot), lot.number.clone()),
            Cell::number(lot.entries.len().to_string()),
            Cell::text(ages(&lot.entries)),
        ]
    });
    let own = (!history.own.is_empty()).then(|| {
        vec![
            Cell::text("this lot, earlier pulls"),
            Cell::number(history.own.len().to_string()),
            Cell::text(ages(&history.own)),
        ]
    });
    Table::new("Of pulls taken before this one", &heads, empty).rows(others.chain(own))
}

fn left_table(history: &History) -> Table {
    let heads = ["Lot", "Results#", "Because"];
    let empty = "Nothing was left out.";
    Table::new("Same presentation, condition, orientation and test, not used", &heads, empty).rows(
        history.left_out.iter().map(|one| {
            vec![Cell::text(&one.number), Cell::number(one.results.to_string()), Cell::text(&one.why)]
        }),
    )
}

fn exclusion_table(visit: &Visit, found: &[Exclusion]) -> Table {
    let heads = ["Of", "Decision", "Because", "By"];
    Table::new("The newest first", &heads, "").rows(found.iter().map(|one| {
        vec![
            Cell::text(component_words(&one.component)),
            Cell::text(&one.state),
            Cell::text(&one.why),
            Cell::noted(&one.by, show::instant(&one.at, visit.at.zone)),
        ]
    }))
}

/// The components that were judged, in the order of their names.
fn components(loaded: &Loaded) -> Vec<String> {
    let mut components: Vec<String> = loaded.verdicts.iter().map(|one| one.component.clone()).collect();
    components.sort();
    components.dedup();
    components
}

fn history_form(visit: &Visit, id: i64, loaded: &Loaded) -> Result<Form, Failure> {
    let choices: Vec<(String, String)> = components(loaded)
        .iter()
        .enumerate()
        .map(|(place, one)| (place.to_string(), component_words(one)))
        .collect();
    Ok(Form::new(visit, &format!("/trend/tests/{id}/history"), "Leave it out, or take it back")?
        .field(Field::new("component", "Which", Entry::Select).choices(choices).value("0"))
        .field(
            Field::new("state", "Decision", Entry::Radios)
                .choices([("left out", "leave it out of the history"), ("taken back", "take it back")])
                .value("left out"),
        )
        .field(
            Field::new("why", "Because", Entry::Text)
                .hint("At least 20 characters; it stands in the history."),
        )
        .quiet())
}

pub(super) fn leave_out(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let loaded = load(visit, id)?;
    let components = components(&loaded);
    form::submit(
        visit,
        history_form(visit, id, &loaded)?,
        |typed| {
            let place = typed.choice("component").and_then(|text| text.parse::<usize>().ok());
            let state = typed.choice("state");
            let why = typed.text("why", 400);
            let component = place.and_then(|place| components.get(place).cloned());
            Some((component.unwrap_or_default(), state?, why?))
        },
        |actor, (component, state, why)| {
            acts::trend::leave_out(visit.db(), actor, id, &component, state == "left out", &why)
        },
        |_| format!("/trend/tests/{id}"),
        |status, form| test_page(status, visit, id, Some(form)),
    )
}
