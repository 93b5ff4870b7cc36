//! `supernate evaluate`: from a file to the printed answer.

use std::path::PathBuf;

use serde_json::Value;
use supernate::cli::evaluate::{Args, ReplicateChoice, run};

use crate::reference;
use crate::support::{agree, data};

/// A file of its own in the folder for temporary files, removed at the end.
struct Table(PathBuf);

impl Table {
    fn new(name: &str, text: &str) -> Self {
        let path = std::env::temp_dir().join(format!("supernate-{}-{name}.csv", std::process::id()));
        std::fs::write(&path, text).unwrap();
        Self(path)
    }
}

impl Drop for Table {
    fn drop(&mut self) {
        let _ = std::fs::remove_file(&self.0);
    }
}

fn args(file: PathBuf) -> Args {
    Args { file, json: true, replicates: ReplicateChoice::Mean, expiry_months: None }
}

fn evaluated(name: &str, text: &str) -> Value {
    let table = Table::new(name, text);
    serde_json::from_str(&run(&args(table.0.clone())).unwrap()).unwrap()
}

fn refused(name: &str, text: &str) -> String {
    let table = Table::new(name, text);
    let refusal = run(&args(table.0.clone())).unwrap_err().to_string();
    refusal.replace(&format!("{}: ", table.0.display()), "")
}

/// Every reference set, through the file: model, status and root.
#[test]
fn reference_sets_through_a_file() {
    for set in reference::sets() {
        let expected = &set.expected;
        let limit = |name: &str| expected[name].as_f64().map_or(String::new(), |limit| limit.to_string());
        let fixed = format!(
            "{},{},{},{}",
            limit("lower_limit"),
            limit("upper_limit"),
            expected["direction"].as_str().unwrap(),
            expected["transform"].as_str().unwrap()
        );
        let mut text = String::from("lot,test,age_months,value,lower_limit,upper_limit,direction,scale\n");
        for (name, _) in &set.lots {
            let lot = &expected["lots"][name];
            for (x, y) in lot["x"].as_array().unwrap().iter().zip(lot["y"].as_array().unwrap()) {
                let (x, y) = (x.as_f64().unwrap(), y.as_f64().unwrap());
                text.push_str(&format!("{name},result,{x},{y},{fixed}\n"));
            }
        }
        let table = Table::new(&set.name, &text);
        let args = Args { replicates: ReplicateChoice::Independent, ..args(table.0.clone()) };
        let found: Value = serde_json::from_str(&run(&args).unwrap()).unwrap();
        let series = &found["series"][0];
        assert_eq!(series["pooling"]["model"], expected["ancova"]["chosen_model"], "{}", set.name);
        let (got, want) = (&series["shelf_life"], &expected["shelf_life"]["chosen"]);
        assert_eq!(got["status"], want["status"], "{}", set.name);
        assert_eq!(got["months_floor"].as_u64(), want["months_floor"].as_u64(), "{}", set.name);
        match want["months"].as_f64() {
            Some(months) => {
                agree(got["months"].as_f64().unwrap(), months, 1e-8, &set.name);
            }
            None => assert!(got["months"].is_null(), "{}", set.name),
        }
        let p = |key: &str| series["pooling"][key]["p"].as_f64();
        if let (Some(got), Some(want)) = (p("slopes"), expected["ancova"]["slopes"]["p"].as_f64()) {
            agree(got, want, 1e-8, &format!("{} p slopes", set.name));
        }
    }
}

const HEADER: &str = "product,lot,test,condition,age_months,value,unit,lower_limit\n";

fn three_lots() -> String {
    let mut text = String::from(HEADER);
    let lots = [
        ("A", [100.2, 99.6, 99.0, 98.3, 97.9]),
        ("B", [100.0, 99.6, 98.9, 98.5, 97.8]),
        ("C", [100.2, 99.3, 99.1, 98.4, 97.9]),
    ];
    for (lot, values) in lots {
        for (value, age) in values.iter().zip([0, 3, 6, 9, 12]) {
            text.push_str(&format!("Invented suspension,{lot},Assay,25/60,{age},{value},%,90.0\n"));
        }
    }
    text
}

