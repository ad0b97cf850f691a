//! Clean but sloppy devices: whatever they do within their tolerances, no finding. `PHASE4_SCRIPTS=2000000 cargo test --release
//! --test audit_sloppy` is the long form.
#![allow(
    clippy::arithmetic_side_effects,
    clippy::as_conversions,
    clippy::expect_used,
    clippy::float_arithmetic,
    clippy::indexing_slicing,
    clippy::missing_const_for_fn,
    clippy::panic,
    clippy::unwrap_used,
    reason = "tests may"
)]

mod judged;

use judged::sloppy::{Kind, Script, script};
use judged::{judge_with, scripts_or};
use phase4::audit::{Auditor, Outcome};
use phase4::base::Instant;

#[derive(Debug, Default, Clone, Copy)]
struct Total {
    decided: u64,
    undecided: u64,
    loosened: u64,
}

impl Total {
    fn share(self) -> f64 {
        self.decided as f64 / (self.decided + self.undecided) as f64
    }
}

fn judged<const H: usize>(script: &Script, auditor: Auditor<H>, from: Instant) -> Total {
    let records: Vec<_> = script.records.iter().copied().filter(|record| record.at >= from).collect();
    let (judgements, auditor) = judge_with(auditor, &records);
    let wrong = judgements.iter().find(|judgement| judgement.outcome == Outcome::Broken);
    assert!(wrong.is_none() && auditor.broken() == 0, "{wrong:#?}");
    Total { decided: auditor.decided(), undecided: auditor.undecided(), loosened: u64::from(auditor.loosened()) }
}

fn all(kind: Kind) -> Total {
    let mut total = Total::default();
    for seed in 0..scripts_or(24_000) {
        let script = script(seed, kind);
        let outcome = std::panic::catch_unwind(|| {
            let auditor = Auditor::<256>::new(&script.program, &script.settings, script.start).unwrap();
            let host = judged(&script, auditor, Instant::ZERO);
            // On the target there is room for twelve hypotheses: it may decide less, and never finds more.
            let small = Auditor::<12>::new(&script.program, &script.settings, script.start).unwrap();
            judged(&script, small, Instant::ZERO);
            if let Some(joins_at) = script.joins_at {
                let auditor = Auditor::<12>::joining(&script.program, &script.settings, joins_at).unwrap();
                judged(&script, auditor, joins_at);
            }
            host
        });
        let Ok(host) = outcome else { panic!("a clean device was found wrong: seed {seed} of {kind:?}\n{script}") };
        total.decided += host.decided;
        total.undecided += host.undecided;
        total.loosened += host.loosened;
    }
    println!("{kind:?}: {} scripts, {total:?}, decided share {:.4}", scripts_or(24_000), total.share());
    total
}

#[test]
fn a_sloppy_device_is_never_found_wrong() {
    let total = all(Kind::Wild);
    assert!(total.share() > 0.6, "{total:?}");
}

#[test]
fn an_exact_device_judged_exactly_is_wholly_decided() {
    let total = all(Kind::Exact);
    assert_eq!((total.undecided, total.loosened), (0, 0));
}

#[test]
fn an_ordinary_run_is_decided() {
    let total = all(Kind::Ordinary);
    assert!(total.share() > 0.99, "{total:?}");
}
