//! What each channel sees of the heart, and where its pulses arrive: between heart and device.

mod leads;
mod params;

pub use leads::Lead;
pub use params::{ChannelParams, LeadChange, LeadParams, NearField};
