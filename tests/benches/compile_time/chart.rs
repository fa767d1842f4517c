//! The chart: a panel a family, time against size, both in logarithms. A dashed line grows as `n log n`
//! from the first measurement.

use std::fmt::Write as _;

use crate::measure::{Measured, PASSES, Pass};

const WIDTH: f64 = 360.0;
const HEIGHT: f64 = 260.0;
const MARGIN: f64 = 46.0;
const COLUMNS: usize = 2;

/// From the colour-blind safe palette of Okabe and Ito (2008).
fn colour(pass: Pass) -> &'static str {
    match pass {
        Pass::Check => "#0072b2",
        Pass::Derive => "#d55e00",
        Pass::Generate => "#009e73",
    }
}

pub(crate) fn svg(panels: &[(&str, Vec<Measured>)]) -> String {
    let rows = panels.len().div_ceil(COLUMNS);
    let (width, height) = (COLUMNS as f64 * WIDTH, rows as f64 * HEIGHT);
    let mut svg = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {width} {height}\" \
         font-family=\"sans-serif\" font-size=\"11\">\n\
         <rect width=\"{width}\" height=\"{height}\" fill=\"white\"/>\n"
    );
    for (place, (name, rows)) in panels.iter().enumerate() {
        let (x, y) = ((place % COLUMNS) as f64, (place / COLUMNS) as f64);
        let body = panel(name, rows);
        writeln!(
            svg,
            "<g transform=\"translate({} {})\">\n{body}</g>",
            x * WIDTH,
            y * HEIGHT
        )
        .expect("a string takes all text");
    }
    svg + "</svg>\n"
}

/// Decades that hold all values.
fn decades(values: impl Iterator<Item = f64> + Clone) -> (f64, f64) {
    let lowest = values.clone().fold(f64::INFINITY, f64::min).log10().floor();
    let highest = values.fold(f64::MIN_POSITIVE, f64::max).log10().ceil();
    (lowest, highest.max(lowest + 1.0))
}

fn panel(name: &str, rows: &[Measured]) -> String {
    let both = || {
        PASSES
            .iter()
            .flat_map(|&pass| rows.iter().map(move |row| (row, pass)))
    };
    let across = decades(both().map(|(row, pass)| row.size(pass) as f64));
    let up = decades(both().map(|(row, pass)| row.seconds(pass)));
    let place = |size: f64, seconds: f64| {
        let part = |value: f64, (low, high): (f64, f64)| (value.log10() - low) / (high - low);
        let x = MARGIN + part(size, across) * (WIDTH - 2.0 * MARGIN);
        let y = HEIGHT - MARGIN - part(seconds, up) * (HEIGHT - 2.0 * MARGIN);
        format!("{x:.1},{y:.1}")
    };
    let mut body = frame(name, across, up);
    for (line, pass) in PASSES.into_iter().enumerate() {
        let (colour, label) = (colour(pass), pass.name());
        let points: Vec<String> = rows
            .iter()
            .map(|row| place(row.size(pass) as f64, row.seconds(pass)))
            .collect();
        let rate = rows[0].per_size(pass);
        let ideal = [&rows[0], &rows[rows.len() - 1]].map(|row| {
            let size = row.size(pass) as f64;
            place(size, rate * size * size.ln())
        });
        writeln!(
            body,
            "<polyline points=\"{}\" fill=\"none\" stroke=\"{colour}\" stroke-width=\"2\"/>\n\
             <polyline points=\"{}\" fill=\"none\" stroke=\"{colour}\" stroke-dasharray=\"3 3\"/>\n\
             <text x=\"{}\" y=\"{}\" fill=\"{colour}\">{label}</text>",
            points.join(" "),
            ideal.join(" "),
            MARGIN + 8.0,
            MARGIN + 14.0 * (line + 1) as f64
        )
        .expect("a string takes all text");
    }
    body
}

/// Title, border and the ends of the axes.
fn frame(name: &str, across: (f64, f64), up: (f64, f64)) -> String {
    let (right, bottom) = (WIDTH - MARGIN, HEIGHT - MARGIN);
    let bytes = [across.0, across.1].map(|e| format!("10^{e} bytes"));
    let seconds = [up.0, up.1].map(|e| format!("10^{e} s"));
    format!(
        "<text x=\"{MARGIN}\" y=\"{}\" font-weight=\"bold\">{name}</text>\n\
         <rect x=\"{MARGIN}\" y=\"{MARGIN}\" width=\"{}\" height=\"{}\" fill=\"none\" stroke=\"#888\"/>\n\
         <text x=\"{MARGIN}\" y=\"{}\">{}</text>\n\
         <text x=\"{right}\" y=\"{}\" text-anchor=\"end\">{}</text>\n\
         <text x=\"{}\" y=\"{bottom}\" text-anchor=\"end\">{}</text>\n\
         <text x=\"{}\" y=\"{}\" text-anchor=\"end\">{}</text>\n",
        MARGIN - 10.0,
        right - MARGIN,
        bottom - MARGIN,
        bottom + 14.0,
        bytes[0],
        bottom + 14.0,
        bytes[1],
        MARGIN - 4.0,
        seconds[0],
        MARGIN - 4.0,
        MARGIN + 10.0,
        seconds[1],
    )
}
