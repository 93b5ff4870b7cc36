use proptest::prelude::*;

use super::*;
use crate::domain::master::Tolerance;

fn decimal(text: &str) -> Decimal {
    text.parse().unwrap()
}

fn ingredient(material: i64, quantity: &str, unit: &str, is_quantity_sufficient: bool) -> Ingredient {
    Ingredient {
        material,
        material_code: format!("M-{material}"),
        name: format!("material {material}"),
        function: "active".to_string(),
        quantity: decimal(quantity),
        unit: unit.to_string(),
        is_quantity_sufficient,
    }
}

fn row(material: i64, unit: &str, step: &str, density: &str) -> MasterIngredient {
    MasterIngredient {
        material,
        name: format!("material {material}"),
        unit: unit.to_string(),
        rounding_step: decimal(step),
        density_g_per_ml: (!density.is_empty()).then(|| decimal(density)),
        tolerance: Tolerance::default(),
        ..MasterIngredient::default()
    }
}

fn recipe(basis: &str, ingredients: Vec<Ingredient>) -> FormulationContent {
    FormulationContent { quantity_basis: basis.to_string(), ingredients, ..FormulationContent::default() }
}

fn master(size_unit: &str, ingredients: Vec<MasterIngredient>) -> MasterRecord {
    MasterRecord { size_unit: size_unit.to_string(), ingredients, ..MasterRecord::default() }
}

/// A volume recipe: amounts, overage, the filler by volumes, density and volume fraction.
#[test]
fn a_suspension_by_volume_is_scaled_and_made_up() {
    let content = recipe(
        "100 mL",
        vec![
            ingredient(1, "8.00", "g", false),
            ingredient(2, "0.26", "g", false),
            ingredient(3, "0", "mL", true),
        ],
    );
    let mut solid = row(1, "kg", "0.01", "2.00");
    solid.is_undissolved = true;
    let mut gum = row(2, "kg", "0.001", "1.60");
    gum.overage_percent = decimal("5");
    let master = master("L", vec![solid, gum, row(3, "L", "0.1", "1.00")]);
    let scaled = scale(&content, &master, decimal("2000")).unwrap();
    let target = |material: i64| scaled.amount(material).unwrap().target.unwrap().to_string();
    assert_eq!(target(1), "160.00");
    assert_eq!(target(2), "5.460");
    // 2000 − 160 ÷ 2.00 − 5.46 ÷ 1.60 = 1916.5875
    assert_eq!(target(3), "1916.6");
    assert_eq!(scaled.amount(3).unwrap().exact.unwrap().normalize(), decimal("1916.5875"));
    // (160 + 5.46 + 1916.6) ÷ (80 + 3.4125 + 1916.6) = 2082.06 ÷ 2000.0125
    assert_eq!(scaled.density_g_per_ml, Some(decimal("1.041")));
    assert_eq!(scaled.solid_volume_percent, Some(decimal("4.00")));
    assert!(scaled.sum.contains("0.0125\u{202f}L over"), "{}", scaled.sum);
    assert!(scaled.amount(2).unwrap().formula.contains("5 % overage"));
}

#[test]
fn what_cannot_be_scaled_says_why() {
    let content = recipe("100 mL", vec![ingredient(1, "8", "g", false)]);
    let litres = |rows: Vec<MasterIngredient>| master("L", rows);
    let scaled = |master: &MasterRecord, size: i64| scale(&content, master, Decimal::from(size)).unwrap_err();
    assert_eq!(scaled(&litres(Vec::new()), 0), ScaleFault::SizeNotPositive);
    assert_eq!(scaled(&litres(Vec::new()), 1), ScaleFault::NotInMaster("material 1".to_string()));
    assert!(matches!(scaled(&master("kg", Vec::new()), 1), ScaleFault::OtherDimension { .. }));
    let by_volume = litres(vec![row(1, "L", "0.1", "")]);
    assert!(matches!(scaled(&by_volume, 1), ScaleFault::DensityMissing { .. }));
    let odd = recipe("a bottle", vec![ingredient(1, "8", "g", false)]);
    let one = litres(vec![row(1, "g", "0.1", "")]);
    assert_eq!(scale(&odd, &one, Decimal::ONE), Err(ScaleFault::BasisUnknown("a bottle".to_string())));
}

