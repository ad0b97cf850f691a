//! Amounts of time in a step: fixed, swept or drawn.

use super::super::scan::{Scan, Wrong};
use super::super::units::{Decimal, Found, Wanted, decimal, instead_of_a_number, signed, unit_for};
use phase4::base::{Deviation, Span};
use phase4::bench::Amount;

/// `300 ms`, `[210..290/5] ms` or `[210..290] ms`, taken off instead of added if `minus`.
pub(super) fn amount(scan: &mut Scan<'_>, minus: bool) -> Result<Amount, Wrong> {
    if !scan.take("[") {
        let number = number(scan)?;
        let unit = unit_for(scan, Wanted::Time)?;
        return Ok(Amount::Fixed(number.deviation(&unit, minus)?));
    }
    let from = number(scan)?;
    if !scan.take("..") {
        return Err(scan.wrong("expected `..` here, as in `[210..290/5] ms`"));
    }
    let to = number(scan)?;
    let step = if scan.take("/") { Some(decimal(scan)?) } else { None };
    if !scan.take("]") {
        return Err(scan.wrong("expected `]` here, as in `[210..290/5] ms`"));
    }
    let unit = unit_for(scan, Wanted::Time)?;
    let place = from.decimal.range.start..to.decimal.range.end;
    let (from, to) = (from.deviation(&unit, minus)?, to.deviation(&unit, minus)?);
    match step {
        Some(step) => {
            let size = Span::from_micros(step.times(&unit)?);
            if size.is_zero() {
                return Err(Wrong::new(step.range, "a sweep needs a step above zero"));
            }
            Ok(Amount::Sweep { from, to, step: size })
        }
        // Drawn between the two, whichever was written first.
        None if from == to => Err(Wrong::new(place, "nothing to draw: both ends are the same")),
        None => Ok(Amount::Random { from: from.min(to), to: from.max(to) }),
    }
}

struct Number {
    decimal: Decimal,
    negative: bool,
}

fn number(scan: &mut Scan<'_>) -> Result<Number, Wrong> {
    let negative = scan.take("-");
    let number = decimal(scan).map_err(|wrong| {
        instead_of_a_number(wrong, "expected a time here, such as `300 ms`, `[210..290/5] ms` or `[210..290] ms`")
    })?;
    Ok(Number { decimal: number, negative })
}

impl Number {
    fn deviation(&self, unit: &Found, minus: bool) -> Result<Deviation, Wrong> {
        signed(self.decimal.times(unit)?, self.negative != minus, &self.decimal.range)
    }
}

/// How many values an amount has, at least 1.
pub(super) fn values(amount: Amount) -> u32 {
    match amount {
        Amount::Sweep { from, to, step } => {
            let apart = to.as_micros().abs_diff(from.as_micros());
            let steps = apart.checked_div(step.as_micros()).unwrap_or(0);
            u32::try_from(steps.saturating_add(1)).unwrap_or(u32::MAX)
        }
        Amount::Fixed(_) | Amount::Random { .. } => 1,
    }
}
