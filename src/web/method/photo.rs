//! Reference photographs of the grades of a draft.

use super::super::field::{Entry, Field};
use super::super::form::{self, Form};
use super::super::reply::Outcome;
use super::super::visit::Visit;
use super::edit_title;
use crate::acts;
use crate::acts::method::GradePhoto;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::method::{MethodContent, Settings};
use crate::domain::version::{VersionRefusal, VersionState};
use crate::store::method::MethodVersion;

const LEAD: &str = "It is shown at the bench beside the sentence that anchors the grade, and the signatures of this \
     version cover it. Another one for the same grade takes its place; the earlier one stays in the history.";

/// Attribute and grade of each choice, and its words.
fn grades(content: &MethodContent) -> Vec<(String, String, String)> {
    let Settings::Appearance { attributes } = &content.settings else { return Vec::new() };
    let of = |attribute: &crate::domain::method::Attribute| {
        let words = |grade: &crate::domain::method::Grade| {
            let has = if grade.photo.is_some() { " (has one)" } else { "" };
            let words = format!("{}: {}{has}", attribute.title, grade.word);
            (attribute.code.clone(), grade.code.clone(), words)
        };
        attribute.grades.iter().map(words).collect::<Vec<_>>()
    };
    attributes.iter().flat_map(of).collect()
}

fn photo_form(visit: &Visit, id: i64) -> Result<(MethodVersion, Form), Failure> {
    visit.needs_role(&[crate::domain::role::Role::LabManager], Act::DraftMethodVersion)?;
    let (method, version) = super::loaded(visit, id)?;
    if version.state != VersionState::Draft {
        return Err(VersionRefusal::VersionFrozen.into());
    }
    let found = grades(&method.content);
    if found.is_empty() {
        return Err(Failure::missing("grade in this version"));
    }
    let choices = found.into_iter().enumerate().map(|(at, (_, _, words))| ((at + 1).to_string(), words));
    let form = Form::new(visit, &format!("/method-versions/{id}/photos"), "Put it beside the grade")?
        .field(Field::new("grade", "Grade it shows", Entry::Select).choices(choices))
        .field(Field::new("file", "Photograph", Entry::File).hint("PNG or JPEG, at most 10 MiB."));
    Ok((method, form))
}

fn title(method: &MethodVersion) -> String {
    edit_title(method).replace("rewrite the draft", "reference photograph")
}

pub(super) fn page(visit: &Visit) -> Outcome {
    let (method, form) = photo_form(visit, visit.id("id")?)?;
    form::show(visit, &title(&method), LEAD, form)
}

pub(super) fn put(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (method, form) = photo_form(visit, id)?;
    let found = grades(&method.content);
    form::submit_page(
        visit,
        &title(&method),
        LEAD,
        form,
        |typed| {
            let place = typed.choice("grade").and_then(|place| place.parse::<usize>().ok());
            let upload = visit.uploads.iter().find(|upload| upload.field == "file");
            if upload.is_none() {
                typed.fault("file", "No file was chosen. Choose a photo.");
            }
            let (attribute, grade, _) = found.get(place?.checked_sub(1)?)?.clone();
            let upload = upload?;
            let (file_name, bytes) = (upload.file_name.as_str(), upload.bytes.as_slice());
            Some(GradePhoto { version: id, attribute, grade, file_name, bytes })
        },
        |actor, new| acts::method::put_photo(visit.db(), &visit.app.folder, actor, &new),
        |()| format!("/method-versions/{id}"),
    )
}
