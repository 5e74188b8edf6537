//! The dissolved total of a metal, how sure it is, who holds it, and the limit it is compared with.

use super::water::RinseWater;
use crate::bath::{Bath, BathError, Solids};
use crate::chemistry::{ComponentKind, Regime};
use crate::equilibrium::{Equilibrium, EquilibriumError, LN_10, System};

/// A limit that applies to a metal.
#[derive(Clone, Debug, PartialEq)]
pub struct AppliedLimit {
    /// The number to meet in steady operation, mg/L.
    pub mg_l: f64,
    /// The number for any one day, where the rule states another.
    pub max_mg_l: Option<f64>,
    /// Where it stands: "US 40 CFR 433.15 …, month average", "own permit".
    pub rule: String,
    /// Whether it is the shop's own number.
    pub own: bool,
}

/// A metal whose dissolved total is followed.
#[derive(Clone, Debug, PartialEq)]
pub struct Watched {
    /// Name in words.
    pub name: String,
    /// System indices of its ions; their totals add up.
    pub components: Vec<usize>,
    /// Molar mass, g/mol.
    pub g_mol: f64,
    /// Its limit, if any.
    pub limit: Option<AppliedLimit>,
}

/// Ions of hardness: no discharge limit, and the treatment brings calcium itself.
const NOT_WATCHED: [&str; 2] = ["Ca+2", "Mg+2"];

/// The metals that the bath brings, with their limits: own permit numbers before published ones.
///
/// # Errors
/// [`BathError::Unknown`] for a regime or a permit metal that does not exist.
pub fn watched(source: &Bath, water: &RinseWater) -> Result<Vec<Watched>, BathError> {
    let rinse = &source.project.rinse;
    let regime = Regime::find(&rinse.regime).ok_or_else(|| {
        let known: Vec<&str> = Regime::built_in().iter().map(|regime| regime.id.as_str()).collect();
        BathError::Unknown {
            field: "rinse.regime".to_owned(),
            name: rinse.regime.clone(),
            fix: format!("no published limits have this short name; choose one of {}", known.join(", ")),
        }
    })?;
    let system = &water.bath.system;
    let mut metals: Vec<Watched> = Vec::new();
    for index in water.bath.metals() {
        let token = system.components[index].as_str();
        if NOT_WATCHED.contains(&token) || water.from_bath[index] <= 0.0 {
            continue;
        }
        let component = water.bath.component(index);
        let Some(g_mol) = component.molar_mass() else { continue };
        let published = regime.limits.iter().find(|limit| limit.metals.iter().any(|known| known == token));
        let same = published.and_then(|limit| {
            metals
                .iter_mut()
                .find(|metal| metal.components.iter().any(|&i| limit.metals.contains(&system.components[i])))
        });
        if let Some(metal) = same {
            metal.components.push(index);
            continue;
        }
        let limit = published.map(|limit| AppliedLimit {
            mg_l: limit.steady_mg_l(),
            max_mg_l: limit.average_mg_l.map(|_| limit.max_mg_l),
            rule: match limit.average_mg_l {
                Some(_) => format!("{}, {} average", regime.name, regime.average_over),
                None => regime.name.clone(),
            },
            own: false,
        });
        metals.push(Watched { name: component.name.clone(), components: vec![index], g_mol, limit });
    }
    for (i, permit) in rinse.limits.iter().enumerate() {
        let component = source.library.component_named(&permit.metal).ok_or_else(|| BathError::Unknown {
            field: format!("rinse.limits[{i}].metal"),
            name: permit.metal.clone(),
            fix: "no component has this name; write a metal like \"Ni+2\" or \"nickel\"".to_owned(),
        })?;
        let own = |metal: &&mut Watched| {
            metal.components.iter().any(|&index| water.bath.present[index] == component)
        };
        if let Some(metal) = metals.iter_mut().find(own) {
            let note = if permit.note.is_empty() { "as typed" } else { &permit.note };
            metal.limit = Some(AppliedLimit {
                mg_l: permit.mg_l,
                max_mg_l: None,
                rule: format!("own permit, {note}"),
                own: true,
            });
        }
    }
    Ok(metals)
}

/// Σ ν c of some components over all species in solution, mol/L.
pub fn dissolved_mol_l(system: &System, solution: &Equilibrium, components: &[usize]) -> f64 {
    let species = system.species.iter().zip(&solution.c);
    species.map(|(species, c)| count(&species.components, components) * c).sum()
}

fn count(terms: &[(usize, f64)], components: &[usize]) -> f64 {
    terms.iter().filter(|(i, _)| components.contains(i)).map(|(_, n)| n).sum()
}

/// Standard uncertainty of log10 of the dissolved total at a held pH: first order in the constants' uncertainties, the
/// activity coefficients taken as they are.
///
/// # Errors
/// [`EquilibriumError`] when the response is singular.
pub fn sigma_log10(
    water: &RinseWater,
    totals: &[f64],
    ph: f64,
    solution: &Equilibrium,
    components: &[usize],
) -> Result<f64, EquilibriumError> {
    let system = &water.bath.system;
    let total = dissolved_mol_l(system, solution, components);
    if total <= 0.0 {
        return Ok(0.0);
    }
    let parts: Vec<(usize, f64)> = system
        .species
        .iter()
        .enumerate()
        .map(|(j, species)| (j, count(&species.components, components) * solution.c[j] / total))
        .filter(|(_, share)| *share > 1e-9)
        .collect();
    let variance = |answers: &crate::equilibrium::Sensitivities| -> f64 {
        let of_constant = |(index, constant): (usize, &crate::equilibrium::ConstantModel)| {
            let response = answers.by_constant(index);
            let slope: f64 = parts
                .iter()
                .map(|&(j, share)| {
                    let species = &system.species[j];
                    let chain: f64 =
                        species.chain.iter().filter(|(known, _)| *known == index).map(|(_, n)| n).sum();
                    let activities: f64 =
                        species.components.iter().map(|&(i, nu)| nu * response.ln_a[i]).sum();
                    share * (chain + activities)
                })
                .sum();
            (slope * constant.sigma_ln / LN_10).powi(2)
        };
        system.constants.iter().enumerate().map(of_constant).sum()
    };
    let variance =
        water.bath.sensitivities(&water.constants, totals, Some(ph), Solids::Real, solution, variance)?;
    Ok(variance.sqrt())
}

/// Shares of the dissolved total of a metal by the agent that holds it, largest first; the last name is for what no
/// agent holds.
pub fn holders(water: &RinseWater, solution: &Equilibrium, components: &[usize]) -> Vec<(String, f64)> {
    let system = &water.bath.system;
    let total = dissolved_mol_l(system, solution, components);
    let mut shares: Vec<(String, f64)> = Vec::new();
    for (species, c) in system.species.iter().zip(&solution.c) {
        let share = count(&species.components, components) * c / total;
        if share <= 0.0 || !share.is_finite() {
            continue;
        }
        let agent = species
            .components
            .iter()
            .find(|&&(i, _)| water.bath.component(i).kind == ComponentKind::Agent)
            .map_or("no agent", |&(i, _)| water.bath.component(i).short());
        match shares.iter_mut().find(|(known, _)| known == agent) {
            Some((_, known)) => *known += share,
            None => shares.push((agent.to_owned(), share)),
        }
    }
    shares.sort_by(|a, b| b.1.total_cmp(&a.1));
    shares
}