#[test]
fn the_shape_of_the_document() {
    let found = evaluated("shape", &three_lots());
    let series = &found["series"][0];
    let keys = |value: &Value| -> Vec<String> {
        let mut keys: Vec<String> = value.as_object().unwrap().keys().cloned().collect();
        keys.sort();
        keys
    };
    assert_eq!(
        keys(series),
        [
            "condition",
            "direction",
            "lots",
            "notes",
            "orientation",
            "pack",
            "pooling",
            "product",
            "scale",
            "shelf_life",
            "test",
            "trend",
            "unit"
        ]
    );
    assert_eq!(keys(&series["lots"][0]), ["df", "intercept", "lot", "mse", "n", "se_slope", "slope"]);
    assert_eq!(keys(&series["pooling"]), ["intercepts", "model", "slopes", "tested"]);
    assert_eq!(keys(&series["pooling"]["slopes"]), ["df1", "df2", "f", "p"]);
    assert_eq!(keys(&series["pooling"]["intercepts"]), ["df1", "df2", "f", "p", "p_full_mse"]);
    assert_eq!(
        keys(&series["shelf_life"]),
        ["binding_lot", "months", "months_floor", "per_lot", "side", "status"]
    );
    assert_eq!(keys(&series["shelf_life"]["per_lot"][0]), ["lot", "months", "status"]);
    let row = &series["trend"][0];
    assert_eq!(keys(row), ["age_months", "context", "early_warning", "lot", "lot_trend", "result", "value"]);
    assert_eq!(keys(&row["result"]), ["lower", "needs", "nu", "p", "rule", "upper", "verdict"]);
    assert_eq!(keys(&row["lot_trend"]), ["needs", "p", "rule", "verdict"]);
    assert_eq!(keys(&row["context"][0]), ["needs", "p", "rule"]);

    assert_eq!(series["direction"], "decreasing");
    assert_eq!(series["pooling"]["model"], "common_line");
    agree(series["shelf_life"]["months"].as_f64().unwrap(), 51.0899, 1e-6, "months");
    assert_eq!(series["shelf_life"]["months_floor"], 51);
    assert_eq!(series["shelf_life"]["side"], "lower");
    assert!(series["shelf_life"]["binding_lot"].is_null() && series["orientation"].is_null());
    assert_eq!(series["trend"].as_array().unwrap().len(), 15);
    assert_eq!(row["result"]["verdict"], "not_evaluable");
    assert_eq!(row["result"]["needs"], "needs a third history lot or an earlier pull of the lot");
    assert_eq!(series["trend"][1]["result"]["verdict"], "in_trend");
    assert!(row["early_warning"].is_null());
}

#[test]
fn the_text_is_a_table_with_a_plot() {
    let table = Table::new("text", &three_lots());
    let text = run(&Args { json: false, ..args(table.0.clone()) }).unwrap();
    for part in [
        "Invented suspension · Assay · 25/60",
        "Slopes: F(2, 9) = 0.372093, p = 0.6994",
        "Intercepts: F(2, 11) = 0.157518, p = 0.8562",
        "Model: common_line (tests at 0.25)",
        "Shelf life: 51 months (exactly 51.0899; lower limit)",
        "months\n",
        "Note: by ICH Q1E (2003)",
    ] {
        assert!(text.contains(part), "{part} is not in\n{text}");
    }
    assert!(text.lines().all(|line| line == line.trim_end()), "no spaces at line ends");
}

#[test]
fn an_expiry_adds_the_early_warning() {
    let table = Table::new("warning", &three_lots());
    let args = Args { expiry_months: Some(36.0), ..args(table.0.clone()) };
    let found: Value = serde_json::from_str(&run(&args).unwrap()).unwrap();
    let warning = &found["series"][0]["trend"][4]["early_warning"];
    assert_eq!(warning["state"], "none");
    assert!(warning["probability"].as_f64().unwrap() < 0.01 && warning["month"].is_null());
}

#[test]
fn replicates_are_averaged_unless_told_otherwise() {
    let mut text = String::from("lot,test,age_days,value,upper_limit,replicate\n");
    for (age, values) in
        [(0, ["1.0", "1.1"]), (91, ["1.2", "1.5"]), (183, ["1.5", "1.6"]), (274, ["1.9", "1.7"])]
    {
        for (index, value) in values.iter().enumerate() {
            text.push_str(&format!("A,x,{age},{value},5,{index}\n"));
        }
    }
    let table = Table::new("replicates", &text);
    let n = |replicates| {
        let args = Args { replicates, ..args(table.0.clone()) };
        let found: Value = serde_json::from_str(&run(&args).unwrap()).unwrap();
        let notes = found["series"][0]["notes"].to_string();
        (found["series"][0]["lots"][0]["n"].as_u64().unwrap(), notes)
    };
    let (mean, notes) = n(ReplicateChoice::Mean);
    assert!(mean == 4 && notes.contains("replicates of a pull are averaged: 8 results, 4 pulls"), "{notes}");
    let (independent, notes) = n(ReplicateChoice::Independent);
    assert!(independent == 8 && notes.contains("independent") && notes.contains("lack of fit"), "{notes}");
}

