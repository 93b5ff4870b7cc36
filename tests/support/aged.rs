//! Lots that grow old together: studies started on one day, their pulls read at their ages.

use supernate::store;

use super::samples::Bench;
use super::{Lab, PASSWORD, world};

/// The days of the usual ages after the first of December 2026.
pub const DAYS: [(&str, &str); 8] = [
    ("Initial", "2026-12-01T09:00:00Z"),
    ("3 months", "2027-03-01T09:00:00Z"),
    ("6 months", "2027-06-01T09:00:00Z"),
    ("9 months", "2027-09-01T09:00:00Z"),
    ("12 months", "2027-12-01T09:00:00Z"),
    ("18 months", "2028-06-01T09:00:00Z"),
    ("24 months", "2028-12-01T09:00:00Z"),
    ("36 months", "2029-12-01T09:00:00Z"),
];

/// One lot's assay at each of its first ages, at 25/60 upright.
pub type Series<'a> = (&'a str, &'a [&'a str]);

/// A laboratory whose lots are on study.
pub struct Aged<'a> {
    pub bench: Bench<'a>,
    pub studies: Vec<(String, i64)>,
}

impl<'a> Aged<'a> {
    /// Lots on study from the first of December 2026, nothing pulled yet.
    pub fn new(lab: &'a Lab, lots: &[&str]) -> Aged<'a> {
        let bench = Bench::new(lab);
        let on_study = |number: &&str| {
            let lot = bench.lot(number);
            (number.to_string(), world::study_of(lab, lot, &[]))
        };
        let studies = lots.iter().map(on_study).collect();
        Aged { bench, studies }
    }

    /// Lots with their assay read at every age given, at 25/60 upright.
    pub fn with_assay(lab: &'a Lab, series: &[Series<'_>]) -> Aged<'a> {
        let numbers: Vec<&str> = series.iter().map(|(number, _)| *number).collect();
        let aged = Aged::new(lab, &numbers);
        let most = series.iter().map(|(_, values)| values.len()).max().unwrap_or_default();
        for (place, (age, day)) in DAYS.iter().enumerate().take(most) {
            lab.clock(day);
            for (number, values) in series {
                if let Some(value) = values.get(place) {
                    aged.reads(number, 1, age, value);
                }
            }
        }
        aged
    }

    pub fn study(&self, number: &str) -> i64 {
        self.studies.iter().find(|(known, _)| known == number).unwrap().1
    }

    /// The arm of a lot by its place.
    pub fn arm(&self, number: &str, position: i64) -> i64 {
        world::pull(self.bench.lab, self.study(number), position, "Initial").study_arm
    }

    /// Takes a pull today and reads its assay (both readings alike) and density, checked. Answers with the sample.
    pub fn reads(&self, number: &str, position: i64, age: &str, assay: &str) -> i64 {
        let lab = self.bench.lab;
        let sample = world::take(lab, &world::pull(lab, self.study(number), position, age));
        self.bench.completes("rafe.tolland", sample, "assay", &[assay, assay]);
        self.bench.completes("rafe.tolland", sample, "density", &["1.11", "1.11"]);
        self.bench.checks("ilse.brandt", sample, "assay");
        self.bench.checks("ilse.brandt", sample, "density");
        sample
    }

    /// QA answers every exception of what waits, agrees and signs, one by one where there are exceptions.
    pub fn signs_all(&self) {
        const WHY: &str = "looked at against the raw readings, no cause to doubt it";
        let (lab, qa) = (self.bench.lab, self.bench.lab.reviewer());
        let open = || lab.app.db.read(store::review::facts::open_ids).unwrap();
        let waiting = open();
        for sample in &waiting {
            let (page, answers) = (format!("/review/{sample}"), format!("/review/{sample}/answers"));
            for _ in 0..6 {
                let seen = qa.get(&page);
                if !seen.html().contains("name=\"because.") {
                    break;
                }
                let form = seen.form(&answers);
                let Some((field, _)) = form.iter().find(|(name, _)| name.starts_with("because.")) else {
                    break;
                };
                qa.submits(&page, &answers, &[(field, WHY)]);
            }
            qa.does(&page, &format!("{page}/agree"), &[]);
        }
        let fields = [("statement", WHY), ("user_name", "ada.whitlock"), ("password", PASSWORD)];
        for _ in 0..=waiting.len() {
            if open().is_empty() {
                return;
            }
            let listed = qa.get("/review/sign").html().contains("name=\"statement\"");
            let fields = if listed { &fields[..] } else { &fields[1..] };
            let seen = qa.submits("/review/sign", "/review/sign", fields);
            assert_eq!(seen.status, 303, "{}", seen.text());
        }
        panic!("not all signed: {:?}", open());
    }
}
