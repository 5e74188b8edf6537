//! The bath: a project resolved to totals in mol/L of a chemical system, ready to be solved at any operating point.

use super::adjust::Adjuster;
use super::air::{self, Air};
use super::error::BathError;
use super::operating::{Ph, Range};
use super::project::{Project, Rule};
use super::recipe::{self, Moles};
use crate::chemistry::{Catalogue, ComponentKind, Library, Product};
use crate::equilibrium::{
    Constants, Equilibrium, EquilibriumError, LN_10, Problem, Sensitivities, Solver, System, assemble,
};
use crate::quantity::kelvin;
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
    /// Largest dose to consider, g/L.
    pub max_g_l: f64,
}

/// A limit in mol/L.
#[derive(Clone, Debug, PartialEq)]
pub struct ResolvedLimit {
    /// System index of the metal.
    pub component: usize,
    /// Free metal must stay under this, mol/L.
    pub ceiling: Option<f64>,
    /// Free metal must stay over this, mol/L.
    pub floor: Option<f64>,
    /// Which wall it stands for.
    pub wall: String,
}

/// A condition that a dose has to meet.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Wall {
    /// Ceiling of limit number n.
    Ceiling(usize),
    /// Floor of limit number n.
    Floor(usize),
    /// Solid number n of the system, which must not form.
    Solid(usize),
}

/// One point of operation.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Point<'a> {
    /// pH to hold; `None` lets the charge balance decide.
    pub ph: Option<f64>,
    /// Grams of each agent's product per litre of bath.
    pub doses: &'a [f64],
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
    /// Product that raises pH.
    pub alkali: Adjuster,
    /// Product that lowers pH.
    pub acid: Adjuster,
}

