//! The fall of an interface over time: lag, first rate, critical point, compression, delayed collapse.

use super::regression::{Line, Point};

/// One reading: time and height of the interface, in units of the caller.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Reading {
    /// Time since the last shaking.
    pub time: f64,
    /// Height of the interface.
    pub height: f64,
}

/// The rate of the first fall.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FirstRate {
    /// Height lost per unit of time.
    pub rate: f64,
    /// True where only two points carry it.
    pub two_point: bool,
    /// Index of its first and last reading.
    pub readings: (usize, usize),
}

/// A sudden fall after a plateau.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Collapse {
    /// Time of the last reading before.
    pub from: f64,
    /// Time of the first reading after.
    pub to: f64,
    /// Share of the first height lost between them.
    pub drop: f64,
}

/// A curve analysed.
#[derive(Clone, Debug, PartialEq)]
pub struct Curve {
    /// Time of the last reading at 0.99 of the first height or above.
    pub lag: f64,
    /// First rate; none where the interface never fell.
    pub first_rate: Option<FirstRate>,
    /// Index of the first reading at which the fall is slower than half the first rate.
    pub critical: Option<usize>,
    /// Rate constant of the exponential end after the critical point (Roberts, recalled).
    pub compression_rate: Option<f64>,
    /// Delayed collapse.
    pub collapse: Option<Collapse>,
}

/// Why a curve cannot be analysed.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum NoCurve {
    /// Fewer than three readings.
    NeedsThreeReadings,
    /// Times do not rise.
    TimesNotRising,
    /// Heights are not finite numbers, or the first is not above zero.
    HeightsNotUsable,
}

/// Analyses readings in the order of time; the first is the height as shaken.
pub fn analyse(readings: &[Reading]) -> Result<Curve, NoCurve> {
    if readings.len() < 3 {
        return Err(NoCurve::NeedsThreeReadings);
    }
    if !readings.windows(2).all(|pair| pair[1].time > pair[0].time) {
        return Err(NoCurve::TimesNotRising);
    }
    let top = readings[0].height;
    let finite = readings.iter().all(|r| r.height.is_finite() && r.time.is_finite());
    if !(finite && top > 0.0) {
        return Err(NoCurve::HeightsNotUsable);
    }
    let high = |r: &&Reading| r.height >= 0.99 * top;
    let last_high = readings.iter().take_while(high).count().saturating_sub(1);
    let first_rate = first_rate(readings, last_high, top);
    let critical = first_rate.and_then(|first| critical(readings, &first));
    Ok(Curve {
        lag: readings[last_high].time - readings[0].time,
        first_rate,
        critical,
        compression_rate: critical.and_then(|index| compression(&readings[index..])),
        collapse: collapse(readings, top),
    })
}

/// The longest run of three or more readings after the lag, at 0.8 of the height or above, on a line with
/// R² ≥ 0.995; else the two readings after the lag.
fn first_rate(readings: &[Reading], start: usize, top: f64) -> Option<FirstRate> {
    let end = readings.iter().rposition(|r| r.height >= 0.8 * top)?;
    for length in (3..=(end + 1).saturating_sub(start)).rev() {
        for from in start..=(end + 1 - length) {
            let run = &readings[from..from + length];
            let points: Vec<Point> = run.iter().map(|r| Point { x: r.time, y: r.height }).collect();
            let Ok(line) = Line::fit(&points) else { continue };
            if line.slope < 0.0 && line.r_squared().is_some_and(|r2| r2 >= 0.995) {
                let readings = (from, from + length - 1);
                return Some(FirstRate { rate: -line.slope, two_point: false, readings });
            }
        }
    }
    let pair = readings.get(start..start + 2)?;
    let rate = (pair[0].height - pair[1].height) / (pair[1].time - pair[0].time);
    (rate > 0.0).then_some(FirstRate { rate, two_point: true, readings: (start, start + 1) })
}

fn critical(readings: &[Reading], first: &FirstRate) -> Option<usize> {
    let slower = |index: &usize| {
        let (before, now) = (readings[index - 1], readings[*index]);
        (before.height - now.height) / (now.time - before.time) < 0.5 * first.rate
    };
    (first.readings.1 + 1..readings.len()).find(slower)
}

