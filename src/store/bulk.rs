//! Invented records in bulk, through triggers and seals, for measurements alone: one act writes one lot's whole life.

use chrono::NaiveDate;
use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Day, Exact, Reader, condition, new_uuid, review, version};
use crate::domain::age::Age;
use crate::domain::digest::sha256_hex;
use crate::domain::formulation::FormulationContent;
use crate::domain::import::plan::method_content;
use crate::domain::moment::plus_days;
use crate::domain::specification::SpecificationContent;
use crate::domain::subject::{Kind, Subject};
use crate::domain::version::Versioned;

/// Eight tests: code, title, unit, and where their values lie: a middle and a step, in thousandths.
const TESTS: [(&str, &str, &str, i64, i64); 8] = [
    ("ph", "pH", "pH units", 6_800, 10),
    ("viscosity", "Viscosity", "mPa s", 1_200_000, 900),
    ("assay", "Assay", "% of label", 99_800, 60),
    ("preservative", "Preservative content", "% of label", 99_000, 90),
    ("sedimentation", "Sedimentation ratio", "", 960, 3),
    ("redispersibility", "Inversions to uniform", "inversions", 12_000, 1_000),
    ("degradation", "Degradation product", "%", 80, 2),
    ("weight-loss", "Weight loss", "%", 110, 4),
];

/// Ages in months and catalogue codes of the three arms.
const AGES: [u32; 8] = [0, 3, 6, 9, 12, 18, 24, 36];
const CONDITIONS: [&str; 3] = ["25/60", "30/65", "40/75"];

/// What all lots of the set share.
#[derive(Clone, Debug)]
pub struct Ground {
    presentation: i64,
    formulation_version: i64,
    formulation_digest: String,
    specification_version: i64,
    method_versions: Vec<i64>,
    conditions: Vec<i64>,
}

/// What was written for one lot.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Written {
    pub lot: i64,
    pub pulls: u64,
    pub readings: u64,
    pub results: u64,
}

/// One product with its definitions. The catalogue of conditions has to be there.
pub fn ground(change: &Change<'_>) -> Answer<Ground> {
    let product = change.insert(
        "insert into product (uuid, code, name, dosage_form)
         values (:uuid, 'BULK', 'Invented suspension', 'oral suspension')",
        named_params! { ":uuid": new_uuid() },
    )?;
    let presentation = change.insert(
        "insert into presentation (uuid, product, code, strength, pack, container_word, market, permeability)
         values (:uuid, :product, 'BULK-100', '50 mg/mL', '100 mL bottle', 'bottle', 'United Kingdom', 'impermeable')",
        named_params! { ":uuid": new_uuid(), ":product": product },
    )?;
    let formulation = change.insert(
        "insert into formulation (uuid, product, code, name) values (:uuid, :product, 'BULK-F', 'Invented')",
        named_params! { ":uuid": new_uuid(), ":product": product },
    )?;
    let content = serde_json::to_string(&FormulationContent::default())?;
    let formulation_version =
        version::insert(change, Versioned::Formulation, formulation, "for measurements", &content, None)?;
    let specification = change.insert(
        "insert into specification (uuid, presentation, code) values (:uuid, :presentation, 'BULK-S')",
        named_params! { ":uuid": new_uuid(), ":presentation": presentation },
    )?;
    let limits = serde_json::to_string(&SpecificationContent::default())?;
    let specification_version =
        version::insert(change, Versioned::Specification, specification, "for measurements", &limits, None)?;
    let mut method_versions = Vec::new();
    for (code, title, unit, _, _) in TESTS {
        let method = change.insert(
            "insert into method (uuid, code, name, kind) values (:uuid, :code, :name, 'numeric')",
            named_params! { ":uuid": new_uuid(), ":code": format!("BULK-{code}"), ":name": title },
        )?;
        let content = serde_json::to_string(&method_content(unit, 3))?;
        method_versions.push(version::insert(
            change,
            Versioned::Method,
            method,
            "for measurements",
            &content,
            None,
        )?);
    }
    let mut conditions = Vec::new();
    for code in CONDITIONS {
        let found = condition::by_code(change, code)?;
        let missing = || crate::domain::failure::Failure::missing(format!("condition {code}"));
        conditions.push(found.ok_or_else(missing)?.id);
    }
    let formulation_digest = sha256_hex(content.as_bytes());
    Ok(Ground {
        presentation,
        formulation_version,
        formulation_digest,
        specification_version,
        method_versions,
        conditions,
    })
}

