//! What a result must be read with: model ranges, missing enthalpies, slow metals, numbers below measurement.

use super::resolve::Bath;
use crate::equilibrium::{ActivityModel, DAVIES_LIMIT, Equilibrium, ION_INTERACTION_LIMIT, TemperatureBasis};
use crate::quantity::significant;

/// A remark that must stand beside a result.
#[derive(Clone, Debug, PartialEq)]
pub enum Flag {
    /// The ionic strength is outside the range of the Davies equation.
    AboveDavies(f64),
    /// The ionic strength is outside the range of the ion interaction coefficients.
    AboveInteraction(f64),
    /// Constants are used as measured although the bath is far from their ionic strength.
    NotCorrected(f64),
    /// So many constants have no enthalpy and are used as they are at this temperature in °C.
    NoEnthalpy(usize, f64),
    /// So many constants are moved by van 't Hoff alone above 60 °C.
    HotVantHoff(usize, f64),
    /// The free concentration of this metal is below what can be measured.
    FromConstants(String),
    /// This component does not follow equilibrium in a tank.
    Slow(String, String),
    /// This gas has a partial pressure in bar over the bath that people notice.
    Escapes(String, f64),
    /// The certificate does not hold.
    Uncertified(f64),
}

impl std::fmt::Display for Flag {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Flag::AboveDavies(i) => write!(
                f,
                "ionic strength {} mol/L is above the range of the Davies equation ({DAVIES_LIMIT}); activity coefficients are held at their value there",
                significant(*i, 2)
            ),
            Flag::AboveInteraction(i) => write!(
                f,
                "ionic strength {} mol/L is above the {ION_INTERACTION_LIMIT} mol/kg that ion interaction is recommended for",
                significant(*i, 2)
            ),
            Flag::NotCorrected(i) => write!(
                f,
                "constants are used as measured, without correction to ionic strength {} mol/L",
                significant(*i, 2)
            ),
            Flag::NoEnthalpy(n, t) => {
                write!(f, "{n} constants have no reaction enthalpy and are used unchanged at {t:.0} °C")
            }
            Flag::HotVantHoff(n, t) => {
                write!(
                    f,
                    "{n} constants are moved to {t:.0} °C with a constant enthalpy, which errs above 60 °C"
                )
            }
            Flag::FromConstants(metal) => {
                write!(f, "free {metal} is a number from constants: it is below what a shop can measure")
            }
            Flag::Slow(name, reason) => write!(f, "{name}: {reason}"),
            Flag::Escapes(gas, bar) => write!(
                f,
                "{gas} over the bath: {} mbar at equilibrium, above its recommended exposure limit; what escapes is not counted",
                significant(bar * 1e3, 2)
            ),
            Flag::Uncertified(residual) => {
                write!(f, "the balances close only to {residual:.1e}; do not rely on this result")
            }
        }
    }
}

/// Free concentration in mol/L below which a number is one from constants.
const MEASURABLE: f64 = 1e-9;

/// All remarks on a result at a temperature in °C.
pub fn flags(bath: &Bath, solution: &Equilibrium, temperature_c: f64) -> Vec<Flag> {
    let mut flags = Vec::new();
    let strength = solution.ionic_strength;
    match bath.project.activity {
        ActivityModel::Davies if strength > DAVIES_LIMIT => flags.push(Flag::AboveDavies(strength)),
        ActivityModel::IonInteraction if strength > ION_INTERACTION_LIMIT => {
            flags.push(Flag::AboveInteraction(strength));
        }
        ActivityModel::AsMeasured if strength > 0.3 => flags.push(Flag::NotCorrected(strength)),
        _ => {}
    }
    let basis = |wanted| bath.system.constants.iter().filter(|c| c.temperature_basis() == wanted).count();
    let (unknown, van_t_hoff) = (basis(TemperatureBasis::None), basis(TemperatureBasis::Enthalpy));
    if (temperature_c - 25.0).abs() > 5.0 && unknown > 0 {
        flags.push(Flag::NoEnthalpy(unknown, temperature_c));
    }
    if temperature_c > 60.0 && van_t_hoff > 0 {
        flags.push(Flag::HotVantHoff(van_t_hoff, temperature_c));
    }
    for limit in &bath.limits {
        if solution.free(limit.component) < MEASURABLE {
            flags.push(Flag::FromConstants(bath.component(limit.component).name.clone()));
        }
    }
    for index in 0..bath.present.len() {
        let component = bath.component(index);
        if let Some(reason) = &component.slow
            && solution.ln_a[index].is_finite()
        {
            flags.push(Flag::Slow(component.name.clone(), reason.clone()));
        }
    }
    for (gas, bar) in bath.notable_gases(solution) {
        flags.push(Flag::Escapes(gas.trim_end_matches("(g)").to_owned(), bar));
    }
    if !solution.certificate.holds() {
        flags.push(Flag::Uncertified(solution.certificate.balance_residual));
    }
    flags
}
