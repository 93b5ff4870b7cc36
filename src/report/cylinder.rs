//! The little cylinder: sediment, clarity, inversions.
