//! Sign-in, sign-out, one-time codes, and who a request's cookie belongs to.

use askama::Template;

use super::app::DemoPerson;
use super::field::{Entry, Field};
use super::form::{self, Form};
use super::page::Shell;
use super::reply::{Outcome, Reply, page_with};
use super::route::{Access, Route, post, public, public_post};
use super::visit::{SignedIn, Visit};
use crate::acts;
use crate::acts::account::Redemption;
use crate::acts::sign_in::Origin;
use crate::domain::account::NewPerson;
use crate::domain::act::Act;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::moment::Moment;
use crate::domain::role::Role;
use crate::domain::setting::{BENCH_IDLE_MINUTES, IDLE_MINUTES};
use crate::store;

pub const SESSION_COOKIE: &str = "__Host-sid";
/// Says that somebody signed in from this browser before; worth nothing else.
pub const BROWSER_COOKIE: &str = "__Host-browser";
/// The whole length of a session, in minutes.
const WHOLE_MINUTES: i64 = 12 * 60;

pub const ROUTES: &[Route] = &[
    public("/sign-in", sign_in_page),
    public_post("/sign-in", &[Act::SignIn], sign_in),
    post("/sign-out", &[Act::SignOut], sign_out),
    public("/code", code_page),
    public_post("/code", &[Act::SetPasswordByCode], redeem),
];

/// The person behind a session cookie, if the session lives.
pub fn signed_in(
    visit: &Visit,
    token: &str,
    route: Option<Route>,
    is_background: bool,
) -> Result<Option<SignedIn>, Failure> {
    let digest = sha256_hex(token.as_bytes());
    let is_bench = route.is_some_and(|route| route.access == Access::Bench);
    let setting = if is_bench { BENCH_IDLE_MINUTES } else { IDLE_MINUTES };
    let found = visit.read(|reader| {
        let Some(session) = store::session::find(reader, &digest)? else { return Ok(None) };
        let account = store::account::get(reader, session.account)?;
        let idle = setting.value(store::setting::get(reader, setting.name)?.as_deref());
        Ok(Some((session, account, idle)))
    })?;
    let Some((session, account, idle)) = found.filter(|(_, account, _)| account.is_enabled) else {
        return Ok(None);
    };
    if is_older(&session.last_seen, visit.at, idle) || is_older(&session.started_at, visit.at, WHOLE_MINUTES)
    {
        visit.db().housekeeping(|work| store::session::end(work, &digest, visit.at))?;
        return Ok(None);
    }
    if !is_background && is_older(&session.last_seen, visit.at, 1) {
        visit.db().housekeeping(|work| store::session::touch(work, &digest, visit.at))?;
    }
    let mut actor = acts::sign_in::actor_of(&account, visit.at, &digest, visit.address.clone());
    actor.submission = None;
    let random = acts::secret::token()?[..32].to_string();
    let form_token = format!("{random}.{}", visit.app.secrets.keyed(&["form", &digest, &random])?);
    Ok(Some(SignedIn { actor, token_digest: digest, form_token }))
}

fn is_older(stored: &str, now: Moment, minutes: i64) -> bool {
    stored < now.plus_minutes(-minutes).stored().as_str()
}

/// Whether the form carries a token of this session.
pub fn has_form_token(visit: &Visit) -> bool {
    let Some(signed_in) = &visit.signed_in else { return false };
    let Some((random, shown)) = visit.form.get("form_token").and_then(|token| token.split_once('.')) else {
        return false;
    };
    visit.app.secrets.is_keyed(&["form", &signed_in.token_digest, random], shown)
}

/// An auditor's reading is logged.
pub fn log_reading(visit: &Visit) -> Result<(), Failure> {
    match visit.actor() {
        Ok(actor) if actor.holds(Role::Auditor) && !visit.path.starts_with("/static/") => visit
            .db()
            .housekeeping(|work| store::session::log_reading(work, actor.account, &visit.path, visit.at)),
        _ => Ok(()),
    }
}

#[derive(Template)]
#[template(path = "session/sign_in.html")]
struct SignInPage {
    shell: Shell,
    form: Form,
    people: Vec<OneClick>,
    has_people: bool,
}

/// A demo person with a form that signs in at one press.
struct OneClick {
    person: DemoPerson,
}

fn sign_in_form(visit: &Visit) -> Result<Form, Failure> {
    let next = visit.query.get("next").or_else(|| visit.form.get("next")).unwrap_or_default();
    Ok(Form::new(visit, "/sign-in", "Sign in")?
        .field(Field::new("user_name", "User name", Entry::UserName).width(20))
        .field(Field::new("password", "Password", Entry::Password).width(20))
        .hide("next", next))
}

fn show_sign_in(status: u16, visit: &Visit, form: Form) -> Outcome {
    let shell = Shell::of(visit, "Sign in").with_errors(&form);
    let people = visit.app.demo_people.iter().cloned().map(|person| OneClick { person }).collect();
    let has_people = visit.read(store::account::has_people)?;
    page_with(status, &SignInPage { shell, form, people, has_people })
}

fn sign_in_page(visit: &Visit) -> Outcome {
    show_sign_in(200, visit, sign_in_form(visit)?)
}

