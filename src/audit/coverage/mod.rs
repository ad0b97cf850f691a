//! What was tried: which windows of the cycle were hit by which kind of event, with a decided answer.

mod bounds;
mod count;
mod origin;
mod stimulus;
mod table;

pub use bounds::EdgeKind;
pub use count::{Coverage, Edge, Row, Share, WholeRun};
pub use table::{After, CellId, CellName, CellState, Column, Need, Stretch};
