//! What beats: cells, tissue, tracts and foci, joined by an anatomy.
//!
//! Everything of interest emerges. There is no code for an escape beat, a Wenckebach group or a compensatory pause: they follow
//! from when cells fire, how long tissue is refractory, and what the gate of a tract lets through.
//!
//! ```
//! use phase4::base::{Instant, Kind};
//! use phase4::heart::{Heart, plain};
//!
//! let mut heart = Heart::new(&plain::ANATOMY, &[], Instant::ZERO)?;
//! let mut beats = 0;
//! while let Some(record) = heart.poll(Instant::from_micros(10_000_000)) {
//!     if record.kind == Kind::Activated && record.place == plain::VENTRICLE.row() {
//!         beats += 1;
//!     }
//! }
//! assert_eq!(beats, 12); // 75 per minute
//! # Ok::<(), phase4::base::ParamError>(())
//! ```

mod anatomy;
mod cell;
mod check;
mod engine;
mod firing;
mod focus;
mod fraction;
mod gate;
mod input;
mod last;
mod launching;
pub mod plain;
mod rows;
mod site;
mod tract;
mod way;

pub use anatomy::Anatomy;
pub use cell::CellParams;
pub use engine::Heart;
pub use focus::{FocusKind, FocusParams};
pub use fraction::Fraction;
pub use input::PulseAnswer;
pub use site::SiteParams;
pub use tract::{TractParams, Way};
pub use way::Ways;
