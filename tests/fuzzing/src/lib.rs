//! What must hold for any input, and a generator of models.
//!
//! [`formula::check`] and [`model::check_bytes`] panic where a property fails; [`generate::model`] turns
//! any bytes into the text of a model that is mostly sound. The fuzz targets under `tests/fuzz` and the
//! ordinary tests call the same functions.

pub mod formula;
pub mod generate;
pub mod model;
pub mod run;
