//! Wrong hearts are refused when they are made, by name, value and what is accepted.
#![allow(clippy::expect_used, clippy::unwrap_used, reason = "tests may")]

use phase4::base::{CellId, Decay, Instant, Interval, MilliVolts, ParamError, SiteId, Span, TractId};
use phase4::heart::{
    Anatomy, CellParams, FocusKind, FocusParams, Fraction, Heart, PulseAnswer, SiteParams, TractParams, Way, Ways, plain,
};

const fn ms(millis: u64) -> Span {
    Span::from_millis(millis)
}

const fn every(span: Span) -> Interval {
    Interval::from_span(span).unwrap()
}

fn refused_site(change: impl Fn(&mut SiteParams)) -> String {
    let mut sites = plain::SITES;
    change(&mut sites[2]);
    Anatomy::new(sites, plain::TRACTS, plain::CELLS).unwrap_err().to_string()
}

fn refused_tract(change: impl Fn(&mut TractParams)) -> String {
    let mut tracts = plain::TRACTS;
    change(&mut tracts[1]);
    Anatomy::new(plain::SITES, tracts, plain::CELLS).unwrap_err().to_string()
}

fn refused_cell(cell: CellParams) -> String {
    Anatomy::new(plain::SITES, plain::TRACTS, [plain::CELLS[0], cell]).unwrap_err().to_string()
}

fn refused_focus(focus: FocusParams<'_>) -> String {
    let foci = [FocusParams::premature(plain::APEX, ms(400)), focus];
    Heart::new(&plain::ANATOMY, &foci, Instant::ZERO).unwrap_err().to_string()
}

#[test]
fn tissue() {
    assert_eq!(refused_site(|site| site.refractory = Span::ZERO), "refractory (row 2) is 0, accepted is 1 to 2000000");
    assert_eq!(refused_site(|site| site.relative = ms(2_001)), "relative (row 2) is 2001000, accepted is 0 to 2000000");
    assert_eq!(refused_site(|site| site.rheobase = MilliVolts(0)), "rheobase (row 2) is 0, accepted is 1 to 20000");
    assert_eq!(refused_site(|site| site.chronaxie = Span::ZERO), "chronaxie (row 2) is 0, accepted is 1 to 20000");
    assert_eq!(refused_site(|site| site.latency = Span::ZERO), "latency (row 2) is 0, accepted is 1 to 100000");
}

#[test]
fn cells() {
    let at_junction = |interval| refused_cell(CellParams::new(plain::JUNCTION, interval));
    assert_eq!(at_junction(every(Span::ZERO)), "interval (row 1) is 0, accepted is 1 to 4294967295");
    let rule = "a cell's own interval must be longer than its site's refractory period";
    assert_eq!(at_junction(every(ms(200))), format!("interval (row 1) is 200000 and refractory is 200000: {rule}"));
    assert!(Anatomy::new(plain::SITES, [], [CellParams::new(plain::JUNCTION, every(Span::from_micros(200_001)))]).is_ok());
    assert_eq!(refused_cell(CellParams::new(SiteId::new(5), every(ms(900)))), "site (row 1) names row 5 of a table of 5");
}

#[test]
fn tracts() {
    assert_eq!(refused_tract(|tract| tract.forward.base = Span::ZERO), "forward.base (row 1) is 0, accepted is 1 to 2000000");
    assert_eq!(
        refused_tract(|tract| tract.backward.base = ms(2_001)),
        "backward.base (row 1) is 2001000, accepted is 1 to 2000000"
    );
    // 110 ms of base leave 1890 ms of gain.
    assert_eq!(
        refused_tract(|tract| tract.forward.gain = ms(1_891)),
        "forward.gain (row 1) is 1891000, accepted is 0 to 1890000"
    );
    assert_eq!(
        refused_tract(|tract| tract.backward.theta = Span::from_secs(61)),
        "backward.theta (row 1) is 61000000, accepted is 0 to 60000000"
    );
    assert_eq!(
        refused_tract(|tract| tract.forward.tau = None),
        "forward.gain (row 1) is 400000 and forward.tau is 0: a gain needs a time constant"
    );
    assert_eq!(refused_tract(|tract| tract.to = tract.from), "to (row 1) is 1 and from is 1: a tract joins two different sites");
    assert_eq!(refused_tract(|tract| tract.from = SiteId::new(7)), "from (row 1) names row 7 of a table of 5");
    assert_eq!(refused_tract(|tract| tract.to = SiteId::new(255)), "to (row 1) names row 255 of a table of 5");
}

#[test]
fn a_delay_longer_than_the_cycle_that_drives_it() {
    let mut tracts = plain::TRACTS;
    tracts[0].forward.base = ms(800);
    let rule = "a tract holds one wave: split a delay longer than the cycle that drives it over two tracts";
    let refusal = Anatomy::new(plain::SITES, tracts, plain::CELLS).unwrap_err().to_string();
    assert_eq!(refusal, format!("forward.base (row 0) is 800000 and interval is 800000: {rule}"));
    tracts[0].forward.shut = true;
    assert!(Anatomy::new(plain::SITES, tracts, plain::CELLS).is_ok(), "nothing drives a way that is shut");
}

