//! A network on paper: families as pool shapes with unit counts, priced and checked by adding up
//! what solved shapes said. No circuit is solved here; what passes is solved as a whole later.

use super::candidates::{Candidate, End, Want};
use crate::network::Job;
use crate::spec::{Rail, Reference};

/// A family of a plan.
#[derive(Debug, Clone, PartialEq)]
pub struct Member {
    /// Rail.
    pub rail: Rail,
    /// Index among the candidates of the rail.
    pub candidate: usize,
    /// Nominal input current, A.
    pub current: f64,
    /// Units in the input leg.
    pub units: u32,
    /// Family that feeds it; `None` is the reference.
    pub parent: Option<usize>,
    /// Bias current, A, and the family that feeds it, for cells that take one.
    pub bias: Option<(f64, Option<usize>)>,
}

/// A whole network on paper; parents stand before children.
#[derive(Debug, Clone, PartialEq)]
pub struct Plan {
    /// Families.
    pub members: Vec<Member>,
    /// Family of each output.
    pub legs: Vec<usize>,
}

/// What a plan costs and how it stands against the limits.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Price {
    /// Area, m^2.
    pub area: f64,
    /// Overhead current, A (nominal).
    pub overhead: f64,
    /// Sum over all limits of how far each is exceeded, as a share of the limit; 0 is feasible.
    pub excess: f64,
    /// Largest error over its limit.
    pub error_share: f64,
}

/// Everything a plan is measured against.
#[derive(Debug, Clone)]
pub struct Ledger<'a> {
    /// The job.
    pub job: Job<'a>,
    /// Candidates of both rails.
    pub candidates: &'a [Vec<Candidate>; 2],
    /// Outputs.
    pub wants: Vec<Want>,
    /// Largest overhead current, A.
    pub budget: f64,
    /// Least and largest voltage the reference pin may have, from the root's rail.
    pub pin: [f64; 2],
    /// Copies of the reference.
    pub copies: usize,
}

/// State of a gate line: what has been collected up to the input of its family.
#[derive(Debug, Clone, Copy, Default)]
struct Line {
    variance: f64,
    error: [f64; 2],
}

/// Units of a leg of `current` in a family, and the relative error of rounding.
pub fn units_for(current: f64, unit: f64) -> (u32, f64) {
    let units = (current / unit).round().max(1.0);
    (units as u32, units * unit / current - 1.0)
}

