//! Reading a result file: header, cells, and what must agree between rows.

use std::collections::HashMap;

use rust_decimal::Decimal;

use super::{COLUMNS, CellFault, MOST_COLUMNS, MOST_ROW_BYTES, MOST_ROWS, Qualifier, Row};
use crate::domain::age::Age;
use crate::domain::typed::{self, NumberRule};

/// Reads a whole file, or names everything in it that cannot be read.
///
/// Refuses in this order: encoding, header, size; then all cells; then rows that contradict each other.
pub fn read(bytes: &[u8]) -> Result<Vec<Row>, Vec<CellFault>> {
    let text = std::str::from_utf8(bytes).map_err(|error| {
        whole(format!(
            "The file is not UTF-8 text: byte {} cannot be read. Save it as “CSV UTF-8”.",
            error.valid_up_to() + 1
        ))
    })?;
    let text = text.trim_start_matches('\u{feff}');
    let header = text.lines().next().unwrap_or_default();
    let mut reader = csv::ReaderBuilder::new()
        .has_headers(false)
        .flexible(true)
        .delimiter(delimiter(header))
        .from_reader(text.as_bytes());
    let mut records = reader.records();
    let names: Vec<String> = match records.next() {
        Some(Ok(record)) => record.iter().map(|name| name.trim().to_lowercase()).collect(),
        _ => Vec::new(),
    };
    check_header(&names)?;
    let mut cells = Cells { names, faults: Vec::new() };
    let mut rows = Vec::new();
    let mut lines = Lines { text, byte: 0, line: 1 };
    for (at, record) in records.enumerate() {
        if at >= MOST_ROWS {
            return Err(whole(format!("The file has more than {MOST_ROWS} rows. Split it.")));
        }
        let Ok(record) = record else { return Err(whole("The file cannot be read as CSV.".to_string())) };
        let line = lines.of(record.position().map_or(0, csv::Position::byte) as usize);
        rows.extend(cells.row(line, &record));
    }
    if rows.is_empty() && cells.faults.is_empty() {
        return Err(whole("The file has a header and no results under it.".to_string()));
    }
    contradictions(&rows, &mut cells.faults);
    cells.faults.sort_by_key(|fault| fault.line);
    if cells.faults.is_empty() { Ok(rows) } else { Err(cells.faults) }
}

/// Counts lines as a person sees them in an editor.
struct Lines<'a> {
    text: &'a str,
    byte: usize,
    line: u64,
}

impl Lines<'_> {
    /// The line in which the row that begins at or after this byte begins. Asked in rising order.
    fn of(&mut self, byte: usize) -> u64 {
        let bytes = self.text.as_bytes();
        let blank = bytes[byte..].iter().take_while(|mark| matches!(mark, b'\r' | b'\n')).count();
        let passed = bytes[self.byte..byte + blank].iter().filter(|mark| **mark == b'\n').count();
        (self.byte, self.line) = (byte + blank, self.line + passed as u64);
        self.line
    }
}

fn whole(sentence: String) -> Vec<CellFault> {
    vec![CellFault { line: None, column: None, sentence }]
}

/// Comma, or what a spreadsheet of another country writes: semicolon or tab.
fn delimiter(header: &str) -> u8 {
    [b'\t', b';', b','].into_iter().find(|mark| header.contains(*mark as char)).unwrap_or(b',')
}

fn check_header(names: &[String]) -> Result<(), Vec<CellFault>> {
    if names.len() > MOST_COLUMNS {
        return Err(whole(format!("The file has {} columns; at most {MOST_COLUMNS} are read.", names.len())));
    }
    let known = |name: &String| COLUMNS.contains(&name.as_str());
    let missing: Vec<&str> =
        COLUMNS.into_iter().filter(|column| !names.iter().any(|name| name == column)).collect();
    let unknown: Vec<&str> = names.iter().filter(|name| !known(name)).map(String::as_str).collect();
    let twice = names.iter().enumerate().find(|(at, name)| names[..*at].contains(name));
    let mut sentence = String::new();
    if !missing.is_empty() {
        sentence.push_str(&format!("The first line does not name the columns {}. ", missing.join(", ")));
    }
    if !unknown.is_empty() {
        sentence.push_str(&format!("It names columns that are not read: {}. ", unknown.join(", ")));
    }
    if let Some((_, name)) = twice {
        sentence.push_str(&format!("It names the column {name} twice. "));
    }
    if sentence.is_empty() {
        return Ok(());
    }
    sentence.push_str(&format!("A result file has the columns {}, in any order.", COLUMNS.join(", ")));
    Err(vec![CellFault { line: Some(1), column: None, sentence }])
}

