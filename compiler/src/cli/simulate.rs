//! `driftwright simulate`

use std::io;
use std::path::Path;

use driftwright_runtime::collect::Summary;
use driftwright_runtime::{Grid, Run, Simulator as _};

use super::args::{Format, SimulateArgs};
use super::fan_chart::{self, Caption, Fan};
use super::load::{Loaded, load_and_show};
use super::output::{OutputFile, commit_all};
use super::paths_file::{Layout, PathsFile};
use super::progress;
use super::run::{Part, Settings};
use super::sample::{Collected, Request, sample};
use super::summary::{self, LEVELS, Quantity, Sample};
use super::{Failure, Outcome, Status, output};
use crate::back::interpret::Interpreter;
use crate::pipeline::Compiled;
use crate::report::text::{self, Style};

/// Observations of a fan chart where the caller names no times.
const CHART_STEPS: usize = 60;

/// Runs paths; summarises, stores or draws them.
pub(super) fn run(args: &SimulateArgs) -> Outcome {
    let Some(loaded) = load_and_show(&args.file) else {
        return Ok(Status::Wrong);
    };
    let Some(compiled) = loaded.compiled() else {
        return Ok(Status::Wrong);
    };
    if loaded.status() != Status::Well {
        // A refuted claim is an error of the model: nothing is run until it is mended.
        return Ok(loaded.status());
    }
    let session = Session::new(args, compiled)?;
    let mut file = session.open_paths_file(args.output.as_deref())?;
    let chart = args.plot.as_deref().map(OutputFile::create).transpose()?;
    let sample = session.sample(&session.settings.grid()?, file.as_mut(), "simulating")?;
    let mut complete = Vec::new();
    if let Some(mut file) = chart {
        file.write_text(&session.chart(args, &sample)?)?;
        complete.push(file);
    }
    let json = summary::json(&sample, &session.settings, &compiled.model, &compiled.plan);
    if let Some(file) = file {
        complete.extend(file.complete(&description(&sample, &session, &loaded))?);
    }
    commit_all(complete)?;
    match args.run.format {
        Format::Json => output::print(&format!("{json:#}\n"))?,
        Format::Human => {
            let mut document =
                summary::document(&sample, &session.settings, &compiled.model, &compiled.plan);
            session.name_files(args, &mut document);
            let style = Style {
                colour: output::colour_on(&io::stdout()),
                ..Style::default()
            };
            output::print(&text::write(&document, style))?;
        }
    }
    Ok(Status::Well)
}

/// One call of the command, ready to run.
struct Session<'a> {
    compiled: &'a Compiled,
    settings: Settings,
    part: Part,
    interpreter: Interpreter,
    names: Vec<String>,
}

impl<'a> Session<'a> {
    fn new(args: &SimulateArgs, compiled: &'a Compiled) -> Result<Self, Failure> {
        let settings = Settings::new(&args.run, &compiled.model, &compiled.plan)?;
        let part = Part::new(settings.paths, args.part)?;
        let interpreter = Interpreter::new(&compiled.program, &settings.parameters)?;
        let names = compiled
            .program
            .outputs
            .iter()
            .map(|o| o.name.clone())
            .collect();
        Ok(Self {
            compiled,
            settings,
            part,
            interpreter,
            names,
        })
    }

    fn open_paths_file(&self, path: Option<&Path>) -> Result<Option<PathsFile>, Failure> {
        let layout = Layout {
            quantities: self.names.clone(),
            times: self.settings.times.clone(),
            paths: self.part.paths,
        };
        path.map(|path| PathsFile::create(path, layout)).transpose()
    }

    /// Runs the paths, and writes them into the file if there is one.
    fn sample(
        &self,
        grid: &Grid,
        file: Option<&mut PathsFile>,
        what: &str,
    ) -> Result<Sample, Failure> {
        let bar = progress::bar(self.part.paths, what);
        let run = Run {
            paths: self.part.paths,
            first_path: self.part.first_path,
            progress: Some(&bar),
            ..self.settings.run()
        };
        let request = Request {
            levels: LEVELS.iter().map(|(level, _)| *level).collect(),
            pairs: Vec::new(),
            coupled: false,
            writer: file
                .map(|file| Box::new(|first, values: &[f64]| file.append(first, values)) as _),
        };
        let collected = sample(&self.interpreter, grid, &run, request)?;
        Ok(Sample {
            paths: self.part.paths,
            first_path: self.part.first_path,
            times: grid.times(),
            quantities: quantities(&self.names, &collected),
            failures: collected.failures,
            arithmetic: collected.arithmetic,
            facts: self.interpreter.facts(),
        })
    }

