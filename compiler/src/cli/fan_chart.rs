//! The fan chart: quantile bands, median and mean of each quantity over time, as one SVG file that
//! reads in light and in dark.

use std::fmt::Write;

use crate::report::number::significant;

/// A quantity over time.
pub(super) struct Fan {
    /// Its name.
    pub(super) name: String,
    /// Its unit, for the axis.
    pub(super) unit: Option<String>,
    /// Means, one a time.
    pub(super) mean: Vec<f64>,
    /// Quantiles at 1, 5, 25, 50, 75, 95, 99 %, each one a time.
    pub(super) quantiles: [Vec<f64>; 7],
}

/// What stands above and below the panels.
pub(super) struct Caption {
    /// Title of the chart.
    pub(super) title: String,
    /// How it was made.
    pub(super) description: String,
    /// Label of the time axis.
    pub(super) time: String,
}

const WIDTH: f64 = 800.0;
const PANEL: f64 = 280.0;
const HEAD: f64 = 56.0;
const LEFT: f64 = 84.0;
const RIGHT: f64 = 24.0;
const TOP: f64 = 30.0;
const BOTTOM: f64 = 44.0;

/// Pairs of quantiles that bound a band, widest first, with the class that colours it.
const BANDS: [(usize, usize, &str, &str); 3] = [
    (0, 6, "b1", "1 to 99 %"),
    (1, 5, "b2", "5 to 95 %"),
    (2, 4, "b3", "25 to 75 %"),
];

