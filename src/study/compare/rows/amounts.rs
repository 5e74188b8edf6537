//! Whether each dose holds, how much it is, what it costs, and the acid or alkali with it.

use super::super::side::Side;
use super::{Better, Cell, Row, because, not_equal, number, rank, words};
use crate::dosing::{Hold, share_of_limit};
use crate::quantity::significant;

/// Two corrections of pH nearer than this are alike: the meter finishes them.
const CORRECTION_SHARE: f64 = 0.05;

/// The rows of the dose itself.
pub fn rows(a: &Side, b: &Side) -> Vec<Row> {
    let mut rows = vec![holds(a, b)];
    rows.extend(amounts(a, b));
    rows.push(correction(a, b));
    rows
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
