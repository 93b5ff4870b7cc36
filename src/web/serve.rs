//! From HTTP to a visit and back: the only file that knows axum's requests.

use std::net::SocketAddr;
use std::sync::Arc;

use axum::Router;
use axum::body::Body;
use axum::extract::{FromRequest, Multipart, RawPathParams, Request};
use axum::http::{HeaderMap, HeaderValue, StatusCode, header};
use axum::response::Response;
use axum::routing::MethodFilter;
use axum::routing::{MethodRouter, on};
use tower_http::compression::CompressionLayer;
use tower_http::limit::RequestBodyLimitLayer;

use super::app::App;
use super::pairs::{Pairs, encoded};
use super::reply::Reply;
use super::route::{Access, Route};
use super::session::{self, SESSION_COOKIE};
use super::visit::{Upload, Visit};
use super::{failure, headers};
use crate::domain::actor::Submission;
use crate::domain::digest::Encoder;
use crate::domain::digest::hex;
use crate::domain::failure::Failure;
use crate::store;

/// A form without files, in bytes.
const FORM_LIMIT: usize = 1024 * 1024;
/// A whole request with files, in bytes: one file of 10 MiB and its form.
const UPLOAD_LIMIT: usize = 11 * 1024 * 1024;

/// The client's address, put into the request by the server loop.
#[derive(Clone, Copy)]
pub struct Client(pub SocketAddr);

/// The router of the whole program.
pub fn router(app: Arc<App>) -> Router {
    let mut router = Router::new();
    for route in super::route::all() {
        router = router.route(route.path, method_router(&app, route));
    }
    let lost = Arc::clone(&app);
    router
        .fallback(move |request: Request| {
            let app = Arc::clone(&lost);
            async move { answer(app, None, Vec::new(), request).await }
        })
        .layer(RequestBodyLimitLayer::new(UPLOAD_LIMIT))
        .layer(CompressionLayer::new().gzip(true))
}

fn method_router(app: &Arc<App>, route: Route) -> MethodRouter {
    let app = Arc::clone(app);
    let filter = if route.is_post { MethodFilter::POST } else { MethodFilter::GET };
    on(filter, move |params: RawPathParams, request: Request| {
        let app = Arc::clone(&app);
        let params = params.iter().map(|(name, value)| (name.to_string(), value.to_string())).collect();
        async move { answer(app, Some(route), params, request).await }
    })
}

async fn answer(
    app: Arc<App>,
    route: Option<Route>,
    params: Vec<(String, String)>,
    request: Request,
) -> Response {
    let head = Head::read(&request);
    let is_https = app.public_origin.starts_with("https://");
    let is_static = request.uri().path().starts_with("/static/");
    let reply = match body(request, route).await {
        Ok((form, uploads)) => {
            let job = move || blocking(&app, route, params, head, form, uploads);
            tokio::task::spawn_blocking(job).await.unwrap_or_else(|_| broken())
        }
        Err(failure) => {
            let visit = head.visit(&app, params, Pairs::default(), Vec::new());
            failure::reply(&visit, failure)
        }
    };
    let mut response = response(reply);
    let is_kept = is_static && response.status() == StatusCode::OK;
    headers::secure(response.headers_mut(), is_kept, is_https);
    response
}

/// A handler that panicked: nothing of its act was committed.
fn broken() -> Reply {
    tracing::error!("a handler stopped unexpectedly");
    Reply::Page {
        status: 500,
        html: "<!doctype html><html lang=\"en\"><title>Something broke</title><h1>Something broke</h1>\
               <p>What you sent was not recorded. All that was recorded before is kept.</p>"
            .to_string(),
    }
}

/// What is read from the request line and the headers.
struct Head {
    path: String,
    query: String,
    session: Option<String>,
    browser: Option<String>,
    theme: Option<String>,
    address: Option<String>,
    agent: Option<String>,
    wants_json: bool,
    is_background: bool,
    headers: HeaderMap,
}

