//! Directions through a tract.

/// Which ways through a tract are meant.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Ways {
    /// Forward only.
    Forward,
    /// Backward only.
    Backward,
    /// Both.
    Both,
}

/// One way through a tract.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Direction {
    Forward,
    Backward,
}

impl Direction {
    pub(super) const fn is_backward(self) -> bool {
        matches!(self, Self::Backward)
    }
}
