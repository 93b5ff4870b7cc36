//! How far a shelf life may reach beyond the data: a person's answers to the tree of ICH Q1E, and the steps they lead
//! through. Nothing here is inferred from the data; what the data suggest stands beside the question.

use rust_decimal::Decimal;
use serde::{Deserialize, Serialize};

use crate::science::extrapolation::{self, Accelerated, Node, Open, Storage};

/// The answers as they were given, with the words that were asked for (requirements E2 and E4).
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Answers {
    /// `room`, `refrigerator`, `freezer`.
    pub storage: String,
    /// `none`, `after-3-months`, `within-3-months`.
    pub accelerated: String,
    /// Why, where the answer is another than the data suggest.
    pub accelerated_why: String,
    /// `not-tested`, `none`, `change`.
    pub intermediate: String,
    pub intermediate_why: String,
    /// Long-term and accelerated data show little or no change and variability.
    pub is_little_change: bool,
    pub little_change_why: String,
    /// The data are amenable to statistics, and the statistics support the proposal.
    pub has_statistics: bool,
    pub has_supporting_data: bool,
    pub supporting_why: String,
    /// Why physical attributes may be read beyond the data; needed where the proposal reaches beyond them.
    pub physical_why: String,
}

pub const STORAGES: [(&str, &str); 3] =
    [("room", "room temperature"), ("refrigerator", "refrigerator (2–8 °C)"), ("freezer", "freezer")];

pub const ACCELERATED: [(&str, &str); 3] = [
    ("none", "no significant change over six months"),
    ("after-3-months", "significant change between 3 and 6 months"),
    ("within-3-months", "significant change within the first 3 months"),
];

pub const INTERMEDIATE: [(&str, &str); 3] = [
    ("not-tested", "not tested, or not asked for"),
    ("none", "no significant change"),
    ("change", "significant change"),
];

/// Where the answers lead: the cap in months, and each step in words.
#[derive(Clone, Debug, PartialEq)]
pub struct Cap {
    /// N1 to N8 of the decision tree (requirements 3.1).
    pub node: String,
    pub months: f64,
    pub steps: Vec<String>,
}

/// Why the answers lead nowhere yet.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum NoLeaf {
    IntermediateNotTested,
    NoSupportingData,
    Unanswered,
}

impl Answers {
    fn storage(&self) -> Option<Storage> {
        match self.storage.as_str() {
            "room" => Some(Storage::RoomTemperature),
            "refrigerator" => Some(Storage::Refrigerator),
            "freezer" => Some(Storage::Freezer),
            _ => None,
        }
    }

    fn tree(&self) -> Option<extrapolation::Answers> {
        let accelerated = match self.accelerated.as_str() {
            "none" => Accelerated::NoChange,
            "after-3-months" => Accelerated::ChangeAfterThreeMonths,
            "within-3-months" => Accelerated::ChangeWithinThreeMonths,
            _ => return None,
        };
        let change_at_intermediate = match self.intermediate.as_str() {
            "not-tested" => None,
            "none" => Some(false),
            "change" => Some(true),
            _ => return None,
        };
        Some(extrapolation::Answers {
            accelerated,
            change_at_intermediate,
            little_change: self.is_little_change,
            statistics: self.has_statistics,
            supporting_data: self.has_supporting_data,
        })
    }

    /// The cap from so many months of long-term data on every lot chosen.
    pub fn cap(&self, covered_months: f64) -> Result<Cap, NoLeaf> {
        let storage = self.storage().ok_or(NoLeaf::Unanswered)?;
        let tree = self.tree().ok_or(NoLeaf::Unanswered)?;
        // Freezer products have no accelerated condition and no leaf: their data alone decide.
        let node = if storage == Storage::Freezer {
            Node::N6
        } else {
            extrapolation::node(&tree, storage).map_err(|open| match open {
                Open::IntermediateNotTested => NoLeaf::IntermediateNotTested,
                Open::NoSupportingData => NoLeaf::NoSupportingData,
            })?
        };
        let months = extrapolation::limit(covered_months, node, storage).ok_or(NoLeaf::Unanswered)?;
        let mut steps = self.steps(storage);
        steps.push(format!(
            "X, the long-term data that every chosen lot has: {} months.",
            plain(covered_months)
        ));
        steps.push(format!("So at most {}: {} months.", rule(node, storage), plain(months)));
        let name = if storage == Storage::Freezer { "freezer".to_string() } else { format!("{node:?}") };
        Ok(Cap { node: name, months, steps })
    }

