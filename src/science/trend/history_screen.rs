//! Gross errors in the history, found by externally studentised residuals. A finding is shown with the
//! verdict computed both ways; only a person takes a result out.

use super::all_finite;
use crate::science::distribution::student::Student;
use crate::science::pooling::{Model, Pooling};
use crate::science::regression::Point;

/// A history result that stands out.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Finding {
    /// Index of the lot in the history.
    pub lot: usize,
    /// Index of the result in its lot, as given.
    pub result: usize,
    /// Probability after Bonferroni over all results.
    pub p: f64,
}

/// At most this many results are flagged.
const MOST: usize = 2;

/// Flags at most two results, one at a time, at family-wise level `alpha` (0.01): externally studentised
/// residuals of the separate lines with one variance. A lot keeps at least three results.
pub fn screen(history: &[&[Point]], alpha: f64) -> Vec<Finding> {
    let mut findings: Vec<Finding> = Vec::new();
    if !history.iter().all(|lot| all_finite(lot)) {
        return findings;
    }
    let mut kept: Vec<Vec<(usize, Point)>> =
        history.iter().map(|lot| lot.iter().copied().enumerate().collect()).collect();
    while findings.len() < MOST {
        let Some(finding) = worst(&kept).filter(|finding| finding.p < alpha) else { break };
        kept[finding.lot].retain(|(index, _)| *index != finding.result);
        findings.push(finding);
    }
    findings
}

/// The most extreme result of the lots that can spare one.
fn worst(kept: &[Vec<(usize, Point)>]) -> Option<Finding> {
    let lots: Vec<Vec<Point>> = kept.iter().map(|lot| lot.iter().map(|(_, p)| *p).collect()).collect();
    let used: Vec<usize> = (0..lots.len()).filter(|&lot| !lots[lot].is_empty()).collect();
    let slices: Vec<&[Point]> = used.iter().map(|&lot| lots[lot].as_slice()).collect();
    let pooling = Pooling::of(&slices, 0.25).ok()?;
    let total: usize = slices.iter().map(|lot| lot.len()).sum();
    let mut best: Option<Finding> = None;
    for (index, &lot) in used.iter().enumerate() {
        let Some(line) = pooling.mean_line(Model::SeparateLines, index) else { continue };
        if lots[lot].len() <= 3 || line.variance <= 0.0 || line.df < 2 {
            continue;
        }
        let student = Student::new(line.df as f64 - 1.0)?;
        for (original, p) in &kept[lot] {
            let rest = 1.0 - line.leverage(p.x);
            if rest < 1e-9 {
                continue;
            }
            let square = (p.y - line.at(p.x)).powi(2) / (line.variance * rest);
            let left = (line.df as f64 - square).max(1e-12);
            let t = (square * (line.df as f64 - 1.0) / left).sqrt();
            let probability = (student.two_sided(t) * total as f64).min(1.0);
            if best.is_none_or(|found| probability < found.p) {
                best = Some(Finding { lot, result: *original, p: probability });
            }
        }
    }
    best
}

/// The history without the flagged results; lots that lost one are copied.
pub fn without(history: &[&[Point]], findings: &[Finding]) -> Vec<Vec<Point>> {
    let flagged = |lot: usize, result: usize| findings.iter().any(|f| f.lot == lot && f.result == result);
    history
        .iter()
        .enumerate()
        .map(|(lot, points)| {
            points.iter().enumerate().filter(|(i, _)| !flagged(lot, *i)).map(|(_, p)| *p).collect()
        })
        .collect()
}
