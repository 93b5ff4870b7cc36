//! The form of a method version: what all kinds share.

use super::super::field::{Entry, Field};
use super::super::form::{Form, Typed};
use super::super::rows::{decimal, maybe_decimal, shown, whole};
use super::super::visit::Visit;
use super::settings;
use crate::domain::instrument::KINDS;
use crate::domain::method::{
    Halves, Level, MethodContent, Reportable, RoundTo, Rounding, Settings, Stage, TestKind,
};

pub fn identity(form: Form) -> Form {
    form.field(Field::new("code", "Code", Entry::Text).width(12).hint("Such as M-014. Never used twice."))
        .field(Field::new("name", "Name", Entry::Text))
}

pub fn reason(form: Form, value: &str) -> Form {
    form.field(
        Field::new("reason", "Why this version", Entry::Text)
            .hint("It stands in the history and under the signatures.")
            .value(value),
    )
}

/// The whole content: shared parts, then what belongs to the kind.
pub fn content(visit: &Visit, form: Form, content: &MethodContent) -> Form {
    let form = sample_part(form, content);
    let form = reading_part(form, content);
    let form = if matches!(content.settings, Settings::Appearance { .. }) {
        form
    } else {
        report_part(form, content)
    };
    settings::part(visit, form, &content.settings)
}

fn tick(name: &str, label: &str, is_on: bool) -> Field {
    Field::new(name, label, Entry::Tick).value(if is_on { "yes" } else { "" })
}

fn count_field(name: &str, label: &str, value: u32) -> Field {
    Field::new(name, label, Entry::Count).width(8).value(value.to_string())
}

fn decimal_field(name: &str, label: &str, value: String) -> Field {
    Field::new(name, label, Entry::Decimal).width(8).value(value)
}

fn sample_part(form: Form, content: &MethodContent) -> Form {
    let stages = Stage::ALL.map(|stage| (stage.words(), stage.words()));
    let form = form
        .heading("The sample", "")
        .field(Field::new("stage", "Stage", Entry::Select).choices(stages).value(content.stage.words()))
        .field(count_field("containers_needed", "Containers needed", content.containers_needed))
        .field(decimal_field("ml_needed", "Volume needed, mL", shown(content.ml_needed)))
        .field(tick("needs_unopened", "The container must be unopened", content.needs_unopened))
        .field(tick("may_share_after", "Others may use the container after", content.may_share_after))
        .field(tick(
            "is_repeatable_on_container",
            "May be repeated on the same container",
            content.is_repeatable_on_container,
        ))
        .field(
            count_field("test_within_days", "Tested within, days after the pull", content.test_within_days)
                .hint("0 is the same day."),
        )
        .field(count_field("hands_on_minutes", "Hands-on time, minutes", content.hands_on_minutes))
        .heading("Instruments", "A reading names one of each kind ticked here.");
    KINDS.iter().enumerate().fold(form, |form, (index, kind)| {
        let is_on = content.instruments.iter().any(|used| used == kind);
        form.field(tick(&instrument_field(index), kind, is_on))
    })
}

fn instrument_field(index: usize) -> String {
    format!("instrument.{}", index + 1)
}

fn reading_part(form: Form, content: &MethodContent) -> Form {
    let is_graded = matches!(content.settings, Settings::Appearance { .. });
    let form = form.heading("What is read", "");
    let form = if is_graded {
        form
    } else {
        form.field(
            Field::new("unit", "Unit of the result", Entry::Text)
                .width(12)
                .value(&content.unit)
                .hint("Empty for a plain number, such as a ratio."),
        )
        .field(
            count_field("reading_decimals", "Decimals read", content.reading_decimals)
                .hint("Fewer typed are asked about; more are kept as typed."),
        )
        .field(
            decimal_field("possible_least", "Least possible reading", content.possible_least.to_string())
                .hint("What lies outside cannot be recorded at all."),
        )
        .field(decimal_field("possible_most", "Greatest possible reading", content.possible_most.to_string()))
        .field(
            decimal_field("repeatability", "Repeatability", shown(content.repeatability))
                .hint("Two readings of the same thing differ by no more. Empty: not asked about."),
        )
    };
    form.field(count_field("replicates", "Replicates", content.replicates))
        .field(
            Field::new("level", "Replicates are", Entry::Select)
                .choices(LEVELS.map(|(_, code, words)| (code, words)))
                .value(level_code(content.level)),
        )
        .field(
            decimal_field(
                "second_reader_tolerance",
                "Second reader agrees within",
                shown(content.second_reader_tolerance),
            )
            .hint("Filled in: a second person reads without seeing the first value."),
        )
        .field(tick("needs_check", "A second qualified person checks the result", content.needs_check))
        .field(tick(
            "hides_limits",
            "Limits and earlier values stay hidden until recorded",
            content.hides_limits,
        ))
}

