//! One series: chart, model, shelf life, lots, what was left out, and which test binds.

use askama::Template;

use super::super::field::{Entry, Field};
use super::super::page::Shell;
use super::super::pairs::encoded;
use super::super::reply::{Outcome, page};
use super::super::table::{Cell, Table};
use super::super::visit::Visit;
use super::load::{self, Loaded};
use super::path;
use crate::domain::evaluation::Replicates;
use crate::domain::evaluation::group::{self, Computed, Wishes};
use crate::domain::evaluation::record::{self, Record, SCALES, scale_code, usual_scale};
use crate::report::chart::Drawn;
use crate::report::evaluation::{self, About, Sheet, words};
use crate::store;

#[derive(Template)]
#[template(path = "evaluation/one.html")]
struct OnePage {
    shell: Shell,
    lead: String,
    chart: Option<Drawn>,
    facts: Vec<(String, String)>,
    pooling: Option<Table>,
    why: String,
    lots: Option<Table>,
    tests: Table,
    left_out: Table,
    notes: Vec<String>,
    choices: Vec<Field>,
    here: String,
    component: String,
    /// Where two formulation versions are compared, if two have results.
    versions: Option<String>,
}

pub fn one(visit: &Visit) -> Outcome {
    visit.knows_query(&["component", "replicates", "scale", "version"])?;
    let loaded = load::group_of(visit, visit.id("arm")?)?;
    let wishes = load::wishes(visit)?;
    let (test, component) = super::asked(visit, &loaded)?;
    let usual = Wishes { alpha: wishes.alpha, ..Wishes::default() };
    let all = group::compute_all(&loaded.group, &loaded.records, &loaded.limits, &usual);
    let computed =
        group::compute(&loaded.group, (&test, &component), &loaded.records, &loaded.limits, &wishes);
    let sheet = match &computed.found {
        Ok(found) if !found.series.lots.is_empty() => Some(evaluation::sheet(&About {
            group: &loaded.group,
            built: &computed.built,
            found,
            specification: &loaded.specification,
            alpha_percent: load::alpha_percent(visit)?,
        })),
        _ => None,
    };
    page(&shown(visit, &loaded, &computed, &all, &wishes, sheet))
}

fn shown(
    visit: &Visit,
    loaded: &Loaded,
    computed: &Computed,
    all: &[Computed],
    wishes: &Wishes,
    sheet: Option<Sheet>,
) -> OnePage {
    let group = &loaded.group;
    let title = format!("{} at {}", computed.title, group.condition_words());
    let shell = Shell::of(visit, &title).crumb("/evaluations", "Evaluation").crumb(
        format!("/evaluations?presentation={}", group.key.presentation),
        format!("{} {}", group.product_code, group.presentation_code),
    );
    let mut notes = sheet.as_ref().map(|sheet| sheet.notes.clone()).unwrap_or_default();
    notes.extend(own_notes(loaded, computed, sheet.is_some()));
    let chosen = choices(loaded, computed, wishes);
    let has_versions = chosen.iter().any(|field| field.name == "version");
    let query = if computed.component.is_empty() {
        String::new()
    } else {
        format!("?component={}", encoded(&computed.component))
    };
    let versions = format!("{}/versions{query}", path(group.arm, &computed.test, ""));
    OnePage {
        shell,
        lead: lead(computed, sheet.as_ref(), &loaded.records),
        pooling: sheet.as_ref().filter(|sheet| !sheet.pooling.is_empty()).map(|sheet| pooling(sheet, wishes)),
        why: sheet.as_ref().map(|sheet| sheet.why.clone()).unwrap_or_default(),
        lots: sheet.as_ref().map(lots),
        tests: tests(group.arm, all, computed),
        left_out: left_out(computed),
        facts: sheet.as_ref().map(|sheet| sheet.facts.clone()).unwrap_or_default(),
        chart: sheet.map(|sheet| sheet.chart),
        notes,
        choices: chosen,
        here: path(group.arm, &computed.test, ""),
        component: computed.component.clone(),
        versions: has_versions.then_some(versions),
    }
}

fn lead(computed: &Computed, sheet: Option<&Sheet>, records: &[Record]) -> String {
    if let Some(sheet) = sheet {
        return sheet.lead.clone();
    }
    if computed.is_in_words {
        let own: Vec<&Record> = records
            .iter()
            .filter(|one| one.point.test == computed.test && one.point.component == computed.component)
            .collect();
        return format!("Reported in words, so no line is drawn: {}.", super::list::in_words(&own));
    }
    match &computed.found {
        Ok(_) => "Not evaluable: no result takes part; below is why.".to_string(),
        Err(sentence) => format!("Not evaluable: {sentence}."),
    }
}

/// What a reader should know beside the computation: other specifications, versions, methods, signatures.
fn own_notes(loaded: &Loaded, computed: &Computed, is_computed: bool) -> Vec<String> {
    let mut notes = Vec::new();
    if !is_computed {
        return notes;
    }
    let distinct = |pick: &dyn Fn(&Record) -> String| {
        let mut found: Vec<String> = computed.built.records().map(pick).collect();
        found.sort();
        found.dedup();
        found
    };
    let formulations = distinct(&|one| one.formulation.clone());
    if formulations.len() > 1 {
        notes.push(format!(
            "lots of several formulation versions stand together: {}",
            formulations.join(", ")
        ));
    }
    if distinct(&|one| one.method_version.to_string()).len() > 1 {
        notes.push("results of several versions of the method stand together".to_string());
    }
    let unsigned =
        computed.built.records().filter(|one| !one.point.is_signed && !one.point.is_imported).count();
    if unsigned > 0 {
        notes.push(format!(
            "{unsigned} of the results are not signed by QA yet; they count, open on the chart"
        ));
    }
    if computed.built.records().any(|one| one.point.is_imported) {
        notes.push("imported results, not observed here: no signed conclusion can rest on them".to_string());
    }
    if loaded.lots_on_study > store::evaluation::NEWEST_LOTS {
        let (newest, all) = (store::evaluation::NEWEST_LOTS, loaded.lots_on_study);
        notes.push(format!("only the newest {newest} of {all} lots on study take part"));
    }
    if !loaded.other_specifications.is_empty() {
        let others = loaded.other_specifications.join(", ");
        notes.push(format!(
            "limits are those of {}; other studies are bound to {others}",
            loaded.specification
        ));
    }
    notes
}

