//! Counting: every judged window places the signals that lay in it.

use super::bounds::{Bounds, EDGE_COUNT, EdgeKind};
use super::stimulus::{Stimuli, Stimulus};
use super::table::{self, After, CellId, CellState, Column, Need, ROW_COUNT, Stretch};
use crate::audit::{AnchorKind, AuditSettings, How, Judgement, Outcome, Tier};
use crate::base::{Channel, FocusId, Instant, Mode, Program, Record, SiteId, Span, TractId};

/// The share of what is asked for that was hit.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Share {
    /// Hit.
    pub hit: u32,
    /// Asked for, and possible under this program and its tolerances.
    pub required: u32,
}

/// A row of the table: a window of a cycle.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Row {
    /// What the cycle begins with.
    pub after: After,
    /// The window.
    pub stretch: Stretch,
    /// Where it begins, from its anchor.
    pub from: Span,
    /// Where it ends.
    pub to: Span,
    /// True if it is narrower than twice the band at its ends: its cells are out of the count.
    pub void: bool,
}

/// An edge and how often it was tried from either side.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Edge {
    /// What the cycle begins with.
    pub after: After,
    /// Which edge.
    pub kind: EdgeKind,
    /// The kind of event: [`Column::Beat`] or [`Column::Premature`].
    pub column: Column,
    /// Where it lies, from its anchor.
    pub at: Span,
    /// Decided hits close before it.
    pub before: u32,
    /// Decided hits close after it.
    pub beyond: u32,
    /// True if another edge lies within the same band.
    pub void: bool,
}

/// Cells of the run as a whole, each asked for once.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum WholeRun {
    /// The first cycle after the start was judged.
    FirstCycle,
    /// A judged cycle spans a multiple of 2³² µs, where a 32-bit counter wraps.
    Wrap,
    /// A cycle of the longest escape interval passed in silence and ended with a judged pulse.
    LongestSilence,
    /// A sensed beat followed another as closely as refractory allows: within 50 ms after it, or three bands where those are wider.
    FastestSenses,
}

#[derive(Debug, Clone, Copy, Default)]
struct Count {
    core: u32,
    band: u32,
}

/// What a run has covered.
///
/// A signal hits a cell if it lies inside the window by more than the band w at both ends and the window's verdict was decided;
/// w = tolerance + uncertainty + the width of the anchor. Hits within w of an end, and undecided ones, are counted apart and prove nothing.
///
/// It reads the heart's records for what stood behind each signal and whether a pulse captured; rules may not. Where records do not tell, a
/// signal counts as a beat and a pulse as captured, and [`guessed`](Self::guessed) says so.
#[derive(Debug, Clone)]
pub struct Coverage {
    channel: Channel,
    mode: Mode,
    bounds: Bounds,
    stimuli: Stimuli,
    cells: [[Count; Column::COUNT]; ROW_COUNT],
    decided: [(u32, u32); ROW_COUNT],
    edges: Sides,
    whole: [u32; 4],
    /// The cycle before, if a pulse ended it: what follows that pulse closely lies just behind an edge.
    before: Option<(After, Instant)>,
}

/// A cycle that was judged.
#[derive(Debug, Clone, Copy)]
struct Cycle {
    after: After,
    anchor: Instant,
    ends: Instant,
    paced: bool,
    decided: bool,
}

impl Coverage {
    /// Nothing covered yet.
    pub fn new(program: &Program, settings: &AuditSettings) -> Self {
        let set = program.settings();
        let (must_not_see, must_see) = settings.sensitivity_limits(set.sensitivity);
        Self {
            channel: program.paces().unwrap_or(Channel::Ventricular),
            mode: set.mode,
            bounds: Bounds::new(program, settings),
            stimuli: Stimuli::new(program.paces(), must_not_see.0, must_see.0),
            cells: [[Count::default(); Column::COUNT]; ROW_COUNT],
            decided: [(0, 0); ROW_COUNT],
            edges: [[[0; 2]; 2]; EDGE_COUNT],
            whole: [0; 4],
            before: None,
        }
    }

    /// Tells where a tract leads, so that a wave can be followed back to what set it off: an ectopic beat that reaches the electrode
    /// by conduction is premature all the same. A wave through a tract not told of counts as a beat of the rhythm.
    pub fn know_tract(&mut self, tract: TractId, from: SiteId, to: SiteId) {
        self.stimuli.origins.know_tract(tract, from, to);
    }

