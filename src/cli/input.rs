//! Bytes from a file or from standard input, never more than a bank file may have.

use std::io::{self, Read};
use std::path::Path;

/// A bank file may have this many bytes; one more is read, so that whoever parses it can see that it is too long.
const LONGEST: u64 = 4 * 1024 * 1024;

/// Bytes with the name to show in messages about them.
pub(super) struct Input {
    /// The file as it was typed, or `standard input`.
    pub name: String,
    /// What was read.
    pub bytes: Vec<u8>,
}

/// Everything from standard input, up to the longest bank file and one byte.
pub(super) fn from_stdin(stdin: &mut dyn Read) -> Result<Input, String> {
    let mut bytes = Vec::new();
    match stdin.take(LONGEST + 1).read_to_end(&mut bytes) {
        Ok(_) => Ok(Input { name: "standard input".into(), bytes }),
        Err(e) => Err(format!("standard input can't be read: {e}")),
    }
}

/// A file likewise.
pub(super) fn from_file(path: &Path) -> Result<Input, String> {
    let name = path.display().to_string();
    read(path).map(|bytes| Input { name: name.clone(), bytes }).map_err(|e| refusal(&name, path, &e))
}

fn read(path: &Path) -> io::Result<Vec<u8>> {
    let mut bytes = Vec::new();
    std::fs::File::open(path)?.take(LONGEST + 1).read_to_end(&mut bytes)?;
    Ok(bytes)
}

/// Why a file can't be read, and what can be done.
fn refusal(name: &str, path: &Path, error: &io::Error) -> String {
    if path.is_dir() {
        return format!("`{name}` is a directory; name one bank file in it");
    }
    match error.kind() {
        io::ErrorKind::NotFound => format!(
            "there is no file `{name}`\n  `ebbvolt draft > bank.yaml` writes a bank file to start from,\n  \
             `ebbvolt plan --example` plans a bank that is built in,\n  `ebbvolt plan -` reads from standard input"
        ),
        io::ErrorKind::PermissionDenied => format!("`{name}` can't be read: this account has no permission to read it"),
        _ => format!("`{name}` can't be read: {error}"),
    }
}
