//! The seven roles a person can hold, and which of them exclude each other.

/// A role of a person. A person may hold several, but administrator and auditor exclude all others.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Role {
    Formulator,
    ProductionOperator,
    Analyst,
    LabManager,
    QaReviewer,
    Auditor,
    Administrator,
}

impl Role {
    pub const ALL: [Role; 7] = [
        Role::Formulator,
        Role::ProductionOperator,
        Role::Analyst,
        Role::LabManager,
        Role::QaReviewer,
        Role::Auditor,
        Role::Administrator,
    ];

    /// The word stored in the database and used in forms.
    pub fn code(self) -> &'static str {
        match self {
            Role::Formulator => "formulator",
            Role::ProductionOperator => "production operator",
            Role::Analyst => "analyst",
            Role::LabManager => "lab manager",
            Role::QaReviewer => "QA reviewer",
            Role::Auditor => "auditor",
            Role::Administrator => "administrator",
        }
    }

    pub fn from_code(code: &str) -> Option<Role> {
        Role::ALL.into_iter().find(|role| role.code() == code)
    }

    fn stands_alone(self) -> bool {
        matches!(self, Role::Auditor | Role::Administrator)
    }
}

/// Whether one person may hold all of these roles at once. At least one role is needed.
pub fn may_hold(roles: &[Role]) -> bool {
    !roles.is_empty() && (roles.len() == 1 || roles.iter().all(|role| !role.stands_alone()))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn administrator_and_auditor_exclude_all_other_roles() {
        let table: &[(&[Role], bool)] = &[
            (&[], false),
            (&[Role::Analyst], true),
            (&[Role::Administrator], true),
            (&[Role::Analyst, Role::LabManager, Role::QaReviewer], true),
            (&[Role::Analyst, Role::Auditor], false),
            (&[Role::Administrator, Role::QaReviewer], false),
            (&[Role::Administrator, Role::Auditor], false),
        ];
        for (roles, expected) in table {
            assert_eq!(may_hold(roles), *expected, "{roles:?}");
        }
    }

    #[test]
    fn codes_lead_back_to_their_roles() {
        for role in Role::ALL {
            assert_eq!(Role::from_code(role.code()), Some(role));
        }
    }
}
