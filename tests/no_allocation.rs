//! A walk of neighbouring points allocates nothing, and neither does the iteration of a cold start.

mod common;

use bathwright::equilibrium::{Equilibrium, Problem, Solver};
use std::alloc::{GlobalAlloc, Layout, System};
use std::cell::Cell;

/// Counts the allocations of each thread.
struct Counting;

thread_local! {
    static COUNT: Cell<usize> = const { Cell::new(0) };
}

// SAFETY: every call is handed to the system's allocator unchanged; the counter is a plain thread-local number.
unsafe impl GlobalAlloc for Counting {
    unsafe fn alloc(&self, layout: Layout) -> *mut u8 {
        let _ = COUNT.try_with(|count| count.set(count.get() + 1));
        unsafe { System.alloc(layout) }
    }

    unsafe fn dealloc(&self, pointer: *mut u8, layout: Layout) {
        unsafe { System.dealloc(pointer, layout) }
    }

    unsafe fn realloc(&self, pointer: *mut u8, layout: Layout, size: usize) -> *mut u8 {
        let _ = COUNT.try_with(|count| count.set(count.get() + 1));
        unsafe { System.realloc(pointer, layout, size) }
    }
}

#[global_allocator]
static ALLOCATOR: Counting = Counting;

fn allocations(work: impl FnOnce()) -> usize {
    let before = COUNT.with(Cell::get);
    work();
    COUNT.with(Cell::get) - before
}

#[test]
fn the_counter_counts() {
    assert_eq!(allocations(|| drop(std::hint::black_box(vec![1u8; 64]))), 1);
}

#[test]
fn a_walk_of_neighbouring_points_allocates_nothing() {
    let mut walked = 0;
    for seed in 0..300 {
        let random = common::random_system(seed);
        let (mut solver, mut result) = (Solver::new(), Equilibrium::default());
        let mut totals = random.totals.clone();
        // The first points make room.
        if solver.solve_into(&random.problem(), &mut result).is_err()
            || result.solids.iter().any(|n| *n > 0.0)
        {
            continue;
        }
        let mut last = allocations(|| {});
        let mut still_without_solids = true;
        for step in 0..6 {
            totals.iter_mut().for_each(|total| *total *= 1.001);
            let problem = Problem { totals: &totals, ..random.problem() };
            let count = allocations(|| {
                let _ = solver.solve_into(&problem, &mut result);
            });
            still_without_solids &= result.solids.iter().all(|n| *n == 0.0);
            if step >= 3 {
                last += count;
            }
        }
        if still_without_solids {
            walked += 1;
            assert_eq!(last, 0, "seed {seed}");
        }
    }
    assert!(walked >= 150, "{walked}");
}

#[test]
fn a_cold_start_of_a_known_system_allocates_nothing() {
    let mut started = 0;
    for seed in 0..300 {
        let random = common::random_system(seed);
        let (mut solver, mut result) = (Solver::new(), Equilibrium::default());
        for _ in 0..3 {
            solver.reset();
            let _ = solver.solve_into(&random.problem(), &mut result);
        }
        if !result.certificate.holds() || result.solids.iter().any(|n| *n > 0.0) {
            continue;
        }
        started += 1;
        solver.reset();
        let count = allocations(|| {
            let _ = solver.solve_into(&random.problem(), &mut result);
        });
        assert_eq!(count, 0, "seed {seed}");
    }
    assert!(started >= 150, "{started}");
}
