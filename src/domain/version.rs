//! Versions of definitions: a draft is written, its author signs, a second person approves, and it is frozen.

use super::act::Act;
use serde_json::Value;

use super::refusal::NamedReason;
use super::signature::SignatureRefusal;
use super::subject::Kind;

/// The kinds of definition that come in versions.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Versioned {
    Formulation,
    Method,
    Specification,
    Protocol,
}

impl Versioned {
    pub fn kind(self) -> Kind {
        match self {
            Versioned::Formulation => Kind::FormulationVersion,
            Versioned::Method => Kind::MethodVersion,
            Versioned::Specification => Kind::SpecificationVersion,
            Versioned::Protocol => Kind::ProtocolVersion,
        }
    }

    /// The act of writing a version; its author signs by the same act, except a formulation's.
    pub fn draft_act(self) -> Act {
        match self {
            Versioned::Formulation => Act::DraftFormulationVersion,
            Versioned::Method => Act::DraftMethodVersion,
            Versioned::Specification => Act::DraftSpecificationVersion,
            Versioned::Protocol => Act::DraftProtocolVersion,
        }
    }

    /// The act of approving a version, and of signing a formulation version as its author.
    pub fn sign_act(self) -> Act {
        match self {
            Versioned::Formulation => Act::SignFormulationVersion,
            Versioned::Method => Act::ApproveMethodVersion,
            Versioned::Specification => Act::ApproveSpecificationVersion,
            Versioned::Protocol => Act::ApproveProtocolVersion,
        }
    }

    /// The definition the versions belong to.
    pub fn parent(self) -> Kind {
        match self {
            Versioned::Formulation => Kind::Formulation,
            Versioned::Method => Kind::Method,
            Versioned::Specification => Kind::Specification,
            Versioned::Protocol => Kind::Protocol,
        }
    }
}

/// Where a version stands; a query over its signatures, never a column.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum VersionState {
    Draft,
    SignedByAuthor,
    Approved,
    /// Came with an imported file: readable, never approved (decision B17).
    Imported,
}

impl VersionState {
    pub fn words(self) -> &'static str {
        match self {
            VersionState::Draft => "draft",
            VersionState::SignedByAuthor => "waiting for approval",
            VersionState::Approved => "approved",
            VersionState::Imported => "imported, not approved here",
        }
    }
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum VersionRefusal {
    #[error("This version is signed and frozen. Write a new version to change anything.")]
    VersionFrozen,
    #[error("There is a draft already, version {0}. Finish or change that one.")]
    DraftOpen(i64),
    #[error("This version is not approved, so nothing can rest on it yet.")]
    VersionNotApproved,
    #[error("This version was imported, not approved here. Nothing that is signed can rest on it.")]
    VersionImported,
}

impl NamedReason for VersionRefusal {}

/// An author may sign only a draft.
pub fn may_sign(state: VersionState) -> Result<(), SignatureRefusal> {
    match state {
        VersionState::Draft => Ok(()),
        _ => Err(SignatureRefusal::AlreadySigned),
    }
}

/// Refuses in this order: no author's signature, approved already, the author approves.
pub fn may_approve(state: VersionState, approver: i64, authors: &[i64]) -> Result<(), SignatureRefusal> {
    match state {
        VersionState::Draft | VersionState::Imported => Err(SignatureRefusal::NotSignedByAuthor),
        VersionState::Approved => Err(SignatureRefusal::AlreadySigned),
        VersionState::SignedByAuthor if authors.contains(&approver) => {
            Err(SignatureRefusal::ApproverIsAuthor(authors.to_vec()))
        }
        VersionState::SignedByAuthor => Ok(()),
    }
}

/// Where two contents differ, in words: what stands in the first, and what in the second.
///
/// `speed rpm: 30` and `speed rpm: 20`; a part that one of them lacks is `none` there.
pub fn differences(first: &str, second: &str) -> (String, String) {
    let Some(found) = parts_that_differ(first, second) else {
        return (first.to_string(), second.to_string());
    };
    if found.is_empty() {
        return ("the same content".to_string(), "the same content".to_string());
    }
    let side =
        |of: fn(&(String, String, String)) -> String| found.iter().map(of).collect::<Vec<_>>().join("; ");
    (side(|(path, one, _)| format!("{path}: {one}")), side(|(path, _, other)| format!("{path}: {other}")))
}