fn sign_in(visit: &Visit) -> Outcome {
    let mut form = sign_in_form(visit)?;
    form.fill(visit)?;
    let user_name = visit.form.get("user_name").unwrap_or_default().trim();
    let password = visit.form.get("password").unwrap_or_default();
    let origin = Origin {
        address: visit.address.clone(),
        agent: visit.agent.clone(),
        known_browser: visit
            .known_browser
            .as_ref()
            .map(|browser| sha256_hex(browser.as_bytes())[..16].to_string()),
    };
    let app = &visit.app;
    match acts::sign_in::sign_in(&app.db, &app.secrets, visit.at, user_name, password, &origin) {
        Ok((account, token)) => {
            let next = visit.form.get("next").filter(|next| is_own_path(next)).unwrap_or("/");
            // A new session is a new token: whatever the browser held before is worth nothing (sec_S32).
            if let Some(old) = &visit.signed_in {
                visit.db().housekeeping(|work| store::session::end(work, &old.token_digest, visit.at))?;
            }
            let browser = visit.known_browser.clone().map_or_else(acts::secret::token, Ok)?;
            let _ = account;
            Ok(Reply::SeeWithCookie {
                to: next.to_string(),
                cookie: format!(
                    "{SESSION_COOKIE}={token}; Path=/; Secure; HttpOnly; SameSite=Lax\n\
                     {BROWSER_COOKIE}={browser}; Path=/; Secure; HttpOnly; SameSite=Lax; Max-Age=31536000"
                ),
                clears_site_data: false,
            })
        }
        Err(Failure::Refused(refusal)) => {
            form.refuse(refusal.field.as_deref(), &refusal.sentence);
            show_sign_in(409, visit, form)
        }
        Err(other) => Err(other),
    }
}

/// A way back after sign-in: a path of ours and nothing else (sec_S44).
fn is_own_path(next: &str) -> bool {
    let mut letters = next.chars();
    letters.next() == Some('/')
        && !matches!(letters.next(), Some('/' | '\\'))
        && next.chars().all(|c| c.is_ascii_graphic() && c != '\\')
}

fn sign_out(visit: &Visit) -> Outcome {
    visit.knows_form(&[])?;
    if let Some(signed_in) = &visit.signed_in {
        acts::session::sign_out(visit.db(), &signed_in.actor, &signed_in.token_digest)?;
    }
    Ok(Reply::SeeWithCookie {
        to: "/sign-in".to_string(),
        cookie: format!("{SESSION_COOKIE}=; Path=/; Secure; HttpOnly; SameSite=Lax; Max-Age=0"),
        clears_site_data: true,
    })
}

fn code_form(visit: &Visit) -> Result<Form, Failure> {
    let is_first = !visit.read(store::account::has_people)?;
    let mut form = Form::new(visit, "/code", "Set the password")?.field(
        Field::new("code", "One-time code", Entry::Text).hint("From the console or from an administrator."),
    );
    if is_first {
        form = form
            .heading("The first administrator", "This code makes the first account of the site.")
            .field(
                Field::new("user_name", "User name", Entry::UserName).width(20).hint("Such as ilse.brandt."),
            )
            .field(Field::new("full_name", "Full name, as printed beside signatures", Entry::Text).width(20))
            .field(
                Field::new("identity_verified_by", "Who saw proof of your identity, and how", Entry::Text)
                    .width(20),
            );
    }
    Ok(form
        .field(
            Field::new("password", "New password", Entry::NewPassword)
                .width(20)
                .hint("At least 15 characters; a few unrelated words are a good one. Pasting is fine."),
        )
        .field(Field::new("password_again", "The same password again", Entry::NewPassword).width(20)))
}

fn code_page(visit: &Visit) -> Outcome {
    form::show(visit, "Set a password with a code", "", code_form(visit)?)
}

fn redeem(visit: &Visit) -> Outcome {
    let mut form = code_form(visit)?;
    form.fill(visit)?;
    let text = |name: &str| visit.form.get(name).unwrap_or_default().to_string();
    let new = visit.form.get("user_name").map(|user_name| NewPerson {
        user_name: user_name.trim().to_string(),
        full_name: text("full_name"),
        identity_verified_by: text("identity_verified_by"),
        roles: vec![Role::Administrator],
    });
    let wanted = Redemption {
        code: text("code"),
        new,
        password: text("password"),
        password_again: text("password_again"),
    };
    match acts::account::redeem(visit.db(), &visit.app.secrets, visit.at, &wanted) {
        Ok(_) => Ok(Reply::See("/sign-in".to_string())),
        Err(Failure::Refused(refusal)) => {
            form.refuse(refusal.field.as_deref(), &refusal.sentence);
            let shell = Shell::of(visit, "Set a password with a code").with_errors(&form);
            page_with(409, &form::FormPage { shell, lead: String::new(), note: String::new(), form })
        }
        Err(other) => Err(other),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// sec_S44: only a path of ours is a way back.
    #[test]
    fn only_own_paths_lead_back() {
        for good in ["/", "/week", "/lots/TW-104-0617", "/pulls/7/bench?x=1"] {
            assert!(is_own_path(good), "{good}");
        }
        for bad in [
            "",
            "week",
            "//evil.example",
            "/\\evil.example",
            "https://x",
            "/a\\b",
            "/a b",
            "/\r\nx",
            "javascript:x",
        ] {
            assert!(!is_own_path(bad), "{bad}");
        }
    }
}
