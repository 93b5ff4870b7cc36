//! Lots: what was made.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Exact, Reader, new_uuid};
use crate::domain::lot::{LotState, NewDistribution, NewLot};

/// A lot with what a page needs to name it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Lot {
    pub id: i64,
    pub number: String,
    pub presentation: i64,
    pub presentation_code: String,
    pub presentation_words: String,
    pub container_word: String,
    pub fill_ml: Option<String>,
    pub market: String,
    pub product: i64,
    pub product_code: String,
    pub product_name: String,
    pub formulation: i64,
    pub formulation_code: String,
    pub formulation_version: i64,
    pub formulation_number: i64,
    pub formulation_digest: String,
    /// Of the formulation version's content as it is now.
    pub formulation_content: String,
    pub made_on: Option<NaiveDate>,
    pub size: Option<String>,
    pub size_unit: Option<String>,
    pub scale: String,
    pub container_closure: String,
    pub bulk_lot: Option<i64>,
    pub bulk_number: Option<String>,
    pub imported: Option<i64>,
    /// The newest decision and its expiry.
    pub decision: Option<String>,
    pub expires_on: Option<NaiveDate>,
    pub has_study: bool,
    /// Its record is open: it is still being made.
    pub is_in_making: bool,
    pub act: i64,
}

impl Lot {
    pub fn state(&self) -> LotState {
        match LotState::of(self.decision.as_deref(), self.has_study, self.imported.is_some()) {
            LotState::Made | LotState::OnStudy if self.is_in_making => LotState::InMaking,
            state => state,
        }
    }
}

