//! Loops that step through time a millisecond at a time, as a firmware's tick handler does.

use crate::rhythm::{BLOCKED, ESCAPE, LINK, LOWER, NEVER, NODE_BASE, NODE_GAIN, NODE_TAU, REFRACTORY, SINUS};

/// Every constant in whole milliseconds, every timer a tick at which it is due.
pub fn whole_milliseconds(until: u64, mut on_beat: impl FnMut(u64)) {
    let (mut sinus, mut conducted, mut escape, mut device) = (833_u64, NEVER, 1_714_u64, 1_000_u64);
    let (mut left_node, mut ready, mut blocked) = (None::<u64>, 0, BLOCKED);
    for tick in 1..until.div_ceil(1_000) {
        if tick == sinus {
            sinus += 833;
            blocked -= 1;
            if blocked == 0 {
                blocked = BLOCKED;
            } else {
                let more = left_node.map_or(0.0, |left| 780.0 * (-((tick - left) as f64) / 110.0).exp());
                conducted = tick + (90.0 + more).round() as u64;
            }
        }
        if tick == conducted {
            left_node = Some(tick);
            if tick >= ready {
                on_beat(tick * 1_000);
                (ready, escape, device) = (tick + 250, tick + 1_714, tick + 1_000);
            }
        }
        if tick == escape {
            on_beat(tick * 1_000);
            (ready, escape, device) = (tick + 250, tick + 1_714, tick + 1_000);
        }
        if tick == device {
            device = tick + 1_000;
            if tick >= ready {
                on_beat(tick * 1_000);
                (ready, escape) = (tick + 250, tick + 1_714);
            }
        }
    }
}

/// Due times kept in microseconds and looked at every millisecond: remainders are kept, events come up to a tick late.
pub fn kept_remainders(until: u64, mut on_beat: impl FnMut(u64)) {
    let (mut sinus, mut conducted, mut escape, mut device) = (SINUS, NEVER, ESCAPE, LOWER);
    let (mut left_node, mut ready, mut blocked) = (None::<u64>, 0, BLOCKED);
    let mut now = 0;
    loop {
        now += 1_000;
        if now >= until {
            return;
        }
        if now >= sinus {
            blocked -= 1;
            if blocked == 0 {
                blocked = BLOCKED;
            } else {
                let atrium = sinus + LINK;
                let recovery = left_node.map_or(60_000_000, |left| atrium - left);
                let more = NODE_GAIN as f64 * (-(recovery as f64) / NODE_TAU as f64).exp();
                conducted = atrium + NODE_BASE + more.round() as u64;
            }
            sinus += SINUS;
        }
        if now >= conducted {
            left_node = Some(conducted);
            if conducted >= ready {
                on_beat(now);
                (ready, escape, device) = (conducted + REFRACTORY, conducted + ESCAPE, conducted + LINK + LOWER);
            }
            conducted = NEVER;
        }
        if now >= escape {
            on_beat(now);
            (ready, escape, device) = (escape + REFRACTORY, escape + ESCAPE, escape + LINK + LOWER);
        }
        if now >= device {
            if device >= ready {
                on_beat(now);
                (ready, escape) = (device + LINK + REFRACTORY, device + LINK + ESCAPE);
            }
            device += LOWER;
        }
    }
}
