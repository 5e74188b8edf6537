//! The heart of the sheet: the numbered additions, the STOP box, and the refusal that takes their place.

use super::cell::{Cell, Para};
use super::flow::Flow;
use super::front::PAD_X;
use super::item::Role;
use super::rich::{Span, Style, emphasise_numbers};
use super::style::{self, Density};
use super::table::{Grid, Row, TableSpec, place};
use super::widths::{Need, share};
use crate::sheet::model::{Addition, Align};

/// Widths of the columns that are the same on every sheet, points: step number, amount, initials.
const STEP_WIDTH: f32 = 29.0;
const TWO_DIGIT_STEP_WIDTH: f32 = 41.0;
const AMOUNT_WIDTH: f32 = 142.0;
const INITIALS_WIDTH: f32 = 48.0;
/// Index of the pH column, and the least and most width it takes, points.
const PH: usize = 4;
const PH_LEAST: f32 = 76.0;
const PH_MOST: f32 = 100.0;
/// Width of the left part of the STOP box, and the space beside its texts, points.
const STOP_WIDTH: f32 = 119.0;
const STOP_PAD: f32 = 7.0;

/// The additions in order, amounts in heavy boxes.
pub(super) fn additions(flow: &mut Flow, additions: &[Addition]) {
    flow.gap(flow.density.section_gap);
    if additions.is_empty() {
        let nothing = vec![Para::new("Nothing to add.", Style::bold(14.0))];
        let spec = TableSpec::paragraphs(flow, Role::Body, nothing);
        return place(flow, &spec.heading("Additions"));
    }
    let density = flow.density;
    let label = |text| Cell::text(Role::HeaderCell, text, density.small()).middle();
    let header = Row::new(vec![
        label("No.").align(Align::Centre),
        label("Material: match the label"),
        label("Measure out"),
        label("How"),
        label("Then pH must read").align(Align::Centre),
        label("Time, initials").align(Align::Centre),
    ]);
    let rows: Vec<Row> = additions.iter().enumerate().map(|(index, a)| step(index + 1, a, density)).collect();
    let ph = rows.iter().map(|row| row.cells[PH].need().best).fold(0.0, f32::max) + 2.0 * PAD_X;
    let ph = ph.clamp(PH_LEAST, PH_MOST);
    let step_width = if additions.len() < 10 { STEP_WIDTH } else { TWO_DIGIT_STEP_WIDTH };
    let rest = flow.area.width() - step_width - AMOUNT_WIDTH - ph - INITIALS_WIDTH;
    let widths = vec![step_width, rest * 0.52, AMOUNT_WIDTH, rest * 0.48, ph, INITIALS_WIDTH];
    let spec = TableSpec {
        header: vec![header],
        grid: Grid::Full,
        pad_x: PAD_X,
        pad_y: flow.density.step_pad,
        announce_steps: true,
        ..TableSpec::plain(widths, rows)
    };
    let heading = if additions.len() == 1 { "Add" } else { "Add in this order. Do not skip, do not swap." };
    place(flow, &spec.heading(heading));
}

fn step(number: usize, addition: &Addition, density: Density) -> Row {
    let mut material = vec![Para::new(&addition.material, style::MATERIAL)];
    material.extend(addition.details.iter().map(|d| Para::new(d, density.small())));

    let mut measure = vec![Para::of(emphasise_numbers(&addition.amount, style::AMOUNT_WORD, style::AMOUNT))];
    measure.extend(
        addition.measure.iter().map(|m| Para::of(emphasise_numbers(m, Style::regular(10.5), style::NUMBER))),
    );
    measure.extend(addition.exact.iter().map(|e| Para::new(e, density.small())));

    let mut how = vec![Para::of(emphasise_numbers(&addition.how, style::WORD, style::NUMBER))];
    how.extend(addition.add_over.iter().map(|time| timed("add over", time)));
    how.extend(addition.wait.iter().map(|time| timed("wait", time)));

    let then = match &addition.then_ph {
        Some(ph) => {
            vec![Para::new(ph, style::NUMBER), Para::new("read _________", density.small()).before(5.0)]
        }
        None => vec![Para::new("–", style::NUMBER)],
    };
    Row::new(vec![
        Cell::text(Role::Cell, &number.to_string(), style::STEP).align(Align::Centre).middle(),
        Cell::new(Role::Cell, material).middle(),
        Cell::new(Role::Cell, measure).middle().heavy(),
        Cell::new(Role::Cell, how).middle(),
        Cell::new(Role::Cell, then).align(Align::Centre).middle(),
        Cell::write_in(),
    ])
}

fn timed(words: &str, time: &str) -> Para {
    Para::of(vec![Span { text: format!("{words} "), style: style::WORD }, Span::new(time, style::NUMBER)])
}

/// Printed in place of the additions when one is refused.
pub(super) fn refusal(flow: &mut Flow, reason: &str) {
    let text = vec![
        Para::new("NO ADDITION", style::ALARM),
        Para::new(reason, Style::bold(14.0)).before(3.0),
        Para::new("Nothing may be added with this sheet. Call the chemist.", Style::regular(14.0))
            .before(4.0),
    ];
    let spec = TableSpec {
        pad_x: 12.0,
        pad_y: 8.0,
        frame: style::ALARM_FRAME,
        ..TableSpec::plain(vec![flow.area.width()], vec![Row::new(vec![Cell::new(Role::Body, text)])])
    };
    flow.gap(flow.density.section_gap + 2.0);
    place(flow, &spec);
}

/// The STOP box: conditions in two columns, read downwards.
pub(super) fn stop(flow: &mut Flow, conditions: &[String]) {
    let conditions: Vec<Para> = conditions
        .iter()
        .filter(|c| !c.trim().is_empty())
        .map(|c| {
            Para::of(emphasise_numbers(c, style::WORD, style::NUMBER)).bullet().spaced_for(style::NUMBER.size)
        })
        .collect();
    if conditions.is_empty() {
        return;
    }
    let lead = vec![
        Para::new("STOP", style::ALARM),
        Para::new("and call the chemist, ext. ______, if:", Style::bold(10.0)),
    ];
    let (left, right) = conditions.split_at(conditions.len().div_ceil(2));
    let columns = [left, right].map(|half| Cell::new(Role::Bullet, half.to_vec()));
    let needs = columns.each_ref().map(|cell| {
        let need = cell.need();
        Need { least: need.least + 2.0 * STOP_PAD, best: need.best + 2.0 * STOP_PAD }
    });
    let widths = share(flow.area.width() - STOP_WIDTH, &needs);
    let [left, right] = columns;
    let cells = vec![Cell::new(Role::Heading, lead).middle(), left, right];
    let spec = TableSpec {
        pad_x: STOP_PAD,
        pad_y: flow.density.cell_pad + 2.0,
        frame: style::ALARM_FRAME,
        ..TableSpec::plain(vec![STOP_WIDTH, widths[0], widths[1]], vec![Row::new(cells)])
    };
    flow.gap(flow.density.section_gap);
    place(flow, &spec);
}
