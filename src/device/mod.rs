//! What is under test: the contract every device meets, and a reference device that can be made to go wrong.

mod contract;
mod modes;
mod reference;

pub use contract::Device;
pub use reference::ReferenceDevice;
