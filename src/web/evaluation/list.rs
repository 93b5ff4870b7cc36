//! The list: presentation by presentation, each test at each condition with its shelf life in short.

use askama::Template;

use super::super::page::Shell;
use super::super::reply::{Outcome, page};
use super::super::show;
use super::super::table::{Cell, Table};
use super::super::visit::Visit;
use super::load;
use crate::domain::act::Act;
use crate::domain::evaluation::group::{self, Computed};
use crate::domain::evaluation::record::{Group, Record, conforming_until, covered_months};
use crate::domain::failure::Failure;
use crate::report::evaluation::words;
use crate::store;

#[derive(Template)]
#[template(path = "evaluation/list.html")]
struct ListPage {
    shell: Shell,
    lead: String,
    /// Path, code, words, lots, whether it is the one shown.
    presentations: Vec<(String, String, String, String, bool)>,
    groups: Vec<GroupPart>,
    conclusions: Option<Table>,
}

/// One condition of the presentation.
struct GroupPart {
    heading: String,
    finding: String,
    table: Table,
    conclude: Option<String>,
}

pub fn list(visit: &Visit) -> Outcome {
    visit.knows_query(&["presentation"])?;
    let known = visit.read(store::evaluation::presentations)?;
    let asked = visit.query.get("presentation").filter(|text| !text.is_empty());
    let chosen = match asked {
        None => known.first().map(|(id, ..)| *id),
        Some(text) => {
            let id = text.parse::<i64>().ok().filter(|id| known.iter().any(|(one, ..)| one == id));
            Some(id.ok_or_else(|| Failure::missing("presentation on study with this number"))?)
        }
    };
    let (groups, conclusions) = match chosen {
        Some(id) => (parts(visit, id)?, Some(conclusions(visit, id)?)),
        None => (Vec::new(), None),
    };
    let presentations = known
        .into_iter()
        .map(|(id, code, words, lots)| {
            let mut words_of_lots = show::counted(lots as usize, "lot on study", "lots on study");
            if lots > store::evaluation::NEWEST_LOTS {
                let newest = store::evaluation::NEWEST_LOTS;
                words_of_lots.push_str(&format!(", of which the newest {newest} take part here"));
            }
            let lots = words_of_lots;
            (format!("/evaluations?presentation={id}"), code, words, lots, Some(id) == chosen)
        })
        .collect();
    let lead = if chosen.is_some() {
        "What the results of all lots say, test by test. A shelf life is assigned by the authorised \
         person, never taken from a computation."
    } else {
        "No lot is on study yet, so there is nothing to evaluate. A lab manager starts a study from a lot's page."
    };
    let shell = Shell::of(visit, "Evaluation");
    page(&ListPage { shell, lead: lead.to_string(), presentations, groups, conclusions })
}

/// The signed conclusions on a presentation.
fn conclusions(visit: &Visit, presentation: i64) -> Result<Table, Failure> {
    let found = visit.read(|reader| store::conclusion::of_presentation(reader, presentation))?;
    let mut rows = Vec::new();
    for one in found {
        let content = one.content()?;
        rows.push(vec![
            Cell::link(format!("/conclusions/{}", one.id), format!("Conclusion {}", one.id)),
            Cell::text(&content.condition),
            Cell::number(one.months.to_string()),
            Cell::text(&content.binds),
            Cell::noted(&one.concluded_by, show::instant(&one.concluded_at, visit.at.zone)),
        ]);
    }
    let heads = ["Conclusion", "Condition", "Proposed, months#", "What binds", "Signed by"];
    let empty = "Nothing is concluded yet. A lab manager or QA concludes from a labelled condition above.";
    Ok(Table::new("Signed conclusions, the newest first", &heads, empty).rows(rows))
}

