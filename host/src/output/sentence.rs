//! The verdict as one line that a person reads on a terminal.

use crate::run_data::{RunData, Verdict};
use crate::scenario::UNNAMED;
use crate::scenario::units::show_micros;
use phase4::audit::{RuleId, Score};

/// The verdict in a word and a sentence, without a line end.
pub fn sentence(run: &RunData) -> String {
    let (beats, pulses) = (run.beats, run.pulses);
    let device = match run.device_name.as_deref() {
        None | Some(UNNAMED) => format!("The {UNNAMED}"),
        Some(name) => name.to_owned(),
    };
    let length = show_length(run.simulated.as_micros());
    match run.verdict {
        Verdict::Holds => {
            let idle = crate::report::untried(run);
            let idle = match idle {
                0 => String::new(),
                1 => "; one was not tried".to_owned(),
                _ => format!("; {idle} were not tried"),
            };
            format!(
                "Holds. In {length} with {} and {} every rule that was tried held{idle}.",
                count(beats, "beat"),
                count(pulses, "pulse")
            )
        }
        Verdict::Broken => broken(run, &device),
        Verdict::Undecided => undecided(run),
        Verdict::Void => match &run.canary {
            Some(canary) => {
                format!("Void. The judge missed its own planted fault (no. {}), so nothing here counts.", canary.fault)
            }
            None => "Void. The judge could not show that it was awake, so nothing here counts.".to_owned(),
        },
        Verdict::Unjudged if run.program.is_none() => {
            format!("Unjudged. No device was connected; the heart beat {} in {length}.", times(beats))
        }
        Verdict::Unjudged => {
            format!("Unjudged. {device} is in a mode that does nothing; the heart beat {} in {length}.", times(beats))
        }
    }
}

fn broken(run: &RunData, device: &str) -> String {
    let mut broken: Vec<&(RuleId, Score)> = run.scores.iter().filter(|(_, score)| score.broken > 0).collect();
    // The rule with the most findings first; the order of the tables where they are even.
    broken.sort_by_key(|(_, score)| std::cmp::Reverse(score.broken));
    let Some((rule, score)) = broken.first() else { return format!("Broken. {device} broke a rule.") };
    let over = score.margin.filter(|margin| margin.as_micros() < 0);
    let by = over.map_or(String::new(), |margin| format!(", by up to {}", show_micros(margin.size().as_micros())));
    let rest = match broken.len().saturating_sub(1) {
        0 => String::new(),
        1 => "; one other rule as well".to_owned(),
        more => format!("; {more} other rules as well"),
    };
    let (times, checked) = (times(u64::from(score.broken)), score.checked);
    format!("Broken. {device} broke {} {times} out of {checked}{by}{rest} ({}).", rule.code(), rule.line())
}

fn undecided(run: &RunData) -> String {
    let all = run.decided.saturating_add(run.undecided);
    let asked = run.decide_thousandths;
    if run.end_reason == INTERRUPTED {
        return "Undecided. The run was interrupted.".to_owned();
    }
    if u128::from(run.decided).saturating_mul(1_000) < u128::from(all).saturating_mul(u128::from(asked)) {
        let (whole, part) = (asked.checked_div(10).unwrap_or(0), asked.checked_rem(10).unwrap_or(0));
        let asked = if part == 0 { whole.to_string() } else { format!("{whole}.{part}") };
        return format!("Undecided. Only {} of {all} cases could be decided; {asked} per cent were asked for.", run.decided);
    }
    "Undecided. A coverage cell that was asked for was not hit.".to_owned()
}

/// The end reason of a run that was interrupted.
pub(crate) const INTERRUPTED: u32 = 2;

fn count(number: u64, noun: &str) -> String {
    match number {
        0 => format!("no {noun}"),
        1 => format!("one {noun}"),
        _ => format!("{number} {noun}s"),
    }
}

fn times(number: u64) -> String {
    match number {
        0 => "never".to_owned(),
        1 => "once".to_owned(),
        2 => "twice".to_owned(),
        _ => format!("{number} times"),
    }
}

/// A length as a person says it: whole milliseconds below a minute, whole seconds above.
fn show_length(micros: u64) -> String {
    const SECOND: u64 = 1_000_000;
    let seconds = micros.checked_div(SECOND).unwrap_or(0);
    let (minutes, rest) = (seconds.checked_div(60).unwrap_or(0), seconds.checked_rem(60).unwrap_or(0));
    let (hours, minutes_left) = (minutes.checked_div(60).unwrap_or(0), minutes.checked_rem(60).unwrap_or(0));
    match (hours, minutes) {
        (0, 0) => {
            let millis = micros.checked_div(1_000).unwrap_or(0).saturating_mul(1_000);
            show_micros(millis)
        }
        (0, _) if rest == 0 => format!("{minutes} min"),
        (0, _) => format!("{minutes} min {rest} s"),
        _ if minutes_left == 0 => format!("{hours} h"),
        _ => format!("{hours} h {minutes_left} min"),
    }
}
