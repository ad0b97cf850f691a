//! What is under test: the contract every device meets, and a reference device that can be made to go wrong.

mod contract;

pub use contract::Device;
