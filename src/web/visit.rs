//! One request, read whole: who, when, which path, which fields.

use std::sync::Arc;

use super::app::App;
use super::pairs::Pairs;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::moment::Moment;
use crate::domain::role::Role;
use crate::store::door::Db;
use crate::store::{Answer, Reader};

/// A file that came with a form.
#[derive(Clone, Debug)]
pub struct Upload {
    pub field: String,
    pub file_name: String,
    pub bytes: Vec<u8>,
}

/// One request.
pub struct Visit {
    pub app: Arc<App>,
    pub at: Moment,
    pub path: String,
    pub params: Vec<(String, String)>,
    pub query: Pairs,
    pub form: Pairs,
    pub uploads: Vec<Upload>,
    pub signed_in: Option<SignedIn>,
    pub theme: Option<String>,
    pub known_browser: Option<String>,
    pub address: Option<String>,
    pub agent: Option<String>,
    /// The script module asks for JSON.
    pub wants_json: bool,
}

/// The session of the request.
#[derive(Clone, Debug)]
pub struct SignedIn {
    pub actor: Actor,
    pub token_digest: String,
    /// What this session's forms carry (sec_S40).
    pub form_token: String,
}

impl Visit {
    /// Who is acting. A public page has nobody.
    pub fn actor(&self) -> Result<&Actor, Failure> {
        self.signed_in.as_ref().map(|signed_in| &signed_in.actor).ok_or(Failure::NoSession)
    }

    pub fn db(&self) -> &Db {
        &self.app.db
    }

    pub fn read<T>(&self, body: impl FnOnce(&Reader<'_>) -> Answer<T>) -> Answer<T> {
        self.app.db.read(body)
    }

    /// A path parameter, such as the `{number}` of `/lots/{number}`.
    pub fn param(&self, name: &str) -> Result<&str, Failure> {
        let found = self.params.iter().find(|(known, _)| known == name);
        found.map(|(_, value)| value.as_str()).ok_or_else(|| Failure::missing("page"))
    }

    /// A path parameter that is a record's number.
    pub fn id(&self, name: &str) -> Result<i64, Failure> {
        self.param(name)?.parse().map_err(|_| Failure::missing("record with this number"))
    }

    /// A page only these roles may open; others get the page that says who may.
    pub fn needs_role(&self, roles: &[Role], act: crate::domain::act::Act) -> Result<&Actor, Failure> {
        let actor = self.actor()?;
        if roles.iter().any(|role| actor.holds(*role)) { Ok(actor) } else { Err(Failure::Denied(act)) }
    }

    /// Whether the person's roles permit an act: asked before a link to it is shown.
    pub fn may(&self, act: crate::domain::act::Act) -> bool {
        self.actor().is_ok_and(|actor| act.role_for(&actor.roles).is_some())
    }

    /// Refuses form fields that a form without boxes does not have (sec_S53).
    pub fn knows_form(&self, known: &[&str]) -> Result<(), Failure> {
        let is_own = |name: &str| known.contains(&name) || name == "form_token" || name == "submission";
        match self.form.iter().find(|(name, _)| !is_own(name)) {
            Some((name, _)) => Err(Failure::BadRequest(format!("This form has no field “{name}”."))),
            None => Ok(()),
        }
    }

    /// Refuses query names the page does not know.
    pub fn knows_query(&self, known: &[&str]) -> Result<(), Failure> {
        match self.query.iter().find(|(name, _)| !known.contains(name)) {
            Some((name, _)) => Err(Failure::BadRequest(format!("This page does not know “{name}”."))),
            None => Ok(()),
        }
    }
}
