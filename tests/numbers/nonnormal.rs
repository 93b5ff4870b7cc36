//! Censored values, counts and grades against R, scipy and published fits.

use serde_json::Value;
use supernate::science::censored::{self, CensoredFit, Errors, NoFit, Observed};
use supernate::science::counts::{self, CountFit};
use supernate::science::distribution::normal;
use supernate::science::ordinal::{self, Grade};
use supernate::science::quantitation::{self, Quantified};

use crate::reference;
use crate::support::{agree, rows};

fn list(value: &Value) -> Vec<f64> {
    value.as_array().unwrap().iter().map(|v| v.as_f64().unwrap()).collect()
}

fn flags(value: &Value) -> Vec<bool> {
    list(value).iter().map(|v| *v == 1.0).collect()
}

/// Design rows: (1, t), (lot indicators, t) or (lot indicators, lot indicators × t) for three lots.
fn design(times: &[f64], lots: &[f64], model: &str) -> (Vec<f64>, usize) {
    let mut rows = Vec::new();
    for (t, lot) in times.iter().zip(lots) {
        let own = |k: usize| f64::from(u8::from(*lot == k as f64));
        match model {
            "common_line" => rows.extend([1.0, *t]),
            "common_slope" => rows.extend([own(0), own(1), own(2), *t]),
            _ => rows.extend([own(0), own(1), own(2), own(0) * t, own(1) * t, own(2) * t]),
        }
    }
    (
        rows,
        match model {
            "common_line" => 2,
            "common_slope" => 4,
            _ => 6,
        },
    )
}

/// Estimates to 1e-6, standard errors to 1e-5 (A.12).
fn fit_agrees(fit: &CensoredFit, want: &Value, what: &str) {
    for (got, want) in fit.coefficients.iter().zip(list(&want["coef"])) {
        agree(*got, want, 1e-6, &format!("{what} coefficient"));
    }
    for (got, want) in fit.standard_errors.iter().zip(list(&want["se"])) {
        agree(*got, want, 1e-5, &format!("{what} standard error"));
    }
    agree(fit.ln_scale, want["log_scale"].as_f64().unwrap(), 1e-6, &format!("{what} ln scale"));
    agree(fit.se_ln_scale, want["se_log_scale"].as_f64().unwrap(), 1e-5, &format!("{what} se of ln scale"));
    agree(fit.log_likelihood, want["loglik"].as_f64().unwrap(), 1e-9, &format!("{what} log likelihood"));
}

/// Shakes that did not redisperse after 100: our own set, scipy and R survreg.
#[test]
fn shakes_known_only_as_more_than_100() {
    let want = &reference::all()["nonnormal"]["shake_right_censored_lognormal"];
    let (times, lots) = (list(&want["time"]), list(&want["lot"]));
    let values: Vec<Observed> = list(&want["count"])
        .iter()
        .zip(flags(&want["censored"]))
        .map(
            |(count, censored)| {
                if censored { Observed::Above(count.ln()) } else { Observed::Exactly(count.ln()) }
            },
        )
        .collect();
    let mut fits = Vec::new();
    for model in ["common_line", "common_slope", "separate"] {
        let (rows, columns) = design(&times, &lots, model);
        let fit = censored::fit(&rows, columns, &values, Errors::Normal).unwrap();
        fit_agrees(&fit, &want[model], model);
        fits.push(fit);
    }
    for (full, reduced, key) in [(2, 1, "lr_slopes"), (1, 0, "lr_intercepts")] {
        let (chi2, p) = censored::likelihood_ratio(&fits[full], &fits[reduced], 2).unwrap();
        agree(chi2, want[key]["chi2"].as_f64().unwrap(), 1e-7, key);
        agree(p, want[key]["p"].as_f64().unwrap(), 1e-6, key);
    }
    let z = normal::quantile(0.95).unwrap();
    let months = censored::upper_limit_meets(&fits[0], z, 60f64.ln()).unwrap();
    agree(months, want["median_upper95_wald_crosses_60_at"].as_f64().unwrap(), 1e-6, "limit 60");
}

