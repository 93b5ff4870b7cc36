//! Work that the clock does while the program serves: forecasts are sealed when windows open.

use std::sync::Arc;
use std::time::{Duration, Instant};

use crate::acts;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::web::app::App;

/// How often the clock looks whether a window has opened.
const TICK: Duration = Duration::from_secs(60);

/// Works at once, which catches up after a stop, and then once a minute for as long as the program serves.
pub async fn work(app: Arc<App>) {
    let mut ticks = tokio::time::interval(TICK);
    ticks.set_missed_tick_behavior(tokio::time::MissedTickBehavior::Delay);
    loop {
        ticks.tick().await;
        let app = Arc::clone(&app);
        match tokio::task::spawn_blocking(move || once(&app)).await {
            Ok(Ok(0)) => {}
            Ok(Ok(pulls)) => tracing::info!(pulls, "forecasts sealed"),
            Ok(Err(failure)) => tracing::warn!(%failure, "forecasts were not sealed"),
            Err(error) => tracing::warn!(%error, "the timed work stopped"),
        }
    }
}

/// What is due at this moment. Nothing while the computer's clock is in doubt (decision B9).
fn once(app: &App) -> Result<usize, Failure> {
    let now = app.now();
    if let Some(guard) = &app.guard {
        guard.may_write(now.utc, Instant::now())?;
    }
    acts::forecast::seal_due(&app.db, &Actor::clock(now))
}
