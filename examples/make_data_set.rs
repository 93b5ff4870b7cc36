//! Makes a data folder of invented records for measurements, through the store with triggers and seals.
//!
//! `cargo run --release --example make_data_set -- FOLDER [LOTS]`
//! 5,000 lots are data set S (120 thousand pulls, about 1.2 million readings), 50,000 lots are data set L.

use std::path::PathBuf;
use std::time::Instant;

use chrono::{NaiveDate, Utc};
use supernate::acts;
use supernate::cli::folder;
use supernate::domain::account::NewPerson;
use supernate::domain::act::Act;
use supernate::domain::actor::Actor;
use supernate::domain::failure::Failure;
use supernate::domain::moment::{Moment, plus_days};
use supernate::domain::reason::Reason;
use supernate::domain::role::Role;
use supernate::store::bulk::{self, Written};
use supernate::store::door::Durability;
use supernate::store::site::Site;

/// The invented people of the set; the password is for measurements on the own machine.
const PASSWORD: &str = "quiet mill pond herons";
const PEOPLE: [(&str, &str, Role); 3] = [
    ("maren.oddy", "Maren Oddy", Role::LabManager),
    ("rafe.tolland", "Rafe Tolland", Role::Analyst),
    ("ada.whitlock", "Ada Whitlock", Role::QaReviewer),
];

fn main() -> Result<(), Failure> {
    let mut arguments = std::env::args().skip(1);
    let Some(path) = arguments.next().map(PathBuf::from) else {
        return Err(Failure::Held(
            "Name a folder that does not exist yet, and the number of lots.".to_string(),
        ));
    };
    let lots: u64 = arguments.next().and_then(|text| text.parse().ok()).unwrap_or(5_000);
    if path.exists() {
        return Err(Failure::Held(format!("{} exists. Name a new folder.", path.display())));
    }
    let began = Instant::now();
    let written = make(&path, lots)?;
    println!(
        "{lots} lots, {} pulls, {} readings, {} results in {:.1} s",
        written.pulls,
        written.readings,
        written.results,
        began.elapsed().as_secs_f64()
    );
    Ok(())
}

fn make(path: &std::path::Path, lots: u64) -> Result<Written, Failure> {
    let mut opened = folder::open(path, Durability::Off)?;
    let now = Moment::new(Utc::now(), chrono_tz::Europe::London);
    let console = Actor::console(now);
    let site = Site { name: "Invented site".to_string(), zone: now.zone, is_demo: true };
    acts::site::set_up(&opened.db, &console, &site)?;
    opened.secrets.cost = acts::secret::HashCost::Demo;
    let mut reviewer = 0;
    for (user_name, full_name, role) in PEOPLE {
        let new = NewPerson {
            user_name: user_name.to_string(),
            full_name: full_name.to_string(),
            identity_verified_by: "invented person".to_string(),
            roles: vec![role],
        };
        reviewer = acts::account::create_demo_person(&opened.db, &opened.secrets, &console, &new, PASSWORD)?;
    }
    let has_catalogue =
        opened.db.read(|reader| supernate::store::condition::by_code(reader, "25/60"))?.is_some();
    if !has_catalogue {
        acts::condition::make_catalogue(&opened.db, &console)?;
    }
    let none = Reason::none();
    let ground = opened.db.change(&console, Act::AddProduct, &none, |change| bulk::ground(change))?;
    let today = now.date();
    let mut sum = Written::default();
    for number in 1..=lots {
        let started_on = started_on(today, number);
        let written = opened.db.change(&console, Act::MakeLot, &none, |change| {
            bulk::lot(change, &ground, number, started_on, today)
        })?;
        let signer = (reviewer, "Ada Whitlock");
        opened
            .db
            .change(&console, Act::SignPulls, &none, |change| bulk::sign(change, written.lot, signer))?;
        sum.pulls += written.pulls;
        sum.readings += written.readings;
        sum.results += written.results;
        if number % 500 == 0 {
            eprintln!("{number} lots …");
        }
    }
    opened.db.settle()?;
    Ok(sum)
}

/// Starts are spread evenly over the last three years, so that about the same number of pulls is due each week.
fn started_on(today: NaiveDate, number: u64) -> NaiveDate {
    plus_days(today, -((number * 37 % 1_096) as i64))
}
