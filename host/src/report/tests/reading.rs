//! Reads a page as a test sees it: its drawings as XML, its text without tags.

use quick_xml::Reader;
use quick_xml::events::{BytesStart, Event};

/// A mark of a drawing: its element, its class, the points it touches.
#[derive(Debug, Clone)]
pub(super) struct Mark {
    pub(super) element: String,
    pub(super) class: String,
    pub(super) points: Vec<(f64, f64)>,
    /// What is written, for a text.
    pub(super) words: String,
    pub(super) anchor: String,
}

/// A drawing: the attributes of its root and its marks. Marks inside definitions and references are left out.
#[derive(Debug, Clone)]
pub(super) struct Drawing {
    pub(super) class: String,
    pub(super) view: [f64; 4],
    pub(super) marks: Vec<Mark>,
}

/// Every drawing of a page. Panics where one is not well-formed.
pub(super) fn drawings(page: &str) -> Vec<Drawing> {
    let mut rest = page;
    let mut found = Vec::new();
    while let Some(start) = rest.find("<svg") {
        let end = start + rest[start..].find("</svg>").expect("every drawing ends") + "</svg>".len();
        found.push(drawing(&rest[start..end]));
        rest = &rest[end..];
    }
    found
}

/// The ladders among them.
pub(super) fn ladders(page: &str) -> Vec<Drawing> {
    drawings(page)
        .into_iter()
        .filter(|drawing| drawing.class == "pic" && drawing.marks.iter().any(|mark| mark.class == "tier"))
        .collect()
}

fn drawing(text: &str) -> Drawing {
    let mut reader = Reader::from_str(text);
    reader.config_mut().check_end_names = true;
    let mut drawing = Drawing { class: String::new(), view: [0.0; 4], marks: Vec::new() };
    let mut depth = 0;
    let mut in_title = false;
    loop {
        let event = reader.read_event().unwrap_or_else(|error| panic!("{error} in {text}"));
        match event {
            Event::Start(start) => {
                if depth == 0 {
                    drawing.class = attribute(&start, "class");
                    let numbers: Vec<f64> =
                        attribute(&start, "viewBox").split(' ').filter_map(|number| number.parse().ok()).collect();
                    drawing.view = numbers.try_into().unwrap_or([0.0; 4]);
                } else {
                    drawing.marks.push(mark(&start));
                }
                in_title = matches!(start.name().as_ref(), "title" | "desc");
                depth += 1;
            }
            Event::Empty(start) => drawing.marks.push(mark(&start)),
            Event::Text(words) => {
                if let Some(mark) = drawing.marks.last_mut().filter(|mark| !in_title && mark.element == "text") {
                    mark.words.push_str(&words);
                }
            }
            Event::GeneralRef(_) => {
                if let Some(mark) = drawing.marks.last_mut() {
                    mark.words.push('?');
                }
            }
            Event::End(_) => depth -= 1,
            Event::Eof => break,
            _ => {}
        }
    }
    assert_eq!(depth, 0, "every element ends");
    drawing
}

fn attribute(start: &BytesStart<'_>, name: &str) -> String {
    let found = start.attributes().map(|attribute| attribute.expect("attributes are well-formed"));
    let value = found.filter(|attribute| attribute.key.as_ref() == name).map(|attribute| attribute.value.into_owned()).next();
    value.unwrap_or_default()
}

fn mark(start: &BytesStart<'_>) -> Mark {
    let number = |name: &str| attribute(start, name).parse::<f64>().unwrap_or(0.0);
    let element = start.name().as_ref().to_owned();
    let points = match element.as_str() {
        "path" => path_points(&attribute(start, "d")),
        "rect" => vec![(number("x"), number("y")), (number("x") + number("width"), number("y") + number("height"))],
        "circle" => {
            let (x, y, r) = (number("cx"), number("cy"), number("r"));
            vec![(x - r, y - r), (x + r, y + r)]
        }
        "text" => vec![(number("x"), number("y"))],
        _ => Vec::new(),
    };
    Mark { class: attribute(start, "class"), anchor: attribute(start, "text-anchor"), words: String::new(), element, points }
}

/// The points of a path made of `M`, `L`, `H`, `V` and their relative forms.
fn path_points(description: &str) -> Vec<(f64, f64)> {
    let mut points = Vec::new();
    let (mut x, mut y) = (0.0, 0.0);
    let mut command = 'M';
    let mut numbers: Vec<f64> = Vec::new();
    let mut word = String::new();
    for c in description.chars().chain([' ']) {
        let ends = c == ' ' || c.is_ascii_alphabetic() || (c == '-' && !word.is_empty());
        if ends && !word.is_empty() {
            numbers.push(word.parse().unwrap_or_else(|_| panic!("{word} in {description}")));
            word.clear();
        }
        let needs = if matches!(command, 'H' | 'h' | 'V' | 'v') { 1 } else { 2 };
        if numbers.len() == needs {
            match (command, numbers[0]) {
                ('H', to) => x = to,
                ('h', by) => x += by,
                ('V', to) => y = to,
                ('v', by) => y += by,
                ('l', by) => (x, y) = (x + by, y + numbers[1]),
                (_, to) => (x, y) = (to, numbers[1]),
            }
            points.push((x, y));
            numbers.clear();
        }
        if c.is_ascii_alphabetic() {
            assert!(numbers.is_empty(), "{description}");
            command = c;
        } else if c != ' ' {
            word.push(c);
        }
    }
    points
}

/// The text of a page between its tags, without style and script, with plain spaces and signs.
pub(super) fn text(page: &str) -> String {
    let body = &page[page.find("<body>").unwrap_or(0)..page.find("<script>").unwrap_or(page.len())];
    let mut out = String::new();
    let mut inside = false;
    for c in body.chars() {
        match c {
            '<' => {
                inside = true;
                out.push(' ');
            }
            '>' if inside => inside = false,
            _ if inside => {}
            '\u{202f}' => out.push(' '),
            '\u{2212}' => out.push('-'),
            c => out.push(c),
        }
    }
    out.split_whitespace().collect::<Vec<_>>().join(" ")
}
