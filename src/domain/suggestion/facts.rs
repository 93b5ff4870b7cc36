//! A lot as the rules look at it, from what is stored: one arm that counts, a warm one, and pairs of orientations.

use std::collections::BTreeMap;

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;

use crate::domain::method::{InterfaceRead, MethodContent, Settings as MethodSettings, TestKind};
use crate::domain::specification::{Limit, LimitSet, SpecificationContent};
use crate::science::warning_rules::facts::{
    ArmPair, Attribute, Doubt, FirstDay, Limits, Lot, Pull, Repeatability, Viscosity,
};

/// One newest result of the lot, with its arm and method.
#[derive(Clone, Debug)]
pub struct ResultFact {
    pub arm: i64,
    pub condition: i64,
    /// "25 °C/60 % RH inverted".
    pub place: String,
    pub orientation: String,
    pub is_labelled: bool,
    pub is_accelerated: bool,
    pub sample: i64,
    pub days: i64,
    pub test: String,
    pub kind: TestKind,
    pub method_version: i64,
    pub value: Option<Decimal>,
    /// As stored: `=`, `>`, `<`, `words`, `none`.
    pub qualifier: String,
    /// JSON: single values, spread.
    pub detail: String,
}

/// A reading beside the results: seconds, residue, torque, clarity, odour, colour.
#[derive(Clone, Debug)]
pub struct ReadingFact {
    pub sample: i64,
    pub field: String,
    pub typed: String,
    pub value: Option<Decimal>,
}

/// Everything about one lot.
#[derive(Clone, Debug, Default)]
pub struct LotFacts {
    /// By arm and age.
    pub results: Vec<ResultFact>,
    pub readings: Vec<ReadingFact>,
    pub methods: BTreeMap<i64, MethodContent>,
    pub specification: Option<SpecificationContent>,
    /// The lot's expiry, in days after time zero.
    pub expiry_days: Option<i64>,
}

impl LotFacts {
    /// The arms that the rules are asked about: those of the labelled condition, upright first, else the first there
    /// is; each with its words.
    pub fn arms(&self) -> Vec<(i64, String)> {
        let rank = |one: &&ResultFact| (!one.is_labelled, one.orientation != "upright", one.arm);
        let mut found: Vec<&ResultFact> = self.results.iter().collect();
        found.sort_by_key(rank);
        let mut arms: Vec<(i64, String)> = Vec::new();
        for one in found {
            let is_known = arms.iter().any(|(arm, _)| *arm == one.arm);
            if !is_known && (one.is_labelled || arms.is_empty()) {
                arms.push((one.arm, one.place.clone()));
            }
        }
        arms
    }

    /// The lot as the rules see it by one arm.
    pub fn lot(&self, arm: i64) -> Lot {
        let warm = self.results.iter().find(|one| one.is_accelerated).map(|one| one.arm);
        Lot {
            pulls: self.pulls(arm),
            warm: warm.map(|arm| self.pulls(arm)).unwrap_or_default(),
            first_day: self.first_day(arm),
            limits: self.limits(),
            repeatability: self.repeatability(),
            expiry_days: self.expiry_days.map(|days| days as f64),
            arms: self.pairs(),
            attributes: self.attributes(arm),
            doubts: self.doubts(arm),
            falling_boundary: self.reads_falling_boundary(),
            ..Lot::default()
        }
    }

    fn of_arm(&self, arm: i64) -> impl Iterator<Item = &ResultFact> {
        self.results.iter().filter(move |one| one.arm == arm)
    }

    fn pulls(&self, arm: i64) -> Vec<Pull> {
        let mut pulls: Vec<(i64, Pull)> = Vec::new();
        for one in self.of_arm(arm) {
            if !pulls.iter().any(|(sample, _)| *sample == one.sample) {
                pulls.push((one.sample, Pull { age_days: one.days as f64, ..Pull::default() }));
            }
            if let Some((_, pull)) = pulls.iter_mut().find(|(sample, _)| *sample == one.sample) {
                self.put(one, pull);
            }
        }
        let first = pulls.first().map(|(sample, _)| *sample);
        for (sample, pull) in &mut pulls {
            self.put_readings(*sample, first, pull);
        }
        pulls.sort_by(|(_, one), (_, other)| one.age_days.total_cmp(&other.age_days));
        pulls.into_iter().map(|(_, pull)| pull).collect()
    }

