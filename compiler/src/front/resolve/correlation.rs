//! The correlation of the drivers.

use std::collections::HashMap;

use super::super::raw::{Name, RawCorrelation, RawModel};
use super::super::suggest::did_you_mean;
use super::numbers::{Basis, short};
use super::place::Place;
use super::scope::Kind;
use super::{Resolver, Silent};
use crate::diagnostic::{Code, Diagnostic};
use crate::model::Formula;
use crate::source::Span;
use crate::symbolic::Expr;

/// Slack for rounding: pivots above minus this count as zero.
const SLACK: f64 = 1e-10;

/// Two drivers and the formula of their correlation.
type DeclaredPair = (usize, usize, Formula);

/// Where drivers, and pairs that are declared already, stand.
struct Places<'a> {
    drivers: HashMap<&'a str, usize>,
    pairs: HashMap<(usize, usize), usize>,
}

impl<'a> Places<'a> {
    fn new(raw: &'a RawModel) -> Self {
        let mut drivers = HashMap::new();
        for (i, driver) in raw.drivers.iter().enumerate() {
            drivers.entry(driver.text.as_str()).or_insert(i);
        }
        Self {
            drivers,
            pairs: HashMap::new(),
        }
    }
}

impl Resolver<'_> {
    /// The matrix and the declared pairs.
    pub(super) fn correlation(&mut self, raw: &RawModel) -> (Vec<Vec<Expr>>, Vec<DeclaredPair>) {
        let size = raw.drivers.len();
        let (zero, one) = (self.pool.zero(), self.pool.one());
        let mut matrix: Vec<Vec<Expr>> = (0..size)
            .map(|i| (0..size).map(|j| if i == j { one } else { zero }).collect())
            .collect();
        let mut declared: Vec<DeclaredPair> = Vec::new();
        let mut places = Places::new(raw);
        for correlation in &raw.correlations {
            let earlier = |place: usize| declared[place].2.span;
            let Some((i, j)) = self.pair(raw, correlation, &places, earlier) else {
                continue;
            };
            places.pairs.insert((i, j), declared.len());
            let formula =
                self.scope
                    .formula(&correlation.formula, Place::Correlation, self.diagnostics);
            let formula = formula.unwrap_or_else(|| self.stand_in());
            self.check_bounds(&formula);
            (matrix[i][j], matrix[j][i]) = (formula.expr, formula.expr);
            declared.push((i, j, formula));
        }
        self.check_semidefinite(&matrix, &declared);
        (matrix, declared)
    }

    /// The position of a driver, or an error: one for each name.
    pub(super) fn driver(&mut self, drivers: &[Name], name: &Name) -> Option<usize> {
        let found = drivers.iter().position(|driver| driver.text == name.text);
        let new = match &mut self.silent_drivers {
            Silent::All => false,
            Silent::These(names) => found.is_none() && names.insert(name.text.clone()),
        };
        if new {
            let message = format!("`{}` is not a driver", name.text);
            let diagnostic = Diagnostic::error(Code::UnknownName, name.span, message);
            let known = self.scope.of_kind(Kind::Driver);
            let hint = did_you_mean(&name.text, known)
                .unwrap_or_else(|| "declare it in `[model]`, in the list `drivers`".to_owned());
            self.diagnostics.push(diagnostic.hint(hint));
        }
        found
    }

    fn pair(
        &mut self,
        raw: &RawModel,
        correlation: &RawCorrelation,
        places: &Places<'_>,
        span_of: impl Fn(usize) -> Span,
    ) -> Option<(usize, usize)> {
        let [first, second] = &correlation.drivers;
        let mut index = |name: &Name| {
            let known = places.drivers.get(name.text.as_str()).copied();
            known.or_else(|| self.driver(&raw.drivers, name))
        };
        let (i, j) = (index(first), index(second));
        let (i, j) = (i?, j?);
        if i == j {
            let message = format!("`{}` with itself has correlation 1", first.text);
            let diagnostic = Diagnostic::error(Code::CorrelationPair, second.span, message);
            self.diagnostics
                .push(diagnostic.hint("remove the line, or name another driver"));
            return None;
        }
        if let Some(&earlier) = places.pairs.get(&(j, i)) {
            let message = format!(
                "`{}` and `{}` are correlated twice",
                first.text, second.text
            );
            self.diagnostics.push(
                Diagnostic::error(Code::CorrelationPair, first.span.to(second.span), message)
                    .label(span_of(earlier), "first here")
                    .hint("keep one of the two, the order of a pair does not matter"),
            );
            return None;
        }
        Some((i, j))
    }

    fn check_bounds(&mut self, formula: &Formula) {
        let Some((value, basis)) = self.numbers.value(formula.expr) else {
            return;
        };
        if value.abs() <= 1.0 {
            return;
        }
        let diagnostic = match basis {
            Basis::Literal => Diagnostic::error(
                Code::CorrelationBounds,
                formula.span,
                format!("a correlation cannot be {}", short(value)),
            ),
            Basis::Defaults => Diagnostic::warning(
                Code::CorrelationBounds,
                formula.span,
                format!("at the default values the correlation is {}", short(value)),
            ),
        };
        self.diagnostics
            .push(diagnostic.hint("correlations lie between -1 and 1"));
    }

    /// Three or more drivers can have entries within bounds and no joint law all the same.
    fn check_semidefinite(&mut self, matrix: &[Vec<Expr>], declared: &[DeclaredPair]) {
        let mut literal = true;
        let mut values = vec![vec![0.0; matrix.len()]; matrix.len()];
        for (i, row) in matrix.iter().enumerate() {
            for (j, &entry) in row.iter().enumerate() {
                let Some((value, basis)) = self.numbers.value(entry) else {
                    return;
                };
                if value.abs() > 1.0 {
                    return;
                }
                literal &= basis == Basis::Literal;
                values[i][j] = value;
            }
        }
        if is_semidefinite(&mut values) {
            return;
        }
        let spans = declared.iter().map(|(_, _, formula)| formula.span);
        let span = spans.reduce(Span::to).unwrap_or_default();
        let text = "is not positive semidefinite";
        let hint = "such correlations contradict one another: bring them nearer to zero";
        let diagnostic = if literal {
            Diagnostic::error(
                Code::CorrelationBounds,
                span,
                format!("the correlation matrix {text}"),
            )
        } else {
            let message = format!("at the default values the correlation matrix {text}");
            Diagnostic::warning(Code::CorrelationBounds, span, message)
        };
        self.diagnostics.push(diagnostic.hint(hint));
    }
}

