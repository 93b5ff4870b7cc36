//! Containers on study and their ledger.