/// An impurity partly below the quantitation limit: our own set, scipy and R survreg.
#[test]
fn impurity_below_its_quantitation_limit() {
    let want = &reference::all()["nonnormal"]["impurity_left_censored_loq"];
    let times = list(&want["time"]);
    let values: Vec<Observed> = list(&want["value"])
        .iter()
        .zip(flags(&want["below_loq"]))
        .map(|(value, below)| if below { Observed::Below(*value) } else { Observed::Exactly(*value) })
        .collect();
    let rows: Vec<f64> = times.iter().flat_map(|t| [1.0, *t]).collect();
    fit_agrees(&censored::fit(&rows, 2, &values, Errors::Normal).unwrap(), &want["tobit"], "impurity");
    let results: Vec<Quantified> = times
        .iter()
        .zip(&values)
        .map(|(&age, value)| match *value {
            Observed::Below(limit) => Quantified::Below(age, limit),
            Observed::Exactly(value) => Quantified::Measured(age, value),
            other => panic!("{other:?}"),
        })
        .collect();
    let lines = quantitation::sensitivity(&results).unwrap();
    for (line, key) in lines.iter().zip(["ols_zero", "ols_half_loq", "ols_loq"]) {
        let want = list(&want[key]["coef"]);
        agree(line.intercept(), want[0], 1e-9, key);
        agree(line.slope, want[1], 1e-9, key);
    }
    agree(lines[1].se_slope().unwrap(), list(&want["ols_half_loq"]["se"])[1], 1e-9, "se with half the limit");
}

/// Counts read in steps of ten: our own set, scipy and R survreg.
#[test]
fn shakes_read_in_steps() {
    let want = &reference::all()["nonnormal"]["shake_interval_censored_steps_of_10"];
    let values: Vec<Observed> = list(&want["lower"])
        .iter()
        .zip(list(&want["upper"]))
        .map(|(low, high)| Observed::Between(low.ln(), high.ln()))
        .collect();
    let rows: Vec<f64> = list(&want["time"]).iter().flat_map(|t| [1.0, *t]).collect();
    fit_agrees(&censored::fit(&rows, 2, &values, Errors::Normal).unwrap(), &want["fit_ln"], "steps");
}

/// Tobin, Econometrica 26 (1958) 24; R package survival.
#[test]
fn tobin() {
    let (mut matrix, mut values) = (Vec::new(), Vec::new());
    for row in rows("worked/survival_tobin.csv") {
        let number = |i: usize| row[i].parse::<f64>().unwrap();
        matrix.extend([1.0, number(1), number(2)]);
        let durable = number(0);
        values.push(if durable > 0.0 { Observed::Exactly(durable) } else { Observed::Below(0.0) });
    }
    let fit = censored::fit(&matrix, 3, &values, Errors::Normal).unwrap();
    for (got, want) in fit.coefficients.iter().zip([15.1448664, -0.1290593, -0.0455417]) {
        agree(*got, want, 1e-6, "coefficient");
    }
    for (got, want) in fit.standard_errors.iter().zip([16.0794532, 0.2185836, 0.0582541]) {
        agree(*got, want, 1e-6, "standard error");
    }
    agree(fit.ln_scale, 1.7178509, 1e-7, "ln scale");
    agree(fit.se_ln_scale, 0.3103227, 1e-6, "se of ln scale");
    agree(fit.log_likelihood, -28.9401332, 1e-8, "log likelihood");
}

