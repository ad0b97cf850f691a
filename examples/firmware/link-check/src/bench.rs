use phase4::audit::AuditSettings;
use phase4::base::{Instant, Program, Record};
use phase4::bench::{self, Event, Log, Sink, canary};
use phase4::device::{Device, Fault, ReferenceDevice};

/// The plain anatomy, a focus of each kind, sixteen steps, as many hypotheses as a target keeps.
type Bench = bench::Bench<'static, ReferenceDevice, 5, 4, 3, 2, 16, 12>;
/// The same with somebody's own device behind the contract.
type Foreign = bench::Bench<'static, &'static mut dyn Device, 5, 4, 3, 2, 16, 12>;
type Script = bench::Script<'static, 16>;
type Ring = bench::Ring<32>;

fn run(bench: &mut Bench, until: Instant, ring: &mut Ring) {
    Bench::run(bench, until, ring);
}

fn newest(ring: &Ring) -> Option<&Record> {
    Ring::iter(ring).last()
}

crate::entries! { BENCH:
    Bench::new as fn(_, _);
    Bench::poll as fn(_, _);
    Bench::next_at as fn(_);
    Bench::interrupt as fn(_);
    Bench::now as fn(_);
    Bench::ended as fn(_);
    Bench::log as fn(_);
    Bench::auditor as fn(_);
    Bench::blind as fn(_, _);
    run as fn(_, _, _);
    Foreign::new as fn(_, _);
    Foreign::poll as fn(_, _);
    Foreign::next_at as fn(_);
}

fn last_visible(program: &Program, settings: &AuditSettings) -> Option<Fault> {
    canary::visible(program, settings).last()
}

crate::entries! { CANARY:
    last_visible as fn(_, _);
    canary::draw_fault as fn(_, _, _);
    canary::run::<12> as fn(_, _, _, _);
    canary::control::<12> as fn(_, _, _);
}

crate::entries! { SCRIPT:
    Event::is as fn(_, _);
    Script::new as fn(_, _, _, _);
    Script::next_at as fn(_);
    Script::poll as fn(_, _);
    Script::notice as fn(_, _);
}

crate::entries! { LOG:
    Log::new as fn();
    Log::take as fn(_, _);
    Log::hash as fn(_);
    Log::count as fn(_);
    Ring::new as fn();
    Ring::take as fn(_, _);
    Ring::forgotten as fn(_);
    newest as fn(_);
}
