//! Pulls: ages that come due, their windows and what happened to them.
