//! Imported files, and the records they bring. Everything is marked with the import and can rest under nothing signed.

use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Exact, Reader, new_uuid, version};
use crate::domain::age::Age;
use crate::domain::digest::sha256_hex;
use crate::domain::formulation::{FormulationContent, IntendedState};
use crate::domain::import::Counts;
use crate::domain::import::plan::{Lot, Plan, Point, Pull, method_content};
use crate::domain::version::Versioned;

/// One imported file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Import {
    pub id: i64,
    pub file_name: String,
    pub sha256: String,
    pub rows: i64,
    pub results: i64,
    pub act: i64,
    /// As stored: UTC.
    pub at: String,
    pub by: String,
}

const SELECT: &str =
    "select i.id, i.file_name, i.sha256, i.row_count, i.result_count, i.act, a.at, a.full_name
    from import i join trail_act a on a.id = i.act";

fn from_row(row: &rusqlite::Row<'_>) -> rusqlite::Result<Import> {
    Ok(Import {
        id: row.get(0)?,
        file_name: row.get(1)?,
        sha256: row.get(2)?,
        rows: row.get(3)?,
        results: row.get(4)?,
        act: row.get(5)?,
        at: row.get(6)?,
        by: row.get(7)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Import> {
    let sql = format!("{SELECT} where i.id = :id");
    reader.one("import with this number", &sql, named_params! { ":id": id }, from_row)
}

/// All imports, newest first.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<Import>> {
    reader.all(&format!("{SELECT} order by i.id desc limit 200"), [], from_row)
}

/// The import of this very file and the number and stored instant of its act, if it was imported.
pub fn before(reader: &Reader<'_>, sha256: &str) -> Answer<Option<(i64, String)>> {
    let sql = "select i.id, a.at from import i join trail_act a on a.id = i.act where i.sha256 = :sha256";
    reader.maybe(sql, named_params! { ":sha256": sha256 }, |row| Ok((row.get(0)?, row.get(1)?)))
}

/// What an import brought, counted in the records themselves.
pub fn counts(reader: &Reader<'_>, import: i64) -> Answer<Counts> {
    reader.one(
        "import",
        "select (select count(*) from result where imported = :import),
             (select count(*) from product where imported = :import),
             (select count(*) from lot where imported = :import),
             (select count(*) from study where imported = :import),
             (select count(*) from study_arm where study in (select id from study where imported = :import)),
             (select count(*) from pull where imported = :import)",
        named_params! { ":import": import },
        |row| {
            let count = |at: usize| row.get::<_, i64>(at).map(|count| count as usize);
            Ok(Counts {
                results: count(0)?,
                products: count(1)?,
                lots: count(2)?,
                studies: count(3)?,
                arms: count(4)?,
                pulls: count(5)?,
            })
        },
    )
}

/// One imported lot with its study, for lists.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ImportedLot {
    pub lot: i64,
    pub number: String,
    pub formulation: String,
    pub study: i64,
    pub study_number: String,
    pub results: i64,
}

pub fn lots(reader: &Reader<'_>, import: i64) -> Answer<Vec<ImportedLot>> {
    reader.all(
        "select l.id, l.number, f.name, s.id, s.number,
             (select count(*) from result r join sample_test t on t.id = r.sample_test
              join sample m on m.id = t.sample where m.lot = l.id)
         from lot l
         join study s on s.lot = l.id
         join formulation_version v on v.id = l.formulation_version
         join formulation f on f.id = v.formulation
         where l.imported = :import
         order by l.id",
        named_params! { ":import": import },
        |row| {
            Ok(ImportedLot {
                lot: row.get(0)?,
                number: row.get(1)?,
                formulation: row.get(2)?,
                study: row.get(3)?,
                study_number: row.get(4)?,
                results: row.get(5)?,
            })
        },
    )
}

/// What the act of importing has to list in histories.
pub struct Written {
    pub import: i64,
    pub products: Vec<i64>,
    /// Lot and study.
    pub lots: Vec<(i64, i64)>,
}

/// Writes a whole plan. The numbers of its records begin with the import's own.
pub fn insert(change: &Change<'_>, file_name: &str, sha256: &str, plan: &Plan) -> Answer<Written> {
    let import = change.insert(
        "insert into import (uuid, file_name, sha256, row_count, result_count)
         values (:uuid, :file_name, :sha256, :count, :count)",
        named_params! {
            ":uuid": new_uuid(),
            ":file_name": file_name,
            ":sha256": sha256,
            ":count": plan.counts.results as i64,
        },
    )?;
    let mut places = Places { import, conditions: Vec::new(), methods: Vec::new() };
    for condition in &plan.conditions {
        places.conditions.push((condition.clone(), place_condition(change, condition)?));
    }
    for (test, unit, decimals) in &plan.tests {
        places.methods.push((
            test.clone(),
            unit.clone(),
            insert_method(change, import, test, unit, *decimals)?,
        ));
    }
    let mut written = Written { import, products: Vec::new(), lots: Vec::new() };
    for (name, lots) in &plan.products {
        let (product, presentation) = insert_product(change, import, written.products.len() + 1, name)?;
        written.products.push(product);
        for lot in lots {
            let number = written.lots.len() + 1;
            written.lots.push(insert_lot(change, &places, number, product, presentation, lot)?);
        }
    }
    Ok(written)
}

/// Where the file's own words went.
struct Places {
    import: i64,
    conditions: Vec<(String, i64)>,
    methods: Vec<(String, String, i64)>,
}

impl Places {
    fn condition(&self, name: &str) -> Option<i64> {
        self.conditions.iter().find(|(known, _)| known == name).map(|(_, id)| *id)
    }

    fn method_version(&self, point: &Point) -> Option<i64> {
        let found = self.methods.iter().find(|(test, unit, _)| *test == point.test && *unit == point.unit);
        found.map(|(_, _, id)| *id)
    }
}

/// A condition as the file writes it, outside the catalogue; the same words are the same condition.
fn place_condition(change: &Change<'_>, name: &str) -> Answer<i64> {
    let code = format!("{name} (imported)");
    let known = change.maybe(
        "select id from condition where code = :code and source = 'imported'",
        named_params! { ":code": code },
        |row| row.get(0),
    )?;
    match known {
        Some(id) => Ok(id),
        None => change.insert(
            "insert into condition (code, name, humidity_rule, use, source, in_catalogue)
             values (:code, :name, 'none', 'as imported', 'imported', 0)",
            named_params! { ":code": code, ":name": name },
        ),
    }
}

fn insert_method(change: &Change<'_>, import: i64, test: &str, unit: &str, decimals: u32) -> Answer<i64> {
    let taken = change.exists(
        "select 1 from method where code = :code",
        named_params! { ":code": format!("I{import}-{test}") },
    )?;
    let code = if taken { format!("I{import}-{test} {unit}") } else { format!("I{import}-{test}") };
    let method = change.insert(
        "insert into method (uuid, code, name, kind) values (:uuid, :code, :name, 'numeric')",
        named_params! { ":uuid": new_uuid(), ":code": code, ":name": test },
    )?;
    let content = serde_json::to_string(&method_content(unit, decimals))?;
    version::insert(change, Versioned::Method, method, "imported with its results", &content, Some(import))
}

fn insert_product(change: &Change<'_>, import: i64, number: usize, name: &str) -> Answer<(i64, i64)> {
    let code = format!("I{import}-P{number}");
    let product = change.insert(
        "insert into product (uuid, code, name, dosage_form, imported)
         values (:uuid, :code, :name, 'not stated', :import)",
        named_params! { ":uuid": new_uuid(), ":code": code, ":name": name, ":import": import },
    )?;
    let presentation = change.insert(
        "insert into presentation (uuid, product, code, strength, pack, container_word, market, permeability)
         values (:uuid, :product, :code, 'strength not stated', 'pack as the file names it', 'container',
             'not stated', 'not stated')",
        named_params! { ":uuid": new_uuid(), ":product": product, ":code": code },
    )?;
    Ok((product, presentation))
}

fn insert_formulation(
    change: &Change<'_>,
    import: i64,
    number: usize,
    product: i64,
    name: &str,
) -> Answer<(i64, String)> {
    let formulation = change.insert(
        "insert into formulation (uuid, product, code, name) values (:uuid, :product, :code, :name)",
        named_params! {
            ":uuid": new_uuid(),
            ":product": product,
            ":code": format!("I{import}-F{number:02}"),
            ":name": name,
        },
    )?;
    let content = serde_json::to_string(&FormulationContent {
        dosage_form: "not stated".to_string(),
        intended_state: IntendedState::NotStated,
        quantity_basis: "not stated".to_string(),
        ..FormulationContent::default()
    })?;
    let digest = sha256_hex(content.as_bytes());
    let reason = "imported with its results; its composition was not in the file";
    let version =
        version::insert(change, Versioned::Formulation, formulation, reason, &content, Some(import))?;
    Ok((version, digest))
}

fn insert_lot(
    change: &Change<'_>,
    places: &Places,
    number: usize,
    product: i64,
    presentation: i64,
    lot: &Lot,
) -> Answer<(i64, i64)> {
    let import = places.import;
    let (version, digest) = insert_formulation(change, import, number, product, &lot.formulation)?;
    let mut containers: Vec<&str> = lot.arms.iter().map(|(_, container, _)| container.as_str()).collect();
    containers.sort_unstable();
    containers.dedup();
    let id = change.insert(
        "insert into lot (uuid, number, presentation, formulation_version, formulation_digest, scale,
             container_closure, imported)
         values (:uuid, :number, :presentation, :version, :digest, 'not stated', :containers, :import)",
        named_params! {
            ":uuid": new_uuid(),
            ":number": format!("I{import}-L{number:02}"),
            ":presentation": presentation,
            ":version": version,
            ":digest": digest,
            ":containers": containers.join("; "),
            ":import": import,
        },
    )?;
    let study_number = format!("I{import}-S{number:02}");
    let study = change.insert(
        "insert into study (uuid, number, lot, programme, rule_set, imported)
         values (:uuid, :number, :lot, 'imported', 'none: imported', :import)",
        named_params! { ":uuid": new_uuid(), ":number": study_number, ":lot": id, ":import": import },
    )?;
    let mut pulls = 0;
    for (at, (condition, container, planned)) in lot.arms.iter().enumerate() {
        let arm = insert_arm(change, study, at + 1, places.condition(condition), container)?;
        for (at, pull) in planned.iter().enumerate() {
            pulls += 1;
            let sample = format!("{study_number}-P{pulls:02}");
            let is_last = at + 1 == planned.len();
            insert_pull(change, places, id, arm, &sample, pull, is_last)?;
        }
    }
    Ok((id, study))
}

