//! What a handler answers with.

use askama::Template;

use crate::domain::failure::Failure;

/// An answer; `serve` adds the headers.
#[derive(Clone, Debug)]
pub enum Reply {
    Page {
        status: u16,
        html: String,
    },
    /// 303 to a path of ours: every successful POST ends so.
    See(String),
    /// See, and a cookie with it.
    SeeWithCookie {
        to: String,
        cookie: String,
        clears_site_data: bool,
    },
    File {
        media_type: &'static str,
        name: String,
        bytes: Vec<u8>,
        is_attachment: bool,
    },
    /// For the script module only.
    Json {
        status: u16,
        body: serde_json::Value,
    },
}

/// What every handler returns.
pub type Outcome = Result<Reply, Failure>;

/// Renders a page.
pub fn page(template: &impl Template) -> Outcome {
    page_with(200, template)
}

/// Renders a page with another status: 409 or 422 for a form that comes back.
pub fn page_with(status: u16, template: &impl Template) -> Outcome {
    let html = template.render().map_err(Failure::fault)?;
    Ok(Reply::Page { status, html })
}

pub fn see(to: impl Into<String>) -> Outcome {
    Ok(Reply::See(to.into()))
}
