//! `bathwright rinse`: the rinse water behind a bath, its treatment, and what breaks the complex.

mod json;
mod text;

use super::{CommandError, Outcome, print};
use crate::bath::{Bath, BathError};
use crate::dosing::{Hold, search};
use crate::study::rinse::{Treated, rinse};
use std::io::Write;

/// Doses to study: those of the project, or with a named agent the smallest dose of it that holds.
///
/// With them a remark where that dose holds by plain numbers only.
fn doses(bath: &Bath, name: Option<&str>) -> Result<(Bath, Vec<f64>, &'static str), CommandError> {
    if name.is_none() {
        return Ok((bath.clone(), bath.doses(), ""));
    }
    let (mut bath, agent) = super::choose_agent(bath, name)?;
    let found = search(&bath, agent)?.found.ok_or_else(|| {
        let product = &bath.agents[agent].product.name;
        CommandError::Option(format!(
            "no dose of {product} holds, so there is no rinse water of it; see the reason with dose"
        ))
    })?;
    bath.project.agents[agent].dose_g_l = found.dose_g_l;
    let doses = bath.doses();
    let remark = if found.hold == Hold::Plain { "Note: the dose holds by plain numbers only.\n" } else { "" };
    Ok((bath, doses, remark))
}

pub fn run(
    bath: &Bath,
    name: Option<&str>,
    as_json: bool,
    path: &str,
    out: &mut dyn Write,
) -> Result<Outcome, CommandError> {
    let (bath, doses, remark) = doses(bath, name)?;
    let bad = |source: BathError| CommandError::Bath { path: path.to_owned(), source };
    let study = rinse(&bath, &doses).map_err(bad)?;
    let text = if as_json {
        format!("{:#}\n", json::object(&bath, &doses, &study))
    } else {
        remark.to_owned() + &text::text(&bath, &doses, &study)
    };
    print(out, &text)?;
    Ok(Outcome::Done)
}

/// System index and mol/L of each solid that formed.
fn formed(treated: &Treated) -> impl Iterator<Item = (usize, f64)> + '_ {
    treated.solution.solids.iter().copied().enumerate().filter(|(_, n)| *n > 0.0)
}
