//! Times of the dose decision on the demo baths: `cargo bench --bench dosing`. The fastest of several runs each, because
//! what others do on the machine is no property of the program.

use bathwright::bath::{AgentDose, Bath, DEMOS, HardnessRange, LoadRange, Shift, Span};
use bathwright::dosing::{Aim, Assessor, blend, sample, search};
use bathwright::quantity::{Amount, Unit};
use bathwright::study::shift::forecast;
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

/// A demo bath whose first metal drifts too: with pH and temperature three ranges, 27 corners and middles. With `all`,
/// hardness and volume drift as well: five ranges.
fn drifting(bath: &Bath, all: bool) -> Option<Bath> {
    let mut project = bath.project.clone();
    let metal = bath.limits.first()?.component;
    let total = bath.contents[metal];
    let amount = |factor: f64| Amount::new(total * factor, Unit::MolePerLitre);
    project.drift.loads.push(LoadRange {
        of: bath.system.components[metal].clone(),
        low: amount(0.85),
        high: amount(1.15),
    });
    if !all {
        return Bath::resolve(&project).ok();
    }
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
        "{:<24} {:>8} {:>8} {:>8} {:>8} {:>8} {:>8} {:>13} {:>9}",
        "demo bath",
        "species",
        "resolve",
        "assess",
        "search",
        "search 3",
        "search 5",
        "10,000 draws",
        "forecast"
    );
    for demo in DEMOS {
        let project = demo.project().expect("demo baths read");
        let bath = Bath::resolve(&project).expect("demo baths resolve");
        let [three, five] = [false, true].map(|all| drifting(&bath, all).expect("demo baths drift"));
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
        let ((assess, search), (_, search_3), (_, search_5)) = (of(&bath), of(&three), of(&five));
        let forecast = shifts(&bath).map_or("-".to_owned(), |time| format!("{time:.1}"));
        let draws = fastest(|| {
            sample(&bath, &doses, 10_000, 1).expect("demo baths solve");
        });
        println!(
            "{:<24} {:>8} {resolve:>8.2} {assess:>8.2} {search:>8.2} {search_3:>8.2} {search_5:>8.2} {draws:>13.0} {forecast:>9}",
            demo.file,
            bath.system.species.len(),
        );
    }
    blends();
}

/// Milliseconds of a forecast of 15 shifts of 8 hours, for baths that say what a shift does to them.
fn shifts(bath: &Bath) -> Option<f64> {
    let shift = Shift { shifts: 15, hours: 8.0, ..bath.project.shift.clone() };
    if bath.project.shift.is_default() {
        return None;
    }
    Some(fastest(|| {
        let running = bath.running(&shift).expect("demo shifts resolve");
        forecast(&running).expect("demo baths solve");
    }))
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
