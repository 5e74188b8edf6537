//! What the pages beyond the bath and its sheet show, and how it is computed: two agents side by side, the shifts ahead,
//! the rinse behind.

use super::answer::Request;
use crate::bath::{Bath, BathError, Running};
use crate::study::compare::{Comparison, compare};
use crate::study::rinse::{RinseStudy, rinse};
use crate::study::shift::{Forecast, TopUpPlan, forecast, plan_top_ups};

/// What a page wants to be told.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Wanted {
    /// Two products by id.
    Comparison(String, String),
    /// The shifts ahead.
    Shift,
    /// The rinse water.
    Rinse,
}

/// The answer to a [`Wanted`].
pub enum Story {
    /// Two agents at equal result.
    Comparison(Box<Comparison>),
    /// The bath through its shifts.
    Shift(Box<ShiftStory>),
    /// Rinse water and treatment.
    Rinse(Box<RinseStudy>),
}

/// The bath left alone, and with the additions that hold it.
pub struct ShiftStory {
    /// Flows and loads, with the bath they belong to.
    pub running: Running<'static>,
    /// Without any addition.
    pub alone: Forecast,
    /// With them; `None` where no agent is free to be added.
    pub plan: Option<TopUpPlan>,
}

/// A story with the version of the project it belongs to, or why there is none.
pub struct Told {
    /// Version number.
    pub generation: u64,
    /// What was wanted.
    pub wanted: Wanted,
    /// What came of it.
    pub story: Result<Story, BathError>,
}

impl std::fmt::Debug for Told {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Told").field("generation", &self.generation).field("wanted", &self.wanted).finish()
    }
}

/// Computes what a page wants; `None` when it wants nothing.
pub fn tell(request: &Request) -> Option<Told> {
    let wanted = request.view.wanted.clone()?;
    let story = Bath::resolve(&request.project).and_then(|bath| of(&bath, &wanted));
    Some(Told { generation: request.generation, wanted, story })
}

fn of(bath: &Bath, wanted: &Wanted) -> Result<Story, BathError> {
    Ok(match wanted {
        Wanted::Comparison(a, b) => Story::Comparison(Box::new(compare(bath, a, b)?)),
        Wanted::Rinse => Story::Rinse(Box::new(rinse(bath, &bath.doses())?)),
        Wanted::Shift => {
            let running = bath.running(&bath.project.shift)?.into_owned();
            let alone = forecast(&running)?;
            let agent = bath.project.agents.iter().position(|agent| !agent.locked);
            let replenish = bath.project.shift.replenish;
            // Where the start holds only by plain numbers, that is all a plan can keep.
            let sure = alone.points.first().is_some_and(|start| start.excess(true) <= 0.0);
            let plan = match agent.filter(|_| !bath.walls().is_empty()) {
                Some(agent) => Some(plan_top_ups(&running, agent, replenish, sure)?),
                None => None,
            };
            Story::Shift(Box::new(ShiftStory { running, alone, plan }))
        }
    })
}
