//! Every component of the look in every state, in both themes, made with the components of the pages and invented
//! data. The look is designed, reviewed and tested here.

use askama::Template;
use rust_decimal::Decimal;

use super::field::{Choice, Entry, Field};
use super::form::{Form, Part};
use super::page::Shell;
use super::part::{Signatures, Signed, StatusMark, Trail, TrailLine};
use super::reply::{Outcome, page};
use super::route::{Route, get};
use super::static_file;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::domain::failure::Failure;
use crate::domain::signature::Meaning;
use crate::domain::status::Status;
use crate::report::chart::{Chart, Drawn, Mark, Point, Series};
use crate::report::cylinder::{Cylinder, Strip};

pub const ROUTES: &[Route] = &[get("/patterns", patterns)];

#[derive(Template)]
#[template(path = "patterns/page.html")]
struct PatternsPage {
    shell: Shell,
    panes: Vec<Pane>,
    photo: &'static str,
}

/// The components of one theme. Names and ids end in the theme's word, so that they stay unique on the page.
struct Pane {
    theme: &'static str,
    form: Form,
    wrong: Form,
    signing: Form,
    marks: Vec<StatusMark>,
    table: Table,
    signatures: Signatures,
    trail: Trail,
    chart: Drawn,
    small_chart: Drawn,
    cylinders: Strip,
    strip: Strip,
}

fn patterns(visit: &Visit) -> Outcome {
    let panes = vec![pane(visit, "light", "TW-104-0617")?, pane(visit, "dark", "TW-104-0640")?];
    let shell = Shell::of(visit, "Patterns");
    page(&PatternsPage { shell, panes, photo: static_file::address("patterns-photo.svg") })
}

fn pane(visit: &Visit, theme: &'static str, lot: &str) -> Result<Pane, Failure> {
    Ok(Pane {
        theme,
        form: renamed(form(visit, theme)?, theme),
        wrong: renamed(wrong_form(visit)?, theme),
        signing: renamed(signing_form(visit)?, theme),
        marks: marks(),
        table: table(theme),
        signatures: signatures(),
        trail: trail(theme),
        chart: chart(lot, theme, false).drawn(),
        small_chart: chart(lot, theme, true).drawn(),
        cylinders: Strip::of(&clarities()),
        strip: Strip::of(&ages()),
    })
}

/// The form with the theme's word at the end of each name.
fn renamed(mut form: Form, theme: &str) -> Form {
    for part in &mut form.parts {
        let fields: Vec<&mut Field> = match part {
            Part::Field(field) => vec![field],
            Part::Grid { rows, .. } => rows.iter_mut().flatten().collect(),
            Part::Signature { fields, .. } => fields.iter_mut().collect(),
            Part::Heading { .. } => Vec::new(),
        };
        for field in fields {
            field.name = format!("{}-{theme}", field.name);
        }
    }
    form
}

fn form(visit: &Visit, theme: &str) -> Result<Form, Failure> {
    let grade = |value: &str, label: &str, anchor: &str| Choice {
        value: value.to_string(),
        label: label.to_string(),
        anchor: anchor.to_string(),
        photo: None,
    };
    let ingredient = |row: usize, name: &str, quantity: &str| {
        vec![
            Field::new(&format!("ingredient.{row}.material"), "Material", Entry::Text).value(name),
            Field::new(&format!("ingredient.{row}.quantity"), "Quantity, g", Entry::Decimal).value(quantity),
        ]
    };
    Ok(Form::new(visit, "/patterns", "Record readings")?
        .field(Field::new("lot", "Lot number", Entry::Text).width(20).value("TW-104-0640"))
        .field(
            Field::new("ph", "pH, pH units", Entry::Decimal)
                .width(8)
                .hint("This method reads to 0.01.")
                .value("6.83"),
        )
        .field(Field::new("n", "Containers received, bottles", Entry::Count).width(4).value("12"))
        .field(Field::new("on", "Made on", Entry::Date).width(12).hint("Day first, for example 3 Mar 2027"))
        .field(Field::new("grade", "Appearance after the label shake", Entry::Radios).value("2").grades(
            vec![
                grade("1", "Grade 1, uniform", "No clump on the wall or base when the bottle is tilted."),
                grade("2", "Grade 2, few clumps", "Up to five clumps that break when the bottle is tapped."),
            ],
        ))
        .field(
            Field::new("orientation", "Orientation", Entry::Select)
                .choices([("upright", "Upright"), ("inverted", "Inverted")])
                .value("inverted"),
        )
        .field(
            Field::new("seen", "What was seen", Entry::Long)
                .value("A ring at the fill line, gone after the label shake."),
        )
        .field(Field::new("unread", "Could not be read", Entry::Tick))
        .field(Field::new("photo", "Photo of the label, PNG or JPEG", Entry::File))
        .heading("Ingredients", "As weighed; the sum is compared with the batch size.")
        .grid(
            &format!("Ingredients, {theme}"),
            &["Material", "Quantity, g"],
            vec![ingredient(1, "Xanthan gum", "4.2"), ingredient(2, "Purified water", "880")],
        )
        .other_button("then", "complete", "Complete this test"))
}

fn wrong_form(visit: &Visit) -> Result<Form, Failure> {
    let mut form = Form::new(visit, "/patterns", "Record readings")?
        .field(Field::new("wrong-ph", "pH, pH units", Entry::Decimal).width(8).value("6.8.3"))
        .field(Field::new("wrong-day", "Made on", Entry::Date).width(12).value("3 Mar 2027"));
    form.refuse(Some("wrong-ph"), "pH has two decimal marks. Write one, as in 6.83.");
    form.refuse(Some("wrong-day"), "Made on is after today. Write a day up to 1 Dec 2026.");
    Ok(form)
}

