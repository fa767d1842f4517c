//! Definitions in an order in which each comes after what it uses; circles are refused.

use std::collections::BTreeMap;

use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::source::Span;

/// A definition: its name and the names it uses, with their places.
pub(in crate::front) struct Definition<'a> {
    pub(in crate::front) name: &'a str,
    pub(in crate::front) uses: Vec<(&'a str, Span)>,
}

/// Positions of the definitions, each after those it uses. What stands in a circle is reported and
/// left out; uses of names that are not among the definitions do not count.
pub(in crate::front) fn order(
    definitions: &[Definition<'_>],
    diagnostics: &mut Diagnostics,
) -> Vec<usize> {
    let mut by_name = BTreeMap::new();
    for (position, definition) in definitions.iter().enumerate() {
        by_name.entry(definition.name).or_insert(position);
    }
    let uses: Vec<Vec<(usize, Span)>> = definitions
        .iter()
        .map(|d| {
            d.uses
                .iter()
                .filter_map(|(n, span)| Some((*by_name.get(n)?, *span)))
                .collect()
        })
        .collect();
    let mut sorter = Sorter {
        uses: &uses,
        marks: vec![Mark::New; uses.len()],
        order: Vec::new(),
        circles: Vec::new(),
    };
    for start in 0..uses.len() {
        sorter.visit(start);
    }
    let Sorter {
        marks,
        order,
        circles,
        ..
    } = sorter;
    circles
        .iter()
        .for_each(|circle| diagnostics.push(report(definitions, circle)));
    order
        .into_iter()
        .filter(|&position| marks[position] == Mark::Done)
        .collect()
}

#[derive(Clone, Copy, PartialEq, Eq)]
enum Mark {
    New,
    /// On the present path.
    Open,
    Done,
    InCircle,
}

struct Sorter<'a> {
    uses: &'a [Vec<(usize, Span)>],
    marks: Vec<Mark>,
    order: Vec<usize>,
    /// Each circle: its definitions, and in each the place that leads to the next.
    circles: Vec<Vec<(usize, Span)>>,
}

impl Sorter<'_> {
    /// Depth first, with a stack of its own: chains of definitions may be long.
    fn visit(&mut self, start: usize) {
        if self.marks[start] != Mark::New {
            return;
        }
        self.marks[start] = Mark::Open;
        // The path from the start: node, next use to follow.
        let mut path = vec![(start, 0)];
        while let Some((node, next)) = path.last_mut() {
            let node = *node;
            let Some(&(used, _)) = self.uses[node].get(*next) else {
                path.pop();
                if self.marks[node] == Mark::Open {
                    self.marks[node] = Mark::Done;
                }
                self.order.push(node);
                continue;
            };
            *next += 1;
            match self.marks[used] {
                Mark::New => {
                    self.marks[used] = Mark::Open;
                    path.push((used, 0));
                }
                Mark::Open => self.circle(used, &path),
                Mark::Done | Mark::InCircle => {}
            }
        }
    }

    /// The path from `from` to its end closes a circle.
    fn circle(&mut self, from: usize, path: &[(usize, usize)]) {
        let start = path.iter().position(|(node, _)| *node == from).unwrap_or(0);
        let circle: Vec<(usize, Span)> = path[start..]
            .iter()
            .map(|&(node, next)| (node, self.uses[node][next - 1].1))
            .collect();
        for (node, _) in &circle {
            self.marks[*node] = Mark::InCircle;
        }
        self.circles.push(circle);
    }
}

/// Each element is a definition and the place in it that leads to the next.
fn report(definitions: &[Definition<'_>], circle: &[(usize, Span)]) -> Diagnostic {
    let name = |position: usize| definitions[position].name;
    let (first, span) = circle[0];
    if circle.len() == 1 {
        let message = format!("`{}` uses itself", name(first));
        return Diagnostic::error(Code::Cycle, span, message)
            .hint("a definition can only use what has a meaning without it");
    }
    let route: Vec<String> = circle
        .iter()
        .map(|(node, _)| format!("`{}`", name(*node)))
        .collect();
    let message = format!(
        "definitions in a circle: {} -> `{}`",
        route.join(" -> "),
        name(first)
    );
    let mut diagnostic = Diagnostic::error(Code::Cycle, span, message);
    for (position, (node, place)) in circle.iter().enumerate() {
        let (next, _) = circle[(position + 1) % circle.len()];
        diagnostic = diagnostic.label(*place, format!("`{}` uses `{}`", name(*node), name(next)));
    }
    diagnostic.hint("break the circle: at least one of them must do without the next")
}

#[cfg(test)]
mod tests {
    use super::{Definition, order};
    use crate::diagnostic::Diagnostics;
    use crate::source::Span;

    fn definitions<'a>(list: &[(&'a str, &[&'a str])]) -> Vec<Definition<'a>> {
        let uses = |names: &[&'a str]| names.iter().map(|&n| (n, Span::new(1, 2))).collect();
        list.iter()
            .map(|(name, names)| Definition {
                name,
                uses: uses(names),
            })
            .collect()
    }

    #[test]
    fn uses_come_first() {
        let mut diagnostics = Diagnostics::new();
        let list = definitions(&[("a", &["b", "c"]), ("b", &["c", "x"]), ("c", &[])]);
        assert_eq!(order(&list, &mut diagnostics), [2, 1, 0]);
        assert!(diagnostics.finish().is_empty());
    }

    #[test]
    fn each_circle_is_reported_once_and_left_out() {
        let mut diagnostics = Diagnostics::new();
        let list = definitions(&[("a", &["b"]), ("b", &["a"]), ("c", &["c"]), ("d", &["a"])]);
        assert_eq!(order(&list, &mut diagnostics), [3]);
        let messages: Vec<String> = diagnostics
            .finish()
            .into_iter()
            .map(|d| d.message)
            .collect();
        assert_eq!(messages.len(), 2, "{messages:?}");
    }

    #[test]
    fn long_chains_do_not_overflow_the_stack() {
        let names: Vec<String> = (0..100_000).map(|i| format!("x{i}")).collect();
        let uses = |i: usize| names.get(i + 1).map(|n| (n.as_str(), Span::default()));
        let chain: Vec<Definition<'_>> = (0..names.len())
            .map(|i| Definition {
                name: &names[i],
                uses: uses(i).into_iter().collect(),
            })
            .collect();
        let mut diagnostics = Diagnostics::new();
        assert_eq!(order(&chain, &mut diagnostics).len(), 100_000);
        assert!(diagnostics.finish().is_empty());
    }
}
