//! The heart side of a test bench for devices that sense and pace the heart.
//!
//! A heart that fires by itself, conducts, blocks, falls silent and escapes, and answers each pulse as tissue would; leads; a device
//! under test; an auditor that judges every interval against what was programmed; and the closed loop that joins them. Everything
//! is integer and fixed-point arithmetic with time as an argument: no clock, no allocation, no float, no reachable panic, and the same
//! bits on every machine.
//!
//! Begin with [`bench::Bench`], which runs the whole loop, or with [`heart::Heart`] alone. To put timing code of your own into the
//! loop, implement [`device::Device`].
//!
//! # The verbs
//! Every machine here has three: `new`, `poll(now)`, `next_at()`. `poll` gives one thing that happened at or before `now`; call it
//! until it answers `None`, then sleep until `next_at`. A whole run:
//!
//! ```
//! use phase4::audit::AuditSettings;
//! use phase4::base::{Instant, Interval, Mode, Rate, Settings, Span};
//! use phase4::bench::{Bench, Entry, Setup};
//! use phase4::device::ReferenceDevice;
//! use phase4::heart::plain;
//! use phase4::lead::LeadParams;
//!
//! let program = Settings::new(Mode::Vvi, Interval::from_rate_nearest(Rate::per_minute(60))).check()?;
//! let setup = Setup {
//!     anatomy: &plain::ANATOMY,
//!     foci: &[],
//!     lead: LeadParams::PLAIN,
//!     judged: Some((program, AuditSettings::new(&program))),
//!     steps: &[],
//!     start: Instant::ZERO,
//!     length: Span::from_secs(10),
//!     seed: 1,
//! };
//! let device = ReferenceDevice::new(program, setup.start);
//! // Room for no steps and for 16 explanations of what the device is doing.
//! let mut bench: Bench<'_, _, 5, 4, 3, 0, 0, 16> = Bench::new(&setup, Some(device))?;
//! while let Some(entry) = bench.poll(Instant::MAX) {
//!     if let Entry::Judged(judgement) = entry {
//!         assert_ne!(judgement.outcome, phase4::audit::Outcome::Broken);
//!     }
//! }
//! # Ok::<(), phase4::base::ParamError>(())
//! ```
//!
//! # Features
//! - `std`: sinks for a run's records into a `Vec` or a writer. Everything else is there without it.
//!
//! # Bench use only
//! Never connect this, its outputs, or a device that it drives to a person. It is not a medical device, and no result is evidence of
//! conformity by itself. Isolation and local electrical codes, licensed practice and the device maker's own process decide.
#![no_std]
#![cfg_attr(test, allow(clippy::arithmetic_side_effects, clippy::as_conversions, clippy::float_arithmetic))]

#[cfg(any(test, feature = "std"))]
extern crate std;

pub mod audit;
pub mod base;
pub mod bench;
pub mod device;
pub mod heart;
pub mod lead;
