//! Instruments: calibration, daily checks, in and out of service.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
