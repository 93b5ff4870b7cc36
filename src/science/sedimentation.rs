//! Sediment and supernatant: ratios, degree of flocculation and what packing allows.

/// Random close packing of spheres, the densest sediment to expect without crystal order.
pub const CLOSE_PACKING: f64 = 0.64;

/// Sedimentation volume ratio F = Vu/Vo; heights may stand for volumes in a vessel of constant bore. May
/// exceed
/// 1 when the floc network needs more room than the product as filled. `None` unless Vu ≥ 0 and Vo > 0.
pub fn ratio(sediment: f64, reference: f64) -> Option<f64> {
    let f = sediment / reference;
    (sediment >= 0.0 && reference > 0.0 && f.is_finite()).then_some(f)
}

/// Supernatant fraction S = 1 − F; none where the bed fills more than the reference.
pub fn supernatant(f: f64) -> Option<f64> {
    (0.0..=1.0).contains(&f).then_some(1.0 - f)
}

/// Degree of flocculation β = F/F∞, with F∞ the stored reference of the same solids fully deflocculated
/// (Hiestand, J. Pharm. Sci. 53 (1964) 1). `None` unless both are positive.
pub fn flocculation(f: f64, deflocculated: f64) -> Option<f64> {
    let beta = f / deflocculated;
    (f > 0.0 && deflocculated > 0.0 && beta.is_finite()).then_some(beta)
}

/// The smallest F that packing allows, φ/0.64; a reading below it is a query. `None` unless 0 ≤ φ ≤ 0.64.
pub fn smallest_ratio(volume_fraction: f64) -> Option<f64> {
    (0.0..=CLOSE_PACKING).contains(&volume_fraction).then_some(volume_fraction / CLOSE_PACKING)
}

/// How dense a sediment is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Bed {
    /// Solids fraction up to 0.2: a loose bed of flocs.
    Loose,
    /// Between.
    Middling,
    /// Solids fraction 0.5 and more: compact, a cake may form.
    Compact,
}

/// Solids fraction of the sediment φ/F, and what it means. `None` unless F > 0 and φ ≥ 0.
pub fn bed(volume_fraction: f64, f: f64) -> Option<(f64, Bed)> {
    let solids = volume_fraction / f;
    let kind = match solids {
        s if s >= 0.5 => Bed::Compact,
        s if s > 0.2 => Bed::Middling,
        _ => Bed::Loose,
    };
    (volume_fraction >= 0.0 && f > 0.0 && solids.is_finite()).then_some((solids, kind))
}

/// Whether sedimentation has come to its end: change below 0.01 over 24 h or more and two or more readings
/// (hours, F), the last ones (common practice).
pub fn is_ultimate(readings: &[(f64, f64)]) -> bool {
    let Some((last_time, last_f)) = readings.last().copied() else { return false };
    let settled = readings.iter().rev().take_while(|(_, f)| (f - last_f).abs() < 0.01);
    settled.last().is_some_and(|(time, _)| last_time - time >= 24.0)
}

/// What the patient pours, bounded by the two ends of a bottle that is never shaken.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Unshaken {
    /// Share of the label in a dose of clear supernatant: the dissolved fraction alone.
    pub first_dose: f64,
    /// Share of the label in a dose of sediment.
    pub last_dose: f64,
}

/// The worst case if the bottle is never shaken, from F and the dissolved fraction: a bound, not a forecast.
/// `None` unless 0 < F ≤ 1 and the fraction lies in 0–1.
pub fn unshaken(f: f64, dissolved: f64) -> Option<Unshaken> {
    let usable = f > 0.0 && f <= 1.0 && (0.0..=1.0).contains(&dissolved);
    let last_dose = dissolved + (1.0 - dissolved) / f;
    (usable && last_dose.is_finite()).then_some(Unshaken { first_dose: dissolved, last_dose })
}

/// Seconds after shaking until the top half has lost 5 %: about 0.05·H/v for the volume-mean size (common
/// practice); compare with the time a dose takes. `None` unless both are positive.
pub fn dose_window_seconds(height: f64, settling_velocity: f64) -> Option<f64> {
    let seconds = 0.05 * height / settling_velocity;
    (height > 0.0 && settling_velocity > 0.0 && seconds.is_finite()).then_some(seconds)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ends_of_the_ranges() {
        assert_eq!((ratio(105.0, 100.0), ratio(1.0, 0.0), ratio(-1.0, 1.0)), (Some(1.05), None, None));
        assert_eq!((supernatant(0.3), supernatant(1.05)), (Some(0.7), None));
        assert_eq!(bed(0.0186, 0.0372).map(|(_, bed)| bed), Some(Bed::Compact));
        assert_eq!(bed(0.0186, 0.8).map(|(_, bed)| bed), Some(Bed::Loose));
    }

    #[test]
    fn the_end_of_sedimentation() {
        assert!(!is_ultimate(&[(0.0, 1.0), (24.0, 0.5)]));
        assert!(is_ultimate(&[(0.0, 1.0), (24.0, 0.5), (48.0, 0.495)]));
        assert!(!is_ultimate(&[(0.0, 1.0), (24.0, 0.5), (30.0, 0.495)]));
        assert!(!is_ultimate(&[]));
    }

    #[test]
    fn a_bottle_never_shaken() {
        let doses = unshaken(0.5, 0.1).unwrap();
        assert!((doses.first_dose - 0.1).abs() < 1e-15 && (doses.last_dose - 1.9).abs() < 1e-15);
        assert!((dose_window_seconds(0.1, 1e-5).unwrap() - 500.0).abs() < 1e-9);
    }
}
