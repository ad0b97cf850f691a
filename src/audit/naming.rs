//! Naming: which rule alone, relaxed by how little, would have explained what no hypothesis allowed.

use super::clock::Micros;
use super::history::{Event, History, Origin};
use super::hypothesis::{Hypotheses, Hypothesis};
use super::scores::Scores;
use super::sense::Shown;
use super::windows::Windows;
use super::{AnchorKind, Hint, RuleId, RuleSet};

/// How a replay ends.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Ending {
    /// With a pulse that must be explained.
    Pulse(Micros),
    /// With no pulse up to here.
    Silence(Micros),
}

/// The rules that may explain a finding, in the order in which equal explanations are given.
const CANDIDATES: [RuleId; 10] = [
    RuleId::Hy1,
    RuleId::Hy2,
    RuleId::Lr1,
    RuleId::Lr2,
    RuleId::Cm1,
    RuleId::Rf1,
    RuleId::Rf2,
    RuleId::In1,
    RuleId::Se1,
    RuleId::Se2,
];

/// The largest change tried: 16.8 s, more than any interval a program accepts.
const MOST: Micros = 1 << 24;
/// How many pulses back a replay may begin.
const FURTHEST: usize = 3;
/// Hypotheses of a replay: few, since it begins at a pulse.
const ROOM: usize = 8;

/// Names a finding: the rule whose smallest change explains it, and those that do so by as small a change.
///
/// A replay begins at the last pulse, whose instant is exact. A single-chamber device is wholly reset by it, so that an earlier
/// beginning can only add conditions; the second and third pulse back are tried where no rule alone explains from the last.
/// The work is bounded: ten rules, at most 25 replays each, of at most 24 events with at most 8 hypotheses; most rules take one
/// replay, since a rule that cannot beat the best change so far is not searched further.
pub(super) fn name(windows: &Windows, history: &History, ending: Ending, missing: bool, scores: &Scores) -> (RuleId, RuleSet) {
    for back in 1..=FURTHEST {
        let mut best = MOST.saturating_add(1);
        let mut named: Option<(RuleId, RuleSet)> = None;
        for rule in CANDIDATES.into_iter().filter(|rule| !scores.is_blind(*rule)) {
            let Some(change) = least_change(windows, history, ending, missing, back, rule, best.min(MOST)) else { continue };
            named = Some(match named {
                Some((first, also)) if change == best => (first, also.with(rule)),
                _ => (rule, RuleSet::EMPTY),
            });
            best = change;
        }
        if let Some(named) = named {
            return named;
        }
    }
    // No rule alone explains it. What is left to say is that it came too early, or too late.
    let plain = if matches!(ending, Ending::Pulse(_)) { RuleId::Lr2 } else { RuleId::Lr1 };
    let named = [plain].into_iter().chain(CANDIDATES).find(|rule| !scores.is_blind(*rule));
    (named.unwrap_or(plain), RuleSet::EMPTY)
}

/// The least change of this rule alone that explains, if one of at most `most` does.
fn least_change(
    windows: &Windows,
    history: &History,
    ending: Ending,
    missing: bool,
    back: usize,
    rule: RuleId,
    most: Micros,
) -> Option<Micros> {
    // A pulse that was left out and a timer that ran one interval too long are the same thing seen from outside.
    if missing && matches!(rule, RuleId::Lr1 | RuleId::Cm1) {
        return Some(1);
    }
    let explained = |by: Micros| explains(&windows.relaxed(rule, by), history, back, ending);
    if !explained(most) {
        return None;
    }
    let (mut refuted, mut enough) = (0, most);
    while enough.saturating_sub(refuted) > 1 {
        let middle = refuted.saturating_add(enough.saturating_sub(refuted) >> 1);
        if explained(middle) {
            enough = middle;
        } else {
            refuted = middle;
        }
    }
    Some(enough)
}

/// True if these windows allow everything from `back` pulses back to the ending.
fn explains(windows: &Windows, history: &History, back: usize, ending: Ending) -> bool {
    let (origin, first) = history.since(back);
    let mut states = Hypotheses::<ROOM>::new();
    begin(&mut states, windows, origin);
    let last = match ending {
        Ending::Pulse(at) => Some(at),
        Ending::Silence(_) => None,
    };
    let mut signals = history.from(first).filter_map(Event::signal);
    let earlier = history.from(first).filter_map(|event| match event {
        Event::Pulse(at) => Some(at),
        Event::Signal(_) => None,
    });
    let mut waiting = signals.next();
    // As live: a signal settles before a pulse that is looked at no earlier.
    for (pulse, judged) in
        earlier.chain(last).map(|at| (Some(at), at.saturating_add(windows.uncertainty))).chain([(None, Micros::MAX)])
    {
        while let Some(signal) = waiting.filter(|signal| windows.settles(signal.at) <= judged) {
            states.show(windows, &signal, None);
            waiting = signals.next();
        }
        if let Some(pulse) = pulse {
            let unsettled = history.from(first).filter_map(Event::signal).filter(|signal| windows.settles(signal.at) > judged);
            for signal in unsettled.filter(|signal| signal.at <= judged) {
                states.show(windows, &signal, Some(pulse));
            }
            if !states.iter().any(|state| windows.allows(state, pulse)) {
                return false;
            }
            states.only(Hypothesis::paced(pulse));
            if last == Some(pulse) {
                return true;
            }
        }
    }
    match ending {
        Ending::Pulse(_) => false,
        Ending::Silence(until) => states.iter().any(|state| windows.expires(state) >= until),
    }
}

/// The states that are possible where a replay or a run begins.
pub(super) fn begin<const H: usize>(states: &mut Hypotheses<H>, windows: &Windows, origin: Origin) {
    match origin {
        Origin::Pulse(at) => states.only(Hypothesis::paced(at)),
        Origin::Start(at) => states.only(Hypothesis { kind: AnchorKind::Start, ..Hypothesis::paced(at) }),
        Origin::Unknown(at) => {
            states.clear();
            let kinds = [Some(AnchorKind::Paced), Some(AnchorKind::Sensed).filter(|_| windows.hysteresis)];
            for kind in kinds.into_iter().flatten() {
                let longest = windows.escape(kind).latest.saturating_add(windows.guard);
                // A signal shown just before may still be on its way to its sense.
                let hi = at.saturating_add(windows.latest_sense());
                states.add(Hypothesis { lo: at.saturating_sub(longest), hi, kind, why: Some(Hint::UnknownState) });
            }
        }
    }
}

impl<const H: usize> Hypotheses<H> {
    /// Lets a signal act on every state, as far as it did before this pulse; true if it may have done something.
    pub(super) fn show(&mut self, windows: &Windows, signal: &Shown, pulse: Option<Micros>) -> bool {
        let mut sensed: Option<Hypothesis> = None;
        self.retain(|state| {
            let fate = windows.fate(state, signal, pulse);
            if let Some(new) = fate.sensed() {
                sensed =
                    Some(sensed.map_or(new, |other| Hypothesis { lo: other.lo.min(new.lo), hi: other.hi.max(new.hi), ..other }));
            }
            fate.stays
        });
        sensed.is_some_and(|sensed| {
            self.add(sensed);
            true
        })
    }
}
