//! The plan of top-ups that holds a bath through its shifts.
//!
//! A top-up comes at the last step before a wall would be crossed: later is too late, and sooner wears and drags out
//! more of it. For the fewest additions it is as large as keeps the bath longest; for the least agent it is as small
//! as the next step asks. Where one addition under its cap is not enough, those before it begin sooner. Where no
//! addition helps, some of the bath has to go.

use super::bail_out::{BailOut, bail_out};
use super::forecast::{Forecast, replay};
use super::planner::{Mixture, Planner};
use super::stirred::Contents;
use super::walk::Change;
use crate::bath::{Adjustment, Replenish, Running};
use crate::dosing::{Direction, Measured, addition_cap, measure, plan};
use crate::equilibrium::EquilibriumError;

/// Sizes of a top-up that are compared.
const SIZES: usize = 10;
/// Bisections between two of them.
const BISECTIONS: usize = 10;
/// Most bail-outs of one plan.
const MOST_BAIL_OUTS: usize = 100;

/// One addition of agent.
#[derive(Clone, Debug, PartialEq)]
pub struct TopUp {
    /// Running hours from the beginning.
    pub hour: f64,
    /// Number of the step.
    pub step: usize,
    /// The amount for the tank.
    pub measured: Measured,
    /// The dose as measured out, g of product per litre of bath.
    pub dose_g_l: f64,
    /// Part of the agent in the bath that it brings.
    pub share: f64,
    /// Acid or alkali that brings the pH back, with its amount for the tank.
    pub adjustment: Option<(Adjustment, Measured)>,
}

/// What to do so that the bath holds.
#[derive(Clone, Debug, PartialEq)]
pub struct TopUpPlan {
    /// Number of the agent.
    pub agent: usize,
    /// Whether it holds with 95 % confidence, or by plain numbers only.
    pub sure: bool,
    /// The additions, in order.
    pub top_ups: Vec<TopUp>,
    /// Where some of the bath has to go.
    pub bail_outs: Vec<BailOut>,
    /// Hour from which nothing that was tried holds.
    pub fails_from: Option<f64>,
    /// Why nothing may be added: an acid into a bath that may hold cyanide, sulfide or hypochlorite.
    pub refused: Option<String>,
    /// Why the pH is not brought back.
    pub uncorrected: Option<String>,
    /// The forecast with everything done.
    pub forecast: Forecast,
}

impl TopUpPlan {
    /// Kilograms of the product in all top-ups.
    pub fn total_kg(&self) -> f64 {
        self.top_ups.iter().fold(0.0, |sum, top_up| sum + top_up.measured.rounded_kg)
    }
}

/// Plans the top-ups of one agent of the bath, by its number.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn plan_top_ups(
    running: &Running,
    agent: usize,
    replenish: Replenish,
    sure: bool,
) -> Result<TopUpPlan, EquilibriumError> {
    let mut planner = Planner::new(running, agent, sure)?;
    let mut plan = Steps::default();
    let (mut frozen, mut from) = (0, 0);
    let fails_from = loop {
        let Some(late) = planner.first_crossed(from, &plan.changes())? else { break None };
        if let Some((better, first)) = planner.hold_through(&plan, late, frozen, replenish)? {
            plan = better;
            from = first;
            continue;
        }
        planner.forget_after(frozen);
        let step = late.saturating_sub(1).max(frozen);
        let hour = late as f64 * running.step_h;
        if plan.bail_outs.len() >= MOST_BAIL_OUTS || plan.bail_outs.iter().any(|known| known.step == step) {
            break Some(hour);
        }
        let Some(found) = bail_out(&mut planner, &plan.changes(), step, late)? else { break Some(hour) };
        plan.top_ups.retain(|(top_up, _)| top_up.step != step);
        plan.bail_outs.push(found);
        planner.forget_after(step);
        (frozen, from) = (step, step);
    };
    let refused = planner.refusal(&plan)?;
    if refused.is_some() {
        plan = Steps::default();
    }
    let forecast = replay(running, &mut planner.judge, &planner.start, &plan.changes())?;
    Ok(TopUpPlan {
        agent,
        sure,
        bail_outs: plan.bail_outs,
        fails_from,
        refused,
        uncorrected: planner.uncorrected,
        forecast,
        top_ups: plan.top_ups.into_iter().map(|(top_up, _)| top_up).collect(),
    })
}

