//! The operating window beyond pH and temperature, and walls that follow from chemistry, against brute force and hand
//! calculation.

use bathwright::bath::{
    Bath, BathError, DEMOS, Demo, Derived, HardnessRange, Limit, LoadRange, Position, Project, Solids, Span,
    Wall,
};
use bathwright::dosing::{Assessor, Hold, search};
use bathwright::equilibrium::Solver;
use bathwright::quantity::{Amount, Unit};

fn demo(file: &str) -> Project {
    Demo::named(file).unwrap().project().unwrap()
}

fn amount(text: &str) -> Amount {
    Amount::parse(text).unwrap()
}

/// A demo bath whose first metal drifts by 20 %, whose make-up water may be hard and whose level moves.
fn drifting(project: &Project) -> Bath {
    let bath = Bath::resolve(project).unwrap();
    let metal = bath.limits[0].component;
    let load = |factor: f64| Amount::new(bath.contents[metal] * factor, Unit::MolePerLitre);
    let mut project = project.clone();
    project.drift.loads.push(LoadRange {
        of: bath.system.components[metal].clone(),
        low: load(0.8),
        high: load(1.2),
    });
    project.drift.hardness =
        Some(HardnessRange { low: amount("0 °dH"), high: amount("12 °dH"), magnesium_share: 0.2 });
    let volume = project.tank.volume_l;
    project.drift.volume_l = Some(Span { low: 0.9 * volume, high: 1.05 * volume });
    Bath::resolve(&project).unwrap()
}

/// Largest excess over each wall on a dense grid: all ends and set points of the drifts, three temperatures, fine pH.
fn brute_force(bath: &Bath, doses: &[f64], ph_steps: usize) -> Vec<f64> {
    let corrected = bath.corrected(doses).unwrap();
    let walls = bath.walls();
    let mut worst = vec![f64::NEG_INFINITY; walls.len()];
    let all_ph: Vec<Option<f64>> = bath.ph().map_or_else(
        || vec![None],
        |range| {
            let share = |step: usize| step as f64 / ph_steps as f64;
            (0..=ph_steps).map(|step| Some(range.low + (range.high - range.low) * share(step))).collect()
        },
    );
    let t = bath.project.tank.temperature_c;
    for corner in 0..3usize.pow(bath.drifts.len() as u32) {
        let mut position = Position::default();
        let mut rest = corner;
        for axis in 0..bath.drifts.len() {
            position.0[axis] = (rest % 3) as f64 - 1.0;
            rest /= 3;
        }
        let mut totals = corrected.totals.clone();
        bath.drifted(&position, corrected.dilution, &mut totals);
        for temperature in [t.low, t.set, t.high] {
            let constants = bath.constants_at(temperature);
            let mut solver = Solver::new();
            for ph in &all_ph {
                let s = bath.solve_totals(&mut solver, &constants, &totals, *ph, Solids::Walls).unwrap();
                for (worst, wall) in worst.iter_mut().zip(&walls) {
                    *worst = worst.max(bath.excess(*wall, &s, temperature));
                }
            }
        }
    }
    worst
}

#[test]
fn the_worst_case_of_every_wall_is_found_inside_the_whole_window() {
    for file in DEMOS {
        let bath = drifting(&file.project().unwrap());
        assert_eq!(bath.drifts.len(), 3);
        for share in [0.0, 0.1, 0.4, 0.9] {
            let doses: Vec<f64> = bath.agents.iter().map(|agent| share * agent.max_g_l).collect();
            let assessment = Assessor::new(&bath).unwrap().assess(&doses).unwrap();
            let brute = brute_force(&bath, &doses, 24);
            for (wall, brute) in assessment.walls.iter().zip(brute) {
                // Far walls are not refined: nobody asks for their third digit.
                let slack = if wall.excess > -2.0 { 1e-6 } else { 0.05 };
                assert!(
                    wall.excess >= brute - slack,
                    "{} at {share}: {:?} {} against {brute}",
                    file.file,
                    wall.wall,
                    wall.excess
                );
                assert!(wall.excess <= brute + 0.02, "{}: {} against {brute}", file.file, wall.excess);
            }
        }
    }
}

#[test]
fn the_bands_hold_over_the_whole_window() {
    for file in DEMOS {
        let bath = drifting(&file.project().unwrap());
        let result = search(&bath, 0).unwrap();
        let max = bath.agents[0].max_g_l;
        let mut doses = bath.doses();
        for step in 0..=12 {
            doses[0] = max * f64::from(step) / 12.0;
            let excess = brute_force(&bath, &doses, 8).into_iter().fold(f64::NEG_INFINITY, f64::max);
            let Some(band) = result.bands.iter().find(|band| band.from <= doses[0] && doses[0] <= band.to)
            else {
                continue;
            };
            // The grid misses interior extremes by less than this.
            if excess.abs() > 2e-3 {
                assert_eq!(
                    band.hold != Hold::Not,
                    excess < 0.0,
                    "{} at {} g/L: {excess}",
                    file.file,
                    doses[0]
                );
            }
        }
    }
}

