//! The clock guard: while the program runs, the wall clock and the steady clock must go together (decision B9).

use std::sync::Mutex;
use std::time::Instant;

use chrono::{DateTime, Utc};

use crate::domain::failure::Failure;

/// The two clocks may drift this far apart before writes are held.
const MOST_DRIFT_S: i64 = 120;

/// Watches the wall clock against the steady one. A handed-in clock has no guard.
pub struct ClockGuard {
    since: Mutex<(DateTime<Utc>, Instant)>,
}

impl ClockGuard {
    pub fn starting(wall: DateTime<Utc>, steady: Instant) -> ClockGuard {
        ClockGuard { since: Mutex::new((wall, steady)) }
    }

    /// Refuses writes when the wall clock has jumped since the start or since it was last confirmed.
    pub fn may_write(&self, wall: DateTime<Utc>, steady: Instant) -> Result<(), Failure> {
        let drift = self.drift_s(wall, steady);
        if drift.abs() <= MOST_DRIFT_S {
            return Ok(());
        }
        Err(Failure::Held(format!(
            "The computer's clock was moved by {drift} seconds while the program ran. An administrator looks at \
             the clock and confirms it under Settings; until then nothing is recorded."
        )))
    }

    fn drift_s(&self, wall: DateTime<Utc>, steady: Instant) -> i64 {
        let since = self.since.lock().unwrap_or_else(std::sync::PoisonError::into_inner);
        let steady_s = i64::try_from(steady.duration_since(since.1).as_secs()).unwrap_or(i64::MAX);
        (wall - since.0).num_seconds() - steady_s
    }

    /// The administrator has looked at the clock: it counts from now.
    pub fn confirm(&self, wall: DateTime<Utc>, steady: Instant) {
        let mut since = self.since.lock().unwrap_or_else(std::sync::PoisonError::into_inner);
        *since = (wall, steady);
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::time::Duration;

    #[test]
    fn a_jump_of_more_than_two_minutes_holds_writes_until_confirmed() {
        let (wall, steady) = ("2026-12-01T09:00:00Z".parse::<DateTime<Utc>>().unwrap(), Instant::now());
        let guard = ClockGuard::starting(wall, steady);
        let later = steady + Duration::from_secs(600);
        assert!(guard.may_write(wall + chrono::Duration::seconds(600), later).is_ok());
        assert!(guard.may_write(wall + chrono::Duration::seconds(719), later).is_ok());
        assert!(guard.may_write(wall + chrono::Duration::seconds(721), later).is_err());
        assert!(guard.may_write(wall - chrono::Duration::days(400), later).is_err());
        let set = wall - chrono::Duration::days(400);
        guard.confirm(set, later);
        assert!(guard.may_write(set, later).is_ok());
    }
}
