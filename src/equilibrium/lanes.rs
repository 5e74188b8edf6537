//! Vectors of eight numbers, and the exponential on them: what the solver's inner loops are made of.
//!
//! Sums and products are written for the vectors of [`pulp::Simd`], which become the widest instructions that the
//! processor at hand has where they are inlined into [`pulp::Arch::dispatch`]; number-by-number loops over one lane the
//! compiler turns into them by itself.

use pulp::Simd;

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

/// Lanes as vectors of the processor.
#[inline(always)]
fn vectors<S: Simd>(lanes: &[Lane]) -> &[S::f64s] {
    S::as_simd_f64s(lanes.as_flattened()).0
}

#[inline(always)]
fn vectors_mut<S: Simd>(lanes: &mut [Lane]) -> &mut [S::f64s] {
    S::as_mut_simd_f64s(lanes.as_flattened_mut()).0
}

/// `sum += factor · lane`.
#[inline(always)]
pub(super) fn add_scaled<S: Simd>(simd: S, sum: &mut [Lane], factor: f64, lanes: &[Lane]) {
    let factor = simd.splat_f64s(factor);
    for (sum, lane) in vectors_mut::<S>(sum).iter_mut().zip(vectors::<S>(lanes)) {
        *sum = simd.mul_add_e_f64s(factor, *lane, *sum);
    }
}

/// `to = a · b`, number by number.
#[inline(always)]
pub(super) fn multiply<S: Simd>(simd: S, to: &mut [Lane], a: &[Lane], b: &[Lane]) {
    for (to, (a, b)) in vectors_mut::<S>(to).iter_mut().zip(vectors::<S>(a).iter().zip(vectors::<S>(b))) {
        *to = simd.mul_f64s(*a, *b);
    }
}

/// Σ a · b over the given lanes.
#[inline(always)]
pub(super) fn dot<S: Simd>(simd: S, a: &[Lane], b: &[Lane], over: impl Iterator<Item = usize>) -> f64 {
    let mut sum = simd.splat_f64s(0.0);
    for q in over {
        for (a, b) in vectors::<S>(&a[q..=q]).iter().zip(vectors::<S>(&b[q..=q])) {
            sum = simd.mul_add_e_f64s(*a, *b, sum);
        }
    }
    simd.reduce_sum_f64s(sum)
}

/// The positive and the negative part of Σ a · b over the given lanes, both as magnitudes.
#[inline(always)]
pub(super) fn both_sides<S: Simd>(
    simd: S,
    a: &[Lane],
    b: &[Lane],
    over: impl Iterator<Item = usize>,
) -> (f64, f64) {
    let zero = simd.splat_f64s(0.0);
    let (mut plus, mut minus) = (zero, zero);
    for q in over {
        for (a, b) in vectors::<S>(&a[q..=q]).iter().zip(vectors::<S>(&b[q..=q])) {
            let part = simd.mul_f64s(*a, *b);
            plus = simd.add_f64s(plus, simd.max_f64s(part, zero));
            minus = simd.sub_f64s(minus, simd.min_f64s(part, zero));
        }
    }
    (simd.reduce_sum_f64s(plus), simd.reduce_sum_f64s(minus))
}

/// `to −= across · factor`; what is left of a number by rounding alone becomes zero.
#[inline(always)]
pub(super) fn eliminate<S: Simd>(simd: S, to: &mut [Lane], across: f64, factor: &[Lane], rounding: f64) {
    let (across, rounding) = (simd.splat_f64s(across), simd.splat_f64s(rounding));
    for (to, factor) in vectors_mut::<S>(to).iter_mut().zip(vectors::<S>(factor)) {
        let value = simd.sub_f64s(*to, simd.mul_f64s(*factor, across));
        let least = simd.mul_f64s(rounding, simd.abs_f64s(*to));
        let kept = simd.greater_than_or_equal_f64s(simd.abs_f64s(value), least);
        *to = simd.select_f64s(kept, value, simd.splat_f64s(0.0));
    }
}

/// `lanes /= divisor`.
#[inline(always)]
pub(super) fn divide<S: Simd>(simd: S, lanes: &mut [Lane], divisor: f64) {
    let divisor = simd.splat_f64s(divisor);
    for value in vectors_mut::<S>(lanes) {
        *value = simd.div_f64s(*value, divisor);
    }
}

