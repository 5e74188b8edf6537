//! The rinse study in words and tables.

use super::super::table::Table;
use super::formed;
use crate::bath::{Bath, Rinse};
use crate::chemistry::pretty;
use crate::dosing::share_of_limit;
use crate::quantity::{fixed, percent, significant};
use crate::study::rinse::{Breaking, Broken, RinseStudy, Treated, Water, holders, sludge_g_l};

/// The whole study.
pub fn text(bath: &Bath, doses: &[f64], study: &RinseStudy) -> String {
    let line = &bath.project.rinse;
    let mut text = heading(bath, doses, study, line);
    text += &stages_table(study);
    text += &leaving(study, line);
    text += &treatment(study);
    text += &verdict(study);
    text += &breaking_text(study);
    text + &notes(study, line)
}

fn poured_text(treated: &Treated) -> String {
    treated
        .poured
        .as_ref()
        .map_or("–".to_owned(), |poured| format!("{} {}", significant(poured.g_l, 3), poured.product))
}

fn solids_text(study: &RinseStudy, solids: impl Iterator<Item = (usize, f64)>) -> String {
    let names: Vec<String> = solids.map(|(k, _)| pretty(&study.water.bath.system.solids[k].token)).collect();
    if names.is_empty() { "–".to_owned() } else { names.join(", ") }
}

fn heading(bath: &Bath, doses: &[f64], study: &RinseStudy, line: &Rinse) -> String {
    let invented = if bath.project.invented { " (demo bath, invented numbers)" } else { "" };
    let mut text = format!("Rinse behind {}{invented}\n", bath.project.name);
    for (agent, dose) in bath.agents.iter().zip(doses) {
        text += &format!("dose of {}: {} g/L\n", agent.product.name, significant(*dose, 4));
    }
    text += &format!(
        "drag-out {} L/h, water {} L/h, {} stage{} ({}), {} °C{}\n",
        significant(line.drag_out_l_h, 3),
        significant(line.flow_l_h, 3),
        line.stages,
        if line.stages == 1 { "" } else { "s" },
        line.arrangement.word(),
        fixed(line.temperature_c, 0),
        if study.assumed { "; all of it assumed: type your own under rinse" } else { "" },
    );
    text
}

fn stages_table(study: &RinseStudy) -> String {
    let names: Vec<String> = study.watched.iter().map(|metal| format!("{} mg/L", metal.name)).collect();
    let mut header = vec!["water", "bath in it", "own pH"];
    header.extend(names.iter().map(String::as_str));
    header.push("solids that form");
    let mut table = Table::new(&header);
    let mut row = |name: String, water: &Water| {
        let mut cells = vec![name, format!("1 : {}", significant(1.0 / water.share, 3)), fixed(water.ph, 2)];
        cells.extend(water.metal_mg_l.iter().map(|mg| significant(*mg, 3)));
        cells.push(solids_text(study, water.solids.iter().copied()));
        table.line(cells);
    };
    for (i, water) in study.stages.iter().enumerate() {
        row(format!("stage {}", i + 1), water);
    }
    row("to treatment".to_owned(), &study.waste);
    format!("\nRinse water, pH as it turns out\n{}", table.text())
}

fn leaving(study: &RinseStudy, line: &Rinse) -> String {
    let mut table = Table::new(&["complexing agent", "mg/L to treatment", "kg a day"]);
    for (name, mg, kg) in &study.agents {
        table.row([name.clone(), significant(*mg, 3), significant(*kg, 3)]);
    }
    let (phosphorus, nitrogen) = study.phosphorus_nitrogen_mg_l;
    format!(
        "\nLeaving in {} hours a day (agents as their acid)\n{}  phosphorus {} mg/L, nitrogen {} mg/L\n",
        significant(line.hours_per_day, 2),
        table.text(),
        significant(phosphorus, 3),
        significant(nitrogen, 3),
    )
}

