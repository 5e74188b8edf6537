//! The forecast in words, for the window, the command and the picture alike.

use super::bail_out::BailOut;
use super::crossings::Crossing;
use super::forecast::Forecast;
use crate::bath::{Rule, Running};
use crate::dosing::wall_name;
use crate::quantity::{fixed, grouped};

/// Hours as a shop says them: "21 h 36 min".
pub fn hours_words(hours: f64) -> String {
    let minutes = (hours * 60.0).round() as i64;
    match (minutes / 60, minutes % 60) {
        (0, minutes) => format!("{minutes} min"),
        (hours, 0) => format!("{hours} h"),
        (hours, minutes) => format!("{hours} h {minutes} min"),
    }
}

/// An hour of the forecast as a place in a shift: "shift 3, after 5 h 36 min".
pub fn in_shift(running: &Running, hour: f64) -> String {
    let length = running.steps_per_shift as f64 * running.step_h;
    let number = ((hour / length + 1e-9).floor() as usize).min(running.shifts - 1);
    let within = hour - number as f64 * length;
    let when =
        if within * 60.0 < 0.5 { "begin".to_owned() } else { format!("after {}", hours_words(within)) };
    format!("shift {}, {when}", number + 1)
}

/// "the nickel floor: not sure from shift 3, after 1 h 22 min; crossed from shift 6, after 7 h 23 min".
pub fn crossing_words(running: &Running, crossing: &Crossing) -> String {
    let when = |hour: f64| {
        if hour == 0.0 { "the beginning".to_owned() } else { in_shift(running, hour) }
    };
    let mut parts = Vec::new();
    if let Some(hour) = crossing.hour_95.filter(|sure| crossing.hour.is_none_or(|plain| *sure < plain)) {
        parts.push(format!("not sure from {}", when(hour)));
    }
    if let Some(hour) = crossing.hour {
        parts.push(format!("crossed from {}", when(hour)));
    }
    format!("{}: {}", wall_name(&running.bath, crossing.wall), parts.join("; "))
}

/// Solids that appear and components that run out, one sentence each.
pub fn events(running: &Running, forecast: &Forecast) -> Vec<String> {
    let bath = &running.bath;
    let when =
        |hour: f64| if hour == 0.0 { "from the beginning".to_owned() } else { in_shift(running, hour) };
    let solids = forecast.solids.iter().map(|solid| {
        let must_not = if solid.rule == Rule::MustNotForm { ", which must not form," } else { "" };
        format!("{}{must_not} appears: {}", bath.solid_name(solid.solid), when(solid.hour))
    });
    let used_up = forecast
        .used_up
        .iter()
        .map(|(component, hour)| format!("{} is used up: {}", bath.component(*component).name, when(*hour)));
    solids.chain(used_up).collect()
}

/// What a bail-out is for and how it is done.
pub fn bail_out_words(running: &Running, agent: usize, bail_out: &BailOut) -> String {
    let bath = &running.bath;
    let product = &bath.agents[agent].product.name;
    let walls: Vec<String> = bail_out.walls.iter().map(|wall| wall_name(bath, *wall)).collect();
    let mut words = format!(
        "{}: no addition of {product} keeps {} any more. Take out {} L and replace it with {}",
        sentence_case(&in_shift(running, bail_out.hour)),
        walls.join(" and "),
        grouped(bail_out.litres, 0),
        bail_out.refill.name(),
    );
    if let Some(measured) = bail_out.measured.as_ref().filter(|_| bail_out.dose_g_l > 0.0) {
        words += &format!(" plus {} of {product}", measured.amount);
    }
    if let Some((adjustment, measured)) = &bail_out.adjustment {
        words += &format!(" and {} of {}", measured.amount, adjustment.product.name);
    }
    words += &match &bail_out.otherwise {
        Some((refill, litres)) => {
            format!("; with {} it would take {} L", refill.name(), grouped(*litres, 0))
        }
        None => String::new(),
    };
    let holds = bail_out.holds_to - bail_out.hour;
    words + &format!(". That holds for {} h.", fixed(holds, if holds.fract() == 0.0 { 0 } else { 1 }))
}

fn sentence_case(text: &str) -> String {
    let mut text = text.to_owned();
    if let Some(first) = text.get_mut(..1) {
        first.make_ascii_uppercase();
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bath::{Bath, Demo, Shift};

    #[test]
    fn hours_are_said_as_a_shop_says_them() {
        assert_eq!(hours_words(21.6), "21 h 36 min");
        assert_eq!(hours_words(0.3), "18 min");
        assert_eq!(hours_words(7.9999), "8 h");
    }

    #[test]
    fn an_hour_lies_in_its_shift() {
        let bath = Bath::resolve(&Demo::named("copper_strike.ron").unwrap().project().unwrap()).unwrap();
        let running = bath.running(&Shift { hours: 7.5, ..Shift::default() }).unwrap();
        assert_eq!(in_shift(&running, 0.0), "shift 1, begin");
        assert_eq!(in_shift(&running, 7.5), "shift 2, begin");
        assert_eq!(in_shift(&running, 9.0), "shift 2, after 1 h 30 min");
        assert_eq!(in_shift(&running, 22.5), "shift 3, after 7 h 30 min");
    }
}
