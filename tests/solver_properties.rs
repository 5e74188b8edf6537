//! The solver never fails: random systems converge, with a certificate, and derivatives agree with differences.

mod common;

use bathwright::equilibrium::{ActivityModel, EquilibriumError, LN_10, Solver};
use common::{Dice, random_system};
use proptest::prelude::*;

fn check(seed: u64) -> Result<(), String> {
    let random = random_system(seed);
    let result = match Solver::new().solve(&random.problem()) {
        Ok(result) => result,
        Err(EquilibriumError::UnboundedSolid { .. }) if random.held[0].is_some() => return Ok(()),
        Err(error) => return Err(format!("seed {seed}: {error}")),
    };
    let certificate = result.certificate;
    if !certificate.holds() {
        return Err(format!("seed {seed}: {certificate:?}"));
    }
    if result.c.iter().chain(&result.solids).any(|value| !value.is_finite() || *value < 0.0) {
        return Err(format!("seed {seed}: a concentration is negative or not a number"));
    }
    Ok(())
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 2000, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn every_random_system_converges_with_its_certificate(seed in 0u64..100_000) {
        prop_assert!(check(seed).is_ok(), "{}", check(seed).unwrap_err());
    }
}

/// `cargo test --release --test solver_properties -- --ignored` solves a hundred thousand systems.
#[test]
#[ignore = "a long run for a release build"]
fn a_hundred_thousand_random_systems_converge() {
    let failures: Vec<String> = (0..std::env::var("SYSTEMS")
        .map_or(100_000, |n| n.parse().unwrap_or(100_000)))
        .filter_map(|seed| check(seed).err())
        .collect();
    assert!(
        failures.is_empty(),
        "{} failed, first: {:?}",
        failures.len(),
        &failures[..failures.len().min(12)]
    );
}

/// A walk from one seed's system by ever larger changes of totals and pH, each point solved warm and cold.
fn check_warm(seed: u64) -> Result<(), String> {
    let mut dice = Dice::new(seed ^ 0xAB_CDEF);
    let mut walking = Solver::new();
    // Only to have a point to start from; whether it has an answer is asked elsewhere.
    let _ = walking.solve(&random_system(seed).problem());
    for decades in [1e-6, 1e-2, 0.3, 3.0, 8.0] {
        let mut moved = random_system(seed);
        for total in &mut moved.totals {
            // The cap makes totals exactly equal now and then: the equivalence point is the hardest case.
            *total = (*total * 10f64.powf(dice.between(-decades, decades))).clamp(-5.0, 5.0);
        }
        if let Some(ln_a) = &mut moved.held[0] {
            *ln_a = (*ln_a / LN_10 + dice.between(-decades, decades)).clamp(-15.0, 1.0) * LN_10;
        }
        let context = |what: String| format!("seed {seed}, {decades} decades: {what}");
        let (cold, warm) = match (Solver::new().solve(&moved.problem()), walking.solve(&moved.problem())) {
            (Ok(cold), Ok(warm)) => (cold, warm),
            (Err(EquilibriumError::UnboundedSolid { .. }), Err(EquilibriumError::UnboundedSolid { .. }))
                if moved.held[0].is_some() =>
            {
                continue;
            }
            (cold, warm) => return Err(context(format!("{:?} {:?}", cold.err(), warm.err()))),
        };
        if !cold.certificate.holds() || !warm.certificate.holds() {
            return Err(context(format!("{:?} {:?}", cold.certificate, warm.certificate)));
        }
        for (i, (a, b)) in cold.ln_a.iter().zip(&warm.ln_a).enumerate() {
            let same = a == b || ((a - b) / LN_10).abs() <= 1e-9;
            if !same {
                return Err(context(format!("component {i}: cold {a}, warm {b}")));
            }
        }
    }
    Ok(())
}

/// `WARM_SYSTEMS=20000` asks for a long walk.
#[test]
fn a_warm_start_ends_where_a_cold_one_does() {
    let systems = std::env::var("WARM_SYSTEMS").ok().and_then(|n| n.parse().ok()).unwrap_or(500);
    // Beside the first seeds, those where a trace solid beside a plentiful one, or two equal totals, went wrong.
    let failures: Vec<String> =
        (0..systems).chain([3106, 4151, 9775]).filter_map(|seed| check_warm(seed).err()).collect();
    assert!(
        failures.is_empty(),
        "{} failed, first: {:?}",
        failures.len(),
        &failures[..failures.len().min(12)]
    );
}

/// One solver for many systems and baths: what a refused or a different problem has left behind must not matter.
///
/// With ion interaction the certificate alone is asked for: strong attraction of highly charged ions can give one bath two
/// solutions, a dilute and a strong one, and a walk stays on its own (5 of 20,000 such jumps).
#[test]
fn a_solver_that_has_seen_other_systems_answers_as_a_fresh_one() {
    let mut travelled = Solver::new();
    let (mut compared, mut refused) = (0, 0);
    for seed in 0..1500 {
        let mut random = random_system(seed);
        let _ = travelled.solve(&random.problem());
        // All that its first solid is made of is held: first beyond saturation, which is refused, then below it.
        if let Some(solid) = random.system.solids.first() {
            let square: f64 = solid.components.iter().map(|(_, nu)| nu * nu).sum();
            let components = solid.components.clone();
            let ln_ks = random.constants.ln_ks[0];
            for (level, beyond) in [(ln_ks + 1.0, true), (ln_ks - 1.0, false)] {
                for &(i, nu) in &components {
                    random.held[i] = Some(level * nu / square);
                }
                if beyond {
                    refused += usize::from(travelled.solve(&random.problem()).is_err());
                }
            }
        } else if let Some(ln_a) = &mut random.held[0] {
            *ln_a = -7.0 * LN_10;
        }
        match (Solver::new().solve(&random.problem()), travelled.solve(&random.problem())) {
            (Ok(fresh), Ok(found)) => {
                compared += 1;
                assert!(found.certificate.holds(), "seed {seed}: {:?}", found.certificate);
                if random.constants.model == ActivityModel::IonInteraction {
                    continue;
                }
                for (i, (a, b)) in fresh.ln_a.iter().zip(&found.ln_a).enumerate() {
                    let same = a == b || ((a - b) / LN_10).abs() <= 1e-9;
                    assert!(same, "seed {seed}, component {i}: fresh {a}, travelled {b}");
                }
            }
            (Err(fresh), Err(found)) => assert_eq!(fresh, found),
            (fresh, found) => panic!("seed {seed}: {:?} {:?}", fresh.err(), found.err()),
        }
    }
    assert!(compared > 1000 && refused > 300, "{compared} {refused}");
}
