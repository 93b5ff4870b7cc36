//! Whether the record of a lot is complete: the thirteen items of 21 CFR 211.188 (b), one by one.

pub mod statement;

/// The items, in the order and in the sense of 21 CFR 211.188 (b)(1) to (13).
pub const ITEMS: [&str; 13] = [
    "Dates of each significant step",
    "Major equipment and lines used",
    "Each lot of component or in-process material used",
    "Weights and measures of the components",
    "In-process and laboratory control results",
    "Inspection of the packaging and labelling area before and after use",
    "Actual yield and percentage of the theoretical yield at each phase",
    "Labelling control records, with specimens of all labels used",
    "Description of containers and closures",
    "Sampling performed",
    "Persons performing, supervising and checking each significant step",
    "Investigations made",
    "Results of the examination of packed and labelled product",
];

/// A place where an item stands.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Proof {
    pub words: String,
    /// The page that shows it; empty where there is none.
    pub path: String,
}

impl Proof {
    pub fn new(words: impl Into<String>, path: impl Into<String>) -> Proof {
        Proof { words: words.into(), path: path.into() }
    }
}

/// What a person states on an item.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum AnswerKind {
    Present,
    NotApplicable,
    Withdrawn,
}

impl AnswerKind {
    pub const ALL: [AnswerKind; 3] = [AnswerKind::Present, AnswerKind::NotApplicable, AnswerKind::Withdrawn];

    /// As stored in `completeness_answer.answer`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            AnswerKind::Present => "present",
            AnswerKind::NotApplicable => "not applicable",
            AnswerKind::Withdrawn => "withdrawn",
        }
    }

    pub fn from_words(words: &str) -> Option<AnswerKind> {
        AnswerKind::ALL.into_iter().find(|kind| kind.words() == words)
    }
}

/// The newest answer on an item.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Answer {
    /// 1 to 13.
    pub item: u8,
    pub kind: AnswerKind,
    /// Where it stands, or why it does not apply.
    pub text: String,
    pub by: String,
}

/// Where the record of a lot is kept that was not carried out here.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Elsewhere {
    pub reference: String,
    pub place: String,
    pub why: String,
    pub by: String,
}

/// What the executed record of the lot, or of the bulk lot it was filled from, holds.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct ExecutedRecord {
    pub number: String,
    pub path: String,
    pub is_closed: bool,
    /// The dates of its first and last entry, in words.
    pub from_to: String,
    pub weighings: usize,
    pub values: usize,
    pub clearances: usize,
    pub samplings: usize,
    pub examinations: usize,
    /// Phases with a theoretical yield, those with an actual one, and those a second person checked.
    pub phases: usize,
    pub yields: usize,
    pub checked_yields: usize,
    /// How many people did or checked something in it.
    pub people: usize,
}

/// An item of packaging, as far as completeness asks.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Packed {
    pub name: String,
    pub path: String,
    pub is_label: bool,
    pub is_checked: bool,
}

/// Something tested or looked into: number, page, and whether it is signed or concluded.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Settled {
    pub words: String,
    pub path: String,
    pub is_settled: bool,
}

/// Everything the program knows of a lot's record.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Evidence {
    pub lot_number: String,
    pub lot_path: String,
    pub is_decided: bool,
    pub is_imported: bool,
    pub record: Option<ExecutedRecord>,
    pub elsewhere: Option<Elsewhere>,
    pub equipment: Vec<Proof>,
    pub material_lots: Vec<Proof>,
    pub container_closure: String,
    pub packaging: Vec<Packed>,
    /// Files attached to the lot: specimens of labels stand there.
    pub files: usize,
    /// Samples received outside the studies; settled once reviewed and signed.
    pub samples: Vec<Settled>,
    /// Deviations and investigations of the lot.
    pub investigations: Vec<Settled>,
    pub answers: Vec<Answer>,
}

/// Where an item stands.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum ItemState {
    Present(Vec<Proof>),
    NotApplicable(String),
    /// What is missing, and how to mend it.
    Missing {
        why: String,
        proofs: Vec<Proof>,
        /// Whether a person may state that it is present elsewhere or does not apply.
        may_be_answered: bool,
    },
}

/// One of the thirteen items.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Item {
    /// 1 to 13.
    pub number: u8,
    pub title: &'static str,
    pub state: ItemState,
}

impl Item {
    pub fn is_missing(&self) -> bool {
        matches!(self.state, ItemState::Missing { .. })
    }
}

