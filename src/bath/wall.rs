//! What a dose has to keep clear of: ceilings and floors of free metal, typed or derived, and solids that must not form.

use super::error::BathError;
use super::project::{Project, Rule};
use super::resolve::Bath;
use crate::chemistry::{Couple, Library, Potentials};
use crate::equilibrium::{Equilibrium, LN_10, System, Value, nernst};
use crate::quantity::{Amount, Level, fixed, kelvin, p_value, significant};
use serde::{Deserialize, Serialize};

/// A ceiling that follows from chemistry instead of shop experience.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub enum Derived {
    /// A solid that must not form.
    Solid {
        /// Solid token, "Ni(OH)2(s)".
        solid: String,
        /// How far under saturation to stay, in units of the saturation index.
        #[serde(default)]
        margin: f64,
    },
    /// No deposit by exchange on a base metal: the metal's potential stays under that of the substrate.
    Immersion {
        /// The substrate's ion: "Fe+2" for steel, "Zn+2" for zinc die cast.
        on: String,
        /// How far under the substrate's potential to stay, mV.
        margin_mv: f64,
    },
    /// A discharge limit on everything dissolved of the metal, whoever holds it.
    Discharge {
        /// The limit, mg/L.
        total: Amount,
    },
}

/// A limit in mol/L.
#[derive(Clone, Debug, PartialEq)]
pub struct ResolvedLimit {
    /// System index of the metal.
    pub component: usize,
    /// Free metal must stay under this, mol/L.
    pub ceiling: Option<f64>,
    /// Free metal must stay over this, mol/L.
    pub floor: Option<f64>,
    /// The wall that follows from chemistry.
    pub derived: Option<ResolvedDerived>,
    /// Which wall it stands for.
    pub wall: String,
}

/// A derived wall with its place in the system.
#[derive(Clone, Debug, PartialEq)]
pub enum ResolvedDerived {
    /// Solid number and margin of its saturation index.
    Solid(usize, f64),
    /// The metal on a substrate.
    Immersion(Immersion),
    /// Limit on the dissolved total, mol/L.
    Discharge(f64),
}

/// A metal that could deposit on a substrate by exchange.
#[derive(Clone, Debug, PartialEq)]
pub struct Immersion {
    metal: &'static Couple,
    substrate: &'static Couple,
    /// System index of the substrate's ion, when the bath holds it.
    dissolved: Option<usize>,
    margin_v: f64,
}

/// A condition that a dose has to meet.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Wall {
    /// Ceiling of limit number n.
    Ceiling(usize),
    /// Floor of limit number n.
    Floor(usize),
    /// Solid number n of the system, which must not form.
    Solid(usize),
    /// The derived wall of limit number n.
    Derived(usize),
}

/// Dissolved substrate, mol/L, where the bath holds none: the usual measure of "no corrosion" (common practice).
const TRACE: f64 = 1e-6;
/// pM from which no complexing agent without cyanide reaches a level of free metal: the strongest hold copper(II) and
/// nickel(II) at pM 20 or so with any excess that a bath can carry (computed from the constants at hand).
const OUT_OF_REACH: f64 = 25.0;

impl Immersion {
    /// ln of the activity of the metal's ion at which it would be in equilibrium with the substrate less the margin.
    fn ln_limit(&self, solution: Option<&Equilibrium>, temperature_k: f64) -> f64 {
        let there = self.dissolved.zip(solution).map(|(ion, solution)| solution.ln_a[ion]);
        let ln_substrate = there.filter(|ln_a| ln_a.is_finite()).unwrap_or_else(|| TRACE.ln());
        let wanted = nernst(self.substrate, ln_substrate, temperature_k) - self.margin_v;
        let standard = nernst(self.metal, 0.0, temperature_k);
        let slope = nernst(self.metal, 1.0, temperature_k) - standard;
        (wanted - standard) / slope
    }

    /// pM of the wall at a temperature in °C, with a trace of dissolved substrate.
    pub fn p_metal(&self, temperature_c: f64) -> f64 {
        -self.ln_limit(None, kelvin(temperature_c)) / LN_10
    }

