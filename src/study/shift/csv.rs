//! Writes a forecast as a table for a spreadsheet: one row per step of each course, the bath left alone and the bath
//! with its plan.
//!
//! pM is −log10 of the free metal in mol/L; "most" and "least" are the ends of the operating range, "95" with one-sided
//! 95 % confidence. Two rows of one hour are before and after an addition.

use super::forecast::Forecast;
use crate::bath::Running;
use crate::quantity::spreadsheet_text;
use crate::study::csv::number;

/// The forecasts as CSV text (UTF-8, no byte order mark, comma separated, decimal point).
pub fn to_csv(running: &Running, courses: &[(&str, &Forecast)]) -> String {
    let bath = &running.bath;
    let mut header = vec!["course".to_owned(), "hour".to_owned(), "shift".to_owned()];
    for limit in &bath.limits {
        let token = &bath.system.components[limit.component];
        header.push(spreadsheet_text(&format!("pM {token}")));
        for column in ["sigma", "pM most free", "pM most free 95", "pM least free", "pM least free 95"] {
            header.push(spreadsheet_text(&format!("{column} {token}")));
        }
    }
    header.extend(["share of nearest limit".to_owned(), "share of nearest limit 95".to_owned()]);
    let doses = bath.agents.iter().map(|agent| spreadsheet_text(&format!("{} g/L", agent.product.name)));
    header.extend(doses);
    header.extend(bath.system.components.iter().map(|token| spreadsheet_text(&format!("{token} mol/L"))));
    let mut writer = ::csv::Writer::from_writer(Vec::new());
    let mut write = |row: Vec<String>| {
        if let Err(error) = writer.write_record(&row) {
            log::error!("a row of the table could not be written: {error}");
        }
    };
    write(header);
    let length = running.steps_per_shift as f64 * running.step_h;
    for (name, forecast) in courses {
        for point in &forecast.points {
            let shift = ((point.hour / length - 1e-9).floor().max(0.0) + 1.0).to_string();
            let mut row = vec![(*name).to_owned(), number(point.hour), shift];
            for metal in &point.metals {
                let numbers = [
                    -metal.log10_free,
                    metal.sigma,
                    -metal.most,
                    -metal.most_95,
                    -metal.least,
                    -metal.least_95,
                ];
                row.extend(numbers.map(number));
            }
            row.extend([point.excess(false), point.excess(true)].map(|excess| number(10f64.powf(excess))));
            row.extend(point.contents.doses.iter().chain(&point.contents.totals).map(|value| number(*value)));
            write(row);
        }
    }
    let bytes = writer.into_inner().unwrap_or_else(|error| {
        log::error!("the table could not be finished: {}", error.error());
        Vec::new()
    });
    String::from_utf8_lossy(&bytes).into_owned()
}
