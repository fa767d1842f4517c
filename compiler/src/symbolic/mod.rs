//! Formulas: hash-consed, exact rationals, normal form, derivatives, printing.
