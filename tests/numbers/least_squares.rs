//! The general solver: Longley's data and the lines through the origin of the NIST collection.
//! https://www.itl.nist.gov/div898/strd/lls/lls.shtml (public domain)

use supernate::science::least_squares;

use crate::support::{agree, rows};

fn columns(name: &str) -> Vec<Vec<f64>> {
    rows(name).iter().map(|row| row.iter().map(|cell| cell.parse().unwrap()).collect()).collect()
}

#[test]
fn longley() {
    let rows = columns("nist_strd/longley.csv");
    // Centred by exact whole numbers, so that the near-constant year costs no digits; the intercept follows.
    let origin = [83.0, 234289.0, 2356.0, 1590.0, 107608.0, 1947.0];
    let matrix: Vec<f64> = rows
        .iter()
        .flat_map(|row| std::iter::once(1.0).chain(row[1..].iter().zip(origin).map(|(x, o)| x - o)))
        .collect();
    let y: Vec<f64> = rows.iter().map(|row| row[0]).collect();
    let fit = least_squares::fit(&matrix, 7, &y).unwrap();
    let certified = [
        (15.0618722713733, 84.9149257747669),
        (-0.358191792925910e-1, 0.334910077722432e-1),
        (-2.02022980381683, 0.488399681651699),
        (-1.03322686717359, 0.214274163161675),
        (-0.511041056535807e-1, 0.226073200069370),
        (1829.15146461355, 455.478499142212),
    ];
    let errors = fit.standard_errors.unwrap();
    for (i, (b, se)) in certified.iter().enumerate() {
        agree(fit.coefficients[i + 1], *b, 1e-9, &format!("b{}", i + 1));
        agree(errors[i + 1], *se, 1e-9, &format!("se{}", i + 1));
    }
    let intercept =
        fit.coefficients[0] - origin.iter().zip(&fit.coefficients[1..]).map(|(o, b)| o * b).sum::<f64>();
    agree(intercept, -3482258.63459582, 1e-9, "b0");
    agree((fit.sse / fit.df as f64).sqrt(), 304.854073561965, 1e-10, "residual standard deviation");
}

#[test]
fn lines_through_the_origin() {
    for (name, b, se, s) in [
        ("nist_strd/noint1.csv", 2.07438016528926, 0.165289256198347e-1, 3.56753034006338),
        ("nist_strd/noint2.csv", 0.727272727272727, 0.420827318078432e-1, 0.369274472937998),
    ] {
        let rows = columns(name);
        let (x, y): (Vec<f64>, Vec<f64>) = rows.iter().map(|row| (row[1], row[0])).unzip();
        let fit = least_squares::fit(&x, 1, &y).unwrap();
        agree(fit.coefficients[0], b, 1e-13, name);
        agree(fit.standard_errors.unwrap()[0], se, 1e-13, name);
        agree((fit.sse / fit.df as f64).sqrt(), s, 1e-13, name);
    }
}
