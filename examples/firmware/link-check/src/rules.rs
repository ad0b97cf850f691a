use phase4::audit::{AuditSettings, RuleId, RuleSet, Tolerance};

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
    RuleSet::is_empty as fn(_);
    count as fn(_);
    Tolerance::symmetric as fn(_);
    AuditSettings::new as fn(_);
    AuditSettings::with_tolerance as fn(_, _);
    AuditSettings::with_uncertainty as fn(_, _, _);
    AuditSettings::with_limits as fn(_, _);
}
