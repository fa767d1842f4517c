//! Passes timed, and what they make counted.

use std::hint::black_box;
use std::time::{Duration, Instant};

use driftwright::back::rust::generate_source;
use driftwright::pipeline::{Compilation, Compiled, compile};
use driftwright::report::text::Style;
use driftwright::report::{self, Derivation};
use driftwright::source::SourceFile;

/// As many runs as fit into this time, at least three.
const TIME_PER_SIZE: Duration = Duration::from_secs(2);

/// What a user waits for.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(crate) enum Pass {
    /// From text to step program, claims judged.
    Check,
    /// The derivation, as JSON and as a dossier.
    Derive,
    /// The Rust source.
    Generate,
}

pub(crate) const PASSES: [Pass; 3] = [Pass::Check, Pass::Derive, Pass::Generate];

impl Pass {
    pub(crate) fn name(self) -> &'static str {
        match self {
            Pass::Check => "check",
            Pass::Derive => "derive",
            Pass::Generate => "generate",
        }
    }
}

/// Bytes.
#[derive(Clone, Copy, Default)]
pub(crate) struct Sizes {
    pub(crate) model: usize,
    pub(crate) json: usize,
    pub(crate) dossier: usize,
    pub(crate) rust: usize,
}

/// One size of a family: the medians of its passes.
pub(crate) struct Measured {
    pub(crate) count: usize,
    pub(crate) sizes: Sizes,
    /// Seconds, as [`PASSES`].
    seconds: [f64; 3],
}

impl Measured {
    pub(crate) fn of(count: usize, models: &[String]) -> Self {
        let source = |text: &String| SourceFile::new("model.toml", text.as_str());
        let models: Vec<SourceFile> = models.iter().map(source).collect();
        let begin = Instant::now();
        let mut samples: [Vec<f64>; 3] = Default::default();
        let mut sizes = Sizes::default();
        while samples[0].len() < 3 || begin.elapsed() < TIME_PER_SIZE && samples[0].len() < 25 {
            let (seconds, made) = once(&models);
            sizes = made;
            for (all, one) in samples.iter_mut().zip(seconds) {
                // The system's clock may not have moved.
                all.push(one.max(1e-5));
            }
        }
        Self {
            count,
            sizes,
            seconds: samples.map(median),
        }
    }

    pub(crate) fn seconds(&self, pass: Pass) -> f64 {
        self.seconds[pass as usize]
    }

    /// The model's text and what the pass makes of it, in bytes. What a check works out is what the
    /// derivation shows.
    pub(crate) fn size(&self, pass: Pass) -> usize {
        let Sizes {
            model,
            json,
            dossier,
            rust,
        } = self.sizes;
        model
            + match pass {
                Pass::Check => json,
                Pass::Derive => json + dossier,
                Pass::Generate => rust,
            }
    }

    /// Seconds per `n log n`.
    pub(crate) fn per_size(&self, pass: Pass) -> f64 {
        self.seconds(pass) / n_log_n(self.size(pass))
    }
}

fn n_log_n(n: usize) -> f64 {
    n as f64 * (n as f64).ln()
}

/// Each pass over all models, one pass after the other.
fn once(models: &[SourceFile]) -> ([f64; 3], Sizes) {
    let (check, compilations) = timed(|| models.iter().map(compile).collect::<Vec<_>>());
    let sound = |c: &Compilation| !c.has_errors();
    assert!(compilations.iter().all(sound));
    let (derive, reports) = timed(|| {
        let all = compilations.iter().map(|c| {
            let derivation = derivation(c, compiled(c));
            let dossier = report::text::write(&report::dossier(&derivation), Style::default());
            (report::json::derivation(&derivation).to_string(), dossier)
        });
        all.collect::<Vec<_>>()
    });
    let (generate, sources) = timed(|| {
        let programs = compilations.iter().map(|c| &compiled(c).program);
        programs.map(generate_source).collect::<Vec<_>>()
    });
    let sizes = Sizes {
        model: models.iter().map(|m| m.text().len()).sum(),
        json: reports.iter().map(|(json, _)| json.len()).sum(),
        dossier: reports.iter().map(|(_, dossier)| dossier.len()).sum(),
        rust: sources.iter().map(String::len).sum(),
    };
    ([check, derive, generate], sizes)
}

fn compiled(compilation: &Compilation) -> &Compiled {
    let compiled = compilation.compiled.as_ref();
    compiled.expect("a model without errors")
}

fn derivation<'a>(compilation: &'a Compilation, compiled: &'a Compiled) -> Derivation<'a> {
    Derivation::new(compiled, &compilation.diagnostics)
}

/// Seconds that some work took, and what came of it.
fn timed<T>(work: impl FnOnce() -> T) -> (f64, T) {
    let begin = Clock::now();
    let result = black_box(work());
    (begin.seconds(), result)
}

/// Time on the processor where the system tells it (Linux), so that a busy machine does not spoil the
/// measurement; else time on the wall.
struct Clock {
    wall: Instant,
    processor: Option<f64>,
}

impl Clock {
    fn now() -> Self {
        Self {
            wall: Instant::now(),
            processor: processor_seconds(),
        }
    }

    fn seconds(&self) -> f64 {
        match (self.processor, processor_seconds()) {
            (Some(begin), Some(end)) => end - begin,
            _ => self.wall.elapsed().as_secs_f64(),
        }
    }
}

fn processor_seconds() -> Option<f64> {
    let text = std::fs::read_to_string("/proc/thread-self/schedstat").ok()?;
    let nanoseconds: f64 = text.split_whitespace().next()?.parse().ok()?;
    Some(nanoseconds / 1e9)
}

fn median(mut samples: Vec<f64>) -> f64 {
    samples.sort_by(f64::total_cmp);
    samples[samples.len() / 2]
}

/// The exponent of a pass in `n log n`: the slope of the least-squares line through the logarithms.
pub(crate) fn exponent(rows: &[Measured], pass: Pass) -> f64 {
    let points: Vec<(f64, f64)> = rows
        .iter()
        .map(|row| (n_log_n(row.size(pass)).ln(), row.seconds(pass).ln()))
        .collect();
    let mean =
        |of: fn(&(f64, f64)) -> f64| points.iter().map(of).sum::<f64>() / points.len() as f64;
    let (x, y) = (mean(|p| p.0), mean(|p| p.1));
    let along: f64 = points.iter().map(|p| (p.0 - x) * (p.1 - y)).sum();
    let square: f64 = points.iter().map(|p| (p.0 - x).powi(2)).sum();
    along / square
}
