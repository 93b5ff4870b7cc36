//! A computed series as a page or a sheet of paper shows it: sentences, facts, tables of words, one chart.

pub mod curves;
pub mod tables;
pub mod words;

use crate::domain::evaluation::assess::Assessment;
use crate::domain::evaluation::container::{self, ContainerBounds};
use crate::domain::evaluation::record::covered_months;
use crate::domain::evaluation::record::{Built, Group};

/// Everything a page shows of one series.
#[derive(Clone, Debug)]
pub struct Sheet {
    /// The finding in one sentence.
    pub lead: String,
    /// Names and values.
    pub facts: Vec<(String, String)>,
    pub chart: crate::report::chart::Drawn,
    /// Question, sum of squares, df, mean square, F, p, answer.
    pub pooling: Vec<Vec<String>>,
    /// Why this model, in a sentence.
    pub why: String,
    /// Lot, formulation, n, slope, its error, intercept, residual variance, shelf life, own-variance shelf life.
    pub lots: Vec<Vec<String>>,
    pub notes: Vec<String>,
    /// Lot, age, why.
    pub left_out: Vec<Vec<String>>,
}

/// What the sheet is told beside the series.
#[derive(Clone, Debug)]
pub struct About<'a> {
    pub group: &'a Group,
    pub built: &'a Built,
    pub found: &'a Assessment,
    /// The specification whose limits hold.
    pub specification: &'a str,
    pub alpha_percent: i64,
}

/// The sheet of a computed series.
pub fn sheet(about: &About<'_>) -> Sheet {
    let found = about.found;
    let bounds = container::of(found);
    Sheet {
        lead: words::lead(about.group, found, covered_months(about.built)),
        facts: facts(about, bounds.as_ref()),
        chart: curves::chart(about).drawn(),
        pooling: tables::pooling(found),
        why: words::why(found),
        lots: tables::lots(about),
        notes: found.notes.clone(),
        left_out: about
            .built
            .left_out
            .iter()
            .map(|one| vec![one.lot.clone(), one.age.clone(), one.why.clone()])
            .collect(),
    }
}

fn facts(about: &About<'_>, bounds: Option<&ContainerBounds>) -> Vec<(String, String)> {
    let found = about.found;
    let mut facts = vec![
        ("Shelf life".to_string(), words::life(found)),
        ("Model".to_string(), words::why(found)),
        ("Limit".to_string(), words::limit(about)),
    ];
    facts.extend(words::quantile(found).map(|words| ("Confidence limit".to_string(), words)));
    facts.extend(words::mean_crossing(found).map(|words| ("The mean line itself".to_string(), words)));
    facts.extend(bounds.map(|bounds| ("One container".to_string(), words::container(found, bounds))));
    let covered =
        covered_months(about.built).map(|months| format!("{} months on every lot", words::months(months)));
    facts.push(("Data cover".to_string(), covered.unwrap_or_else(|| "no age yet".to_string())));
    facts.push(("Scale".to_string(), words::scale(found).to_string()));
    facts
}
