//! Mean kinetic temperature, Arrhenius, and loss from a suspension.

use serde_json::Value;
use supernate::science::kinetics::{
    COMPENDIAL_RATIO_KELVIN, GAS_CONSTANT, NoArrhenius, arrhenius, mean_kinetic_temperature, suspension_loss,
};
use supernate::science::regression::{Line, Point};

use crate::reference;
use crate::support::{agree, rows};

fn list(value: &Value) -> Vec<f64> {
    value.as_array().unwrap().iter().map(|v| v.as_f64().unwrap()).collect()
}

/// USP ⟨1160⟩ formula; our own sets, computed with numpy.
#[test]
fn mean_kinetic_temperatures() {
    for (name, want) in reference::all()["kinetics"]["mkt"].as_object().unwrap() {
        let celsius = list(&want["celsius"]);
        let weights =
            if want["weights"].is_null() { vec![1.0; celsius.len()] } else { list(&want["weights"]) };
        let readings: Vec<(f64, f64)> = celsius.into_iter().zip(weights).collect();
        for (key, enthalpy) in [("mkt", 83.144), ("mkt_dh60", 60.0), ("mkt_dh100", 100.0)] {
            let got = mean_kinetic_temperature(&readings, enthalpy / 8.3144e-3).unwrap();
            agree(got, want[key].as_f64().unwrap(), 1e-11, &format!("{name} {key}"));
        }
    }
}

/// Published examples: 2 h at 20, 4 h at 2, 1 h at 25 °C is 15.7 °C (public compendial question pages); and
/// the values of the method document.
#[test]
fn published_mean_kinetic_temperatures() {
    let mkt = |readings: &[(f64, f64)]| mean_kinetic_temperature(readings, COMPENDIAL_RATIO_KELVIN).unwrap();
    let equal = |celsius: &[f64]| mkt(&celsius.iter().map(|c| (*c, 1.0)).collect::<Vec<_>>());
    assert_eq!(format!("{:.1}", mkt(&[(20.0, 2.0), (2.0, 4.0), (25.0, 1.0)])), "15.7");
    assert_eq!(format!("{:.3}", equal(&[20.0, 25.0, 30.0])), "25.858");
    assert_eq!(format!("{:.3}", mkt(&[(5.0, 23.0), (25.0, 1.0)])), "7.756");
    let months = [21.0, 22.0, 23.0, 24.0, 25.0, 26.0, 28.0, 30.0, 27.0, 25.0, 23.0, 22.0];
    assert_eq!(format!("{:.3}", equal(&months)), "25.036");
    let year = [15.0, 17.0, 20.0, 22.0, 25.0, 28.0, 30.0, 30.0, 26.0, 22.0, 18.0, 16.0];
    assert_eq!(format!("{:.6}", equal(&year)), "23.806726");
    assert_eq!(mean_kinetic_temperature(&[], 10_000.0), None);
    assert_eq!(mean_kinetic_temperature(&[(25.0, 0.0)], 10_000.0), None);
    assert_eq!(mean_kinetic_temperature(&[(-300.0, 1.0)], 10_000.0), None);
}

#[test]
fn arrhenius_with_a_prediction() {
    let want = &reference::all()["kinetics"]["arrhenius"];
    let rates: Vec<(f64, f64)> = list(&want["celsius"]).into_iter().zip(list(&want["k"])).collect();
    let fit = arrhenius(&rates).unwrap();
    let value = |key: &str| want[key].as_f64().unwrap();
    agree(fit.ln_a, value("ln_A"), 1e-10, "ln A");
    agree(fit.activation_energy, value("Ea_kJ_mol"), 1e-10, "activation energy");
    agree(fit.se_activation_energy, value("se_Ea"), 1e-9, "its standard error");
    agree(fit.se_ln_a, list(&want["se"])[0], 1e-9, "standard error of ln A");
    agree(fit.line.variance.sqrt(), value("s"), 1e-9, "s");
    let (low, k, high) = fit.rate_at(5.0, 0.95).unwrap();
    agree(k, value("k_5C"), 1e-10, "rate at 5 °C");
    agree(low, list(&want["k_5C_ci95"])[0], 1e-9, "lower limit");
    agree(high, list(&want["k_5C_ci95"])[1], 1e-9, "upper limit");
    agree(fit.q10(25.0), value("q10_25_35"), 1e-10, "Q10");
    assert_eq!(arrhenius(&[(25.0, 0.1), (30.0, 0.2)]), Err(NoArrhenius::NeedsThreeTemperatures));
    assert_eq!(arrhenius(&[(25.0, 0.1), (30.0, 0.2), (40.0, 0.0)]), Err(NoArrhenius::NotUsable));
}

/// Atkins, Physical Chemistry: decomposition of acetaldehyde (recalled, recomputed).
#[test]
fn acetaldehyde() {
    let rates = [
        (700.0, 0.011),
        (730.0, 0.035),
        (760.0, 0.105),
        (790.0, 0.343),
        (810.0, 0.789),
        (840.0, 2.17),
        (910.0, 20.0),
        (1000.0, 145.0),
    ];
    let celsius: Vec<(f64, f64)> = rates.iter().map(|(kelvin, k)| (kelvin - 273.15, *k)).collect();
    let fit = arrhenius(&celsius).unwrap();
    agree(fit.line.slope, -22650.745179850008, 1e-9, "slope");
    agree(fit.ln_a, 27.7071142294922, 1e-9, "ln A");
    agree(-fit.line.slope * GAS_CONSTANT / 1000.0, 188.32877406770658, 1e-8, "activation energy");
}

/// NIST/SEMATECH e-Handbook 8.4.2.3: degradation lines through the origin.
#[test]
fn nist_8_4_2_3() {
    let points: Vec<Point> = rows("worked/nist_apr423_degradation.csv")
        .iter()
        .map(|row| {
            let number = |i: usize| row[i].parse::<f64>().unwrap();
            Point { x: 11605.0 / (number(0) + 273.16), y: (30.0 * number(2) / number(3)).ln() }
        })
        .collect();
    let line = Line::fit(&points).unwrap();
    agree(line.intercept(), -18.94336862968701, 1e-10, "intercept");
    agree(line.slope, 0.818771899867904, 1e-10, "activation energy, eV");
    agree(line.mse().unwrap().sqrt(), 0.5610511615152575, 1e-10, "s");
}

/// Martin, Physical Pharmacy, chapter on kinetics (recalled): k₁ 4.5e-6/s, S 0.33, C₀ 6.5 g/100 mL.
#[test]
fn aspirin_suspension() {
    let (k0, t90) = suspension_loss(4.5e-6, 0.33, 6.5).unwrap();
    agree(k0, 1.485e-6, 1e-12, "k0");
    agree(t90 / 86_400.0, 5.066093029055992, 1e-12, "t90 in days");
    assert_eq!(suspension_loss(0.0, 0.33, 6.5), None);
}
