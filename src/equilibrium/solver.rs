//! Solves a system: absent components out, held activities fixed, solids settled, activity coefficients brought to rest.

use super::convex::Minimiser;
use super::coupling::{Coupling, Rest};
use super::error::EquilibriumError;
use super::layout::Layout;
use super::problem::{Equilibrium, Problem};
use super::report;
use super::solids::{Exchange, Unsettled, exchange, settle};
use super::stage::{Fixed, Stage};
use super::start::Start;

/// Rounds of solids and activity coefficients.
const MAX_ROUNDS: usize = 60;
/// Share of the correction of the first step by degrees, and the smallest step.
const FIRST_DEGREE: f64 = 0.2;
const LEAST_DEGREE: f64 = 1e-3;
/// Residual of the original balances from which refinement is worth a step.
const REFINED: f64 = 1e-11;
const MAX_REFINEMENTS: usize = 3;
/// Distance of the sums from their concentrations, in units of the ionic strength, that counts as rest.
const AT_REST: f64 = 1e-13;
/// Distance up to which a round that no longer gains is accepted.
const NEARLY_AT_REST: f64 = 1e-11;

/// The solver with its buffers and its memory of the last point.
#[derive(Clone, Debug, Default)]
pub struct Solver {
    layout: Layout,
    coupling: Coupling,
    minimiser: Minimiser,
    stage: Stage,
    start: Start,
    amounts: Vec<(usize, f64)>,
    barred: Vec<usize>,
    x: Vec<f64>,
    /// Whether the stage holds the solution of the last problem.
    warm: bool,
}

impl Solver {
    /// A fresh solver.
    pub fn new() -> Self {
        Self::default()
    }

    /// Forgets the last point, so that the next solve starts cold.
    pub fn reset(&mut self) {
        self.warm = false;
    }

    /// Solves a problem, starting from the last one when it had the same components.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed problem; never for a well-posed one.
    pub fn solve(&mut self, problem: &Problem) -> Result<Equilibrium, EquilibriumError> {
        let mut result = Equilibrium::default();
        self.solve_into(problem, &mut result)?;
        Ok(result)
    }

    /// As [`Solver::solve`] into a result whose buffers are used again: a walk of neighbouring points then allocates
    /// nothing.
    ///
    /// # Errors
    /// As [`Solver::solve`]; the result is then meaningless.
    pub fn solve_into(
        &mut self,
        problem: &Problem,
        result: &mut Equilibrium,
    ) -> Result<(), EquilibriumError> {
        check(problem)?;
        let mut warm = std::mem::take(&mut self.warm);
        if !self.layout.load(problem)? || !self.coupling.serves(problem) {
            self.coupling.prepare(problem, &self.layout);
            warm = false;
        }
        let mut iterations = 0;
        let mut found = Err(Failure::NotConverged(f64::NAN));
        if warm {
            found = self.go_on(problem, &mut iterations);
        }
        if matches!(found, Err(Failure::NotConverged(_))) {
            found = self.begin(problem, &mut iterations);
        }
        if matches!(found, Err(Failure::NotConverged(_))) && problem.constants.model.corrects() {
            found = self.by_degrees(problem, &mut iterations);
            self.coupling.share = 1.0;
        }
        match found {
            Ok(()) => {
                self.warm = true;
                self.report(problem, result);
                self.refine(problem, result, &mut iterations);
                result.certificate.iterations = iterations;
                Ok(())
            }
            Err(Failure::Unbounded { solid, excess }) => Err(EquilibriumError::UnboundedSolid {
                solid: problem.system.solids[self.layout.solids[solid]].token.clone(),
                index: excess / super::LN_10,
            }),
            Err(Failure::NotConverged(_)) if lacks_proton_balance(problem) => {
                Err(EquilibriumError::NoProtonBalance)
            }
            Err(Failure::NotConverged(residual)) => {
                Err(EquilibriumError::NotConverged { residual, iterations })
            }
        }
    }

    fn report(&self, problem: &Problem, result: &mut Equilibrium) {
        let Self { layout, coupling, minimiser, x, amounts, .. } = self;
        report::fill(problem, layout, coupling, minimiser, (x, amounts), result);
    }

