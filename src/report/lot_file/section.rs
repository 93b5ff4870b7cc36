//! The sections of the lot file, in the order in which an inspector reads a lot's life.

use super::words::{flat, head, shown};
use super::{Document, Entry, Grid, Line, Place, Section};
use crate::domain::lot_file::{Cell, LotFile, Table};
use crate::domain::moment::Moment;
use crate::domain::series::{ArmWords, SeriesPoint};
use crate::report::chart::from_series::of_arms;
use crate::report::cylinder::{Strip, of_points};

/// Columns that stand elsewhere in the line, or only in the data files.
const NOT_SHOWN: [&str; 19] = [
    "id",
    "act",
    "content",
    "detail",
    "numbers",
    "hints",
    "supersedes",
    "superseded_by",
    "offset_minutes",
    "lower",
    "centre",
    "upper",
    "action_lower",
    "action_upper",
    "degrees_of_freedom",
    "probability",
    "alert_level",
    "action_level",
    "needs",
];

/// Everything about the lot, section by section.
pub fn by_section(file: &LotFile, place: Place) -> Document {
    let maker = Maker { file, place };
    let mut sections = vec![maker.tables("identity", "Identity and label", "", &[])];
    maker.identity(&mut sections);
    maker.versions(&mut sections, "formulation", "Formulation", "formulation_versions");
    maker.making(&mut sections);
    sections.push(maker.tables(
        "studies",
        "Studies",
        "",
        &["studies", "amendments", "arms", "pulls", "pull_events"],
    ));
    maker.versions(&mut sections, "protocols", "Protocols", "protocol_versions");
    maker.versions(&mut sections, "specifications", "Specifications", "specification_versions");
    maker.drawings(&mut sections);
    sections.push(maker.tables(
        "trend",
        "Trend",
        "Each result against a forecast made before it was measured. Forecasts stand here once their readings are \
         recorded.",
        &["trend_verdicts", "trend_forecasts", "trend_exclusions"],
    ));
    sections.push(maker.tables(
        "conclusions",
        "Conclusions on shelf life",
        "What was proposed from this lot among others. A shelf life is assigned, never taken from a computation.",
        &["evaluation_conclusions"],
    ));
    sections.push(maker.tables("containers", "Containers", "", &["containers", "container_events"]));
    sections.push(maker.tables(
        "samples",
        "Samples and pulls",
        "Each sample with its results, readings, corrections, findings, checks and decisions.",
        &[],
    ));
    maker.samples(&mut sections);
    sections.push(maker.tables("corrections", "Corrections", "", &["corrections"]));
    sections.push(maker.tables(
        "deviations",
        "Deviations",
        "",
        &["deviations", "deviation_entries", "flags", "stage_losses", "investigations", "answers"],
    ));
    sections.push(maker.tables("signatures", "Signatures", "", &["signatures"]));
    maker.versions(&mut sections, "methods", "Methods", "method_versions");
    sections.push(maker.tables(
        "people",
        "People and registers",
        "",
        &["people", "qualifications", "instruments"],
    ));
    sections.push(maker.tables("attachments", "Attachments", "", &["attachments"]));
    sections.push(maker.tables("entries", "Entries of the audit trail", "", &["entries"]));
    Document { sections }
}

/// The entries alone, one line each.
pub fn by_time(file: &LotFile, place: Place, person: Option<&str>, day: Option<&str>) -> Document {
    let maker = Maker { file, place };
    let mut section = maker.tables("entries", "By time", "One line for each act, oldest first.", &[]);
    if let Some(table) = file.table("entries") {
        let is_asked = |row: &[Cell]| {
            let date = Moment::from_stored(&table.text(row, "at"), file.zone).map(|at| at.date().to_string());
            person.is_none_or(|person| table.text(row, "user_name") == person)
                && day.is_none_or(|day| date.as_deref() == Some(day))
        };
        let rows: Vec<&Vec<Cell>> = table.rows.iter().filter(|row| is_asked(row)).collect();
        section.grids = vec![maker.grid(table, &rows, &NOT_SHOWN)];
    }
    Document { sections: vec![section] }
}