    /// A result into its place. A count known only to be more than a bound stands with the bound: the rules ask
    /// whether it is large.
    fn put(&self, one: &ResultFact, pull: &mut Pull) {
        let usable = one.qualifier == "=" || (one.kind == TestKind::Redispersibility && one.qualifier == ">");
        let Some(value) = one.value.filter(|_| usable).and_then(|value| value.to_f64()) else { return };
        match (one.kind, one.test.as_str()) {
            (TestKind::Sedimentation, _) => pull.f = Some(value),
            (TestKind::Redispersibility, _) => pull.inversions = Some(value),
            (TestKind::Ph, _) => pull.ph = Some(value),
            (TestKind::Viscosity, test) => {
                let method = u32::try_from(one.method_version).unwrap_or_default();
                pull.viscosity = Some(Viscosity { value, method, low_shear: test.contains("low-shear") });
            }
            (TestKind::Numeric, "assay") => {
                pull.assay = Some(value);
                pull.assay_rsd = rsd(&one.detail);
            }
            (TestKind::Numeric, "preservative") => pull.preservative = Some(value),
            (TestKind::Numeric, "density") => pull.density = Some(value),
            (TestKind::Numeric, "weight-loss") => pull.weight_loss = Some(value),
            (TestKind::Numeric, "d10") => pull.d10 = Some(value),
            (TestKind::Numeric, "d90") => pull.d90 = Some(value),
            (TestKind::Numeric, "mean-size") => pull.mean_size = Some(value),
            (TestKind::Numeric, "size-span") => pull.size_spread = Some(value),
            (TestKind::Numeric, "zeta") => pull.zeta = Some(value),
            (TestKind::Numeric, "microbial-count") if value > 0.0 => pull.log_count = Some(value.log10()),
            _ => {}
        }
    }

