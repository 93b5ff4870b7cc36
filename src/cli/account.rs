//! `supernate account`: people, from the command line.

use std::path::PathBuf;

use super::folder::{self, Folder};
use super::identity::{self, Identity};
use crate::acts;
use crate::domain::account::NewPerson;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::role::Role;
use crate::store;
use crate::store::account::Account;
use crate::store::door::Durability;

/// Lists, creates, disables and enables accounts, and issues codes to set a password
#[derive(clap::Args)]
pub struct Arguments {
    /// The data folder
    #[arg(long, default_value = "data", global = true)]
    data: PathBuf,
    #[command(flatten)]
    identity: Identity,
    #[command(subcommand)]
    work: Work,
}

#[derive(clap::Subcommand)]
enum Work {
    /// Lists all people with their roles
    List,
    /// Creates an account and prints the one-time code with which the person sets a password
    Create {
        /// The user name, never used again
        user_name: String,
        /// The full name, as printed beside signatures
        #[arg(long)]
        full_name: String,
        /// Who saw proof of the person's identity, and how
        #[arg(long)]
        identity_verified_by: String,
        /// A role, such as "analyst" or "QA reviewer"; may be given several times
        #[arg(long = "role", required = true, value_parser = role)]
        roles: Vec<Role>,
    },
    /// Disables an account and ends its sessions
    Disable {
        user_name: String,
        /// Why, in at least ten characters
        #[arg(long)]
        because: String,
    },
    /// Enables an account again
    Enable {
        user_name: String,
        /// Why, in at least ten characters
        #[arg(long)]
        because: String,
    },
    /// Prints a one-time code with which a person sets a new password
    Code {
        user_name: String,
        /// Why, in at least ten characters
        #[arg(long)]
        because: String,
    },
}

fn role(text: &str) -> Result<Role, String> {
    Role::ALL.into_iter().find(|role| role.code().eq_ignore_ascii_case(text)).ok_or_else(|| {
        let known: Vec<&str> = Role::ALL.iter().map(|role| role.code()).collect();
        format!("the roles are {}", known.join(", "))
    })
}

pub fn run(arguments: &Arguments) -> Result<(), Failure> {
    folder::must_exist(&arguments.data)?;
    let opened = folder::open(&arguments.data, Durability::Full)?;
    identity::set_up(&opened)?;
    if matches!(arguments.work, Work::List) {
        return list(&opened);
    }
    let actor = arguments.identity.actor(&opened)?;
    work(&opened, &actor, &arguments.work)
}

#[allow(clippy::print_stdout)]
fn list(opened: &Folder) -> Result<(), Failure> {
    for person in opened.db.read(store::account::people)? {
        let roles: Vec<&str> = person.roles.iter().map(|role| role.code()).collect();
        let state = if person.is_enabled { "enabled" } else { "disabled" };
        println!("{:<20} {:<24} {:<9} {}", person.user_name, person.full_name, state, roles.join(", "));
    }
    Ok(())
}

#[allow(clippy::print_stdout)]
fn work(opened: &Folder, actor: &Actor, work: &Work) -> Result<(), Failure> {
    let db = &opened.db;
    match work {
        Work::List => {}
        Work::Create { user_name, full_name, identity_verified_by, roles } => {
            let new = NewPerson {
                user_name: user_name.clone(),
                full_name: full_name.clone(),
                identity_verified_by: identity_verified_by.clone(),
                roles: roles.clone(),
            };
            let (_, code) = acts::account::create(db, actor, &new)?;
            println!("Code for {full_name} (24 hours, one use): {code}");
        }
        Work::Disable { user_name, because } => {
            let person = person(opened, user_name)?;
            acts::account::set_enabled(db, actor, person.id, false, &Reason::given(because)?)?;
            println!("{} is disabled", person.full_name);
        }
        Work::Enable { user_name, because } => {
            let person = person(opened, user_name)?;
            acts::account::set_enabled(db, actor, person.id, true, &Reason::given(because)?)?;
            println!("{} is enabled", person.full_name);
        }
        Work::Code { user_name, because } => {
            let person = person(opened, user_name)?;
            let code = acts::account::issue_reset_code(db, actor, person.id, &Reason::given(because)?)?;
            println!("Code for {} (24 hours, one use): {code}", person.full_name);
        }
    }
    Ok(())
}

fn person(opened: &Folder, user_name: &str) -> Result<Account, Failure> {
    let found = opened.db.read(|reader| store::account::by_user_name(reader, user_name))?;
    found
        .filter(|account| account.is_person)
        .ok_or_else(|| Failure::missing(format!("person with the user name {user_name}")))
}
