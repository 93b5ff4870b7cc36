//! How far a shelf life may reach beyond the long-term data.
//!
//! Source: ICH Q1E (2003), sections 2.4–2.5 and appendix A. The answers to the tree are a person's; nothing
//! here is inferred from the data.

/// The intended storage.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Storage {
    /// Room temperature.
    RoomTemperature,
    /// Refrigerator.
    Refrigerator,
    /// Freezer: long-term data only.
    Freezer,
}

/// A leaf of the decision tree.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Node {
    /// No significant change; little or no change and variability: no statistics needed.
    N1,
    /// No significant change; some change or variability; statistics done, with supporting data.
    N2,
    /// No significant change; some change or variability; no statistics, supporting data only.
    N3,
    /// Significant change accelerated, none intermediate; statistics done, with supporting data.
    N4,
    /// As N4 without statistics.
    N5,
    /// Significant change accelerated and intermediate.
    N6,
    /// Refrigerated: significant change at accelerated between 3 and 6 months.
    N7,
    /// Refrigerated: significant change at accelerated within 3 months.
    N8,
}

/// When a significant change was seen at the accelerated condition.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Accelerated {
    /// No significant change over six months.
    NoChange,
    /// Between 3 and 6 months.
    ChangeAfterThreeMonths,
    /// Within the first 3 months.
    ChangeWithinThreeMonths,
}

/// A person's answers to the tree.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Answers {
    /// Result at the accelerated condition.
    pub accelerated: Accelerated,
    /// Whether the intermediate condition shows a significant change; none if it was not tested.
    pub change_at_intermediate: Option<bool>,
    /// Long-term and accelerated data show little or no change and variability.
    pub little_change: bool,
    /// The data are amenable to statistics, the statistics were done and support the proposal.
    pub statistics: bool,
    /// Relevant supporting data exist.
    pub supporting_data: bool,
}

/// Why there is no leaf.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Open {
    /// A significant change at accelerated asks for the intermediate condition first.
    IntermediateNotTested,
    /// Without supporting data nothing beyond the long-term data is proposed.
    NoSupportingData,
}

/// The leaf that the answers lead to. Freezer products have no leaf of their own: any leaf gives their cap.
pub fn node(answers: &Answers, storage: Storage) -> Result<Node, Open> {
    match (answers.accelerated, storage) {
        (Accelerated::NoChange, _) => without_change(answers),
        (Accelerated::ChangeAfterThreeMonths, Storage::Refrigerator) => Ok(Node::N7),
        (Accelerated::ChangeWithinThreeMonths, Storage::Refrigerator) => Ok(Node::N8),
        _ => match answers.change_at_intermediate {
            None => Err(Open::IntermediateNotTested),
            Some(true) => Ok(Node::N6),
            Some(false) if !answers.supporting_data => Err(Open::NoSupportingData),
            Some(false) if answers.statistics => Ok(Node::N4),
            Some(false) => Ok(Node::N5),
        },
    }
}

fn without_change(answers: &Answers) -> Result<Node, Open> {
    match answers {
        Answers { little_change: true, .. } => Ok(Node::N1),
        Answers { supporting_data: false, .. } => Err(Open::NoSupportingData),
        Answers { statistics: true, .. } => Ok(Node::N2),
        _ => Ok(Node::N3),
    }
}

/// The longest period, in months, that may be proposed from `months` of long-term data covering every lot
/// chosen for the conclusion. Leaves that a storage does not know give no extrapolation.
/// `None` when `months` is negative or not finite.
pub fn limit(months: f64, node: Node, storage: Storage) -> Option<f64> {
    if !(months.is_finite() && months >= 0.0) {
        return None;
    }
    let twice = (2.0 * months).min(months + 12.0);
    let half_more = (1.5 * months).min(months + 6.0);
    Some(match (storage, node) {
        (Storage::RoomTemperature, Node::N1 | Node::N2) => twice,
        (Storage::RoomTemperature, Node::N3 | Node::N4) => half_more,
        (Storage::RoomTemperature, Node::N5) => months + 3.0,
        (Storage::Refrigerator, Node::N1 | Node::N2) => half_more,
        (Storage::Refrigerator, Node::N3) => months + 3.0,
        _ => months,
    })
}

