//! From a line of the recipe to moles of components per litre of bath.

use super::error::BathError;
use crate::chemistry::{Catalogue, Library, Product};
use crate::quantity::{Amount, Dimension};
use std::collections::BTreeMap;

/// Moles per litre of bath, by library component.
pub type Moles = BTreeMap<usize, f64>;

/// What a name in the recipe stands for.
enum Meaning<'a> {
    Product(&'a Product),
    Component(usize),
    Species(Moles),
}

/// Resolves one constituent.
///
/// # Errors
/// [`BathError`] naming `field` when the amount is negative, the name unknown, or the unit does not fit.
pub fn resolve(
    field: &str,
    what: &str,
    amount: Amount,
    library: &Library,
    catalogue: &Catalogue,
) -> Result<Moles, BathError> {
    if !(amount.value.is_finite() && amount.value >= 0.0) {
        let fix = "give zero or a positive number";
        return Err(BathError::Number { field: format!("{field}.amount"), value: amount.value, fix });
    }
    let base = amount.value * amount.unit.factor();
    let misfit = |fix: &str| BathError::Unit {
        field: format!("{field}.amount"),
        amount: amount.to_string(),
        fix: fix.to_owned(),
    };
    match meaning(field, what, library, catalogue)? {
        Meaning::Product(product) => {
            let per_gram = moles_per_gram(field, product, library)?;
            let grams = match amount.unit.dimension() {
                Dimension::Mass => base,
                Dimension::Volume => {
                    base * product
                        .density_g_ml
                        .ok_or_else(|| misfit("the product has no density; weigh it, in g/L"))?
                }
                Dimension::Mole => {
                    base / product.moles_per_gram().map_err(|source| in_field(field, source))?
                }
                Dimension::Hardness => {
                    return Err(misfit("hardness is given for calcium or magnesium, not for a product"));
                }
            };
            Ok(per_gram.into_iter().map(|(component, moles)| (component, moles * grams)).collect())
        }
        Meaning::Component(index) => {
            let component = &library.components[index];
            let moles = match amount.unit.dimension() {
                Dimension::Mole | Dimension::Hardness => base,
                Dimension::Mass => {
                    base / component.reported_molar_mass().ok_or_else(|| {
                        misfit("its formula is not known; give mol/L, or add a formula to the component")
                    })?
                }
                Dimension::Volume => {
                    return Err(misfit(
                        "mL/L needs a liquid product; give g/L or mol/L, or choose a product",
                    ));
                }
            };
            Ok(Moles::from([(index, moles)]))
        }
        Meaning::Species(formation) => match amount.unit.dimension() {
            Dimension::Mole => Ok(formation.into_iter().map(|(i, count)| (i, count * base)).collect()),
            _ => Err(misfit("give a species in mol/L")),
        },
    }
}

fn meaning<'a>(
    field: &str,
    what: &str,
    library: &Library,
    catalogue: &'a Catalogue,
) -> Result<Meaning<'a>, BathError> {
    if let Some(index) = library.component(what) {
        return Ok(Meaning::Component(index));
    }
    if let Some(product) = catalogue.find(what) {
        return Ok(Meaning::Product(product));
    }
    if let Some(index) = library.component_named(what) {
        return Ok(Meaning::Component(index));
    }
    if let Some(formation) = library.formation(what) {
        return Ok(Meaning::Species(formation.components));
    }
    let fix = match crate::chemistry::Formula::parse(what) {
        Ok(_) => {
            "no product, component or species has this formula; choose one from the list or add it as own product"
        }
        Err(_) => {
            "no product, component or species has this name; choose one from the list, or add it under constants or products"
        }
    };
    Err(BathError::Unknown { field: format!("{field}.what"), name: what.to_owned(), fix: fix.to_owned() })
}

fn in_field(field: &str, source: crate::chemistry::ChemistryError) -> BathError {
    BathError::Chemistry { field: field.to_owned(), source }
}

/// Moles of each component that one gram of product releases.
///
/// # Errors
/// [`BathError::Chemistry`] for a bad formula, [`BathError::Unknown`] for a component the library lacks.
pub fn moles_per_gram(field: &str, product: &Product, library: &Library) -> Result<Moles, BathError> {
    let per_gram = product.moles_per_gram().map_err(|source| in_field(field, source))?;
    let mut moles = Moles::new();
    for (token, count) in &product.releases {
        let index = library.component(token).ok_or_else(|| BathError::Unknown {
            field: format!("{field}.releases"),
            name: token.clone(),
            fix: "not a component of the library; add it under constants, or correct the product".to_owned(),
        })?;
        *moles.entry(index).or_insert(0.0) += count * per_gram;
    }
    Ok(moles)
}

/// As [`moles_per_gram`], leaving out what the library does not know: in a bath that brings its whole chemistry the
/// other ions of the shop's acid and alkali take no part.
///
/// # Errors
/// [`BathError::Chemistry`] for a bad formula.
pub fn known_moles_per_gram(field: &str, product: &Product, library: &Library) -> Result<Moles, BathError> {
    let mut known = product.clone();
    known.releases.retain(|(token, _)| library.component(token).is_some());
    moles_per_gram(field, &known, library)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::Unit;

    fn moles(what: &str, amount: &str) -> Result<Vec<(String, f64)>, BathError> {
        let library = Library::built_in();
        let amount = Amount::parse(amount).unwrap();
        let moles = resolve("contents[0]", what, amount, library, Catalogue::built_in())?;
        Ok(moles.into_iter().map(|(i, m)| (library.components[i].token.clone(), m)).collect())
    }

    /// Composition of a sack by molar mass alone: NiSO4·6H2O 262.84 g/mol at 99 %.
    #[test]
    fn a_hydrate_product_brings_its_metal_and_its_anion() {
        let found = moles("niso4-6", "26.549 g/L").unwrap();
        for (token, m) in found {
            assert!(["Ni+2", "SO4-2"].contains(&token.as_str()) && (m - 0.1).abs() < 2e-4, "{token} {m}");
        }
    }

    #[test]
    fn metals_count_as_metal_and_agents_as_their_acid() {
        assert!((moles("copper", "63.546 g/L").unwrap()[0].1 - 1.0).abs() < 1e-6);
        assert!((moles("EDTA", "292.244 g/L").unwrap()[0].1 - 1.0).abs() < 1e-4);
        assert!((moles("Ca+2", "100.086 mg/L CaCO3").unwrap()[0].1 - 1e-3).abs() < 1e-8);
    }

    #[test]
    fn misfits_name_the_field_and_the_fix() {
        for (what, amount, needle) in [
            ("niso4-6", "3 mL/L", "no density"),
            ("copper", "3 mL/L", "liquid product"),
            ("unobtainium", "3 g/L", "no product"),
            ("copper", "-3 g/L", "positive"),
        ] {
            let error = moles(what, amount).unwrap_err();
            assert!(error.to_string().contains(needle), "{error}");
            assert!(error.field().starts_with("contents[0]"));
        }
        let nan = Amount::new(f64::NAN, Unit::GramPerLitre);
        assert!(resolve("x", "copper", nan, Library::built_in(), Catalogue::built_in()).is_err());
    }
}
