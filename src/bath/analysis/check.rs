//! Whether the numbers of an analysis can be: the field, the value and the fix.

use super::super::error::BathError;
use super::super::operating::Ph;
use super::super::project::Project;
use super::Finding;

/// Refuses numbers that no titration gives.
pub(super) fn finding(field: &str, finding: &Finding) -> Result<(), BathError> {
    let number =
        |part: &str, value: f64, fix| Err(BathError::Number { field: format!("{field}.{part}"), value, fix });
    if !(finding.amount.value.is_finite() && finding.amount.value >= 0.0) {
        return number("amount", finding.amount.value, "give zero or a positive number");
    }
    if let Some(percent) = finding.uncertainty_percent {
        if !(percent.is_finite() && (0.0..=100.0).contains(&percent)) {
            return number("uncertainty_percent", percent, "give a standard uncertainty between 0 and 100 %");
        }
        if finding.uncertainty.is_some() {
            let fix = "an absolute uncertainty is given as well; keep one of them";
            return number("uncertainty_percent", percent, fix);
        }
    }
    if let Some(sigma) = finding.uncertainty {
        let amount = sigma.to_string();
        if sigma.unit.dimension() != finding.amount.unit.dimension() {
            let fix = format!("give it in {}, like the amount", finding.amount.unit.symbol());
            return Err(BathError::Unit { field: format!("{field}.uncertainty"), amount, fix });
        }
        if !(sigma.value.is_finite() && sigma.value >= 0.0) {
            return number("uncertainty", sigma.value, "give zero or a positive number");
        }
        if sigma.value > 0.0 && finding.amount.value == 0.0 {
            let fix = "an amount of 0 can't carry it; give the smallest amount that the method sees";
            return number("uncertainty", sigma.value, fix);
        }
    }
    Ok(())
}

/// Refuses a reading that no meter gives, and one for a bath whose pH is predicted.
pub(super) fn ph(project: &Project) -> Result<(), BathError> {
    let Some(reading) = project.analysis.ph else { return Ok(()) };
    let number = |part: &str, value: f64, fix| {
        Err(BathError::Number { field: format!("analysis.ph.{part}"), value, fix })
    };
    if project.tank.ph == Ph::Predicted {
        let fix =
            "the pH of this bath is predicted from its contents; hold it under tank.ph to use a reading";
        return number("value", reading.value, fix);
    }
    if !(reading.value.is_finite() && (-1.0..=15.0).contains(&reading.value)) {
        return number("value", reading.value, "give a pH between -1 and 15");
    }
    if let Some(temperature) = reading.temperature_c
        && !(temperature.is_finite() && (0.0..=100.0).contains(&temperature))
    {
        return number("temperature_c", temperature, "give a temperature between 0 and 100 °C");
    }
    if let Some(sigma) = reading.uncertainty
        && !(sigma.is_finite() && (0.0..=2.0).contains(&sigma))
    {
        return number("uncertainty", sigma, "give a standard uncertainty between 0 and 2 pH");
    }
    Ok(())
}
