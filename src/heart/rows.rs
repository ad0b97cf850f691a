//! A set of table rows in one word, walked in table order.

use crate::base::{low_u8, word};
use core::num::NonZeroU32;

/// Rows of a table of at most 32.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub(super) struct Rows(u32);

impl Rows {
    pub(super) const NONE: Self = Self(0);

    /// How many rows a table may have.
    pub(super) const MOST: usize = 32;

    /// This row alone. Rows from 32 on do not exist: tables are refused before they reach that far.
    pub(super) const fn one(row: u8) -> Self {
        Self(1_u32.wrapping_shl(word(row)))
    }

    /// Every row of a table of so many.
    pub(super) fn all(rows: usize) -> Self {
        (0..=31).take(rows).map(Self::one).fold(Self::NONE, Self::with)
    }

    pub(super) const fn with(self, other: Self) -> Self {
        Self(self.0 | other.0)
    }

    pub(super) const fn without(self, other: Self) -> Self {
        Self(self.0 & !other.0)
    }

    pub(super) const fn and(self, other: Self) -> Self {
        Self(self.0 & other.0)
    }

    pub(super) const fn has(self, row: u8) -> bool {
        self.0 & Self::one(row).0 != 0
    }

    pub(super) const fn is_empty(self) -> bool {
        self.0 == 0
    }

    /// Takes the first row out.
    pub(super) fn take_first(&mut self) -> Option<u8> {
        let rows = NonZeroU32::new(self.0)?;
        self.0 &= self.0.wrapping_sub(1);
        Some(low_u8(rows.trailing_zeros()))
    }
}
