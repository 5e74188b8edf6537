//! Correction from an analysis: uncertainty against sampling, doses and bail-outs against independent scans, the pH of a
//! cold sample against published buffers.

mod common;

use bathwright::bath::{Bath, Demo, MeterReading, Project, Solids, Trust, read};
use bathwright::dosing::{CONFIDENCE_95, Hold};
use bathwright::equilibrium::{ConstantModel, Constants, LN_10, Solver};
use bathwright::study::correction::{Correction, Effect, Refill, Remedy, correct, refilled};
use common::Dice;

fn demo(file: &str) -> Project {
    Demo::named(file).unwrap().project().unwrap()
}

/// The bath's pH for a reading, without the program's own conversion.
fn ph_in_the_tank(bath: &Bath, totals: &[f64], reading: f64, sample: &Constants, tank: &Constants) -> f64 {
    let proton = bath.system.proton.unwrap();
    let held = bath.solve_totals(&mut Solver::new(), sample, totals, Some(reading), Solids::Real).unwrap();
    let mut totals = totals.to_vec();
    totals[proton] = held.totals[proton];
    bath.solve_totals(&mut Solver::new(), tank, &totals, None, Solids::Real).unwrap().ph(proton)
}

/// Constants moved by a draw of each published one.
fn drawn(bath: &Bath, constants: &Constants, shifts: &[f64]) -> Constants {
    let mut drawn = constants.clone();
    let sum = |chain: &[(usize, f64)]| chain.iter().map(|&(i, n)| n * shifts[i]).sum::<f64>();
    for (ln_beta, species) in drawn.ln_beta.iter_mut().zip(&bath.system.species) {
        *ln_beta += sum(&species.chain);
    }
    for (ln_ks, solid) in drawn.ln_ks.iter_mut().zip(&bath.system.solids) {
        *ln_ks += sum(&solid.chain);
    }
    drawn
}

/// Standard deviation of log10 free metal when all inputs, the reading and all constants are drawn at random.
fn sampled(correction: &Correction, with_constants: bool) -> f64 {
    let bath = &correction.bath;
    let metal = bath.limits[correction.metals[0].limit].component;
    let found = correction.ph.unwrap();
    let (sample, tank) =
        (bath.constants_at(found.meter_temperature_c), bath.constants_at(found.bath_temperature_c));
    let slope = {
        let at = |ph| ph_in_the_tank(bath, &bath.contents, ph, &sample, &tank);
        (at(found.meter + 0.02) - at(found.meter - 0.02)) / 0.04
    };
    let meter_sigma = found.sigma / slope;
    let mut dice = Dice::new(11);
    let mut normal = || -> f64 { (0..12).map(|_| dice.unit()).sum::<f64>() - 6.0 };
    let draws = 4000;
    let mut solver = Solver::new();
    let mut values = Vec::with_capacity(draws);
    for _ in 0..draws {
        let mut totals = bath.contents.clone();
        let mut reading = found.meter;
        for input in &correction.inputs {
            let z = normal();
            match &input.effect {
                Effect::Totals(moles) => {
                    totals.iter_mut().zip(moles).for_each(|(t, m)| *t += m * (input.sigma * z).max(-0.99));
                }
                Effect::Ph => reading += meter_sigma * z,
            }
        }
        let shifts: Vec<f64> = bath
            .system
            .constants
            .iter()
            .map(|c: &ConstantModel| if with_constants { c.sigma_ln * normal() } else { 0.0 })
            .collect();
        let (sample, tank) = (drawn(bath, &sample, &shifts), drawn(bath, &tank, &shifts));
        let ph = ph_in_the_tank(bath, &totals, reading, &sample, &tank);
        let result = bath.solve_totals(&mut solver, &tank, &totals, Some(ph), Solids::Real).unwrap();
        values.push(result.ln_c[metal] / LN_10);
    }
    let mean = values.iter().sum::<f64>() / draws as f64;
    (values.iter().map(|v| (v - mean).powi(2)).sum::<f64>() / (draws - 1) as f64).sqrt()
}

