//! Trend charts as SVG.
