//! The README is a promise: its example file solves as written.

use bathwright::bath::{Bath, Point, read};
use bathwright::equilibrium::Solver;

#[test]
fn the_project_file_of_the_readme_solves_to_its_own_constants() {
    let readme = include_str!("../README.md");
    let text =
        readme.split("```ron").nth(1).and_then(|rest| rest.split("```").next()).expect("an example file");
    let bath = Bath::resolve(&read(text, "README.md").unwrap()).unwrap();
    let constants = bath.constants_at(25.0);
    let solution = bath.solve(&mut Solver::new(), &constants, Point { ph: Some(7.0), doses: &[] }).unwrap();
    let of = |token: &str| solution.c[bath.system.species_index(token).unwrap()];
    let k = of("ML") / (of("M+2") * of("L-2"));
    assert!((k / 1e8 - 1.0).abs() < 1e-9, "{k}");
    assert!(solution.certificate.holds());
    assert!(solution.saturation_index(0) < 0.0);
}
