//! Random level and slope over a fixed grid of variance ratios: the computation shared by H, HL and HS.

use std::sync::OnceLock;

use super::Needs;
use crate::science::pooling::slope_of;
use crate::science::regression::{Point, Sums, rounding_floor};

/// A symmetric 2 × 2 matrix: (11, 12, 22).
pub(super) type Symmetric = [f64; 3];

const LEVEL_NODES: usize = 15;
const SLOPE_NODES: usize = 11;

/// The grid: e^t − 1 and ln of the prior weight, at t = 0, 0.7, 1.4, …
struct Grid {
    level: [(f64, f64); LEVEL_NODES],
    slope: [(f64, f64); SLOPE_NODES],
}

fn grid() -> &'static Grid {
    static GRID: OnceLock<Grid> = OnceLock::new();
    GRID.get_or_init(|| {
        let t = |i: usize| 0.7 * i as f64;
        let level = std::array::from_fn(|i| {
            (t(i).exp_m1(), if i == 0 { 0.2_f64.ln() } else { (0.8_f64 / 14.0).ln() })
        });
        let fading: f64 = (1..SLOPE_NODES).map(|i| (-0.25 * t(i)).exp()).sum();
        let slope = std::array::from_fn(|i| {
            (t(i).exp_m1(), if i == 0 { 0.1_f64.ln() } else { (0.9 / fading).ln() - 0.25 * t(i) })
        });
        Grid { level, slope }
    })
}

/// Lots with one design: their number, M = [[n, Σx], [Σx, Σx²]], Σz and Σzz' with z = (Σr, Σxr).
#[derive(Clone, Copy, Debug)]
struct Group {
    count: f64,
    m: Symmetric,
    z: [f64; 2],
    zz: Symmetric,
}

impl Group {
    /// What is left of Σr² about the lot's own line; 0 for a lot that has no more than a line takes up.
    fn squares_about_own_line(&self, squares: f64) -> f64 {
        let [n, sum, square] = self.m;
        let area = n * square - sum * sum;
        if n < 3.0 || area <= 1e-12 * n * square {
            return 0.0;
        }
        let [z, xz] = self.z;
        (squares - (square * z * z - 2.0 * sum * z * xz + n * xz * xz) / area).max(0.0)
    }
}

/// History, and the pulls of one lot if there are any, prepared for the grid.
pub(super) struct LotModel {
    groups: Vec<Group>,
    own: Option<Group>,
    squares: f64,
    /// Ages are divided by this.
    pub(super) age_unit: f64,
    line: Sums,
    slope: f64,
    /// ν = number of points − 2.
    pub(super) df: f64,
    unit_level: f64,
    unit_slope: f64,
    floor: f64,
}

/// An added spread of the lot's own slope: its variance ratio, and the ln of its prior weight.
pub(super) type Stray = (f64, f64);

/// One node of the grid, with what a prediction needs.
#[derive(Clone, Copy, Debug)]
pub(super) struct Node {
    pub ln_weight: f64,
    /// Common level and slope (of the residuals from the pooled line, age in units).
    pub b: [f64; 2],
    /// A⁻¹.
    pub a_inverse: Symmetric,
    /// S/ν.
    pub variance: f64,
    /// ρ of level and slope; the lot's own slope has `own_slope_ratio`.
    pub level_ratio: f64,
    pub slope_ratio: f64,
    pub own_slope_ratio: f64,
    a_own: Symmetric,
    c_own: [f64; 2],
    /// Position in the grid.
    pub level_index: usize,
    pub slope_index: usize,
    pub stray_index: usize,
}

impl LotModel {
    /// Prepares history and the lot's own pulls. All numbers finite.
    pub(super) fn new(history: &[&[Point]], own: &[Point]) -> Result<Self, Needs> {
        let lots = || history.iter().copied().chain(std::iter::once(own));
        let age_unit = lots().flatten().map(|p| p.x.abs()).fold(0.0, f64::max);
        let total = lots().map(<[Point]>::len).sum::<usize>();
        if age_unit == 0.0 || total < 3 {
            return Err(Needs::LongerHistory);
        }
        let line = sums_over(lots, total);
        let slope = slope_of(&line).ok_or(Needs::LongerHistory)?;
        let mut model = Self {
            groups: Vec::with_capacity(history.len()),
            own: None,
            squares: 0.0,
            age_unit,
            line,
            slope,
            df: total as f64 - 2.0,
            unit_level: 1.0,
            unit_slope: 1.0,
            floor: rounding_floor(total, line.syy, line.largest_y),
        };
        let (mut results, mut spread, mut within) = (0.0, 0.0, 0.0);
        for lot in history.iter().filter(|lot| !lot.is_empty()) {
            let before = model.squares;
            let group = model.group(lot);
            within += group.squares_about_own_line(model.squares - before);
            results += group.m[0];
            spread += group.m[2] - group.m[1] * group.m[1] / group.m[0];
            model.collect(group);
        }
        if within <= model.floor {
            return Err(Needs::Variance);
        }
        let lots = history.iter().filter(|lot| !lot.is_empty()).count() as f64;
        model.unit_level = lots / results;
        model.unit_slope = if spread > 0.0 { lots / spread } else { 1.0 };
        if !own.is_empty() {
            model.own = Some(model.group(own));
        }
        Ok(model)
    }

