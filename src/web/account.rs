//! People: the administrator's list, new accounts, roles, disabling; and everybody's own page.

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::page::Shell;
use super::part::Trail;
use super::reply::{Outcome, page, page_with};
use super::route::{Route, get, post};
use super::show;
use super::visit::Visit;
use crate::acts;
use crate::domain::account::NewPerson;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::role::Role;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::account::Account;

pub const ROUTES: &[Route] = &[
    get("/people", list),
    get("/people/new", new_page),
    post("/people/new", &[Act::CreateAccount], create),
    get("/people/{id}", person),
    post("/people/{id}/roles", &[Act::GrantRoles], grant),
    post("/people/{id}/state", &[Act::DisableAccount, Act::EnableAccount], set_state),
    post("/people/{id}/code", &[Act::IssueResetCode], issue_code),
    get("/me", me),
    post("/me/password", &[Act::ChangePassword], change_password),
    post("/me/sessions", &[Act::EndSession], end_session),
];

#[derive(Template)]
#[template(path = "account/list.html")]
struct PeoplePage {
    shell: Shell,
    people: Vec<Row>,
    may_create: bool,
}

struct Row {
    id: i64,
    full_name: String,
    user_name: String,
    roles: String,
    state: &'static str,
}

fn row(account: Account) -> Row {
    let state = match (account.is_enabled, account.password_hash.is_some()) {
        (false, _) => "disabled",
        (true, true) => "enabled",
        (true, false) => "waiting for a first password",
    };
    let roles = account.roles.iter().map(|role| role.code()).collect::<Vec<_>>().join(", ");
    Row { id: account.id, full_name: account.full_name, user_name: account.user_name, roles, state }
}

fn list(visit: &Visit) -> Outcome {
    let people = visit.read(store::account::people)?.into_iter().map(row).collect();
    page(&PeoplePage { shell: Shell::of(visit, "People"), people, may_create: visit.may(Act::CreateAccount) })
}

fn role_fields(form: Form, held: &[Role]) -> Form {
    Role::ALL.iter().fold(form, |form, role| {
        let ticked = if held.contains(role) { "yes" } else { "" };
        form.field(Field::new(&role_field(*role), role.code(), Entry::Tick).value(ticked))
    })
}

fn role_field(role: Role) -> String {
    format!("role.{}", role.code().replace(' ', "-"))
}

fn typed_roles(typed: &Typed<'_>) -> Vec<Role> {
    Role::ALL.into_iter().filter(|role| typed.tick(&role_field(*role))).collect()
}

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    visit.needs_role(&[Role::Administrator], Act::CreateAccount)?;
    let form = Form::new(visit, "/people/new", "Create the account")?
        .field(
            Field::new("user_name", "User name", Entry::Text)
                .width(20)
                .hint("Never used again, also after leaving."),
        )
        .field(Field::new("full_name", "Full name, as printed beside signatures", Entry::Text).width(20))
        .field(Field::new("identity_verified_by", "Who saw proof of identity, and how", Entry::Text))
        .heading("Roles", "Administrator and auditor exclude all other roles.");
    Ok(role_fields(form, &[]))
}

const NEW_LEAD: &str =
    "The person sets a password with a one-time code that is shown once, on the next page.";

fn new_page(visit: &Visit) -> Outcome {
    form::show(visit, "New account", NEW_LEAD, new_form(visit)?)
}

/// A code is shown once, on the answer itself: it is stored only as a digest.
#[derive(Template)]
#[template(path = "account/code.html")]
struct CodePage {
    shell: Shell,
    full_name: String,
    code: String,
}

fn create(visit: &Visit) -> Outcome {
    let mut form = new_form(visit)?;
    form.fill(visit)?;
    let typed = form.reading(visit);
    let new = NewPerson {
        user_name: typed.raw("user_name"),
        full_name: typed.raw("full_name"),
        identity_verified_by: typed.raw("identity_verified_by"),
        roles: typed_roles(&typed),
    };
    match acts::account::create(visit.db(), visit.actor()?, &new) {
        Ok((_, code)) => {
            let shell = Shell::of(visit, "Account created").crumb("/people", "People");
            page(&CodePage { shell, full_name: new.full_name, code })
        }
        Err(Failure::Refused(refusal)) => {
            let field = if refusal.field.as_deref() == Some("roles") {
                Some(role_field(Role::Formulator))
            } else {
                refusal.field
            };
            form.refuse(field.as_deref(), &refusal.sentence);
            let shell = Shell::of(visit, "New account").with_errors(&form);
            page_with(409, &form::FormPage { shell, lead: NEW_LEAD.to_string(), note: String::new(), form })
        }
        Err(other) => Err(other),
    }
}

#[derive(Template)]
#[template(path = "account/person.html")]
struct PersonPage {
    shell: Shell,
    row: Row,
    forms: Vec<(String, Form)>,
    trail: Trail,
}

fn person(visit: &Visit) -> Outcome {
    person_page(200, visit, visit.id("id")?, None)
}

fn person_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let (account, lines) = visit.read(|reader| {
        Ok((
            store::account::get(reader, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Account, id))?,
        ))
    })?;
    let mut shell = Shell::of(visit, &account.full_name).crumb("/people", "People");
    let mut forms = Vec::new();
    if visit.may(Act::GrantRoles) && visit.actor()?.account != id {
        forms.push(("Roles".to_string(), roles_form(visit, &account)?));
        forms.push(("Access".to_string(), state_form(visit, &account)?));
        forms.push(("Password".to_string(), code_form(visit, &account)?));
    }
    if let Some(failed) = failed {
        shell = shell.with_errors(&failed);
        if let Some(place) = forms.iter_mut().find(|(_, form)| form.action == failed.action) {
            place.1 = failed;
        }
    }
    let trail = Trail::of(&lines, visit.at.zone);
    page_with(status, &PersonPage { shell, row: row(account), forms, trail })
}

