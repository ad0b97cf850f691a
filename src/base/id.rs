//! Names of the parts of an anatomy: small numbers, one type each, so that a site is never taken for a tract.

macro_rules! id {
    ($(#[$doc:meta])* $name:ident) => {
        $(#[$doc])*
        #[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
        pub struct $name(u8);

        impl $name {
            /// The part in this row of its table, counted from 0.
            pub const fn new(row: u8) -> Self {
                Self(row)
            }

            /// Its row in its table, counted from 0.
            pub const fn row(self) -> u8 {
                self.0
            }
        }
    };
}

id! {
    /// A piece of tissue that activates as one: a row of the anatomy's site table.
    SiteId
}
id! {
    /// A way between two sites: a row of the anatomy's tract table.
    TractId
}
id! {
    /// A pacemaker at a site: a row of the anatomy's cell table.
    CellId
}
id! {
    /// An ectopic or replayed source: a row of the heart's focus table.
    FocusId
}
