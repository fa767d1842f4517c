//! A limit on the processor time of one input.
//!
//! libFuzzer's own limit counts the clock, so that a loaded machine sees hangs that are none, and its
//! handler may wait for ever for the allocator that it interrupted. Here a second thread looks at the
//! processor time, writes the input beside the other finds, and ends the process.

use std::fs;
use std::path::Path;
use std::sync::Mutex;
use std::sync::atomic::{AtomicU64, Ordering};
use std::time::Duration;

/// Seconds of processor time for one input, with instrumentation.
const LIMIT: u64 = 20;

/// Where a slow input goes: a folder, named by this environment variable.
const FOLDER: &str = "DRIFTWRIGHT_FUZZ_SLOW";

/// The exit status that libFuzzer gives a timeout, so that its parent process counts one.
const TIMEOUT_STATUS: i32 = 70;

unsafe extern "C" {
    fn _exit(status: i32) -> !;
}

static STARTED: AtomicU64 = AtomicU64::new(u64::MAX);
static INPUT: Mutex<Vec<u8>> = Mutex::new(Vec::new());

/// Runs a check of one input under the limit. The first call starts the thread that looks.
pub fn within_limit(input: &[u8], check: impl FnOnce()) {
    static LOOKING: std::sync::Once = std::sync::Once::new();
    LOOKING.call_once(|| {
        std::thread::spawn(look);
    });
    if let Ok(mut kept) = INPUT.lock() {
        kept.clear();
        kept.extend_from_slice(input);
    }
    STARTED.store(processor_time().unwrap_or(u64::MAX), Ordering::Release);
    check();
    STARTED.store(u64::MAX, Ordering::Release);
}

fn look() {
    loop {
        std::thread::sleep(Duration::from_secs(1));
        let used = processor_time().unwrap_or(0);
        let limit = LIMIT * ticks_per_second();
        if used.saturating_sub(STARTED.load(Ordering::Acquire)) > limit {
            give_up();
        }
    }
}

/// Keeps the input and ends the process at once: nothing of it may still hold a lock that is needed.
fn give_up() -> ! {
    if let (Some(folder), Ok(input)) = (std::env::var_os(FOLDER), INPUT.lock()) {
        // FNV-1a (Fowler, Noll, Vo 1991) tells the files apart.
        let hash = input.iter().fold(0xcbf2_9ce4_8422_2325_u64, |hash, &byte| {
            (hash ^ u64::from(byte)).wrapping_mul(0x0100_0000_01b3)
        });
        // A folder that cannot be written to loses the input, not the verdict.
        let _ = fs::write(
            Path::new(&folder).join(format!("slow-{hash:016x}")),
            &*input,
        );
    }
    // SAFETY: ends the process; nothing of it is used any more.
    unsafe { _exit(TIMEOUT_STATUS) }
}

/// Clock ticks of user and system time that the process has used (proc(5), fields 14 and 15).
fn processor_time() -> Option<u64> {
    let stat = fs::read_to_string("/proc/self/stat").ok()?;
    let fields: Vec<&str> = stat.rsplit(')').next()?.split_whitespace().collect();
    Some(fields.get(11)?.parse::<u64>().ok()? + fields.get(12)?.parse::<u64>().ok()?)
}

/// Linux counts these times in hundredths of a second on every machine this runs on (sysconf(3)).
fn ticks_per_second() -> u64 {
    100
}
