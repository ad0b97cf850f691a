//! The answer of a whole run, and the exit code that carries it.

use core::fmt;

/// The answer of a run.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Verdict {
    /// Every rule that was tried held. This means that these rules found nothing on this run, never that a device is safe.
    Holds,
    /// At least one rule was broken.
    Broken,
    /// Too little could be decided, something asked for was not covered, or the run was interrupted.
    Undecided,
    /// The judge missed its own planted fault: nothing counts.
    Void,
    /// There was nothing to judge: no device, or a mode that does nothing.
    Unjudged,
}

/// What a verdict is made from.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Findings {
    /// False where there was no device, or its mode neither paces nor senses.
    pub judged: bool,
    /// False if a canary ran and its planted fault was not caught.
    pub canary_caught: bool,
    /// Findings: how often something was found broken.
    pub broken: u32,
    /// Windows and signals about which everything could be told.
    pub decided: u64,
    /// Windows and signals about which not everything could be told.
    pub undecided: u64,
    /// The least share of decided cases that is asked for, in thousandths.
    pub decide_thousandths: u32,
    /// True if a coverage cell that was asked for by name was not hit.
    pub required_missing: bool,
    /// True if the run was stopped before its end.
    pub interrupted: bool,
}

impl Verdict {
    /// The verdict of these findings: the first that applies of void, broken, unjudged, undecided, holds.
    ///
    /// A broken rule counts even where there is otherwise nothing to judge: a device in a mode that paces nothing must not pace.
    /// Coverage never makes a verdict but where it was asked for by name.
    pub const fn of(findings: &Findings) -> Self {
        if !findings.canary_caught {
            Self::Void
        } else if findings.broken > 0 {
            Self::Broken
        } else if !findings.judged {
            Self::Unjudged
        } else if findings.required_missing || findings.interrupted || findings.decides_too_little() {
            Self::Undecided
        } else {
            Self::Holds
        }
    }

    /// The verdict in one lower-case word.
    pub const fn word(self) -> &'static str {
        match self {
            Self::Holds => "holds",
            Self::Broken => "broken",
            Self::Undecided => "undecided",
            Self::Void => "void",
            Self::Unjudged => "unjudged",
        }
    }

    /// The exit code of a command that gives this verdict. Code 2, bad input or output, is the command's own.
    pub const fn exit_code(self) -> u8 {
        match self {
            Self::Holds | Self::Unjudged => 0,
            Self::Broken => 1,
            Self::Undecided => 3,
            Self::Void => 4,
        }
    }

    /// The worse of two, for a folder of runs: void, broken, undecided, then the rest.
    #[must_use]
    pub const fn worse(self, other: Self) -> Self {
        if self.rank() >= other.rank() { self } else { other }
    }

    const fn rank(self) -> u8 {
        match self {
            Self::Unjudged => 0,
            Self::Holds => 1,
            Self::Undecided => 2,
            Self::Broken => 3,
            Self::Void => 4,
        }
    }
}

impl Findings {
    /// Compared as products, so that nothing is divided or rounded. A run with nothing to decide decides enough.
    const fn decides_too_little(&self) -> bool {
        #[allow(clippy::as_conversions, reason = "lossless; `From` is not const yet")]
        let (decided, undecided, asked) = (self.decided as u128, self.undecided as u128, self.decide_thousandths as u128);
        decided.saturating_mul(1_000) < decided.saturating_add(undecided).saturating_mul(asked)
    }
}

impl fmt::Display for Verdict {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.word())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const CLEAN: Findings = Findings {
        judged: true,
        canary_caught: true,
        broken: 0,
        decided: 9,
        undecided: 1,
        decide_thousandths: 900,
        required_missing: false,
        interrupted: false,
    };

    #[test]
    fn the_first_that_applies_counts() {
        let verdict = |findings: Findings| (Verdict::of(&findings), Verdict::of(&findings).exit_code());
        assert_eq!(verdict(CLEAN), (Verdict::Holds, 0));
        assert_eq!(verdict(Findings { undecided: 2, ..CLEAN }), (Verdict::Undecided, 3));
        assert_eq!(verdict(Findings { decided: 0, undecided: 0, ..CLEAN }), (Verdict::Holds, 0));
        assert_eq!(verdict(Findings { required_missing: true, ..CLEAN }), (Verdict::Undecided, 3));
        assert_eq!(verdict(Findings { interrupted: true, broken: 1, ..CLEAN }), (Verdict::Broken, 1));
        assert_eq!(verdict(Findings { judged: false, interrupted: true, ..CLEAN }), (Verdict::Unjudged, 0));
        assert_eq!(verdict(Findings { judged: false, broken: 1, ..CLEAN }), (Verdict::Broken, 1));
        assert_eq!(verdict(Findings { canary_caught: false, broken: 1, ..CLEAN }), (Verdict::Void, 4));
    }

    #[test]
    fn a_folder_is_as_bad_as_its_worst_run() {
        let order = [Verdict::Unjudged, Verdict::Holds, Verdict::Undecided, Verdict::Broken, Verdict::Void];
        for (place, better) in order.into_iter().enumerate() {
            for worse in order.into_iter().skip(place) {
                assert_eq!((better.worse(worse), worse.worse(better)), (worse, worse));
            }
        }
    }
}