fn reason_field() -> Field {
    Field::new("reason", "Why", Entry::Text).hint("At least ten characters; it stands in the history.")
}

fn roles_form(visit: &Visit, account: &Account) -> Result<Form, Failure> {
    let form = Form::new(visit, &format!("/people/{}/roles", account.id), "Change the roles")?;
    Ok(role_fields(form, &account.roles).field(reason_field()))
}

fn state_form(visit: &Visit, account: &Account) -> Result<Form, Failure> {
    let words = if account.is_enabled { "Disable the account" } else { "Enable the account" };
    let wanted = if account.is_enabled { "disabled" } else { "enabled" };
    Ok(Form::new(visit, &format!("/people/{}/state", account.id), words)?
        .field(Field { name: "why".to_string(), ..reason_field() })
        .hide("state", wanted)
        .quiet())
}

fn code_form(visit: &Visit, account: &Account) -> Result<Form, Failure> {
    let action = format!("/people/{}/code", account.id);
    Ok(Form::new(visit, &action, "Issue a code to set a new password")?
        .field(Field { name: "because".to_string(), ..reason_field() })
        .quiet())
}

fn grant(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let account = visit.read(|reader| store::account::get(reader, id))?;
    form::submit(
        visit,
        roles_form(visit, &account)?,
        |typed| Some((typed_roles(typed), typed.reason("reason")?)),
        |actor, (roles, reason)| acts::account::grant_roles(visit.db(), actor, id, &roles, &reason),
        |_| format!("/people/{id}"),
        |status, form| person_page(status, visit, id, Some(form)),
    )
}

fn set_state(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let account = visit.read(|reader| store::account::get(reader, id))?;
    let is_enabled = visit.form.get("state") == Some("enabled");
    form::submit(
        visit,
        state_form(visit, &account)?,
        |typed| typed.reason("why"),
        |actor, reason| acts::account::set_enabled(visit.db(), actor, id, is_enabled, &reason),
        |_| format!("/people/{id}"),
        |status, form| person_page(status, visit, id, Some(form)),
    )
}

fn issue_code(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let account = visit.read(|reader| store::account::get(reader, id))?;
    let mut form = code_form(visit, &account)?;
    form.fill(visit)?;
    let Some(reason) = form.reading(visit).reason("because") else {
        return person_page(422, visit, id, Some(form));
    };
    let code = acts::account::issue_reset_code(visit.db(), visit.actor()?, id, &reason)?;
    let shell = Shell::of(visit, "Code issued").crumb("/people", "People");
    page(&CodePage { shell, full_name: account.full_name, code })
}

#[derive(Template)]
#[template(path = "account/me.html")]
struct MePage {
    shell: Shell,
    roles: String,
    form: Form,
    sessions: Vec<SessionRow>,
    form_token: String,
}

struct SessionRow {
    digest: String,
    started: String,
    last_seen: String,
    place: String,
    is_this: bool,
}

fn me(visit: &Visit) -> Outcome {
    me_page(200, visit, password_form(visit)?)
}

fn me_page(status: u16, visit: &Visit, form: Form) -> Outcome {
    let actor = visit.actor()?;
    let own = visit.signed_in.as_ref().map(|at| at.token_digest.clone()).unwrap_or_default();
    let sessions = visit
        .read(|reader| store::session::of_account(reader, actor.account))?
        .into_iter()
        .map(|session| SessionRow {
            started: show::instant(&session.started_at, visit.at.zone),
            last_seen: show::instant(&session.last_seen, visit.at.zone),
            place: session.address.unwrap_or_else(|| "unknown address".to_string()),
            is_this: session.token_digest == own,
            digest: session.token_digest[..8].to_string(),
        })
        .collect();
    let shell = Shell::of(visit, &actor.full_name).with_errors(&form);
    let roles = actor.roles.iter().map(|role| role.code()).collect::<Vec<_>>().join(", ");
    let form_token = shell.form_token.clone();
    page_with(status, &MePage { shell, roles, form, sessions, form_token })
}

fn password_form(visit: &Visit) -> Result<Form, Failure> {
    Ok(Form::new(visit, "/me/password", "Change the password")?
        .field(Field::new("present", "Present password", Entry::Password).width(20))
        .field(
            Field::new("password", "New password", Entry::NewPassword)
                .width(20)
                .hint("At least 15 characters."),
        ))
}

fn change_password(visit: &Visit) -> Outcome {
    let app = &visit.app;
    form::submit(
        visit,
        password_form(visit)?,
        |typed| {
            Some((
                typed.visit.form.get("present")?.to_string(),
                typed.visit.form.get("password")?.to_string(),
            ))
        },
        |actor, (present, wanted)| {
            acts::account::change_password(&app.db, &app.secrets, actor, &present, &wanted)
        },
        |_| "/me".to_string(),
        |status, form| me_page(status, visit, form),
    )
}

fn end_session(visit: &Visit) -> Outcome {
    visit.knows_form(&["session"])?;
    let digest = visit.form.get("session").unwrap_or_default();
    acts::session::end_own(visit.db(), visit.actor()?, digest)?;
    super::reply::see("/me")
}
