//! The constants of a firmware image: what the host writes compiles, and runs as the scenario it was written from.
//!
//! The texts beside this file are written by
//! `cargo run -p phase4-host --example image_constants -- examples/scenarios/NAME.toml > host/tests/image/NAME.rs`.

use phase4::audit::RuleSet;
use phase4::base::Instant;
use phase4::bench::Bench;
use phase4_host::image::constants;
use phase4_host::refusal::Source;
use phase4_host::run;
use phase4_host::scenario::Scenario;
use std::path::Path;
use std::sync::atomic::AtomicBool;

const fn order(seed: u64, stop: &AtomicBool) -> run::Order<'_> {
    run::Order { seed, blind: RuleSet::EMPTY, stop, keep: false }
}

macro_rules! images {
    ($($name:ident $file:literal;)*) => {
        $(#[test]
        fn $name() {
            #[allow(missing_docs, unreachable_pub, dead_code, unused_imports, clippy::panic, reason = "written by a program, for an image")]
            mod image {
                include!(concat!("image/", $file, ".rs"));
            }
            let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("..");
            let folder = root.join("examples/scenarios");
            // The name as a user in the root would give it.
            let name = concat!("examples/scenarios/", $file, ".toml");
            let text = std::fs::read_to_string(root.join(name)).unwrap();
            let scenario = Scenario::parse(Source::new(name, text), &folder).unwrap();
            assert_eq!(constants(&scenario, scenario.seed), include_str!(concat!("image/", $file, ".rs")), "write it again");

            let mut bench =
                Bench::<_, { image::SITES }, { image::TRACTS }, { image::CELLS }, { image::FOCI }, { image::STEPS }, 12>::new(
                    &image::SETUP,
                    image::device(),
                )
                .unwrap();
            while bench.poll(Instant::MAX).is_some() {}
            let on_host = run::run(&scenario, order(scenario.seed, &AtomicBool::new(false)), |_| Ok(()), |_| ()).unwrap();
            assert_eq!(bench.log().hash().value(), on_host.hash);
            assert_eq!(bench.auditor().map(|auditor| auditor.broken()), on_host.judged.map(|judged| judged.broken));
        })*
    };
}

images! {
    steady "steady";
    conduction_returns "conduction-returns";
    arrest_escape "arrest-escape";
    premature "premature";
    recorded "recorded";
    faulty_device "faulty-device";
}
