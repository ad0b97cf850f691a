//! Loops that step through time a millisecond at a time, as a firmware's tick handler does.

use crate::rhythm::{BLOCKED, ESCAPE, LINK, LOWER, NEVER, NODE_BASE, NODE_GAIN, NODE_TAU, REFRACTORY, SINUS};

/// Every constant in whole milliseconds, every timer a counter of ticks.
pub fn whole_milliseconds(until: u64, mut on_beat: impl FnMut(u64)) {
    const TIMER_OFF: u32 = u32::MAX;
    let (mut sinus, mut conducted, mut escape, mut device) = (833_u32, TIMER_OFF, 1_714_u32, 1_000_u32);
    let (mut recovery, mut refractory, mut blocked) = (60_000_u32, 0_u32, BLOCKED);
    let mut now = 0;
    loop {
        now += 1_000;
        if now >= until {
            return;
        }
        recovery = recovery.saturating_add(1);
        refractory = refractory.saturating_sub(1);
        sinus -= 1;
        escape -= 1;
        device -= 1;
        let mut beat = false;
        if sinus == 0 {
            sinus = 833;
            blocked -= 1;
            if blocked == 0 {
                blocked = BLOCKED;
            } else {
                conducted = (90.0 + 780.0 * (-f64::from(recovery) / 110.0).exp()).round() as u32;
            }
        }
        if conducted != TIMER_OFF {
            conducted -= 1;
            if conducted == 0 {
                conducted = TIMER_OFF;
                recovery = 0;
                beat = refractory == 0;
            }
        }
        beat |= escape == 0;
        if device == 0 {
            device = 1_000;
            beat |= refractory == 0;
        }
        if beat {
            on_beat(now);
            (refractory, escape, device) = (250, 1_714, 1_000);
        }
    }
}

/// Due times kept in microseconds and looked at every millisecond: remainders are kept, events come up to a tick late.
pub fn kept_remainders(until: u64, mut on_beat: impl FnMut(u64)) {
    let (mut sinus, mut conducted, mut escape, mut device, mut capture) = (SINUS, NEVER, ESCAPE, LOWER, NEVER);
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
                let recovery = left_node.map_or(60_000_000, |left| sinus - left);
                let more = NODE_GAIN as f64 * (-(recovery as f64) / NODE_TAU as f64).exp();
                conducted = sinus + NODE_BASE + more.round() as u64;
            }
            sinus += SINUS;
        }
        let mut beat = NEVER;
        if now >= conducted {
            left_node = Some(conducted);
            if conducted >= ready {
                (beat, device) = (conducted, conducted + LINK + LOWER);
            }
            conducted = NEVER;
        }
        if now >= escape {
            (beat, device) = (escape, escape + LINK + LOWER);
        }
        if now >= capture {
            beat = capture;
            capture = NEVER;
        }
        if now >= device {
            if device >= ready {
                capture = device + LINK;
            }
            device += LOWER;
        }
        if beat != NEVER {
            on_beat(now);
            (ready, escape) = (beat + REFRACTORY, beat + ESCAPE);
        }
    }
}