/// Which solids take part in an equilibrium.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Solids {
    /// All that form in the time of a shift: what will be in the tank.
    Real,
    /// Only those that may; the others stay dissolved, so that their saturation index tells how far off a dose is.
    Walls,
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
            for (name, value) in [("dose_g_l", dose.dose_g_l), ("max_g_l", dose.max_g_l)] {
                if !(value.is_finite() && (0.0..=5000.0).contains(&value)) {
                    let fix = "give grams of product per litre, between 0 and 5000";
                    return Err(BathError::Number { field: format!("{field}.{name}"), value, fix });
                }
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
            .flat_map(|moles| moles.keys());
        for &component in brought {
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
                product,
            })
            .collect();
        let alkali = Adjuster { per_gram: spread(&alkali_moles), product: alkali };
        let acid = Adjuster { per_gram: spread(&acid_moles), product: acid };
        let limits = resolve_limits(project, &library, &present)?;
        let rules = resolve_rules(project, &library, &system, &limits)?;
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
            alkali,
            acid,
        })
    }

    /// Totals with the given doses, mol/L.
    pub fn totals(&self, doses: &[f64]) -> Vec<f64> {
        let mut totals = self.contents.clone();
        for (agent, dose) in self.agents.iter().zip(doses) {
            for (total, per_gram) in totals.iter_mut().zip(&agent.per_gram) {
                *total += dose * per_gram;
            }
        }
        totals
    }

    /// The doses of the project, g/L.
    pub fn doses(&self) -> Vec<f64> {
        self.project.agents.iter().map(|agent| agent.dose_g_l).collect()
    }

    /// Constants at a temperature in °C.
    pub fn constants_at(&self, temperature_c: f64) -> Constants {
        self.system.constants_at(kelvin(temperature_c), self.project.activity)
    }

    /// What will be in the tank at an operating point: solids that form in the time of a shift form.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn solve(
        &self,
        solver: &mut Solver,
        constants: &Constants,
        point: Point,
    ) -> Result<Equilibrium, EquilibriumError> {
        self.solve_with(solver, constants, point, Solids::Real)
    }

    /// As [`Bath::solve`], with solids that must not form kept in solution.
    pub fn solve_with(
        &self,
        solver: &mut Solver,
        constants: &Constants,
        point: Point,
        solids: Solids,
    ) -> Result<Equilibrium, EquilibriumError> {
        let totals = self.totals(point.doses);
        self.solve_totals(solver, constants, &totals, point.ph, solids)
    }

    /// Solves for given totals; with a free pH the total of H⁺ decides it.
    pub fn solve_totals(
        &self,
        solver: &mut Solver,
        constants: &Constants,
        totals: &[f64],
        ph: Option<f64>,
        solids: Solids,
    ) -> Result<Equilibrium, EquilibriumError> {
        let held = self.held(ph);
        let (may_form, open_to) = (self.may_form(solids), self.open_to());
        solver.solve(&Problem {
            system: &self.system,
            constants,
            totals,
            held: &held,
            may_form: &may_form,
            open_to: &open_to,
            counter_ion: true,
        })
    }

    /// Exact derivatives at a solved point, handed to `ask`.
    ///
    /// # Errors
    /// [`EquilibriumError`] when the response is singular.
    pub fn sensitivities<T>(
        &self,
        constants: &Constants,
        totals: &[f64],
        ph: Option<f64>,
        solids: Solids,
        solution: &Equilibrium,
        ask: impl FnOnce(&Sensitivities) -> T,
    ) -> Result<T, EquilibriumError> {
        let (held, may_form, open_to) = (self.held(ph), self.may_form(solids), self.open_to());
        let problem = Problem {
            system: &self.system,
            constants,
            totals,
            held: &held,
            may_form: &may_form,
            open_to: &open_to,
            counter_ion: true,
        };
        Ok(ask(&Sensitivities::new(problem, solution)?))
    }

    fn held(&self, ph: Option<f64>) -> Vec<Option<f64>> {
        (0..self.system.components.len())
            .map(|i| if self.system.proton == Some(i) { ph.map(|ph| -ph * LN_10) } else { None })
            .collect()
    }

    fn may_form(&self, solids: Solids) -> Vec<bool> {
        self.rules
            .iter()
            .map(|rule| match solids {
                Solids::Real => *rule != Rule::TooSlow,
                Solids::Walls => *rule == Rule::MayForm,
            })
            .collect()
    }

    /// Range of a held pH.
    pub fn ph(&self) -> Option<Range> {
        self.project.tank.ph.range()
    }

    /// The held pH at the set point.
    pub fn ph_set(&self) -> Option<f64> {
        self.ph().map(|range| range.set)
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

fn resolve_limits(
    project: &Project,
    library: &Library,
    present: &[usize],
) -> Result<Vec<ResolvedLimit>, BathError> {
    let mut limits = Vec::new();
    for (i, limit) in project.limits.iter().enumerate() {
        let field = format!("limits[{i}]");
        let unknown = |fix: &str| BathError::Unknown {
            field: format!("{field}.metal"),
            name: limit.metal.clone(),
            fix: fix.to_owned(),
        };
        let index = library.component_named(&limit.metal).ok_or_else(|| {
            unknown("no component has this name; write a metal like \"Cu+2\" or \"copper\"")
        })?;
        let component = present.iter().position(|&known| known == index).ok_or_else(|| {
            unknown("this metal is not in the bath; add it under contents, or remove the limit")
        })?;
        let mass = library.components[index].molar_mass().unwrap_or(f64::NAN);
        let level = |part: &str, level: Option<crate::quantity::Level>| match level {
            None => Ok(None),
            Some(level) => {
                let value = level.mol_per_litre(mass);
                if value.is_finite() && value > 0.0 && value < 100.0 {
                    Ok(Some(value))
                } else {
                    let fix = "give a level above zero, like \"pM 10.8\" or \"2e-8 mol/L\"";
                    Err(BathError::Number { field: format!("{field}.{part}"), value: level.value(), fix })
                }
            }
        };
        let (ceiling, floor) = (level("ceiling", limit.ceiling)?, level("floor", limit.floor)?);
        if let (Some(ceiling), Some(floor)) = (ceiling, floor)
            && floor >= ceiling
        {
            let fix = "the floor is not under the ceiling; raise the ceiling or lower the floor";
            return Err(BathError::Number { field: format!("{field}.floor"), value: floor, fix });
        }
        limits.push(ResolvedLimit { component, ceiling, floor, wall: limit.wall.clone() });
    }
    Ok(limits)
}

fn resolve_rules(
    project: &Project,
    library: &Library,
    system: &System,
    limits: &[ResolvedLimit],
) -> Result<Vec<Rule>, BathError> {
    for (i, rule) in project.solids.iter().enumerate() {
        if !library.solids.iter().any(|solid| solid.record.token == rule.solid) {
            return Err(BathError::Unknown {
                field: format!("solids[{i}].solid"),
                name: rule.solid.clone(),
                fix: "no solid has this name; write it like \"CaCO3(cr)\", or add it under constants"
                    .to_owned(),
            });
        }
    }
    let limited = |components: &[(usize, f64)]| {
        limits.iter().any(|limit| components.iter().any(|&(component, _)| component == limit.component))
    };
    Ok(system
        .solids
        .iter()
        .map(|solid| match project.solids.iter().rev().find(|rule| rule.solid == solid.token) {
            Some(rule) => rule.rule,
            None if solid.aged => Rule::TooSlow,
            None if limited(&solid.components) => Rule::MustNotForm,
            None => Rule::MayForm,
        })
        .collect())
}
