//! Codes on labels: the same text as QR code (ISO/IEC 18004) and as Code 128 (ISO/IEC 15417), drawn as SVG paths.

use barcoders::sym::code128::Code128;
use qrcode::{Color, EcLevel, QrCode};

/// A drawn code: one path in units of its smallest element, with the size of its view box.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Code {
    pub path: String,
    pub width: usize,
    pub height: usize,
}

/// The quiet zone around a QR code, in modules (ISO/IEC 18004: four).
const QR_QUIET: usize = 4;
/// The quiet zone at each end of a Code 128, in modules (ISO/IEC 15417: ten).
const BAR_QUIET: usize = 10;
/// How tall the bars are drawn, in modules.
const BAR_HEIGHT: usize = 40;

/// The QR code of a text, with a quarter of it recoverable; `None` where it does not fit.
pub fn qr(text: &str) -> Option<Code> {
    let code = QrCode::with_error_correction_level(text, EcLevel::Q).ok()?;
    let size = code.width();
    let colors = code.to_colors();
    let mut path = String::new();
    for (at, _) in colors.iter().enumerate().filter(|(_, color)| **color == Color::Dark) {
        path.push_str(&format!("M{} {}h1v1h-1z", at % size + QR_QUIET, at / size + QR_QUIET));
    }
    Some(Code { path, width: size + 2 * QR_QUIET, height: size + 2 * QR_QUIET })
}

/// The Code 128 of a text, in character set B; `None` for a text outside printable ASCII.
pub fn bars(text: &str) -> Option<Code> {
    if text.is_empty() || !text.chars().all(|c| (' '..='~').contains(&c)) {
        return None;
    }
    // The first character chooses set B in the encoder's own notation.
    let modules = Code128::new(format!("\u{181}{text}")).ok()?.encode();
    let mut path = String::new();
    let mut at = 0;
    for run in modules.chunk_by(|one, next| one == next) {
        if run[0] == 1 {
            path.push_str(&format!("M{} 0h{}v{BAR_HEIGHT}h-{}z", at + BAR_QUIET, run.len(), run.len()));
        }
        at += run.len();
    }
    Some(Code { path, width: modules.len() + 2 * BAR_QUIET, height: BAR_HEIGHT })
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Widths of Code 128 set B: start 11 modules, 11 a character, check 11, stop 13 (ISO/IEC 15417).
    #[test]
    fn bars_have_the_length_and_the_ends_of_the_standard() {
        let code = bars("ML-0042").unwrap();
        assert_eq!(code.width, 11 + 7 * 11 + 11 + 13 + 2 * BAR_QUIET);
        // Start B is 2 bars, 1 space, 1, 2, 1, 4: the first bar is two modules wide.
        assert!(code.path.starts_with("M10 0h2v40h-2z"), "{}", code.path);
        assert_eq!(bars("Größe"), None);
        assert_eq!(bars(""), None);
    }

    /// A QR code of version 1 has 21 modules a side and three finders of 7 × 7 in its corners (ISO/IEC 18004).
    #[test]
    fn a_qr_code_has_its_size_and_its_finders() {
        let code = qr("ML-0042").unwrap();
        assert_eq!((code.width, code.height), (21 + 8, 21 + 8));
        for corner in ["M4 4h1v1h-1z", "M24 4h1v1h-1z", "M4 24h1v1h-1z"] {
            assert!(code.path.contains(corner), "{corner}");
        }
        assert!(!code.path.contains("M5 5h1v1h-1z"));
    }
}
