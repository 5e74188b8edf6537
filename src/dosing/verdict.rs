//! One plain sentence for the doses as they stand.

use super::assess::{Assessment, WallReading};
use super::search::{Hold, Search};
use crate::bath::{Bath, ResolvedDerived, Wall};
use crate::quantity::{fixed, p_value, percent, significant};

/// Whether the doses hold.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum State {
    /// Every wall holds with 95 % confidence.
    Held,
    /// Every wall holds by plain numbers, but not with 95 % confidence.
    Unsure,
    /// Some wall is crossed.
    NotHeld,
    /// No dose up to the cap holds.
    Infeasible,
    /// There is no limit to hold.
    NoLimit,
}

impl State {
    /// The word for it.
    pub fn word(self) -> &'static str {
        match self {
            State::Held => "Held",
            State::Unsure => "Unsure",
            State::NotHeld => "Not held",
            State::Infeasible => "Infeasible",
            State::NoLimit => "No limit yet",
        }
    }
}

/// The state, its sentence and a short form for a status chip.
#[derive(Clone, Debug, PartialEq)]
pub struct Verdict {
    /// The state.
    pub state: State,
    /// One or two sentences that follow the state's word.
    pub sentence: String,
    /// "97 % of the copper ceiling at 95 %".
    pub short: String,
}

/// The verdict on an assessment; a finished search of the first free agent tells whether any dose would do.
pub fn verdict(bath: &Bath, assessment: &Assessment, search: Option<&Search>) -> Verdict {
    let Some(nearest) = assessment.nearest() else {
        return Verdict {
            state: State::NoLimit,
            sentence: "Set a ceiling under Limits, then find the dose.".to_owned(),
            short: String::new(),
        };
    };
    let surest =
        assessment.walls.iter().max_by(|a, b| a.excess_95.total_cmp(&b.excess_95)).unwrap_or(nearest);
    let short = |wall: &WallReading, sure: bool| {
        let excess = if sure { wall.excess_95 } else { wall.excess };
        let confidence = if sure { " at 95 %" } else { "" };
        format!("{} of {}{confidence}", share(excess), wall_name(bath, wall.wall))
    };
    if nearest.excess <= 0.0 {
        let state = if surest.excess_95 <= 0.0 { State::Held } else { State::Unsure };
        let sentence = match state {
            State::Held => held(bath, assessment, nearest, surest),
            _ => unsure(bath, nearest, surest, search),
        };
        return Verdict { state, sentence, short: short(surest, true) };
    }
    let none = search.filter(|search| search.found.is_none());
    let (state, mut sentence) =
        (if none.is_some() { State::Infeasible } else { State::NotHeld }, crossed(bath, nearest));
    match (none, search.and_then(|search| search.found.as_ref().map(|found| (search, found)))) {
        (Some(search), _) => {
            sentence = format!(
                "No dose of {} up to {} g/L holds; the best, {} g/L, still reaches {} of the nearest limit.",
                bath.agents[search.agent].product.name,
                significant(bath.agents[search.agent].max_g_l, 3),
                significant(search.best.0, 3),
                share(search.best.1),
            );
        }
        (None, Some((search, found))) => {
            let sure = if found.hold == Hold::Sure { ", with 95 % confidence" } else { "" };
            sentence += &format!(
                " From {} g/L of {} it holds{sure}.",
                significant(found.dose_g_l, 3),
                bath.agents[search.agent].product.name,
            );
        }
        (None, None) => {}
    }
    Verdict { state, sentence, short: short(nearest, false) }
}

/// A share of a limit: "69 %" below it, "1.6 ×" above.
pub fn share(excess: f64) -> String {
    let ratio = 10f64.powf(excess);
    if ratio <= 1.3 {
        percent(ratio)
    } else if ratio < 1e4 {
        format!("{} ×", significant(ratio, 2))
    } else {
        format!("10{} ×", super_digits(excess.round() as i64))
    }
}

fn super_digits(n: i64) -> String {
    n.to_string().chars().filter_map(|c| "⁰¹²³⁴⁵⁶⁷⁸⁹".chars().nth(c.to_digit(10)? as usize)).collect()
}

/// A wall in words: "the copper ceiling".
pub fn wall_name(bath: &Bath, wall: Wall) -> String {
    match wall {
        Wall::Ceiling(i) => format!("the {} ceiling", bath.component(bath.limits[i].component).name),
        Wall::Floor(i) => format!("the {} floor", bath.component(bath.limits[i].component).name),
        Wall::Solid(k) => format!("saturation with {}", bath.solid_name(k)),
        Wall::Derived(i) => {
            let metal = &bath.component(bath.limits[i].component).name;
            match bath.limits[i].derived {
                Some(ResolvedDerived::Solid(k, _)) => {
                    format!("the margin under saturation with {}", bath.solid_name(k))
                }
                Some(ResolvedDerived::Discharge(_)) => format!("the discharge limit of {metal}"),
                _ => format!("the immersion wall of {metal}"),
            }
        }
    }
}