    fn put_readings(&self, sample: i64, first: Option<i64>, pull: &mut Pull) {
        let of = |sample: i64, field: &'static str| {
            self.readings.iter().filter(move |one| one.sample == sample).filter(move |one| one.field == field)
        };
        let seconds = of(sample, "seconds").filter_map(|one| one.value).max();
        pull.seconds = seconds.and_then(|value| value.to_f64());
        let mut residue = of(sample, "residue").map(|one| !is_none(&one.typed)).peekable();
        pull.residue = residue.peek().is_some().then(|| residue.any(|is_there| is_there));
        let changed = |field: &'static str| {
            let now = of(sample, field).next().map(|one| one.typed.clone())?;
            let before = first.and_then(|first| of(first, field).next().map(|one| one.typed.clone()))?;
            Some(now != before)
        };
        pull.odour_changed = changed("odour");
        pull.colour_changed = changed("colour");
    }

    /// The first cylinder of the arm after a day.
    fn first_day(&self, arm: i64) -> FirstDay {
        let first = self.of_arm(arm).find(|one| one.kind == TestKind::Sedimentation);
        let Some(first) = first else { return FirstDay::default() };
        let clarity =
            self.readings.iter().find(|one| one.sample == first.sample && one.field == "clarity@1440");
        let turbid = clarity.and_then(|one| one.typed.trim().parse::<u8>().ok()).map(|grade| grade >= 2);
        FirstDay { turbid, f: first.value.and_then(|value| value.to_f64()), sharp_interface: None }
    }

    fn shelf_life(&self, test: &str) -> (Option<f64>, Option<f64>) {
        let limits = self.specification.as_ref().and_then(|content| content.of(test));
        match limits.map(|limits| limits.limit(LimitSet::ShelfLife)) {
            Some(Limit::Between { lower, upper }) => {
                (lower.and_then(|limit| limit.to_f64()), upper.and_then(|limit| limit.to_f64()))
            }
            _ => (None, None),
        }
    }

    fn limits(&self) -> Limits {
        let (ph_lower, ph_upper) = self.shelf_life("ph");
        Limits { ph_lower, ph_upper, preservative_lower: self.shelf_life("preservative").0 }
    }

    fn repeatability(&self) -> Repeatability {
        let of = |pick: &dyn Fn(&ResultFact) -> bool| {
            let one = self.results.iter().find(|one| pick(one))?;
            self.methods.get(&one.method_version)?.repeatability?.to_f64()
        };
        let kind = |kind: TestKind| of(&move |one: &ResultFact| one.kind == kind);
        let test = |test: &'static str| of(&move |one: &ResultFact| one.test == test);
        Repeatability {
            f: kind(TestKind::Sedimentation),
            inversions: kind(TestKind::Redispersibility),
            viscosity: kind(TestKind::Viscosity),
            ph: kind(TestKind::Ph),
            assay: test("assay"),
            density: test("density"),
        }
    }

    /// Single values of upright and inverted containers of one condition at the latest age that both have.
    fn pairs(&self) -> Vec<ArmPair> {
        let compares = |one: &&ResultFact| {
            matches!(one.kind, TestKind::Sedimentation | TestKind::AsStoredSediment)
                || one.test == "weight-loss"
        };
        let mut latest: BTreeMap<(i64, &str), (i64, &ResultFact, &ResultFact)> = BTreeMap::new();
        for up in self.results.iter().filter(compares).filter(|one| one.orientation == "upright") {
            let down = self.results.iter().filter(compares).find(|one| {
                one.orientation == "inverted"
                    && one.condition == up.condition
                    && one.test == up.test
                    && (one.days - up.days).abs() <= 15
            });
            let Some(down) = down else { continue };
            let at = latest.entry((up.condition, &up.test)).or_insert((up.days, up, down));
            if up.days >= at.0 {
                *at = (up.days, up, down);
            }
        }
        let pair = |(_, up, down): &(i64, &ResultFact, &ResultFact)| ArmPair {
            upright: singles(&up.detail),
            inverted: singles(&down.detail),
        };
        latest.values().map(pair).collect()
    }

    fn attributes(&self, arm: i64) -> Vec<Attribute> {
        let mut attributes: BTreeMap<&str, Attribute> = BTreeMap::new();
        for one in self.of_arm(arm).filter(|one| one.qualifier == "=") {
            let (lower, upper) = self.shelf_life(&one.test);
            let Some(value) = one.value.and_then(|value| value.to_f64()) else { continue };
            if lower.is_some() || upper.is_some() {
                let start = Attribute { results: Vec::new(), lower, upper };
                attributes.entry(&one.test).or_insert(start).results.push((one.days as f64, value));
            }
        }
        attributes.into_values().collect()
    }

    fn doubts(&self, arm: i64) -> Vec<Doubt> {
        let is_here = |sample: i64| self.of_arm(arm).any(|one| one.sample == sample);
        let torque = self
            .readings
            .iter()
            .filter(|one| one.field == "torque_percent")
            .filter(|one| is_here(one.sample));
        torque.filter_map(|one| one.value.and_then(|value| value.to_f64())).map(Doubt::Torque).collect()
    }

    fn reads_falling_boundary(&self) -> bool {
        self.methods.values().any(|content| match &content.settings {
            MethodSettings::Sedimentation { reads, .. } => *reads == InterfaceRead::FallingBoundary,
            _ => false,
        })
    }
}

/// "0", "none" and "no" mean that nothing stayed on the base.
fn is_none(typed: &str) -> bool {
    ["", "0", "none", "no", "nothing"].contains(&typed.trim().to_lowercase().as_str())
}

fn parsed(detail: &str) -> serde_json::Value {
    serde_json::from_str(detail).unwrap_or_default()
}

fn number(value: &serde_json::Value) -> Option<f64> {
    value
        .as_f64()
        .or_else(|| value.as_str().and_then(|text| text.parse().ok()))
        .filter(|value| value.is_finite())
}

/// Relative standard deviation of a result's single values, in percent.
fn rsd(detail: &str) -> Option<f64> {
    number(&parsed(detail)["rsd_percent"])
}

/// The single values behind a result.
fn singles(detail: &str) -> Vec<f64> {
    let detail = parsed(detail);
    detail["values"].as_array().into_iter().flatten().filter_map(|one| number(&one["value"])).collect()
}
