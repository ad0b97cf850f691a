//! A heart of your own: three sites, two ways round between two of them, and what that makes of one premature beat.
//!
//! `cargo run --example user_anatomy` prints what fires, when and why.
//!
//! Bench use only: never connected to a person, not a medical device.

use phase4::base::{CauseKind, Decay, Instant, Interval, Kind, ParamError, SiteId, Span};
use phase4::heart::{Anatomy, CellParams, FocusParams, Fraction, Heart, SiteParams, TractParams, Way};

// Rows of the tables, by name.
const ATRIUM: SiteId = SiteId::new(0);
const JUNCTION: SiteId = SiteId::new(1);
const VENTRICLE: SiteId = SiteId::new(2);
const NAMES: [&str; 3] = ["atrium", "junction", "ventricle"];

const fn ms(millis: u64) -> Span {
    Span::from_millis(millis)
}

/// Two pathways through the AV node: a fast one that recovers slowly, a slow one that recovers fast.
fn two_pathways() -> Result<Anatomy<3, 3, 1>, ParamError> {
    let sites = [SiteParams::new(ms(210)), SiteParams::new(ms(200)), SiteParams::new(ms(250))];
    let fast = TractParams::new(
        ATRIUM,
        JUNCTION,
        Fraction::ONE,
        Way::new(ms(110)).with_recovery(ms(200), Decay::new(ms(80))?).with_theta(ms(300)),
        Way::new(ms(70)).with_theta(ms(200)),
    );
    let slow = TractParams::new(
        ATRIUM,
        JUNCTION,
        Fraction::ZERO,
        Way::new(ms(260)).with_recovery(ms(150), Decay::new(ms(90))?).with_theta(ms(290)),
        Way::new(ms(260)).with_theta(ms(350)),
    );
    let bundle = TractParams::new(JUNCTION, VENTRICLE, Fraction::ZERO, Way::new(ms(40)), Way::new(ms(40)));
    let leads = CellParams::new(ATRIUM, Interval::from_span(ms(800)).unwrap_or(Interval::MAX));
    Anatomy::new(sites, [fast, slow, bundle], [leads])
}

fn main() -> Result<(), ParamError> {
    let anatomy = two_pathways()?;
    // After the third beat of the atrium, one that comes 350 ms later.
    let foci = [FocusParams::premature_after(ATRIUM, ATRIUM, ms(350), 3)];
    let mut heart = Heart::new(&anatomy, &foci, Instant::ZERO)?;
    while let Some(record) = heart.poll(Instant::from_micros(4_500_000)) {
        let name = |row: u8| NAMES.get(usize::from(row)).copied().unwrap_or("?");
        let at = record.at.as_micros() / 1_000;
        match (record.kind, record.cause.kind) {
            (Kind::Activated, CauseKind::Own) => println!("{at:5} ms  {} fires by itself", name(record.place)),
            (Kind::Activated, CauseKind::Focus) => println!("{at:5} ms  {} fires too early", name(record.place)),
            (Kind::Activated, _) => {
                println!("{at:5} ms  {} fires, reached by tract {}", name(record.place), record.cause.id);
            }
            (Kind::Blocked, _) => println!("{at:5} ms      tract {} blocks a wave", record.place),
            (Kind::Collided, _) => println!("{at:5} ms      in tract {} two waves meet and end", record.place),
            _ => {}
        }
    }
    Ok(())
}
