//! From a planned dose to the sheet's data: the one place where the sheet's numbers are rounded and worded.

use super::evidence::{constants_table, equilibrium_table, margins_table, solids_table};
use super::model::{Addition, DosingSheet, FileCopy, Finding, Header, Retest, RetestColumn, Target};
use crate::bath::{Bath, Content, Solids, Trust, flags};
use crate::chemistry::{Form, PROTON, Product, pretty};
use crate::dosing::{Assessment, Plan, ROUNDING_FLAG, Step, Verdict, share_of_limit, wall_name};
use crate::equilibrium::{Equilibrium, EquilibriumError, Solver};
use crate::quantity::{fixed, grouped, p_value, plain, significant};
use sha2::{Digest as _, Sha256};

/// Largest pH that a spread around an expected value is printed with.
const PH_TOLERANCE: f64 = 0.1;
/// Amount of a portion, kg, that is added in ten minutes; a tenth of it in five.
const SLOW_ADDITION_KG: f64 = 5.0;

/// Builds the sheet for a plan. `date` is printed as it is given: the caller knows the clock.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn content(
    bath: &Bath,
    plan: &Plan,
    verdict: &Verdict,
    date: Option<String>,
) -> Result<DosingSheet, EquilibriumError> {
    let constants = bath.constants_at(bath.project.tank.temperature_c.set);
    let totals = bath.corrected(&plan.rounded_doses)?.totals;
    let solution = bath.solve_totals(&mut Solver::new(), &constants, &totals, bath.ph_set(), Solids::Real)?;
    let refused = plan.refused.is_some();
    Ok(DosingSheet {
        header: header(bath, &solution, date),
        found: found(bath),
        targets: targets(bath, plan),
        before_you_start: before_you_start(),
        additions: (0..plan.steps.len()).map(|number| addition(bath, plan, number)).collect(),
        refused: plan.refused.clone(),
        stop: stop(bath, plan),
        retest: if refused { Retest::default() } else { retest(bath, plan, &solution) },
        chemists_number: chemists_number(bath, plan, verdict),
        cautions: cautions(plan),
        sign_off: [
            "Issued by (chemist)",
            "Measured out by",
            "Witnessed by",
            "Added by",
            "Re-tested by",
            "Tank released by",
        ]
        .map(str::to_owned)
        .to_vec(),
        file_copy: file_copy(bath, plan, &solution),
    })
}

fn header(bath: &Bath, solution: &Equilibrium, date: Option<String>) -> Header {
    let project = &bath.project;
    let some = |text: &str| (!text.trim().is_empty()).then(|| text.to_owned());
    let (line, tank) = match project.place.split_once(',') {
        Some((line, tank)) => (some(line.trim()), capitalised(tank.trim())),
        None => (None, project.place.clone()),
    };
    Header {
        bath: project.name.clone(),
        tank,
        line,
        title: "Dosing sheet".to_owned(),
        sheet_no: None,
        date,
        shift: some(&project.sheet.shift),
        valid_until: None,
        prepared_by: some(&project.sheet.prepared_by),
        program_version: format!("Bathwright {}", env!("CARGO_PKG_VERSION")),
        project_hash: project_hash(bath),
        basis: Some(format!(
            "{} °C, I = {} mol/L, equilibrium only",
            fixed(project.tank.temperature_c.set, 0),
            significant(solution.ionic_strength, 2),
        )),
        invented: project.invented,
    }
}

/// The first letter as a capital: "tank 7" heads the sheet as "Tank 7".
fn capitalised(text: &str) -> String {
    let mut letters = text.chars();
    letters.next().map_or_else(String::new, |first| first.to_uppercase().chain(letters).collect())
}

/// First eight hexadecimal digits of the project's SHA-256, to tell which project a sheet came from.
fn project_hash(bath: &Bath) -> String {
    let text = crate::bath::write(&bath.project).unwrap_or_default();
    let digest = Sha256::digest(text.as_bytes());
    let hex: String = digest.iter().take(4).map(|byte| format!("{byte:02x}")).collect();
    format!("{} {}", &hex[..4], &hex[4..])
}

/// Largest number of findings that stand side by side.
const MAX_FINDINGS: usize = 5;