/// One lot that began on a day, with its study. What was due before `today` was pulled, read and judged; the rest is
/// planned.
pub fn lot(
    change: &Change<'_>,
    ground: &Ground,
    number: u64,
    started_on: NaiveDate,
    today: NaiveDate,
) -> Answer<Written> {
    let lot = change.insert(
        "insert into lot (uuid, number, presentation, formulation_version, formulation_digest, made_on, scale,
             container_closure)
         values (:uuid, :number, :presentation, :version, :digest, :made_on, 'production', 'amber glass, 100 mL')",
        named_params! {
            ":uuid": new_uuid(),
            ":number": format!("BK-{number:06}"),
            ":presentation": ground.presentation,
            ":version": ground.formulation_version,
            ":digest": ground.formulation_digest,
            ":made_on": Day(started_on),
        },
    )?;
    let study_number = format!("BS-{number:06}");
    let study = change.insert(
        "insert into study (uuid, number, lot, specification_version, programme, started_on, rule_set)
         values (:uuid, :number, :lot, :specification, 'ongoing', :started_on, 'ICH Q1A(R2)')",
        named_params! {
            ":uuid": new_uuid(),
            ":number": study_number,
            ":lot": lot,
            ":specification": ground.specification_version,
            ":started_on": Day(started_on),
        },
    )?;
    change.concerns(Kind::Lot, lot)?;
    change.concerns(Kind::Study, study)?;
    let mut written = Written { lot, ..Written::default() };
    for (position, condition) in ground.conditions.iter().enumerate() {
        let arm = change.insert(
            "insert into study_arm (study, position, condition, orientation, limits_do, is_labelled_condition,
                 is_contingent)
             values (:study, :position, :condition, 'inverted', 'OOS', :is_labelled, 0)",
            named_params! {
                ":study": study,
                ":position": position as i64 + 1,
                ":condition": condition,
                ":is_labelled": position == 0,
            },
        )?;
        for months in AGES {
            written.pulls += 1;
            let name = format!("{study_number}-P{:02}", written.pulls);
            let (sample, due_on) = pull(change, ground, lot, arm, &name, months, started_on)?;
            if due_on < today {
                observed(change, sample, months, due_on, number, &mut written)?;
            }
        }
    }
    Ok(written)
}

/// A planned pull with its sample and tests.
fn pull(
    change: &Change<'_>,
    ground: &Ground,
    lot: i64,
    arm: i64,
    name: &str,
    months: u32,
    started_on: NaiveDate,
) -> Answer<(i64, NaiveDate)> {
    let due_on = Age::Months(months).due_on(started_on);
    let pull = change.insert(
        "insert into pull (uuid, study_arm, age_months, age_text, due_on, earliest_on, latest_on, containers_needed,
             is_last)
         values (:uuid, :arm, :months, :text, :due, :due, :latest, 2, :is_last)",
        named_params! {
            ":uuid": new_uuid(),
            ":arm": arm,
            ":months": months,
            ":text": Age::Months(months).words(),
            ":due": Day(due_on),
            ":latest": Day(plus_days(due_on, 7)),
            ":is_last": months == 36,
        },
    )?;
    let sample = change.insert(
        "insert into sample (uuid, number, purpose, lot, pull, specification_version, limit_set)
         values (:uuid, :number, 'stability pull', :lot, :pull, :specification, 'shelf-life')",
        named_params! {
            ":uuid": new_uuid(),
            ":number": name,
            ":lot": lot,
            ":pull": pull,
            ":specification": ground.specification_version,
        },
    )?;
    for (at, (code, title, _, _, _)) in TESTS.iter().enumerate() {
        change.insert(
            "insert into sample_test (sample, position, test, title, method_version)
             values (:sample, :position, :test, :title, :method_version)",
            named_params! {
                ":sample": sample,
                ":position": at as i64 + 1,
                ":test": code,
                ":title": title,
                ":method_version": ground.method_versions.get(at),
            },
        )?;
    }
    Ok((sample, due_on))
}

