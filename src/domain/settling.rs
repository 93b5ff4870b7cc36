//! How a suspension settles after shaking: curves from the readings of its cylinders, and what a patient pours.

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;

use crate::science::sedimentation::{dose_window_seconds, unshaken};
use crate::science::settling_curve::{self, NoCurve};

/// One volume read in one cylinder of one sample.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Volume {
    pub arm: i64,
    pub sample: i64,
    pub age: String,
    pub age_months: Decimal,
    /// Container and replicate: which cylinder it is.
    pub cylinder: (i64, i64),
    /// Minutes after shaking; none for the total volume.
    pub minute: Option<i64>,
    pub ml: Decimal,
}

/// The sediment of one sample over minutes, as a share of the total volume, the mean of its cylinders.
#[derive(Clone, Debug, PartialEq)]
pub struct Curve {
    pub arm: i64,
    pub sample: i64,
    pub age: String,
    pub age_months: Decimal,
    /// How many cylinders the mean is of.
    pub cylinders: usize,
    /// Minute and share, the first at minute 0 as shaken.
    pub points: Vec<(i64, Decimal)>,
}

/// What a curve shows.
#[derive(Clone, Debug, PartialEq)]
pub struct Analysis {
    /// Minutes until it begins to fall.
    pub lag_minutes: f64,
    /// Share of the height lost per hour at first; none where it never fell.
    pub first_rate_per_hour: Option<f64>,
    /// The rate rests on two readings only.
    pub is_two_point: bool,
    /// Minute from which the fall is slower than half the first rate.
    pub critical_minute: Option<i64>,
    /// Rate constant of the compression, per hour.
    pub compression_per_hour: Option<f64>,
    /// Minutes between which it collapsed after a plateau, and the share lost.
    pub collapse: Option<(f64, f64, f64)>,
}

/// The curves of all samples, oldest first. A cylinder without its total volume takes no part.
pub fn curves(volumes: &[Volume]) -> Vec<Curve> {
    let mut samples: Vec<i64> = volumes.iter().map(|one| one.sample).collect();
    samples.sort_unstable();
    samples.dedup();
    let mut found: Vec<Curve> = samples.into_iter().filter_map(|sample| curve(volumes, sample)).collect();
    found.sort_by_key(|one| (one.arm, one.age_months));
    found
}

fn curve(volumes: &[Volume], sample: i64) -> Option<Curve> {
    let own: Vec<&Volume> = volumes.iter().filter(|one| one.sample == sample).collect();
    let first = own.first()?;
    let total = |cylinder: (i64, i64)| {
        let of = own.iter().find(|one| one.cylinder == cylinder && one.minute.is_none());
        of.map(|one| one.ml).filter(|ml| ml.is_sign_positive() && !ml.is_zero())
    };
    let mut shares: Vec<(i64, Vec<Decimal>)> = vec![(0, Vec::new())];
    let mut cylinders: Vec<(i64, i64)> = Vec::new();
    for one in &own {
        let (Some(minute), Some(total)) = (one.minute, total(one.cylinder)) else { continue };
        let Some(share) = one.ml.checked_div(total) else { continue };
        if !cylinders.contains(&one.cylinder) {
            cylinders.push(one.cylinder);
        }
        match shares.iter_mut().find(|(known, _)| *known == minute) {
            Some((_, values)) => values.push(share),
            None => shares.push((minute, vec![share])),
        }
    }
    shares.sort_by_key(|(minute, _)| *minute);
    let mean = |values: &Vec<Decimal>| {
        let count = Decimal::from(values.len());
        values.iter().sum::<Decimal>().checked_div(count).unwrap_or(Decimal::ONE)
    };
    Some(Curve {
        arm: first.arm,
        sample,
        age: first.age.clone(),
        age_months: first.age_months,
        cylinders: cylinders.len(),
        points: shares.iter().map(|(minute, values)| (*minute, mean(values))).collect(),
    })
    .filter(|curve| curve.points.len() > 1)
}

