//! The tables of the file copy: margins, equilibrium, solids, and the constants with their sources.

use super::content::wall_words;
use super::model::{Align, Column, Table};
use crate::bath::Bath;
use crate::chemistry::{pretty, pretty_reaction};
use crate::dosing::{Plan, place_words, share_of_limit};
use crate::equilibrium::{ActivityModel, Equilibrium, LN_10};
use crate::quantity::{fixed, kelvin, p_value, percent, significant};

/// Species under this share of every component they hold are left out of the printed tables.
const SMALLEST_SHARE: f64 = 1e-3;

fn columns(specification: &[(&str, Align, f32)]) -> Vec<Column> {
    specification.iter().map(|(label, align, width)| Column::new(*label, *align, *width)).collect()
}

/// Worst case of every wall before and after.
pub(super) fn margins_table(bath: &Bath, plan: &Plan) -> Table {
    let rows = plan.after.walls.iter().zip(&plan.before.walls).enumerate().map(|(i, (after, before))| {
        vec![
            wall_words(bath, &plan.after, i),
            place_words(bath, &after.worst),
            p_value(after.worst.value),
            share_of_limit(before.excess),
            share_of_limit(after.excess),
            share_of_limit(after.excess_95),
            fixed(after.worst.sigma, 2),
        ]
    });
    Table {
        title: "Margins over the operating range, worst case".to_owned(),
        columns: columns(&[
            ("limit", Align::Left, 3.0),
            ("worst at", Align::Left, 1.7),
            ("pM or p(ratio)", Align::Right, 1.0),
            ("before", Align::Right, 1.0),
            ("after", Align::Right, 1.0),
            ("at 95 %", Align::Right, 1.0),
            ("σ log10", Align::Right, 0.9),
        ]),
        rows: rows.collect(),
    }
}

/// Share of its largest holder that a species has: the largest over its components.
fn importance(bath: &Bath, solution: &Equilibrium, species: usize) -> f64 {
    bath.system.species[species]
        .components
        .iter()
        .filter(|&&(i, _)| bath.system.proton != Some(i) && solution.totals[i] > 0.0)
        .map(|&(i, nu)| nu.abs() * solution.c[species] / solution.totals[i])
        .fold(0.0, f64::max)
}

/// Species that matter, largest concentration first.
fn weighty(bath: &Bath, solution: &Equilibrium) -> Vec<usize> {
    let mut order: Vec<usize> = (0..solution.c.len())
        .filter(|&j| {
            let limited = bath.limits.iter().any(|limit| limit.component == j);
            limited || importance(bath, solution, j) >= SMALLEST_SHARE
        })
        .collect();
    order.sort_by(|&a, &b| solution.c[b].total_cmp(&solution.c[a]));
    order
}

/// Species with concentration and share.
pub(super) fn equilibrium_table(bath: &Bath, solution: &Equilibrium) -> Table {
    let rows = weighty(bath, solution).into_iter().map(|j| {
        vec![
            pretty(&bath.system.species[j].token),
            significant(solution.c[j], 3),
            p_value(solution.c[j]),
            percent(importance(bath, solution, j)),
        ]
    });
    Table {
        title: "Equilibrium at the set point, after the additions".to_owned(),
        columns: columns(&[
            ("species", Align::Left, 2.0),
            ("mol/L", Align::Right, 1.2),
            ("p", Align::Right, 0.6),
            ("largest share of a component", Align::Right, 1.6),
        ]),
        rows: rows.collect(),
    }
}

/// Solids near or over saturation.
pub(super) fn solids_table(bath: &Bath, solution: &Equilibrium) -> Table {
    let mut near: Vec<usize> = (0..solution.solids.len())
        .filter(|&k| solution.saturation_index(k) > -4.0 && solution.ln_saturation[k].is_finite())
        .collect();
    near.sort_by(|&a, &b| solution.ln_saturation[b].total_cmp(&solution.ln_saturation[a]));
    let rows = near.into_iter().map(|k| {
        vec![
            bath.solid_name(k).to_owned(),
            pretty(&bath.system.solids[k].token),
            fixed(solution.saturation_index(k), 2),
            if solution.solids[k] > 0.0 { significant(solution.solids[k], 3) } else { "–".to_owned() },
        ]
    });
    Table {
        title: "Solids within four units of saturation".to_owned(),
        columns: columns(&[
            ("solid", Align::Left, 2.4),
            ("formula", Align::Left, 1.6),
            ("saturation index", Align::Right, 1.0),
            ("forms, mol/L", Align::Right, 1.0),
        ]),
        rows: rows.collect(),
    }
}

/// The constants behind the species that matter.
pub(super) fn constants_table(bath: &Bath, solution: &Equilibrium, temperature_c: f64) -> Table {
    let mut used: Vec<usize> = weighty(bath, solution)
        .iter()
        .flat_map(|&j| bath.system.species[j].chain.iter().map(|&(constant, _)| constant))
        .collect();
    used.sort_unstable();
    used.dedup();
    let rows = used.into_iter().map(|constant| {
        let record = &bath.library.constants[bath.system.library_constants[constant]].record;
        let model = &bath.system.constants[constant];
        let here = model.ln_k_at(kelvin(temperature_c), bath.project.activity) / LN_10;
        vec![
            pretty_reaction(&record.reaction),
            fixed(record.log_k, 2),
            format!(
                "{} °C, I {}",
                fixed(record.temperature_c, 0),
                crate::quantity::plain(record.ionic_strength, 2)
            ),
            fixed(here, 2),
            fixed(record.sigma, 2),
            format!("{} ({})", record.source, record.basis.word()),
        ]
    });
    Table {
        title: format!(
            "Constants behind the species above; as used: at {} °C{}",
            fixed(temperature_c, 0),
            match bath.project.activity {
                ActivityModel::Davies => " and zero ionic strength, before the Davies correction",
                ActivityModel::IonInteraction => " and zero ionic strength, before ion interaction",
                ActivityModel::AsMeasured => ", H⁺ as activity",
            }
        ),
        columns: columns(&[
            ("reaction", Align::Left, 2.8),
            ("log K", Align::Right, 0.7),
            ("measured at", Align::Left, 1.1),
            ("as used", Align::Right, 0.7),
            ("σ", Align::Right, 0.5),
            ("source", Align::Left, 4.2),
        ]),
        rows: rows.collect(),
    }
}