    /// Where rounding shows in the original balances, the unknowns were chosen by sizes that the solution doesn't have:
    /// they are chosen once more by those it has.
    fn refine(&mut self, problem: &Problem, result: &mut Equilibrium, iterations: &mut usize) {
        for _ in 0..MAX_REFINEMENTS {
            if result.certificate.balance_residual <= REFINED {
                return;
            }
            let Self { layout, coupling, minimiser, stage, x, .. } = self;
            let fixed = fixed(layout, coupling);
            let active: Vec<usize> = stage.active.iter().map(|&(solid, _)| solid).collect();
            stage.weigh(&fixed, &minimiser.c);
            stage.prepare(&fixed, &active, x);
            if self.settle_and_rest(problem, iterations).is_err() {
                self.warm = false;
                return;
            }
            self.report(problem, result);
        }
    }

    /// From nothing.
    fn begin(&mut self, problem: &Problem, iterations: &mut usize) -> Result<(), Failure> {
        self.coupling.guess(problem);
        self.coupling.refresh(problem);
        let Self { layout, coupling, stage, start, x, .. } = self;
        x.clear();
        x.extend(layout.columns.iter().map(|&component| {
            let proton = problem.system.proton == Some(component);
            let free = if proton { 1e-7 } else { problem.totals[component].max(1e-30) };
            problem.held[component].unwrap_or_else(|| free.ln())
        }));
        let fixed = fixed(layout, coupling);
        stage.forget();
        stage.prepare(&fixed, &[], x);
        stage.start(&fixed, start);
        self.settle_and_rest(problem, iterations)
    }

    /// From the solution of the last problem.
    fn go_on(&mut self, problem: &Problem, iterations: &mut usize) -> Result<(), Failure> {
        self.coupling.refresh(problem);
        let Self { layout, coupling, minimiser, stage, x, amounts, barred, .. } = self;
        stage.reload(&fixed(layout, coupling), &minimiser.exponent);
        if problem.constants.model.corrects() && rest(problem, coupling, stage, minimiser, iterations) {
            stage.ln_activities(x);
            barred.clear();
            if matches!(exchange(&fixed(layout, coupling), stage, minimiser, amounts, barred), Exchange::None)
            {
                return Ok(());
            }
        }
        self.settle_and_rest(problem, iterations)
    }

    /// From no correction to the full one by degrees, for baths so strong that the way from a guess was lost.
    fn by_degrees(&mut self, problem: &Problem, iterations: &mut usize) -> Result<(), Failure> {
        self.coupling.share = 0.0;
        self.begin(problem, iterations)?;
        let mut degree = FIRST_DEGREE;
        while self.coupling.share < 1.0 {
            let (sums, y, share) = (self.coupling.sums.clone(), self.stage.y.clone(), self.coupling.share);
            let active = self.stage.active.clone();
            self.coupling.share = (share + degree).min(1.0);
            match self.settle_and_rest(problem, iterations) {
                Ok(()) => degree *= 1.5,
                Err(Failure::NotConverged(residual)) if degree < LEAST_DEGREE => {
                    return Err(Failure::NotConverged(residual));
                }
                Err(Failure::NotConverged(_)) => {
                    degree *= 0.25;
                    self.coupling.share = share;
                    self.coupling.sums = sums;
                    if self.stage.active == active && self.stage.y.len() == y.len() {
                        self.stage.y = y;
                    }
                    self.settle_and_rest(problem, iterations)?;
                }
                Err(unbounded) => return Err(unbounded),
            }
        }
        Ok(())
    }

