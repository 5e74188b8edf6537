//! egui's own style in both themes: flat, hairlines instead of shadows, nothing that grows on hover.

use eframe::egui;
use std::collections::BTreeMap;

use eframe::egui::epaint::Shadow;
use eframe::egui::style::{Selection, WidgetVisuals, Widgets};
use eframe::egui::{
    Color32, Context, CornerRadius, FontFamily, FontId, Margin, Stroke, Style, TextStyle, Theme, Visuals,
    vec2,
};

use super::{Palette, Text};

/// Corner radius of fields, buttons and cards.
pub const RADIUS: u8 = 4;
/// Width of separating lines.
pub const HAIRLINE: f32 = 1.0;
/// Margin inside a panel.
pub const INSET: f32 = 16.0;
/// Space between groups.
pub const GAP: f32 = 12.0;
/// Smallest side of anything that can be clicked or dragged.
pub const MIN_HIT: f32 = 24.0;

pub(super) fn install(ctx: &Context) {
    for theme in [Theme::Light, Theme::Dark] {
        ctx.style_mut_of(theme, |style| apply(style, theme));
    }
}

fn apply(style: &mut Style, theme: Theme) {
    style.text_styles = text_styles();
    style.visuals = visuals(theme);
    style.animation_time = 0.08;
    style.interaction.selectable_labels = false;

    let spacing = &mut style.spacing;
    spacing.item_spacing = vec2(8.0, 6.0);
    spacing.button_padding = vec2(10.0, 4.0);
    spacing.interact_size = vec2(40.0, MIN_HIT);
    spacing.menu_margin = Margin::same(4);
    spacing.window_margin = Margin::same(12);
    spacing.icon_width = 16.0;
    spacing.icon_width_inner = 10.0;
    spacing.combo_width = 64.0;
    spacing.tooltip_width = 340.0;
    spacing.scroll = egui::style::ScrollStyle::thin();
}

fn text_styles() -> BTreeMap<TextStyle, FontId> {
    let mut styles: BTreeMap<_, _> = Text::ALL.into_iter().map(|role| (role.style(), role.font())).collect();
    styles.insert(TextStyle::Button, Text::Body.font());
    let monospace = FontId::new(Text::Body.size(), FontFamily::Monospace);
    styles.insert(TextStyle::Monospace, monospace);
    styles
}

fn visuals(theme: Theme) -> Visuals {
    let palette = Palette::of(theme);
    let radius = CornerRadius::same(RADIUS);
    let mut visuals = theme.default_visuals();

    visuals.widgets = widgets(palette, radius);
    // The stroke is also the frame of a text field that has the keyboard, hence its width.
    let frame = Stroke::new(2.0 * HAIRLINE, palette.accent);
    visuals.selection = Selection { bg_fill: palette.accent_soft, stroke: frame };
    visuals.text_cursor.stroke = Stroke::new(2.0, palette.accent);
    visuals.hyperlink_color = palette.accent;
    visuals.weak_text_color = Some(palette.ink2);
    visuals.faint_bg_color = palette.grid;
    visuals.extreme_bg_color = palette.raised;
    visuals.text_edit_bg_color = Some(palette.raised);
    visuals.code_bg_color = palette.grid;
    visuals.warn_fg_color = palette.unsure;
    visuals.error_fg_color = palette.not_held;
    visuals.panel_fill = palette.panel;
    visuals.window_fill = palette.panel;
    visuals.window_stroke = Stroke::new(HAIRLINE, palette.line);
    visuals.window_corner_radius = radius;
    visuals.menu_corner_radius = radius;
    visuals.window_shadow = Shadow::NONE;
    visuals.popup_shadow = Shadow::NONE;
    visuals.indent_has_left_vline = false;
    visuals.slider_trailing_fill = true;
    visuals
}

fn widgets(palette: &Palette, corner_radius: CornerRadius) -> Widgets {
    let look = |fill: Color32, outline: Stroke, ink: Color32| WidgetVisuals {
        bg_fill: fill,
        weak_bg_fill: fill,
        bg_stroke: outline,
        corner_radius,
        fg_stroke: Stroke::new(HAIRLINE, ink),
        expansion: 0.0,
    };
    let line = Stroke::new(HAIRLINE, palette.line);
    Widgets {
        noninteractive: look(palette.panel, line, palette.ink),
        inactive: look(palette.raised, line, palette.ink),
        hovered: look(palette.raised, Stroke::new(HAIRLINE, palette.accent), palette.ink),
        // Also the look of whatever has the keyboard: the ring must be seen.
        active: look(palette.accent_soft, Stroke::new(2.0, palette.accent), palette.ink),
        open: look(palette.accent_soft, line, palette.ink),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::window::theme;

    #[test]
    fn both_themes_are_flat_and_use_the_panel_colour() {
        let ctx = Context::default();
        theme::install(&ctx);
        for theme in [Theme::Light, Theme::Dark] {
            let style = ctx.style_of(theme);
            assert_eq!(style.visuals.panel_fill, Palette::of(theme).panel);
            assert_eq!(style.visuals.window_shadow, Shadow::NONE);
            assert_eq!(style.visuals.dark_mode, theme == Theme::Dark);
        }
    }

    #[test]
    fn every_text_role_is_a_named_style() {
        let styles = text_styles();
        for role in Text::ALL {
            assert_eq!(styles.get(&role.style()), Some(&role.font()), "{role:?}");
        }
    }
}