    fn steps(&self, storage: Storage) -> Vec<String> {
        let words = |list: &[(&str, &str)], code: &str| {
            list.iter()
                .find(|(known, _)| *known == code)
                .map_or(String::new(), |(_, words)| words.to_string())
        };
        let mut steps = vec![format!("Stored at {}.", words(&STORAGES, &self.storage))];
        if storage == Storage::Freezer {
            steps.push("Freezer products rest on their long-term data alone.".to_string());
            return steps;
        }
        steps.push(format!("Accelerated: {}.", words(&ACCELERATED, &self.accelerated)));
        if self.accelerated != "none" && storage == Storage::RoomTemperature {
            steps.push(format!("Intermediate: {}.", words(&INTERMEDIATE, &self.intermediate)));
        }
        if self.accelerated == "none" {
            let little = if self.is_little_change { "Little or no" } else { "Some" };
            steps.push(format!("{little} change and variability at both conditions, as answered."));
        }
        let yes = |is: bool| if is { "yes" } else { "no" };
        steps.push(format!("Statistical analysis done and in support: {}.", yes(self.has_statistics)));
        steps.push(format!("Relevant supporting data: {}.", yes(self.has_supporting_data)));
        steps
    }
}

fn rule(node: Node, storage: Storage) -> &'static str {
    match (storage, node) {
        (Storage::RoomTemperature, Node::N1 | Node::N2) => "twice X, and not more than X + 12",
        (Storage::RoomTemperature, Node::N3 | Node::N4) | (Storage::Refrigerator, Node::N1 | Node::N2) => {
            "one and a half times X, and not more than X + 6"
        }
        (Storage::RoomTemperature, Node::N5) | (Storage::Refrigerator, Node::N3) => "X + 3",
        _ => "X, without any reach beyond the data",
    }
}

fn plain(months: f64) -> String {
    Decimal::try_from(months).map(|months| months.round_dp(2).normalize().to_string()).unwrap_or_default()
}

/// The months that may be proposed: the earlier of root and cap, rounded down.
pub fn most_months(root: Option<f64>, cap: f64) -> Option<u64> {
    extrapolation::proposal(root, cap)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn room() -> Answers {
        Answers {
            storage: "room".to_string(),
            accelerated: "none".to_string(),
            intermediate: "not-tested".to_string(),
            is_little_change: true,
            has_statistics: true,
            has_supporting_data: true,
            ..Answers::default()
        }
    }

    /// Unit values of requirement E1 (ICH Q1E appendix A), through the answers.
    #[test]
    fn req_e1_answers_lead_to_the_caps_of_the_guideline() {
        let some = Answers { is_little_change: false, ..room() };
        let without = Answers { has_statistics: false, ..some.clone() };
        let after = Answers {
            accelerated: "after-3-months".to_string(),
            intermediate: "none".to_string(),
            ..some.clone()
        };
        let cold = |answers: &Answers| Answers { storage: "refrigerator".to_string(), ..answers.clone() };
        for (answers, covered, node, months) in [
            (room(), 12.0, "N1", 24.0),
            (room(), 24.0, "N1", 36.0),
            (some.clone(), 6.0, "N2", 12.0),
            (without.clone(), 18.0, "N3", 24.0),
            (after.clone(), 12.0, "N4", 18.0),
            (Answers { has_statistics: false, ..after.clone() }, 12.0, "N5", 15.0),
            (Answers { intermediate: "change".to_string(), ..after.clone() }, 12.0, "N6", 12.0),
            (cold(&room()), 12.0, "N1", 18.0),
            (cold(&without), 12.0, "N3", 15.0),
            (cold(&after), 12.0, "N7", 12.0),
            (Answers { storage: "freezer".to_string(), ..room() }, 12.0, "freezer", 12.0),
        ] {
            let cap = answers.cap(covered).unwrap();
            assert_eq!((cap.node.as_str(), cap.months), (node, months), "{answers:?}");
            assert!(cap.steps.last().unwrap().starts_with("So at most"), "{:?}", cap.steps);
        }
        let open = Answers { intermediate: "not-tested".to_string(), ..after };
        assert_eq!(open.cap(12.0), Err(NoLeaf::IntermediateNotTested));
        assert_eq!(Answers { has_supporting_data: false, ..some }.cap(12.0), Err(NoLeaf::NoSupportingData));
        assert_eq!(Answers::default().cap(12.0), Err(NoLeaf::Unanswered));
        assert_eq!(most_months(Some(45.45), 24.0), Some(24));
        assert_eq!(most_months(Some(20.6), 24.0), Some(20));
    }
}
