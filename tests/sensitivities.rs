//! Exact derivatives against differences, and first-order uncertainty against sampling.

mod common;

use bathwright::bath::{Bath, Demo, Point};
use bathwright::equilibrium::{ConstantModel, Equilibrium, LN_10, Sensitivities, Solver, Value};
use common::{Dice, RandomSystem, random_system};

fn solve(random: &RandomSystem) -> Option<Equilibrium> {
    Solver::new().solve(&random.problem()).ok()
}

fn present(solution: &Equilibrium) -> Vec<bool> {
    solution.solids.iter().map(|n| *n > 0.0).collect()
}

/// Largest share of its own precision that a derivative may be off by: differences of doubles over a step of 1e-3,
/// extrapolated once, are good to about 1e-9 where the system itself is not ill-conditioned.
const TOLERANCE: f64 = 1e-6;

/// d ln a by Richardson's extrapolation of central differences; `None` where a solid comes or goes within the step.
fn difference(
    random: &RandomSystem,
    here: &Equilibrium,
    shift: impl Fn(&mut RandomSystem, f64),
) -> Option<Vec<f64>> {
    let at = |h: f64| {
        let mut moved = RandomSystem {
            system: random.system.clone(),
            constants: random.constants.clone(),
            totals: random.totals.clone(),
            held: random.held.clone(),
            may_form: random.may_form.clone(),
        };
        shift(&mut moved, h);
        solve(&moved).filter(|there| present(there) == present(here))
    };
    let slope = |h: f64| -> Option<Vec<f64>> {
        let (up, down) = (at(h)?, at(-h)?);
        Some(up.ln_a.iter().zip(&down.ln_a).map(|(up, down)| (up - down) / (2.0 * h)).collect())
    };
    let (coarse, fine) = (slope(1e-3)?, slope(5e-4)?);
    Some(coarse.iter().zip(&fine).map(|(coarse, fine)| (4.0 * fine - coarse) / 3.0).collect())
}

fn compare(seed: u64, what: &str, exact: &[f64], numeric: &[f64], here: &Equilibrium) {
    let size = exact.iter().fold(1.0f64, |max, value| max.max(value.abs()));
    for ((exact, numeric), ln_a) in exact.iter().zip(numeric).zip(&here.ln_a) {
        if ln_a.is_finite() {
            assert!(
                (exact - numeric).abs() <= TOLERANCE * size,
                "seed {seed}, {what}: {exact} against {numeric}"
            );
        }
    }
}

/// Systems whose answer moves by more than this per unit of relative change in a balance lose as many digits to the
/// rounding of their own totals; the high-precision references cover them.
const MOST_SENSITIVE: f64 = 1e5;

/// Largest change of ln a per unit of relative change in one side of a balance.
fn condition(random: &RandomSystem, here: &Equilibrium, answers: &Sensitivities) -> f64 {
    let magnitude = |i: usize| -> f64 {
        (0..here.c.len()).map(|j| (random.system.coefficient(j, i) * here.c[j]).abs()).sum()
    };
    let largest = |i: usize| {
        let size = magnitude(i);
        answers.by_total(i).ln_a.iter().fold(0.0f64, |max, slope| max.max((slope * size).abs()))
    };
    (0..random.totals.len()).map(largest).fold(0.0, f64::max)
}

