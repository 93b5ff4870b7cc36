//! The style sheet and the script module, served under an address that holds their digest.

use std::sync::LazyLock;

use super::reply::{Outcome, Reply};
use super::route::{Route, public};
use super::visit::Visit;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;

pub const ROUTES: &[Route] = &[public("/static/{digest}/{name}", file)];

const FILES: [(&str, &str, &str); 4] = [
    ("mark.svg", "image/svg+xml", include_str!("../../templates/static/mark.svg")),
    ("patterns-photo.svg", "image/svg+xml", include_str!("../../templates/static/patterns-photo.svg")),
    ("look.css", "text/css; charset=utf-8", include_str!("../../templates/static/look.css")),
    ("supernate.mjs", "text/javascript; charset=utf-8", include_str!("../../templates/static/supernate.mjs")),
];

static ADDRESSES: LazyLock<Vec<String>> = LazyLock::new(|| {
    let address = |(name, _, text): &(&str, &str, &str)| {
        format!("/static/{}/{name}", &sha256_hex(text.as_bytes())[..16])
    };
    FILES.iter().map(address).collect()
});

/// The address of a file: `/static/<digest>/<name>`, cached for ever; empty for a file that is not there.
pub fn address(name: &str) -> &'static str {
    let found = FILES.iter().zip(ADDRESSES.iter()).find(|((known, _, _), _)| *known == name);
    found.map(|(_, address)| address.as_str()).unwrap_or_default()
}

fn file(visit: &Visit) -> Outcome {
    let name = visit.param("name")?;
    let found = FILES.iter().find(|(known, _, _)| *known == name);
    let (name, media_type, text) = found.ok_or_else(|| Failure::missing("file with this name"))?;
    if address(name) != visit.path {
        return Err(Failure::missing("file with this digest"));
    }
    Ok(Reply::File {
        media_type,
        name: name.to_string(),
        bytes: text.as_bytes().to_vec(),
        is_attachment: false,
    })
}