    /// Whether no agent brings free metal that low.
    pub fn out_of_reach(&self, temperature_c: f64) -> bool {
        self.p_metal(temperature_c) >= OUT_OF_REACH
    }
}

impl Bath {
    /// All walls: ceilings and floors, derived walls within reach, solids that must not form.
    pub fn walls(&self) -> Vec<Wall> {
        let mut walls = Vec::new();
        let set = self.project.tank.temperature_c.set;
        for (i, limit) in self.limits.iter().enumerate() {
            walls.extend(limit.ceiling.map(|_| Wall::Ceiling(i)));
            walls.extend(limit.floor.map(|_| Wall::Floor(i)));
            let counts = limit.derived.as_ref().is_some_and(|derived| match derived {
                ResolvedDerived::Immersion(immersion) => !immersion.out_of_reach(set),
                _ => true,
            });
            walls.extend(counts.then_some(Wall::Derived(i)));
        }
        let derived = |solid: usize| {
            self.limits.iter().any(
                |limit| matches!(limit.derived, Some(ResolvedDerived::Solid(known, _)) if known == solid),
            )
        };
        let forbidden = self.rules.iter().enumerate().filter(|(_, rule)| **rule == Rule::MustNotForm);
        walls.extend(forbidden.filter(|(solid, _)| !derived(*solid)).map(|(solid, _)| Wall::Solid(solid)));
        walls
    }

    /// The value that a wall limits.
    pub fn limited_value(&self, wall: Wall) -> Value {
        match wall {
            Wall::Ceiling(limit) | Wall::Floor(limit) => Value::Free(self.limits[limit].component),
            Wall::Solid(solid) => Value::Saturation(solid),
            Wall::Derived(limit) => match &self.limits[limit].derived {
                Some(ResolvedDerived::Solid(solid, _)) => Value::Saturation(*solid),
                Some(ResolvedDerived::Discharge(_)) => Value::Dissolved(self.limits[limit].component),
                _ => Value::Free(self.limits[limit].component),
            },
        }
    }

    /// log10 of the excess over a wall at a solution and its temperature in °C: zero or less holds.
    pub fn excess(&self, wall: Wall, solution: &Equilibrium, temperature_c: f64) -> f64 {
        let value = self.limited_value(wall).ln(&self.system, solution) / LN_10;
        match wall {
            Wall::Ceiling(i) => value - self.limits[i].ceiling.map_or(f64::INFINITY, f64::log10),
            Wall::Floor(i) => self.limits[i].floor.map_or(f64::NEG_INFINITY, f64::log10) - value,
            Wall::Solid(_) => value,
            Wall::Derived(i) => match &self.limits[i].derived {
                Some(ResolvedDerived::Solid(_, margin)) => value + margin,
                Some(ResolvedDerived::Discharge(limit)) => value - limit.log10(),
                Some(ResolvedDerived::Immersion(immersion)) => {
                    let ln_a = solution.ln_a[self.limits[i].component];
                    (ln_a - immersion.ln_limit(Some(solution), kelvin(temperature_c))) / LN_10
                }
                None => f64::NEG_INFINITY,
            },
        }
    }

    /// Whether more of the value is worse (ceilings, solids) or better (floors).
    pub fn rises_towards(&self, wall: Wall) -> bool {
        !matches!(wall, Wall::Floor(_))
    }