#[test]
fn a_wider_window_never_asks_for_less() {
    for file in DEMOS {
        let narrow = Bath::resolve(&file.project().unwrap()).unwrap();
        let wide = drifting(&file.project().unwrap());
        let dose = |bath: &Bath| search(bath, 0).unwrap().plain_g_l.unwrap_or(f64::INFINITY);
        assert!(dose(&wide) >= dose(&narrow) - 1e-6, "{}", file.file);
    }
}

/// Evaporation to nine tenths concentrates everything by 1/0.9; the metal load is given as a total.
#[test]
fn drifts_move_totals_as_a_shop_would_count_them() {
    let bath = drifting(&demo("copper_strike.ron"));
    let copper = bath.limits[0].component;
    let calcium = bath.system.component("Ca+2").unwrap();
    let at = |t: [f64; 3]| {
        let mut position = Position::default();
        position.0[..3].copy_from_slice(&t);
        let mut totals = bath.contents.clone();
        bath.drifted(&position, 1.0, &mut totals);
        totals
    };
    assert!((at([1.0, 0.0, 0.0])[copper] / bath.contents[copper] - 1.2).abs() < 1e-12);
    assert!((at([-0.5, 0.0, 0.0])[copper] / bath.contents[copper] - 0.9).abs() < 1e-12);
    assert!((at([0.0, 0.0, -1.0])[copper] / bath.contents[copper] - 1.0 / 0.9).abs() < 1e-12);
    // One German degree is 10 mg/L CaO; CaO 56.077 g/mol.
    let hardness = 12.0 * 0.010 / 56.077;
    let added = at([0.0, 1.0, 0.0])[calcium] - bath.contents[calcium];
    assert!((added / (0.8 * hardness) - 1.0).abs() < 1e-4, "{added}");
    assert!(
        bath.position_words(&Position([1.0, 0.0, -1.0, 0.0, 0.0, 0.0, 0.0, 0.0])).contains("volume 1656 L")
    );
}

#[test]
fn drifts_that_make_no_sense_name_field_and_fix() {
    let project = demo("copper_strike.ron");
    let resolve = |change: &dyn Fn(&mut Project)| {
        let mut changed = project.clone();
        change(&mut changed);
        Bath::resolve(&changed).unwrap_err()
    };
    let load =
        |of: &str, low: &str, high: &str| LoadRange { of: of.into(), low: amount(low), high: amount(high) };
    let cases: [(BathError, &str); 5] = [
        (resolve(&|p| p.drift.loads.push(load("unobtainium", "1 g/L", "2 g/L"))), "drift.loads[0].of"),
        (resolve(&|p| p.drift.loads.push(load("copper", "900 g/L", "950 g/L"))), "drift.loads[0].low"),
        (resolve(&|p| p.drift.volume_l = Some(Span { low: 1.0, high: 2.0 })), "drift.volume_l.high"),
        (
            resolve(&|p| {
                p.drift.hardness =
                    Some(HardnessRange {
                        low: amount("1 g/L"), high: amount("3 °dH"), magnesium_share: 0.2
                    });
            }),
            "drift.hardness.low",
        ),
        (
            resolve(&|p| {
                p.drift.hardness =
                    Some(HardnessRange {
                        low: amount("1 °dH"), high: amount("3 °dH"), magnesium_share: 1.2
                    });
            }),
            "drift.hardness.magnesium_share",
        ),
    ];
    for (error, field) in cases {
        assert_eq!(error.field(), field, "{error}");
    }
}

#[test]
fn a_project_with_drifts_and_derived_walls_is_the_same_after_a_round_trip() {
    let mut project = drifting(&demo("copper_strike.ron")).project;
    project.limits[0].derived = Some(Derived::Immersion { on: "Zn+2".into(), margin_mv: 50.0 });
    let text = bathwright::bath::write(&project).unwrap();
    assert_eq!(bathwright::bath::read(&text, "bath.ron").unwrap(), project);
    assert!(!bathwright::bath::write(&demo("copper_strike.ron")).unwrap().contains("drift"));
}

fn with_limit(file: &str, limit: Limit) -> Bath {
    let mut project = demo(file);
    project.limits = vec![limit];
    Bath::resolve(&project).unwrap()
}

/// E° of copper 0.340 V and of iron -0.440 V at 25 °C, 1e-6 mol/L of iron(II) dissolved: copper deposits on steel from
/// pCu = (0.340 + 0.440 + 0.1774 + margin) / 0.02958 down (Nernst; standard potentials as in the library, hand
/// calculation). No cyanide-free agent gets there, so the typed ceiling stands, and is called empirical.
#[test]
fn immersion_of_copper_on_steel_is_out_of_reach_and_leaves_the_typed_ceiling_empirical() {
    let mut project = demo("copper_strike.ron");
    project.limits[0].derived = Some(Derived::Immersion { on: "Fe+2".into(), margin_mv: 0.0 });
    project.tank.temperature_c = bathwright::bath::Range::fixed(25.0);
    let bath = Bath::resolve(&project).unwrap();
    assert!(!bath.walls().contains(&Wall::Derived(0)), "out of reach, so no wall");
    assert!(bath.walls().contains(&Wall::Ceiling(0)));
    let line = bath.limit_line(0);
    assert!(line.contains("empirical") && line.contains("no agent without cyanide"), "{line}");
    let p: f64 = line.split("pCu ").nth(2).unwrap().split(';').next().unwrap().parse().unwrap();
    assert!((p - (0.340 + 0.440 + 6.0 * 0.02958) / 0.02958).abs() < 0.3, "{p}");
}

