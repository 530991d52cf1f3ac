//! Measuring a network: both ends of every output's range at every corner, the worst of each, and
//! the headroom.

use super::bench::{Bench, NotConverged, Reading, Readings, of};
use super::corners::{self, Corner};
use super::{Job, Network};
use crate::spec::{AccuracyOf, Output, Reference};

/// Steps of the search for the headroom: a range of 2 V to half a millivolt.
const BISECTIONS: usize = 12;
/// Where no accuracy is asked, an output works while its current is this near its mid-range value.
pub const PLAIN_FALL: f64 = 0.01;

/// The worst of one output over corners and over its range.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Worst {
    /// Worst current error (systematic + k sigma), fraction.
    pub error: f64,
    /// Corner of it, index.
    pub error_corner: usize,
    /// Which end of the range it is worst at: 0 low, 1 high.
    pub error_end: usize,
    /// Error limit, if any, fraction.
    pub limit: Option<f64>,
    /// Least voltage from the rail at which the output still meets its limit, V.
    pub headroom: f64,
    /// Corner of it, index.
    pub headroom_corner: usize,
    /// Output resistance at the low end of the range, Ohm.
    pub resistance: f64,
    /// Corner of it, index.
    pub resistance_corner: usize,
    /// Where no accuracy is asked: largest departure of the current at the low end from that in the
    /// middle of the range, fraction; 0 elsewhere.
    pub fall: f64,
}

/// A measured network.
#[derive(Debug, Clone, PartialEq)]
pub struct Measured {
    /// Area, m^2.
    pub area: f64,
    /// Overhead current per corner, A.
    pub overhead: Vec<f64>,
    /// Reference pin per corner, V to ground.
    pub pin: Vec<f64>,
    /// Readings at the low end of every range.
    pub low: Readings,
    /// Readings at the high end.
    pub high: Readings,
    /// Per output.
    pub worst: Vec<Worst>,
}

/// Error of a reading as its output's accuracy counts it: |systematic| + what the reference's own
/// tolerance adds + k sigma.
pub fn total_error(job: &Job, output: &Output, reading: &Reading) -> f64 {
    let sigma = output.accuracy.map_or(3.0, |a| a.sigma);
    let variance: f64 = reading.variance.iter().sum();
    reading.systematic.abs() + tolerance(job, output) + sigma * variance.sqrt()
}

/// What the reference's tolerance adds to an output's error.
pub fn tolerance(job: &Job, output: &Output) -> f64 {
    match job.spec.reference {
        Reference::Current { tolerance, .. } if of(output) == AccuracyOf::Current => tolerance,
        _ => 0.0,
    }
}

/// Solves and reads the placed network at both ends of every range. The headroom is left at the
/// low end of the range; [`headroom`] finds it.
pub fn measure(job: &Job, bench: &mut Bench, network: &Network) -> Result<Measured, NotConverged> {
    bench.place(network);
    let ends =
        |pick: fn(&Output) -> f64| -> Vec<f64> { job.spec.outputs.iter().map(pick).collect() };
    bench.solve(&ends(|o| o.range.most.0))?;
    let high = bench.read();
    bench.solve(&ends(|o| o.range.least.0))?;
    let low = bench.read();
    let corners = bench.corners();
    let worst = job
        .spec
        .outputs
        .iter()
        .enumerate()
        .map(|(k, output)| worst_of(job, output, &low.outputs[k], &high.outputs[k], corners))
        .collect();
    let mut worst: Vec<Worst> = worst;
    if worst.iter().any(|w| w.limit.is_none()) {
        let corners = bench.corners().to_vec();
        bench.solve(&ends(|o| (o.range.least.0 + o.range.most.0) / 2.0))?;
        let middle = bench.currents();
        for (k, worst) in worst
            .iter_mut()
            .enumerate()
            .filter(|(_, w)| w.limit.is_none())
        {
            let falls = (0..corners.len())
                .filter(|&c| corners[c].counts)
                .map(|c| (low.outputs[k][c].current / middle[k][c] - 1.0).abs());
            worst.fall = falls.fold(0.0, f64::max);
        }
    }
    Ok(Measured {
        area: network.area(job),
        overhead: low.common.iter().map(|c| c.overhead).collect(),
        pin: low.common.iter().map(|c| c.pin).collect(),
        low,
        high,
        worst,
    })
}

