//! What a run leaves in its folder: `summary.json`, `log.jsonl`, `log.csv` and `report.html`.

mod folder;
mod sentence;
mod summary;

pub use folder::{Folder, FolderError};
pub(crate) use sentence::INTERRUPTED;
pub use sentence::sentence;
pub use summary::Summary;
