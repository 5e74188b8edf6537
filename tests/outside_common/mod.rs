//! Shared by the tests against the outside: a project written as a RON snippet, resolved and solved at one point.

#![allow(dead_code)]

use bathwright::bath::{self, Bath, Point};
use bathwright::equilibrium::{Constants, Equilibrium, LN_10, Solver};

/// A chemistry of one's own: components and constants taken from the source under test, nothing from the library.
#[derive(Default)]
pub struct Chemistry {
    components: String,
    reactions: String,
    solids: String,
}

impl Chemistry {
    /// Components with their kind in a bath, "Ca+2: Metal, EDTA-4: Agent, H+: Proton".
    pub fn of(components: &str) -> Self {
        let mut chemistry = Self::default();
        for entry in components.split(", ") {
            let (token, kind) = entry.split_once(": ").expect("token: kind");
            chemistry.components +=
                &format!("(token: \"{token}\", name: \"{token}\", kind: {kind}),\n            ");
        }
        chemistry
    }

    /// Adds reactions with log10 K, used as they stand whatever the ionic strength, all from one source.
    pub fn reactions(mut self, source: &str, reactions: &[(&str, f64)]) -> Self {
        for (reaction, log_k) in reactions {
            self.reactions += &format!(
                "(reaction: \"{reaction}\", log_k: {log_k:?}, sigma: 0.0, convention: Thermodynamic, basis: Read, \
                 source: \"{source}\"),\n            "
            );
        }
        self
    }

    /// Adds a fresh solid with its dissolution.
    pub fn solid(mut self, source: &str, token: &str, reaction: &str, log_k: f64) -> Self {
        self.solids += &format!(
            "(token: \"{token}\", name: \"{token}\", state: Fresh, reaction: \"{reaction}\", log_k: {log_k:?}, \
             sigma: 0.0, convention: Thermodynamic, basis: Read, source: \"{source}\"),\n            "
        );
        self
    }

    /// A bath with these contents, "Ca+2: 0.1 mol/L, EDTA-4: 0.1 mol/L", in which only these constants hold and
    /// no activity correction is made: the arithmetic of a textbook.
    pub fn bath(&self, contents: &str) -> Bath {
        let Self { components, reactions, solids } = self;
        resolve(&format!(
            "activity: AsMeasured, contents: [{}],
            constants: (library: false, components: [{components}], reactions: [{reactions}], solids: [{solids}])",
            list(contents)
        ))
    }
}

fn list(contents: &str) -> String {
    contents
        .split(", ")
        .map(|entry| {
            let (what, amount) = entry.split_once(": ").expect("what: amount");
            format!("(what: \"{what}\", amount: \"{amount}\"), ")
        })
        .collect()
}

/// A bath of the program's own library with Davies coefficients.
pub fn library_bath(contents: &str) -> Bath {
    library_bath_with(contents, "")
}

/// The same with solids treated other than by default, "CaCO3(cr): MayForm".
pub fn library_bath_with(contents: &str, rules: &str) -> Bath {
    let rules: String = rules
        .split(", ")
        .filter_map(|entry| entry.split_once(": "))
        .map(|(solid, rule)| format!("(solid: \"{solid}\", rule: {rule}), "))
        .collect();
    resolve(&format!("contents: [{}], solids: [{rules}]", list(contents)))
}

/// A project with the given fields, resolved.
pub fn resolve(fields: &str) -> Bath {
    let text = format!(
        "(format: 1, name: \"outside\",
        tank: (volume_l: 1, ph: Predicted, temperature_c: (low: 25, set: 25, high: 25)),
        {fields})"
    );
    let project = bath::read(&text, "outside").unwrap_or_else(|error| panic!("{error}\n{text}"));
    Bath::resolve(&project).unwrap_or_else(|error| panic!("{error}\n{text}"))
}

/// A solved bath, asked by token.
pub struct Solved {
    /// The bath.
    pub bath: Bath,
    /// Its constants at the temperature.
    pub constants: Constants,
    /// What came out.
    pub equilibrium: Equilibrium,
}

/// Solves a bath at 25 °C.
pub fn solve(bath: &Bath, ph: Option<f64>) -> Solved {
    solve_at(bath, 25.0, ph)
}

