//! Rules about accounts.

use super::refusal::NamedReason;
use super::role::{Role, may_hold};

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum AccountRefusal {
    #[error("User names are 2 to 40 letters, digits, points or hyphens, such as ilse.brandt.")]
    UserNameShape,
    #[error("The user name {0} is or was in use. A name is never used again; choose another.")]
    UserNameTaken(String),
    #[error("The full name is empty. Type it as it shall stand beside signatures.")]
    FullNameEmpty,
    #[error("Say who saw proof of the person's identity, and how.")]
    IdentityNotVerified,
    #[error("Choose at least one role. Administrator and auditor exclude all other roles.")]
    RolesExcludeEachOther,
    #[error("You cannot change your own roles or disable yourself. Another administrator can.")]
    OwnAccount,
    #[error("This code is used, expired or unknown. An administrator can issue another.")]
    CodeNotUsable,
    #[error("The two passwords differ. Type the same password twice.")]
    PasswordsDiffer,
    #[error("There is an administrator already; the code for the first one no longer works.")]
    AdministratorExists,
}

impl NamedReason for AccountRefusal {
    fn field(&self) -> Option<String> {
        let field = match self {
            AccountRefusal::UserNameShape | AccountRefusal::UserNameTaken(_) => "user_name",
            AccountRefusal::FullNameEmpty => "full_name",
            AccountRefusal::IdentityNotVerified => "identity_verified_by",
            AccountRefusal::RolesExcludeEachOther => "roles",
            AccountRefusal::CodeNotUsable => "code",
            AccountRefusal::PasswordsDiffer => "password_again",
            AccountRefusal::OwnAccount | AccountRefusal::AdministratorExists => return None,
        };
        Some(field.to_string())
    }
}

/// A person about to get an account.
#[derive(Clone, Debug)]
pub struct NewPerson {
    pub user_name: String,
    pub full_name: String,
    pub identity_verified_by: String,
    pub roles: Vec<Role>,
}

/// Refuses in this order: user name, whether it was ever used, full name, proof of identity, roles.
pub fn may_create(new: &NewPerson, is_taken: bool) -> Result<(), AccountRefusal> {
    let length = new.user_name.chars().count();
    let shape = |c: char| c.is_ascii_alphanumeric() || c == '.' || c == '-';
    if !(2..=40).contains(&length) || !new.user_name.chars().all(shape) {
        return Err(AccountRefusal::UserNameShape);
    }
    if is_taken {
        return Err(AccountRefusal::UserNameTaken(new.user_name.clone()));
    }
    if new.full_name.trim().is_empty() {
        return Err(AccountRefusal::FullNameEmpty);
    }
    if new.identity_verified_by.trim().is_empty() {
        return Err(AccountRefusal::IdentityNotVerified);
    }
    if !may_hold(&new.roles) {
        return Err(AccountRefusal::RolesExcludeEachOther);
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn person() -> NewPerson {
        NewPerson {
            user_name: "ilse.brandt".to_string(),
            full_name: "Ilse Brandt".to_string(),
            identity_verified_by: "M. Oddy, staff card".to_string(),
            roles: vec![Role::Analyst],
        }
    }

    #[test]
    fn reasons_come_in_their_order() {
        let all_wrong = NewPerson {
            user_name: "x".to_string(),
            full_name: String::new(),
            identity_verified_by: String::new(),
            roles: vec![],
        };
        assert_eq!(may_create(&all_wrong, true), Err(AccountRefusal::UserNameShape));
        let named = NewPerson { user_name: "x.y".to_string(), ..all_wrong };
        assert_eq!(may_create(&named, true), Err(AccountRefusal::UserNameTaken("x.y".to_string())));
        assert_eq!(may_create(&named, false), Err(AccountRefusal::FullNameEmpty));
        let full = NewPerson { full_name: "X Y".to_string(), ..named };
        assert_eq!(may_create(&full, false), Err(AccountRefusal::IdentityNotVerified));
        let seen = NewPerson { identity_verified_by: "seen".to_string(), ..full };
        assert_eq!(may_create(&seen, false), Err(AccountRefusal::RolesExcludeEachOther));
        assert_eq!(may_create(&person(), false), Ok(()));
    }
}
