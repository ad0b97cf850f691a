//! The gate rule, case by case. One way takes 100 ms, the gate waits 300 ms; times in ms.

use super::super::{Fraction, TractParams, Way};
use super::*;
use crate::base::{Decay, SiteId};

const THETA: Span = Span::from_millis(300);

fn at(millis: u64) -> Instant {
    Instant::from_micros(millis * 1_000)
}

fn ms(millis: u64) -> Span {
    Span::from_millis(millis)
}

fn share(percent: u32) -> Fraction {
    Fraction::from_millionths(percent * 10_000).unwrap()
}

fn tract(gate: u32, conceal: u32) -> TractParams {
    let way = Way::new(ms(100)).with_theta(THETA).with_conceal(share(conceal));
    TractParams::new(SiteId::new(0), SiteId::new(1), share(gate), way, way)
}

/// The tract at rest, its gate last passed at this time if ever.
fn gate(tract: &TractParams, passed: Option<u64>) -> Gate<'_> {
    let passed = passed.map_or(Last::NEVER, |millis| Last::at(at(millis)));
    Gate { tract, memory: tract.memory(), passed, flight: None, shut_forward: false, shut_backward: false }
}

/// A wave that set out at `entry`.
fn flight(tract: &TractParams, direction: Direction, entry: u64) -> Flight {
    let took = ms(100);
    let pass_at = at(entry).saturating_add(tract.before_gate(direction).of(took));
    Flight { direction, due: at(entry).saturating_add(took), pass_at, took }
}

/// What becomes of it, in a word.
fn word(fate: Option<Fate>) -> &'static str {
    match fate {
        None => "nothing",
        Some(Fate::Enters(_)) => "enters",
        Some(Fate::Meets(_)) => "meets",
        Some(Fate::Blocked(_, BlockReason::Refractory, _)) => "refractory",
        Some(Fate::Blocked(_, BlockReason::Shut, _)) => "shut",
        Some(Fate::Blocked(_, BlockReason::Occupied, _)) => "occupied",
        Some(Fate::Blocked(_, BlockReason::Site, _)) => "site",
    }
}

fn words(decided: Decided) -> (&'static str, &'static str) {
    (word(decided.first), word(decided.second))
}

#[test]
fn a_wave_enters_once_the_gate_has_recovered() {
    let tract = tract(0, 0);
    let gate = gate(&tract, Some(1_000));
    assert_eq!(words(gate.decide(true, false, at(1_299))), ("refractory", "nothing"));
    assert_eq!(words(gate.decide(true, false, at(1_300))), ("enters", "nothing"));
    assert_eq!(words(Gate { shut_forward: true, ..gate }.decide(true, false, at(1_300))), ("shut", "nothing"));
    assert_eq!(words(Gate { shut_forward: true, ..gate }.decide(false, true, at(1_300))), ("enters", "nothing"));
}

#[test]
fn the_gate_is_passed_where_it_lies() {
    for (position, forward, backward) in [(0, 0, 100), (100, 100, 0), (25, 25, 75)] {
        let tract = tract(position, 0);
        let gate = gate(&tract, None);
        for (direction, expected) in [(Direction::Forward, forward), (Direction::Backward, backward)] {
            let Some(Fate::Enters(flight)) = gate.decide(!direction.is_backward(), direction.is_backward(), at(1_000)).first
            else {
                unreachable!("nothing stops it")
            };
            assert_eq!((flight.pass_at, flight.due), (at(1_000 + expected), at(1_100)));
        }
    }
}

