//! Clocks and memory of this process.