#[test]
fn tables_of_a_wrong_size() {
    let site = SiteParams::new(ms(200));
    let size = |outcome: Result<(), ParamError>| outcome.unwrap_err().to_string();
    assert_eq!(size(Anatomy::new([], [], []).map(drop)), "sites is 0, accepted is 1 to 32");
    assert_eq!(size(Anatomy::new([site; 33], [], []).map(drop)), "sites is 33, accepted is 1 to 32");
    let tract = plain::TRACTS[2];
    assert_eq!(size(Anatomy::new([site; 5], [tract; 33], []).map(drop)), "tracts is 33, accepted is 0 to 32");
    assert_eq!(size(Anatomy::new([site; 5], [], [plain::CELLS[0]; 33]).map(drop)), "cells is 33, accepted is 0 to 32");
    assert!(Anatomy::new([site; 32], [tract; 32], [plain::CELLS[0]; 32]).is_ok());
}

#[test]
fn foci() {
    let premature = |trigger, coupling, every| FocusParams::premature_after(plain::APEX, trigger, coupling, every);
    let (broken, sound) = ([ms(800), Span::ZERO], [ms(800)]);
    let replay = |site, intervals, cell| FocusParams::replay(site, intervals, false, CellId::new(cell));
    assert_eq!(refused_focus(premature(plain::APEX, Span::ZERO, 1)), "coupling (row 1) is 0, accepted is 1 to 60000000");
    assert_eq!(refused_focus(premature(plain::APEX, ms(400), 0)), "every (row 1) is 0, accepted is 1 to 4294967295");
    assert_eq!(refused_focus(premature(SiteId::new(5), ms(400), 1)), "trigger (row 1) names row 5 of a table of 5");
    assert_eq!(refused_focus(FocusParams::premature(SiteId::new(9), ms(400))), "site (row 1) names row 9 of a table of 5");
    assert_eq!(refused_focus(replay(plain::SINUS, &[], 0)), "intervals (row 1) is 0, accepted is 1 to 4294967295");
    assert_eq!(refused_focus(replay(plain::SINUS, &broken, 0)), "interval (row 1) is 0, accepted is 1 to 3600000000");
    assert_eq!(refused_focus(replay(plain::SINUS, &sound, 3)), "in_place_of (row 1) names row 3 of a table of 3");
    assert_eq!(
        refused_focus(replay(plain::SINUS, &sound, 1)),
        "in_place_of (row 1) is 1 and site is 0: a series beats where the cell beats whose place it takes"
    );
    let twice = [replay(plain::SINUS, &sound, 0); 2];
    assert_eq!(
        Heart::new(&plain::ANATOMY, &twice, Instant::ZERO).unwrap_err().to_string(),
        "in_place_of (row 1) is 0 and in_place_of is 0: a cell gives up its place to one series only"
    );
}

#[test]
fn a_fraction_above_the_whole() {
    assert_eq!(Fraction::from_millionths(1_000_001).unwrap_err().to_string(), "fraction is 1000001, accepted is 0 to 1000000");
}

/// What is not in the anatomy can be looked up, and is ignored where it is named all the same.
#[test]
fn rows_that_do_not_exist() {
    assert!(plain::ANATOMY.site(SiteId::new(5)).is_none() && plain::ANATOMY.site(plain::APEX).is_some());
    assert!(plain::ANATOMY.tract(TractId::new(4)).is_none() && plain::ANATOMY.cell(CellId::new(3)).is_none());
    let mut heart = Heart::new(&plain::ANATOMY, &[], Instant::ZERO).unwrap();
    let before = heart.clone();
    for row in [3, 4, 5, 31, 32, 33, 255] {
        heart.arrest(CellId::new(row), Instant::ZERO).unwrap();
        heart.release(CellId::new(row), Instant::ZERO).unwrap();
        if row > 3 {
            heart.shut(TractId::new(row), Ways::Both, Instant::ZERO).unwrap();
            heart.open(TractId::new(row), Ways::Both, Instant::ZERO).unwrap();
        }
        if row > 4 {
            heart.beat(SiteId::new(row), Instant::ZERO, phase4::base::Cause::NONE).unwrap();
        }
    }
    assert_eq!(before, heart);
}

/// The heart alone stays within the memory that a small microcontroller has for it, and can be shared between threads on a big one.
#[test]
fn size_and_auto_traits() {
    const fn shared<X: Send + Sync>() {}
    assert!(size_of::<Heart<'_, 5, 4, 3, 0>>() <= 640, "{} bytes", size_of::<Heart<'_, 5, 4, 3, 0>>());
    println!(
        "the plain heart: {} bytes, each focus {}",
        size_of::<Heart<'_, 5, 4, 3, 0>>(),
        size_of::<Heart<'_, 5, 4, 3, 1>>() - size_of::<Heart<'_, 5, 4, 3, 0>>()
    );
    shared::<Heart<'_, 5, 4, 3, 2>>();
    shared::<Anatomy<5, 4, 3>>();
    shared::<(SiteParams, CellParams, TractParams, Way, Fraction, FocusParams<'_>, FocusKind<'_>, PulseAnswer, Ways, Decay)>();
}
