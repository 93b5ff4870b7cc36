//! Containers, closures and labels of a lot: issued, used, sampled, destroyed, returned, and reconciled.

use rust_decimal::Decimal;

use super::method::Halves;
use super::refusal::NamedReason;
use super::rounding::to_decimals;

/// What is counted (terms of the trade), as stored in `packaging_item.kind`.
pub const KINDS: [&str; 6] = ["container", "closure", "label", "carton", "leaflet", "other"];

/// The kind whose control records 21 CFR 211.188 (b)(8) asks for.
pub const LABEL: &str = "label";

/// An item that will be counted.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewPackagingItem {
    pub kind: String,
    /// With its version, as it is printed: "label 60 × 40, version 3".
    pub name: String,
    pub material_lot: Option<i64>,
    /// Accounted for, in % of what was issued.
    pub least_percent: Decimal,
    pub most_percent: Decimal,
}

/// The kinds of count.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum CountKind {
    Issued,
    Used,
    Sampled,
    Destroyed,
    Returned,
}

impl CountKind {
    pub const ALL: [CountKind; 5] =
        [CountKind::Issued, CountKind::Used, CountKind::Sampled, CountKind::Destroyed, CountKind::Returned];

    /// As stored in `packaging_entry.kind`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            CountKind::Issued => "issued",
            CountKind::Used => "used",
            CountKind::Sampled => "sampled",
            CountKind::Destroyed => "destroyed",
            CountKind::Returned => "returned",
        }
    }

    pub fn from_words(words: &str) -> Option<CountKind> {
        CountKind::ALL.into_iter().find(|kind| kind.words() == words)
    }
}

/// A count about to be recorded.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewCount {
    pub kind: CountKind,
    pub count: i64,
    /// The count it corrects.
    pub supersedes: Option<i64>,
    pub why: String,
}

/// A count as it stands; one that was corrected does not count.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Count {
    pub id: i64,
    pub kind: CountKind,
    pub count: i64,
    pub is_superseded: bool,
    pub by: i64,
}

/// What came out.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Reconciliation {
    pub issued: i64,
    /// Used, sampled, destroyed and returned together.
    pub accounted: i64,
    /// Of what was issued, to two decimals, halves away from zero. Judged is the exact value.
    pub percent: Decimal,
    pub is_within: bool,
}

/// Accounted % = (used + sampled + destroyed + returned) / issued × 100; `None` where nothing was issued.
pub fn reconcile(counts: &[Count], least: Decimal, most: Decimal) -> Option<Reconciliation> {
    let standing = counts.iter().filter(|one| !one.is_superseded);
    let (issued, accounted) = standing.fold((0_i64, 0_i64), |(issued, accounted), one| match one.kind {
        CountKind::Issued => (issued.saturating_add(one.count), accounted),
        _ => (issued, accounted.saturating_add(one.count)),
    });
    if issued == 0 {
        return None;
    }
    let hundredfold = Decimal::from(accounted) * Decimal::ONE_HUNDRED;
    // Compared by multiplication, so that no quotient is rounded before it is judged.
    let is_within =
        hundredfold >= least * Decimal::from(issued) && hundredfold <= most * Decimal::from(issued);
    let percent = to_decimals(hundredfold / Decimal::from(issued), 2, Halves::AwayFromZero);
    Some(Reconciliation { issued, accounted, percent, is_within })
}

/// What is known of an item.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PackagingFacts {
    pub name: String,
    pub lot_number: String,
    /// The lot is released or rejected.
    pub is_decided: bool,
    pub counts: Vec<Count>,
    /// The newest count that a second person's check covers.
    pub checked_up_to: Option<i64>,
    pub least_percent: Decimal,
    pub most_percent: Decimal,
}

impl PackagingFacts {
    /// A check stands, and no count came after it.
    pub fn is_checked(&self) -> bool {
        let newest = self.counts.iter().map(|one| one.id).max();
        newest.is_some() && newest == self.checked_up_to
    }

