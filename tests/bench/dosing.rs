//! Times of the dose decision on the demo baths: `cargo bench --bench dosing`. The fastest of several runs each, because
//! what others do on the machine is no property of the program.

use bathwright::bath::{AgentDose, Bath, DEMOS, HardnessRange, LoadRange, Span};
use bathwright::dosing::{Aim, Assessor, blend, sample, search};
use bathwright::quantity::{Amount, Unit};
use std::time::Instant;

const REPEATS: usize = 15;

/// Milliseconds of the fastest run.
fn fastest(mut run: impl FnMut()) -> f64 {
    let times = (0..REPEATS).map(|_| {
        let begin = Instant::now();
        run();
        begin.elapsed().as_secs_f64() * 1e3
    });
    times.fold(f64::INFINITY, f64::min)
}

/// A demo bath whose first metal, hardness and volume drift too: with pH and temperature five ranges.
fn drifting(bath: &Bath) -> Option<Bath> {
    let mut project = bath.project.clone();
    let metal = bath.limits.first()?.component;
    let total = bath.contents[metal];
    let amount = |factor: f64| Amount::new(total * factor, Unit::MolePerLitre);
    project.drift.loads.push(LoadRange {
        of: bath.system.components[metal].clone(),
        low: amount(0.85),
        high: amount(1.15),
    });
    project.drift.hardness = Some(HardnessRange {
        low: Amount::parse("0 °dH").ok()?,
        high: Amount::parse("10 °dH").ok()?,
        magnesium_share: 0.2,
    });
    let volume = project.tank.volume_l;
    project.drift.volume_l = Some(Span { low: 0.95 * volume, high: 1.02 * volume });
    Bath::resolve(&project).ok()
}

fn main() {
    println!("milliseconds");
    println!(
        "{:<24} {:>8} {:>8} {:>8} {:>8}   {:>8} {:>8}   {:>8}",
        "demo bath", "species", "resolve", "assess", "search", "assess 5", "search 5", "10,000 draws"
    );
    for demo in DEMOS {
        let project = demo.project().expect("demo baths read");
        let bath = Bath::resolve(&project).expect("demo baths resolve");
        let drifting = drifting(&bath).expect("demo baths drift");
        let doses: Vec<f64> = bath.agents.iter().map(|agent| 0.3 * agent.max_g_l).collect();
        let of = |bath: &Bath| {
            let assess = fastest(|| {
                Assessor::new(bath)
                    .and_then(|mut assessor| assessor.assess(&doses))
                    .expect("demo baths solve");
            });
            let search = fastest(|| {
                search(bath, 0).expect("demo baths solve");
            });
            (assess, search)
        };
        let resolve = fastest(|| {
            Bath::resolve(&project).expect("demo baths resolve");
        });
        let ((assess, search), (assess_5, search_5)) = (of(&bath), of(&drifting));
        let draws = fastest(|| {
            sample(&bath, &doses, 10_000, 1).expect("demo baths solve");
        });
        println!(
            "{:<24} {:>8} {resolve:>8.2} {assess:>8.2} {search:>8.2}   {assess_5:>8.2} {search_5:>8.2}   {draws:>8.0}",
            demo.file,
            bath.system.species.len(),
        );
    }
    blends();
}

/// Three agents on the cleaner and the derusting bath, with the demo's own window.
fn blends() {
    for (file, agents) in [
        ("hard_water_cleaner.ron", [("na-gluconate", 40.0), ("nta-na3-40", 20.0), ("edta-na4-39", 10.0)]),
        ("derusting.ron", [("edta-na4-39", 80.0), ("hedta-na3-41", 80.0), ("citric-mono", 40.0)]),
        ("copper_strike.ron", [("hedp-60", 80.0), ("citric-mono", 40.0), ("edta-na4-39", 40.0)]),
    ] {
        let demo = bathwright::bath::Demo::named(file).expect("a demo bath");
        let mut project = demo.project().expect("demo baths read");
        let dose = |(product, max_g_l): (&str, f64)| AgentDose {
            product: product.to_owned(),
            max_g_l,
            ..AgentDose::default()
        };
        project.agents = agents.map(dose).into();
        let bath = Bath::resolve(&project).expect("demo baths resolve");
        let time = fastest(|| {
            blend(&bath, &[0, 1, 2], Aim::Cheapest).expect("demo baths solve");
        });
        println!("blend of three, {file:<24} {time:>8.1}");
    }
}
