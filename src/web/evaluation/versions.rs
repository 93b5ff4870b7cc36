//! One formulation version against another on stability.

use askama::Template;

use super::super::field::{Entry, Field};
use super::super::page::Shell;
use super::super::reply::{Outcome, page};
use super::super::table::{Cell, Table};
use super::super::visit::Visit;
use super::load::{self, Loaded};
use super::path;
use crate::domain::evaluation::group::{self, Computed, Wishes};
use crate::domain::evaluation::versions::{Compared, compare};
use crate::domain::failure::Failure;
use crate::report::chart::Drawn;
use crate::report::evaluation::{About, curves, words};

#[derive(Template)]
#[template(path = "evaluation/versions.html")]
struct VersionsPage {
    shell: Shell,
    lead: String,
    charts: Vec<Drawn>,
    lives: Option<Table>,
    differences: Option<Table>,
    choices: Vec<Field>,
    here: String,
    component: String,
}

pub fn versions(visit: &Visit) -> Outcome {
    visit.knows_query(&["component", "one", "other"])?;
    let loaded = load::group_of(visit, visit.id("arm")?)?;
    let (test, component) = super::asked(visit, &loaded)?;
    let known = formulations(&loaded, &test);
    let pick = |name: &str, usual: Option<&(i64, String)>| match visit.query.get(name) {
        None | Some("") => Ok(usual.cloned()),
        Some(text) => {
            let found = known.iter().find(|(id, _)| text.parse() == Ok(*id));
            found.cloned().map(Some).ok_or_else(|| Failure::missing("formulation version with results here"))
        }
    };
    let newest = known.last();
    let before = known.iter().rev().nth(1);
    let (one, other) = (pick("one", before)?, pick("other", newest)?);
    let alpha = load::alpha_percent(visit)? as f64 / 100.0;
    let computed = |version: &Option<(i64, String)>| {
        let wishes =
            Wishes { alpha, formulation_version: version.as_ref().map(|(id, _)| *id), ..Wishes::default() };
        group::compute(&loaded.group, (&test, &component), &loaded.records, &loaded.limits, &wishes)
    };
    let pair = match (&one, &other) {
        (Some(one), Some(other)) if one.0 != other.0 => Some((one.clone(), other.clone())),
        _ => None,
    };
    let sides = [computed(&one), computed(&other)];
    page(&shown(visit, &loaded, pair, &sides, &known))
}

/// The formulation versions with results of a test, in the order they were written.
fn formulations(loaded: &Loaded, test: &str) -> Vec<(i64, String)> {
    let own = loaded.records.iter().filter(|one| one.point.test == test && !one.is_development);
    let mut known: Vec<(i64, String)> =
        own.map(|one| (one.formulation_version, one.formulation.clone())).collect();
    known.sort();
    known.dedup();
    known
}

type Pair = Option<((i64, String), (i64, String))>;

fn shown(
    visit: &Visit,
    loaded: &Loaded,
    pair: Pair,
    sides: &[Computed; 2],
    known: &[(i64, String)],
) -> VersionsPage {
    let group = &loaded.group;
    let [first, second] = sides;
    let title = format!("Versions compared: {} at {}", first.title, group.condition_words());
    let shell = Shell::of(visit, &title)
        .crumb("/evaluations", "Evaluation")
        .crumb(path(group.arm, &first.test, &first.component), first.title.as_str());
    let compared = match (&pair, &first.found, &second.found) {
        (Some(_), Ok(one), Ok(other)) => Some(compare(one, other)),
        _ => None,
    };
    let names = pair.as_ref().map(|(one, other)| [one.1.clone(), other.1.clone()]);
    let value = |at: usize| pair.as_ref().map(|(one, other)| if at == 0 { one.0 } else { other.0 });
    let field = |name: &str, label: &str, at: usize| {
        Field::new(name, label, Entry::Select)
            .choices(known.iter().map(|(id, words)| (id.to_string(), words.clone())))
            .value(value(at).map(|id| id.to_string()).unwrap_or_default())
    };
    VersionsPage {
        shell,
        lead: lead(names.as_ref(), compared.as_ref()),
        charts: names.iter().flat_map(|names| charts(loaded, sides, names)).collect(),
        lives: names.as_ref().map(|names| lives(sides, names)),
        differences: compared.as_ref().map(|compared| differences(compared, first)),
        choices: vec![field("one", "Version", 0), field("other", "against", 1)],
        here: format!("{}/versions", path(group.arm, &first.test, "")),
        component: first.component.clone(),
    }
}

