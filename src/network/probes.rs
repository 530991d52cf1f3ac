//! Where output legs are probed: both ends of every output's range, and a ladder for feeders.

use super::Job;
use crate::cells::solved::Solved;
use crate::spec::Rail;

/// Rungs of the ladder, as shares of the largest supply.
const RUNGS: [f64; 6] = [0.10, 0.26, 0.42, 0.58, 0.74, 0.90];

/// Voltages from the rail at which output legs are probed.
#[derive(Debug, Clone, PartialEq)]
pub struct Probes {
    /// Rising, without repetition.
    pub volts: Vec<f64>,
    /// Indices of the ladder's rungs, evenly spaced in voltage.
    pub ladder: Vec<usize>,
}

/// Solved shapes of both rails, and where they were probed.
#[derive(Debug, Clone)]
pub struct Pool {
    /// Probes per rail, indexed by `rail as usize`.
    pub probes: [Probes; 2],
    /// Solved shapes per rail.
    pub shapes: [Vec<Solved>; 2],
}

impl Probes {
    /// Probes of a rail: both ends (and the middle, where no accuracy is asked) of every output's
    /// range, and the ladder up to the largest supply.
    pub fn of(job: &Job, rail: Rail) -> Probes {
        let mut volts: Vec<f64> = Vec::new();
        for output in job.spec.outputs.iter().filter(|o| o.rail == rail) {
            let (a, b) = (output.range.least.0, output.range.most.0);
            volts.extend([a, b]);
            if output.accuracy.is_none() {
                volts.push((a + b) / 2.0);
            }
        }
        let top = job.spec.supply.most.0;
        let rungs = RUNGS.map(|share| share * top);
        volts.extend(rungs);
        volts.sort_by(f64::total_cmp);
        volts.dedup();
        let mut probes = Probes {
            volts,
            ladder: Vec::new(),
        };
        probes.ladder = rungs.iter().map(|&v| probes.index(v)).collect();
        probes
    }

    /// Index of a voltage that was put in.
    pub fn index(&self, volts: f64) -> usize {
        let found = self.volts.iter().position(|&v| v == volts);
        found.expect("every output's range is probed")
    }

    /// Place on the ladder of a voltage: index of the rung below and how far it is to the next, 1
    /// or more beyond the top; `None` below the lowest rung.
    #[inline(always)]
    pub fn rung(&self, volts: f64) -> Option<(usize, f64)> {
        let first = self.volts[self.ladder[0]];
        let step = (self.volts[self.ladder[RUNGS.len() - 1]] - first) / (RUNGS.len() - 1) as f64;
        let place = (volts - first) / step;
        if place < 0.0 {
            return None;
        }
        let below = (place as usize).min(RUNGS.len() - 2);
        Some((below, place - below as f64))
    }
}