/// k of H − H∞ ∝ e^(−kt), with H∞ the last height.
fn compression(tail: &[Reading]) -> Option<f64> {
    let end = tail.last()?.height;
    let above = tail.iter().filter(|r| r.height > end);
    let points: Vec<Point> = above.map(|r| Point { x: r.time, y: (r.height - end).ln() }).collect();
    let line = Line::fit(&points).ok().filter(|line| line.sums.n >= 3)?;
    (line.slope < 0.0).then_some(-line.slope)
}

/// One interval that takes 0.20 of the height or more, and half of all that was lost, from 0.80 or above.
fn collapse(readings: &[Reading], top: f64) -> Option<Collapse> {
    let lowest = readings.iter().map(|r| r.height).fold(top, f64::min);
    let mut falls = readings.windows(2).filter(|pair| {
        let drop = pair[0].height - pair[1].height;
        drop >= 0.2 * top * (1.0 - 1e-9)
            && drop >= 0.5 * (top - lowest)
            && pair[0].height >= 0.8 * top * (1.0 - 1e-9)
    });
    // A fall in the first interval is settling, not a delayed collapse.
    let pair = falls.find(|pair| pair[0].time > readings[0].time)?;
    Some(Collapse { from: pair[0].time, to: pair[1].time, drop: (pair[0].height - pair[1].height) / top })
}

/// Concentration at the interface by Kynch (Trans. Faraday Soc. 48 (1952) 166): φ₀H₀/Z, with Z the height at
/// which the tangent of the curve meets time zero. `None` unless Z > 0.
pub fn kynch(volume_fraction: f64, first_height: f64, now: Reading, rate: f64) -> Option<f64> {
    let z = now.height + now.time * rate.abs();
    let value = volume_fraction * first_height / z;
    (z > 0.0 && value.is_finite()).then_some(value)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn readings(pairs: &[(f64, f64)]) -> Vec<Reading> {
        pairs.iter().map(|&(time, height)| Reading { time, height }).collect()
    }

    #[test]
    fn lag_rate_and_compression() {
        let mut pairs = vec![(0.0, 100.0), (1.0, 99.5), (2.0, 99.2)];
        pairs.extend((1..=4).map(|i| (2.0 + f64::from(i), 99.2 - 4.0 * f64::from(i))));
        pairs.extend(
            (1..=8).map(|i| (6.0 + 2.0 * f64::from(i), 40.0 + 43.2 * (-0.05 * 2.0 * f64::from(i)).exp())),
        );
        pairs.push((2000.0, 40.0));
        let curve = analyse(&readings(&pairs)).unwrap();
        assert_eq!(curve.lag, 2.0);
        let first = curve.first_rate.unwrap();
        assert!((first.rate - 4.0).abs() < 1e-9 && !first.two_point && first.readings == (2, 6), "{first:?}");
        assert_eq!(curve.critical, Some(8));
        assert!((curve.compression_rate.unwrap() - 0.05).abs() < 1e-9);
        assert_eq!(curve.collapse, None);
    }

    #[test]
    fn a_delayed_collapse() {
        let curve =
            analyse(&readings(&[(1.0, 1.0), (7.0, 0.95), (14.0, 0.9), (21.0, 0.5), (28.0, 0.45)])).unwrap();
        let collapse = curve.collapse.unwrap();
        assert_eq!((collapse.from, collapse.to), (14.0, 21.0));
        assert!((collapse.drop - 0.4).abs() < 1e-12);
    }

    #[test]
    fn what_is_no_curve() {
        assert_eq!(analyse(&readings(&[(0.0, 1.0), (1.0, 0.9)])), Err(NoCurve::NeedsThreeReadings));
        assert_eq!(analyse(&readings(&[(0.0, 1.0), (2.0, 0.9), (1.0, 0.8)])), Err(NoCurve::TimesNotRising));
        assert_eq!(analyse(&readings(&[(0.0, 0.0), (1.0, 0.0), (2.0, 0.0)])), Err(NoCurve::HeightsNotUsable));
        let still = analyse(&readings(&[(0.0, 1.0), (1.0, 1.0), (2.0, 1.0)])).unwrap();
        assert_eq!((still.lag, still.first_rate), (2.0, None));
    }
}