impl Head {
    fn read(request: &Request) -> Head {
        let headers = request.headers().clone();
        let text = |name: header::HeaderName| headers.get(name).and_then(|value| value.to_str().ok());
        let cookies = text(header::COOKIE).unwrap_or_default().to_string();
        let cookie = |name: &str| {
            let mut pairs = cookies.split(';').filter_map(|pair| pair.trim().split_once('='));
            pairs.find(|(known, _)| *known == name).map(|(_, value)| value.to_string())
        };
        Head {
            path: request.uri().path().to_string(),
            query: request.uri().query().unwrap_or_default().to_string(),
            session: cookie(SESSION_COOKIE),
            browser: cookie(session::BROWSER_COOKIE),
            theme: cookie("theme").filter(|theme| theme == "dark" || theme == "light"),
            address: request.extensions().get::<Client>().map(|client| client.0.ip().to_string()),
            agent: text(header::USER_AGENT).map(|agent| agent.chars().take(200).collect()),
            wants_json: text(header::ACCEPT).is_some_and(|accept| accept.starts_with("application/json")),
            is_background: headers.contains_key("x-background"),
            headers,
        }
    }

    fn visit(
        &self,
        app: &Arc<App>,
        params: Vec<(String, String)>,
        form: Pairs,
        uploads: Vec<Upload>,
    ) -> Visit {
        Visit {
            app: Arc::clone(app),
            at: app.now(),
            path: self.path.clone(),
            params,
            query: Pairs::default(),
            form,
            uploads,
            signed_in: None,
            theme: self.theme.clone(),
            known_browser: self.browser.clone(),
            address: self.address.clone(),
            agent: self.agent.clone(),
            wants_json: self.wants_json,
        }
    }
}

async fn body(request: Request, route: Option<Route>) -> Result<(Pairs, Vec<Upload>), Failure> {
    if !route.is_some_and(|route| route.is_post) {
        return Ok((Pairs::default(), Vec::new()));
    }
    let too_large =
        || Failure::BadRequest("The request is larger than a form of this page can be.".to_string());
    let media_type = request.headers().get(header::CONTENT_TYPE).and_then(|value| value.to_str().ok());
    match media_type.unwrap_or_default() {
        kind if kind.starts_with("multipart/form-data") => multipart(request).await,
        kind if kind.starts_with("application/x-www-form-urlencoded") => {
            let bytes =
                axum::body::to_bytes(request.into_body(), FORM_LIMIT).await.map_err(|_| too_large())?;
            let text = std::str::from_utf8(&bytes)
                .map_err(|_| Failure::BadRequest("The form holds text that is not UTF-8.".to_string()))?;
            Ok((Pairs::read(text)?, Vec::new()))
        }
        _ => Err(Failure::BadRequest("A form was expected.".to_string())),
    }
}

async fn multipart(request: Request) -> Result<(Pairs, Vec<Upload>), Failure> {
    let unreadable = || {
        Failure::BadRequest(
            "The upload could not be read, or a file is larger than 10 MiB. Send a smaller file.".to_string(),
        )
    };
    let (mut parts, body) = request.into_parts();
    parts.extensions.insert(axum::extract::DefaultBodyLimit::max(UPLOAD_LIMIT));
    let request = Request::from_parts(parts, body);
    let mut reading = Multipart::from_request(request, &()).await.map_err(|_| unreadable())?;
    let (mut pairs, mut uploads) = (Pairs::default(), Vec::new());
    while let Some(part) = reading.next_field().await.map_err(|_| unreadable())? {
        let name = part.name().unwrap_or_default().to_string();
        match part.file_name().map(str::to_string) {
            Some(file_name) => {
                let bytes = part.bytes().await.map_err(|_| unreadable())?.to_vec();
                pairs.add(name.clone(), file_name.clone())?;
                if !bytes.is_empty() {
                    uploads.push(Upload { field: name, file_name, bytes });
                }
            }
            None => pairs.add(name, part.text().await.map_err(|_| unreadable())?)?,
        }
    }
    Ok((pairs, uploads))
}

