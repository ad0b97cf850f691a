//! What is refused, where, and what to write instead: one form for every input the command reads.

mod complaint;
mod names;
mod source;

pub use complaint::{Complaint, Refusal};
pub use names::{list, nearest};
pub use source::{LARGEST, Source};
