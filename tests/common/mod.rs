//! Shared by the tests: random chemical systems from a seed.

#![allow(dead_code)]

use bathwright::equilibrium::{
    ActivityModel, Constants, Interaction, Problem, SolidEntry, SpeciesEntry, System, SystemParts,
};

/// A small deterministic generator (xorshift64*, Vigna 2016), so that a failing seed can be run again anywhere.
pub struct Dice(u64);

impl Dice {
    pub fn new(seed: u64) -> Self {
        Self(seed.wrapping_mul(0x9E37_79B9_7F4A_7C15) | 1)
    }

    pub fn next(&mut self) -> u64 {
        self.0 ^= self.0 >> 12;
        self.0 ^= self.0 << 25;
        self.0 ^= self.0 >> 27;
        self.0.wrapping_mul(0x2545_F491_4F6C_DD1D)
    }

    pub fn unit(&mut self) -> f64 {
        (self.next() >> 11) as f64 / (1u64 << 53) as f64
    }

    pub fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.unit()
    }

    pub fn whole(&mut self, low: usize, high: usize) -> usize {
        low + (self.next() % (high - low + 1) as u64) as usize
    }

    pub fn chance(&mut self, share: f64) -> bool {
        self.unit() < share
    }
}

/// A random system with everything a problem needs.
pub struct RandomSystem {
    pub system: System,
    pub constants: Constants,
    pub totals: Vec<f64>,
    pub held: Vec<Option<f64>>,
    pub may_form: Vec<bool>,
}

impl RandomSystem {
    pub fn problem(&self) -> Problem<'_> {
        Problem {
            system: &self.system,
            constants: &self.constants,
            totals: &self.totals,
            held: &self.held,
            may_form: &self.may_form,
            open_to: &[],
            counter_ion: false,
        }
    }
}

fn species(token: String, components: Vec<(usize, f64)>, charges: &[f64]) -> SpeciesEntry {
    let charge = components.iter().map(|&(i, nu)| nu * charges[i]).sum();
    SpeciesEntry { token, charge, components, chain: Vec::new() }
}

/// Three classes each of cations and anions with coefficients of −0.3 to 0.3 kg/mol towards each other, the same both
/// ways as they derive from one excess energy.
fn random_interaction(dice: &mut Dice, species: &[SpeciesEntry]) -> Interaction {
    let pairs: Vec<f64> = (0..9).map(|_| dice.between(-0.3, 0.3)).collect();
    let class: Vec<Option<usize>> = species
        .iter()
        .map(|one| match one.charge {
            charge if charge > 0.0 => Some(dice.whole(0, 2)),
            charge if charge < 0.0 => Some(3 + dice.whole(0, 2)),
            _ => None,
        })
        .collect();
    let between = |one: usize, other: Option<usize>| match other {
        Some(other) if one < 3 && other >= 3 => pairs[3 * one + other - 3],
        Some(other) if one >= 3 && other < 3 => pairs[3 * other + one - 3],
        _ => 0.0,
    };
    Interaction {
        epsilon: (0..6).map(|one| class.iter().map(|&other| between(one, other)).collect()).collect(),
        counter: (0..6).map(|one| if one < 3 { (0.0, 0.1) } else { (0.05, 0.0) }).collect(),
        salting_out: species.iter().map(|one| if one.charge == 0.0 { 0.1 } else { 0.0 }).collect(),
        class,
    }
}

