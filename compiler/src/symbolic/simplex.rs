//! Non-negative multipliers, exactly: the simplex method on rational numbers.
//!
//! Two phases with Bland's rule (Bland 1977, Mathematics of Operations Research 2, 103-107), so that it
//! ends. Meant for tens of columns.

use super::node::Rational;

/// Steps after which the search is given up.
const MAX_STEPS: usize = 500;

/// `rows * x = right`, `x >= 0`, on the way to a largest value.
pub(super) struct Tableau {
    /// Coefficients, the right side last.
    rows: Vec<Vec<Rational>>,
    /// The variable each row is solved for; none while no variable has been found for it.
    basis: Vec<Option<usize>>,
    steps: usize,
}

/// How a search for a largest value ended.
pub(super) enum Largest {
    /// The value is attained.
    At(Rational),
    /// There is no largest value: it grows along this column.
    Unbounded(usize),
}

impl Tableau {
    /// A tableau with a feasible point; none where there is no such point, or it was not found in time.
    pub(super) fn feasible(mut rows: Vec<Vec<Rational>>) -> Option<Self> {
        for row in &mut rows {
            if row.last().is_some_and(|right| *right < Rational::ZERO) {
                row.iter_mut().for_each(|entry| *entry = -&*entry);
            }
        }
        let basis = vec![None; rows.len()];
        let mut tableau = Self {
            rows,
            basis,
            steps: 0,
        };
        let width = tableau.width();
        // What the rows without a variable add up to is driven down to zero.
        while let Some(column) = (0..width).find(|&j| tableau.missing(j) > Rational::ZERO) {
            let row = tableau.leaving(column)?;
            tableau.pivot(row, column)?;
        }
        if tableau.missing(width) > Rational::ZERO {
            return None;
        }
        tableau.finish_rows()?;
        Some(tableau)
    }

    fn width(&self) -> usize {
        self.rows.first().map_or(0, |row| row.len() - 1)
    }

    /// The sum of a column over the rows without a variable.
    fn missing(&self, column: usize) -> Rational {
        let open = self.rows.iter().zip(&self.basis);
        open.filter(|(_, basic)| basic.is_none())
            .fold(Rational::ZERO, |sum, (row, _)| sum + &row[column])
    }

    /// Finds variables for rows whose right side is zero, and drops rows that say nothing.
    fn finish_rows(&mut self) -> Option<()> {
        let mut row = 0;
        while row < self.rows.len() {
            if self.basis[row].is_some() {
                row += 1;
                continue;
            }
            let mut columns = 0..self.width();
            match columns.find(|&j| !self.rows[row][j].is_zero()) {
                Some(column) => self.pivot(row, column)?,
                None => {
                    self.rows.remove(row);
                    self.basis.remove(row);
                }
            }
        }
        Some(())
    }

    /// The row that bounds a step along a column.
    fn leaving(&self, column: usize) -> Option<usize> {
        let width = self.width();
        let rows = (0..self.rows.len()).filter(|&i| self.rows[i][column] > Rational::ZERO);
        rows.min_by_key(|&i| {
            let ratio = &self.rows[i][width] / &self.rows[i][column];
            (ratio, self.basis[i])
        })
    }

    fn pivot(&mut self, row: usize, column: usize) -> Option<()> {
        self.steps += 1;
        if self.steps > MAX_STEPS {
            return None;
        }
        let scale = self.rows[row][column].clone();
        self.rows[row].iter_mut().for_each(|entry| *entry /= &scale);
        let solved = self.rows[row].clone();
        for (i, other) in self.rows.iter_mut().enumerate() {
            let factor = other[column].clone();
            if i == row || factor.is_zero() {
                continue;
            }
            for (entry, solved) in other.iter_mut().zip(&solved) {
                *entry -= &factor * solved;
            }
        }
        self.basis[row] = Some(column);
        Some(())
    }

    /// What a step along a column gains.
    fn gain(&self, values: &[Rational], column: usize) -> Rational {
        let solved = self.rows.iter().zip(&self.basis);
        let lost = solved.fold(Rational::ZERO, |sum, (row, basic)| match basic {
            Some(basic) => sum + &row[column] * &values[*basic],
            None => sum,
        });
        &values[column] - lost
    }

    /// The value of the present point.
    fn value(&self, values: &[Rational]) -> Rational {
        let width = self.width();
        let solved = self.rows.iter().zip(&self.basis);
        solved.fold(Rational::ZERO, |sum, (row, basic)| match basic {
            Some(basic) => sum + &row[width] * &values[*basic],
            None => sum,
        })
    }

    /// Moves to the largest value of `values * x` along columns whose step costs nothing of `kept`.
    /// None where it was not found in time.
    pub(super) fn maximise(
        &mut self,
        values: &[Rational],
        kept: Option<&[Rational]>,
    ) -> Option<Largest> {
        loop {
            let free = |j: usize| kept.is_none_or(|kept| self.gain(kept, j).is_zero());
            let gains = |&j: &usize| free(j) && self.gain(values, j) > Rational::ZERO;
            let Some(column) = (0..values.len()).find(gains) else {
                return Some(Largest::At(self.value(values)));
            };
            match self.leaving(column) {
                Some(row) => self.pivot(row, column)?,
                None => return Some(Largest::Unbounded(column)),
            }
        }
    }

    /// The variables that are positive at the present point, or become so along a column.
    pub(super) fn positive(&self, along: Option<usize>) -> Vec<usize> {
        let width = self.width();
        let moved = |row: &[Rational]| along.is_some_and(|j| row[j] < Rational::ZERO);
        let solved = self.rows.iter().zip(&self.basis);
        let mut found: Vec<usize> = solved
            .filter(|(row, _)| row[width] > Rational::ZERO || moved(row))
            .filter_map(|(_, basic)| *basic)
            .chain(along)
            .collect();
        found.sort_unstable();
        found
    }
}