/// What is blocked counts for nothing at q = 0, as if it had passed at q = 1, and for its share of the way between that and the last
/// passage otherwise, but never further back than θ + 8τ before its entry.
#[test]
fn concealment_moves_the_gate_clock() {
    let after = |conceal, passed: Option<u64>, entry| {
        let tract = tract(100, conceal);
        gate(&tract, passed).decide(true, false, at(entry)).passed
    };
    // It would have passed at 1200 + 100; the gate had been passed at 1000.
    assert_eq!(after(0, Some(1_000), 1_200), Last::at(at(1_000)));
    assert_eq!(after(100, Some(1_000), 1_200), Last::at(at(1_300)));
    assert_eq!(after(25, Some(1_000), 1_200), Last::at(at(1_075)));

    // Behind another wave, in a way that never blocks: that the gate was passed 80 before matters no more.
    let deaf = Way::new(ms(100)).with_conceal(share(50));
    let after = |backward: Way| {
        let tract = TractParams::new(SiteId::new(0), SiteId::new(1), share(0), deaf, backward);
        let busy = Gate { flight: Some(flight(&tract, Direction::Forward, 1_000)), ..gate(&tract, None) };
        busy.decide(true, false, at(1_080)).passed
    };
    assert_eq!(after(deaf), Last::at(at(1_080)));
    // The memory is that of both ways: θ + 8τ = 40 + 8 · 5 reaches back to 1000.
    assert_eq!(after(deaf.with_theta(ms(40)).with_recovery(ms(9), Decay::new(ms(5)).unwrap())), Last::at(at(1_040)));
    assert_eq!(after(deaf.with_theta(ms(40))), Last::at(at(1_060)));
}

/// What a shut way stops comes up to the gate and counts as having passed it, whatever the concealment of its way.
#[test]
fn a_shut_way_conceals_wholly() {
    let tract = tract(100, 0);
    for passed in [None, Some(1_000), Some(8_900)] {
        let shut = Gate { shut_forward: true, ..gate(&tract, passed) };
        assert_eq!(shut.decide(true, false, at(9_000)).passed, Last::at(at(9_100)));
    }
}

#[test]
fn behind_another_wave_the_way_is_occupied() {
    let tract = tract(100, 100);
    let busy = Gate { flight: Some(flight(&tract, Direction::Forward, 1_000)), ..gate(&tract, None) };
    let decided = busy.decide(true, false, at(1_050));
    assert_eq!(words(decided), ("occupied", "nothing"));
    // The wave ahead counts as past the gate, though it will be there at 1100 only; the newcomer would have been at 1150.
    assert!(matches!(decided.first, Some(Fate::Blocked(_, _, recovery)) if recovery.is_zero()));
    assert_eq!(decided.passed, Last::at(at(1_150)));
}

/// The gate blocks only what reaches it.
#[test]
fn opposite_waves_end_where_they_meet() {
    // Gate at the far end: a forward wave under way reaches it last, so that what comes from there is tested first.
    let far = tract(100, 0);
    let under_way = Some(flight(&far, Direction::Forward, 1_000));
    let open = Gate { flight: under_way, ..gate(&far, None) };
    let decided = open.decide(false, true, at(1_040));
    assert_eq!(words(decided), ("meets", "nothing"));
    assert_eq!(decided.passed, Last::at(at(1_040)), "the newcomer passed the gate before they met");
    assert!(
        matches!(decided.first, Some(Fate::Meets(m)) if (m.left, m.took, m.delay, m.backward) == (ms(60), ms(100), ms(100), true))
    );
    let refractory = Gate { flight: under_way, ..gate(&far, Some(900)) };
    assert_eq!(words(refractory.decide(false, true, at(1_040))), ("refractory", "nothing"), "the other goes on");
    let shut = Gate { shut_backward: true, ..open };
    assert_eq!(words(shut.decide(false, true, at(1_040))), ("shut", "nothing"));

    // Gate at the near end: the wave under way has passed it, and the newcomer meets it before it gets there, refractory or shut or not.
    let near = tract(0, 0);
    let past = Gate { flight: Some(flight(&near, Direction::Forward, 1_000)), shut_backward: true, ..gate(&near, Some(900)) };
    let decided = past.decide(false, true, at(1_040));
    assert_eq!(words(decided), ("meets", "nothing"));
    assert_eq!(decided.passed, Last::at(at(1_000)));
}

