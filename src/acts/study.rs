//! Studies: a lot ageing by a protocol.
