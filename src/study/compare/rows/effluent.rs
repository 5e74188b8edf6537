//! What each agent leaves in treated rinse water.

use super::super::side::{EFFLUENT_PH, Effluent, Side};
use super::{Cell, Row, because, number, rank, reach};
use crate::quantity::significant;

/// Two daily amounts nearer than this share are alike: drag-out and flow are not known better.
const ALIKE: f64 = 0.05;

/// The rows of the treated rinse water.
pub fn rows(a: &Side, b: &Side) -> Vec<Row> {
    let (Some(x), Some(y)) = (&a.effluent, &b.effluent) else { return Vec::new() };
    let mut rows = Vec::new();
    for (i, metal) in x.watched.iter().enumerate() {
        let Some(j) = y.watched.iter().position(|other| other.name == metal.name) else { continue };
        let (p, q) = (x.dissolved_mg_l[i], y.dissolved_mg_l[j]);
        let better = rank(Some(p.log10()), Some(q.log10()), reach(x.sigma[i], y.sigma[j]), true);
        let mut why = because(better, "less metal kept dissolved", "within the uncertainty of the constants");
        if let Some(limit) = &metal.limit {
            let over = match (p > limit.mg_l, q > limit.mg_l) {
                (true, true) => "both over",
                (false, false) => "both under",
                (true, false) => "the first over",
                (false, true) => "the second over",
            };
            why += &format!("; {over} the limit of {} mg/L", limit.mg_l);
        }
        rows.push(Row {
            key: format!("effluent {}", metal.name),
            label: format!("{} left in treated rinse water, pH {EFFLUENT_PH}", metal.name),
            a: number(Some(p), 2),
            b: number(Some(q), 2),
            unit: "mg/L",
            better,
            why,
        });
    }
    let poured = |effluent: &Effluent| match &effluent.poured_kg_day {
        Some((kg, name)) => Cell { value: Some(*kg), text: format!("{} {name}", significant(*kg, 2)) },
        None => Cell { value: Some(0.0), text: "none".to_owned() },
    };
    let daily = |key: &str, label: String, a: Cell, b: Cell| {
        let tolerance = ALIKE * a.value.unwrap_or(0.0).max(b.value.unwrap_or(0.0));
        let better = rank(a.value, b.value, tolerance, true);
        let why = because(better, "less of it", "nearly the same");
        Row { key: key.to_owned(), label, a, b, unit: "kg a day", better, why }
    };
    rows.push(daily(
        "treatment",
        format!("to bring the rinse water to pH {EFFLUENT_PH}"),
        poured(x),
        poured(y),
    ));
    let sludge = |effluent: &Effluent| number(Some(effluent.sludge_kg_day), 2);
    rows.push(daily("sludge", "dry sludge from that".to_owned(), sludge(x), sludge(y)));
    rows
}
