//! Dead time of the readout.

/// Recorded rate of a trigger rate R under a dead time t after each recorded event, not prolonged
/// by events that fall into it: R / (1 + R t).
///
/// # Units
/// Hz, s.
///
/// # Source
/// Non-paralysable counter: Knoll 2010, Radiation Detection and Measurement, 4th ed., sec. 4.7.
pub fn recorded_rate_hz(trigger_rate_hz: f64, dead_time_s: f64) -> f64 {
    trigger_rate_hz / (1.0 + trigger_rate_hz * dead_time_s)
}

/// Fraction of the time that the readout is dead: R t / (1 + R t).
pub fn dead_fraction(trigger_rate_hz: f64, dead_time_s: f64) -> f64 {
    let load = trigger_rate_hz * dead_time_s;
    load / (1.0 + load)
}
