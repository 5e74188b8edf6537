//! What an input rests on: three pips and a word. Fewer filled pips, weaker ground.

use eframe::egui;
use eframe::egui::{Rect, Response, Role, Sense, Stroke, StrokeKind, Ui, WidgetInfo, pos2, vec2};

use super::band::to_pixel;
use crate::window::theme::{HAIRLINE, Text, palette};

/// What an input rests on, strongest first.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Evidence {
    /// Measured today.
    Today,
    /// Measured, but earlier.
    Earlier,
    /// Worked out from something measured.
    Inferred,
    /// Nobody measured it.
    Assumed,
}

impl Evidence {
    /// The word.
    pub fn word(self) -> &'static str {
        match self {
            Self::Today => "today",
            Self::Earlier => "earlier",
            Self::Inferred => "inferred",
            Self::Assumed => "assumed",
        }
    }

    fn filled_pips(self) -> usize {
        match self {
            Self::Today => 3,
            Self::Earlier => 2,
            Self::Inferred => 1,
            Self::Assumed => 0,
        }
    }
}

const PIP: egui::Vec2 = vec2(5.0, 9.0);
const PITCH: f32 = 6.0;

/// Shows pips and words: the word, then `detail` ("today" + "07:30", "earlier," + "5 d").
pub fn evidence(ui: &mut Ui, rests_on: Evidence, detail: &str) -> Response {
    let palette = palette(ui);
    let space = if detail.is_empty() || detail.starts_with(',') { "" } else { " " };
    let text = format!("{}{space}{detail}", rests_on.word());
    let galley = ui.painter().layout_no_wrap(text.clone(), Text::Axis.font(), palette.ink);
    let pips = 3.0 * PITCH + 3.0;
    let size = vec2(pips + galley.size().x, galley.size().y);
    let (rect, response) = ui.allocate_exact_size(size, Sense::hover());
    response.widget_info(|| WidgetInfo::labeled(Role::Image, true, format!("Evidence: {text}")));
    if ui.is_rect_visible(rect) {
        let painter = ui.painter();
        for i in 0..3_u8 {
            let left = to_pixel(painter, rect.left() + f32::from(i) * PITCH);
            let top = to_pixel(painter, rect.center().y - PIP.y / 2.0);
            let pip = Rect::from_min_size(pos2(left, top), PIP);
            if usize::from(i) < rests_on.filled_pips() {
                painter.rect_filled(pip, 0.0, palette.ink2);
            } else {
                painter.rect_stroke(pip, 0.0, Stroke::new(HAIRLINE, palette.ink2), StrokeKind::Inside);
            }
        }
        painter.galley(rect.min + vec2(pips, 0.0), galley, palette.ink);
    }
    response
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::window::widget::lab;
    use egui_kittest::kittest::Queryable as _;

    #[test]
    fn evidence_reads_as_word_and_detail() {
        let mut harness = lab([640.0, 400.0], (), |ui, ()| {
            evidence(ui, Evidence::Today, "07:30");
            evidence(ui, Evidence::Inferred, ", assay 12 d");
            evidence(ui, Evidence::Assumed, "");
        });
        harness.run();
        harness.get_by_label("Evidence: today 07:30");
        harness.get_by_label("Evidence: inferred, assay 12 d");
        harness.get_by_label("Evidence: assumed");
    }

    #[test]
    fn weaker_ground_fills_fewer_pips() {
        let order = [Evidence::Today, Evidence::Earlier, Evidence::Inferred, Evidence::Assumed];
        assert!(order.windows(2).all(|pair| pair[0].filled_pips() > pair[1].filled_pips()));
    }
}
