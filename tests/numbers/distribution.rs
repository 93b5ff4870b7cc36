//! Distribution functions: relative 1e-10 for probabilities, 1e-9 for quantiles.
//!
//! Reference: tables computed with scipy 1.17.1 (`data/tables/`, our own; three noncentral t tails that
//! scipy loses by cancellation were computed by quadrature at 40 digits), and closed forms (t with 1 and 2,
//! F with 2, chi squared with 2 degrees of freedom; Johnson, Kotz & Balakrishnan, Continuous Univariate
//! Distributions, 2nd ed. 1994/1995).

use supernate::science::distribution::chi_squared::ChiSquared;
use supernate::science::distribution::fisher::Fisher;
use supernate::science::distribution::noncentral_t::NoncentralT;
use supernate::science::distribution::student::Student;
use supernate::science::distribution::{Tails, normal};

use crate::support::{agree, relative, rows};

fn tails(distribution: &str, args: &[f64], x: f64) -> Tails {
    match distribution {
        "t" => Student::new(args[0]).unwrap().tails(x),
        "F" => Fisher::new(args[0], args[1]).unwrap().tails(x),
        "chi2" => ChiSquared::new(args[0]).unwrap().tails(x),
        "nct" => NoncentralT::new(args[0], args[1]).unwrap().tails(x),
        "norm" => Tails { lower: normal::lower(x), upper: normal::upper(x) },
        other => panic!("unknown distribution {other}"),
    }
}

#[test]
fn both_tails_at_the_check_points() {
    let mut worst = std::collections::BTreeMap::<String, f64>::new();
    for row in rows("tables/cdf_survival_checkpoints.csv") {
        let args: Vec<f64> = row[1].split(';').filter_map(|part| part.parse().ok()).collect();
        let x: f64 = row[2].parse().unwrap();
        let got = tails(&row[0], &args, x);
        for (got, want) in [(got.lower, &row[3]), (got.upper, &row[4])] {
            let want: f64 = want.parse().unwrap();
            let off = relative(got, want);
            let slot = worst.entry(row[0].to_string()).or_default();
            *slot = slot.max(off);
        }
    }
    for (name, off) in worst {
        assert!(off <= 1e-10, "{name}: {off:e}");
    }
}

#[test]
fn student_quantiles_of_the_table() {
    let levels = [0.75, 0.8, 0.9, 0.95, 0.975, 0.99, 0.995, 0.999, 0.9995, 0.99865];
    for row in rows("tables/student_t_quantiles.csv") {
        let Ok(df) = row[0].parse::<f64>() else { continue };
        if !df.is_finite() {
            continue;
        }
        let t = Student::new(df).unwrap();
        for (i, level) in levels.iter().enumerate() {
            let want: f64 = row[i + 1].parse().unwrap();
            agree(t.quantile(*level).unwrap(), want, 1e-11, &format!("t {df} {level}"));
        }
    }
}

#[test]
fn chi_squared_quantiles_of_the_table() {
    let levels =
        [0.001, 0.005, 0.01, 0.025, 0.05, 0.1, 0.25, 0.5, 0.75, 0.9, 0.95, 0.975, 0.99, 0.995, 0.999];
    for row in rows("tables/chi2_quantiles.csv") {
        let df: f64 = row[0].parse().unwrap();
        let chi2 = ChiSquared::new(df).unwrap();
        for (i, level) in levels.iter().enumerate() {
            let want: f64 = row[i + 1].parse().unwrap();
            agree(chi2.quantile(*level).unwrap(), want, 1e-11, &format!("chi2 {df} {level}"));
        }
    }
}

#[test]
fn critical_values_of_f_of_the_table() {
    for row in rows("tables/f_upper_critical.csv") {
        let number = |i: usize| row[i].parse::<f64>().unwrap();
        let f = Fisher::new(number(1), number(2)).unwrap();
        agree(f.upper_quantile(number(0)).unwrap(), number(3), 1e-11, &format!("F {:?}", row));
    }
}

#[test]
fn closed_forms_far_into_the_tails() {
    for k in 1..=14 {
        let p = 10f64.powi(-k);
        let cauchy = 1.0 / (std::f64::consts::PI * p).tan();
        agree(Student::new(1.0).unwrap().upper_quantile(p).unwrap(), cauchy, 1e-9, "t with 1 degree");
        let two = ((1.0 - 2.0 * p) * (2.0 / (4.0 * p * (1.0 - p))).sqrt()).abs();
        agree(Student::new(2.0).unwrap().upper_quantile(p).unwrap(), two, 1e-9, "t with 2 degrees");
        agree(ChiSquared::new(2.0).unwrap().upper_quantile(p).unwrap(), -2.0 * p.ln(), 1e-9, "chi2 with 2");
        agree(
            ChiSquared::new(2.0).unwrap().quantile(p).unwrap(),
            -2.0 * (-p).ln_1p(),
            1e-9,
            "chi2 low with 2",
        );
        for df2 in [1.0, 3.0, 17.0, 400.0, 1e5] {
            let want = 0.5 * df2 * (-2.0 / df2 * p.ln()).exp_m1();
            agree(Fisher::new(2.0, df2).unwrap().upper_quantile(p).unwrap(), want, 1e-9, "F with 2 and n");
            let tail = Fisher::new(2.0, df2).unwrap().tails(want).upper;
            agree(tail, p, 1e-10, "F upper tail with 2 and n");
        }
    }
}

