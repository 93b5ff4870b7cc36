//! Gauss–Legendre nodes and weights, computed, not tabulated.

/// A rule with N nodes on (−1, 1): pairs of node and weight.
pub struct Rule<const N: usize> {
    nodes: [(f64, f64); N],
}

impl<const N: usize> Rule<N> {
    /// Newton on the Legendre polynomial from the usual cosine start; exact to rounding.
    pub fn new() -> Self {
        let mut nodes = [(0.0, 0.0); N];
        for (i, slot) in nodes.iter_mut().enumerate() {
            let mut x = (std::f64::consts::PI * (i as f64 + 0.75) / (N as f64 + 0.5)).cos();
            let mut slope = 1.0;
            for _ in 0..100 {
                let (value, derivative) = legendre(N, x);
                slope = derivative;
                let step = value / derivative;
                x -= step;
                if step.abs() < 1e-16 {
                    break;
                }
            }
            *slot = (x, 2.0 / ((1.0 - x * x) * slope * slope));
        }
        Self { nodes }
    }

    /// Pairs of node and weight.
    pub fn nodes(&self) -> &[(f64, f64)] {
        &self.nodes
    }

    /// The integral of f from `from` to `to`.
    pub fn integrate(&self, from: f64, to: f64, mut f: impl FnMut(f64) -> f64) -> f64 {
        let (middle, half) = (0.5 * (from + to), 0.5 * (to - from));
        half * self.nodes.iter().map(|(x, w)| w * f(middle + half * x)).sum::<f64>()
    }
}

impl<const N: usize> Default for Rule<N> {
    fn default() -> Self {
        Self::new()
    }
}

/// The Legendre polynomial of degree n and its derivative at x.
fn legendre(n: usize, x: f64) -> (f64, f64) {
    let (mut before, mut now) = (1.0, x);
    for k in 2..=n {
        let k = k as f64;
        (before, now) = (now, ((2.0 * k - 1.0) * x * now - (k - 1.0) * before) / k);
    }
    (now, n as f64 * (x * now - before) / (x * x - 1.0))
}
