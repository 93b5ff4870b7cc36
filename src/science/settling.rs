//! One particle in a liquid: Stokes, what follows beyond its range, and where diffusion wins. SI units.

/// Standard gravity, m/s².
pub const GRAVITY: f64 = 9.806_65;

/// Boltzmann constant, J/K (exact since 2019).
const BOLTZMANN: f64 = 1.380_649e-23;

/// A particle and its liquid.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Particle {
    /// Diameter, m.
    pub diameter: f64,
    /// Density of the solid, kg/m³.
    pub solid_density: f64,
    /// Density of the liquid, kg/m³.
    pub liquid_density: f64,
    /// Viscosity at the low shear rate around the particle, Pa·s. Not the reading at 50 or 100 rpm.
    pub viscosity: f64,
    /// Gravity, m/s²; [`GRAVITY`] unless an example uses another.
    pub gravity: f64,
}

/// How far Stokes' law can be trusted, by the particle's Reynolds number.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Range {
    /// Below 0.2: within about 3 %.
    Valid,
    /// 0.2 to 1: usable.
    Usable,
    /// Above 1: the drag law of Schiller and Naumann was used.
    Drag,
}

/// A settling velocity.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Settling {
    /// m/s downwards; negative where the particle rises (creaming).
    pub velocity: f64,
    /// Reynolds number of the particle.
    pub reynolds: f64,
    /// The range.
    pub range: Range,
}

impl Particle {
    fn usable(&self) -> bool {
        let positive = [self.diameter, self.solid_density, self.liquid_density, self.viscosity, self.gravity];
        positive.iter().all(|value| *value > 0.0 && value.is_finite())
    }

    fn excess(&self) -> f64 {
        self.solid_density - self.liquid_density
    }

    fn reynolds(&self, velocity: f64) -> f64 {
        self.liquid_density * velocity.abs() * self.diameter / self.viscosity
    }

    /// v = d²Δρg/(18η), whatever its range. `None` unless all values are positive and finite.
    pub fn stokes(&self) -> Option<f64> {
        let velocity = self.diameter * self.diameter * self.excess() * self.gravity / (18.0 * self.viscosity);
        (self.usable() && velocity.is_finite()).then_some(velocity)
    }

    /// The settling velocity: Stokes up to a Reynolds number of 1, above it drag 24/Re·(1 + 0.15 Re^0.687)
    /// (Schiller & Naumann 1933, up to 800).
    pub fn settle(&self) -> Option<Settling> {
        let velocity = self.stokes()?;
        let reynolds = self.reynolds(velocity);
        let range = match reynolds {
            re if re < 0.2 => Range::Valid,
            re if re <= 1.0 => Range::Usable,
            _ => return self.with_drag(velocity),
        };
        Some(Settling { velocity, reynolds, range })
    }

    /// v(1 + 0.15 Re^0.687) = v_Stokes, by halving: the left side rises with v.
    fn with_drag(&self, stokes: f64) -> Option<Settling> {
        let (mut low, mut high) = (0.0, stokes.abs());
        for _ in 0..200 {
            let middle = 0.5 * (low + high);
            let drag = middle * (1.0 + 0.15 * self.reynolds(middle).powf(0.687));
            if drag > stokes.abs() { high = middle } else { low = middle }
        }
        let reynolds = self.reynolds(high);
        (reynolds < 800.0).then_some(Settling {
            velocity: high.copysign(stokes),
            reynolds,
            range: Range::Drag,
        })
    }

    /// Péclet number 4πr⁴Δρg/(3kT): below 1 diffusion keeps the particle up.
    pub fn peclet(&self, kelvin: f64) -> Option<f64> {
        let r = 0.5 * self.diameter;
        let value = 4.0 * std::f64::consts::PI * r.powi(4) * self.excess().abs() * self.gravity
            / (3.0 * BOLTZMANN * kelvin);
        (self.usable() && kelvin > 0.0 && value.is_finite()).then_some(value)
    }

    /// Archimedes number d³ρl(ρs − ρl)g/η².
    pub fn archimedes(&self) -> Option<f64> {
        let value = self.diameter.powi(3) * self.liquid_density * self.excess().abs() * self.gravity
            / self.viscosity.powi(2);
        (self.usable() && value.is_finite()).then_some(value)
    }

    /// Smallest yield stress that holds the particle, dΔρg/21 (Beris et al., J. Fluid Mech. 158 (1985) 219,
    /// as quoted; Y_G = 3/21), times a safety factor (3: common practice).
    pub fn holding_yield_stress(&self, safety: f64) -> Option<f64> {
        let stress = self.diameter * self.excess().abs() * self.gravity / 21.0 * safety;
        (self.usable() && safety > 0.0 && stress.is_finite()).then_some(stress)
    }
}

/// Diameter of the sphere that settles at a velocity by Stokes' law; the particle's own diameter is not used.
pub fn stokes_diameter(particle: &Particle, velocity: f64) -> Option<f64> {
    let square = 18.0 * particle.viscosity * velocity / (particle.excess() * particle.gravity);
    let probe = Particle { diameter: 1.0, ..*particle };
    (probe.usable() && square > 0.0 && square.is_finite()).then(|| square.sqrt())
}

/// Largest radius that a yield stress holds, 21τ/(2gΔρ).
pub fn held_radius(yield_stress: f64, density_difference: f64, gravity: f64) -> Option<f64> {
    let radius = 21.0 * yield_stress / (2.0 * gravity * density_difference.abs());
    (yield_stress > 0.0 && gravity > 0.0 && radius.is_finite()).then_some(radius)
}

/// Diameter in m of a phi class: 2^(−φ) mm.
pub fn phi_diameter(phi: f64) -> f64 {
    (-phi.clamp(-100.0, 100.0)).exp2() * 1e-3
}

/// Creeping settling in a power-law liquid τ = Kγⁿ: v = [g d^(n+1) Δρ/(18 K X(n))]^(1/n), with X between the
/// values 1, 1.24, 1.38, 1.42, 1.44 at n = 1, 0.8, 0.6, 0.5, 0.4 (recalled). `None` for n outside 0.4–1.
pub fn power_law(particle: &Particle, consistency: f64, index: f64) -> Option<f64> {
    const TABLE: [(f64, f64); 5] = [(0.4, 1.44), (0.5, 1.42), (0.6, 1.38), (0.8, 1.24), (1.0, 1.0)];
    let pair = TABLE.windows(2).find(|pair| index >= pair[0].0 && index <= pair[1].0)?;
    let share = (index - pair[0].0) / (pair[1].0 - pair[0].0);
    let x = pair[0].1 + share * (pair[1].1 - pair[0].1);
    let base = particle.gravity * particle.diameter.powf(index + 1.0) * particle.excess().abs()
        / (18.0 * consistency * x);
    let probe = Particle { viscosity: 1.0, ..*particle };
    let velocity = base.powf(1.0 / index).copysign(particle.excess());
    (probe.usable() && consistency > 0.0 && velocity.is_finite()).then_some(velocity)
}
