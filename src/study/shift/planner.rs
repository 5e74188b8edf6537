//! What every trial of a plan needs: the judge, the contents of the tank at each step, doses with their acid or alkali.

use super::forecast::judge;
use super::judge::Judge;
use super::stirred::{Contents, bound};
use super::walk::Change;
use crate::bath::{Adjustment, Bath, Running};
use crate::dosing::{Direction, Measured, measure};
use crate::equilibrium::EquilibriumError;

/// Everything that a trial needs.
pub struct Planner<'a> {
    pub running: &'a Running<'a>,
    pub judge: Judge<'a>,
    /// The bath, to be given the contents of an hour.
    pub tank: Bath,
    pub agent: usize,
    sure: bool,
    pub start: Contents,
    /// Contents at the beginning of each step, before what is changed there, as far as they are known.
    trail: Vec<Contents>,
    /// Why the pH is not brought back, when the product at hand can't do it.
    pub uncorrected: Option<String>,
}

/// A dose with the acid or alkali that goes with it, per gram of product.
pub struct Mixture {
    /// Moles of each component per gram of the agent's product.
    per_gram: Vec<f64>,
    /// Acid or alkali, g per gram.
    adjuster: Option<Adjustment>,
}

impl Mixture {
    /// The acid or alkali for a dose, exact and as measured out.
    pub fn adjustment(&self, running: &Running, dose_g_l: f64) -> Option<(Adjustment, Measured)> {
        let per_gram = self.adjuster.as_ref()?;
        let adjustment = Adjustment { dose_g_l: per_gram.dose_g_l * dose_g_l, ..per_gram.clone() };
        let (amount, details) = (adjustment.dose_g_l, &running.bath.project.sheet);
        let measured = measure(&adjustment.product, amount, running.volume_l, details, Direction::Down);
        Some((adjustment, measured))
    }
}

impl<'a> Planner<'a> {
    /// Begins a plan.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn new(running: &'a Running<'a>, agent: usize, sure: bool) -> Result<Self, EquilibriumError> {
        let start = Contents::at_start(&running.bath)?;
        Ok(Self {
            running,
            judge: judge(running, &start)?,
            tank: running.bath.clone().into_owned(),
            agent,
            sure,
            trail: vec![start.clone()],
            start,
            uncorrected: None,
        })
    }

    /// Whether 95 % confidence is asked for.
    pub fn sure(&self) -> bool {
        self.sure
    }

    /// First step, from one up to which the bath is known to hold, at which a wall is crossed.
    pub fn first_crossed(
        &mut self,
        from: usize,
        changes: &[Change],
    ) -> Result<Option<usize>, EquilibriumError> {
        let steps = self.running.steps();
        let contents = self.contents_at(from, changes)?;
        let reach = self.reach(&contents, from, steps, changes, true)?;
        Ok((reach <= steps).then_some(reach))
    }

    /// First step from `from` to `until` at which the contents no longer hold, `until + 1` when they do throughout.
    /// What is changed at a step counts there as soon as it is changed; at `from` only when `changed_at_first`.
    pub fn reach(
        &mut self,
        from_contents: &Contents,
        from: usize,
        until: usize,
        changes: &[Change],
        changed_at_first: bool,
    ) -> Result<usize, EquilibriumError> {
        let mut contents = from_contents.clone();
        for step in from..=until {
            let mut solids = self.bound(&contents)?;
            let due =
                changes.iter().filter(|change| change.step == step && (step > from || changed_at_first));
            let due: Vec<&Change> = due.collect();
            // What comes at the beginning mends the beginning; later it must have held until then.
            let mends = step == 0 && !due.is_empty();
            if !mends && !self.judge.holds(&contents.totals, self.sure)? {
                return Ok(step);
            }
            if !due.is_empty() {
                for change in due {
                    contents = change.apply(&contents, &solids);
                }
                if !self.judge.holds(&contents.totals, self.sure)? {
                    return Ok(step);
                }
                solids = self.bound(&contents)?;
            }
            contents = contents.later(self.running, &solids, self.running.step_h);
        }
        Ok(until + 1)
    }

    /// Contents at the beginning of a step, before what is changed there. After a change of plan, those that it
    /// touches have to be forgotten first.
    pub fn contents_at(&mut self, step: usize, changes: &[Change]) -> Result<Contents, EquilibriumError> {
        while self.trail.len() <= step {
            let earlier = self.trail.len() - 1;
            let mut contents = self.trail[earlier].clone();
            for change in changes.iter().filter(|change| change.step == earlier) {
                contents = change.apply(&contents, &self.bound(&contents)?);
            }
            let solids = self.bound(&contents)?;
            self.trail.push(contents.later(self.running, &solids, self.running.step_h));
        }
        Ok(self.trail[step].clone())
    }

    /// Forgets the contents after a step at which the plan was changed.
    pub fn forget_after(&mut self, step: usize) {
        self.trail.truncate(step + 1);
    }

    /// What solids hold of each component at the set point.
    pub fn bound(&mut self, contents: &Contents) -> Result<Vec<f64>, EquilibriumError> {
        let solution = self.judge.solve(0, &contents.totals)?;
        Ok(bound(&self.running.bath, &solution))
    }

    /// The agent with its acid or alkali in proportion, found for the largest amount in question.
    pub fn mixture(&mut self, contents: &Contents, largest: f64) -> Result<Mixture, EquilibriumError> {
        self.tank.contents.clone_from(&contents.totals);
        let mut doses = vec![0.0; self.tank.agents.len()];
        doses[self.agent] = largest;
        let corrected = self.tank.corrected(&doses)?;
        self.uncorrected = self.uncorrected.take().or(corrected.failure);
        let adjuster =
            corrected.adjustment.map(|found| Adjustment { dose_g_l: found.dose_g_l / largest, ..found });
        let mut per_gram = self.tank.agents[self.agent].per_gram.clone();
        if let Some(Adjustment { product, dose_g_l }) = &adjuster {
            let bath = &self.tank;
            let adjusts = if *product == bath.alkali.product { &bath.alkali } else { &bath.acid };
            for (total, more) in per_gram.iter_mut().zip(&adjusts.per_gram) {
                *total += dose_g_l * more;
            }
        }
        Ok(Mixture { per_gram, adjuster })
    }

    /// A dose put in, nothing taken out.
    pub fn change(&self, step: usize, mixture: &Mixture, dose_g_l: f64) -> Change {
        let mut doses = vec![0.0; self.running.bath.agents.len()];
        doses[self.agent] = dose_g_l;
        let add = mixture.per_gram.iter().map(|moles| moles * dose_g_l).collect();
        Change { step, keep: 1.0, add, doses }
    }
}