    /// A limit with its derivation in one line.
    pub fn limit_line(&self, limit: usize) -> String {
        let resolved = &self.limits[limit];
        let component = self.component(resolved.component);
        let (name, short) = (&component.name, component.short());
        let set = self.project.tank.temperature_c.set;
        let mut parts = Vec::new();
        if let Some(ceiling) = resolved.ceiling {
            let empirical = match &resolved.derived {
                Some(ResolvedDerived::Immersion(immersion)) if immersion.out_of_reach(set) => ", empirical",
                _ => "",
            };
            parts.push(format!("ceiling p{short} {}{empirical}", p_value(ceiling)));
        }
        parts.extend(resolved.floor.map(|floor| format!("floor p{short} {}", p_value(floor))));
        parts.extend(resolved.derived.as_ref().map(|derived| match derived {
            ResolvedDerived::Solid(solid, margin) => format!(
                "{} must not form: saturation index at most {}",
                self.solid_name(*solid),
                fixed(-margin, 1)
            ),
            ResolvedDerived::Discharge(total) => format!(
                "discharge limit: at most {} mg/L dissolved, free or complexed",
                significant(total * component.molar_mass().unwrap_or(f64::NAN) * 1e3, 3)
            ),
            ResolvedDerived::Immersion(immersion) => {
                let p = fixed(immersion.p_metal(set), 1);
                let on = &immersion.substrate.metal;
                let margin = fixed(immersion.margin_v * 1e3, 0);
                let reach = if immersion.out_of_reach(set) {
                    "; no agent without cyanide reaches that, so it bounds no dose"
                } else {
                    ""
                };
                format!(
                    "no immersion deposit on the metal of {on} with {margin} mV to spare: p{short} {p}{reach}"
                )
            }
        }));
        if !resolved.wall.is_empty() {
            parts.push(resolved.wall.clone());
        }
        let mut line = format!("{name}: {}", parts.join("; "));
        if let Some(first) = line.chars().next() {
            line.replace_range(..first.len_utf8(), &first.to_uppercase().to_string());
        }
        line
    }
}

/// Resolves the limits of a project.
pub(super) fn resolve_limits(
    project: &Project,
    library: &Library,
    present: &[usize],
    system: &System,
) -> Result<Vec<ResolvedLimit>, BathError> {
    let mut limits = Vec::new();
    for (i, limit) in project.limits.iter().enumerate() {
        let field = format!("limits[{i}]");
        let unknown = |fix: &str| BathError::Unknown {
            field: format!("{field}.metal"),
            name: limit.metal.clone(),
            fix: fix.to_owned(),
        };
        let index = library.component_named(&limit.metal).ok_or_else(|| {
            unknown("no component has this name; write a metal like \"Cu+2\" or \"copper\"")
        })?;
        let component = present.iter().position(|&known| known == index).ok_or_else(|| {
            unknown("this metal is not in the bath; add it under contents, or remove the limit")
        })?;
        let mass = library.components[index].molar_mass().unwrap_or(f64::NAN);
        let level = |part: &str, level: Option<Level>| match level {
            None => Ok(None),
            Some(level) => {
                let value = level.mol_per_litre(mass);
                if value.is_finite() && value > 0.0 && value < 100.0 {
                    Ok(Some(value))
                } else {
                    let fix = "give a level above zero, like \"pM 10.8\" or \"2e-8 mol/L\"";
                    Err(BathError::Number { field: format!("{field}.{part}"), value: level.value(), fix })
                }
            }
        };
        let (ceiling, floor) = (level("ceiling", limit.ceiling)?, level("floor", limit.floor)?);
        if let (Some(ceiling), Some(floor)) = (ceiling, floor)
            && floor >= ceiling
        {
            let fix = "the floor is not under the ceiling; raise the ceiling or lower the floor";
            return Err(BathError::Number { field: format!("{field}.floor"), value: floor, fix });
        }
        let derived = match &limit.derived {
            Some(derived) => {
                Some(resolve_derived(&format!("{field}.derived"), derived, system, component, mass)?)
            }
            None => None,
        };
        limits.push(ResolvedLimit { component, ceiling, floor, derived, wall: limit.wall.clone() });
    }
    Ok(limits)
}