const LEVELS: [(Level, &str, &str); 3] = [
    (Level::Reading, "reading", "readings of one preparation"),
    (Level::Preparation, "preparation", "preparations"),
    (Level::Container, "container", "containers"),
];

fn level_code(level: Level) -> &'static str {
    LEVELS.iter().find(|(known, _, _)| *known == level).map_or("reading", |(_, code, _)| code)
}

const REPORTABLE: [(&str, &str); 4] = [
    ("each", "each container is judged"),
    ("highest", "the highest value judges"),
    ("lowest", "the lowest value judges"),
    ("mean", "the mean, while the values agree"),
];

const ROUND_TO: [(&str, &str); 3] =
    [("decimals", "so many decimals"), ("nearest", "nearest"), ("figures", "so many significant figures")];

const HALVES: [(&str, &str); 2] = [("away", "away from zero"), ("even", "to even (ASTM E29)")];

fn report_part(form: Form, content: &MethodContent) -> Form {
    let (rule, range, rsd) = match &content.reportable {
        Reportable::EachContainer => ("each", None, None),
        Reportable::Worst { highest: true } => ("highest", None, None),
        Reportable::Worst { highest: false } => ("lowest", None, None),
        Reportable::Mean { range_at_most, rsd_percent_at_most } => {
            ("mean", *range_at_most, *rsd_percent_at_most)
        }
    };
    let (to, number) = match content.rounding.to {
        RoundTo::Decimals(number) => ("decimals", number),
        RoundTo::Nearest(number) => ("nearest", number),
        RoundTo::SignificantFigures(number) => ("figures", number),
    };
    let halves = if content.rounding.halves == Halves::ToEven { "even" } else { "away" };
    form.heading("What is reported", "")
        .field(
            Field::new("reportable", "The reportable value", Entry::Select).choices(REPORTABLE).value(rule),
        )
        .field(
            decimal_field("range_at_most", "Mean only while the range is at most", shown(range))
                .hint("In the unit of the result. Beyond it there is no reportable value."),
        )
        .field(decimal_field("rsd_at_most", "Mean only while the RSD is at most, %", shown(rsd)))
        .field(Field::new("round_to", "Rounded to", Entry::Select).choices(ROUND_TO).value(to))
        .field(
            count_field("round_number", "Decimals, step or figures", number)
                .hint("2 decimals, the nearest 10, 3 significant figures."),
        )
        .field(Field::new("halves", "A half goes", Entry::Select).choices(HALVES).value(halves))
}

/// Reads the whole content; every fault stands at its field.
pub fn read(typed: &mut Typed<'_>, kind: TestKind) -> Option<MethodContent> {
    let is_graded = kind == TestKind::Appearance;
    let stage = typed.choice("stage").and_then(|words| Stage::from_words(&words));
    let containers_needed = whole(typed, "containers_needed", 0, 1000);
    let ml_needed = maybe_decimal(typed, "ml_needed", "Volume needed, mL");
    let test_within_days = whole(typed, "test_within_days", 0, 365);
    let hands_on_minutes = whole(typed, "hands_on_minutes", 0, 10_000);
    let numbers = if is_graded { Some(Numbers::of_grades()) } else { read_numbers(typed) };
    let replicates = whole(typed, "replicates", 1, 100);
    let level = typed.choice("level");
    let second_reader_tolerance =
        maybe_decimal(typed, "second_reader_tolerance", "Second reader agrees within");
    let settings = settings::read(typed, kind);
    let level =
        level.and_then(|code| LEVELS.iter().find(|(_, known, _)| *known == code).map(|found| found.0));
    let numbers = numbers?;
    Some(MethodContent {
        stage: stage?,
        unit: numbers.unit,
        reading_decimals: numbers.reading_decimals,
        rounding: numbers.rounding,
        replicates: replicates?,
        level: level?,
        reportable: numbers.reportable,
        possible_least: numbers.least,
        possible_most: numbers.most,
        repeatability: numbers.repeatability,
        needs_check: typed.tick("needs_check"),
        second_reader_tolerance: second_reader_tolerance?,
        hides_limits: typed.tick("hides_limits"),
        is_repeatable_on_container: typed.tick("is_repeatable_on_container"),
        containers_needed: containers_needed?,
        ml_needed: ml_needed?,
        needs_unopened: typed.tick("needs_unopened"),
        may_share_after: typed.tick("may_share_after"),
        test_within_days: test_within_days?,
        hands_on_minutes: hands_on_minutes?,
        instruments: instruments(typed),
        settings: settings?,
    })
}