/// The parts in which two contents differ: the way to the part, what stands in the first, what in the second.
/// `None` where one of them is no document.
pub fn parts_that_differ(first: &str, second: &str) -> Option<Vec<(String, String, String)>> {
    let one: Value = serde_json::from_str(first).ok()?;
    let other: Value = serde_json::from_str(second).ok()?;
    let mut found = Vec::new();
    differ(&mut Vec::new(), Some(&one), Some(&other), &mut found);
    Some(found)
}

fn differ(
    path: &mut Vec<String>,
    one: Option<&Value>,
    other: Option<&Value>,
    found: &mut Vec<(String, String, String)>,
) {
    if one == other {
        return;
    }
    let mut keys: Vec<String> = Vec::new();
    for value in [one, other].into_iter().flatten() {
        match value {
            Value::Object(fields) => keys.extend(fields.keys().cloned()),
            Value::Array(items) => keys.extend((1..=items.len()).map(|number| number.to_string())),
            _ => {}
        }
    }
    keys.sort_by_key(|key| (key.parse::<usize>().unwrap_or(0), key.clone()));
    keys.dedup();
    if keys.is_empty() {
        found.push((path.join(", "), leaf(one), leaf(other)));
        return;
    }
    for key in keys {
        path.push(key.replace(['_', '-'], " "));
        differ(path, part(one, &key), part(other, &key), found);
        path.pop();
    }
}

fn part<'a>(value: Option<&'a Value>, key: &str) -> Option<&'a Value> {
    match value? {
        Value::Object(fields) => fields.get(key),
        Value::Array(items) => items.get(key.parse::<usize>().ok()?.checked_sub(1)?),
        _ => None,
    }
}

fn leaf(value: Option<&Value>) -> String {
    match value {
        None | Some(Value::Null) => "none".to_string(),
        Some(Value::String(text)) => text.clone(),
        Some(Value::Bool(is_so)) => if *is_so { "yes" } else { "no" }.to_string(),
        Some(Value::Array(_) | Value::Object(_)) => "other parts".to_string(),
        Some(Value::Number(number)) => number.to_string(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn approval_needs_the_author_first_and_a_second_person() {
        let table = [
            (VersionState::Draft, 2, Err(SignatureRefusal::NotSignedByAuthor)),
            (VersionState::Approved, 2, Err(SignatureRefusal::AlreadySigned)),
            (VersionState::SignedByAuthor, 1, Err(SignatureRefusal::ApproverIsAuthor(vec![1]))),
            (VersionState::SignedByAuthor, 2, Ok(())),
            (VersionState::Imported, 2, Err(SignatureRefusal::NotSignedByAuthor)),
        ];
        for (state, approver, expected) in table {
            assert_eq!(may_approve(state, approver, &[1]), expected, "{state:?} by {approver}");
        }
    }

    #[test]
    fn two_contents_differ_in_words() {
        let table = [
            (r#"{"speed_rpm":"30","a":1}"#, r#"{"speed_rpm":"20","a":1}"#, "speed rpm: 30", "speed rpm: 20"),
            (
                r#"{"list":[1,2]}"#,
                r#"{"list":[1,3,4]}"#,
                "list, 2: 2; list, 3: none",
                "list, 2: 3; list, 3: 4",
            ),
            (r#"{"needs_check":true}"#, r#"{"needs_check":null}"#, "needs check: yes", "needs check: none"),
            (r#"{"a":1}"#, r#"{"a":1}"#, "the same content", "the same content"),
            ("not JSON", "{}", "not JSON", "{}"),
        ];
        for (first, second, one, other) in table {
            assert_eq!(differences(first, second), (one.to_string(), other.to_string()));
        }
    }
}
