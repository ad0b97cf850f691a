//! Rates and the hierarchy of pacemakers.

use crate::heart_common::{drive, every, intervals, ms, run, span, times};
use phase4::base::{Instant, Kind, SiteId};
use phase4::heart::{Anatomy, CellParams, Heart, SiteParams, plain};

const SITE: SiteId = SiteId::new(0);

/// Tissue with a refractory period of 250 ms follows up to 240 per minute, one of 300 ms up to 200 per minute.
/// Common practice, no source (pure arithmetic); a heart of 250 ms is said to follow "up to the low 200s".
#[test]
fn the_refractory_period_sets_the_highest_rate() {
    for (refractory, per_minute) in [(250, 240), (300, 200)] {
        let anatomy = Anatomy::new([SiteParams::new(span(refractory))], [], []).unwrap();
        let captured = |period: u64| {
            let mut heart = Heart::new(&anatomy, &[], Instant::ZERO).unwrap();
            times(&drive(&mut heart, SITE, ms(period), span(period), per_minute), SITE).len()
        };
        assert_eq!(60_000 / refractory, per_minute);
        assert_eq!(captured(refractory), per_minute as usize, "at its own period tissue follows 1:1");
        assert_eq!(captured(refractory - 1), per_minute as usize / 2, "faster, every other beat finds it refractory");
    }
}

/// A human sinus node cell of 828 ms beats 72.46 times a minute, within the normal 60–100. Verkerk et al., Eur Heart J 2007;28:2472
/// (one patient): checked.
#[test]
fn a_human_sinus_node_cell() {
    let cell = CellParams::new(SITE, every(828));
    let anatomy = Anatomy::new([SiteParams::new(span(144))], [], [cell]).unwrap();
    let mut heart = Heart::new(&anatomy, &[], Instant::ZERO).unwrap();
    let in_100_minutes = times(&run(&mut heart, ms(6_000_000)), SITE).len();
    assert_eq!(in_100_minutes, 7_246);
    assert!((6_000..=10_000).contains(&in_100_minutes));
}

/// Sinus 75, junction 50, ventricle 35 per minute: only the sinus node shows; without it the junction leads, without both the
/// ventricle. The order is textbook (rates 60–100, 40–60, 20–40: checked).
#[test]
fn the_fastest_living_pacemaker_leads() {
    let mut heart = Heart::new(&plain::ANATOMY, &[], Instant::ZERO).unwrap();
    let led_by = |log: &[phase4::base::Record], cell: u8| {
        let own = log.iter().filter(|r| r.kind == Kind::Activated && r.cause.kind == phase4::base::CauseKind::Own);
        own.clone().count() > 10 && own.clone().all(|r| r.cause.id == cell)
    };
    let sinus = run(&mut heart, ms(60_000));
    assert!(led_by(&sinus, 0));

    heart.arrest(plain::SINUS_CELL, ms(60_000)).unwrap();
    let junction = run(&mut heart, ms(120_000));
    assert!(led_by(&junction, 1));
    assert!(intervals(&times(&junction, plain::VENTRICLE)).iter().all(|&rr| rr == 1_200.0));

    heart.arrest(plain::JUNCTION_CELL, ms(120_000)).unwrap();
    let ventricle = run(&mut heart, ms(180_000));
    assert!(led_by(&ventricle, 2));
    assert!(intervals(&times(&ventricle, plain::VENTRICLE)).iter().all(|&rr| rr == 1_750.0));
}

/// After a reset the later cycles keep the old period and only the phase has moved (kitten sinus node: Jalife, Hamilton, Lamanna,
/// Moe, Am J Physiol 1980;238:H307: checked). Exact here, for there is no overdrive suppression.
#[test]
fn a_reset_moves_the_phase_and_not_the_period() {
    let mut heart = Heart::new(&plain::ANATOMY, &[], Instant::ZERO).unwrap();
    let log = drive(&mut heart, plain::SINUS, ms(2_000), span(8_000), 1);
    assert_eq!(times(&log, plain::SINUS)[..5].iter().map(|t| t / 1_000).collect::<Vec<_>>(), [800, 1_600, 2_000, 2_800, 3_600]);
}
