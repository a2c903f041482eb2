//! Reading a whole file within bounds: refused with a reason before it can hang or fill the memory.

use crate::canon::sha256_hex;
use crate::place::{Fault, Place, Source};
use std::fs::{self, File, Metadata};
use std::io::{self, ErrorKind, Read};
use std::path::Path;
use std::sync::Arc;

/// A study larger than this is something else.
pub const LARGEST_STUDY: u64 = 16 << 20;
/// Data are held in memory.
pub const LARGEST_DATA: u64 = 1 << 30;

/// The bytes of a file and their SHA-256 in hexadecimal.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Bytes {
    pub bytes: Vec<u8>,
    pub sha256: String,
}

/// Reads a regular file of at most `limit` bytes. The message of a failure names the file.
pub fn read(path: &Path, limit: u64) -> Result<Bytes, String> {
    read_with(path, limit, || ())
}

/// `between` runs after the first reading (tests change the file there).
fn read_with(path: &Path, limit: u64, between: impl FnOnce()) -> Result<Bytes, String> {
    let name = path.display();
    let said = |error: io::Error| format!("{name}: {}", reason(&error));
    // Looked at before it is opened: opening a pipe waits for a writer.
    regular(&fs::metadata(path).map_err(said)?).map_err(|what| format!("{name} {what}"))?;
    let mut file = File::open(path).map_err(said)?;
    let before = file.metadata().map_err(said)?;
    regular(&before).map_err(|what| format!("{name} {what}"))?;
    let large = |size: u64| {
        format!(
            "{name} is too large: {} where at most {} are read",
            amount(size),
            amount(limit)
        )
    };
    if before.len() > limit {
        return Err(large(before.len()));
    }
    let mut bytes = Vec::with_capacity(before.len() as usize);
    (&mut file)
        .take(limit + 1)
        .read_to_end(&mut bytes)
        .map_err(said)?;
    if bytes.len() as u64 > limit {
        return Err(large(bytes.len() as u64));
    }
    let sha256 = sha256_hex(&bytes);
    between();
    // The time stamp of a file is coarse; a second reading is not.
    let again = fs::read(path).map_err(said)?;
    let after = file.metadata().map_err(said)?;
    let same = before.len() == after.len() && before.modified().ok() == after.modified().ok();
    if !same || again != bytes {
        return Err(format!("{name} was changed while it was being read"));
    }
    Ok(Bytes { bytes, sha256 })
}

fn regular(metadata: &Metadata) -> Result<(), &'static str> {
    if metadata.is_dir() {
        Err("is a folder, not a file")
    } else if !metadata.is_file() {
        Err("is a pipe or a device, not a file")
    } else {
        Ok(())
    }
}

fn reason(error: &io::Error) -> String {
    match error.kind() {
        ErrorKind::NotFound => "there is no such file".into(),
        ErrorKind::PermissionDenied => "no right to read it".into(),
        ErrorKind::NotADirectory => "a part of this path is not a folder".into(),
        _ => format!("cannot be read ({error})"),
    }
}

fn amount(bytes: u64) -> String {
    if bytes < 10 << 10 {
        format!("{bytes} bytes")
    } else if bytes < 10 << 20 {
        format!("{} KiB", bytes >> 10)
    } else if bytes < 10 << 30 {
        format!("{} MiB", bytes >> 20)
    } else {
        format!("{} GiB", bytes >> 30)
    }
}