    /// Tells that a focus stands for the heart's own rhythm, such as a replayed series: its beats are not premature.
    pub fn know_rhythm(&mut self, focus: FocusId) {
        self.stimuli.origins.know_rhythm(focus);
    }

    /// Takes a record, in the order of the log.
    pub fn record(&mut self, record: &Record) {
        self.stimuli.record(record);
    }

    /// Takes a judgement, after the records up to its instant.
    pub fn judged(&mut self, judgement: &Judgement) {
        if judgement.rule.tier() == Tier::Envelope || judgement.channel != self.channel {
            return;
        }
        let after = judgement.anchor.and_then(|anchor| match anchor.kind {
            AnchorKind::Sensed => Some(After::Sense),
            AnchorKind::Paced if self.stimuli.captured(anchor.latest) => Some(After::CapturedPulse),
            AnchorKind::Paced => Some(After::LostPulse),
            AnchorKind::Start => None,
        });
        let cycle = after.zip(judgement.anchor.map(|anchor| anchor.latest));
        if judgement.outcome == Outcome::Undecided && judgement.how == How::Withheld {
            self.stimuli.could_not_tell(judgement.at, cycle);
            return;
        }
        let ends = match (judgement.seen, judgement.window) {
            (Some(seen), _) => seen,
            (None, Some(window)) if judgement.how == How::Missing => window.latest,
            (None, _) => judgement.at,
        };
        let decided = judgement.outcome != Outcome::Undecided;
        if let Some(anchor) = judgement.anchor.filter(|_| decided) {
            self.count_whole(WholeRun::Wrap, anchor.latest.as_micros() >> 32 != ends.as_micros() >> 32);
            self.count_whole(WholeRun::FirstCycle, after.is_none());
        }
        if let Some((after, anchor)) = cycle {
            let paced = judgement.how != How::Withheld;
            self.place(&Cycle { after, anchor, ends, paced, decided });
            self.before = paced.then_some((after, anchor));
        }
        self.stimuli.forget(ends);
    }

    fn count_whole(&mut self, cell: WholeRun, hit: bool) {
        if let Some(count) = self.whole.get_mut(cell.place()) {
            *count = count.saturating_add(u32::from(hit));
        }
    }

    fn place(&mut self, cycle: &Cycle) {
        let bounds = self.bounds;
        for signal in self.stimuli.iter().filter(|signal| signal.onset <= cycle.ends) {
            let decided = cycle.decided && !signal.is_undecided();
            // The signal this cycle began with ended the one before, as is known only now.
            let (after, anchor) = match signal.may_have_ended {
                Some(Some(before)) if bounds.offset(signal.onset, cycle.anchor).is_none() => before,
                _ => (cycle.after, cycle.anchor),
            };
            if let Some(offset) = bounds.offset(signal.onset, anchor) {
                for (place, of, stretch) in table::rows_of(self.mode, bounds.hysteresis).filter(|(_, of, _)| *of == after) {
                    let (from, to, band) = bounds.row(of, stretch);
                    if from <= offset && offset < to {
                        let inside = offset.saturating_sub(from) > band && to.saturating_sub(offset) > band;
                        let outlasts = signal.end > anchor.saturating_add(Span::from_micros(to.saturating_add(band)));
                        hit(&mut self.cells, place, signal, decided && inside, inside && outlasts);
                        if let Some((yes, no)) = self.decided.get_mut(place) {
                            *if decided { yes } else { no } = if decided { yes.saturating_add(1) } else { no.saturating_add(1) };
                        }
                    }
                }
                if decided {
                    try_edges(&mut self.edges, &bounds, after, offset, signal.column, false);
                }
            }
            if let Some((after, anchor)) = self.before
                && decided
                && let Some(offset) = bounds.offset(signal.onset, anchor)
            {
                try_edges(&mut self.edges, &bounds, after, offset, signal.column, true);
            }
        }
        self.place_silence(cycle);
    }

