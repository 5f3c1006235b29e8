//! A sheet that SVG elements are written on.

use crate::billiard::Vec2;
use std::fmt::Write;

/// Width of every picture in points: 180 mm.
pub(super) const WIDTH: f64 = 510.24;
/// Width of every picture in millimetres.
const WIDTH_MILLIMETRES: f64 = 180.0;
/// Size of ordinary text, points: the smallest that is read without effort in print.
pub(super) const TEXT: f64 = 9.0;
/// Size of the title, points.
pub(super) const TITLE: f64 = 11.5;
/// Distance of two lines of text as a multiple of its size.
pub(super) const LEADING: f64 = 1.3;
/// White border around everything, points.
pub(super) const BORDER: f64 = 8.0;

/// Colours that remain different for colour-blind readers: M. Okabe & K. Ito, Color Universal Design (2008), from memory;
/// greys added.
pub(super) mod palette {
    pub(crate) const BLACK: &str = "#000000";
    pub(crate) const ORANGE: &str = "#E69F00";
    pub(crate) const GREEN: &str = "#009E73";
    pub(crate) const BLUE: &str = "#0072B2";
    pub(crate) const VERMILLION: &str = "#D55E00";
    pub(crate) const GREY: &str = "#8C8C8C";
    pub(crate) const LIGHT_GREY: &str = "#DCDCDC";
    pub(crate) const WHITE: &str = "#FFFFFF";
}

/// How a line is drawn.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Stroke {
    /// Colour.
    pub(super) color: &'static str,
    /// Width in points.
    pub(super) width: f64,
    /// Lengths of dashes and gaps in points; empty for a solid line.
    pub(super) dash: &'static str,
}

impl Stroke {
    /// A solid line.
    pub(super) const fn solid(color: &'static str, width: f64) -> Self {
        Self {
            color,
            width,
            dash: "",
        }
    }

    /// A broken line.
    pub(super) const fn broken(color: &'static str, width: f64, dash: &'static str) -> Self {
        Self { color, width, dash }
    }
}

/// Which point of a text lies at the given place.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Anchor {
    /// Its left end.
    Start,
    /// Its middle.
    Middle,
    /// Its right end.
    End,
}

/// How a text is drawn.
#[derive(Clone, Copy, Debug)]
pub(super) struct Lettering {
    /// Size in points.
    pub(super) size: f64,
    /// Alignment along the line.
    pub(super) anchor: Anchor,
    /// Bold?
    pub(super) bold: bool,
    /// Read from below upwards?
    pub(super) upright: bool,
}

impl Lettering {
    /// Ordinary text.
    pub(super) const fn plain(anchor: Anchor) -> Self {
        Self {
            size: TEXT,
            anchor,
            bold: false,
            upright: false,
        }
    }

    /// Title of a picture.
    pub(super) const fn title() -> Self {
        Self {
            size: TITLE,
            anchor: Anchor::Start,
            bold: true,
            upright: false,
        }
    }

    /// Text along a vertical axis, read from below.
    pub(super) const fn upright() -> Self {
        Self {
            upright: true,
            ..Self::plain(Anchor::Middle)
        }
    }
}

/// A coordinate with the resolution of a picture, a hundredth of a point (3.5 micrometres).
pub(super) fn number(value: f64) -> String {
    if !value.is_finite() {
        return "0".into();
    }
    let text = format!("{value:.2}");
    let text = text.trim_end_matches('0').trim_end_matches('.');
    if text == "-0" { "0" } else { text }.into()
}

/// Text as XML wants it: markup characters as entities, characters that XML 1.0 forbids replaced.
pub(super) fn escape(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for letter in text.chars() {
        match letter {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\'' => out.push_str("&apos;"),
            '\t' | '\n' | '\r' => out.push(' '),
            '\u{0}'..='\u{1f}' | '\u{fffe}' | '\u{ffff}' => out.push('\u{fffd}'),
            other => out.push(other),
        }
    }
    out
}

/// Width of a text in points, estimated from the proportions of the widest of the faces that pictures name (a narrower one
/// leaves some space).
pub(super) fn text_width(text: &str, size: f64) -> f64 {
    let width = |letter: char| match letter {
        'i' | 'j' | 'l' | '\'' => 0.28,
        ' ' | '.' | ',' | ':' | ';' | '!' | '|' | 'I' | '/' => 0.34,
        'f' | 't' | 'r' | '-' | '(' | ')' | '[' | ']' => 0.41,
        'm' | 'w' | 'M' | 'W' | '@' | '%' => 0.98,
        '+' | '=' | '\u{2212}' | '\u{d7}' | '\u{b1}' | '<' | '>' | '#' => 0.84,
        '\u{2070}'..='\u{207f}' | '\u{b2}' | '\u{b3}' | '\u{b9}' => 0.41,
        'A'..='Z' => 0.72,
        letter if u32::from(letter) < 0x2e80 => 0.635,
        _ => 1.0,
    };
    text.chars().map(width).sum::<f64>() * size
}

