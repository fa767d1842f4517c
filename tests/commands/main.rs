//! The commands, as people and programs call them: the real binary on real files.

mod check;
mod derive;
mod generate;
mod harness;
mod options;
mod simulate;
mod verify;
