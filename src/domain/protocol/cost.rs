//! What a pull costs: containers and minutes at the bench, from the methods of its tests.

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;

use super::super::method::MethodContent;
use super::super::moment::push_number;

/// What one method needs of a pull.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Need {
    pub containers: u32,
    pub ml: Option<Decimal>,
    /// A container that served this test may serve later ones.
    pub may_share_after: bool,
    pub minutes: u32,
    pub test_within_days: u32,
}

impl Need {
    pub fn of(method: &MethodContent) -> Need {
        Need {
            containers: method.containers_needed,
            ml: method.ml_needed,
            may_share_after: method.may_share_after,
            minutes: method.hands_on_minutes,
            test_within_days: method.test_within_days,
        }
    }
}

/// What a set of tests needs together.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Cost {
    pub containers: u32,
    pub minutes: u32,
}

/// Containers and minutes of one pull.
///
/// Tests that leave their containers to later ones share: the most any of them asks for, and never fewer than
/// hold the millilitres they ask for together. A test that shares with none takes its own. At least one.
pub fn cost(needs: &[Need], fill_ml: Option<Decimal>) -> Cost {
    if needs.is_empty() {
        return Cost::default();
    }
    let (sharing, alone): (Vec<&Need>, Vec<&Need>) = needs.iter().partition(|need| need.may_share_after);
    let most = sharing.iter().map(|need| need.containers).max().unwrap_or(0);
    let shared = most.max(containers_for_ml(&sharing, fill_ml));
    let own: u32 = alone.iter().map(|need| need.containers.max(containers_for_ml(&[*need], fill_ml))).sum();
    Cost { containers: (shared + own).max(1), minutes: needs.iter().map(|need| need.minutes).sum() }
}

fn containers_for_ml(needs: &[&Need], fill_ml: Option<Decimal>) -> u32 {
    let Some(fill) = fill_ml.filter(|fill| *fill > Decimal::ZERO) else { return 0 };
    let ml: Decimal = needs.iter().filter_map(|need| need.ml).sum();
    (ml / fill).ceil().to_u32().unwrap_or(0)
}

/// `3 h 20 min`, `45 min`.
pub fn minutes_words(minutes: u32) -> String {
    let mut text = String::with_capacity(16);
    let (hours, rest) = (minutes / 60, minutes % 60);
    if hours > 0 {
        push_number(&mut text, hours);
        text.push_str(" h");
    }
    if hours > 0 && rest > 0 {
        text.push(' ');
    }
    if hours == 0 || rest > 0 {
        push_number(&mut text, rest);
        text.push_str(" min");
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    fn need(containers: u32, ml: Option<i64>, may_share_after: bool) -> Need {
        let ml = ml.map(Decimal::from);
        Need { containers, ml, may_share_after, minutes: 10, test_within_days: 7 }
    }

    #[test]
    fn tests_share_containers_where_their_methods_allow() {
        let fill = Some(Decimal::from(200));
        let table = [
            (vec![], fill, 0),
            (vec![need(0, None, true)], fill, 1),
            (vec![need(3, None, true), need(1, Some(20), true)], fill, 3),
            (vec![need(1, Some(150), true), need(1, Some(100), true)], fill, 2),
            (vec![need(1, Some(150), true), need(1, Some(100), true)], None, 1),
            (vec![need(3, None, true), need(1, Some(100), false)], fill, 4),
            (vec![need(1, Some(500), false)], fill, 3),
        ];
        for (needs, fill, containers) in table {
            assert_eq!(cost(&needs, fill).containers, containers, "{needs:?}");
        }
        assert_eq!(cost(&[need(1, None, true), need(1, None, true)], fill).minutes, 20);
    }

    #[test]
    fn minutes_have_words() {
        assert_eq!(minutes_words(45), "45 min");
        assert_eq!(minutes_words(120), "2 h");
        assert_eq!(minutes_words(200), "3 h 20 min");
    }
}
