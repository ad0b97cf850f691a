//! Published and derived values of heart timing, each with its source and how well that is known.
//!
//! Marks: *checked*: found in print while this was written. *From memory*: recalled from the literature, not found again.
//! *Derived*: algebra from the stated rule. *Common practice, no source*: folklore of the trade.
#![allow(
    clippy::arithmetic_side_effects,
    clippy::as_conversions,
    clippy::cast_possible_truncation,
    clippy::expect_used,
    clippy::float_arithmetic,
    clippy::indexing_slicing,
    clippy::unwrap_used,
    reason = "tests may"
)]

mod block;
mod capture;
mod ectopy;
#[path = "../heart_common/mod.rs"]
mod heart_common;
mod node;
mod parasystole;
mod plain;
mod rate;
mod sinus;
