//! What a judgement found.