/// Breaks a text into lines of at most `width` points, between words where that is possible.
pub(super) fn wrap(text: &str, width: f64, size: f64) -> Vec<String> {
    let mut lines: Vec<String> = Vec::new();
    let mut line = String::new();
    for word in text
        .split_whitespace()
        .flat_map(|word| pieces(word, width, size))
    {
        if !line.is_empty()
            && text_width(&line, size) + text_width(" ", size) + text_width(&word, size) > width
        {
            lines.push(std::mem::take(&mut line));
        }
        if !line.is_empty() {
            line.push(' ');
        }
        line.push_str(&word);
    }
    if !line.is_empty() {
        lines.push(line);
    }
    lines
}

/// Breaks one word that is wider than a line.
fn pieces(word: &str, width: f64, size: f64) -> Vec<String> {
    let mut parts = vec![String::new()];
    for letter in word.chars() {
        if let Some(part) = parts.last_mut() {
            part.push(letter);
            if text_width(part, size) > width - size {
                parts.push(String::new());
            }
        }
    }
    parts.retain(|part| !part.is_empty());
    parts
}

/// An SVG document in the making.
#[derive(Debug)]
pub(super) struct Canvas {
    title: String,
    description: String,
    body: String,
}

impl Canvas {
    /// An empty sheet; the description is for readers who cannot see the picture.
    pub(super) fn new(title: &str, description: &str) -> Self {
        Self {
            title: title.into(),
            description: description.into(),
            body: String::new(),
        }
    }

    /// Writes the title at the top of the sheet; returns the height down to which the sheet is now taken.
    pub(super) fn heading(&mut self) -> f64 {
        let title = self.title.clone();
        self.paragraph(&title, BORDER, Lettering::title())
    }

    /// Writes a text broken into lines over the whole width, starting below `top`; returns the height of its lower edge.
    pub(super) fn paragraph(&mut self, text: &str, top: f64, lettering: Lettering) -> f64 {
        let mut bottom = top;
        for line in wrap(text, WIDTH - 2.0 * BORDER, lettering.size) {
            bottom += lettering.size * LEADING;
            self.text(
                Vec2::new(BORDER, bottom - 0.3 * lettering.size),
                lettering,
                &line,
            );
        }
        bottom
    }

    /// A path whose data is already in SVG's notation.
    pub(super) fn path(&mut self, data: &str, stroke: Stroke) {
        if !data.is_empty() {
            self.element(&format!(
                "<path d=\"{data}\" fill=\"none\"{} stroke-linejoin=\"round\" stroke-linecap=\"round\"/>",
                stroke_attributes(stroke)
            ));
        }
    }

    /// A path whose line ends flat at its ends and at those of its dashes.
    pub(super) fn flat_path(&mut self, data: &str, stroke: Stroke) {
        if !data.is_empty() {
            self.element(&format!(
                "<path d=\"{data}\" fill=\"none\"{} stroke-linejoin=\"round\"/>",
                stroke_attributes(stroke)
            ));
        }
    }

    /// The inside of a closed path, without its rim.
    pub(super) fn area(&mut self, data: &str, fill: &str) {
        if !data.is_empty() {
            self.element(&format!(
                "<path d=\"{data}\" fill=\"{fill}\" fill-rule=\"evenodd\"/>"
            ));
        }
    }

    /// A straight line.
    pub(super) fn line(&mut self, from: Vec2, to: Vec2, stroke: Stroke) {
        self.flat_path(&polyline(&[from, to]), stroke);
    }

    /// A rectangle between two opposite corners.
    pub(super) fn rectangle(
        &mut self,
        corner: Vec2,
        opposite: Vec2,
        fill: &str,
        stroke: Option<Stroke>,
    ) {
        let low = corner.inf(&opposite);
        let size = corner.sup(&opposite) - low;
        self.element(&format!(
            "<rect x=\"{}\" y=\"{}\" width=\"{}\" height=\"{}\" fill=\"{fill}\"{}/>",
            number(low.x),
            number(low.y),
            number(size.x),
            number(size.y),
            stroke.map(stroke_attributes).unwrap_or_default()
        ));
    }

    /// Rows of square cells: for every colour a path of horizontal lines, in units of a cell from the corner on.
    pub(super) fn cells(&mut self, corner: Vec2, size: f64, paths: &[(String, String)]) {
        self.element(&format!(
            "<g transform=\"translate({} {}) scale({size:.5})\" fill=\"none\" stroke-width=\"1\" \
             shape-rendering=\"crispEdges\">",
            number(corner.x),
            number(corner.y)
        ));
        for (color, data) in paths {
            self.element(&format!("<path stroke=\"{color}\" d=\"{data}\"/>"));
        }
        self.element("</g>");
    }

