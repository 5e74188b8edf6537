//! The decision on each demo bath, checked by an independent fine scan of the doses.

use bathwright::bath::{Bath, DEMOS, ResolvedDerived, Solids, Wall};
use bathwright::dosing::{Assessor, Band, Hold, search};
use bathwright::equilibrium::{LN_10, Solver};

fn hold_at(bands: &[Band], dose: f64) -> Option<Hold> {
    bands.iter().find(|band| band.from <= dose && dose <= band.to).map(|band| band.hold)
}

/// 61 values over a held range; a predicted pH follows from the totals.
fn all_ph(bath: &Bath) -> Vec<Option<f64>> {
    bath.ph().map_or_else(
        || vec![None],
        |range| (0..=60).map(|i| Some(range.low + (range.high - range.low) * f64::from(i) / 60.0)).collect(),
    )
}

/// Largest excess over all walls by brute force: a dense grid of pH and the three temperatures, no refinement.
fn brute_force(bath: &Bath, doses: &[f64]) -> f64 {
    let mut worst = f64::NEG_INFINITY;
    let t = bath.project.tank.temperature_c;
    let totals = bath.corrected(doses).unwrap().totals;
    for temperature in [t.low, t.set, t.high] {
        let constants = bath.constants_at(temperature);
        let mut solver = Solver::new();
        for ph in all_ph(bath) {
            let s = bath.solve_totals(&mut solver, &constants, &totals, ph, Solids::Walls).unwrap();
            for limit in &bath.limits {
                let log_free = s.ln_c[limit.component] / LN_10;
                worst = worst.max(limit.ceiling.map_or(f64::NEG_INFINITY, |c| log_free - c.log10()));
                worst = worst.max(limit.floor.map_or(f64::NEG_INFINITY, |f| f.log10() - log_free));
                if let Some(ResolvedDerived::Solid(solid, margin)) = limit.derived {
                    worst = worst.max(s.saturation_index(solid) + margin);
                }
            }
            for (k, rule) in bath.rules.iter().enumerate() {
                if *rule == bathwright::bath::Rule::MustNotForm {
                    worst = worst.max(s.saturation_index(k));
                }
            }
        }
    }
    worst
}

#[test]
fn the_bands_of_every_demo_bath_agree_with_a_fine_scan() {
    for demo in DEMOS {
        let bath = Bath::resolve(&demo.project().unwrap()).unwrap();
        let result = search(&bath, 0).unwrap();
        let mut doses = bath.doses();
        let max = bath.agents[0].max_g_l;
        for step in 0..=80 {
            doses[0] = max * f64::from(step) / 80.0;
            let excess = brute_force(&bath, &doses);
            let Some(hold) = hold_at(&result.bands, doses[0]) else { continue };
            // Within rounding of a wall either answer is right.
            if excess.abs() > 1e-4 {
                assert_eq!(hold != Hold::Not, excess < 0.0, "{} at {} g/L: {excess}", demo.file, doses[0]);
            }
        }
    }
}

#[test]
fn the_smallest_dose_holds_and_a_little_less_does_not() {
    for demo in DEMOS {
        let bath = Bath::resolve(&demo.project().unwrap()).unwrap();
        let result = search(&bath, 0).unwrap();
        let found = result.found.unwrap_or_else(|| panic!("{}: no dose", demo.file));
        let mut assessor = Assessor::new(&bath).unwrap();
        let mut doses = bath.doses();
        doses[0] = found.dose_g_l;
        let excess = |a: &bathwright::dosing::Assessment| {
            if found.hold == Hold::Sure { a.excess_95() } else { a.excess() }
        };
        assert!(excess(&assessor.assess(&doses).unwrap()) <= 0.0, "{}", demo.file);
        doses[0] = found.dose_g_l * 0.999;
        assert!(excess(&assessor.assess(&doses).unwrap()) > 0.0, "{}: less would do", demo.file);
    }
}

#[test]
fn the_worst_case_is_never_better_than_any_point_of_the_range() {
    for demo in DEMOS {
        let bath = Bath::resolve(&demo.project().unwrap()).unwrap();
        let doses: Vec<f64> = bath.agents.iter().map(|agent| 0.3 * agent.max_g_l).collect();
        let assessment = Assessor::new(&bath).unwrap().assess(&doses).unwrap();
        assert!(
            assessment
                .walls
                .iter()
                .any(|wall| matches!(wall.wall, Wall::Ceiling(_) | Wall::Solid(_) | Wall::Derived(_)))
        );
        let brute = brute_force(&bath, &doses);
        assert!(
            assessment.excess() >= brute - 1e-6,
            "{}: {} against {brute}",
            demo.file,
            assessment.excess()
        );
    }
}

/// Uncertainty jumps where a solid comes or goes, so a coarse scan of pH can step over the worst place.
#[test]
fn no_ph_of_the_range_is_worse_with_confidence_than_the_assessment_says() {
    for demo in DEMOS {
        let bath = Bath::resolve(&demo.project().unwrap()).unwrap();
        let found = search(&bath, 0).unwrap().found.unwrap();
        let mut doses = bath.doses();
        doses[0] = found.dose_g_l;
        let said = Assessor::new(&bath).unwrap().assess(&doses).unwrap().excess_95();
        let totals = bath.corrected(&doses).unwrap().totals;
        let t = bath.project.tank.temperature_c;
        let steps = (0..=100).map(|step| f64::from(step) / 100.0);
        let ph: Vec<Option<f64>> = match bath.ph() {
            Some(range) => steps.map(|share| Some(range.low + (range.high - range.low) * share)).collect(),
            None => vec![None],
        };
        let mut worst = f64::NEG_INFINITY;
        for temperature in [t.low, t.set, t.high] {
            let constants = bath.constants_at(temperature);
            let mut solver = Solver::new();
            for &ph in &ph {
                let s = bath.solve_totals(&mut solver, &constants, &totals, ph, Solids::Walls).unwrap();
                for wall in bath.walls() {
                    let excess = bath.excess(wall, &s, temperature);
                    if excess > -2.0 {
                        let value = bath.limited_value(wall);
                        let ask = |answers: &bathwright::equilibrium::Sensitivities| {
                            answers.sigma_log10(&[value])[0]
                        };
                        let sigma =
                            bath.sensitivities(&constants, &totals, ph, Solids::Walls, &s, ask).unwrap();
                        worst = worst.max(excess + bathwright::dosing::CONFIDENCE_95 * sigma);
                    }
                }
            }
        }
        assert!(said >= worst - 0.01, "{}: {said} against {worst}", demo.file);
        assert!(said <= worst + 0.05, "{}: {said} against {worst}", demo.file);
    }
}

/// Whatever agent is asked for: a dose that is said to hold with confidence does so in its own assessment.
#[test]
fn a_dose_found_with_confidence_is_assessed_so_for_many_agents() {
    for demo in DEMOS {
        let project = demo.project().unwrap();
        for product in
            ["edta-na4-39", "hedta-na3-41", "citric-mono", "nta-na3-40", "glda-na4-47", "hedp-60", "tea-85"]
        {
            let mut other = project.clone();
            other.agents[0].product = product.to_owned();
            let Ok(bath) = Bath::resolve(&other) else { continue };
            let Some(found) = search(&bath, 0).unwrap().found else { continue };
            let excess = match found.hold {
                Hold::Sure => found.assessment.excess_95(),
                _ => found.assessment.excess(),
            };
            assert!(excess <= 1e-6, "{} with {product} at {}: {excess}", demo.file, found.dose_g_l);
        }
    }
}