#[test]
fn one_lot_and_lots_that_cannot_be_tested() {
    let one = evaluated(
        "one",
        "lot,test,age_months,value,lower_limit\nA,x,0,100,95\nA,x,6,98.5,95\nA,x,12,97.2,95\n",
    );
    assert_eq!(one["series"][0]["pooling"]["model"], "common_line");
    assert_eq!(one["series"][0]["pooling"]["tested"], false);
    assert!(one["series"][0]["pooling"]["slopes"].is_null());
    let two = evaluated(
        "two",
        "lot,test,age_months,value,lower_limit\nA,x,0,100,95\nA,x,6,98.5,95\nB,x,0,100,95\nB,x,6,98.4,95\n",
    );
    assert_eq!(two["series"][0]["pooling"]["model"], "separate");
    assert_eq!(two["series"][0]["pooling"]["tested"], false);
    assert_eq!(two["series"][0]["shelf_life"]["status"], "not_estimable");
}

#[test]
fn a_series_with_one_age_beside_another() {
    let found = evaluated(
        "one-age",
        "lot,test,age_months,value,lower_limit\nA,x,0,100,95\nA,x,6,98,95\nA,x,9,97,95\n\
         A,pH,0,7,6\nB,pH,0,7.1,6\n",
    );
    let ph = &found["series"][1];
    assert_eq!(ph["shelf_life"]["status"], "not_estimable");
    assert!(ph["lots"][0]["slope"].is_null() && ph["lots"][0]["df"].is_null());
    assert!(ph["notes"].to_string().contains("needs 2 ages"));
}

#[test]
fn bounds_forbid_a_line_and_say_what_is_known() {
    let mut text = String::from("lot,test,age_months,value,qualifier,upper_limit,scale\n");
    for (age, value, qualifier) in
        [(0, 12, ""), (3, 18, ""), (6, 30, ""), (9, 44, "="), (12, 70, ""), (18, 100, ">")]
    {
        text.push_str(&format!("A,Inversions,{age},{value},{qualifier},60,ln\n"));
    }
    let found = evaluated("bounds", &text);
    let series = &found["series"][0];
    assert_eq!(series["shelf_life"]["status"], "not_estimable");
    assert_eq!(series["trend"][3]["result"]["verdict"], "not_evaluable");
    let notes = series["notes"].to_string();
    assert!(notes.contains("1 of 6 results are known only as bounds: no least-squares line"), "{notes}");
    assert!(notes.contains("maximum likelihood") && notes.contains("from 18.00 months on"), "{notes}");
}

#[test]
fn a_few_results_below_a_bound_are_halved_and_marked() {
    let mut text = String::from("lot,test,age_months,value,qualifier,upper_limit\n");
    for (age, value, qualifier) in [
        (0, "0.05", "<"),
        (3, "0.06", ""),
        (6, "0.07", ""),
        (9, "0.09", ""),
        (12, "0.12", ""),
        (18, "0.15", ""),
        (24, "0.18", ""),
    ] {
        text.push_str(&format!("A,Impurity,{age},{value},{qualifier},0.5\n"));
    }
    let found = evaluated("halved", &text);
    let series = &found["series"][0];
    assert_eq!(series["shelf_life"]["status"], "crosses");
    assert_eq!(series["lots"][0]["n"], 7);
    let notes = series["notes"].to_string();
    assert!(
        notes.contains("half the bound stands in") && notes.contains("slope of all lots with 0"),
        "{notes}"
    );
}

/// NIST certified slope of Norris, its digits kept through the file.
#[test]
fn norris_through_a_file() {
    let mut text = String::from("lot,test,age_months,value\n");
    for row in crate::support::rows("nist_strd/norris.csv") {
        text.push_str(&format!("A,ozone,{},{}\n", &row[1], &row[0]));
    }
    let table = Table::new("norris", &text);
    let args = Args { replicates: ReplicateChoice::Independent, ..args(table.0.clone()) };
    let found: Value = serde_json::from_str(&run(&args).unwrap()).unwrap();
    let lot = &found["series"][0]["lots"][0];
    agree(lot["slope"].as_f64().unwrap(), 1.00211681802045, 1e-12, "slope");
    agree(lot["se_slope"].as_f64().unwrap(), 0.429796848199937e-3, 1e-11, "standard error");
    agree(lot["intercept"].as_f64().unwrap(), -0.262323073774029, 1e-11, "intercept");
}

