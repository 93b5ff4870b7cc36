//! Ordinal grades: supported period, trend signals and, with enough data, a proportional-odds fit.

use super::distribution::normal;
use super::least_squares::Cholesky;

/// One grade of one unit at one age; grade 0 is the best.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Grade {
    /// Age.
    pub age: f64,
    /// Grade.
    pub grade: u32,
}

/// The last age up to which every unit met the grade limit, and the first age at which one did not. Units of
/// all lots are handed in together.
pub fn supported_period(grades: &[Grade], worst_allowed: u32) -> (Option<f64>, Option<f64>) {
    let fails = grades.iter().filter(|g| g.grade > worst_allowed).map(|g| g.age).min_by(f64::total_cmp);
    let before = |g: &&Grade| fails.is_none_or(|age| g.age < age);
    let last = grades.iter().filter(before).map(|g| g.age).max_by(f64::total_cmp);
    (last, fails)
}

/// Whether a new grade stands out, and why.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum GradeSignal {
    /// Nothing to report.
    None,
    /// Worse than every earlier grade of other lots at this age.
    WorseThanHistory,
    /// Two or more steps worse than the lot's own previous pull.
    TwoStepsWorse,
    /// Neither other lots at this age nor an earlier pull: nothing to compare with.
    NotEvaluable,
}

/// Compares a new grade with the history at its age and with the lot's previous pull.
pub fn signal(new: u32, history_at_age: &[u32], previous: Option<u32>) -> GradeSignal {
    match (history_at_age.iter().max(), previous) {
        (None, None) => GradeSignal::NotEvaluable,
        (_, Some(before)) if new >= before.saturating_add(2) => GradeSignal::TwoStepsWorse,
        (Some(worst), _) if new > *worst => GradeSignal::WorseThanHistory,
        _ => GradeSignal::None,
    }
}

/// A rank correlation with its two-sided probability.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct RankTrend {
    /// Kendall's τ_b.
    pub tau_b: f64,
    /// Two-sided probability: exact without ties and n ≤ 8, else by the normal approximation with ties.
    pub p: f64,
    /// Whether p is exact.
    pub exact: bool,
}

/// Kendall's τ_b of grade on age. Source: Kendall, Rank Correlation Methods, 4th ed. 1970, ch. 3–5. `None`
/// with fewer than three grades or when all ages or all grades are equal.
pub fn kendall(grades: &[Grade]) -> Option<RankTrend> {
    let n = grades.len();
    (n >= 3).then_some(())?;
    let mut s = 0i64;
    for (i, a) in grades.iter().enumerate() {
        for b in &grades[i + 1..] {
            s += sign(a.age.total_cmp(&b.age)) * sign(a.grade.cmp(&b.grade));
        }
    }
    let ages = ties(grades, |g| g.age.to_bits());
    let steps = ties(grades, |g| u64::from(g.grade));
    let pairs = |n: f64| 0.5 * n * (n - 1.0);
    let all = pairs(n as f64);
    let free = |ties: &[f64]| all - ties.iter().map(|t| pairs(*t)).sum::<f64>();
    let (free_ages, free_steps) = (free(&ages), free(&steps));
    (free_ages > 0.0 && free_steps > 0.0).then_some(())?;
    let tau_b = (s as f64 / (free_ages * free_steps).sqrt()).clamp(-1.0, 1.0);
    let untied = ages.iter().chain(&steps).all(|t| *t == 1.0);
    let exact = untied && n <= 8;
    let p = if exact { exact_p(n, s) } else { normal_p(n as f64, s as f64, &ages, &steps) };
    Some(RankTrend { tau_b, p, exact })
}

fn sign(order: std::cmp::Ordering) -> i64 {
    order as i64
}

/// Sizes of groups of equal keys.
fn ties(grades: &[Grade], key: impl Fn(&Grade) -> u64) -> Vec<f64> {
    let mut keys: Vec<u64> = grades.iter().map(key).collect();
    keys.sort_unstable();
    keys.chunk_by(|a, b| a == b).map(|group| group.len() as f64).collect()
}

/// Normal approximation with the tie-corrected variance.
fn normal_p(n: f64, s: f64, x: &[f64], y: &[f64]) -> f64 {
    let sum = |ties: &[f64], f: fn(f64) -> f64| ties.iter().map(|t| f(*t)).sum::<f64>();
    let v = |t: f64| t * (t - 1.0) * (2.0 * t + 5.0);
    let three = |t: f64| t * (t - 1.0) * (t - 2.0);
    let two = |t: f64| t * (t - 1.0);
    let variance = (v(n) - sum(x, v) - sum(y, v)) / 18.0
        + sum(x, three) * sum(y, three) / (9.0 * n * (n - 1.0) * (n - 2.0))
        + sum(x, two) * sum(y, two) / (2.0 * n * (n - 1.0));
    if variance > 0.0 { (2.0 * normal::upper(s.abs() / variance.sqrt())).min(1.0) } else { 1.0 }
}

