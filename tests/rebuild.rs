//! A user's crate is compiled again exactly when an input of its models has changed, by build script and
//! by macro alike.

use std::path::{Path, PathBuf};
use std::process::{Command, Output};

const MODEL: &str = r#"[model]
name    = "pier"
drivers = ["W"]

[parameters]
mu = 0.125

[states.X]
initial   = "1"
drift     = "mu"
diffusion = "1"
"#;

/// A crate with one binary per way to compile a model.
struct Crate {
    root: PathBuf,
}

impl Crate {
    fn new() -> Self {
        let root = Path::new(env!("CARGO_TARGET_TMPDIR")).join("rebuild");
        let workspace = Path::new(env!("CARGO_MANIFEST_DIR"))
            .parent()
            .expect("tests/ has a parent");
        let dependency = |name: &str, folder: &str| {
            format!("{name} = {{ path = {:?} }}\n", workspace.join(folder))
        };
        let manifest = format!(
            "[package]\nname = \"pier-user\"\nversion = \"0.1.0\"\nedition = \"2024\"\n\n[dependencies]\n{}{}\n\
             [build-dependencies]\n{}\n[workspace]\n",
            dependency("driftwright-runtime", "runtime"),
            dependency("driftwright-macros", "macros"),
            dependency("driftwright", "compiler"),
        );
        let this = Self { root };
        this.write("Cargo.toml", &manifest);
        let lock =
            std::fs::read_to_string(workspace.join("Cargo.lock")).expect("the workspace is locked");
        this.write("Cargo.lock", &lock);
        this.write(
            "build.rs",
            "fn main() {\n    driftwright::build::models([\"models/pier.toml\"]);\n}\n",
        );
        let built = "include!(concat!(env!(\"OUT_DIR\"), \"/pier.rs\"));\n";
        let expanded = "driftwright_macros::model!(\"models/expanded.toml\");\n";
        let main = "fn main() {\n    println!(\"{:?}\", pier::Parameters::default());\n}\n";
        this.write("src/bin/built.rs", &format!("{built}{main}"));
        this.write("src/bin/expanded.rs", &format!("{expanded}{main}"));
        this.write("models/pier.toml", MODEL);
        this.write("models/expanded.toml", MODEL);
        this.write("notes.txt", "first");
        this
    }

    /// Writes a file, with a time stamp that no earlier build has seen.
    fn write(&self, file: &str, text: &str) {
        let path = self.root.join(file);
        std::fs::create_dir_all(path.parent().expect("every file has a folder"))
            .expect("a writable folder");
        std::fs::write(path, text).expect("a writable file");
    }

    fn cargo(&self) -> Output {
        Command::new(env!("CARGO"))
            .args(["build", "--offline", "--message-format=json"])
            .current_dir(&self.root)
            .env("CARGO_TARGET_DIR", self.root.join("target"))
            .env_remove("RUSTFLAGS")
            .output()
            .expect("cargo runs")
    }

    /// Builds; returns the binaries that were compiled again.
    fn compiled(&self) -> Vec<String> {
        let output = self.cargo();
        let errors = String::from_utf8_lossy(&output.stderr);
        assert!(output.status.success(), "{errors}");
        let text = String::from_utf8(output.stdout).expect("cargo writes UTF-8");
        let messages = text.lines().map(|line| {
            serde_json::from_str::<serde_json::Value>(line).expect("cargo writes JSON lines")
        });
        let mut names: Vec<String> = messages
            .filter(|m| {
                m["reason"] == "compiler-artifact"
                    && m["target"]["kind"][0] == "bin"
                    && m["fresh"] == false
            })
            .map(|m| {
                m["target"]["name"]
                    .as_str()
                    .expect("targets have names")
                    .to_owned()
            })
            .collect();
        names.sort();
        names
    }

    /// What is said of a crate that does not compile, by build script and compiler.
    fn refusal(&self) -> String {
        let refused = self.cargo();
        assert_eq!(refused.status.code(), Some(101));
        let said = [refused.stdout, refused.stderr].concat();
        String::from_utf8(said).expect("cargo writes UTF-8")
    }

    fn printed(&self, binary: &str) -> String {
        let output = Command::new(self.root.join("target/debug").join(binary))
            .output()
            .expect("it was built");
        String::from_utf8(output.stdout)
            .expect("it prints UTF-8")
            .trim()
            .to_owned()
    }
}

#[test]
fn a_crate_is_compiled_again_exactly_when_a_model_changed() {
    let user = Crate::new();
    user.compiled();
    assert_eq!(user.printed("built"), "Parameters { mu: 0.125 }");
    assert_eq!(user.compiled(), [""; 0], "nothing changed");

    user.write("notes.txt", "second");
    assert_eq!(user.compiled(), [""; 0], "no input changed");

    user.write("models/pier.toml", &MODEL.replace("0.125", "0.25"));
    assert_eq!(
        user.compiled(),
        ["built", "expanded"],
        "the build script's output belongs to both"
    );
    assert_eq!(user.printed("built"), "Parameters { mu: 0.25 }");
    assert_eq!(user.printed("expanded"), "Parameters { mu: 0.125 }");

    user.write("models/expanded.toml", &MODEL.replace("0.125", "0.5"));
    assert_eq!(user.compiled(), ["expanded"], "the macro tracks its file");
    assert_eq!(user.printed("expanded"), "Parameters { mu: 0.5 }");

    user.write("models/pier.toml", &MODEL.replace("\"mu\"", "\"nu\""));
    let refused = user.cargo();
    let errors = String::from_utf8_lossy(&refused.stderr);
    assert!(!refused.status.success());
    assert!(
        errors.contains("models/pier.toml:10:14") && errors.contains("drift     = \"nu\""),
        "{errors}"
    );

    // Nesting is a finding on whatever stack Cargo and the compiler give a model, not an overflow of it.
    let deep = format!("\"{}mu{}\"", "(".repeat(100_000), ")".repeat(100_000));
    let deep = MODEL.replace("\"mu\"", &deep);
    user.write("models/pier.toml", &deep);
    assert!(user.refusal().contains("DW0205"), "{}", user.refusal());
    user.write("models/pier.toml", MODEL);
    user.write("models/expanded.toml", &deep);
    assert!(user.refusal().contains("DW0205"), "{}", user.refusal());
}
