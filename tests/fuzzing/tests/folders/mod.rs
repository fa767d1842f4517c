//! Where the corpora are.

use std::fs;
use std::path::{Path, PathBuf};

/// The top level of the repository.
pub(crate) fn repository() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../..")
}

/// The files of a folder, by name.
fn sorted_files(folder: &Path) -> Vec<PathBuf> {
    let entries = fs::read_dir(folder).expect("the folder is part of the repository");
    let mut paths: Vec<PathBuf> = entries
        .map(|entry| entry.expect("an entry").path())
        .collect();
    paths.sort();
    paths
}

/// The names and contents of the files of a folder, by name.
pub(crate) fn contents(folder: &Path) -> Vec<(String, Vec<u8>)> {
    let read = |path: PathBuf| {
        let name = path.file_name().expect("a file").to_string_lossy();
        (name.into_owned(), fs::read(&path).expect("a readable file"))
    };
    sorted_files(folder).into_iter().map(read).collect()
}
