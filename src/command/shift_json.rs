//! The JSON object of `bathwright shift`; its fields are documented in the README.

use super::shift::Story;
use crate::bath::{Bath, Wall};
use crate::dosing::Measured;
use crate::study::shift::{BailOut, Forecast, TopUp, bail_out_words};
use serde_json::{Value, json};

pub fn json_text(story: &Story) -> Value {
    let Story { running, alone, plan, .. } = story;
    let bath: &Bath = &running.bath;
    let agent = &bath.agents[plan.agent].product;
    let bail_outs = plan.bail_outs.iter().map(|bail_out| {
        let mut object = bail_out_json(bath, bail_out);
        object["advice"] = json!(bail_out_words(running, plan.agent, bail_out));
        object
    });
    json!({
        "bath": bath.project.name,
        "invented": bath.project.invented,
        "shifts": running.shifts,
        "hours_per_shift": running.steps_per_shift as f64 * running.step_h,
        "volume_L": running.volume_l,
        "agent": { "product": agent.id, "name": agent.name },
        "starting_dose_g_per_L": bath.doses()[plan.agent],
        "starting_dose_found": story.found_first,
        "confidence": if plan.sure { "95 %" } else { "plain" },
        "holds": plan.fails_from.is_none() && plan.refused.is_none(),
        "left_alone": forecast_json(bath, alone),
        "with_additions": forecast_json(bath, &plan.forecast),
        "additions": plan.top_ups.iter().map(top_up_json).collect::<Vec<_>>(),
        "total_kg": plan.total_kg(),
        "bail_outs": bail_outs.collect::<Vec<_>>(),
        "fails_from_hour": plan.fails_from,
        "refused": plan.refused,
    })
}

fn wall(bath: &Bath, wall: Wall) -> Value {
    match wall {
        Wall::Ceiling(i) => {
            json!({ "wall": "ceiling", "of": bath.system.components[bath.limits[i].component] })
        }
        Wall::Floor(i) => json!({ "wall": "floor", "of": bath.system.components[bath.limits[i].component] }),
        Wall::Solid(k) => json!({ "wall": "solid", "of": bath.system.solids[k].token }),
        Wall::Derived(i) => {
            json!({ "wall": "derived", "of": bath.system.components[bath.limits[i].component] })
        }
    }
}

fn forecast_json(bath: &Bath, forecast: &Forecast) -> Value {
    let points = forecast.points.iter().map(|point| {
        let metals = bath.limits.iter().zip(&point.metals).map(|(limit, metal)| {
            json!({
                "metal": bath.system.components[limit.component],
                "pM": -metal.log10_free,
                "sigma_log10": metal.sigma,
                "pM_most_free": -metal.most,
                "pM_most_free_95": -metal.most_95,
                "pM_least_free": -metal.least,
                "pM_least_free_95": -metal.least_95,
            })
        });
        json!({
            "hour": point.hour,
            "metals": metals.collect::<Vec<_>>(),
            "share_of_limit": 10f64.powf(point.excess(false)),
            "share_of_limit_95": 10f64.powf(point.excess(true)),
        })
    });
    let crossings = forecast.crossings.iter().map(|crossing| {
        let mut object = wall(bath, crossing.wall);
        object["hour"] = json!(crossing.hour);
        object["hour_95"] = json!(crossing.hour_95);
        object
    });
    let solids = forecast
        .solids
        .iter()
        .map(|solid| json!({ "solid": bath.system.solids[solid.solid].token, "hour": solid.hour }));
    let used_up = forecast
        .used_up
        .iter()
        .map(|(component, hour)| json!({ "component": bath.system.components[*component], "hour": hour }));
    json!({
        "points": points.collect::<Vec<_>>(),
        "crossings": crossings.collect::<Vec<_>>(),
        "solids": solids.collect::<Vec<_>>(),
        "used_up": used_up.collect::<Vec<_>>(),
    })
}

fn top_up_json(top_up: &TopUp) -> Value {
    let adjustment = top_up.adjustment.as_ref().map(|(adjustment, measured)| {
        json!({
            "product": adjustment.product.id,
            "measure_out": measured.amount,
            "measured_kg": measured.rounded_kg,
        })
    });
    json!({
        "hour": top_up.hour,
        "measure_out": top_up.measured.amount,
        "measured_kg": top_up.measured.rounded_kg,
        "dose_g_per_L": top_up.dose_g_l,
        "share_of_agent": top_up.share.is_finite().then_some(top_up.share),
        "adjustment": adjustment,
    })
}

fn bail_out_json(bath: &Bath, bail_out: &BailOut) -> Value {
    let otherwise =
        bail_out.otherwise.map(|(refill, litres)| json!({ "refill": refill.name(), "litres": litres }));
    json!({
        "hour": bail_out.hour,
        "walls": bail_out.walls.iter().map(|&w| wall(bath, w)).collect::<Vec<_>>(),
        "litres": bail_out.litres,
        "refill": bail_out.refill.name(),
        "otherwise": otherwise,
        "dose_g_per_L": bail_out.dose_g_l,
        "measure_out": bail_out.measured.as_ref().map(|measured: &Measured| measured.amount.clone()),
        "holds_to_hour": bail_out.holds_to,
    })
}
