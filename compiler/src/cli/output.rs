//! Where output goes: standard output that may be closed early, and files that appear whole or not at
//! all.

use std::fmt::Display;
use std::fs::{self, File};
use std::io::{self, BufWriter, ErrorKind, IsTerminal, Write};
use std::path::{Path, PathBuf};

use super::Failure;
use super::interrupt::{self, Partial};

/// Prints to standard output. A reader that has gone away is no failure: what it wanted, it has.
pub(super) fn print(text: &str) -> Result<(), Failure> {
    let mut out = io::stdout().lock();
    match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        Err(error) if error.kind() != ErrorKind::BrokenPipe => {
            Err(Failure(format!("cannot write to standard output: {error}")))
        }
        _ => Ok(()),
    }
}

/// Prints to standard error, as far as that goes.
pub(super) fn note(text: &str) {
    let _ = io::stderr().lock().write_all(text.as_bytes());
}

/// Says on standard error why a command failed.
pub(super) fn complain(reason: &str) {
    let head = if colour_on(&io::stderr()) {
        "\u{1b}[1;31merror\u{1b}[0m"
    } else {
        "error"
    };
    note(&format!("{head}: {reason}\n"));
}

/// Whether a stream should carry colours: it is a terminal, and nobody asked for none.
pub(super) fn colour_on(stream: &impl IsTerminal) -> bool {
    let refused = std::env::var_os("NO_COLOR").is_some_and(|v| !v.is_empty());
    let dumb = std::env::var_os("TERM").is_some_and(|v| v == "dumb");
    stream.is_terminal() && !refused && !dumb
}

/// Writes text to a file, whole or not at all, or to standard output.
pub(super) fn deliver(path: Option<&Path>, text: &str) -> Result<(), Failure> {
    let Some(path) = path else { return print(text) };
    let mut file = OutputFile::create(path)?;
    file.write_text(text)?;
    commit_all(vec![file])
}

/// A file in the making: written beside its target under another name, and given its name when it is
/// complete. Dropped before that, it leaves nothing behind.
pub(super) struct OutputFile {
    target: PathBuf,
    partial: Option<PathBuf>,
    writer: Option<BufWriter<File>>,
}

impl OutputFile {
    /// Opens a file to become `path`. A device or a pipe is written directly: it cannot be replaced.
    ///
    /// Through a symbolic link the file behind it is replaced, not the link; one that leads nowhere is
    /// refused, and so is a file that may not be written. A file that is replaced keeps its permissions.
    pub(super) fn create(path: &Path) -> Result<Self, Failure> {
        let fail = |why: &dyn Display| Failure(format!("cannot write {}: {why}", path.display()));
        let old = fs::metadata(path).ok();
        if old.as_ref().is_some_and(fs::Metadata::is_dir) {
            return Err(fail(&"it is a directory"));
        }
        if old.as_ref().is_some_and(|m| !m.is_file()) {
            let file = File::options().write(true).open(path);
            return Ok(Self {
                target: path.to_owned(),
                partial: None,
                writer: Some(BufWriter::new(file.map_err(|e| fail(&e))?)),
            });
        }
        if old.is_none() && fs::symlink_metadata(path).is_ok() {
            return Err(fail(&"it is a symbolic link that leads to no file"));
        }
        if old.as_ref().is_some_and(|m| m.permissions().readonly()) {
            return Err(fail(&"it is read-only"));
        }
        let target = fs::canonicalize(path).unwrap_or_else(|_| path.to_owned());
        let (partial, file) = beside(&target).map_err(|e| fail(&e))?;
        let made = Self {
            target,
            partial: Some(partial.clone()),
            writer: Some(BufWriter::with_capacity(1 << 18, file)),
        };
        if let Some(old) = old {
            fs::set_permissions(&partial, old.permissions()).map_err(|e| fail(&e))?;
        }
        Ok(made)
    }

    /// The failure that an error of writing is.
    pub(super) fn failure(&self, error: &io::Error) -> Failure {
        Failure(format!("cannot write {}: {error}", self.target.display()))
    }

    /// Writes text.
    pub(super) fn write_text(&mut self, text: &str) -> Result<(), Failure> {
        self.write_all(text.as_bytes())
            .map_err(|e| self.failure(&e))
    }

    /// Brings everything that was written to the disk's keeper.
    fn close(&mut self) -> Result<(), Failure> {
        let flushed = self
            .writer
            .take()
            .map_or(Ok(()), |mut writer| writer.flush());
        flushed.map_err(|e| self.failure(&e))
    }

    /// Gives the file its name.
    fn rename(&mut self, making: &mut Partial) -> Result<(), Failure> {
        let Some(partial) = &self.partial else {
            return Ok(());
        };
        fs::rename(partial, &self.target).map_err(|e| self.failure(&e))?;
        making.forget(partial);
        self.partial = None;
        Ok(())
    }
}

/// A new file in the folder of `target`, under a name that nothing has.
fn beside(target: &Path) -> io::Result<(PathBuf, File)> {
    let mut making = interrupt::partial();
    let mut number = 0;
    loop {
        let name = format!(".driftwright-{}-{number}.partial", std::process::id());
        let path = target.with_file_name(name);
        // Never through a name that is there already: it may be somebody's link.
        match File::create_new(&path) {
            Err(error) if error.kind() == ErrorKind::AlreadyExists && number < 1000 => number += 1,
            Err(error) => return Err(error),
            Ok(file) => {
                making.add(&path);
                return Ok((path, file));
            }
        }
    }
}

/// Gives several files their names, when all of them are complete. An interrupt comes before the first
/// or after the last.
pub(super) fn commit_all(mut files: Vec<OutputFile>) -> Result<(), Failure> {
    files.iter_mut().try_for_each(OutputFile::close)?;
    let mut making = interrupt::partial();
    let named = files
        .iter_mut()
        .try_for_each(|file| file.rename(&mut making));
    drop(making);
    named
}

impl Write for OutputFile {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        match &mut self.writer {
            Some(writer) => writer.write(bytes),
            None => Err(io::Error::other("the file is closed")),
        }
    }

    fn flush(&mut self) -> io::Result<()> {
        self.writer.as_mut().map_or(Ok(()), Write::flush)
    }
}

impl Drop for OutputFile {
    fn drop(&mut self) {
        self.writer = None;
        if let Some(partial) = self.partial.take() {
            let mut making = interrupt::partial();
            let _ = fs::remove_file(&partial);
            making.forget(&partial);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_dropped_file_leaves_nothing_and_keeps_the_old_one() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("x.csv");
        fs::write(&path, "old").unwrap();
        let mut file = OutputFile::create(&path).unwrap();
        file.write_all(b"half").unwrap();
        drop(file);
        assert_eq!(fs::read_to_string(&path).unwrap(), "old");
        assert_eq!(fs::read_dir(folder.path()).unwrap().count(), 1);
    }

    #[test]
    fn a_committed_file_replaces_the_old_one() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("x.csv");
        fs::write(&path, "old").unwrap();
        deliver(Some(&path), "new").unwrap();
        assert_eq!(fs::read_to_string(&path).unwrap(), "new");
        assert_eq!(fs::read_dir(folder.path()).unwrap().count(), 1);
    }

    #[test]
    fn a_folder_that_does_not_exist_is_named() {
        let Err(Failure(reason)) = deliver(Some(Path::new("no/such/folder/x.csv")), "x") else {
            panic!("wrote into a folder that does not exist");
        };
        assert!(reason.contains("no/such/folder/x.csv"), "{reason}");
    }
}
