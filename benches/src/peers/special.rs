//! Hand-written event loops for this one rhythm and nothing else: the floor.

use crate::rhythm::{BLOCKED, ESCAPE, LINK, LOWER, NEVER, NODE_BASE, NODE_GAIN, NODE_TAU, REFRACTORY, SINUS};

/// Whole microseconds, `f64` exponential, then rounded.
pub fn float_exponential(until: u64, on_beat: impl FnMut(u64)) {
    let delay = |recovery: u64| {
        let micros = 780_000.0 * (-(recovery as f64) / 110_000.0).exp();
        NODE_BASE + micros.round() as u64
    };
    events(until, delay, on_beat);
}

/// Whole microseconds, exponential from an integer table of 1024 entries with interpolation.
pub fn integer_table(until: u64, on_beat: impl FnMut(u64)) {
    // Once for the run: exp(-k/64) in 0.32, and r/tau in 32.32 by multiplication.
    let table: Vec<u64> = (0..=1024).map(|row| ((-f64::from(row) / 64.0).exp() * 4_294_967_296.0).round() as u64).collect();
    let per_tau = (1_u128 << 64).div_euclid(NODE_TAU as u128) as u64;
    let delay = |recovery: u64| {
        let steps = ((u128::from(recovery) * u128::from(per_tau)) >> 26) as u64; // recovery/tau · 64 in 32.32
        let (row, part) = ((steps >> 32) as usize, steps & 0xFFFF_FFFF);
        let Some(&[from, to]) = table.get(row..row + 2).and_then(|pair| pair.first_chunk()) else { return NODE_BASE };
        let factor = from - (((from - to) * part) >> 32);
        NODE_BASE + ((NODE_GAIN * factor + (1 << 31)) >> 32)
    };
    events(until, delay, on_beat);
}

#[inline]
fn events(until: u64, delay: impl Fn(u64) -> u64, mut on_beat: impl FnMut(u64)) {
    let (mut sinus, mut conducted, mut escape, mut device) = (SINUS, NEVER, ESCAPE, LOWER);
    let (mut left_node, mut ready, mut blocked) = (None, 0, BLOCKED);
    loop {
        let now = sinus.min(conducted).min(escape).min(device);
        if now >= until {
            return;
        }
        if now == sinus {
            sinus += SINUS;
            blocked -= 1;
            if blocked == 0 {
                blocked = BLOCKED;
            } else {
                let atrium = now + LINK;
                conducted = atrium + left_node.map_or(NODE_BASE, |left| delay(atrium - left));
            }
        } else if now == conducted {
            conducted = NEVER;
            left_node = Some(now);
            if now >= ready {
                on_beat(now);
                (ready, escape, device) = (now + REFRACTORY, now + ESCAPE, now + LINK + LOWER);
            }
        } else if now == escape {
            on_beat(now);
            (ready, escape, device) = (now + REFRACTORY, now + ESCAPE, now + LINK + LOWER);
        } else {
            device = now + LOWER;
            if now >= ready {
                on_beat(now + LINK);
                (ready, escape) = (now + LINK + REFRACTORY, now + LINK + ESCAPE);
            }
        }
    }
}

/// Milliseconds in `f64` throughout; beat times are never rounded.
pub fn float_throughout(until: u64, mut on_beat: impl FnMut(f64)) {
    let until = until as f64 / 1_000.0;
    let (mut sinus, mut conducted, mut escape, mut device) = (833.333, f64::INFINITY, 1_714.0, 1_000.0);
    let (mut left_node, mut ready, mut blocked) = (f64::NEG_INFINITY, 0.0, BLOCKED);
    loop {
        let now = f64::min(f64::min(sinus, conducted), f64::min(escape, device));
        if now >= until {
            return;
        }
        if now == sinus {
            sinus += 833.333;
            blocked -= 1;
            if blocked == 0 {
                blocked = BLOCKED;
            } else {
                let atrium = now + 0.001;
                conducted = atrium + 90.0 + 780.0 * ((left_node - atrium) / 110.0).exp();
            }
        } else if now == conducted {
            conducted = f64::INFINITY;
            left_node = now;
            if now >= ready {
                on_beat(now);
                (ready, escape, device) = (now + 250.0, now + 1_714.0, now + 1_000.001);
            }
        } else if now == escape {
            on_beat(now);
            (ready, escape, device) = (now + 250.0, now + 1_714.0, now + 1_000.001);
        } else {
            device = now + 1_000.0;
            if now >= ready {
                on_beat(now + 0.001);
                (ready, escape) = (now + 250.001, now + 1_714.001);
            }
        }
    }
}
