//! The uncertainty of a dose by sampling: every published constant drawn from its own distribution, the bath solved anew for
//! each draw. Slower than first order, and right where the response is not straight.

use super::assess::Assessor;
use super::places::Place;
use crate::bath::{Bath, Points, Solids, Wall};
use crate::equilibrium::{Constants, Equilibrium, EquilibriumError};

/// What draws of the constants say about a dose, at the place of the operating window that is worst with confidence.
#[derive(Clone, Debug, PartialEq)]
pub struct Sampled {
    /// The wall that is nearest with confidence.
    pub wall: Wall,
    /// Draws of all constants.
    pub draws: usize,
    /// Draws in which every wall holds there.
    pub holding: usize,
    /// Median of the excess (log10) over the wall.
    pub median: f64,
    /// Its 95 % quantile: the excess that 19 of 20 draws stay under.
    pub excess_95: f64,
    /// The same by first order.
    pub first_order_95: f64,
}

/// Draws that one thread works off.
const THREADS: usize = 2;

/// Draws all constants so many times for doses in g/L; the same seed gives the same answer. `None` without walls.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn sample(
    bath: &Bath,
    doses: &[f64],
    draws: usize,
    seed: u64,
) -> Result<Option<Sampled>, EquilibriumError> {
    let mut assessor = Assessor::new(bath)?;
    let dosed = assessor.places.dose(doses)?;
    let worst = assessor.worst(&dosed)?;
    let nearest = (0..worst.len()).max_by(|&a, &b| worst[a].excess_95.total_cmp(&worst[b].excess_95));
    let Some(nearest) = nearest else { return Ok(None) };
    let (wall, place) = (assessor.walls[nearest], worst[nearest].sure);
    let totals = assessor.places.totals(&dosed, &place);
    let walls = &assessor.walls;
    let shares = (0..THREADS).map(|i| draws * (i + 1) / THREADS - draws * i / THREADS);
    let parts: Vec<Result<Vec<(f64, bool)>, EquilibriumError>> = std::thread::scope(|scope| {
        let workers: Vec<_> = shares
            .enumerate()
            .map(|(number, share)| {
                let (totals, place) = (&totals, &place);
                let seed = seed.wrapping_add(number as u64);
                scope.spawn(move || part(bath, (wall, walls), (totals, place), share, seed))
            })
            .collect();
        workers
            .into_iter()
            .map(|worker| worker.join().unwrap_or_else(|panic| std::panic::resume_unwind(panic)))
            .collect()
    });
    let mut found = Vec::with_capacity(draws);
    for part in parts {
        found.extend(part?);
    }
    let holding = found.iter().filter(|(_, holds)| *holds).count();
    let mut excesses: Vec<f64> = found.into_iter().map(|(excess, _)| excess).collect();
    excesses.sort_by(f64::total_cmp);
    let quantile = |share: f64| {
        let at = ((excesses.len() as f64 * share) as usize).min(excesses.len().saturating_sub(1));
        excesses.get(at).copied().unwrap_or(f64::NAN)
    };
    Ok(Some(Sampled {
        wall,
        draws,
        holding,
        median: quantile(0.5),
        excess_95: quantile(0.95),
        first_order_95: worst[nearest].excess_95,
    }))
}

/// Excess over the wall, and whether all walls hold, for each draw.
fn part(
    bath: &Bath,
    (wall, walls): (Wall, &[Wall]),
    (totals, place): (&[f64], &Place),
    draws: usize,
    seed: u64,
) -> Result<Vec<(f64, bool)>, EquilibriumError> {
    let constants = bath.constants_at(place.temperature_c);
    let mut drawn = constants.clone();
    let mut points = Points::new(bath, Solids::Walls);
    let mut solution = Equilibrium::default();
    let mut dice = fastrand::Rng::with_seed(seed);
    let mut shifts = vec![0.0; bath.system.constants.len()];
    let mut found = Vec::with_capacity(draws);
    for _ in 0..draws {
        draw(bath, &mut dice, &mut shifts);
        shift(bath, &constants, &shifts, &mut drawn);
        points.solve_into(&drawn, totals, place.ph, &mut solution)?;
        let excess = |wall: Wall| bath.excess(wall, &solution, place.temperature_c);
        found.push((excess(wall), walls.iter().all(|wall| excess(*wall) <= 0.0)));
    }
    Ok(found)
}

/// A normal shift of each constant, two at a time (Box and Muller 1958).
fn draw(bath: &Bath, dice: &mut fastrand::Rng, shifts: &mut [f64]) {
    let mut spare = None;
    for (shift, constant) in shifts.iter_mut().zip(&bath.system.constants) {
        let normal = spare.take().unwrap_or_else(|| {
            let radius = (-2.0 * (1.0 - dice.f64()).ln()).sqrt();
            let (sine, cosine) = (std::f64::consts::TAU * dice.f64()).sin_cos();
            spare = Some(radius * sine);
            radius * cosine
        });
        *shift = constant.sigma_ln * normal;
    }
}

/// Constants moved by shifts of the published ones, each in all the species, solids and gases whose chain it stands in.
fn shift(bath: &Bath, constants: &Constants, shifts: &[f64], drawn: &mut Constants) {
    let along = |chain: &[(usize, f64)]| chain.iter().map(|&(i, count)| count * shifts[i]).sum::<f64>();
    let system = &bath.system;
    for ((drawn, known), entry) in drawn.ln_beta.iter_mut().zip(&constants.ln_beta).zip(&system.species) {
        *drawn = known + along(&entry.chain);
    }
    for ((drawn, known), entry) in drawn.ln_ks.iter_mut().zip(&constants.ln_ks).zip(&system.solids) {
        *drawn = known + along(&entry.chain);
    }
    for ((drawn, known), entry) in drawn.ln_kg.iter_mut().zip(&constants.ln_kg).zip(&system.gases) {
        *drawn = known + along(&entry.chain);
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bath::Demo;

    fn demo(file: &str) -> Bath {
        Bath::resolve(&Demo::named(file).unwrap().project().unwrap()).unwrap()
    }

    /// 4,000 draws place a 95 % quantile to about ±0.035 σ; the response is nearly straight here.
    #[test]
    fn sampling_agrees_with_first_order_where_the_response_is_straight() {
        let bath = demo("copper_strike.ron");
        let mut doses = bath.doses();
        doses[0] = 40.0;
        let sampled = sample(&bath, &doses, 4000, 1).unwrap().unwrap();
        let sigma = (sampled.first_order_95 - sampled.median) / 1.645;
        assert!((sampled.excess_95 - sampled.first_order_95).abs() < 0.15 * sigma, "{sampled:?}");
    }

    #[test]
    fn the_same_seed_gives_the_same_answer_and_another_nearly_the_same() {
        let bath = demo("hard_water_cleaner.ron");
        let mut doses = bath.doses();
        doses[0] = 3.0;
        let of = |seed| sample(&bath, &doses, 2000, seed).unwrap().unwrap();
        assert_eq!(of(7), of(7));
        assert!(of(7) != of(8) && (of(7).excess_95 - of(8).excess_95).abs() < 0.05);
    }
}
