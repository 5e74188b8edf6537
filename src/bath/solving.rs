//! Asking a bath for equilibria: which pH is held, which solids take part, what the air brings.

use super::operating::Range;
use super::project::Rule;
use super::resolve::Bath;
use crate::equilibrium::{Constants, Equilibrium, EquilibriumError, LN_10, Problem, Sensitivities, Solver};
use crate::quantity::kelvin;

/// One point of operation.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Point<'a> {
    /// pH to hold; `None` lets the charge balance decide.
    pub ph: Option<f64>,
    /// Grams of each agent's product per litre of bath.
    pub doses: &'a [f64],
}

/// Which solids take part in an equilibrium.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Solids {
    /// All that form in the time of a shift: what will be in the tank.
    Real,
    /// Only those that may; the others stay dissolved, so that their saturation index tells how far off a dose is.
    Walls,
}

/// A solver set up for one bath, for many points of it.
#[derive(Clone, Debug)]
pub struct Points<'a> {
    bath: &'a Bath,
    solver: Solver,
    held: Vec<Option<f64>>,
    may_form: Vec<bool>,
    open_to: Vec<Option<f64>>,
}

impl<'a> Points<'a> {
    /// Sets up.
    pub fn new(bath: &'a Bath, solids: Solids) -> Self {
        Self {
            solver: Solver::new(),
            held: vec![None; bath.system.components.len()],
            may_form: bath.may_form(solids),
            open_to: bath.open_to(),
            bath,
        }
    }

    /// Solves for given totals into a result whose buffers are used again; with a free pH the total of H⁺ decides it.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn solve_into(
        &mut self,
        constants: &Constants,
        totals: &[f64],
        ph: Option<f64>,
        result: &mut Equilibrium,
    ) -> Result<(), EquilibriumError> {
        self.hold(ph);
        let Self { bath, solver, held, may_form, open_to } = self;
        solver.solve_into(&problem(bath, constants, totals, (held, may_form, open_to)), result)
    }

    /// Exact derivatives at a point solved before, handed to `ask`.
    ///
    /// # Errors
    /// [`EquilibriumError`] when the response is singular.
    pub fn sensitivities<T>(
        &mut self,
        constants: &Constants,
        totals: &[f64],
        ph: Option<f64>,
        solution: &Equilibrium,
        ask: impl FnOnce(&Sensitivities) -> T,
    ) -> Result<T, EquilibriumError> {
        self.hold(ph);
        let Self { bath, held, may_form, open_to, .. } = self;
        let problem = problem(bath, constants, totals, (held, may_form, open_to));
        Ok(ask(&Sensitivities::new(problem, solution)?))
    }

    /// The bath.
    pub fn bath(&self) -> &'a Bath {
        self.bath
    }

    fn hold(&mut self, ph: Option<f64>) {
        if let Some(proton) = self.bath.system.proton {
            self.held[proton] = ph.map(|ph| -ph * LN_10);
        }
    }
}

/// What is held, what may form, and what the bath is open to.
type Conditions<'a> = (&'a [Option<f64>], &'a [bool], &'a [Option<f64>]);

fn problem<'a>(
    bath: &'a Bath,
    constants: &'a Constants,
    totals: &'a [f64],
    (held, may_form, open_to): Conditions<'a>,
) -> Problem<'a> {
    Problem { system: &bath.system, constants, totals, held, may_form, open_to, counter_ion: true }
}

impl Bath {
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
        self.solve_totals(solver, constants, &self.totals(point.doses), point.ph, Solids::Real)
    }

    /// Solves for given totals; with a free pH the total of H⁺ decides it.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn solve_totals(
        &self,
        solver: &mut Solver,
        constants: &Constants,
        totals: &[f64],
        ph: Option<f64>,
        solids: Solids,
    ) -> Result<Equilibrium, EquilibriumError> {
        let (held, may_form, open_to) = (self.held(ph), self.may_form(solids), self.open_to());
        solver.solve(&problem(self, constants, totals, (&held, &may_form, &open_to)))
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
        let problem = problem(self, constants, totals, (&held, &may_form, &open_to));
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
}
