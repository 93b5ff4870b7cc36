//! Materials: what a formulation is made of.
