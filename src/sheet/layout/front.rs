//! The operator's page around the additions: head, analysis, tick boxes, re-test, chemist's number, cautions, boxes
//! to sign. Each function places one section; the order is decided in the parent module.

use super::cell::{Cell, Para};
use super::flow::Flow;
use super::item::{Frame, Item, Role, Rule};
use super::rich::{Span, Style, emphasise_numbers};
use super::style::{self, Density};
use super::table::{Grid, Row, TableSpec, place};
use super::widths::{Need, fits, share};
use crate::sheet::fonts::printable;
use crate::sheet::model::{Align, DosingSheet, Finding, Header, RetestColumn, Target};

/// Printed on every page of a sheet with invented numbers.
const BANNER: &str = "demo bath, invented numbers";
/// Left and right of the banner's text, points.
const BANNER_PAD: f32 = 4.0;
/// A line to write a missing value on.
const BLANK: &str = "__________";
/// Left and right of the text of a cell, points.
pub(super) const PAD_X: f32 = 5.5;

/// `Tank 7, copper strike`.
pub(super) fn tank_and_bath(header: &Header) -> String {
    joined(&[&header.tank, &header.bath], ", ")
}

/// `Dosing sheet 118, rev. 0`.
pub(super) fn sheet_name(header: &Header) -> String {
    let number = header.sheet_no.as_deref().unwrap_or(BLANK);
    joined(&[&header.title, number], " ")
}

/// The line at the top of following pages. The bath comes last: if anything has to be cut, then its name.
pub(super) fn running_text(header: &Header) -> String {
    let short = |text: &str| text.chars().take(36).collect::<String>();
    let banner = if header.invented { BANNER } else { "" };
    let (tank, sheet) = (short(&header.tank), short(&sheet_name(header)));
    joined(&[&tank, &sheet, banner, &header.bath], " · ")
}

/// Joins the parts that are not blank.
pub(super) fn joined(parts: &[&str], separator: &str) -> String {
    let parts: Vec<&str> = parts.iter().map(|p| p.trim()).filter(|p| !p.is_empty()).collect();
    parts.join(separator)
}

/// Tank, sheet number, dates, who prepared it.
pub(super) fn head(flow: &mut Flow, header: &Header) {
    let filled = |value: &Option<String>, label: &str| match value {
        Some(text) if !text.trim().is_empty() => text.clone(),
        _ => format!("{label} {BLANK}"),
    };
    let when = joined(&[&filled(&header.shift, "shift"), &filled(&header.date, "date")], ", ");
    let where_when = joined(&[header.line.as_deref().unwrap_or(""), &when], " · ");
    let valid = format!("valid to {}", header.valid_until.as_deref().unwrap_or(BLANK));
    let prepared = format!("prepared by {}", header.prepared_by.as_deref().unwrap_or(BLANK));
    let density = flow.density;
    let title = Cell::text(Role::Title, &tank_and_bath(header), style::TITLE);
    let number = vec![Para::new(&sheet_name(header), style::SHEET_NO), Para::new(&prepared, density.small())];
    let when = Cell::new(
        Role::Title,
        vec![Para::of(vec![
            Span { text: format!("{} · ", printable(&where_when)), style: style::SUBTITLE },
            Span { text: printable(&valid).replace(' ', "\u{a0}"), style: style::SUBTITLE_STRONG },
        ])],
    );
    let banner = Cell::text(Role::Title, if header.invented { BANNER } else { "" }, density.small_strong());
    let rows = |cells: [Cell; 2]| vec![Row::new(cells.to_vec())];
    let width = flow.area.width();
    let number = Cell::new(Role::Title, number).align(Align::Right);
    place(flow, &TableSpec::plain(vec![width * 0.6, width * 0.4], rows([title, number])));
    // The banner's frame needs a little room at the right edge, and stands off the line above.
    let banner_width = if header.invented { banner.need().best + 2.0 * BANNER_PAD + 8.0 } else { 0.0 };
    let widths = vec![width - banner_width, (banner_width - BANNER_PAD).max(0.0)];
    flow.y += 1.5;
    place(flow, &TableSpec::plain(widths, rows([when, banner.align(Align::Right).middle()])));
    frame_banner(flow);
    flow.y += 5.0;
    if flow.room() > 2.0 {
        let (y, thickness) = (flow.y, 2.0);
        flow.put(Item::Rule(Rule { x1: flow.area.left, y1: y, x2: flow.area.right, y2: y, thickness }));
        flow.y += 1.0;
    }
}

fn frame_banner(flow: &mut Flow) {
    let Some(run) = flow.pages.last().and_then(|items| {
        items.iter().rev().find_map(|item| match item {
            Item::Text(run) if run.text == BANNER => Some(run.clone()),
            _ => None,
        })
    }) else {
        return;
    };
    flow.put(Item::Frame(Frame {
        x: run.x - BANNER_PAD,
        y: run.baseline - 1.05 * run.size,
        width: run.width + 2.0 * BANNER_PAD,
        height: 1.4 * run.size,
        thickness: style::THIN,
    }));
}

