//! Blends of agents against a fine grid of doses, and their certificates against the window made a little wider.

use bathwright::bath::{AgentDose, Bath, Demo, Project, Range, Rule, Solids};
use bathwright::dosing::{Aim, Assessor, Blend, BlendError, Hold, blend, search};
use bathwright::equilibrium::{Constants, LN_10, Solver};
use bathwright::quantity::Level;

fn demo(file: &str) -> Project {
    Demo::named(file).unwrap().project().unwrap()
}

/// A demo bath with other agents and its first ceiling moved by so many decades.
fn case(file: &str, agents: &[(&str, f64)], decades: f64) -> Bath {
    let mut project = demo(file);
    project.agents = agents
        .iter()
        .map(|&(product, max_g_l)| AgentDose { product: product.into(), max_g_l, ..AgentDose::default() })
        .collect();
    let bath = Bath::resolve(&project).unwrap();
    let ceiling = bath.limits[0].ceiling.unwrap();
    project.limits[0].ceiling = Some(Level::MolePerLitre(ceiling * 10f64.powf(decades)));
    Bath::resolve(&project).unwrap()
}

/// Whether doses hold by plain numbers on a grid of pH and temperature, independent of the library's own search.
struct Scan<'a> {
    bath: &'a Bath,
    levels: Vec<(Constants, Solver)>,
    ph: Vec<f64>,
    /// Where the last doses failed: the next ones likely fail there too.
    last: (usize, usize),
}

impl<'a> Scan<'a> {
    fn new(bath: &'a Bath) -> Self {
        let t = bath.project.tank.temperature_c;
        let range = bath.ph().unwrap();
        let steps = 12;
        let ph = (0..=steps).map(|i| range.low + (range.high - range.low) * f64::from(i) / f64::from(steps));
        let levels = [t.low, t.set, t.high].map(|t| (bath.constants_at(t), Solver::new()));
        Self { bath, levels: levels.into(), ph: ph.collect(), last: (0, 0) }
    }

    fn holds(&mut self, doses: &[f64], slack: f64) -> bool {
        let totals = self.bath.corrected(doses).unwrap().totals;
        let (last_level, last_ph) = self.last;
        let places = (0..self.levels.len()).flat_map(|level| (0..self.ph.len()).map(move |ph| (level, ph)));
        for (level, ph) in std::iter::once((last_level, last_ph)).chain(places) {
            let (constants, solver) = &mut self.levels[level];
            let s =
                self.bath.solve_totals(solver, constants, &totals, Some(self.ph[ph]), Solids::Walls).unwrap();
            let over = self.bath.limits.iter().any(|limit| {
                let log_free = s.ln_c[limit.component] / LN_10;
                limit.ceiling.is_some_and(|ceiling| log_free > ceiling.log10() + slack)
                    || limit.floor.is_some_and(|floor| log_free < floor.log10() - slack)
            });
            let forms = (0..s.solids.len())
                .any(|k| self.bath.rules[k] == Rule::MustNotForm && s.saturation_index(k) > slack);
            if over || forms {
                self.last = (level, ph);
                return false;
            }
        }
        true
    }
}

fn cost(bath: &Bath, aim: Aim, doses: &[f64]) -> f64 {
    let price = |agent: usize| match aim {
        Aim::Lightest => 1.0,
        Aim::Cheapest => bath.agents[agent].product.price().unwrap() * 1e-3,
    };
    doses.iter().enumerate().map(|(agent, dose)| price(agent) * dose).sum()
}

/// The cheapest doses of a grid that hold, if any is cheaper than `below`.
fn cheaper_on_a_grid(bath: &Bath, aim: Aim, steps: usize, below: f64) -> Option<Vec<f64>> {
    let mut scan = Scan::new(bath);
    let n = bath.agents.len();
    let points = (0..(steps + 1).pow(n as u32)).map(|number| {
        let mut rest = number;
        (0..n)
            .map(|agent| {
                let digit = rest % (steps + 1);
                rest /= steps + 1;
                bath.agents[agent].max_g_l * digit as f64 / steps as f64
            })
            .collect::<Vec<f64>>()
    });
    points.filter(|doses| cost(bath, aim, doses) < below).find(|doses| scan.holds(doses, 0.0))
}

