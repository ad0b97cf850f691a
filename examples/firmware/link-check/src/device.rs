use phase4::device::{Device, Fault, FaultRow, ReferenceDevice};

crate::entries! { DEVICE:
    ReferenceDevice::new as fn(_, _);
    ReferenceDevice::with_fault as fn(_, _, _);
    ReferenceDevice::program as fn(_);
    ReferenceDevice::signal as fn(_, _, _, _);
    ReferenceDevice::poll as fn(_, _);
    ReferenceDevice::next_at as fn(_);
}

crate::entries! { FAULTS:
    FaultRow::of as fn(_);
    FaultRow::shown_under as fn(_, _, _);
    Fault::new as fn(_, _);
    Fault::of_row as fn(_);
    Fault::id as fn(_);
    Fault::size as fn(_);
    Fault::row as fn(_);
}
