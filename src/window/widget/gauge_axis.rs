//! The pM axis of a gauge: which stretch of pM it shows, and where a pM stands on it. Top is the lower number.

use eframe::egui;
use std::ops::RangeInclusive;

use eframe::egui::Rangef;

use super::ticks::nice_step;
use super::{Gauge, Ticks, ticks};

/// Ticks on a gauge, at most.
const MOST_TICKS: usize = 6;
/// The least an axis shows: closer, and the last digit of a constant would look like a hill.
const LEAST_SPAN: f64 = 1.0;

/// A pM axis on the screen.
#[derive(Clone, Debug)]
pub(super) struct GaugeAxis {
    top: f64,
    bottom: f64,
    screen: Rangef,
}

impl GaugeAxis {
    pub(super) fn new(gauge: &Gauge<'_>, screen: Rangef) -> Self {
        let range = gauge.axis.clone().unwrap_or_else(|| fitted(gauge));
        Self { top: *range.start(), bottom: *range.end(), screen }
    }

    /// Height of a pM, held inside the well.
    pub(super) fn y(&self, pm: f64) -> f32 {
        let part = ((pm - self.top) / (self.bottom - self.top)).clamp(0.0, 1.0);
        egui::lerp(self.screen, part as f32)
    }

    pub(super) fn ticks(&self) -> Ticks {
        ticks(self.top, self.bottom, MOST_TICKS)
    }

    pub(super) fn shows(&self, pm: f64) -> bool {
        (self.top..=self.bottom).contains(&pm)
    }
}

/// Everything the gauge has to show, with room for a plate behind each limit, out to round numbers.
fn fitted(gauge: &Gauge<'_>) -> RangeInclusive<f64> {
    let (mut low, mut high) =
        gauge.numbers().fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), n| (low.min(n), high.max(n)));
    if low > high {
        return 0.0..=LEAST_SPAN;
    }
    let spare = (LEAST_SPAN - (high - low)).max(0.0) / 2.0;
    (low, high) = (low - spare, high + spare);
    let margin = 0.12 * (high - low);
    let step = nice_step(high - low + 2.0 * margin, MOST_TICKS) / 2.0;
    let top = ((low - margin) / step).floor() * step;
    let bottom = ((high + margin) / step).ceil() * step;
    top..=bottom
}

#[cfg(test)]
mod tests {
    use super::*;

    fn gauge(ceiling: f64, worst: f64, least: f64) -> Gauge<'static> {
        Gauge { ceiling: Some(ceiling), worst, least, set: worst, ..Gauge::default() }
    }

    #[test]
    fn less_pm_is_higher_up() {
        let axis = GaugeAxis::new(&gauge(10.8, 11.0, 12.0), Rangef::new(100.0, 300.0));
        assert!(axis.y(10.8) < axis.y(11.0));
        assert_eq!(axis.y(-5.0), 100.0);
        assert_eq!(axis.y(99.0), 300.0);
    }

    #[test]
    fn the_axis_leaves_room_for_the_plate_above_the_ceiling() {
        for (ceiling, worst, least) in [(10.8, 11.0, 12.0), (24.9, 26.8, 29.0), (3.0, 3.01, 3.02)] {
            let range = fitted(&gauge(ceiling, worst, least));
            let span = range.end() - range.start();
            assert!(ceiling - range.start() > 0.05 * span, "{range:?}");
            assert!(*range.end() > least && span >= LEAST_SPAN, "{range:?}");
        }
    }

    #[test]
    fn a_gauge_without_numbers_still_has_an_axis() {
        assert_eq!(fitted(&Gauge::default()), 0.0..=1.0);
    }
}