    /// Settles the solids at given activity coefficients, brings these to rest with the concentrations, and looks at the
    /// solids again, until neither changes.
    fn settle_and_rest(&mut self, problem: &Problem, iterations: &mut usize) -> Result<(), Failure> {
        let Self { layout, coupling, minimiser, stage, x, amounts, barred, .. } = self;
        let mut bracket = Bracket::default();
        let mut best = f64::INFINITY;
        for _ in 0..MAX_ROUNDS {
            coupling.refresh(problem);
            let outcome = settle(&fixed(layout, coupling), stage, minimiser, amounts, x)
                .map_err(|unsettled| Failure::from_unsettled(unsettled, iterations))?;
            *iterations += outcome.steps;
            let distance = coupling.distance(&minimiser.c);
            if distance <= AT_REST || (distance <= NEARLY_AT_REST && distance >= 0.5 * best) {
                return if outcome.converged { Ok(()) } else { Err(Failure::NotConverged(outcome.residual)) };
            }
            best = best.min(distance);
            let from = coupling.sums[0];
            bracket.narrow(coupling);
            if rest(problem, coupling, stage, minimiser, iterations) {
                stage.ln_activities(x);
                barred.clear();
                let fixed = fixed(layout, coupling);
                match exchange(&fixed, stage, minimiser, amounts, barred) {
                    Exchange::None => return Ok(()),
                    Exchange::Unbounded { solid, excess } => {
                        return Err(Failure::Unbounded { solid, excess });
                    }
                    Exchange::Made => {
                        let active: Vec<usize> = amounts.iter().map(|&(solid, _)| solid).collect();
                        stage.weigh(&fixed, &minimiser.c);
                        stage.prepare(&fixed, &active, x);
                        if !bracket.holds(coupling.sums[0]) {
                            bracket = Bracket::default();
                        }
                        continue;
                    }
                }
            }
            // Newton's method on both failed: move the sums alone, inside what is known of them.
            coupling.sums[0] = from;
            coupling.distance(&minimiser.c);
            bracket.move_inside(coupling);
        }
        Err(Failure::NotConverged(best))
    }
}

/// Why a solve has no result.
#[derive(Clone, Copy, Debug)]
enum Failure {
    Unbounded { solid: usize, excess: f64 },
    NotConverged(f64),
}

impl Failure {
    fn from_unsettled(unsettled: Unsettled, iterations: &mut usize) -> Self {
        match unsettled {
            Unsettled::Unbounded { solid, excess } => Self::Unbounded { solid, excess },
            Unsettled::Endless { steps } => {
                *iterations += steps;
                Self::NotConverged(f64::NAN)
            }
        }
    }
}

fn fixed<'a>(layout: &'a Layout, coupling: &'a Coupling) -> Fixed<'a> {
    Fixed {
        base: &layout.base,
        ln_ks: &layout.ln_ks,
        column_weight: &layout.weights,
        minus_ln_gamma: &coupling.minus_ln_gamma,
    }
}

fn rest(
    problem: &Problem,
    coupling: &mut Coupling,
    stage: &mut Stage,
    minimiser: &mut Minimiser,
    iterations: &mut usize,
) -> bool {
    let Stage { balances, y, .. } = stage;
    coupling.rest(problem, balances, minimiser, y, iterations) == Rest::Reached
}

/// What is known of the ionic strength: I(c(I)) is above I at the low end and below it at the high one.
#[derive(Clone, Copy, Debug)]
struct Bracket {
    low: f64,
    high: f64,
}

impl Default for Bracket {
    fn default() -> Self {
        Self { low: 0.0, high: f64::INFINITY }
    }
}

impl Bracket {
    fn narrow(&mut self, coupling: &Coupling) {
        let now = coupling.sums[0];
        if coupling.found_strength() > now {
            self.low = self.low.max(now);
        } else {
            self.high = self.high.min(now);
        }
    }

    fn holds(&self, strength: f64) -> bool {
        (self.low..=self.high).contains(&strength)
    }

    fn move_inside(&self, coupling: &mut Coupling) {
        let now = coupling.sums[0];
        coupling.adopt(0.5);
        if !self.holds(coupling.sums[0]) || coupling.sums[0] == now {
            coupling.sums[0] =
                if self.high.is_finite() { 0.5 * (self.low + self.high) } else { 2.0 * now + 1e-6 };
        }
    }
}

fn check(problem: &Problem) -> Result<(), EquilibriumError> {
    for (i, token) in problem.system.components.iter().enumerate() {
        let (total, is_proton) = (problem.totals[i], problem.system.proton == Some(i));
        match problem.held[i] {
            Some(ln_a) if !ln_a.is_finite() => {
                return Err(EquilibriumError::BadHeld { component: token.clone() });
            }
            None if !total.is_finite() || (total < 0.0 && !is_proton) => {
                return Err(EquilibriumError::BadTotal { component: token.clone(), value: total });
            }
            _ => {}
        }
    }
    Ok(())
}

/// Whether the hydrogen balance is free, not positive, and no species gives it a negative part.
fn lacks_proton_balance(problem: &Problem) -> bool {
    problem.system.proton.is_some_and(|h| {
        problem.held[h].is_none()
            && problem.totals[h] <= 0.0
            && !problem
                .system
                .species
                .iter()
                .any(|s| s.components.len() == 1 && s.components[0].0 == h && s.components[0].1 < 0.0)
    })
}
