//! Ito's rule, moments and claims, held against published and independently computed values.

mod claims;
mod common;
mod facts;
mod ito;
mod moments;
mod working;
