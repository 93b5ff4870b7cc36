//! Weighing, measuring and photographing a container that is never opened.

use std::path::Path;

use super::attachment::{NewFile, attach_inside};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::attachment::{AttachmentRefusal, MediaType};
use crate::domain::container::Purpose;
use crate::domain::failure::Failure;
use crate::domain::follow_through::{FollowFacts, NewObservation, may_observe};
use crate::domain::reason::Reason;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::door::{Change, Db};

/// A photograph that came with an observation: file name and bytes.
pub type Photo<'a> = (&'a str, &'a [u8]);

/// Records an observation; one that is there already is superseded, with its reason. The photo is kept with the pull of
/// its age, at loading with the study.
///
/// Refuses in the order of [`may_observe`], then as [`super::attachment::attach`].
pub fn observe(
    db: &Db,
    folder: &Path,
    actor: &Actor,
    container: i64,
    new: &NewObservation,
    photo: Option<Photo<'_>>,
) -> Result<(), Failure> {
    db.change(actor, Act::RecordContainer, &Reason::stated(new.why.trim()), |change| {
        let found = store::container::get(change, container)?;
        let rows = store::follow_through::of_container(change, container)?;
        let ages = store::follow_through::ages(change, container)?;
        let is_superseded = |id: i64| rows.iter().any(|row| row.supersedes == Some(id));
        let there = rows.iter().find(|row| row.pull == new.pull && !is_superseded(row.id));
        let age =
            new.pull.and_then(|pull| ages.iter().find(|(id, _)| *id == pull)).map(|(_, age)| age.as_str());
        let facts = FollowFacts {
            is_follow_through: found.purpose == Purpose::FollowThrough.words(),
            has_left: found.event.is_some(),
            has_loading: rows.iter().any(|row| row.pull.is_none()),
            is_there: there.is_some(),
            is_pull_of_arm: age.is_some(),
        };
        // A correction of the weight alone keeps the heights that were read.
        let new = &NewObservation {
            bed_top_mm: new.bed_top_mm.or(there.and_then(|row| row.bed_top_mm)),
            fill_line_mm: new.fill_line_mm.or(there.and_then(|row| row.fill_line_mm)),
            ..new.clone()
        };
        may_observe(new, facts)?;
        let when = age.unwrap_or("at loading");
        let subject = match new.pull {
            Some(pull) => Subject::new(Kind::Pull, pull),
            None => Subject::new(Kind::Study, found.study),
        };
        let about = format!("{}, {when}", found.label);
        let kept = photo.map(|photo| keep(change, folder, subject, photo, about)).transpose()?;
        let attachment = kept.or(there.and_then(|row| row.attachment));
        store::follow_through::insert(change, container, new, attachment, there.map(|row| row.id))?;
        change.concerns(Kind::Study, found.study)?;
        change.concerns(Kind::Lot, found.lot)?;
        if let Some(pull) = new.pull {
            change.concerns(Kind::Pull, pull)?;
        }
        let was = there.map(|row| format!(", was {} g", row.weight_g)).unwrap_or_default();
        change.tell(format!("{} {when}: {} g{was}", found.label, new.weight_g));
        Ok(())
    })
}

fn keep(
    change: &Change<'_>,
    folder: &Path,
    subject: Subject,
    (file_name, bytes): Photo<'_>,
    about: String,
) -> Result<i64, Failure> {
    let (id, row) = attach_inside(change, folder, &NewFile { subject, file_name, bytes, about })?;
    if !MediaType::from_code(row.media_type).is_some_and(MediaType::is_photo) {
        return Err(AttachmentRefusal::NotAPhoto.into());
    }
    Ok(id)
}
