//! Customers, products and presentations.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Exact, Reader, new_uuid};
use crate::domain::product::{NewCustomer, NewPresentation, NewProduct};

/// A customer with how many products are made for them.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Customer {
    pub id: i64,
    pub code: String,
    pub name: String,
    pub products: i64,
}

pub fn insert_customer(change: &Change<'_>, new: &NewCustomer) -> Answer<i64> {
    change.insert(
        "insert into customer (uuid, code, name) values (:uuid, :code, :name)",
        named_params! { ":uuid": new_uuid(), ":code": new.code, ":name": new.name },
    )
}

pub fn is_customer_code_taken(reader: &Reader<'_>, code: &str) -> Answer<bool> {
    reader.exists("select 1 from customer where code = :code", named_params! { ":code": code })
}

pub fn customers(reader: &Reader<'_>) -> Answer<Vec<Customer>> {
    reader.all(
        "select c.id, c.code, c.name, (select count(*) from product where customer = c.id)
         from customer c
         order by c.code",
        [],
        |row| Ok(Customer { id: row.get(0)?, code: row.get(1)?, name: row.get(2)?, products: row.get(3)? }),
    )
}

/// A product with its customer and how much hangs on it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Product {
    pub id: i64,
    pub code: String,
    pub name: String,
    pub dosage_form: String,
    pub customer: Option<String>,
    pub is_imported: bool,
    pub presentations: i64,
    pub formulations: i64,
}

const SELECT: &str =
    "select p.id, p.code, p.name, p.dosage_form, c.code || ', ' || c.name, p.imported is not null,
        (select count(*) from presentation where product = p.id),
        (select count(*) from formulation where product = p.id)
    from product p left join customer c on c.id = p.customer";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Product> {
    Ok(Product {
        id: row.get(0)?,
        code: row.get(1)?,
        name: row.get(2)?,
        dosage_form: row.get(3)?,
        customer: row.get(4)?,
        is_imported: row.get(5)?,
        presentations: row.get(6)?,
        formulations: row.get(7)?,
    })
}

pub fn insert(change: &Change<'_>, new: &NewProduct) -> Answer<i64> {
    change.insert(
        "insert into product (uuid, code, name, dosage_form, customer)
         values (:uuid, :code, :name, :dosage_form, :customer)",
        named_params! {
            ":uuid": new_uuid(),
            ":code": new.code,
            ":name": new.name,
            ":dosage_form": new.dosage_form,
            ":customer": new.customer,
        },
    )
}

pub fn is_code_taken(reader: &Reader<'_>, code: &str) -> Answer<bool> {
    reader.exists("select 1 from product where code = :code", named_params! { ":code": code })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Product> {
    let sql = format!("{SELECT} where p.id = :id");
    reader.one("product with this number", &sql, named_params! { ":id": id }, from_row)
}

/// All products by code.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<Product>> {
    reader.all(&format!("{SELECT} order by p.code"), [], from_row)
}

/// A presentation with its product.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Presentation {
    pub id: i64,
    pub product: i64,
    pub product_code: String,
    pub product_name: String,
    pub code: String,
    pub strength: String,
    pub pack: String,
    pub container_word: String,
    pub fill_ml: Option<rust_decimal::Decimal>,
    pub market: String,
    pub permeability: String,
}

impl Presentation {
    /// `TW-104-200, 400 mg/5 mL, 200 mL amber PET bottle`.
    pub fn words(&self) -> String {
        format!("{}, {}, {}", self.code, self.strength, self.pack)
    }
}

const SELECT_PRESENTATION: &str =
    "select r.id, p.id, p.code, p.name, r.code, r.strength, r.pack, r.container_word,
        r.fill_ml, r.market, r.permeability
    from presentation r join product p on p.id = r.product";

fn presentation_from_row(row: &Row<'_>) -> rusqlite::Result<Presentation> {
    Ok(Presentation {
        id: row.get(0)?,
        product: row.get(1)?,
        product_code: row.get(2)?,
        product_name: row.get(3)?,
        code: row.get(4)?,
        strength: row.get(5)?,
        pack: row.get(6)?,
        container_word: row.get(7)?,
        fill_ml: row.get::<_, Option<Exact>>(8)?.map(|exact| exact.0),
        market: row.get(9)?,
        permeability: row.get(10)?,
    })
}

pub fn insert_presentation(change: &Change<'_>, new: &NewPresentation) -> Answer<i64> {
    change.insert(
        "insert into presentation (uuid, product, code, strength, pack, container_word, fill_ml, market,
             permeability)
         values (:uuid, :product, :code, :strength, :pack, :container_word, :fill_ml, :market, :permeability)",
        named_params! {
            ":uuid": new_uuid(),
            ":product": new.product,
            ":code": new.code,
            ":strength": new.strength,
            ":pack": new.pack,
            ":container_word": new.container_word,
            ":fill_ml": new.fill_ml.map(Exact),
            ":market": new.market,
            ":permeability": new.permeability,
        },
    )
}

pub fn is_presentation_code_taken(reader: &Reader<'_>, code: &str) -> Answer<bool> {
    reader.exists("select 1 from presentation where code = :code", named_params! { ":code": code })
}

pub fn presentation(reader: &Reader<'_>, id: i64) -> Answer<Presentation> {
    let sql = format!("{SELECT_PRESENTATION} where r.id = :id");
    reader.one("presentation with this number", &sql, named_params! { ":id": id }, presentation_from_row)
}

/// The presentations of a product by code.
pub fn presentations_of(reader: &Reader<'_>, product: i64) -> Answer<Vec<Presentation>> {
    let sql = format!("{SELECT_PRESENTATION} where r.product = :product order by r.code");
    reader.all(&sql, named_params! { ":product": product }, presentation_from_row)
}

/// All presentations by code.
pub fn presentations(reader: &Reader<'_>) -> Answer<Vec<Presentation>> {
    reader.all(&format!("{SELECT_PRESENTATION} order by r.code"), [], presentation_from_row)
}

/// A record that hangs on a presentation.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Hanging {
    /// `specification`, `protocol` or `lot`.
    pub kind: String,
    pub id: i64,
    pub number: String,
    pub about: String,
}

/// Specifications and protocols of a presentation by code, then its newest lots, at most 50.
pub fn hanging_on(reader: &Reader<'_>, presentation: i64) -> Answer<Vec<Hanging>> {
    reader.all(
        "select * from (
             select 'specification', id, code, '' from specification
             where presentation = :presentation order by code)
         union all
         select * from (
             select 'protocol', id, code, title from protocol
             where presentation = :presentation order by code)
         union all
         select * from (
             select 'lot', id, number, container_closure from lot
             where presentation = :presentation order by id desc limit 50)",
        named_params! { ":presentation": presentation },
        |row| Ok(Hanging { kind: row.get(0)?, id: row.get(1)?, number: row.get(2)?, about: row.get(3)? }),
    )
}
