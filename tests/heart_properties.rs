//! What holds for every heart, whatever is done to it and however it is polled.
//!
//! The seeded runs count their events. `PHASE4_EVENTS=10000000 cargo test --release --test heart_properties -- --nocapture` makes them
//! long ones. The proptest runs are shorter and shrink what they find.
#![allow(
    clippy::arithmetic_side_effects,
    clippy::as_conversions,
    clippy::cast_possible_truncation,
    clippy::expect_used,
    clippy::float_arithmetic,
    clippy::indexing_slicing,
    clippy::panic,
    clippy::unwrap_used,
    reason = "tests may"
)]

#[path = "heart_common/mod.rs"]
mod heart_common;
#[path = "heart_common/random.rs"]
mod random;

use heart_common::{drain, ms, run};
use phase4::base::{BlockReason, CauseKind, FineInstant, Instant, Interval, Kind, Meeting, Rate, Record, SiteId, Span, TractId};
use phase4::heart::{Anatomy, CellParams, Heart, SiteParams, TractParams, Way, Ways};
use proptest::prelude::*;
use proptest::test_runner::FileFailurePersistence;
use random::{Act, Dice, Foci, Genes, RandomAnatomy, S, T, drain_in_pieces, play, play_plainly, renamed};
use std::collections::BTreeMap;

fn genes() -> impl Strategy<Value = Genes> {
    let acts = prop::collection::vec(any::<[u8; 4]>(), 0..40);
    (any::<[[u8; 2]; 6]>(), any::<[[u8; 13]; 8]>(), any::<[[u8; 2]; 3]>(), any::<[[u8; 5]; 2]>(), acts)
        .prop_map(|(sites, tracts, cells, foci, acts)| Genes { sites, tracts, cells, foci, acts })
}

fn anatomy(genes: &Genes) -> RandomAnatomy {
    let (sites, tracts, cells) = genes.tables();
    Anatomy::new(sites, tracts, cells).expect("every gene is valid")
}

/// What a seeded run has seen.
#[derive(Default)]
struct Counts {
    events: usize,
    instants: usize,
    ties: usize,
    kinds: BTreeMap<Kind, usize>,
}

impl Counts {
    fn add(&mut self, log: &[Record]) {
        self.events += log.len();
        for record in log {
            *self.kinds.entry(record.kind).or_default() += 1;
        }
        for instant in log.chunk_by(|a, b| a.at == b.at) {
            self.instants += 1;
            // What happened there by itself: what only follows from it, a reset or a wave's fate at a mouth, does not count.
            let site = |record: &Record| record.kind == Kind::Blocked && record.a & 0xFF == BlockReason::Site.number();
            let by_itself = |record: &&Record| {
                matches!(record.kind, Kind::Activated | Kind::Joined | Kind::NotCaptured | Kind::Collided) || site(record)
            };
            self.ties += usize::from(instant.iter().filter(by_itself).count() > 1);
        }
    }

    fn report(&self, name: &str) {
        let share = 100 * self.ties / self.instants;
        println!("{name}: {} events, {} instants, {share} % of them ties, {:?}", self.events, self.instants, self.kinds);
        assert!(share >= 20, "only {share} % of instants are ties");
        assert!(Kind::ALL[..6].iter().all(|kind| self.kinds.contains_key(kind)), "every kind of event occurs");
    }
}

/// Runs seeds until so many events have been seen.
fn seeded(name: &str, mut run: impl FnMut(u64) -> Vec<Record>) {
    let wanted = std::env::var("PHASE4_EVENTS").ok().and_then(|events| events.parse().ok()).unwrap_or(150_000);
    let mut counts = Counts::default();
    for seed in 0.. {
        if counts.events >= wanted {
            break;
        }
        counts.add(&run(seed));
    }
    counts.report(name);
}

/// However a run is polled, every record and the state at its end are the same to the bit.
fn polling_does_not_matter(genes: &Genes, seed: u64) -> Vec<Record> {
    let (anatomy, foci, acts) = (anatomy(genes), genes.foci(), genes.acts());
    let (whole, at_end) = play_plainly(&anatomy, &foci, &acts);
    let mut dice = Dice::new(seed);
    let (pieces, also_at_end) = play(&anatomy, &foci, &acts, |heart, until, log| drain_in_pieces(&mut dice, heart, until, log));
    assert_eq!(whole, pieces);
    assert_eq!(at_end, also_at_end);
    whole
}

