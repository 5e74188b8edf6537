//! How much of the bath each rinse stage holds: the usual mass balance of rinsing (common practice).
//!
//! As much liquid leaves a stage with the work as came in with it. With D litres of drag-out and Q litres of water an
//! hour, stage i of a counterflow satisfies D·c(i−1) + Q·c(i+1) = (D + Q)·c(i), and a stage of its own
//! D·c(i−1) = (D + q)·c(i). Every solute obeys the same balance, so one number tells a stage: the share of bath in it.

use crate::bath::{Arrangement, Rinse};

/// Share of bath liquid in each stage, in the order of the work; the rest is fresh water.
pub fn shares(rinse: &Rinse) -> Vec<f64> {
    let n = rinse.stages.max(1) as i32;
    match rinse.arrangement {
        Arrangement::Counterflow => {
            let ratio = rinse.flow_l_h / rinse.drag_out_l_h;
            // c(i)/c(0) = S(n + 1 − i)/S(n + 1) with the geometric sum S(k) = 1 + R + … + R^(k−1).
            let sum = |k: i32| (0..k).map(|m| ratio.powi(m)).sum::<f64>();
            (1..=n).map(|i| sum(n + 1 - i) / sum(n + 1)).collect()
        }
        Arrangement::Separate => {
            let own = rinse.flow_l_h / f64::from(n);
            let step = rinse.drag_out_l_h / (rinse.drag_out_l_h + own);
            (1..=n).map(|i| step.powi(i)).collect()
        }
    }
}

/// Share of bath liquid in the waste water of all stages together.
pub fn waste_share(rinse: &Rinse) -> f64 {
    let shares = shares(rinse);
    match rinse.arrangement {
        Arrangement::Counterflow => shares[0],
        Arrangement::Separate => shares.iter().sum::<f64>() / shares.len() as f64,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn rinse(arrangement: Arrangement, stages: u32, drag_out: f64, flow: f64) -> Rinse {
        Rinse { arrangement, stages, drag_out_l_h: drag_out, flow_l_h: flow, ..Rinse::default() }
    }

    #[test]
    fn every_stage_closes_its_own_balance() {
        for ratio in [0.5, 1.0, 7.0, 75.0] {
            let rinse = rinse(Arrangement::Counterflow, 3, 2.0, 2.0 * ratio);
            let mut line = vec![1.0];
            line.extend(shares(&rinse));
            line.push(0.0);
            for i in 1..=3 {
                let balance = line[i - 1] + ratio * line[i + 1] - (1.0 + ratio) * line[i];
                assert!(balance.abs() < 1e-12, "ratio {ratio}, stage {i}: {balance}");
            }
        }
    }

    #[test]
    fn what_leaves_with_waste_water_and_work_is_what_the_work_brought() {
        for arrangement in [Arrangement::Counterflow, Arrangement::Separate] {
            let rinse = rinse(arrangement, 3, 4.0, 300.0);
            let last = *shares(&rinse).last().unwrap();
            let leaving = 300.0 * waste_share(&rinse) + 4.0 * last;
            assert!((leaving - 4.0).abs() < 1e-12, "{arrangement:?}: {leaving}");
        }
    }

    /// Common practice: two counterflow stages rinse like one with the square of the ratio.
    #[test]
    fn one_counterflow_stage_dilutes_by_the_ratio_and_two_by_its_square() {
        let one = shares(&rinse(Arrangement::Counterflow, 1, 1.0, 99.0));
        assert!((one[0] - 0.01).abs() < 1e-12);
        let two = shares(&rinse(Arrangement::Counterflow, 2, 1.0, 99.0));
        assert!((two[1] * 99.0 * 99.0 - 1.0).abs() < 0.02, "{two:?}");
    }
}