/// Reads cells by the name of their column and gathers what is wrong.
struct Cells {
    names: Vec<String>,
    faults: Vec<CellFault>,
}

impl Cells {
    fn fault(&mut self, line: u64, column: &str, sentence: impl Into<String>) {
        let column = Some(column.to_string()).filter(|column| !column.is_empty());
        self.faults.push(CellFault { line: Some(line), column, sentence: sentence.into() });
    }

    fn row(&mut self, line: u64, record: &csv::StringRecord) -> Option<Row> {
        if record.as_slice().len() > MOST_ROW_BYTES {
            self.fault(line, "", "the row is longer than 64 KiB. Shorten its texts.");
            return None;
        }
        if record.len() != self.names.len() {
            let (found, wanted) = (record.len(), self.names.len());
            self.fault(line, "", format!("there are {found} cells, and {wanted} columns in the header."));
            return None;
        }
        let study = self.text(line, record, "study", 60);
        let formulation = self.text(line, record, "formulation", 200);
        let condition = self.maybe_text(line, record, "condition", 120);
        let container = self.maybe_text(line, record, "container", 120);
        let age = self.age(line, record);
        let test = self.text(line, record, "test", 60);
        let value = self.value(line, record);
        let sd = self.spread(line, record);
        let n = self.number_of(line, record);
        let unit = self.maybe_text(line, record, "unit", 40);
        let flag = self.maybe_text(line, record, "flag", 200);
        let (qualifier, shown, value) = value?;
        Some(Row {
            line,
            study: study?,
            formulation: formulation?,
            condition: stated(condition?),
            container: stated(container?),
            age: age?,
            test: test?,
            value,
            shown,
            qualifier,
            sd: sd?,
            n: n?,
            unit: unit?,
            flag: flag?,
        })
    }

    /// The cell without white space around it, and without the one mark that keeps a spreadsheet from computing it.
    fn raw(&self, record: &csv::StringRecord, column: &str) -> String {
        let at = self.names.iter().position(|name| name == column);
        let cell = at.and_then(|at| record.get(at)).unwrap_or_default().trim();
        match cell.strip_prefix('\'') {
            Some(rest) if rest.starts_with(['=', '+', '-', '@', '\t', '\r', '\n']) => rest.to_string(),
            _ => cell.to_string(),
        }
    }

    fn maybe_text(
        &mut self,
        line: u64,
        record: &csv::StringRecord,
        column: &str,
        most: usize,
    ) -> Option<String> {
        let text = self.raw(record, column);
        let length = text.chars().count();
        if length > most {
            self.fault(line, column, format!("the text has {length} characters; at most {most} fit."));
            return None;
        }
        if text.chars().any(char::is_control) {
            self.fault(
                line,
                column,
                "the text holds a control character, such as a line break. Take it out.",
            );
            return None;
        }
        Some(text)
    }

    fn text(&mut self, line: u64, record: &csv::StringRecord, column: &str, most: usize) -> Option<String> {
        let text = self.maybe_text(line, record, column, most)?;
        if text.is_empty() {
            self.fault(line, column, "the cell is empty. Fill it in.");
            return None;
        }
        Some(text)
    }

    fn decimal(&mut self, line: u64, column: &str, text: &str, rule: &NumberRule) -> Option<Decimal> {
        match typed::number(text, rule) {
            Ok(number) => Some(number.value),
            Err(fault) => {
                self.fault(line, column, fault.to_string());
                None
            }
        }
    }