#[test]
fn splitting_a_poll_changes_not_one_bit() {
    seeded("splitting", |seed| polling_does_not_matter(&Genes::from_seed(seed, 60), seed));
}

/// Records come in order; after `None` the next instant lies ahead; an early or repeated poll finds nothing and changes nothing; what
/// is handed out lies at or before `now`, and exactly when `next_at` had said.
#[test]
fn next_at_keeps_its_word() {
    seeded("next_at", |seed| {
        let genes = Genes::from_seed(seed, 60);
        let (anatomy, foci, acts) = (anatomy(&genes), genes.foci(), genes.acts());
        let mut latest = Instant::ZERO;
        let (log, _) = play(&anatomy, &foci, &acts, |heart, until, log| {
            latest = latest.max(until); // an earlier `now` counts as the latest one
            loop {
                let promised = heart.next_at();
                let Some(record) = heart.poll(until) else { break };
                // A promise may turn out empty where the waves of an instant set out in silence; it is never too late.
                assert!(promised.is_some_and(|promised| promised <= record.at) && record.at <= latest);
                log.push(record);
            }
            assert!(heart.next_at().is_none_or(|next| next > latest));
            let before = heart.clone();
            for now in [until, Instant::ZERO, until.saturating_sub(Span::from_millis(5))] {
                assert_eq!(heart.poll(now), None);
            }
            assert_eq!(before, *heart);
        });
        assert!(log.is_sorted_by_key(|record| record.at));
        log
    });
}

/// No site fires again before its refractory period is over.
#[test]
fn no_site_fires_within_its_refractory_period() {
    seeded("refractory", |seed| {
        let genes = Genes::from_seed(seed, 60);
        let (anatomy, foci) = (anatomy(&genes), genes.foci());
        let (log, _) = play_plainly(&anatomy, &foci, &genes.acts());
        let mut last = [None; S];
        for record in log.iter().filter(|record| record.kind == Kind::Activated) {
            let site = usize::from(record.place);
            if let Some(before) = last[site].replace(record.at) {
                assert!(record.at.saturating_since(before) >= anatomy.sites()[site].refractory, "{record:?}");
            }
        }
        log
    });
}

/// Other names for the same heart: where each site and tract has gone, and which tracts have been turned round.
struct Renaming {
    sites: [usize; S],
    tracts: [usize; T],
    turned: [bool; T],
}

impl Renaming {
    fn drawn(dice: &mut Dice) -> Self {
        let (sites, tracts) = (dice.shuffled(), dice.shuffled());
        Self { sites, tracts, turned: core::array::from_fn(|_| dice.below(2) == 0) }
    }

    fn site(&self, site: SiteId) -> SiteId {
        SiteId::new(self.sites[usize::from(site.row())] as u8)
    }

    fn tract(&self, tract: TractId) -> TractId {
        TractId::new(self.tracts[usize::from(tract.row())] as u8)
    }

    fn heart(&self, genes: &Genes) -> (RandomAnatomy, Foci) {
        let (sites, tracts, cells) = genes.tables();
        let (mut new_sites, mut new_tracts) = (sites, tracts);
        for (row, &to) in self.sites.iter().enumerate() {
            new_sites[to] = sites[row];
        }
        for (row, &to) in self.tracts.iter().enumerate() {
            let TractParams { from, to: end, gate, forward, backward, .. } = tracts[row];
            let (from, end) = (self.site(from), self.site(end));
            new_tracts[to] = if self.turned[row] {
                TractParams::new(end, from, gate.complement(), backward, forward)
            } else {
                TractParams::new(from, end, gate, forward, backward)
            };
        }
        let cells = cells.map(|cell| CellParams::new(self.site(cell.site), cell.interval));
        let foci = renamed(&genes.foci(), |site| self.site(site));
        (Anatomy::new(new_sites, new_tracts, cells).unwrap(), foci)
    }

    fn act(&self, act: Act) -> Act {
        let ways = |tract: TractId, ways: Ways| match (self.turned[usize::from(tract.row())], ways) {
            (true, Ways::Forward) => Ways::Backward,
            (true, Ways::Backward) => Ways::Forward,
            (_, ways) => ways,
        };
        match act {
            Act::Pulse(site, amplitude) => Act::Pulse(self.site(site), amplitude),
            Act::Beat(site) => Act::Beat(self.site(site)),
            Act::Shut(tract, which) => Act::Shut(self.tract(tract), ways(tract, which)),
            Act::Open(tract, which) => Act::Open(self.tract(tract), ways(tract, which)),
            other => other,
        }
    }

