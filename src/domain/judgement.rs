//! From readings to a reportable value and its verdict.