fn resolve_derived(
    field: &str,
    derived: &Derived,
    system: &System,
    component: usize,
    molar_mass: f64,
) -> Result<ResolvedDerived, BathError> {
    let unknown = |part: &str, name: &str, fix: &str| BathError::Unknown {
        field: format!("{field}.{part}"),
        name: name.to_owned(),
        fix: fix.to_owned(),
    };
    let number =
        |part: &str, value: f64, fix| BathError::Number { field: format!("{field}.{part}"), value, fix };
    match derived {
        Derived::Solid { solid, margin } => {
            let index = system.solids.iter().position(|known| known.token == *solid);
            let of_metal = system
                .solids
                .iter()
                .filter(|known| known.components.iter().any(|(i, _)| *i == component))
                .map(|known| known.token.as_str());
            let known = of_metal.collect::<Vec<_>>().join(", ");
            let fix = if known.is_empty() {
                "no solid of this metal is known in this bath; type a ceiling instead".to_owned()
            } else {
                format!("no solid of this bath has this name; of this metal it knows {known}")
            };
            let index = index.ok_or_else(|| unknown("solid", solid, &fix))?;
            if !(0.0..=5.0).contains(margin) {
                return Err(number("margin", *margin, "give units of the saturation index between 0 and 5"));
            }
            Ok(ResolvedDerived::Solid(index, *margin))
        }
        Derived::Immersion { on, margin_mv } => {
            let potentials = Potentials::built_in();
            let fix =
                "no potential of this metal is known; write the substrate's ion, like \"Fe+2\" or \"Zn+2\"";
            let substrate = potentials.couple(on).ok_or_else(|| unknown("on", on, fix))?;
            let metal = &system.components[component];
            let fix = "no potential of the limited metal is known; type a ceiling instead";
            let metal = potentials.couple(metal).ok_or_else(|| unknown("on", metal, fix))?;
            if !(0.0..=1000.0).contains(margin_mv) {
                return Err(number("margin_mv", *margin_mv, "give millivolts between 0 and 1000"));
            }
            let dissolved = system.component(on);
            let margin_v = margin_mv * 1e-3;
            Ok(ResolvedDerived::Immersion(Immersion { metal, substrate, dissolved, margin_v }))
        }
        Derived::Discharge { total } => {
            let level = match total.unit.dimension() {
                crate::quantity::Dimension::Mass => total.value * total.unit.factor() / molar_mass,
                crate::quantity::Dimension::Mole => total.value * total.unit.factor(),
                _ => {
                    let (field, fix) = (format!("{field}.total"), "give mg/L of the metal".to_owned());
                    return Err(BathError::Unit { field, amount: total.to_string(), fix });
                }
            };
            if !(level.is_finite() && level > 0.0) {
                return Err(number("total", total.value, "give a limit above zero, in mg/L of the metal"));
            }
            Ok(ResolvedDerived::Discharge(level))
        }
    }
}

/// How each solid of the system is treated.
pub(super) fn resolve_rules(
    project: &Project,
    library: &Library,
    system: &System,
    limits: &[ResolvedLimit],
) -> Result<Vec<Rule>, BathError> {
    for (i, rule) in project.solids.iter().enumerate() {
        if !library.solids.iter().any(|solid| solid.record.token == rule.solid) {
            return Err(BathError::Unknown {
                field: format!("solids[{i}].solid"),
                name: rule.solid.clone(),
                fix: "no solid has this name; write it like \"CaCO3(cr)\", or add it under constants"
                    .to_owned(),
            });
        }
    }
    // A limit on what is dissolved is met by letting the metal precipitate.
    let keeps_in_solution = |limit: &&ResolvedLimit| {
        limit.ceiling.is_some()
            || limit.floor.is_some()
            || !matches!(limit.derived, Some(ResolvedDerived::Discharge(_)))
    };
    let limited = |components: &[(usize, f64)]| {
        let mut limits = limits.iter().filter(keeps_in_solution);
        limits.any(|limit| components.iter().any(|&(component, _)| component == limit.component))
    };
    let derived = |index: usize| {
        let mut limits = limits.iter();
        limits.any(|limit| matches!(limit.derived, Some(ResolvedDerived::Solid(solid, _)) if solid == index))
    };
    let rules = system.solids.iter().enumerate().map(|(index, solid)| {
        match project.solids.iter().rev().find(|rule| rule.solid == solid.token) {
            _ if derived(index) => Rule::MustNotForm,
            Some(rule) => rule.rule,
            None if solid.aged => Rule::TooSlow,
            None if limited(&solid.components) => Rule::MustNotForm,
            None => Rule::MayForm,
        }
    });
    Ok(rules.collect())
}