const SELECT: &str = "select l.id, l.number, p.id, p.code, p.strength || ', ' || p.pack, p.container_word,
        p.fill_ml, p.market, d.id, d.code, d.name, f.id, f.code, v.id, v.number, l.formulation_digest, v.content,
        l.made_on, l.size, l.size_unit, l.scale, l.container_closure, l.bulk_lot,
        (select number from lot where id = l.bulk_lot), l.imported,
        (select decision from lot_decision where lot = l.id order by id desc limit 1),
        (select expires_on from lot_decision where lot = l.id order by id desc limit 1),
        exists (select 1 from study where lot = l.id),
        exists (select 1 from batch_record r join open_batch o on o.record = r.id where r.lot = l.id), l.act
    from lot l
    join presentation p on p.id = l.presentation
    join product d on d.id = p.product
    join formulation_version v on v.id = l.formulation_version
    join formulation f on f.id = v.formulation";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Lot> {
    let day = |found: Option<Day>| found.map(|day| day.0);
    Ok(Lot {
        id: row.get(0)?,
        number: row.get(1)?,
        presentation: row.get(2)?,
        presentation_code: row.get(3)?,
        presentation_words: row.get(4)?,
        container_word: row.get(5)?,
        fill_ml: row.get(6)?,
        market: row.get(7)?,
        product: row.get(8)?,
        product_code: row.get(9)?,
        product_name: row.get(10)?,
        formulation: row.get(11)?,
        formulation_code: row.get(12)?,
        formulation_version: row.get(13)?,
        formulation_number: row.get(14)?,
        formulation_digest: row.get(15)?,
        formulation_content: row.get(16)?,
        made_on: day(row.get(17)?),
        size: row.get(18)?,
        size_unit: row.get(19)?,
        scale: row.get(20)?,
        container_closure: row.get(21)?,
        bulk_lot: row.get(22)?,
        bulk_number: row.get(23)?,
        imported: row.get(24)?,
        decision: row.get(25)?,
        expires_on: day(row.get(26)?),
        has_study: row.get(27)?,
        is_in_making: row.get(28)?,
        act: row.get(29)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Lot> {
    let sql = format!("{SELECT} where l.id = :id");
    reader.one("lot with this number", &sql, named_params! { ":id": id }, from_row)
}

pub fn by_number(reader: &Reader<'_>, number: &str) -> Answer<Option<Lot>> {
    let sql = format!("{SELECT} where l.number = :number");
    reader.maybe(&sql, named_params! { ":number": number }, from_row)
}

/// Lots newest first, those recorded before `before`, at most `limit`: paging by key.
pub fn before(reader: &Reader<'_>, before: Option<i64>, limit: i64) -> Answer<Vec<Lot>> {
    let sql = format!("{SELECT} where l.id < :before order by l.id desc limit :limit");
    reader.all(&sql, named_params! { ":before": before.unwrap_or(i64::MAX), ":limit": limit }, from_row)
}

/// The lots filled from a bulk lot.
pub fn packed_from(reader: &Reader<'_>, bulk: i64) -> Answer<Vec<(i64, String)>> {
    reader.all(
        "select id, number from lot where bulk_lot = :bulk order by id",
        named_params! { ":bulk": bulk },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}

/// A presentation as a choice, with its product.
pub fn presentations(reader: &Reader<'_>) -> Answer<Vec<(i64, String)>> {
    reader.all(
        "select p.id, p.code || ': ' || d.name || ', ' || p.strength || ', ' || p.pack
         from presentation p
         join product d on d.id = p.product
         where d.imported is null
         order by p.code",
        [],
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}

/// The product of a presentation.
pub fn product_of_presentation(reader: &Reader<'_>, presentation: i64) -> Answer<i64> {
    reader.one(
        "presentation with this number",
        "select product from presentation where id = :id",
        named_params! { ":id": presentation },
        |row| row.get(0),
    )
}

/// The product a formulation belongs to.
pub fn product_of_formulation(reader: &Reader<'_>, formulation: i64) -> Answer<i64> {
    reader.one(
        "formulation with this number",
        "select product from formulation where id = :id",
        named_params! { ":id": formulation },
        |row| row.get(0),
    )
}

/// The approved formulation versions as choices, newest of each formulation first.
pub fn approved_formulations(reader: &Reader<'_>) -> Answer<Vec<(i64, String)>> {
    reader.all(
        "select v.id, f.code || ' version ' || v.number || ': ' || d.name
         from formulation_version v
         join formulation f on f.id = v.formulation
         join product d on d.id = f.product
         where v.imported is null and exists (
             select 1 from signature
             where kind = 'formulation_version' and subject = v.id and meaning = 'approval')
         order by f.code, v.number desc",
        [],
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}

pub fn insert(change: &Change<'_>, new: &NewLot, formulation_digest: &str) -> Answer<i64> {
    change.insert(
        "insert into lot (uuid, number, presentation, formulation_version, formulation_digest, made_on, size,
             size_unit, scale, container_closure, bulk_lot)
         values (:uuid, :number, :presentation, :formulation_version, :digest, :made_on, :size, :size_unit,
             :scale, :container_closure, :bulk_lot)",
        named_params! {
            ":uuid": new_uuid(),
            ":number": new.number,
            ":presentation": new.presentation,
            ":formulation_version": new.formulation_version,
            ":digest": formulation_digest,
            ":made_on": Day(new.made_on),
            ":size": new.size.map(Exact),
            ":size_unit": new.size_unit,
            ":scale": new.scale.words(),
            ":container_closure": new.container_closure,
            ":bulk_lot": new.bulk_lot,
        },
    )
}

/// One recorded distribution.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Distribution {
    pub first_on: NaiveDate,
    pub markets: String,
}

pub fn distributions(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Distribution>> {
    reader.all(
        "select first_on, markets from lot_distribution where lot = :lot order by first_on, id",
        named_params! { ":lot": lot },
        |row| Ok(Distribution { first_on: row.get::<_, Day>(0)?.0, markets: row.get(1)? }),
    )
}

pub fn insert_distribution(change: &Change<'_>, lot: i64, new: &NewDistribution) -> Answer<i64> {
    change.insert(
        "insert into lot_distribution (lot, first_on, markets) values (:lot, :first_on, :markets)",
        named_params! { ":lot": lot, ":first_on": Day(new.first_on), ":markets": new.markets },
    )
}

/// A sample of a lot, for its list.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SampleLine {
    pub id: i64,
    pub number: String,
    pub purpose: String,
    pub received_on: Option<NaiveDate>,
    pub tests: i64,
}

/// Samples of a lot that belong to no pull, oldest first. Pulls are listed by their study.
pub fn samples(reader: &Reader<'_>, lot: i64) -> Answer<Vec<SampleLine>> {
    reader.all(
        "select s.id, s.number, s.purpose, s.received_on,
             (select count(*) from sample_test where sample = s.id)
         from sample s
         where s.lot = :lot and s.pull is null
         order by s.id",
        named_params! { ":lot": lot },
        |row| {
            Ok(SampleLine {
                id: row.get(0)?,
                number: row.get(1)?,
                purpose: row.get(2)?,
                received_on: row.get::<_, Option<Day>>(3)?.map(|day| day.0),
                tests: row.get(4)?,
            })
        },
    )
}

/// A study of a lot, for its list.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct StudyLine {
    pub id: i64,
    pub number: String,
    pub programme: String,
    pub started_on: Option<NaiveDate>,
    pub arms: i64,
    pub pulls: i64,
}

pub fn studies(reader: &Reader<'_>, lot: i64) -> Answer<Vec<StudyLine>> {
    reader.all(
        "select s.id, s.number, s.programme, s.started_on,
             (select count(*) from study_arm where study = s.id),
             (select count(*) from pull p join study_arm a on a.id = p.study_arm where a.study = s.id)
         from study s
         where s.lot = :lot
         order by s.id",
        named_params! { ":lot": lot },
        |row| {
            Ok(StudyLine {
                id: row.get(0)?,
                number: row.get(1)?,
                programme: row.get(2)?,
                started_on: row.get::<_, Option<Day>>(3)?.map(|day| day.0),
                arms: row.get(4)?,
                pulls: row.get(5)?,
            })
        },
    )
}
