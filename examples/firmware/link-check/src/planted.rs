//! What the check must find, one feature each: proof that it can.

#[cfg(feature = "planted-index")]
mod index {
    fn of(table: &[u8], row: usize) -> u8 {
        table[row]
    }
    crate::entries! { PLANTED_INDEX: of as fn(_, _); }
}

#[cfg(feature = "planted-float")]
mod float {
    fn doubled(value: f32) -> f32 {
        value * 2.0
    }
    crate::entries! { PLANTED_FLOAT: doubled as fn(_); }
}

#[cfg(feature = "planted-allocation")]
mod allocation {
    unsafe extern "C" {
        safe fn malloc(size: usize) -> *mut u8;
    }
    fn room(size: usize) -> *mut u8 {
        malloc(size)
    }
    crate::entries! { PLANTED_ALLOCATION: room as fn(_); }
}
