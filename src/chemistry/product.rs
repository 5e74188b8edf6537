//! Bought products: what a sack or drum holds, what it releases in the bath, and how to handle it.

use super::constant::Basis;
use super::{ChemistryError, Formula, charge_of};
use serde::{Deserialize, Serialize};
use std::sync::{Arc, LazyLock};

/// What a product is bought for.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum Role {
    /// Complexing agent.
    Agent,
    /// Raises pH.
    Alkali,
    /// Lowers pH.
    Acid,
    /// Brings the metal.
    MetalSalt,
    /// Holds pH.
    Buffer,
    /// Conducting or other salt.
    Salt,
    /// Reducing agent.
    Reducer,
    /// Waste treatment.
    Effluent,
}

/// How a product looks in its packing, which decides between scale and jug.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[allow(missing_docs)]
pub enum Form {
    Liquid,
    Powder,
    Crystal,
    Flake,
    Granule,
}

impl Form {
    /// The word on a sheet.
    pub fn word(self) -> &'static str {
        match self {
            Form::Liquid => "liquid",
            Form::Powder => "powder",
            Form::Crystal => "crystal",
            Form::Flake => "flake",
            Form::Granule => "granule",
        }
    }
}

/// Assay in per cent by weight of [`Product::formula`].
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Assay {
    /// Lowest that a certificate shows.
    pub low: f64,
    /// The value to compute with.
    pub typical: f64,
    /// Highest that a certificate shows.
    pub high: f64,
}

/// Price per kg in the shop's own currency; the built-in ones are illustrative.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[allow(missing_docs)]
pub struct PriceRange {
    pub low: f64,
    pub high: f64,
}

/// Where a group of a product's numbers comes from.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Evidence {
    /// Which numbers.
    pub what: String,
    /// Seen or recalled.
    pub basis: Basis,
    /// Source.
    pub source: String,
}

/// A bought product.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Product {
    /// Unique id, "hedp-60".
    pub id: String,
    /// Name on the sheet.
    pub name: String,
    /// CAS number.
    #[serde(default)]
    pub cas: String,
    /// Elemental formula that the assay counts, with hydrate water.
    pub formula: String,
    /// In words what the assay counts, "as H4HEDP".
    #[serde(default)]
    pub assay_basis: String,
    /// Assay, per cent by weight.
    pub assay_percent: Assay,
    /// How it looks.
    pub form: Form,
    /// Density at 20 °C in g/mL, liquids only.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub density_g_ml: Option<f64>,
    /// (component, moles) per mole of formula; hydroxide is −1 of H+.
    pub releases: Vec<(String, f64)>,
    /// What it is bought for.
    pub role: Role,
    /// The component it is bought for.
    pub active: String,
    /// Price per kg.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub price_per_kg: Option<PriceRange>,
    /// GHS hazard statements.
    #[serde(default)]
    pub hazards: Vec<String>,
    /// What can hurt, in plain words.
    #[serde(default)]
    pub caution: String,
    /// How to add it, in plain words.
    #[serde(default)]
    pub dissolve: String,
    /// Where the numbers come from.
    #[serde(default)]
    pub evidence: Vec<Evidence>,
    /// Remark.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub note: Option<String>,
}

impl Product {
    /// Molar mass of the assay's substance in g/mol.
    ///
    /// # Errors
    /// [`ChemistryError::Formula`] when the formula can't be read.
    pub fn molar_mass(&self) -> Result<f64, ChemistryError> {
        Ok(Formula::parse(&self.formula)?.molar_mass())
    }

    /// Moles of the assay's substance in one gram of product.
    ///
    /// # Errors
    /// As [`Product::molar_mass`].
    pub fn moles_per_gram(&self) -> Result<f64, ChemistryError> {
        Ok(self.assay_percent.typical / 100.0 / self.molar_mass()?)
    }

    /// Moles of one component released by one mole of formula; 0 when none.
    pub fn released(&self, component: &str) -> f64 {
        self.releases.iter().find(|(token, _)| token == component).map_or(0.0, |(_, moles)| *moles)
    }

    /// Mean price per kg.
    pub fn price(&self) -> Option<f64> {
        self.price_per_kg.map(|range| 0.5 * (range.low + range.high))
    }

    /// Whether it is measured by volume.
    pub fn is_liquid(&self) -> bool {
        self.form == Form::Liquid && self.density_g_ml.is_some()
    }