/// Analyses a curve, or says in a sentence what it needs.
pub fn analyse(curve: &Curve) -> Result<Analysis, &'static str> {
    let reading = |(minute, share): &(i64, Decimal)| settling_curve::Reading {
        time: *minute as f64,
        height: share.to_f64().unwrap_or(f64::NAN),
    };
    let readings: Vec<settling_curve::Reading> = curve.points.iter().map(reading).collect();
    let found = settling_curve::analyse(&readings).map_err(|why| match why {
        NoCurve::NeedsThreeReadings => "needs three readings after shaking",
        NoCurve::TimesNotRising => "needs readings at rising times",
        NoCurve::HeightsNotUsable => "needs volumes above 0",
    })?;
    Ok(Analysis {
        lag_minutes: found.lag,
        first_rate_per_hour: found.first_rate.map(|first| first.rate * 60.0),
        is_two_point: found.first_rate.is_some_and(|first| first.two_point),
        critical_minute: found.critical.and_then(|at| curve.points.get(at)).map(|(minute, _)| *minute),
        compression_per_hour: found.compression_rate.map(|rate| rate * 60.0),
        collapse: found.collapse.map(|fall| (fall.from, fall.to, fall.drop)),
    })
}

/// What a patient pours, as bounds.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Poured {
    /// Share of the label in a dose of the liquid above the sediment, if the bottle is never shaken.
    pub first_dose: f64,
    /// Share of the label in a dose of sediment.
    pub last_dose: f64,
    /// Seconds after shaking until the top half has lost 5 %; none where nothing fell.
    pub seconds_to_dose: Option<f64>,
}

/// The bounds from the as-stored F, the dissolved fraction and the first rate of settling (share of the height per
/// hour). `None` unless 0 < F ≤ 1 and the fraction lies in 0–1.
///
/// Sources: mass balance of solids in a sediment of share F, first dose s, last dose s + (1 − s)/F; 0.05·H/v
/// (common practice), with v the fall of the interface, which here is a share of H per unit of time.
pub fn poured(stored_f: Decimal, dissolved: f64, first_rate_per_hour: Option<f64>) -> Option<Poured> {
    let bounds = unshaken(stored_f.to_f64()?, dissolved)?;
    let per_second = first_rate_per_hour.map(|rate| rate / 3600.0);
    Some(Poured {
        first_dose: bounds.first_dose,
        last_dose: bounds.last_dose,
        seconds_to_dose: per_second.and_then(|rate| dose_window_seconds(1.0, rate)),
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn volume(cylinder: i64, minute: Option<i64>, ml: &str) -> Volume {
        Volume {
            arm: 1,
            sample: 7,
            age: "Initial".to_string(),
            age_months: Decimal::ZERO,
            cylinder: (cylinder, 1),
            minute,
            ml: ml.parse().unwrap(),
        }
    }

    #[test]
    fn a_curve_is_the_mean_share_of_its_cylinders_from_as_shaken() {
        let mut volumes = vec![volume(1, None, "100"), volume(2, None, "50"), volume(3, Some(60), "9")];
        for (minute, one, other) in [(60, "90", "46"), (120, "80", "41"), (1440, "60", "31")] {
            volumes.push(volume(1, Some(minute), one));
            volumes.push(volume(2, Some(minute), other));
        }
        let found = curves(&volumes);
        let d = |text: &str| text.parse::<Decimal>().unwrap();
        assert_eq!(found[0].points, [(0, d("1")), (60, d("0.91")), (120, d("0.81")), (1440, d("0.61"))]);
        assert_eq!(found[0].cylinders, 2, "one has no total volume");
        let analysis = analyse(&found[0]).unwrap();
        assert!((analysis.first_rate_per_hour.unwrap() - 0.095).abs() < 1e-9, "{analysis:?}");
        assert_eq!(analysis.critical_minute, Some(1440));
        let short = Curve { points: found[0].points[..2].to_vec(), ..found[0].clone() };
        assert_eq!(analyse(&short), Err("needs three readings after shaking"));
    }

    /// F 0.5 and nothing dissolved: the liquid holds nothing and the sediment twice the label (mass balance). A tenth
    /// of the height an hour: 5 % after 1800 s.
    #[test]
    fn what_is_poured_is_bounded() {
        let half = Decimal::new(5, 1);
        let found = poured(half, 0.0, Some(0.1)).unwrap();
        assert_eq!((found.first_dose, found.last_dose), (0.0, 2.0));
        assert!((found.seconds_to_dose.unwrap() - 1800.0).abs() < 1e-9);
        let dissolved = poured(half, 0.115, None).unwrap();
        assert!((dissolved.last_dose - 1.885).abs() < 1e-12 && dissolved.seconds_to_dose.is_none());
        assert_eq!(poured(Decimal::ZERO, 0.0, None), None);
        assert_eq!(poured(half, 1.2, None), None);
    }
}
