//! Who holds an agent: each metal, protons, solids, or nothing.

use crate::bath::Bath;
use crate::chemistry::ComponentKind;
use crate::equilibrium::Equilibrium;

/// What holds a share of an agent.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub enum Holder {
    /// Complexes of this system component.
    Metal(usize),
    /// Protonated forms.
    Protons,
    /// Other ions.
    Others,
    /// This solid of the system.
    Solid(usize),
    /// Nothing: ready to take up metal.
    Free,
}

/// One line of the ledger.
#[derive(Clone, Debug, PartialEq)]
pub struct LedgerEntry {
    /// Who holds it.
    pub holder: Holder,
    /// Moles of agent per litre of bath.
    pub mol_l: f64,
    /// Share of all of the agent.
    pub share: f64,
}

/// The ledger of one agent component, largest share first.
pub fn ledger(bath: &Bath, solution: &Equilibrium, agent: usize) -> Vec<LedgerEntry> {
    let mut entries: Vec<LedgerEntry> = Vec::new();
    let mut add = |holder: Holder, mol_l: f64| {
        if mol_l <= 0.0 {
            return;
        }
        match entries.iter_mut().find(|entry| entry.holder == holder) {
            Some(entry) => entry.mol_l += mol_l,
            None => entries.push(LedgerEntry { holder, mol_l, share: 0.0 }),
        }
    };
    for (index, species) in bath.system.species.iter().enumerate() {
        let count = bath.system.coefficient(index, agent);
        if count != 0.0 {
            add(holder_of(bath, &species.components, agent), count * solution.c[index]);
        }
    }
    for (index, solid) in bath.system.solids.iter().enumerate() {
        let count: f64 = solid.components.iter().filter(|(i, _)| *i == agent).map(|(_, n)| n).sum();
        add(Holder::Solid(index), count * solution.solids[index]);
    }
    let total: f64 = entries.iter().map(|entry| entry.mol_l).sum();
    for entry in &mut entries {
        entry.share = entry.mol_l / total;
    }
    entries.sort_by(|a, b| b.mol_l.total_cmp(&a.mol_l));
    entries
}

fn holder_of(bath: &Bath, components: &[(usize, f64)], agent: usize) -> Holder {
    let others = || components.iter().filter(|&&(i, _)| i != agent);
    let metal = others().find(|&&(i, _)| bath.component(i).kind == ComponentKind::Metal);
    match metal {
        Some(&(metal, _)) => Holder::Metal(metal),
        None if others().any(|&(i, _)| bath.system.proton != Some(i)) => Holder::Others,
        None if others().any(|&(_, count)| count > 0.0) => Holder::Protons,
        None => Holder::Free,
    }
}

impl Holder {
    /// The holder in words.
    pub fn name(&self, bath: &Bath) -> String {
        match self {
            Holder::Metal(component) => bath.component(*component).name.clone(),
            Holder::Protons => "acid (protons)".to_owned(),
            Holder::Others => "other ions".to_owned(),
            Holder::Solid(solid) => bath.solid_name(*solid).to_owned(),
            Holder::Free => "nothing: ready".to_owned(),
        }
    }
}