fn cells(row: &[String], numbers: &[usize]) -> Vec<Cell> {
    let cell = |(at, words): (usize, &String)| {
        if numbers.contains(&at) { Cell::number(words.clone()) } else { Cell::text(words.clone()) }
    };
    row.iter().enumerate().map(cell).collect()
}

fn pooling(sheet: &Sheet, wishes: &Wishes) -> Table {
    let caption = format!(
        "Can the lots be pooled? Level {}, slopes before intercepts (Q1E 2003)",
        words::months(wishes.alpha)
    );
    let heads = ["Question", "Sum of squares#", "df#", "Mean square#", "F#", "p#", "Answer"];
    Table::new(&caption, &heads, "").rows(sheet.pooling.iter().map(|row| cells(row, &[1, 2, 3, 4, 5])))
}

fn lots(sheet: &Sheet) -> Table {
    let heads = [
        "Lot",
        "Results#",
        "Slope per month#",
        "Its error#",
        "At time zero#",
        "Variance#",
        "Months#",
        "By own variance#",
    ];
    let caption =
        "Each lot by itself; months by the chosen model, and beside it by the lot's own variance (not Q1E)";
    let row = |row: &Vec<String>| {
        let mut cells = cells(row, &[2, 3, 4, 5, 6, 7, 8]);
        cells.splice(0..2, [Cell::noted(row[0].clone(), row[1].clone())]);
        cells
    };
    Table::new(caption, &heads, "").rows(sheet.lots.iter().map(row))
}

fn tests(arm: i64, all: &[Computed], here: &Computed) -> Table {
    let binding = group::binding(all).map(|one| (one.test.clone(), one.component.clone()));
    let row = |one: &Computed| {
        let (short, exact) = match &one.found {
            Ok(_) if one.is_in_words => ("in words".to_string(), None),
            Ok(found) => {
                (words::life_short(found), found.life.outcome.months().map(|months| format!("{months:.4}")))
            }
            Err(sentence) => (format!("not evaluable: {sentence}"), None),
        };
        let lot = one
            .found
            .as_ref()
            .ok()
            .and_then(|found| found.life.binding_lot.map(|lot| found.series.lots[lot].name.clone()));
        let key = (one.test.clone(), one.component.clone());
        let is_here = one.test == here.test && one.component == here.component;
        let note = match (binding.as_ref() == Some(&key), is_here) {
            (true, true) => "binds; this page",
            (true, false) => "binds",
            (false, true) => "this page",
            (false, false) => "",
        };
        let (path, words) = (path(arm, &one.test, &one.component), one.title.clone());
        vec![
            Cell::Link { path, words, note: note.to_string() },
            Cell::text(short),
            Cell::number_or_missing(exact.clone(), "none"),
            Cell::or_missing(lot, if exact.is_some() { "all lots alike" } else { "none" }),
        ]
    };
    let heads = ["Test", "Shelf life", "Exactly, months#", "Lot that binds"];
    Table::new("Every test of this condition, by the usual choices", &heads, "").rows(all.iter().map(row))
}

fn left_out(computed: &Computed) -> Table {
    let rows = computed.built.left_out.iter();
    Table::new("By name, with the reason", &["Lot", "Age", "Why"], "Nothing was left out.")
        .rows(rows.map(|one| vec![Cell::text(&one.lot), Cell::text(&one.age), Cell::text(&one.why)]))
}

fn choices(loaded: &Loaded, computed: &Computed, wishes: &Wishes) -> Vec<Field> {
    let mut fields = Vec::new();
    let own: Vec<Record> =
        loaded.records.iter().filter(|one| one.point.test == computed.test).cloned().collect();
    if record::has_independent(&own) {
        let value = if wishes.replicates == Replicates::Independent { "independent" } else { "mean" };
        fields.push(
            Field::new("replicates", "Several containers of a pull", Entry::Select)
                .choices([("mean", "the reported value"), ("independent", "each container by itself")])
                .value(value),
        );
    }
    let usual = scale_code(usual_scale(&computed.kind));
    let value = wishes.scale.clone().unwrap_or_else(|| usual.to_string());
    let words = |code: &str, words: &str| {
        if code == usual { format!("{words} (usual for this test)") } else { words.to_string() }
    };
    fields.push(
        Field::new("scale", "Analysis scale", Entry::Select)
            .choices(SCALES.iter().map(|(code, _, said)| (code.to_string(), words(code, said))))
            .value(value),
    );
    let mut versions: Vec<(i64, String)> =
        own.iter().map(|one| (one.formulation_version, one.formulation.clone())).collect();
    versions.sort();
    versions.dedup();
    if versions.len() > 1 {
        let value = wishes.formulation_version.map(|id| id.to_string()).unwrap_or_default();
        fields.push(
            Field::new("version", "Only lots of", Entry::Select)
                .choices(versions.into_iter().map(|(id, words)| (id.to_string(), words)))
                .value(value),
        );
    }
    fields
}
