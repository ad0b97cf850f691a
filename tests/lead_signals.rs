//! The leads on a time line, and what holds for them however they are polled.
#![allow(
    clippy::arithmetic_side_effects,
    clippy::as_conversions,
    clippy::expect_used,
    clippy::float_arithmetic,
    clippy::indexing_slicing,
    clippy::missing_const_for_fn,
    clippy::panic,
    reason = "tests may"
)]

use core::cell::Cell;
use phase4::base::{
    Cause, CauseKind, Channel, Instant, Kind, MicroVolts, NotYet, Record, Signal, SiteId, Span, Stream, draw_below,
};
use phase4::lead::{ChannelParams, Lead, LeadChange, LeadParams, NearField};
use proptest::collection::vec;
use proptest::prelude::*;
use proptest::test_runner::{Config, TestCaseResult, TestError, TestRunner};

const ATRIUM: SiteId = SiteId::new(1);
const APEX: SiteId = SiteId::new(4);
const SINUS_BEAT: Cause = Cause::new(CauseKind::Conducted, 0);

fn both_chambers() -> LeadParams {
    LeadParams {
        atrial: Some(ChannelParams::at(ATRIUM, NearField::ATRIAL)),
        ventricular: Some(ChannelParams::at(APEX, NearField::VENTRICULAR)),
    }
}

fn leads() -> Lead {
    Lead::new(&both_chambers()).expect("the defaults are in range")
}

fn us(micros: u64) -> Instant {
    Instant::from_micros(micros)
}

fn activation(site: SiteId, at: u64) -> Record {
    Record::new(us(at), Kind::Activated, site.row(), SINUS_BEAT)
}

fn wave(peak: u32) -> Signal {
    Signal { peak: MicroVolts(peak), width: Span::from_millis(10) }
}

/// Everything that comes out up to an instant: channel, peak in µV, width in µs, onset in µs.
fn out(lead: &mut Lead, until: u64) -> Vec<(Channel, u32, u64, u64)> {
    let signals = core::iter::from_fn(|| lead.poll(us(until)));
    let parts = signals.map(|record| (record.as_signal().expect("leads yield signals"), record.at.as_micros()));
    parts.map(|((channel, signal), at)| (channel, signal.peak.0, signal.width.as_micros(), at)).collect()
}

#[test]
fn a_beat_is_seen_at_its_own_electrode_after_the_delay() {
    let mut lead = leads();
    lead.activated(&activation(ATRIUM, 100_000));
    lead.activated(&activation(SiteId::new(2), 180_000)); // no electrode there
    lead.activated(&activation(APEX, 260_000));
    assert_eq!(lead.next_at(), Some(us(102_000)));
    assert_eq!(out(&mut lead, 101_999), []);
    assert_eq!(
        out(&mut lead, 500_000),
        [(Channel::Atrial, 3_000, 20_000, 102_000), (Channel::Ventricular, 8_000, 40_000, 262_000)]
    );
    assert_eq!(lead.next_at(), None);
}

#[test]
fn a_signal_carries_the_cause_of_the_beat_behind_it() {
    let mut lead = leads();
    lead.activated(&activation(APEX, 0));
    assert_eq!(lead.poll(us(2_000)).map(|record| record.cause), Some(SINUS_BEAT));
    let script = Cause::new(CauseKind::Script, 3);
    assert_eq!(lead.show(Channel::Atrial, wave(500), us(5_000), script), Ok(()));
    assert_eq!(lead.poll(us(5_000)).map(|record| record.cause), Some(script));
}

#[test]
fn records_of_other_kinds_are_not_beats() {
    let mut lead = leads();
    for kind in Kind::ALL.into_iter().filter(|kind| *kind != Kind::Activated) {
        lead.activated(&Record::new(us(0), kind, APEX.row(), Cause::NONE));
    }
    assert_eq!(lead.next_at(), None);
}

#[test]
fn one_electrode_can_serve_both_channels_and_equal_onsets_have_an_order() {
    let near = NearField { delay: Span::from_millis(5), ..NearField::VENTRICULAR };
    let both = Some(ChannelParams::at(APEX, near));
    let mut lead = Lead::new(&LeadParams { atrial: both, ventricular: both }).expect("in range");
    lead.activated(&activation(APEX, 0));
    lead.show(Channel::Ventricular, wave(1), us(5_000), Cause::NONE).expect("its slot is free");
    lead.show(Channel::Atrial, wave(2), us(5_000), Cause::NONE).expect("its slot is free");
    let order: Vec<_> = out(&mut lead, 5_000).into_iter().map(|(channel, peak, ..)| (channel, peak)).collect();
    use Channel::{Atrial, Ventricular};
    assert_eq!(order, [(Atrial, 2), (Ventricular, 1), (Atrial, 8_000), (Ventricular, 8_000)]);
}

