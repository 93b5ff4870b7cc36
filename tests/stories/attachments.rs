//! Photos and files: what is taken, how it is kept and served, and measuring a photo blind.

use axum::body::Body;
use axum::http::{Request, header};
use supernate::domain::method::TestKind;

use crate::benches::at_bench;
use crate::support::{Lab, Person, Seen};

const BOUNDARY: &str = "----------------quiet-mill";

pub fn photo(width: u32, height: u32) -> Vec<u8> {
    let mut bytes = std::io::Cursor::new(Vec::new());
    image::RgbImage::new(width, height).write_to(&mut bytes, image::ImageFormat::Png).unwrap();
    bytes.into_inner()
}

pub fn uploads(person: &Person<'_>, page: &str, name: &str, bytes: &[u8]) -> Seen {
    uploads_with(person, page, name, bytes, ("about", "bottle 07"))
}

/// A file and one more field of the form.
pub fn uploads_with(person: &Person<'_>, page: &str, name: &str, bytes: &[u8], with: (&str, &str)) -> Seen {
    let mut body = Vec::new();
    let (field, value) = with;
    let mut pairs = person.get(page).form(page);
    pairs.retain(|(known, _)| known != field);
    pairs.push((field.to_string(), value.to_string()));
    for (field, value) in pairs {
        let part =
            format!("--{BOUNDARY}\r\nContent-Disposition: form-data; name=\"{field}\"\r\n\r\n{value}\r\n");
        body.extend_from_slice(part.as_bytes());
    }
    let head = format!(
        "--{BOUNDARY}\r\nContent-Disposition: form-data; name=\"file\"; filename=\"{name}\"\r\n\
         Content-Type: application/octet-stream\r\n\r\n"
    );
    body.extend_from_slice(head.as_bytes());
    body.extend_from_slice(bytes);
    body.extend_from_slice(format!("\r\n--{BOUNDARY}--\r\n").as_bytes());
    let request = Request::builder()
        .method("POST")
        .uri(page)
        .header("sec-fetch-site", "same-origin")
        .header(header::CONTENT_TYPE, format!("multipart/form-data; boundary={BOUNDARY}"))
        .header(header::COOKIE, format!("__Host-sid={}", person.token()))
        .body(Body::from(body))
        .unwrap();
    person.lab.send(request)
}

#[test]
fn a_photo_is_kept_as_it_came_and_served_so_that_nothing_runs() {
    let lab = Lab::new();
    let (sample, _, _) = at_bench(&lab, &[TestKind::AsStoredSediment]);
    let page = format!("/files/sample/{sample}");
    let bytes = photo(60, 120);
    let seen = uploads(&lab.analyst(), &page, "bed.png", &bytes);
    assert_eq!((seen.status, seen.location.as_deref()), (303, Some("/attachments/1")), "{}", seen.text());
    lab.auditor().sees(&format!("/samples/{sample}"), "attached a file: bed.png: bottle 07");
    let file = lab.auditor().get("/attachments/1/file");
    assert_eq!(file.body, bytes);
    let of = |name: &str| file.headers.get(name).unwrap().to_str().unwrap().to_string();
    assert!(of("content-disposition").starts_with("attachment; filename=\"bed.png\""));
    assert!(of("content-security-policy").contains("sandbox"));
    assert_eq!(
        (of("content-type").as_str(), of("x-content-type-options").as_str()),
        ("image/png", "nosniff")
    );
    let preview = lab.auditor().get("/attachments/1/preview");
    assert_eq!(preview.headers.get("content-type").unwrap(), "image/jpeg");
    assert!(preview.body.starts_with(b"\xff\xd8\xff"));
    let digest = supernate::domain::digest::sha256_hex(&bytes);
    assert_eq!(std::fs::read(lab.folder.0.join("files").join(&digest)).unwrap(), bytes);
    std::fs::write(lab.folder.0.join("files").join(&digest), b"another").unwrap();
    assert_eq!(lab.auditor().get("/attachments/1/file").status, 503);
}

#[test]
fn what_is_not_a_photo_or_a_pdf_is_refused_by_its_reason() {
    let lab = Lab::new();
    let (sample, _, _) = at_bench(&lab, &[TestKind::AsStoredSediment]);
    let page = format!("/files/sample/{sample}");
    let analyst = lab.analyst();
    let png = photo(4, 4);
    let huge = {
        let mut bytes = photo(4, 4);
        bytes[16..24].copy_from_slice(&[0, 0, 0x40, 0, 0, 0, 0x40, 0]);
        bytes
    };
    let table: [(&str, &[u8], &str); 6] = [
        ("bed.svg", b"<svg onload=\"alert(1)\"/>", "is not a PNG or JPEG photo or a PDF by its content"),
        (
            "page.pdf",
            b"<html><script>alert(1)</script>",
            "is not a PNG or JPEG photo or a PDF by its content",
        ),
        ("bed.html", &png, "another thing by its name"),
        ("bed.png", &png[..20], "cannot be read"),
        ("bed.jpg", b"\xff\xd8\xff\xe0 not a photo", "cannot be read"),
        ("big.png", &huge, "million pixels"),
    ];
    for (name, bytes, words) in table {
        let seen = uploads(&analyst, &page, name, bytes);
        assert_eq!(seen.status, 409, "{name}: {}", seen.text());
        let damaged = seen.text().contains("cannot be read");
        assert!(seen.text().contains(words) || (name == "big.png" && damaged), "{name}: {}", seen.text());
    }
    let none = analyst.submits(&page, &page, &[("about", "nothing")]);
    assert_eq!(none.status, 422);
    assert_eq!(lab.auditor().submits_nothing(&page), 403);
}