/// Nelson & Hahn 1972 (motorettes); Weibull fit of MASS, 4th ed.: scale at 130 °C 33813 h.
#[test]
fn motorettes() {
    let (mut matrix, mut values) = (Vec::new(), Vec::new());
    for row in rows("worked/mass_motors.csv") {
        let number = |i: usize| row[i].parse::<f64>().unwrap();
        matrix.extend([1.0, number(0)]);
        let ln = number(1).ln();
        values.push(if number(2) == 1.0 { Observed::Exactly(ln) } else { Observed::Above(ln) });
    }
    let weibull = censored::fit(&matrix, 2, &values, Errors::SmallestExtreme).unwrap();
    agree(weibull.coefficients[0], 16.31851938, 1e-7, "Weibull intercept");
    agree(weibull.coefficients[1], -0.04530707, 1e-6, "Weibull slope");
    agree(weibull.ln_scale, -1.09564089, 1e-6, "Weibull ln scale");
    agree(weibull.standard_errors[0], 0.62296386, 1e-5, "Weibull se");
    let scale = (weibull.coefficients[0] + 130.0 * weibull.coefficients[1]).exp();
    assert!((scale - 33813.0).abs() < 0.5, "{scale}");
    let lognormal = censored::fit(&matrix, 2, &values, Errors::Normal).unwrap();
    agree(lognormal.coefficients[0], 16.49154898, 1e-7, "log-normal intercept");
    agree(lognormal.coefficients[1], -0.04654115, 1e-6, "log-normal slope");
    agree(lognormal.ln_scale, -0.46837791, 1e-6, "log-normal ln scale");
    agree(lognormal.standard_errors[1], 0.00485343, 1e-5, "log-normal se");
}

/// NIST/SEMATECH e-Handbook 8.4.2.2: Arrhenius with right-censoring at 85, 105 and 125 °C.
#[test]
fn nist_8_4_2_2() {
    let (mut matrix, mut values, mut ln_times) = (Vec::new(), Vec::new(), 0.0);
    for row in rows("worked/nist_apr422_arrhenius_lognormal.csv") {
        let number = |i: usize| row[i].parse::<f64>().unwrap();
        matrix.extend([1.0, 11605.0 / (number(0) + 273.16)]);
        let ln = number(1).ln();
        values.push(if number(2) == 1.0 { Observed::Exactly(ln) } else { Observed::Above(ln) });
        ln_times += number(2) * ln;
    }
    assert_eq!(values.len(), 175);
    let fit = censored::fit(&matrix, 2, &values, Errors::Normal).unwrap();
    agree(fit.coefficients[0], -19.9061735, 1e-7, "intercept");
    agree(fit.coefficients[1], 0.8629004, 1e-6, "activation energy, eV");
    agree(fit.ln_scale.exp(), 0.771986, 1e-5, "scale");
    // Printed for the density of the times themselves: each exact time costs its logarithm.
    agree(fit.log_likelihood - ln_times, -476.7089135, 1e-9, "log likelihood");
}

#[test]
fn what_cannot_be_fitted_is_named() {
    let rows = [1.0, 0.0, 1.0, 3.0, 1.0, 6.0];
    let fit = |values: &[Observed]| censored::fit(&rows, 2, values, Errors::Normal);
    let above = Observed::Above(1.0);
    assert_eq!(fit(&[above, above, Observed::Exactly(1.0)]), Err(NoFit::OnlyBounds));
    assert_eq!(fit(&[above]), Err(NoFit::BadInput));
    assert_eq!(fit(&[Observed::Exactly(f64::NAN); 3]), Err(NoFit::BadInput));
    assert_eq!(fit(&[Observed::Between(2.0, 1.0); 3]), Err(NoFit::BadInput));
    assert!(fit(&[Observed::Exactly(1.0), Observed::Exactly(2.0), Observed::Exactly(3.0)]).is_err());
}

fn count_fit_agrees(fit: &CountFit, want: &Value, what: &str) {
    for (got, want) in fit.coefficients.iter().zip(list(&want["coef"])) {
        agree(*got, want, 1e-8, &format!("{what} coefficient"));
    }
    for (got, want) in fit.standard_errors.iter().zip(list(&want["se"])) {
        agree(*got, want, 1e-7, &format!("{what} se"));
    }
    for (got, want) in fit.quasi_standard_errors().unwrap().iter().zip(list(&want["se_quasi"])) {
        agree(*got, want, 1e-7, &format!("{what} quasi se"));
    }
    agree(fit.deviance, want["deviance"].as_f64().unwrap(), 1e-9, &format!("{what} deviance"));
    agree(fit.pearson, want["pearson_chi2"].as_f64().unwrap(), 1e-8, &format!("{what} Pearson"));
    agree(fit.log_likelihood, want["loglik"].as_f64().unwrap(), 1e-9, &format!("{what} log likelihood"));
}

