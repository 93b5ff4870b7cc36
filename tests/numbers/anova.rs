//! NIST Statistical Reference Datasets, analysis of variance; certified values to nine digits or more.
//! https://www.itl.nist.gov/div898/strd/anova/anova.html (public domain)

use supernate::science::anova::one_way;

use crate::regression::offsets;
use crate::support::{agree, data};

/// Values as differences from the first, grouped; formed exactly before any float.
fn groups(name: &str) -> Vec<Vec<f64>> {
    let text = std::fs::read_to_string(data(&format!("nist_strd/anova/{name}.dat"))).unwrap();
    let rows: Vec<(&str, &str)> = text
        .lines()
        .skip(60)
        .filter_map(|line| line.split_whitespace().collect::<Vec<_>>().try_into().ok())
        .map(|[group, value]: [&str; 2]| (group, value))
        .collect();
    let (_, values) = offsets(&rows.iter().map(|(_, value)| *value).collect::<Vec<_>>());
    let mut groups: Vec<(&str, Vec<f64>)> = Vec::new();
    for ((group, _), value) in rows.iter().zip(values) {
        match groups.iter_mut().find(|(name, _)| name == group) {
            Some((_, list)) => list.push(value),
            None => groups.push((group, vec![value])),
        }
    }
    groups.into_iter().map(|(_, list)| list).collect()
}

#[test]
fn certified_variance_ratios() {
    for (name, sizes, f, between, within) in [
        ("SiRstv", (5, 25), 1.18046237440255, 5.11462616e-2, 2.16636560e-1),
        ("AtmWtAg", (2, 48), 15.9467335677930, 3.63834187500000e-9, 1.04951729166667e-8),
        ("SmLs01", (9, 189), 21.0, 1.68, 1.80),
        ("SmLs04", (9, 189), 21.0, 1.68, 1.80),
        ("SmLs07", (9, 189), 21.0, 1.68, 1.80),
    ] {
        let groups = groups(name);
        let slices: Vec<&[f64]> = groups.iter().map(Vec::as_slice).collect();
        assert_eq!((slices.len(), slices.iter().map(|g| g.len()).sum::<usize>()), sizes, "{name}");
        let table = one_way(&slices).unwrap();
        agree(table.f.unwrap(), f, 1e-13, &format!("{name} F"));
        agree(table.between, between, 1e-8, &format!("{name} between"));
        agree(table.within, within, 1e-8, &format!("{name} within"));
    }
}