/// Silver on copper, by contrast: E° 0.799 and 0.340 V; with 1e-6 mol/L of copper dissolved pAg = (0.799 - 0.340 + 0.1775)
/// / 0.05916 = 10.8 (hand calculation), which agents do reach.
#[test]
fn immersion_of_silver_on_copper_is_a_wall() {
    let mut project = demo("copper_strike.ron");
    project.contents.push(bathwright::bath::Content {
        what: "Ag+".into(),
        amount: amount("0.1 mmol/L"),
        trust: bathwright::bath::Trust::Assumed,
        note: String::new(),
    });
    project
        .contents
        .retain(|content| !content.what.to_lowercase().contains("cu") && content.what != "copper");
    project.tank.temperature_c = bathwright::bath::Range::fixed(25.0);
    project.limits = vec![Limit {
        metal: "Ag+".into(),
        derived: Some(Derived::Immersion { on: "Cu+2".into(), margin_mv: 0.0 }),
        ..Limit::default()
    }];
    let bath = Bath::resolve(&project).unwrap();
    assert!(bath.walls().contains(&Wall::Derived(0)));
    let constants = bath.constants_at(25.0);
    let silver = bath.limits[0].component;
    let s = bath
        .solve_totals(&mut Solver::new(), &constants, &bath.contents, bath.ph_set(), Solids::Walls)
        .unwrap();
    let excess = bath.excess(Wall::Derived(0), &s, 25.0);
    let p_activity = -s.ln_a[silver] / bathwright::equilibrium::LN_10;
    assert!((excess - (10.8 - p_activity)).abs() < 0.1, "{excess} at pAg {p_activity}");
}

#[test]
fn a_solid_with_a_margin_holds_only_that_far_under_saturation() {
    let limit = |margin: f64| Limit {
        metal: "calcium".into(),
        derived: Some(Derived::Solid { solid: "CaCO3(cr)".into(), margin }),
        ..Limit::default()
    };
    let dose = |margin: f64| {
        let bath = with_limit("hard_water_cleaner.ron", limit(margin));
        assert!(bath.walls().contains(&Wall::Derived(0)));
        let found = search(&bath, 0).unwrap();
        let dose = found.plain_g_l.unwrap();
        let mut doses = bath.doses();
        doses[0] = dose;
        let nearest = |doses: &[f64]| {
            let excess = brute_force(&bath, doses, 40);
            let derived = bath.walls().iter().position(|wall| *wall == Wall::Derived(0)).unwrap();
            (excess.iter().copied().fold(f64::NEG_INFINITY, f64::max), excess[derived])
        };
        assert!(nearest(&doses).0 <= 1e-6);
        doses[0] *= 0.999;
        let (less, derived) = nearest(&doses);
        // With a whole unit to spare it is this wall and no other that the dose stops at.
        assert!(less > 0.0 && (margin == 0.0 || derived == less), "{less} {derived}");
        dose
    };
    assert!(dose(1.0) > dose(0.0));
}

#[test]
fn a_discharge_limit_counts_all_that_is_dissolved_and_lets_the_metal_precipitate() {
    let limit = Limit {
        metal: "nickel".into(),
        derived: Some(Derived::Discharge { total: amount("3.98 mg/L") }),
        ..Limit::default()
    };
    let bath = with_limit("electroless_nickel.ron", limit);
    let doses = vec![0.0; bath.agents.len()];
    let assessment = Assessor::new(&bath).unwrap().assess(&doses).unwrap();
    let wall = assessment.walls.iter().find(|wall| wall.wall == Wall::Derived(0)).unwrap();
    // 6.1 g/L of nickel, all of it dissolved in the acid bath.
    assert!((10f64.powf(wall.excess) * 3.98 / 6100.0 - 1.0).abs() < 0.01, "{}", wall.excess);
}

/// A liquid product thins the bath: 40 g/L of a 1.29 g/mL solution make 1.031 L of one litre.
#[test]
fn additions_thin_what_is_in_the_bath() {
    let bath = Bath::resolve(&demo("derusting.ron")).unwrap();
    let mut doses = vec![0.0; bath.agents.len()];
    doses[0] = 40.0;
    let density = bath.agents[0].product.density_g_ml.unwrap();
    let totals = bath.totals(&doses);
    let iron = bath.limits[0].component;
    let factor = bath.contents[iron] / totals[iron];
    assert!((factor - (1.0 + 40.0 / density / 1000.0)).abs() < 1e-9, "{factor}");
    assert!(bath.corrected(&doses).unwrap().dilution >= factor - 1e-12);
}