    /// The record as it should read under the new names, in a form that does not know which of several simultaneous waves came first.
    fn told(&self, record: &Record) -> Vec<String> {
        let site = |row: u8| self.site(SiteId::new(row)).row();
        let tract = |row: u8| self.tract(TractId::new(row)).row();
        let turned = |row: u8, backward: bool| backward != self.turned[usize::from(row)];
        let at = record.at.as_micros();
        // Which of several waves fired a site is a matter of names.
        let cause = match record.cause.kind {
            CauseKind::Conducted => "a wave".to_owned(),
            _ => format!("{:?}", record.cause),
        };
        match record.kind {
            Kind::Activated if record.cause.kind == CauseKind::Conducted => {
                vec![format!("{at} {} fires by {cause}", site(record.place)), format!("{at} {} arrives", tract(record.cause.id))]
            }
            Kind::Activated => vec![format!("{at} {} fires by {cause}", site(record.place))],
            Kind::Joined => vec![format!("{at} {} arrives", tract(record.place))],
            Kind::Blocked => {
                let (reason, backward) = (record.a & 0xFF, turned(record.place, record.a & 0x100 != 0));
                vec![format!("{at} {} blocks {reason} backward {backward} after {} by {cause}", tract(record.place), record.b)]
            }
            Kind::Collided => {
                let Meeting { left, took, delay, backward } = Meeting::unpack(record.a, record.b);
                let place = tract(record.place);
                if left == took {
                    // Both set out in this instant: neither is the newcomer.
                    return vec![format!("{at} {place} both {:?} {:?}", took.min(delay), took.max(delay))];
                }
                let backward = turned(record.place, backward);
                vec![format!("{at} {place} meets {left:?} {took:?} {delay:?} backward {backward} by {cause}")]
            }
            Kind::NotCaptured => {
                vec![format!("{at} {} silent {} {} by {cause}", site(record.place), record.a, record.b)]
            }
            _ => vec![format!("{at} {:?} {} {} {} by {cause}", record.kind, record.place, record.a, record.b)],
        }
    }

    fn story(&self, log: &[Record]) -> Vec<String> {
        let told = |instant: &[Record]| {
            let mut lines: Vec<String> = instant.iter().flat_map(|record| self.told(record)).collect();
            lines.sort();
            lines
        };
        log.chunk_by(|a, b| a.at == b.at).flat_map(told).collect()
    }
}

fn names_do_not_matter(genes: &Genes, seed: u64) -> Vec<Record> {
    let same = Renaming { sites: core::array::from_fn(|n| n), tracts: core::array::from_fn(|n| n), turned: [false; T] };
    let renaming = Renaming::drawn(&mut Dice::new(seed));
    let (first, foci) = same.heart(genes);
    let (other, other_foci) = renaming.heart(genes);
    let acts = genes.acts();
    let other_acts: Vec<_> = acts.iter().map(|&(at, act)| (at, renaming.act(act))).collect();
    let (log, _) = play_plainly(&first, &foci, &acts);
    let (other_log, _) = play_plainly(&other, &other_foci, &other_acts);
    let (expected, found) = (renaming.story(&log), same.story(&other_log));
    if let Some(n) = expected.iter().zip(&found).position(|(a, b)| a != b) {
        panic!("expected {}\nfound    {}", expected[n], found[n]);
    }
    assert_eq!(expected.len(), found.len());
    log
}

/// Permuting sites, permuting tracts, turning a tract round: only names change, and the order within an instant.
///
/// Guards the two phases of an instant and the one decision a tract takes for both its ends: without either, the order of the tables
/// shows.
#[test]
fn only_names_depend_on_the_order_of_the_tables() {
    seeded("renaming", |seed| names_do_not_matter(&Genes::from_seed(seed, 60), seed));
}

proptest! {
    #![proptest_config(ProptestConfig {
        cases: 300,
        failure_persistence: Some(Box::new(FileFailurePersistence::WithSource("proptest-regressions"))),
        ..ProptestConfig::default()
    })]

    #[test]
    fn splitting_a_poll_changes_nothing(genes in genes(), seed in any::<u64>()) {
        polling_does_not_matter(&genes, seed);
    }

    #[test]
    fn names_change_nothing(genes in genes(), seed in any::<u64>()) {
        names_do_not_matter(&genes, seed);
    }

    /// A run that is copied half-way goes on as the original does.
    #[test]
    fn a_copy_goes_on_as_the_original(genes in genes(), half in 0_usize..40) {
        let (anatomy, foci, acts) = (anatomy(&genes), genes.foci(), genes.acts());
        let (_, mut heart) = play_plainly(&anatomy, &foci, &acts[..half.min(acts.len())]);
        let mut copy = heart.clone();
        prop_assert_eq!(run(&mut heart, ms(60_000)), run(&mut copy, ms(60_000)));
    }
}

