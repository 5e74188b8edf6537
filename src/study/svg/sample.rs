//! Baths to draw in tests.

use crate::bath::{AgentDose, Bath, Content, Limit, Ph, Project, Range, Rule, SolidRule, Trust};
use crate::equilibrium::EquilibriumError;
use crate::quantity::{Amount, Level};
use crate::study::{Axis, Basis, Diagram, diagram};

/// A bath from its contents and agents (product, dose, cap).
pub fn project(contents: &[(&str, &str)], agents: &[(&str, f64, f64)]) -> Project {
    let mut project = Project::empty();
    project.contents = contents
        .iter()
        .map(|(what, amount)| Content {
            what: (*what).to_owned(),
            amount: Amount::parse(amount).unwrap(),
            trust: Trust::Assumed,
            note: String::new(),
        })
        .collect();
    project.agents = agents
        .iter()
        .map(|&(product, dose_g_l, max_g_l)| AgentDose {
            product: product.to_owned(),
            dose_g_l,
            max_g_l,
            ..AgentDose::default()
        })
        .collect();
    project
}

/// A limit in p values.
pub fn limit(metal: &str, ceiling: Option<f64>, floor: Option<f64>, wall: &str) -> Limit {
    Limit {
        metal: metal.to_owned(),
        ceiling: ceiling.map(Level::P),
        floor: floor.map(Level::P),
        wall: wall.to_owned(),
        ..Limit::default()
    }
}

/// The bath and its diagram of the component with this token.
pub fn draw(project: &Project, axis: Axis, basis: &str) -> (Bath, Diagram) {
    let bath = Bath::resolve(project).unwrap();
    let basis = bath.system.components.iter().position(|token| token == basis).unwrap();
    let diagram = diagram(&bath, axis, Basis(basis), 141);
    (bath, diagram)
}

/// An invented copper strike with HEDP.
pub fn copper() -> Project {
    let contents = [("Cu+2", "10.2 g/L"), ("HEDP", "86 g/L"), ("k2co3", "48 g/L"), ("Ca+2", "2.1 mmol/L")];
    let mut project = project(&contents, &[("hedp-60", 16.0, 40.0)]);
    project.name = "Copper strike <A> & \"B\"".to_owned();
    project.place = "Line 2, tank 7".to_owned();
    project.invented = true;
    project.tank.ph = Ph::Held { low: 9.2, set: 9.45, high: 9.8 };
    project.tank.temperature_c = Range::new(38.0, 42.0, 45.0);
    project.limits = vec![limit("Cu+2", Some(10.8), Some(13.2), "from the coupon series <b>")];
    project
}

/// An invented nickel bath with ammonia and EDTA, and three limited metals.
pub fn nickel() -> Project {
    let contents = [("Ni+2", "6 g/L"), ("NH3", "0.8 mol/L"), ("Ca+2", "0.5 mmol/L"), ("Zn+2", "0.05 g/L")];
    let mut project = project(&contents, &[("edta-na4-39", 40.0, 200.0), ("citric-anh", 10.0, 40.0)]);
    project.name = "Nickel, ammonia".to_owned();
    project.tank.ph = Ph::Held { low: 8.8, set: 9.0, high: 9.4 };
    project.limits = vec![
        limit("Ni+2", Some(5.0), None, "no hydroxide"),
        limit("Ca+2", Some(4.5), None, ""),
        limit("Zn+2", Some(7.0), Some(10.0), "dull below"),
    ];
    project.solids = Vec::new();
    project
}

/// The same metals with nothing to hold them.
pub fn bare() -> Project {
    let mut bare = nickel();
    bare.limits.clear();
    bare.agents.clear();
    bare.contents.remove(1);
    bare.solids = vec![SolidRule { solid: "Ni(OH)2(am)".to_owned(), rule: Rule::MayForm }];
    bare
}

/// The copper strike over pH.
pub fn over_ph() -> (Bath, Diagram) {
    draw(&copper(), Axis::Ph { from: 2.0, to: 13.0 }, "Cu+2")
}

/// The copper strike over the dose of HEDP.
pub fn over_dose() -> (Bath, Diagram) {
    draw(&copper(), Axis::Dose { agent: 0, to: 40.0 }, "Cu+2")
}

/// Every picture to look at, with a name.
pub fn all() -> Vec<(&'static str, (Bath, Diagram))> {
    let wide = Axis::Ph { from: 0.0, to: 14.0 };
    let mut gaps = over_ph();
    gaps.1.series.iter_mut().for_each(|series| series.share[40..60].fill(f64::NAN));
    gaps.1.free.iter_mut().for_each(|line| line.log10_free[40..60].fill(f64::NAN));
    gaps.1.gaps = Some((20, EquilibriumError::NotConverged { residual: 2e-4, iterations: 200 }));
    gaps.0.project.name = "Copper, with a name that goes on and on ".repeat(4);
    let mut predicted = nickel();
    predicted.tank.ph = Ph::Predicted;
    vec![
        ("gaps", gaps),
        ("predicted", draw(&predicted, wide, "Ni+2")),
        ("copper_ph", over_ph()),
        ("copper_dose", over_dose()),
        ("copper_agent", draw(&copper(), wide, "HEDP-4")),
        ("nickel_ph", draw(&nickel(), wide, "Ni+2")),
        ("nickel_dose", draw(&nickel(), Axis::Dose { agent: 0, to: 200.0 }, "Ni+2")),
        ("bare", draw(&bare(), wide, "Ni+2")),
    ]
}
