//! The units in which a shop states what is in a bath, and their factor to one base unit per dimension.

use serde::{Deserialize, Serialize};

/// What a unit measures; conversion between dimensions needs a molar mass, a density or an assay.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Dimension {
    /// Mass per litre of bath; base g/L.
    Mass,
    /// Amount of substance per litre of bath; base mol/L.
    Mole,
    /// Volume of a liquid product per litre of bath; base mL/L.
    Volume,
    /// Water hardness; base mol/L of calcium plus magnesium.
    Hardness,
}

/// A unit of concentration as a shop writes it.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Serialize, Deserialize)]
pub enum Unit {
    /// g/L
    #[serde(rename = "g/L")]
    GramPerLitre,
    /// mg/L, the trade's ppm in water
    #[serde(rename = "mg/L")]
    MilligramPerLitre,
    /// mol/L
    #[serde(rename = "mol/L")]
    MolePerLitre,
    /// mmol/L
    #[serde(rename = "mmol/L")]
    MillimolePerLitre,
    /// mL of a liquid product per litre of bath
    #[serde(rename = "mL/L")]
    MillilitrePerLitre,
    /// avoirdupois ounce per US gallon
    #[serde(rename = "oz/gal")]
    OuncePerGallon,
    /// gram per 100 mL
    #[serde(rename = "% w/v")]
    PercentWeightPerVolume,
    /// mL of a liquid product per 100 mL
    #[serde(rename = "% v/v")]
    PercentVolume,
    /// hardness as mg of calcium carbonate per litre
    #[serde(rename = "mg/L CaCO3")]
    MilligramCalciumCarbonatePerLitre,
    /// German degree of hardness
    #[serde(rename = "°dH")]
    GermanDegree,
    /// French degree of hardness
    #[serde(rename = "°fH")]
    FrenchDegree,
    /// grain of calcium carbonate per US gallon
    #[serde(rename = "gpg")]
    GrainPerGallon,
}

/// Molar mass of calcium carbonate in g/mol, for hardness units (IUPAC 2021 abridged weights).
const CALCIUM_CARBONATE_G_MOL: f64 = 40.078 + 12.011 + 3.0 * 15.999;
/// Avoirdupois ounce per US gallon in g/L: 28.349523125 g / 3.785411784 L.
const OUNCE_PER_GALLON_G_L: f64 = 28.349_523_125 / super::LITRES_PER_US_GALLON;
/// Grain per US gallon in g/L: 0.06479891 g / 3.785411784 L.
const GRAIN_PER_GALLON_G_L: f64 = 0.064_798_91 / super::LITRES_PER_US_GALLON;
/// One German degree is 10 mg/L CaO (molar mass 56.077 g/mol).
const GERMAN_DEGREE_MOL_L: f64 = 0.010 / (40.078 + 15.999);

impl Unit {
    /// Every unit, in the order in which menus show them.
    pub const ALL: [Unit; 12] = [
        Unit::GramPerLitre,
        Unit::MilligramPerLitre,
        Unit::MolePerLitre,
        Unit::MillimolePerLitre,
        Unit::MillilitrePerLitre,
        Unit::OuncePerGallon,
        Unit::PercentWeightPerVolume,
        Unit::PercentVolume,
        Unit::MilligramCalciumCarbonatePerLitre,
        Unit::GermanDegree,
        Unit::FrenchDegree,
        Unit::GrainPerGallon,
    ];

