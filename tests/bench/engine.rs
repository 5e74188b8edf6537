//! Times of the solver and of what is drawn with it: `cargo bench --bench engine`.

mod systems;

use bathwright::bath::{Bath, Demo};
use bathwright::equilibrium::{Equilibrium, Problem, Sensitivities, Solver, Value};
use bathwright::study::{Axis, Basis, diagram};
use criterion::{BatchSize, Criterion, criterion_group, criterion_main};
use std::hint::black_box;
use systems::random_case;

fn cold_and_warm(criterion: &mut Criterion) {
    for (components, species) in [(8, 80), (12, 150), (20, 400)] {
        let cases: Vec<_> = (0..100).map(|seed| random_case(components, species, seed)).collect();
        let mut solvers = vec![Solver::new(); cases.len()];
        let (mut solver, mut result) = (Solver::new(), Equilibrium::default());
        let mut turn = 0;
        criterion.bench_function(&format!("cold {components} x {species}"), |bencher| {
            bencher.iter(|| {
                turn = (turn + 1) % cases.len();
                solvers[turn].reset();
                let _ = black_box(solvers[turn].solve_into(&cases[turn].problem(), &mut result));
            });
        });
        let case = &cases[0];
        let mut totals = case.totals.clone();
        let mut up = true;
        criterion.bench_function(&format!("warm {components} x {species}"), |bencher| {
            bencher.iter(|| {
                up = if totals[1] > 1.5 * case.totals[1] { false } else { up || totals[1] < case.totals[1] };
                totals[1] *= if up { 1.02 } else { 1.0 / 1.02 };
                let problem = Problem { totals: &totals, ..case.problem() };
                let _ = black_box(solver.solve_into(&problem, &mut result));
            });
        });
    }
}

fn uncertainty(criterion: &mut Criterion) {
    let project =
        Demo::named("electroless_nickel.ron").expect("a demo bath").project().expect("demo baths read");
    let bath = Bath::resolve(&project).expect("demo baths resolve");
    let constants = bath.constants_at(bath.project.tank.temperature_c.set);
    let mut solver = Solver::new();
    let totals = bath.totals(&bath.doses());
    let held: Vec<Option<f64>> = (0..bath.system.components.len())
        .map(|i| (bath.system.proton == Some(i)).then_some(-5.0 * bathwright::equilibrium::LN_10))
        .collect();
    let may_form = vec![false; bath.system.solids.len()];
    let problem = Problem {
        system: &bath.system,
        constants: &constants,
        totals: &totals,
        held: &held,
        may_form: &may_form,
        open_to: &[],
        counter_ion: true,
    };
    let solution = solver.solve(&problem).expect("demo baths solve");
    let metal = bath.limits[0].component;
    criterion.bench_function("uncertainty of a demo bath", |bencher| {
        bencher.iter_batched(
            || (),
            |()| {
                Sensitivities::new(problem, &solution)
                    .map(|answers| answers.sigma_log10(&[Value::Free(metal)]))
            },
            BatchSize::SmallInput,
        );
    });
}

fn four_hundred_points(criterion: &mut Criterion) {
    let project =
        Demo::named("hard_water_cleaner.ron").expect("a demo bath").project().expect("demo baths read");
    let bath = Bath::resolve(&project).expect("demo baths resolve");
    let basis = Basis(bath.limits[0].component);
    criterion.bench_function("diagram of 400 points of a demo bath", |bencher| {
        bencher.iter(|| black_box(diagram(&bath, Axis::Ph { from: 6.0, to: 13.0 }, basis, 400)));
    });
}

criterion_group!(benches, cold_and_warm, uncertainty, four_hundred_points);
criterion_main!(benches);