impl Person<'_> {
    /// A form this person is not shown, sent all the same.
    fn submits_nothing(&self, page: &str) -> u16 {
        let token = self.get("/me").form("/sign-out")[0].1.clone();
        let seen = uploads_as(self, page, &token);
        seen.status
    }
}

fn uploads_as(person: &Person<'_>, page: &str, token: &str) -> Seen {
    let body = [
        format!("--{BOUNDARY}\r\nContent-Disposition: form-data; name=\"form_token\"\r\n\r\n{token}\r\n"),
        format!("--{BOUNDARY}\r\nContent-Disposition: form-data; name=\"submission\"\r\n\r\nabcdefgh\r\n"),
        format!("--{BOUNDARY}\r\nContent-Disposition: form-data; name=\"about\"\r\n\r\nbottle 07\r\n"),
        format!(
            "--{BOUNDARY}\r\nContent-Disposition: form-data; name=\"file\"; filename=\"bed.png\"\r\n\r\n"
        ),
    ];
    let mut bytes = body.concat().into_bytes();
    bytes.extend_from_slice(&photo(4, 4));
    bytes.extend_from_slice(format!("\r\n--{BOUNDARY}--\r\n").as_bytes());
    let request = Request::builder()
        .method("POST")
        .uri(page)
        .header("sec-fetch-site", "same-origin")
        .header(header::CONTENT_TYPE, format!("multipart/form-data; boundary={BOUNDARY}"))
        .header(header::COOKIE, format!("__Host-sid={}", person.token()))
        .body(Body::from(bytes))
        .unwrap();
    person.lab.send(request)
}

#[test]
fn the_reviewer_measures_the_same_photo_blind() {
    let lab = Lab::new();
    let (sample, _, _) = at_bench(&lab, &[TestKind::AsStoredSediment]);
    uploads(&lab.analyst(), &format!("/files/sample/{sample}"), "bed.png", &photo(60, 120));
    let marks = |base: &'static str, interface: &'static str, fill: &'static str| {
        [("base.y", base), ("interface.y", interface), ("fill.y", fill), ("base.x", "0.5")]
    };
    let (page, action) = ("/attachments/1", "/attachments/1/marks");
    let wrong = lab.analyst().submits(page, action, &marks("0.1", "0.5", "0.9"));
    assert_eq!(wrong.status, 409);
    lab.analyst().does(page, action, &marks("0.9000", "0.5000", "0.1000"));
    let blind = lab.reviewer().sees(page, "Measured already by someone else");
    assert!(!blind.text().contains("0.5000"), "{}", blind.text());
    let both = lab.reviewer().does(page, action, &marks("0.9000", "0.5100", "0.1000"));
    assert!(both.text().contains("0.5000") && both.text().contains("0.4875"), "{}", both.text());
    assert!(both.text().contains("0.5, 0.9000"), "the clicks are kept: {}", both.text());
}

/// The review page shows the photos of its sample, and the first marks only after the reviewer's own.
#[test]
fn the_review_shows_the_photos_and_both_ratios_once_both_are_in() {
    let lab = Lab::new();
    let (sample, _, _) = at_bench(&lab, &[TestKind::AsStoredSediment]);
    uploads(&lab.analyst(), &format!("/files/sample/{sample}"), "bed.png", &photo(60, 120));
    let marks = |interface: &'static str| {
        [("base.y", "0.9000"), ("interface.y", interface), ("fill.y", "0.1000"), ("fill.x", "0.4820")]
    };
    let (review, page, action) = (format!("/review/{sample}"), "/attachments/1", "/attachments/1/marks");
    let bare = lab.reviewer().sees(&review, "bottle 07, by Rafe Tolland");
    assert!(
        bare.html().contains("src=\"/attachments/1/preview\"") && !bare.text().contains("Measured already")
    );
    lab.analyst().does(page, action, &marks("0.5000"));
    let blind = lab.reviewer().sees(&review, "Measured already by someone else");
    assert!(!blind.text().contains("0.5000"), "{}", blind.text());
    lab.auditor().sees(&review, "0.5000 down");
    lab.reviewer().does(page, action, &marks("0.5100"));
    let both = lab.reviewer().sees(&review, "0.4820, 0.1000");
    assert!(both.text().contains("0.5000") && both.text().contains("0.4875"), "{}", both.text());
}
