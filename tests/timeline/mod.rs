//! A device on a time line, for tests that read as one: signals in, pulses out, times in milliseconds.
#![allow(
    dead_code,
    clippy::expect_used,
    clippy::arithmetic_side_effects,
    reason = "a test helper; each test file uses a part of it"
)]

use phase4::base::{Channel, Instant, Interval, MicroVolts, Mode, Program, Rate, Settings, Signal, Span};
use phase4::device::{Device, ReferenceDevice};

pub(crate) const LOUD: Signal = Signal { peak: MicroVolts(8_000), width: Span::from_millis(40) };

/// Settings of a mode at a rate per minute; blanking 100 ms, refractory 320 ms.
pub(crate) const fn at(mode: Mode, per_minute: u16) -> Settings {
    let mut settings = Settings::new(mode, Interval::from_rate_nearest(Rate::per_minute(per_minute)));
    settings.refractory = ms(320);
    settings
}

pub(crate) const fn ms(millis: u64) -> Span {
    Span::from_millis(millis)
}

pub(crate) const fn at_ms(millis: u64) -> Instant {
    Instant::ZERO.saturating_add(ms(millis))
}

/// Everything a device is shown, in order: a channel, a signal and its onset.
pub(crate) type Shown = (Channel, Signal, Instant);

/// The same loud signal on one channel at each of these milliseconds.
pub(crate) fn shown(channel: Channel, millis: &[u64]) -> Vec<Shown> {
    millis.iter().map(|&millis| (channel, LOUD, at_ms(millis))).collect()
}

pub(crate) fn v(millis: &[u64]) -> Vec<Shown> {
    shown(Channel::Ventricular, millis)
}

pub(crate) fn a(millis: &[u64]) -> Vec<Shown> {
    shown(Channel::Atrial, millis)
}

/// Instants of the pulses up to and including `until`, in microseconds. Polled only where the device asks for it.
pub(crate) fn pulses_us(device: &mut dyn Device, shown: &[Shown], until: Instant) -> Vec<u64> {
    let mut pulses = Vec::new();
    for &(channel, signal, at) in shown {
        while let Err(not_yet) = device.signal(channel, signal, at) {
            assert!(not_yet.0 < at, "refused although nothing is due before");
            pulses.extend(device.poll(not_yet.0).map(|(at, _)| at.as_micros()));
        }
    }
    while let Some((at, _)) = device.poll(until) {
        pulses.push(at.as_micros());
    }
    pulses
}

/// The pulses of a reference device with this program, started at zero, in whole milliseconds.
pub(crate) fn pulses(program: Settings, shown: &[Shown], until_ms: u64) -> Vec<u64> {
    let mut device = ReferenceDevice::new(checked(program), Instant::ZERO);
    let micros = pulses_us(&mut device, shown, at_ms(until_ms));
    micros.into_iter().inspect(|at| assert_eq!(at % 1_000, 0, "not on a millisecond")).map(|at| at / 1_000).collect()
}

pub(crate) fn checked(settings: Settings) -> Program {
    settings.check().expect("a program")
}