#[test]
fn a_script_may_show_several_signals_at_once_if_each_is_fetched() {
    let mut lead = leads();
    assert_eq!(lead.show(Channel::Ventricular, wave(1), us(700), Cause::NONE), Ok(()));
    assert_eq!(lead.show(Channel::Ventricular, wave(2), us(700), Cause::NONE), Err(NotYet(us(700))));
    assert_eq!(out(&mut lead, 700).len(), 1);
    assert_eq!(lead.show(Channel::Ventricular, wave(2), us(700), Cause::NONE), Ok(()));
    assert_eq!(out(&mut lead, 700), [(Channel::Ventricular, 2, 10_000, 700)]);
}

#[test]
fn a_change_is_for_the_beats_to_come() {
    let mut lead = leads();
    lead.activated(&activation(APEX, 0));
    lead.change(Channel::Ventricular, LeadChange::Peak(MicroVolts(400)));
    lead.change(Channel::Ventricular, LeadChange::Delay(Span::from_millis(9)));
    lead.change(Channel::Ventricular, LeadChange::Width(Span::from_millis(60)));
    assert_eq!(out(&mut lead, 100_000), [(Channel::Ventricular, 8_000, 40_000, 2_000)]);
    lead.activated(&activation(APEX, 800_000));
    assert_eq!(out(&mut lead, 900_000), [(Channel::Ventricular, 400, 60_000, 809_000)]);
}

#[test]
fn a_change_beyond_its_range_is_cut_to_it() {
    let mut lead = leads();
    lead.change(Channel::Atrial, LeadChange::Delay(Span::ZERO));
    lead.change(Channel::Atrial, LeadChange::Peak(MicroVolts(u32::MAX)));
    lead.change(Channel::Atrial, LeadChange::Width(Span::from_secs(9)));
    lead.activated(&activation(ATRIUM, 10));
    assert_eq!(out(&mut lead, 100), [(Channel::Atrial, 100_000, 1_000_000, 11)]);
}

#[test]
fn a_channel_that_is_not_connected_sees_and_paces_nothing() {
    let mut lead = Lead::new(&LeadParams { atrial: None, ..both_chambers() }).expect("in range");
    lead.activated(&activation(ATRIUM, 0));
    lead.change(Channel::Atrial, LeadChange::Peak(MicroVolts(1)));
    assert_eq!(lead.next_at(), None);
    assert_eq!(lead.pace_site(Channel::Atrial), None);
    assert_eq!(lead.pace_site(Channel::Ventricular), Some(APEX));
    lead.show(Channel::Atrial, wave(7), us(9), Cause::NONE).expect("the bench reaches the terminals without a lead");
    assert_eq!(out(&mut lead, 9), [(Channel::Atrial, 7, 10_000, 9)]);
}

/// Two beats within the delay can only be seen as one: the lead says how often that happened.
#[test]
fn a_beat_within_the_delay_of_the_last_overtakes_it() {
    let mut lead = leads();
    lead.activated(&activation(APEX, 0));
    lead.activated(&activation(APEX, 1_500));
    assert_eq!(out(&mut lead, 10_000), [(Channel::Ventricular, 8_000, 40_000, 3_500)]);
    assert_eq!(lead.overtaken(), 1);
}

#[test]
fn wrong_parameters_are_refused_by_name() {
    let refused = |near| {
        let ventricular = Some(ChannelParams::at(APEX, near));
        Lead::new(&LeadParams { ventricular, ..both_chambers() }).expect_err("refused").to_string()
    };
    let good = NearField::VENTRICULAR;
    assert_eq!(refused(NearField { peak: MicroVolts(100_001), ..good }), "peak (row 1) is 100001, accepted is 0 to 100000");
    assert_eq!(refused(NearField { delay: Span::ZERO, ..good }), "delay (row 1) is 0, accepted is 1 to 100000");
    assert_eq!(refused(NearField { width: Span::ZERO, ..good }), "width (row 1) is 0, accepted is 1 to 1000000");
    assert_eq!(LeadChange::Delay(Span::ZERO).check().map_err(|e| e.parameter), Err("delay"));
    assert_eq!(LeadChange::Peak(MicroVolts(0)).check(), Ok(()));
}

