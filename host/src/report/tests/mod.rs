//! The page as a whole: its words, its drawings, its size.

mod geometry;
mod page;
mod reading;
mod support;
mod wording;
