//! Diagrams as inline SVG: the kinds of nodes in columns, arrows as curves between them.

use crate::report::document::{Diagram, NodeKind};
use crate::report::math::escape_html as escape;

/// Nodes beyond which a drawing shows less than a list does.
const MOST_NODES: usize = 60;

const BOX_HEIGHT: usize = 28;
const ROW: usize = 44;
const GAP: usize = 90;
const MARGIN: usize = 12;
/// Width of a letter at the size of the labels.
const LETTER: usize = 9;

const KINDS: [NodeKind; 3] = [NodeKind::Driver, NodeKind::State, NodeKind::Observed];

/// A node in its place: left edge, middle line, width.
struct Place {
    x: usize,
    y: usize,
    width: usize,
}

/// The diagram as a figure, its lines in words as the alternative text; many nodes as a list.
pub(super) fn html(diagram: &Diagram) -> String {
    let lines = diagram.lines();
    if diagram.nodes.len() > MOST_NODES {
        let items: String = lines
            .iter()
            .map(|line| format!("<li>{}</li>\n", escape(line)))
            .collect();
        return format!("<ul>\n{items}</ul>\n");
    }
    let (places, width, height) = places(diagram);
    let mut out = format!(
        "<figure>\n<svg viewBox=\"0 0 {width} {height}\" width=\"{width}\" height=\"{height}\" \
         role=\"img\" aria-label=\"{}\">\n\
         <defs><marker id=\"tip\" viewBox=\"0 0 8 8\" refX=\"7\" refY=\"4\" markerWidth=\"7\" \
         markerHeight=\"7\" orient=\"auto\"><path d=\"M0 0 8 4 0 8z\"/></marker></defs>\n",
        escape(&lines.join(". "))
    );
    for &(from, to) in &diagram.arrows {
        out.push_str(&arrow(&places[from], &places[to]));
    }
    for (node, place) in diagram.nodes.iter().zip(&places) {
        out.push_str(&format!(
            "<g class=\"{}\"><rect x=\"{}\" y=\"{}\" width=\"{}\" height=\"{BOX_HEIGHT}\" rx=\"6\"/>\
             <text x=\"{}\" y=\"{}\">{}</text></g>\n",
            class(node.kind),
            place.x,
            place.y - BOX_HEIGHT / 2,
            place.width,
            place.x + place.width / 2,
            place.y + 5,
            escape(&node.name)
        ));
    }
    out + "</svg>\n<figcaption>Left: Brownian motions. Middle: states. Right: derived quantities and \
           readouts.</figcaption>\n</figure>\n"
}

fn class(kind: NodeKind) -> &'static str {
    match kind {
        NodeKind::Driver => "driver",
        NodeKind::State => "state",
        NodeKind::Observed => "observed",
    }
}

/// Every node in its place, and the size of the drawing.
fn places(diagram: &Diagram) -> (Vec<Place>, usize, usize) {
    let of_kind = |kind| diagram.nodes.iter().filter(move |n| n.kind == kind);
    let tallest = KINDS.map(|kind| of_kind(kind).count()).into_iter().max();
    let tallest = tallest.unwrap_or(0);
    let mut columns = Vec::new();
    let mut x = MARGIN;
    for kind in KINDS {
        let longest = of_kind(kind).map(|n| n.name.chars().count()).max();
        let width = longest.map_or(0, |letters| letters * LETTER + 24);
        let rows = of_kind(kind).count();
        // Shorter columns stand in the middle of the longest.
        let top = MARGIN + ROW / 2 + (tallest - rows) * ROW / 2;
        columns.push((x, width, top));
        if width > 0 {
            x += width + GAP;
        }
    }
    let mut next = [0; KINDS.len()];
    let places = diagram.nodes.iter().map(|node| {
        let column = node.kind as usize;
        let (x, width, top) = columns[column];
        next[column] += 1;
        let y = top + (next[column] - 1) * ROW;
        Place { x, y, width }
    });
    (
        places.collect(),
        x - GAP + MARGIN + GAP / 2,
        tallest * ROW + 2 * MARGIN,
    )
}

/// From the right side of one node to the left side of another; within a column around the right side.
fn arrow(from: &Place, to: &Place) -> String {
    let (x1, y1) = (from.x + from.width, from.y);
    let path = if from.x == to.x {
        let bulge = x1 + GAP / 2;
        format!(
            "M{x1} {y1} C{bulge} {y1} {bulge} {} {x1} {}",
            to.y + 5,
            to.y + 5
        )
    } else {
        let middle = (x1 + to.x) / 2;
        format!(
            "M{x1} {y1} C{middle} {y1} {middle} {} {} {}",
            to.y, to.x, to.y
        )
    };
    format!("<path class=\"arrow\" d=\"{path}\" marker-end=\"url(#tip)\"/>\n")
}