/// Two readings and a result for each test.
fn observed(
    change: &Change<'_>,
    sample: i64,
    months: u32,
    due_on: NaiveDate,
    number: u64,
    written: &mut Written,
) -> Answer<()> {
    change.execute(
        "insert into pull_event (pull, kind, happened_on)
         select pull, 'pulled', :on from sample where id = :sample",
        named_params! { ":sample": sample, ":on": Day(due_on) },
    )?;
    let tests = change.all(
        "select id from sample_test where sample = :sample order by position",
        named_params! { ":sample": sample },
        |row| row.get::<_, i64>(0),
    )?;
    for (at, test) in tests.into_iter().enumerate() {
        let (_, _, unit, middle, step) = TESTS[at % TESTS.len()];
        let noise = (number * 7 + u64::from(months) * 3 + at as u64 * 5) % 9;
        let thousandths = middle - step * i64::from(months) + step * noise as i64;
        for replicate in 1..=2 {
            reading(change, test, replicate, thousandths + replicate)?;
            written.readings += 1;
        }
        let value = rust_decimal::Decimal::new(thousandths * 10 + 15, 4);
        change.insert(
            "insert into result (sample_test, version, component, value, qualifier, shown, unit, verdict, detail)
             values (:test, 1, '', :value, '=', :shown, :unit, 'conforms', '{}')",
            named_params! {
                ":test": test,
                ":value": Exact(value),
                ":shown": value.round_dp(3).to_string(),
                ":unit": unit,
            },
        )?;
        written.results += 1;
    }
    Ok(())
}

fn reading(change: &Change<'_>, test: i64, replicate: i64, thousandths: i64) -> Answer<()> {
    let value = rust_decimal::Decimal::new(thousandths, 3);
    change.insert(
        "insert into reading (sample_test, replicate, field, typed, value, qualifier)
         values (:test, :replicate, 'value', :typed, :value, '=')",
        named_params! {
            ":test": test,
            ":replicate": replicate,
            ":typed": value.to_string(),
            ":value": Exact(value),
        },
    )?;
    Ok(())
}

/// Signs what was observed of a lot, in an act of its own, over the same text as any review signature.
pub fn sign(change: &Change<'_>, lot: i64, (account, name): (i64, &str)) -> Answer<()> {
    let samples = change.all(
        "select s.id from sample s join pull_event e on e.pull = s.pull where s.lot = :lot order by s.id",
        named_params! { ":lot": lot },
        |row| row.get::<_, i64>(0),
    )?;
    for sample in samples {
        let digest = sha256_hex(review::canonical(change, sample, Some(change.act()))?.as_bytes());
        let subject = Subject::new(Kind::Sample, sample);
        change.insert(
            "insert into signature (kind, subject, meaning, account, signer_name, digest)
             values (:kind, :subject, 'review', :account, :name, :digest)",
            named_params! {
                ":kind": subject.kind.code(),
                ":subject": subject.id,
                ":account": account,
                ":name": name,
                ":digest": digest,
            },
        )?;
        change.concerns(Kind::Sample, sample)?;
    }
    Ok(())
}

/// A test that nobody has read yet, to write measured entries into.
pub fn first_open_test(reader: &Reader<'_>) -> Answer<i64> {
    reader.one(
        "test without readings",
        "select t.id from sample_test t
         where not exists (select 1 from reading r where r.sample_test = t.id)
         order by t.id
         limit 1",
        [],
        |row| row.get(0),
    )
}

/// Three readings of one test, as one entry at the bench writes them.
pub fn three_readings(change: &Change<'_>, test: i64, first_replicate: i64) -> Answer<()> {
    for replicate in first_replicate..first_replicate + 3 {
        reading(change, test, replicate, 6_800 + replicate % 50)?;
    }
    Ok(())
}