fn treatment(study: &RinseStudy) -> String {
    let mut names = Vec::new();
    for metal in &study.watched {
        let limit = metal
            .limit
            .as_ref()
            .map_or("no limit".to_owned(), |limit| format!("limit {}", significant(limit.mg_l, 3)));
        names.push(format!("{} ({limit})", metal.name));
        names.push("without agents".to_owned());
    }
    let mut header = vec!["pH", "g/L of water"];
    header.extend(names.iter().map(String::as_str));
    header.extend(["dry sludge g/L", "solids with the agents"]);
    let mut table = Table::new(&header);
    for point in &study.scan {
        let mut cells = vec![fixed(point.ph, 1)];
        match &point.with_agents {
            Some(treated) => cells.push(poured_text(treated)),
            None => cells.push("not reached".to_owned()),
        }
        for i in 0..study.watched.len() {
            let number = |mg: Option<f64>| mg.map_or("–".to_owned(), |mg| significant(mg, 2));
            cells.push(number(point.with_agents.as_ref().map(|treated| treated.dissolved_mg_l[i])));
            cells.push(number(point.without_mg_l.as_ref().map(|without| without[i])));
        }
        match &point.with_agents {
            Some(treated) => {
                cells.push(significant(sludge_g_l(&study.water, &treated.solution), 2));
                cells.push(solids_text(study, formed(treated)));
            }
            None => cells.extend(["–".to_owned(), "–".to_owned()]),
        }
        table.line(cells);
    }
    format!("\nTreated with acid or alkali alone: metal that stays dissolved, mg/L\n{}", table.text())
}

fn verdict(study: &RinseStudy) -> String {
    let Some((best, treated)) =
        study.best.and_then(|best| Some((best, study.scan[best].with_agents.as_ref()?)))
    else {
        return "\nNo treatment pH can be reached.\n".to_owned();
    };
    if study.watched.is_empty() {
        return "\nThis bath brings no metal but hardness: there is no limit to compare with.\n".to_owned();
    }
    let limited = study.watched.iter().any(|metal| metal.limit.is_some());
    let nearest =
        if limited { "Nearest to the limits, or furthest under them," } else { "Least metal dissolved" };
    let mut text = format!("\n{nearest} at pH {}:\n", fixed(treated.ph, 1));
    if limited {
        text += &reaching(study);
    } else {
        text += "  No limit is published for these metals here: type your permit's under rinse.limits.\n";
    }
    for (i, metal) in study.watched.iter().enumerate() {
        let mg = treated.dissolved_mg_l[i];
        let without = study.scan[best].without_mg_l.as_ref().map(|without| without[i]);
        text += &format!("  {} {} mg/L", metal.name, significant(mg, 2));
        if let Some(limit) = &metal.limit {
            text += &format!(", {} of {} mg/L ({})", percent(mg / limit.mg_l), limit.mg_l, limit.rule);
        }
        if let Some(without) = without {
            text += &format!("; without agents {}", significant(without, 2));
        }
        if let Some(concentrated) = &study.concentrated_mg_l {
            text += &format!("; with a tenth of the rinse water {}", significant(concentrated[i], 2));
        }
        let held = holders(&study.water, &treated.solution, &metal.components);
        let held: Vec<String> = held
            .iter()
            .filter(|(_, share)| *share >= 0.01)
            .map(|(name, share)| format!("{name} {}", percent(*share)))
            .collect();
        text += &format!(". Held by: {}.\n", held.join(", "));
    }
    if let Some(share) = study.scan[best].worst_share_95(&study.watched).filter(|share| *share > 0.0) {
        text += &format!("  With 95 % confidence: {} of the nearest limit.\n", share_of_limit(share.log10()));
    }
    text
}

/// At which treatment pH alkali alone is enough.
fn reaching(study: &RinseStudy) -> String {
    let enough = |point: &&crate::study::rinse::ScanPoint| {
        point.with_agents.as_ref().is_some_and(|treated| treated.worst_share(&study.watched) <= 1.0)
    };
    let ph: Vec<String> = study.scan.iter().filter(enough).map(|point| fixed(point.ph, 1)).collect();
    if ph.is_empty() {
        "  Acid or alkali alone reaches the limits at no pH.\n".to_owned()
    } else {
        format!("  Acid or alkali alone reaches the limits at pH {}.\n", ph.join(", "))
    }
}

