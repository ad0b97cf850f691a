//! The heart side of a test bench for devices that sense and pace the heart.
#![no_std]
#![cfg_attr(test, allow(clippy::arithmetic_side_effects, clippy::as_conversions, clippy::float_arithmetic))]

#[cfg(test)]
extern crate std;

pub mod audit;
pub mod base;
pub mod bench;
pub mod device;
pub mod heart;
pub mod lead;
