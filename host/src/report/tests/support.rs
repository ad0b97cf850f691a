//! Runs for the tests: real closed loops of made-up scenarios, and what no loop gives, set by hand.

use crate::assemble::{Outcome, run_data};
use crate::refusal::Source;
use crate::run::{Finished, Order};
use crate::run_data::{Coverage, CoverageCell, CoverageEdge, CoverageRow, CoverageState, Need, RunData, Verdict};
use crate::scenario::Scenario;
use phase4::audit::{RuleId, RuleSet};
use phase4::base::{Kind, Record, Span};
use std::path::{Path, PathBuf};
use std::sync::atomic::AtomicBool;

/// The folder of the shipped scenarios.
pub(super) fn scenarios() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../examples/scenarios")
}

/// Runs a shipped scenario.
pub(super) fn shipped(name: &str) -> RunData {
    run(&Scenario::load(&scenarios().join(name)).unwrap())
}

/// Runs a scenario written here.
pub(super) fn written(text: &str) -> RunData {
    run(&Scenario::parse(Source::new("written.toml", text), &scenarios()).unwrap())
}

/// A device that paces alone: `lines` go into `[device]`, `rest` behind everything.
pub(super) fn vvi(length: &str, lines: &str, rest: &str) -> RunData {
    written(&format!(
        "[scenario]\nname = \"A test\"\n[run]\nlength = \"{length}\"\nseed = 1\n[heart]\nsinus = \"75 /min\"\n[device]\nname = \"Corncrake-3\"\nmode = \"VVI\"\n{lines}\n[audit]\ntolerance = \"8 ms\"\n{rest}"
    ))
}

fn run(scenario: &Scenario) -> RunData {
    let mut records = Vec::new();
    let watch = |record: &Record| {
        records.push(*record);
        Ok(())
    };
    let order = Order { seed: scenario.seed, blind: RuleSet::EMPTY, stop: &AtomicBool::new(false), keep: true };
    let Finished { tally, hash, judged } = crate::run::run(scenario, order, watch, |_| {}).unwrap();
    let command = format!("phase4 run {} --seed {}", scenario.source.name(), scenario.seed);
    run_data(scenario, Outcome { command, tally, hash, records, judged }, RuleSet::EMPTY).unwrap()
}

/// A coverage table with every sort of cell.
pub(super) fn coverage() -> Coverage {
    let cell = |state, need, core, band| CoverageCell { need, state, core, band };
    let cells = vec![
        cell(CoverageState::Hit, Need::Required, 46, 1),
        cell(CoverageState::BandOnly, Need::Required, 0, 2),
        cell(CoverageState::Empty, Need::Required, 0, 0),
        cell(CoverageState::Empty, Need::Optional, 0, 0),
        cell(CoverageState::Void, Need::Required, 0, 0),
        cell(CoverageState::NoStimulus, Need::Required, 0, 0),
        cell(CoverageState::Impossible, Need::Impossible, 0, 0),
    ];
    let row = |anchor: &str, window: &str, from, to| CoverageRow {
        code: window.to_owned(),
        anchor: anchor.to_owned(),
        window: window.to_owned(),
        from: Span::from_millis(from),
        to: Span::from_millis(to),
        cells: cells.clone(),
    };
    let edge = |edge: &str, at, before, after, void| CoverageEdge {
        anchor: "after a pulse".to_owned(),
        edge: edge.to_owned(),
        column: "R beat".to_owned(),
        at: Span::from_millis(at),
        before,
        after,
        void,
    };
    Coverage {
        columns: ["R beat", "PVC", "near thr.", "sub thr.", "T wave", "noise run", "magnet"].map(str::to_owned).to_vec(),
        rows: vec![
            row("after a seen beat", "V1 blanking", 0, 100),
            row("after a seen beat", "V2 refractory", 100, 250),
            row("after a captured pulse", "V1 blanking", 0, 100),
        ],
        edges: vec![edge("VB", 100, 0, 0, false), edge("VRP", 250, 1, 2, false), edge("HRI", 1_200, 0, 0, true)],
        whole_run: vec![("first cycle after start".to_owned(), 1), ("longest silence".to_owned(), 0)],
        hit: 3,
        required: 12,
    }
}

/// A run of this length that is only records: a device that paces every second and a beat of the heart in between now and then.
pub(super) fn long(pulses: u64, broken_every: u64) -> RunData {
    use phase4::audit::{Anchor, AnchorKind, How, Outcome, Window};
    use phase4::base::{Cause, CauseKind, Channel, Deviation, MicroVolts, MilliVolts, Pulse, Signal};
    let mut data = vvi("2 s", "lower_rate = \"60 /min\"", "");
    let judgement = *data.judgements.first().unwrap();
    let pulse = Pulse { channel: Channel::Ventricular, amplitude: MilliVolts(3_500), width: Span::from_micros(400) };
    let wave = Signal { peak: MicroVolts(8_000), width: Span::from_millis(40) };
    let conducted = |tract| Cause::new(CauseKind::Conducted, tract);
    (data.records, data.judgements) = (Vec::new(), Vec::new());
    let mut last = data.start;
    for number in 0..pulses {
        let late = if broken_every > 0 && number % broken_every == broken_every - 1 { 31_000 + number % 900 } else { number % 7 };
        let at = last.saturating_add(Span::from_micros(1_000_000 + late));
        let apex = at.saturating_add(Span::from_micros(100));
        let above = apex.saturating_add(Span::from_millis(40));
        data.records.push(Record::new(
            above.saturating_sub(Span::from_millis(600)),
            Kind::Activated,
            0,
            Cause::new(CauseKind::Own, 0),
        ));
        data.records.push(Record::pulse(at, pulse));
        data.records.push(Record::new(apex, Kind::Activated, 4, Cause::new(CauseKind::Pulse, 1)));
        data.records.push(Record::new(above, Kind::Activated, 3, conducted(3)));
        let window = Window {
            earliest: last.saturating_add(Span::from_millis(992)),
            nominal: last.saturating_add(Span::from_millis(1_000)),
            latest: last.saturating_add(Span::from_millis(1_008)),
        };
        let mut judged = judgement;
        judged.at = at;
        judged.outcome = if late > 8_000 { Outcome::Broken } else { Outcome::Held };
        judged.how = if late > 8_000 { How::Late } else { How::OnTime };
        judged.rule = RuleId::Lr1;
        judged.anchor = Some(Anchor { earliest: last, latest: last, kind: AnchorKind::Paced });
        judged.window = Some(window);
        judged.seen = Some(at);
        judged.deviation = Some(Deviation::from_micros(late as i64));
        data.judgements.push(judged);
        last = at;
        if number % 3 == 2 {
            let beat = at.saturating_add(Span::from_millis(700));
            data.records.push(Record::new(beat, Kind::Activated, 3, Cause::new(CauseKind::Own, 2)));
            let seen = beat.saturating_add(Span::from_millis(40));
            data.records.push(Record::new(seen, Kind::Activated, 4, conducted(3)));
            data.records.push(Record::signal(seen, Channel::Ventricular, wave, conducted(3)));
            last = seen;
        }
    }
    data.simulated = last.saturating_since(data.start).saturating_add(Span::from_secs(1));
    data.verdict = if broken_every > 0 { Verdict::Broken } else { Verdict::Holds };
    data
}
