//! The sheet of paper: writes SVG elements and escapes what users typed.

use super::palette::{LIMIT, SOLID, SOLID_HATCH, SOLID_SOFT, WHITE};

/// Width of the picture in pixels.
pub const WIDTH: f64 = 960.0;
/// Height of the picture in pixels.
pub const HEIGHT: f64 = 640.0;

/// Where a text is held.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Hold {
    Start,
    Middle,
    End,
}

/// Look of a text.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Type {
    pub size: f64,
    pub bold: bool,
    pub colour: &'static str,
}

impl Type {
    pub const fn plain(size: f64, colour: &'static str) -> Self {
        Self { size, bold: false, colour }
    }

    pub const fn bold(size: f64, colour: &'static str) -> Self {
        Self { size, bold: true, colour }
    }

    /// Estimated width of a text in pixels, on the generous side: the font is the reader's.
    pub fn width(self, text: &str) -> f64 {
        let ems: f64 = text.chars().map(em).sum();
        ems * self.size * if self.bold { 1.1 } else { 1.0 }
    }

    /// The text, cut with an ellipsis when it is wider than the room.
    pub fn fit(self, text: &str, room: f64) -> String {
        if self.width(text) <= room {
            return text.to_owned();
        }
        let mut cut = String::new();
        for c in text.chars() {
            cut.push(c);
            if self.width(&cut) + self.width("…") > room {
                cut.pop();
                break;
            }
        }
        format!("{}…", cut.trim_end())
    }
}

fn em(c: char) -> f64 {
    match c {
        '₀'..='₎' | '⁰'..='⁾' | '¹' | '²' | '³' => 0.43,
        ' ' | '.' | ',' | ':' | ';' | '\'' | '|' | 'i' | 'j' | 'l' | '·' | '!' | 'I' => 0.33,
        'f' | 'r' | 't' | '(' | ')' | '[' | ']' | '/' | '-' => 0.41,
        'm' | 'w' | 'M' | 'W' | '%' | '@' | '…' | '–' => 0.95,
        'A'..='Z' => 0.71,
        c if c as u32 > 0x2E7F => 1.05,
        _ => 0.62,
    }
}

/// An SVG document in the making.
pub struct Paper(String);

