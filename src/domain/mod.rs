//! Nouns, values and rules. Nothing here reads a clock, a file, a database or a request.

pub mod account;
pub mod act;
pub mod actor;
pub mod age;
pub mod digest;
pub mod failure;
pub mod formulation;
pub mod method;
pub mod moment;
pub mod password;
pub mod protocol;
pub mod reason;
pub mod refusal;
pub mod role;
pub mod signature;
pub mod specification;
pub mod status;
pub mod subject;
pub mod throttle;
pub mod typed;
pub mod version;
