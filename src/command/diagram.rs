//! `bathwright diagram`: a distribution diagram as SVG or CSV.

use super::arguments::Against;
use super::{CommandError, Outcome, choose_agent, print, write_picture};
use crate::bath::Bath;
use crate::study::{Axis, Basis, diagram, to_csv, to_svg};
use std::io::Write;
use std::path::Path;

/// What the user asked for.
pub struct Wish<'a> {
    pub of: Option<&'a str>,
    pub against: Against,
    pub agent: Option<&'a str>,
    pub points: u32,
}

/// Room beside the operating range that a pH axis shows.
const PH_ROOM: f64 = 3.0;

pub fn run(bath: &Bath, wish: &Wish, path: &Path, out: &mut dyn Write) -> Result<Outcome, CommandError> {
    let (bath, axis) = match wish.against {
        Against::Ph => (bath.clone(), ph_axis(bath)),
        Against::Dose => {
            let (bath, agent) = choose_agent(bath, wish.agent)?;
            let to = bath.agents[agent].max_g_l;
            (bath, Axis::Dose { agent, to })
        }
    };
    let basis = basis(&bath, wish.of)?;
    let drawn = diagram(&bath, axis, basis, wish.points as usize);
    if let Some((count, error)) = drawn.gaps.as_ref().filter(|(count, _)| *count == drawn.x.len()) {
        return Err(CommandError::Option(format!("no point of {count} has an answer: {error}")));
    }
    write_picture(path, || to_svg(&bath, &drawn), || to_csv(&bath, &drawn))?;
    print(out, &format!("{} written\n", path.display()))?;
    Ok(Outcome::Done)
}

fn ph_axis(bath: &Bath) -> Axis {
    let (from, to) = ph_ends(bath);
    Axis::Ph { from, to }
}

/// The operating range with room on both sides; the whole scale when the pH is not held.
pub fn ph_ends(bath: &Bath) -> (f64, f64) {
    match bath.ph() {
        Some(range) => ((range.low - PH_ROOM).floor().max(-1.0), (range.high + PH_ROOM).ceil().min(15.0)),
        None => (0.0, 14.0),
    }
}

/// The named component of the bath, else its first limited metal.
pub fn basis(bath: &Bath, of: Option<&str>) -> Result<Basis, CommandError> {
    let Some(name) = of else {
        let first = bath.limits.first().map(|limit| limit.component).or_else(|| bath.metals().next());
        return first
            .map(Basis)
            .ok_or_else(|| CommandError::Option("the bath holds no metal: name an agent with --of".into()));
    };
    let index = bath.library.component_named(name);
    let place = index.and_then(|index| bath.present.iter().position(|&known| known == index));
    place.map(Basis).ok_or_else(|| {
        let known: Vec<&str> = bath.system.components.iter().map(String::as_str).collect();
        CommandError::Option(format!("--of is \"{name}\": not in this bath; it holds {}", known.join(", ")))
    })
}
