//! Rinse water as a chemical system: what the drag-out brings, the fresh water, and room for the reagents of treatment.

use super::treat;
use crate::bath::{Adjust, AgentDose, Air, Bath, BathError, Content, Ph, Range, Rinse, Solids};
use crate::chemistry::ComponentKind;
use crate::equilibrium::{Constants, Equilibrium, EquilibriumError, Solver};
use crate::quantity::{Amount, Dimension, Unit};

/// The hydrogen carbonate that fresh water brings, and the ions that balance hardness and alkalinity.
const CARBONATE: &str = "CO3-2";
const HARDNESS: [&str; 2] = ["Ca+2", "Mg+2"];
/// Components that acid turns into a poisonous gas.
const POISON_SOURCES: [&str; 3] = ["CN-", "HS-", "OCl-"];

/// Rinse water between fresh water and bath.
pub struct RinseWater {
    /// Its chemical system as a bath: `contents` are the fresh water, `agents` the reagents that break complexes.
    pub bath: Bath,
    /// Constants at the temperature of the treatment.
    pub constants: Constants,
    /// What a litre of bath brings, mol/L; the hydrogen is what it holds at its set point.
    pub from_bath: Vec<f64>,
    /// Index of H⁺.
    pub proton: usize,
    /// The water may hold what acid turns into a poisonous gas: none is poured.
    pub no_acid: bool,
    solver: Solver,
}

impl RinseWater {
    /// The rinse water behind a bath with the given doses in g/L and their pH correction. Reagents that the library
    /// has no constants for are left out.
    ///
    /// # Errors
    /// [`BathError`] for a bad rinse section or an ill-posed bath.
    pub fn new(bath: &Bath, doses: &[f64], reagents: &[&str]) -> Result<Self, BathError> {
        let rinse = &bath.project.rinse;
        rinse.check()?;
        check_amounts(rinse)?;
        let mut water = Bath::resolve(&project_of(bath, reagents)?)?;
        add_alkalinity(&mut water, rinse)?;
        let Some(proton) = water.system.proton else {
            return Err(EquilibriumError::NoProtonBalance.into());
        };
        let constants = bath.constants_at(bath.project.tank.temperature_c.set);
        let totals = bath.corrected(doses)?.totals;
        let dragged =
            bath.solve_totals(&mut Solver::new(), &constants, &totals, bath.ph_set(), Solids::Real)?;
        let place = |library: usize| bath.present.iter().position(|&known| known == library);
        let from_bath: Vec<f64> =
            water.present.iter().map(|&library| place(library).map_or(0.0, |i| dragged.totals[i])).collect();
        let poison = |token: &str| water.system.component(token).is_some_and(|i| from_bath[i] > 0.0);
        let no_acid = bath.project.sheet.holds_cyanide_sulfide_or_hypochlorite
            || POISON_SOURCES.iter().any(|token| poison(token));
        let constants = water.constants_at(rinse.temperature_c);
        let mut water = Self { constants, from_bath, proton, no_acid, solver: Solver::new(), bath: water };
        water.take_up_carbon_dioxide(rinse.water.ph)?;
        Ok(water)
    }

    /// Fresh water with the carbon dioxide that gives it its pH; a pH above that of its hydrogen carbonate alone leaves
    /// it as it is.
    fn take_up_carbon_dioxide(&mut self, ph: f64) -> Result<(), EquilibriumError> {
        let fresh = self.bath.contents.clone();
        let Some(carbonate) = self.bath.system.component(CARBONATE) else { return Ok(()) };
        if self.solve(&fresh, None)?.ph(self.proton) <= ph {
            return Ok(());
        }
        let mut brings = vec![0.0; fresh.len()];
        brings[carbonate] = 1.0;
        brings[self.proton] = 2.0;
        if let Some(mol_l) = treat::amount(self, &fresh, ph, &brings)? {
            self.bath.contents = treat::with(&fresh, &brings, mol_l);
        }
        Ok(())
    }

    /// Totals of water that holds a share of bath, mol/L.
    pub fn mixed(&self, share: f64) -> Vec<f64> {
        let fresh = self.bath.contents.iter();
        fresh.zip(&self.from_bath).map(|(fresh, bath)| (1.0 - share) * fresh + share * bath).collect()
    }

    /// Equilibrium of given totals with all fresh solids; a free pH follows from the total of H⁺.
    ///
    /// # Errors
    /// [`EquilibriumError`] for ill-posed totals.
    pub fn solve(&mut self, totals: &[f64], ph: Option<f64>) -> Result<Equilibrium, EquilibriumError> {
        self.bath.solve_totals(&mut self.solver, &self.constants, totals, ph, Solids::Real)
    }