    /// The unit as it is written.
    pub fn symbol(self) -> &'static str {
        match self {
            Unit::GramPerLitre => "g/L",
            Unit::MilligramPerLitre => "mg/L",
            Unit::MolePerLitre => "mol/L",
            Unit::MillimolePerLitre => "mmol/L",
            Unit::MillilitrePerLitre => "mL/L",
            Unit::OuncePerGallon => "oz/gal",
            Unit::PercentWeightPerVolume => "% w/v",
            Unit::PercentVolume => "% v/v",
            Unit::MilligramCalciumCarbonatePerLitre => "mg/L CaCO3",
            Unit::GermanDegree => "°dH",
            Unit::FrenchDegree => "°fH",
            Unit::GrainPerGallon => "gpg",
        }
    }

    /// What the unit measures.
    pub fn dimension(self) -> Dimension {
        match self {
            Unit::GramPerLitre
            | Unit::MilligramPerLitre
            | Unit::OuncePerGallon
            | Unit::PercentWeightPerVolume => Dimension::Mass,
            Unit::MolePerLitre | Unit::MillimolePerLitre => Dimension::Mole,
            Unit::MillilitrePerLitre | Unit::PercentVolume => Dimension::Volume,
            Unit::MilligramCalciumCarbonatePerLitre
            | Unit::GermanDegree
            | Unit::FrenchDegree
            | Unit::GrainPerGallon => Dimension::Hardness,
        }
    }

    /// Size of the unit in the base unit of its [`Dimension`].
    pub fn factor(self) -> f64 {
        match self {
            Unit::GramPerLitre | Unit::MolePerLitre | Unit::MillilitrePerLitre => 1.0,
            Unit::MilligramPerLitre | Unit::MillimolePerLitre => 1e-3,
            Unit::OuncePerGallon => OUNCE_PER_GALLON_G_L,
            Unit::PercentWeightPerVolume | Unit::PercentVolume => 10.0,
            Unit::MilligramCalciumCarbonatePerLitre => 1e-3 / CALCIUM_CARBONATE_G_MOL,
            Unit::GermanDegree => GERMAN_DEGREE_MOL_L,
            Unit::FrenchDegree => 1e-2 / CALCIUM_CARBONATE_G_MOL,
            Unit::GrainPerGallon => GRAIN_PER_GALLON_G_L / CALCIUM_CARBONATE_G_MOL,
        }
    }

    /// Reads a unit as people write it: case does not matter except that spaces may be missing.
    pub fn parse(text: &str) -> Option<Unit> {
        let key: String = text.chars().filter(|c| !c.is_whitespace()).collect::<String>().to_lowercase();
        Some(match key.as_str() {
            "g/l" => Unit::GramPerLitre,
            "mg/l" | "ppm" => Unit::MilligramPerLitre,
            "mol/l" | "m" => Unit::MolePerLitre,
            "mmol/l" | "mm" => Unit::MillimolePerLitre,
            "ml/l" => Unit::MillilitrePerLitre,
            "oz/gal" => Unit::OuncePerGallon,
            "%w/v" => Unit::PercentWeightPerVolume,
            "%v/v" => Unit::PercentVolume,
            "mg/lcaco3" | "ppmcaco3" => Unit::MilligramCalciumCarbonatePerLitre,
            "°dh" | "dh" => Unit::GermanDegree,
            "°fh" | "fh" => Unit::FrenchDegree,
            "gpg" | "gr/gal" => Unit::GrainPerGallon,
            _ => return None,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_unit_reads_back_what_it_writes() {
        for unit in Unit::ALL {
            assert_eq!(Unit::parse(unit.symbol()), Some(unit), "{}", unit.symbol());
        }
    }

    /// Trade conversion factors, common practice: 1 oz/gal = 7.489 g/L, 1 gpg = 17.1 mg/L, 1 °dH = 17.85 mg/L CaCO3.
    #[test]
    fn trade_units_have_the_factors_that_shops_use() {
        assert!((Unit::OuncePerGallon.factor() - 7.489).abs() < 1e-3);
        let mg_caco3 = Unit::MilligramCalciumCarbonatePerLitre.factor();
        assert!((Unit::GrainPerGallon.factor() / mg_caco3 - 17.12).abs() < 0.01);
        assert!((Unit::GermanDegree.factor() / mg_caco3 - 17.85).abs() < 0.01);
        assert!((Unit::FrenchDegree.factor() / mg_caco3 - 10.0).abs() < 1e-12);
    }
}