fn insert_arm(
    change: &Change<'_>,
    study: i64,
    position: usize,
    condition: Option<i64>,
    container: &str,
) -> Answer<i64> {
    change.insert(
        "insert into study_arm (study, position, condition, orientation, limits_do, is_labelled_condition,
             is_contingent, container_text)
         values (:study, :position, :condition, 'not stated', 'information', 0, 0, :container)",
        named_params! {
            ":study": study,
            ":position": position as i64,
            ":condition": condition,
            ":container": container,
        },
    )
}

fn insert_pull(
    change: &Change<'_>,
    places: &Places,
    lot: i64,
    arm: i64,
    number: &str,
    pull: &Pull,
    is_last: bool,
) -> Answer<()> {
    let (months, days) = match pull.age {
        Age::Months(months) => (Some(months), None),
        Age::Days(days) => (None, Some(days)),
    };
    let id = change.insert(
        "insert into pull (uuid, study_arm, age_months, age_days, age_text, containers_needed, is_last, imported)
         values (:uuid, :arm, :months, :days, :text, 0, :is_last, :import)",
        named_params! {
            ":uuid": new_uuid(),
            ":arm": arm,
            ":months": months,
            ":days": days,
            ":text": pull.age.words(),
            ":is_last": is_last,
            ":import": places.import,
        },
    )?;
    let sample = change.insert(
        "insert into sample (uuid, number, purpose, lot, pull, limit_set)
         values (:uuid, :number, 'stability pull', :lot, :pull, 'none')",
        named_params! { ":uuid": new_uuid(), ":number": number, ":lot": lot, ":pull": id },
    )?;
    for (position, point) in pull.points.iter().enumerate() {
        insert_result(change, places, sample, position + 1, point)?;
    }
    Ok(())
}

fn insert_result(
    change: &Change<'_>,
    places: &Places,
    sample: i64,
    position: usize,
    point: &Point,
) -> Answer<()> {
    let test = change.insert(
        "insert into sample_test (sample, position, test, title, method_version)
         values (:sample, :position, :test, :test, :method_version)",
        named_params! {
            ":sample": sample,
            ":position": position as i64,
            ":test": point.test,
            ":method_version": places.method_version(point),
        },
    )?;
    let detail = serde_json::json!({ "flag": point.flag, "state": "imported, not observed here" });
    change.insert(
        "insert into result (sample_test, version, component, value, qualifier, shown, unit, verdict, detail, sd, n,
             imported, import_line)
         values (:test, 1, '', :value, :qualifier, :shown, :unit, 'not judged', :detail, :sd, :n, :import, :line)",
        named_params! {
            ":test": test,
            ":value": Exact(point.value),
            ":qualifier": point.qualifier.code(),
            ":shown": point.shown,
            ":unit": point.unit,
            ":detail": detail.to_string(),
            ":sd": point.sd.map(Exact),
            ":n": point.n,
            ":import": places.import,
            ":line": point.line as i64,
        },
    )?;
    Ok(())
}