    /// The pooled line at an age; predictions are counted from it.
    pub(super) fn origin(&self, x: f64) -> f64 {
        self.line.mean_y + self.slope * (x - self.line.mean_x)
    }

    /// Slope of the pooled line per unit of age as given.
    pub(super) fn pooled_slope(&self) -> f64 {
        self.slope
    }

    fn group(&mut self, lot: &[Point]) -> Group {
        let mut g = Group { count: 1.0, m: [lot.len() as f64, 0.0, 0.0], z: [0.0; 2], zz: [0.0; 3] };
        for p in lot {
            let (x, r) = (p.x / self.age_unit, p.y - self.origin(p.x));
            g.m[1] += x;
            g.m[2] += x * x;
            g.z[0] += r;
            g.z[1] += x * r;
            self.squares += r * r;
        }
        g.zz = [g.z[0] * g.z[0], g.z[0] * g.z[1], g.z[1] * g.z[1]];
        g
    }

    /// Lots with identical designs share the work of one.
    fn collect(&mut self, new: Group) {
        match self.groups.iter_mut().find(|g| g.m == new.m) {
            Some(g) => {
                g.count += 1.0;
                (0..2).for_each(|i| g.z[i] += new.z[i]);
                (0..3).for_each(|i| g.zz[i] += new.zz[i]);
            }
            None => self.groups.push(new),
        }
    }

    /// Visits every node. `Err` where a residual sum of squares is rounding only.
    pub(super) fn visit(&self, strays: &[Stray], mut each: impl FnMut(Node)) -> Result<(), Needs> {
        for (level_index, &(level, ln_level)) in grid().level.iter().enumerate() {
            for (slope_index, &(slope, ln_slope)) in grid().slope.iter().enumerate() {
                let (level_ratio, slope_ratio) = (self.unit_level * level, self.unit_slope * slope);
                let mut history = Accumulated::start(self.squares);
                for g in &self.groups {
                    history.add(g, level_ratio, slope_ratio);
                }
                for (stray_index, &(added, ln_stray)) in strays.iter().enumerate() {
                    let own_slope_ratio = slope_ratio + added;
                    let (mut all, mut a_own, mut c_own) = (history, [0.0; 3], [0.0; 2]);
                    if let Some(own) = &self.own {
                        (a_own, c_own) = all.add(own, level_ratio, own_slope_ratio);
                    }
                    let (ln_likelihood, b, a_inverse, s) = all.finish(self.df);
                    if !(ln_likelihood.is_finite() && s.is_finite() && b.iter().all(|b| b.is_finite())) {
                        return Err(Needs::FiniteNumbers);
                    }
                    if s <= self.floor {
                        return Err(Needs::Variance);
                    }
                    each(Node {
                        ln_weight: ln_likelihood + ln_level + ln_slope + ln_stray,
                        b,
                        a_inverse,
                        variance: s / self.df,
                        level_ratio,
                        slope_ratio,
                        own_slope_ratio,
                        a_own,
                        c_own,
                        level_index,
                        slope_index,
                        stray_index,
                    });
                }
            }
        }
        Ok(())
    }
}

/// Number of nodes without strays.
pub(super) const NODES: usize = LEVEL_NODES * SLOPE_NODES;

/// Index of the last level and slope node.
pub(super) const TOP: (usize, usize) = (LEVEL_NODES - 1, SLOPE_NODES - 1);

/// The single component of H and HL: the lot is like the history.
pub(super) const LIKE_HISTORY: [Stray; 1] = [(0.0, 0.0)];

#[derive(Clone, Copy)]
struct Accumulated {
    a: Symmetric,
    c: [f64; 2],
    q: f64,
    /// Product of determinants not yet taken to the logarithm, and the logarithm so far.
    product: f64,
    ln_determinants: f64,
}

