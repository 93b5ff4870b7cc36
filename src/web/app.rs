//! What every request needs: the database, the secrets, the site, and the clock that was handed in.

use std::path::PathBuf;
use std::sync::Arc;

use chrono::{DateTime, Utc};

use super::guard::ClockGuard;
use crate::acts::secret::Secrets;
use crate::domain::moment::Moment;
use crate::store::door::Db;
use crate::store::site::Site;

/// The clock of the running program; tests hand in their own.
pub type Clock = Arc<dyn Fn() -> DateTime<Utc> + Send + Sync>;

/// The running program.
pub struct App {
    pub db: Db,
    pub secrets: Secrets,
    pub site: Site,
    pub clock: Clock,
    /// Watches the computer's own clock; `None` where the clock was handed in.
    pub guard: Option<ClockGuard>,
    /// The data folder; attachments live in its `files`.
    pub folder: PathBuf,
    /// The address people type, such as `https://stability.example`: what `Origin` is compared with.
    pub public_origin: String,
    /// Invented people that the sign-in page of a demo offers: user name, full name, roles, password.
    pub demo_people: Vec<DemoPerson>,
}

/// An invented person whose password the demo shows.
#[derive(Clone, Debug)]
pub struct DemoPerson {
    pub user_name: String,
    pub full_name: String,
    pub roles: String,
    pub password: String,
}

impl App {
    pub fn now(&self) -> Moment {
        Moment::new((self.clock)(), self.site.zone)
    }
}