/// The text of a file: UTF-8, with or without a byte order mark, which is left out. A fault shows the line
/// of the first byte that is not UTF-8.
pub fn text(bytes: Vec<u8>, name: &str) -> Result<Arc<Source>, Fault> {
    let start = if bytes.starts_with(b"\xef\xbb\xbf") {
        3
    } else {
        0
    };
    let error = match std::str::from_utf8(&bytes[start..]) {
        Ok(text) => {
            return Ok(Arc::new(Source {
                name: name.into(),
                text: text.into(),
            }));
        }
        Err(error) => error,
    };
    let good = error.valid_up_to();
    let offset = start + good;
    let byte = bytes[offset];
    let source = Arc::new(Source {
        name: name.into(),
        text: String::from_utf8_lossy(&bytes[start..]).into_owned(),
    });
    let place = Place {
        source,
        span: good..good + '\u{fffd}'.len_utf8(),
    };
    let wide = bytes.starts_with(b"\xff\xfe") || bytes.starts_with(b"\xfe\xff");
    let help = if wide {
        "this looks like UTF-16: save the file as UTF-8"
    } else {
        "save the file as UTF-8 (an older 8-bit encoding is likely)"
    };
    Err(Fault::at(
        place,
        format!("{name} is not UTF-8: byte 0x{byte:02X} at offset {offset}"),
    )
    .label("not UTF-8 from here")
    .help(help))
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::path::PathBuf;

    fn folder() -> tempfile::TempDir {
        tempfile::tempdir().expect("a temporary folder")
    }

    fn with(folder: &tempfile::TempDir, bytes: &[u8]) -> PathBuf {
        let path = folder.path().join("file");
        fs::write(&path, bytes).expect("a writable folder");
        path
    }

    #[test]
    fn reads_bytes_and_their_digest() {
        let folder = folder();
        let read = read(&with(&folder, b"abc"), 3).expect("readable");
        assert_eq!(read.bytes, b"abc");
        assert_eq!(read.sha256, sha256_hex(b"abc"));
    }

    #[test]
    fn refuses_what_is_not_a_file_of_sane_size() {
        let folder = folder();
        let path = with(&folder, b"abcd");
        let said = |path: &Path, limit| read(path, limit).expect_err("refused");
        assert!(
            said(&path, 3).ends_with("file is too large: 4 bytes where at most 3 bytes are read")
        );
        assert!(said(folder.path(), 3).ends_with("is a folder, not a file"));
        assert!(said(&folder.path().join("none"), 3).ends_with("none: there is no such file"));
        assert!(said(&path.join("below"), 3).contains("is not a folder"));
        assert!(said(Path::new("\0"), 3).contains("cannot be read"));
    }

    #[cfg(unix)]
    #[test]
    fn a_pipe_or_a_device_does_not_hang() {
        let folder = folder();
        let pipe = folder.path().join("pipe");
        let made = std::process::Command::new("mkfifo").arg(&pipe).status();
        assert!(made.expect("mkfifo runs").success());
        for path in [pipe.as_path(), Path::new("/dev/zero")] {
            let said = read(path, 10).expect_err("refused");
            assert!(
                said.ends_with("is a pipe or a device, not a file"),
                "{said}"
            );
        }
    }

    #[test]
    fn a_sparse_giant_is_refused_unread() {
        let folder = folder();
        let path = with(&folder, b"");
        let file = File::options().write(true).open(&path).expect("writable");
        file.set_len(2 << 30).expect("sparse files");
        let said = read(&path, LARGEST_STUDY).expect_err("refused");
        assert!(
            said.ends_with("is too large: 2048 MiB where at most 16 MiB are read"),
            "{said}"
        );
    }

    #[test]
    fn a_change_while_reading_is_seen() {
        let folder = folder();
        let path = with(&folder, b"1,2");
        let change = |bytes: &'static [u8]| {
            let path = path.clone();
            move || fs::write(path, bytes).expect("writable")
        };
        for bytes in [&b"1,3"[..], b"1,2,3", b""] {
            let said = read_with(&path, 10, change(bytes)).expect_err("seen");
            assert!(
                said.ends_with("was changed while it was being read"),
                "{said}"
            );
            fs::write(&path, b"1,2").expect("writable");
        }
    }

    #[test]
    fn text_is_utf8_with_or_without_a_mark() {
        assert_eq!(
            text(b"\xef\xbb\xbfa".to_vec(), "f").expect("UTF-8").text,
            "a"
        );
        let fault = text(b"a\nb\xe4c".to_vec(), "f").expect_err("Latin-1");
        assert_eq!(fault.what, "f is not UTF-8: byte 0xE4 at offset 3");
        assert_eq!(fault.place.expect("a place").line_column(), (2, 2));
        let fault = text(b"\xff\xfea\0".to_vec(), "f").expect_err("UTF-16");
        assert!(fault.help.expect("help").contains("UTF-16"));
    }
}
