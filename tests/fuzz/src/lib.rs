//! What the fuzz targets share; the properties that they check are in `driftwright-fuzzing`.

pub mod watch;