/// suspension.md example 20: 24.0 mg/mL × 100 L, assay 98.5 % anhydrous, loss on drying 2.0 % → 2486.3 g.
#[test]
fn an_amount_is_corrected_for_assay_and_water() {
    let (exact, formula) = corrected(decimal("2400"), Decimal::ONE, decimal("98.5"), decimal("2.0")).unwrap();
    assert_eq!(to_step(exact, decimal("0.1")), decimal("2486.3"));
    assert_eq!(formula, "2400 × 100 ÷ (98.5 × (1 − 2.0 ÷ 100))");
    assert_eq!(corrected(decimal("1"), Decimal::ONE, Decimal::ZERO, Decimal::ZERO), None);
    assert_eq!(corrected(decimal("1"), Decimal::ONE, decimal("99"), decimal("100")), None);
}

#[test]
fn a_step_rounds_halves_away_from_zero() {
    for (value, step, expected) in
        [("12.345", "0.01", "12.35"), ("12.5", "5", "15"), ("0.0249", "0.05", "0.00"), ("7", "0", "7")]
    {
        assert_eq!(to_step(decimal(value), decimal(step)), decimal(expected), "{value} to {step}");
    }
}

/// A recipe of one to twelve ingredients by mass with a filler: hundredths of g per 100 g, balance steps, overages.
fn random_recipe() -> impl Strategy<Value = (FormulationContent, MasterRecord, Decimal)> {
    let part = (1_i64..700, 0_usize..4, 0_i64..60);
    (proptest::collection::vec(part, 1..12), 1_i64..5_000_000).prop_map(|(parts, size)| {
        let steps = ["0.001", "0.01", "0.05", "0.1"];
        let mut ingredients = Vec::new();
        let mut rows = Vec::new();
        for ((units, step, overage), number) in parts.into_iter().zip(1_i64..) {
            ingredients.push(ingredient(number, &Decimal::new(units, 2).to_string(), "g", false));
            let mut one = row(number, "kg", steps[step], "");
            one.overage_percent = Decimal::new(overage, 1);
            rows.push(one);
        }
        ingredients.push(ingredient(99, "0", "g", true));
        rows.push(row(99, "kg", "0.1", ""));
        (recipe("100 g", ingredients), master("kg", rows), Decimal::new(size, 3))
    })
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(10_000))]

    /// screen 15e: scaling and sum by exact decimals over 10,000 random recipes.
    #[test]
    fn ten_thousand_recipes_scale_and_sum_exactly((content, master, size) in random_recipe()) {
        let scaled = scale(&content, &master, size).unwrap();
        let sum: Decimal = scaled.amounts.iter().filter_map(|one| one.target).sum();
        prop_assert_eq!(sum, size);
        let told = format!("Sum {0}\u{202f}kg of {0}\u{202f}kg", size.normalize());
        prop_assert_eq!(&scaled.sum, &told);
        for one in scaled.amounts.iter().filter(|one| !one.is_quantity_sufficient) {
            let stated = content.ingredients.iter().find(|row| row.material == one.material).unwrap();
            let overage = master.ingredient(one.material).unwrap().overage_percent;
            let (exact, target) = (one.exact.unwrap(), one.target.unwrap());
            // Exactly, without any division: amount × 100 × 100 = quantity × size × (100 + overage).
            let left = exact * Decimal::from(10_000);
            prop_assert_eq!(left, stated.quantity * size * (Decimal::ONE_HUNDRED + overage));
            prop_assert!((target - exact).abs() * Decimal::TWO <= one.rounding_step);
            prop_assert!((target % one.rounding_step).is_zero());
        }
        let doubled = scale(&content, &master, size * Decimal::TWO).unwrap();
        for (one, two) in scaled.amounts.iter().zip(&doubled.amounts) {
            if !one.is_quantity_sufficient {
                prop_assert_eq!(one.exact.unwrap() * Decimal::TWO, two.exact.unwrap());
            }
        }
    }
}
