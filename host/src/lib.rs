//! The host side of phase4: scenario files in, closed loops run and judged, reports out.
//!
//! Bench use only: what this drives is never connected to a person. It is not a medical device, and what it prints is by itself no
//! evidence of conformity with anything.

pub mod assemble;
pub mod cli;
pub mod image;
pub mod judge;
pub mod log_file;
pub mod output;
pub mod refusal;
pub mod report;
pub mod run;
pub mod run_data;
pub mod scenario;
pub mod tally;