#[test]
fn free_metal_carries_the_uncertainty_of_the_analysis_as_sampling_does() {
    for file in ["copper_strike.ron", "electroless_nickel.ron"] {
        let mut project = demo(file);
        if file == "copper_strike.ron" {
            // Far enough from copper hydroxide that it forms in no draw: the first order does not see a solid begin.
            project.analysis.results[1].amount.value = 90.0;
        }
        let correction = correct(&project, None).unwrap();
        let spread = &correction.metals[0].spread;
        let all = sampled(&correction, true);
        assert!((all / spread.total() - 1.0).abs() < 0.1, "{file}: sampled {all}, {}", spread.total());
        let inputs = spread.inputs.iter().map(|sigma| sigma * sigma).sum::<f64>().sqrt();
        let without = sampled(&correction, false);
        assert!((without / inputs - 1.0).abs() < 0.1, "{file}: sampled {without}, {inputs} of the inputs");
    }
}

/// Primary pH standards: Bates, J. Res. NBS 66A (1962) 179 (values from memory): phosphate 0.025 + 0.025 mol/kg 6.865 at
/// 25 °C, 6.838 at 40 °C; borax 0.01 mol/kg 9.180 and 9.068.
#[test]
fn a_buffer_read_cold_has_its_published_ph_when_warm() {
    for (lines, cold, warm) in [
        (r#"(what: "PO4-3", amount: "50 mmol/L"), (what: "Na+", amount: "75 mmol/L")"#, 6.865, 6.838),
        (r#"(what: "B(OH)4-", amount: "40 mmol/L"), (what: "Na+", amount: "20 mmol/L")"#, 9.180, 9.068),
    ] {
        let text = format!(
            r#"(format: 1, name: "buffer", tank: (volume_l: 1, ph: Held(low: 5, set: 7, high: 10),
                temperature_c: (low: 40, set: 40, high: 40)),
                contents: [{lines}, (what: "calcium", amount: "1e-9 mol/L")],
                agents: [(product: "edta-acid", max_g_l: 1)],
                limits: [(metal: "calcium", ceiling: "1 mol/L")],
                analysis: (ph: (value: {cold}, temperature_c: 25, uncertainty: 0.02)))"#
        );
        let found = correct(&read(&text, "buffer").unwrap(), None).unwrap().ph.unwrap();
        assert!((found.bath - warm).abs() < 0.02, "{} at 25 °C: {} against {warm}", cold, found.bath);
        assert!((found.sigma / 0.02 - 1.0).abs() < 0.05, "a buffer keeps the error of its reading");
    }
}

/// Neutral and alkaline water move with the ion product: pKw 13.995 at 25 °C, 13.02 at 60 °C (IAPWS 2007, R11-07).
#[test]
fn alkali_read_cold_is_nearly_a_whole_ph_lower_when_hot() {
    let mut project = demo("hard_water_cleaner.ron");
    project.analysis.ph =
        Some(MeterReading { value: 12.2, temperature_c: Some(25.0), uncertainty: None, trust: Trust::Today });
    let correction = correct(&project, None).unwrap();
    let found = correction.ph.unwrap();
    assert!((found.meter - found.bath - 0.97).abs() < 0.1, "{}", found.bath);
    // 11.2 in the tank is under the range of 11.8 to 12.5.
    assert!(correction.ph_outside);
    let adjustment = correction.bring_back.unwrap();
    assert_eq!(adjustment.product.id, "naoh-50");
    // The tank with that alkali in it, its hydrogen counted, has the set pH.
    let bath = &correction.bath;
    let tank = bath.constants_at(60.0);
    let proton = bath.system.proton.unwrap();
    let as_found =
        bath.solve_totals(&mut Solver::new(), &tank, &bath.contents, Some(found.bath), Solids::Real).unwrap();
    let mut totals = bath.contents.clone();
    totals[proton] = as_found.totals[proton];
    let thinned = 1.0 + adjustment.dose_g_l * bath.alkali.litres_per_gram;
    for (total, part) in totals.iter_mut().zip(&bath.alkali.per_gram) {
        *total = (*total + adjustment.dose_g_l * part) / thinned;
    }
    let after = bath.solve_totals(&mut Solver::new(), &tank, &totals, None, Solids::Real).unwrap();
    assert!((after.ph(proton) - 12.2).abs() < 1e-6, "{}", after.ph(proton));
}

