//! Word wrapping with real widths.
//!
//! Lines break at spaces; a number keeps its unit; a word longer than a line is broken inside, after punctuation where
//! possible, because cutting it off would lose what the user typed. The ruler is a parameter so that the text writer
//! wraps with the same rules, counting characters instead of points.

use super::item::Join;
use super::rich::{Span, Style, is_bound};

/// Measures text.
pub(in crate::sheet) trait Ruler {
    /// Width of `text` in the ruler's unit.
    fn width(&self, text: &str, style: Style) -> f32;
}

/// Measures in points, with the embedded fonts.
pub(super) struct Points;

impl Ruler for Points {
    fn width(&self, text: &str, style: Style) -> f32 {
        crate::sheet::fonts::width_pt(text, style.size, style.weight)
    }
}

/// A line of pieces, each in one style.
#[derive(Clone, Debug, PartialEq)]
pub(in crate::sheet) struct Line {
    pub pieces: Vec<Piece>,
    /// Width of the whole line.
    pub width: f32,
    /// Largest font size in it, points.
    pub size: f32,
}

/// A piece of a line.
#[derive(Clone, Debug, PartialEq)]
pub(in crate::sheet) struct Piece {
    pub text: String,
    pub style: Style,
    /// Distance from the start of the line.
    pub x: f32,
    pub width: f32,
    pub join: Join,
}

/// Slack for rounding when a width is compared, in the ruler's unit.
const SLACK: f32 = 0.01;

#[derive(Clone)]
struct Fragment {
    text: String,
    style: Style,
    width: f32,
}

#[derive(Default)]
struct Word {
    fragments: Vec<Fragment>,
    /// Width of its fragments.
    width: f32,
    /// The space before it, absent at the start of the text.
    space: Option<Fragment>,
    /// It must stay on the line of the word before it.
    bound: bool,
}

impl Word {
    fn text(&self) -> String {
        self.fragments.iter().map(|f| f.text.as_str()).collect()
    }

    fn width_with_space(&self) -> f32 {
        self.width + self.space.as_ref().map_or(0.0, |s| s.width)
    }
}

/// Breaks spans into lines no wider than `width`. Empty text gives no line; every line holds at least one character.
pub(in crate::sheet) fn wrap(spans: &[Span], width: f32, ruler: &impl Ruler) -> Vec<Line> {
    let words = words(spans, ruler);
    let mut setter =
        Setter { width, ruler, lines: Vec::new(), current: Vec::new(), x: 0.0, join: Join::Start };
    let mut rest = words.as_slice();
    while let Some(first) = rest.first() {
        let length = 1 + rest[1..].iter().take_while(|w| w.bound).count();
        let (cluster, after) = rest.split_at(length);
        let cluster_width = first.width + cluster[1..].iter().map(Word::width_with_space).sum::<f32>();
        if setter.fits(cluster_width, first.space.as_ref()) || cluster_width <= width + SLACK {
            if !setter.fits(cluster_width, first.space.as_ref()) {
                setter.end_line(Join::Space);
            }
            cluster.iter().for_each(|word| setter.push(word));
        } else {
            cluster.iter().for_each(|word| setter.place(word));
        }
        rest = after;
    }
    setter.end_line(Join::Space);
    setter.lines
}

/// Width below which a word, or a number and its unit, would be broken.
pub(in crate::sheet) fn least_width(spans: &[Span], ruler: &impl Ruler) -> f32 {
    let mut widest: f32 = 0.0;
    let mut cluster: f32 = 0.0;
    for word in words(spans, ruler) {
        cluster = if word.bound { cluster + word.width_with_space() } else { word.width };
        widest = widest.max(cluster);
    }
    widest
}

fn words(spans: &[Span], ruler: &impl Ruler) -> Vec<Word> {
    let mut words: Vec<Word> = Vec::new();
    let mut word = Word::default();
    for span in spans {
        for (index, part) in span.text.split(' ').enumerate() {
            if index > 0 {
                let space =
                    Fragment { text: " ".into(), style: span.style, width: ruler.width(" ", span.style) };
                if word.fragments.is_empty() {
                    // Leading or doubled space: keep only one, and none at the very start.
                    if !words.is_empty() {
                        word.space = Some(space);
                    }
                } else {
                    words.push(std::mem::take(&mut word));
                    word.space = Some(space);
                }
            }
            if !part.is_empty() {
                let width = ruler.width(part, span.style);
                word.width += width;
                word.fragments.push(Fragment { text: part.to_owned(), style: span.style, width });
            }
        }
    }
    if !word.fragments.is_empty() {
        words.push(word);
    }
    let texts: Vec<String> = words.iter().map(Word::text).collect();
    for index in 1..words.len() {
        words[index].bound = is_bound(&texts[index - 1], &texts[index]);
    }
    words
}

struct Setter<'a, R: Ruler> {
    width: f32,
    ruler: &'a R,
    lines: Vec<Line>,
    current: Vec<Fragment>,
    x: f32,
    /// How the line being set continues the one before it.
    join: Join,
}