    fn value(&mut self, line: u64, record: &csv::StringRecord) -> Option<(Qualifier, String, Decimal)> {
        let shown = self.raw(record, "value");
        let (qualifier, number) = match shown.chars().next() {
            Some('<') => (Qualifier::Below, &shown[1..]),
            Some('>') => (Qualifier::Above, &shown[1..]),
            _ => (Qualifier::Equal, shown.as_str()),
        };
        let value = self.decimal(line, "value", number, &NumberRule::any("The value"))?;
        Some((qualifier, shown, value))
    }

    fn spread(&mut self, line: u64, record: &csv::StringRecord) -> Option<Option<Decimal>> {
        let text = self.raw(record, "sd");
        if text.is_empty() {
            return Some(None);
        }
        let rule = NumberRule { least: Decimal::ZERO, ..NumberRule::any("The standard deviation") };
        self.decimal(line, "sd", &text, &rule).map(Some)
    }

    fn number_of(&mut self, line: u64, record: &csv::StringRecord) -> Option<Option<u32>> {
        let text = self.raw(record, "n");
        if text.is_empty() {
            return Some(None);
        }
        match typed::count(&text, &NumberRule::between("The number of readings", 1, 100_000)) {
            Ok(number) => Some(u32::try_from(number.value.mantissa()).ok()),
            Err(fault) => {
                self.fault(line, "n", fault.to_string());
                None
            }
        }
    }

    /// Ages are whole days or whole months; a week is seven days, a year twelve months.
    fn age(&mut self, line: u64, record: &csv::StringRecord) -> Option<Age> {
        let (time, unit) = (self.raw(record, "time"), self.raw(record, "time_unit").to_lowercase());
        let unit = unit.trim_end_matches('s').to_string();
        if time.is_empty() {
            self.fault(
                line,
                "time",
                "the cell is empty. A stability result needs the age at which it was measured.",
            );
        }
        if !["hour", "day", "week", "month", "year"].contains(&unit.as_str()) {
            self.fault(line, "time_unit", "the unit of time is hour, day, week, month or year.");
            return None;
        }
        if time.is_empty() {
            return None;
        }
        let rule = NumberRule::between("The time", 0, 1_000_000);
        let time = self.decimal(line, "time", &time, &rule)?;
        let (factor, divisor) = match unit.as_str() {
            "week" => (7, 1),
            "year" => (12, 1),
            "hour" => (1, 24),
            _ => (1, 1),
        };
        let exact = time * Decimal::from(factor);
        let whole = exact / Decimal::from(divisor);
        match u32::try_from(whole.normalize().mantissa()).ok().filter(|_| whole.normalize().scale() == 0) {
            Some(count) if unit == "month" || unit == "year" => Some(Age::Months(count)),
            Some(count) => Some(Age::Days(count)),
            None => {
                let sentence =
                    format!("{time} {unit} is neither whole days nor whole months. Ages are one of both.");
                self.fault(line, "time", sentence);
                None
            }
        }
    }
}

fn stated(text: String) -> String {
    if text.is_empty() { "not stated".to_string() } else { text }
}