fn breaking_text(study: &RinseStudy) -> String {
    if study.breaking.is_empty() {
        return String::new();
    }
    let ph: Vec<String> = study.scan.iter().map(|point| format!("pH {}", fixed(point.ph, 1))).collect();
    let mut header = vec!["before the alkali"];
    header.extend(ph.iter().map(String::as_str));
    let mut table = Table::new(&header);
    for breaking in &study.breaking {
        let mut cells = vec![breaking.method.name.to_owned()];
        let dose = |broken: &Option<Broken>| {
            broken.as_ref().map_or("–".to_owned(), |broken| significant(broken.dose_g_l, 2))
        };
        cells.extend(breaking.by_ph.iter().map(dose));
        table.line(cells);
    }
    let mut text = format!(
        "\nBreaking the complex: smallest dose that reaches every limit, g of reagent per L of water\n{}",
        table.text()
    );
    for breaking in &study.breaking {
        text += &outcome(study, breaking);
    }
    if study.breaking.iter().all(|breaking| breaking.smallest().is_none()) {
        text += "  None of them reaches the limits: keep this water apart and recover it.\n";
    }
    text + "  An acid step changes the speed and the salt, not what a given water comes to. That iron(II) reduces copper(II) is not counted.\n"
}

/// One method in a sentence.
fn outcome(study: &RinseStudy, breaking: &Breaking) -> String {
    let (broken, begin) = match (breaking.smallest(), &breaking.best) {
        // That the alkali alone is enough stands above already.
        (Some(broken), _) if broken.dose_g_l == 0.0 && broken.acid.is_none() => return String::new(),
        (Some(broken), _) if broken.dose_g_l == 0.0 => (broken, "the acid step alone is enough".to_owned()),
        (Some(broken), _) => {
            let multiple = significant(broken.per_agent, 2);
            (broken, format!("from {} g/L ({multiple} mol per mol agent)", significant(broken.dose_g_l, 3)))
        }
        (None, Some(broken)) => {
            (broken, format!("not reached; nearest with {} g/L", significant(broken.dose_g_l, 3)))
        }
        (None, None) => return String::new(),
    };
    let metals = study.watched.iter().zip(&broken.treated.dissolved_mg_l);
    let left: Vec<String> = metals
        .filter(|(metal, _)| metal.limit.is_some())
        .map(|(metal, mg)| format!("{} {} mg/L", metal.name, significant(*mg, 2)))
        .collect();
    let acid = broken.acid.as_ref().map_or(String::new(), |step| {
        let poured = step
            .poured
            .as_ref()
            .map(|acid| format!(" with {} g/L {}", significant(acid.g_l, 2), acid.product));
        format!(
            "; first to pH {}{}, where {} of the metal is free of agents",
            fixed(step.ph, 1),
            poured.unwrap_or_default(),
            percent(step.freed)
        )
    });
    let then = broken.treated.poured.as_ref().map_or(String::new(), |poured| {
        format!(" with {} g/L {}", significant(poured.g_l, 3), poured.product)
    });
    format!(
        "  {}: {begin} at pH {}{then}: {}, {} of the limit{acid}.\n",
        breaking.method.name,
        fixed(broken.treated.ph, 1),
        left.join(", "),
        percent(broken.treated.worst_share(&study.watched)),
    )
}

fn notes(study: &RinseStudy, line: &Rinse) -> String {
    let mut text = String::from(
        "\nNote: your permit rules; its numbers, sampling and the laboratory decide, not this model.\n\
         Note: limits are meant for treated water; rinsing harder is dilution, which rules forbid in place of treatment.\n",
    );
    let before: Vec<String> = study
        .watched
        .iter()
        .zip(&study.waste.metal_mg_l)
        .filter(|(metal, mg)| metal.limit.as_ref().is_some_and(|limit| **mg <= limit.mg_l))
        .map(|(metal, _)| metal.name.clone())
        .collect();
    if !before.is_empty() {
        text += &format!(
            "Note: {} is under its limit before any treatment, by rinse water alone ({} L/h): that counts as dilution.\n",
            before.join(", "),
            significant(line.flow_l_h, 3)
        );
    }
    for (agent, rule) in &study.forbidden {
        text += &format!("Note: {agent} must not be in the waste water under {rule}.\n");
    }
    if study.water.no_acid {
        text += "Note: the water may hold cyanide, sulfide or hypochlorite: no acid is poured.\n";
    }
    for rests in &study.rests_on {
        text += &format!(
            "Rests on constants only: {}, log K {} ± {} ({}; {}).\n",
            rests.solid,
            rests.log_k,
            rests.sigma,
            rests.basis.word(),
            rests.source
        );
    }
    for flag in &study.flags {
        text += &format!("Note: {flag}.\n");
    }
    text + "Note: a jar test with the real water comes before any treatment.\n"
}
