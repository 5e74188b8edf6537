//! The rinse study as one JSON object.

use super::formed;
use crate::bath::Bath;
use crate::study::rinse::{Broken, RinseStudy, Treated, Water, sludge_g_l};
use serde_json::{Value, json};

/// The whole study; its fields are documented in the README.
pub fn object(bath: &Bath, doses: &[f64], study: &RinseStudy) -> Value {
    let agents: Vec<Value> = bath
        .agents
        .iter()
        .zip(doses)
        .map(|(agent, dose)| json!({ "product": agent.product.id, "g_per_L": dose }))
        .collect();
    json!({
        "bath": bath.project.name,
        "invented": bath.project.invented,
        "rinse_assumed": study.assumed,
        "doses": agents,
        "limits": study.watched.iter().map(|metal| json!({
            "metal": metal.name,
            "mg_per_L": metal.limit.as_ref().map(|limit| limit.mg_l),
            "max_mg_per_L": metal.limit.as_ref().and_then(|limit| limit.max_mg_l),
            "rule": metal.limit.as_ref().map(|limit| limit.rule.clone()),
        })).collect::<Vec<_>>(),
        "stages": study.stages.iter().map(|water| water_json(study, water)).collect::<Vec<_>>(),
        "to_treatment": water_json(study, &study.waste),
        "agents_leaving": study.agents.iter().map(|(name, mg, kg)| json!({
            "agent": name, "mg_per_L": mg, "kg_per_day": kg })).collect::<Vec<_>>(),
        "phosphorus_mg_per_L": study.phosphorus_nitrogen_mg_l.0,
        "nitrogen_mg_per_L": study.phosphorus_nitrogen_mg_l.1,
        "treatment": study.scan.iter().map(|point| json!({
            "pH": point.ph,
            "with_agents": point.with_agents.as_ref().map(|treated| treated_json(study, treated)),
            "sigma_log10": point.sigma,
            "share_of_limit_95": point.worst_share_95(&study.watched),
            "without_agents_mg_per_L": point.without_mg_l,
        })).collect::<Vec<_>>(),
        "nearest_pH": study.best.map(|best| study.scan[best].ph),
        "dissolved_with_a_tenth_of_the_water_mg_per_L": study.concentrated_mg_l,
        "breaking": study.breaking.iter().map(|breaking| json!({
            "method": breaking.method.name,
            "reagent": breaking.method.reagent,
            "smallest": breaking.smallest().map(|broken| broken_json(study, broken)),
            "dose_g_per_L_by_pH": study.scan.iter().zip(&breaking.by_ph).map(|(point, broken)| {
                json!({ "pH": point.ph, "dose_g_per_L": broken.as_ref().map(|broken| broken.dose_g_l) })
            }).collect::<Vec<_>>(),
            "best": breaking.best.as_ref().map(|broken| broken_json(study, broken)),
        })).collect::<Vec<_>>(),
        "forbidden": study.forbidden.iter().map(|(agent, rule)| json!({ "agent": agent, "rule": rule })).collect::<Vec<_>>(),
        "rests_on": study.rests_on.iter().map(|rests| json!({
            "solid": rests.solid, "log_k": rests.log_k, "sigma": rests.sigma,
            "basis": rests.basis.word(), "source": rests.source })).collect::<Vec<_>>(),
        "flags": study.flags.iter().map(|flag| json!(flag.to_string())).collect::<Vec<_>>(),
        "permit": "your permit rules",
    })
}

fn treated_json(study: &RinseStudy, treated: &Treated) -> Value {
    let metals = study.watched.iter().zip(&treated.dissolved_mg_l);
    let dissolved: serde_json::Map<String, Value> =
        metals.map(|(metal, mg)| (metal.name.clone(), json!(mg))).collect();
    let solids: serde_json::Map<String, Value> =
        formed(treated).map(|(k, n)| (study.water.bath.system.solids[k].token.clone(), json!(n))).collect();
    json!({
        "pH": treated.ph,
        "poured": treated.poured.as_ref().map(|p| json!({ "product": p.product, "g_per_L": p.g_l })),
        "dissolved_mg_per_L": dissolved,
        "share_of_limit": treated.worst_share(&study.watched),
        "solids_mol_per_L": solids,
        "dry_sludge_g_per_L": sludge_g_l(&study.water, &treated.solution),
    })
}

fn water_json(study: &RinseStudy, water: &Water) -> Value {
    let metals = study.watched.iter().zip(&water.metal_mg_l);
    let total: serde_json::Map<String, Value> =
        metals.map(|(metal, mg)| (metal.name.clone(), json!(mg))).collect();
    let solids: serde_json::Map<String, Value> = water
        .solids
        .iter()
        .map(|(k, n)| (study.water.bath.system.solids[*k].token.clone(), json!(n)))
        .collect();
    json!({ "share_of_bath": water.share, "pH": water.ph, "total_mg_per_L": total, "solids_mol_per_L": solids })
}

fn broken_json(study: &RinseStudy, broken: &Broken) -> Value {
    json!({
        "dose_g_per_L": broken.dose_g_l,
        "mol_per_mol_agent": broken.per_agent,
        "acid_step": broken.acid.as_ref().map(|step| json!({
            "pH": step.ph,
            "poured": step.poured.as_ref().map(|p| json!({ "product": p.product, "g_per_L": p.g_l })),
            "share_free_of_agents": step.freed,
        })),
        "treated": treated_json(study, &broken.treated),
    })
}
