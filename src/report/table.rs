//! Tables of results.