/// Exact two-sided probability: share of the n! orders with |S| at least as large, by counting inversions.
fn exact_p(n: usize, s: i64) -> f64 {
    let most = n * (n - 1) / 2;
    let mut ways = vec![0.0; most + 1];
    ways[0] = 1.0;
    for item in 2..=n {
        let before = ways.clone();
        for (inversions, slot) in ways.iter_mut().enumerate() {
            *slot = before[inversions.saturating_sub(item - 1)..=inversions].iter().sum();
        }
    }
    let all: f64 = ways.iter().sum();
    let far = |inversions: usize| (most as i64 - 2 * inversions as i64).abs() >= s.abs();
    (0..=most).filter(|k| far(*k)).map(|k| ways[k]).sum::<f64>() / all
}

/// A proportional-odds fit: logit P(grade ≤ j) = cut_j − β·x.
#[derive(Clone, Debug, PartialEq)]
pub struct ProportionalOdds {
    /// Effects, one per column.
    pub effects: Vec<f64>,
    /// Their standard errors.
    pub standard_errors: Vec<f64>,
    /// Cut points, rising.
    pub cuts: Vec<f64>,
    /// Log likelihood.
    pub log_likelihood: f64,
}

/// Why there is no proportional-odds fit.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum NoOdds {
    /// Needs 20 results and 3 grades.
    TooFew,
    /// Sizes do not fit or a number is not finite.
    BadInput,
    /// Grades separate perfectly: the effect has no finite estimate.
    Separated,
}

/// One observation of the fit.
struct Odds<'a> {
    rows: &'a [f64],
    columns: usize,
    grades: &'a [usize],
    weights: &'a [f64],
    levels: usize,
}

/// Fits grades (numbered 0, 1, … without gaps) on the columns of `rows`, each row counted `weights` times.
/// Source: McCullagh, J. R. Stat. Soc. B 42 (1980) 109.
pub fn proportional_odds(
    rows: &[f64],
    columns: usize,
    grades: &[usize],
    weights: &[f64],
) -> Result<ProportionalOdds, NoOdds> {
    let sizes = columns > 0 && rows.len() == columns * grades.len() && weights.len() == grades.len();
    let finite = rows.iter().chain(weights).all(|x| x.is_finite()) && weights.iter().all(|w| *w >= 0.0);
    if !(sizes && finite) {
        return Err(NoOdds::BadInput);
    }
    let levels = grades.iter().max().map_or(0, |top| top + 1);
    if weights.iter().sum::<f64>() < 20.0 || levels < 3 {
        return Err(NoOdds::TooFew);
    }
    let odds = Odds { rows, columns, grades, weights, levels };
    let mut parameters = odds.start().ok_or(NoOdds::BadInput)?;
    let mut here = odds.at(&parameters);
    for _ in 0..100 {
        let step = Cholesky::of(&here.2, parameters.len()).ok_or(NoOdds::Separated)?.solve(&here.1);
        let mut share = 1.0;
        let (next, there) = loop {
            let next: Vec<f64> = parameters.iter().zip(&step).map(|(p, s)| p + share * s).collect();
            let there = odds.at(&next);
            if there.0 >= here.0 - 1e-12 * here.0.abs() || share < 1e-9 {
                break (next, there);
            }
            share *= 0.5;
        };
        (parameters, here) = (next, there);
        if parameters.iter().any(|p| p.abs() > 1e4) {
            return Err(NoOdds::Separated);
        }
        if step.iter().map(|s| (share * s).abs()).fold(0.0, f64::max) < 1e-13 {
            break;
        }
    }
    odds.finish(parameters, here)
}