/// 1–8 metals, 1–6 agents, up to 120 species with log β −25…45, totals 0 or 1e−12…5 mol/L, pH held at −1…15 or
/// total H of either sign, 0–6 solids with parallel ones among them, Davies on or off.
pub fn random_system(seed: u64) -> RandomSystem {
    let mut dice = Dice::new(seed);
    let (metals, agents) = (dice.whole(1, 8), dice.whole(1, 6));
    let count = 1 + metals + agents;
    let mut charges = vec![1.0];
    charges.extend((0..metals).map(|_| dice.whole(1, 3) as f64));
    charges.extend((0..agents).map(|_| -(dice.whole(0, 4) as f64)));
    let mut system = SystemParts {
        components: (0..count).map(|i| format!("X{i}")).collect(),
        proton: Some(0),
        ..SystemParts::default()
    };
    let mut ln_beta = vec![0.0; count];
    for i in 0..count {
        system.species.push(species(format!("X{i}"), vec![(i, 1.0)], &charges));
    }
    let push =
        |system: &mut SystemParts, ln_beta: &mut Vec<f64>, components: Vec<(usize, f64)>, log_beta: f64| {
            let token = format!("S{}", system.species.len());
            system.species.push(species(token, components, &charges));
            ln_beta.push(log_beta * std::f64::consts::LN_10);
        };
    push(&mut system, &mut ln_beta, vec![(0, -1.0)], -14.0);
    let target = dice.whole(count + 1, 120);
    while system.species.len() < target {
        let metal = 1 + dice.whole(0, metals - 1);
        let agent = 1 + metals + dice.whole(0, agents - 1);
        let mut components = Vec::new();
        let (with_metal, with_agent) = (dice.chance(0.75), dice.chance(0.8));
        if with_metal {
            components.push((metal, dice.whole(1, 2) as f64));
        }
        if with_agent {
            components.push((agent, dice.whole(1, 3) as f64));
        }
        if components.is_empty() {
            continue;
        }
        let protons = dice.whole(0, 6) as f64 - 3.0;
        if protons != 0.0 {
            components.push((0, protons));
        }
        components.sort_by_key(|&(i, _)| i);
        let log_beta = dice.between(-25.0, 45.0);
        push(&mut system, &mut ln_beta, components, log_beta);
    }
    let mut totals: Vec<f64> = (0..count)
        .map(|_| if dice.chance(0.08) { 0.0 } else { 10f64.powf(dice.between(-12.0, 0.7)) })
        .collect();
    let mut held = vec![None; count];
    if dice.chance(0.5) {
        held[0] = Some(-dice.between(-1.0, 15.0) * std::f64::consts::LN_10);
    } else if dice.chance(0.5) {
        totals[0] = -totals[0];
    }
    let mut ln_ks = Vec::new();
    let solids = if dice.chance(0.5) { 0 } else { dice.whole(1, 6) };
    for k in 0..solids {
        let parallel = k > 0 && dice.chance(0.3);
        let components = if parallel {
            system.solids[k - 1].components.clone()
        } else {
            let mut components = vec![(1 + dice.whole(0, metals - 1), dice.whole(1, 3) as f64)];
            if dice.chance(0.5) {
                components.push((1 + metals + dice.whole(0, agents - 1), dice.whole(1, 2) as f64));
            }
            if dice.chance(0.6) {
                components.insert(0, (0, -(dice.whole(1, 3) as f64)));
            }
            components
        };
        system.solids.push(SolidEntry { token: format!("P{k}"), components, chain: Vec::new(), aged: false });
        ln_ks.push(dice.between(-25.0, 10.0) * std::f64::consts::LN_10);
    }
    let model = match dice.whole(0, 3) {
        0 => ActivityModel::IonInteraction,
        1 => ActivityModel::Davies,
        _ => ActivityModel::AsMeasured,
    };
    if model == ActivityModel::IonInteraction {
        system.interaction = random_interaction(&mut dice, &system.species);
        // Beyond about 6 mol/kg no interaction coefficient was ever fitted.
        let strongest = totals.iter().fold(0.0f64, |most, total| most.max(total.abs()));
        totals.iter_mut().for_each(|total| *total *= (0.5 / strongest).min(1.0));
    }
    let constants = Constants { ln_beta, ln_ks, ln_kg: Vec::new(), model, slope_a: 0.5105, water_kg_l: 1.0 };
    let may_form = vec![true; system.solids.len()];
    RandomSystem { system: system.into(), constants, totals, held, may_form }
}
