//! Lays a sheet out: which section stands where, on how many pages.
//!
//! The operator's part is tried with less and less white space until it fits one page; type is never made smaller. If
//! it does not fit even then, it flows on in order, and the STOP box moves in front of the additions, because it must
//! be read before the first one and not on the page after it.

mod additions;
mod back;
mod cell;
mod flow;
mod foot;
mod front;
mod item;
mod rich;
mod style;
mod table;
#[cfg(test)]
mod tests;
pub(super) mod widths;
pub(super) mod wrap;

pub use item::{
    CheckBox, Frame, Item, Join, LaidOut, Page, Paper, Place, Role, Rule, TextRun, Weight, WriteIn,
};
pub(super) use rich::{Span, Style};

use self::flow::{Area, Flow};
use self::foot::Foot;
use self::style::Density;
use super::fonts::printable;
use super::model::DosingSheet;

/// Leftover height from which a box for remarks is worth printing, points.
const REMARKS_LEAST: f32 = 46.0;
/// White space kept between the last box and the footer, points.
const REMARKS_SPARE: f32 = 6.0;
/// Height beyond which it would look like a page forgotten, points.
const REMARKS_MOST: f32 = 190.0;

/// Lays the sheet out on the given paper. Cannot fail: any text fits, on more pages if need be.
pub fn lay_out(sheet: &DosingSheet, paper: Paper) -> LaidOut {
    let side_margins = 2.0 * style::MARGIN_SIDE;
    let foot = Foot::new(&sheet.header, paper.size_pt().0 - side_margins);
    let area = Area::above_footer(paper, foot.height());
    let mut flow = operator_part(sheet, area);
    let mut file_page = None;
    if !back::is_empty(&sheet.file_copy) {
        file_page = Some(flow.pages.len() + 1);
        flow.density = style::NORMAL;
        back::file_copy(&mut flow, sheet);
    }
    foot.put(&mut flow, file_page);
    let (width_pt, height_pt) = paper.size_pt();
    let header = &sheet.header;
    let title = [front::tank_and_bath(header), front::sheet_name(header)];
    LaidOut {
        paper,
        title: printable(&front::joined(&[&title[0], &title[1]], ": ")),
        author: header.prepared_by.as_deref().map(printable).filter(|a| !a.is_empty()),
        creator: printable(&header.program_version),
        pages: flow.pages.into_iter().map(|items| Page { width_pt, height_pt, items }).collect(),
    }
}

/// The operator's part, airy if it fits one page, denser if it must.
fn operator_part(sheet: &DosingSheet, area: Area) -> Flow {
    let one_page = airiest_on_one_page(sheet, area);
    let stop_first = one_page.is_none();
    let flow = one_page.unwrap_or_else(|| place_operator_part(sheet, area, style::NORMAL, None, stop_first));
    // What is left of the last page becomes a box for remarks, rather than a blank that looks forgotten.
    let gap = flow.density.section_gap;
    let leftover = flow.room() - gap - REMARKS_SPARE;
    if leftover < REMARKS_LEAST {
        return flow;
    }
    let height = leftover.min(REMARKS_MOST);
    let with_remarks = place_operator_part(sheet, area, flow.density, Some(height), stop_first);
    if with_remarks.pages.len() == flow.pages.len() { with_remarks } else { flow }
}

/// The operator's part with as much white space as one page allows; `None` if even the densest needs more pages.
fn airiest_on_one_page(sheet: &DosingSheet, area: Area) -> Option<Flow> {
    let try_step = |step| {
        let flow = place_operator_part(sheet, area, style::density(step), None, false);
        (flow.pages.len() == 1).then_some(flow)
    };
    let mut best = try_step(style::DENSEST)?;
    let (mut low, mut high) = (0, style::DENSEST);
    while low < high {
        let middle = low.midpoint(high);
        match try_step(middle) {
            Some(flow) => (best, high) = (flow, middle),
            None => low = middle + 1,
        }
    }
    Some(best)
}

fn place_operator_part(
    sheet: &DosingSheet,
    area: Area,
    density: Density,
    remarks: Option<f32>,
    stop_first: bool,
) -> Flow {
    let running = foot::one_line(&front::running_text(&sheet.header), Style::bold(10.0), area.width());
    let mut flow = Flow::new(area, density, running);
    front::head(&mut flow, &sheet.header);
    front::found(&mut flow, &sheet.found);
    if let Some(reason) = &sheet.refused {
        additions::refusal(&mut flow, reason);
        additions::stop(&mut flow, &sheet.stop);
    } else {
        front::before_you_start(&mut flow, &sheet.before_you_start);
        if stop_first {
            additions::stop(&mut flow, &sheet.stop);
        }
        additions::additions(&mut flow, sheet.printed_additions());
        if !stop_first {
            additions::stop(&mut flow, &sheet.stop);
        }
        front::retest(&mut flow, &sheet.retest.intro, &sheet.retest.columns);
    }
    front::chemists_number(&mut flow, sheet);
    front::cautions(&mut flow, &sheet.cautions);
    if let Some(height) = remarks {
        flow.gap(density.section_gap);
        front::remarks(&mut flow, height);
    }
    front::sign_off(&mut flow, &sheet.sign_off);
    flow
}