impl Odds<'_> {
    /// No effects; cuts at the logits of the shares found.
    fn start(&self) -> Option<Vec<f64>> {
        let mut counts = vec![0.0; self.levels];
        for (grade, weight) in self.grades.iter().zip(self.weights) {
            counts[*grade] += weight;
        }
        let total: f64 = counts.iter().sum();
        let mut parameters = vec![0.0; self.columns];
        let mut below = 0.0;
        for count in &counts[..self.levels - 1] {
            (*count > 0.0).then_some(())?;
            below += count;
            parameters.push((below / (total - below)).ln());
        }
        (counts[self.levels - 1] > 0.0).then_some(parameters)
    }

    /// Log likelihood, gradient and observed information in (effects, cuts).
    fn at(&self, parameters: &[f64]) -> (f64, Vec<f64>, Vec<f64>) {
        let size = parameters.len();
        let (mut value, mut gradient, mut information) = (0.0, vec![0.0; size], vec![0.0; size * size]);
        for ((row, &grade), &weight) in
            self.rows.chunks_exact(self.columns).zip(self.grades).zip(self.weights)
        {
            let shift: f64 = row.iter().zip(parameters).map(|(x, b)| x * b).sum();
            let end = |cut: Option<usize>| cut.map(|cut| logistic(parameters[self.columns + cut] - shift));
            let (low, high) = (grade.checked_sub(1), (grade + 1 < self.levels).then_some(grade));
            let (l, u) = (end(low).unwrap_or([0.0; 3]), end(high).unwrap_or([1.0, 0.0, 0.0]));
            let probability = u[0] - l[0];
            if probability.is_nan() || probability <= 0.0 {
                return (f64::NEG_INFINITY, gradient, information);
            }
            value += weight * probability.ln();
            // Derivatives of the two ends in every parameter: −x for effects, 1 for the end's own cut.
            let part = |end: Option<usize>, i: usize| {
                if i < self.columns { -row[i] } else { f64::from(u8::from(end == Some(i - self.columns))) }
            };
            for i in 0..size {
                let (ui, li) = (part(high, i), part(low, i));
                let first = (u[1] * ui - l[1] * li) / probability;
                gradient[i] += weight * first;
                for j in 0..=i {
                    let (uj, lj) = (part(high, j), part(low, j));
                    let other = (u[1] * uj - l[1] * lj) / probability;
                    let second = (u[2] * ui * uj - l[2] * li * lj) / probability - first * other;
                    information[i * size + j] -= weight * second;
                    if i != j {
                        information[j * size + i] -= weight * second;
                    }
                }
            }
        }
        (value, gradient, information)
    }

    fn finish(
        &self,
        parameters: Vec<f64>,
        here: (f64, Vec<f64>, Vec<f64>),
    ) -> Result<ProportionalOdds, NoOdds> {
        let size = parameters.len();
        let inverse = Cholesky::of(&here.2, size).ok_or(NoOdds::Separated)?.inverse();
        let standard_errors: Vec<f64> = (0..self.columns).map(|i| inverse[i * size + i].sqrt()).collect();
        if !here.0.is_finite() || standard_errors.iter().any(|se| *se > 1e3) {
            return Err(NoOdds::Separated);
        }
        let (effects, cuts) = parameters.split_at(self.columns);
        Ok(ProportionalOdds {
            effects: effects.to_vec(),
            standard_errors,
            cuts: cuts.to_vec(),
            log_likelihood: here.0,
        })
    }
}

/// The logistic distribution function with its first two derivatives.
fn logistic(z: f64) -> [f64; 3] {
    let f = 1.0 / (1.0 + (-z).exp());
    let slope = f * (1.0 - f);
    [f, slope, slope * (1.0 - 2.0 * f)]
}

#[cfg(test)]
mod tests {
    use super::*;

    fn grades(pairs: &[(f64, u32)]) -> Vec<Grade> {
        pairs.iter().map(|&(age, grade)| Grade { age, grade }).collect()
    }

    #[test]
    fn the_supported_period_ends_before_the_first_failure() {
        let set = grades(&[(0.0, 0), (3.0, 0), (6.0, 1), (6.0, 2), (9.0, 1)]);
        assert_eq!(supported_period(&set, 1), (Some(3.0), Some(6.0)));
        assert_eq!(supported_period(&set, 2), (Some(9.0), None));
        assert_eq!(supported_period(&set[3..4], 1), (None, Some(6.0)));
    }

    #[test]
    fn signals() {
        assert_eq!(signal(2, &[1, 1, 0], Some(1)), GradeSignal::WorseThanHistory);
        assert_eq!(signal(3, &[3], Some(1)), GradeSignal::TwoStepsWorse);
        assert_eq!(signal(1, &[1], Some(1)), GradeSignal::None);
        assert_eq!(signal(1, &[], None), GradeSignal::NotEvaluable);
    }

    #[test]
    fn exact_kendall_of_a_perfect_order() {
        let trend = kendall(&grades(&[(0.0, 0), (1.0, 1), (2.0, 2), (3.0, 3), (4.0, 4)])).unwrap();
        assert_eq!(trend.tau_b, 1.0);
        assert!((trend.p - 2.0 / 120.0).abs() < 1e-15 && trend.exact);
        assert_eq!(kendall(&grades(&[(0.0, 1), (1.0, 1), (2.0, 1)])), None);
    }

    #[test]
    fn too_few_grades_are_refused() {
        assert_eq!(proportional_odds(&[1.0, 2.0], 1, &[0, 1], &[1.0, 1.0]), Err(NoOdds::TooFew));
    }
}
