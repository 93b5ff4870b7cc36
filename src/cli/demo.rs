//! `supernate demo`: a fresh data folder with the invented site, made through the acts, then served.

use std::net::SocketAddr;
use std::path::PathBuf;

use super::{folder, serve};
use crate::acts;
use crate::acts::secret::HashCost;
use crate::domain::account::NewPerson;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::moment::Moment;
use crate::domain::role::Role;
use crate::store::door::Durability;
use crate::store::site::Site;
use crate::web::app::DemoPerson;

/// Makes a fresh data folder with invented lots and studies, and serves it on this machine.
#[derive(clap::Args)]
pub struct Arguments {
    /// The data folder to make; an earlier demo there is replaced
    #[arg(long, default_value = "demo-data")]
    data: PathBuf,
    /// The address to listen on; only this machine
    #[arg(long, default_value = "127.0.0.1:8351")]
    listen: SocketAddr,
}

/// The invented people: user name, full name, roles.
const PEOPLE: [(&str, &str, &[Role]); 9] = [
    ("nell.farrow", "Nell Farrow", &[Role::Administrator]),
    ("tomas.reyle", "Tomas Reyle", &[Role::Formulator]),
    ("bea.skelton", "Bea Skelton", &[Role::ProductionOperator]),
    ("rafe.tolland", "Rafe Tolland", &[Role::Analyst]),
    ("ilse.brandt", "Ilse Brandt", &[Role::Analyst]),
    ("maren.oddy", "Maren Oddy", &[Role::LabManager]),
    ("ada.whitlock", "Ada Whitlock", &[Role::QaReviewer]),
    ("per.lindqvist", "Per Lindqvist", &[Role::QaReviewer]),
    ("ines.caro", "Ines Caro", &[Role::Auditor]),
];

/// Every demo person has this password; it is shown on the sign-in page.
const PASSWORD: &str = "quiet mill pond herons";

pub fn run(arguments: &Arguments) -> Result<(), Failure> {
    if !arguments.listen.ip().is_loopback() {
        return Err(Failure::Held("The demo serves only this machine. Listen on 127.0.0.1.".to_string()));
    }
    clear(&arguments.data)?;
    let now = chrono::Utc::now();
    let mut opened = folder::open(&arguments.data, Durability::Off)?;
    let site = Site {
        name: "Tarnwick Suspension Works".to_string(),
        zone: chrono_tz::Europe::London,
        is_demo: true,
    };
    let console = Actor::console(Moment::new(now, site.zone));
    acts::site::set_up(&opened.db, &console, &site)?;
    opened.secrets.cost = HashCost::Demo;
    let people = make_people(&opened, &console)?;
    opened.db.settle()?;
    serve::serve(opened, site, arguments.listen, None, people.clone(), |address| tell(address, &people))
}

/// Removes an earlier demo folder; refuses one that is not a demo.
fn clear(path: &std::path::Path) -> Result<(), Failure> {
    if !folder::database_of(path).exists() {
        return Ok(());
    }
    let is_demo = folder::open(path, Durability::Full)?.site.is_some_and(|site| site.is_demo);
    if !is_demo {
        return Err(Failure::Held(format!(
            "{} holds a data folder that is not a demo. Name another with --data.",
            path.display()
        )));
    }
    std::fs::remove_dir_all(path)?;
    Ok(())
}

fn make_people(opened: &folder::Folder, console: &Actor) -> Result<Vec<DemoPerson>, Failure> {
    let mut shown = Vec::new();
    for (user_name, full_name, roles) in PEOPLE {
        let new = NewPerson {
            user_name: user_name.to_string(),
            full_name: full_name.to_string(),
            identity_verified_by: "invented person".to_string(),
            roles: roles.to_vec(),
        };
        acts::account::create_demo_person(&opened.db, &opened.secrets, console, &new, PASSWORD)?;
        shown.push(DemoPerson {
            user_name: user_name.to_string(),
            full_name: full_name.to_string(),
            roles: roles.iter().map(|role| role.code()).collect::<Vec<_>>().join(", "),
            password: PASSWORD.to_string(),
        });
    }
    Ok(shown)
}

#[allow(clippy::print_stdout)]
fn tell(address: &str, people: &[DemoPerson]) {
    println!("Open {address} in a browser; one press signs in. People, all with the password “{PASSWORD}”:");
    for person in people {
        println!("  {:<16} {:<16} {}", person.user_name, person.full_name, person.roles);
    }
}