/// The drawn cylinders of each arm where any was read.
fn strips(file: &LotFile) -> Vec<(String, Strip)> {
    let arms = file.series.iter();
    let strip = |(words, points): &(ArmWords, Vec<SeriesPoint>)| {
        let cylinders = of_points(points, &file.clarities, true);
        (!cylinders.is_empty()).then(|| (words.condition.clone(), Strip::of(&cylinders)))
    };
    arms.filter_map(strip).collect()
}

struct Maker<'a> {
    file: &'a LotFile,
    place: Place,
}

impl Maker<'_> {
    /// A section of whole tables. A table without rows says so.
    fn tables(&self, anchor: &str, title: &str, lead: &str, names: &[&str]) -> Section {
        let found = names.iter().filter_map(|name| self.file.table(name));
        let grids = found.map(|table| self.grid(table, &table.rows.iter().collect::<Vec<_>>(), &NOT_SHOWN));
        Section {
            anchor: anchor.to_string(),
            title: title.to_string(),
            lead: lead.to_string(),
            grids: grids.collect(),
            ..Section::default()
        }
    }

    /// Cylinders and charts over the ages.
    fn drawings(&self, sections: &mut Vec<Section>) {
        sections.push(Section {
            strips: strips(self.file),
            ..self.tables(
                "cylinders",
                "Cylinders over the ages",
                "Sediment, liquid above it and inversions to uniform, drawn to scale.",
                &[],
            )
        });
        sections.push(Section {
            charts: of_arms(&self.file.number, &self.file.series, false),
            ..self.tables("charts", "Charts", "", &[])
        });
    }

    /// A table with its lines; columns that are empty in every line are left out.
    fn grid(&self, table: &Table, rows: &[&Vec<Cell>], not_shown: &[&str]) -> Grid {
        let is_filled = |column: &str| rows.iter().any(|row| *table.cell(row, column) != Cell::Missing);
        let columns: Vec<&String> = table
            .columns
            .iter()
            .filter(|column| !not_shown.contains(&column.as_str()) && is_filled(column))
            .collect();
        Grid {
            caption: table.title.to_string(),
            heads: columns.iter().map(|column| (head(column), table.is_numeric(column))).collect(),
            rows: rows.iter().map(|row| self.line(table, row, &columns)).collect(),
        }
    }

    fn line(&self, table: &Table, row: &[Cell], columns: &[&String]) -> Line {
        let cells = columns
            .iter()
            .map(|column| (shown(column, table.cell(row, column), self.file.zone), table.is_numeric(column)))
            .collect();
        let is_entry = table.name == "entries";
        let id = table.text(row, if is_entry { "act" } else { "id" });
        // A reading stands once in the document, so that its address is its own.
        let anchor = match table.name {
            "readings" => format!("reading-{id}"),
            "entries" => format!("entry-{id}"),
            _ => String::new(),
        };
        Line { anchor, cells, entry: self.entry(table.text(row, "act")) }
    }

    fn entry(&self, act: String) -> Option<Entry> {
        let entries = self.file.table("entries")?;
        let row = entries.rows_where("act", &act).into_iter().next()?;
        let address = match self.place {
            Place::Page => format!("/history/{act}"),
            Place::File => format!("{}#entry-{act}", super::BY_TIME),
        };
        Some(Entry { address, seal: entries.text(row, "seal").chars().take(8).collect(), act })
    }

    /// Versions with their whole content, line by line.
    fn versions(&self, sections: &mut Vec<Section>, anchor: &str, title: &str, name: &str) {
        sections.push(self.tables(anchor, title, "", &[name]));
        let Some(table) = self.file.table(name) else { return };
        for row in &table.rows {
            let id = table.text(row, "id");
            sections.push(Section {
                anchor: format!("{anchor}-{id}"),
                title: format!("{} version {}", table.text(row, "code"), table.text(row, "number")),
                is_part: true,
                facts: flat(&table.text(row, "content")),
                ..Section::default()
            });
        }
    }

    /// The lot, and the bulk lots it was filled from, each as a list of facts.
    fn identity(&self, sections: &mut Vec<Section>) {
        let Some(table) = self.file.table("lots") else { return };
        for row in &table.rows {
            let stated = table.columns.iter().filter(|column| !NOT_SHOWN.contains(&column.as_str()));
            let stated = stated.filter(|column| *table.cell(row, column) != Cell::Missing);
            let fact =
                |column: &String| (head(column), shown(column, table.cell(row, column), self.file.zone));
            sections.push(Section {
                anchor: format!("lot-{}", table.text(row, "id")),
                title: format!("Lot {}", table.text(row, "number")),
                is_part: true,
                facts: stated.map(fact).collect(),
                ..Section::default()
            });
        }
    }

    /// How the lot was made, and what its release asked for.
    fn making(&self, sections: &mut Vec<Section>) {
        let made = ["batch_records", "step_entries", "phase_yields", "stock_entries", "equipment_uses"];
        let note = "A row that supersedes another is a correction of it; both stand here.";
        sections.push(self.tables("making", "How it was made", note, &made));
        let packed = ["packaging_counts", "packaging_checks", "retains", "blank_sheets"];
        sections.push(self.tables("packing", "Containers, labels and retains", "", &packed));
        let stated = ["completeness_statements", "certificates"];
        sections.push(self.tables("completeness", "Completeness and certificates", "", &stated));
        let decided = ["lot_decisions", "lot_distributions"];
        sections.push(self.tables("release", "Release and distribution", "", &decided));
    }

    /// One part for each sample.
    fn samples(&self, sections: &mut Vec<Section>) {
        let Some(samples) = self.file.table("samples") else { return };
        for row in &samples.rows {
            let number = samples.text(row, "number");
            let words = |column: &str| shown(column, samples.cell(row, column), self.file.zone);
            let facts =
                ["purpose", "condition", "orientation", "age", "condition_on_receipt", "handed_over_by"];
            let facts = facts.iter().filter(|column| *samples.cell(row, column) != Cell::Missing);
            let mut grids: Vec<Grid> = self.results(&number).into_iter().collect();
            for name in ["readings", "stage_losses", "checks", "reviews"] {
                grids.extend(self.of_sample(name, &number));
            }
            sections.push(Section {
                anchor: format!("sample-{}", samples.text(row, "id")),
                title: format!("Sample {number}"),
                is_part: true,
                facts: facts.map(|column| (head(column), words(column))).collect(),
                grids,
                ..Section::default()
            });
        }
    }

    fn of_sample(&self, name: &str, number: &str) -> Option<Grid> {
        let table = self.file.table(name)?;
        let rows = table.rows_where("sample", number);
        let not_shown: Vec<&str> = NOT_SHOWN.iter().copied().chain(["sample", "test"]).collect();
        if rows.is_empty() { None } else { Some(self.grid(table, &rows, &not_shown)) }
    }

    /// A value never stands without its limits, its unit and its version (screen_U104).
    fn results(&self, number: &str) -> Option<Grid> {
        let table = self.file.table("results")?;
        let rows = table.rows_where("sample", number);
        let lines = rows.iter().map(|row| {
            let text = |column: &str| shown(column, table.cell(row, column), self.file.zone);
            let part = table.text(row, "component");
            let title = if part.is_empty() { text("title") } else { format!("{}, {part}", text("title")) };
            let spread = match (table.text(row, "sd"), table.text(row, "n")) {
                (sd, n) if !sd.is_empty() && !n.is_empty() => format!("{sd} (n {n})"),
                (sd, _) if !sd.is_empty() => sd,
                _ => "–".to_string(),
            };
            let value = format!("{} ({})\u{202f}{}", text("shown"), text("limits"), table.text(row, "unit"));
            let state = match (text("is_imported").as_str(), text("is_newest").as_str()) {
                ("yes", _) => "imported, not observed here".to_string(),
                (_, "yes") => text("verdict"),
                _ => format!("{}; replaced by a later version", text("verdict")),
            };
            let cells = [
                (title, false),
                (value, true),
                (spread, true),
                (state, false),
                (text("version"), true),
                (text("completed_by"), false),
                (text("completed_at"), false),
            ];
            Line { anchor: String::new(), cells: cells.into(), entry: self.entry(table.text(row, "act")) }
        });
        let heads = [
            ("Test", false),
            ("Result with its limits and unit", true),
            ("Spread", true),
            ("Verdict", false),
            ("Version", true),
            ("Completed by", false),
            ("Completed at", false),
        ];
        let heads = heads.iter().map(|(words, is_number)| (words.to_string(), *is_number)).collect();
        let grid = Grid { caption: "Results".to_string(), heads, rows: lines.collect() };
        if grid.rows.is_empty() { None } else { Some(grid) }
    }
}