/// Under way towards the gate, it sets the clock when it is the first there, though both end beyond.
#[test]
fn the_first_at_the_gate_sets_it() {
    let middle = tract(50, 0);
    let busy = Gate { flight: Some(flight(&middle, Direction::Forward, 1_000)), ..gate(&middle, None) };
    assert_eq!(busy.decide(false, true, at(1_001)).passed, Last::at(at(1_050)), "1050 against 1051");
    let late = flight(&middle, Direction::Backward, 1_000);
    let from_there = Gate { flight: Some(late), ..gate(&middle, None) };
    assert_eq!(from_there.decide(true, false, at(1_030)).passed, Last::at(at(1_050)));
}

/// A wave under way has passed only if that was earlier than now. Guards the rule's one tie: the newcomer's recovery.
#[test]
fn at_the_gate_is_not_past_it() {
    let way = Way::new(ms(100)).with_recovery(ms(100), Decay::new(ms(100)).unwrap());
    let tract = TractParams::new(SiteId::new(0), SiteId::new(1), share(50), way, way);
    let took = |now| {
        let busy = Gate { flight: Some(flight(&tract, Direction::Forward, 1_000)), ..gate(&tract, None) };
        match busy.decide(false, true, at(now)).first {
            Some(Fate::Meets(meeting)) => meeting.delay,
            _ => unreachable!("they meet"),
        }
    };
    assert_eq!(took(1_050), ms(100), "fully recovered: the wave is at the gate, not past it");
    assert!(took(1_051) > ms(198), "one ms of recovery");
}

#[test]
fn both_ends_at_once_test_the_first_at_the_gate() {
    // Far end nearer to the gate: backward is there first.
    let far = tract(75, 0);
    let decided = gate(&far, None).decide(true, true, at(1_000));
    assert_eq!((words(decided), decided.passed), (("meets", "nothing"), Last::at(at(1_025))));
    // Backward blocked: forward is tested alone.
    let shut = Gate { shut_backward: true, ..gate(&far, None) };
    assert_eq!(words(shut.decide(true, true, at(1_000))), ("enters", "shut"));
    let both_blocked = gate(&far, Some(900));
    assert_eq!(words(both_blocked.decide(true, true, at(1_000))), ("refractory", "refractory"));
    // Forward blocked as second: it does not matter, they never let it reach the gate.
    let shut = Gate { shut_forward: true, ..gate(&far, None) };
    assert_eq!(words(shut.decide(true, true, at(1_000))), ("meets", "nothing"));
}

#[test]
fn both_at_the_gate_together_collide_unless_both_are_blocked() {
    let middle = tract(50, 0);
    let open = gate(&middle, None);
    assert_eq!(words(open.decide(true, true, at(1_000))), ("meets", "nothing"));
    assert_eq!(words(Gate { shut_forward: true, ..open }.decide(true, true, at(1_000))), ("meets", "nothing"));
    assert_eq!(words(Gate { shut_backward: true, ..open }.decide(true, true, at(1_000))), ("meets", "nothing"));
    let closed = Gate { shut_forward: true, shut_backward: true, ..open };
    assert_eq!(words(closed.decide(true, true, at(1_000))), ("shut", "shut"));
}

/// Both ends are decided from the state before the instant: what one end's blocked wave conceals does not reach the other.
#[test]
fn neither_end_sees_what_the_other_has_just_done() {
    let busy_tract = tract(50, 100);
    let busy = Gate { flight: Some(flight(&busy_tract, Direction::Forward, 1_000)), ..gate(&busy_tract, None) };
    let (alone, both) = (busy.decide(false, true, at(1_060)), busy.decide(true, true, at(1_060)));
    assert_eq!(words(alone), ("meets", "nothing"));
    assert_eq!(words(both), ("occupied", "meets"));
    assert_eq!(both.passed, busy.decide(true, false, at(1_060)).passed.max(alone.passed));
}
