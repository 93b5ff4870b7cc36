//! A lot: what was made, to which formulation version, in which pack.

use chrono::NaiveDate;
use rust_decimal::Decimal;

use super::refusal::NamedReason;
use super::version::VersionState;

/// How large a lot is against production (ICH Q1A(R2) 2.2.3 words).
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Scale {
    Laboratory,
    Pilot,
    Production,
    NotStated,
}

impl Scale {
    pub const ALL: [Scale; 4] = [Scale::Laboratory, Scale::Pilot, Scale::Production, Scale::NotStated];

    /// As stored in `lot.scale`.
    pub fn words(self) -> &'static str {
        match self {
            Scale::Laboratory => "laboratory",
            Scale::Pilot => "pilot",
            Scale::Production => "production",
            Scale::NotStated => "not stated",
        }
    }

    pub fn from_words(words: &str) -> Option<Scale> {
        Scale::ALL.into_iter().find(|scale| scale.words() == words)
    }
}

/// A lot to be recorded.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewLot {
    pub number: String,
    pub presentation: i64,
    pub formulation_version: i64,
    pub made_on: NaiveDate,
    pub size: Option<Decimal>,
    pub size_unit: Option<String>,
    pub scale: Scale,
    pub container_closure: String,
    /// The bulk lot a packed lot was filled from.
    pub bulk_lot: Option<i64>,
}

/// What is known when a lot is about to be recorded.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct LotFacts {
    pub is_number_taken: bool,
    pub version_state: VersionState,
    /// The product the formulation version belongs to.
    pub version_product: i64,
    /// The product the presentation belongs to.
    pub presentation_product: i64,
    pub today: NaiveDate,
    pub bulk: Option<BulkFacts>,
}

/// What is known of the bulk lot.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct BulkFacts {
    pub formulation_version: i64,
    pub made_on: Option<NaiveDate>,
    pub is_imported: bool,
    pub is_rejected: bool,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum LotRefusal {
    #[error("There is a lot {0} already. A lot number is never used twice.")]
    LotNumberTaken(String),
    #[error("This formulation version is {0}. A lot is made to an approved version.")]
    FormulationNotApproved(&'static str),
    #[error(
        "This formulation version belongs to another product than the presentation. Choose one of its own."
    )]
    FormulationOfOtherProduct,
    #[error("The day it was made lies ahead. Record the lot once it is made.")]
    MadeInFuture,
    #[error("A size needs its unit, and a unit its size. Fill in both or neither.")]
    SizeWithoutUnit,
    #[error(
        "The bulk lot was made to another formulation version. A packed lot has the version of its bulk lot."
    )]
    BulkOfOtherFormulation,
    #[error("The bulk lot was made after this lot was filled. Look at both dates.")]
    BulkMadeLater,
    #[error("The bulk lot was imported, not observed here. Nothing can be filled from it.")]
    BulkImported,
    #[error("The bulk lot was rejected. Nothing can be filled from it.")]
    BulkRejected,
}

impl NamedReason for LotRefusal {
    fn field(&self) -> Option<String> {
        use LotRefusal::*;
        let name = match self {
            LotNumberTaken(_) => "number",
            FormulationNotApproved(_) | FormulationOfOtherProduct => "formulation_version",
            MadeInFuture => "made_on",
            SizeWithoutUnit => "size_unit",
            BulkOfOtherFormulation | BulkMadeLater | BulkImported | BulkRejected => "bulk_lot",
        };
        Some(name.to_string())
    }
}

