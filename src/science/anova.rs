//! One-way analysis of variance: between groups against within groups.

use super::distribution::fisher::Fisher;

/// The table of a one-way analysis.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct OneWay {
    /// Sum of squares between groups.
    pub between: f64,
    /// Its degrees of freedom.
    pub df_between: usize,
    /// Sum of squares within groups.
    pub within: f64,
    /// Its degrees of freedom.
    pub df_within: usize,
    /// The variance ratio; none where the variance within is zero.
    pub f: Option<f64>,
    /// Probability of an F at least as large; none with f.
    pub p: Option<f64>,
}

/// Compares the means of groups. Sums are taken about means; hand in values as differences from a common
/// exact origin where they share many leading digits. `None` unless there are two groups, none empty, more
/// values than groups, and all values finite.
pub fn one_way(groups: &[&[f64]]) -> Option<OneWay> {
    let n: usize = groups.iter().map(|group| group.len()).sum();
    if groups.len() < 2 || groups.iter().any(|group| group.is_empty()) || n <= groups.len() {
        return None;
    }
    let means: Vec<f64> = groups.iter().map(|group| mean(group)).collect();
    let grand = groups.iter().zip(&means).map(|(group, m)| group.len() as f64 * m).sum::<f64>() / n as f64;
    let between: f64 =
        groups.iter().zip(&means).map(|(group, m)| group.len() as f64 * (m - grand) * (m - grand)).sum();
    let within: f64 =
        groups.iter().zip(&means).flat_map(|(group, m)| group.iter().map(move |y| (y - m) * (y - m))).sum();
    let (df_between, df_within) = (groups.len() - 1, n - groups.len());
    let f = (between / df_between as f64) / (within / df_within as f64);
    let f = f.is_finite().then_some(f);
    let p = f.and_then(|f| Some(Fisher::new(df_between as f64, df_within as f64)?.tails(f).upper));
    (between.is_finite() && within.is_finite()).then_some(OneWay {
        between,
        df_between,
        within,
        df_within,
        f,
        p,
    })
}

/// The mean, with what rounding left over carried back.
fn mean(values: &[f64]) -> f64 {
    let count = values.len() as f64;
    let first = values.iter().sum::<f64>() / count;
    first + values.iter().map(|y| y - first).sum::<f64>() / count
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_cannot_be_compared_has_no_table() {
        assert_eq!(one_way(&[&[1.0, 2.0]]), None);
        assert_eq!(one_way(&[&[1.0], &[2.0]]), None);
        assert_eq!(one_way(&[&[1.0, 2.0], &[]]), None);
        let flat = one_way(&[&[1.0, 1.0], &[2.0, 2.0]]).unwrap();
        assert_eq!((flat.f, flat.p), (None, None));
    }
}
