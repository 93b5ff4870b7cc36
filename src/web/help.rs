//! Help: what the program is for, what it does not decide, and the keys at the bench.

use askama::Template;

use super::page::Shell;
use super::reply::{Outcome, page};
use super::route::{Route, public};
use super::visit::Visit;

pub const ROUTES: &[Route] = &[public("/help", help)];

#[derive(Template)]
#[template(path = "help.html")]
struct HelpPage {
    shell: Shell,
    version: &'static str,
    sqlite: String,
}

fn help(visit: &Visit) -> Outcome {
    let shell = Shell::of(visit, "Help");
    page(&HelpPage {
        shell,
        version: env!("CARGO_PKG_VERSION"),
        sqlite: crate::store::door::library_version(),
    })
}