/// Gaussian elimination with the largest remaining diagonal entry as pivot (Higham 2002, section
/// 10.3): semidefinite if no pivot is negative and nothing is left beside pivots that are zero.
fn is_semidefinite(matrix: &mut [Vec<f64>]) -> bool {
    let mut open: Vec<usize> = (0..matrix.len()).collect();
    while let Some(at) = (0..open.len())
        .max_by(|&a, &b| matrix[open[a]][open[a]].total_cmp(&matrix[open[b]][open[b]]))
    {
        let pivot = open.swap_remove(at);
        let diagonal = matrix[pivot][pivot];
        if diagonal <= SLACK {
            open.push(pivot);
            return open.iter().all(|&i| {
                matrix[i][i] >= -SLACK && open.iter().all(|&j| matrix[i][j].abs() <= SLACK.sqrt())
            });
        }
        for &i in &open {
            let factor = matrix[i][pivot] / diagonal;
            for &j in &open {
                matrix[i][j] -= factor * matrix[pivot][j];
            }
        }
    }
    true
}

#[cfg(test)]
mod tests {
    use super::is_semidefinite;

    #[test]
    fn semidefinite_matrices_are_told_from_others() {
        let triple =
            |a: f64, b: f64, c: f64| vec![vec![1.0, a, b], vec![a, 1.0, c], vec![b, c, 1.0]];
        assert!(is_semidefinite(&mut triple(0.5, 0.5, 0.5)));
        assert!(is_semidefinite(&mut triple(1.0, 1.0, 1.0)));
        assert!(is_semidefinite(&mut triple(-0.5, -0.5, -0.5)));
        assert!(!is_semidefinite(&mut triple(-0.6, -0.6, -0.6)));
        assert!(!is_semidefinite(&mut triple(0.9, 0.9, -0.9)));
        assert!(!is_semidefinite(&mut triple(1.0, 1.0, 0.9)));
    }
}