    /// Windows that passed with no event, if the pulse at their end was judged.
    fn place_silence(&mut self, cycle: &Cycle) {
        let bounds = self.bounds;
        let span = cycle.ends.saturating_since(cycle.anchor).as_micros();
        let lies_in = |from: u64, to: u64| {
            let mut offsets = self.stimuli.iter().filter(|signal| signal.onset <= cycle.ends);
            offsets.any(|signal| bounds.offset(signal.onset, cycle.anchor).is_some_and(|offset| from <= offset && offset <= to))
        };
        if !cycle.decided {
            return;
        }
        let silent = !lies_in(0, span);
        if !cycle.paced {
            let close = bounds.refractory.saturating_add(bounds.band.refractory.saturating_mul(3).max(50_000));
            self.count_whole(WholeRun::FastestSenses, cycle.after == After::Sense && span <= close);
            return;
        }
        let passed = table::rows_of(self.mode, bounds.hysteresis).filter(|(_, after, stretch)| {
            let (from, to, band) = bounds.row(*after, *stretch);
            let within = (from.saturating_sub(band), to.saturating_add(band));
            *after == cycle.after && span.saturating_add(band) >= to && !lies_in(within.0, within.1)
        });
        for (place, ..) in passed {
            if let Some(cell) = self.cells.get_mut(place).and_then(|cells| cells.get_mut(Column::Empty.place())) {
                cell.core = cell.core.saturating_add(1);
            }
        }
        let longest = cycle.after == After::Sense || !bounds.hysteresis;
        self.count_whole(WholeRun::LongestSilence, longest && silent);
    }

    /// The rows of this program.
    pub fn rows(&self) -> impl Iterator<Item = Row> + '_ {
        table::rows_of(self.mode, self.bounds.hysteresis).map(|(_, after, stretch)| {
            let (from, to, _) = self.bounds.row(after, stretch);
            let void = self.bounds.is_void(after, stretch);
            Row { after, stretch, from: Span::from_micros(from), to: Span::from_micros(to.max(from)), void }
        })
    }

    /// Every cell of this program.
    pub fn cells(&self) -> impl Iterator<Item = CellId> + '_ {
        self.rows().flat_map(|row| Column::ALL.map(|column| CellId { after: row.after, stretch: row.stretch, column }))
    }

    /// Whether a cell is asked for.
    pub fn need(&self, cell: CellId) -> Need {
        table::need(cell.stretch, cell.column)
    }

    /// How a cell stands; a cell that this program does not have counts as void.
    pub fn state(&self, cell: CellId) -> CellState {
        if table::need(cell.stretch, cell.column) == Need::Impossible {
            return CellState::Impossible;
        }
        let Some(place) = self.place_of(cell) else { return CellState::Void };
        let count = self.count_at(place, cell.column);
        if self.bounds.is_void(cell.after, cell.stretch) {
            CellState::Void
        } else if !cell.column.has_stimulus() {
            CellState::NoStimulus
        } else if count.core > 0 {
            CellState::Hit
        } else if count.band > 0 {
            CellState::BandOnly
        } else {
            CellState::Untried
        }
    }

    /// Hits well inside the window with a decided answer, and hits that prove nothing.
    pub fn hits(&self, cell: CellId) -> (u32, u32) {
        let count = self.place_of(cell).map_or(Count::default(), |place| self.count_at(place, cell.column));
        (count.core, count.band)
    }

    /// Signals of a row about which everything could be told, and those about which not.
    pub fn decided(&self, after: After, stretch: Stretch) -> (u32, u32) {
        let cell = CellId { after, stretch, column: Column::Empty };
        self.place_of(cell).and_then(|place| self.decided.get(place)).copied().unwrap_or_default()
    }

    /// The edges of this program.
    pub fn edges(&self) -> impl Iterator<Item = Edge> + '_ {
        let senses = self.mode.senses().is_some();
        let kinds = EdgeKind::ALL.into_iter().filter(move |_| senses);
        kinds.flat_map(move |kind| {
            After::ALL.into_iter().flat_map(move |after| {
                [Column::Beat, Column::Premature].map(|column| {
                    let (at, band) = self.bounds.edge(after, kind);
                    let count = self.edges.get(Bounds::edge_place(after, kind)).and_then(|both| both.get(column.place()));
                    let [before, beyond] = count.copied().unwrap_or_default();
                    let void = self.bounds.is_edge_void(after, kind, at, band);
                    Edge { after, kind, column, at: Span::from_micros(at), before, beyond, void }
                })
            })
        })
    }

    /// The cells of the run as a whole and how often each was hit.
    pub fn whole_run(&self) -> impl Iterator<Item = (WholeRun, u32)> + '_ {
        let (paces, senses) = (self.mode.paces().is_some(), self.mode.senses().is_some());
        let asked = move |cell: &WholeRun| paces && (senses || *cell != WholeRun::FastestSenses);
        WholeRun::ALL.into_iter().filter(asked).map(|cell| (cell, self.whole.get(cell.place()).copied().unwrap_or(0)))
    }

    /// The share of required cells that was hit, those of the run as a whole among them.
    pub fn score(&self) -> Share {
        let mut share = Share::default();
        for cell in self.cells().filter(|cell| self.need(*cell) == Need::Required) {
            match self.state(cell) {
                CellState::Void | CellState::Impossible => {}
                state => share.count(state == CellState::Hit),
            }
        }
        self.whole_run().for_each(|(_, hits)| share.count(hits > 0));
        share
    }

    /// The share of edges that were tried from both sides.
    pub fn edge_score(&self) -> Share {
        let mut share = Share::default();
        self.edges().filter(|edge| !edge.void).for_each(|edge| share.count(edge.before > 0 && edge.beyond > 0));
        share
    }

    /// True if some signal had no cause, or some pulse no answer, in the records: it was counted as a beat, or as captured.
    pub const fn guessed(&self) -> bool {
        self.stimuli.guessed
    }

    /// The channel that is covered.
    pub const fn channel(&self) -> Channel {
        self.channel
    }

    fn place_of(&self, cell: CellId) -> Option<usize> {
        let mut rows = table::rows_of(self.mode, self.bounds.hysteresis);
        rows.find(|(_, after, stretch)| *after == cell.after && *stretch == cell.stretch).map(|(place, ..)| place)
    }

    fn count_at(&self, place: usize, column: Column) -> Count {
        self.cells.get(place).and_then(|row| row.get(column.place())).copied().unwrap_or_default()
    }
}

