//! The window's font: one merged family in regular and bold, with every sign the program shows.
//!
//! egui's own fonts stay behind it for letters somebody types that ours lacks; the test below makes sure that nothing
//! the program itself writes falls through to them, because mixed fonts in one line look broken.

use eframe::egui;
use std::sync::Arc;

use eframe::egui::{FontData, FontDefinitions, FontFamily};

const REGULAR_BYTES: &[u8] = include_bytes!("../../../assets/fonts/sans-regular.ttf");
const BOLD_BYTES: &[u8] = include_bytes!("../../../assets/fonts/sans-bold.ttf");

const REGULAR: &str = "regular";
/// Name of the bold family; also the name of its font.
pub(super) const BOLD: &str = "bold";

/// Width of the space between thousands, as a part of a full space: half of one is hard to see.
const THIN_SPACE_WIDTH: f32 = 0.75;

pub(super) fn install(ctx: &egui::Context) {
    ctx.set_fonts(definitions());
}

fn definitions() -> FontDefinitions {
    let mut fonts = FontDefinitions::default();
    for (name, bytes) in [(REGULAR, REGULAR_BYTES), (BOLD, BOLD_BYTES)] {
        let mut data = FontData::from_static(bytes);
        data.tweak.thin_space_width = THIN_SPACE_WIDTH;
        fonts.font_data.insert(name.to_owned(), Arc::new(data));
    }
    let fallback = fonts.families.get(&FontFamily::Proportional).cloned().unwrap_or_default();
    let with_fallback = |name: &str| {
        let mut family = vec![name.to_owned()];
        family.extend(fallback.iter().cloned());
        family
    };
    for (family, name) in [
        (FontFamily::Proportional, REGULAR),
        // Digits are tabular, so columns of numbers need no second typeface.
        (FontFamily::Monospace, REGULAR),
        (FontFamily::Name(BOLD.into()), BOLD),
    ] {
        fonts.families.insert(family, with_fallback(name));
    }
    fonts
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::window::theme::{Text, install};

    /// Every sign outside plain ASCII that the program writes itself.
    const USED: &str =
        "⁰¹²³⁴⁵⁶⁷⁸⁹⁺⁻₀₁₂₃₄₅₆₇₈₉₊₋ₓ°℃℉µμ·±×÷ΣΔ√≤≥≈≠−–—…‰½“”‘’′←→↑↓↔⇌▲▼▶◀▸▾●○◆◇■□⬡☐☑✓✔✗✘⚠αβγσ£€§";

    fn installed() -> egui::Context {
        let ctx = egui::Context::default();
        install(&ctx);
        // Fonts become available with the first pass.
        ctx.run_ui(egui::RawInput::default(), |_| {}).textures_delta.clear();
        ctx
    }

    #[test]
    fn our_own_fonts_hold_every_sign_that_is_written() {
        let ctx = installed();
        for (family, name) in [(FontFamily::Proportional, REGULAR), (FontFamily::Name(BOLD.into()), BOLD)] {
            ctx.fonts_mut(|fonts| {
                let known = fonts.characters(&family);
                for sign in USED.chars().chain(' '..='~') {
                    let from = known.get(&sign).map(Vec::as_slice).unwrap_or_default();
                    assert!(from.iter().any(|f| f == name), "{sign} in {family:?}");
                }
            });
        }
    }

    #[test]
    fn thin_spaces_between_thousands_are_drawn() {
        let ctx = installed();
        ctx.fonts_mut(|fonts| {
            assert!(fonts.has_glyph(&Text::Body.font(), '\u{2009}'));
            assert!(fonts.has_glyph(&Text::Strong.font(), '\u{202F}'));
        });
    }

    #[test]
    fn rows_are_not_taller_than_the_text_needs() {
        let ctx = installed();
        ctx.fonts_mut(|fonts| {
            for role in Text::ALL {
                let height = fonts.row_height(&role.font()) / role.size();
                assert!((1.25..1.45).contains(&height), "{role:?}: {height}");
            }
        });
    }

    #[test]
    fn digits_are_equally_wide() {
        let ctx = installed();
        ctx.fonts_mut(|fonts| {
            let font = Text::Value.font();
            let one = fonts.glyph_width(&font, '1');
            assert!(('0'..='9').all(|digit| fonts.glyph_width(&font, digit) == one));
        });
    }
}
