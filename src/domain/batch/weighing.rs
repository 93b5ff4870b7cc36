//! Weighings: gross, tare and net as typed, what is still missing, and the tolerance of the sum.

use rust_decimal::Decimal;

use super::state::present;
use super::{Entry, EntryKind, Planned, RecordContent, Verdict};
use crate::domain::master::MasterIngredient;
use crate::domain::master::scale::{corrected, to_step};
use crate::domain::refusal::NamedReason;
use crate::domain::typed::Number;

/// What was typed of one weighing.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct TypedWeight {
    pub gross: Option<Number>,
    pub tare: Option<Number>,
    pub net: Option<Number>,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum WeightRefusal {
    #[error("Type the net weight, or gross and tare.")]
    NetMissing,
    #[error("A gross weight needs its tare, and a tare its gross weight. Type both, or the net alone.")]
    GrossWithoutTare,
    #[error("Gross {gross} less tare {tare} is {is}, and {net} is typed as net. Look at the three figures.")]
    NetDoesNotFollow { gross: String, tare: String, is: Decimal, net: String },
    #[error("A net weight is more than 0. Look at gross and tare.")]
    NetNotPositive,
    #[error(
        "{net}\u{202f}{unit} is finer than the balance's step of {step}\u{202f}{unit}. Type what it showed."
    )]
    FinerThanStep { net: String, step: Decimal, unit: String },
}

impl NamedReason for WeightRefusal {
    fn field(&self) -> Option<String> {
        Some(if *self == WeightRefusal::GrossWithoutTare { "tare" } else { "net" }.to_string())
    }
}

/// The net of a weighing, with the text it is kept as. Refuses in this order: nothing typed, gross without tare, net
/// that does not follow, net not more than 0, finer than the balance's step.
pub fn net(typed: &TypedWeight, step: Decimal, unit: &str) -> Result<(String, Decimal), WeightRefusal> {
    let (text, value) = match (&typed.gross, &typed.tare, &typed.net) {
        (None, None, None) => return Err(WeightRefusal::NetMissing),
        (Some(gross), Some(tare), net) => {
            let is = gross.value - tare.value;
            match net {
                Some(net) if net.value != is => {
                    return Err(WeightRefusal::NetDoesNotFollow {
                        gross: gross.text.clone(),
                        tare: tare.text.clone(),
                        is,
                        net: net.text.clone(),
                    });
                }
                Some(net) => (net.text.clone(), is),
                None => (is.to_string(), is),
            }
        }
        (None, None, Some(net)) => (net.text.clone(), net.value),
        _ => return Err(WeightRefusal::GrossWithoutTare),
    };
    if value <= Decimal::ZERO {
        return Err(WeightRefusal::NetNotPositive);
    }
    if step > Decimal::ZERO && !(value % step).is_zero() {
        return Err(WeightRefusal::FinerThanStep { net: text, step, unit: unit.to_string() });
    }
    Ok((text, value))
}

/// Assay and water of a material lot, in percent.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct LotPotency {
    pub assay_percent: Decimal,
    pub water_percent: Decimal,
}

/// What a step is to weigh of one ingredient.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Target<'a> {
    pub row: &'a MasterIngredient,
    /// In the unit of the row; `None` for a filler whose amount is not known before.
    pub amount: Option<Decimal>,
}

/// The target of a step that dispenses: its share of the scaled amount, rounded to the balance's step.
pub fn target<'a>(content: &'a RecordContent, planned: &Planned<'_>) -> Option<Target<'a>> {
    let dispense = planned.step.dispense?;
    let row = content.master.ingredient(dispense.material)?;
    let scaled = content.scaled.amount(dispense.material)?;
    let amount = scaled.target.map(|whole| {
        let share = whole * dispense.share_percent / Decimal::ONE_HUNDRED;
        if dispense.share_percent == Decimal::ONE_HUNDRED { whole } else { to_step(share, row.rounding_step) }
    });
    Some(Target { row, amount })
}

/// What the whole target would be from a material lot: corrected for its assay and water, rounded, with the formula.
/// Without a correction it is the target itself.
pub fn full_target(target: &Target<'_>, lot: Option<LotPotency>) -> Option<(Decimal, String)> {
    let amount = target.amount?;
    match (target.row.potency, lot) {
        (Some(potency), Some(lot)) => {
            let (exact, formula) =
                corrected(amount, potency.salt_factor, lot.assay_percent, lot.water_percent)?;
            Some((to_step(exact, target.row.rounding_step), formula))
        }
        _ => Some((amount, String::new())),
    }
}

/// The standing weighings of a step's present run.
pub fn weighings<'a>(planned: &Planned<'_>, entries: &'a [Entry]) -> Vec<&'a Entry> {
    present(entries, planned.number).into_iter().filter(|one| one.kind == EntryKind::Weighing).collect()
}

