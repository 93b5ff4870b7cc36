//! `supernate demo`: a fresh data folder with the invented site, made through the acts, then served.

mod bench;
mod definition;
mod lot;
mod making;
mod master;
mod method;
mod player;
mod pull;
mod reading;
pub mod seed;
mod stock;

use std::net::SocketAddr;
use std::path::PathBuf;

use player::{Player, Scene};
use seed::Seed;

use super::{folder, listen, serve};
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

/// The demo begins so many days before today.
const FIRST_DAY_DAYS_AGO: i64 = 1200;

/// Every demo person has this password; it is shown on the sign-in page.
pub(in crate::cli) const PASSWORD: &str = "quiet mill pond herons";

pub fn run(arguments: &Arguments) -> Result<(), Failure> {
    if !arguments.listen.ip().is_loopback() {
        return Err(Failure::Held("The demo serves only this machine. Listen on 127.0.0.1.".to_string()));
    }
    listen::is_free(arguments.listen)?;
    clear(&arguments.data)?;
    let (opened, site, people) = make(&arguments.data, chrono::Utc::now())?;
    serve::serve(opened, site, arguments.listen, None, people.clone(), |address| tell(address, &people))
}

/// Makes the demo in a fresh folder, as it stands at an instant: its site, its people and the whole scenario.
pub fn make(
    path: &std::path::Path,
    now: chrono::DateTime<chrono::Utc>,
) -> Result<(folder::Folder, Site, Vec<DemoPerson>), Failure> {
    let mut opened = folder::open(path, Durability::Off)?;
    let site = Site {
        name: "Tarnwick Suspension Works".to_string(),
        zone: chrono_tz::Europe::London,
        is_demo: true,
    };
    let console = Actor::console(Moment::new(now, site.zone));
    acts::site::set_up(&opened.db, &console, &site)?;
    opened.secrets.cost = HashCost::Demo;
    let seed = Seed::read()?;
    let people = make_people(&opened, &seed, &console)?;
    play(&opened, &seed, Moment::new(now, site.zone))?;
    opened.db.settle()?;
    Ok((opened, site, people))
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

fn make_people(opened: &folder::Folder, seed: &Seed, console: &Actor) -> Result<Vec<DemoPerson>, Failure> {
    let mut shown = Vec::new();
    for row in &seed.people {
        let new = NewPerson {
            user_name: row.user_name.clone(),
            full_name: row.full_name.clone(),
            identity_verified_by: "invented person".to_string(),
            roles: row.roles.split('+').filter_map(Role::from_code).collect(),
        };
        acts::account::create_demo_person(&opened.db, &opened.secrets, console, &new, PASSWORD)?;
        shown.push(DemoPerson {
            user_name: row.user_name.clone(),
            full_name: row.full_name.clone(),
            roles: row.roles.replace('+', ", "),
            password: PASSWORD.to_string(),
        });
    }
    Ok(shown)
}

/// Definitions first, then lots as they were made, then whatever follows from them.
fn play(opened: &folder::Folder, seed: &Seed, now: Moment) -> Result<(), Failure> {
    let mut player = Player::new(&opened.db, &opened.secrets, seed, now)?;
    player.begin(player.days_ago(FIRST_DAY_DAYS_AGO));
    player.make_definitions()?;
    for (at, lot) in seed.lots.iter().enumerate() {
        // The early shift; the lot that is still in the making was begun late.
        let hour = if lot.making == "half" { 16 } else { 4 };
        player.plan(player.days_ago(lot.made_days_ago), hour, 30, Scene::MakeLot(at));
    }
    for year in 1..=3 {
        player.plan(player.days_ago(FIRST_DAY_DAYS_AGO - 365 * year), 8, 0, Scene::YearlyCare);
    }
    player.play()?;
    // Today's checks are done, so that readings can begin.
    player.now = now.plus_minutes(-5);
    player.check_floor_balance()?;
    player.daily_checks("rafe.tolland")
}

#[allow(clippy::print_stdout)]
fn tell(address: &str, people: &[DemoPerson]) {
    println!("Open {address} in a browser; one press signs in. People, all with the password “{PASSWORD}”:");
    for person in people {
        println!("  {:<16} {:<16} {}", person.user_name, person.full_name, person.roles);
    }
}
