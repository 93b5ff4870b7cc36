//! The scale on which a test is analysed; fixed per test, never chosen per data set.

use thiserror::Error;

/// The analysis scale.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Scale {
    /// The values as they are.
    None,
    /// Natural logarithm: viscosity, shake counts.
    Ln,
    /// √(y + 3/8): counts with zeros (Anscombe, Biometrika 35 (1948) 246).
    Anscombe,
    /// ln(y/(1 − y)): shares between 0 and 1.
    Logit,
}

/// A value that the scale cannot take.
#[derive(Clone, Copy, Debug, PartialEq, Error)]
pub enum OffScale {
    /// The logarithm needs values above zero.
    #[error("the ln scale needs a value above 0")]
    NotAboveZero,
    /// Counts cannot be negative.
    #[error("the anscombe scale needs a value of 0 or more")]
    Negative,
    /// The logit needs values strictly between 0 and 1.
    #[error("the logit scale needs a value between 0 and 1, the ends left out")]
    OutsideZeroToOne,
    /// Not a finite number.
    #[error("the value is not a finite number")]
    NotFinite,
}

impl Scale {
    /// The value on the analysis scale. All scales rise with the value, so a lower limit stays a lower limit.
    pub fn forward(self, y: f64) -> Result<f64, OffScale> {
        if !y.is_finite() {
            return Err(OffScale::NotFinite);
        }
        match self {
            Self::None => Ok(y),
            Self::Ln if y > 0.0 => Ok(y.ln()),
            Self::Ln => Err(OffScale::NotAboveZero),
            Self::Anscombe if y >= 0.0 => Ok((y + 0.375).sqrt()),
            Self::Anscombe => Err(OffScale::Negative),
            Self::Logit if y > 0.0 && y < 1.0 => Ok(y.ln() - (-y).ln_1p()),
            Self::Logit => Err(OffScale::OutsideZeroToOne),
        }
    }

    /// Back to the original scale. Of a mean this is the median, not the mean, of the original values.
    /// A value too large for a number becomes the largest number.
    pub fn back(self, z: f64) -> f64 {
        let y = match self {
            Self::None => z,
            Self::Ln => z.exp(),
            Self::Anscombe => z.max(0.0).powi(2) - 0.375,
            Self::Logit => 1.0 / (1.0 + (-z).exp()),
        };
        y.clamp(f64::MIN, f64::MAX)
    }
}

/// Moves shares of exactly 0 or 1 inside, for the logit: (y(n − 1) + ½)/n for n results.
///
/// Source: Smithson & Verkuilen, Psychol. Methods 11 (2006) 54 (recalled). `None` when n is 0 or y outside
/// 0–1.
pub fn inside_zero_to_one(y: f64, n: usize) -> Option<f64> {
    let count = n as f64;
    (n > 0 && (0.0..=1.0).contains(&y)).then(|| (y * (count - 1.0) + 0.5) / count)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn back_undoes_forward() {
        for scale in [Scale::None, Scale::Ln, Scale::Anscombe, Scale::Logit] {
            for y in [0.01, 0.2, 0.5, 0.9] {
                assert!((scale.back(scale.forward(y).unwrap()) - y).abs() < 1e-15, "{scale:?} {y}");
            }
        }
    }

    #[test]
    fn what_is_off_the_scale_is_named() {
        assert_eq!(Scale::Ln.forward(0.0), Err(OffScale::NotAboveZero));
        assert_eq!(Scale::Anscombe.forward(-1.0), Err(OffScale::Negative));
        assert_eq!(Scale::Logit.forward(1.0), Err(OffScale::OutsideZeroToOne));
        assert_eq!(Scale::None.forward(f64::NAN), Err(OffScale::NotFinite));
        assert_eq!(Scale::Ln.back(1e9), f64::MAX);
    }

    #[test]
    fn ends_are_moved_inside() {
        assert_eq!(inside_zero_to_one(1.0, 10), Some(0.95));
        assert_eq!(inside_zero_to_one(0.0, 10), Some(0.05));
        assert_eq!(inside_zero_to_one(1.1, 10), None);
    }
}
