//! The bath: a project resolved to totals in mol/L of a chemical system, ready to be solved at any operating point.

use super::adjust::Adjuster;
use super::air::{self, Air};
use super::drift::{self, DriftAxis, Position, Surroundings};
use super::error::BathError;
use super::operating::{Ph, Range};
use super::project::{Project, Rule};
use super::recipe::{self, Moles};
use super::wall::{ResolvedLimit, resolve_limits, resolve_rules};
use crate::chemistry::{Catalogue, ComponentKind, Library, Product};
use crate::equilibrium::{System, assemble};
use std::sync::Arc;

/// A complexing agent with what one gram of its product releases.
#[derive(Clone, Debug, PartialEq)]
pub struct Agent {
    /// The bought product.
    pub product: Product,
    /// Moles of each system component per gram of product.
    pub per_gram: Vec<f64>,
    /// System index of the component it is bought for.
    pub active: usize,
    /// Litres that one gram of product adds to the bath: liquids by their density, solids nothing.
    pub litres_per_gram: f64,
    /// Largest dose to consider, g/L.
    pub max_g_l: f64,
}

/// A resolved bath.
#[derive(Clone, Debug)]
pub struct Bath {
    /// The project it came from.
    pub project: Project,
    /// Constants in force.
    pub library: Arc<Library>,
    /// Products at hand.
    pub catalogue: Arc<Catalogue>,
    /// Components, species and solids that can occur.
    pub system: System,
    /// Library index of each system component.
    pub present: Vec<usize>,
    /// Totals of the bath as it stands, before any dose, mol/L.
    pub contents: Vec<f64>,
    /// Agents in the order of the project.
    pub agents: Vec<Agent>,
    /// Limits in the order of the project.
    pub limits: Vec<ResolvedLimit>,
    /// How each solid of the system is treated.
    pub rules: Vec<Rule>,
    /// What drifts beside pH and temperature.
    pub drifts: Vec<DriftAxis>,
    /// Product that raises pH.
    pub alkali: Adjuster,
    /// Product that lowers pH.
    pub acid: Adjuster,
}

impl Bath {
    /// Resolves a project.
    ///
    /// # Errors
    /// [`BathError`], naming the first field at fault.
    pub fn resolve(project: &Project) -> Result<Bath, BathError> {
        check_tank(project)?;
        let chemistry = |field: &str| {
            let field = field.to_owned();
            move |source| BathError::Chemistry { field, source }
        };
        let library = Library::with_own(&project.constants).map_err(chemistry("constants"))?;
        let catalogue = if project.products.is_empty() {
            Catalogue::shared()
        } else {
            Arc::new(Catalogue::with_own(&project.products).map_err(chemistry("products"))?)
        };
        if project.contents.is_empty() {
            return Err(BathError::EmptyBath);
        }
        let mut all: Vec<Moles> = Vec::new();
        for (i, content) in project.contents.iter().enumerate() {
            let field = format!("contents[{i}]");
            all.push(recipe::resolve(&field, &content.what, content.amount, &library, &catalogue)?);
        }
        let product = |field: &str, name: &str| product_named(field, name, &catalogue);
        let mut agents: Vec<(Product, Moles)> = Vec::new();
        for (i, dose) in project.agents.iter().enumerate() {
            let field = format!("agents[{i}]");
            let found = product(&format!("{field}.product"), &dose.product)?;
            let moles = recipe::moles_per_gram(&field, &found, &library)?;
            let numbers = [("dose_g_l", dose.dose_g_l), ("min_g_l", dose.min_g_l), ("max_g_l", dose.max_g_l)];
            for (name, value) in numbers {
                if !(value.is_finite() && (0.0..=5000.0).contains(&value)) {
                    let fix = "give grams of product per litre, between 0 and 5000";
                    return Err(BathError::Number { field: format!("{field}.{name}"), value, fix });
                }
            }
            if dose.min_g_l > dose.max_g_l {
                let (field, fix) = (format!("{field}.min_g_l"), "the smallest dose is above the largest");
                return Err(BathError::Number { field, value: dose.min_g_l, fix });
            }
            agents.push((found, moles));
        }
        let alkali = product("adjust.alkali", &project.adjust.alkali)?;
        let acid = product("adjust.acid", &project.adjust.acid)?;
        let alkali_moles = recipe::known_moles_per_gram("adjust.alkali", &alkali, &library)?;
        let acid_moles = recipe::known_moles_per_gram("adjust.acid", &acid, &library)?;
        let mut present: Vec<usize> = library.proton().into_iter().collect();
        let adjusters = [&alkali_moles, &acid_moles];
        let of_the_air = air::exchanged(project.tank.air)
            .and_then(|gas| library.gas(gas))
            .map(|gas| gas.formation.components.keys().copied())
            .into_iter()
            .flatten();
        for component in of_the_air {
            if !present.contains(&component) {
                present.push(component);
            }
        }
        let brought = all
            .iter()
            .chain(agents.iter().map(|(_, moles)| moles))
            .chain(adjusters)
            .flat_map(|moles| moles.keys().copied());
        for component in brought.chain(drift::brought(&project.drift, &library)) {
            if !present.contains(&component) {
                present.push(component);
            }
        }
        let system = assemble(&library, &present, project.activity);
        let spread = |moles: &Moles| -> Vec<f64> {
            present.iter().map(|component| moles.get(component).copied().unwrap_or(0.0)).collect()
        };
        let mut contents = vec![0.0; present.len()];
        for moles in &all {
            for (total, more) in contents.iter_mut().zip(spread(moles)) {
                *total += more;
            }
        }
        let agents = agents
            .into_iter()
            .zip(&project.agents)
            .map(|((product, moles), dose)| Agent {
                per_gram: spread(&moles),
                active: library
                    .component(&product.active)
                    .and_then(|component| present.iter().position(|&known| known == component))
                    .unwrap_or(0),
                max_g_l: dose.max_g_l,
                litres_per_gram: litres_per_gram(&product),
                product,
            })
            .collect();
        let adjuster = |product: Product, moles: &Moles| Adjuster {
            per_gram: spread(moles),
            litres_per_gram: litres_per_gram(&product),
            product,
        };
        let (alkali, acid) = (adjuster(alkali, &alkali_moles), adjuster(acid, &acid_moles));
        let limits = resolve_limits(project, &library, &present, &system)?;
        let rules = resolve_rules(project, &library, &system, &limits)?;
        let around = Surroundings {
            library: &library,
            catalogue: &catalogue,
            present: &present,
            contents: &contents,
            volume_l: project.tank.volume_l,
        };
        let drifts = drift::axes(&project.drift, &around)?;
        let project = project.clone();
        Ok(Bath {
            project,
            library,
            catalogue,
            system,
            present,
            contents,
            agents,
            limits,
            rules,
            drifts,
            alkali,
            acid,
        })
    }