impl<R: Ruler> Setter<'_, R> {
    /// Whether `width` more fits on the current line, after a space if something stands there already.
    fn fits(&self, width: f32, space: Option<&Fragment>) -> bool {
        let space = if self.current.is_empty() { 0.0 } else { space.map_or(0.0, |s| s.width) };
        self.x + space + width <= self.width + SLACK
    }

    fn push(&mut self, word: &Word) {
        if let (false, Some(space)) = (self.current.is_empty(), &word.space) {
            self.x += space.width;
            self.current.push(space.clone());
        }
        self.x += word.width;
        self.current.extend(word.fragments.iter().cloned());
    }

    /// Places one word, on a new line if it must, broken if even that is too narrow.
    fn place(&mut self, word: &Word) {
        if self.fits(word.width, word.space.as_ref()) {
            return self.push(word);
        }
        self.end_line(Join::Space);
        if word.width <= self.width + SLACK {
            return self.push(word);
        }
        for fragment in &word.fragments {
            self.place_broken(fragment);
        }
    }

    fn place_broken(&mut self, fragment: &Fragment) {
        let mut rest = fragment.text.as_str();
        while !rest.is_empty() {
            let room = self.width - self.x;
            let end = self.break_at(rest, fragment.style, room);
            if end == 0 {
                self.end_line(Join::Tight);
                continue;
            }
            let (head, tail) = rest.split_at(end);
            let width = self.ruler.width(head, fragment.style);
            self.x += width;
            self.current.push(Fragment { text: head.to_owned(), style: fragment.style, width });
            rest = tail;
            if !rest.is_empty() {
                self.end_line(Join::Tight);
            }
        }
    }

    /// Byte index at which to break `text` so that the part before it fits into `room`; at least one character when
    /// the line is empty.
    fn break_at(&self, text: &str, style: Style, room: f32) -> usize {
        let mut used = 0.0;
        let mut end = 0;
        for (index, character) in text.char_indices() {
            used += self.ruler.width(character.encode_utf8(&mut [0; 4]), style);
            if used > room + SLACK {
                break;
            }
            end = index + character.len_utf8();
        }
        // Kerning can make the whole a little wider than its letters.
        while end > 0 && self.ruler.width(&text[..end], style) > room + SLACK {
            end = text[..end].char_indices().last().map_or(0, |(index, _)| index);
        }
        if end == 0 && self.current.is_empty() {
            return text.chars().next().map_or(0, char::len_utf8);
        }
        if end == text.len() {
            return end;
        }
        let punctuation = |c: char| matches!(c, '-' | '/' | ',' | ')' | ']' | '}' | '·' | '–' | '_' | ';');
        match text[..end].rfind(punctuation) {
            Some(index) if index * 2 >= end => index + text[index..].chars().next().map_or(1, char::len_utf8),
            _ => end,
        }
    }

    fn end_line(&mut self, next: Join) {
        if self.current.is_empty() {
            return;
        }
        let mut pieces: Vec<Piece> = Vec::new();
        for fragment in self.current.drain(..) {
            match pieces.last_mut() {
                Some(last) if last.style == fragment.style => last.text.push_str(&fragment.text),
                _ => pieces.push(Piece {
                    text: fragment.text,
                    style: fragment.style,
                    x: 0.0,
                    width: 0.0,
                    join: if pieces.is_empty() { self.join } else { Join::Tight },
                }),
            }
        }
        let mut x = 0.0;
        for piece in &mut pieces {
            piece.x = x;
            piece.width = self.ruler.width(&piece.text, piece.style);
            x += piece.width;
        }
        let size = pieces.iter().map(|p| p.style.size).fold(0.0, f32::max);
        self.lines.push(Line { pieces, width: x, size });
        self.x = 0.0;
        self.join = next;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    struct Characters;
    impl Ruler for Characters {
        fn width(&self, text: &str, _: Style) -> f32 {
            text.chars().count() as f32
        }
    }

    fn lines(text: &str, width: f32) -> Vec<String> {
        wrap(&[Span { text: text.into(), style: Style::regular(10.0) }], width, &Characters)
            .into_iter()
            .map(|line| line.pieces.into_iter().map(|p| p.text).collect())
            .collect()
    }

    #[test]
    fn lines_break_at_spaces() {
        assert_eq!(lines("over the weir, thin stream", 10.0), ["over the", "weir, thin", "stream"]);
    }

    #[test]
    fn a_number_keeps_its_unit_on_the_line() {
        assert_eq!(lines("measure 10.0 L now", 12.0), ["measure", "10.0 L now"]);
    }

    #[test]
    fn a_bound_pair_wider_than_the_line_is_parted_all_the_same() {
        assert_eq!(lines("100000 mmol/L", 7.0), ["100000", "mmol/L"]);
    }

    #[test]
    fn a_long_word_breaks_after_punctuation_where_it_can() {
        assert_eq!(lines("1-hydroxyethane-diphosphonic", 18.0), ["1-hydroxyethane-", "diphosphonic"]);
        assert_eq!(lines("aaaaaaaaaaaa", 5.0), ["aaaaa", "aaaaa", "aa"]);
    }

    #[test]
    fn a_line_narrower_than_a_character_still_makes_progress() {
        assert_eq!(lines("abc", 0.5), ["a", "b", "c"]);
    }

    #[test]
    fn joins_rebuild_the_text() {
        let text = "Potassium hydroxide 45 % pentahydratedisodium x";
        let spans = [Span { text: text.into(), style: Style::regular(10.0) }];
        let mut rebuilt = String::new();
        for piece in wrap(&spans, 11.0, &Characters).iter().flat_map(|l| &l.pieces) {
            if piece.join == Join::Space {
                rebuilt.push(' ');
            }
            rebuilt.push_str(&piece.text);
        }
        assert_eq!(rebuilt, text);
    }

    #[test]
    fn empty_text_gives_no_line() {
        assert!(lines("", 10.0).is_empty());
    }
}
