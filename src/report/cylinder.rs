//! The little cylinder: sediment height, clarity of the liquid above it and inversions to uniform, at one age; and
//! a strip of them over the ages of a lot. Drawn to scale: F 1.00 fills the reference volume.

use askama::Template;
use rust_decimal::Decimal;

use crate::domain::series::SeriesPoint;

/// Picture heights: the floor, and the units that F 1.00 takes.
const FLOOR: i64 = 164;
const WHOLE: i64 = 140;

/// What was seen in one cylinder.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Cylinder {
    /// "12 months".
    pub age: String,
    /// Sedimentation ratio F; `None` where it was not read.
    pub ratio: Option<Decimal>,
    /// 0 clear, 1 slightly hazy, 2 hazy, 3 cloudy (decision A14).
    pub clarity: Option<u8>,
    /// "11 inversions", "more than 100 inversions"; empty where not counted.
    pub inversions: String,
    pub is_small: bool,
}

/// The word of a clarity grade.
pub fn clarity_words(grade: u8) -> &'static str {
    match grade {
        0 => "clear",
        1 => "slightly hazy",
        2 => "hazy",
        _ => "cloudy",
    }
}

impl Cylinder {
    /// The same in words, for those who do not see the drawing.
    pub fn words(&self) -> String {
        let mut parts = vec![match self.ratio {
            Some(ratio) => format!("sedimentation ratio {}", two_decimals(ratio)),
            None => "sedimentation not read".to_string(),
        }];
        parts.extend(self.clarity.map(|grade| clarity_words(grade).to_string()));
        if !self.inversions.is_empty() {
            parts.push(self.inversions.clone());
        }
        format!("{}: {}", self.age, parts.join(", "))
    }

    pub fn drawn(&self) -> DrawnCylinder {
        let bed = self.ratio.map(|ratio| {
            let units = ratio.clamp(Decimal::ZERO, Decimal::new(112, 2)) * Decimal::from(WHOLE);
            units.round_dp(1)
        });
        let top = bed.map(|bed| Decimal::from(FLOOR) - bed);
        let surface = Decimal::from(FLOOR - WHOLE);
        DrawnCylinder {
            words: self.words(),
            age: self.age.clone(),
            ratio: self.ratio.map(two_decimals).unwrap_or_default(),
            clarity_class: self.clarity.unwrap_or(0).min(3),
            clarity: self.clarity.map(clarity_words).unwrap_or_default(),
            liquid: top
                .map(|top| (top - surface).max(Decimal::ZERO).normalize().to_string())
                .unwrap_or_default(),
            bed: bed.map(|bed| bed.normalize().to_string()).unwrap_or_default(),
            top: top.map(|top| top.normalize().to_string()).unwrap_or_default(),
            inversions: self.inversions.clone(),
            is_small: self.is_small,
        }
    }
}

/// The product drawn at each age of one arm: sediment, clarity and inversions as they were reported. Ages at which
/// nothing of it was read are left out.
pub fn of_points(points: &[SeriesPoint], clarities: &[(i64, u8)], is_small: bool) -> Vec<Cylinder> {
    let settled = |point: &&SeriesPoint| point.test == "sedimentation" && !point.is_missed;
    let cylinder = |point: &SeriesPoint| {
        let inversions = points.iter().find(|other| {
            other.sample == point.sample && other.test == "redispersibility" && other.value.is_some()
        });
        Cylinder {
            age: point.age.clone(),
            ratio: point.value,
            clarity: clarities.iter().find(|(id, _)| *id == point.sample).map(|(_, grade)| *grade),
            inversions: inversions.map(inversion_words).unwrap_or_default(),
            is_small,
        }
    };
    let seen = |cylinder: &Cylinder| cylinder.ratio.is_some() || !cylinder.inversions.is_empty();
    points.iter().filter(settled).map(cylinder).filter(seen).collect()
}

fn inversion_words(point: &SeriesPoint) -> String {
    if point.shown.contains("inversion") {
        point.shown.clone()
    } else {
        format!("{} inversions", point.shown)
    }
}

/// Two decimals, halves away from zero: how F is always shown.
fn two_decimals(ratio: Decimal) -> String {
    let rounded = ratio.round_dp_with_strategy(2, rust_decimal::RoundingStrategy::MidpointAwayFromZero);
    format!("{rounded:.2}")
}

/// A drawn cylinder. Pages embed it as it is.
#[derive(Clone, Debug, Template)]
#[template(path = "part/cylinder.html")]
pub struct DrawnCylinder {
    pub words: String,
    pub age: String,
    pub ratio: String,
    pub clarity_class: u8,
    pub clarity: &'static str,
    pub liquid: String,
    pub bed: String,
    pub top: String,
    pub inversions: String,
    pub is_small: bool,
}

impl askama::filters::HtmlSafe for DrawnCylinder {}

/// Cylinders side by side, oldest first.
#[derive(Clone, Debug, Template)]
#[template(
    ext = "html",
    source = r#"<div class="strip">{% for cylinder in cylinders %}{{ cylinder }}{% endfor %}</div>"#
)]
pub struct Strip {
    pub cylinders: Vec<DrawnCylinder>,
}

impl askama::filters::HtmlSafe for Strip {}

impl Strip {
    pub fn of(cylinders: &[Cylinder]) -> Strip {
        Strip { cylinders: cylinders.iter().map(Cylinder::drawn).collect() }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_bed_stands_to_scale_and_is_said_in_words() {
        let cylinder = Cylinder {
            age: "12 months".to_string(),
            ratio: Some(Decimal::new(84, 2)),
            clarity: Some(3),
            inversions: "11 inversions".to_string(),
            is_small: false,
        };
        let drawn = cylinder.drawn();
        assert_eq!(
            (drawn.top.as_str(), drawn.bed.as_str(), drawn.liquid.as_str()),
            ("46.4", "117.6", "22.4")
        );
        let html = drawn.render().unwrap();
        assert!(html.contains("12 months: sedimentation ratio 0.84, cloudy, 11 inversions"), "{html}");
        assert!(html.contains("url(#specks-3)") && html.contains("clarity-3"));
    }

    #[test]
    fn a_clear_liquid_has_no_specks_and_an_unread_cylinder_no_bed() {
        let clear = Cylinder { ratio: Some(Decimal::ONE), clarity: Some(0), ..Cylinder::default() };
        assert!(!clear.drawn().render().unwrap().contains("specks"));
        let unread = Cylinder::default().drawn().render().unwrap();
        assert!(unread.contains("not read") && !unread.contains("class=\"sediment\""));
        let swollen = Cylinder { ratio: Some(Decimal::new(108, 2)), ..Cylinder::default() };
        assert_eq!(swollen.drawn().top, "12.8", "a bed above the reference volume is drawn above it");
    }
}
