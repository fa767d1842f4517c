//! `simulate`: statistics, files, parts, determinism.

use serde_json::Value;

use crate::harness::{Folder, json, run};

const ORCHARD: &str = "models/orchard_spot.toml";

fn floats(value: &Value) -> Vec<f64> {
    value
        .as_array()
        .unwrap()
        .iter()
        .map(|v| v.as_f64().unwrap())
        .collect()
}

#[test]
fn json_holds_the_contract() {
    let found = json(&[
        "simulate", ORCHARD, "--paths", "1000", "--times", "0.5,1", "--seed", "7", "--format",
        "json",
    ]);
    assert_eq!(found["model"], "orchard_spot");
    assert_eq!(found["paths"], 1000);
    assert_eq!(found["seed"], 7);
    assert_eq!(floats(&found["times"]), [0.5, 1.0]);
    assert_eq!(
        found["failures"],
        serde_json::json!({ "non_finite": 0, "left_domain": 0 })
    );
    let quantities = found["quantities"].as_object().unwrap();
    assert_eq!(
        quantities.keys().collect::<Vec<_>>(),
        ["S", "log_S", "square_root", "call"]
    );
    for (name, quantity) in quantities {
        for key in [
            "mean",
            "variance",
            "std_error",
            "skewness",
            "excess_kurtosis",
            "minimum",
            "maximum",
        ] {
            assert_eq!(floats(&quantity[key]).len(), 2, "{name} {key}");
        }
        let levels = quantity["quantiles"].as_object().unwrap();
        assert_eq!(
            levels.keys().collect::<Vec<_>>(),
            ["0.01", "0.05", "0.25", "0.5", "0.75", "0.95", "0.99"]
        );
    }
    let manifest = &found["manifest"];
    assert!(manifest["stream_version"].is_u64() && manifest["tool_version"].is_string());
    assert!(["fused", "unfused"].contains(&manifest["arithmetic"].as_str().unwrap()));
    assert_eq!(manifest["scheme"]["S"], "exact");
    assert_eq!(found["defaults"], serde_json::json!([]));
}

#[test]
fn defaults_are_stated() {
    let human = run(&["simulate", ORCHARD]);
    assert_eq!(human.status, 0);
    for stated in ["100,000 paths", "horizon 1", "seed 0", "stream version"] {
        assert!(human.out.contains(stated), "{stated}: {}", human.out);
    }
    let approximate = run(&["simulate", "models/kelp_stock.toml", "--paths", "500"]);
    assert!(approximate.out.contains("200 steps"), "{}", approximate.out);
}

#[test]
fn threads_do_not_matter_and_seeds_do() {
    let call = |threads: &str, seed: &str| {
        run(&[
            "simulate",
            ORCHARD,
            "--paths",
            "5000",
            "--threads",
            threads,
            "--seed",
            seed,
            "--format",
            "json",
        ])
        .out
    };
    assert_eq!(call("1", "0"), call("3", "0"));
    assert_ne!(call("1", "0"), call("1", "1"));
}

/// The values of an NPY file written by the tool, and its shape.
fn npy(path: &str) -> (Vec<usize>, Vec<f64>) {
    let bytes = std::fs::read(path).unwrap();
    assert_eq!(&bytes[..8], b"\x93NUMPY\x01\x00");
    let length = usize::from(u16::from_le_bytes([bytes[8], bytes[9]]));
    let header = std::str::from_utf8(&bytes[10..10 + length]).unwrap();
    assert_eq!((10 + length) % 64, 0);
    assert!(header.contains("'descr': '<f8'") && header.contains("'fortran_order': False"));
    let shape = header
        .split_once("'shape': (")
        .unwrap()
        .1
        .split_once(')')
        .unwrap()
        .0;
    let shape = shape.split(", ").map(|n| n.parse().unwrap()).collect();
    let numbers = bytes[10 + length..]
        .chunks(8)
        .map(|c| f64::from_le_bytes(c.try_into().unwrap()));
    (shape, numbers.collect())
}

#[test]
fn parts_have_the_bits_of_the_whole() {
    let folder = Folder::new();
    let whole = folder.path("whole.npy");
    let common = [
        "simulate", ORCHARD, "--paths", "1000", "--times", "0.5,1", "--output",
    ];
    let call = |path: &str, part: Option<&str>| {
        let mut arguments = common.to_vec();
        arguments.push(path);
        arguments.extend(part.iter().flat_map(|p| ["--part", *p]));
        assert_eq!(run(&arguments).status, 0);
    };
    call(&whole, None);
    let (shape, all) = npy(&whole);
    assert_eq!(shape, [1000, 2, 4]);
    let mut joined = Vec::new();
    for part in ["1/3", "2/3", "3/3"] {
        let path = folder.path("part.npy");
        call(&path, Some(part));
        let beside: Value =
            serde_json::from_str(&std::fs::read_to_string(folder.path("part.npy.json")).unwrap())
                .unwrap();
        assert_eq!(beside["first_path"], joined.len() / 8, "{part}");
        assert_eq!(
            beside["quantities"],
            serde_json::json!(["S", "log_S", "square_root", "call"])
        );
        joined.extend(npy(&path).1);
    }
    let bits = |values: &[f64]| values.iter().map(|v| v.to_bits()).collect::<Vec<_>>();
    assert_eq!(bits(&all), bits(&joined));
}

