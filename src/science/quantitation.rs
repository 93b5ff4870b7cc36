//! Results below the quantitation limit: what may be done with them, and how much it matters.
//!
//! Source: EPA QA/G-9 (2000), section 4.7; Helsel, Statistics for Censored Environmental Data, 2012
//! (recalled).

use super::regression::{Line, NoLine, Point};

/// One result, perhaps only known to be below its quantitation limit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Quantified {
    /// (age, value).
    Measured(f64, f64),
    /// (age, quantitation limit).
    Below(f64, f64),
}

/// What may be done, by the share of results below the limit.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Treatment {
    /// No result is below.
    AsMeasured,
    /// At most 15 %: half the limit may stand in, marked.
    HalfTheLimit,
    /// At most 50 %: maximum likelihood.
    MaximumLikelihood,
    /// More: no line; only the largest result is stated.
    OnlyTheMaximum,
}

/// The treatment for these results. No results count as none below.
pub fn treatment(results: &[Quantified]) -> Treatment {
    let below = results.iter().filter(|r| matches!(r, Quantified::Below(..))).count();
    match (below * 100, results.len()) {
        (0, _) => Treatment::AsMeasured,
        (share, n) if share <= 15 * n => Treatment::HalfTheLimit,
        (share, n) if share <= 50 * n => Treatment::MaximumLikelihood,
        _ => Treatment::OnlyTheMaximum,
    }
}

/// The lines with 0, half the limit and the whole limit in place of what was not quantified: how far apart
/// they lie shows how much the choice matters.
pub fn sensitivity(results: &[Quantified]) -> Result<[Line; 3], NoLine> {
    let with = |share: f64| {
        let points: Vec<Point> = results
            .iter()
            .map(|result| match *result {
                Quantified::Measured(x, y) => Point { x, y },
                Quantified::Below(x, limit) => Point { x, y: share * limit },
            })
            .collect();
        Line::fit(&points)
    };
    Ok([with(0.0)?, with(0.5)?, with(1.0)?])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_share_below_decides() {
        let set = |measured: usize, below: usize| {
            let mut results = vec![Quantified::Measured(0.0, 1.0); measured];
            results.extend(vec![Quantified::Below(0.0, 0.05); below]);
            treatment(&results)
        };
        assert_eq!(set(5, 0), Treatment::AsMeasured);
        assert_eq!(set(17, 3), Treatment::HalfTheLimit);
        assert_eq!(set(5, 1), Treatment::MaximumLikelihood);
        assert_eq!(set(5, 5), Treatment::MaximumLikelihood);
        assert_eq!(set(4, 5), Treatment::OnlyTheMaximum);
    }
}
