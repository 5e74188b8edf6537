//! A walk through the hours: the contents of the tank step by step, with what the operators change in between.

use super::judge::Judge;
use super::stirred::{Contents, bound};
use crate::bath::Running;
use crate::equilibrium::EquilibriumError;

/// What is changed at the tank at the beginning of a step: some of the solution is taken out, something is put in.
#[derive(Clone, Debug, PartialEq)]
pub struct Change {
    /// Number of the step, from 0.
    pub step: usize,
    /// Part of the solution that stays; solids stay whole.
    pub keep: f64,
    /// What is put in, mol per litre of bath by system component.
    pub add: Vec<f64>,
    /// Products among it, g per litre of bath by agent.
    pub doses: Vec<f64>,
}

impl Change {
    /// The contents after the change.
    pub fn apply(&self, contents: &Contents, bound: &[f64]) -> Contents {
        let kept = |total: f64, solid: f64| solid + self.keep * (total - solid);
        let totals = contents.totals.iter().zip(bound).zip(&self.add);
        let doses = contents.doses.iter().zip(&self.doses);
        Contents {
            totals: totals.map(|((total, solid), more)| kept(*total, *solid) + more).collect(),
            doses: doses.map(|(dose, more)| self.keep * dose + more).collect(),
        }
    }
}

/// A moment of a walk.
#[derive(Clone, Debug)]
pub struct Moment {
    /// Hours from the beginning.
    pub hour: f64,
    /// What is in the tank.
    pub contents: Contents,
    /// What solids hold of each component at the set point, mol/L.
    pub bound: Vec<f64>,
    /// Amount of each solid at the set point, mol/L.
    pub solids: Vec<f64>,
    /// log10 of every value that the judge follows, by place.
    pub values: Vec<Vec<f64>>,
}

/// Moments between two changes; the first is right after a change, the last right before the next.
pub type Leg = Vec<Moment>;

/// Walks from the start through all steps.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn walk(
    running: &Running,
    judge: &mut Judge,
    start: &Contents,
    changes: &[Change],
) -> Result<Vec<Leg>, EquilibriumError> {
    let steps = running.steps();
    let mut legs = Vec::new();
    let mut leg = Vec::new();
    let mut moment = at(running, judge, 0.0, start.clone())?;
    for step in 0..=steps {
        let hour = step as f64 * running.step_h;
        for change in changes.iter().filter(|change| change.step == step) {
            let after = change.apply(&moment.contents, &moment.bound);
            if step > 0 {
                leg.push(moment);
                legs.push(std::mem::take(&mut leg));
            }
            moment = at(running, judge, hour, after)?;
        }
        if step < steps {
            let later = moment.contents.later(running, &moment.bound, running.step_h);
            leg.push(moment);
            moment = at(running, judge, (step + 1) as f64 * running.step_h, later)?;
        }
    }
    leg.push(moment);
    legs.push(leg);
    Ok(legs)
}

/// The moment at an hour.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn at(
    running: &Running,
    judge: &mut Judge,
    hour: f64,
    contents: Contents,
) -> Result<Moment, EquilibriumError> {
    let set = judge.solve(0, &contents.totals)?;
    let mut values = Vec::with_capacity(judge.places());
    values.push(judge.read(0, &set));
    for place in 1..judge.places() {
        values.push(judge.values(place, &contents.totals)?);
    }
    Ok(Moment { hour, contents, bound: bound(&running.bath, &set), solids: set.solids, values })
}