/// Confident excess by brute force: a fine grid of pH, slopes by inputs as differences of solved points.
fn brute_force_95(correction: &Correction, doses: &[f64]) -> f64 {
    let bath = &correction.bath;
    let t = bath.project.tank.temperature_c;
    let range = bath.ph().unwrap();
    let corrected = bath.corrected(doses).unwrap();
    let mut worst = f64::NEG_INFINITY;
    for temperature in [t.low, t.set, t.high] {
        let constants = bath.constants_at(temperature);
        for step in 0..=24 {
            let ph = range.low + (range.high - range.low) * f64::from(step) / 24.0;
            let mut solver = Solver::new();
            let mut at = |totals: &[f64], ph: f64| {
                let s = bath.solve_totals(&mut solver, &constants, totals, Some(ph), Solids::Walls).unwrap();
                bath.walls().iter().map(|wall| bath.excess(*wall, &s, temperature)).collect::<Vec<f64>>()
            };
            let here = at(&corrected.totals, ph);
            let mut variance = vec![0.0; here.len()];
            for input in &correction.inputs {
                let small = 1e-3;
                let (up, down) = match &input.effect {
                    Effect::Totals(moles) => {
                        let moved = |sign: f64| -> Vec<f64> {
                            let parts = corrected.totals.iter().zip(moles);
                            parts.map(|(t, m)| t + sign * small * m / corrected.dilution).collect()
                        };
                        (at(&moved(1.0), ph), at(&moved(-1.0), ph))
                    }
                    Effect::Ph => (at(&corrected.totals, ph + small), at(&corrected.totals, ph - small)),
                };
                for (sum, (up, down)) in variance.iter_mut().zip(up.iter().zip(&down)) {
                    let slope = (up - down) / (2.0 * small);
                    *sum += if slope.is_finite() { (slope * input.sigma).powi(2) } else { 0.0 };
                }
            }
            let s = bath
                .solve_totals(&mut Solver::new(), &constants, &corrected.totals, Some(ph), Solids::Walls)
                .unwrap();
            let sigmas = bath
                .sensitivities(&constants, &corrected.totals, Some(ph), Solids::Walls, &s, |answers| {
                    let values = bath.walls().into_iter().map(|wall| bath.limited_value(wall));
                    values.map(|value| answers.gradient(value).sigma_log10(&bath.system)).collect::<Vec<_>>()
                })
                .unwrap();
            for ((excess, variance), sigma) in here.iter().zip(&variance).zip(&sigmas) {
                if *excess > -3.0 {
                    worst = worst.max(excess + CONFIDENCE_95 * (variance + sigma * sigma).sqrt());
                }
            }
        }
    }
    worst
}

#[test]
fn the_dose_holds_with_the_analysis_counted_and_a_little_less_does_not() {
    let mut project = demo("copper_strike.ron");
    for result in &mut project.analysis.results {
        // Coarse enough that it matters beside the constants.
        result.uncertainty = None;
        result.uncertainty_percent = Some(12.0);
    }
    let correction = correct(&project, Some(1)).unwrap();
    let Remedy::Add { agent: 1, dose_g_l, hold: Hold::Sure, search } = &correction.remedy else {
        panic!("{:?}", correction.remedy)
    };
    let perfect = search.found.as_ref().unwrap().dose_g_l;
    assert!(*dose_g_l > perfect, "{dose_g_l} with, {perfect} without the analysis");
    let at = brute_force_95(&correction, &[0.0, *dose_g_l]);
    assert!(at.abs() < 2e-3, "{at}");
    assert!(brute_force_95(&correction, &[0.0, 0.98 * dose_g_l]) > 1e-3);
}

/// One metal M, one agent L, one complex MLn with K = 10^(6n); constants and analysis exact.
fn plain_bath(n: i32, metal: f64, agent: f64, limits: &str, cap: f64, make_up: &str) -> Project {
    let log_k = 6 * n;
    let text = format!(
        r#"(format: 1, name: "plain", tank: (volume_l: 100, ph: Held(low: 7, set: 7, high: 7),
            temperature_c: (low: 25, set: 25, high: 25)),
            contents: [(what: "M+2", amount: "1 mmol/L"), (what: "L", amount: "1 mmol/L")],
            agents: [(product: "agent", max_g_l: {cap})],
            limits: [(metal: "M+2", {limits})],
            activity: AsMeasured,
            adjust: (alkali: "agent", acid: "agent"),
            analysis: (results: [
                (what: "M+2", amount: "{metal} mmol/L", uncertainty_percent: 0, trust: Today),
                (what: "L", amount: "{agent} mmol/L", uncertainty_percent: 0, trust: Today),
            ], make_up: [{make_up}]),
            products: [(id: "agent", name: "agent", formula: "NH3", assay_basis: "all of it",
                assay_percent: (low: 100, typical: 100, high: 100), form: Powder, releases: [("L", 1)],
                role: Agent, active: "L")],
            constants: (library: false,
                components: [(token: "H+", name: "hydrogen ion", kind: Proton, formula: "H"),
                    (token: "M+2", name: "metal", kind: Metal), (token: "L", name: "ligand", kind: Agent)],
                reactions: [
                    (reaction: "H2O = H+ + OH-", log_k: -14.0, sigma: 0, convention: Thermodynamic, basis: Memory, source: "x"),
                    (reaction: "M+2 + {n} L = ML+2", log_k: {log_k}, sigma: 0, temperature_c: 25, ionic_strength: 0.1,
                     convention: Concentration, basis: Memory, source: "x"),
                ]))"#
    );
    read(&text, "plain").unwrap()
}

