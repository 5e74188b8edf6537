//! Vectors of eight numbers, and the exponential on them: what the solver's inner loops are made of.
//!
//! Plain arrays with loops of fixed length: the compiler turns them into the widest instructions that the processor at
//! hand has, where they are inlined into [`pulp::Arch::dispatch`]. No fused operations are used, so that every processor
//! gives the same bits.

/// Eight numbers side by side.
pub(super) type Lane = [f64; WIDTH];
/// Numbers in a [`Lane`].
pub(super) const WIDTH: usize = 8;

/// A lane of zeros.
pub(super) const ZERO_LANE: Lane = [0.0; WIDTH];

/// Lanes that hold `count` numbers.
pub(super) fn lanes_for(count: usize) -> usize {
    count.div_ceil(WIDTH)
}

/// One number of a row of lanes.
#[inline(always)]
pub(super) fn at(lanes: &[Lane], index: usize) -> f64 {
    lanes[index / WIDTH][index % WIDTH]
}

/// Sets one number of a row of lanes.
#[inline(always)]
pub(super) fn put(lanes: &mut [Lane], index: usize, value: f64) {
    lanes[index / WIDTH][index % WIDTH] = value;
}

/// Sum of the numbers of a lane, in pairs.
#[inline(always)]
pub(super) fn total(lane: &Lane) -> f64 {
    ((lane[0] + lane[4]) + (lane[2] + lane[6])) + ((lane[1] + lane[5]) + (lane[3] + lane[7]))
}

/// `sum += factor · lane`, number by number.
#[inline(always)]
pub(super) fn add_scaled(sum: &mut Lane, factor: f64, lane: &Lane) {
    for l in 0..WIDTH {
        sum[l] += factor * lane[l];
    }
}

/// The larger of two numbers; the second where one is not a number. One instruction, which [`f64::max`] is not.
#[inline(always)]
pub(super) fn larger(a: f64, b: f64) -> f64 {
    if a > b { a } else { b }
}

const LN2_HIGH: f64 = 6.931_471_803_691_238e-1;
const LN2_LOW: f64 = 1.908_214_929_270_587_7e-10;
/// 1.5 · 2⁵²: adding it rounds a number to a whole one, which then stands in its lowest bits.
const ROUND: f64 = 6_755_399_441_055_744.0;
/// Above this the exponential is infinite.
const LARGEST: f64 = 709.7;
/// Below this it is no normal number any more, and counts as zero.
const SMALLEST: f64 = -708.3;

/// Reciprocal factorials from 1/13! down to 1/2!, the Taylor polynomial on |r| ≤ ½ ln 2: its remainder is 4e−18.
const TAYLOR: [f64; 12] = [
    1.0 / 6_227_020_800.0,
    1.0 / 479_001_600.0,
    1.0 / 39_916_800.0,
    1.0 / 3_628_800.0,
    1.0 / 362_880.0,
    1.0 / 40_320.0,
    1.0 / 5_040.0,
    1.0 / 720.0,
    1.0 / 120.0,
    1.0 / 24.0,
    1.0 / 6.0,
    1.0 / 2.0,
];

/// eˣ of each number within one unit in the last place; zero where it would be subnormal.
#[inline(always)]
pub(super) fn exp(x: &Lane) -> Lane {
    let (mut rest, mut scale) = (ZERO_LANE, ZERO_LANE);
    for l in 0..WIDTH {
        let clamped = if x[l] > LARGEST { LARGEST } else { x[l] };
        let clamped = if clamped < SMALLEST { SMALLEST } else { clamped };
        let rounded = clamped * std::f64::consts::LOG2_E + ROUND;
        let power = rounded - ROUND;
        rest[l] = (clamped - power * LN2_HIGH) - power * LN2_LOW;
        scale[l] = f64::from_bits(rounded.to_bits().wrapping_add(1023) << 52);
    }
    let mut tail = [TAYLOR[0]; WIDTH];
    for coefficient in &TAYLOR[1..] {
        for l in 0..WIDTH {
            tail[l] = tail[l] * rest[l] + coefficient;
        }
    }
    let mut result = ZERO_LANE;
    for l in 0..WIDTH {
        let value = (1.0 + (rest[l] + rest[l] * rest[l] * tail[l])) * scale[l];
        let value = if x[l] > LARGEST { f64::INFINITY } else { value };
        result[l] = if x[l] < SMALLEST { 0.0 } else { value };
    }
    result
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_exponential_is_within_two_units_in_the_last_place_over_the_whole_range() {
        let arch = pulp::Arch::new();
        for i in 0..200_000 {
            let x = -708.0 + 1417.0 * f64::from(i) / 200_000.0;
            let lane = arch.dispatch(|| exp(&[x; WIDTH]));
            let gap = (lane[3] - x.exp()).abs() / x.exp();
            assert!(gap <= 2.0 * f64::EPSILON, "{x}: {gap}");
        }
    }

    #[test]
    fn the_exponential_ends_in_zero_and_infinity() {
        assert_eq!(exp(&[-800.0, f64::NEG_INFINITY, 800.0, 0.0, 1.0, -1.0, 0.5, 2.0])[..4], [0.0, 0.0, f64::INFINITY, 1.0]);
        assert!(exp(&[f64::NAN; WIDTH])[0].is_nan());
    }
}
