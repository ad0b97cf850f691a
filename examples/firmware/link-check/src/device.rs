use phase4::device::{Device, ReferenceDevice};

crate::entries! { DEVICE:
    ReferenceDevice::new as fn(_, _);
    ReferenceDevice::program as fn(_);
    ReferenceDevice::signal as fn(_, _, _, _);
    ReferenceDevice::poll as fn(_, _);
    ReferenceDevice::next_at as fn(_);
}
