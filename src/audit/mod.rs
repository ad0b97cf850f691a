//! What must hold: the auditor, its rules, its judgements and what it has covered.

mod auditor;
mod check;
mod clock;
pub mod coverage;
mod envelope;
mod history;
mod hypothesis;
mod judgement;
mod late;
mod naming;
mod pulses;
mod rule;
mod scores;
mod sense;
mod settings;
mod signals;
mod verdict;
mod windows;

pub use auditor::Auditor;
pub use coverage::Coverage;
pub use judgement::{Anchor, AnchorKind, Hint, How, Judgement, Outcome, Window};
pub use rule::{RULE_SET, RuleId, RuleSet, Score, Tier};
pub use settings::{AuditSettings, Decision, Limits, Tolerance};
pub use verdict::{Findings, Verdict};