/// The largest number of all, at least the given one.
#[inline(always)]
pub(super) fn largest<S: Simd>(simd: S, lanes: &[Lane], least: f64) -> f64 {
    let mut highest = simd.splat_f64s(least);
    for value in vectors::<S>(lanes) {
        highest = simd.max_f64s(highest, *value);
    }
    simd.reduce_max_f64s(highest)
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

/// eˣ of each number within two units in the last place; zero where it would be subnormal.
#[inline(always)]
pub(super) fn exp<S: Simd>(simd: S, x: &[Lane], to: &mut [Lane]) {
    for (x, to) in x.iter().zip(&mut *to) {
        let mut scale = ZERO_LANE;
        for l in 0..WIDTH {
            let clamped = if x[l] > LARGEST { LARGEST } else { x[l] };
            let clamped = if clamped < SMALLEST { SMALLEST } else { clamped };
            let rounded = clamped * std::f64::consts::LOG2_E + ROUND;
            scale[l] = f64::from_bits(rounded.to_bits().wrapping_add(1023) << 52);
        }
        *to = scale;
    }
    let (smallest, largest) = (simd.splat_f64s(SMALLEST), simd.splat_f64s(LARGEST));
    let (zero, infinity) = (simd.splat_f64s(0.0), simd.splat_f64s(f64::INFINITY));
    let (round, one) = (simd.splat_f64s(ROUND), simd.splat_f64s(1.0));
    let per_power = simd.splat_f64s(std::f64::consts::LOG2_E);
    let (high, low) = (simd.splat_f64s(-LN2_HIGH), simd.splat_f64s(-LN2_LOW));
    let taylor = TAYLOR.map(|coefficient| simd.splat_f64s(coefficient));
    for (&x, to) in vectors::<S>(x).iter().zip(vectors_mut::<S>(to)) {
        let clamped = simd.max_f64s(simd.min_f64s(x, largest), smallest);
        let rounded = simd.add_f64s(simd.mul_f64s(clamped, per_power), round);
        let power = simd.sub_f64s(rounded, round);
        let rest = simd.mul_add_e_f64s(power, low, simd.mul_add_e_f64s(power, high, clamped));
        // Pairs of terms at once, so that the processor has more than one chain to work on.
        let square = simd.mul_f64s(rest, rest);
        let pair = |i: usize| simd.mul_add_e_f64s(taylor[i], rest, taylor[i + 1]);
        let mut tail = pair(0);
        for i in [2, 4, 6, 8, 10] {
            tail = simd.mul_add_e_f64s(tail, square, pair(i));
        }
        let value = simd.add_f64s(one, simd.mul_add_e_f64s(tail, square, rest));
        let value = simd.mul_f64s(value, *to);
        let value = simd.select_f64s(simd.greater_than_f64s(x, largest), infinity, value);
        let value = simd.select_f64s(simd.less_than_f64s(x, smallest), zero, value);
        // A number that is none stays none.
        *to = simd.select_f64s(simd.equal_f64s(x, x), value, x);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    struct Exponential(Lane);

    impl pulp::WithSimd for Exponential {
        type Output = Lane;

        #[inline(always)]
        fn with_simd<S: Simd>(self, simd: S) -> Lane {
            let mut to = [ZERO_LANE];
            exp(simd, &[self.0], &mut to);
            to[0]
        }
    }

    fn exponential(x: Lane) -> Lane {
        let plain = pulp::Scalar::new().vectorize(Exponential(x));
        let wide = pulp::Arch::new().dispatch(Exponential(x));
        for (plain, wide) in plain.iter().zip(&wide) {
            assert!(
                plain == wide || (plain - wide).abs() <= 4e-16 * wide || plain.is_nan(),
                "{plain} {wide}"
            );
        }
        wide
    }

    #[test]
    fn the_exponential_is_within_two_units_in_the_last_place_over_the_whole_range() {
        for i in 0..200_000 {
            let x = -708.0 + 1417.0 * f64::from(i) / 200_000.0;
            let lane = exponential([x; WIDTH]);
            let gap = (lane[3] - x.exp()).abs() / x.exp();
            assert!(gap <= 2.0 * f64::EPSILON, "{x}: {gap}");
        }
    }

    #[test]
    fn the_exponential_ends_in_zero_and_infinity() {
        assert_eq!(
            exponential([-800.0, f64::NEG_INFINITY, 800.0, 0.0, 1.0, -1.0, 0.5, 2.0])[..4],
            [0.0, 0.0, f64::INFINITY, 1.0]
        );
        assert!(exponential([f64::NAN; WIDTH])[0].is_nan());
    }
}