impl<'a> Ledger<'a> {
    /// A ledger for a job with candidates; `tighten` scales accuracy limits.
    pub fn new(
        job: Job<'a>,
        candidates: &'a [Vec<Candidate>; 2],
        tighten: f64,
        budget: f64,
    ) -> Ledger<'a> {
        let supply = job.spec.supply;
        let (pin, copies) = match job.spec.reference {
            Reference::Current { range, copies, .. } => {
                let pin = match job.spec.reference.rail() {
                    Rail::Sink => [range.least.0, range.most.0],
                    // Measured below the supply; the worst corner of each end.
                    Rail::Source => [supply.most.0 - range.most.0, supply.least.0 - range.least.0],
                };
                (pin, copies as usize)
            }
            // A resistor works at any pin voltage below the supply; it needs something across it.
            Reference::Resistor { .. } => ([0.0, 0.9 * supply.least.0], 1),
        };
        let wants = super::candidates::wants(&job, tighten);
        Ledger {
            job,
            candidates,
            wants,
            budget,
            pin,
            copies,
        }
    }

    /// The candidate of a member.
    pub fn candidate(&self, member: &Member) -> &'a Candidate {
        &self.candidates[member.rail as usize][member.candidate]
    }

    /// Voltage range across a feeder into an input of `input` volts.
    pub fn feeder_volts(&self, input: [f64; 2]) -> [f64; 2] {
        let supply = self.job.spec.supply;
        [supply.least.0 - input[1], supply.most.0 - input[0]]
    }

    /// Prices a plan.
    pub fn price(&self, plan: &Plan) -> Price {
        let mut area = 0.0;
        let mut overhead = 0.0;
        let mut excess = 0.0;
        let mut copies = 0;
        let mut lines: Vec<Line> = Vec::with_capacity(plan.members.len());
        let mut absolute = [0.0; 2];
        for member in &plan.members {
            let c = self.candidate(member);
            let unit = member.current / f64::from(member.units);
            let bias = member.bias.map_or(0.0, |b| b.0);
            area += c.input_area(unit, f64::from(member.units), bias);
            if !c.drawable(unit, member.units) {
                excess += 1.0;
            }
            let mut line = Line::default();
            let feeds = [
                Some((member.parent, member.current, c.input)),
                member
                    .bias
                    .map(|(i, p)| (p, i, c.bias_voltage.unwrap_or_default())),
            ];
            for (which, feed) in feeds.into_iter().enumerate() {
                let Some((parent, current, input)) = feed else {
                    continue;
                };
                overhead += current;
                let Some(parent) = parent else {
                    copies += 1;
                    excess += outside(input, self.pin);
                    if let Reference::Resistor { .. } = self.job.spec.reference {
                        let (ohms, a) = self.own_reference(current, c);
                        absolute = a;
                        if let Some(card) = &self.job.card.resistor {
                            area += crate::device::resistor_area(card, card.width, ohms, 1);
                        }
                    }
                    continue;
                };
                let from = &plan.members[parent];
                let by = self.candidate(from);
                let from_unit = from.current / f64::from(from.units);
                let (units, rounding) = units_for(current, from_unit);
                area += by.leg_area(from_unit, f64::from(units));
                let Some(end) = by.feeder(self.feeder_volts(input)) else {
                    excess += 1.0;
                    continue;
                };
                if which == 0 {
                    let up = &lines[parent];
                    line = Line {
                        variance: up.variance
                            + end.variance_in / from.current
                            + end.variance_out / current,
                        error: [
                            up.error[0] + end.error[0] + rounding,
                            up.error[1] + end.error[1] + rounding,
                        ],
                    };
                } else {
                    // A bias leg only has to be there: a tenth off moves its gate by little.
                    let off = end.error[0].abs().max(end.error[1].abs()) + rounding.abs();
                    excess += (off - 0.1).max(0.0);
                }
            }
            lines.push(line);
        }
        let mut error_share: f64 = 0.0;
        for (k, (&leg, want)) in plan.legs.iter().zip(&self.wants).enumerate() {
            let member = &plan.members[leg];
            let c = self.candidate(member);
            let unit = member.current / f64::from(member.units);
            let (units, rounding) = units_for(want.current, unit);
            area += want.count * c.leg_area(unit, f64::from(units));
            let Some(ends) = &c.outputs[k] else {
                excess += 1.0;
                continue;
            };
            let line = &lines[leg];
            let mut start = line.error;
            if want.absolute {
                start = [start[0] + absolute[0], start[1] + absolute[1]];
            }
            let error = worst(ends, line.variance, start, rounding, member.current, want);
            let share = error / want.limit;
            error_share = error_share.max(share);
            excess += (share - 1.0).max(0.0);
        }
        excess += copies.max(self.copies) as f64 - self.copies as f64;
        excess += (overhead / self.budget - 1.0 - 1e-9).max(0.0);
        Price {
            area,
            overhead,
            excess,
            error_share,
        }
    }

    /// The resistor that makes `current` at the nominal corner, and the reference's relative error
    /// over corners.
    fn own_reference(&self, current: f64, root: &Candidate) -> (f64, [f64; 2]) {
        let supply = self.job.spec.supply;
        let middle = (supply.least.0 + supply.most.0) / 2.0;
        let input = (root.input[0] + root.input[1]) / 2.0;
        let ohms = (middle - input).max(0.05) / current;
        let tech = self.job.tech(Rail::Sink);
        let factors: Vec<f64> = crate::network::corners::climates(&self.job)
            .iter()
            .map(|c| crate::cells::solved::resistor_factor(&tech, c))
            .collect();
        let most = factors.iter().copied().fold(f64::MIN, f64::max);
        let least = factors.iter().copied().fold(f64::MAX, f64::min);
        let low = (supply.least.0 - root.input[1]) / (ohms * most) / current - 1.0;
        let high = (supply.most.0 - root.input[0]) / (ohms * least) / current - 1.0;
        (ohms, [low, high])
    }
}

/// Worst error of an output leg: systematic part and k sigma at the worse end of its range.
#[inline]
pub fn worst(
    ends: &[End; 2],
    variance: f64,
    line: [f64; 2],
    rounding: f64,
    input_current: f64,
    want: &Want,
) -> f64 {
    let mut out: f64 = 0.0;
    for end in ends {
        let low = line[0] + end.error[0] + rounding;
        let high = line[1] + end.error[1] + rounding;
        let sigma =
            (variance + end.variance_in / input_current + end.variance_out / want.current).sqrt();
        out = out.max(low.abs().max(high.abs()) + want.sigma * sigma);
    }
    out
}

/// How far a range sticks out of another, as a share of a volt.
fn outside(range: [f64; 2], limits: [f64; 2]) -> f64 {
    (limits[0] - range[0]).max(0.0) + (range[1] - limits[1]).max(0.0)
}