    /// A circle.
    pub(super) fn circle(&mut self, center: Vec2, radius: f64, fill: &str, stroke: Option<Stroke>) {
        self.element(&format!(
            "<circle cx=\"{}\" cy=\"{}\" r=\"{}\" fill=\"{fill}\"{}/>",
            number(center.x),
            number(center.y),
            number(radius),
            stroke.map(stroke_attributes).unwrap_or_default()
        ));
    }

    /// One line of text; `place` is on its base line.
    pub(super) fn text(&mut self, place: Vec2, lettering: Lettering, text: &str) {
        let anchor = match lettering.anchor {
            Anchor::Start => "",
            Anchor::Middle => " text-anchor=\"middle\"",
            Anchor::End => " text-anchor=\"end\"",
        };
        let bold = if lettering.bold {
            " font-weight=\"bold\""
        } else {
            ""
        };
        let (x, y) = (number(place.x), number(place.y));
        let turn = if lettering.upright {
            format!(" transform=\"rotate(-90 {x} {y})\"")
        } else {
            String::new()
        };
        self.element(&format!(
            "<text x=\"{x}\" y=\"{y}\" font-size=\"{}\"{anchor}{bold}{turn}>{}</text>",
            number(lettering.size),
            escape(text)
        ));
    }

    fn element(&mut self, element: &str) {
        self.body.push_str(element);
        self.body.push('\n');
    }

    /// The finished document, cut off at a height.
    pub(super) fn finish(self, height: f64) -> String {
        let (wide, high) = (number(WIDTH), number(height));
        let mut out = String::with_capacity(self.body.len() + 1000);
        out.push_str("<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n");
        // Writing into a string cannot fail.
        let _ = writeln!(
            out,
            "<svg xmlns=\"http://www.w3.org/2000/svg\" version=\"1.1\" role=\"img\" width=\"{}mm\" height=\"{}mm\" \
             viewBox=\"0 0 {wide} {high}\" font-family=\"Helvetica, Arial, 'Liberation Sans', 'DejaVu Sans', sans-serif\">",
            number(WIDTH_MILLIMETRES),
            number(height * WIDTH_MILLIMETRES / WIDTH),
        );
        let _ = writeln!(out, "<title>{}</title>", escape(&self.title));
        let _ = writeln!(out, "<desc>{}</desc>", escape(&self.description));
        let _ = writeln!(
            out,
            "<rect width=\"{wide}\" height=\"{high}\" fill=\"{}\"/>",
            palette::WHITE
        );
        out.push_str(&self.body);
        out.push_str("</svg>\n");
        out
    }
}

fn stroke_attributes(stroke: Stroke) -> String {
    let mut out = format!(
        " stroke=\"{}\" stroke-width=\"{}\"",
        stroke.color,
        number(stroke.width)
    );
    if !stroke.dash.is_empty() {
        let _ = write!(out, " stroke-dasharray=\"{}\"", stroke.dash);
    }
    out
}

/// Path data of an open chain of points on the sheet.
pub(super) fn polyline(points: &[Vec2]) -> String {
    let mut out = String::with_capacity(points.len() * 13);
    for (index, point) in points.iter().enumerate() {
        out.push_str(match index {
            0 => "M",
            1 => "L",
            _ => " ",
        });
        out.push_str(&number(point.x));
        out.push(' ');
        out.push_str(&number(point.y));
    }
    // A line without length shows as a dot when its ends are round.
    if points.len() == 1 {
        out.push_str("h0");
    }
    out
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    #[test]
    fn numbers_are_short_and_never_negative_zero() {
        for (value, text) in [
            (1.0, "1"),
            (-0.001, "0"),
            (0.125, "0.12"),
            (-2.5, "-2.5"),
            (1234.567, "1234.57"),
            (100.0, "100"),
            (f64::NAN, "0"),
            (f64::INFINITY, "0"),
        ] {
            assert_eq!(number(value), text);
        }
    }

    #[test]
    fn markup_in_texts_is_escaped() {
        assert_eq!(
            escape("a<b & \"c\" > 'd'\n"),
            "a&lt;b &amp; &quot;c&quot; &gt; &apos;d&apos; "
        );
        assert_eq!(escape("\u{7}\u{fffe}é"), "\u{fffd}\u{fffd}é");
    }

    #[test]
    fn wrapped_lines_fit_and_lose_nothing() {
        let text = "the quick brown fox jumps over the extraordinarilylongwordwithoutanyspace dog";
        let lines = wrap(text, 80.0, TEXT);
        assert!(lines.len() > 3);
        for line in &lines {
            assert!(text_width(line, TEXT) <= 80.0, "{line}");
        }
        let strip = |text: &str| text.replace(' ', "");
        assert_eq!(strip(&lines.concat()), strip(text));
        assert!(wrap("", 80.0, TEXT).is_empty());
    }

    #[test]
    fn a_single_point_is_drawn_as_a_dot() {
        assert_eq!(polyline(&[Vec2::new(1.0, 2.0)]), "M1 2h0");
        assert_eq!(polyline(&[]), "");
    }
}
