//! Pure parasystole: two clocks on one ventricle, each deaf to the other.
//! Glass, Goldberger, Bélair, Am J Physiol 1986;251:H841 (abstract checked).

use crate::heart_common::{every, ms, span};
use phase4::base::{CauseKind, CellId, Instant, Kind, SiteId, Stream, draw_below};
use phase4::heart::{Anatomy, CellParams, FocusParams, Heart, SiteParams};
use std::collections::BTreeSet;

const VENTRICLE: SiteId = SiteId::new(0);

/// How many sinus beats lie between neighbouring ectopic ones that show, over this many that fire, from phase 0.
fn between(sinus: u64, ectopic: u64, refractory: u64, ectopics: u64) -> BTreeSet<u32> {
    let cells = [CellParams::new(VENTRICLE, every(5_000)); 2];
    let anatomy = Anatomy::new([SiteParams::new(span(refractory))], [], cells).unwrap();
    let (every_sinus, every_ectopic) = ([span(sinus)], [span(ectopic)]);
    let foci = [
        FocusParams::replay(VENTRICLE, &every_sinus, true, CellId::new(0)),
        FocusParams::replay(VENTRICLE, &every_ectopic, true, CellId::new(1)),
    ];
    let mut heart = Heart::new(&anatomy, &foci, Instant::ZERO).unwrap();
    let (mut found, mut count) = (BTreeSet::new(), None);
    while let Some(record) = heart.poll(ms(1_000 + ectopic * ectopics)) {
        match (record.kind, record.cause.id) {
            (Kind::Activated, 0) => count = count.map(|count| count + 1),
            (Kind::Activated, _) => found.extend(count.replace(0)),
            _ => assert_eq!((record.kind, record.cause.kind), (Kind::NotCaptured, CauseKind::Focus)),
        }
    }
    found
}

/// Worked triples (sinus, ectopic, refractory) over 20 000 ectopic beats. Theorem: checked; numbers: derived, exact.
#[test]
fn worked_triples() {
    let triples = [
        (800, 1_400, 401, [6].as_slice()),
        (800, 1_730, 401, &[1, 8, 10]),
        (857, 1_999, 430, &[1, 4, 6]),
        (900, 2_470, 460, &[2, 7]),
    ];
    for (sinus, ectopic, refractory, expected) in triples {
        let found: Vec<u32> = between(sinus, ectopic, refractory, 20_000).into_iter().collect();
        assert_eq!(found, expected, "{sinus} {ectopic} {refractory}");
    }
}

/// The theorem over random triples with the ectopic period above the sinus one and the refractory period above half of that: at most
/// three numbers of sinus beats; if three, one is odd and the two smaller add up to one less than the largest. Exact: checked.
#[test]
fn the_theorem_of_three_numbers() {
    let mut threes = 0;
    for n in 0..400 {
        let pick = |draw: u64, from: u32, below: u32| u64::from(from + draw_below(3, Stream(n), draw, below - from));
        let sinus = pick(0, 600, 1_200);
        let ectopic = sinus + pick(1, 1, 2_500);
        let refractory = sinus / 2 + 1 + pick(2, 0, 150);
        let found: Vec<u32> = between(sinus, ectopic, refractory, 3_000).into_iter().collect();
        assert!(found.len() <= 3, "{sinus} {ectopic} {refractory}: {found:?}");
        if let [small, middle, large] = found[..] {
            threes += 1;
            assert_eq!(found.iter().filter(|&count| count % 2 == 1).count(), 1, "{sinus} {ectopic} {refractory}: {found:?}");
            assert_eq!(small + middle + 1, large, "{sinus} {ectopic} {refractory}: {found:?}");
        }
    }
    assert!(threes > 100, "only {threes} of 400 show three numbers");
}
