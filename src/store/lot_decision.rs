//! Release or rejection of a lot.