/// What is planned so far.
#[derive(Clone, Default)]
struct Steps {
    top_ups: Vec<(TopUp, Change)>,
    bail_outs: Vec<BailOut>,
}

impl Steps {
    fn changes(&self) -> Vec<Change> {
        let top_ups = self.top_ups.iter().map(|(_, change)| change.clone());
        top_ups.chain(self.bail_outs.iter().map(|bail_out| bail_out.change.clone())).collect()
    }

    fn changed_at(&self, step: usize) -> bool {
        self.top_ups.iter().any(|(top_up, _)| top_up.step == step)
            || self.bail_outs.iter().any(|bail_out| bail_out.step == step)
    }

    fn with(&self, top_up: (TopUp, Change)) -> Self {
        let mut more = self.clone();
        more.top_ups.push(top_up);
        more.top_ups.sort_by_key(|(top_up, _)| top_up.step);
        more
    }
}

impl Planner<'_> {
    /// The plan with as many more top-ups as carry the bath past a step that would be crossed, and the first step that
    /// they change.
    fn hold_through(
        &mut self,
        plan: &Steps,
        late: usize,
        frozen: usize,
        replenish: Replenish,
    ) -> Result<Option<(Steps, usize)>, EquilibriumError> {
        let mut tried = plan.clone();
        for step in (frozen..=late.saturating_sub(1)).rev() {
            if tried.changed_at(step) {
                continue;
            }
            let changes = tried.changes();
            let contents = self.contents_at(step, &changes)?;
            let Some(most) = self.most(&contents, step, &changes)? else { return Ok(None) };
            let size = self.size(&contents, (step, late), &changes, &most, replenish)?;
            // More than one addition may bring is asked for: this one comes in full, and another before it.
            let in_full = size.is_none();
            let Some(top_up) = self.top_up(step, &contents, &most, size.unwrap_or(most.capped)) else {
                return Ok(None);
            };
            tried = tried.with(top_up);
            self.forget_after(step);
            if !in_full {
                return Ok(Some((tried, step)));
            }
            let reach = self.reach(&contents, step, late, &tried.changes(), true)?;
            if reach > late {
                return Ok(Some((tried, step)));
            }
            if reach < late || !most.by_cap {
                return Ok(None);
            }
        }
        Ok(None)
    }

    /// The largest top-up that is allowed at a step and holds there; `None` when none is.
    fn most(
        &mut self,
        contents: &Contents,
        step: usize,
        changes: &[Change],
    ) -> Result<Option<Most>, EquilibriumError> {
        let product = &self.running.bath.agents[self.agent];
        let there = contents.totals[product.active];
        let per_gram = product.per_gram[product.active];
        let cap = if there > 0.0 && per_gram > 0.0 {
            addition_cap(&self.running.bath) * there / per_gram
        } else {
            f64::INFINITY
        };
        let room = product.max_g_l - contents.doses[self.agent];
        let allowed = cap.min(room);
        if allowed <= 0.0 {
            return Ok(None);
        }
        let mixture = self.mixture(contents, allowed)?;
        let solids = self.bound(contents)?;
        let mut most = None;
        for i in (1..=SIZES).rev() {
            let size = allowed * i as f64 / SIZES as f64;
            let change = self.change(step, &mixture, size);
            if self.reach(&change.apply(contents, &solids), step, step, changes, false)? > step {
                most = Some((size, i == SIZES));
                break;
            }
        }
        Ok(most.map(|(capped, whole)| Most { capped, by_cap: whole && cap <= room, mixture }))
    }

    /// The size that suits the choice, if any carries the bath past the step that would be crossed.
    fn size(
        &mut self,
        contents: &Contents,
        (step, late): (usize, usize),
        changes: &[Change],
        most: &Most,
        replenish: Replenish,
    ) -> Result<Option<f64>, EquilibriumError> {
        let end = self.running.steps();
        let solids = self.bound(contents)?;
        let reach = |planner: &mut Self, size: f64, until: usize| {
            let after = planner.change(step, &most.mixture, size).apply(contents, &solids);
            planner.reach(&after, step, until, changes, false)
        };
        let sizes: Vec<f64> = (1..=SIZES).map(|i| most.capped * i as f64 / SIZES as f64).collect();
        let (wanted, first) = match replenish {
            Replenish::LeastAgent => {
                let mut first = None;
                for (i, &size) in sizes.iter().enumerate() {
                    if reach(self, size, late)? > late {
                        first = Some(i);
                        break;
                    }
                }
                (late, first)
            }
            Replenish::Fewest => {
                let mut best = (late, None);
                for (i, &size) in sizes.iter().enumerate() {
                    let found = reach(self, size, end)?;
                    if found > best.0 {
                        best = (found, Some(i));
                    }
                }
                (best.0 - 1, best.1)
            }
        };
        let Some(first) = first else { return Ok(None) };
        // The smallest size that reaches as far.
        let (mut low, mut high) = (if first == 0 { 0.0 } else { sizes[first - 1] }, sizes[first]);
        for _ in 0..BISECTIONS {
            let middle = 0.5 * (low + high);
            if reach(self, middle, wanted)? > wanted { high = middle } else { low = middle }
        }
        Ok(Some(high))
    }

    /// The top-up as it is measured out: rounded up, down where it would pass its cap. `None` when nothing is left.
    fn top_up(&self, step: usize, contents: &Contents, most: &Most, size: f64) -> Option<(TopUp, Change)> {
        let bath = &self.running.bath;
        let agent = &bath.agents[self.agent];
        let volume = self.running.volume_l;
        let round = |direction| measure(&agent.product, size, volume, &bath.project.sheet, direction);
        let mut measured = round(Direction::Up);
        if measured.rounded_kg * 1000.0 / volume > most.capped * (1.0 + 1e-9) {
            measured = round(Direction::Down);
        }
        let dose_g_l = measured.rounded_kg * 1000.0 / volume;
        if dose_g_l <= 0.0 {
            return None;
        }
        let there = contents.totals[agent.active];
        let share = if there > 0.0 { dose_g_l * agent.per_gram[agent.active] / there } else { f64::INFINITY };
        let adjustment = most.mixture.adjustment(self.running, dose_g_l);
        let hour = step as f64 * self.running.step_h;
        let change = self.change(step, &most.mixture, dose_g_l);
        Some((TopUp { hour, step, measured, dose_g_l, share, adjustment }, change))
    }

    /// Whether the largest addition may be printed, as the dose plan judges it.
    fn refusal(&mut self, steps: &Steps) -> Result<Option<String>, EquilibriumError> {
        let top_ups = steps.top_ups.iter().map(|(top_up, _)| (top_up.step, top_up.dose_g_l));
        let bail_outs = steps.bail_outs.iter().map(|bail_out| (bail_out.step, bail_out.dose_g_l));
        let all = top_ups.chain(bail_outs).filter(|(_, dose)| *dose > 0.0);
        let Some((step, dose)) = all.max_by(|a, b| a.1.total_cmp(&b.1)) else { return Ok(None) };
        self.tank.contents = self.contents_at(step, &steps.changes())?.totals;
        let mut doses = vec![0.0; self.tank.agents.len()];
        doses[self.agent] = dose;
        Ok(plan(&self.tank, &doses)?.refused)
    }
}

/// The largest top-up that is allowed and holds.
struct Most {
    /// g/L.
    capped: f64,
    /// Whether the cap of one addition is what limits it.
    by_cap: bool,
    mixture: Mixture,
}
