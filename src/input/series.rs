//! A measured series for `probe`: CSV to the forcing of a face.
//!
//! Columns: `time_s`, and either `surface_c`, or `flux_kw_m2` (net into the rock), or any of `irradiance_kw_m2`, `gas_c`
//! with `h_w_m2k`. Values are linear in between. With a gas but no irradiance the surroundings are taken to radiate at the
//! initial temperature; with an irradiance but no gas there is no convection.

use std::io::Read;
use std::path::Path;

use super::{InputError, InputFile, open, reading_error};
use crate::diagnostic::{Diagnostic, Severity};
use crate::fire::exposure::ExposureClass;
use crate::fire::pulse::{Series, SeriesRow, TIED_FACE_W_M2_K};
use crate::units::{ICE_POINT_K, W_PER_KW};

const COLUMNS: [&str; 6] = ["time_s", "surface_c", "flux_kw_m2", "irradiance_kw_m2", "gas_c", "h_w_m2k"];
/// Ranges of the columns, in their own units.
const RANGES: [(f64, f64); 6] =
    [(-1e7, 1e8), (-100.0, 1500.0), (-1000.0, 1000.0), (0.0, 1000.0), (-100.0, 1700.0), (0.0, 1000.0)];

/// Reads a series; `emissivity` and `initial_k` are the rock's. Time counts from the first row.
///
/// # Errors
/// When the file cannot be read, lacks the columns, or holds a value that is no number, out of range or out of order.
pub fn read_series(path: &Path, emissivity: f64, initial_k: f64) -> Result<(Series, InputFile), InputError> {
    let (text, name) = open(path)?;
    let mut content = String::new();
    text.clone().read_to_string(&mut content).map_err(|e| reading_error(&name, &e))?;
    let file = text.finish(&name).map_err(|e| reading_error(&name, &e))?;
    let refuse = |line: Option<u64>, property: &str, found: String, expected: String, remedy: &str| {
        InputError::new(
            Diagnostic::new(Severity::Refusal, "series", name.clone())
                .at_line(line)
                .property(property, found)
                .expected(expected)
                .remedy(remedy),
        )
    };
    let mut reader = csv::ReaderBuilder::new().trim(csv::Trim::All).flexible(true).from_reader(content.as_bytes());
    let headers = reader
        .headers()
        .map_err(|e| refuse(Some(1), "header", e.to_string(), "a line of column names".into(), "see docs/inputs.md"))?
        .clone();
    let place = COLUMNS.map(|c| headers.iter().position(|h| h.eq_ignore_ascii_case(c)));
    let [time, surface, flux, irradiance, gas, h] = place;
    let found = || headers.iter().collect::<Vec<_>>().join(", ");
    if time.is_none() {
        return Err(refuse(Some(1), "header", found(), "a time_s column".into(), "add it, in seconds"));
    }
    let kinds = [surface.is_some(), flux.is_some(), irradiance.is_some() || gas.is_some() || h.is_some()];
    if kinds.iter().filter(|k| **k).count() != 1 {
        let expected = "time_s with surface_c, or with flux_kw_m2, or with any of irradiance_kw_m2, gas_c, h_w_m2k";
        return Err(refuse(Some(1), "header", found(), expected.into(), "keep one of the three kinds"));
    }
    if gas.is_some() != h.is_some() {
        let expected = "gas_c and h_w_m2k together";
        return Err(refuse(Some(1), "header", found(), expected.into(), "add the missing one"));
    }
    let mut series = Series { time_s: Vec::new(), rows: Vec::new() };
    for record in reader.records() {
        let record = record
            .map_err(|e| refuse(None, "row", e.to_string(), "as many cells as the header".into(), "mend the row"))?;
        let line = record.position().map(csv::Position::line);
        if record.iter().all(str::is_empty) {
            continue;
        }
        let mut values = [None; COLUMNS.len()];
        for (c, column) in place.iter().enumerate() {
            let Some(column) = column else { continue };
            let cell = record.get(*column).unwrap_or("");
            let (low, high) = RANGES[c];
            let value = cell.parse::<f64>().ok().filter(|v| v.is_finite() && (low..=high).contains(v));
            let remedy = "give every row every value, as a plain number";
            values[c] =
                Some(value.ok_or_else(|| {
                    refuse(line, COLUMNS[c], format!("{cell:?}"), format!("{low} to {high}"), remedy)
                })?);
        }
        let at = values[0].expect("the time column is there");
        if series.time_s.last().is_some_and(|last| at <= *last) {
            let expected = "later than the row before".to_owned();
            return Err(refuse(line, "time_s", at.to_string(), expected, "sort the rows and drop repeated times"));
        }
        series.time_s.push(at);
        series.rows.push(row(&values, emissivity, initial_k));
    }
    if series.time_s.len() < 2 {
        let rows = format!("{} rows", series.time_s.len());
        return Err(refuse(None, "rows", rows, "two rows or more".into(), "add the rest of the series"));
    }
    let start = series.time_s[0];
    series.time_s.iter_mut().for_each(|t| *t -= start);
    Ok((series, file))
}

fn row(values: &[Option<f64>; COLUMNS.len()], emissivity: f64, initial_k: f64) -> SeriesRow {
    let [_, surface_c, flux, irradiance, gas_c, h] = *values;
    let still = SeriesRow { emissivity: 0.0, irradiance_w_m2: 0.0, gas_k: 0.0, h_w_m2_k: 0.0, flux_w_m2: 0.0 };
    if let Some(t) = surface_c {
        return SeriesRow { gas_k: t + ICE_POINT_K, h_w_m2_k: TIED_FACE_W_M2_K, ..still };
    }
    if let Some(q) = flux {
        return SeriesRow { flux_w_m2: q * W_PER_KW, ..still };
    }
    SeriesRow {
        emissivity,
        irradiance_w_m2: irradiance.map_or_else(|| ExposureClass::black_body_w_m2(initial_k), |g| g * W_PER_KW),
        gas_k: gas_c.map_or(0.0, |t| t + ICE_POINT_K),
        h_w_m2_k: h.unwrap_or(0.0),
        ..still
    }
}
