//! `supernate serve`: the program for real use.

use std::net::SocketAddr;
use std::path::PathBuf;
use std::sync::Arc;

use chrono::Utc;

use super::{folder, listen};
use crate::acts;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::moment::Moment;
use crate::store;
use crate::store::door::Durability;
use crate::store::site::Site;
use crate::web::app::App;
use crate::web::guard::ClockGuard;

/// Serves a data folder.
///
/// Without people in the folder it prints a one-time code for the first administrator.
#[derive(clap::Args)]
pub struct Arguments {
    /// The data folder; made when it does not exist
    #[arg(long, default_value = "data")]
    data: PathBuf,
    /// The address to listen on; put a proxy with TLS before it for anything but this machine
    #[arg(long, default_value = "127.0.0.1:8350")]
    listen: SocketAddr,
    /// The address people type, such as https://stability.example; default: http:// and the listen address
    #[arg(long)]
    origin: Option<String>,
    /// The name of the site, for a new data folder
    #[arg(long, default_value = "Our site")]
    site_name: String,
    /// The site's time zone, for a new data folder
    #[arg(long, default_value = "Europe/London")]
    zone: chrono_tz::Tz,
}

/// Opens the folder and serves it until stopped.
#[allow(clippy::print_stdout)]
pub fn run(arguments: &Arguments) -> Result<(), Failure> {
    let mut opened = folder::open(&arguments.data, Durability::Full)?;
    if opened.site.is_none() {
        let site = Site { name: arguments.site_name.clone(), zone: arguments.zone, is_demo: false };
        acts::site::set_up(&opened.db, &Actor::console(Moment::new(Utc::now(), site.zone)), &site)?;
        opened.site = Some(site);
    }
    let Some(site) = opened.site.clone() else { return Err(Failure::missing("site")) };
    if site.is_demo && !arguments.listen.ip().is_loopback() {
        return Err(Failure::Held(
            "This data folder is a demo: it serves only this machine. Listen on 127.0.0.1.".to_string(),
        ));
    }
    let console = Actor::console(Moment::new(Utc::now(), site.zone));
    if !opened.db.read(store::account::has_people)? {
        let code = acts::account::issue_first_code(&opened.db, &console)?;
        println!("Code for the first administrator (one hour, one use): {code}");
    }
    if !arguments.listen.ip().is_loopback() && !is_https(arguments) {
        println!(
            "Without TLS a browser on another machine cannot sign in. Put a proxy with TLS before this address \
             and name it with --origin https://…"
        );
    }
    let origin = arguments.origin.clone();
    serve(opened, site, arguments.listen, origin, Vec::new(), |_| ())
}

fn is_https(arguments: &Arguments) -> bool {
    arguments.origin.as_ref().is_some_and(|origin| origin.starts_with("https://"))
}

/// Serves an open folder; tells the address once it is bound.
#[allow(clippy::print_stdout)]
pub fn serve(
    opened: folder::Folder,
    site: Site,
    address: SocketAddr,
    origin: Option<String>,
    demo_people: Vec<crate::web::app::DemoPerson>,
    ready: impl FnOnce(&str),
) -> Result<(), Failure> {
    // The port is known only when bound: an address with port 0 is bound once here to choose one.
    let address = chosen(address)?;
    let public_origin = origin.unwrap_or_else(|| format!("http://{address}"));
    let folder::Folder { path, db, secrets, _lock, .. } = opened;
    let shown = public_origin.clone();
    let app = App {
        db,
        secrets,
        site,
        clock: Arc::new(Utc::now),
        guard: Some(ClockGuard::starting(Utc::now(), std::time::Instant::now())),
        folder: path,
        public_origin,
        demo_people,
    };
    listen::run(Arc::new(app), address, |_| {
        println!("Supernate serves {shown}");
        ready(&shown);
    })
}

fn chosen(address: SocketAddr) -> Result<SocketAddr, Failure> {
    if address.port() != 0 {
        return Ok(address);
    }
    Ok(std::net::TcpListener::bind(address)?.local_addr()?)
}