#[test]
fn derivatives_agree_with_differences_on_two_hundred_random_systems() {
    let (mut compared, mut with_solids, mut seed) = (0, 0, 0);
    while compared < 200 {
        seed += 1;
        assert!(seed < 2000, "too few systems could be compared: {compared}");
        let random = random_system(seed);
        let Some(here) = solve(&random) else { continue };
        let Ok(answers) = Sensitivities::new(random.problem(), &here) else { continue };
        if condition(&random, &here, &answers) > MOST_SENSITIVE {
            continue;
        }
        let mut dice = Dice::new(seed);
        let component = 1 + dice.whole(0, random.totals.len() - 2);
        if random.totals[component] == 0.0 {
            continue;
        }
        let total = random.totals[component];
        let by_total = difference(&random, &here, |moved, h| moved.totals[component] *= 1.0 + h);
        // Beyond this a relative step of 1e-3 is no small step any more.
        let exact: Vec<f64> = answers.by_total(component).ln_a.iter().map(|slope| slope * total).collect();
        if exact.iter().any(|slope| slope.abs() > 30.0) {
            continue;
        }
        let Some(numeric) = by_total else { continue };
        compare(seed, "total", &exact, &numeric, &here);
        if random.held[0].is_some()
            && let Some(numeric) =
                difference(&random, &here, |moved, h| moved.held[0] = moved.held[0].map(|x| x + h))
        {
            compare(seed, "held pH", &answers.by_held(0).ln_a, &numeric, &here);
        }
        let species =
            random.totals.len() + dice.whole(0, random.system.species.len() - random.totals.len() - 1);
        let mut shift = vec![0.0; random.system.species.len()];
        shift[species] = 1.0;
        let exact = answers.by_shift(&shift, &vec![0.0; random.system.solids.len()]).ln_a;
        if let Some(numeric) = difference(&random, &here, |moved, h| moved.constants.ln_beta[species] += h) {
            compare(seed, "ln beta", &exact, &numeric, &here);
        }
        compared += 1;
        with_solids += usize::from(here.solids.iter().any(|n| *n > 0.0));
    }
    assert!(with_solids > 20, "{with_solids}");
}

/// First order against 10,000 draws. The sample's own standard deviation is uncertain by 1/√(2·10000) = 0.7 %, and the
/// response is not quite linear over one σ; 10 % covers both where the constants that matter are not far off.
#[test]
fn first_order_uncertainty_agrees_with_sampling() {
    let bath = Bath::resolve(&Demo::named("electroless_copper.ron").unwrap().project().unwrap()).unwrap();
    let constants = bath.constants_at(25.0);
    let doses = vec![20.0; bath.agents.len()];
    let point = Point { ph: bath.ph_set(), doses: &doses };
    let copper = bath.system.component("Cu+2").unwrap();
    let solution = bath.solve(&mut Solver::new(), &constants, point).unwrap();
    let totals = bath.totals(&doses);
    let solids = bathwright::bath::Solids::Real;
    let ask = |answers: &Sensitivities| answers.sigma_log10(&[Value::Free(copper)])[0];
    let sigma = bath.sensitivities(&constants, &totals, bath.ph_set(), solids, &solution, ask).unwrap();

    let mut dice = Dice::new(7);
    let mut normal = || -> f64 { (0..12).map(|_| dice.unit()).sum::<f64>() - 6.0 };
    let mut solver = Solver::new();
    let draws = 10_000;
    let mut values = Vec::with_capacity(draws);
    for _ in 0..draws {
        let shifts: Vec<f64> =
            bath.system.constants.iter().map(|c: &ConstantModel| c.sigma_ln * normal()).collect();
        let mut drawn = constants.clone();
        let sum = |chain: &[(usize, f64)]| chain.iter().map(|&(i, n)| n * shifts[i]).sum::<f64>();
        for (ln_beta, species) in drawn.ln_beta.iter_mut().zip(&bath.system.species) {
            *ln_beta += sum(&species.chain);
        }
        for (ln_ks, solid) in drawn.ln_ks.iter_mut().zip(&bath.system.solids) {
            *ln_ks += sum(&solid.chain);
        }
        let result = bath.solve(&mut solver, &drawn, point).unwrap();
        values.push(result.ln_c[copper] / LN_10);
    }
    let mean = values.iter().sum::<f64>() / draws as f64;
    let deviation = (values.iter().map(|v| (v - mean).powi(2)).sum::<f64>() / (draws - 1) as f64).sqrt();
    assert!((deviation / sigma - 1.0).abs() < 0.10, "sampled {deviation}, first order {sigma}");
}