fn found(bath: &Bath) -> Vec<Finding> {
    let tank = &bath.project.tank;
    let mut findings = vec![Finding {
        label: "Level".to_owned(),
        value: format!("{} L", grouped(tank.volume_l, 0)),
        range: "working volume".to_owned(),
        evidence: "read the mark today".to_owned(),
        emphasised: false,
    }];
    if let Some(range) = bath.ph() {
        findings.push(Finding {
            label: "pH at bath temp.".to_owned(),
            value: fixed(range.set, 2),
            range: format!("range {} to {}", plain(range.low, 2), plain(range.high, 2)),
            evidence: "set point".to_owned(),
            emphasised: false,
        });
    }
    let t = tank.temperature_c;
    findings.push(Finding {
        label: "Temperature".to_owned(),
        value: format!("{} °C", plain(t.set, 1)),
        range: format!("range {} to {}", plain(t.low, 1), plain(t.high, 1)),
        evidence: "set point".to_owned(),
        emphasised: false,
    });
    let room = MAX_FINDINGS.saturating_sub(findings.len());
    let mut contents: Vec<&Content> = bath.project.contents.iter().collect();
    // Limited metals and the agent matter most to the dose; they come first.
    contents.sort_by_key(|content| !matters(bath, content));
    findings.extend(contents.into_iter().take(room).map(|content| Finding {
        label: content_name(bath, &content.what),
        value: format!("{} {}", plain(content.amount.value, 4), content.amount.unit.symbol()),
        range: String::new(),
        evidence: evidence(content),
        emphasised: matches!(content.trust, Trust::Inferred | Trust::Assumed),
    }));
    findings
}

fn matters(bath: &Bath, content: &Content) -> bool {
    let index = bath.library.component_named(&content.what);
    let component = index.and_then(|index| bath.present.iter().position(|&known| known == index));
    component.is_some_and(|component| {
        bath.limits.iter().any(|limit| limit.component == component)
            || bath.agents.iter().any(|agent| agent.active == component)
    })
}

fn evidence(content: &Content) -> String {
    if content.note.is_empty() {
        content.trust.word().to_owned()
    } else {
        format!("{}, {}", content.trust.word(), content.note)
    }
}

/// Name of a constituent as people say it.
pub(crate) fn content_name(bath: &Bath, what: &str) -> String {
    if let Some(product) = bath.catalogue.find(what) {
        return product.name.clone();
    }
    match bath.library.component_named(what) {
        Some(index) => {
            let component = &bath.library.components[index];
            let acid = if component.acid_form.is_some() { ", as acid" } else { "" };
            format!("{}{acid}", capitalised(&component.name))
        }
        None => pretty(what),
    }
}

fn targets(bath: &Bath, plan: &Plan) -> Vec<Target> {
    let walls = plan.before.walls.iter().zip(&plan.after.walls);
    walls
        .filter_map(|(before, after)| {
            let (limit, level, kind) = match after.wall {
                crate::bath::Wall::Ceiling(i) => (i, bath.limits[i].ceiling?, "ceiling"),
                crate::bath::Wall::Floor(i) => (i, bath.limits[i].floor?, "floor"),
                crate::bath::Wall::Solid(_) | crate::bath::Wall::Derived(_) => return None,
            };
            let component = bath.component(bath.limits[limit].component);
            let predicted = |excess: f64, value: f64| {
                let share = if kind == "ceiling" { share_of_limit(excess) } else { share_of_limit(-excess) };
                format!("{share} of the {kind} (p{} {})", component.short(), p_value(value))
            };
            Some(Target {
                metal: component.name.clone(),
                ceiling: format!(
                    "{kind} {} mol/L (p{} {})",
                    significant(level, 2),
                    component.short(),
                    p_value(level)
                ),
                wall: bath.limits[limit].wall.clone(),
                before: predicted(before.excess, before.worst.value),
                after: predicted(after.excess, after.worst.value),
            })
        })
        .collect()
}

fn before_you_start() -> Vec<String> {
    ["parts out", "current OFF", "heater OFF", "air and pump ON", "carbon filter OFF", "level checked"]
        .map(str::to_owned)
        .to_vec()
}