/// Refuses in this order: number taken, version not approved, version of another product, date ahead, size
/// without unit, then the bulk lot: imported, rejected, another version, made later.
pub fn may_make(new: &NewLot, facts: &LotFacts) -> Result<(), LotRefusal> {
    if facts.is_number_taken {
        return Err(LotRefusal::LotNumberTaken(new.number.clone()));
    }
    if facts.version_state != VersionState::Approved {
        return Err(LotRefusal::FormulationNotApproved(facts.version_state.words()));
    }
    if facts.version_product != facts.presentation_product {
        return Err(LotRefusal::FormulationOfOtherProduct);
    }
    if new.made_on > facts.today {
        return Err(LotRefusal::MadeInFuture);
    }
    if new.size.is_some() != new.size_unit.is_some() {
        return Err(LotRefusal::SizeWithoutUnit);
    }
    facts.bulk.map_or(Ok(()), |bulk| may_be_filled_from(new, &bulk))
}

fn may_be_filled_from(new: &NewLot, bulk: &BulkFacts) -> Result<(), LotRefusal> {
    if bulk.is_imported {
        return Err(LotRefusal::BulkImported);
    }
    if bulk.is_rejected {
        return Err(LotRefusal::BulkRejected);
    }
    if bulk.formulation_version != new.formulation_version {
        return Err(LotRefusal::BulkOfOtherFormulation);
    }
    if bulk.made_on.is_some_and(|made_on| made_on > new.made_on) {
        return Err(LotRefusal::BulkMadeLater);
    }
    Ok(())
}

/// Where a lot stands; read from rows, never a column.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LotState {
    /// Its record is open.
    InMaking,
    Made,
    OnStudy,
    Released,
    Rejected,
    Imported,
}

impl LotState {
    pub fn words(self) -> &'static str {
        match self {
            LotState::InMaking => "in the making",
            LotState::Made => "made, not decided on",
            LotState::OnStudy => "on study, not decided on",
            LotState::Released => "released",
            LotState::Rejected => "rejected",
            LotState::Imported => "imported, not observed here",
        }
    }

    /// From the newest decision, whether there is a study, and whether it was imported.
    pub fn of(decision: Option<&str>, has_study: bool, is_imported: bool) -> LotState {
        match decision {
            _ if is_imported => LotState::Imported,
            Some("released") => LotState::Released,
            Some("rejected") => LotState::Rejected,
            _ if has_study => LotState::OnStudy,
            _ => LotState::Made,
        }
    }
}

/// The first distribution of a lot: from when, to which markets.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewDistribution {
    pub first_on: NaiveDate,
    pub markets: String,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum DistributionRefusal {
    #[error("An imported lot was not made here, so its distribution is not recorded here.")]
    LotImported,
    #[error("The lot is not released. Its distribution is recorded after the release.")]
    LotNotReleased,
    #[error("The first day lies ahead. Record the distribution once it has begun.")]
    DistributedInFuture,
    #[error("The first day lies before the lot was made. Look at the date.")]
    DistributedBeforeMade,
}

impl NamedReason for DistributionRefusal {
    fn field(&self) -> Option<String> {
        match self {
            DistributionRefusal::DistributedInFuture | DistributionRefusal::DistributedBeforeMade => {
                Some("first_on".to_string())
            }
            _ => None,
        }
    }
}

