//! Reading a model file from disk.

use std::io::ErrorKind;
use std::path::Path;

use crate::diagnostic::{Code, Diagnostic};
use crate::source::{SourceFile, Span};

/// Reads a model file. A byte order mark at its start is taken off.
///
/// # Errors
/// The file does not exist, is a directory, may not be read, or is not UTF-8 text; the diagnostic has
/// no place inside the file.
pub fn load(path: &Path) -> Result<SourceFile, Diagnostic> {
    let shown = path.display().to_string();
    if path.is_dir() {
        let message = format!("`{shown}` is a directory, not a model file");
        return Err(unreadable(message).hint("name the .toml file inside it"));
    }
    let bytes = std::fs::read(path).map_err(|error| match error.kind() {
        ErrorKind::NotFound => {
            let message = format!("there is no file `{shown}`");
            unreadable(message).hint("check the path, it counts from the current directory")
        }
        ErrorKind::PermissionDenied => {
            let message = format!("the file `{shown}` may not be read");
            unreadable(message).hint("check its permissions")
        }
        _ => unreadable(format!("the file `{shown}` cannot be read: {error}"))
            .hint("check the disk and the path"),
    })?;
    decode(&shown, &bytes)
}

/// The bytes of a model file as text; `path` is how it is shown. A byte order mark is taken off.
///
/// # Errors
/// The bytes are not UTF-8 text; the diagnostic has no place inside the file.
///
/// ```
/// use driftwright::front::decode;
/// assert_eq!(decode("a.toml", b"[model]").unwrap().text(), "[model]");
/// assert!(decode("a.toml", b"caf\xe9").is_err());
/// ```
pub fn decode(path: &str, bytes: &[u8]) -> Result<SourceFile, Diagnostic> {
    let bytes = bytes.strip_prefix(b"\xef\xbb\xbf").unwrap_or(bytes);
    let place = |offset: usize| {
        let line = bytes[..offset].iter().filter(|&&b| b == b'\n').count() + 1;
        format!("byte {} (line {line})", offset + 1)
    };
    if bytes.starts_with(b"\xff\xfe") || bytes.starts_with(b"\xfe\xff") {
        let message = format!("`{path}` is UTF-16 text");
        return Err(unreadable(message).hint("save the file as UTF-8"));
    }
    let text = std::str::from_utf8(bytes).map_err(|error| {
        let at = place(error.valid_up_to());
        unreadable(format!(
            "`{path}` is not UTF-8 text: {at} begins no character"
        ))
        .hint("save the file as UTF-8")
    })?;
    if let Some(offset) = text.find('\0') {
        let message = format!("`{path}` is not a text file: {} is zero", place(offset));
        return Err(unreadable(message).hint("a model file is TOML text"));
    }
    Ok(SourceFile::new(path, text))
}

fn unreadable(message: String) -> Diagnostic {
    Diagnostic::error(Code::UnreadableFile, Span::default(), message)
}

#[cfg(test)]
mod tests {
    use super::{decode, load};

    #[test]
    fn a_byte_order_mark_is_taken_off() {
        let file = decode("a.toml", b"\xef\xbb\xbf[model]").unwrap();
        assert_eq!(file.text(), "[model]");
    }

    #[test]
    fn text_in_other_encodings_is_refused_with_its_place() {
        let error = decode("a.toml", b"[model]\nname = \"caf\xe9\"").unwrap_err();
        assert!(
            error.message.contains("byte 20 (line 2)"),
            "{}",
            error.message
        );
        assert!(
            decode("a.toml", b"a\0b")
                .unwrap_err()
                .message
                .contains("byte 2 (line 1)")
        );
        assert!(
            decode("a.toml", b"\xff\xfea\0")
                .unwrap_err()
                .message
                .contains("UTF-16")
        );
    }

    #[test]
    fn missing_files_and_directories_are_told_apart() {
        let dir = tempfile::tempdir().unwrap();
        assert!(load(dir.path()).unwrap_err().message.contains("directory"));
        let missing = load(&dir.path().join("no.toml")).unwrap_err();
        assert!(missing.message.contains("there is no file"));
    }
}
