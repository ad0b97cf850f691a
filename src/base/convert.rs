//! Widening and splitting of integers in `const` code, where `From` cannot be called yet.
#![allow(clippy::as_conversions, reason = "the one place where `as` is allowed: each use is lossless or says what it drops")]

/// Lossless `u32` to `u64`.
pub(crate) const fn wide(value: u32) -> u64 {
    value as u64
}

/// Lossless `u8` to `u32`.
pub(crate) const fn word(value: u8) -> u32 {
    value as u32
}

/// The low 8 bits; the high ones are dropped.
pub(crate) const fn low_u8(value: u32) -> u8 {
    value as u8
}

/// The low 32 bits; the high ones are dropped.
pub(crate) const fn low_u32(value: u64) -> u32 {
    value as u32
}

/// The low 64 bits; the high ones are dropped.
pub(crate) const fn low_u64(value: u128) -> u64 {
    value as u64
}

/// The high 32 bits, as a number of their own.
pub(crate) const fn high_u64(value: u64) -> u64 {
    value >> 32
}

/// Lossless `u64` to `u128`.
pub(crate) const fn wider(value: u64) -> u128 {
    value as u128
}

/// Lossless `u32` to `usize`: no supported target has a narrower one.
pub(crate) const fn index(value: u32) -> usize {
    value as usize
}
