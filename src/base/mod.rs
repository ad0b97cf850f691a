//! What every room shares: time, quantities, chance, plain data, records and their hash. No timing rules live here.

mod chance;
mod convert;
mod decay;
mod error;
mod hash;
mod id;
mod instant;
mod interval;
mod mode;
mod program;
mod record;
mod signal;

pub use chance::{Stream, draw, draw_below};
pub use decay::Decay;
pub use error::{NotYet, ParamError, Problem};
pub use hash::RecordHash;
pub use id::{CellId, FocusId, SiteId, TractId};
pub use instant::{Deviation, Instant, Span};
pub use interval::{FineInstant, Interval, Rate};
pub use mode::Mode;
pub use program::{Edge, Program, Settings, Straddle, Tie};
pub use record::{BlockReason, Cause, CauseKind, Kind, Meeting, NoCapture, Record};
pub use signal::{Channel, MicroVolts, MilliVolts, Pulse, Signal};

pub(crate) use convert::{high_u64, low_u8, low_u32, wide, word};
