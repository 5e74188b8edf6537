//! The five states a limit can be in, as the window shows them: a silhouette, a word and a colour, never colour alone.

use eframe::egui;
use eframe::egui::{Color32, Painter, Pos2, Rect, Shape, Stroke, pos2, vec2};

use super::Palette;

/// What the window says about a limit.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum State {
    /// Holds everywhere in the operating range, at the chosen confidence.
    Held,
    /// The numbers hold, but not at the chosen confidence.
    Unsure,
    /// Somewhere in the operating range it is not held.
    NotHeld,
    /// No dose can hold it.
    Infeasible,
    /// Nothing to say yet: no limit, no result.
    #[default]
    Unknown,
}

impl State {
    /// All states, best first.
    pub const ALL: [Self; 5] = [Self::Held, Self::Unsure, Self::NotHeld, Self::Infeasible, Self::Unknown];

    /// The word that stands beside the mark.
    pub fn word(self) -> &'static str {
        match self {
            Self::Held => "Held",
            Self::Unsure => "Unsure",
            Self::NotHeld => "Not held",
            Self::Infeasible => "Infeasible",
            Self::Unknown => "No limit yet",
        }
    }

    /// Colour of the mark and of the word.
    pub fn colour(self, palette: &Palette) -> Color32 {
        match self {
            Self::Held => palette.held,
            Self::Unsure => palette.unsure,
            Self::NotHeld => palette.not_held,
            Self::Infeasible => palette.infeasible,
            Self::Unknown => palette.ink2,
        }
    }

    /// Ground for text about this state.
    pub fn soft(self, palette: &Palette) -> Color32 {
        match self {
            Self::Held => palette.held_soft,
            Self::Unsure => palette.unsure_soft,
            Self::NotHeld => palette.not_held_soft,
            Self::Infeasible => palette.infeasible_soft,
            Self::Unknown => palette.grid,
        }
    }

    /// Draws the silhouette into the largest square inside `rect`.
    pub fn paint(self, painter: &Painter, rect: Rect, palette: &Palette) {
        let colour = self.colour(palette);
        let centre = rect.center();
        let half = rect.width().min(rect.height()) / 2.0;
        let stroke = Stroke::new((half * 0.24).max(1.5), palette.raised);
        let outline = Stroke::new((half * 0.2).max(1.5), colour);
        let at = |x: f32, y: f32| centre + vec2(x, y) * half;
        match self {
            Self::Held => {
                let square = Rect::from_center_size(centre, vec2(2.0, 2.0) * half);
                painter.rect_filled(square, half * 0.22, colour);
                painter.line(vec![at(-0.55, 0.02), at(-0.15, 0.45), at(0.6, -0.45)], stroke);
            }
            Self::Unsure => {
                let radius = half - outline.width / 2.0;
                painter.add(Shape::convex_polygon(half_disc(centre, radius), colour, Stroke::NONE));
                painter.circle_stroke(centre, radius, outline);
            }
            Self::NotHeld => {
                let corners = vec![at(0.0, -1.1), at(1.1, 0.0), at(0.0, 1.1), at(-1.1, 0.0)];
                painter.add(Shape::convex_polygon(corners, colour, Stroke::NONE));
                painter.line_segment([at(-0.36, -0.36), at(0.36, 0.36)], stroke);
                painter.line_segment([at(-0.36, 0.36), at(0.36, -0.36)], stroke);
            }
            Self::Infeasible => {
                let corners =
                    [(-1.0, 0.0), (-0.5, -0.87), (0.5, -0.87), (1.0, 0.0), (0.5, 0.87), (-0.5, 0.87)]
                        .map(|(x, y)| at(x * 0.95, y * 0.95));
                painter.add(Shape::closed_line(corners.to_vec(), outline));
                painter.line_segment([at(-0.42, 0.0), at(0.42, 0.0)], outline);
            }
            Self::Unknown => {
                let ring = ring_points(centre, half * 0.85);
                painter.extend(Shape::dashed_line(&ring, outline, half * 0.35, half * 0.32));
            }
        }
    }
}

fn half_disc(centre: Pos2, radius: f32) -> Vec<Pos2> {
    (0..=16_u8)
        .map(|i| {
            let angle = std::f32::consts::PI * (0.5 + f32::from(i) / 16.0);
            pos2(centre.x + radius * angle.cos(), centre.y + radius * angle.sin())
        })
        .collect()
}

fn ring_points(centre: Pos2, radius: f32) -> Vec<Pos2> {
    (0..=32_u8)
        .map(|i| centre + radius * egui::Vec2::angled(std::f32::consts::TAU * f32::from(i) / 32.0))
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_state_has_its_own_word_and_colour() {
        for theme in [egui::Theme::Light, egui::Theme::Dark] {
            let palette = Palette::of(theme);
            for (i, a) in State::ALL.iter().enumerate() {
                for b in &State::ALL[..i] {
                    assert_ne!(a.word(), b.word());
                    assert_ne!(a.colour(palette), b.colour(palette));
                }
            }
        }
    }

    #[test]
    fn the_words_never_promise_safety() {
        for state in State::ALL {
            assert!(!state.word().to_lowercase().contains("safe"));
        }
    }
}