/// The months that may be proposed: the earlier of root and cap, rounded down. With no root (the limit is
/// never met) the cap alone decides. `None` when either is not usable.
pub fn proposal(root: Option<f64>, cap: f64) -> Option<u64> {
    let months = root.map_or(cap, |root| root.min(cap));
    (months.is_finite() && months >= 0.0).then(|| (months + 1e-9).floor() as u64)
}

#[cfg(test)]
mod tests {
    use super::*;
    use Node::*;
    use Storage::*;

    /// Unit values of requirement E1 (ICH Q1E appendix A).
    #[test]
    fn req_e1_caps() {
        for (months, node, storage, cap) in [
            (12.0, N1, RoomTemperature, 24.0),
            (24.0, N1, RoomTemperature, 36.0),
            (6.0, N1, RoomTemperature, 12.0),
            (12.0, N2, RoomTemperature, 24.0),
            (12.0, N3, RoomTemperature, 18.0),
            (18.0, N3, RoomTemperature, 24.0),
            (12.0, N4, RoomTemperature, 18.0),
            (12.0, N5, RoomTemperature, 15.0),
            (12.0, N6, RoomTemperature, 12.0),
            (12.0, N1, Refrigerator, 18.0),
            (6.0, N1, Refrigerator, 9.0),
            (12.0, N2, Refrigerator, 18.0),
            (12.0, N3, Refrigerator, 15.0),
            (12.0, N7, Refrigerator, 12.0),
            (12.0, N8, Refrigerator, 12.0),
            (12.0, N1, Freezer, 12.0),
        ] {
            assert_eq!(limit(months, node, storage), Some(cap), "{months} {node:?} {storage:?}");
        }
        assert_eq!(limit(f64::NAN, N1, RoomTemperature), None);
        assert_eq!(limit(-1.0, N1, RoomTemperature), None);
    }

    #[test]
    fn answers_lead_to_leaves() {
        use Accelerated::*;
        let base = Answers {
            accelerated: NoChange,
            change_at_intermediate: None,
            little_change: true,
            statistics: true,
            supporting_data: true,
        };
        let some = Answers { little_change: false, ..base };
        let changed = Answers { accelerated: ChangeAfterThreeMonths, ..some };
        for (answers, storage, leaf) in [
            (base, RoomTemperature, Ok(N1)),
            (some, RoomTemperature, Ok(N2)),
            (Answers { statistics: false, ..some }, RoomTemperature, Ok(N3)),
            (Answers { supporting_data: false, ..some }, RoomTemperature, Err(Open::NoSupportingData)),
            (changed, RoomTemperature, Err(Open::IntermediateNotTested)),
            (Answers { change_at_intermediate: Some(false), ..changed }, RoomTemperature, Ok(N4)),
            (
                Answers { change_at_intermediate: Some(false), statistics: false, ..changed },
                RoomTemperature,
                Ok(N5),
            ),
            (Answers { change_at_intermediate: Some(true), ..changed }, RoomTemperature, Ok(N6)),
            (changed, Refrigerator, Ok(N7)),
            (Answers { accelerated: ChangeWithinThreeMonths, ..some }, Refrigerator, Ok(N8)),
        ] {
            assert_eq!(node(&answers, storage), leaf, "{answers:?}");
        }
    }

    #[test]
    fn the_earlier_of_root_and_cap() {
        assert_eq!(proposal(Some(45.45), 24.0), Some(24));
        assert_eq!(proposal(Some(20.9999999999), 24.0), Some(21));
        assert_eq!(proposal(Some(20.6), 24.0), Some(20));
        assert_eq!(proposal(None, 24.5), Some(24));
    }
}