#[test]
fn quantile_and_tail_are_inverse_over_the_whole_range() {
    let degrees = [0.5, 1.0, 2.0, 3.0, 7.0, 30.0, 200.0, 1e3, 1e4, 1e5];
    for &df in &degrees {
        let (t, chi2) = (Student::new(df).unwrap(), ChiSquared::new(df).unwrap());
        for k in [0.301, 0.31, 0.5, 1.0, 2.0, 4.0, 7.0, 10.0, 14.0] {
            let p = 10f64.powf(-k);
            agree(t.tails(t.upper_quantile(p).unwrap()).upper, p, 1e-10, &format!("t {df}"));
            agree(chi2.tails(chi2.upper_quantile(p).unwrap()).upper, p, 1e-10, &format!("chi2 upper {df}"));
            agree(chi2.tails(chi2.quantile(p).unwrap()).lower, p, 1e-10, &format!("chi2 lower {df}"));
            for &df2 in &degrees {
                let f = Fisher::new(df, df2).unwrap();
                let high = f.upper_quantile(p).unwrap();
                if high < 1e200 {
                    agree(f.tails(high).upper, p, 1e-10, &format!("F {df} {df2} {p}"));
                }
                // F(d1, d2) upside down is F(d2, d1).
                if high < 1e200 {
                    let low = Fisher::new(df2, df).unwrap().quantile(p).unwrap();
                    agree(low, 1.0 / high, 1e-9, &format!("1/F {df} {df2} {p}"));
                }
            }
        }
    }
}

#[test]
fn student_near_zero_and_against_f() {
    for df in [1.0, 4.0, 33.0, 1e5] {
        let t = Student::new(df).unwrap();
        let small = 1e-8;
        agree(t.tails(small).lower - 0.5, small * t.density(0.0), 1e-7, "first order at zero");
        for x in [0.1, 0.7, 1.5, 3.0, 9.0] {
            agree(t.two_sided(x), Fisher::new(1.0, df).unwrap().tails(x * x).upper, 1e-12, "t² is F");
        }
    }
}

#[test]
fn normal_quantiles_and_far_tails() {
    // P(Z > 10), P(Z > 37): Abramowitz & Stegun 26.2 and its asymptotic series.
    agree(normal::upper(10.0), 7.619853024160526e-24, 1e-12, "upper tail at 10");
    agree(normal::ln_upper(40.0), -804.608442013754, 1e-12, "ln upper tail at 40");
    agree(normal::ln_upper(5.0 - 1e-9), normal::ln_upper(5.0), 1e-8, "no step at 5");
    for p in [1e-12, 1e-6, 0.001, 0.2, 0.5, 0.9, 0.999999] {
        agree(normal::lower(normal::quantile(p).unwrap()), p, 1e-11, "normal quantile");
    }
    assert_eq!(normal::quantile(0.0), None);
    assert_eq!(normal::quantile(1.0), None);
}

#[test]
fn noncentral_quantiles_invert_their_tails() {
    for (df, shift) in [(1.0, 0.5), (4.0, 2.5), (9.0, 5.2), (42.0, 8.4), (200.0, 30.0), (9.0, -1.0)] {
        let t = NoncentralT::new(df, shift).unwrap();
        for p in [1e-4, 0.05, 0.5, 0.9, 0.95, 0.99, 0.9999] {
            let tails = t.tails(t.quantile(p).unwrap());
            agree(tails.lower, p, 1e-10, &format!("noncentral t {df} {shift} {p}"));
            agree(tails.lower + tails.upper, 1.0, 1e-11, "tails sum to one");
        }
        let central = NoncentralT::new(df, 0.0).unwrap();
        agree(central.tails(2.0).upper, Student::new(df).unwrap().tails(2.0).upper, 1e-11, "shift 0 is t");
    }
}

#[test]
fn parameters_that_define_no_distribution_are_refused() {
    for df in [0.0, -1.0, f64::NAN, f64::INFINITY] {
        assert!(
            Student::new(df).is_none() && ChiSquared::new(df).is_none() && Fisher::new(df, 1.0).is_none()
        );
        assert!(Fisher::new(1.0, df).is_none() && NoncentralT::new(df, 1.0).is_none());
    }
}
