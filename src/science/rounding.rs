//! Exact rounding of decimal numbers, as laboratories report them.

use rust_decimal::{Decimal, RoundingStrategy};

/// What to do with a value that lies exactly half-way between two reportable values.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Half {
    /// Away from zero: 2.5 becomes 3, −2.5 becomes −3 (the compendial rule, USP General Notices 7.20).
    AwayFromZero,
    /// To the even neighbour: 2.5 becomes 2, 3.5 becomes 4 (ASTM E29).
    ToEven,
}

/// The place to which a value is rounded.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Place {
    /// So many digits after the point; the result carries exactly that many.
    Decimals(u32),
    /// The nearest power of ten: 1 is the nearest ten, 2 the nearest hundred.
    PowerOfTen(u32),
    /// So many significant figures; 0 is read as 1.
    SignificantFigures(u32),
}

/// Rounds exactly, in decimal arithmetic. A value too large or too fine for the wanted place is returned as
/// it is, since a decimal of 28 digits then holds nothing to round.
///
/// ```
/// use rust_decimal::Decimal;
/// use supernate::science::rounding::{Half, Place, round};
/// let value: Decimal = "7.445".parse().unwrap();
/// assert_eq!(round(value, Place::Decimals(2), Half::AwayFromZero).to_string(), "7.45");
/// ```
pub fn round(value: Decimal, place: Place, half: Half) -> Decimal {
    match place {
        Place::Decimals(digits) => to_decimals(value, digits, half),
        Place::PowerOfTen(power) => to_power_of_ten(value, power, half),
        Place::SignificantFigures(figures) => to_significant(value, figures.max(1), half),
    }
}

fn strategy(half: Half) -> RoundingStrategy {
    match half {
        Half::AwayFromZero => RoundingStrategy::MidpointAwayFromZero,
        Half::ToEven => RoundingStrategy::MidpointNearestEven,
    }
}

fn to_decimals(value: Decimal, digits: u32, half: Half) -> Decimal {
    let mut rounded = value.round_dp_with_strategy(digits, strategy(half));
    if rounded.scale() < digits {
        rounded.rescale(digits.min(Decimal::MAX_SCALE));
    }
    rounded
}

fn to_power_of_ten(value: Decimal, power: u32, half: Half) -> Decimal {
    let unit = 10i128.checked_pow(power).and_then(|ten| Decimal::try_from_i128_with_scale(ten, 0).ok());
    let Some(unit) = unit else { return value };
    // The scale is raised first, so that the division by a power of ten only moves the point.
    let Some(moved) = value.checked_div(unit) else { return value };
    if moved.checked_mul(unit) != Some(value) {
        return value;
    }
    moved
        .round_dp_with_strategy(0, strategy(half))
        .checked_mul(unit)
        .map_or(value, |rounded| rounded.normalize())
}

fn to_significant(value: Decimal, figures: u32, half: Half) -> Decimal {
    if value.is_zero() {
        return value;
    }
    let digits_before_scale = value.mantissa().unsigned_abs().ilog10() as i64 + 1;
    // Decimals that leave `figures` digits; negative means rounding left of the point.
    let decimals = i64::from(figures) - (digits_before_scale - i64::from(value.scale()));
    let rounded = at_signed_decimals(value, decimals, half);
    // 9.96 to two figures is 10, not 10.0: a carry costs one decimal.
    let carried = rounded.mantissa().unsigned_abs() >= 10u128.saturating_pow(figures) && decimals > 0;
    if carried { at_signed_decimals(rounded, decimals - 1, half) } else { rounded }
}

fn at_signed_decimals(value: Decimal, decimals: i64, half: Half) -> Decimal {
    match u32::try_from(decimals) {
        Ok(digits) => to_decimals(value, digits, half),
        Err(_) => to_power_of_ten(value, decimals.unsigned_abs() as u32, half),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn check(cases: &[(&str, &str, &str)], place: Place) {
        for (typed, away, even) in cases {
            let value: Decimal = typed.parse().unwrap();
            assert_eq!(round(value, place, Half::AwayFromZero).to_string(), *away, "{typed} away");
            assert_eq!(round(value, place, Half::ToEven).to_string(), *even, "{typed} to even");
        }
    }

    #[test]
    fn one_decimal() {
        check(
            &[
                ("7.45", "7.5", "7.4"),
                ("7.55", "7.6", "7.6"),
                ("-7.45", "-7.5", "-7.4"),
                ("7.4500000000000000000000001", "7.5", "7.5"),
                ("94.95", "95.0", "95.0"),
                ("94.85", "94.9", "94.8"),
                ("3", "3.0", "3.0"),
                ("0", "0.0", "0.0"),
            ],
            Place::Decimals(1),
        );
    }

    #[test]
    fn nearest_ten_and_hundred() {
        check(
            &[("1245", "1250", "1240"), ("1255", "1260", "1260"), ("-5", "-10", "0"), ("4.9", "0", "0")],
            Place::PowerOfTen(1),
        );
        check(&[("1250", "1300", "1200"), ("1250.01", "1300", "1300")], Place::PowerOfTen(2));
    }

    #[test]
    fn significant_figures() {
        check(
            &[
                ("1245", "1250", "1240"),
                ("0.012345", "0.0123", "0.0123"),
                ("0.01235", "0.0124", "0.0124"),
                ("99.95", "100", "100"),
                ("9.996", "10.0", "10.0"),
                ("2", "2.00", "2.00"),
                ("0", "0", "0"),
                ("-0.0012345", "-0.00123", "-0.00123"),
            ],
            Place::SignificantFigures(3),
        );
    }

    #[test]
    fn what_cannot_be_moved_stays() {
        let long: Decimal = "7922816251426433759354395033.5".parse().unwrap();
        assert_eq!(round(long, Place::Decimals(28), Half::ToEven), long);
        assert_eq!(round(long, Place::PowerOfTen(60), Half::ToEven), long);
    }
}
