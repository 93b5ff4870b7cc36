//! Instruments: calibration, daily checks, in and out of service.
