//! Two formulation versions side by side.

use rust_decimal::{Decimal, RoundingStrategy};

use super::{FormulationContent, Ingredient, PHYSICAL, ingredient_words};
use crate::domain::master::compare::{Part, parts};

/// One line of a comparison of two versions.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Difference {
    pub what: String,
    pub was: Option<String>,
    pub is: Option<String>,
    /// `+2.50 %`, `new`, `left out`, `changed`, `same`.
    pub change: String,
}

impl Difference {
    fn of_text(what: &str, was: &str, is: &str) -> Difference {
        let change = if was == is { "same" } else { "changed" };
        let shown = |text: &str| (!text.is_empty()).then(|| text.to_string());
        Difference { what: what.to_string(), was: shown(was), is: shown(is), change: change.to_string() }
    }

    pub fn is_same(&self) -> bool {
        self.change == "same"
    }
}

/// The change from one value to another in percent of the first, two decimals: `+2.50 %`.
fn percent(was: Decimal, is: Decimal) -> String {
    if was == is {
        return "same".to_string();
    }
    if was.is_zero() {
        return "changed".to_string();
    }
    let percent = ((is - was) / was * Decimal::ONE_HUNDRED)
        .round_dp_with_strategy(2, RoundingStrategy::MidpointAwayFromZero);
    let sign = if percent > Decimal::ZERO { "+" } else { "" };
    format!("{sign}{percent:.2}\u{202f}%").replace('-', "\u{2212}")
}

fn ingredient_change(was: &Ingredient, is: &Ingredient) -> String {
    let is_comparable = was.unit == is.unit && was.is_quantity_sufficient == is.is_quantity_sufficient;
    match (is_comparable, was.function == is.function) {
        (true, true) => percent(was.quantity, is.quantity),
        (true, false) if was.quantity == is.quantity => format!("now {}", is.function),
        (true, false) => format!("{}, now {}", percent(was.quantity, is.quantity), is.function),
        (false, _) => "changed".to_string(),
    }
}

/// All lines of a comparison: ingredients in the order of the newer version, then those left out, then the rest.
pub fn compare(was: &FormulationContent, is: &FormulationContent) -> Vec<Difference> {
    let of = |content: &FormulationContent, material: i64| {
        content.ingredients.iter().find(|ingredient| ingredient.material == material).cloned()
    };
    let mut lines: Vec<Difference> = is
        .ingredients
        .iter()
        .map(|ingredient| {
            let before = of(was, ingredient.material);
            Difference {
                what: ingredient.name.clone(),
                was: before.as_ref().map(ingredient_words),
                is: Some(ingredient_words(ingredient)),
                change: before.map_or("new".to_string(), |before| ingredient_change(&before, ingredient)),
            }
        })
        .collect();
    let left_out = was.ingredients.iter().filter(|ingredient| of(is, ingredient.material).is_none());
    lines.extend(left_out.map(|ingredient| Difference {
        what: ingredient.name.clone(),
        was: Some(ingredient_words(ingredient)),
        is: None,
        change: "left out".to_string(),
    }));
    lines.extend(compare_rest(was, is));
    lines
}

fn compare_rest(was: &FormulationContent, is: &FormulationContent) -> Vec<Difference> {
    let total = |content: &FormulationContent| {
        content.target_total.map(|total| total.to_string()).unwrap_or_default()
    };
    let mut lines = vec![
        Difference::of_text("Dosage form", &was.dosage_form, &is.dosage_form),
        Difference::of_text("Intended state", was.intended_state.words(), is.intended_state.words()),
        Difference::of_text("Quantities per", &was.quantity_basis, &is.quantity_basis),
        Difference::of_text("Target total", &total(was), &total(is)),
    ];
    let values = was.physical.values().into_iter().zip(is.physical.values());
    for ((was, is), (_, label)) in values.zip(PHYSICAL) {
        let change = match (was, is) {
            (Some(was), Some(is)) => percent(was, is),
            (None, None) => "same".to_string(),
            (None, Some(_)) => "new".to_string(),
            (Some(_), None) => "left out".to_string(),
        };
        let shown = |value: Option<Decimal>| value.map(|value| value.to_string());
        lines.push(Difference { what: label.to_string(), was: shown(was), is: shown(is), change });
    }
    lines.extend(compare_masters(was, is));
    lines
}

