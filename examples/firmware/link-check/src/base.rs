use core::fmt::{self, Display, Write};
use phase4::base::{
    BlockReason, Cause, CellId, Channel, Decay, Deviation, FineInstant, FocusId, Instant, Interval, Kind, Meeting, Mode,
    NoCapture, ParamError, Program, Rate, Record, RecordHash, Settings, SiteId, Span, TractId, draw, draw_below,
};

crate::entries! { BASE:
    draw as fn(_, _, _);
    draw_below as fn(_, _, _, _);
    Decay::new as fn(_);
    Decay::tau as fn(_);
    Decay::factor as fn(_, _);
    Decay::scaled as fn(_, _, _);
    ParamError::new as fn(_, _);
    ParamError::in_row as fn(_, _);
    RecordHash::new as fn();
    RecordHash::add as fn(_, _);
    RecordHash::value as fn(_);
    SiteId::new as fn(_);
    SiteId::row as fn(_);
    TractId::new as fn(_);
    TractId::row as fn(_);
    CellId::new as fn(_);
    CellId::row as fn(_);
    FocusId::new as fn(_);
    FocusId::row as fn(_);
    Instant::from_micros as fn(_);
    Instant::as_micros as fn(_);
    Instant::saturating_add as fn(_, _);
    Instant::saturating_sub as fn(_, _);
    Instant::shifted as fn(_, _);
    Instant::since as fn(_, _);
    Instant::saturating_since as fn(_, _);
    Instant::deviation_from as fn(_, _);
    Span::from_micros as fn(_);
    Span::from_millis as fn(_);
    Span::from_secs as fn(_);
    Span::as_micros as fn(_);
    Span::saturating_add as fn(_, _);
    Span::saturating_sub as fn(_, _);
    Span::saturating_mul as fn(_, _);
    Span::as_deviation as fn(_);
    Span::is_zero as fn(_);
    Deviation::from_micros as fn(_);
    Deviation::from_millis as fn(_);
    Deviation::as_micros as fn(_);
    Deviation::size as fn(_);
    Deviation::saturating_add as fn(_, _);
    Deviation::reversed as fn(_);
    Rate::per_minute as fn(_);
    Rate::from_milli_per_minute as fn(_);
    Rate::as_milli_per_minute as fn(_);
    Interval::from_rate_nearest as fn(_);
    Interval::from_span as fn(_);
    Interval::from_fixed as fn(_);
    Interval::as_fixed as fn(_);
    Interval::nearest as fn(_);
    Interval::floor as fn(_);
    Interval::ceil as fn(_);
    FineInstant::at as fn(_);
    FineInstant::plus as fn(_, _);
    FineInstant::nearest as fn(_);
    Mode::code as fn(_);
    Mode::from_code as fn(_);
    Mode::paces as fn(_);
    Mode::senses as fn(_);
    Settings::new as fn(_, _);
    Settings::check as fn(_);
    Program::settings as fn(_);
    Program::paces as fn(_);
    Program::senses as fn(_);
    Program::escape_after_sense as fn(_);
    BlockReason::number as fn(_);
    NoCapture::number as fn(_);
    Kind::number as fn(_);
    Kind::is_bench_visible as fn(_);
    Cause::new as fn(_, _);
    Meeting::pack as fn(_);
    Meeting::unpack as fn(_, _);
    Record::new as fn(_, _, _, _);
    Record::with_details as fn(_, _, _);
    Record::signal as fn(_, _, _, _);
    Record::pulse as fn(_, _);
    Record::as_signal as fn(_);
    Record::as_pulse as fn(_);
    Record::to_words as fn(_);
    Record::to_bytes as fn(_);
    Channel::number as fn(_);
    Channel::from_number as fn(_);
}

fn show<T: Display>(value: &T, sink: &mut dyn Write) -> fmt::Result {
    write!(sink, "{value}")
}

// The texts too, as far as they hold no decimal number: core's own formatting of those keeps a bounds check that it never
// fails. So the texts of ParamError and NotYet are not among the functions said to be free of panics.
crate::entries! { TEXTS:
    show::<RecordHash> as fn(_, _);
    show::<Mode> as fn(_, _);
}
