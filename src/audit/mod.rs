//! What must hold: the auditor, its rules, its judgements and what it has covered.

mod judgement;
mod rule;
mod settings;

pub use judgement::{Anchor, AnchorKind, Hint, How, Judgement, Outcome, Window};
pub use rule::{RULE_SET, RuleId, RuleSet, Score, Tier};
pub use settings::{AuditSettings, Decision, Limits, Tolerance};