fn addition(bath: &Bath, plan: &Plan, number: usize) -> Addition {
    let step: &Step = &plan.steps[number];
    let first = plan.steps[..number].iter().position(|earlier| earlier.addition == step.addition);
    let whole = &plan.additions[step.addition];
    let product = &whole.product;
    let (portion, portions) = step.portion;
    let by_meter = whole.agent.is_none() && portion == portions;
    let mut measure = vec![step.measured.how.clone()];
    if portions > 1 {
        measure.push(format!("part {portion} of {portions}"));
    }
    if by_meter {
        measure.push("stop at the set pH".to_owned());
    }
    let exact = if portions > 1 {
        (portion == 1).then(|| format!("all parts together: exact {}", whole.measured.exact))
    } else {
        Some(format!("exact {}", whole.measured.exact))
    };
    let set = bath.ph();
    let then_ph = match (by_meter, set) {
        (true, Some(range)) => Some(spread(range.set)),
        _ => step.ph_after.map(spread),
    };
    let slow = step.measured.rounded_kg >= SLOW_ADDITION_KG;
    Addition {
        material: product.name.clone(),
        details: match first {
            Some(first) => vec![format!("same drum as step {}", first + 1)],
            None => details(product),
        },
        amount: if by_meter {
            format!("up to {}", step.measured.amount)
        } else {
            step.measured.amount.clone()
        },
        measure,
        exact,
        how: match first {
            Some(first) => format!("As in step {}.", first + 1),
            None if product.dissolve.is_empty() => "Over the weir, slowly, with the pump on.".to_owned(),
            None => product.dissolve.clone(),
        },
        add_over: Some(if slow { "10 min" } else { "5 min" }.to_owned()),
        wait: Some("5 min".to_owned()),
        then_ph,
    }
}

fn spread(ph: f64) -> String {
    format!("{} to {}", fixed(ph - PH_TOLERANCE, 1), fixed(ph + PH_TOLERANCE, 1))
}

fn details(product: &Product) -> Vec<String> {
    let mut lines = Vec::new();
    let form = if product.form == Form::Liquid { "solution" } else { product.form.word() };
    let basis =
        if product.assay_basis.is_empty() { String::new() } else { format!(" {}", product.assay_basis) };
    lines.push(format!("{form}, {} %{basis}", plain(product.assay_percent.typical, 2)));
    if !product.cas.is_empty() {
        lines.push(format!("CAS {}", product.cas));
    }
    if let Some(density) = product.density_g_ml {
        lines.push(format!("density {}", plain(density, 3)));
    }
    lines
}

/// Room beyond the operating range, and beyond what the additions themselves do, before the operator has to stop.
const STOP_PH_ROOM: f64 = 0.3;

fn stop(bath: &Bath, plan: &Plan) -> Vec<String> {
    let mut stop = Vec::new();
    if let Some(range) = bath.ph() {
        let on_the_way = || plan.steps.iter().filter_map(|step| step.ph_after);
        let low = on_the_way().fold(range.low, f64::min) - STOP_PH_ROOM;
        let high = on_the_way().fold(range.high, f64::max) + STOP_PH_ROOM;
        stop.push(format!("pH under {} or over {}", fixed(low, 1), fixed(high, 1)));
    }
    stop.push(format!("above {} °C", plain(bath.project.tank.temperature_c.high + 2.0, 0)));
    for condition in
        ["5 °C up in 2 min", "haze or floc", "gas, smell or foam over the edge", "a label does not match"]
    {
        stop.push(condition.to_owned());
    }
    stop
}

fn retest(bath: &Bath, plan: &Plan, solution: &Equilibrium) -> Retest {
    let mut columns = Vec::new();
    if let Some(range) = bath.ph() {
        columns.push(RetestColumn { label: "pH at bath temp.".to_owned(), expect: spread(range.set) });
    }
    let t = bath.project.tank.temperature_c;
    columns.push(RetestColumn {
        label: "Temperature".to_owned(),
        expect: format!("{} to {} °C", plain(t.low, 1), plain(t.high, 1)),
    });
    for (_, agent) in bath.agents.iter().enumerate().filter(|(i, _)| plan.rounded_doses[*i] > 0.0).take(2) {
        let component = bath.component(agent.active);
        let total = bath.totals(&plan.rounded_doses)[agent.active];
        let expect = match component.reported_molar_mass() {
            Some(mass) => format!("{} g/L", significant(total * mass, 3)),
            None => format!("{} mol/L", significant(total, 3)),
        };
        let acid = if component.acid_form.is_some() { ", as acid" } else { "" };
        columns.push(RetestColumn { label: format!("{}{acid}", capitalised(&component.name)), expect });
    }
    let haze = (0..solution.solids.len()).find(|&k| solution.solids[k] > 0.0);
    let expect =
        haze.map_or("clear".to_owned(), |k| format!("haze: {}", pretty(&bath.system.solids[k].token)));
    columns.push(RetestColumn { label: "Look".to_owned(), expect });
    Retest {
        intro: "Wait 20 minutes with the pump on, then test. Do not add again meanwhile.".to_owned(),
        columns,
    }
}