fn blocking(
    app: &Arc<App>,
    route: Option<Route>,
    params: Vec<(String, String)>,
    head: Head,
    form: Pairs,
    uploads: Vec<Upload>,
) -> Reply {
    let mut visit = head.visit(app, params, form, uploads);
    let outcome = guarded(&mut visit, route, &head);
    outcome.unwrap_or_else(|failure| match failure {
        Failure::NoSession if !visit.wants_json => sign_in_first(&visit, route),
        other => failure::reply(&visit, other),
    })
}

fn sign_in_first(visit: &Visit, route: Option<Route>) -> Reply {
    let is_page = route.is_some_and(|route| !route.is_post) && visit.path != "/";
    Reply::See(if is_page {
        format!("/sign-in?next={}", encoded(&visit.path))
    } else {
        "/sign-in".to_string()
    })
}

/// What still works while writes are held for the clock: signing in and out, and confirming it.
const MAY_GO_ON: [&str; 3] = ["/sign-in", "/sign-out", "/settings/clock"];

/// Session, origin, form token, roles and submission key, in this order; then the handler.
fn guarded(visit: &mut Visit, route: Option<Route>, head: &Head) -> Result<Reply, Failure> {
    visit.query = Pairs::read(&head.query)?;
    if let Some(token) = &head.session {
        visit.signed_in = session::signed_in(visit, token, route, head.is_background)?;
    }
    let Some(route) = route else {
        visit.actor()?;
        return Err(Failure::missing("page at this address"));
    };
    if route.access != Access::Public {
        visit.actor()?;
    }
    if !route.is_post {
        session::log_reading(visit)?;
        return (route.handler)(visit);
    }
    if !headers::is_from_our_pages(&head.headers, &visit.app.public_origin) {
        return Err(Failure::BadRequest("This form did not come from a page of this program.".to_string()));
    }
    if route.access != Access::Public && !session::has_form_token(visit) {
        return Err(Failure::BadRequest("This form is of another session. Open the page again.".to_string()));
    }
    if let Some(guard) = visit.app.guard.as_ref().filter(|_| !MAY_GO_ON.contains(&route.path)) {
        guard.may_write(visit.at.utc, std::time::Instant::now())?;
    }
    if let Ok(actor) = visit.actor() {
        visit.app.db.permits(actor, route.acts)?;
    }
    match repeated(visit)? {
        Some(reply) => Ok(reply),
        None => first(visit, route),
    }
}

/// Runs the handler and remembers where a successful submit led.
fn first(visit: &mut Visit, route: Route) -> Result<Reply, Failure> {
    let key = visit.form.get("submission").map(str::to_string);
    let digest = content_digest(visit);
    if let (Some(signed_in), Some(key)) = (visit.signed_in.as_mut(), &key) {
        signed_in.actor.submission =
            Some(Submission { key: key.clone(), content_digest: digest, is_claimed: Arc::default() });
    }
    let outcome = (route.handler)(visit);
    if let Err(Failure::Repeated) = outcome {
        // The same submit at the same moment: the other one has just committed.
        return repeated(visit)?.ok_or(Failure::Repeated);
    }
    let kept = match &outcome {
        Ok(Reply::See(to)) => Some(to.clone()),
        Ok(Reply::Json { status: 200, body }) => Some(format!("{KEPT_JSON}{body}")),
        _ => None,
    };
    if let (Some(kept), Some(key)) = (kept, &key) {
        visit.app.db.housekeeping(|work| store::submission::remember_location(work, key, &kept))?;
    }
    outcome
}

/// Marks a kept answer that was JSON and not a place to go to.
const KEPT_JSON: &str = "json:";

