//! Colours by role, read from `assets/theme.ron`, where light and dark stand side by side.

use eframe::egui;
use std::sync::LazyLock;

use eframe::egui::{Color32, Theme};
use serde::Deserialize;

use super::SERIES_COUNT;

const SOURCE: &str = include_str!("../../../assets/theme.ron");

static PALETTES: LazyLock<[Palette; 2]> = LazyLock::new(|| {
    let sheet: ColourSheet =
        ron::from_str(SOURCE).expect("assets/theme.ron is compiled in and checked by a test");
    [sheet.pick(|pair| pair.0.0), sheet.pick(|pair| pair.1.0)]
});

/// One colour written as six hex digits.
#[derive(Clone, Copy, Deserialize)]
#[serde(try_from = "String")]
struct Hex(Color32);

impl TryFrom<String> for Hex {
    type Error = String;

    fn try_from(text: String) -> Result<Self, String> {
        let digits = u32::from_str_radix(&text, 16)
            .ok()
            .filter(|_| text.len() == 6)
            .ok_or_else(|| format!("“{text}” is not a colour of six hex digits"))?;
        let [_, red, green, blue] = digits.to_be_bytes();
        Ok(Self(Color32::from_rgb(red, green, blue)))
    }
}

/// Light, then dark.
type Pair = (Hex, Hex);

macro_rules! roles {
    ($($(#[$doc:meta])* $role:ident,)+) => {
        /// The colours of one theme, by role.
        #[derive(Clone, Debug, PartialEq)]
        pub struct Palette {
            $($(#[$doc])* pub $role: Color32,)+
            /// Curves and shares; use them through [`super::Series`], which adds the dash.
            pub series: [Color32; SERIES_COUNT],
        }

        /// The file: every role in both themes.
        #[derive(Deserialize)]
        #[serde(deny_unknown_fields)]
        struct ColourSheet {
            $($role: Pair,)+
            series: [Pair; SERIES_COUNT],
        }

        impl ColourSheet {
            fn pick(&self, side: impl Fn(&Pair) -> Color32) -> Palette {
                Palette {
                    $($role: side(&self.$role),)+
                    series: std::array::from_fn(|i| side(&self.series[i])),
                }
            }
        }
    };
}

roles! {
    /// Behind the panels.
    desk,
    /// Panels: most text stands on it.
    panel,
    /// Fields, wells and cards.
    raised,
    /// Hairlines and field outlines.
    line,
    /// Plot grids and empty tracks.
    grid,
    /// Main text.
    ink,
    /// Secondary text, units, axis numbers.
    ink2,
    /// What can be taken hold of: handles, focus ring, main button.
    accent,
    /// Selection and operating range.
    accent_soft,
    /// Text on `accent` or on a series colour.
    on_accent,
    /// The limit is held.
    held,
    /// Ground under a held verdict.
    held_soft,
    /// The numbers hold, the confidence does not.
    unsure,
    /// Ground under an unsure verdict.
    unsure_soft,
    /// The limit is not held.
    not_held,
    /// Ground under a verdict that is not held.
    not_held_soft,
    /// No dose can hold it.
    infeasible,
    /// Ground under an infeasible verdict.
    infeasible_soft,
    /// Ceilings and floors.
    limit_plate,
    /// The liquid in the picture of the tank.
    water,
}

impl Palette {
    /// The palette of a theme, for code that has no `Ui` at hand.
    pub fn of(theme: Theme) -> &'static Self {
        Self::of_dark(theme == Theme::Dark)
    }

    pub(super) fn of_dark(dark: bool) -> &'static Self {
        &PALETTES[usize::from(dark)]
    }
}

/// WCAG 2 contrast ratio of two opaque colours, 1 to 21.
pub fn contrast(a: Color32, b: Color32) -> f32 {
    let (a, b) = (luminance(a), luminance(b));
    (a.max(b) + 0.05) / (a.min(b) + 0.05)
}

fn luminance(colour: Color32) -> f32 {
    let linear = egui::Rgba::from(colour);
    0.2126 * linear.r() + 0.7152 * linear.g() + 0.0722 * linear.b()
}

#[cfg(test)]
mod tests {
    use super::*;

    const THEMES: [Theme; 2] = [Theme::Light, Theme::Dark];

    fn assert_readable(what: &str, ink: Color32, ground: Color32) {
        let ratio = contrast(ink, ground);
        assert!(ratio >= 4.5, "{what}: {ratio:.2}:1");
    }

    #[test]
    fn contrast_of_black_on_white_is_21() {
        assert!((contrast(Color32::BLACK, Color32::WHITE) - 21.0).abs() < 0.01);
    }

    #[test]
    fn text_roles_are_readable_on_panel_and_raised() {
        for theme in THEMES {
            let p = Palette::of(theme);
            let mut roles = vec![
                ("ink", p.ink),
                ("ink2", p.ink2),
                ("accent", p.accent),
                ("held", p.held),
                ("unsure", p.unsure),
                ("not held", p.not_held),
                ("infeasible", p.infeasible),
                ("limit plate", p.limit_plate),
            ];
            roles.extend(p.series.map(|colour| ("series", colour)));
            for (role, colour) in roles {
                assert_readable(&format!("{theme:?} {role} on panel"), colour, p.panel);
                assert_readable(&format!("{theme:?} {role} on raised"), colour, p.raised);
            }
        }
    }

    #[test]
    fn ink_is_readable_on_every_soft_ground_and_on_the_desk() {
        for theme in THEMES {
            let p = Palette::of(theme);
            let grounds = [
                p.held_soft,
                p.unsure_soft,
                p.not_held_soft,
                p.infeasible_soft,
                p.accent_soft,
                p.grid,
                p.desk,
            ];
            for ground in grounds {
                assert_readable(&format!("{theme:?} ink on soft"), p.ink, ground);
            }
            assert_readable(&format!("{theme:?} ink2 on desk"), p.ink2, p.desk);
        }
    }

    #[test]
    fn text_on_filled_colours_is_readable() {
        for theme in THEMES {
            let p = Palette::of(theme);
            assert_readable(&format!("{theme:?} selected"), p.accent, p.accent_soft);
            for ground in p.series.into_iter().chain([p.accent]) {
                assert_readable(&format!("{theme:?} on_accent"), p.on_accent, ground);
            }
        }
    }

    #[test]
    fn marks_stand_out_from_the_ground_they_are_drawn_on() {
        for theme in THEMES {
            let p = Palette::of(theme);
            for (mark, ground) in [
                (p.held, p.held_soft),
                (p.unsure, p.unsure_soft),
                (p.not_held, p.not_held_soft),
                (p.infeasible, p.infeasible_soft),
                (p.accent, p.accent_soft),
            ] {
                assert!(contrast(mark, ground) >= 3.0, "{theme:?} {mark:?}");
            }
        }
    }
}