/// Adv. Pharmacol. Pharm. Sci. 2021, 6634275, table 3: nine formulations, no limits.
#[test]
fn zinc_oxide_suspensions() {
    let found: Value =
        serde_json::from_str(&run(&args(data("suspensions/zno_aloe_weloensis_sedimentation.csv"))).unwrap())
            .unwrap();
    let series = found["series"].as_array().unwrap();
    assert_eq!(series.len(), 1);
    assert_eq!(series[0]["product"], "zno_aloe_weloensis");
    assert_eq!(series[0]["pack"], "measuring cylinder (assumed)");
    assert_eq!(series[0]["lots"].as_array().unwrap().len(), 9);
    assert_eq!(series[0]["shelf_life"]["status"], "no_limit");
    // The delayed collapse of acacia 4 % between day 14 and day 21 is no part of its trend.
    let collapse = series[0]["trend"].as_array().unwrap().iter().find(|row| {
        row["lot"] == "ZnO suspension, acacia 4% w/v"
            && (row["age_months"].as_f64().unwrap() - 0.69).abs() < 0.01
    });
    assert_eq!(collapse.unwrap()["result"]["verdict"], "action");
}

/// Can. J. Hosp. Pharm. 2017;70(1):51, tables 1 and 2: mean of 3, standard deviations not used.
#[test]
fn tacrolimus_liquids() {
    let found: Value =
        serde_json::from_str(&run(&args(data("suspensions/tacrolimus_cjhp2017.csv"))).unwrap()).unwrap();
    let series = found["series"].as_array().unwrap();
    assert_eq!(series.len(), 8);
    for one in series {
        assert_eq!(one["lots"].as_array().unwrap().len(), 2);
        assert_eq!(one["lots"][0]["n"], 8);
        let rising = |lot: &Value| lot["slope"].as_f64().unwrap() / lot["se_slope"].as_f64().unwrap();
        // No arm falls significantly (the note of the data set): t above −2.45, the 5 % point of 6 degrees.
        assert!(one["lots"].as_array().unwrap().iter().all(|lot| rising(lot) > -2.447));
    }
    assert!(series[0]["notes"].to_string().contains("the file prints sd 0.004 to 0.042 and n 3"));
}

#[test]
fn the_other_two_files_are_refused() {
    let refusal = |name: &str| run(&args(data(name))).unwrap_err().to_string();
    let ages = refusal("suspensions/crosssection_caco3_acacia_and_ibuprofen_grewia.csv");
    assert!(ages.contains("line 2: time and time_unit are empty"), "{ages}");
    assert_eq!(ages.lines().count(), 1, "{ages}");
    let columns = refusal("suspensions/settling_usgs_withdrawal_times.csv");
    assert!(columns.contains("line 1: the columns are those of neither known table"), "{columns}");
}

/// Tables to mend, by their header, numbers and contradictions: name, text, what is said.
fn tables_to_mend() -> Vec<(&'static str, String, &'static str)> {
    let tidy = "lot,test,age_months,value";
    vec![
        ("unknown", format!("{tidy},colour\nA,x,0,1,red\n"), "line 1: the column colour is not known"),
        ("number", format!("{tidy}\nA,x,0,1\nA,x,3,abc\n"), "line 3: value \"abc\" is not a number"),
        ("bound", format!("{tidy}\nA,x,0,<1\n"), "line 2: value \"<1\" is not a number; write < or >"),
        ("empty", format!("{tidy}\nA,x,0,\n"), "line 2: value is empty"),
        ("negative", format!("{tidy}\nA,x,-3,1\n"), "line 2: age_months is -3; an age cannot be negative"),
        ("cells", format!("{tidy}\nA,x,0\n"), "line 2: the line has 3 cells, the header 4"),
        ("twice", format!("{tidy},test\nA,x,0,1,x\n"), "line 1: the column test stands twice"),
        (
            "ages",
            format!("{tidy},age_days\nA,x,0,1,0\n"),
            "line 1: the table has both age_months and age_days",
        ),
        (
            "units",
            format!("{tidy},unit\nA,x,0,1,cP\nA,x,3,1,Pa s\n"),
            "line 3: x is given in Pa s here and in cP on line 2",
        ),
        (
            "limits",
            format!("{tidy},lower_limit\nA,x,0,1,0.5\nA,x,3,1,0.6\n"),
            "line 3: lower_limit differs from that on line 2",
        ),
        (
            "order",
            format!("{tidy},lower_limit,upper_limit\nA,x,0,1,2,1\nA,x,3,1,2,1\n"),
            "line 2: the lower limit 2 is not below the upper limit 1",
        ),
    ]
}

