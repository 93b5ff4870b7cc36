//! Three clicks on a photo — base, interface, fill line — give the sediment ratio.

use rust_decimal::Decimal;

use super::method::Halves;
use super::refusal::NamedReason;
use super::rounding::to_decimals;

/// The marks as fractions of the picture: heights from 0 at its top, and where across, from 0 at the left, when they
/// were clicked. Only the heights give the ratio.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Marks {
    pub base_y: Decimal,
    pub interface_y: Decimal,
    pub fill_line_y: Decimal,
    pub base_x: Option<Decimal>,
    pub interface_x: Option<Decimal>,
    pub fill_line_x: Option<Decimal>,
}

#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum PhotoRefusal {
    #[error("A mark lies outside the picture. Places are fractions from 0 (top, left) to 1.")]
    OutsidePicture,
    #[error("The fill line does not lie above the base. Mark base, interface and fill line again.")]
    FillBelowBase,
    #[error("The interface lies below the base. Mark it again.")]
    InterfaceBelowBase,
}

impl NamedReason for PhotoRefusal {
    fn field(&self) -> Option<String> {
        let field = match self {
            PhotoRefusal::InterfaceBelowBase => "interface.y",
            PhotoRefusal::OutsidePicture | PhotoRefusal::FillBelowBase => "base.y",
        };
        Some(field.to_string())
    }
}

/// Height of the bed over height of the liquid, (base − interface) / (base − fill line), to four places.
///
/// Refuses in this order: outside the picture, fill line below the base, interface below the base.
pub fn ratio(marks: Marks) -> Result<Decimal, PhotoRefusal> {
    let all = [marks.base_y, marks.interface_y, marks.fill_line_y];
    let across = [marks.base_x, marks.interface_x, marks.fill_line_x];
    if all.iter().chain(across.iter().flatten()).any(|at| *at < Decimal::ZERO || *at > Decimal::ONE) {
        return Err(PhotoRefusal::OutsidePicture);
    }
    if marks.fill_line_y >= marks.base_y {
        return Err(PhotoRefusal::FillBelowBase);
    }
    if marks.interface_y > marks.base_y {
        return Err(PhotoRefusal::InterfaceBelowBase);
    }
    let exact = (marks.base_y - marks.interface_y) / (marks.base_y - marks.fill_line_y);
    Ok(to_decimals(exact, 4, Halves::AwayFromZero))
}

/// Whether a person sees what others measured: their own measurement comes first (blind).
pub fn sees_others(measured_by: &[i64], viewer: i64, may_measure: bool) -> bool {
    !may_measure || measured_by.contains(&viewer)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_ratio_is_exact_and_impossible_marks_are_refused() {
        let d = |text: &str| text.parse::<Decimal>().unwrap();
        let marks = |base: &str, interface: &str, fill: &str| Marks {
            base_y: d(base),
            interface_y: d(interface),
            fill_line_y: d(fill),
            base_x: Some(d("0.5")),
            ..Marks::default()
        };
        assert_eq!(ratio(marks("0.9000", "0.5000", "0.1000")), Ok(d("0.5000")));
        assert_eq!(ratio(marks("0.9", "0.3", "0.0")), Ok(d("0.6667")));
        assert_eq!(ratio(marks("0.9", "0.9", "0.1")), Ok(d("0.0000")));
        assert_eq!(ratio(marks("1.2", "0.5", "0.1")), Err(PhotoRefusal::OutsidePicture));
        assert_eq!(ratio(marks("0.1", "0.5", "0.9")), Err(PhotoRefusal::FillBelowBase));
        assert_eq!(ratio(marks("0.8", "0.9", "0.1")), Err(PhotoRefusal::InterfaceBelowBase));
    }

    #[test]
    fn others_are_seen_after_the_own_measurement() {
        assert!(!sees_others(&[4], 7, true));
        assert!(sees_others(&[4, 7], 7, true));
        assert!(sees_others(&[4], 9, false));
    }
}
