//! The text roles: five sizes, two weights. Widgets name a role, so a size is changed in one place.

use std::sync::LazyLock;

use eframe::egui::{Color32, FontFamily, FontId, RichText, TextStyle};

use super::fonts::BOLD;

static BOLD_FAMILY: LazyLock<FontFamily> = LazyLock::new(|| FontFamily::Name(BOLD.into()));

/// A text role.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Text {
    /// 11, axis numbers and evidence.
    Axis,
    /// 11 bold, words under a rail.
    AxisStrong,
    /// 12, second lines.
    Small,
    /// 12 bold.
    SmallStrong,
    /// 13, most text.
    Body,
    /// 13 bold.
    Strong,
    /// 14, numbers in fields.
    Value,
    /// 14 bold, headings and the numbers that matter most.
    Heading,
    /// 16, the verdict.
    Verdict,
    /// 16 bold, the word of the verdict.
    VerdictStrong,
}

impl Text {
    /// All roles, smallest first.
    pub const ALL: [Self; 10] = [
        Self::Axis,
        Self::AxisStrong,
        Self::Small,
        Self::SmallStrong,
        Self::Body,
        Self::Strong,
        Self::Value,
        Self::Heading,
        Self::Verdict,
        Self::VerdictStrong,
    ];

    /// Size in points.
    pub fn size(self) -> f32 {
        match self {
            Self::Axis | Self::AxisStrong => 11.0,
            Self::Small | Self::SmallStrong => 12.0,
            Self::Body | Self::Strong => 13.0,
            Self::Value | Self::Heading => 14.0,
            Self::Verdict | Self::VerdictStrong => 16.0,
        }
    }

    fn is_strong(self) -> bool {
        matches!(
            self,
            Self::AxisStrong | Self::SmallStrong | Self::Strong | Self::Heading | Self::VerdictStrong
        )
    }

    /// Font for painting.
    pub fn font(self) -> FontId {
        let family = if self.is_strong() { BOLD_FAMILY.clone() } else { FontFamily::Proportional };
        FontId::new(self.size(), family)
    }

    /// Name under which the role stands among egui's text styles.
    pub fn style(self) -> TextStyle {
        let name = match self {
            Self::Small => return TextStyle::Small,
            Self::Body => return TextStyle::Body,
            Self::Heading => return TextStyle::Heading,
            Self::Axis => "axis",
            Self::AxisStrong => "axis strong",
            Self::SmallStrong => "small strong",
            Self::Strong => "strong",
            Self::Value => "value",
            Self::Verdict => "verdict",
            Self::VerdictStrong => "verdict strong",
        };
        TextStyle::Name(name.into())
    }

    /// Text for a label in this role.
    pub fn rich(self, text: impl Into<String>, colour: Color32) -> RichText {
        RichText::new(text).font(self.font()).color(colour)
    }
}
