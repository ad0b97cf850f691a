//! How deep the stack went: free RAM is painted, and what is no longer painted was used.

use cortex_m::register::msp;
use cortex_m_rt::STACK_PAINT_VALUE;

unsafe extern "C" {
    // Set by the linker script: the lowest word of the stack's room, and the one above its highest.
    static _stack_end: u32;
    static _stack_start: u32;
}

/// Bytes there are for the stack.
pub fn room() -> usize {
    (&raw const _stack_start).addr() - (&raw const _stack_end).addr()
}

/// The deepest the stack has been since the paint was put on, in bytes. The start-up code paints before anything runs.
pub fn deepest() -> usize {
    let mut word = &raw const _stack_end;
    // Only reads, and only between the two ends.
    while word < &raw const _stack_start && unsafe { word.read_volatile() } == STACK_PAINT_VALUE {
        word = word.wrapping_add(1);
    }
    (&raw const _stack_start).addr() - word.addr()
}

/// Paints anew what lies below the stack pointer, so that [`deepest`] tells of what comes next.
#[inline(never)]
pub fn repaint() {
    /// Left alone below the stack pointer; more than this function needs.
    const MARGIN: usize = 64;
    let top = msp::read() as usize - MARGIN;
    let mut word = (&raw const _stack_end).cast_mut();
    while word.addr() < top {
        // Below the stack pointer nothing is in use: no interrupt is enabled in this image.
        unsafe { word.write_volatile(STACK_PAINT_VALUE) };
        word = word.wrapping_add(1);
    }
}