/// Undisturbed since instant s, beat n of a cell with interval T comes within 0.5 µs + n · 2⁻³³ µs of s + n · T, for 24 hours.
///
/// Guards the carried fraction: dropping it puts the last beat of a day up to 0.1 s off.
#[test]
fn a_cell_does_not_drift_in_a_day() {
    const DAY: u64 = 86_400_000_000;
    let mut dice = Dice::new(24);
    let mut beats = 0;
    for _ in 0..20 {
        let milli = 20_000 + dice.below(160_000);
        let start = Instant::from_micros(u64::from(dice.below(u32::MAX)));
        let cell = CellParams::new(SiteId::new(0), Interval::from_rate_nearest(Rate::from_milli_per_minute(milli)));
        let anatomy = Anatomy::new([SiteParams::new(Span::from_millis(250))], [], [cell]).unwrap();
        let mut heart = Heart::new(&anatomy, &[], start).unwrap();
        let mut n = 0_u64;
        while let Some(record) = heart.poll(start.saturating_add(Span::from_micros(DAY))) {
            n += 1;
            let since = u128::from(record.at.saturating_since(start).as_micros());
            // In units of 1/milli of 2^-33 µs: the exact time of beat n is n · 60 · 10^9 / milli µs.
            let off = (since * u128::from(milli)).abs_diff(u128::from(n) * 60_000_000_000) << 33;
            assert!(off <= u128::from(milli) * ((1 << 32) + u128::from(n)), "beat {n} at {milli} per 1000 minutes");
        }
        assert!(n * 60_000_000 * 1_000 / u64::from(milli) > DAY - 4_000_000);
        beats += n;
    }
    println!("{beats} beats in 20 days");
}

/// A cell that is reset at an instant counts exactly from there: nothing of its old fraction is left.
#[test]
fn a_reset_cell_counts_from_the_reset() {
    let interval = Interval::from_rate_nearest(Rate::per_minute(65));
    let cell = CellParams::new(SiteId::new(0), interval);
    let anatomy = Anatomy::new([SiteParams::new(Span::from_millis(250))], [], [cell]).unwrap();
    let mut heart = Heart::new(&anatomy, &[], Instant::ZERO).unwrap();
    let mut log = heart_common::beat(&mut heart, SiteId::new(0), ms(5_000));
    drain(&mut heart, ms(60_000), &mut log);
    let (mut due, mut n) = (FineInstant::at(ms(5_000)), 0);
    for record in log.iter().filter(|record| record.kind == Kind::Activated && record.at > ms(5_000)) {
        due = due.plus(interval);
        assert_eq!(record.at, due.nearest());
        n += 1;
    }
    assert_eq!(n, 59);
}

/// A tract has one gate clock: a wave that passes it one way makes the next one the other way wait.
///
/// Guards the single clock: with one per direction the second wave would find a gate never passed.
#[test]
fn both_directions_share_one_gate() {
    let way = Way::new(Span::from_millis(50)).with_theta(Span::from_millis(300));
    let (from, to) = (SiteId::new(0), SiteId::new(1));
    for gate in [0, 250_000, 1_000_000] {
        let gate = phase4::heart::Fraction::from_millionths(gate).unwrap();
        let tract = TractParams::new(from, to, gate, way, way);
        let anatomy = Anatomy::new([SiteParams::new(Span::from_millis(100)); 2], [tract], []).unwrap();
        for (first, second, before_gate) in [(to, from, gate.complement()), (from, to, gate)] {
            let mut heart = Heart::new(&anatomy, &[], Instant::ZERO).unwrap();
            let mut log = heart_common::beat(&mut heart, first, ms(1_000));
            log.extend(heart_common::beat(&mut heart, second, ms(1_200)));
            log.extend(run(&mut heart, ms(2_000)));
            let passed = 1_000_000 + before_gate.of(Span::from_millis(50)).as_micros();
            let block = log.iter().find(|record| record.kind == Kind::Blocked).expect("the gate has not recovered");
            assert_eq!(u64::from(block.b), 1_200_000 - passed);
        }
    }
}
