//! The results of one test over ages, for charts.