/// The analysis: label, value, where it should be and what it rests on.
pub(super) fn found(flow: &mut Flow, found: &[Finding]) {
    let density = flow.density;
    let columns: Vec<[Cell; 3]> = found
        .iter()
        .map(|f| {
            [
                Cell::text(Role::HeaderCell, &f.label, density.small()),
                Cell::text(Role::Cell, &f.value, Style::bold(15.0)),
                Cell::new(Role::Cell, vec![Para::new(&f.range, density.small()), evidence(f, density)]),
            ]
        })
        .collect();
    column_tables(flow, "Found, and where it should be", None, columns);
}

/// What a value rests on; doubtful evidence with its first word in bold capitals.
fn evidence(finding: &Finding, density: Density) -> Para {
    if !finding.emphasised {
        return Para::new(&finding.evidence, density.small());
    }
    let text = printable(&finding.evidence);
    let end = text.find([' ', ',']).unwrap_or(text.len());
    let (word, rest) = text.split_at(end);
    Para::of(vec![
        Span { text: word.to_uppercase(), style: density.small_strong() },
        Span { text: rest.to_owned(), style: density.small() },
    ])
}

/// What to test afterwards, with room for the reading.
pub(super) fn retest(flow: &mut Flow, intro: &str, tests: &[RetestColumn]) {
    let density = flow.density;
    let columns: Vec<[Cell; 3]> = tests
        .iter()
        .map(|test| {
            [
                Cell::text(Role::HeaderCell, &test.label, density.small()),
                Cell::text(Role::Cell, &test.expect, style::NUMBER),
                Cell::write_in(),
            ]
        })
        .collect();
    let label = |role, text| Cell::text(role, text, density.small()).middle();
    let labels = [label(Role::HeaderCell, "Re-test"), label(Role::Cell, "expect"), label(Role::Cell, "read")];
    if columns.is_empty() {
        if !intro.trim().is_empty() {
            flow.gap(flow.density.section_gap);
            let spec = TableSpec::paragraphs(flow, Role::Heading, vec![Para::new(intro, style::HEADING)]);
            place(flow, &spec);
        }
    } else {
        column_tables(flow, intro, Some(labels), columns);
    }
}

/// Tables of three rows whose columns are given, as many side by side as fit without breaking words.
fn column_tables(flow: &mut Flow, heading: &str, labels: Option<[Cell; 3]>, columns: Vec<[Cell; 3]>) {
    if columns.is_empty() {
        return;
    }
    let width = flow.area.width();
    let need = |column: &[Cell; 3]| column.iter().map(padded_need).fold(Need::default(), Need::and);
    let with_labels = |chunk: &[[Cell; 3]]| labels.iter().chain(chunk).cloned().collect::<Vec<_>>();
    let mut side_by_side = columns.len().min(5);
    while side_by_side > 1
        && !columns
            .chunks(side_by_side)
            .all(|chunk| fits(width, &with_labels(chunk).iter().map(need).collect::<Vec<_>>()))
    {
        side_by_side -= 1;
    }
    // Even shares: six columns become three and three, not five and one.
    let side_by_side = columns.len().div_ceil(columns.len().div_ceil(side_by_side));
    for (index, chunk) in columns.chunks(side_by_side).enumerate() {
        let chunk = with_labels(chunk);
        let widths = share(width, &chunk.iter().map(need).collect::<Vec<_>>());
        let row = |number: usize| Row::new(chunk.iter().map(|column| column[number].clone()).collect());
        let last = if labels.is_some() { row(2).at_least(flow.density.write_in * 0.75) } else { row(2) };
        let mut spec = TableSpec {
            header: vec![row(0)],
            grid: Grid::Full,
            pad_x: PAD_X,
            pad_y: flow.density.cell_pad * 0.7,
            ..TableSpec::plain(widths, vec![row(1), last])
        };
        flow.gap(if index == 0 { flow.density.section_gap } else { 3.0 });
        if index == 0 {
            spec = spec.heading(heading);
        }
        place(flow, &spec);
    }
}

/// Tick boxes, in as many columns as the longest label allows.
pub(super) fn before_you_start(flow: &mut Flow, checks: &[String]) {
    let cells: Vec<Cell> = checks
        .iter()
        .map(|check| {
            let spans = emphasise_numbers(check, Style::regular(12.0), style::NUMBER);
            Cell::new(Role::CheckLabel, vec![Para::of(spans)]).tick().middle()
        })
        .filter(|cell| !cell.paras.is_empty())
        .collect();
    if cells.is_empty() {
        return;
    }
    let heading = Cell::text(Role::Heading, "Before you start", style::HEADING);
    let heading_width = heading.need().best + 14.0;
    let width = flow.area.width() - heading_width;
    let widest = cells.iter().map(|c| c.need().best + 8.0).fold(1.0, f32::max);
    let columns = ((width / widest) as usize).clamp(1, cells.len());
    let columns = cells.len().div_ceil(cells.len().div_ceil(columns));
    let mut widths = vec![width / columns as f32; columns];
    widths.insert(0, heading_width);
    let rows = cells.chunks(columns).enumerate().map(|(index, chunk)| {
        let first = if index == 0 { heading.clone().middle() } else { Cell::new(Role::Heading, Vec::new()) };
        Row::new(std::iter::once(first).chain(chunk.iter().cloned()).collect())
    });
    let spec = TableSpec { pad_y: 0.6, ..TableSpec::plain(widths, rows.collect()) };
    flow.gap(flow.density.section_gap + 2.0);
    place(flow, &spec);
}