    /// The fan chart; where no times were named, of a run of its own that observes more often, so that
    /// everything else is the same with and without it.
    fn chart(&self, args: &SimulateArgs, sample: &Sample) -> Result<String, Failure> {
        let own;
        let shown = if self.settings.times_given {
            sample
        } else {
            let horizon = self.settings.horizon;
            let times: Vec<f64> = (0..=CHART_STEPS)
                .map(|i| horizon * i as f64 / CHART_STEPS as f64)
                .collect();
            let grid = Grid::new(&times, self.settings.steps)?;
            own = self.sample(&grid, None, "drawing")?;
            &own
        };
        let model = &self.compiled.model;
        let fans: Vec<Fan> = shown.quantities.iter().map(|q| self.fan(q)).collect();
        let unit = model
            .time_unit
            .as_ref()
            .map(|u| format!(" ({u})"))
            .unwrap_or_default();
        let caption = Caption {
            title: model.title.clone().unwrap_or_else(|| model.name.clone()),
            description: format!(
                "Fan chart of {}: bands between sample quantiles, median and mean over time. {}.",
                args.file.file_stem().unwrap_or_default().to_string_lossy(),
                self.settings.describe()
            ),
            time: format!("time{unit}"),
        };
        Ok(fan_chart::draw(&caption, &shown.times, &fans))
    }

    fn fan(&self, quantity: &Quantity) -> Fan {
        let outputs = &self.compiled.program.outputs;
        Fan {
            name: quantity.name.clone(),
            unit: outputs
                .iter()
                .find(|o| o.name == quantity.name)
                .and_then(|o| o.unit.clone()),
            mean: quantity.mean.clone(),
            quantiles: quantity.quantiles.clone(),
        }
    }

    /// Says which files were written and what they hold.
    fn name_files(&self, args: &SimulateArgs, document: &mut crate::report::Document) {
        let mut items = Vec::new();
        if let Some(path) = &args.output {
            items.push(crate::report::document::words(format!(
                "paths in {}",
                path.display()
            )));
        }
        if let Some(path) = &args.plot {
            let times = if self.settings.times_given {
                "at the times above".to_owned()
            } else {
                format!(
                    "at {} times from 0 on, in a run of its own",
                    CHART_STEPS + 1
                )
            };
            let text = format!("fan chart in {}, {times}", path.display());
            items.push(crate::report::document::words(text));
        }
        document.list(items);
    }
}

/// What goes beside an NPY file.
fn description(sample: &Sample, session: &Session<'_>, loaded: &Loaded) -> serde_json::Value {
    let model = loaded.compiled().map_or("", |c| c.model.name.as_str());
    serde_json::json!({
        "model": model,
        "quantities": session.names,
        "times": sample.times,
        "first_path": sample.first_path,
        "paths": sample.paths,
        "seed": session.settings.seed,
        "manifest": summary::manifest(
            sample, &session.settings, &session.compiled.model, &session.compiled.plan,
        ),
    })
}

fn quantities(names: &[String], collected: &Collected) -> Vec<Quantity> {
    let (moments, table) = (&collected.moments, &collected.quantiles);
    let series =
        |q: usize, of: fn(&Summary) -> f64| moments.iter().map(|row| of(&row[q])).collect();
    names
        .iter()
        .enumerate()
        .map(|(q, name)| Quantity {
            name: name.clone(),
            mean: series(q, |s| s.mean),
            variance: series(q, Summary::variance),
            std_error: series(q, Summary::std_error),
            skewness: series(q, Summary::skewness),
            excess_kurtosis: series(q, Summary::excess_kurtosis),
            minimum: series(q, |s| s.minimum),
            maximum: series(q, |s| s.maximum),
            quantiles: std::array::from_fn(|level| {
                (0..moments.len())
                    .map(|time| table.get(time, q, level))
                    .collect()
            }),
        })
        .collect()
}