    /// Checks assay, density, formula and charge balance.
    ///
    /// # Errors
    /// [`ChemistryError::Value`], [`ChemistryError::Formula`] or [`ChemistryError::Product`].
    pub fn check(&self) -> Result<(), ChemistryError> {
        let place = || format!("product {}", self.id);
        let Assay { low, typical, high } = self.assay_percent;
        for (field, value) in [("assay_percent.low", low), ("assay_percent.typical", typical)] {
            if !(value.is_finite() && value > 0.0 && value <= 100.0) {
                let reason = "not between 0 and 100; give per cent by weight";
                return Err(ChemistryError::Value { place: place(), field, value, reason });
            }
        }
        if !(high.is_finite() && high >= typical && high <= 110.0) {
            let reason = "below the typical assay or far over 100; correct it";
            return Err(ChemistryError::Value {
                place: place(),
                field: "assay_percent.high",
                value: high,
                reason,
            });
        }
        if let Some(density) = self.density_g_ml
            && !(density.is_finite() && (0.5..=3.0).contains(&density))
        {
            let reason = "not between 0.5 and 3 g/mL; correct it";
            return Err(ChemistryError::Value {
                place: place(),
                field: "density_g_ml",
                value: density,
                reason,
            });
        }
        self.molar_mass()?;
        let charge: f64 = self.releases.iter().map(|(token, moles)| moles * charge_of(token)).sum();
        if charge.abs() > 1e-9 {
            let reason =
                format!("the ions it releases carry a charge of {charge:+}; add the missing counter-ion");
            return Err(ChemistryError::Product { product: self.id.clone(), reason });
        }
        if self.released(&self.active) == 0.0 {
            let reason =
                format!("it releases none of its active component {}; correct one of them", self.active);
            return Err(ChemistryError::Product { product: self.id.clone(), reason });
        }
        Ok(())
    }
}

/// All products at hand: the built-in ones and the project's own.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Catalogue {
    products: Vec<Product>,
}

#[derive(Deserialize)]
struct ProductsFile {
    #[serde(rename = "about")]
    _about: String,
    products: Vec<Product>,
}

static BUILT_IN: LazyLock<Arc<Catalogue>> = LazyLock::new(|| {
    let file: ProductsFile = super::library::read_asset(include_str!("../../assets/products.ron"))
        .expect("the embedded products are read by every test run");
    Arc::new(Catalogue { products: file.products })
});

impl Catalogue {
    /// The built-in products.
    pub fn built_in() -> &'static Catalogue {
        &BUILT_IN
    }

    /// The built-in products, to share.
    pub fn shared() -> Arc<Catalogue> {
        Arc::clone(&BUILT_IN)
    }

    /// The built-in products with the project's own put before them; an own product replaces one of the same id.
    ///
    /// # Errors
    /// As [`Product::check`].
    pub fn with_own(own: &[Product]) -> Result<Catalogue, ChemistryError> {
        for product in own {
            product.check()?;
        }
        let kept = BUILT_IN.products.iter().filter(|product| own.iter().all(|mine| mine.id != product.id));
        Ok(Catalogue { products: own.iter().chain(kept).cloned().collect() })
    }

    /// A product by id or by name, case ignored.
    pub fn find(&self, key: &str) -> Option<&Product> {
        self.products
            .iter()
            .find(|product| product.id == key)
            .or_else(|| self.products.iter().find(|product| product.name.eq_ignore_ascii_case(key)))
    }

    /// Every product.
    pub fn iter(&self) -> impl Iterator<Item = &Product> {
        self.products.iter()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::chemistry::Library;

    #[test]
    fn every_built_in_product_passes_its_check_and_releases_known_components() {
        let library = Library::built_in();
        let mut ids = std::collections::BTreeSet::new();
        for product in Catalogue::built_in().iter() {
            product.check().unwrap_or_else(|error| panic!("{error}"));
            assert!(ids.insert(&product.id), "{} stands twice", product.id);
            for (token, _) in &product.releases {
                assert!(library.component(token).is_some(), "{}: {token} is not a component", product.id);
            }
        }
        assert!(ids.len() > 60);
    }

    #[test]
    fn an_assay_over_one_hundred_is_refused_with_its_field() {
        let mut product = Catalogue::built_in().find("hedp-60").unwrap().clone();
        product.assay_percent.typical = 120.0;
        let error = Catalogue::with_own(&[product]).unwrap_err().to_string();
        assert!(error.contains("assay_percent.typical") && error.contains("120"), "{error}");
    }

    #[test]
    fn an_unbalanced_product_is_refused() {
        let mut product = Catalogue::built_in().find("hedp-60").unwrap().clone();
        product.releases.pop();
        assert!(product.check().unwrap_err().to_string().contains("counter-ion"));
    }
}
