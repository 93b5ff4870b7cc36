//! The lot file as one archive.
