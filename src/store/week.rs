//! The lab manager’s week.