/// The thirteen items as they stand. What the rows show comes first, then the record kept elsewhere, then what a
/// person stated; an open count, sample, yield or deviation is missing whatever was stated.
pub fn judge(evidence: &Evidence) -> Vec<Item> {
    let numbers = 1..=ITEMS.len() as u8;
    let items = numbers.zip(ITEMS).map(|(number, title)| {
        let found = from_rows(number, evidence);
        Item { number, title, state: answered(number, found, evidence) }
    });
    items.collect()
}

/// "7 Actual yield …" of each item that is missing.
pub fn missing(items: &[Item]) -> Vec<String> {
    let open = items.iter().filter(|item| item.is_missing());
    open.map(|item| format!("({}) {}", item.number, item.title.to_lowercase())).collect()
}

fn answered(number: u8, found: ItemState, evidence: &Evidence) -> ItemState {
    let ItemState::Missing { may_be_answered: true, proofs, .. } = &found else { return found };
    let answer = evidence.answers.iter().find(|answer| answer.item == number);
    match answer.map(|answer| (answer.kind, format!("{} ({})", answer.text, answer.by))) {
        Some((AnswerKind::Present, text)) => {
            ItemState::Present(proofs.iter().cloned().chain([Proof::new(text, "")]).collect())
        }
        Some((AnswerKind::NotApplicable, text)) => ItemState::NotApplicable(text),
        _ => found,
    }
}

fn from_rows(number: u8, evidence: &Evidence) -> ItemState {
    match number {
        1 => of_record(evidence, |record| match record.is_closed {
            true => Ok(record.from_to.clone()),
            false => Err("The record is not closed yet. Finish its steps and close it.".to_string()),
        }),
        2 => listed(&evidence.equipment, evidence, "No equipment is recorded as used in this lot."),
        3 => listed(&evidence.material_lots, evidence, "No material lot is recorded as used in this lot."),
        4 => of_record(evidence, |record| counted(record.weighings, "weighing", "No weighing is recorded.")),
        5 => results(evidence),
        6 => of_record(evidence, |record| {
            counted(record.clearances, "line clearance", "No line clearance is recorded.")
        }),
        7 => of_record(evidence, yields),
        8 => labels(evidence),
        9 => containers(evidence),
        10 => sampling(evidence),
        11 => of_record(evidence, |record| match (record.people, record.is_closed) {
            (people, true) if people >= 2 => Ok(format!("{people} people, each entry with its doer")),
            (people, true) => Err(format!("Only {people} took part. A second person checks.")),
            (_, false) => Err("The record is not closed yet: steps wait for their checks.".to_string()),
        }),
        12 => investigations(evidence),
        _ => of_record(evidence, |record| {
            counted(record.examinations, "examination", "No examination of the packed product is recorded.")
        }),
    }
}

fn open(why: &str, may_be_answered: bool) -> ItemState {
    ItemState::Missing { why: why.to_string(), proofs: Vec::new(), may_be_answered }
}

fn counted(count: usize, what: &str, none: &str) -> Result<String, String> {
    match count {
        0 => Err(none.to_string()),
        1 => Ok(format!("1 {what}")),
        count => Ok(format!("{count} {what}s")),
    }
}

/// An item that the executed record holds, or the record kept elsewhere.
fn of_record(evidence: &Evidence, read: impl Fn(&ExecutedRecord) -> Result<String, String>) -> ItemState {
    match (&evidence.record, &evidence.elsewhere) {
        (Some(record), _) => match read(record) {
            Ok(words) => {
                let words = format!("record {}: {words}", record.number);
                ItemState::Present(vec![Proof::new(words, &record.path)])
            }
            Err(why) => ItemState::Missing {
                why,
                proofs: vec![Proof::new(format!("record {}", record.number), &record.path)],
                may_be_answered: true,
            },
        },
        (None, Some(elsewhere)) => ItemState::Present(vec![kept_elsewhere(elsewhere)]),
        (None, None) => open(
            "There is no executed record here. Carry the lot out here, or state where its record is kept.",
            true,
        ),
    }
}

fn kept_elsewhere(elsewhere: &Elsewhere) -> Proof {
    Proof::new(format!("in the executed record {}, {}", elsewhere.reference, elsewhere.place), "")
}

