//! The routes, as data: `tests/house` reads them.

use super::reply::Outcome;
use super::visit::Visit;
use crate::domain::act::Act;

/// A handler: everything is read from the visit, everything is told by the outcome.
pub type Handler = fn(&Visit) -> Outcome;

/// Who may reach a route at all. What the person may do there is the act's question.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Access {
    /// Without a session: sign-in, redeeming a code, static files, help.
    Public,
    SignedIn,
    /// A signed-in page at the bench: shorter idle time, bench layout.
    Bench,
}

/// One route.
#[derive(Clone, Copy)]
pub struct Route {
    pub path: &'static str,
    pub access: Access,
    /// The acts a POST can do; empty for GET.
    pub acts: &'static [Act],
    pub is_post: bool,
    pub handler: Handler,
}

/// A GET page for signed-in people.
pub const fn get(path: &'static str, handler: Handler) -> Route {
    Route { path, access: Access::SignedIn, acts: &[], is_post: false, handler }
}

/// A GET page for everybody.
pub const fn public(path: &'static str, handler: Handler) -> Route {
    Route { path, access: Access::Public, acts: &[], is_post: false, handler }
}

/// A POST that does one of these acts.
pub const fn post(path: &'static str, acts: &'static [Act], handler: Handler) -> Route {
    Route { path, access: Access::SignedIn, acts, is_post: true, handler }
}

/// A POST without a session.
pub const fn public_post(path: &'static str, acts: &'static [Act], handler: Handler) -> Route {
    Route { path, access: Access::Public, acts, is_post: true, handler }
}

impl Route {
    /// The same route as a bench page.
    pub const fn at_bench(self) -> Route {
        Route { access: Access::Bench, ..self }
    }
}

/// Every route of the program, one noun after the other.
pub fn all() -> Vec<Route> {
    [site_and_definitions(), of_making(), records()].concat()
}

/// People, settings, and what is defined once.
fn site_and_definitions() -> Vec<Route> {
    [
        super::static_file::ROUTES,
        super::session::ROUTES,
        super::home::ROUTES,
        super::account::ROUTES,
        super::setting::ROUTES,
        super::history::ROUTES,
        super::help::ROUTES,
        super::definitions::ROUTES,
        super::product::ROUTES,
        super::material::ROUTES,
        super::formulation::ROUTES,
        super::rack::ROUTES,
        super::master::ROUTES,
        super::method::ROUTES,
        super::specification::ROUTES,
        super::shelf_life::ROUTES,
        super::instrument::ROUTES,
        super::qualification::ROUTES,
        super::stop::ROUTES,
    ]
    .concat()
}

/// Lots and everything that happens to them.
fn records() -> Vec<Route> {
    [
        super::lot::ROUTES,
        super::batch::ROUTES,
        super::lot_decision::ROUTES,
        super::settling::ROUTES,
        super::condition::ROUTES,
        super::chamber::ROUTES,
        super::protocol::ROUTES,
        super::study::ROUTES,
        super::amendment::ROUTES,
        super::evaluation::ROUTES,
        super::conclusion::ROUTES,
        super::container::ROUTES,
        super::pull::ROUTES,
        super::week::ROUTES,
        super::sample::ROUTES,
        super::bench::ROUTES,
        super::reading::ROUTES,
        super::sedimentation::ROUTES,
        super::result::ROUTES,
        super::check::ROUTES,
        super::review::ROUTES,
        super::trend::ROUTES,
        super::suggestion::ROUTES,
        super::investigation::ROUTES,
        super::attachment::ROUTES,
        super::import::ROUTES,
        super::lot_file::ROUTES,
        super::find::ROUTES,
        super::patterns::ROUTES,
    ]
    .concat()
}

/// What lots are made from and in, and what makes them releasable.
fn of_making() -> Vec<Route> {
    [
        super::material_lot::ROUTES,
        super::equipment::ROUTES,
        super::deviation::ROUTES,
        super::label::ROUTES,
        super::packaging::ROUTES,
        super::retain::ROUTES,
        super::completeness::ROUTES,
        super::certificate::ROUTES,
        super::blank_sheet::ROUTES,
    ]
    .concat()
}
