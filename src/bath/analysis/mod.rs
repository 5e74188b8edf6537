//! Today's titration: what was found in the tank takes the place of what the recipe makes it out to be.
//!
//! A result is the total of one component. It replaces all that the recipe brings of that component; the counter-ions of
//! a product stay, because a titration says nothing about them. Where the pH is predicted they move with the result: there
//! the charge decides, and metal without its counter-ions would turn a caustic bath acid.

mod check;

use super::error::BathError;
use super::operating::Ph;
use super::project::{Content, Project, Trust};
use super::recipe::{self, Moles};
use super::resolve::Bath;
use crate::chemistry::{Catalogue, Library};
use crate::quantity::{Amount, Dimension, Unit};
use serde::{Deserialize, Serialize};
use std::collections::BTreeMap;
use std::sync::Arc;

/// The result that stands for calcium and magnesium together.
pub const HARDNESS: &str = "hardness";
/// Magnesium in a hardness, mole by mole, where the recipe lists neither metal: one part to four of calcium, as in many
/// tap waters (common practice).
const USUAL_MAGNESIUM_SHARE: f64 = 0.2;

/// What the laboratory found in the tank.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub struct Analysis {
    /// When the sample was taken, as people write it: "06:10".
    #[serde(skip_serializing_if = "String::is_empty")]
    pub taken: String,
    /// Totals found.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub results: Vec<Finding>,
    /// The pH that was read.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub ph: Option<MeterReading>,
    /// A fresh bath as made up, to top up with after a bail-out; empty for water.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub make_up: Vec<Content>,
}

/// One total found.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Finding {
    /// A component ("copper", "Cu+2", "EDTA"), or "hardness".
    pub what: String,
    /// How much of it.
    pub amount: Amount,
    /// Standard uncertainty (one σ) in per cent of the amount.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub uncertainty_percent: Option<f64>,
    /// Standard uncertainty (one σ) as an amount, instead of the per cent.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub uncertainty: Option<Amount>,
    /// What the number rests on.
    #[serde(default)]
    pub trust: Trust,
    /// When or how it was found.
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub note: String,
}

/// A pH with the temperature at which the meter read it.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct MeterReading {
    /// What the meter showed.
    pub value: f64,
    /// Temperature of the sample in °C; empty for the set temperature of the bath.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub temperature_c: Option<f64>,
    /// Standard uncertainty (one σ).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub uncertainty: Option<f64>,
    /// What the number rests on.
    #[serde(default)]
    pub trust: Trust,
}

/// Where a line of the contents comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Origin {
    /// Result number n of the analysis.
    Finding(usize),
    /// Line number n of the recipe, or what is left of it.
    Recipe(usize),
}

/// A project with the contents that were found.
#[derive(Clone, Debug, PartialEq)]
pub struct Analyzed {
    /// The project; nothing is dosed yet, and it holds no analysis any more.
    pub project: Project,
    /// Where each line of its contents comes from.
    pub origins: Vec<Origin>,
    /// What the recipe had made of each result, in the unit of the result.
    pub believed: Vec<f64>,
}

impl Analysis {
    /// Whether nothing was found.
    pub fn is_default(&self) -> bool {
        *self == Self::default()
    }
}

impl Finding {
    /// Standard uncertainty as a share of the amount, where it is stated.
    pub fn relative_uncertainty(&self) -> Option<f64> {
        let absolute = |sigma: Amount| {
            sigma.value * sigma.unit.factor() / (self.amount.value * self.amount.unit.factor())
        };
        self.uncertainty_percent.map(|percent| percent / 100.0).or(self.uncertainty.map(absolute))
    }
}

