//! phase4 measured beside the ways one would otherwise get beat times, all on one rhythm.

pub mod measure;
pub mod ours;
pub mod peers;
pub mod rhythm;
pub mod table;