impl Share {
    const fn count(&mut self, hit: bool) {
        self.required = self.required.saturating_add(1);
        if hit {
            self.hit = self.hit.saturating_add(1);
        }
    }
}

impl WholeRun {
    /// Every cell.
    pub const ALL: [Self; 4] = [Self::FirstCycle, Self::Wrap, Self::LongestSilence, Self::FastestSenses];

    /// Its name.
    pub const fn code(self) -> &'static str {
        match self {
            Self::FirstCycle => "first-cycle",
            Self::Wrap => "wrap",
            Self::LongestSilence => "longest-silence",
            Self::FastestSenses => "fastest-senses",
        }
    }

    const fn place(self) -> usize {
        match self {
            Self::FirstCycle => 0,
            Self::Wrap => 1,
            Self::LongestSilence => 2,
            Self::FastestSenses => 3,
        }
    }
}

/// Decided hits before and behind each edge, per kind of beat.
type Sides = [[[u32; 2]; 2]; EDGE_COUNT];

/// Counts a decided signal that lies close to an edge. Over the end of its cycle only the last edge can still be near.
fn try_edges(edges: &mut Sides, bounds: &Bounds, after: After, offset: u64, column: Column, over: bool) {
    for kind in EdgeKind::ALL.into_iter().filter(|kind| !over || *kind == EdgeKind::Escape) {
        let (at, band) = bounds.edge(after, kind);
        let far = band.saturating_mul(3);
        let before = at.saturating_sub(far) <= offset && offset < at.saturating_sub(band);
        let beyond = at.saturating_add(band) < offset && offset <= at.saturating_add(far);
        if (before || beyond)
            && let Some(sides) = edges.get_mut(Bounds::edge_place(after, kind)).and_then(|both| both.get_mut(column.place()))
            && let Some(count) = sides.get_mut(usize::from(beyond))
        {
            *count = count.saturating_add(1);
        }
    }
}

fn hit(cells: &mut [[Count; Column::COUNT]; ROW_COUNT], place: usize, signal: &Stimulus, core: bool, straddles: bool) {
    let columns =
        [Some(signal.column), Some(Column::Straddle).filter(|_| straddles), Some(Column::TwoAtOnce).filter(|_| signal.second)];
    for column in columns.into_iter().flatten() {
        if let Some(count) = cells.get_mut(place).and_then(|row| row.get_mut(column.place())) {
            if core {
                count.core = count.core.saturating_add(1);
            } else {
                count.band = count.band.saturating_add(1);
            }
        }
    }
}
