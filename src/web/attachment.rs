//! Photos and files of a record: attaching, downloading, looking, measuring.

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::page::Shell;
use super::part::Trail;
use super::photo::Measurements;
use super::reply::{Outcome, Reply, page_with};
use super::route::{Route, get, post};
use super::show;
use super::visit::Visit;
use crate::acts;
use crate::acts::attachment::NewFile;
use crate::domain::act::Act;
use crate::domain::attachment::MediaType;
use crate::domain::failure::Failure;
use crate::domain::photo::Marks;
use crate::domain::subject::{Kind, Subject};
use crate::domain::typed::NumberRule;
use crate::store;
use crate::store::attachment::Attachment;

pub const ROUTES: &[Route] = &[
    get("/files/{kind}/{subject}", files),
    post("/files/{kind}/{subject}", &[Act::AttachFile], attach),
    get("/attachments/{id}", attachment),
    get("/attachments/{id}/file", download),
    get("/attachments/{id}/preview", preview),
    post("/attachments/{id}/marks", &[Act::MarkPhoto], measure),
];

/// The records that take files, with the address of their pages.
const OF: [(Kind, &str); 6] = [
    (Kind::Sample, "/samples"),
    (Kind::Investigation, "/investigations"),
    (Kind::Lot, "/lots"),
    (Kind::BatchRecord, "/batches"),
    (Kind::Deviation, "/deviations"),
    (Kind::Pull, "/pulls"),
];

/// The files of a record, for its page.
#[derive(Template)]
#[template(path = "attachment/list.html")]
pub struct Files {
    rows: Vec<FileRow>,
    path: String,
    may_attach: bool,
}

impl askama::filters::HtmlSafe for Files {}

struct FileRow {
    id: i64,
    name: String,
    about: String,
    size: String,
    by: String,
    at: String,
}

impl Files {
    pub fn of(visit: &Visit, subject: Subject) -> Result<Files, Failure> {
        let found = visit.read(|reader| store::attachment::of_subject(reader, subject))?;
        let rows = found.into_iter().map(|file| row(file, visit)).collect();
        let path = format!("/files/{}/{}", subject.kind.code(), subject.id);
        Ok(Files { rows, path, may_attach: visit.may(Act::AttachFile) })
    }
}

fn row(file: Attachment, visit: &Visit) -> FileRow {
    FileRow {
        id: file.id,
        size: format!("{} KiB", (file.size_bytes + 1023) / 1024),
        at: show::instant(&file.at, visit.at.zone),
        name: file.file_name,
        about: file.about,
        by: file.by,
    }
}

fn subject(visit: &Visit) -> Result<(Subject, &'static str), Failure> {
    let (kind, id) = (visit.param("kind")?, visit.id("subject")?);
    let found = OF.iter().find(|(known, _)| known.code() == kind);
    let (kind, path) = found.ok_or_else(|| Failure::missing("record of this kind that takes files"))?;
    let is_there = visit.read(|reader| match kind {
        Kind::Sample => store::bench::sample(reader, id).map(|_| ()),
        Kind::Investigation => store::investigation::get(reader, id).map(|_| ()),
        Kind::Lot => store::lot::get(reader, id).map(|_| ()),
        Kind::BatchRecord => store::batch::get(reader, id).map(|_| ()),
        Kind::Deviation => store::deviation::get(reader, id).map(|_| ()),
        _ => store::attachment::has_pull(reader, id),
    });
    is_there.map(|()| (Subject::new(*kind, id), *path))
}

#[derive(Template)]
#[template(path = "attachment/files.html")]
struct FilesPage {
    shell: Shell,
    files: Files,
    form: Option<Form>,
}

fn attach_form(visit: &Visit, subject: Subject) -> Result<Form, Failure> {
    let action = format!("/files/{}/{}", subject.kind.code(), subject.id);
    Ok(Form::new(visit, &action, "Attach it")?
        .field(Field::new("file", "File", Entry::File).hint("PNG or JPEG photo, or PDF, at most 10 MiB."))
        .field(Field::new("about", "What it shows", Entry::Text).hint("Such as: bottle 07, as stored.")))
}

fn files(visit: &Visit) -> Outcome {
    files_page(200, visit, None)
}

fn files_page(status: u16, visit: &Visit, failed: Option<Form>) -> Outcome {
    let (subject, path) = subject(visit)?;
    let mut shell =
        Shell::of(visit, "Photos and files").crumb(format!("{path}/{}", subject.id), subject.kind.words());
    let form = match failed {
        Some(failed) => {
            shell = shell.with_errors(&failed);
            Some(failed)
        }
        None if visit.may(Act::AttachFile) => Some(attach_form(visit, subject)?),
        None => None,
    };
    page_with(status, &FilesPage { shell, files: Files::of(visit, subject)?, form })
}