/// The answer of the first submit under this key, if there was one.
fn repeated(visit: &Visit) -> Result<Option<Reply>, Failure> {
    let (Ok(actor), Some(key)) = (visit.actor(), visit.form.get("submission")) else { return Ok(None) };
    let known = visit.read(|reader| store::submission::answered(reader, actor.account, key))?;
    let Some(known) = known else { return Ok(None) };
    if known.content_digest != content_digest(visit) {
        return Err(Failure::RepeatedOtherwise);
    }
    let kept = known.location.unwrap_or_else(|| format!("/history/{}", known.act));
    match kept.strip_prefix(KEPT_JSON) {
        Some(json) => Ok(Some(Reply::Json { status: 200, body: serde_json::from_str(json)? })),
        None if visit.wants_json => {
            // Committed, but the answer was lost with the process: a fresh key, so that work can go on.
            let submission = crate::acts::secret::token()?;
            let saved = visit.at.clock_shown();
            let mut body = serde_json::json!({ "saved": saved, "hints": [], "submission": submission });
            if let Some(newest) = visit.read(|reader| store::reading::newest_of_act(reader, known.act))? {
                body["version"] = newest.to_string().into();
            }
            Ok(Some(Reply::Json { status: 200, body }))
        }
        None => Ok(Some(Reply::See(kept))),
    }
}

fn content_digest(visit: &Visit) -> String {
    let mut encoder = Encoder::new();
    encoder.text(&visit.path);
    for (name, value) in
        visit.form.iter().filter(|(name, _)| !["form_token", "submission", "password"].contains(name))
    {
        encoder.text(name).text(value);
    }
    for upload in &visit.uploads {
        encoder.text(&upload.field).blob(&upload.bytes);
    }
    hex(&encoder.digest())
}

fn response(reply: Reply) -> Response {
    let mut builder = Response::builder();
    let (body, media_type) = match reply {
        Reply::Page { status, html } => {
            builder = builder.status(status);
            (Body::from(html), "text/html; charset=utf-8")
        }
        Reply::See(to) => {
            builder = builder.status(303).header(header::LOCATION, to);
            (Body::empty(), "text/html; charset=utf-8")
        }
        Reply::SeeWithCookie { to, cookie, clears_site_data } => {
            builder = builder.status(303).header(header::LOCATION, to);
            for line in cookie.lines() {
                builder = builder.header(header::SET_COOKIE, line);
            }
            if clears_site_data {
                builder = builder.header("clear-site-data", "\"cache\", \"storage\"");
            }
            (Body::empty(), "text/html; charset=utf-8")
        }
        Reply::File { media_type, name, bytes, is_attachment } => {
            if is_attachment {
                builder = builder
                    .header(header::CONTENT_DISPOSITION, disposition(&name))
                    .header(header::CONTENT_SECURITY_POLICY, "sandbox; default-src 'none'");
            }
            (Body::from(bytes), media_type)
        }
        Reply::Json { status, body } => {
            builder = builder.status(status);
            (Body::from(body.to_string()), "application/json")
        }
    };
    let built = builder.header(header::CONTENT_TYPE, HeaderValue::from_static(media_type)).body(body);
    built.unwrap_or_else(|_| {
        let mut response = Response::new(Body::empty());
        *response.status_mut() = StatusCode::INTERNAL_SERVER_ERROR;
        response
    })
}

/// A download name after RFC 6266: plain letters for old programs, all of it percent-encoded for the rest.
fn disposition(name: &str) -> String {
    let is_plain = |c: char| c.is_ascii_alphanumeric() || "-_. ".contains(c);
    let plain: String = name.chars().map(|c| if is_plain(c) { c } else { '_' }).collect();
    format!("attachment; filename=\"{plain}\"; filename*=UTF-8''{}", encoded(name))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// ASVS 5.4.2: names cannot split a header or leave their place.
    #[test]
    fn a_download_name_stays_inside_its_header() {
        for name in ["../../x", "a\r\nset-cookie: b", "“quoted”\".pdf", "\u{202e}fdp.exe", &"n".repeat(300)]
        {
            let text = disposition(name);
            assert!(HeaderValue::from_str(&text).is_ok(), "{text}");
            assert!(!text.contains("/") && !text.contains('\r'), "{text}");
        }
    }
}
