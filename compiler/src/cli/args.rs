//! The command line's grammar: commands, options, and the help people read.

use std::path::PathBuf;

use clap::{Args, Parser, Subcommand, ValueEnum};
use driftwright_runtime::ArithmeticClass;

use super::parse;
use crate::meaning::signoff::ENDING as SIGNOFF_ENDING;

/// From a stochastic differential equation in TOML to the code that simulates it.
///
/// driftwright reads models written as stochastic differential equations, derives the dynamics of
/// every quantity you name by Ito's rule, proves or refutes what you claim about them, chooses how
/// to step each state (an exact law where one can be proved), and simulates, or writes the Rust that
/// does.
#[derive(Debug, Parser)]
#[command(name = "driftwright", version, propagate_version = true, after_long_help = OVERVIEW)]
pub struct Cli {
    /// What to do.
    #[command(subcommand)]
    pub command: Command,
}

const OVERVIEW: &str = "\
A first session:
  driftwright check models/orchard_spot.toml      is the model sound, do its claims hold?
  driftwright derive models/orchard_spot.toml     the derivation a reviewer reads
  driftwright verify models/orchard_spot.toml     simulate it and hold it against analytic values
  driftwright simulate models/orchard_spot.toml --horizon 5 --plot fan.svg

Exit status: 0 all is well; 1 a claim, verification or sign-off did not hold; 2 the input or the command
line is wrong, and nothing was written. With several files the worst status counts.";

/// The commands.
#[derive(Debug, Subcommand)]
pub enum Command {
    /// Read models, derive, prove the claims, choose the methods, and print diagnostics
    ///
    /// Reads each model file, resolves its names, derives the dynamics, proves or refutes the claims
    /// and chooses the methods. Everything found is printed in one run, with the place in the file.
    #[command(after_long_help = CHECK_EXAMPLES)]
    Check(CheckArgs),
    /// Print the derivation a reviewer reads
    ///
    /// Writes the model's dossier: its assumptions, the dynamics of each state, Ito's rule applied to
    /// each derived quantity with the Ito correction set apart, the methods with their reasons and
    /// what was rejected, and the claims with their verdicts.
    #[command(after_long_help = DERIVE_EXAMPLES)]
    Derive(DeriveArgs),
    /// Write the Rust source that simulates the model
    ///
    /// Writes the same source that the build script and the macro produce. The generated code needs
    /// the crate driftwright-runtime and nothing else.
    #[command(after_long_help = GENERATE_EXAMPLES)]
    Generate(GenerateArgs),
    /// Run paths and summarise them, or write them to a file
    ///
    /// Simulates the model in process; no Rust toolchain is needed. Path k is a pure function of the
    /// model, the parameters, the times, the arithmetic class, the seed and k: the same on any number
    /// of threads and in any part of the run. Statistics need bounded memory, however many paths.
    #[command(after_long_help = SIMULATE_EXAMPLES)]
    Simulate(SimulateArgs),
    /// Simulate, and hold the sample against the analytic values
    ///
    /// Runs paths and compares sample means, variances, covariances, quantiles and open claims with
    /// the analytic values the compiler derived. All checks share one family-wise error of 0.001:
    /// each is held to the threshold that a set of that size allows (Sidak 1967). Where a scheme is
    /// approximate the model is also run at twice the step, and the discretisation bias estimated
    /// from the two runs is shown beside each z-score and allowed for, never hidden.
    #[command(after_long_help = VERIFY_EXAMPLES)]
    Verify(VerifyArgs),
    /// Show what changed in meaning between two versions of a model
    ///
    /// Compares formulas, ranges, assumptions, correlations, domains, schemes and claims by proof: what is
    /// written otherwise and means the same is no change, and a renaming is shown as one. For what changed
    /// it shows the difference, and which drifts, corrections, methods, moments and verdicts follow.
    #[command(after_long_help = COMPARE_EXAMPLES)]
    Compare(CompareArgs),
    /// Record that a model has been reviewed as it stands
    ///
    /// Writes the sign-off beside the model, in FILE's neighbour *.signoff.toml: who, when, and what was
    /// reviewed. Layout, titles and default values do not void it; any change of meaning does, and
    /// `check --require-signoff` then shows what changed.
    #[command(after_long_help = SIGNOFF_EXAMPLES)]
    Signoff(SignoffArgs),
    /// Write models in one canonical layout
    ///
    /// Orders tables and keys, aligns equality signs and puts spaces in formulas, in place. Comments
    /// are kept, and what a model means is compared before and after, formula by formula: a file whose
    /// meaning would change, or that has errors, is left as it is. Where one of several files cannot be
    /// laid out, none is written.
    #[command(after_long_help = FORMAT_EXAMPLES)]
    Format(FormatArgs),
    /// Print the JSON Schema of the model file
    ///
    /// Editors that read JSON Schema complete and check model files with it.
    #[command(after_long_help = SCHEMA_EXAMPLES)]
    Schema(SchemaArgs),
    /// Print completions for a shell
    ///
    /// Writes a completion script for the named shell to standard output.
    #[command(after_long_help = COMPLETIONS_EXAMPLES)]
    Completions(CompletionsArgs),
}

