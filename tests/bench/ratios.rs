//! Prints how much faster the solver is than a plain Newton iteration and than scipy's root finders, on the same random
//! systems in one run: `cargo bench --bench ratios`. The ratios to scipy need `python3` with scipy.

mod systems;
mod yardstick;

use bathwright::bath::{Bath, DEMOS};
use bathwright::equilibrium::{Equilibrium, Solver};
use bathwright::study::{MapArea, MapOf, map};
use std::collections::BTreeMap;
use std::process::Command;
use std::time::Instant;
use systems::{Case, random_case};
use yardstick::Yardstick;

const SIZES: [(usize, usize); 3] = [(8, 80), (12, 150), (20, 400)];
const COUNT: u64 = 300;
/// Systems that scipy gets: it is slow.
const FOR_SCIPY: usize = 100;
const REPEATS: usize = 15;
const WALK: usize = 40;

/// Share solved and microseconds for each system.
#[derive(Clone, Copy)]
struct Timing {
    solved: f64,
    micros: f64,
}

fn main() {
    let sets: Vec<(String, Vec<Case>)> = SIZES
        .iter()
        .map(|&(m, n)| (format!("{m} × {n}"), (0..COUNT).map(|seed| random_case(m, n, seed)).collect()))
        .collect();
    let scipy = ask_scipy(&sets);
    println!(
        "{COUNT} random systems of each size, components × species, microseconds for each system (share solved);"
    );
    println!("ratios are of the times for each solved system");
    println!(
        "{:<10} {:>18} {:>18} {:>7} {:>22} {:>22} {:>7}",
        "cold", "this solver", "plain Newton", "ratio", "scipy hybr", "scipy lm", "ratio"
    );
    for (size, cases) in &sets {
        let (own, plain) = (cold(cases), plain_cold(cases));
        let methods =
            ["hybr", "lm"].map(|method| scipy.as_ref().and_then(|all| all.get(&format!("{size} {method}"))));
        // A method that gives up soon on most systems is not the faster one: time for each system that it solves.
        let best = methods.iter().flatten().map(|t| t.micros / t.solved).fold(f64::INFINITY, f64::min);
        println!(
            "{size:<10} {:>18} {:>18} {:>7.1} {:>22} {:>22} {:>7}",
            show(Some(&own)),
            show(Some(&plain)),
            plain.micros / plain.solved / own.micros,
            show(methods[0]),
            show(methods[1]),
            if best.is_finite() { format!("{:.0}", best / own.micros) } else { "-".to_owned() }
        );
    }
    println!("{:<10} {:>18} {:>18} {:>7}", "warm", "this solver", "plain Newton", "ratio");
    for (size, cases) in &sets {
        let (own, plain) = (warm(cases), plain_warm(cases));
        let ratio = plain.micros / plain.solved / own.micros;
        println!("{size:<10} {:>18} {:>18} {ratio:>7.1}", show(Some(&own)), show(Some(&plain)));
    }
    maps();
}

/// A map of 200 × 150 points over pH and dose of each demo bath, on two threads.
fn maps() {
    println!("map of 200 x 150 points, milliseconds");
    for demo in DEMOS {
        let bath = Bath::resolve(&demo.project().expect("demo baths read")).expect("demo baths resolve");
        let ph = bath.ph().map_or((0.0, 14.0), |range| (range.low - 3.0, range.high + 2.0));
        let area = MapArea { agent: 0, ph, points: (200, 150) };
        let times = (0..REPEATS).map(|_| {
            let begin = Instant::now();
            std::hint::black_box(map(&bath, MapOf::Excess, area).expect("demo baths solve"));
            begin.elapsed().as_secs_f64() * 1e3
        });
        println!("{:<24} {:>8.1}", demo.file, times.fold(f64::INFINITY, f64::min));
    }
}

fn show(timing: Option<&Timing>) -> String {
    timing.map_or_else(
        || "not installed".to_owned(),
        |timing| format!("{:.1} ({:.0} %)", timing.micros, 100.0 * timing.solved),
    )
}

/// The fastest of the repeats of each system, averaged over the systems: what others do on the machine counts least.
fn fastest(cases: &[Case], mut solve: impl FnMut(&Case) -> bool) -> Timing {
    let (mut solved, mut sum) = (0, 0.0);
    for case in cases {
        solved += usize::from(solve(case));
        let mut best = f64::INFINITY;
        for _ in 0..REPEATS {
            let begin = Instant::now();
            std::hint::black_box(solve(case));
            best = best.min(begin.elapsed().as_secs_f64());
        }
        sum += best;
    }
    let count = cases.len() as f64;
    Timing { solved: solved as f64 / count, micros: sum / count * 1e6 }
}

