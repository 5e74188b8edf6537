//! The highest point of a function between two values, and the crossing of zero.

/// Golden-section steps: the bracket shrinks to a thousandth.
const GOLDEN_STEPS: usize = 14;
/// Steps of a crossing; a safeguarded secant needs about eight.
const CROSSING_STEPS: usize = 60;

/// Place and height of the highest value met by a golden-section search between `low` and `high`.
///
/// # Errors
/// The first error of `at`.
pub(super) fn highest<E>(
    low: f64,
    high: f64,
    mut at: impl FnMut(f64) -> Result<f64, E>,
) -> Result<(f64, f64), E> {
    let ratio = 0.5 * (5f64.sqrt() - 1.0);
    let (mut a, mut b) = (low, high);
    let (mut left, mut right) = (b - ratio * (b - a), a + ratio * (b - a));
    let (mut f_left, mut f_right) = (at(left)?, at(right)?);
    for _ in 0..GOLDEN_STEPS {
        if f_left > f_right {
            (b, right, f_right) = (right, left, f_left);
            left = b - ratio * (b - a);
            f_left = at(left)?;
        } else {
            (a, left, f_left) = (left, right, f_right);
            right = a + ratio * (b - a);
            f_right = at(right)?;
        }
    }
    Ok(if f_left > f_right { (left, f_left) } else { (right, f_right) })
}

/// The two sides of a crossing of zero, `(x, f)` with f ≤ 0 first, closer than `width`; regula falsi with the weight of a
/// stuck end halved, and a bisection wherever that does not halve the bracket within three steps.
///
/// # Errors
/// The first error of `at`.
pub(super) fn crossing<E>(
    holds: (f64, f64),
    fails: (f64, f64),
    width: f64,
    mut at: impl FnMut(f64) -> Result<f64, E>,
) -> Result<[f64; 2], E> {
    let ((mut h, mut f_h), (mut c, mut f_c)) = (holds, fails);
    let (mut last, mut since, mut size) = (0, 0, (h - c).abs());
    for step in 0..CROSSING_STEPS {
        if (h - c).abs() <= width {
            break;
        }
        since += 1;
        let bisect = step % 2 == 1 && since >= 3 && (h - c).abs() > 0.5 * size;
        if (h - c).abs() <= 0.5 * size {
            (since, size) = (0, (h - c).abs());
        }
        let secant = (h * f_c - c * f_h) / (f_c - f_h);
        // Aim a little beyond the root, so that both ends close in on it.
        let ahead = 0.4 * width * (h - c).signum();
        let inside = secant.is_finite() && (secant - h) * (secant - c) < 0.0;
        let x = if bisect || !inside { 0.5 * (h + c) } else { secant + ahead };
        let x = if (x - h) * (x - c) < 0.0 { x } else { 0.5 * (h + c) };
        let f = at(x)?;
        if f <= 0.0 {
            (h, f_h) = (x, f);
            f_c *= if last == 1 { 0.5 } else { 1.0 };
            last = 1;
        } else {
            (c, f_c) = (x, f);
            f_h *= if last == -1 { 0.5 } else { 1.0 };
            last = -1;
        }
    }
    Ok([h, c])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_crossing_is_enclosed_from_both_sides() {
        for power in [1, 3, 9] {
            let mut calls = 0;
            let f = |x: f64| x.powi(power) - 0.3f64.powi(power);
            let [h, c] = crossing((0.0, f(0.0)), (1.0, f(1.0)), 1e-10, |x| {
                calls += 1;
                Ok::<f64, ()>(f(x))
            })
            .unwrap();
            assert!(f(h) <= 0.0 && f(c) > 0.0 && (h - c).abs() <= 1e-10, "{power}: {h} {c}");
            assert!(calls < 40, "{power}: {calls}");
        }
    }

    #[test]
    fn the_highest_point_is_found_inside() {
        let (x, f) = highest(0.0, 2.0, |x: f64| Ok::<f64, ()>(-(x - 0.7).powi(2))).unwrap();
        assert!((x - 0.7).abs() < 2e-3 && f > -1e-5);
    }
}