/// Plain numbers decide on the grid, so the blend is asked without uncertainty.
fn without_uncertainty(bath: &Bath) -> Bath {
    let mut bath = bath.clone();
    let mut parts = bathwright::equilibrium::SystemParts::clone(&bath.system);
    parts.constants.iter_mut().for_each(|constant| constant.sigma_ln = 0.0);
    bath.system = parts.into();
    bath
}

type Case = (&'static str, &'static [(&'static str, f64)], [f64; 4]);

const PAIRS: [Case; 5] = [
    ("copper_strike.ron", &[("hedp-60", 80.0), ("citric-mono", 40.0)], [0.0, -0.3, 0.3, 0.6]),
    ("hard_water_cleaner.ron", &[("edta-na4-39", 10.0), ("mgda-na3-40", 20.0)], [0.0, -0.5, 0.5, -1.0]),
    ("hard_water_cleaner.ron", &[("na-gluconate", 40.0), ("nta-na3-40", 20.0)], [0.0, 0.4, -0.4, 0.8]),
    ("derusting.ron", &[("edta-na4-39", 80.0), ("hedta-na3-41", 80.0)], [0.0, -0.5, 0.5, 1.0]),
    ("electroless_nickel.ron", &[("lactic-88", 40.0), ("citric-mono", 20.0)], [0.0, -0.1, 0.1, 0.2]),
];

#[test]
fn no_blend_is_beaten_by_a_fine_grid_by_more_than_half_a_per_cent() {
    let (mut cases, mut none) = (0, 0);
    for (file, agents, decades) in PAIRS {
        for decades in decades {
            for aim in [Aim::Cheapest, Aim::Lightest] {
                let bath = without_uncertainty(&case(file, agents, decades));
                let name = format!("{file} {agents:?} {decades} {aim:?}");
                let found = blend(&bath, &[0, 1], aim).unwrap();
                cases += 1;
                let below = match &found {
                    Some(found) => {
                        assert!(Scan::new(&bath).holds(&found.doses, 1e-6), "{name}: {:?}", found.doses);
                        assert!((cost(&bath, aim, &found.doses) / found.per_litre - 1.0).abs() < 1e-12);
                        0.995 * found.per_litre
                    }
                    None => {
                        none += 1;
                        f64::INFINITY
                    }
                };
                let cheaper = cheaper_on_a_grid(&bath, aim, 50, below);
                assert_eq!(cheaper, None, "{name}: {found:?}");
            }
        }
    }
    assert!(cases == 40 && none < 10, "{cases} cases, {none} without a blend");
}

#[test]
fn a_blend_of_three_is_no_worse_than_a_grid_or_any_pair() {
    let agents = [("na-gluconate", 40.0), ("nta-na3-40", 20.0), ("edta-na4-39", 10.0)];
    for aim in [Aim::Cheapest, Aim::Lightest] {
        let bath = without_uncertainty(&case("hard_water_cleaner.ron", &agents, 0.0));
        let three = blend(&bath, &[0, 1, 2], aim).unwrap().expect("EDTA alone holds");
        for pair in [[0, 1], [0, 2], [1, 2]] {
            if let Some(two) = blend(&bath, &pair, aim).unwrap() {
                assert!(three.per_litre <= two.per_litre * 1.001, "{aim:?} {pair:?}");
            }
        }
        assert_eq!(cheaper_on_a_grid(&bath, aim, 16, 0.995 * three.per_litre), None, "{aim:?}");
    }
}

#[test]
fn a_blend_of_one_agent_is_the_dose_search() {
    for file in ["copper_strike.ron", "hard_water_cleaner.ron", "derusting.ron"] {
        let bath = Bath::resolve(&demo(file)).unwrap();
        let single = search(&bath, 0).unwrap().found.unwrap();
        let one = blend(&bath, &[0], Aim::Lightest).unwrap().unwrap();
        assert_eq!(one.hold, single.hold, "{file}");
        assert!((one.doses[0] / single.dose_g_l - 1.0).abs() < 2e-3, "{file}: {one:?} {single:?}");
    }
}

#[test]
fn a_blend_holds_with_confidence_where_it_says_so() {
    for (file, agents, _) in PAIRS {
        let bath = case(file, agents, 0.0);
        let Some(found) = blend(&bath, &[0, 1], Aim::Cheapest).unwrap() else { continue };
        let assessment = Assessor::new(&bath).unwrap().assess(&found.doses).unwrap();
        match found.hold {
            Hold::Sure => assert!(assessment.excess_95() <= 1e-6, "{file}: {}", assessment.excess_95()),
            _ => assert!(assessment.excess() <= 1e-6, "{file}: {}", assessment.excess()),
        }
    }
}

/// The shadow price of a wider window against the blend that the wider window really needs.
#[test]
fn a_worsening_costs_what_the_certificate_says() {
    let bath = Bath::resolve(&demo("copper_strike.ron")).unwrap();
    let base: Blend = blend(&bath, &[0], Aim::Lightest).unwrap().unwrap();
    let binding = &base.binding[0];
    assert!(binding.per_decade > 0.0);
    let (what, change): (&str, f64) = ("0.1 pH lower", -0.1);
    let said =
        binding.worsenings.iter().find(|worsening| worsening.what == what).expect("acid is the enemy").cost;
    let mut project = bath.project.clone();
    let range = bath.ph().unwrap();
    project.tank.ph = Range::new(range.low + change, range.set, range.high).into();
    let wider = Bath::resolve(&project).unwrap();
    let needed = blend(&wider, &[0], Aim::Lightest).unwrap().unwrap();
    let real = needed.per_litre - base.per_litre;
    // First order: the excess is curved in the dose and in pH.
    assert!((said / real - 1.0).abs() < 0.25, "said {said}, needed {real}");
}

#[test]
fn bounds_are_kept_and_what_is_missing_is_named() {
    let mut project = demo("hard_water_cleaner.ron");
    project.agents[1].min_g_l = 3.0;
    let bath = Bath::resolve(&project).unwrap();
    let found = blend(&bath, &[0, 1], Aim::Lightest).unwrap().unwrap();
    assert!(found.doses[1] >= 3.0);
    assert_eq!(blend(&bath, &[], Aim::Lightest), Err(BlendError::Count(0)));
    project.limits.clear();
    project.solids = bath
        .system
        .solids
        .iter()
        .map(|solid| bathwright::bath::SolidRule { solid: solid.token.clone(), rule: Rule::MayForm })
        .collect();
    let bath = Bath::resolve(&project).unwrap();
    assert_eq!(blend(&bath, &[0], Aim::Lightest), Err(BlendError::NoWall));
}

#[test]
fn a_floor_that_no_dose_can_reach_has_no_blend() {
    let mut project = demo("hard_water_cleaner.ron");
    project.contents.push(bathwright::bath::Content {
        what: "nickel".into(),
        amount: bathwright::quantity::Amount::parse("0 g/L").unwrap(),
        trust: bathwright::bath::Trust::Assumed,
        note: String::new(),
    });
    project.limits.push(bathwright::bath::Limit {
        metal: "nickel".into(),
        floor: Some(Level::P(6.0)),
        ..Default::default()
    });
    let bath = Bath::resolve(&project).unwrap();
    assert_eq!(blend(&bath, &[0, 1], Aim::Lightest).unwrap(), None);
    assert!(search(&bath, 0).unwrap().found.is_none());
}
