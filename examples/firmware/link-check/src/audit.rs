use phase4::audit::coverage::{After, CellId, Column, EdgeKind, Stretch, WholeRun};
use phase4::audit::{self, AuditSettings, Coverage, RuleId, RuleSet, Tolerance, Verdict};

/// As many hypotheses as a target keeps.
type Auditor = audit::Auditor<12>;

fn count(set: RuleSet) -> usize {
    RuleSet::iter(set).count()
}

crate::entries! { RULES:
    RuleId::code as fn(_);
    RuleId::line as fn(_);
    RuleId::tier as fn(_);
    RuleId::from_code as fn(_);
    RuleId::number as fn(_);
    RuleSet::only as fn(_);
    RuleSet::with as fn(_, _);
    RuleSet::has as fn(_, _);
    RuleSet::and as fn(_, _);
    RuleSet::without as fn(_, _);
    RuleSet::is_empty as fn(_);
    count as fn(_);
    Tolerance::symmetric as fn(_);
    AuditSettings::new as fn(_);
    AuditSettings::check as fn(_, _);
    AuditSettings::with_tolerance as fn(_, _);
    AuditSettings::with_uncertainty as fn(_, _, _);
    AuditSettings::with_limits as fn(_, _);
    AuditSettings::sensitivity_limits as fn(_, _);
    Verdict::of as fn(_);
    Verdict::word as fn(_);
    Verdict::exit_code as fn(_);
    Verdict::worse as fn(_, _);
}

crate::entries! { AUDITOR:
    Auditor::new as fn(_, _, _);
    Auditor::joining as fn(_, _, _);
    Auditor::blind as fn(_, _);
    Auditor::observe as fn(_, _);
    Auditor::poll as fn(_, _);
    Auditor::next_at as fn(_);
    Auditor::finish as fn(_, _);
    Auditor::spinning as fn(_, _);
    Auditor::score as fn(_, _);
    Auditor::broken as fn(_);
    Auditor::decided as fn(_);
    Auditor::undecided as fn(_);
    Auditor::loosened as fn(_);
    Auditor::lost as fn(_);
    Auditor::overdue_since as fn(_);
}

fn lines(coverage: &Coverage) -> (usize, usize, usize, usize) {
    let cells = Coverage::cells(coverage).count();
    let edges = Coverage::edges(coverage).count();
    let whole = Coverage::whole_run(coverage).count();
    (Coverage::rows(coverage).count(), cells, edges, whole)
}

crate::entries! { COVERAGE:
    Coverage::new as fn(_, _);
    Coverage::know_tract as fn(_, _, _, _);
    Coverage::know_rhythm as fn(_, _);
    Coverage::record as fn(_, _);
    Coverage::judged as fn(_, _);
    Coverage::need as fn(_, _);
    Coverage::state as fn(_, _);
    Coverage::hits as fn(_, _);
    Coverage::decided as fn(_, _, _);
    Coverage::score as fn(_);
    Coverage::edge_score as fn(_);
    Coverage::guessed as fn(_);
    Coverage::channel as fn(_);
    lines as fn(_);
    CellId::from_name as fn(_, _);
    CellId::name as fn(_, _);
    After::code as fn(_, _);
    After::line as fn(_);
    Column::code as fn(_, _);
    Column::has_stimulus as fn(_);
    EdgeKind::code as fn(_);
    Stretch::code as fn(_);
    WholeRun::code as fn(_);
}
