//! The JSON object of `bathwright correct`; its fields are documented in the README.

use super::CommandError;
use crate::bath::{Adjustment, Bath};
use crate::dosing::{Hold, plan, wall_name};
use crate::study::correction::{Correction, Effect, Refill, Remedy};
use serde_json::{Value, json};

/// The object.
pub fn object(correction: &Correction) -> Result<Value, CommandError> {
    let bath = &correction.bath;
    let nearest = correction.nearest();
    let inputs: Vec<Value> = correction
        .inputs
        .iter()
        .enumerate()
        .map(|(number, input)| {
            let (kind, sigma) = match input.effect {
                Effect::Totals(_) => ("total", "sigma_relative"),
                Effect::Ph => ("pH", "sigma_pH"),
            };
            json!({
                "name": input.name,
                "kind": kind,
                "value": input.amount,
                "recipe": input.believed,
                sigma: input.sigma,
                "sigma_stated": input.stated,
                "evidence": input.trust.word(),
                "analysed": input.analysed,
                "share_of_variance": nearest.map_or(0.0, |wall| wall.spread.share(number)),
            })
        })
        .collect();
    let metals: Vec<Value> = correction
        .metals
        .iter()
        .map(|metal| {
            json!({
                "metal": bath.system.components[bath.limits[metal.limit].component],
                "mol_per_L": metal.free,
                "sigma_log10": metal.spread.total(),
                "sigma_log10_constants": metal.spread.constants,
            })
        })
        .collect();
    let walls: Vec<Value> = correction
        .walls
        .iter()
        .map(|wall| {
            json!({
                "wall": wall_name(bath, wall.wall),
                "pH": wall.worst.ph,
                "temperature_C": wall.worst.temperature_c,
                "share_of_limit": 10f64.powf(wall.excess),
                "share_of_limit_95": 10f64.powf(wall.excess_95),
                "sigma_log10": wall.spread.total(),
            })
        })
        .collect();
    Ok(json!({
        "bath": bath.project.name,
        "invented": bath.project.invented,
        "inputs": inputs,
        "pH": correction.ph.map(|ph| json!({
            "meter": ph.meter,
            "meter_temperature_C": ph.meter_temperature_c,
            "bath": ph.bath,
            "bath_temperature_C": ph.bath_temperature_c,
            "sigma": ph.sigma,
            "outside_range": correction.ph_outside,
            "bring_back": correction.bring_back.as_ref().filter(|_| correction.refused.is_none()).map(adjustment),
        })),
        "free_metals": metals,
        "walls": walls,
        "remedy": remedy(correction)?,
        "measure_first": correction.rests_on.iter()
            .map(|&number| correction.inputs[number].name.clone()).collect::<Vec<_>>(),
    }))
}

fn adjustment(adjustment: &Adjustment) -> Value {
    json!({ "product": adjustment.product.id, "g_per_L": adjustment.dose_g_l })
}

fn confidence(hold: Hold) -> Value {
    match hold {
        Hold::Sure => json!("95 %"),
        Hold::Plain => json!("plain"),
        Hold::Not => Value::Null,
    }
}

fn kg(bath: &Bath, dose_g_l: f64) -> f64 {
    dose_g_l * bath.project.tank.volume_l / 1000.0
}

fn remedy(correction: &Correction) -> Result<Value, CommandError> {
    let bath = &correction.bath;
    if let Some(refused) = &correction.refused {
        return Ok(json!({ "kind": "refused", "reason": refused }));
    }
    Ok(match &correction.remedy {
        Remedy::Nothing => json!({ "kind": "nothing", "confidence": "95 %" }),
        Remedy::Unsure => json!({ "kind": "nothing", "confidence": "plain" }),
        Remedy::Add { agent, dose_g_l, hold, search } => {
            let mut doses = vec![0.0; bath.agents.len()];
            doses[*agent] = *dose_g_l;
            let plan = plan(bath, &doses)?;
            json!({
                "kind": "add",
                "confidence": confidence(*hold),
                "product": bath.agents[*agent].product.id,
                "dose_g_per_L": dose_g_l,
                "dose_kg": kg(bath, *dose_g_l),
                "dose_with_perfect_analysis_g_per_L": search.found.as_ref().map(|found| found.dose_g_l),
                "additions": plan.additions.iter().map(|addition| json!({
                    "product": addition.product.id,
                    "exact_g_per_L": addition.exact_g_l,
                    "measure_out": addition.measured.amount,
                })).collect::<Vec<_>>(),
            })
        }
        Remedy::BailOut(found) => json!({
            "kind": "bail-out",
            "confidence": confidence(found.hold),
            "refill": match found.refill { Refill::Water => "water", Refill::Fresh => "fresh" },
            "share": found.share,
            "litres": found.share * bath.project.tank.volume_l,
            "product": found.dose.map(|(agent, _)| bath.agents[agent].product.id.clone()),
            "dose_g_per_L": found.dose.map(|(_, dose)| dose),
            "dose_kg": found.dose.map(|(_, dose)| kg(bath, dose)),
        }),
        Remedy::None(reason) => json!({
            "kind": "none",
            "best_dose_g_per_L": reason.best_dose_g_l,
            "best_share_of_limit": 10f64.powf(reason.best.excess()),
        }),
    })
}