    /// System indices of the complexing agents.
    pub fn agents(&self) -> impl Iterator<Item = usize> + '_ {
        (0..self.bath.present.len()).filter(|&i| self.bath.component(i).kind == ComponentKind::Agent)
    }

    /// Moles of complexing agent per litre; those that bind by one atom count only where there is no other.
    pub fn chelant_mol_l(&self, totals: &[f64]) -> f64 {
        let sum = |chelants: bool| -> f64 {
            let counts = |i: &usize| !chelants || self.bath.component(*i).donors != Some(1);
            self.agents().filter(counts).map(|i| totals[i]).sum()
        };
        let chelants = sum(true);
        if chelants > 0.0 { chelants } else { sum(false) }
    }

    /// The same water at the same pH without any complexing agent.
    ///
    /// # Errors
    /// [`EquilibriumError`] for ill-posed totals.
    pub fn without_agents(&mut self, totals: &[f64]) -> Result<Vec<f64>, EquilibriumError> {
        let ph = self.solve(totals, None)?.ph(self.proton);
        let mut bare = totals.to_vec();
        for agent in self.agents().collect::<Vec<_>>() {
            bare[agent] = 0.0;
        }
        bare[self.proton] = self.solve(&bare, Some(ph))?.totals[self.proton];
        Ok(bare)
    }
}

/// A project whose contents are the fresh water, with everything that bath and treatment can bring at zero.
fn project_of(bath: &Bath, reagents: &[&str]) -> Result<crate::bath::Project, BathError> {
    let rinse = &bath.project.rinse;
    let mut project = bath.project.clone();
    let none = Amount::new(0.0, Unit::MolePerLitre);
    let line = |what: &str, amount| Content {
        what: what.to_owned(),
        amount,
        trust: crate::bath::Trust::Assumed,
        note: String::new(),
    };
    let known = |token: &str| bath.library.component(token).is_some();
    project.contents = bath.system.components.iter().map(|token| line(token, none)).collect();
    for (token, amount) in HARDNESS.into_iter().zip([rinse.water.calcium, rinse.water.magnesium]) {
        if known(token) {
            project.contents.push(line(token, amount));
        }
    }
    for token in [CARBONATE, crate::chemistry::CHLORIDE, crate::chemistry::SODIUM] {
        if known(token) {
            project.contents.push(line(token, none));
        }
    }
    let usable = |id: &&&str| {
        let product = bath.catalogue.find(id);
        product.is_some_and(|product| product.releases.iter().all(|(token, _)| known(token)))
    };
    project.agents = reagents
        .iter()
        .filter(usable)
        .map(|id| AgentDose { product: (**id).to_owned(), max_g_l: 1000.0, ..AgentDose::default() })
        .collect();
    project.limits.clear();
    project.solids.clear();
    for (field, name) in [("rinse.alkali", &rinse.alkali), ("rinse.acid", &rinse.acid)] {
        if bath.catalogue.find(name).is_none() {
            return Err(BathError::Unknown {
                field: field.to_owned(),
                name: name.clone(),
                fix: "no product has this id or name; choose one from the list or add it under products"
                    .to_owned(),
            });
        }
    }
    project.adjust = Adjust { alkali: rinse.alkali.clone(), acid: rinse.acid.clone() };
    project.tank.ph = Ph::Predicted;
    project.tank.temperature_c = Range::fixed(rinse.temperature_c);
    project.tank.air = Air::Closed;
    Ok(project)
}

/// Hardness as hydrogen carbonate, or the alkalinity as typed with chloride or sodium for the rest.
fn add_alkalinity(water: &mut Bath, rinse: &Rinse) -> Result<(), BathError> {
    let (Some(carbonate), Some(proton)) = (water.system.component(CARBONATE), water.system.proton) else {
        return Ok(());
    };
    let hardness: f64 = HARDNESS
        .iter()
        .filter_map(|token| water.system.component(token))
        .map(|i| 2.0 * water.contents[i])
        .sum();
    let alkalinity = match rinse.water.hydrogen_carbonate {
        None => hardness,
        Some(amount) => {
            let base = amount.value * amount.unit.factor();
            // Alkalinity in mg/L of CaCO3 counts two hydrogen carbonates for each carbonate.
            match amount.unit.dimension() {
                Dimension::Hardness => 2.0 * base,
                Dimension::Mole => base,
                Dimension::Mass | Dimension::Volume => {
                    return Err(BathError::Unit {
                        field: "rinse.water.hydrogen_carbonate".to_owned(),
                        amount: amount.to_string(),
                        fix: "give mmol/L, or alkalinity in mg/L CaCO3".to_owned(),
                    });
                }
            }
        }
    };
    water.contents[carbonate] += alkalinity;
    water.contents[proton] += alkalinity;
    let rest = hardness - alkalinity;
    let counter = if rest > 0.0 { crate::chemistry::CHLORIDE } else { crate::chemistry::SODIUM };
    if let Some(i) = water.system.component(counter) {
        water.contents[i] += rest.abs();
    }
    Ok(())
}

fn check_amounts(rinse: &Rinse) -> Result<(), BathError> {
    let water = &rinse.water;
    let typed = [
        ("calcium", Some(water.calcium)),
        ("magnesium", Some(water.magnesium)),
        ("hydrogen_carbonate", water.hydrogen_carbonate),
    ];
    for (name, amount) in typed.into_iter().filter_map(|(name, amount)| Some((name, amount?))) {
        let field = format!("rinse.water.{name}");
        if !(amount.value.is_finite() && amount.value >= 0.0) {
            let fix = "give zero or a positive number";
            return Err(BathError::Number { field, value: amount.value, fix });
        }
        if amount.unit.dimension() == Dimension::Volume {
            let fix = "give mg/L, mmol/L or a hardness".to_owned();
            return Err(BathError::Unit { field, amount: amount.to_string(), fix });
        }
    }
    Ok(())
}