fn parts(visit: &Visit, presentation: i64) -> Result<Vec<GroupPart>, Failure> {
    let (groups, records, arms, bindings) = visit.read(|reader| {
        Ok((
            store::evaluation::groups(reader, presentation)?,
            store::evaluation::records_of_presentation(reader, presentation)?,
            store::evaluation::arms(reader, presentation)?,
            store::evaluation::specifications(reader, presentation)?,
        ))
    })?;
    let (limits, _, _) = load::newest(bindings);
    let wishes = load::wishes(visit)?;
    let mut parts = Vec::new();
    for one in groups {
        let is_of = |record: &&Record| arms.contains(&(record.arm, one.arm));
        let own: Vec<Record> = records.iter().filter(is_of).cloned().collect();
        let computed = group::compute_all(&one, &own, &limits, &wishes);
        let may = visit.may(Act::ConcludeEvaluation) && !one.is_imported && !computed.is_empty();
        let may = may && (one.is_labelled || one.condition_use.starts_with("long-term"));
        let conclude = may.then(|| format!("/conclusions/new?arm={}", one.arm));
        parts.push(GroupPart { conclude, ..part(&one, &own, &computed) });
    }
    Ok(parts)
}

fn part(group: &Group, records: &[Record], computed: &[Computed]) -> GroupPart {
    let heads = ["Test", "Lots#", "Data cover, months#", "Newest result", "Shelf life", "Exactly, months#"];
    let empty = "No test at this condition has a result yet.";
    let rows = computed.iter().map(|one| row(group, records, one));
    let finding = match group::binding(computed) {
        Some(one) => {
            let life = one.found.as_ref().map(words::life_short).unwrap_or_default();
            format!("{} binds: {life}.", one.title)
        }
        None => "No test meets its limit.".to_string(),
    };
    GroupPart {
        heading: heading(group),
        finding: if computed.is_empty() { String::new() } else { finding },
        table: Table::new(&format!("Tests at {}", group.condition_words()), &heads, empty).rows(rows),
        conclude: None,
    }
}

fn heading(group: &Group) -> String {
    let what = match (group.is_imported, group.is_labelled) {
        (true, _) => ", imported, not observed here",
        (false, true) => ", labelled condition",
        (false, false) => "",
    };
    let used = if group.is_imported { String::new() } else { format!(" ({})", group.condition_use) };
    format!("{}{used}{what}", group.condition_words())
}

fn row(group: &Group, records: &[Record], one: &Computed) -> Vec<Cell> {
    let path = super::path(group.arm, &one.test, &one.component);
    let own: Vec<&Record> = records
        .iter()
        .filter(|record| record.point.test == one.test && record.point.component == one.component)
        .filter(|record| record.result.is_some() && !record.is_development)
        .collect();
    let newest = own.iter().max_by_key(|record| record.result.map(|(id, _)| id));
    let newest = newest.map_or(Cell::Missing("none".to_string()), |record| {
        let shown = show::with_unit(&record.point.shown, &record.point.unit);
        Cell::noted(shown, format!("{}, {}", record.lot_number, record.point.age))
    });
    let mut lots: Vec<i64> = own.iter().map(|record| record.lot).collect();
    lots.sort_unstable();
    lots.dedup();
    let (short, exact) = life(one, &own);
    let covered = covered_months(&one.built).map(words::months);
    vec![
        Cell::link(path, one.title.clone()),
        Cell::number(lots.len().to_string()),
        Cell::number_or_missing(covered, "no number"),
        newest,
        Cell::Text(short),
        exact,
    ]
}

fn life(one: &Computed, own: &[&Record]) -> (String, Cell) {
    if one.is_in_words {
        return (in_words(own), Cell::Missing("in words".to_string()));
    }
    match &one.found {
        Ok(found) => {
            let exact = found.life.outcome.months().map(|months| format!("{months:.4}"));
            (words::life_short(found), Cell::number_or_missing(exact, "none"))
        }
        Err(sentence) => (format!("not evaluable: {sentence}"), Cell::Missing("none".to_string())),
    }
}

/// Grades have no line: how long every lot conformed.
pub fn in_words(own: &[&Record]) -> String {
    let months = |age: rust_decimal::Decimal| age.round_dp(1).normalize().to_string();
    match conforming_until(own) {
        (_, Some((age, lot))) => format!("lot {lot} does not conform at {} months", months(age)),
        (Some(age), None) => format!("every lot conforms to {} months", months(age)),
        (None, None) => "not judged yet".to_string(),
    }
}
