//! Opening a station file.

use std::io::Read;
use std::path::Path;

use super::diagnostics;
use super::output::Failure;
use crate::diagnostic::{Code, Diagnostic};
use crate::station::{MAX_BYTES, Station, read, too_large};

/// Reads a station file; its warnings go to standard error at once.
pub(super) fn open(path: &Path) -> Result<Station, Failure> {
    let bytes = read_bytes(path).map_err(|diagnostic| Failure::Findings {
        path: path.to_owned(),
        text: String::new(),
        list: vec![diagnostic],
    })?;
    let (station, list) = read(&bytes);
    let text = String::from_utf8(bytes).unwrap_or_default();
    match station {
        Some(station) => {
            if !list.is_empty() {
                diagnostics::print(path, &text, &list);
            }
            Ok(station)
        }
        None => Err(Failure::Findings { path: path.to_owned(), text, list }),
    }
}

fn read_bytes(path: &Path) -> Result<Vec<u8>, Diagnostic> {
    let failed = |error: &std::io::Error| {
        Diagnostic::about_file(Code::CannotRead, format!("the file cannot be read: {error}"))
    };
    let metadata = std::fs::metadata(path).map_err(|error| {
        failed(&error).help("is the name right? `nappe new KIND -o FILE` makes one to start from")
    })?;
    if metadata.is_dir() {
        return Err(Diagnostic::about_file(Code::CannotRead, "this is a folder, not a file")
            .help("name the station file inside it"));
    }
    let file = std::fs::File::open(path).map_err(|error| failed(&error))?;
    let mut bytes = Vec::new();
    // A pipe has no size to ask for: one byte more than is allowed is read, and no further.
    file.take(MAX_BYTES + 1).read_to_end(&mut bytes).map_err(|error| failed(&error))?;
    if bytes.len() as u64 > MAX_BYTES {
        return Err(too_large(metadata.len().max(bytes.len() as u64)));
    }
    Ok(bytes)
}