fn listed(proofs: &[Proof], evidence: &Evidence, none: &str) -> ItemState {
    match (proofs.is_empty(), &evidence.elsewhere, &evidence.record) {
        (false, _, _) => ItemState::Present(proofs.to_vec()),
        (true, Some(elsewhere), None) => ItemState::Present(vec![kept_elsewhere(elsewhere)]),
        _ => open(none, true),
    }
}

fn yields(record: &ExecutedRecord) -> Result<String, String> {
    match (record.phases, record.yields, record.checked_yields) {
        (0, _, _) => Err("The master record states no theoretical yield.".to_string()),
        (phases, yields, _) if yields < phases => {
            Err(format!("{} of {phases} phases have no yield yet. Work it out.", phases - yields))
        }
        (phases, _, checked) if checked < phases => {
            Err(format!("{} of {phases} yields are not checked by a second person.", phases - checked))
        }
        (phases, _, _) => Ok(format!("yields of {phases} phases, checked")),
    }
}

fn settled(found: &[Settled], none: ItemState, why_open: &str) -> ItemState {
    let proof = |one: &Settled| Proof::new(one.words.clone(), one.path.clone());
    let waiting: Vec<&Settled> = found.iter().filter(|one| !one.is_settled).collect();
    match (found.is_empty(), waiting.is_empty()) {
        (true, _) => none,
        (false, true) => ItemState::Present(found.iter().map(proof).collect()),
        (false, false) => ItemState::Missing {
            why: why_open.to_string(),
            proofs: waiting.into_iter().map(proof).collect(),
            may_be_answered: false,
        },
    }
}

fn results(evidence: &Evidence) -> ItemState {
    let none = open("No sample was received for release. Receive one and have it tested.", false);
    let state = settled(&evidence.samples, none, "These samples are not reviewed and signed yet.");
    match (state, &evidence.record) {
        (ItemState::Present(mut proofs), Some(record)) if record.values > 0 => {
            proofs.push(Proof::new(
                format!("record {}: {} values", record.number, record.values),
                &record.path,
            ));
            ItemState::Present(proofs)
        }
        (state, _) => state,
    }
}

fn labels(evidence: &Evidence) -> ItemState {
    let proof = |one: &Packed| Proof::new(one.name.clone(), one.path.clone());
    let unchecked: Vec<Proof> = evidence.packaging.iter().filter(|one| !one.is_checked).map(proof).collect();
    if !unchecked.is_empty() {
        let why = "These counts are not reconciled and checked by a second person yet.".to_string();
        return ItemState::Missing { why, proofs: unchecked, may_be_answered: false };
    }
    let labels: Vec<Proof> = evidence.packaging.iter().filter(|one| one.is_label).map(proof).collect();
    match (labels.is_empty(), evidence.files, &evidence.elsewhere, &evidence.record) {
        (true, _, Some(elsewhere), None) => ItemState::Present(vec![kept_elsewhere(elsewhere)]),
        (true, ..) => open("No label is counted for this lot. Count what was issued and used.", true),
        (false, 0, ..) => ItemState::Missing {
            why: "No specimen of the label is attached to the lot. Attach a photo or a copy.".to_string(),
            proofs: labels,
            may_be_answered: true,
        },
        (false, files, ..) => {
            let specimens = Proof::new(format!("{files} files with specimens"), &evidence.lot_path);
            ItemState::Present(labels.into_iter().chain([specimens]).collect())
        }
    }
}

fn containers(evidence: &Evidence) -> ItemState {
    match evidence.container_closure.trim() {
        "" => open("The lot does not say in which container and closure it is.", false),
        words => ItemState::Present(vec![Proof::new(words, &evidence.lot_path)]),
    }
}

fn sampling(evidence: &Evidence) -> ItemState {
    let mut proofs: Vec<Proof> =
        evidence.samples.iter().map(|one| Proof::new(one.words.clone(), one.path.clone())).collect();
    if let Some(record) = evidence.record.as_ref().filter(|record| record.samplings > 0) {
        proofs.push(Proof::new(
            format!("record {}: {} sampling steps", record.number, record.samplings),
            &record.path,
        ));
    }
    match proofs.is_empty() {
        true => open("No sampling is recorded. Receive the samples that were taken.", true),
        false => ItemState::Present(proofs),
    }
}

fn investigations(evidence: &Evidence) -> ItemState {
    let none = ItemState::NotApplicable("No deviation and no investigation was opened.".to_string());
    settled(&evidence.investigations, none, "These are open. QA closes them first.")
}

#[cfg(test)]
mod tests;
