// Written from examples/scenarios/steady.toml with seed 1. Change that file, not this text.

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
pub const STEPS: usize = 1;

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
        heart::CellParams::new(base::SiteId::new(0), match base::Interval::from_span(base::Span::from_micros(800000)) { Some(interval) => interval, None => base::Interval::MAX }),
        heart::CellParams::new(base::SiteId::new(2), match base::Interval::from_span(base::Span::from_micros(1200000)) { Some(interval) => interval, None => base::Interval::MAX }),
        heart::CellParams::new(base::SiteId::new(3), match base::Interval::from_span(base::Span::from_micros(1750000)) { Some(interval) => interval, None => base::Interval::MAX }),
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

/// What the device is set to.
pub const PROGRAM: base::Program = {
    let mut settings = base::Settings::new(base::Mode::Vvi, base::Interval::from_rate_nearest(base::Rate::from_milli_per_minute(55000)));
    settings.hysteresis = None;
    settings.refractory = base::Span::from_micros(250000);
    settings.blanking = base::Span::from_micros(100000);
    settings.sensitivity = base::MicroVolts(2500);
    settings.amplitude = base::MilliVolts(3500);
    settings.width = base::Span::from_micros(400);
    settings.edge = base::Edge::Outside;
    settings.tie = base::Tie::SenseFirst;
    settings.straddle = base::Straddle::Onset;
    settings.detect_delay = base::Span::from_micros(0);
    sound(settings.check())
};

/// How it is judged.
pub const AUDIT: audit::AuditSettings = {
    let mut settings = audit::AuditSettings::new(&PROGRAM);
    settings.lower = audit::Tolerance { low: base::Span::from_micros(8000), high: base::Span::from_micros(8000), share_millionths: 0, tick: base::Span::from_micros(0) };
    settings.hysteresis = audit::Tolerance { low: base::Span::from_micros(8000), high: base::Span::from_micros(8000), share_millionths: 0, tick: base::Span::from_micros(0) };
    settings.refractory = audit::Tolerance { low: base::Span::from_micros(8000), high: base::Span::from_micros(8000), share_millionths: 0, tick: base::Span::from_micros(0) };
    settings.blanking = audit::Tolerance { low: base::Span::from_micros(8000), high: base::Span::from_micros(8000), share_millionths: 0, tick: base::Span::from_micros(0) };
    settings.uncertainty = base::Span::from_micros(0);
    settings.decision = audit::Decision::Simple;
    settings.sensitivity_thousandths = 200;
    settings.detect = (base::Span::from_micros(0), base::Span::from_micros(0));
    settings.limits = audit::Limits { ceiling: base::Span::from_micros(292683), longest_pause: None, vulnerable: Some((base::Span::from_micros(150000), base::Span::from_micros(400000))) };
    settings.decide_thousandths = 900;
    settings
};

/// The device.
pub fn device() -> Option<device::ReferenceDevice> {
    Some(device::ReferenceDevice::new(PROGRAM, START))
}

/// The script.
pub static SCRIPT: [bench::Step; 0] = [
];

/// The run.
pub static SETUP: bench::Setup<'static, SITES, TRACTS, CELLS, FOCI> = bench::Setup {
    anatomy: &ANATOMY,
    foci: &FOCUS_PARAMS,
    lead: LEAD,
    judged: Some((PROGRAM, AUDIT)),
    steps: &SCRIPT,
    start: START,
    length: base::Span::from_micros(120000000),
    seed: 1,
};
