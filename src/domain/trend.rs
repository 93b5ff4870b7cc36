//! Whether a result agrees with the trend of its lot.
