//! The commands, as people and programs call them: the real binary on real files.

mod check;
mod compare;
mod derive;
mod documents;
mod format;
mod generate;
mod harness;
mod hostile;
mod options;
mod sarif;
mod signoff;
mod simulate;
mod suggestions;
mod verify;
