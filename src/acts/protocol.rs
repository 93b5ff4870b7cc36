//! Adding a protocol; writing, signing and approving its versions.

use super::version::{self, Written};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::protocol::rules;
use crate::domain::protocol::{PlannedTest, Programme, ProtocolCodeRefusal, ProtocolContent, preset};
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::domain::version::Versioned;
use crate::store;
use crate::store::Reader;
use crate::store::door::{Change, Db};
use crate::store::version::Version;

/// A protocol to be added; its first draft starts from the usual arms of the programme.
#[derive(Clone, Debug)]
pub struct NewProtocol {
    pub presentation: i64,
    pub code: String,
    pub title: String,
    pub programme: Programme,
    pub specification_version: i64,
}

/// Adds a protocol with a first draft: usual arms, every test of the specification at every age.
///
/// Refuses a code that is taken. Answers with the number of the draft.
pub fn add(db: &Db, actor: &Actor, new: &NewProtocol) -> Result<i64, Failure> {
    db.change(actor, Act::DraftProtocolVersion, &Reason::none(), |change| {
        if store::protocol::is_code_taken(change, &new.code)? {
            return Err(ProtocolCodeRefusal::ProtocolCodeTaken(new.code.clone()).into());
        }
        let content = first_content(change, new)?;
        let id = store::protocol::insert(change, new.presentation, &new.code, &new.title)?;
        change.concerns(Kind::Protocol, id)?;
        change.concerns(Kind::Presentation, new.presentation)?;
        let written = Written { reason: "first version".to_string(), content: written(&content)? };
        let draft = version::draft_inside(change, Versioned::Protocol, id, &written)?;
        change.tell(format!("{} with version 1", new.code));
        Ok(draft)
    })
}

/// The canonical text of a content.
pub fn written(content: &ProtocolContent) -> Result<String, Failure> {
    Ok(serde_json::to_string(content)?)
}

fn first_content(reader: &Reader<'_>, new: &NewProtocol) -> Result<ProtocolContent, Failure> {
    let limits = store::specification::content(reader, new.specification_version)?;
    let methods = store::method::approved_versions(reader)?;
    let mut tests = Vec::new();
    for limit in limits.tests {
        // Versions come newest first, so the first of a method is its newest.
        let Some(found) = methods.iter().find(|version| version.method == limit.method) else { continue };
        tests.push((
            found.content.stage,
            PlannedTest {
                test: limit.test,
                title: limit.title,
                method_version: found.id,
                is_information: false,
            },
        ));
    }
    tests.sort_by_key(|(stage, _)| *stage);
    let tests: Vec<PlannedTest> = tests.into_iter().map(|(_, test)| test).collect();
    let conditions = store::protocol::condition_facts(reader)?;
    Ok(ProtocolContent {
        programme: new.programme,
        specification_version: new.specification_version,
        arms: preset::arms(new.programme, &conditions, &tests),
        tests,
        spare_containers: 2,
        retain_containers: 1,
        follow_through_containers: 0,
        why_no_intermediate: None,
        worst_orientation: None,
        trend_promise_percent: None,
    })
}

/// The check before a protocol is signed or approved: no fault of [`rules::faults`].
pub fn content_is_sound(change: &Change<'_>, version: &Version) -> Result<(), Failure> {
    let content: ProtocolContent = version.read()?;
    let protocol = store::protocol::get(change, version.parent)?;
    let facts = store::protocol::facts(change, protocol.presentation, &content)?;
    Ok(rules::may_be_signed(&content, &facts)?)
}