impl Command {
    /// Sign-offs stand beside the models, and `models/*.toml` names them too: among several files they are
    /// left out. One that is named alone is read, and refused as no model.
    pub(super) fn leave_out_signoffs(&mut self) {
        let files = match self {
            Self::Check(args) => &mut args.files,
            Self::Generate(args) => &mut args.files,
            Self::Verify(args) => &mut args.files,
            Self::Format(args) => &mut args.files,
            _ => return,
        };
        let is_model = |path: &PathBuf| {
            let name = path.file_name().unwrap_or_default();
            !name.to_string_lossy().ends_with(SIGNOFF_ENDING)
        };
        if files.iter().any(is_model) {
            files.retain(is_model);
        }
    }
}

const CHECK_EXAMPLES: &str = "\
Examples:
  driftwright check models/*.toml
  driftwright check --format json model.toml
  driftwright check --format sarif models/*.toml > findings.sarif
  driftwright check --explain DW0103";

const DERIVE_EXAMPLES: &str = "\
Examples:
  driftwright derive model.toml
  driftwright derive model.toml --of 'S^2*exp(-r*t)'
  driftwright derive model.toml --format markdown --output dossier.md";

const GENERATE_EXAMPLES: &str = "\
Examples:
  driftwright generate model.toml --output src/model.rs
  driftwright generate models/*.toml";

const SIMULATE_EXAMPLES: &str = "\
Examples:
  driftwright simulate model.toml
  driftwright simulate model.toml --paths 1e6 --horizon 2 --set sigma=0.3
  driftwright simulate model.toml --times 0.25,0.5,1 --format json
  driftwright simulate model.toml --horizon 5 --plot fan.svg
  driftwright simulate model.toml --paths 1e7 --part 2/8 --output part2.npy";

const VERIFY_EXAMPLES: &str = "\
Examples:
  driftwright verify models/*.toml
  driftwright verify model.toml --times 0.5,1,2 --paths 1e6
  driftwright verify model.toml --format json";

const FORMAT_EXAMPLES: &str = "\
Examples:
  driftwright format models/*.toml
  driftwright format --check models/*.toml";

const COMPARE_EXAMPLES: &str = "\
Examples:
  driftwright compare old.toml new.toml
  driftwright compare --since main models/orchard_spot.toml --format markdown";

const SIGNOFF_EXAMPLES: &str = "\
Example:
  driftwright signoff models/orchard_spot.toml --by \"R. Reviewer\" --note \"checked against the term sheet\"
  driftwright check --require-signoff models/*.toml";

const SCHEMA_EXAMPLES: &str = "\
Example:
  driftwright schema > driftwright.schema.json";

const COMPLETIONS_EXAMPLES: &str = "\
Example:
  driftwright completions bash > ~/.local/share/bash-completion/completions/driftwright";

/// Output for people or for programs.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum Format {
    /// For people
    Human,
    /// For programs
    Json,
}

/// Output formats of `check`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum CheckFormat {
    /// For people
    Human,
    /// For programs
    Json,
    /// SARIF 2.1.0, for services that show findings beside the code
    Sarif,
}

/// Output formats of `derive`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum DeriveFormat {
    /// Plain text for a terminal of 100 columns
    Text,
    /// Markdown
    Markdown,
    /// One self-contained page with typeset formulas, for a browser
    Html,
    /// An article for LaTeX
    Latex,
    /// For programs; formulas are strings in the grammar of the model file
    Json,
}

/// `check`
#[derive(Debug, Args)]
pub struct CheckArgs {
    /// Refuse models without a valid sign-off, and show what changed since it
    #[arg(long)]
    pub require_signoff: bool,
    /// Model files
    #[arg(value_name = "FILE", required_unless_present = "explain")]
    pub files: Vec<PathBuf>,
    /// Output for people or for programs
    #[arg(long, value_enum, default_value_t = CheckFormat::Human)]
    pub format: CheckFormat,
    /// Treat warnings as errors
    #[arg(long)]
    pub deny_warnings: bool,
    /// Explain a diagnostic's code, such as DW0103, and stop
    #[arg(long, value_name = "CODE", conflicts_with_all = ["files", "deny_warnings"])]
    pub explain: Option<String>,
}

/// `derive`
#[derive(Debug, Args)]
pub struct DeriveArgs {
    /// Model file
    pub file: PathBuf,
    /// Form of the derivation
    #[arg(long, value_enum, default_value_t = DeriveFormat::Text)]
    pub format: DeriveFormat,
    /// Apply Ito's rule to this formula on the spot, instead of deriving the whole model
    #[arg(long, value_name = "FORMULA", allow_hyphen_values = true)]
    pub of: Option<String>,
    /// Write to this file instead of standard output
    #[arg(long, short, value_name = "PATH")]
    pub output: Option<PathBuf>,
}

/// `compare`
#[derive(Debug, Args)]
pub struct CompareArgs {
    /// Earlier version, or with --since the model file
    #[arg(value_name = "OLD")]
    pub old: PathBuf,
    /// Later version
    #[arg(
        value_name = "NEW",
        required_unless_present = "since",
        conflicts_with = "since"
    )]
    pub new: Option<PathBuf>,
    /// Read the earlier version of the file from this revision of its git repository
    #[arg(long, value_name = "REV")]
    pub since: Option<String>,
    /// Form of the comparison
    #[arg(long, value_enum, default_value_t = CompareFormat::Text)]
    pub format: CompareFormat,
    /// Write to this file instead of standard output
    #[arg(long, short, value_name = "PATH")]
    pub output: Option<PathBuf>,
}

/// Output formats of `compare`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum CompareFormat {
    /// Plain text for a terminal of 100 columns
    Text,
    /// Markdown, for a comment on a proposed change
    Markdown,
    /// One self-contained page
    Html,
    /// For programs
    Json,
}

/// `signoff`
#[derive(Debug, Args)]
pub struct SignoffArgs {
    /// Model file
    pub file: PathBuf,
    /// Who reviewed it
    #[arg(long, value_name = "NAME")]
    pub by: String,
    /// What the reviewer wants known
    #[arg(long, value_name = "TEXT")]
    pub note: Option<String>,
}

/// `generate`
#[derive(Debug, Args)]
pub struct GenerateArgs {
    /// Model files
    #[arg(value_name = "FILE", required = true)]
    pub files: Vec<PathBuf>,
    /// Write to this file instead of standard output; several models go one after the other
    #[arg(long, short, value_name = "PATH")]
    pub output: Option<PathBuf>,
}

/// What `simulate` and `verify` share.
#[derive(Debug, Args)]
pub struct RunArgs {
    /// Number of paths [default: 100000]
    #[arg(long, value_name = "N", allow_negative_numbers = true, value_parser = parse::count)]
    pub paths: Option<u64>,
    /// End of the simulation, in the model's unit of time [default: 1, or the last of --times]
    #[arg(long, value_name = "T", allow_negative_numbers = true, value_parser = parse::positive)]
    pub horizon: Option<f64>,
    /// Cut the horizon into N equal steps [default: none for exact laws, 200 for approximate schemes]
    #[arg(long, value_name = "N", value_parser = parse::steps)]
    pub steps: Option<usize>,
    /// Observation times, separated by commas [default: the horizon alone]
    #[arg(long, value_name = "T,...", value_delimiter = ',', allow_negative_numbers = true, value_parser = parse::time)]
    pub times: Option<Vec<f64>>,
    /// Seed of the random numbers [default: 0]
    #[arg(long, value_name = "N")]
    pub seed: Option<u64>,
    /// Give a parameter a value; may be repeated
    #[arg(long = "set", value_name = "NAME=VALUE", value_parser = parse::assignment, allow_hyphen_values = true)]
    pub set: Vec<(String, f64)>,
    /// Threads [default: all the machine has]; results do not depend on it
    #[arg(long, value_name = "N", value_parser = parse::threads)]
    pub threads: Option<usize>,
    /// Arithmetic: fused multiply-adds where the processor has them, or the same bits everywhere
    #[arg(long, value_name = "CLASS", default_value_t = ArithmeticClass::Fused, value_parser = parse::arithmetic())]
    pub arithmetic: ArithmeticClass,
    /// Output for people or for programs
    #[arg(long, value_enum, default_value_t = Format::Human)]
    pub format: Format,
}

/// `simulate`
#[derive(Debug, Args)]
pub struct SimulateArgs {
    /// Model file
    pub file: PathBuf,
    /// Paths, times, parameters, threads.
    #[command(flatten)]
    pub run: RunArgs,
    /// Run only part I of N of the paths, with the bits they have in the whole run
    #[arg(long, value_name = "I/N", value_parser = parse::part)]
    pub part: Option<(u64, u64)>,
    /// Write every path to this file; its ending chooses the form: .csv or .npy
    #[arg(long, short, value_name = "PATH", value_parser = parse::paths_file)]
    pub output: Option<PathBuf>,
    /// Draw a fan chart of every quantity over time into this SVG file
    #[arg(long, value_name = "PATH", value_parser = parse::plot_file)]
    pub plot: Option<PathBuf>,
}

/// `verify`
#[derive(Debug, Args)]
pub struct VerifyArgs {
    /// Model files
    #[arg(value_name = "FILE", required = true)]
    pub files: Vec<PathBuf>,
    /// Write the evidence to this file too, as one self-contained HTML page with every check
    #[arg(long, value_name = "PATH")]
    pub report: Option<PathBuf>,
    /// Paths, times, parameters, threads.
    #[command(flatten)]
    pub run: RunArgs,
}

/// `format`
#[derive(Debug, Args)]
pub struct FormatArgs {
    /// Model files
    #[arg(value_name = "FILE", required = true)]
    pub files: Vec<PathBuf>,
    /// Write nothing; exit with 1 when a file would change, and name it
    #[arg(long)]
    pub check: bool,
}

/// `schema`
#[derive(Debug, Args)]
pub struct SchemaArgs {
    /// Write to this file instead of standard output
    #[arg(long, short, value_name = "PATH")]
    pub output: Option<PathBuf>,
}

/// `completions`
#[derive(Debug, Args)]
pub struct CompletionsArgs {
    /// The shell
    #[arg(value_enum)]
    pub shell: clap_complete::Shell,
}
