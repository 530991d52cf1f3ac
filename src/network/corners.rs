//! The corners of a spec: process x supply x temperature, and their names.

use super::Job;
use crate::cells::solved::Climate;

/// One corner.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Corner {
    /// Process corner and temperature.
    pub climate: Climate,
    /// Supply, V.
    pub supply: f64,
    /// Counts towards worst cases. Corners at the nominal supply serve error budgets only.
    pub counts: bool,
}

/// Temperatures of a spec, without repetition: least, nominal, most.
pub fn temperatures(job: &Job) -> Vec<f64> {
    let t = &job.spec.temperature;
    distinct([t.least.0, t.nominal.0, t.most.0])
}

/// Indices in the card of the spec's process corners.
pub fn processes(job: &Job) -> Vec<usize> {
    job.spec
        .corners
        .iter()
        .filter_map(|name| job.card.corners.iter().position(|c| &c.name == name))
        .collect()
}

/// Nominal supply: the middle of the range, V.
pub fn nominal_supply(job: &Job) -> f64 {
    (job.spec.supply.least.0 + job.spec.supply.most.0) / 2.0
}

/// Process corners at every temperature, nominal first: where families are solved.
pub fn climates(job: &Job) -> Vec<Climate> {
    let mut all = Vec::new();
    for corner in processes(job) {
        for temperature in temperatures(job) {
            all.push(Climate {
                corner,
                temperature,
            });
        }
    }
    all
}

/// Every corner at which a network is verified. The first is nominal in process and temperature.
pub fn verified(job: &Job) -> Vec<Corner> {
    with_supplies(
        job,
        distinct([job.spec.supply.least.0, job.spec.supply.most.0]),
        |_| true,
    )
}

/// The verified corners and the same at the nominal supply.
pub fn with_nominal_supply(job: &Job) -> Vec<Corner> {
    let ends = [job.spec.supply.least.0, job.spec.supply.most.0];
    let nominal = nominal_supply(job);
    with_supplies(job, distinct([ends[0], nominal, ends[1]]), |v| {
        ends.contains(&v)
    })
}

fn with_supplies(job: &Job, supplies: Vec<f64>, counts: impl Fn(f64) -> bool) -> Vec<Corner> {
    let mut all = Vec::new();
    for climate in climates(job) {
        for &supply in &supplies {
            all.push(Corner {
                climate,
                supply,
                counts: counts(supply),
            });
        }
    }
    all
}

fn distinct<const N: usize>(values: [f64; N]) -> Vec<f64> {
    let mut out: Vec<f64> = Vec::new();
    for v in values {
        if !out.contains(&v) {
            out.push(v);
        }
    }
    out
}

/// Name of a corner as reports write it: "SS 1.62 V -40 degC".
pub fn name(job: &Job, corner: &Corner) -> String {
    let celsius = (corner.climate.temperature - 273.15) * 1e6;
    // Kelvin to Celsius and back leaves dust beyond the sixth decimal.
    let celsius = celsius.round() / 1e6;
    format!(
        "{} {} V {} degC",
        job.card.corners[corner.climate.corner].name,
        (corner.supply * 1e6).round() / 1e6,
        celsius
    )
}