const STYLE: &str = "\
svg{background:#fff;color:#1d2733;font:13px system-ui,sans-serif}
text{fill:currentColor}.title{font-size:17px;font-weight:600}.name{font-weight:600}.small{font-size:12px;opacity:.75}
.axis{stroke:currentColor;stroke-opacity:.55}.grid{stroke:currentColor;stroke-opacity:.12}
.b1,.b2,.b3{fill:#1f77a8}.b1{fill-opacity:.16}.b2{fill-opacity:.24}.b3{fill-opacity:.36}
.median{stroke:#12506f;fill:none;stroke-width:1.8}.mean{stroke:#c2571a;fill:none;stroke-width:1.8;stroke-dasharray:6 4}
@media (prefers-color-scheme:dark){svg{background:#141a21;color:#dbe4ee}.b1,.b2,.b3{fill:#5bb0e0}
.median{stroke:#a9dcf7}.mean{stroke:#f2a263}}";

/// Draws the chart. `times` are increasing; every series has one value a time.
pub(super) fn draw(caption: &Caption, times: &[f64], fans: &[Fan]) -> String {
    let height = HEAD + PANEL * fans.len() as f64;
    let mut svg = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {WIDTH} {height}\" width=\"{WIDTH}\" \
         height=\"{height}\" role=\"img\" aria-labelledby=\"title desc\">\n\
         <title id=\"title\">{}</title>\n<desc id=\"desc\">{}</desc>\n<style>\n{STYLE}\n</style>\n\
         <text class=\"title\" x=\"{LEFT}\" y=\"24\">{}</text>\n",
        escape(&caption.title),
        escape(&caption.description),
        escape(&caption.title),
    );
    legend(&mut svg);
    for (i, fan) in fans.iter().enumerate() {
        let offset = HEAD + PANEL * i as f64;
        let _ = writeln!(svg, "<g transform=\"translate(0 {offset})\">");
        panel(&mut svg, caption, times, fan);
        svg.push_str("</g>\n");
    }
    svg.push_str("</svg>\n");
    svg
}

fn legend(svg: &mut String) {
    let mut x = LEFT;
    for (_, _, class, label) in BANDS {
        let _ = writeln!(
            svg,
            "<rect class=\"{class}\" x=\"{x}\" y=\"36\" width=\"18\" height=\"12\"/><text class=\"small\" \
             x=\"{}\" y=\"46\">{label}</text>",
            x + 24.0
        );
        x += 110.0;
    }
    for (class, label) in [("median", "median"), ("mean", "mean")] {
        let _ = writeln!(
            svg,
            "<path class=\"{class}\" d=\"M{x} 42h24\"/><text class=\"small\" x=\"{}\" y=\"46\">{label}</text>",
            x + 30.0
        );
        x += 95.0;
    }
}

/// Maps values to places.
struct Scale {
    low: f64,
    high: f64,
    from: f64,
    to: f64,
}

impl Scale {
    fn place(&self, value: f64) -> f64 {
        self.from + (value - self.low) / (self.high - self.low) * (self.to - self.from)
    }
}

fn panel(svg: &mut String, caption: &Caption, times: &[f64], fan: &Fan) {
    let values = || {
        fan.quantiles
            .iter()
            .flatten()
            .chain(&fan.mean)
            .copied()
            .filter(|v| v.is_finite())
    };
    let (low, high) = spread(
        values().fold(f64::INFINITY, f64::min),
        values().fold(f64::NEG_INFINITY, f64::max),
    );
    let (start, end) = spread(
        times.first().copied().unwrap_or(0.0),
        times.last().copied().unwrap_or(1.0),
    );
    let x = Scale {
        low: start,
        high: end,
        from: LEFT,
        to: WIDTH - RIGHT,
    };
    let y = Scale {
        low,
        high,
        from: PANEL - BOTTOM,
        to: TOP,
    };
    axes(svg, caption, fan, &x, &y);
    for (lower, upper, class, _) in BANDS {
        let forth = points(times, &fan.quantiles[lower], &x, &y);
        let mut back = points(times, &fan.quantiles[upper], &x, &y);
        back.reverse();
        if !forth.is_empty() {
            let outline: Vec<String> = forth.into_iter().chain(back).collect();
            let _ = writeln!(
                svg,
                "<polygon class=\"{class}\" points=\"{}\"/>",
                outline.join(" ")
            );
        }
    }
    for (class, series) in [("median", &fan.quantiles[3]), ("mean", &fan.mean)] {
        let line = points(times, series, &x, &y).join(" ");
        let _ = writeln!(svg, "<polyline class=\"{class}\" points=\"{line}\"/>");
    }
}

fn points(times: &[f64], values: &[f64], x: &Scale, y: &Scale) -> Vec<String> {
    times
        .iter()
        .zip(values)
        .filter(|(_, v)| v.is_finite())
        .map(|(t, v)| format!("{:.2},{:.2}", x.place(*t), y.place(*v)))
        .collect()
}

fn axes(svg: &mut String, caption: &Caption, fan: &Fan, x: &Scale, y: &Scale) {
    let unit = fan
        .unit
        .as_ref()
        .map(|u| format!(" ({u})"))
        .unwrap_or_default();
    let _ = writeln!(
        svg,
        "<text class=\"name\" x=\"{LEFT}\" y=\"20\">{}{}</text>",
        escape(&fan.name),
        escape(&unit)
    );
    for tick in ticks(y.low, y.high, 5) {
        let at = y.place(tick);
        let _ = writeln!(
            svg,
            "<path class=\"grid\" d=\"M{LEFT} {at:.2}H{:.2}\"/><text class=\"small\" x=\"{:.2}\" y=\"{:.2}\" \
             text-anchor=\"end\">{}</text>",
            x.to,
            LEFT - 8.0,
            at + 4.0,
            significant(tick, 6)
        );
    }
    for tick in ticks(x.low, x.high, 8) {
        let at = x.place(tick);
        let _ = writeln!(
            svg,
            "<path class=\"axis\" d=\"M{at:.2} {:.2}v5\"/><text class=\"small\" x=\"{at:.2}\" y=\"{:.2}\" \
             text-anchor=\"middle\">{}</text>",
            y.from,
            y.from + 18.0,
            significant(tick, 6)
        );
    }
    let _ = writeln!(
        svg,
        "<path class=\"axis\" fill=\"none\" d=\"M{LEFT} {:.2}V{:.2}H{:.2}\"/><text class=\"small\" x=\"{:.2}\" \
         y=\"{:.2}\" text-anchor=\"end\">{}</text>",
        y.to,
        y.from,
        x.to,
        x.to,
        y.from + 34.0,
        escape(&caption.time)
    );
}

/// A range with room in it, for constant series too.
fn spread(low: f64, high: f64) -> (f64, f64) {
    if !(low.is_finite() && high.is_finite()) {
        return (0.0, 1.0);
    }
    if high > low {
        return (low, high);
    }
    let room = if low == 0.0 { 1.0 } else { low.abs() * 0.1 };
    (low - room, low + room)
}

/// About `wanted` round numbers between two values.
fn ticks(low: f64, high: f64, wanted: usize) -> Vec<f64> {
    let rough = (high - low) / wanted as f64;
    let power = 10_f64.powf(rough.log10().floor());
    let step = [1.0, 2.0, 5.0, 10.0]
        .into_iter()
        .map(|m| m * power)
        .find(|s| *s >= rough)
        .unwrap_or(rough);
    let (first, last) = ((low / step - 1e-9).ceil(), (high / step + 1e-9).floor());
    let count = (last - first).clamp(0.0, 100.0) as usize;
    (0..=count)
        .map(|i| (first + i as f64) * step)
        .map(|v| if v == 0.0 { 0.0 } else { v })
        .collect()
}

fn escape(text: &str) -> String {
    text.replace('&', "&amp;")
        .replace('<', "&lt;")
        .replace('>', "&gt;")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ticks_are_round_and_inside() {
        let shown: Vec<String> = ticks(0.13, 1.04, 5)
            .iter()
            .map(|t| significant(*t, 6))
            .collect();
        assert_eq!(shown, ["0.2", "0.4", "0.6", "0.8", "1"]);
        assert_eq!(ticks(0.0, 1.0, 8).len(), 6);
    }

    #[test]
    fn values_that_are_not_finite_are_left_out() {
        let fan = Fan {
            name: "a<b".to_owned(),
            unit: None,
            mean: vec![1.0, f64::NAN],
            quantiles: std::array::from_fn(|i| vec![i as f64, f64::INFINITY]),
        };
        let caption = Caption {
            title: "t".into(),
            description: "d".into(),
            time: "time".into(),
        };
        let svg = draw(&caption, &[0.0, 1.0], &[fan]);
        assert!(
            svg.contains("a&lt;b") && !svg.contains("NaN") && !svg.contains("inf"),
            "{svg}"
        );
    }
}
