//! Control charts of the NIST/SEMATECH e-Handbook, 6.3 (recalled, recomputed).

use supernate::science::control_chart::{counts, individuals, moving_average};

use crate::support::agree;

#[test]
fn nist_6_3_2_2_individuals() {
    let values = [49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1];
    let chart = individuals(&values, 1.128).unwrap();
    agree(chart.centre, 50.81, 1e-14, "centre");
    agree(chart.upper, 55.80408983451537, 1e-12, "upper");
    agree(chart.lower, 45.81591016548463, 1e-12, "lower");
}

#[test]
fn nist_6_3_2_4_moving_average() {
    let values = [
        52.0, 47.0, 53.0, 49.3, 50.1, 47.0, 51.0, 50.1, 51.2, 50.5, 49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6,
        52.4, 53.6, 52.1,
    ];
    let printed = [
        50.60, 49.52, 50.56, 50.18, 50.16, 49.21, 49.75, 49.85, 50.26, 50.33, 50.11, 49.36, 49.52, 50.05,
        49.38, 49.92, 50.73, 51.23, 51.94, 51.99,
    ];
    let (chart, series) = moving_average(&values, 0.3, 50.0, 2.0539, 3.0).unwrap();
    agree(chart.upper, 52.588431738126616, 1e-12, "upper");
    agree(chart.lower, 47.411568261873384, 1e-12, "lower");
    for (got, want) in series.iter().zip(printed) {
        assert!((got - want).abs() < 0.0051, "{got} for {want}");
    }
}

#[test]
fn nist_6_3_3_1_counts() {
    let defects =
        [16, 14, 28, 16, 12, 20, 10, 12, 10, 17, 19, 17, 14, 16, 15, 13, 14, 16, 11, 20, 11, 19, 16, 31, 13];
    let chart = counts(&defects).unwrap();
    assert_eq!((chart.lower, chart.centre, chart.upper), (4.0, 16.0, 28.0));
}
