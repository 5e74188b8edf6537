//! The rows of a comparison: label, both values, which is better and why, or that it does not matter.

use super::band::Band;
use super::side::{EFFLUENT_PH, Side};
use crate::bath::Wall;
use crate::dosing::{CONFIDENCE_95, Hold, Holder, share_of_limit};
use crate::quantity::{fixed, percent, significant};

/// Which side a row speaks for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Better {
    /// The first.
    A,
    /// The second.
    B,
    /// Neither: the difference is within its uncertainty.
    Alike,
    /// Neither: the row explains and does not rank.
    Unranked,
}

/// A value as a number and as text.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Cell {
    /// The number in the row's unit, where there is one.
    pub value: Option<f64>,
    /// As it is shown, without unit.
    pub text: String,
}

/// One line of a comparison.
#[derive(Clone, Debug, PartialEq)]
pub struct Row {
    /// Unique short name for scripts.
    pub key: String,
    /// What is compared.
    pub label: String,
    /// Of the first side.
    pub a: Cell,
    /// Of the second.
    pub b: Cell,
    /// Unit of both; empty without one.
    pub unit: &'static str,
    /// Which is better.
    pub better: Better,
    /// Why, in a short phrase.
    pub why: String,
}

/// A drift of pH under this is within what a shop's meter shows (common practice).
const METER_PH: f64 = 0.1;
/// A drift of temperature under this is within what a controller holds (common practice).
const CONTROLLER_C: f64 = 2.0;
/// Two corrections of pH nearer than this are alike: the meter finishes them.
const CORRECTION_SHARE: f64 = 0.05;
/// Heat of complexation by calorimetry differs by this between laboratories, kJ/mol (from memory).
const HEAT_KJ: f64 = 2.0;

/// All rows, in the order in which they are read.
pub fn rows(a: &Side, b: &Side) -> Vec<Row> {
    let mut rows = vec![holds(a, b)];
    rows.extend(amounts(a, b));
    rows.extend(bands(a, b));
    rows.extend(strength(a, b));
    rows.extend(ledger(a, b));
    rows.push(correction(a, b));
    rows.extend(solids(a, b));
    rows.extend(effluent(a, b));
    rows
}

fn number(value: Option<f64>, figures: usize) -> Cell {
    Cell { value, text: value.map_or("–".to_owned(), |value| significant(value, figures)) }
}

fn words(text: impl Into<String>) -> Cell {
    Cell { value: None, text: text.into() }
}

/// Ranks two values: alike within the tolerance, else the lower or the higher one.
fn rank(a: Option<f64>, b: Option<f64>, tolerance: f64, lower_is_better: bool) -> Better {
    match (a, b) {
        (Some(a), Some(b)) if (a - b).abs() <= tolerance => Better::Alike,
        (Some(a), Some(b)) if (a < b) == lower_is_better => Better::A,
        (Some(_), Some(_)) => Better::B,
        _ => Better::Unranked,
    }
}

fn because(better: Better, ranked: &str, alike: &str) -> String {
    match better {
        Better::A | Better::B => ranked.to_owned(),
        Better::Alike => alike.to_owned(),
        Better::Unranked => String::new(),
    }
}

/// Combined reach of two standard uncertainties at 95 %.
fn reach(a: f64, b: f64) -> f64 {
    CONFIDENCE_95 * a.hypot(b)
}

fn holds(a: &Side, b: &Side) -> Row {
    let cell = |side: &Side| {
        words(match side.hold {
            Hold::Sure => "with 95 % confidence".to_owned(),
            Hold::Plain => "by plain numbers only".to_owned(),
            Hold::Not => format!("at no dose; the best reaches {}", share_of_limit(side.search.best.1)),
        })
    };
    let better = match a.hold.cmp(&b.hold) {
        std::cmp::Ordering::Greater => Better::A,
        std::cmp::Ordering::Less => Better::B,
        std::cmp::Ordering::Equal => Better::Alike,
    };
    let why = because(better, "the surer result", "equal result");
    let label = "holds every limit".to_owned();
    Row { key: "holds".into(), label, a: cell(a), b: cell(b), unit: "", better, why }
}

/// Half the spread of a product's assay, as a share.
fn assay_share(side: &Side) -> f64 {
    let assay = side.product().assay_percent;
    0.5 * (assay.high - assay.low) / assay.typical
}