fn worst_of(
    job: &Job,
    output: &Output,
    low: &[Reading],
    high: &[Reading],
    corners: &[Corner],
) -> Worst {
    let mut worst = Worst {
        error: f64::NEG_INFINITY,
        error_corner: 0,
        error_end: 0,
        limit: output.accuracy.map(|a| a.limit),
        headroom: output.range.least.0,
        headroom_corner: 0,
        resistance: f64::INFINITY,
        resistance_corner: 0,
        fall: 0.0,
    };
    for (end, readings) in [low, high].into_iter().enumerate() {
        for (c, reading) in readings.iter().enumerate() {
            if !corners[c].counts {
                continue;
            }
            let error = total_error(job, output, reading);
            if error > worst.error {
                (worst.error, worst.error_corner, worst.error_end) = (error, c, end);
            }
            if end == 0 && reading.resistance < worst.resistance {
                (worst.resistance, worst.resistance_corner) = (reading.resistance, c);
            }
        }
    }
    worst
}

/// Finds every output's headroom by bisection, all outputs at once, and writes it into `measured`.
pub fn headroom(job: &Job, bench: &mut Bench, measured: &mut Measured) -> Result<(), NotConverged> {
    let outputs = &job.spec.outputs;
    let middle: Vec<f64> = outputs
        .iter()
        .map(|o| (o.range.least.0 + o.range.most.0) / 2.0)
        .collect();
    bench.solve(&middle)?;
    let plain = bench.currents();
    // The excess over the limit at a voltage, and the corner where it is largest.
    let excess = |k: usize, readings: &Readings, corners: &[Corner]| -> (f64, usize) {
        let output = &outputs[k];
        let mut worst = (f64::NEG_INFINITY, 0);
        for (c, reading) in readings.outputs[k].iter().enumerate() {
            if !corners[c].counts {
                continue;
            }
            let over = match output.accuracy {
                Some(a) => total_error(job, output, reading) - a.limit,
                None => (reading.current / plain[k][c] - 1.0).abs() - PLAIN_FALL,
            };
            if over > worst.0 {
                worst = (over, c);
            }
        }
        worst
    };
    // It works at the low end, or (on a network that breaks its limits) somewhere above, or
    // nowhere: then the high end stands for it.
    let at_low = |k: usize, corners: &[Corner]| excess(k, &measured.low, corners).0 <= 0.0;
    let mut dead = vec![0.0; outputs.len()];
    let mut alive: Vec<f64> = Vec::with_capacity(outputs.len());
    for (k, output) in outputs.iter().enumerate() {
        if at_low(k, bench.corners()) {
            alive.push(output.range.least.0);
        } else {
            dead[k] = output.range.least.0;
            alive.push(output.range.most.0);
        }
    }
    let mut corner = vec![0; outputs.len()];
    for _ in 0..BISECTIONS {
        let trial: Vec<f64> = dead
            .iter()
            .zip(&alive)
            .map(|(a, b)| (a + b) / 2.0)
            .collect();
        bench.solve(&trial)?;
        let readings = bench.read();
        for k in 0..outputs.len() {
            let (over, at) = excess(k, &readings, bench.corners());
            if over <= 0.0 {
                alive[k] = trial[k];
            } else {
                dead[k] = trial[k];
                corner[k] = at;
            }
        }
    }
    for (k, worst) in measured.worst.iter_mut().enumerate() {
        worst.headroom = alive[k];
        worst.headroom_corner = corner[k];
    }
    Ok(())
}

/// Sets the reference resistor so that the nominal corner carries the wanted current: the network
/// is solved there alone, and the resistor follows Ohm's law from the pin voltage found. Does
/// nothing for an external reference.
pub fn trim_reference(job: &Job, network: &mut Network) -> Result<(), NotConverged> {
    let (Reference::Resistor { current }, Some(card)) = (job.spec.reference, &job.card.resistor)
    else {
        return Ok(());
    };
    let supply = corners::nominal_supply(job);
    let nominal = Corner {
        climate: crate::cells::solved::Climate {
            corner: corners::processes(job)[0],
            temperature: job.spec.temperature.nominal.0,
        },
        supply,
        counts: true,
    };
    let factor =
        crate::cells::solved::resistor_factor(&job.tech(crate::spec::Rail::Sink), &nominal.climate);
    let mut bench = Bench::new(*job, vec![nominal]);
    let volts: Vec<f64> = job.spec.outputs.iter().map(|o| o.range.least.0).collect();
    for _ in 0..4 {
        bench.place(network);
        bench.solve(&volts)?;
        let pin = bench.read().common[0].pin;
        let ohms = (supply - pin) / current.0 / factor;
        // Drawn length on the grid, as every other size.
        let grid = job.card.nmos.grid.0;
        let length = (card.width * ohms / card.sheet / grid).round() * grid;
        network.reference_resistor = Some(length / card.width * card.sheet);
    }
    Ok(())
}