fn instruments(typed: &Typed<'_>) -> Vec<String> {
    let ticked = |(index, _): &(usize, &&str)| typed.tick(&instrument_field(*index));
    KINDS.iter().enumerate().filter(ticked).map(|(_, kind)| kind.to_string()).collect()
}

/// What only a test with numbers asks.
struct Numbers {
    unit: String,
    reading_decimals: u32,
    least: rust_decimal::Decimal,
    most: rust_decimal::Decimal,
    repeatability: Option<rust_decimal::Decimal>,
    reportable: Reportable,
    rounding: Rounding,
}

impl Numbers {
    /// An appearance has grades and no numbers.
    fn of_grades() -> Numbers {
        Numbers {
            unit: String::new(),
            reading_decimals: 0,
            least: rust_decimal::Decimal::ZERO,
            most: rust_decimal::Decimal::ONE_HUNDRED,
            repeatability: None,
            reportable: Reportable::EachContainer,
            rounding: Rounding { halves: Halves::AwayFromZero, to: RoundTo::Decimals(0) },
        }
    }
}

fn read_numbers(typed: &mut Typed<'_>) -> Option<Numbers> {
    let unit = typed.maybe_text("unit", 30);
    let reading_decimals = whole(typed, "reading_decimals", 0, 9);
    let least = decimal(typed, "possible_least", "Least possible reading");
    let most = decimal(typed, "possible_most", "Greatest possible reading");
    let repeatability = maybe_decimal(typed, "repeatability", "Repeatability");
    let reportable = read_reportable(typed);
    let rounding = read_rounding(typed);
    Some(Numbers {
        unit: unit?.unwrap_or_default(),
        reading_decimals: reading_decimals?,
        least: least?,
        most: most?,
        repeatability: repeatability?,
        reportable: reportable?,
        rounding: rounding?,
    })
}

fn read_reportable(typed: &mut Typed<'_>) -> Option<Reportable> {
    let rule = typed.choice("reportable");
    let range_at_most = maybe_decimal(typed, "range_at_most", "Range at most");
    let rsd_percent_at_most = maybe_decimal(typed, "rsd_at_most", "RSD at most, %");
    let (range_at_most, rsd_percent_at_most) = (range_at_most?, rsd_percent_at_most?);
    Some(match rule?.as_str() {
        "highest" => Reportable::Worst { highest: true },
        "lowest" => Reportable::Worst { highest: false },
        "mean" => Reportable::Mean { range_at_most, rsd_percent_at_most },
        _ => Reportable::EachContainer,
    })
}

fn read_rounding(typed: &mut Typed<'_>) -> Option<Rounding> {
    let to = typed.choice("round_to");
    let halves = typed.choice("halves");
    let number = match to.as_deref() {
        Some("nearest") => whole(typed, "round_number", 1, 1_000_000),
        Some("figures") => whole(typed, "round_number", 1, 12),
        _ => whole(typed, "round_number", 0, 9),
    };
    let halves = if halves? == "even" { Halves::ToEven } else { Halves::AwayFromZero };
    let to = match (to?.as_str(), number?) {
        ("nearest", number) => RoundTo::Nearest(number),
        ("figures", number) => RoundTo::SignificantFigures(number),
        (_, number) => RoundTo::Decimals(number),
    };
    Some(Rounding { halves, to })
}
