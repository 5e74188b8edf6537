//! The systems of the benches: random ones of a given size, and a slow walk along pH through each.

use bathwright::equilibrium::{ActivityModel, Constants, LN_10, Problem, SpeciesEntry, System};

/// A deterministic generator (xorshift64*, Vigna 2016), so that every run solves the same systems.
struct Dice(u64);

impl Dice {
    fn next(&mut self) -> u64 {
        self.0 ^= self.0 >> 12;
        self.0 ^= self.0 << 25;
        self.0 ^= self.0 >> 27;
        self.0.wrapping_mul(0x2545_F491_4F6C_DD1D)
    }

    fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * ((self.next() >> 11) as f64 / (1u64 << 53) as f64)
    }

    fn whole(&mut self, low: usize, high: usize) -> usize {
        low + (self.next() % (high - low + 1) as u64) as usize
    }
}

/// A system with its constants and totals; pH is held.
pub struct Case {
    pub system: System,
    pub constants: Constants,
    pub totals: Vec<f64>,
    pub held: Vec<Option<f64>>,
    pub may_form: Vec<bool>,
}

impl Case {
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

/// `components` unknowns (H⁺ among them, then metals, then agents) and `species` species with log β −25…45, totals
/// 1e−12…5 mol/L, hydrogen as a total of either sign.
pub fn random_case(components: usize, species: usize, seed: u64) -> Case {
    let mut dice = Dice(seed.wrapping_mul(0x9E37_79B9_7F4A_7C15) | 1);
    let metals = (components - 1).div_ceil(2);
    let mut system = bathwright::equilibrium::SystemParts {
        components: (0..components).map(|i| format!("X{i}")).collect(),
        proton: Some(0),
        ..Default::default()
    };
    let mut ln_beta = vec![0.0; components];
    for i in 0..components {
        let token = format!("X{i}");
        system.species.push(SpeciesEntry {
            token,
            charge: 0.0,
            components: vec![(i, 1.0)],
            chain: Vec::new(),
        });
    }
    let mut push = |components: Vec<(usize, f64)>, log_beta: f64| {
        let token = format!("S{}", system.species.len());
        system.species.push(SpeciesEntry { token, charge: 0.0, components, chain: Vec::new() });
        ln_beta.push(log_beta * LN_10);
    };
    push(vec![(0, -1.0)], -14.0);
    for _ in components + 1..species {
        let mut terms = Vec::new();
        let kind = dice.whole(0, 9);
        if kind < 8 {
            terms.push((1 + dice.whole(0, metals - 1), dice.whole(1, 2) as f64));
        }
        if kind > 1 {
            terms.push((1 + metals + dice.whole(0, components - 2 - metals), dice.whole(1, 3) as f64));
        }
        let protons = dice.whole(0, 6) as f64 - 3.0;
        if protons != 0.0 {
            terms.insert(0, (0, protons));
        }
        push(terms, dice.between(-25.0, 45.0));
    }
    let mut totals: Vec<f64> = (0..components).map(|_| 10f64.powf(dice.between(-12.0, 0.7))).collect();
    if dice.whole(0, 1) == 1 {
        totals[0] = -totals[0];
    }
    let constants = Constants {
        ln_beta,
        ln_ks: Vec::new(),
        ln_kg: Vec::new(),
        model: ActivityModel::AsMeasured,
        slope_a: 0.5105,
        water_kg_l: 1.0,
    };
    Case { held: vec![None; components], may_form: Vec::new(), system: system.into(), constants, totals }
}