/// What happens to the leads: so much later, at a site or on a channel.
#[derive(Debug, Clone, Copy)]
enum Step {
    Beat(u8),
    Show(bool),
    Delay(bool, u64),
}

fn any_step() -> impl Strategy<Value = (u64, Step)> {
    let step = prop_oneof![
        6 => prop::sample::select(vec![1_u8, 2, 4]).prop_map(Step::Beat),
        3 => any::<bool>().prop_map(Step::Show),
        1 => (any::<bool>(), 1..3_000_u64).prop_map(|(atrial, micros)| Step::Delay(atrial, micros)),
    ];
    let later = prop_oneof![2 => Just(0), 1 => Just(2_000), 2 => 1..20_000_u64];
    (later, step)
}

/// Runs the steps. Between them the leads are polled up to each step, and with a seed at random instants besides.
fn signals(steps: &[(u64, Step)], seed: Option<u64>) -> Result<(Vec<Record>, u32, usize), TestCaseError> {
    let mut lead = leads();
    let (mut now, mut seen, mut all, mut beats, mut drawn) = (0, 0, Vec::new(), 0, 0);
    let mut below = |bound: u64| {
        drawn += 1;
        u64::from(draw_below(seed.unwrap_or(0), Stream(0), drawn, u32::try_from(bound).expect("small")))
    };
    for (later, step) in steps {
        now += later;
        // Within an instant everything that comes in comes before the poll.
        while seed.is_some() && seen < now && below(3) > 0 {
            seen += below(now - seen);
            match lead.poll(us(seen)) {
                Some(record) => all.push(record),
                None => prop_assert!(lead.next_at().is_none_or(|next| next > us(seen)), "waits for the past"),
            }
        }
        // What lies before this step comes out before it.
        while let Some(record) = lead.next_at().filter(|at| *at < us(now)).and_then(|at| lead.poll(at)) {
            all.push(record);
        }
        seen = now;
        let channel = |atrial| if atrial { Channel::Atrial } else { Channel::Ventricular };
        match *step {
            Step::Beat(site) => {
                lead.activated(&activation(SiteId::new(site), now));
                beats += usize::from(site != 2);
            }
            Step::Show(atrial) => {
                while lead.show(channel(atrial), wave(7), us(now), Cause::NONE).is_err() {
                    all.extend(lead.poll(us(now)));
                }
                beats += 1;
            }
            Step::Delay(atrial, micros) => lead.change(channel(atrial), LeadChange::Delay(Span::from_micros(micros))),
        }
    }
    all.extend(core::iter::from_fn(|| lead.poll(Instant::MAX)));
    Ok((all, lead.overtaken(), beats))
}

#[test]
fn polling_changes_nothing_and_nothing_is_lost() {
    let events = Cell::new(0);
    let strategy = (vec(any_step(), 200..400), any::<u64>());
    let mut runner = TestRunner::new(Config { cases: 800, failure_persistence: None, ..Config::default() });
    let outcome = runner.run(&strategy, |(steps, seed)| -> TestCaseResult {
        let (mut seldom, overtaken, beats) = signals(&steps, None)?;
        let (mut often, overtaken_too, _) = signals(&steps, Some(seed))?;
        prop_assert!(often.is_sorted_by_key(|record| record.at), "out of order");
        prop_assert_eq!(seldom.len() + overtaken as usize, beats, "a beat is shown, or counted as overtaken");
        prop_assert_eq!(overtaken, overtaken_too);
        // Within an instant the order is that of the calls: a signal fetched before a later step of the same instant precedes it.
        let key = |record: &Record| (record.at, record.place, record.a, record.cause);
        seldom.sort_by_key(key);
        often.sort_by_key(key);
        prop_assert_eq!(seldom, often);
        events.set(events.get() + beats);
        Ok(())
    });
    match outcome {
        Ok(()) => {}
        Err(TestError::Fail(reason, case)) => panic!("{reason}\nsmallest case: {case:#?}"),
        Err(abort) => panic!("{abort}"),
    }
    println!("{} events", events.get());
    assert!(events.get() >= 100_000, "{} events are too few", events.get());
}