fn amounts(a: &Side, b: &Side) -> Vec<Row> {
    let equal = a.hold == b.hold && a.hold != Hold::Not;
    let row = |key: &str, label: &str, unit, of: &dyn Fn(&Side) -> f64, ranked: &str| {
        let (x, y) = (of(a), of(b));
        let tolerance = x * assay_share(a) + y * assay_share(b);
        let better = if equal { rank(Some(x), Some(y), tolerance, true) } else { Better::Unranked };
        let why = match better {
            Better::Unranked => not_equal(a, b),
            better => because(better, ranked, "within the assay of the products"),
        };
        let (a, b) = (number(Some(x), 3), number(Some(y), 3));
        Row { key: key.to_owned(), label: label.to_owned(), a, b, unit, better, why }
    };
    let mut rows = vec![
        row("dose", "smallest dose", "g/L", &|side| side.dose_g_l, "less to weigh"),
        row("moles", "agent in it", "mmol/L", &|side| side.mol_l() * 1e3, "each mole does more"),
        row("mass", "for the tank", "kg", &Side::kg, "less to handle"),
        row("lost", "of it lost by drag-out", "kg a day", &Side::lost_kg_day, "less to replace and to treat"),
    ];
    for (cell, side) in [a, b].into_iter().enumerate().filter(|(_, side)| side.hold == Hold::Not) {
        let text = if cell == 0 { &mut rows[0].a.text } else { &mut rows[0].b.text };
        *text = format!("best {} of up to {}", significant(side.dose_g_l, 3), significant(side.cap(), 3));
    }
    rows.push(cost(a, b, equal));
    if a.hold != Hold::Plain || b.hold != Hold::Plain {
        let plain = |side: &Side| side.search.plain_g_l;
        let share = |side: &Side| plain(side).unwrap_or(0.0) * assay_share(side);
        let better = rank(plain(a), plain(b), share(a) + share(b), true);
        rows.push(Row {
            key: "plain_dose".into(),
            label: "dose by plain numbers".into(),
            a: number(plain(a), 3),
            b: number(plain(b), 3),
            unit: "g/L",
            better,
            why: because(better, "less, where confidence is not asked", "within the assay of the products"),
        });
    }
    rows
}

fn not_equal(a: &Side, b: &Side) -> String {
    let weaker = if a.hold < b.hold { a } else { b };
    match weaker.hold {
        Hold::Not => format!("not at equal result: {} holds at no dose", weaker.short()),
        _ => format!("not at equal result: {} holds by plain numbers only", weaker.short()),
    }
}

fn cost(a: &Side, b: &Side, equal: bool) -> Row {
    let range = |side: &Side| side.product().price_per_kg.map(|p| (p.low * side.kg(), p.high * side.kg()));
    let cell = |side: &Side| match (side.product().price(), range(side)) {
        (Some(price), Some((low, high))) => Cell {
            value: Some(price * side.kg()),
            text: format!(
                "{} ({} to {})",
                significant(price * side.kg(), 2),
                significant(low, 2),
                significant(high, 2)
            ),
        },
        _ => words("no price"),
    };
    let own = |side: &Side| side.bath.project.products.iter().any(|mine| mine.id == side.product().id);
    let note = if own(a) && own(b) { "own prices" } else { "illustrative prices" };
    let (better, why) = match (range(a), range(b)) {
        (Some(_), Some(_)) if !equal => (Better::Unranked, not_equal(a, b)),
        (Some(x), Some(y)) if x.1 < y.0 => (Better::A, format!("cheaper at any price in range; {note}")),
        (Some(x), Some(y)) if y.1 < x.0 => (Better::B, format!("cheaper at any price in range; {note}")),
        (Some(_), Some(_)) => (Better::Alike, format!("price ranges overlap; {note}")),
        _ => (Better::Unranked, "a price is missing".to_owned()),
    };
    Row {
        key: "cost".into(),
        label: "cost for the tank".into(),
        a: cell(a),
        b: cell(b),
        unit: "",
        better,
        why,
    }
}

