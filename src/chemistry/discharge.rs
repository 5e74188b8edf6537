//! Published limits on metals in waste water.

use super::constant::Basis;
use serde::Deserialize;
use std::sync::LazyLock;

/// A published limit on the total of one metal in treated water.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct DischargeLimit {
    /// Tokens of the metal's ions; their dissolved totals add up.
    pub metals: Vec<String>,
    /// Most on any one day or in any one sample, mg/L.
    pub max_mg_l: f64,
    /// Most on average, mg/L.
    #[serde(default)]
    pub average_mg_l: Option<f64>,
}

impl DischargeLimit {
    /// The number that steady operation has to meet: the average where there is one.
    pub fn steady_mg_l(&self) -> f64 {
        self.average_mg_l.unwrap_or(self.max_mg_l)
    }
}

/// One section of law with its limits.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Regime {
    /// Unique short name, "433.15".
    pub id: String,
    /// Name in words.
    pub name: String,
    /// What the averages are taken over; empty without averages.
    #[serde(default)]
    pub average_over: String,
    /// Whether the text itself forbids dilution in place of treatment.
    #[serde(default)]
    pub dilution_forbidden: bool,
    /// Seen or recalled.
    pub basis: Basis,
    /// Where it is published.
    pub source: String,
    /// The limits.
    pub limits: Vec<DischargeLimit>,
    /// Complexing agents that must not be in the water at all.
    #[serde(default)]
    pub forbidden_agents: Vec<String>,
    /// Remark.
    #[serde(default)]
    pub note: String,
}

#[derive(Deserialize)]
struct File {
    #[serde(rename = "about")]
    _about: String,
    regimes: Vec<Regime>,
}

static BUILT_IN: LazyLock<Vec<Regime>> = LazyLock::new(|| {
    let file: File = super::library::read_asset(include_str!("../../assets/discharge_limits.ron"))
        .expect("the embedded limits are read by every test run");
    file.regimes
});

impl Regime {
    /// All published limits at hand.
    pub fn built_in() -> &'static [Regime] {
        &BUILT_IN
    }

    /// A regime by its short name.
    pub fn find(id: &str) -> Option<&'static Regime> {
        BUILT_IN.iter().find(|regime| regime.id == id)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::chemistry::Library;

    #[test]
    fn every_limit_names_known_ions_and_no_average_is_over_its_daily_limit() {
        let library = Library::built_in();
        for regime in Regime::built_in() {
            assert!(!regime.source.is_empty() && !regime.limits.is_empty(), "{}", regime.id);
            for limit in &regime.limits {
                assert!(limit.metals.iter().all(|token| library.component(token).is_some()), "{limit:?}");
                assert!(limit.max_mg_l > 0.0 && limit.steady_mg_l() <= limit.max_mg_l, "{limit:?}");
            }
            assert!(regime.forbidden_agents.iter().all(|token| library.component(token).is_some()));
        }
    }

    /// US Code of Federal Regulations, title 40, 433.15: nickel 3.98 mg/L on any one day, 2.38 on monthly average.
    #[test]
    fn the_nickel_limit_is_the_published_one() {
        let regime = Regime::find("433.15").unwrap();
        let nickel = regime.limits.iter().find(|limit| limit.metals == ["Ni+2"]).unwrap();
        assert_eq!((nickel.max_mg_l, nickel.average_mg_l), (3.98, Some(2.38)));
        assert!(regime.dilution_forbidden);
    }
}
