//! Mean, range, relative standard deviation and median of single values, in exact decimals.

use rust_decimal::{Decimal, MathematicalOps};

/// The spread of two or more values, and the mean of one or more.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Spread {
    /// Sum over number; a quotient that does not end is kept to 28 digits.
    pub mean: Decimal,
    /// Largest less smallest.
    pub range: Decimal,
    /// 100·s/|mean| with n − 1; none for one value or a mean of 0.
    pub rsd_percent: Option<Decimal>,
}

impl Spread {
    /// `None` without values, or where the sums leave the 28 digits of a decimal.
    pub fn of(values: &[Decimal]) -> Option<Spread> {
        let (least, most) = (values.iter().min()?, values.iter().max()?);
        let sum = values.iter().try_fold(Decimal::ZERO, |sum, value| sum.checked_add(*value))?;
        let mean = sum.checked_div(Decimal::from(values.len()))?.normalize();
        let range = most.checked_sub(*least)?;
        Some(Spread { mean, range, rsd_percent: rsd_percent(values, sum) })
    }
}

/// From RSD² = n(nΣx² − S²)/((n − 1)S²): one division and one root.
fn rsd_percent(values: &[Decimal], sum: Decimal) -> Option<Decimal> {
    let n = Decimal::from(values.len());
    let squares = values
        .iter()
        .try_fold(Decimal::ZERO, |total, value| total.checked_add(value.checked_mul(*value)?))?;
    let about_mean = n.checked_mul(squares)?.checked_sub(sum.checked_mul(sum)?)?.max(Decimal::ZERO);
    let below = (n - Decimal::ONE).checked_mul(sum.checked_mul(sum)?)?;
    if values.len() < 2 || below.is_zero() {
        return None;
    }
    let square = n.checked_mul(about_mean)?.checked_div(below)?;
    square.sqrt()?.checked_mul(Decimal::ONE_HUNDRED)
}

/// The middle value; of an even number the mean of the two in the middle.
pub fn median(values: &[Decimal]) -> Option<Decimal> {
    let mut sorted = values.to_vec();
    sorted.sort();
    let middle = sorted.len() / 2;
    let upper = *sorted.get(middle)?;
    if sorted.len() % 2 == 1 {
        return Some(upper);
    }
    let lower = *sorted.get(middle.checked_sub(1)?)?;
    Some(lower.checked_add(upper)?.checked_div(Decimal::TWO)?.normalize())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn values(texts: &[&str]) -> Vec<Decimal> {
        texts.iter().map(|text| text.parse().unwrap()).collect()
    }

    /// screen_U103: the mean of unrounded values, the spread beside it.
    #[test]
    fn screen_u103_mean_range_and_rsd_are_exact() {
        let spread = Spread::of(&values(&["7.10", "7.12", "7.15"])).unwrap();
        assert_eq!(spread.mean.round_dp(6).to_string(), "7.123333");
        assert_eq!(spread.range.to_string(), "0.05");
        // s = 0.0251661, 100·s/mean = 0.35329
        assert_eq!(spread.rsd_percent.unwrap().round_dp(5).to_string(), "0.35329");
        let tenth = Spread::of(&[Decimal::new(1, 1); 10]).unwrap();
        assert_eq!((tenth.mean.to_string().as_str(), tenth.rsd_percent), ("0.1", Some(Decimal::ZERO)));
        assert_eq!(Spread::of(&values(&["0", "0"])).unwrap().rsd_percent, None);
        assert_eq!(Spread::of(&values(&["5"])).unwrap().rsd_percent, None);
        assert_eq!(Spread::of(&[]), None);
    }

    #[test]
    fn medians() {
        assert_eq!(median(&values(&["14", "100", "12"])).unwrap().to_string(), "14");
        assert_eq!(median(&values(&["14", "100", "12", "15"])).unwrap().to_string(), "14.5");
        assert_eq!(median(&[]), None);
    }
}
