//! The ledger bar: who holds the agent, as shares of one bar. Shares differ by pattern as well as by colour, and carry
//! their name; those too narrow for a name have it under the bar, and the narrowest leave it to the table.

use eframe::egui::{
    Color32, Painter, Rangef, Rect, Response, Role, Sense, Stroke, Ui, WidgetInfo, pos2, vec2,
};

use super::band::to_pixel;
use super::{Lean, fixed, hatch};
use crate::window::theme::{Palette, Text, palette};

const BAR: f32 = 26.0;
const LABEL_ROW: f32 = 16.0;
/// Shares under this are only in the table.
const LEAST_NAMED: f64 = 0.02;

/// How a share is filled.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Fill {
    /// Plain colour.
    #[default]
    Solid,
    /// Hatched over a lighter tone.
    Hatched(Lean),
}

/// One share of the bar.
#[derive(Clone, Debug, PartialEq)]
pub struct Share<'a> {
    /// Who holds it, short: "copper".
    pub label: &'a str,
    /// Part of the whole, 0 to 1.
    pub part: f64,
    /// Number of the series colour.
    pub series: usize,
    /// Solid or hatched.
    pub fill: Fill,
}

/// Shows the shares side by side over the available width. `name` says what is shared out.
pub fn ledger_bar(ui: &mut Ui, name: &str, shares: &[Share<'_>]) -> Response {
    let size = vec2(ui.available_width(), BAR + LABEL_ROW);
    let (rect, response) = ui.allocate_exact_size(size, Sense::hover());
    response.widget_info(|| WidgetInfo::labeled(Role::Image, true, spoken(name, shares)));
    if ui.is_rect_visible(rect) {
        let bar = Rect::from_min_size(rect.min, vec2(rect.width(), BAR));
        paint(ui.painter(), bar, shares, palette(ui));
    }
    response
}

/// The key of a share, for the rows of a table. Its row names it, so it stays silent.
pub fn swatch(ui: &mut Ui, series: usize, fill: Fill) -> Response {
    let (rect, response) = ui.allocate_exact_size(vec2(14.0, 12.0), Sense::hover());
    if ui.is_rect_visible(rect) {
        let palette = palette(ui);
        paint_fill(ui.painter(), rect, colour_of(palette, series), fill, palette);
    }
    response
}

fn colour_of(palette: &Palette, series: usize) -> Color32 {
    palette.series[series % palette.series.len()]
}

fn percent(part: f64) -> String {
    if part > 0.0 && part < 0.01 { "under 1 %".to_owned() } else { format!("{} %", fixed(part * 100.0, 0)) }
}

fn spoken(name: &str, shares: &[Share<'_>]) -> String {
    let parts: Vec<String> =
        shares.iter().map(|share| format!("{} {}", share.label, percent(share.part))).collect();
    format!("{name}: {}", parts.join(", "))
}

fn paint(painter: &Painter, bar: Rect, shares: &[Share<'_>], palette: &Palette) {
    painter.rect_filled(bar, 0.0, palette.grid);
    let total: f64 = shares.iter().map(|share| share.part.max(0.0)).sum();
    // Shares of a whole leave the rest of the bar empty; more than the whole is squeezed in.
    let scale = f64::from(bar.width()) / total.max(1.0);
    let mut left = bar.left();
    let mut under = Rangef::new(bar.left(), bar.left());
    for share in shares {
        let right = (left + (share.part.max(0.0) * scale) as f32).min(bar.right());
        let (from, to) = (to_pixel(painter, left), to_pixel(painter, right));
        left = right;
        if to <= from {
            continue;
        }
        let part = Rect::from_x_y_ranges(from..=to, bar.y_range());
        paint_fill(painter, part, colour_of(palette, share.series), share.fill, palette);
        if to < bar.right() {
            painter.vline(to - 0.5, bar.y_range(), Stroke::new(1.0, palette.panel));
        }
        if share.part >= LEAST_NAMED {
            paint_name(painter, bar, part, share, &mut under, palette);
        }
    }
}

fn paint_fill(painter: &Painter, rect: Rect, colour: Color32, fill: Fill, palette: &Palette) {
    match fill {
        Fill::Solid => {
            painter.rect_filled(rect, 0.0, colour);
        }
        Fill::Hatched(lean) => {
            let tone = palette.panel.lerp_to_gamma(colour, 0.45);
            painter.rect_filled(rect, 0.0, tone);
            hatch(painter, rect, lean, 4.0, Stroke::new(1.8, colour));
        }
    }
}

/// Inside the share when it fits, else under the bar when there is still room.
fn paint_name(
    painter: &Painter,
    bar: Rect,
    part: Rect,
    share: &Share<'_>,
    under: &mut Rangef,
    palette: &Palette,
) {
    let text = format!("{} {}", share.label, percent(share.part));
    let inside = match share.fill {
        Fill::Solid => palette.on_accent,
        Fill::Hatched(_) => palette.ink,
    };
    let galley = painter.layout_no_wrap(text.clone(), Text::SmallStrong.font(), inside);
    if galley.size().x + 18.0 <= part.width() {
        let at = pos2(part.left() + 9.0, part.center().y - galley.size().y / 2.0);
        if share.fill != Fill::Solid {
            let plate = Rect::from_min_size(at, galley.size()).expand2(vec2(4.0, 0.0));
            painter.rect_filled(plate, 2.0, palette.panel);
        }
        painter.galley(at, galley, inside);
        return;
    }
    let galley = painter.layout_no_wrap(text, Text::Axis.font(), palette.ink2);
    let width = galley.size().x;
    let left = (part.center().x - width / 2.0).clamp(bar.left(), (bar.right() - width).max(bar.left()));
    if left >= under.max {
        painter.galley(pos2(left, bar.bottom() + 1.0), galley, palette.ink2);
        *under = Rangef::new(under.min, left + width + 8.0);
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::window::widget::lab;
    use egui_kittest::kittest::Queryable as _;

    #[test]
    fn the_bar_reads_every_share_even_those_too_narrow_to_draw() {
        let mut harness = lab([640.0, 400.0], (), |ui, ()| {
            let share = |label, part, series| Share { label, part, series, fill: Fill::Solid };
            let shares = [share("copper", 0.499, 0), share("acid", 0.431, 3), share("iron", 0.004, 1)];
            ledger_bar(ui, "Who holds the HEDP", &shares);
        });
        harness.run();
        harness.get_by_label("Who holds the HEDP: copper 50 %, acid 43 %, iron under 1 %");
    }
}
