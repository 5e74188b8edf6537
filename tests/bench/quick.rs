mod systems;
use bathwright::equilibrium::Solver;
use std::time::Instant;
fn main() {
    let only: Option<usize> = std::env::var("ONLY").ok().and_then(|n| n.parse().ok());
    for (m, n) in
        [(8usize, 80usize), (12, 150), (20, 400)].into_iter().filter(|(m, _)| only.is_none_or(|o| o == *m))
    {
        let count = 400;
        let cases: Vec<_> = (0..count).map(|s| systems::random_case(m, n, s)).collect();
        let mut times: Vec<(f64, usize, u64)> = Vec::new();
        let mut failed = 0;
        let mut solver = Solver::new();
        let all = Instant::now();
        for (s, case) in cases.iter().enumerate() {
            let problem = case.problem();
            solver.reset();
            let _ = solver.solve(&problem);
            let start = Instant::now();
            let mut iterations = 0;
            for _ in 0..20 {
                solver.reset();
                match solver.solve(&problem) {
                    Ok(r) => iterations = r.certificate.iterations,
                    Err(_) => failed += 1,
                }
            }
            times.push((start.elapsed().as_secs_f64() / 20.0 * 1e6, iterations, s as u64));
        }
        let total = all.elapsed().as_secs_f64() / 21.0 / count as f64 * 1e6;
        times.sort_by(|a, b| a.0.total_cmp(&b.0));
        let q = |f: f64| times[((times.len() - 1) as f64 * f) as usize];
        println!(
            "{m}x{n}: mean {total:.1} µs failed {failed} min {:?} q25 {:?} med {:?} q75 {:?} q90 {:?} max {:?}",
            q(0.0),
            q(0.25),
            q(0.5),
            q(0.75),
            q(0.9),
            q(1.0)
        );
        // warm walk
        let mut wt = 0.0;
        let mut wn = 0;
        for case in cases.iter().take(100) {
            let mut totals = case.totals.clone();
            solver.reset();
            let mut p = case.problem();
            p.totals = &totals;
            if solver.solve(&p).is_err() {
                continue;
            }
            for _ in 0..40 {
                totals[1] *= 1.02;
                totals[m - 1] *= 0.99;
                let mut p = case.problem();
                p.totals = &totals;
                let start = Instant::now();
                let r = solver.solve(&p);
                wt += start.elapsed().as_secs_f64();
                wn += 1;
                if r.is_err() {
                    println!("warm failure");
                }
            }
        }
        println!("   warm mean {:.2} µs", wt / wn as f64 * 1e6);
    }
}
