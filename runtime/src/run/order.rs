//! Blocks finish in any order and are handed on in the order of their paths.

use std::collections::BTreeMap;
use std::sync::{Condvar, Mutex, MutexGuard, PoisonError};

/// Puts finished blocks in order. A thread that runs too far ahead waits, so that no more
/// than `window` blocks are held.
pub(super) struct Order<T, U> {
    state: Mutex<State<T, U>>,
    moved: Condvar,
    window: u64,
}

struct State<T, U> {
    next: u64,
    waiting: BTreeMap<u64, T>,
    stopped: bool,
    sink: U,
}

impl<T, U> Order<T, U> {
    pub(super) fn new(first: u64, window: u64, sink: U) -> Self {
        Order {
            state: Mutex::new(State {
                next: first,
                waiting: BTreeMap::new(),
                stopped: false,
                sink,
            }),
            moved: Condvar::new(),
            window,
        }
    }

    /// A poisoned lock means that another thread panicked in the sink; `stopped` is set
    /// then, and the panic is passed on when the threads are joined.
    fn lock(&self) -> MutexGuard<'_, State<T, U>> {
        self.state.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// Waits until block `index` is near enough to the front; false if the run was stopped.
    pub(super) fn enter(&self, index: u64) -> bool {
        let mut state = self.lock();
        while !state.stopped && index >= state.next.saturating_add(self.window) {
            state = self
                .moved
                .wait(state)
                .unwrap_or_else(PoisonError::into_inner);
        }
        !state.stopped
    }

    /// Hands in block `index`; `accept` gets it, and those that waited for it, in order.
    pub(super) fn deliver(&self, index: u64, item: T, mut accept: impl FnMut(&mut U, T) -> bool) {
        let mut guard = self.lock();
        let state = &mut *guard;
        state.waiting.insert(index, item);
        while !state.stopped
            && let Some(item) = state.waiting.remove(&state.next)
        {
            state.stopped = !accept(&mut state.sink, item);
            state.next += 1;
        }
        drop(guard);
        self.moved.notify_all();
    }

    /// Makes all threads stop before their next block.
    pub(super) fn stop(&self) {
        self.lock().stopped = true;
        self.moved.notify_all();
    }

    pub(super) fn into_sink(self) -> U {
        let state = self.state.into_inner();
        state.unwrap_or_else(PoisonError::into_inner).sink
    }
}

/// Stops the others if this thread unwinds.
pub(super) struct StopOnPanic<'a, T, U>(pub(super) &'a Order<T, U>);

impl<T, U> Drop for StopOnPanic<'_, T, U> {
    fn drop(&mut self) {
        if std::thread::panicking() {
            self.0.stop();
        }
    }
}
