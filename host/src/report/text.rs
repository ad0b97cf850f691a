//! Words that come from outside: cut to a bearable length, and free of what no page may hold.

/// The text without characters that XML forbids or that would turn the reading direction of what stands around it.
pub(super) fn clean(text: &str) -> String {
    text.chars().filter(|c| *c != '\r').map(|c| if is_welcome(c) { c } else { '\u{fffd}' }).collect()
}

/// As [`clean`], on one line and cut to `most` characters with an ellipsis.
pub(super) fn short(text: &str, most: usize) -> String {
    let cleaned = clean(text);
    let line = cleaned.split_whitespace().collect::<Vec<_>>().join(" ");
    if line.chars().count() <= most {
        return line;
    }
    line.chars().take(most.saturating_sub(1)).chain(['…']).collect()
}

/// A fault in words, as part of a sentence: without its number in front and the full stop behind.
pub(super) fn fault(line: &str) -> String {
    let line = short(line, 200);
    let numbered = line.strip_prefix("fault ").and_then(|rest| rest.split_once(": "));
    let words =
        numbered.filter(|(number, _)| number.chars().all(|c| c.is_ascii_digit())).map_or(line.as_str(), |(_, words)| words);
    words.trim_end_matches('.').to_owned()
}

/// The text with a capital first letter.
pub(super) fn capital(text: &str) -> String {
    let mut chars = text.chars();
    chars.next().map_or_else(String::new, |first| first.to_uppercase().chain(chars).collect())
}

fn is_welcome(c: char) -> bool {
    let turns_direction = matches!(c, '\u{200e}' | '\u{200f}' | '\u{202a}'..='\u{202e}' | '\u{2066}'..='\u{2069}');
    let forbidden = matches!(c, '\u{fffe}' | '\u{ffff}') || (c.is_control() && c != '\n' && c != '\t');
    !turns_direction && !forbidden
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn nothing_that_xml_forbids_stays() {
        assert_eq!(clean("a\u{0}b\u{1b}c\u{202e}d\u{fffe}\r\ne\tf"), "a\u{fffd}b\u{fffd}c\u{fffd}d\u{fffd}\ne\tf");
    }

    #[test]
    fn long_names_are_cut_and_lines_joined() {
        assert_eq!(short(" a \n b ", 10), "a b");
        assert_eq!(short("abcdefgh", 5), "abcd…");
        assert_eq!(capital("held"), "Held");
        assert_eq!(fault("fault 5: the rate timer runs too long, by 8 ms."), "the rate timer runs too long, by 8 ms");
        assert_eq!(fault("fault of the day: none"), "fault of the day: none");
    }
}