#[test]
fn poisson_counts_of_three_lots() {
    let want = &reference::all()["nonnormal"]["shake_counts_poisson"];
    let (times, lots, values) = (list(&want["time"]), list(&want["lot"]), list(&want["count"]));
    let mut fits = Vec::new();
    for model in ["common_line", "common_slope", "separate"] {
        let (rows, columns) = design(&times, &lots, model);
        let fit = counts::poisson(&rows, columns, &values).unwrap();
        count_fit_agrees(&fit, &want["models"][model], model);
        fits.push(fit);
    }
    let (f, p) = counts::quasi_test(&fits[2], &fits[1]).unwrap();
    agree(f, want["slopes_test_quasi"]["F"].as_f64().unwrap(), 1e-7, "F slopes");
    agree(p, want["slopes_test_quasi"]["p"].as_f64().unwrap(), 1e-7, "p slopes");
}

#[test]
fn negative_binomial_counts() {
    let want = &reference::all()["nonnormal"]["shake_counts_negbin2"];
    let rows: Vec<f64> = list(&want["time"]).iter().flat_map(|t| [1.0, *t]).collect();
    let fit = counts::negative_binomial(&rows, 2, &list(&want["count"])).unwrap();
    for (got, want) in fit.fit.coefficients.iter().zip(list(&want["coef"])) {
        agree(*got, want, 1e-6, "coefficient");
    }
    agree(fit.theta, want["theta"].as_f64().unwrap(), 1e-6, "theta");
    agree(fit.fit.log_likelihood, want["loglik"].as_f64().unwrap(), 1e-9, "log likelihood");
    for (got, want) in fit.fit.standard_errors.iter().zip(list(&want["se_given_theta"])) {
        agree(*got, want, 1e-5, "se");
    }
}

/// Dobson, An Introduction to Generalized Linear Models, 1990 (AIDS deaths; recalled, R agrees).
#[test]
fn dobson_aids_deaths() {
    let data: Vec<(f64, f64)> = rows("worked/dobson_aids_deaths.csv")
        .iter()
        .map(|row| (row[0].parse().unwrap(), row[1].parse().unwrap()))
        .collect();
    let values: Vec<f64> = data.iter().map(|(y, _)| *y).collect();
    let on = |f: fn(f64) -> f64| {
        let matrix: Vec<f64> = data.iter().flat_map(|(_, t)| [1.0, f(*t)]).collect();
        counts::poisson(&matrix, 2, &values).unwrap()
    };
    let (linear, log) = (on(|t| t), on(f64::ln));
    agree(log.coefficients[0], -1.944166212, 1e-8, "ln t, intercept");
    agree(log.coefficients[1], 2.174783801, 1e-8, "ln t, slope");
    // R stops one step earlier (0.21504737); the limit itself was computed with 30 digits.
    agree(log.standard_errors[1], 0.215050697732, 1e-11, "ln t, se");
    agree(linear.coefficients[0], 0.3396339207, 1e-8, "t, intercept");
    agree(linear.coefficients[1], 0.2565235937, 1e-8, "t, slope");
    agree(linear.standard_errors[1], 0.0220391132585, 1e-11, "t, se");
    agree(linear.dispersion().unwrap(), 2.4039420829, 1e-10, "dispersion");
    agree(linear.deviance, 29.65352, 1e-6, "deviance");
}