    pub fn reconciliation(&self) -> Option<Reconciliation> {
        reconcile(&self.counts, self.least_percent, self.most_percent)
    }
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum PackagingRefusal {
    #[error("{0} is decided on. Its counts are closed; a deviation takes what comes up later.")]
    CountsClosed(String),
    #[error("Limits lie between 0 and 200 %, the lower one first.")]
    LimitsImpossible,
    #[error("A count is 0 or more.")]
    CountBelowZero,
    #[error("That count is not of this item, or was corrected already. Choose one of the listed.")]
    CountNotStanding,
    #[error("A corrected count keeps its kind: that one was {0}.")]
    CountOfOtherKind(&'static str),
    #[error("Say why the count is corrected, in at least ten characters.")]
    CountReasonMissing,
    #[error("Nothing of {0} was issued yet. Record what was issued, then what became of it.")]
    NothingIssued(String),
    #[error("The reconciliation of {0} is checked as it stands.")]
    CheckedAlready(String),
    #[error("You counted {name} yourself. A second person checks the reconciliation.")]
    CounterChecks { name: String, counted: Vec<i64> },
}

impl NamedReason for PackagingRefusal {
    fn field(&self) -> Option<String> {
        use PackagingRefusal::*;
        let name = match self {
            LimitsImpossible => "least_percent",
            CountBelowZero => "count",
            CountNotStanding | CountOfOtherKind(_) => "supersedes",
            CountReasonMissing => "why",
            _ => return None,
        };
        Some(name.to_string())
    }

    fn took_part(&self) -> Option<Vec<i64>> {
        match self {
            PackagingRefusal::CounterChecks { counted, .. } => Some(counted.clone()),
            _ => None,
        }
    }
}

/// Refuses in this order: the lot is decided on, the limits.
pub fn may_add(new: &NewPackagingItem, lot_number: &str, is_decided: bool) -> Result<(), PackagingRefusal> {
    if is_decided {
        return Err(PackagingRefusal::CountsClosed(lot_number.to_string()));
    }
    let most = Decimal::from(200);
    if new.least_percent < Decimal::ZERO || new.most_percent > most || new.least_percent > new.most_percent {
        return Err(PackagingRefusal::LimitsImpossible);
    }
    Ok(())
}

/// Refuses in this order: the lot is decided on, below zero, the corrected count is not standing, of another kind,
/// the reason of a correction.
pub fn may_count(new: &NewCount, facts: &PackagingFacts) -> Result<(), PackagingRefusal> {
    if facts.is_decided {
        return Err(PackagingRefusal::CountsClosed(facts.lot_number.clone()));
    }
    if new.count < 0 {
        return Err(PackagingRefusal::CountBelowZero);
    }
    let Some(corrected) = new.supersedes else { return Ok(()) };
    let found = facts.counts.iter().find(|one| one.id == corrected && !one.is_superseded);
    let Some(found) = found else { return Err(PackagingRefusal::CountNotStanding) };
    if found.kind != new.kind {
        return Err(PackagingRefusal::CountOfOtherKind(found.kind.words()));
    }
    if new.why.trim().chars().count() < 10 {
        return Err(PackagingRefusal::CountReasonMissing);
    }
    Ok(())
}

/// The reconciliation that a second person checks. Refuses in this order: the lot is decided on, nothing issued,
/// checked already, own counts.
pub fn may_check(facts: &PackagingFacts, checker: i64) -> Result<Reconciliation, PackagingRefusal> {
    if facts.is_decided {
        return Err(PackagingRefusal::CountsClosed(facts.lot_number.clone()));
    }
    let Some(found) = facts.reconciliation() else {
        return Err(PackagingRefusal::NothingIssued(facts.name.clone()));
    };
    if facts.is_checked() {
        return Err(PackagingRefusal::CheckedAlready(facts.name.clone()));
    }
    let mut counted: Vec<i64> = facts.counts.iter().map(|one| one.by).collect();
    counted.sort_unstable();
    counted.dedup();
    if counted.contains(&checker) {
        return Err(PackagingRefusal::CounterChecks { name: facts.name.clone(), counted });
    }
    Ok(found)
}

/// What came out, in a sentence: what a page and a deviation say.
pub fn words(facts: &PackagingFacts, found: &Reconciliation) -> String {
    format!(
        "{} of {}: {} of {} issued are accounted for, {} % (limits {} to {} %).",
        facts.name,
        facts.lot_number,
        found.accounted,
        found.issued,
        found.percent,
        facts.least_percent,
        facts.most_percent
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    fn dec(text: &str) -> Decimal {
        text.parse().unwrap()
    }

    fn count(id: i64, kind: CountKind, count: i64) -> Count {
        Count { id, kind, count, is_superseded: false, by: 4 }
    }

    fn facts() -> PackagingFacts {
        PackagingFacts {
            name: "label version 3".to_string(),
            lot_number: "TW-104".to_string(),
            is_decided: false,
            counts: vec![
                count(1, CountKind::Issued, 3000),
                count(2, CountKind::Used, 2900),
                count(3, CountKind::Destroyed, 40),
            ],
            checked_up_to: None,
            least_percent: dec("98"),
            most_percent: dec("100"),
        }
    }

    #[test]
    fn what_is_issued_is_accounted_for_exactly() {
        let with = |more: Vec<Count>| PackagingFacts { counts: [facts().counts, more].concat(), ..facts() };
        let table = [
            (with(vec![]), 2940, "98.00", true),
            (with(vec![count(4, CountKind::Returned, 60)]), 3000, "100.00", true),
            (with(vec![count(4, CountKind::Returned, 61)]), 3001, "100.03", false),
            (with(vec![count(4, CountKind::Sampled, 10)]), 2950, "98.33", true),
        ];
        for (facts, accounted, percent, is_within) in table {
            let found = facts.reconciliation().unwrap();
            assert_eq!(
                (found.accounted, found.percent, found.is_within),
                (accounted, dec(percent), is_within)
            );
        }
        let mut short = facts();
        short.counts[1].count = 2899;
        let found = short.reconciliation().unwrap();
        assert_eq!((found.percent, found.is_within), (dec("97.97"), false));
        // 97.999 % shows as 98.00 and is judged unrounded.
        let close = vec![count(1, CountKind::Issued, 100_000), count(2, CountKind::Used, 97_999)];
        let found = reconcile(&close, dec("98"), dec("100")).unwrap();
        assert_eq!((found.percent, found.is_within), (dec("98.00"), false));
        assert_eq!(reconcile(&[], dec("98"), dec("100")), None);
    }

    #[test]
    fn a_corrected_count_does_not_count() {
        let mut corrected = facts();
        corrected.counts[2].is_superseded = true;
        corrected.counts.push(count(4, CountKind::Destroyed, 100));
        assert_eq!(corrected.reconciliation().unwrap().accounted, 3000);
    }

    #[test]
    fn refusals_come_in_their_order() {
        use PackagingRefusal::*;
        let name = || "label version 3".to_string();
        let lot = || "TW-104".to_string();
        let decided = || PackagingFacts { is_decided: true, ..facts() };
        let new =
            |kind, supersedes| NewCount { kind, count: 5, supersedes, why: "counted twice".to_string() };
        let table = [
            (new(CountKind::Used, None), facts(), Ok(())),
            (new(CountKind::Used, None), decided(), Err(CountsClosed(lot()))),
            (NewCount { count: -1, ..new(CountKind::Used, None) }, facts(), Err(CountBelowZero)),
            (new(CountKind::Used, Some(9)), facts(), Err(CountNotStanding)),
            (new(CountKind::Used, Some(3)), facts(), Err(CountOfOtherKind("destroyed"))),
            (
                NewCount { why: "oh".into(), ..new(CountKind::Used, Some(2)) },
                facts(),
                Err(CountReasonMissing),
            ),
            (new(CountKind::Used, Some(2)), facts(), Ok(())),
        ];
        for (new, facts, expected) in table {
            assert_eq!(may_count(&new, &facts), expected, "{new:?}");
        }
        let checked = || PackagingFacts { checked_up_to: Some(3), ..facts() };
        let table = [
            (decided(), 5, Some(CountsClosed(lot()))),
            (PackagingFacts { counts: vec![], ..facts() }, 5, Some(NothingIssued(name()))),
            (checked(), 4, Some(CheckedAlready(name()))),
            (facts(), 4, Some(CounterChecks { name: name(), counted: vec![4] })),
            (PackagingFacts { checked_up_to: Some(2), ..facts() }, 5, None),
        ];
        for (facts, checker, expected) in table {
            assert_eq!(may_check(&facts, checker).err(), expected, "{facts:?}");
        }
        let item = |least: &str, most: &str| NewPackagingItem {
            kind: LABEL.to_string(),
            name: name(),
            material_lot: None,
            least_percent: dec(least),
            most_percent: dec(most),
        };
        assert_eq!(may_add(&item("98", "100"), "TW-104", false), Ok(()));
        assert_eq!(may_add(&item("98", "100"), "TW-104", true), Err(CountsClosed(lot())));
        for (least, most) in [("-1", "100"), ("98", "201"), ("100", "98")] {
            assert_eq!(may_add(&item(least, most), "TW-104", false), Err(LimitsImpossible));
        }
    }
}
