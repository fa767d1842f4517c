//! Scores of checks as inline SVG: a row a check, its distance from the expected value in standard errors.

use crate::report::document::Scores;
use crate::report::math::escape_html as escape;

const ROW: f64 = 20.0;
const LABELS: f64 = 250.0;
const FIELD: f64 = 420.0;
const MARGIN: f64 = 14.0;

/// The drawing; what lies beyond its sides is drawn at the side.
pub(super) fn html(scores: &Scores) -> String {
    let widest = 1.25 * scores.threshold;
    let place = |z: f64| LABELS + FIELD * (0.5 + 0.5 * (z / widest).clamp(-1.0, 1.0));
    let height = MARGIN * 2.0 + ROW * (scores.points.len() as f64 + 1.0);
    let width = LABELS + FIELD + MARGIN;
    let foot = height - MARGIN - ROW;
    let mut out = format!(
        "<figure class=\"scores\">\n<svg viewBox=\"0 0 {width} {height}\" width=\"{width}\" \
         height=\"{height}\" role=\"img\" aria-label=\"{}\">\n",
        escape(&scores.in_words())
    );
    let edge = format!("{:.2}", scores.threshold);
    for (z, class, label) in [
        (-scores.threshold, "limit", format!("−{edge}")),
        (0.0, "expected", "0".to_owned()),
        (scores.threshold, "limit", edge.clone()),
    ] {
        let x = place(z);
        out.push_str(&format!(
            "<path class=\"{class}\" d=\"M{x:.1} {MARGIN}V{foot:.1}\"/><text class=\"tick\" x=\"{x:.1}\" \
             y=\"{:.1}\">{label}</text>\n",
            foot + 15.0
        ));
    }
    for (i, point) in scores.points.iter().enumerate() {
        let y = MARGIN + ROW * (i as f64 + 0.5);
        let class = if point.passed { "good" } else { "bad" };
        out.push_str(&format!(
            "<text class=\"label\" x=\"{:.1}\" y=\"{:.1}\">{}</text><circle class=\"{class}\" cx=\"{:.1}\" \
             cy=\"{y:.1}\" r=\"4.5\"/>\n",
            LABELS - 12.0,
            y + 4.0,
            escape(&point.label),
            place(point.z)
        ));
    }
    out + "</svg>\n<figcaption>Sample less expected value, in standard errors; a check holds between the \
           outer lines.</figcaption>\n</figure>\n"
}
