//! Turns the solver's last point into a result over the whole system, and certifies it from the original balances.

use super::activity;
use super::certificate::Certificate;
use super::convex::Minimiser;
use super::coupling::Coupling;
use super::lanes::at;
use super::layout::Layout;
use super::problem::{Equilibrium, Problem};

/// Fills a result from ln a over the columns and the amounts of the present solids.
pub(super) fn fill(
    problem: &Problem,
    layout: &Layout,
    coupling: &Coupling,
    minimiser: &Minimiser,
    (x, amounts): (&[f64], &[(usize, f64)]),
    result: &mut Equilibrium,
) {
    let system = problem.system;
    layout.spread(x, f64::NEG_INFINITY, &mut result.ln_a);
    renew(&mut result.ln_c, system.species.len(), f64::NEG_INFINITY);
    renew(&mut result.c, system.species.len(), 0.0);
    renew(&mut result.ln_gamma, system.species.len(), 0.0);
    for (place, &j) in layout.species.iter().enumerate() {
        result.c[j] = at(&minimiser.c, place);
        result.ln_c[j] = at(&minimiser.exponent, place);
        result.ln_gamma[j] = -at(&coupling.minus_ln_gamma, place);
    }
    result.sums.clone_from(&coupling.sums);
    renew(&mut result.solids, system.solids.len(), 0.0);
    for &(place, amount) in amounts {
        result.solids[layout.solids[place]] = amount;
    }
    result.ln_saturation.clear();
    for (solid, ln_ks) in system.solids.iter().zip(&problem.constants.ln_ks) {
        let possible = solid.components.iter().all(|&(i, _)| result.ln_a[i].is_finite());
        let product: f64 = solid.components.iter().map(|&(i, nu)| nu * result.ln_a[i]).sum();
        result.ln_saturation.push(if possible { product - ln_ks } else { f64::NEG_INFINITY });
    }
    result.ln_pressure.clear();
    for (gas, ln_kg) in system.gases.iter().zip(&problem.constants.ln_kg) {
        let possible = gas.components.iter().all(|&(i, _)| result.ln_a[i].is_finite());
        let product: f64 = gas.components.iter().map(|&(i, nu)| nu * result.ln_a[i]).sum();
        result.ln_pressure.push(if possible { product + ln_kg } else { f64::NEG_INFINITY });
    }
    renew(&mut result.uptake, system.gases.len(), 0.0);
    result.charge_gap =
        layout.charge.iter().enumerate().map(|(place, charge)| charge * at(&minimiser.c, place)).sum();
    certify(problem, layout, result);
}

fn renew(values: &mut Vec<f64>, count: usize, value: f64) {
    values.clear();
    values.resize(count, value);
}

/// Fills the totals, the ionic strength and the certificate from the original balances.
fn certify(problem: &Problem, layout: &Layout, result: &mut Equilibrium) {
    let system = problem.system;
    renew(&mut result.totals, system.components.len(), 0.0);
    let mut worst: f64 = 0.0;
    let magnitude = &mut result.magnitudes;
    renew(magnitude, system.components.len(), 0.0);
    let mut add = |components: &[(usize, f64)], amount: f64| {
        for &(i, nu) in components {
            result.totals[i] += nu * amount;
            magnitude[i] += (nu * amount).abs();
        }
    };
    for &j in &layout.species {
        add(&system.species[j].components, result.c[j]);
    }
    for (solid, &n) in system.solids.iter().zip(&result.solids) {
        if n > 0.0 {
            add(&solid.components, n);
        }
    }
    for &(gas, column) in &layout.gases {
        // What the balance of the component that it took out lacks has come from the air.
        let component = layout.columns[column];
        let terms = &system.gases[gas].components;
        let own = terms.iter().find(|&&(i, _)| i == component).map_or(1.0, |&(_, nu)| nu);
        result.uptake[gas] = (result.totals[component] - problem.totals[component]) / own;
    }
    for &i in layout.columns.iter().filter(|&&i| problem.held[i].is_none()) {
        let size = result.magnitudes[i] + problem.totals[i].abs();
        if size > 0.0 {
            worst =
                worst.max((result.totals[i] - problem.totals[i] - result.taken_up(system, i)).abs() / size);
        }
    }
    let mut unmet: f64 = 0.0;
    for &k in &layout.solids {
        let excess = result.ln_saturation[k];
        unmet = unmet.max(if result.solids[k] > 0.0 { excess.abs() } else { excess.max(0.0) });
    }
    let counter = if problem.counter_ion { result.charge_gap.abs() } else { 0.0 };
    let squares: f64 =
        layout.species.iter().zip(&layout.charge).map(|(&j, charge)| charge * charge * result.c[j]).sum();
    result.ionic_strength = 0.5 * (squares + counter);
    let mut sums: f64 = 0.0;
    for (sum, &used) in result.sums.iter().enumerate() {
        let found = if sum == 0 { result.ionic_strength } else { gathered(problem, layout, result, sum) };
        sums = sums.max((found - used).abs() / result.ionic_strength.max(1e-12));
    }
    result.certificate =
        Certificate { balance_residual: worst, kkt_residual: unmet, activity_residual: sums, iterations: 0 };
}

fn gathered(problem: &Problem, layout: &Layout, result: &Equilibrium, sum: usize) -> f64 {
    let ions: f64 = layout.species.iter().map(|&j| activity::weight(problem, sum, j) * result.c[j]).sum();
    let (cations, anions) = activity::counter_weight(problem, sum);
    let gap = result.charge_gap;
    ions + if gap > 0.0 { anions * gap } else { -cations * gap }
}
