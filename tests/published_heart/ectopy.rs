//! Premature beats and their pauses. Definitions: textbook (checked); the algebra is derived.

use crate::heart_common::{beat, decay, every, intervals, ms, run, span, times};
use phase4::base::{Instant, SiteId};
use phase4::heart::{Anatomy, CellParams, FocusParams, Fraction, Heart, SiteParams, TractParams, Way, plain};

/// The plain heart with constant AV conduction and full concealment.
fn constant_conduction() -> Anatomy<5, 4, 1> {
    let mut tracts = plain::TRACTS;
    tracts[1].forward = Way::new(span(110)).with_theta(span(300)).with_conceal(Fraction::ONE);
    Anatomy::new(plain::SITES, tracts, [CellParams::new(plain::SINUS, every(800))]).unwrap()
}

/// A ventricular beat coupled at 440 to a rhythm of 800, without conduction to the atrium: pause 1160, both together two cycles.
/// Derived, exact.
#[test]
fn a_ventricular_premature_beat_is_fully_compensatory() {
    let anatomy = constant_conduction();
    let mut heart = Heart::new(&anatomy, &[], Instant::ZERO).unwrap();
    let mut log = run(&mut heart, ms(4_300));
    let beat_at = times(&log, plain::VENTRICLE).last().unwrap() / 1_000 + 440;
    log.extend(beat(&mut heart, plain::VENTRICLE, ms(beat_at)));
    log.extend(run(&mut heart, ms(beat_at + 3_000)));
    let rr = intervals(&times(&log, plain::VENTRICLE));
    let premature = rr.iter().position(|&rr| rr == 440.0).unwrap();
    assert_eq!(rr[premature..premature + 3], [440.0, 1_160.0, 800.0]);
    let pp = intervals(&times(&log, plain::ATRIUM));
    assert!(pp.iter().all(|&pp| pp == 800.0), "the atrium never knew");
}

/// The same after every beat: bigeminy of 440 and 1160. Derived, exact.
#[test]
fn coupled_to_every_beat_it_is_bigeminy() {
    let anatomy = constant_conduction();
    let foci = [FocusParams::premature(plain::VENTRICLE, span(440))];
    let mut heart = Heart::new(&anatomy, &foci, Instant::ZERO).unwrap();
    let rr = intervals(&times(&run(&mut heart, ms(60_000)), plain::VENTRICLE));
    assert!(rr.chunks_exact(2).all(|pair| pair == [440.0, 1_160.0]) && rr.len() > 70);
}

/// Interpolated: at a cycle of 1200 a beat coupled at 420 leaves the next sinus beat conducted. Both RRs make one cycle plus what the
/// PR has grown, that PR is longer than before, and the more so the later the beat. Signs exact: checked (qualitative).
#[test]
fn an_early_beat_in_a_slow_rhythm_is_interpolated() {
    let site = |refractory: u64| SiteParams::new(span(refractory));
    let (atrium, ventricle) = (SiteId::new(0), SiteId::new(1));
    let node = Way::new(span(90)).with_recovery(span(780), decay(110)).with_theta(span(230));
    let tract = TractParams::new(atrium, ventricle, Fraction::ONE, node, Way::new(span(90)).closed());
    let anatomy = Anatomy::new([site(210), site(300)], [tract], [CellParams::new(atrium, every(1_200))]).unwrap();
    let mut last_pr = 0;
    for coupling in [320, 420, 500, 600, 700, 760] {
        let mut heart = Heart::new(&anatomy, &[], Instant::ZERO).unwrap();
        let mut log = run(&mut heart, ms(12_500));
        let (p, r) = (times(&log, atrium), times(&log, ventricle));
        let (p, r) = (*p.last().unwrap(), *r.last().unwrap());
        log.extend(beat(&mut heart, ventricle, ms(coupling).saturating_add(phase4::base::Span::from_micros(r))));
        log.extend(run(&mut heart, Instant::from_micros(p + 2_000_000)));
        let rr = times(&log, ventricle);
        let next = rr[rr.iter().position(|&t| t == r).unwrap() + 2];
        let (pr_before, pr_after) = (r - p, next - (p + 1_200_000));
        assert_eq!(next - r, 1_200_000 + pr_after - pr_before, "both RRs make one cycle and the growth of PR");
        assert!(pr_after > pr_before.max(last_pr), "PR {pr_after} at coupling {coupling}");
        last_pr = pr_after;
    }
    assert!(last_pr < 276_500, "gain and base bound it: 90 + 780 e^(-230/110)");
}