/// Ceilings on free metal and the chemist's sentence, small: they are for the chemist, not for the operator.
pub(super) fn chemists_number(flow: &mut Flow, sheet: &DosingSheet) {
    let density = flow.density;
    let mut paras: Vec<Para> = sheet.targets.iter().map(|t| target(t, density)).collect();
    if !sheet.chemists_number.trim().is_empty() {
        paras.push(Para::of(vec![
            Span { text: "Chemist's number: ".into(), style: density.small_strong() },
            Span::new(&sheet.chemists_number, density.small()),
        ]));
    }
    if paras.is_empty() {
        return;
    }
    flow.gap(flow.density.section_gap * 0.5);
    let spec = TableSpec::paragraphs(flow, Role::Body, paras);
    place(flow, &spec);
}

fn target(target: &Target, density: Density) -> Para {
    let wall = joined(&[&target.ceiling, &bracketed(&target.wall)], " ");
    let prediction =
        joined(&[&prefixed("before ", &target.before), &prefixed("after ", &target.after)], ", ");
    let text = joined(&[&wall, &prediction], "; ");
    Para::of(vec![
        Span { text: format!("Free {}: ", printable(&target.metal)), style: density.small_strong() },
        Span::new(&format!("{text}."), density.small()),
    ])
}

fn bracketed(text: &str) -> String {
    if text.trim().is_empty() { String::new() } else { format!("({})", text.trim()) }
}

fn prefixed(prefix: &str, text: &str) -> String {
    if text.trim().is_empty() { String::new() } else { format!("{prefix}{}", text.trim()) }
}

/// Cautions, one paragraph each.
pub(super) fn cautions(flow: &mut Flow, cautions: &[String]) {
    let density = flow.density;
    let paras: Vec<Para> = cautions
        .iter()
        .filter(|c| !c.trim().is_empty())
        .map(|c| Para::new(c, density.caution()).bullet())
        .collect();
    if paras.is_empty() {
        return;
    }
    flow.gap(flow.density.section_gap);
    let spec = TableSpec::paragraphs(flow, Role::Bullet, paras).heading("Take care");
    place(flow, &spec);
}

/// A box for lot numbers and remarks, `height` points high with its outline.
pub(super) fn remarks(flow: &mut Flow, height: f32) {
    let label = "Lot numbers, amounts really added, remarks";
    let label = Cell::text(Role::HeaderCell, label, flow.density.small());
    let label = Cell { write_in: true, ..label };
    let spec = TableSpec {
        grid: Grid::Full,
        pad_x: PAD_X,
        pad_y: flow.density.cell_pad * 0.7,
        ..TableSpec::plain(vec![flow.area.width()], vec![Row::new(vec![label]).at_least(height)])
    };
    place(flow, &spec);
}

/// Boxes to sign, at most six side by side.
pub(super) fn sign_off(flow: &mut Flow, labels: &[String]) {
    let labels: Vec<&String> = labels.iter().filter(|l| !l.trim().is_empty()).collect();
    if labels.is_empty() {
        return;
    }
    let side_by_side = labels.len().div_ceil(labels.len().div_ceil(6));
    let density = flow.density;
    for (index, chunk) in labels.chunks(side_by_side).enumerate() {
        let header: Vec<Cell> =
            chunk.iter().map(|l| Cell::text(Role::HeaderCell, l, density.small())).collect();
        let boxes = chunk.iter().map(|_| Cell::write_in()).collect();
        // Equal boxes, unless a label needs more.
        let equal = flow.area.width() / chunk.len() as f32;
        let equal_or_more =
            |need: Need| Need { best: need.best.max(equal), least: need.best.min(equal * 1.5) };
        let needs: Vec<Need> = header.iter().map(padded_need).map(equal_or_more).collect();
        let spec = TableSpec {
            grid: Grid::Full,
            header: vec![Row::new(header)],
            pad_x: PAD_X,
            pad_y: density.cell_pad * 0.7,
            ..TableSpec::plain(
                share(flow.area.width(), &needs),
                vec![Row::new(boxes).at_least(density.write_in)],
            )
        };
        flow.gap(if index == 0 { density.section_gap } else { 3.0 });
        place(flow, &spec);
    }
}

/// Width a cell wants with its padding.
fn padded_need(cell: &Cell) -> Need {
    let need = cell.need();
    Need { least: need.least + 2.0 * PAD_X + 0.5, best: need.best + 2.0 * PAD_X }
}
