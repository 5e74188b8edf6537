//! `bathwright map`: free metal, or the share of the nearest limit, over pH and dose as SVG or CSV.

use super::diagram::{basis, ph_ends};
use super::{CommandError, Outcome, choose_agent, needs_walls, print, write_picture};
use crate::bath::Bath;
use crate::study::{MapArea, MapOf, map, map_to_csv, map_to_svg};
use std::io::Write;
use std::path::Path;

/// Points along pH and dose.
const POINTS: (usize, usize) = (200, 150);

pub fn run(
    bath: &Bath,
    of: Option<&str>,
    agent: Option<&str>,
    path: &Path,
    out: &mut dyn Write,
) -> Result<Outcome, CommandError> {
    let (bath, agent) = choose_agent(bath, agent)?;
    let of = match of {
        Some("limit") => MapOf::Excess,
        of => MapOf::Free(basis(&bath, of)?.0),
    };
    if of == MapOf::Excess {
        needs_walls(&bath, "map it")?;
    }
    let drawn = map(&bath, of, MapArea { agent, ph: ph_ends(&bath), points: POINTS })?;
    if drawn.span().is_none() {
        return Err(CommandError::Option("no point of the map has an answer".to_owned()));
    }
    write_picture(path, || map_to_svg(&bath, &drawn), || map_to_csv(&bath, &drawn))?;
    print(out, &format!("{} written\n", path.display()))?;
    Ok(Outcome::Done)
}
