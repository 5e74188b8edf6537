//! `bathwright compare`: two agents side by side at equal result.

use super::table::Table;
use super::{CommandError, Outcome, needs_walls, print};
use crate::bath::{Bath, BathError};
use crate::dosing::Hold;
use crate::study::compare::{Better, Cell, Comparison, Row, Side, compare};
use serde_json::{Value, json};
use std::io::Write;

pub fn run(
    bath: &Bath,
    names: (&str, &str),
    as_json: bool,
    path: &str,
    out: &mut dyn Write,
) -> Result<Outcome, CommandError> {
    needs_walls(bath, "compare agents")?;
    let a = product(bath, "--with", names.0)?;
    let b = product(bath, "--and", names.1)?;
    if a == b {
        return Err(CommandError::Option(format!(
            "--with and --and both name {a}: give two different products"
        )));
    }
    let bad = |source: BathError| CommandError::Bath { path: path.to_owned(), source };
    let comparison = compare(bath, &a, &b).map_err(bad)?;
    let text = if as_json { format!("{:#}\n", object(&comparison)) } else { text(&comparison) };
    print(out, &text)?;
    let none = [&comparison.a, &comparison.b].into_iter().all(|side| side.hold == Hold::Not);
    Ok(if none { Outcome::NoDoseHolds } else { Outcome::Done })
}

/// Id of a product: one of the bath's agents first, then any of the catalogue.
fn product(bath: &Bath, option: &str, name: &str) -> Result<String, CommandError> {
    let listed = bath.agents.iter().map(|agent| &agent.product);
    let found = listed.chain(bath.catalogue.iter()).find(|product| super::answers_to(product, bath, name));
    found.map(|product| product.id.clone()).ok_or_else(|| {
        let known: Vec<&str> = bath.agents.iter().map(|agent| agent.product.id.as_str()).collect();
        CommandError::Option(format!(
            "{option} is \"{name}\": no product has this id or name; this bath lists {}",
            if known.is_empty() { "no agent".to_owned() } else { known.join(", ") }
        ))
    })
}

fn text(comparison: &Comparison) -> String {
    let (a, b) = (&comparison.a, &comparison.b);
    let project = &a.bath.project;
    let invented = if project.invented { " (demo bath, invented numbers)" } else { "" };
    let (first, second) = comparison.names();
    let mut text = format!("{}{invented}: two agents at equal result\n", project.name);
    text += &format!("{first}: {}; {second}: {}\n\n", a.product().name, b.product().name);
    let mut table = Table::new(&["", first, second, "", "better", "why"]);
    for row in &comparison.rows {
        table.row([
            row.label.clone(),
            row.a.text.clone(),
            row.b.text.clone(),
            row.unit.to_owned(),
            match row.better {
                Better::A => first.to_owned(),
                Better::B => second.to_owned(),
                Better::Alike => "does not matter".to_owned(),
                Better::Unranked => "–".to_owned(),
            },
            row.why.clone(),
        ]);
    }
    text += &table.text();
    text += "\n";
    for (side, name) in [(Better::A, first), (Better::B, second)] {
        let rows = comparison.better_in(side);
        if !rows.is_empty() {
            text += &format!("{name} is better in: {}.\n", rows.join("; "));
        }
    }
    if project.rinse.is_default() {
        text += "Note: drag-out, rinse water and treatment are assumed: type your own under rinse. Your permit rules.\n";
    } else {
        text += "Note: your permit rules.\n";
    }
    for (who, remark) in &comparison.remarks {
        text += &format!("Note, {who}: {remark}.\n");
    }
    text
}

fn cell_json(cell: &Cell) -> Value {
    json!({ "value": cell.value, "text": cell.text })
}

fn row_json(row: &Row) -> Value {
    json!({
        "key": row.key,
        "label": row.label,
        "with": cell_json(&row.a),
        "and": cell_json(&row.b),
        "unit": row.unit,
        "better": match row.better {
            Better::A => "with",
            Better::B => "and",
            Better::Alike => "does not matter",
            Better::Unranked => "not ranked",
        },
        "why": row.why,
    })
}

fn side_json(side: &Side) -> Value {
    json!({
        "product": side.product().id,
        "name": side.product().name,
        "holds": match side.hold {
            Hold::Sure => "95 %",
            Hold::Plain => "plain",
            Hold::Not => "not",
        },
        "dose_g_per_L": side.dose_g_l,
    })
}

fn object(comparison: &Comparison) -> Value {
    json!({
        "bath": comparison.a.bath.project.name,
        "invented": comparison.a.bath.project.invented,
        "with": side_json(&comparison.a),
        "and": side_json(&comparison.b),
        "rows": comparison.rows.iter().map(row_json).collect::<Vec<_>>(),
        "remarks": comparison.remarks.iter().map(|(who, remark)| json!({ "who": who, "remark": remark })).collect::<Vec<_>>(),
        "permit": "your permit rules",
    })
}