fn cold(cases: &[Case]) -> Timing {
    // One solver for each system, as a bath has: what it lays out serves all points of the bath.
    let mut solvers: BTreeMap<*const Case, Solver> = BTreeMap::new();
    let mut result = Equilibrium::default();
    fastest(cases, |case| {
        let solver = solvers.entry(case).or_default();
        solver.reset();
        solver.solve_into(&case.problem(), &mut result).is_ok() && result.certificate.holds()
    })
}

fn plain_cold(cases: &[Case]) -> Timing {
    let mut yardsticks: BTreeMap<*const Case, Yardstick> = BTreeMap::new();
    fastest(cases, |case| {
        let yardstick = yardsticks.entry(case).or_insert_with(|| Yardstick::new(case));
        yardstick.solve(&case.totals, &mut Yardstick::start(case))
    })
}

/// Moves totals by a few per cent, as the next point of a sweep does.
fn next(totals: &mut [f64]) {
    let last = totals.len() - 1;
    totals[1] *= 1.02;
    totals[last] *= 0.99;
}

fn warm(cases: &[Case]) -> Timing {
    let (mut solver, mut result) = (Solver::new(), Equilibrium::default());
    let (mut solved, mut sum) = (0, 0.0);
    for case in cases {
        let mut best = f64::INFINITY;
        for repeat in 0..REPEATS {
            let mut totals = case.totals.clone();
            solver.reset();
            let _ = solver.solve_into(&case.problem(), &mut result);
            let begin = Instant::now();
            for _ in 0..WALK {
                next(&mut totals);
                let problem = bathwright::equilibrium::Problem { totals: &totals, ..case.problem() };
                let found = solver.solve_into(&problem, &mut result).is_ok() && result.certificate.holds();
                solved += usize::from(found && repeat == 0);
            }
            best = best.min(begin.elapsed().as_secs_f64());
        }
        sum += best / WALK as f64;
    }
    let count = cases.len() as f64;
    Timing { solved: solved as f64 / (count * WALK as f64), micros: sum / count * 1e6 }
}

fn plain_warm(cases: &[Case]) -> Timing {
    let (mut solved, mut counted, mut sum) = (0, 0usize, 0.0);
    for case in cases {
        let yardstick = Yardstick::new(case);
        let mut begin_at = Yardstick::start(case);
        // Its cold failures would only measure how long it tries.
        if !yardstick.solve(&case.totals, &mut begin_at) {
            continue;
        }
        counted += 1;
        let mut best = f64::INFINITY;
        for repeat in 0..REPEATS {
            let (mut totals, mut x) = (case.totals.clone(), begin_at.clone());
            let begin = Instant::now();
            for _ in 0..WALK {
                next(&mut totals);
                let found = yardstick.solve(&totals, &mut x);
                solved += usize::from(found && repeat == 0);
            }
            best = best.min(begin.elapsed().as_secs_f64());
        }
        sum += best / WALK as f64;
    }
    let count = counted.max(1) as f64;
    Timing { solved: solved as f64 / (count * WALK as f64), micros: sum / count * 1e6 }
}

/// Times of scipy by "size method"; `None` where python or scipy is missing.
fn ask_scipy(sets: &[(String, Vec<Case>)]) -> Option<BTreeMap<String, Timing>> {
    let as_json = |case: &Case| {
        let dense: Vec<Vec<f64>> = (0..case.system.species.len())
            .map(|j| (0..case.totals.len()).map(|i| case.system.coefficient(j, i)).collect())
            .collect();
        serde_json::json!({ "stoichiometry": dense, "ln_beta": case.constants.ln_beta, "totals": case.totals })
    };
    let systems: serde_json::Map<String, serde_json::Value> = sets
        .iter()
        .map(|(size, cases)| (size.clone(), cases[..FOR_SCIPY].iter().map(as_json).collect()))
        .collect();
    let file = tempfile::NamedTempFile::new().ok()?;
    serde_json::to_writer(&file, &systems).ok()?;
    let script = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/bench/scipy_root.py");
    let output = Command::new("python3").arg(script).arg(file.path()).output().ok()?;
    if !output.status.success() {
        eprintln!(
            "no times of scipy: {}",
            String::from_utf8_lossy(&output.stderr).lines().last().unwrap_or("")
        );
        return None;
    }
    let times: BTreeMap<String, [f64; 2]> = serde_json::from_slice(&output.stdout).ok()?;
    let timing = |[solved, micros]: [f64; 2]| Timing { solved, micros };
    Some(times.into_iter().map(|(name, time)| (name, timing(time))).collect())
}