/// Solves a bath; without a pH the charge balance decides it.
pub fn solve_at(bath: &Bath, temperature_c: f64, ph: Option<f64>) -> Solved {
    let constants = bath.constants_at(temperature_c);
    let point = Point { ph, doses: &[] };
    let equilibrium = bath
        .solve(&mut Solver::new(), &constants, point)
        .unwrap_or_else(|error| panic!("{error} at {temperature_c} °C and pH {ph:?}"));
    Solved { bath: bath.clone(), constants, equilibrium }
}

impl Solved {
    fn species(&self, token: &str) -> usize {
        let known = || self.bath.system.species.iter().map(|s| s.token.as_str()).collect::<Vec<_>>();
        self.bath.system.species_index(token).unwrap_or_else(|| panic!("no {token} among {:?}", known()))
    }

    fn component(&self, token: &str) -> usize {
        self.bath.system.component(token).unwrap_or_else(|| panic!("no component {token}"))
    }

    fn solid(&self, token: &str) -> usize {
        let found = self.bath.system.solids.iter().position(|solid| solid.token == token);
        found.unwrap_or_else(|| panic!("no solid {token}"))
    }

    /// Concentration of a species, mol/L.
    pub fn c(&self, token: &str) -> f64 {
        self.equilibrium.c[self.species(token)]
    }

    /// Activity of a component, mol/L.
    pub fn activity(&self, token: &str) -> f64 {
        self.equilibrium.ln_a[self.component(token)].exp()
    }

    /// pH as a meter reads it.
    pub fn ph(&self) -> f64 {
        self.equilibrium.ph(self.component("H+"))
    }

    /// Amount of a solid, mol per litre of bath.
    pub fn formed(&self, token: &str) -> f64 {
        self.equilibrium.solids[self.solid(token)]
    }

    /// log10 of the ion activity product over the solubility product.
    pub fn saturation_index(&self, token: &str) -> f64 {
        self.equilibrium.saturation_index(self.solid(token))
    }

    /// Everything dissolved that holds a component, mol of the component per litre.
    pub fn dissolved(&self, token: &str) -> f64 {
        let component = self.component(token);
        let system = &self.bath.system;
        self.equilibrium.c.iter().enumerate().map(|(j, c)| c * system.coefficient(j, component)).sum()
    }

    /// What is dissolved of a component outside the species that hold `other` as well.
    pub fn without(&self, token: &str, other: &str) -> f64 {
        let (component, other) = (self.component(token), self.component(other));
        let system = &self.bath.system;
        let apart = |j: &usize| system.coefficient(*j, other) == 0.0;
        let species = (0..system.species.len()).filter(apart);
        species.map(|j| self.equilibrium.c[j] * system.coefficient(j, component)).sum()
    }

    /// Conditional constant of metal and agent at this point: bound over free metal and unbound agent.
    pub fn conditional(&self, metal: &str, agent: &str) -> f64 {
        let (metal_apart, agent_apart) = (self.without(metal, agent), self.without(agent, metal));
        (self.dissolved(metal) - metal_apart) / (metal_apart * agent_apart)
    }

    /// log10 of the overall constant of a species, thermodynamic or as measured as the bath is.
    pub fn log_beta(&self, token: &str) -> f64 {
        self.constants.ln_beta[self.species(token)] / LN_10
    }

    /// log10 of the overall solubility product of a solid, written to components.
    pub fn log_ks(&self, token: &str) -> f64 {
        self.constants.ln_ks[self.solid(token)] / LN_10
    }
}

/// A value rounded to the digits a table prints.
pub fn round_to(value: f64, digits: i32) -> f64 {
    let scale = 10f64.powi(digits - 1 - value.abs().log10().floor() as i32);
    (value * scale).round() / scale
}

/// Asserts a difference in absolute terms and says both values.
pub fn close(what: &str, found: f64, published: f64, tolerance: f64) {
    let off = found - published;
    println!("{what}: {found:.5e} against {published:.5e}, off by {off:+.3e} of {tolerance:.1e}");
    assert!(off.abs() <= tolerance, "{what}: {found} against {published}, off by {off:+.4} > {tolerance}");
}

/// Asserts a relative difference and says both values.
pub fn close_ratio(what: &str, found: f64, published: f64, tolerance: f64) {
    let off = found / published - 1.0;
    println!(
        "{what}: {found:.5e} against {published:.5e}, off by {:+.2} % of {:.1} %",
        off * 1e2,
        tolerance * 1e2
    );
    assert!(off.abs() <= tolerance, "{what}: {found:e} against {published:e}, off by {:+.2} %", off * 1e2);
}