    /// Totals with the given doses, mol/L; what a liquid product adds to the volume thins all of them.
    pub fn totals(&self, doses: &[f64]) -> Vec<f64> {
        self.mixed(doses, None).totals
    }

    /// Totals at a position of the drifts, from totals at the set point that additions have thinned by `dilution`.
    pub fn drifted(&self, position: &Position, dilution: f64, totals: &mut [f64]) {
        drift::move_totals(&self.drifts, position, dilution, totals);
    }

    /// What is not at its set point, in words: "copper 11.5 g/L, hardness 15 °dH"; empty at the set point.
    pub fn position_words(&self, position: &Position) -> String {
        let moved = self.drifts.iter().zip(&position.0).filter(|(axis, t)| axis.value(**t) != axis.set);
        moved.map(|(axis, t)| axis.words(*t)).collect::<Vec<_>>().join(", ")
    }

    /// The doses of the project, g/L.
    pub fn doses(&self) -> Vec<f64> {
        self.project.agents.iter().map(|agent| agent.dose_g_l).collect()
    }

    /// System indices of the metals.
    pub fn metals(&self) -> impl Iterator<Item = usize> + '_ {
        (0..self.present.len()).filter(|&i| self.component(i).kind == ComponentKind::Metal)
    }

    /// The library's record of a system component.
    pub fn component(&self, index: usize) -> &crate::chemistry::Component {
        &self.library.components[self.present[index]]
    }

    /// Name in words of a solid of the system.
    pub fn solid_name(&self, solid: usize) -> &str {
        let token = &self.system.solids[solid].token;
        let found = self.library.solids.iter().find(|known| known.record.token == *token);
        found.map_or(token, |known| &known.record.name)
    }
}

/// Litres per gram of a liquid. A dissolved solid is counted as adding none: a few per cent of its own weight, which
/// the working volume is never known to.
fn litres_per_gram(product: &Product) -> f64 {
    product.density_g_ml.filter(|_| product.is_liquid()).map_or(0.0, |density| 1e-3 / density)
}

fn product_named(field: &str, name: &str, catalogue: &Catalogue) -> Result<Product, BathError> {
    catalogue.find(name).cloned().ok_or_else(|| BathError::Unknown {
        field: field.to_owned(),
        name: name.to_owned(),
        fix: "no product has this id or name; choose one from the list or add it under products".to_owned(),
    })
}

fn check_tank(project: &Project) -> Result<(), BathError> {
    let number =
        |field: &str, value: f64, fix| Err(BathError::Number { field: field.to_owned(), value, fix });
    let volume = project.tank.volume_l;
    if !(volume.is_finite() && volume > 0.0 && volume <= 1e7) {
        return number("tank.volume_l", volume, "give the working volume in litres, more than 0");
    }
    let ordered = |field: &str, range: &Range, low: f64, high: f64, fix| {
        for (part, value) in [("low", range.low), ("set", range.set), ("high", range.high)] {
            if !(value.is_finite() && (low..=high).contains(&value)) {
                return number(&format!("{field}.{part}"), value, fix);
            }
        }
        if range.is_ordered() {
            Ok(())
        } else {
            let Range { low, set, high } = *range;
            Err(BathError::Order { field: field.to_owned(), low, set, high })
        }
    };
    if let Air::Open { co2_bar } = project.tank.air
        && !(co2_bar.is_finite() && (1e-9..=1.0).contains(&co2_bar))
    {
        let fix = "give the partial pressure of carbon dioxide in bar, about 4.2e-4 outdoors";
        return number("tank.air.co2_bar", co2_bar, fix);
    }
    if let Ph::Held { low, set, high } = project.tank.ph {
        ordered("tank.ph", &Range { low, set, high }, -1.0, 15.0, "give a pH between -1 and 15")?;
    }
    let temperature = &project.tank.temperature_c;
    ordered("tank.temperature_c", temperature, 0.0, 100.0, "give a temperature between 0 and 100 °C")?;
    for (field, step) in [
        ("sheet.scale_step_kg", project.sheet.scale_step_kg),
        ("sheet.jug_step_l", project.sheet.jug_step_l),
        ("sheet.addition_cap_percent", project.sheet.addition_cap_percent),
    ] {
        if let Some(value) = step
            && !(value.is_finite() && value > 0.0)
        {
            return number(field, value, "give a number above 0, or leave it out");
        }
    }
    Ok(())
}
