//! What a bath as found rests on: each input with its evidence and its uncertainty, and what that does to a value.

use super::meter::FoundPh;
use crate::bath::{Analyzed, Bath, BathError, Origin, Project, Trust};
use crate::equilibrium::{Gradient, LN_10, System};
use std::collections::BTreeMap;

/// One input of the bath as found.
#[derive(Clone, Debug, PartialEq)]
pub struct Input {
    /// What it is: "copper", "niso4-6", "pH".
    pub name: String,
    /// The value as typed.
    pub amount: String,
    /// What the recipe had made of it, in the same unit; for what was analysed only.
    pub believed: Option<f64>,
    /// What it rests on.
    pub trust: Trust,
    /// Whether today's analysis brought it.
    pub analysed: bool,
    /// Standard uncertainty: a share of the amount, or pH units.
    pub sigma: f64,
    /// Whether the uncertainty was given; otherwise it is the usual one of this evidence.
    pub stated: bool,
    /// What it moves.
    pub effect: Effect,
}

/// What an input moves.
#[derive(Clone, Debug, PartialEq)]
pub enum Effect {
    /// Moles of each system component per litre that the whole input stands for.
    Totals(Vec<f64>),
    /// The held pH.
    Ph,
}

/// Standard uncertainty of log10 of a value, by where it comes from.
#[derive(Clone, Debug, PartialEq)]
pub struct Spread {
    /// From the constants.
    pub constants: f64,
    /// From each input.
    pub inputs: Vec<f64>,
}

/// Usual standard uncertainty of an amount whose own is not stated, as a share of it. Own choice: a careful titration, one
/// that has aged, a make-up less a guessed drag-out, a guess.
pub fn usual_share(trust: Trust) -> f64 {
    match trust {
        Trust::Today => 0.02,
        Trust::Earlier => 0.05,
        Trust::Inferred => 0.10,
        Trust::Assumed => 0.30,
    }
}

/// The same of a pH reading. Own choice: a meter calibrated today, one that was, a strip, a guess.
pub fn usual_ph(trust: Trust) -> f64 {
    match trust {
        Trust::Today => 0.05,
        Trust::Earlier => 0.1,
        Trust::Inferred => 0.2,
        Trust::Assumed => 0.3,
    }
}

impl Input {
    /// Whether it was measured, today or earlier.
    pub fn is_measured(&self) -> bool {
        matches!(self.trust, Trust::Today | Trust::Earlier)
    }
}

impl Spread {
    /// The spread of a value from its gradient, in a bath that additions have thinned by `dilution`.
    pub fn of(gradient: &Gradient, system: &System, inputs: &[Input], dilution: f64) -> Self {
        let part = |input: &Input| match &input.effect {
            Effect::Totals(moles) => gradient.along(moles) * input.sigma / (dilution * LN_10),
            // d log10 / d pH = −d ln / d ln a of the hydrogen ion.
            Effect::Ph => system.proton.map_or(0.0, |proton| -gradient.by_held(system, proton)) * input.sigma,
        };
        Self {
            constants: gradient.sigma_log10(system),
            inputs: inputs.iter().map(|input| part(input).abs()).collect(),
        }
    }

    /// All together.
    pub fn total(&self) -> f64 {
        self.with(|_| true)
    }

    /// Constants and the inputs that are wanted, by number.
    pub fn with(&self, wanted: impl Fn(usize) -> bool) -> f64 {
        let inputs = self.inputs.iter().enumerate().filter(|(number, _)| wanted(*number));
        (self.constants.powi(2) + inputs.map(|(_, sigma)| sigma.powi(2)).sum::<f64>()).sqrt()
    }

    /// Share of the variance that one input brings.
    pub fn share(&self, input: usize) -> f64 {
        let all = self.total().powi(2);
        if all > 0.0 { self.inputs[input].powi(2) / all } else { 0.0 }
    }

    /// Inputs by falling share of the variance.
    pub fn ranking(&self) -> Vec<usize> {
        let mut order: Vec<usize> = (0..self.inputs.len()).collect();
        order.sort_by(|&a, &b| self.inputs[b].total_cmp(&self.inputs[a]));
        order
    }
}

/// The inputs of a bath as found: one for each result and for each line of the recipe that is still in force.
pub(super) fn inputs(
    project: &Project,
    analyzed: &Analyzed,
    bath: &Bath,
    ph: Option<&FoundPh>,
) -> Result<Vec<Input>, BathError> {
    let mut moles: BTreeMap<Origin, Vec<f64>> = BTreeMap::new();
    for (origin, line) in analyzed.origins.iter().zip(bath.lines()?) {
        let sum = moles.entry(*origin).or_insert_with(|| vec![0.0; line.len()]);
        sum.iter_mut().zip(line).for_each(|(sum, part)| *sum += part);
    }
    let ph = ph.map(|found| Input {
        name: "pH".to_owned(),
        amount: crate::quantity::plain(found.bath, 2),
        believed: bath.ph_set(),
        trust: found.trust,
        analysed: true,
        sigma: found.sigma,
        stated: found.stated,
        effect: Effect::Ph,
    });
    let totals = moles.into_iter().map(|(origin, moles)| {
        let effect = Effect::Totals(moles);
        match origin {
            Origin::Finding(number) => {
                let finding = &project.analysis.results[number];
                let stated = finding.relative_uncertainty();
                Input {
                    name: finding.what.clone(),
                    amount: finding.amount.to_string(),
                    believed: Some(analyzed.believed[number]),
                    trust: finding.trust,
                    analysed: true,
                    sigma: stated.unwrap_or_else(|| usual_share(finding.trust)),
                    stated: stated.is_some(),
                    effect,
                }
            }
            Origin::Recipe(number) => {
                let content = &project.contents[number];
                let whole = analyzed.project.contents.contains(content);
                Input {
                    name: if whole { content.what.clone() } else { format!("the rest of {}", content.what) },
                    amount: content.amount.to_string(),
                    believed: None,
                    trust: content.trust,
                    analysed: false,
                    sigma: usual_share(content.trust),
                    stated: false,
                    effect,
                }
            }
        }
    });
    Ok(totals.chain(ph).collect())
}