#[test]
fn a_warm_start_finds_the_same_answer_as_a_cold_one() {
    for seed in 0..400 {
        let mut random = random_system(seed);
        let mut warm = Solver::new();
        if warm.solve(&random.problem()).is_err() {
            continue;
        }
        let mut dice = Dice::new(seed);
        let reach = if dice.chance(0.5) { 0.1 } else { 5.0 };
        for total in &mut random.totals {
            *total *= 10f64.powf(dice.between(-reach, reach)).min(5.0 / total.abs().max(1e-300));
        }
        let (Ok(there), Some(cold)) = (warm.solve(&random.problem()), solve(&random)) else { continue };
        assert!(there.certificate.holds(), "seed {seed}");
        for (warm, cold) in there.ln_c.iter().zip(&cold.ln_c).filter(|(_, cold)| cold.is_finite()) {
            // Balances met to 1e-14 leave ln c open by that times the condition of the system.
            assert!((warm - cold).abs() < 1e-6, "seed {seed}: {warm} against {cold}");
        }
    }
}

/// The transposed solve and one solve per input are two ways to the same numbers.
#[test]
fn gradients_agree_with_the_response_to_each_input() {
    let mut compared = 0;
    for seed in 1..400 {
        let random = random_system(seed);
        let Some(here) = solve(&random) else { continue };
        let Ok(answers) = Sensitivities::new(random.problem(), &here) else { continue };
        if condition(&random, &here, &answers) > MOST_SENSITIVE {
            continue;
        }
        let system = &random.system;
        let close = |what: &str, one: f64, other: f64| {
            let scale = 1.0 + one.abs().max(other.abs());
            assert!((one - other).abs() <= 1e-7 * scale, "seed {seed}, {what}: {one} against {other}");
        };
        let Some(metal) = (1..random.totals.len()).find(|&i| here.ln_a[i].is_finite()) else { continue };
        let free = answers.gradient(Value::Free(metal));
        for i in 0..random.totals.len() {
            let size = random.totals[i].abs().max(1e-12);
            let response = answers.by_total(i);
            close("total", free.by_total[i] * size, answers.ln_free(&response, metal) * size);
        }
        if random.held[0].is_some() {
            close("pH", free.by_held(system, 0), answers.ln_free(&answers.by_held(0), metal));
        }
        let by_constants = free.by_constants(system);
        for (index, slope) in by_constants.iter().enumerate() {
            close("constant", *slope, answers.ln_free(&answers.by_constant(index), metal));
        }
        let dissolved = answers.gradient(Value::Dissolved(metal));
        for (index, slope) in dissolved.by_constants(system).iter().enumerate() {
            let response = answers.by_constant(index);
            let of_solids: f64 = system
                .solids
                .iter()
                .zip(&response.solids)
                .flat_map(|(solid, n)| solid.components.iter().map(move |(i, nu)| (*i, nu * n)))
                .filter(|(i, _)| *i == metal)
                .map(|(_, change)| change)
                .sum();
            let total: f64 = (0..here.c.len()).map(|j| system.coefficient(j, metal) * here.c[j]).sum();
            // What the solids give up goes into solution, as the total stays.
            close("dissolved", *slope, -of_solids / total);
        }
        for solid in 0..system.solids.len() {
            let product = |slopes: &[f64]| -> f64 {
                system.solids[solid].components.iter().map(|&(i, nu)| nu * slopes[i]).sum()
            };
            if !here.ln_saturation[solid].is_finite() {
                continue;
            }
            let saturation = answers.gradient(Value::Saturation(solid));
            let by_total = product(&answers.by_total(metal).ln_a);
            let size = random.totals[metal];
            close("saturation", saturation.by_total[metal] * size, by_total * size);
        }
        compared += 1;
    }
    assert!(compared > 100, "{compared}");
}
