//! `[device] fault`: what is wrong with the reference device.

use super::schema::FAULT;
use super::units::{deviation, share_millionths, span};
use super::walk::Section;
use crate::refusal::Complaint;
use phase4::base::ParamError;
use phase4::device::{BANK, Fault, FaultRow, Size};

/// Reads the fault, `None` if there is none or if a complaint was made.
pub(super) fn read(device: &Section<'_, '_>) -> Option<Fault> {
    if !device.has("fault") {
        return None;
    }
    if !device.has_table("fault") {
        return row(device, "fault").and_then(|row| Fault::of_row(row.id));
    }
    let table = device.open("fault", &FAULT);
    if !table.has("number") {
        table.missing("number");
    }
    let row = row(&table, "number")?;
    let size = if table.has("size") { size(&table, row)? } else { row.size };
    let refuse = |_: ParamError| {
        // The range of a size is told in the measure of its row, which the library's error does not carry.
        let message = format!("fault {} does not come in this size", row.id);
        let range =
            if row.least == row.greatest { show(row.least) } else { format!("{} to {}", show(row.least), show(row.greatest)) };
        table.complain(Complaint::new(message).at(table.place("size"), format!("accepted is {range}")));
    };
    Fault::new(row.id, size).map_err(refuse).ok()
}

/// The row of the bank that a number names.
fn row(table: &Section<'_, '_>, key: &str) -> Option<&'static FaultRow> {
    let number = table.whole(key)?;
    let row = u8::try_from(number).ok().and_then(FaultRow::of);
    if row.is_none() {
        let numbers: Vec<String> = BANK.iter().map(|row| row.id.to_string()).collect();
        let message = format!("there is no fault {number} in the bank");
        let complaint = Complaint::new(message).at(table.place(key), "not one of its numbers");
        table.complain(complaint.help(format!("the numbers are {}", crate::refusal::list(numbers.iter().map(String::as_str)))));
    }
    row
}

fn size(table: &Section<'_, '_>, row: &FaultRow) -> Option<Size> {
    match row.size {
        Size::Span(_) => table.read("size", span).map(Size::Span),
        Size::Shift(_) => table.read("size", deviation).map(Size::Shift),
        Size::Millionths(_) => table.read("size", share_millionths).map(Size::Millionths),
        Size::Divisor(_) => table.whole("size").map(|by| Size::Divisor(u32::try_from(by).unwrap_or(u32::MAX))),
        Size::Whole => {
            let message = format!("fault {} has no size: {}", row.id, row.line);
            table.complain(Complaint::new(message).at(table.place("size"), "leave this out"));
            None
        }
    }
}

/// A size as it is written.
pub(super) fn show(size: Size) -> String {
    use super::units::show_micros;
    match size {
        Size::Whole => "there".to_owned(),
        Size::Span(span) => show_micros(span.as_micros()),
        Size::Shift(by) => {
            let sign = if by.as_micros() < 0 { "-" } else { "+" };
            format!("{sign}{}", show_micros(by.size().as_micros()))
        }
        Size::Millionths(share) => format!("{share} millionths"),
        Size::Divisor(by) => by.to_string(),
    }
}

/// The fault in one plain line, with its number and size.
pub fn describe(fault: Fault) -> String {
    let row = fault.row();
    match fault.size() {
        Size::Whole => format!("fault {}: {}", row.id, row.line),
        size => format!("fault {}: {}, by {}", row.id, row.line, show(size)),
    }
}