fn signing_form(visit: &Visit) -> Result<Form, Failure> {
    Ok(Form::new(visit, "/patterns", "Sign 2 pulls")?.signature(Meaning::Review.words()))
}

fn marks() -> Vec<StatusMark> {
    let plain = Status::ALL.into_iter().map(StatusMark::of);
    plain.chain([StatusMark::counting(Status::OutOfSpecification, 1, 7, "tests")]).collect()
}

fn table(theme: &str) -> Table {
    Table::new(
        &format!("Results at 12 months, {theme}"),
        &["Lot", "State", "pH, pH units#", "Assay, %#"],
        "No results yet. They come with the first pull, on 3 Mar 2027.",
    )
    .rows([
        vec![
            Cell::link("/lots", "TW-104-0617"),
            Cell::Status(StatusMark::of(Status::Signed)),
            Cell::number("6.83"),
            Cell::number("99.4"),
        ],
        vec![
            Cell::noted("TW-104-0655", "40 °C/75 % RH, inverted"),
            Cell::Status(StatusMark::of(Status::InProgress)),
            Cell::number("6.79"),
            Cell::number_or_missing(None, "not done: bottle broken"),
        ],
    ])
}

const DIGEST: &str = "9f2c41d0 a7b35e18 04c6d2f7 71be9a35 c0d81f42 6e93ab57 2d4f80c1 b95ea673";

fn signatures() -> Signatures {
    let signed = |is_broken| Signed {
        meaning: Meaning::Review.words().to_string(),
        name: "Ada Whitlock".to_string(),
        role: "QA reviewer".to_string(),
        at: "1 Dec 2026, 15:02 (+00:00)".to_string(),
        digest: DIGEST.to_string(),
        statement: String::new(),
        is_broken,
    };
    Signatures { signed: vec![signed(false), signed(true)] }
}

fn trail(theme: &str) -> Trail {
    let line = |act: i64, at: &str, who: &str, what: &str, detail: &str, reason: &str| TrailLine {
        act,
        at: format!("30 Nov 2026, {at} (+00:00)"),
        who: who.to_string(),
        role: "analyst".to_string(),
        what: what.to_string(),
        detail: detail.to_string(),
        reason: reason.to_string(),
        is_denied: act == 43,
        digest: "4e01b7c2a771".to_string(),
    };
    let lines = vec![
        line(41, "10:12", "Rafe Tolland", "recorded readings", "pH, bottle 08: 6.38", ""),
        line(42, "10:20", "Rafe Tolland", "corrected a reading", "was 6.38, is 6.83", "mistyped"),
        line(43, "15:40", "Rafe Tolland", "checked a result", "pH", ""),
    ];
    Trail { name: format!("History, {theme}"), lines, whole: None }
}

/// Viscosity of an invented lot: a fall, a missed pull, a value below the limit.
fn chart(lot: &str, theme: &str, is_small: bool) -> Chart {
    let facts = [(0, 1182), (3, 1150), (6, 1121), (9, 0), (12, 1030), (18, 784)];
    let points = facts.map(|(months, value)| Point {
        age_months: Decimal::from(months),
        age: format!("{months} months"),
        value: (value > 0).then(|| Decimal::from(value)),
        shown: if value > 0 { value.to_string() } else { String::new() },
        replicates: if value > 0 { vec![Decimal::from(value - 8), Decimal::from(value + 8)] } else { vec![] },
        mark: if value == 784 { Mark::OutOfSpecification } else { Mark::None },
        is_signed: months < 18,
        is_asked: months == 18,
        ..Point::default()
    });
    Chart {
        id: format!("viscosity-{theme}-{}", if is_small { "small" } else { "large" }),
        test: if is_small { "Viscosity at this pull" } else { "Viscosity" }.to_string(),
        unit: "mPa·s".to_string(),
        lot: lot.to_string(),
        condition: "25 °C/60 % RH".to_string(),
        series: vec![Series { label: String::new(), points: points.to_vec() }],
        lower: Some(Decimal::from(800)),
        life_months: Some(Decimal::from(24)),
        is_small,
        ..Chart::default()
    }
}

fn cylinder(age: &str, hundredths: i64, clarity: u8, inversions: u32) -> Cylinder {
    Cylinder {
        age: age.to_string(),
        ratio: Some(Decimal::new(hundredths, 2)),
        clarity: Some(clarity),
        inversions: format!("{inversions} inversions"),
        is_small: false,
    }
}

/// The four clarities, a swollen bed, one that was not read, and the small drawing.
fn clarities() -> Vec<Cylinder> {
    let mut all: Vec<Cylinder> =
        (0..4).map(|grade| cylinder(&format!("Grade {grade}"), 62, grade, 4)).collect();
    all.push(cylinder("Swollen", 106, 0, 3));
    all.push(Cylinder { age: "24 months".to_string(), ..Cylinder::default() });
    all.push(Cylinder { is_small: true, ..cylinder("Small", 80, 2, 5) });
    all
}

/// How an invented lot has aged.
fn ages() -> Vec<Cylinder> {
    let facts =
        [(0, 96, 0, 4), (3, 95, 0, 4), (6, 93, 1, 5), (9, 91, 1, 6), (12, 84, 2, 11), (18, 71, 3, 23)];
    facts
        .map(|(months, ratio, clarity, count)| cylinder(&format!("{months} months"), ratio, clarity, count))
        .to_vec()
}
