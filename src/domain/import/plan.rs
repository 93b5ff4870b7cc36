//! What the rows of a file become: products, lots with one study each, arms, pulls and results.

use std::collections::BTreeMap;

use rust_decimal::Decimal;

use super::{Counts, Row};
use crate::domain::age::Age;
use crate::domain::method::{Halves, Level, MethodContent, Reportable, RoundTo, Rounding, Settings, Stage};

/// Everything a file brings, in the order of the file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Plan {
    /// Product name (the file's study) and the lots of it.
    pub products: Vec<(String, Vec<Lot>)>,
    /// Conditions as the file writes them.
    pub conditions: Vec<String>,
    /// Test, unit and the most decimals of its values: one method each.
    pub tests: Vec<(String, String, u32)>,
    pub counts: Counts,
}

/// One formulation of the file, as one lot on one study.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Lot {
    pub formulation: String,
    /// Condition and container of each arm, with its pulls by age.
    pub arms: Vec<(String, String, Vec<Pull>)>,
}

/// One age of an arm with what was measured then.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Pull {
    pub age: Age,
    pub points: Vec<Point>,
}

/// One result of the file.
pub type Point = Row;

/// Puts the rows into their places. Ages stand in their order, everything else in the order of the file.
pub fn plan(rows: &[Row]) -> Plan {
    let mut products: Vec<(String, Vec<Lot>)> = Vec::new();
    let mut conditions: Vec<String> = Vec::new();
    let mut tests: BTreeMap<(String, String), u32> = BTreeMap::new();
    for row in rows {
        let lots =
            &mut place(&mut products, |(name, _)| *name == row.study, || (row.study.clone(), Vec::new())).1;
        let lot = place(
            lots,
            |lot| lot.formulation == row.formulation,
            || Lot { formulation: row.formulation.clone(), arms: Vec::new() },
        );
        let arm = place(
            &mut lot.arms,
            |arm| arm.0 == row.condition && arm.1 == row.container,
            || (row.condition.clone(), row.container.clone(), Vec::new()),
        );
        let pull =
            place(&mut arm.2, |pull| pull.age == row.age, || Pull { age: row.age, points: Vec::new() });
        pull.points.push(row.clone());
        place(&mut conditions, |known| *known == row.condition, || row.condition.clone());
        let decimals = tests.entry((row.test.clone(), row.unit.clone())).or_default();
        *decimals = (*decimals).max(row.value.scale());
    }
    for arm in products.iter_mut().flat_map(|(_, lots)| lots).flat_map(|lot| &mut lot.arms) {
        arm.2.sort_by_key(|pull| pull.age.nominal_months());
    }
    let counts = counts(&products, rows.len());
    let tests = tests.into_iter().map(|((test, unit), decimals)| (test, unit, decimals)).collect();
    Plan { products, conditions, tests, counts }
}

/// The item that fits, added at the end where there is none.
fn place<T>(items: &mut Vec<T>, fits: impl Fn(&T) -> bool, new: impl FnOnce() -> T) -> &mut T {
    let at = items.iter().position(fits).unwrap_or_else(|| {
        items.push(new());
        items.len() - 1
    });
    &mut items[at]
}

fn counts(products: &[(String, Vec<Lot>)], results: usize) -> Counts {
    let lots: Vec<&Lot> = products.iter().flat_map(|(_, lots)| lots).collect();
    let arms = || lots.iter().flat_map(|lot| &lot.arms);
    Counts {
        results,
        products: products.len(),
        lots: lots.len(),
        studies: lots.len(),
        arms: arms().count(),
        pulls: arms().map(|arm| arm.2.len()).sum(),
    }
}

/// The least a method has to say so that an imported number can be shown: its unit and its decimals.
pub fn method_content(unit: &str, decimals: u32) -> MethodContent {
    let far = Decimal::from(1_000_000_000_i64);
    MethodContent {
        stage: Stage::AfterRedispersion,
        unit: unit.to_string(),
        reading_decimals: decimals,
        rounding: Rounding { halves: Halves::AwayFromZero, to: RoundTo::Decimals(decimals) },
        replicates: 1,
        level: Level::Reading,
        reportable: Reportable::EachContainer,
        possible_least: -far,
        possible_most: far,
        repeatability: None,
        needs_check: false,
        second_reader_tolerance: None,
        hides_limits: false,
        is_repeatable_on_container: true,
        containers_needed: 0,
        ml_needed: None,
        needs_unopened: false,
        may_share_after: true,
        test_within_days: 0,
        hands_on_minutes: 0,
        instruments: Vec::new(),
        settings: Settings::Numeric {
            inputs: Vec::new(),
            formula: None,
            components: Vec::new(),
            has_total: false,
        },
    }
}

#[cfg(test)]
mod tests {
    use super::super::read::read;
    use super::*;

    #[test]
    fn rows_find_their_places_and_ages_their_order() {
        let text = "study,formulation,condition,container,time,time_unit,test,value,sd,n,unit,flag\n\
            S,F1,5 C,bottle,7,day,assay,99.10,,,%,\nS,F1,5 C,bottle,0,day,assay,100,,,%,\n\
            S,F1,25 C,bottle,0,day,assay,100,,,%,\nS,F2,5 C,syringe,0,day,pH,7.1,,,,\n";
        let plan = plan(&read(text.as_bytes()).unwrap());
        let expected = Counts { results: 4, products: 1, lots: 2, studies: 2, arms: 3, pulls: 4 };
        assert_eq!(plan.counts, expected);
        assert_eq!(plan.products[0].1[0].arms[0].2[0].age, Age::Days(0));
        assert_eq!(plan.tests, [("assay".into(), "%".into(), 2), ("pH".into(), "".into(), 1)]);
        assert_eq!(plan.counts.words(), "4 results: 1 product, 2 lots, 2 studies, 3 arms, 4 pulls");
    }
}
