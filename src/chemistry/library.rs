//! The constants library: components, species and solids, resolved from the built-in files and the project's own.

use super::constant::{Component, Constant};
use super::own_constants::OwnConstants;
use super::resolve::{Formation, resolve};
use super::solid_record::SolidRecord;
use super::{ChemistryError, Formula, PROTON, Reaction, charge_of};
use serde::Deserialize;
use std::sync::{Arc, LazyLock};

/// Where a record comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Origin {
    /// The files that ship with the program.
    BuiltIn,
    /// The project file.
    Own,
}

/// A species in solution that is not a bare component.
#[derive(Clone, Debug, PartialEq)]
pub struct Species {
    /// Name with charge.
    pub token: String,
    /// Charge number.
    pub charge: f64,
    /// Components and constants it is made of.
    pub formation: Formation,
    /// Index of the constant that defined it.
    pub constant: usize,
}

/// A gas over the bath; ln of its partial pressure in bar is Σ chain ln K + Σ coefficient · ln a over components.
#[derive(Clone, Debug, PartialEq)]
pub struct Gas {
    /// Name, ending in "(g)".
    pub token: String,
    /// Components and constants it is made of.
    pub formation: Formation,
    /// Index of the constant that defined it.
    pub constant: usize,
}

/// A solid with its dissolution resolved to components.
#[derive(Clone, Debug, PartialEq)]
pub struct Solid {
    /// The record as it stands in its file.
    pub record: SolidRecord,
    /// ln IAP = Σ coefficient · ln a over components.
    pub dissolution: Formation,
    /// Index of its own constant.
    pub constant: usize,
}

/// A published constant in use.
#[derive(Clone, Debug, PartialEq)]
pub struct LibraryConstant {
    /// The record as it stands in its file.
    pub record: Constant,
    /// Its reaction, read.
    pub reaction: Reaction,
    /// Built in or own.
    pub origin: Origin,
}

/// Everything known about components, species and solids.
#[derive(Clone, Debug, PartialEq)]
pub struct Library {
    /// Building blocks.
    pub components: Vec<Component>,
    /// Published constants; [`Formation::chain`] indexes them.
    pub constants: Vec<LibraryConstant>,
    /// Species in solution beyond the bare components.
    pub species: Vec<Species>,
    /// Gases.
    pub gases: Vec<Gas>,
    /// Solids.
    pub solids: Vec<Solid>,
}

#[derive(Deserialize)]
struct ComponentsFile {
    #[serde(rename = "about")]
    _about: String,
    components: Vec<Component>,
}

#[derive(Deserialize)]
struct ReactionsFile {
    #[serde(rename = "about")]
    _about: String,
    reactions: Vec<Constant>,
}

#[derive(Deserialize)]
struct SolidsFile {
    #[serde(rename = "about")]
    _about: String,
    solids: Vec<SolidRecord>,
}

/// Reads an embedded file; optional fields need no `Some(…)`.
pub(crate) fn read_asset<T: serde::de::DeserializeOwned>(text: &str) -> Result<T, ron::error::SpannedError> {
    ron::Options::default().with_default_extension(ron::extensions::Extensions::IMPLICIT_SOME).from_str(text)
}

macro_rules! reaction_files {
    ($($name:literal),* $(,)?) => {
        [$(($name, include_str!(concat!("../../assets/constants/", $name)))),*]
    };
}

/// How the token of a gas ends.
const GAS_ENDING: &str = "(g)";

const COMPONENTS: &str = include_str!("../../assets/constants/components.ron");
const SOLIDS: &str = include_str!("../../assets/constants/solids.ron");
const REACTIONS: [(&str, &str); 18] = reaction_files!(
    "water_and_acids.ron",
    "hydrolysis.ron",
    "edta.ron",
    "nta.ron",
    "hedta.ron",
    "dtpa.ron",
    "biodegradable_chelants.ron",
    "citrate.ron",
    "tartrate_gluconate.ron",
    "hydroxy_and_carboxylic_acids.ron",
    "glycine.ron",
    "ammonia_and_amines.ron",
    "alkanolamines.ron",
    "phosphates.ron",
    "phosphonates.ron",
    "inorganic_ligands.ron",
    "silicate.ron",
    "gases.ron",
);

static BUILT_IN: LazyLock<Arc<Library>> = LazyLock::new(|| {
    read_built_in()
        .map(Arc::new)
        .unwrap_or_else(|error| panic!("the embedded constants are read by every test run: {error}"))
});

fn in_file(file: &str, error: &ron::error::SpannedError) -> ChemistryError {
    ChemistryError::File {
        file: file.to_owned(),
        line: error.span.start.line,
        column: error.span.start.col,
        reason: error.code.to_string(),
    }
}

