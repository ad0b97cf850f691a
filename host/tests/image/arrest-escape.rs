// Written from examples/scenarios/arrest-escape.toml with seed 1. Change that file, not this text.

use phase4::{audit, base, bench, device, heart, lead};

/// Sites of the anatomy.
pub const SITES: usize = 5;
/// Tracts of the anatomy.
pub const TRACTS: usize = 4;
/// Cells of the anatomy.
pub const CELLS: usize = 3;
/// Foci beside the cells.
pub const FOCI: usize = 0;
/// Room for the steps of the script.
pub const STEPS: usize = 4;

const fn sound<T: Copy>(value: Result<T, base::ParamError>) -> T {
    match value {
        Ok(value) => value,
        Err(error) => panic!("{}", error.parameter),
    }
}

/// The heart.
pub static ANATOMY: heart::Anatomy<SITES, TRACTS, CELLS> = match heart::Anatomy::new(
    [
        heart::SiteParams::new(base::Span::from_micros(144000)).with_relative(base::Span::from_micros(0)).with_threshold(base::MilliVolts(500), base::Span::from_micros(300)).with_latency(base::Span::from_micros(3000)),
        heart::SiteParams::new(base::Span::from_micros(210000)).with_relative(base::Span::from_micros(30000)).with_threshold(base::MilliVolts(500), base::Span::from_micros(300)).with_latency(base::Span::from_micros(3000)),
        heart::SiteParams::new(base::Span::from_micros(200000)).with_relative(base::Span::from_micros(50000)).with_threshold(base::MilliVolts(500), base::Span::from_micros(300)).with_latency(base::Span::from_micros(3000)),
        heart::SiteParams::new(base::Span::from_micros(250000)).with_relative(base::Span::from_micros(50000)).with_threshold(base::MilliVolts(500), base::Span::from_micros(300)).with_latency(base::Span::from_micros(3000)),
        heart::SiteParams::new(base::Span::from_micros(250000)).with_relative(base::Span::from_micros(50000)).with_threshold(base::MilliVolts(500), base::Span::from_micros(300)).with_latency(base::Span::from_micros(3000)),
    ],
    [
        heart::TractParams::new(base::SiteId::new(0), base::SiteId::new(1), sound(heart::Fraction::from_millionths(0)), heart::Way::new(base::Span::from_micros(70000)).with_theta(base::Span::from_micros(0)).with_conceal(sound(heart::Fraction::from_millionths(0))), heart::Way::new(base::Span::from_micros(70000)).with_theta(base::Span::from_micros(220000)).with_conceal(sound(heart::Fraction::from_millionths(0)))),
        heart::TractParams::new(base::SiteId::new(1), base::SiteId::new(2), sound(heart::Fraction::from_millionths(1000000)), heart::Way::new(base::Span::from_micros(110000)).with_recovery(base::Span::from_micros(400000), sound(base::Decay::new(base::Span::from_micros(110000)))).with_theta(base::Span::from_micros(150000)).with_conceal(sound(heart::Fraction::from_millionths(190000))), heart::Way::new(base::Span::from_micros(150000)).with_theta(base::Span::from_micros(380000)).with_conceal(sound(heart::Fraction::from_millionths(190000))).closed()),
        heart::TractParams::new(base::SiteId::new(2), base::SiteId::new(3), sound(heart::Fraction::from_millionths(0)), heart::Way::new(base::Span::from_micros(40000)).with_theta(base::Span::from_micros(0)).with_conceal(sound(heart::Fraction::from_millionths(0))), heart::Way::new(base::Span::from_micros(40000)).with_theta(base::Span::from_micros(0)).with_conceal(sound(heart::Fraction::from_millionths(0)))),
        heart::TractParams::new(base::SiteId::new(3), base::SiteId::new(4), sound(heart::Fraction::from_millionths(0)), heart::Way::new(base::Span::from_micros(40000)).with_theta(base::Span::from_micros(0)).with_conceal(sound(heart::Fraction::from_millionths(0))), heart::Way::new(base::Span::from_micros(40000)).with_theta(base::Span::from_micros(0)).with_conceal(sound(heart::Fraction::from_millionths(0)))),
    ],
    [
        heart::CellParams::new(base::SiteId::new(0), base::Interval::from_rate_nearest(base::Rate::from_milli_per_minute(70000))),
        heart::CellParams::new(base::SiteId::new(2), base::Interval::from_rate_nearest(base::Rate::from_milli_per_minute(45000))),
        heart::CellParams::new(base::SiteId::new(3), match base::Interval::from_span(base::Span::from_micros(2000000)) { Some(interval) => interval, None => base::Interval::MAX }),
    ],
) {
    Ok(anatomy) => anatomy,
    Err(error) => panic!("{}", error.parameter),
};

/// The foci.
pub static FOCUS_PARAMS: [heart::FocusParams<'static>; FOCI] = [
];

/// The leads.
pub const LEAD: lead::LeadParams = lead::LeadParams { atrial: None, ventricular: Some(lead::ChannelParams { sense: base::SiteId::new(4), pace: base::SiteId::new(4), near: lead::NearField { peak: base::MicroVolts(8000), delay: base::Span::from_micros(2000), width: base::Span::from_micros(40000) } }) };

/// When it starts.
pub const START: base::Instant = base::Instant::from_micros(0);

/// No device is connected.
pub fn device() -> Option<device::ReferenceDevice> {
    None
}

/// The script.
pub static SCRIPT: [bench::Step; 4] = [
    bench::Step { when: bench::When::At(base::Span::from_micros(10000000)), act: bench::Act::Arrest(base::CellId::new(0)), times: 1 },
    bench::Step { when: bench::When::At(base::Span::from_micros(25000000)), act: bench::Act::Arrest(base::CellId::new(1)), times: 1 },
    bench::Step { when: bench::When::At(base::Span::from_micros(50000000)), act: bench::Act::Release(base::CellId::new(1)), times: 1 },
    bench::Step { when: bench::When::At(base::Span::from_micros(50000000)), act: bench::Act::Release(base::CellId::new(0)), times: 1 },
];

/// The run.
pub static SETUP: bench::Setup<'static, SITES, TRACTS, CELLS, FOCI> = bench::Setup {
    anatomy: &ANATOMY,
    foci: &FOCUS_PARAMS,
    lead: LEAD,
    judged: None,
    steps: &SCRIPT,
    start: START,
    length: base::Span::from_micros(65000000),
    seed: 1,
};
