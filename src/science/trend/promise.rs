//! False alarms: what a promise costs per pull, and what was expected against what was found.

use crate::science::distribution::chi_squared::ChiSquared;

/// The level of one pull that keeps a promise over all planned pulls of a lot: 1 − (1 − α)^(1/K) (Šidák,
/// JASA 62 (1967) 626). `None` unless 0 < α < 1 and K > 0.
pub fn per_pull(per_lot: f64, planned_pulls: u32) -> Option<f64> {
    weighted(per_lot, 1.0, f64::from(planned_pulls))
}

/// The same with an unequal share: weight of this pull, sum of the weights of all planned pulls.
pub fn weighted(per_lot: f64, weight: f64, sum: f64) -> Option<f64> {
    let usable = per_lot > 0.0 && per_lot < 1.0 && weight > 0.0 && sum >= weight && sum.is_finite();
    usable.then(|| -((-per_lot).ln_1p() * weight / sum).exp_m1())
}

/// The level of one judgement that keeps a yearly budget of false actions. `None` without judgements.
pub fn per_judgement(budget: f64, judgements: u32) -> Option<f64> {
    let level = budget / f64::from(judgements);
    (judgements > 0 && level > 0.0 && level < 1.0).then_some(level)
}

/// Alarms expected and found.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Tally {
    /// Results judged.
    pub judged: u32,
    /// False alarms expected if nothing is wrong.
    pub expected: f64,
    /// Alarms found.
    pub found: u32,
    /// Up to so many are ordinary: Poisson, 99 %.
    pub ordinary: u32,
}

impl Tally {
    /// At one level for all results.
    pub fn new(judged: u32, level: f64, found: u32) -> Self {
        let expected = f64::from(judged) * level.clamp(0.0, 1.0);
        Self { judged, expected, found, ordinary: ordinary(expected) }
    }

    /// Where results were judged at different levels: the sum of them is expected.
    pub fn expecting(judged: u32, expected: f64, found: u32) -> Self {
        Self { judged, expected, found, ordinary: ordinary(expected) }
    }

    /// More than is ordinary: real trouble, or heavy tails, or a wrong scale.
    pub fn stands_out(&self) -> bool {
        self.found > self.ordinary
    }
}

/// The smallest count that a Poisson count of this mean stays at or below with 99 %.
fn ordinary(mean: f64) -> u32 {
    // P(count ≤ k) = P(χ² with 2(k + 1) > 2·mean).
    let stays = |k: &u32| {
        ChiSquared::new(2.0 * (f64::from(*k) + 1.0)).is_some_and(|chi2| chi2.tails(2.0 * mean).upper >= 0.99)
    };
    (0..100_000).find(stays).unwrap_or(100_000)
}

/// Probabilities adjusted by Holm (Scand. J. Statist. 6 (1979) 65), in the order given; information only.
pub fn holm(p: &[f64]) -> Vec<f64> {
    let n = p.len();
    let mut adjusted = vec![0.0; n];
    let mut largest = 0.0_f64;
    for (rank, index) in sorted(p).into_iter().enumerate() {
        largest = largest.max((p[index] * (n - rank) as f64).min(1.0));
        adjusted[index] = largest;
    }
    adjusted
}

/// Probabilities adjusted by Benjamini & Hochberg (J. R. Stat. Soc. B 57 (1995) 289); information only.
pub fn benjamini_hochberg(p: &[f64]) -> Vec<f64> {
    let n = p.len();
    let mut adjusted = vec![0.0; n];
    let mut smallest = 1.0_f64;
    for (rank, index) in sorted(p).into_iter().enumerate().rev() {
        smallest = smallest.min(p[index] * n as f64 / (rank + 1) as f64);
        adjusted[index] = smallest;
    }
    adjusted
}

fn sorted(p: &[f64]) -> Vec<usize> {
    let mut order: Vec<usize> = (0..p.len()).collect();
    order.sort_by(|&a, &b| p[a].total_cmp(&p[b]));
    order
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_promise_of_five_percent_over_eight_pulls() {
        assert!((per_pull(0.05, 8).unwrap() - 0.00639).abs() < 5e-6);
        let parts = [1.0, 1.0, 1.0, 1.0, 2.0, 2.0, 3.0, 3.0].map(|w| weighted(0.05, w, 14.0).unwrap());
        let kept: f64 = parts.iter().map(|a| 1.0 - a).product();
        assert!((kept - 0.95).abs() < 1e-14);
        assert_eq!(per_pull(0.05, 0), None);
    }

    #[test]
    fn three_hundred_judgements() {
        let action = Tally::new(300, 0.01, 5);
        assert_eq!((action.expected, action.ordinary, action.stands_out()), (3.0, 8, false));
        assert_eq!(Tally::new(300, 0.05, 0).ordinary, 25);
        assert!(Tally::new(300, 0.01, 9).stands_out());
        assert_eq!(per_judgement(3.0, 300), Some(0.01));
    }

    #[test]
    fn adjusted_probabilities() {
        let p = [0.01, 0.04, 0.03];
        let close = |got: Vec<f64>, want: [f64; 3]| got.iter().zip(want).all(|(g, w)| (g - w).abs() < 1e-15);
        assert!(close(holm(&p), [0.03, 0.06, 0.06]));
        assert!(close(benjamini_hochberg(&p), [0.03, 0.04, 0.04]));
    }
}