/// The parts of the two master records, in the order of the newer one, then what only the older one has.
fn compare_masters(was: &FormulationContent, is: &FormulationContent) -> Vec<Difference> {
    let of = |content: &FormulationContent| content.master.as_ref().map(parts).unwrap_or_default();
    let (was, is) = (of(was), of(is));
    let find = |all: &[Part], what: &str| all.iter().find(|part| part.what == what).cloned();
    let line = |was: Option<&Part>, is: Option<&Part>| {
        let change = match (was, is) {
            (Some(was), Some(is)) if was.shown == is.shown => "same".to_string(),
            (Some(was), Some(is)) => {
                was.number.zip(is.number).map_or("changed".to_string(), |(was, is)| percent(was, is))
            }
            (None, _) => "new".to_string(),
            (_, None) => "left out".to_string(),
        };
        let what = was.or(is).map(|part| part.what.clone()).unwrap_or_default();
        let shown = |part: Option<&Part>| part.map(|part| part.shown.clone());
        Difference { what, was: shown(was), is: shown(is), change }
    };
    let newer = is.iter().map(|part| line(find(&was, &part.what).as_ref(), Some(part)));
    let gone = was.iter().filter(|part| find(&is, &part.what).is_none()).map(|part| line(Some(part), None));
    newer.chain(gone).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::formulation::tests::content;

    #[test]
    fn a_comparison_names_what_is_new_left_out_and_changed_in_percent() {
        let was = content(
            "100 g",
            Some("100"),
            &[(1, "8.00", "g", false), (2, "0.40", "g", false), (3, "5", "g", false), (4, "0", "g", true)],
        );
        let is = content(
            "100 g",
            Some("100"),
            &[(1, "8.20", "g", false), (2, "0.30", "g", false), (5, "1", "g", false), (4, "0", "g", true)],
        );
        let lines = compare(&was, &is);
        let of = |what: &str| {
            let line = lines.iter().find(|line| line.what == what).unwrap();
            line.change.replace('\u{202f}', " ")
        };
        assert_eq!(of("material 1"), "+2.50 %");
        assert_eq!(of("material 2"), "\u{2212}25.00 %");
        assert_eq!(of("material 3"), "left out");
        assert_eq!(of("material 4"), "same");
        assert_eq!(of("material 5"), "new");
        assert_eq!(of("Dosage form"), "same");
        assert!(compare(&was, &was).iter().all(Difference::is_same));
    }

    #[test]
    fn two_master_records_differ_part_by_part_in_percent() {
        use crate::domain::master::{MasterRecord, Phase, Step, StepKind, StepValue};
        let with = |speed: i64, minutes: Option<u32>| {
            let value = StepValue {
                name: "speed".to_string(),
                unit: "rpm".to_string(),
                least: Some(Decimal::from(speed)),
                ..StepValue::default()
            };
            let step = Step {
                kind: StepKind::Disperse,
                title: "Hydrate the gum".to_string(),
                instruction: "Strew in slowly.".to_string(),
                values: vec![value],
                least_minutes: minutes,
                ..Step::default()
            };
            let phase = Phase { name: "Gum".to_string(), steps: vec![step], ..Phase::default() };
            let master = MasterRecord { phases: vec![phase], ..MasterRecord::default() };
            FormulationContent { master: Some(master), ..content("100 g", None, &[(1, "8.00", "g", false)]) }
        };
        let lines = compare(&with(1200, None), &with(1500, Some(30)));
        let of =
            |what: &str| lines.iter().find(|line| line.what == what).unwrap().change.replace('\u{202f}', " ");
        assert_eq!(of("Step “Hydrate the gum”: speed, least"), "+25.00 %");
        assert_eq!(of("Step “Hydrate the gum”: shortest time"), "new");
        assert_eq!(lines.iter().filter(|line| !line.is_same()).count(), 2, "{lines:#?}");
    }
}