impl Project {
    /// The bath as found: results of the analysis in the place of what the recipe brings of their components.
    ///
    /// # Errors
    /// [`BathError`] naming the field of the analysis, or the line of the contents, that can't be used.
    pub fn analyzed(&self) -> Result<Analyzed, BathError> {
        let (library, catalogue) = chemistry(self)?;
        check::ph(self)?;
        let recipe = resolved("contents", &self.contents, &library, &catalogue)?;
        let mut taken: BTreeMap<usize, usize> = BTreeMap::new();
        let (mut contents, mut origins, mut believed) = (Vec::new(), Vec::new(), Vec::new());
        for (number, finding) in self.analysis.results.iter().enumerate() {
            let field = format!("analysis.results[{number}]");
            check::finding(&field, finding)?;
            let found = components(&field, finding, &recipe, &library, &catalogue)?;
            for &(component, _) in &found {
                if taken.insert(component, number).is_some() {
                    return Err(BathError::Unknown {
                        field: format!("{field}.what"),
                        name: finding.what.clone(),
                        fix: "an earlier result is for the same component; keep one of them".to_owned(),
                    });
                }
            }
            let per_unit: f64 = found.iter().map(|(_, share)| share).sum();
            let there =
                |component: usize| recipe.iter().filter_map(|moles| moles.get(&component)).sum::<f64>();
            believed.push(found.iter().map(|&(component, _)| there(component)).sum::<f64>() / per_unit);
            let single = found.len() == 1;
            for (component, share) in found {
                let (what, amount) = match single {
                    true => (finding.what.clone(), finding.amount),
                    false => {
                        let moles = Amount::new(share * finding.amount.value, Unit::MolePerLitre);
                        (library.components[component].token.clone(), moles)
                    }
                };
                let note =
                    if finding.note.is_empty() { self.analysis.taken.clone() } else { finding.note.clone() };
                contents.push(Content { what, amount, trust: finding.trust, note });
                origins.push(Origin::Finding(number));
            }
        }
        let predicted = self.tank.ph == Ph::Predicted;
        for (number, (content, moles)) in self.contents.iter().zip(&recipe).enumerate() {
            let finding = moles.keys().find_map(|component| taken.get(component)).copied();
            let ratio = |finding: usize| self.analysis.results[finding].amount.value / believed[finding];
            let moving = finding.filter(|&finding| predicted && believed[finding] > 0.0);
            let kept = remainder(content, moles, &taken, &library, moving.map_or(1.0, ratio));
            let origin = moving.map_or(Origin::Recipe(number), Origin::Finding);
            origins.extend(kept.iter().map(|_| origin));
            contents.extend(kept);
        }
        let mut project = Project { contents, ..self.clone() };
        project.agents.iter_mut().for_each(|agent| agent.dose_g_l = 0.0);
        project.analysis = Analysis::default();
        widen_loads(&mut project, &self.analysis.results, &taken, &library, &catalogue)?;
        Ok(Analyzed { project, origins, believed })
    }
}

impl Bath {
    /// What each line of the contents brings, mol/L of each system component.
    ///
    /// # Errors
    /// [`BathError`] as when the bath was resolved.
    pub fn lines(&self) -> Result<Vec<Vec<f64>>, BathError> {
        let lines = resolved("contents", &self.project.contents, &self.library, &self.catalogue)?;
        let spread = |moles: Moles| -> Vec<f64> {
            self.present.iter().map(|component| moles.get(component).copied().unwrap_or(0.0)).collect()
        };
        Ok(lines.into_iter().map(spread).collect())
    }
}

fn chemistry(project: &Project) -> Result<(Arc<Library>, Arc<Catalogue>), BathError> {
    let chemistry = |field: &str| {
        let field = field.to_owned();
        move |source| BathError::Chemistry { field, source }
    };
    let library = Library::with_own(&project.constants).map_err(chemistry("constants"))?;
    let catalogue = Catalogue::with_own(&project.products).map_err(chemistry("products"))?;
    Ok((library, Arc::new(catalogue)))
}

fn resolved(
    list: &str,
    contents: &[Content],
    library: &Library,
    catalogue: &Catalogue,
) -> Result<Vec<Moles>, BathError> {
    let lines = contents.iter().enumerate();
    lines
        .map(|(i, content)| {
            recipe::resolve(&format!("{list}[{i}]"), &content.what, content.amount, library, catalogue)
        })
        .collect()
}

/// The components of a finding, with mol/L of each for one unit of its amount.
fn components(
    field: &str,
    finding: &Finding,
    recipe: &[Moles],
    library: &Library,
    catalogue: &Catalogue,
) -> Result<Vec<(usize, f64)>, BathError> {
    let unit = finding.amount.unit;
    if finding.what.eq_ignore_ascii_case(HARDNESS) {
        if unit.dimension() != Dimension::Hardness {
            let fix = "give a hardness in mg/L CaCO3, °dH, °fH or gpg".to_owned();
            let amount = finding.amount.to_string();
            return Err(BathError::Unit { field: format!("{field}.amount"), amount, fix });
        }
        let metals: Vec<usize> =
            ["Ca+2", "Mg+2"].iter().filter_map(|token| library.component(token)).collect();
        if let [calcium, magnesium] = metals[..] {
            let there = |component| recipe.iter().filter_map(|moles| moles.get(&component)).sum::<f64>();
            let (ca, mg) = (there(calcium), there(magnesium));
            let share = if ca + mg > 0.0 { mg / (ca + mg) } else { USUAL_MAGNESIUM_SHARE };
            let shares = [(calcium, (1.0 - share) * unit.factor()), (magnesium, share * unit.factor())];
            return Ok(shares.into_iter().filter(|(_, share)| *share > 0.0).collect());
        }
    }
    let component = library.component_named(&finding.what).ok_or_else(|| BathError::Unknown {
        field: format!("{field}.what"),
        name: finding.what.clone(),
        fix: "no component has this name; write what was titrated, like \"copper\", \"EDTA\" or \"hardness\""
            .to_owned(),
    })?;
    if Some(component) == library.proton() {
        return Err(BathError::Unknown {
            field: format!("{field}.what"),
            name: finding.what.clone(),
            fix: "give the pH under analysis.ph".to_owned(),
        });
    }
    let token = &library.components[component].token;
    let one = recipe::resolve(field, token, Amount::new(1.0, unit), library, catalogue)?;
    Ok(one.into_iter().collect())
}

