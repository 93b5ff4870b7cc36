//! Facts become documents and drawings: charts, tables, the lot file. Pure.

pub mod calendar;
pub mod chart;
pub mod code;
pub mod cylinder;
pub mod evaluation;
pub mod export;
pub mod lot_file;
pub mod settling;
pub mod table;
pub mod zip;
