//! What was measured on photos: blind until the viewer has measured too.

use askama::Template;
use rust_decimal::Decimal;

use super::show;
use super::visit::Visit;
use crate::domain::act::Act;
use crate::domain::attachment::MediaType;
use crate::domain::failure::Failure;
use crate::domain::photo::{Marks, sees_others};
use crate::domain::subject::Subject;
use crate::store;
use crate::store::attachment::Measured;

/// The measurements on one photo as this visitor may see them.
#[derive(Template)]
#[template(path = "attachment/measurements.html")]
pub struct Measurements {
    rows: Vec<MeasureRow>,
    /// How many are there that the visitor does not see before measuring.
    hidden: usize,
}

impl askama::filters::HtmlSafe for Measurements {}

struct MeasureRow {
    by: String,
    at: String,
    base: String,
    interface: String,
    fill_line: String,
    ratio: String,
    strokes: [(Decimal, Decimal, Decimal); 3],
}

impl Measurements {
    pub fn of(visit: &Visit, measured: Vec<Measured>) -> Result<Measurements, Failure> {
        let by: Vec<i64> = measured.iter().map(|one| one.account).collect();
        if !sees_others(&by, visit.actor()?.account, visit.may(Act::MarkPhoto)) {
            return Ok(Measurements { rows: Vec::new(), hidden: measured.len() });
        }
        Ok(Measurements { rows: measured.into_iter().map(|one| row(one, visit)).collect(), hidden: 0 })
    }

    /// The clicks of all that the visitor sees.
    fn strokes(&self) -> impl Iterator<Item = &(Decimal, Decimal, Decimal)> {
        self.rows.iter().flat_map(|row| row.strokes.iter())
    }
}

fn row(measured: Measured, visit: &Visit) -> MeasureRow {
    let Marks { base_y, interface_y, fill_line_y, base_x, interface_x, fill_line_x } = measured.marks;
    MeasureRow {
        by: measured.by,
        at: show::instant(&measured.at, visit.at.zone),
        base: click(base_x, base_y),
        interface: click(interface_x, interface_y),
        fill_line: click(fill_line_x, fill_line_y),
        ratio: measured.ratio.to_string(),
        strokes: [stroke(base_x, base_y), stroke(interface_x, interface_y), stroke(fill_line_x, fill_line_y)],
    }
}

/// "0.4820, 0.9000": from the left, from the top. A typed height alone is "0.9000 down".
fn click(x: Option<Decimal>, y: Decimal) -> String {
    x.map_or_else(|| format!("{y} down"), |x| format!("{x}, {y}"))
}

/// A click as a short level stroke on the picture, in thousandths of it: from, to, height.
fn stroke(x: Option<Decimal>, y: Decimal) -> (Decimal, Decimal, Decimal) {
    let (thousand, half) = (Decimal::ONE_THOUSAND, Decimal::from(60));
    let middle = x.unwrap_or(Decimal::new(5, 1)) * thousand;
    let (from, to) = (middle - half, middle + half);
    (from.normalize(), to.normalize(), (y * thousand).normalize())
}

/// The photos of a record, for its review.
#[derive(Template)]
#[template(path = "attachment/photos.html")]
pub struct Photos {
    photos: Vec<Photo>,
    may_measure: bool,
}

impl askama::filters::HtmlSafe for Photos {}

struct Photo {
    id: i64,
    name: String,
    about: String,
    by: String,
    at: String,
    measured: Measurements,
}

impl Photos {
    pub fn of(visit: &Visit, subject: Subject) -> Result<Photos, Failure> {
        let (files, mut measured) = visit.read(|reader| {
            let files = store::attachment::of_subject(reader, subject)?;
            Ok((files, store::attachment::measured_of(reader, subject)?))
        })?;
        let mut photos = Vec::new();
        let is_photo = |media_type: &str| MediaType::from_code(media_type).is_some_and(MediaType::is_photo);
        for file in files.into_iter().filter(|file| is_photo(&file.media_type)) {
            let (own, rest) = measured.into_iter().partition::<Vec<_>, _>(|(photo, _)| *photo == file.id);
            measured = rest;
            photos.push(Photo {
                id: file.id,
                at: show::instant(&file.at, visit.at.zone),
                name: file.file_name,
                about: file.about,
                by: file.by,
                measured: Measurements::of(visit, own.into_iter().map(|(_, one)| one).collect())?,
            });
        }
        Ok(Photos { photos, may_measure: visit.may(Act::MarkPhoto) })
    }

    pub fn is_empty(&self) -> bool {
        self.photos.is_empty()
    }
}