fn read_built_in() -> Result<Library, ChemistryError> {
    let components: ComponentsFile =
        read_asset(COMPONENTS).map_err(|error| in_file("components.ron", &error))?;
    let mut reactions = Vec::new();
    for (name, text) in REACTIONS {
        let file: ReactionsFile = read_asset(text).map_err(|error| in_file(name, &error))?;
        reactions.extend(file.reactions.into_iter().map(|record| (record, Origin::BuiltIn)));
    }
    let solids: SolidsFile = read_asset(SOLIDS).map_err(|error| in_file("solids.ron", &error))?;
    let solids = solids.solids.into_iter().map(|record| (record, Origin::BuiltIn)).collect();
    Library::build(components.components, reactions, solids)
}

impl Library {
    /// The library that ships with the program.
    pub fn built_in() -> &'static Library {
        &BUILT_IN
    }

    /// The built-in library with a project's own constants added or put in place of built-in ones.
    ///
    /// # Errors
    /// Any [`ChemistryError`] of the own records.
    pub fn with_own(own: &OwnConstants) -> Result<Arc<Library>, ChemistryError> {
        if own.is_default() {
            return Ok(Arc::clone(&BUILT_IN));
        }
        let base = own.library.then_some(&**BUILT_IN);
        let mut components = base.map_or_else(Vec::new, |library| library.components.clone());
        for component in &own.components {
            match components.iter_mut().find(|known| known.token == component.token) {
                Some(known) => *known = component.clone(),
                None => components.push(component.clone()),
            }
        }
        let mut reactions: Vec<(Constant, Origin)> = base.map_or_else(Vec::new, Library::reaction_records);
        for record in &own.reactions {
            let reaction = Reaction::parse(&record.reaction)?;
            if let Some(base) = base {
                base.make_room_for(&reaction, &mut reactions);
            }
            reactions.push((record.clone(), Origin::Own));
        }
        let mut solids: Vec<(SolidRecord, Origin)> = base.map_or_else(Vec::new, |library| {
            library.solids.iter().map(|solid| (solid.record.clone(), Origin::BuiltIn)).collect()
        });
        for record in &own.solids {
            solids.retain(|(known, _)| known.token != record.token);
            solids.push((record.clone(), Origin::Own));
        }
        Library::build(components, reactions, solids).map(Arc::new)
    }

    /// The records of reactions in solution, without those of solids.
    fn reaction_records(&self) -> Vec<(Constant, Origin)> {
        let of_solids: Vec<usize> = self.solids.iter().map(|solid| solid.constant).collect();
        let constants = self.constants.iter().enumerate().filter(|(index, _)| !of_solids.contains(index));
        constants.map(|(_, constant)| (constant.record.clone(), constant.origin)).collect()
    }

    /// Takes out the built-in reaction that an own one replaces: the same equilibrium, or else the one that
    /// defines the last species on its right side when every species in it is known already.
    fn make_room_for(&self, own: &Reaction, reactions: &mut Vec<(Constant, Origin)>) {
        let same = self.constants.iter().find(|constant| constant.reaction.same_as(own));
        let replaced = same.map(|constant| &constant.record.reaction).or_else(|| {
            let known = |token: &str| {
                self.component(token).is_some() || self.species.iter().any(|species| species.token == token)
            };
            if !own.solutes().all(|(token, _)| known(token)) {
                return None;
            }
            let target = own.terms.iter().rev().filter(|(_, c)| *c > 0.0).find_map(|(token, _)| {
                self.species.iter().find(|species| species.token == *token && token != super::HYDROXIDE)
            })?;
            Some(&self.constants[target.constant].record.reaction)
        });
        if let Some(text) = replaced {
            reactions.retain(|(record, origin)| *origin == Origin::Own || record.reaction != *text);
        }
    }

    /// Builds a library from records: parses, checks, resolves.
    ///
    /// # Errors
    /// The first [`ChemistryError`] met.
    pub fn build(
        components: Vec<Component>,
        reactions: Vec<(Constant, Origin)>,
        solids: Vec<(SolidRecord, Origin)>,
    ) -> Result<Library, ChemistryError> {
        for component in &components {
            for formula in component.formulas() {
                Formula::parse(formula)?;
            }
        }
        let tokens: Vec<String> = components.iter().map(|component| component.token.clone()).collect();
        let mut constants = Vec::new();
        for (record, origin) in reactions {
            check_constant(&record)?;
            let reaction = Reaction::parse(&record.reaction)?;
            constants.push(LibraryConstant { record, reaction, origin });
        }
        let entries: Vec<(usize, &str, &Reaction)> = constants
            .iter()
            .enumerate()
            .map(|(index, constant)| (index, constant.record.reaction.as_str(), &constant.reaction))
            .collect();
        let defined = resolve(&tokens, &entries)?;
        let (gases, dissolved): (Vec<_>, Vec<_>) =
            defined.into_iter().partition(|d| d.token.ends_with(GAS_ENDING));
        let gases = gases
            .into_iter()
            .map(|d| Gas { token: d.token, formation: d.formation, constant: d.constant })
            .collect();
        let species: Vec<Species> = dissolved
            .into_iter()
            .map(|d| Species {
                charge: charge_of(&d.token),
                token: d.token,
                formation: d.formation,
                constant: d.constant,
            })
            .collect();
        let mut library = Library { components, constants, species, gases, solids: Vec::new() };
        for (record, origin) in solids {
            library.add_solid(record, origin)?;
        }
        Ok(library)
    }

    fn add_solid(&mut self, record: SolidRecord, origin: Origin) -> Result<(), ChemistryError> {
        check_constant(&record.dissolution)?;
        if !record.formula.is_empty() {
            Formula::parse(&record.formula)?;
        }
        let fail = |reason: String| ChemistryError::Reaction {
            reaction: record.dissolution.reaction.clone(),
            reason,
        };
        let reaction = Reaction::parse(&record.dissolution.reaction)?;
        if (reaction.coefficient(&record.token) + 1.0).abs() > 1e-12 {
            return Err(fail(format!("the solid {} must stand alone on the left, once", record.token)));
        }
        if self.solids.iter().any(|known| known.record.token == record.token) {
            return Err(ChemistryError::DuplicateToken { token: record.token });
        }
        let constant = self.constants.len();
        let mut dissolution = Formation::default();
        dissolution.chain.insert(constant, 1.0);
        for (token, coefficient) in reaction.solutes().filter(|(token, _)| *token != record.token) {
            let formation = self.formation(token).ok_or_else(|| ChemistryError::Unresolved {
                reaction: record.dissolution.reaction.clone(),
                unknown: token.to_owned(),
            })?;
            for (&component, &count) in &formation.components {
                *dissolution.components.entry(component).or_insert(0.0) += coefficient * count;
            }
            // IAP = Π a^s with a = β Π x^ν: the chain of each product moves to the other side of ln Ks.
            for (&index, &count) in &formation.chain {
                *dissolution.chain.entry(index).or_insert(0.0) -= coefficient * count;
            }
        }
        dissolution.components.retain(|_, c| c.abs() > 1e-9);
        dissolution.chain.retain(|_, c| c.abs() > 1e-9);
        if dissolution.components.is_empty() {
            return Err(fail("it dissolves to nothing that is a component".to_owned()));
        }
        self.constants.push(LibraryConstant { record: record.dissolution.clone(), reaction, origin });
        self.solids.push(Solid { record, dissolution, constant });
        Ok(())
    }

    /// Index of a component by its token.
    pub fn component(&self, token: &str) -> Option<usize> {
        self.components.iter().position(|component| component.token == token)
    }

    /// Index of a component by token, short name or name, case ignored for names.
    pub fn component_named(&self, key: &str) -> Option<usize> {
        self.component(key).or_else(|| {
            self.components
                .iter()
                .position(|c| c.short().eq_ignore_ascii_case(key) || c.name.eq_ignore_ascii_case(key))
        })
    }

    /// A gas by its token.
    pub fn gas(&self, token: &str) -> Option<&Gas> {
        self.gases.iter().find(|gas| gas.token == token)
    }

    /// How a component, species or gas is made of components.
    pub fn formation(&self, token: &str) -> Option<Formation> {
        if let Some(index) = self.component(token) {
            let components = std::collections::BTreeMap::from([(index, 1.0)]);
            return Some(Formation { components, ..Formation::default() });
        }
        let species = self.species.iter().find(|species| species.token == token);
        species.map(|s| &s.formation).or_else(|| self.gas(token).map(|gas| &gas.formation)).cloned()
    }

    /// Index of the hydrogen ion, when the library has one.
    pub fn proton(&self) -> Option<usize> {
        self.component(PROTON)
    }
}

