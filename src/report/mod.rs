//! Facts become documents and drawings: charts, tables, the lot file. Pure.
