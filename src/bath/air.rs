//! What the bath exchanges with the air.

use super::resolve::Bath;
use crate::equilibrium::Equilibrium;
use serde::{Deserialize, Serialize};

/// Token of carbon dioxide as a gas.
const CARBON_DIOXIDE: &str = "CO2(g)";

/// Whether the bath is in equilibrium with the carbon dioxide of the air.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub enum Air {
    /// It takes up and gives off nothing.
    #[default]
    Closed,
    /// It has taken up, or given off, all the carbon dioxide that it would in the end.
    Open {
        /// Partial pressure of carbon dioxide in bar: about 4.2e-4 outdoors.
        co2_bar: f64,
    },
}

impl Air {
    /// Whether this is the default.
    pub fn is_closed(&self) -> bool {
        *self == Air::Closed
    }
}

/// Partial pressures in bar from which a gas over the bath is worth a remark: recommended exposure limits, in parts per
/// million by volume of air: NH3 25, HCN 4.7 (ceiling), H2S 10 (ceiling), SO2 2 (NIOSH Pocket Guide, from memory).
const NOTABLE: &[(&str, f64)] = &[("NH3(g)", 25e-6), ("HCN(g)", 4.7e-6), ("H2S(g)", 10e-6), ("SO2(g)", 2e-6)];

impl Bath {
    /// ln of the pressure in bar of each gas that the bath is open to.
    pub(super) fn open_to(&self) -> Vec<Option<f64>> {
        let Air::Open { co2_bar } = self.project.tank.air else { return Vec::new() };
        let gases = self.system.gases.iter();
        gases.map(|gas| (gas.token == CARBON_DIOXIDE).then(|| co2_bar.ln())).collect()
    }

    /// Gases that leave the bath to a degree that people notice, with their partial pressures in bar.
    pub fn notable_gases(&self, solution: &Equilibrium) -> Vec<(String, f64)> {
        let pressures = self.system.gases.iter().zip(&solution.ln_pressure);
        pressures
            .filter_map(|(gas, ln_pressure)| {
                let (_, notable) = NOTABLE.iter().find(|(token, _)| *token == gas.token)?;
                (ln_pressure.exp() >= *notable).then(|| (gas.token.clone(), ln_pressure.exp()))
            })
            .collect()
    }
}

/// The gas that an open bath exchanges.
pub(super) fn exchanged(air: Air) -> Option<&'static str> {
    (!air.is_closed()).then_some(CARBON_DIOXIDE)
}