/// What weighings come to in the unit of the target: each net by the share it is of its lot's whole target. Twelve
/// decimals, so that a quotient that ends beyond them still meets a bound exactly.
pub fn equivalent(target: &Target<'_>, weighed: &[(Decimal, Option<Decimal>)]) -> Decimal {
    let one = |(net, full): &(Decimal, Option<Decimal>)| match (target.amount, full) {
        (Some(amount), Some(full)) if *full != amount && !full.is_zero() => {
            net.checked_mul(amount).and_then(|product| product.checked_div(*full)).unwrap_or(*net)
        }
        _ => *net,
    };
    weighed.iter().map(one).sum::<Decimal>().round_dp(12)
}

/// How the weighings of a step stand to the tolerance of its target.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Standing {
    /// Equivalent of what is weighed, in the unit of the target.
    pub weighed: Decimal,
    pub least: Option<Decimal>,
    pub most: Option<Decimal>,
    pub verdict: Verdict,
}

impl Standing {
    /// More than the tolerance allows.
    pub fn is_above(&self) -> bool {
        self.most.is_some_and(|most| self.weighed > most)
    }

    /// `40.00 kg, allowed 39.60 to 40.40 kg`.
    pub fn limit_words(&self, unit: &str) -> String {
        let bound = |value: Decimal| value.normalize();
        match (self.least, self.most) {
            (Some(least), Some(most)) => format!("{} to {}\u{202f}{unit}", bound(least), bound(most)),
            (Some(least), None) => format!("at least {}\u{202f}{unit}", bound(least)),
            (None, Some(most)) => format!("at most {}\u{202f}{unit}", bound(most)),
            (None, None) => "no limit".to_string(),
        }
    }
}

/// Judges what is weighed so far.
pub fn judge(target: &Target<'_>, weighed: &[(Decimal, Option<Decimal>)]) -> Standing {
    let sum = equivalent(target, weighed);
    let (least, most) = target.amount.map_or((None, None), |amount| target.row.tolerance.bounds(amount));
    Standing { weighed: sum, least, most, verdict: Verdict::of(sum, least, most) }
}

/// Nets with the whole target of their lots, for [`judge`].
pub fn parts(weighings: &[&Entry]) -> Vec<(Decimal, Option<Decimal>)> {
    weighings.iter().filter_map(|one| Some((one.value?, one.weighed.full_target))).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::master::{Potency, Tolerance};

    fn decimal(text: &str) -> Decimal {
        text.parse().unwrap()
    }

    fn number(text: &str) -> Option<Number> {
        (!text.is_empty()).then(|| Number { text: text.to_string(), value: decimal(text), decimals: 2 })
    }

    #[test]
    fn gross_tare_and_net_agree_exactly() {
        let table = [
            ("", "", "", "NetMissing"),
            ("12.50", "", "", "GrossWithoutTare"),
            ("", "0.52", "11.98", "GrossWithoutTare"),
            ("12.50", "0.52", "11.89", "NetDoesNotFollow"),
            ("12.50", "0.52", "11.98", "11.98"),
            ("12.50", "0.52", "", "11.98"),
            ("", "", "11.980", "11.980"),
            ("0.52", "0.52", "", "NetNotPositive"),
            ("", "", "-3", "NetNotPositive"),
            ("", "", "11.985", "FinerThanStep"),
        ];
        for (gross, tare, typed_net, expected) in table {
            let typed = TypedWeight { gross: number(gross), tare: number(tare), net: number(typed_net) };
            let said = match net(&typed, decimal("0.01"), "kg") {
                Ok((text, _)) => text,
                Err(refusal) => format!("{refusal:?}"),
            };
            assert!(said.starts_with(expected), "{gross} − {tare} = {typed_net}: {said}");
        }
    }

    #[test]
    fn the_sum_of_weighings_is_judged_with_its_lots_corrected() {
        let row = MasterIngredient {
            unit: "kg".to_string(),
            rounding_step: decimal("0.01"),
            tolerance: Tolerance { below: Some(Decimal::ONE), above: Some(Decimal::ONE), is_percent: true },
            potency: Some(Potency { salt_factor: Decimal::ONE }),
            ..MasterIngredient::default()
        };
        let target = Target { row: &row, amount: Some(decimal("40.00")) };
        let lot = LotPotency { assay_percent: decimal("98.5"), water_percent: decimal("2.0") };
        let (full, formula) = full_target(&target, Some(lot)).unwrap();
        assert_eq!(full, decimal("41.44"));
        assert!(formula.contains("98.5"));
        let at = |net: &str| (decimal(net), Some(full));
        for (weighed, verdict) in [
            (vec![at("41.44")], Verdict::Within),
            (vec![at("41.8544")], Verdict::Within),
            (vec![at("41.0256")], Verdict::Within),
            (vec![at("41.86")], Verdict::Outside),
            (vec![at("41.02")], Verdict::Outside),
            (vec![at("20.72"), (decimal("20.00"), None)], Verdict::Within),
        ] {
            assert_eq!(judge(&target, &weighed).verdict, verdict, "{weighed:?}");
        }
        let open = Target { row: &row, amount: None };
        assert_eq!(judge(&open, &[at("7")]).verdict, Verdict::NoLimit);
    }
}