#[test]
fn csv_and_npy_hold_the_same_numbers() {
    let folder = Folder::new();
    let (csv, array) = (folder.path("x.csv"), folder.path("x.npy"));
    for path in [&csv, &array] {
        assert_eq!(
            run(&["simulate", ORCHARD, "--paths", "300", "--output", path]).status,
            0
        );
    }
    let text = std::fs::read_to_string(&csv).unwrap();
    let mut lines = text.lines();
    assert_eq!(lines.next(), Some("path,time,S,log_S,square_root,call"));
    let (_, values) = npy(&array);
    let mut rows = 0;
    for (i, (line, row)) in lines.zip(values.chunks(4)).enumerate() {
        let fields: Vec<&str> = line.split(',').collect();
        assert_eq!((fields[0], fields[1]), (i.to_string().as_str(), "1"));
        let numbers: Vec<f64> = fields[2..].iter().map(|f| f.parse().unwrap()).collect();
        assert_eq!(numbers, row);
        rows += 1;
    }
    assert_eq!(rows, 300);
    assert_eq!(folder.files(), ["x.csv", "x.npy", "x.npy.json"]);
}

#[test]
fn a_failed_run_leaves_no_file() {
    let folder = Folder::new();
    let ran = run(&["simulate", ORCHARD, "--output", &folder.path("no/x.csv")]);
    assert_eq!((ran.status, ran.out.as_str()), (2, ""));
    // The paths' file is open when the chart's folder turns out not to exist.
    let ran = run(&[
        "simulate",
        ORCHARD,
        "--paths",
        "500",
        "--output",
        &folder.path("x.csv"),
        "--plot",
        &folder.path("no/x.svg"),
    ]);
    assert_eq!((ran.status, ran.out.as_str()), (2, ""));
    assert_eq!(folder.files(), Vec::<String>::new());
}

#[test]
fn the_summary_is_the_same_with_and_without_files() {
    let folder = Folder::new();
    let plain = run(&["simulate", ORCHARD, "--paths", "2000", "--format", "json"]);
    let with = run(&[
        "simulate",
        ORCHARD,
        "--paths",
        "2000",
        "--format",
        "json",
        "--plot",
        &folder.path("fan.svg"),
        "--output",
        &folder.path("x.npy"),
    ]);
    assert_eq!(plain.out, with.out);
    let svg = std::fs::read_to_string(folder.path("fan.svg")).unwrap();
    for part in [
        "<title",
        "<desc",
        "prefers-color-scheme:dark",
        "class=\"b1\"",
        "class=\"mean\"",
        "square_root",
    ] {
        assert!(svg.contains(part), "{part}");
    }
    assert!(!svg.contains("NaN"));
}

#[test]
fn values_that_are_not_finite_are_null_and_counted() {
    let ran = run(&[
        "simulate", ORCHARD, "--paths", "300", "--set", "mu=1e6", "--format", "json",
    ]);
    assert_eq!(ran.status, 0, "{}", ran.err);
    let found: Value = serde_json::from_str(&ran.out).unwrap();
    assert_eq!(found["failures"]["non_finite"], 300);
    assert!(found["quantities"]["S"]["variance"][0].is_null());
}

/// A fact that ranges and assumptions leave open is checked at the values of the run: Feller's condition
/// `2 kappa theta >= xi^2` of the variance (Cox, Ingersoll and Ross 1985).
#[test]
fn facts_are_checked_at_the_values_of_a_run() {
    let wool = "models/wool_sale.toml";
    for (kappa, holds) in [("3", true), ("0.1", false)] {
        let set = format!("kappa={kappa}");
        for command in ["simulate", "verify"] {
            let arguments = [
                command,
                wool,
                "--paths",
                "2000",
                "--set",
                "theta=0.05",
                "--set",
                "xi=0.5",
                "--set",
                &set,
            ];
            let ran = run(&[&arguments[..], &["--format", "json"]].concat());
            let found: Value = serde_json::from_str(&ran.out).unwrap();
            let facts = match command {
                "simulate" => &found["manifest"]["facts"],
                _ => &found["facts"],
            };
            let end = facts
                .as_array()
                .unwrap()
                .iter()
                .find(|f| f["statement"] == "v does not attain 0");
            let end = end.unwrap();
            assert_eq!(end["condition"], "2*kappa*theta >= xi^2");
            assert_eq!(end["holds"], holds, "{command} {kappa}");
            let shown = run(&arguments).out;
            let word = if holds { "holds" } else { "does not hold" };
            let line = format!("{word} at these parameters: v does not attain 0");
            assert!(shown.contains(&line), "{line} is missing in\n{shown}");
        }
    }
}
