//! Pages: a request becomes a [`visit::Visit`], a handler answers with a [`reply::Reply`], a failure has its page.

pub mod account;
pub mod app;
pub mod failure;
pub mod field;
pub mod form;
pub mod headers;
pub mod help;
pub mod history;
pub mod home;
pub mod page;
pub mod pairs;
pub mod part;
pub mod reply;
pub mod route;
pub mod serve;
pub mod session;
pub mod show;
pub mod static_file;
pub mod version;
pub mod visit;
