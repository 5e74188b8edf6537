//! The part of the library that a set of components can form.

use super::activity::{ActivityModel, Interaction};
use super::system::{GasEntry, SolidEntry, SpeciesEntry, System, SystemParts, Terms};
use super::temperature::ConstantModel;
use crate::chemistry::{
    CHLORIDE, Freshness, Interactions, Library, Origin, PROTON, Reaction, SODIUM, WATER, charge_of,
};
use std::collections::{BTreeMap, BTreeSet};

/// Collects all species and solids that the given components (indices in the library) can form.
///
/// H⁺ takes part when it is among them. For ion interaction, ion pairs that its coefficients hold already are left out:
/// none is counted twice.
pub fn assemble(library: &Library, present: &[usize], model: ActivityModel) -> System {
    let interactions = (model == ActivityModel::IonInteraction).then(Interactions::built_in);
    let contained: BTreeSet<&str> =
        interactions.iter().flat_map(|interactions| interactions.contained_species()).collect();
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
    for species in library.species.iter().filter(|species| !contained.contains(species.token.as_str())) {
        if let Some(components) = local(&species.formation.components).filter(|terms| !terms.is_empty()) {
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
    for gas in &library.gases {
        if let Some(components) = local(&gas.formation.components) {
            let chain = renumber(&gas.formation.chain);
            system.gases.push(GasEntry { token: gas.token.clone(), components, chain });
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
    if let Some(interactions) = interactions {
        system.interaction = interaction(&interactions, &system.species);
    }
    system.proton = system.components.iter().position(|token| token == PROTON);
    system.into()
}

/// Gathers the species into classes of ions with the same coefficients towards all others.
fn interaction(interactions: &Interactions, species: &[SpeciesEntry]) -> Interaction {
    let mut result = Interaction::default();
    let mut known: BTreeMap<Vec<u64>, usize> = BTreeMap::new();
    for one in species {
        let epsilon = |other: &str| interactions.epsilon(&one.token, other).value;
        result.salting_out.push(if one.charge == 0.0 { interactions.neutral.value } else { 0.0 });
        if one.charge == 0.0 {
            result.class.push(None);
            continue;
        }
        let row: Vec<f64> = species.iter().map(|other| epsilon(&other.token)).collect();
        let counter = (epsilon(SODIUM), epsilon(CHLORIDE));
        let bits = row.iter().chain([&counter.0, &counter.1]).map(|value| value.to_bits()).collect();
        let class = *known.entry(bits).or_insert_with(|| {
            result.epsilon.push(row);
            result.counter.push(counter);
            result.epsilon.len() - 1
        });
        result.class.push(Some(class));
    }
    result
}

fn is_water(reaction: &Reaction) -> bool {
    reaction.terms.len() == 3
        && reaction.coefficient(WATER) == -1.0
        && reaction.coefficient(PROTON) == 1.0
        && reaction.coefficient(crate::chemistry::HYDROXIDE) == 1.0
}
