//! The part of the library that a set of components can form.

use super::system::{SolidEntry, SpeciesEntry, System, SystemParts, Terms};
use super::temperature::ConstantModel;
use crate::chemistry::{Freshness, Library, Origin, PROTON, Reaction, WATER, charge_of};
use std::collections::BTreeMap;

/// Collects all species and solids that the given components (indices in the library) can form.
///
/// H⁺ takes part when it is among them.
pub fn assemble(library: &Library, present: &[usize]) -> System {
    let place: BTreeMap<usize, usize> = present.iter().enumerate().map(|(new, &old)| (old, new)).collect();
    let local = |components: &BTreeMap<usize, f64>| -> Option<Terms> {
        components.iter().map(|(old, &count)| place.get(old).map(|&new| (new, count))).collect()
    };
    let mut used: BTreeMap<usize, usize> = BTreeMap::new();
    let mut renumber = |chain: &BTreeMap<usize, f64>| -> Terms {
        chain
            .iter()
            .map(|(&old, &count)| {
                let next = used.len();
                (*used.entry(old).or_insert(next), count)
            })
            .collect()
    };
    let mut system = SystemParts::default();
    for (index, &old) in present.iter().enumerate() {
        let token = library.components[old].token.clone();
        let entry = SpeciesEntry {
            charge: charge_of(&token),
            components: vec![(index, 1.0)],
            chain: Vec::new(),
            token: token.clone(),
        };
        system.species.push(entry);
        system.components.push(token);
    }
    for species in &library.species {
        let is_gas = species.token.ends_with("(g)");
        if let Some(components) =
            local(&species.formation.components).filter(|terms| !is_gas && !terms.is_empty())
        {
            let chain = renumber(&species.formation.chain);
            system.species.push(SpeciesEntry {
                token: species.token.clone(),
                charge: species.charge,
                components,
                chain,
            });
        }
    }
    for solid in &library.solids {
        if let Some(components) = local(&solid.dissolution.components) {
            let chain = renumber(&solid.dissolution.chain);
            let aged = solid.record.state == Freshness::Aged;
            system.solids.push(SolidEntry { token: solid.record.token.clone(), components, chain, aged });
        }
    }
    let mut ordered: Vec<(usize, usize)> = used.into_iter().map(|(old, new)| (new, old)).collect();
    ordered.sort_unstable();
    for (_, old) in ordered {
        let constant = &library.constants[old];
        let water = constant.origin == Origin::BuiltIn && is_water(&constant.reaction);
        system.constants.push(ConstantModel::new(&constant.record, &constant.reaction, water));
        system.library_constants.push(old);
    }
    system.proton = system.components.iter().position(|token| token == PROTON);
    system.into()
}

fn is_water(reaction: &Reaction) -> bool {
    reaction.terms.len() == 3
        && reaction.coefficient(WATER) == -1.0
        && reaction.coefficient(PROTON) == 1.0
        && reaction.coefficient(crate::chemistry::HYDROXIDE) == 1.0
}
