//! Progress of long work, on a terminal only.

use std::io::{self, IsTerminal};
use std::time::Duration;

use driftwright_runtime::Progress;
use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};

/// A bar over the paths of a run.
pub(super) struct Bar(ProgressBar);

impl Progress for Bar {
    fn advanced(&self, done: u64, _total: u64) {
        self.0.set_position(done);
    }
}

impl Drop for Bar {
    fn drop(&mut self) {
        self.0.finish_and_clear();
    }
}

/// A bar over the paths of a run; hidden where standard error is no terminal.
pub(super) fn bar(paths: u64, what: &str) -> Bar {
    let target = if io::stderr().is_terminal() {
        ProgressDrawTarget::stderr()
    } else {
        ProgressDrawTarget::hidden()
    };
    let bar = ProgressBar::with_draw_target(Some(paths), target);
    if let Ok(style) =
        ProgressStyle::with_template("{msg} {bar:40} {human_pos}/{human_len} paths, {eta} left")
    {
        bar.set_style(style);
    }
    bar.set_message(what.to_owned());
    bar.enable_steady_tick(Duration::from_millis(200));
    Bar(bar)
}