fn lead(names: Option<&[String; 2]>, compared: Option<&Compared>) -> String {
    let Some([one, other]) = names else {
        return "Only one formulation version has results of this test here; a comparison needs two."
            .to_string();
    };
    let said = match compared.map(|compared| &compared.slope) {
        Some(Ok(slope)) if slope.p < 0.05 => {
            format!("They change at another rate (p {}).", words::probability(slope.p))
        }
        Some(Ok(slope)) => {
            format!(
                "No difference in rate is shown (p {}), which does not show that there is none.",
                words::probability(slope.p)
            )
        }
        Some(Err(needs)) => format!("The rates cannot be compared: {needs}."),
        None => "They cannot be compared on this scale.".to_string(),
    };
    format!("{other} against {one}. {said}")
}

fn charts(loaded: &Loaded, sides: &[Computed; 2], names: &[String; 2]) -> Vec<Drawn> {
    let chart = |(one, name): (&Computed, &String)| {
        let found = one.found.as_ref().ok().filter(|found| !found.series.lots.is_empty())?;
        let about = About {
            group: &loaded.group,
            built: &one.built,
            found,
            specification: &loaded.specification,
            alpha_percent: 0,
        };
        let mut chart = curves::chart(&about);
        chart.id = format!(
            "{}-{}",
            chart.id,
            name.to_lowercase().replace(|c: char| !c.is_ascii_alphanumeric(), "-")
        );
        chart.condition = format!("{}, {name}", chart.condition);
        chart.is_small = true;
        Some(chart.drawn())
    };
    sides.iter().zip(names).filter_map(chart).collect()
}

fn lives(sides: &[Computed; 2], names: &[String; 2]) -> Table {
    let row = |(one, name): (&Computed, &String)| {
        let (life, exact) = match &one.found {
            Ok(found) => {
                (words::life_short(found), found.life.outcome.months().map(|months| format!("{months:.4}")))
            }
            Err(sentence) => (format!("not evaluable: {sentence}"), None),
        };
        vec![
            Cell::text(name),
            Cell::number(one.built.series.lots.len().to_string()),
            Cell::number(one.built.records().count().to_string()),
            Cell::text(life),
            Cell::number_or_missing(exact, "none"),
        ]
    };
    let heads = ["Formulation", "Lots#", "Results#", "Shelf life", "Exactly, months#"];
    Table::new("Each version by itself", &heads, "").rows(sides.iter().zip(names).map(row))
}

fn differences(compared: &Compared, first: &Computed) -> Table {
    let unit = &first.built.series.unit;
    let rows = [("Rate of change per month", &compared.slope), ("Level at time zero", &compared.level)];
    let row = |(name, found): (&str, &Result<_, &'static str>)| {
        let found: &Result<crate::domain::evaluation::versions::Found, &'static str> = found;
        match found {
            Ok(one) => vec![
                Cell::text(name),
                Cell::number(words::number(one.value)),
                Cell::number(format!("{} to {}", words::number(one.lower), words::number(one.upper))),
                Cell::number(one.df.to_string()),
                Cell::number(words::probability(one.p)),
            ],
            Err(needs) => vec![
                Cell::text(name),
                Cell::Missing(format!("not evaluable: {needs}")),
                Cell::Missing("none".to_string()),
                Cell::Missing("none".to_string()),
                Cell::Missing("none".to_string()),
            ],
        }
    };
    let heads = ["What", "Difference#", "95 % confidence#", "df#", "p#"];
    let caption = format!("The second minus the first, on the analysis scale ({unit})");
    Table::new(&caption, &heads, "").rows(rows.into_iter().map(row))
}
