//! Tolerance factors against published tables, within their rounding.

use supernate::science::distribution::normal;
use supernate::science::tolerance::{Aim, howe, howe_guenther, one_sided, one_sided_approximate, two_sided};

use crate::support::{agree, rows};

fn number(row: &csv::StringRecord, i: usize) -> f64 {
    match row[i].trim() {
        "inf" | "Infinity" => f64::INFINITY,
        text => text.parse().unwrap(),
    }
}

/// ISO 16269-6:2014, Annex F: two-sided, unknown common standard deviation, m samples; rounded up.
#[test]
fn iso_16269_6_annex_f() {
    let rows = rows("tables/iso16269-6_2014_annexF_two_sided_unknown_sigma_m_samples.csv");
    assert_eq!(rows.len(), 690);
    for row in &rows {
        let (n, m) = (number(row, 3), number(row, 4));
        let aim =
            Aim { content: number(row, 1), confidence: number(row, 2), centre_size: n, df: m * (n - 1.0) };
        let rounded_up = (two_sided(&aim).unwrap() * 1e4 - 1e-5).ceil() / 1e4;
        assert!((rounded_up - number(row, 5)).abs() < 1e-9, "{row:?}: {rounded_up}");
    }
}

/// Meeker, Hahn & Escobar, Statistical Intervals, 2nd ed. 2017, tables J.5a and J.5b.
#[test]
fn meeker_hahn_escobar_j5() {
    let rows = rows("tables/meeker_hahn_escobar_2017_J5_two_sided.csv");
    assert_eq!(rows.len(), 1110);
    for row in &rows {
        let n = number(row, 3);
        let aim = Aim { content: number(row, 1), confidence: number(row, 2), centre_size: n, df: n - 1.0 };
        let k = two_sided(&aim).unwrap();
        assert!((k - number(row, 4)).abs() <= 0.00051, "{row:?}: {k}");
    }
}

/// Montgomery & Runger, Applied Statistics and Probability for Engineers, 7th ed., table XII.
#[test]
fn montgomery_runger_xii() {
    let rows = rows("tables/montgomery_runger_tableXII_one_sided.csv");
    assert_eq!(rows.len(), 288);
    for row in &rows {
        let k = one_sided(&Aim::of_sample(number(row, 0), number(row, 1), number(row, 2) as usize)).unwrap();
        agree(k, number(row, 3), 4e-4, &format!("{row:?}"));
    }
}

/// Our own table (scipy 1.17.1, other code): all five kinds of factor.
#[test]
fn computed_factors() {
    for row in rows("tables/k_factors_computed.csv") {
        let (content, confidence, n) = (number(&row, 0), number(&row, 1), number(&row, 2) as usize);
        let aim = Aim::of_sample(content, confidence, n);
        let check = |got: f64, column: usize| {
            let digits = row[column].split('.').nth(1).map_or(0, str::len) as i32;
            let rounding = 0.51 * 10f64.powi(-digits);
            let want = number(&row, column);
            assert!((got - want).abs() <= rounding + 1e-7 * want, "{row:?} column {column}: {got}");
        };
        check(one_sided(&aim).unwrap(), 3);
        // With a ≤ 0 the approximation has no meaning, whatever number comes out of it.
        let z = normal::quantile(confidence).unwrap();
        if z * z < 2.0 * (n as f64 - 1.0) {
            check(one_sided_approximate(content, confidence, n).unwrap(), 4);
        } else {
            assert_eq!(one_sided_approximate(content, confidence, n), None);
        }
        check(two_sided(&aim).unwrap(), 5);
        check(howe(&aim).unwrap(), 6);
        check(howe_guenther(content, confidence, n).unwrap(), 7);
    }
}

/// NIST/SEMATECH e-Handbook 7.2.6.3: n = 43, 90 % with 99 % confidence.
#[test]
fn nist_7_2_6_3() {
    let aim = Aim::of_sample(0.90, 0.99, 43);
    agree(one_sided_approximate(0.90, 0.99, 43).unwrap(), 1.8751896, 2e-8, "k1 as printed");
    agree(howe(&aim).unwrap(), 2.2173159, 1e-8, "k2 as printed");
    agree(one_sided(&aim).unwrap(), 1.8739536058511987, 1e-9, "k1 exact");
    agree(two_sided(&aim).unwrap(), 2.222825173792317, 1e-8, "k2 exact");
    agree(howe_guenther(0.90, 0.99, 43).unwrap(), 2.2219923836361337, 1e-10, "Guenther");
    let (mean, s) = (97.07_f64, 0.0268_f64);
    assert!(
        (mean - 2.2173159 * s - 97.010576).abs() < 1e-6 && (mean + 1.8751896 * s - 97.120255).abs() < 1e-6
    );
}

/// Owen-type table value 2.065 for n = 50, 95 % with 95 % confidence (NRC ML14031A495, p. 47).
#[test]
fn owen_fifty() {
    agree(one_sided(&Aim::of_sample(0.95, 0.95, 50)).unwrap(), 2.064993417743975, 1e-9, "k1");
}

/// Berthouex & Brown, Statistics for Environmental Engineers, table 21.1 (two decimals).
#[test]
fn berthouex_brown_21_1() {
    let n = [4, 5, 6, 7, 8, 9, 10, 12, 15, 20, 25, 30, 40, 60];
    let printed = [
        (0.90, [5.37, 4.29, 3.73, 3.39, 3.16, 2.99, 2.86, 2.67, 2.49, 2.32, 2.22, 2.15, 2.06, 1.96]),
        (0.95, [6.34, 5.08, 4.42, 4.02, 3.75, 3.55, 3.39, 3.17, 2.96, 2.76, 2.64, 2.55, 2.45, 2.34]),
        (0.99, [8.22, 6.60, 5.76, 5.24, 4.89, 4.63, 4.44, 4.16, 3.89, 3.62, 3.46, 3.35, 3.22, 3.07]),
    ];
    for (content, row) in printed {
        for (n, want) in n.iter().zip(row) {
            let k = two_sided(&Aim::of_sample(content, 0.95, *n)).unwrap();
            assert!((k - want).abs() <= 0.0051, "{content} {n}: {k} for {want}");
        }
    }
}

#[test]
fn aims_without_a_factor() {
    for (content, confidence, n) in [(0.0, 0.95, 5), (1.0, 0.95, 5), (0.9, 1.0, 5), (0.9, 0.95, 1)] {
        let aim = Aim::of_sample(content, confidence, n);
        assert_eq!((one_sided(&aim), two_sided(&aim), howe(&aim)), (None, None, None));
    }
    assert_eq!(one_sided_approximate(0.95, 0.99, 2), None);
}