impl Accumulated {
    fn start(squares: f64) -> Self {
        Self { a: [0.0; 3], c: [0.0; 2], q: squares, product: 1.0, ln_determinants: 0.0 }
    }

    /// Adds a group with W = (I + M G)⁻¹; returns its W M and W z.
    fn add(&mut self, g: &Group, level: f64, slope: f64) -> (Symmetric, [f64; 2]) {
        let [m11, m12, m22] = g.m;
        let (first, second) = (1.0 + m11 * level, 1.0 + m22 * slope);
        let determinant = first * second - m12 * m12 * level * slope;
        let inverse = 1.0 / determinant;
        let area = m11 * m22 - m12 * m12;
        let wm = [(m11 + slope * area) * inverse, m12 * inverse, (m22 + level * area) * inverse];
        let wz = [
            (second * g.z[0] - m12 * slope * g.z[1]) * inverse,
            (first * g.z[1] - m12 * level * g.z[0]) * inverse,
        ];
        self.a.iter_mut().zip(wm).for_each(|(a, part)| *a += g.count * part);
        self.c[0] += wz[0];
        self.c[1] += wz[1];
        self.q -= inverse
            * (level * (second * g.zz[0] - m12 * slope * g.zz[1])
                + slope * (first * g.zz[2] - m12 * level * g.zz[1]));
        self.multiply(determinant, g.count);
        (wm, wz)
    }

    fn multiply(&mut self, determinant: f64, count: f64) {
        if count == 1.0 {
            self.product *= determinant;
        } else {
            self.ln_determinants += count * determinant.ln();
        }
        if self.product > 1e200 {
            self.ln_determinants += self.product.ln();
            self.product = 1.0;
        }
    }

    /// (ln likelihood, b, A⁻¹, S).
    fn finish(&self, df: f64) -> (f64, [f64; 2], Symmetric, f64) {
        let [a11, a12, a22] = self.a;
        let determinant = a11 * a22 - a12 * a12;
        let inverse = [a22 / determinant, -a12 / determinant, a11 / determinant];
        let b = times(&inverse, self.c);
        let rest = self.q - self.c[0] * b[0] - self.c[1] * b[1];
        // Rounding may take it to zero or below; a number that is none stays one, to be refused.
        let s = if rest <= 0.0 { f64::MIN_POSITIVE } else { rest };
        let ln_determinants = self.ln_determinants + (self.product * determinant).ln();
        (-0.5 * (ln_determinants + df * s.ln()), b, inverse, s)
    }
}

fn times(m: &Symmetric, v: [f64; 2]) -> [f64; 2] {
    [m[0] * v[0] + m[1] * v[1], m[1] * v[0] + m[2] * v[1]]
}

impl Node {
    /// Centre (counted from the pooled line) and variance factor V of one future result of the lot at an age
    /// given in units; V − 1 is the factor of the lot's mean.
    pub(super) fn predict(&self, age: f64) -> (f64, f64) {
        let g = [self.level_ratio, self.own_slope_ratio * age];
        let ab = times(&self.a_own, self.b);
        let shift = g[0] * (self.c_own[0] - ab[0]) + g[1] * (self.c_own[1] - ab[1]);
        let centre = self.b[0] + self.b[1] * age + shift;
        let ag = times(&self.a_own, g);
        let d = [1.0 - ag[0], age - ag[1]];
        let di = times(&self.a_inverse, d);
        let factor = 1.0 + g[0] + g[1] * age - (g[0] * ag[0] + g[1] * ag[1]) + d[0] * di[0] + d[1] * di[1];
        (centre, factor)
    }
}

/// Sums over all lots about the overall means, in two passes.
fn sums_over<'a, I: Iterator<Item = &'a [Point]>>(lots: impl Fn() -> I, n: usize) -> Sums {
    let count = n as f64;
    let (mut mean_x, mut mean_y, mut largest_y) = (0.0, 0.0, 0.0_f64);
    for p in lots().flatten() {
        mean_x += p.x / count;
        mean_y += p.y / count;
        largest_y = largest_y.max(p.y.abs());
    }
    let mut s = Sums { n, mean_x, mean_y, sxx: 0.0, sxy: 0.0, syy: 0.0, largest_y };
    for p in lots().flatten() {
        let (dx, dy) = (p.x - mean_x, p.y - mean_y);
        s.sxx += dx * dx;
        s.sxy += dx * dy;
        s.syy += dy * dy;
    }
    s
}
