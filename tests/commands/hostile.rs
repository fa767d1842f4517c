//! Hostile input and outputs: a clear error, the status of the contract, nothing half-written.

use crate::harness::{Folder, altered, run};

/// A model whose parameter `mu` has this value, as text.
fn with_value(value: &str) -> String {
    altered(
        "orchard_spot.toml",
        "{ value = 0.05,",
        &format!("{{ value = {value},"),
    )
}

#[test]
fn bytes_that_are_no_text_are_findings_in_every_command() {
    let folder = Folder::new();
    let good = altered("orchard_spot.toml", "EUR/t", "EUR/t");
    let cases: [(&str, Vec<u8>); 4] = [
        ("latin", [good.as_bytes(), b"# caf\xe9\n"].concat()),
        ("zero", [good.as_bytes(), b"# \0\n"].concat()),
        ("utf16", b"\xff\xfe[\0m\0".to_vec()),
        ("empty", Vec::new()),
    ];
    for (name, bytes) in cases {
        let path = folder.path(&format!("{name}.toml"));
        std::fs::write(&path, bytes).unwrap();
        for command in [
            "check", "derive", "generate", "simulate", "verify", "format",
        ] {
            let ran = run(&[command, &path]);
            assert_eq!(ran.status, 2, "{command} {name}");
            let said = ran.out + &ran.err;
            assert!(said.contains("error[DW"), "{command} {name}: {said}");
        }
    }
    assert_eq!(folder.files().len(), 4);
}

#[test]
fn numbers_out_of_reach_are_findings_and_tiny_ones_are_not() {
    let folder = Folder::new();
    let digits = "9".repeat(400);
    for value in [
        "1e999999",
        "1e400",
        "nan",
        "inf",
        &digits,
        "1e-999999999999",
    ] {
        let path = folder.write("m.toml", &with_value(value));
        let ran = run(&["check", &path]);
        assert_eq!(ran.status, 2, "{value}: {}", ran.out);
        assert!(ran.out.contains("error[DW"), "{value}: {}", ran.out);
    }
    let path = folder.write("m.toml", &with_value("1e-300"));
    assert_eq!(run(&["simulate", &path, "--paths", "64"]).status, 0);
}

#[test]
fn nesting_is_a_finding_in_every_command() {
    let folder = Folder::new();
    let (open, close) = ("(".repeat(100_000), ")".repeat(100_000));
    let formula = altered(
        "orchard_spot.toml",
        "\"mu*S\"",
        &format!("\"{open}S{close}\""),
    );
    let (open, close) = (open.replace('(', "["), close.replace(')', "]"));
    let arrays = altered("orchard_spot.toml", "\"mu*S\"", &format!("{open}{close}"));
    for (text, code) in [(formula, "DW0205"), (arrays, "DW0002")] {
        let path = folder.write("m.toml", &text);
        for command in [
            "check", "derive", "generate", "simulate", "verify", "format",
        ] {
            let ran = run(&[command, &path]);
            assert_eq!(ran.status, 2, "{command}");
            let said = ran.out + &ran.err;
            assert!(said.contains(code), "{command}: {said}");
            // The line is far longer than anyone reads.
            assert!(said.len() < 2000, "{command}: {} bytes", said.len());
        }
    }
}

#[test]
fn a_folder_is_neither_model_nor_output() {
    let folder = Folder::new();
    let path = folder.path("");
    assert_eq!(run(&["check", &path]).status, 2);
    let ran = run(&["schema", "--output", &path]);
    assert_eq!(ran.status, 2);
    assert!(ran.err.contains("directory"), "{}", ran.err);
}

#[cfg(unix)]
mod unix {
    use std::fs::{self, File, Permissions};
    use std::os::unix::fs::{PermissionsExt, symlink};
    use std::process::Command;
    use std::time::{Duration, Instant};

    use crate::harness::{Folder, binary, run};

