//! Heart, lead, device and auditor joined in a closed loop, driven by a script.

mod script;

pub use script::{Act, Amount, Coupling, Event, Step, When, WindowEnd};