fn attach(visit: &Visit) -> Outcome {
    let (subject, _) = subject(visit)?;
    form::submit(
        visit,
        attach_form(visit, subject)?,
        |typed| {
            let about = typed.text("about", 200);
            let upload = visit.uploads.iter().find(|upload| upload.field == "file");
            if upload.is_none() {
                typed.fault("file", "No file was chosen. Choose a photo or a PDF.");
            }
            Some((upload?, about?))
        },
        |actor, (upload, about)| {
            let new = NewFile { subject, file_name: &upload.file_name, bytes: &upload.bytes, about };
            acts::attachment::attach(visit.db(), &visit.app.folder, actor, &new)
        },
        |id| format!("/attachments/{id}"),
        |status, form| files_page(status, visit, Some(form)),
    )
}

#[derive(Template)]
#[template(path = "attachment/attachment.html")]
struct AttachmentPage {
    shell: Shell,
    file: FileRow,
    digest: String,
    is_photo: bool,
    measures: Option<Form>,
    measured: Measurements,
    trail: Trail,
}

fn attachment(visit: &Visit) -> Outcome {
    attachment_page(200, visit, visit.id("id")?, None)
}

fn attachment_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let (found, measured, lines) = visit.read(|reader| {
        let found = store::attachment::get(reader, id)?;
        let subject = found.of().unwrap_or(Subject::new(Kind::Site, 1));
        let lines = store::trail::of_subject(reader, subject)?;
        Ok((found, store::attachment::measured(reader, id)?, lines))
    })?;
    let is_photo = MediaType::from_code(&found.media_type).is_some_and(MediaType::is_photo);
    let mut shell = Shell::of(visit, &found.file_name);
    let mut pages = OF.iter().chain(&[(Kind::Method, "/methods")]);
    if let Some((kind, path)) = pages.find(|(kind, _)| kind.code() == found.kind) {
        shell = shell.crumb(format!("{path}/{}", found.subject), kind.words());
    }
    let measures = match failed {
        Some(failed) => {
            shell = shell.with_errors(&failed);
            Some(failed)
        }
        None if is_photo && visit.may(Act::MarkPhoto) => Some(marks_form(visit, id)?),
        None => None,
    };
    let measured = Measurements::of(visit, measured)?;
    let digest = show::digest(&found.sha256);
    let trail = Trail::of(&lines, visit.at.zone);
    let page = AttachmentPage { shell, file: row(found, visit), digest, is_photo, measures, measured, trail };
    page_with(status, &page)
}

const MARKS: [(&str, &str); 3] = [("base", "Base"), ("interface", "Interface"), ("fill", "Fill line")];

fn marks_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    let form = Form::new(visit, &format!("/attachments/{id}/marks"), "Record the three marks")?;
    Ok(MARKS.iter().fold(form, |form, (name, words)| {
        let across = format!("{words}, from the left, 0 to 1");
        let down = format!("{words}, from the top, 0 to 1");
        form.field(Field::new(&format!("{name}.x"), &across, Entry::Decimal).width(8))
            .field(Field::new(&format!("{name}.y"), &down, Entry::Decimal).width(8))
    }))
}

fn measure(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    visit.read(|reader| store::attachment::get(reader, id))?;
    form::submit(
        visit,
        marks_form(visit, id)?,
        typed_marks,
        |actor, marks| acts::attachment::measure(visit.db(), actor, id, &marks),
        |()| format!("/attachments/{id}"),
        |status, form| attachment_page(status, visit, id, Some(form)),
    )
}

/// Heights are needed; the place across is kept where somebody clicked.
fn typed_marks(typed: &mut Typed<'_>) -> Option<Marks> {
    let (mut across, mut heights) = (Vec::new(), Vec::new());
    for (name, words) in MARKS {
        let rule = NumberRule::between(words, 0, 1);
        across.push(typed.maybe_decimal(&format!("{name}.x"), &rule));
        heights.push(typed.decimal(&format!("{name}.y"), &rule).map(|number| number.value));
    }
    let x = |place: usize| across[place].clone().map(|number| number.map(|number| number.value));
    Some(Marks {
        base_y: heights[0]?,
        interface_y: heights[1]?,
        fill_line_y: heights[2]?,
        base_x: x(0)?,
        interface_x: x(1)?,
        fill_line_x: x(2)?,
    })
}

fn download(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let found = visit.read(|reader| store::attachment::get(reader, id))?;
    let bytes = acts::attachment::bytes(&visit.app.folder, &found.sha256)?;
    let media_type = MediaType::from_code(&found.media_type).map(MediaType::code);
    let media_type = media_type.unwrap_or("application/octet-stream");
    Ok(Reply::File { media_type, name: found.file_name, bytes, is_attachment: true })
}

fn preview(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let found = visit.read(|reader| store::attachment::get(reader, id))?;
    let original = acts::attachment::bytes(&visit.app.folder, &found.sha256)?;
    let bytes = acts::attachment::preview(&found.media_type, &original)?;
    Ok(Reply::File { media_type: "image/jpeg", name: "preview.jpg".to_string(), bytes, is_attachment: false })
}
