//! Programs of our own that get the same beat times in other ways, each as one would write it today for this rhythm.

pub mod general;
pub mod heap;
pub mod special;
pub mod ticks;
