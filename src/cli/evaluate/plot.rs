//! A small plot in characters: results as letters, limits, and the confidence limit that decides.

use crate::domain::evaluation::assess::{Assessment, CONFIDENCE};
use crate::science::interval;
use crate::science::shelf_life::{Direction, Outcome};

const WIDTH: usize = 64;
const HEIGHT: usize = 14;

/// A grid of characters over ages and values.
struct Canvas {
    cells: Vec<Vec<char>>,
    ages: (f64, f64),
    values: (f64, f64),
}

impl Canvas {
    fn column(&self, age: f64) -> Option<usize> {
        place(age, self.ages, WIDTH)
    }

    fn row(&self, value: f64) -> Option<usize> {
        place(value, self.values, HEIGHT).map(|up| HEIGHT - 1 - up)
    }

    /// Sets a character; two different letters in one cell become a star.
    fn put(&mut self, age: f64, value: f64, mark: char) {
        let (Some(column), Some(row)) = (self.column(age), self.row(value)) else { return };
        let cell = &mut self.cells[row][column];
        let letter = |c: char| c.is_alphabetic() || c == '*';
        *cell = if letter(*cell) && letter(mark) && *cell != mark {
            '*'
        } else if letter(*cell) {
            *cell
        } else {
            mark
        };
    }
}

fn place(x: f64, (low, high): (f64, f64), size: usize) -> Option<usize> {
    let share = (x - low) / (high - low);
    (0.0..=1.0).contains(&share).then(|| ((share * size as f64) as usize).min(size - 1))
}

/// The letter of a lot: a–z, then A–Z, then again.
pub(super) fn letter(lot: usize) -> char {
    const LETTERS: &[u8; 52] = b"abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ";
    char::from(LETTERS[lot % LETTERS.len()])
}

/// The plot, on the original scale; empty where there is nothing to draw.
pub(super) fn draw(found: &Assessment) -> String {
    let back = |z: f64| found.series.scale.back(z + found.origin);
    let all = || found.points.iter().flatten();
    let oldest = all().map(|p| p.x).fold(0.0, f64::max);
    if oldest == 0.0 {
        return String::new();
    }
    let limits = [found.specification.lower, found.specification.upper];
    let values = all().map(|p| back(p.y)).chain(limits.into_iter().flatten().map(back));
    let (low, high) = values.fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), v| (l.min(v), h.max(v)));
    let margin = if high > low { 0.05 * (high - low) } else { 0.05 * high.abs().max(1.0) };
    let end = match found.life.outcome {
        Outcome::Crosses(months) => oldest.max(months.min(2.0 * oldest)) * 1.05,
        _ => oldest * 1.05,
    };
    let mut canvas = Canvas {
        cells: vec![vec![' '; WIDTH]; HEIGHT],
        ages: (0.0, end),
        values: (low - margin, high + margin),
    };
    for limit in limits.into_iter().flatten() {
        for column in 0..WIDTH {
            canvas.put(end * (column as f64 + 0.5) / WIDTH as f64, back(limit), '-');
        }
    }
    draw_bounds(found, &mut canvas, end, &back);
    for (lot, points) in found.points.iter().enumerate() {
        for p in points {
            canvas.put(p.x, back(p.y), letter(lot));
        }
    }
    framed(&canvas, end)
}

/// The confidence limit of the binding lot, or of the common line.
fn draw_bounds(found: &Assessment, canvas: &mut Canvas, end: f64, back: &impl Fn(f64) -> f64) {
    let Some(pooling) = &found.pooling else { return };
    let lot = found.life.binding_lot.unwrap_or(0);
    let Some(line) = pooling.mean_line(pooling.model, lot) else { return };
    let Some(direction) = found.series.direction else { return };
    for column in 0..WIDTH {
        let age = end * (column as f64 + 0.5) / WIDTH as f64;
        let limits = match direction {
            Direction::Either => interval::confidence_of_mean(&line, age, CONFIDENCE),
            _ => interval::confidence_of_mean_one_sided(&line, age, CONFIDENCE),
        };
        let Some(limits) = limits else { return };
        if direction != Direction::Increasing {
            canvas.put(age, back(limits.lower), '.');
        }
        if direction != Direction::Decreasing {
            canvas.put(age, back(limits.upper), '.');
        }
    }
}

fn framed(canvas: &Canvas, end: f64) -> String {
    let mut text = String::new();
    for (row, cells) in canvas.cells.iter().enumerate() {
        let (low, high) = canvas.values;
        let value = low + (high - low) * (HEIGHT as f64 - row as f64 - 0.5) / HEIGHT as f64;
        let label = if row % 4 == 1 { super::text::number(value) } else { String::new() };
        let line: String = cells.iter().collect();
        text.push_str(&format!("  {label:>10} |{}\n", line.trim_end()));
    }
    text.push_str(&format!("  {:>10} +{}\n", "", "-".repeat(WIDTH)));
    let right = format!("{} months", super::text::number(end));
    text.push_str(&format!("  {:>10}  0{right:>width$}\n", "", width = WIDTH - 1));
    text
}