/// Free metal of M + n L = MLn with K = 10^(6n), by bisection of the balance of L.
fn free_metal(n: i32, metal: f64, agent: f64) -> f64 {
    let k = 10f64.powi(6 * n);
    let free = |l: f64| metal / (1.0 + k * l.powi(n));
    let (mut low, mut high) = (0.0, agent);
    for _ in 0..100 {
        let l = 0.5 * (low + high);
        if l + f64::from(n) * k * free(l) * l.powi(n) < agent { low = l } else { high = l }
    }
    free(low)
}

/// The first share of a fine scan at which a condition holds.
fn first(holds: impl Fn(f64) -> bool) -> Option<f64> {
    (0..=95_000).map(|i| f64::from(i) * 1e-5).find(|share| holds(*share))
}

#[test]
fn an_overdosed_bath_is_thinned_as_far_as_a_scan_says() {
    // Thinning sets metal of a two-to-one complex free: twice the water, twice the free metal.
    let project = plain_bath(2, 1.0, 40.0, r#"floor: "2e-12 mol/L""#, 5.0, "");
    let Remedy::BailOut(found) = correct(&project, None).unwrap().remedy else { panic!() };
    assert_eq!((found.refill, found.dose, found.hold), (Refill::Water, None, Hold::Sure));
    let left = |share: f64| free_metal(2, 1e-3 * (1.0 - share), 40e-3 * (1.0 - share));
    let scanned = first(|share| left(share) >= 2e-12).expect("the scan finds a share");
    assert!(scanned > 0.1 && scanned < 0.9, "{scanned}");
    assert!((found.share - scanned).abs() < 2e-4, "{} against {scanned}", found.share);
}

#[test]
fn an_overloaded_bath_without_agent_at_hand_is_thinned_by_the_ratio_of_loads() {
    // No agent in the bath and a cap of next to nothing: free metal is the total.
    let project = plain_bath(1, 4.0, 0.0, r#"ceiling: "1e-3 mol/L""#, 1e-9, "");
    let Remedy::BailOut(found) = correct(&project, None).unwrap().remedy else { panic!() };
    assert!((found.share - 0.75).abs() < 2e-4, "{}", found.share);
}

#[test]
fn a_fresh_bath_refills_when_water_would_thin_the_metal_under_its_floor() {
    let limits = r#"ceiling: "1e-4 mol/L", floor: "5e-5 mol/L""#;
    let project = plain_bath(
        1,
        4.0,
        0.5,
        limits,
        1e-9,
        r#"(what: "M+2", amount: "1 mmol/L"), (what: "L", amount: "1.2 mmol/L")"#,
    );
    let Remedy::BailOut(found) = correct(&project, None).unwrap().remedy else { panic!() };
    let mixed = |share: f64, metal: f64, agent: f64| {
        free_metal(
            1,
            1e-3 * (4.0 * (1.0 - share) + metal * share),
            1e-3 * (0.5 * (1.0 - share) + agent * share),
        )
    };
    let holds = |free: f64| (5e-5..=1e-4).contains(&free);
    let water = first(|share| holds(mixed(share, 0.0, 0.0)));
    let fresh = first(|share| holds(mixed(share, 1.0, 1.2)));
    let smaller = water.into_iter().chain(fresh).fold(f64::INFINITY, f64::min);
    assert!(smaller.is_finite());
    assert!((found.share - smaller).abs() < 2e-4, "{} against {water:?} and {fresh:?}", found.share);
    let wanted = if fresh.is_some_and(|fresh| water.is_none_or(|water| fresh < water)) {
        Refill::Fresh
    } else {
        Refill::Water
    };
    assert_eq!(found.refill, wanted);
}

#[test]
fn where_neither_dose_nor_water_holds_alone_both_do_and_a_scan_agrees() {
    // The ceiling wants more agent than the cap allows, and thinning alone leaves too much free metal.
    let ceiling = 1.0e-6;
    let cap = 0.05;
    let project = plain_bath(1, 20.0, 0.0, r#"ceiling: "1e-6 mol/L""#, cap, "");
    let correction = correct(&project, None).unwrap();
    let Remedy::BailOut(found) = &correction.remedy else { panic!("{:?}", correction.remedy) };
    let (_, dose) = found.dose.expect("a dose as well");
    let most = cap * correction.bath.agents[0].per_gram[correction.bath.agents[0].active];
    let scanned = first(|share| free_metal(1, 20e-3 * (1.0 - share), most) <= ceiling);
    match scanned {
        Some(share) => assert!((found.share - share).abs() < 2e-3, "{} against {share}", found.share),
        None => panic!("the scan finds nothing"),
    }
    assert!(dose <= cap);
}

#[test]
fn the_bail_out_of_a_demo_bath_is_the_smallest_of_a_scan_with_the_analysis_counted() {
    let correction = correct(&demo("electroless_nickel.ron"), None).unwrap();
    let Remedy::BailOut(found) = &correction.remedy else { panic!("{:?}", correction.remedy) };
    assert_eq!((found.dose, found.hold), (None, Hold::Sure));
    let at = |share: f64| {
        let before = &correction.bath;
        let bath = Bath::resolve(&refilled(before, found.refill, share).unwrap()).unwrap();
        let mut inputs = correction.inputs.clone();
        for input in &mut inputs {
            let Effect::Totals(moles) = &mut input.effect else { continue };
            let old = |token: &String| before.system.components.iter().position(|known| known == token);
            let left = bath.system.components.iter().map(|token| old(token).map_or(0.0, |i| moles[i]));
            *moles = left.map(|moles| (1.0 - share) * moles).collect();
        }
        let doses = vec![0.0; bath.agents.len()];
        brute_force_95(&Correction { bath, inputs, ..correction.clone() }, &doses)
    };
    assert!(at(found.share).abs() < 2e-3, "{}", at(found.share));
    for i in 0..=20 {
        let share = 0.98 * found.share * f64::from(i) / 20.0;
        assert!(at(share) > 0.0, "{share} would do");
    }
}

#[test]
fn a_decision_that_rests_on_guesses_names_what_to_measure_first() {
    let mut project = demo("electroless_nickel.ron");
    project.analysis.results.truncate(1);
    project.analysis.results[0].amount.value = 6.0;
    for content in project.contents.iter_mut().filter(|content| content.what == "lactate") {
        content.amount.value = 22.0;
        content.trust = Trust::Assumed;
    }
    let correction = correct(&project, None).unwrap();
    let named: Vec<&str> =
        correction.rests_on.iter().map(|&number| correction.inputs[number].name.as_str()).collect();
    assert_eq!(named.first(), Some(&"lactate"), "{named:?}");
    for content in project.contents.iter_mut() {
        content.trust = Trust::Today;
    }
    assert!(correct(&project, None).unwrap().rests_on.is_empty());
}

#[test]
fn a_bath_found_in_order_needs_nothing() {
    let mut project = demo("electroless_nickel.ron");
    project.analysis.results[0].amount.value = 6.1;
    project.analysis.results[1].amount.value = 30.0;
    assert_eq!(correct(&project, None).unwrap().remedy, Remedy::Nothing);
}

#[test]
fn no_acid_is_told_for_a_bath_that_may_hold_cyanide() {
    // Citric acid would be the dose.
    let mut project = demo("copper_strike.ron");
    assert!(correct(&project, Some(1)).unwrap().refused.is_none());
    project.sheet.holds_cyanide_sulfide_or_hypochlorite = true;
    assert!(correct(&project, Some(1)).unwrap().refused.unwrap().contains("Citric acid"));
    // Sulfuric acid would bring the pH down.
    let mut project = demo("copper_strike.ron");
    project.sheet.holds_cyanide_sulfide_or_hypochlorite = true;
    project.analysis.ph =
        Some(MeterReading { value: 9.8, temperature_c: None, uncertainty: None, trust: Trust::Today });
    assert!(correct(&project, None).unwrap().refused.unwrap().contains("poisonous gas"));
}

#[test]
fn an_empty_analysis_is_refused() {
    assert!(correct(&demo("derusting.ron"), None).unwrap_err().to_string().contains("analysis is empty"));
}