/// What is left of a line of the recipe when some of its components were found by analysis, times a factor.
fn remainder(
    content: &Content,
    moles: &Moles,
    taken: &BTreeMap<usize, usize>,
    library: &Library,
    factor: f64,
) -> Vec<Content> {
    if !moles.keys().any(|component| taken.contains_key(component)) {
        return vec![content.clone()];
    }
    let rest = moles.iter().filter(|(component, moles)| !taken.contains_key(component) && **moles != 0.0);
    rest.map(|(&component, &moles)| {
        let (token, moles) = (&library.components[component].token, factor * moles);
        // Alkali is written as what it brings: a negative amount of hydrogen ion is no line of a recipe.
        let (what, moles) = if moles < 0.0 { ("OH-".to_owned(), -moles) } else { (token.clone(), moles) };
        Content {
            what,
            amount: Amount::new(moles, Unit::MolePerLitre),
            trust: content.trust,
            note: format!("brought by {} {}", content.amount, content.what),
        }
    })
    .collect()
}

/// Loads that the bath has left are part of its operating window from now on.
fn widen_loads(
    project: &mut Project,
    results: &[Finding],
    taken: &BTreeMap<usize, usize>,
    library: &Library,
    catalogue: &Catalogue,
) -> Result<(), BathError> {
    for load in &mut project.drift.loads {
        let Some(component) = library.component_named(&load.of) else { continue };
        let Some(finding) = taken.get(&component).map(|&number| &results[number]) else { continue };
        let token = &library.components[component].token;
        let moles = |amount: Amount| {
            let moles = recipe::resolve("drift.loads", token, amount, library, catalogue)?;
            Ok::<f64, BathError>(moles.get(&component).copied().unwrap_or(0.0))
        };
        let found = moles(finding.amount)?;
        if found > moles(load.high)? {
            load.high = finding.amount;
        } else if found < moles(load.low)? {
            load.low = finding.amount;
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bath::Demo;

    fn finding(what: &str, amount: &str) -> Finding {
        Finding {
            what: what.to_owned(),
            amount: Amount::parse(amount).unwrap(),
            uncertainty_percent: Some(2.0),
            uncertainty: None,
            trust: Trust::Today,
            note: String::new(),
        }
    }

    fn with(demo: &str, results: Vec<Finding>) -> Project {
        let mut project = Demo::named(demo).unwrap().project().unwrap();
        project.analysis.results = results;
        project
    }

    fn total(bath: &Bath, token: &str) -> f64 {
        bath.contents[bath.system.component(token).unwrap()]
    }

    #[test]
    fn a_found_total_replaces_all_that_the_recipe_brings_and_nothing_else() {
        let project = with("copper_strike.ron", vec![finding("copper", "9.9 g/L")]);
        let before = Bath::resolve(&project).unwrap();
        let analyzed = project.analyzed().unwrap();
        let after = Bath::resolve(&analyzed.project).unwrap();
        assert!((total(&after, "Cu+2") - 9.9 / 63.546).abs() < 1e-6);
        assert!((analyzed.believed[0] - 8.4).abs() < 1e-9);
        for token in ["HEDP-4", "K+", "CO3-2", "Ca+2", "Fe+3"] {
            assert!((total(&after, token) - total(&before, token)).abs() < 1e-15, "{token}");
        }
        assert_eq!(analyzed.origins[0], Origin::Finding(0));
    }

    #[test]
    fn the_counter_ions_of_a_product_stay_when_its_metal_was_found() {
        let mut project =
            with("copper_strike.ron", vec![finding("copper", "9.9 g/L"), finding("K+", "40 g/L")]);
        project.contents[0].what = "cuso4-5".to_owned();
        let before = Bath::resolve(&project).unwrap();
        let after = Bath::resolve(&project.analyzed().unwrap().project).unwrap();
        assert!((total(&after, "Cu+2") - 9.9 / 63.546).abs() < 1e-6);
        assert!((total(&after, "K+") - 40.0 / 39.098).abs() < 1e-4);
        for token in ["SO4-2", "CO3-2"] {
            assert!((total(&after, token) / total(&before, token) - 1.0).abs() < 1e-12, "{token}");
        }
    }

    #[test]
    fn alkali_whose_metal_was_found_leaves_its_hydroxide_where_the_ph_is_held() {
        let project = with("zinc_nickel.ron", vec![finding("sodium", "95 g/L")]);
        let before = Bath::resolve(&project).unwrap();
        let after = Bath::resolve(&project.analyzed().unwrap().project).unwrap();
        assert!((total(&after, "H+") - total(&before, "H+")).abs() < 1e-12);
        assert!((total(&after, "Na+") - 95.0 / 22.990).abs() < 1e-3);
    }

    #[test]
    fn counter_ions_move_with_the_result_where_the_ph_is_predicted() {
        let project = with("aluminium_etch.ron", vec![finding("aluminium", "95 g/L")]);
        let before = Bath::resolve(&project).unwrap();
        let analyzed = project.analyzed().unwrap();
        let after = Bath::resolve(&analyzed.project).unwrap();
        let more = (95.0 - 84.0) / 26.982;
        assert!((total(&after, "Al+3") - total(&before, "Al+3") - more).abs() < 1e-5);
        // Each gram of aluminium went in as its hydroxide.
        assert!((total(&after, "H+") - total(&before, "H+") + 3.0 * more).abs() < 2e-5);
        assert_eq!(analyzed.origins.iter().filter(|origin| **origin == Origin::Finding(0)).count(), 2);
    }

    #[test]
    fn hardness_keeps_the_ratio_of_its_metals() {
        let project = with("hard_water_cleaner.ron", vec![finding("hardness", "500 mg/L CaCO3")]);
        let after = Bath::resolve(&project.analyzed().unwrap().project).unwrap();
        let (ca, mg) = (total(&after, "Ca+2"), total(&after, "Mg+2"));
        assert!((ca + mg - 5.0e-3).abs() < 1e-5, "{ca} {mg}");
        assert!((ca / mg - 190.0 / 60.0).abs() < 1e-9);
    }

    #[test]
    fn the_section_survives_a_round_trip_and_is_not_written_when_empty() {
        let mut project = with("copper_strike.ron", vec![finding("copper", "9.9 g/L")]);
        project.analysis.ph = Some(MeterReading {
            value: 9.3,
            temperature_c: Some(25.0),
            uncertainty: Some(0.05),
            trust: Trust::Today,
        });
        let text = crate::bath::write(&project).unwrap();
        assert_eq!(crate::bath::read(&text, "x").unwrap(), project);
        project.analysis = Analysis::default();
        assert!(!crate::bath::write(&project).unwrap().contains("analysis"));
    }

    #[test]
    fn nonsense_is_refused_with_its_field() {
        let refused = |project: Project| project.analyzed().unwrap_err();
        let cases: [(&str, &str, &str); 4] = [
            ("unobtainium", "1 g/L", "analysis.results[0].what"),
            ("copper", "-1 g/L", "analysis.results[0].amount"),
            ("hardness", "1 g/L", "analysis.results[0].amount"),
            ("H+", "1 mol/L", "analysis.results[0].what"),
        ];
        for (what, amount, field) in cases {
            assert_eq!(refused(with("copper_strike.ron", vec![finding(what, amount)])).field(), field);
        }
        let twice = vec![finding("copper", "1 g/L"), finding("Cu+2", "2 g/L")];
        assert_eq!(refused(with("copper_strike.ron", twice)).field(), "analysis.results[1].what");
        let mut both = finding("copper", "1 g/L");
        both.uncertainty = Some(Amount::parse("0.1 g/L").unwrap());
        assert_eq!(
            refused(with("copper_strike.ron", vec![both.clone()])).field(),
            "analysis.results[0].uncertainty_percent"
        );
        both.uncertainty_percent = None;
        both.uncertainty = Some(Amount::parse("1 °dH").unwrap());
        assert_eq!(refused(with("copper_strike.ron", vec![both])).field(), "analysis.results[0].uncertainty");
        let reading =
            MeterReading { value: 19.0, temperature_c: None, uncertainty: None, trust: Trust::Today };
        let mut project = with("copper_strike.ron", Vec::new());
        project.analysis.ph = Some(reading);
        assert_eq!(refused(project).field(), "analysis.ph.value");
        let mut predicted = with("aluminium_etch.ron", Vec::new());
        predicted.analysis.ph = Some(MeterReading { value: 13.0, ..reading });
        assert!(refused(predicted).to_string().contains("tank.ph"));
    }
}