/// Venables & Ripley, MASS, 4th ed. 2002 (quine): negative binomial and quasi-Poisson.
#[test]
fn quine() {
    let (mut matrix, mut values) = (Vec::new(), Vec::new());
    for row in rows("worked/mass_quine.csv") {
        let is = |i: usize, level: &str| f64::from(u8::from(&row[i] == level));
        matrix.extend([1.0, is(0, "N"), is(1, "M"), is(2, "F1"), is(2, "F2"), is(2, "F3"), is(3, "SL")]);
        values.push(row[4].parse::<f64>().unwrap());
    }
    let fit = counts::negative_binomial(&matrix, 7, &values).unwrap();
    let want = [2.89458020, -0.56937170, 0.08232026, -0.44842815, 0.08808014, 0.35690095, 0.29210914];
    for (got, want) in fit.fit.coefficients.iter().zip(want) {
        agree(*got, want, 1e-6, "coefficient");
    }
    agree(fit.theta, 1.274892646, 1e-7, "theta");
    assert!((fit.se_theta - 0.161).abs() < 0.0005, "{}", fit.se_theta);
    agree(2.0 * fit.fit.log_likelihood, -1093.151, 1e-6, "twice the log likelihood");
    let quasi = counts::poisson(&matrix, 7, &values).unwrap();
    agree(quasi.coefficients[0], 2.7153802, 1e-7, "quasi intercept");
    // R stops one step earlier (13.166913); the limit itself was computed with 30 digits.
    agree(quasi.dispersion().unwrap(), 13.1668426275, 1e-11, "quasi dispersion");
}

/// Venables & Ripley, MASS, 4th ed. 2002 (housing): proportional odds.
#[test]
fn housing() {
    let (mut matrix, mut grades, mut weights) = (Vec::new(), Vec::new(), Vec::new());
    for row in rows("worked/mass_housing.csv") {
        let is = |i: usize, level: &str| f64::from(u8::from(&row[i] == level));
        matrix.extend([
            is(1, "Medium"),
            is(1, "High"),
            is(2, "Apartment"),
            is(2, "Atrium"),
            is(2, "Terrace"),
            is(3, "High"),
        ]);
        grades.push(["Low", "Medium", "High"].iter().position(|level| *level == &row[0]).unwrap());
        weights.push(row[4].parse::<f64>().unwrap());
    }
    let fit = ordinal::proportional_odds(&matrix, 6, &grades, &weights).unwrap();
    let want = [0.5663937, 1.2888191, -0.5723501, -0.3661866, -1.0910149, 0.3602841];
    for (got, want) in fit.effects.iter().zip(want) {
        agree(*got, want, 2e-6, "effect");
    }
    // MASS::polr takes its standard errors from a numerical Hessian, good to about 1e-5.
    for (got, want) in fit.standard_errors.iter().zip([0.1046528, 0.1271561, 0.119238, 0.1551733]) {
        agree(*got, want, 3e-5, "standard error");
    }
    agree(fit.cuts[0], -0.4961353, 2e-6, "first cut");
    agree(fit.cuts[1], 0.6907083, 2e-6, "second cut");
    agree(-2.0 * fit.log_likelihood, 3479.149299, 1e-9, "deviance");
}

#[test]
fn appearance_grades() {
    let want = &reference::all()["nonnormal"]["appearance_ordinal"];
    let (times, grades) = (list(&want["time"]), list(&want["grade"]));
    let steps: Vec<usize> = grades.iter().map(|g| *g as usize).collect();
    let fit = ordinal::proportional_odds(&times, 1, &steps, &vec![1.0; steps.len()]).unwrap();
    agree(fit.effects[0], want["beta"].as_f64().unwrap(), 1e-6, "effect");
    for (got, want) in fit.cuts.iter().zip(list(&want["cutpoints"])) {
        agree(*got, want, 1e-6, "cut");
    }
    agree(fit.log_likelihood, want["loglik"].as_f64().unwrap(), 1e-9, "log likelihood");
    let pairs: Vec<Grade> =
        times.iter().zip(&grades).map(|(&age, &g)| Grade { age, grade: g as u32 }).collect();
    let trend = ordinal::kendall(&pairs).unwrap();
    agree(trend.tau_b, want["kendall"]["tau_b"].as_f64().unwrap(), 1e-12, "tau b");
    agree(trend.p, want["kendall"]["p"].as_f64().unwrap(), 1e-10, "p");
}
