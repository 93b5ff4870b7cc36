//! Rounding of exact decimals, once, as the method version says.

use rust_decimal::Decimal;

use super::method::{Halves, RoundTo, Rounding};
use crate::science::rounding::{Half, Place, round};

fn half(halves: Halves) -> Half {
    match halves {
        Halves::AwayFromZero => Half::AwayFromZero,
        Halves::ToEven => Half::ToEven,
    }
}

/// The value rounded as the method says.
///
/// The text of the answer carries the decimals of the place: 7.1 to two decimals is `7.10`.
pub fn rounded(value: Decimal, rounding: Rounding) -> Decimal {
    match rounding.to {
        RoundTo::Decimals(decimals) => to_decimals(value, decimals, rounding.halves),
        RoundTo::Nearest(step) => to_step(value, step, rounding.halves),
        RoundTo::SignificantFigures(figures) => {
            round(value, Place::SignificantFigures(figures), half(rounding.halves))
        }
    }
}

/// The value rounded to so many decimals.
pub fn to_decimals(value: Decimal, decimals: u32, halves: Halves) -> Decimal {
    round(value, Place::Decimals(decimals), half(halves))
}

/// The nearest multiple of a whole step, by an exact remainder, so that no quotient is ever rounded first.
/// A step of 0 rounds nothing.
fn to_step(value: Decimal, step: u32, halves: Halves) -> Decimal {
    let step = Decimal::from(step);
    let Some(rest) = value.checked_rem(step) else { return value };
    let below = value - rest;
    let away = if value.is_sign_negative() { -step } else { step };
    let doubled = rest.abs() * Decimal::TWO;
    let is_up = match doubled.cmp(&step) {
        std::cmp::Ordering::Less => false,
        std::cmp::Ordering::Greater => true,
        std::cmp::Ordering::Equal => match halves {
            Halves::AwayFromZero => true,
            Halves::ToEven => !(below / step % Decimal::TWO).is_zero(),
        },
    };
    let rounded = if is_up { below.checked_add(away).unwrap_or(value) } else { below };
    // Zero has no sign, and a whole step leaves no decimals.
    if rounded.is_zero() { Decimal::ZERO } else { rounded.normalize() }
}

/// How the method rounds, in words: `2 decimals, halves away from zero`.
pub fn words(rounding: Rounding) -> String {
    let place = match rounding.to {
        RoundTo::Decimals(0) => "whole numbers".to_string(),
        RoundTo::Decimals(1) => "1 decimal".to_string(),
        RoundTo::Decimals(decimals) => format!("{decimals} decimals"),
        RoundTo::Nearest(step) => format!("nearest {step}"),
        RoundTo::SignificantFigures(1) => "1 significant figure".to_string(),
        RoundTo::SignificantFigures(figures) => format!("{figures} significant figures"),
    };
    let halves = match rounding.halves {
        Halves::AwayFromZero => "halves away from zero",
        Halves::ToEven => "halves to even (ASTM E29)",
    };
    format!("{place}, {halves}")
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn by(to: RoundTo, halves: Halves) -> Rounding {
        Rounding { halves, to }
    }

    /// screen_U102: 2.675 as an exact decimal, both ways; and the other places.
    #[test]
    fn screen_u102_halves_go_where_the_method_says() {
        let table = [
            ("2.675", RoundTo::Decimals(2), "2.68", "2.68"),
            ("2.665", RoundTo::Decimals(2), "2.67", "2.66"),
            ("-2.665", RoundTo::Decimals(2), "-2.67", "-2.66"),
            ("7.1", RoundTo::Decimals(2), "7.10", "7.10"),
            ("1245", RoundTo::Nearest(10), "1250", "1240"),
            ("1255", RoundTo::Nearest(10), "1260", "1260"),
            ("-1245", RoundTo::Nearest(10), "-1250", "-1240"),
            ("1250", RoundTo::Nearest(100), "1300", "1200"),
            ("1244.999", RoundTo::Nearest(10), "1240", "1240"),
            ("12.5", RoundTo::Nearest(5), "15", "10"),
            ("17.5", RoundTo::Nearest(5), "20", "20"),
            ("-2", RoundTo::Nearest(10), "0", "0"),
            ("3.7", RoundTo::Nearest(0), "3.7", "3.7"),
            ("1245", RoundTo::SignificantFigures(3), "1250", "1240"),
            ("0.012345", RoundTo::SignificantFigures(3), "0.0123", "0.0123"),
        ];
        for (typed, to, away, even) in table {
            let value: Decimal = typed.parse().unwrap();
            let shown = |halves| rounded(value, by(to, halves)).to_string();
            assert_eq!(shown(Halves::AwayFromZero), away, "{typed} {to:?} away");
            assert_eq!(shown(Halves::ToEven), even, "{typed} {to:?} even");
        }
    }

    #[test]
    fn the_rule_has_words() {
        assert_eq!(
            words(by(RoundTo::Decimals(2), Halves::AwayFromZero)),
            "2 decimals, halves away from zero"
        );
        assert_eq!(words(by(RoundTo::Nearest(10), Halves::ToEven)), "nearest 10, halves to even (ASTM E29)");
    }

    proptest! {
        /// Rounding moves a value by at most half a step, gives a multiple of it, and does nothing twice.
        #[test]
        fn rounding_is_near_exact_and_settled(
            mantissa in -10_000_000_000_i64..10_000_000_000,
            scale in 0u32..8,
            step in prop::sample::select(vec![1u32, 5, 10, 20, 100]),
            is_even in any::<bool>(),
        ) {
            let value = Decimal::new(mantissa, scale);
            let halves = if is_even { Halves::ToEven } else { Halves::AwayFromZero };
            for to in [RoundTo::Nearest(step), RoundTo::Decimals(step % 7)] {
                let rule = by(to, halves);
                let once = rounded(value, rule);
                let width = match to {
                    RoundTo::Decimals(decimals) => Decimal::new(1, decimals),
                    _ => Decimal::from(step),
                };
                prop_assert!((once - value).abs() * Decimal::TWO <= width);
                prop_assert!((once % width).is_zero());
                prop_assert_eq!(rounded(once, rule), once);
                prop_assert_eq!(rounded(-value, rule), -once);
            }
        }
    }
}
