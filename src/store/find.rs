//! Finding records by number, code or name. Separators and capitals do not matter.

use rusqlite::functions::FunctionFlags;
use rusqlite::{Connection, Row, named_params};

use super::{Answer, Reader};
use crate::domain::find::folded;

/// What a found record is; decides its page and its place in the results.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Found {
    Lot,
    Study,
    Sample,
    Container,
    Product,
    Presentation,
    Formulation,
    Material,
    Method,
    Specification,
    Protocol,
    Instrument,
    MaterialLot,
    Equipment,
    Chamber,
    Condition,
    Customer,
}

/// One found record.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Hit {
    pub id: i64,
    /// Number, code or label.
    pub number: String,
    /// Its name, or what it belongs to.
    pub about: String,
    /// The record to open where the hit has no page of its own: a container's study.
    pub owner: Option<i64>,
}

/// Where a kind is looked for: table with its joins, number, words about it, owner.
struct Place {
    found: Found,
    from: &'static str,
    number: &'static str,
    about: &'static str,
    owner: &'static str,
}

const fn named(found: Found, from: &'static str, about: &'static str) -> Place {
    Place { found, from, number: "t.code", about, owner: "null" }
}

const PLACES: [Place; 17] = [
    Place {
        found: Found::Lot,
        from: "lot t join presentation r on r.id = t.presentation join product p on p.id = r.product",
        number: "t.number",
        about: "p.name || ', ' || r.pack",
        owner: "null",
    },
    Place {
        found: Found::Study,
        from: "study t join lot l on l.id = t.lot",
        number: "t.number",
        about: "'lot ' || l.number || ', ' || t.programme",
        owner: "null",
    },
    Place {
        found: Found::Sample,
        from: "sample t join lot l on l.id = t.lot",
        number: "t.number",
        about: "'lot ' || l.number || ', ' || t.purpose",
        owner: "null",
    },
    Place {
        found: Found::Container,
        from: "container t join study_arm a on a.id = t.study_arm join study s on s.id = a.study",
        number: "t.label",
        about: "'study ' || s.number || ', for ' || t.purpose",
        owner: "s.id",
    },
    named(Found::Product, "product t", "t.name"),
    named(
        Found::Presentation,
        "presentation t join product p on p.id = t.product",
        "p.name || ', ' || t.strength || ', ' || t.pack",
    ),
    named(Found::Formulation, "formulation t", "t.name"),
    named(Found::Material, "material t", "t.name"),
    named(Found::Method, "method t", "t.name"),
    named(Found::Specification, "specification t join presentation p on p.id = t.presentation", "p.code"),
    named(Found::Protocol, "protocol t", "t.title"),
    named(Found::Instrument, "instrument t", "t.name"),
    Place {
        found: Found::MaterialLot,
        from: "material_lot t join material m on m.id = t.material",
        number: "t.number",
        about: "m.name || ', ' || t.supplier || ' ' || t.supplier_lot",
        owner: "null",
    },
    named(Found::Equipment, "equipment t", "t.name"),
    named(Found::Chamber, "chamber t", "t.name"),
    named(Found::Condition, "condition t", "t.name"),
    named(Found::Customer, "customer t", "t.name"),
];

fn hit(row: &Row<'_>) -> rusqlite::Result<Hit> {
    Ok(Hit { id: row.get(0)?, number: row.get(1)?, about: row.get(2)?, owner: row.get(3)? })
}

/// Records whose number, code or label is this text, capitals aside. One each: it can be opened at once.
pub fn exact(reader: &Reader<'_>, typed: &str) -> Answer<Vec<(Found, Hit)>> {
    let mut found = Vec::new();
    for place in &PLACES {
        let Place { from, number, about, owner, .. } = place;
        let sql =
            format!("select t.id, {number}, {about}, {owner} from {from} where {number} = :typed limit 2");
        let hits = reader.all(&sql, named_params! { ":typed": typed.trim() }, hit)?;
        found.extend(hits.into_iter().map(|hit| (place.found, hit)));
    }
    Ok(found)
}

/// Records whose number or words hold this text, of each kind at most `limit` and one more. Nothing that is
/// typed is a wildcard. Samples and containers, of which there are many, are found by their numbers alone.
pub fn holding(reader: &Reader<'_>, typed: &str, limit: usize) -> Answer<Vec<(Found, Vec<Hit>)>> {
    let typed = folded(typed);
    if typed.is_empty() {
        return Ok(Vec::new());
    }
    let mut found = Vec::new();
    for place in &PLACES {
        let Place { from, number, about, owner, .. } = place;
        let is_worded = !matches!(place.found, Found::Sample | Found::Container);
        let in_words =
            if is_worded { format!("or instr(folded({about}), :typed) > 0") } else { String::new() };
        let sql = format!(
            "select t.id, {number}, {about}, {owner}
             from {from}
             where instr(folded({number}), :typed) > 0 {in_words}
             order by instr(folded({number}), :typed) > 0 desc, t.id desc
             limit :limit"
        );
        let hits = reader.all(&sql, named_params! { ":typed": typed, ":limit": limit as i64 + 1 }, hit)?;
        if !hits.is_empty() {
            found.push((place.found, hits));
        }
    }
    Ok(found)
}

/// Makes [`folded`] a function of SQL, so that both sides of a comparison are folded alike.
pub(in crate::store) fn register_function(connection: &Connection) -> Answer<()> {
    let pure =
        FunctionFlags::SQLITE_UTF8 | FunctionFlags::SQLITE_INNOCUOUS | FunctionFlags::SQLITE_DETERMINISTIC;
    connection.create_scalar_function("folded", 1, pure, |context| {
        Ok(folded(context.get_raw(0).as_str().unwrap_or_default()))
    })?;
    Ok(())
}
