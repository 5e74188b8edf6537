//! How strongly each agent binds, why, and who holds it.

use super::super::side::Side;
use super::{Better, Cell, Row, because, decimals, rank, reach, words};
use crate::dosing::Holder;
use crate::quantity::percent;

/// Heat of complexation by calorimetry differs by this between laboratories, kJ/mol (from memory).
const HEAT_KJ: f64 = 2.0;

/// The rows of binding.
pub fn rows(a: &Side, b: &Side) -> Vec<Row> {
    let mut rows = strength(a, b);
    rows.extend(ledger(a, b));
    rows
}

fn strength(a: &Side, b: &Side) -> Vec<Row> {
    let Some(limit) = a.bath.limits.first() else { return Vec::new() };
    let metal = &a.bath.component(limit.component).name;
    let conditional = |side: &Side| side.conditional.map(|(log_k, _)| log_k);
    let sigma = |side: &Side| side.conditional.map_or(0.0, |(_, sigma)| sigma);
    let mut better = rank(conditional(a), conditional(b), reach(sigma(a), sigma(b)), false);
    let mut why =
        because(better, "holds the metal more tightly here", "within the uncertainty of the constants");
    if limit.floor.is_some() && better != Better::Alike {
        better = Better::Unranked;
        why = "tighter is no gain under a floor".to_owned();
    }
    let mut rows = vec![Row {
        key: "log_k_conditional".into(),
        label: format!("log K′ of {metal} in this bath"),
        a: decimals(conditional(a), 2),
        b: decimals(conditional(b), 2),
        unit: "",
        better,
        why,
    }];
    let chelate = |side: &Side| side.chelate.clone();
    let per_log_k = |side: &Side| {
        chelate(side).map_or(0.0, |c| if c.log_k == 0.0 { 0.0 } else { (c.dg_kj / c.log_k).abs() * c.sigma })
    };
    let dg = |side: &Side| chelate(side).map(|c| c.dg_kj);
    let dh = |side: &Side| chelate(side).and_then(|c| c.dh_kj);
    let tds = |side: &Side| chelate(side).and_then(|c| c.minus_tds_kj());
    let names: Vec<String> = [a, b].into_iter().filter_map(|side| chelate(side).map(|c| c.complex)).collect();
    let names: Vec<String> = names.iter().map(|token| crate::chemistry::pretty(token)).collect();
    let kj = |key: &str, label: String, of: &dyn Fn(&Side) -> Option<f64>, why: String| Row {
        key: key.to_owned(),
        label,
        a: decimals(of(a), 1),
        b: decimals(of(b), 1),
        unit: "kJ/mol",
        better: Better::Unranked,
        why,
    };
    let tolerance = reach(per_log_k(a), per_log_k(b));
    let dg_why = match (dg(a), dg(b)) {
        (Some(x), Some(y)) if (x - y).abs() <= tolerance => {
            "within the uncertainty of the constants".to_owned()
        }
        (Some(x), Some(y)) => format!(
            "{} is stronger on its own; protons and calcium decide in the bath",
            if x < y { a.short() } else { b.short() }
        ),
        _ => "no constant for a 1:1 complex".to_owned(),
    };
    rows.push(kj("dg", format!("ΔG° of {}", names.join(" and ")), &dg, dg_why));
    rows.push(kj("dh", "of it heat, ΔH°".into(), &dh, heat(dh(a), dh(b))));
    let disorder = match (tds(a), tds(b)) {
        (Some(x), Some(y)) if (x - y).abs() > 2.0 * HEAT_KJ => "the more negative sets more water free",
        (Some(_), Some(_)) => "alike in what they set free",
        _ => "a constant without enthalpy",
    };
    rows.push(kj("minus_tds", "of it disorder, −TΔS°".into(), &tds, disorder.into()));
    let count = |key: &str, label: &str, of: &dyn Fn(&Side) -> Option<(f64, String)>, why: &str| {
        let cell = |side: &Side| match of(side) {
            Some((value, text)) => Cell { value: Some(value), text },
            None => words("–"),
        };
        let (a, b) = (cell(a), cell(b));
        Row {
            key: key.to_owned(),
            label: label.to_owned(),
            a,
            b,
            unit: "",
            better: Better::Unranked,
            why: why.into(),
        }
    };
    let particles = |side: &Side| {
        let (before, after) = chelate(side)?.particles()?;
        Some((f64::from(after) - f64::from(before), format!("{before} to {after}")))
    };
    let rings = |side: &Side| chelate(side)?.rings().map(|rings| (f64::from(rings), rings.to_string()));
    rows.push(count("particles", "particles, before to after", &particles, "water pushed off the metal"));
    rows.push(count("rings", "chelate rings, at most", &rings, "bound donor atoms less one"));
    rows
}

fn heat(a: Option<f64>, b: Option<f64>) -> String {
    match (a, b) {
        (Some(a), Some(b)) if (a - b).abs() <= 2.0 * HEAT_KJ => "alike within calorimetry".to_owned(),
        (Some(_), Some(_)) => "the more negative loses more on heating".to_owned(),
        _ => "a constant without enthalpy".to_owned(),
    }
}

/// Holders that have a hundredth of either agent.
fn ledger(a: &Side, b: &Side) -> Vec<Row> {
    let name = |side: &Side, holder: &Holder| holder.name(&side.bath);
    let mut names: Vec<String> = Vec::new();
    for side in [a, b] {
        for entry in side.ledger.iter().filter(|entry| entry.share >= 0.01) {
            let name = name(side, &entry.holder);
            if !names.contains(&name) {
                names.push(name);
            }
        }
    }
    let share = |side: &Side, wanted: &str| -> f64 {
        side.ledger.iter().filter(|e| name(side, &e.holder) == wanted).map(|e| e.share).sum()
    };
    let cell = |share: f64| Cell { value: Some(share), text: percent(share) };
    names
        .into_iter()
        .map(|holder| Row {
            key: format!("held_by {holder}"),
            label: format!("agent held by {holder}"),
            a: cell(share(a, &holder)),
            b: cell(share(b, &holder)),
            unit: "",
            better: Better::Unranked,
            why: String::new(),
        })
        .collect()
}