fn bands(a: &Side, b: &Side) -> [Row; 2] {
    let row =
        |key: &str, label: &str, unit, of: fn(&Side) -> Option<Band>, decimals, tolerance, alike: &str| {
            let cell = |side: &Side| match of(side) {
                Some(band) => {
                    let mark = |open: bool| if open { " or beyond" } else { "" };
                    Cell {
                        value: Some(band.width()),
                        text: format!(
                            "{}{} to {}{}",
                            fixed(band.low, decimals),
                            mark(band.open.0),
                            fixed(band.high, decimals),
                            mark(band.open.1)
                        ),
                    }
                }
                None => words("none"),
            };
            let sure = |side: &Side| of(side).map(|band| band.sure);
            let width = |side: &Side| of(side).map(|band| band.width());
            let (better, why) = if sure(a) != sure(b) {
                (Better::Unranked, not_equal(a, b))
            } else {
                let better = rank(width(a), width(b), tolerance, false);
                (better, because(better, "stands more drift at its dose", alike))
            };
            Row { key: key.to_owned(), label: label.to_owned(), a: cell(a), b: cell(b), unit, better, why }
        };
    [
        row("ph_band", "pH that still holds", "", |s| s.ph_band, 2, METER_PH, "within what a meter shows"),
        row(
            "temperature_band",
            "temperature that still holds",
            "°C",
            |s| s.temperature_band,
            0,
            CONTROLLER_C,
            "within what a controller holds",
        ),
    ]
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

fn decimals(value: Option<f64>, decimals: usize) -> Cell {
    Cell { value, text: value.map_or("–".to_owned(), |value| fixed(value, decimals)) }
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

fn correction(a: &Side, b: &Side) -> Row {
    let grams =
        |side: &Side| side.corrected.adjustment.as_ref().map_or(0.0, |adjustment| adjustment.dose_g_l);
    let cell = |side: &Side| match (&side.corrected.adjustment, &side.corrected.failure) {
        (Some(adjustment), _) => Cell {
            value: Some(adjustment.dose_g_l),
            text: format!("{} {}", significant(adjustment.dose_g_l, 3), adjustment.product.name),
        },
        (None, Some(failure)) => words(failure.clone()),
        (None, None) => Cell { value: Some(0.0), text: "none".to_owned() },
    };
    let failed = a.corrected.failure.is_some() || b.corrected.failure.is_some();
    let tolerance = CORRECTION_SHARE * grams(a).max(grams(b));
    let better = if failed || a.hold != b.hold {
        Better::Unranked
    } else {
        rank(Some(grams(a)), Some(grams(b)), tolerance, true)
    };
    let why = match better {
        Better::Unranked if a.hold != b.hold => not_equal(a, b),
        better => because(better, "less acid or alkali with it", "the meter finishes it"),
    };
    Row {
        key: "correction".into(),
        label: "to bring the pH back".into(),
        a: cell(a),
        b: cell(b),
        unit: "g/L",
        better,
        why,
    }
}

/// The forbidden solid that comes nearest at the worst of the range: saturation index, its uncertainty, name.
fn nearest_solid(side: &Side) -> Option<(f64, f64, String)> {
    let solids = side.assessment.walls.iter().filter_map(|wall| match wall.wall {
        Wall::Solid(k) => Some((wall.excess, wall.worst.sigma, side.bath.solid_name(k).to_owned())),
        _ => None,
    });
    solids.filter(|(excess, ..)| excess.is_finite()).max_by(|x, y| x.0.total_cmp(&y.0))
}

fn solids(a: &Side, b: &Side) -> Option<Row> {
    let (x, y) = (nearest_solid(a), nearest_solid(b));
    if x.is_none() && y.is_none() {
        return None;
    }
    let cell = |solid: &Option<(f64, f64, String)>| match solid {
        Some((index, _, name)) => Cell { value: Some(*index), text: format!("{} {name}", fixed(*index, 2)) },
        None => words("none can form"),
    };
    let index = |solid: &Option<(f64, f64, String)>| solid.as_ref().map(|s| s.0);
    let sigma = |solid: &Option<(f64, f64, String)>| solid.as_ref().map_or(0.0, |s| s.1);
    let better = rank(index(&x), index(&y), reach(sigma(&x), sigma(&y)), true);
    Some(Row {
        key: "solid".into(),
        label: "nearest solid that must not form, saturation index at worst".into(),
        a: cell(&x),
        b: cell(&y),
        unit: "",
        better,
        why: because(better, "further from clouding", "within the uncertainty of the constants"),
    })
}

fn effluent(a: &Side, b: &Side) -> Vec<Row> {
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
    rows
}
