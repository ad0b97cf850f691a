//! Steps and ticks of axes.

/// The roundest step of 1, 2 or 5 times a power of ten that divides `range` into at most `most` parts.
pub(super) fn step_for(range: f64, most: u32) -> f64 {
    let least = range / f64::from(most.max(1));
    if !least.is_finite() || least <= 0.0 {
        return 1.0;
    }
    let mut power = 1.0;
    while power * 10.0 <= least {
        power *= 10.0;
    }
    while power > least {
        power /= 10.0;
    }
    [1.0, 2.0, 5.0].map(|factor| factor * power).into_iter().find(|step| *step >= least).unwrap_or(10.0 * power)
}

/// The whole multiples of `step` from `from` to `to`.
pub(super) fn ticks(from: f64, to: f64, step: f64) -> impl Iterator<Item = f64> {
    let (first, last) = ((from / step).ceil() as i64, (to / step).floor() as i64);
    (first..=last.min(first.saturating_add(1_000))).map(move |number| number as f64 * step)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn steps_are_round_and_few() {
        assert_eq!(step_for(97.0, 9), 20.0);
        assert_eq!(step_for(9.0, 9), 1.0);
        assert_eq!(step_for(1_000_000.0, 5), 200_000.0);
        assert_eq!(step_for(0.0, 5), 1.0);
        assert_eq!(ticks(-45.0, 45.0, 20.0).collect::<Vec<_>>(), [-40.0, -20.0, 0.0, 20.0, 40.0]);
    }
}
