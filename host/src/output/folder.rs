//! The output folder: everything is written beside it first and put in place at the end, or not at all.

use crate::log_file::{CsvLog, JsonLog};
use crate::run_data::Names;
use phase4::base::Record;
use std::fmt;
use std::fs::{self, File};
use std::io::{self, BufWriter, Write};
use std::path::{Path, PathBuf};
use tempfile::TempDir;

/// The files of a run, in the order in which they are put in place: the summary last, so that it never speaks of older files.
const FILES: [&str; 4] = [LOG_JSON, LOG_CSV, REPORT, SUMMARY];
const SUMMARY: &str = "summary.json";
const LOG_JSON: &str = "log.jsonl";
const LOG_CSV: &str = "log.csv";
const REPORT: &str = "report.html";

/// An output folder that is being filled. Dropped without [`Folder::put_in_place`], it leaves nothing behind.
#[derive(Debug)]
pub struct Folder {
    target: PathBuf,
    beside: TempDir,
    json: JsonLog<BufWriter<File>>,
    csv: CsvLog<File>,
}

/// Why an output folder could not be written.
#[derive(Debug)]
pub struct FolderError {
    target: PathBuf,
    what: String,
}

impl fmt::Display for FolderError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "cannot write to {}: {}", self.target.display(), self.what)
    }
}

impl std::error::Error for FolderError {}

impl Folder {
    /// Begins an output folder, which may exist already. Whether it can be written is found out here, before anything runs.
    ///
    /// # Errors
    /// Refuses a target that is no folder, one that cannot be written, and one in which a folder has the name of one of our files.
    pub fn begin(target: &Path) -> Result<Self, FolderError> {
        let error = |what: String| FolderError { target: target.to_owned(), what };
        let exists = target.exists();
        if exists && !target.is_dir() {
            return Err(error("there is a file of that name".to_owned()));
        }
        for file in FILES {
            if target.join(file).is_dir() {
                return Err(error(format!("there is a folder named {file} in it")));
            }
        }
        // Beside the target, or inside it if it exists: on the same file system either way, so that renaming is all it takes.
        let parent = if exists { target } else { nearest_folder(target) };
        let beside = builder().prefix(".phase4-").tempdir_in(parent).map_err(|cause| error(cause.to_string()))?;
        let open = |name: &str| File::create_new(beside.path().join(name)).map_err(|cause| error(cause.to_string()));
        let (json, csv) = (open(LOG_JSON)?, open(LOG_CSV)?);
        let csv = CsvLog::new(csv).map_err(|cause| error(cause.to_string()))?;
        Ok(Self { target: target.to_owned(), json: JsonLog::new(BufWriter::new(json)), csv, beside })
    }

    /// Writes one record to both logs.
    ///
    /// # Errors
    /// What the file system refuses.
    pub fn record(&mut self, record: &Record, names: &Names) -> io::Result<()> {
        self.json.write(record, names)?;
        self.csv.write(record, names)
    }

    /// Writes the rest and puts everything in place: our own older files are replaced, all others stay.
    ///
    /// # Errors
    /// What the file system refuses. Until the files are moved nothing has changed.
    pub fn put_in_place(self, summary: &str, report: &str) -> Result<(), FolderError> {
        let Self { target, beside, json, csv } = self;
        let place = || -> io::Result<()> {
            json.finish()?.into_inner().map_err(io::IntoInnerError::into_error)?.sync_all()?;
            csv.finish()?.sync_all()?;
            write(&beside.path().join(REPORT), report)?;
            write(&beside.path().join(SUMMARY), summary)?;
            if target.is_dir() {
                for file in FILES {
                    fs::rename(beside.path().join(file), target.join(file))?;
                }
                return Ok(());
            }
            if let Some(parent) = target.parent().filter(|parent| !parent.as_os_str().is_empty()) {
                fs::create_dir_all(parent)?;
            }
            fs::rename(beside.path(), &target)
        };
        place().map_err(|cause| FolderError { target: target.clone(), what: cause.to_string() })
    }
}

fn write(path: &Path, text: &str) -> io::Result<()> {
    let mut file = File::create_new(path)?;
    file.write_all(text.as_bytes())?;
    file.sync_all()
}

/// The nearest folder above a path that exists.
fn nearest_folder(path: &Path) -> &Path {
    let existing = path.ancestors().skip(1).find(|folder| folder.is_dir());
    existing.unwrap_or(Path::new("."))
}

/// A temporary folder that may become the target: with the rights of any new folder, not those of a private one.
#[cfg(unix)]
fn builder() -> tempfile::Builder<'static, 'static> {
    use std::os::unix::fs::PermissionsExt;
    let mut builder = tempfile::Builder::new();
    builder.permissions(fs::Permissions::from_mode(0o777));
    builder
}

#[cfg(not(unix))]
fn builder() -> tempfile::Builder<'static, 'static> {
    tempfile::Builder::new()
}