/// Values and words to mend.
fn words_to_mend() -> Vec<(&'static str, String, &'static str)> {
    let tidy = "lot,test,age_months,value";
    vec![
        (
            "logit",
            format!("{tidy},scale\nA,F,0,0.9,logit\nA,F,3,1.0,logit\n"),
            "line 3: the value 1.0 of F: the logit scale needs a value between 0 and 1",
        ),
        ("ln", format!("{tidy},scale\nA,v,0,0,ln\nA,v,3,1,ln\n"), "line 2: the value 0 of v: the ln scale"),
        (
            "limit-scale",
            format!("{tidy},scale,lower_limit\nA,F,0,0.9,logit,0\nA,F,3,0.8,logit,0\n"),
            "line 2: the lower limit of F: the logit scale",
        ),
        ("one-age", format!("{tidy}\nA,x,3,1\nB,x,3,2\n"), "no series has results of one lot at two ages"),
        ("header", format!("{tidy}\n"), "the table has a header but no results"),
        (
            "direction",
            format!("{tidy},direction\nA,x,0,1,down\n"),
            "line 2: the direction \"down\" is not known",
        ),
        ("scale", format!("{tidy},scale\nA,x,0,1,log\n"), "line 2: the scale \"log\" is not known"),
        ("qualifier", format!("{tidy},qualifier\nA,x,0,1,~\n"), "line 2: the qualifier \"~\" is not known"),
        (
            "replicate",
            format!("{tidy},replicate\nA,x,0,1,1\nA,x,0,2,1\n"),
            "line 3: replicate 1 of lot A at this age stands on line 2 already",
        ),
        ("neither", "a,b\n1,2\n".into(), "line 1: the columns are those of neither known table"),
        (
            "time-unit",
            "formulation,time,time_unit,test,value\nA,1,year,x,1\n".into(),
            "line 2: the time_unit \"year\" is not known",
        ),
    ]
}

#[test]
fn what_must_be_mended_is_said_with_its_line() {
    for (name, text, sentence) in tables_to_mend().into_iter().chain(words_to_mend()) {
        let refusal = refused(name, &text);
        assert!(refusal.contains(sentence), "{name}: {refusal}");
        for word in ["invalid", "illegal", "please", "sorry", "oops"] {
            assert!(!refusal.to_lowercase().contains(word), "{refusal}");
        }
    }
    let many = refused("many", "lot,test,age_months,value\nA,x,0,a\nA,x,-1,b\nA,x,2,3\n");
    assert_eq!(many.lines().count(), 3, "all complaints of all lines at once: {many}");
}

/// The program itself: exit code 2, the sentence on standard error, nothing on standard output.
#[test]
fn a_refusal_prints_nothing_but_its_sentence() {
    let run = |text: &str, name: &str| {
        let table = Table::new(name, text);
        let program = env!("CARGO_BIN_EXE_supernate");
        std::process::Command::new(program).arg("evaluate").arg(&table.0).output().unwrap()
    };
    let refused = run("lot,test,age_months,value\nA,x,0,1\nA,x,3,abc\n", "exit-two");
    assert_eq!(refused.status.code(), Some(2));
    assert!(refused.stdout.is_empty());
    assert!(String::from_utf8(refused.stderr).unwrap().contains("line 3: value \"abc\" is not a number"));
    let good = run("lot,test,age_months,value\nA,x,0,1\nA,x,3,2\n", "exit-zero");
    assert!(good.status.success() && good.stderr.is_empty());
    assert!(String::from_utf8(good.stdout).unwrap().contains("Shelf life: none"));
}

/// Traps of printed tables: byte-order mark, semicolons with decimal commas, typographic minus, blank lines.
#[test]
fn tables_as_spreadsheets_save_them() {
    let text = "\u{feff}lot;test;age_months;value\nA;x;0;\u{2212}1,5\n;;;\nA;x;3;2,5\nA;x;6;3,5\n";
    let found = evaluated("semicolons", text);
    assert_eq!(found["series"][0]["trend"][0]["value"], -1.5);
    assert_eq!(found["series"][0]["lots"][0]["n"], 3);
}
