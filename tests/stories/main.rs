//! Stories: what people do, through the router.

#![allow(clippy::unwrap_used, clippy::expect_used)]

#[path = "../support/mod.rs"]
mod support;

mod amendments;
mod appearances;
mod attachments;
mod backups;
mod batches;
mod benches;
mod blank_sheets;
mod certificates;
mod checks;
mod completeness;
mod conflicts;
mod daily;
mod definitions;
mod demos;
mod deviations;
mod equipments;
mod evaluations;
mod follow_throughs;
mod formulations;
mod hostile_texts;
mod imports;
mod instruments;
mod investigations;
mod judgements;
mod kills;
mod lot_decisions;
mod lot_files;
mod lots;
mod masters;
mod material_lots;
mod methods;
mod own_work;
mod packagings;
mod people;
mod protocols;
mod racks;
mod redispersions;
mod requests;
mod retains;
mod reviews;
mod searches;
mod sedimentations;
mod settlings;
mod signatures;
mod specifications;
mod studies;
mod trail;
mod trends;
mod upgrades;
mod verification;
mod weeks;
