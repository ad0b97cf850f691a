//! Heart, lead, device and auditor joined in a closed loop, driven by a script.

pub mod canary;
mod check;
mod closed_loop;
mod cues;
mod log;
mod script;
#[cfg(feature = "std")]
mod std_sinks;
#[cfg(test)]
mod tests;

pub use closed_loop::{Bench, EndReason, Entry, MOST_PULSES_AT_ONCE, Setup};
pub use cues::{Cued, Script};
pub use log::{Log, Ring, Sink};
pub use script::{Act, Amount, Coupling, Event, Step, When, WindowEnd};
#[cfg(feature = "std")]
pub use std_sinks::RecordWriter;