fn check_constant(record: &Constant) -> Result<(), ChemistryError> {
    let fail = |field, value, reason| {
        Err(ChemistryError::Value {
            place: format!("reaction \"{}\"", record.reaction),
            field,
            value,
            reason,
        })
    };
    if !(record.log_k.is_finite() && record.log_k.abs() <= 200.0) {
        return fail("log_k", record.log_k, "not a number between -200 and 200; give log10 K");
    }
    if !(record.sigma.is_finite() && (0.0..=20.0).contains(&record.sigma)) {
        return fail("sigma", record.sigma, "not between 0 and 20; give the standard uncertainty of log10 K");
    }
    if !(record.ionic_strength.is_finite() && (0.0..=20.0).contains(&record.ionic_strength)) {
        return fail("ionic_strength", record.ionic_strength, "not between 0 and 20 mol/L");
    }
    if !(record.temperature_c.is_finite() && (-10.0..=300.0).contains(&record.temperature_c)) {
        return fail("temperature_c", record.temperature_c, "not between -10 and 300 °C");
    }
    for (field, value) in [("dh_kj", record.dh_kj), ("dcp_j", record.dcp_j)] {
        if let Some(value) = value
            && !(value.is_finite() && value.abs() <= 1e5)
        {
            return fail(field, value, "not a number of ordinary size");
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::chemistry::{Basis, Convention};

    #[test]
    fn the_embedded_library_reads_balances_and_resolves() {
        let library = Library::built_in();
        assert!(library.species.len() > 300, "{}", library.species.len());
        assert!(library.solids.len() > 40, "{}", library.solids.len());
        for constant in &library.constants {
            assert!(!constant.record.source.trim().is_empty(), "{} has no source", constant.record.reaction);
        }
    }

    #[test]
    fn charge_of_a_species_equals_the_charge_of_its_components() {
        let library = Library::built_in();
        for species in &library.species {
            let charge: f64 = species
                .formation
                .components
                .iter()
                .map(|(&index, count)| count * charge_of(&library.components[index].token))
                .sum();
            assert!((charge - species.charge).abs() < 1e-9, "{}", species.token);
        }
    }

    #[test]
    fn gases_resolve_to_components_and_stay_apart_from_dissolved_species() {
        let library = Library::built_in();
        assert!(library.species.iter().all(|species| !species.token.ends_with("(g)")));
        let carbon_dioxide = library.gas("CO2(g)").unwrap();
        let (carbonate, proton) = (library.component("CO3-2").unwrap(), library.proton().unwrap());
        assert_eq!(carbon_dioxide.formation.components, [(proton, 2.0), (carbonate, 1.0)].into());
        assert_eq!(carbon_dioxide.formation.chain.len(), 3);
        assert_eq!(carbon_dioxide.formation.chain[&carbon_dioxide.constant], -1.0);
        for token in ["NH3(g)", "SO2(g)", "HCN(g)", "H2S(g)"] {
            assert!(library.gas(token).is_some(), "{token}");
        }
    }

    fn own(reaction: &str, log_k: f64) -> OwnConstants {
        let record = Constant {
            reaction: reaction.to_owned(),
            log_k,
            sigma: 0.1,
            temperature_c: 25.0,
            ionic_strength: 0.1,
            medium: String::new(),
            convention: Convention::Concentration,
            dh_kj: None,
            dcp_j: None,
            basis: Basis::Read,
            source: "own titration".to_owned(),
            dh_basis: None,
            dh_source: None,
            note: String::new(),
        };
        OwnConstants { reactions: vec![record], ..OwnConstants::default() }
    }

    #[test]
    fn an_own_constant_replaces_the_built_in_value_of_the_same_equilibrium() {
        let library = Library::with_own(&own("Ni+2 + EDTA-4 = NiEDTA-2", 19.0)).unwrap();
        let species = library.species.iter().find(|species| species.token == "NiEDTA-2").unwrap();
        assert_eq!(library.constants[species.constant].record.log_k, 19.0);
        assert_eq!(library.constants[species.constant].origin, Origin::Own);
        assert_eq!(library.species.len(), Library::built_in().species.len());
    }

    #[test]
    fn an_own_constant_written_otherwise_still_replaces_the_species_it_forms() {
        let library = Library::with_own(&own("Ni+2 + HEDTA-3 = NiEDTA-2 + H+", 8.5)).unwrap();
        assert_eq!(library.species.len(), Library::built_in().species.len());
        let species = library.species.iter().find(|species| species.token == "NiEDTA-2").unwrap();
        assert_eq!(library.constants[species.constant].record.log_k, 8.5);
    }

    #[test]
    fn a_project_can_bring_its_whole_chemistry() {
        let mut own = own("M+2 + L-2 = ML", 5.0);
        own.library = false;
        for (token, kind) in [("M+2", ComponentKindOf::Metal), ("L-2", ComponentKindOf::Agent)] {
            own.components.push(Component {
                token: token.to_owned(),
                name: token.to_owned(),
                symbol: None,
                kind,
                formula: "C".to_owned(),
                acid_form: None,
                donors: None,
                slow: None,
                note: None,
            });
        }
        let library = Library::with_own(&own).unwrap();
        assert_eq!((library.components.len(), library.species.len(), library.solids.len()), (2, 1, 0));
    }

    use crate::chemistry::ComponentKind as ComponentKindOf;
}
