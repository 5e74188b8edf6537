//! Hatching of a rectangle. Lines are clipped by arithmetic, not by a clip rectangle, so that a hatch costs no extra
//! draw call; they sit on a fixed grid of the screen, so that the pattern stands still while the rectangle changes.

use eframe::egui;
use eframe::egui::{Painter, Rect, Shape, Stroke, pos2};

/// Which way hatch lines lean.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Lean {
    /// Like a slash.
    Rising,
    /// Like a backslash.
    Falling,
}

/// Hatches `rect` with lines `spacing` points apart, measured across the lines.
pub fn hatch(painter: &Painter, rect: Rect, lean: Lean, spacing: f32, stroke: Stroke) {
    if painter.clip_rect().intersects(rect) {
        painter.extend(lines(rect, lean, spacing).map(|points| Shape::line_segment(points, stroke)));
    }
}

fn lines(rect: Rect, lean: Lean, spacing: f32) -> impl Iterator<Item = [egui::Pos2; 2]> {
    // Distance between neighbouring lines along either axis.
    let pitch = spacing.max(1.0) * std::f32::consts::SQRT_2;
    let (first, last) = match lean {
        Lean::Rising => (rect.left() + rect.top(), rect.right() + rect.bottom()),
        Lean::Falling => (rect.top() - rect.right(), rect.bottom() - rect.left()),
    };
    let start = (first / pitch).ceil() * pitch;
    let empty = !rect.is_positive() || !rect.is_finite();
    std::iter::successors(Some(start), move |c| Some(c + pitch)).take_while(move |c| !empty && *c < last).map(
        move |c| match lean {
            Lean::Rising => {
                let left = rect.left().max(c - rect.bottom());
                let right = rect.right().min(c - rect.top());
                [pos2(left, c - left), pos2(right, c - right)]
            }
            Lean::Falling => {
                let left = rect.left().max(rect.top() - c);
                let right = rect.right().min(rect.bottom() - c);
                [pos2(left, c + left), pos2(right, c + right)]
            }
        },
    )
}

#[cfg(test)]
mod tests {
    use super::*;
    use eframe::egui::vec2;

    #[test]
    fn lines_stay_inside_and_lean_the_right_way() {
        let rect = Rect::from_min_size(pos2(13.0, 7.0), vec2(60.0, 18.0));
        for (lean, sign) in [(Lean::Rising, -1.0), (Lean::Falling, 1.0)] {
            let all: Vec<_> = lines(rect, lean, 4.0).collect();
            assert!(all.len() > 10, "{lean:?}");
            for [a, b] in all {
                assert!(rect.expand(0.01).contains(a) && rect.expand(0.01).contains(b));
                assert!(((b.y - a.y) - sign * (b.x - a.x)).abs() < 1e-3, "{lean:?}");
            }
        }
    }

    #[test]
    fn an_empty_rectangle_has_no_lines() {
        let flat = Rect::from_min_size(pos2(3.0, 3.0), vec2(0.0, 20.0));
        assert_eq!(lines(flat, Lean::Rising, 4.0).count(), 0);
        assert_eq!(lines(Rect::NOTHING, Lean::Rising, 4.0).count(), 0);
    }

    #[test]
    fn the_pattern_stands_still_when_the_rectangle_grows() {
        let small = Rect::from_min_size(pos2(0.0, 0.0), vec2(20.0, 20.0));
        let large = Rect::from_min_size(pos2(0.0, 0.0), vec2(60.0, 20.0));
        let offsets = |rect| -> Vec<f32> { lines(rect, Lean::Rising, 5.0).map(|[a, _]| a.x + a.y).collect() };
        let (few, many) = (offsets(small), offsets(large));
        assert!(few.iter().zip(&many).all(|(a, b)| (a - b).abs() < 1e-3));
    }
}