    #[test]
    fn a_full_disk_is_said_and_is_status_2() {
        for arguments in [
            &["derive", "models/orchard_spot.toml"][..],
            &["check", "--format", "sarif", "models/orchard_spot.toml"],
            &["schema"],
        ] {
            let full = File::options().write(true).open("/dev/full");
            let Ok(full) = full else { return };
            let output = binary().args(arguments).stdout(full).output().unwrap();
            let said = String::from_utf8_lossy(&output.stderr).into_owned();
            assert_eq!(output.status.code(), Some(2), "{arguments:?}");
            assert!(said.contains("cannot write to standard output"), "{said}");
        }
    }

    #[test]
    fn a_device_that_is_full_is_said_and_is_status_2() {
        let folder = Folder::new();
        let link = folder.path("x.csv");
        if !std::path::Path::new("/dev/full").exists() {
            return;
        }
        symlink("/dev/full", &link).unwrap();
        let ran = run(&[
            "simulate",
            "models/orchard_spot.toml",
            "--paths",
            "5000",
            "--output",
            &link,
        ]);
        assert_eq!(ran.status, 2);
        assert!(ran.err.contains("could not be written"), "{}", ran.err);
        assert_eq!(folder.files(), ["x.csv"]);
    }

    /// As `driftwright derive model.toml | head` has it.
    #[test]
    fn a_reader_that_has_gone_away_is_no_failure() {
        for arguments in [
            &["derive", "models/orchard_spot.toml"][..],
            &["check", "--format", "json", "models/orchard_spot.toml"],
            &["schema"],
        ] {
            let (reader, writer) = std::io::pipe().unwrap();
            drop(reader);
            let output = binary().args(arguments).stdout(writer).output().unwrap();
            assert_eq!(output.status.code(), Some(0), "{arguments:?}");
            assert!(output.stderr.is_empty(), "{output:?}");
        }
    }

    #[test]
    fn the_file_behind_a_link_is_replaced_with_its_permissions() {
        let folder = Folder::new();
        let real = folder.write("real.json", "old");
        fs::set_permissions(&real, Permissions::from_mode(0o640)).unwrap();
        let link = folder.path("link.json");
        symlink("real.json", &link).unwrap();
        assert_eq!(run(&["schema", "--output", &link]).status, 0);
        assert!(fs::symlink_metadata(&link).unwrap().is_symlink());
        assert!(fs::read_to_string(&real).unwrap().starts_with('{'));
        let mode = fs::metadata(&real).unwrap().permissions().mode();
        assert_eq!(mode & 0o777, 0o640);
    }

    #[test]
    fn links_to_nowhere_and_read_only_files_are_refused() {
        let folder = Folder::new();
        let (nowhere, circle) = (folder.path("nowhere"), folder.path("circle"));
        symlink("none", &nowhere).unwrap();
        symlink("circle", &circle).unwrap();
        let kept = folder.write("kept.json", "old");
        fs::set_permissions(&kept, Permissions::from_mode(0o444)).unwrap();
        for (path, why) in [
            (&nowhere, "symbolic link"),
            (&circle, "symbolic link"),
            (&kept, "read-only"),
        ] {
            let ran = run(&["schema", "--output", path]);
            assert_eq!(ran.status, 2, "{path}");
            assert!(ran.err.contains(why), "{}", ran.err);
        }
        assert_eq!(fs::read_to_string(&kept).unwrap(), "old");
        assert_eq!(folder.files(), ["circle", "kept.json", "nowhere"]);
    }

    #[test]
    fn an_interrupt_leaves_no_file() {
        let folder = Folder::new();
        let output = folder.path("x.csv");
        let mut child = binary()
            .args([
                "simulate",
                "models/honey_market.toml",
                "--paths",
                "1e8",
                "--output",
                &output,
            ])
            .spawn()
            .unwrap();
        let start = Instant::now();
        while folder.files().is_empty() && start.elapsed() < Duration::from_secs(60) {
            std::thread::sleep(Duration::from_millis(20));
        }
        assert_eq!(folder.files().len(), 1);
        let killed = Command::new("kill")
            .args(["-INT", &child.id().to_string()])
            .status();
        assert!(killed.unwrap().success());
        assert_eq!(child.wait().unwrap().code(), Some(130));
        assert_eq!(folder.files(), Vec::<String>::new());
    }
}
