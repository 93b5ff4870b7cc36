//! pH meters: electrode slope, calibration limits, and pH from a reading.

/// Theoretical slope in volt per pH: 0.05916 + 0.0001984(T − 25) (USP ⟨791⟩), T in °C.
pub fn theoretical_slope(celsius: f64) -> Option<f64> {
    (0.0..=100.0).contains(&celsius).then_some(0.05916 + 0.000_198_4 * (celsius - 25.0))
}

/// pH = pHs + (E − Es)/k as the chapter writes it, potentials in volt.
pub fn from_potential(
    standard_ph: f64,
    potential: f64,
    standard_potential: f64,
    celsius: f64,
) -> Option<f64> {
    let ph = standard_ph + (potential - standard_potential) / theoretical_slope(celsius)?;
    ph.is_finite().then_some(ph)
}

/// A calibration with two buffers: their pH and the potentials read, in mV.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Calibration {
    /// (pH, mV) of the first buffer.
    pub first: (f64, f64),
    /// (pH, mV) of the second buffer.
    pub second: (f64, f64),
    /// Temperature, °C.
    pub celsius: f64,
    /// (true pH, pH read) of the verification buffer, if one was measured.
    pub verification: Option<(f64, f64)>,
}

/// What a calibration fails, in the order it is looked at.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Fault {
    /// The buffers are less than 2 pH apart.
    BuffersTooClose,
    /// Slope outside 90.0–105.0 %.
    Slope,
    /// Offset beyond ±30 mV.
    Offset,
    /// No verification buffer was measured.
    NotVerified,
    /// The verification buffer lies outside the calibration buffers.
    VerificationNotBetween,
    /// It reads more than 0.05 off.
    Verification,
    /// The sample lies outside the calibration buffers.
    SampleNotBracketed,
}

/// Slope in % of theory and offset in mV (potential at pH 7), and every fault for a sample of this pH.
#[derive(Clone, Debug, PartialEq)]
pub struct Check {
    /// 100·|slope|/(1000 k).
    pub slope_percent: f64,
    /// mV at pH 7.
    pub offset: f64,
    /// Faults; none means that the reading may be accepted.
    pub faults: Vec<Fault>,
}

/// Checks a calibration (limits: USP ⟨791⟩ as summarised for USP 39; verification ±0.05, common practice).
/// `None` where the buffers are equal or numbers are not finite.
pub fn check(calibration: &Calibration, sample_ph: f64) -> Option<Check> {
    let ((ph1, mv1), (ph2, mv2)) = (calibration.first, calibration.second);
    let slope = (mv2 - mv1) / (ph2 - ph1);
    let slope_percent = 100.0 * slope.abs() / (1000.0 * theoretical_slope(calibration.celsius)?);
    let offset = mv1 + slope * (7.0 - ph1);
    (slope_percent.is_finite() && offset.is_finite() && sample_ph.is_finite()).then_some(())?;
    let (low, high) = (ph1.min(ph2), ph1.max(ph2));
    let between = |ph: f64| (low..=high).contains(&ph);
    let verification = calibration.verification;
    // Limits are met by values that differ from them by rounding only.
    let close = 1e-9;
    let faults = [
        (Fault::BuffersTooClose, high - low < 2.0 - close),
        (Fault::Slope, !(90.0 - close..=105.0 + close).contains(&slope_percent)),
        (Fault::Offset, offset.abs() > 30.0 + close),
        (Fault::NotVerified, verification.is_none()),
        (Fault::VerificationNotBetween, verification.is_some_and(|(ph, _)| !between(ph))),
        (Fault::Verification, verification.is_some_and(|(ph, read)| (read - ph).abs() > 0.05 + close)),
        (Fault::SampleNotBracketed, !between(sample_ph)),
    ];
    let faults = faults.into_iter().filter_map(|(fault, yes)| yes.then_some(fault)).collect();
    Some(Check { slope_percent, offset, faults })
}

#[cfg(test)]
mod tests {
    use super::*;

    const GOOD: Calibration = Calibration {
        first: (4.0, 175.0),
        second: (7.0, 0.0),
        celsius: 25.0,
        verification: Some((6.0, 6.03)),
    };

    #[test]
    fn a_good_calibration_has_no_faults() {
        let check = check(&GOOD, 5.6).unwrap();
        assert!((check.slope_percent - 98.6).abs() < 0.01 && check.offset.abs() < 1e-12);
        assert_eq!(check.faults, []);
    }

    #[test]
    fn faults_are_named() {
        let faults = |calibration: Calibration, ph: f64| check(&calibration, ph).unwrap().faults;
        assert_eq!(faults(GOOD, 8.0), [Fault::SampleNotBracketed]);
        assert_eq!(faults(Calibration { verification: None, ..GOOD }, 5.6), [Fault::NotVerified]);
        assert_eq!(
            faults(Calibration { verification: Some((6.0, 6.06)), ..GOOD }, 5.6),
            [Fault::Verification]
        );
        assert_eq!(faults(Calibration { first: (4.0, 150.0), ..GOOD }, 5.6), [Fault::Slope]);
        let shifted = Calibration { first: (4.0, 210.0), second: (7.0, 35.0), ..GOOD };
        assert_eq!(faults(shifted, 5.6), [Fault::Offset]);
        assert_eq!(check(&Calibration { second: (4.0, 0.0), ..GOOD }, 5.6), None);
    }
}
