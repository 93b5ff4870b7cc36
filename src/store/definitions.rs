//! How many of each definition there are.

use super::{Answer, Reader};

/// Counts of the index of definitions, in one read.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Counts {
    pub products: i64,
    pub presentations: i64,
    pub materials: i64,
    pub customers: i64,
    pub formulations: i64,
    pub methods: i64,
    pub specifications: i64,
    pub instruments: i64,
    pub qualifications: i64,
    pub conditions: i64,
    pub chambers: i64,
    pub protocols: i64,
    pub imports: i64,
    pub material_lots: i64,
    pub equipment: i64,
}

pub fn counts(reader: &Reader<'_>) -> Answer<Counts> {
    reader.one(
        "count of definitions",
        "select (select count(*) from product),
             (select count(*) from presentation),
             (select count(*) from material),
             (select count(*) from customer),
             (select count(*) from formulation),
             (select count(*) from method),
             (select count(*) from specification),
             (select count(*) from instrument),
             (select count(*) from qualification),
             (select count(*) from condition),
             (select count(*) from chamber),
             (select count(*) from protocol),
             (select count(*) from import),
             (select count(*) from material_lot),
             (select count(*) from equipment)",
        [],
        |row| {
            let count = |column: usize| row.get(column);
            Ok(Counts {
                products: count(0)?,
                presentations: count(1)?,
                materials: count(2)?,
                customers: count(3)?,
                formulations: count(4)?,
                methods: count(5)?,
                specifications: count(6)?,
                instruments: count(7)?,
                qualifications: count(8)?,
                conditions: count(9)?,
                chambers: count(10)?,
                protocols: count(11)?,
                imports: count(12)?,
                material_lots: count(13)?,
                equipment: count(14)?,
            })
        },
    )
}
