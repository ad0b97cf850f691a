//! Processor time and memory of this process.

use rustix::time::{ClockId, clock_gettime};
use std::time::Duration;

/// Runs something and says how much processor time of this thread it took: what others do on the machine does not count.
pub fn processor_time<T>(run: impl FnOnce() -> T) -> (T, Duration) {
    let now = || {
        let time = clock_gettime(ClockId::ThreadCPUTime);
        Duration::new(time.tv_sec.unsigned_abs(), u32::try_from(time.tv_nsec).expect("below a second"))
    };
    let before = now();
    let value = run();
    (value, now() - before)
}

/// The middle one of several, the smallest and the largest.
pub fn spread(mut values: Vec<f64>) -> (f64, f64, f64) {
    values.sort_by(f64::total_cmp);
    (values[values.len() / 2], values[0], values[values.len() - 1])
}

/// The most memory that this process has held so far, in KiB, where the system tells.
pub fn peak_memory_kib() -> Option<u64> {
    let status = std::fs::read_to_string("/proc/self/status").ok()?;
    status.lines().find_map(|line| line.strip_prefix("VmHWM:")?.trim().strip_suffix(" kB")?.parse().ok())
}

/// How many others want a processor now: three averages over the last minutes.
pub fn load() -> String {
    let text = std::fs::read_to_string("/proc/loadavg").unwrap_or_default();
    text.split(' ').take(3).collect::<Vec<_>>().join(" ")
}
