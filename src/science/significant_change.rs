//! "Significant change" of a drug product at the accelerated or intermediate condition.
//!
//! Source: ICH Q1A(R2), section 2.2.7.1; water loss of semi-permeable packs, section 2.2.7.3.

/// How a change of 5 % is read.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum AssayReading {
    /// 5 points of the label claim: |x − x₀| ≥ 5 (the usual reading).
    PointsOfLabel,
    /// 5 % of the initial value: |x − x₀| ≥ 0.05·x₀.
    ShareOfInitial,
}

/// The kinds, in the order of the guideline.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Kind {
    /// SC1: assay changed by 5 % from its initial value.
    Assay,
    /// SC2: a degradation product exceeds its limit.
    DegradationProduct,
    /// SC3: appearance, a physical attribute or a functionality fails.
    Physical,
    /// SC4: pH fails its limit.
    Ph,
    /// SC5: dissolution of 12 units fails.
    Dissolution,
    /// SC6: 5 % of the water of a semi-permeable pack is lost.
    WaterLoss,
}

/// One pull at an accelerated or intermediate condition. SC7: the initial value is the mean at time zero of
/// the same lot and pack, shared by all conditions.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Pull {
    /// Age in months.
    pub months: f64,
    /// (initial, now) in % of label.
    pub assay: Option<(f64, f64)>,
    /// A degradation product is above its limit.
    pub degradation_product_fails: bool,
    /// Colour, phase separation, resuspendability, caking, dose delivery or the like fails.
    pub physical_fails: bool,
    /// pH is outside its limits.
    pub ph_fails: bool,
    /// Dissolution fails for 12 units.
    pub dissolution_fails: bool,
    /// Water lost in % of the initial content, of a semi-permeable pack.
    pub water_loss_percent: Option<f64>,
}

/// Every kind of significant change at one pull, in the order of the guideline.
pub fn of_pull(pull: &Pull, reading: AssayReading) -> Vec<Kind> {
    let assay = pull.assay.is_some_and(|(initial, now)| {
        let limit = match reading {
            AssayReading::PointsOfLabel => 5.0,
            AssayReading::ShareOfInitial => 0.05 * initial.abs(),
        };
        (now - initial).abs() >= limit * (1.0 - 1e-12)
    });
    let found = [
        (Kind::Assay, assay),
        (Kind::DegradationProduct, pull.degradation_product_fails),
        (Kind::Physical, pull.physical_fails),
        (Kind::Ph, pull.ph_fails),
        (Kind::Dissolution, pull.dissolution_fails),
        (Kind::WaterLoss, pull.water_loss_percent.is_some_and(|loss| loss >= 5.0)),
    ];
    found.into_iter().filter_map(|(kind, yes)| yes.then_some(kind)).collect()
}

/// The age of the first significant change among pulls, with its kinds; none if there is none.
pub fn first(pulls: &[Pull], reading: AssayReading) -> Option<(f64, Vec<Kind>)> {
    pulls
        .iter()
        .map(|pull| (pull.months, of_pull(pull, reading)))
        .filter(|(_, kinds)| !kinds.is_empty())
        .min_by(|a, b| a.0.total_cmp(&b.0))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn kinds_are_found_in_order() {
        let pull = Pull {
            months: 6.0,
            assay: Some((100.2, 95.2)),
            physical_fails: true,
            water_loss_percent: Some(5.0),
            ..Pull::default()
        };
        assert_eq!(
            of_pull(&pull, AssayReading::PointsOfLabel),
            [Kind::Assay, Kind::Physical, Kind::WaterLoss]
        );
        // 5 points of 100.2 are less than 5 % of it.
        assert_eq!(of_pull(&pull, AssayReading::ShareOfInitial), [Kind::Physical, Kind::WaterLoss]);
    }

    #[test]
    fn the_first_pull_that_changed_is_named() {
        let at = |months, now| Pull { months, assay: Some((100.0, now)), ..Pull::default() };
        let pulls = [at(6.0, 93.0), at(3.0, 94.9), at(1.0, 99.0)];
        assert_eq!(first(&pulls, AssayReading::PointsOfLabel), Some((3.0, vec![Kind::Assay])));
        assert_eq!(first(&pulls[2..], AssayReading::PointsOfLabel), None);
    }
}
