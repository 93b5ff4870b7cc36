//! The index of everything that is defined before a lot is made or a study starts.

use super::page::Shell;
use super::record::Record;
use super::reply::Outcome;
use super::route::{Route, get};
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::store;
use crate::store::definitions::Counts;

pub const ROUTES: &[Route] = &[get("/definitions", definitions)];

type Line = (&'static str, &'static str, i64, &'static str);

fn what_is_made(counts: &Counts) -> Vec<Line> {
    vec![
        ("/products", "Products", counts.products, "What is made, in which dosage form, for whom."),
        (
            "/presentations",
            "Presentations",
            counts.presentations,
            "Strength and pack for a market; carries the shelf life.",
        ),
        (
            "/formulations",
            "Formulations",
            counts.formulations,
            "What a suspension is made of, in approved versions.",
        ),
        ("/materials", "Materials", counts.materials, "What formulations choose from, by function."),
        (
            "/material-lots",
            "Material lots",
            counts.material_lots,
            "Deliveries with their status, retest or expiry, and balance.",
        ),
        (
            "/equipment",
            "Equipment",
            counts.equipment,
            "What lots are made in: clean, calibrated, in service.",
        ),
        ("/customers", "Customers", counts.customers, "For whom a contract maker makes."),
    ]
}

fn how_it_is_tested(counts: &Counts) -> Vec<Line> {
    vec![
        ("/methods", "Methods", counts.methods, "How each test is done and reported, in approved versions."),
        (
            "/specifications",
            "Specifications",
            counts.specifications,
            "Release and shelf-life limits of a presentation.",
        ),
        (
            "/instruments",
            "Instruments",
            counts.instruments,
            "Calibration, daily check, in or out of service.",
        ),
        (
            "/qualifications",
            "Qualifications",
            counts.qualifications,
            "Who may do which test, from when to when.",
        ),
    ]
}

fn how_it_ages(counts: &Counts) -> Vec<Line> {
    vec![
        ("/conditions", "Conditions", counts.conditions, "Temperature and humidity with their tolerances."),
        (
            "/chambers",
            "Chambers",
            counts.chambers,
            "Where a condition is kept, and until when it is qualified.",
        ),
        ("/protocols", "Protocols", counts.protocols, "Which tests at which ages under which conditions."),
        ("/imports", "Imports", counts.imports, "Results that were observed elsewhere and brought in whole."),
    ]
}

fn table(lines: Vec<Line>) -> Table {
    let first = lines.first().map(|(_, name, ..)| name.to_lowercase()).unwrap_or_default();
    let caption = format!("Counts of what is on record, from {first} on");
    let rows = lines.into_iter().map(|(path, name, count, sentence)| {
        vec![Cell::link(path, name), Cell::number(count.to_string()), Cell::text(sentence)]
    });
    Table::new(&caption, &["Definition", "On record#", "What it holds"], "").rows(rows)
}

fn definitions(visit: &Visit) -> Outcome {
    let counts = visit.read(store::definitions::counts)?;
    let lead =
        "What lots and studies rest on. An approved version never changes; a new version takes its place.";
    Record::new(Shell::of(visit, "Definitions"), lead)
        .table("What is made", table(what_is_made(&counts)))
        .table("How it is tested", table(how_it_is_tested(&counts)))
        .table("How it ages", table(how_it_ages(&counts)))
        .show()
}