/// The same point twice, and a test in two units.
fn contradictions(rows: &[Row], faults: &mut Vec<CellFault>) {
    let mut points: HashMap<(&str, &str, &str, &str, Age, &str), u64> = HashMap::new();
    let mut units: HashMap<(&str, &str), (&str, u64)> = HashMap::new();
    let mut fault = |line: u64, column: &str, sentence: String| {
        faults.push(CellFault { line: Some(line), column: Some(column.to_string()), sentence });
    };
    for row in rows {
        let point = (
            row.study.as_str(),
            row.formulation.as_str(),
            row.condition.as_str(),
            row.container.as_str(),
            row.age,
            row.test.as_str(),
        );
        if let Some(first) = points.get(&point) {
            let sentence =
                format!("the same point stands in line {first} already. Keep one of them, or their mean.");
            fault(row.line, "value", sentence);
        } else {
            points.insert(point, row.line);
        }
        let (unit, first) = *units.entry((&row.study, &row.test)).or_insert((&row.unit, row.line));
        if unit != row.unit {
            let sentence = format!("{} is in “{}” here and in “{unit}” in line {first}.", row.test, row.unit);
            fault(row.line, "unit", sentence);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    const HEADER: &str = "study,formulation,condition,container,time,time_unit,test,value,sd,n,unit,flag\n";

    fn faults(rows: &str) -> Vec<String> {
        let found = read(format!("{HEADER}{rows}").as_bytes()).unwrap_err();
        found.iter().map(CellFault::to_string).collect()
    }

    #[test]
    fn columns_come_in_any_order_and_ages_in_any_unit() {
        let text = "flag;unit;n;sd;value;test;time_unit;time;container;condition;formulation;study\r\n\
            as printed;%;3;0,1;'-0.5;assay;weeks;2;bottle;25 C;F1;S\r\n;;;;<0.05;F;year;1.5;;;F1;S\r\n";
        let rows = read(text.as_bytes()).unwrap();
        assert_eq!((rows[0].age, rows[1].age), (Age::Days(14), Age::Months(18)));
        assert_eq!((rows[0].line, rows[1].line), (2, 3));
        assert_eq!(rows[0].value, "-0.5".parse().unwrap());
        assert_eq!((rows[0].sd, rows[0].n), (Some("0.1".parse().unwrap()), Some(3)));
        assert_eq!((rows[1].qualifier, rows[1].shown.as_str()), (Qualifier::Below, "<0.05"));
        assert_eq!(rows[1].condition, "not stated");
    }

    #[test]
    fn every_cell_that_cannot_be_read_is_named_at_once() {
        let found =
            faults("S,F,,,x,day,assay,1.2.3,-1,0,%,\n,F,,,1,fortnight,assay,9,,2.5,%,\nS,F,,,1,day\n");
        let named: Vec<&str> = found.iter().map(|fault| fault.split(':').next().unwrap()).collect();
        let expected = [
            "Line 2, time",
            "Line 2, value",
            "Line 2, sd",
            "Line 2, n",
            "Line 3, study",
            "Line 3, time_unit",
            "Line 3, n",
            "Line 4",
        ];
        assert_eq!(named, expected, "{found:#?}");
    }

    #[test]
    fn rows_that_contradict_each_other_are_named_with_both_lines() {
        let found = faults("S,F,,,1,day,pH,7,,,pH,\nS,F,,,1,day,pH,8,,,pH,\nS,F,,,2,day,pH,8,,,1,\n");
        assert!(found[0].starts_with("Line 3, value: the same point stands in line 2"), "{found:?}");
        assert!(found[1].starts_with("Line 4, unit: pH is in “1” here and in “pH” in line 2"), "{found:?}");
        assert!(faults("S,F,,,5,hour,pH,7,,,pH,\n")[0].contains("neither whole days nor whole months"));
        assert!(read(format!("{HEADER}S,F,,,48,hours,pH,7,,,pH,\n").as_bytes()).is_ok());
    }

    #[test]
    fn a_file_of_another_kind_is_refused_in_one_sentence() {
        for (bytes, words) in [
            (&b"a,b\n1,2\n"[..], "does not name the columns study"),
            (b"\xff\xfe", "not UTF-8 text: byte 1"),
            (HEADER.as_bytes(), "no results under it"),
            (b"", "does not name the columns"),
        ] {
            let found = read(bytes).unwrap_err();
            assert_eq!(found.len(), 1);
            assert!(found[0].sentence.contains(words), "{}", found[0]);
        }
    }

    proptest! {
        #[test]
        fn no_bytes_make_it_panic(
            bytes in proptest::collection::vec(any::<u8>(), 0..400),
            cells in "[-+=',;\"0-9a-z\n]{0,200}",
        ) {
            let _ = read(&bytes);
            let _ = read(format!("{HEADER}{cells}").as_bytes());
        }
    }
}
