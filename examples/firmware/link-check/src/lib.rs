//! Every public function of the library, kept alive in tables, so that `check` can link them alone and look at what came along.
//!
//! A function in a table is compiled for arguments of which nothing is known: a panic it can reach, an allocation or a routine
//! for floats then shows up as a symbol. `check` also compares the tables with the library's sources: a public function that
//! is named nowhere here fails the check.
#![no_std]

mod audit;
mod base;
mod bench;
mod device;
mod heart;
mod lead;
mod planted;

/// A table of functions that the linker must keep.
#[repr(transparent)]
pub struct Entries<const N: usize>([*const (); N]);

// The addresses are read by nobody.
unsafe impl<const N: usize> Sync for Entries<N> {}

/// `entries! { NAME: path as fn(_, _); … }` makes the table `NAME`; an underscore for each argument.
macro_rules! entries {
    ($table:ident: $($entry:path as fn($($argument:tt),*);)*) => {
        #[unsafe(no_mangle)]
        pub static $table: crate::Entries<{ [$(stringify!($entry)),*].len() }> =
            crate::Entries([$($entry as fn($($argument),*) -> _ as *const ()),*]);
    };
}
use entries;

unsafe extern "C" {
    /// Defined nowhere: the linker names whoever can get here.
    fn a_panic_is_reachable() -> !;
}

#[panic_handler]
fn panic(_: &core::panic::PanicInfo) -> ! {
    unsafe { a_panic_is_reachable() }
}
