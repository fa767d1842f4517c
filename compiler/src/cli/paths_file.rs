//! Files of paths: NPY and CSV, written in path order while the paths are made.

use std::io::{self, Write};
use std::path::Path;

use serde_json::Value;

use super::Failure;
use super::output::OutputFile;

/// What a file of paths holds.
#[derive(Clone, Debug)]
pub(super) struct Layout {
    /// Names of the quantities.
    pub(super) quantities: Vec<String>,
    /// Observation times.
    pub(super) times: Vec<f64>,
    /// Number of paths.
    pub(super) paths: u64,
}

/// A file of paths in the making.
pub(super) struct PathsFile {
    layout: Layout,
    form: Form,
}

enum Form {
    Csv(Box<csv::Writer<OutputFile>>),
    Npy(OutputFile, OutputFile),
}

impl PathsFile {
    /// Opens a file; its ending chooses the form.
    pub(super) fn create(path: &Path, layout: Layout) -> Result<Self, Failure> {
        let mut file = OutputFile::create(path)?;
        let is_npy = path
            .extension()
            .is_some_and(|e| e.eq_ignore_ascii_case("npy"));
        let form = if is_npy {
            file.write_all(&npy_header(&layout))
                .map_err(|e| file.failure(&e))?;
            let mut beside = path.as_os_str().to_owned();
            beside.push(".json");
            Form::Npy(file, OutputFile::create(Path::new(&beside))?)
        } else {
            let mut writer = csv::Writer::from_writer(file);
            let names = layout.quantities.iter().map(String::as_str);
            writer.write_record(["path", "time"].into_iter().chain(names))?;
            Form::Csv(Box::new(writer))
        };
        Ok(Self { layout, form })
    }

    /// Appends paths from `first_path` on: values in C order, shape (paths, times, quantities).
    pub(super) fn append(&mut self, first_path: u64, values: &[f64]) -> io::Result<()> {
        match &mut self.form {
            Form::Npy(file, _) => {
                let bytes: Vec<u8> = values.iter().flat_map(|v| v.to_le_bytes()).collect();
                file.write_all(&bytes)
            }
            Form::Csv(writer) => {
                let width = self.layout.quantities.len().max(1);
                let paths = values.chunks(width * self.layout.times.len());
                for (path, rows) in (first_path..).zip(paths) {
                    let path = path.to_string();
                    for (time, row) in self.layout.times.iter().zip(rows.chunks(width)) {
                        writer.write_field(&path)?;
                        writer.write_field(time.to_string())?;
                        for value in row {
                            writer.write_field(value.to_string())?;
                        }
                        writer.write_record(None::<&[u8]>)?;
                    }
                }
                Ok(())
            }
        }
    }

    /// The files, complete but not yet under their names; beside an NPY file goes its description.
    pub(super) fn complete(self, description: &Value) -> Result<Vec<OutputFile>, Failure> {
        match self.form {
            Form::Csv(writer) => {
                let file = writer
                    .into_inner()
                    .map_err(|e| Failure(e.error().to_string()))?;
                Ok(vec![file])
            }
            Form::Npy(file, mut beside) => {
                beside.write_text(&format!("{description:#}\n"))?;
                Ok(vec![file, beside])
            }
        }
    }
}

/// The head of an NPY file, format version 1.0 (NumPy Enhancement Proposal 1): magic, version, length,
/// and a Python dictionary padded so that the data are aligned to 64 bytes.
fn npy_header(layout: &Layout) -> Vec<u8> {
    const MAGIC: &[u8] = b"\x93NUMPY\x01\x00";
    let shape = format!(
        "({}, {}, {})",
        layout.paths,
        layout.times.len(),
        layout.quantities.len()
    );
    let mut dictionary = format!("{{'descr': '<f8', 'fortran_order': False, 'shape': {shape}, }}");
    let unpadded = MAGIC.len() + 2 + dictionary.len() + 1;
    dictionary.push_str(&" ".repeat(unpadded.next_multiple_of(64) - unpadded));
    dictionary.push('\n');
    let length = u16::try_from(dictionary.len()).unwrap_or(u16::MAX);
    [MAGIC, &length.to_le_bytes(), dictionary.as_bytes()].concat()
}

#[cfg(test)]
mod tests {
    use super::super::output::commit_all;
    use super::*;

    fn layout() -> Layout {
        Layout {
            quantities: vec!["S".into(), "log_S".into()],
            times: vec![0.5, 1.0],
            paths: 2,
        }
    }

    const VALUES: [f64; 8] = [0.0, 1.0, 2.0, 3.0, 10.0, 11.0, 12.0, 13.5];

    #[test]
    fn the_header_is_aligned_and_names_the_shape() {
        let header = npy_header(&layout());
        assert_eq!(header.len() % 64, 0);
        let text = String::from_utf8_lossy(&header[10..]).into_owned();
        assert!(
            text.contains("'shape': (2, 2, 2)") && text.ends_with(" \n"),
            "{text}"
        );
        assert_eq!(
            usize::from(u16::from_le_bytes([header[8], header[9]])),
            header.len() - 10
        );
    }

    #[test]
    fn npy_is_path_major() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("x.npy");
        let mut file = PathsFile::create(&path, layout()).unwrap();
        file.append(7, &VALUES).unwrap();
        commit_all(file.complete(&Value::Null).unwrap()).unwrap();
        let bytes = std::fs::read(&path).unwrap();
        let numbers: Vec<f64> = bytes[bytes.len() - 64..]
            .chunks(8)
            .map(|c| f64::from_le_bytes(c.try_into().unwrap()))
            .collect();
        assert_eq!(numbers, VALUES);
        assert!(folder.path().join("x.npy.json").exists());
    }

    #[test]
    fn csv_has_a_row_a_path_and_time() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("x.csv");
        let mut file = PathsFile::create(&path, layout()).unwrap();
        file.append(7, &VALUES).unwrap();
        commit_all(file.complete(&Value::Null).unwrap()).unwrap();
        let text = std::fs::read_to_string(&path).unwrap();
        assert_eq!(
            text,
            "path,time,S,log_S\n7,0.5,0,1\n7,1,2,3\n8,0.5,10,11\n8,1,12,13.5\n"
        );
    }
}
