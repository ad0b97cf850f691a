//! What is under test: the contract every device meets, and a reference device that can be made to go wrong.

mod bank;
mod contract;
mod fault;
mod hooks;
mod modes;
mod probe;
mod reference;
mod timers;

pub use bank::{BANK, FaultRow, Needs};
pub use contract::Device;
pub use fault::{Fault, Size};
pub use probe::{Allowance, PROBE_WIDTH, Probe};
pub use reference::ReferenceDevice;
