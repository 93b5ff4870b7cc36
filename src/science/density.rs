//! Density, volume fraction and dissolved share from a formula.

/// One ingredient: mass and density, in units that agree (g and g/mL).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Ingredient {
    /// Mass.
    pub mass: f64,
    /// Density.
    pub density: f64,
}

fn usable(ingredients: &[Ingredient]) -> bool {
    let one =
        |i: &Ingredient| i.mass >= 0.0 && i.density > 0.0 && i.mass.is_finite() && i.density.is_finite();
    !ingredients.is_empty() && ingredients.iter().all(one)
}

/// Density of a mixture without contraction, Σm/Σ(m/ρ). Show the measured density beside it: more than 2 %
/// apart means air or an error (common practice).
pub fn mixture(ingredients: &[Ingredient]) -> Option<f64> {
    let mass: f64 = ingredients.iter().map(|i| i.mass).sum();
    let volume: f64 = ingredients.iter().map(|i| i.mass / i.density).sum();
    (usable(ingredients) && volume > 0.0).then(|| mass / volume)
}

/// Volume fraction of solids, Σ(m/ρ) of what is not dissolved over the total volume. `None` above 1.
pub fn volume_fraction(undissolved: &[Ingredient], total_volume: f64) -> Option<f64> {
    let solid: f64 = undissolved.iter().map(|i| i.mass / i.density).sum();
    let phi = solid / total_volume;
    (usable(undissolved) && total_volume > 0.0 && phi <= 1.0).then_some(phi)
}

/// Share of a drug that is not dissolved, 1 − S/C, from solubility and content in one unit; 0 if all
/// dissolves.
pub fn undissolved_share(content: f64, solubility: f64) -> Option<f64> {
    let share = 1.0 - solubility / content;
    (content > 0.0 && solubility >= 0.0 && share.is_finite()).then_some(share.max(0.0))
}

/// % w/w from % w/v and density in g/mL.
pub fn weight_percent(weight_volume_percent: f64, density: f64) -> Option<f64> {
    let percent = weight_volume_percent / density;
    (weight_volume_percent >= 0.0 && density > 0.0 && percent.is_finite()).then_some(percent)
}

/// Entrained air in % of the volume, 100(1 − measured/calculated). Negative says that the calculation is off.
pub fn entrained_air_percent(measured: f64, calculated: f64) -> Option<f64> {
    let percent = 100.0 * (1.0 - measured / calculated);
    (measured > 0.0 && calculated > 0.0 && percent.is_finite()).then_some(percent)
}

/// Mass of water to make up a volume: V·ρ − Σ others. `None` where the others weigh more.
pub fn water_to_volume(volume: f64, density: f64, others: f64) -> Option<f64> {
    let water = volume * density - others;
    (volume > 0.0 && density > 0.0 && others >= 0.0 && water >= 0.0).then_some(water)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_suspension_from_its_formula() {
        let water = Ingredient { mass: 95.0, density: 1.0 };
        let solid = Ingredient { mass: 5.0, density: 2.5 };
        assert!((mixture(&[water, solid]).unwrap() - 100.0 / 97.0).abs() < 1e-15);
        assert!((volume_fraction(&[solid], 97.0).unwrap() - 2.0 / 97.0).abs() < 1e-15);
        assert_eq!(mixture(&[]), None);
        assert_eq!(volume_fraction(&[solid], 1.0), None);
        assert!((entrained_air_percent(0.97, 1.0).unwrap() - 3.0).abs() < 1e-12);
        assert_eq!(water_to_volume(100.0, 1.03, 8.0), Some(95.0));
        assert_eq!(undissolved_share(0.2, 0.3), Some(0.0));
    }
}
