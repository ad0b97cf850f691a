//! The command `phase4`.

fn main() {}