fn chemists_number(bath: &Bath, plan: &Plan, verdict: &Verdict) -> String {
    let mut text = format!(
        "nearest limit before {}, after {} ({} with 95 % confidence). {}. {} Calculated, not measured.",
        share_of_limit(plan.before.excess()),
        share_of_limit(plan.after.excess()),
        share_of_limit(plan.after.excess_95()),
        verdict.state.word(),
        verdict.sentence,
    );
    if let Some(share) = plan.over_cap {
        text += &format!(
            " Each part brings {} of the agent in the bath, more than one addition should: re-test before the next.",
            crate::quantity::percent(share)
        );
    }
    if let Some(failure) = &plan.uncorrected {
        text += &format!(" {failure}.");
    }
    if bath.ph().is_some() {
        text += " pH is meant at bath temperature; a cooled sample reads otherwise.";
    }
    for addition in
        plan.additions.iter().filter(|a| a.agent.is_some() && a.measured.change.abs() > ROUNDING_FLAG)
    {
        text += &format!(
            " Rounding changes {} by {}: use a finer scale.",
            addition.product.name,
            crate::quantity::percent(addition.measured.change.abs())
        );
    }
    text
}

fn cautions(plan: &Plan) -> Vec<String> {
    let mut cautions = Vec::new();
    for addition in &plan.additions {
        let product = &addition.product;
        if !product.caution.is_empty() {
            let codes = if product.hazards.is_empty() {
                String::new()
            } else {
                format!(" ({})", product.hazards.join(", "))
            };
            cautions.push(format!("{}: {}{codes}", product.name, product.caution));
        }
    }
    let brings = |sign: f64| plan.additions.iter().any(|a| a.product.released(PROTON) * sign > 0.0);
    if brings(1.0) {
        cautions.push(
            "Never pour acid into a tank that may hold cyanide, sulfide or hypochlorite: it frees a poisonous gas."
                .to_owned(),
        );
    }
    if brings(1.0) && brings(-1.0) {
        cautions.push(
            "Never let the two concentrates meet outside the tank; rinse the jug between them.".to_owned(),
        );
    }
    cautions.push(
        "Face shield, gauntlets, apron; eye-wash checked. Do not hose spills to the mixed drain. The safety data sheets, site rules and local law govern; licensed practice decides."
            .to_owned(),
    );
    cautions
}

fn file_copy(bath: &Bath, plan: &Plan, solution: &Equilibrium) -> FileCopy {
    let certificate = solution.certificate;
    let temperature = bath.project.tank.temperature_c.set;
    FileCopy {
        tables: vec![
            margins_table(bath, plan),
            equilibrium_table(bath, solution),
            solids_table(bath, solution),
            constants_table(bath, solution, temperature),
        ],
        flags: flags(bath, solution, temperature).iter().map(ToString::to_string).collect(),
        certificate: vec![
            format!(
                "Largest relative balance residual {:.0e}, conditions of solids {:.0e}, ionic strength {:.0e}; {} Newton steps.",
                certificate.balance_residual,
                certificate.kkt_residual,
                certificate.activity_residual,
                certificate.iterations
            ),
            format!(
                "Activity model: {}. Ionic strength {} mol/L. Charge gap {} mol/L, made up by the acid or alkali that holds the pH.",
                bath.project.activity.name(),
                significant(solution.ionic_strength, 3),
                significant(solution.charge_gap, 3)
            ),
        ],
    }
}

/// Worst case of each wall in words, for margins.
pub(super) fn wall_words(bath: &Bath, assessment: &Assessment, place: usize) -> String {
    assessment.walls.get(place).map_or_else(String::new, |wall| wall_name(bath, wall.wall))
}