impl Paper {
    /// An empty sheet with the hatches; `title` and `description` are read aloud by a screen reader.
    pub fn new(title: &str, description: &str) -> Self {
        let mut paper = Self(format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{WIDTH}\" height=\"{HEIGHT}\" viewBox=\"0 0 {WIDTH} \
             {HEIGHT}\" font-family=\"sans-serif\" role=\"img\">\n<title>{}</title>\n<desc>{}</desc>\n<defs>\n",
            escape(title),
            escape(description)
        ));
        let strokes = |d: &str, width: f64, colour: &str| {
            format!("<path d=\"{d}\" fill=\"none\" stroke=\"{colour}\" stroke-width=\"{width}\"/>")
        };
        let (up, down) = ("M-1 6 L6 -1 M4 8 L8 4", "M-1 1 L6 8 M4 -1 L8 3");
        paper.pattern("ceiling", 7.0, &strokes(up, 1.2, LIMIT));
        paper.pattern("floor", 7.0, &strokes(down, 1.2, LIMIT));
        paper.pattern("solid0", 9.0, &strokes("M-1 10 L10 -1", 0.8, SOLID_HATCH));
        let dot = format!("<circle cx=\"3\" cy=\"3\" r=\"1\" fill=\"{SOLID_HATCH}\"/>");
        paper.pattern("solid1", 6.0, &dot);
        paper.pattern("solid2", 6.0, &strokes("M0 3 L6 3", 0.8, SOLID_HATCH));
        paper.0.push_str("</defs>\n");
        paper.rectangle((0.0, 0.0), (WIDTH, HEIGHT), WHITE);
        paper
    }

    fn pattern(&mut self, id: &str, size: f64, inside: &str) {
        self.0.push_str(&format!(
            "<pattern id=\"{id}\" width=\"{size}\" height=\"{size}\" patternUnits=\"userSpaceOnUse\">{inside}\
             </pattern>\n"
        ));
    }

    /// The finished document.
    pub fn finish(mut self) -> String {
        self.0.push_str("</svg>\n");
        self.0
    }

    /// Opens a group that shows only what falls in a rectangle; close it with [`Paper::close`].
    pub fn clip(&mut self, id: &str, at: (f64, f64), size: (f64, f64)) {
        self.0.push_str(&format!(
            "<clipPath id=\"{id}\"><rect {}/></clipPath>\n<g clip-path=\"url(#{id})\">\n",
            place(at, size)
        ));
    }

    /// Closes a group.
    pub fn close(&mut self) {
        self.0.push_str("</g>\n");
    }

    /// A filled rectangle.
    pub fn rectangle(&mut self, at: (f64, f64), size: (f64, f64), fill: &str) {
        self.0.push_str(&format!("<rect {} fill=\"{fill}\"/>\n", place(at, size)));
    }

    /// A framed patch of a hatch, to stand before the name of what it means.
    pub fn swatch(&mut self, (x, y): (f64, f64), size: (f64, f64), hatch: &str) {
        let at = (x - size.0 / 2.0, y - size.1 / 2.0);
        self.rectangle(at, size, SOLID_SOFT);
        self.rectangle(at, size, hatch);
        self.outline(at, size, SOLID);
    }

    /// An empty rectangle.
    pub fn outline(&mut self, at: (f64, f64), size: (f64, f64), colour: &str) {
        self.0.push_str(&format!("<rect {} fill=\"none\" stroke=\"{colour}\"/>\n", place(at, size)));
    }

    /// A straight line.
    pub fn line(&mut self, from: (f64, f64), to: (f64, f64), colour: &str, width: f64) {
        let d = format!("M{:.1} {:.1} L{:.1} {:.1}", from.0, from.1, to.0, to.1);
        self.path(&d, (colour, ""), width);
    }

    /// A path with a pen: colour and dash.
    pub fn path(&mut self, d: &str, (colour, dash): (&str, &str), width: f64) {
        let dash = if dash.is_empty() { String::new() } else { format!(" stroke-dasharray=\"{dash}\"") };
        self.0.push_str(&format!(
            "<path d=\"{d}\" fill=\"none\" stroke=\"{colour}\" stroke-width=\"{width}\"{dash}/>\n"
        ));
    }

    /// A closed path filled so that what is behind shows through.
    pub fn tint(&mut self, d: &str, fill: &str, opacity: f64) {
        self.0.push_str(&format!("<path d=\"{d}\" fill=\"{fill}\" fill-opacity=\"{opacity}\"/>\n"));
    }

    /// A small triangle that points down to a place.
    pub fn arrow_down(&mut self, (x, y): (f64, f64), fill: &str) {
        self.0.push_str(&format!("<path d=\"M{x:.1} {y:.1} l-6 -11 h12 Z\" fill=\"{fill}\"/>\n"));
    }

    /// A dot on a line.
    pub fn dot(&mut self, (x, y): (f64, f64), fill: &str) {
        self.0.push_str(&format!(
            "<circle cx=\"{x:.1}\" cy=\"{y:.1}\" r=\"4\" fill=\"{fill}\" stroke=\"{WHITE}\" stroke-width=\"1.2\"/>\n"
        ));
    }

    /// The diamond of the set point.
    pub fn diamond(&mut self, (x, y): (f64, f64), fill: &str) {
        self.0
            .push_str(&format!("<path d=\"M{x:.1} {:.1} l6 7 l-6 7 l-6 -7 Z\" fill=\"{fill}\"/>\n", y - 7.0));
    }

    /// A text on one line.
    pub fn text(&mut self, (x, y): (f64, f64), hold: Hold, look: Type, text: &str) {
        self.written(&format!("x=\"{x:.1}\" y=\"{y:.1}\""), hold, look, text);
    }

    /// A text that reads upwards.
    pub fn upward(&mut self, (x, y): (f64, f64), look: Type, text: &str) {
        self.written(
            &format!("transform=\"translate({x:.1} {y:.1}) rotate(-90)\""),
            Hold::Middle,
            look,
            text,
        );
    }

    fn written(&mut self, at: &str, hold: Hold, look: Type, text: &str) {
        let anchor = match hold {
            Hold::Start => "",
            Hold::Middle => " text-anchor=\"middle\"",
            Hold::End => " text-anchor=\"end\"",
        };
        let weight = if look.bold { " font-weight=\"bold\"" } else { "" };
        self.0.push_str(&format!(
            "<text {at} font-size=\"{}\" fill=\"{}\"{weight}{anchor}>{}</text>\n",
            look.size,
            look.colour,
            escape(text)
        ));
    }

    /// A white plate about a middle, so that hatches do not disturb what is written on it.
    pub fn backing(&mut self, (x, y): (f64, f64), size: (f64, f64)) {
        let at = (x - size.0 / 2.0, y - size.1 / 2.0);
        self.0.push_str(&format!("<rect {} fill=\"{WHITE}\" fill-opacity=\"0.88\"/>\n", place(at, size)));
    }

    /// A text in the middle of a white plate.
    pub fn plate(&mut self, (x, y): (f64, f64), look: Type, text: &str) {
        self.backing((x, y), (look.width(text) + 6.0, look.size * 1.25));
        self.text((x, y + look.size * 0.36), Hold::Middle, look, text);
    }
}

fn place(at: (f64, f64), size: (f64, f64)) -> String {
    format!(
        "x=\"{:.1}\" y=\"{:.1}\" width=\"{:.1}\" height=\"{:.1}\"",
        at.0,
        at.1,
        size.0.max(0.0),
        size.1.max(0.0)
    )
}

/// Text as XML: markup escaped, characters that XML forbids replaced, on one line.
pub fn escape(text: &str) -> String {
    let mut safe = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => safe.push_str("&amp;"),
            '<' => safe.push_str("&lt;"),
            '>' => safe.push_str("&gt;"),
            '"' => safe.push_str("&quot;"),
            '\'' => safe.push_str("&apos;"),
            '\t' | '\n' | '\r' => safe.push(' '),
            '\u{FFFE}' | '\u{FFFF}' => safe.push('\u{FFFD}'),
            c if c.is_control() => safe.push('\u{FFFD}'),
            c => safe.push(c),
        }
    }
    safe
}

#[cfg(test)]
mod tests {
    use super::super::palette::INK;
    use super::*;

    #[test]
    fn user_text_cannot_break_out_of_the_markup() {
        assert_eq!(escape("<b> & \"x\" 'y'\n\u{1}"), "&lt;b&gt; &amp; &quot;x&quot; &apos;y&apos; \u{FFFD}");
    }

    #[test]
    fn a_long_text_is_cut_to_its_room() {
        let look = Type::plain(13.0, INK);
        let cut = look.fit(&"copper ".repeat(40), 200.0);
        assert!(cut.ends_with('…') && look.width(&cut) <= 200.0);
        assert_eq!(look.fit("copper", 200.0), "copper");
    }
}