/// Where a worst case is: "pH 9.2, 45 °C, copper 11.5 g/L".
pub fn place(bath: &Bath, reading: &super::Reading) -> String {
    let ph = reading.ph.is_finite().then(|| format!("pH {}", fixed(reading.ph, 1)));
    let temperature = Some(format!("{} °C", fixed(reading.temperature_c, 0)));
    let drifts = Some(bath.position_words(&reading.position)).filter(|words| !words.is_empty());
    [ph, temperature, drifts].into_iter().flatten().collect::<Vec<_>>().join(", ")
}

fn reaches(bath: &Bath, wall: &WallReading) -> String {
    match wall.wall {
        Wall::Ceiling(i) => {
            let metal = &bath.component(bath.limits[i].component).name;
            format!("free {metal} reaches {} of the ceiling", share(wall.excess))
        }
        Wall::Floor(i) => {
            let metal = &bath.component(bath.limits[i].component).name;
            format!(
                "free {metal} stays over its floor by a factor of {}",
                significant(10f64.powf(-wall.excess), 2)
            )
        }
        Wall::Solid(k) => format!("{} reaches {} of saturation", bath.solid_name(k), share(wall.excess)),
        Wall::Derived(i) => {
            let metal = &bath.component(bath.limits[i].component).name;
            let what = match bath.limits[i].derived {
                Some(ResolvedDerived::Solid(k, _)) => bath.solid_name(k).to_owned(),
                Some(ResolvedDerived::Discharge(_)) => format!("dissolved {metal}"),
                _ => format!("free {metal}"),
            };
            format!("{what} reaches {} of {}", share(wall.excess), wall_name(bath, wall.wall))
        }
    }
}

fn held(bath: &Bath, assessment: &Assessment, nearest: &WallReading, surest: &WallReading) -> String {
    let mut sentence = format!("At its worst ({}) {}", place(bath, &nearest.worst), reaches(bath, nearest));
    if nearest.wall == surest.wall {
        sentence += &match surest.wall {
            Wall::Floor(_) => {
                format!(", {} with 95 % confidence", significant(10f64.powf(-surest.excess_95), 2))
            }
            _ => format!(", {} with 95 % confidence", share(surest.excess_95)),
        };
    }
    let floor =
        assessment.walls.iter().find(|wall| matches!(wall.wall, Wall::Floor(_)) && wall.wall != nearest.wall);
    if let Some(floor) = floor {
        sentence +=
            &format!("; the floor stays clear by a factor of {}", significant(10f64.powf(-floor.excess), 2));
    }
    sentence + "."
}

fn unsure(bath: &Bath, nearest: &WallReading, surest: &WallReading, search: Option<&Search>) -> String {
    let mut sentence = format!(
        "The numbers hold ({} of {}), but not with 95 % confidence ({} of {}).",
        share(nearest.excess),
        wall_name(bath, nearest.wall),
        share(surest.excess_95),
        wall_name(bath, surest.wall),
    );
    if let Some(search) = search
        && let Some(found) = search.found.as_ref().filter(|found| found.hold == Hold::Sure)
    {
        let now = bath.project.agents[search.agent].dose_g_l;
        if found.dose_g_l > now {
            sentence += &format!(" {} g/L more settles it.", significant(found.dose_g_l - now, 2));
        }
    }
    sentence
}

fn crossed(bath: &Bath, wall: &WallReading) -> String {
    let at = place(bath, &wall.worst);
    match wall.wall {
        Wall::Ceiling(i) => {
            let component = bath.component(bath.limits[i].component);
            let ratio = 10f64.powf(wall.excess);
            format!(
                "At {at} free {} is {} × the ceiling (p{} {}).",
                component.name,
                significant(ratio, 2),
                component.short(),
                p_value(wall.worst.value)
            )
        }
        Wall::Floor(i) => {
            let component = bath.component(bath.limits[i].component);
            format!("At {at} free {} is {} of its floor.", component.name, percent(10f64.powf(-wall.excess)))
        }
        Wall::Solid(k) => {
            format!("At {at} {} forms (saturation index {}).", bath.solid_name(k), fixed(wall.excess, 1))
        }
        Wall::Derived(_) => format!("At {at} {}.", reaches(bath, wall)),
    }
}