/// Refuses in this order: imported, not released, date ahead, date before it was made.
pub fn may_distribute(
    new: &NewDistribution,
    state: LotState,
    made_on: Option<NaiveDate>,
    today: NaiveDate,
) -> Result<(), DistributionRefusal> {
    match state {
        LotState::Imported => Err(DistributionRefusal::LotImported),
        LotState::Released if new.first_on > today => Err(DistributionRefusal::DistributedInFuture),
        LotState::Released if made_on.is_some_and(|made_on| new.first_on < made_on) => {
            Err(DistributionRefusal::DistributedBeforeMade)
        }
        LotState::Released => Ok(()),
        _ => Err(DistributionRefusal::LotNotReleased),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use LotRefusal::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    fn new_lot() -> NewLot {
        NewLot {
            number: "TW-104-0640".to_string(),
            presentation: 1,
            formulation_version: 3,
            made_on: day("2026-11-30"),
            size: None,
            size_unit: None,
            scale: Scale::Pilot,
            container_closure: "amber glass bottle".to_string(),
            bulk_lot: None,
        }
    }

    fn facts() -> LotFacts {
        LotFacts {
            is_number_taken: false,
            version_state: VersionState::Approved,
            version_product: 7,
            presentation_product: 7,
            today: day("2026-12-01"),
            bulk: None,
        }
    }

    fn bulk() -> BulkFacts {
        BulkFacts { formulation_version: 3, made_on: None, is_imported: false, is_rejected: false }
    }

    #[test]
    fn a_lot_is_refused_for_its_first_fault() {
        let ahead = NewLot { made_on: day("2026-12-02"), ..new_lot() };
        let sized = NewLot { size: Some(Decimal::TEN), ..new_lot() };
        let with = |change: BulkFacts| LotFacts { bulk: Some(change), ..facts() };
        let table = [
            (new_lot(), facts(), Ok(())),
            (new_lot(), with(bulk()), Ok(())),
            (
                ahead.clone(),
                LotFacts { is_number_taken: true, version_state: VersionState::Draft, ..facts() },
                Err(LotNumberTaken("TW-104-0640".to_string())),
            ),
            (
                ahead.clone(),
                LotFacts { version_state: VersionState::SignedByAuthor, version_product: 8, ..facts() },
                Err(FormulationNotApproved("waiting for approval")),
            ),
            (
                new_lot(),
                LotFacts { version_state: VersionState::Imported, ..facts() },
                Err(FormulationNotApproved("imported, not approved here")),
            ),
            (ahead.clone(), LotFacts { version_product: 8, ..facts() }, Err(FormulationOfOtherProduct)),
            (ahead, facts(), Err(MadeInFuture)),
            (sized, facts(), Err(SizeWithoutUnit)),
            (
                new_lot(),
                with(BulkFacts { is_imported: true, is_rejected: true, ..bulk() }),
                Err(BulkImported),
            ),
            (new_lot(), with(BulkFacts { is_rejected: true, ..bulk() }), Err(BulkRejected)),
            (new_lot(), with(BulkFacts { formulation_version: 2, ..bulk() }), Err(BulkOfOtherFormulation)),
            (new_lot(), with(BulkFacts { made_on: Some(day("2026-12-01")), ..bulk() }), Err(BulkMadeLater)),
        ];
        for (new, facts, expected) in table {
            assert_eq!(may_make(&new, &facts), expected, "{new:?} {facts:?}");
        }
    }

    #[test]
    fn the_state_is_read_from_rows() {
        let table = [
            (None, false, false, LotState::Made),
            (None, true, false, LotState::OnStudy),
            (Some("released"), true, false, LotState::Released),
            (Some("rejected"), false, false, LotState::Rejected),
            (None, true, true, LotState::Imported),
        ];
        for (decision, has_study, is_imported, expected) in table {
            assert_eq!(LotState::of(decision, has_study, is_imported), expected);
        }
    }

    #[test]
    fn distribution_follows_the_release() {
        let new =
            |first_on: &str| NewDistribution { first_on: day(first_on), markets: "United Kingdom".into() };
        let (made, today) = (Some(day("2026-11-01")), day("2026-12-01"));
        use DistributionRefusal::*;
        let table = [
            ("2026-12-01", LotState::Released, Ok(())),
            ("2026-12-02", LotState::Released, Err(DistributedInFuture)),
            ("2026-10-31", LotState::Released, Err(DistributedBeforeMade)),
            ("2026-12-01", LotState::OnStudy, Err(LotNotReleased)),
            ("2026-12-01", LotState::Rejected, Err(LotNotReleased)),
            ("2026-12-01", LotState::Imported, Err(LotImported)),
        ];
        for (first_on, state, expected) in table {
            assert_eq!(may_distribute(&new(first_on), state, made, today), expected, "{first_on} {state:?}");
        }
    }
}
