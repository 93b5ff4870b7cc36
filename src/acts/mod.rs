//! What people do, one function per act: load, decide, store. No SQL here, no HTTP, no rule.

pub mod account;
pub mod secret;
pub mod session;
pub mod setting;
pub mod sign_in;
pub mod signature;
pub mod site;
pub mod version;
