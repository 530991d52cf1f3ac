//! A pool shape as the assembly sees it: area as a function of unit current, and how well a leg
//! would serve each output and each kind of feeder. Everything here comes from solved shapes;
//! nothing is solved again.

use crate::cells::solved::{Probe, Solved};
use crate::cells::{CELLS, Size, bias_diode};
use crate::device;
use crate::network::Job;
use crate::network::bench::of;
use crate::network::measure::PLAIN_FALL;
use crate::network::probes::{Pool, Probes};
use crate::numeric::scalar::ln;
use crate::process::AreaRule;
use crate::spec::{AccuracyOf, Output, Rail, Reference};

/// Sizes on paper may miss a drawing limit or an output resistance by this share: descents end on
/// the limit itself, drawing snaps to it, and the whole network is held to it exactly.
const HAIR: f64 = 4e-3;

/// A drawn device whose width grows with the unit current.
#[derive(Debug, Clone, Copy)]
struct Strip {
    /// Effective width per ampere, m/A.
    width: f64,
    /// Drawn length, m.
    length: f64,
}

/// An output leg at one end of its range: what it adds to the error of its line.
#[derive(Debug, Clone, Copy, Default)]
pub struct End {
    /// Least and largest systematic error of the copy.
    pub error: [f64; 2],
    /// Mismatch variance of the input leg times its current, A.
    pub variance_in: f64,
    /// Mismatch variance of the output leg times its current, A.
    pub variance_out: f64,
}

/// A shape ready for assembly.
#[derive(Debug, Clone)]
pub struct Candidate {
    /// Rail.
    pub rail: Rail,
    /// Index in the pool's shapes of that rail.
    pub index: usize,
    /// Index of the cell.
    pub cell: usize,
    strips: [Option<Strip>; 2],
    bias: Option<Strip>,
    /// Voltage across a unit's resistor, V; `None` without one.
    resistor: Option<f64>,
    /// The resistor sits in the input leg only.
    resistor_in_input: bool,
    rule: AreaRule,
    width_loss: f64,
    width_limits: [f64; 2],
    resistor_card: Option<crate::process::Resistor>,
    /// Least and largest input-leg voltage, V from the rail.
    pub input: [f64; 2],
    /// The same of the bias leg.
    pub bias_voltage: Option<[f64; 2]>,
    /// Per output of the spec: both ends of its range; `None` where the leg cannot serve it at any
    /// accuracy of its line (other rail, too little output resistance, out of saturation).
    pub outputs: Vec<Option<[End; 2]>>,
    /// Ladder of voltages across a feeder leg and what it does there.
    pub ladder: Vec<(f64, Probe)>,
}

/// What assembly needs to know about an output.
#[derive(Debug, Clone, Copy)]
pub struct Want {
    /// Rail.
    pub rail: Rail,
    /// Nominal current, A.
    pub current: f64,
    /// How many equal legs.
    pub count: f64,
    /// Error limit less what the reference takes, fraction; infinite where none is asked.
    pub limit: f64,
    /// Standard deviations that count.
    pub sigma: f64,
    /// Held to its current although the network makes its own reference: the reference's spread
    /// counts too.
    pub absolute: bool,
    /// Least output resistance times current, V; 0 where none is asked.
    pub early: f64,
    /// Where no accuracy is asked: how far the current at the low end may be below that in the
    /// middle of the range, fraction.
    pub fall: f64,
}

/// The outputs as the assembly sees them; `tighten` scales every accuracy limit.
pub fn wants(job: &Job, tighten: f64) -> Vec<Want> {
    job.spec
        .outputs
        .iter()
        .map(|o| {
            let own_reference = matches!(job.spec.reference, Reference::Resistor { .. });
            let tolerance = match job.spec.reference {
                Reference::Current { tolerance, .. } if of(o) == AccuracyOf::Current => tolerance,
                _ => 0.0,
            };
            Want {
                rail: o.rail,
                current: job.spec.target(o).0,
                count: f64::from(o.count),
                limit: o
                    .accuracy
                    .map_or(f64::INFINITY, |a| a.limit * tighten - tolerance),
                sigma: o.accuracy.map_or(3.0, |a| a.sigma),
                absolute: own_reference && of(o) == AccuracyOf::Current,
                early: o
                    .output_resistance
                    .map_or(0.0, |r| r.0 * job.spec.target(o).0),
                // A little inside: the whole network is held to the full fall.
                fall: 0.9 * PLAIN_FALL,
            }
        })
        .collect()
}

impl Candidate {
    /// Digests a solved shape.
    pub fn new(
        job: &Job,
        wants: &[Want],
        rail: Rail,
        index: usize,
        solved: &Solved,
        probes: &Probes,
    ) -> Candidate {
        let tech = job.tech(rail);
        let mosfet = tech.mosfet();
        let loss = device::width_loss(mosfet);
        let unit = &solved.unit;
        let strip = |s: Size| Strip {
            width: (s.width - loss) / unit.current,
            length: s.length,
        };
        let parts = CELLS[solved.shape.cell].parts();
        let at = |volts: f64| &solved.probes[probes.index(volts)];
        let outputs = job
            .spec
            .outputs
            .iter()
            .zip(wants)
            .map(|(o, want)| (o.rail == rail).then(|| fit(o, want, &at)).flatten())
            .collect();
        Candidate {
            rail,
            index,
            cell: solved.shape.cell,
            strips: [Some(strip(unit.mirror)), unit.cascode.map(strip)],
            // Bias sizes are per ampere already and shed no width loss.
            bias: unit.bias.map(|b| Strip {
                width: b.width,
                length: b.length,
            }),
            resistor: unit.resistor.map(|r| r.ohms * unit.current),
            resistor_in_input: parts.cascode,
            rule: mosfet.area,
            width_loss: loss,
            width_limits: [mosfet.width.least.0, mosfet.width.most.0],
            resistor_card: job.card.resistor,
            input: solved.input,
            bias_voltage: solved.bias,
            outputs,
            ladder: probes
                .ladder
                .iter()
                .map(|&k| (probes.volts[k], solved.probes[k]))
                .collect(),
        }
    }

    /// Digests a whole pool.
    pub fn all(job: &Job, wants: &[Want], pool: &Pool) -> [Vec<Candidate>; 2] {
        [Rail::Sink, Rail::Source].map(|rail| {
            let probes = &pool.probes[rail as usize];
            pool.shapes[rail as usize]
                .iter()
                .enumerate()
                .map(|(k, solved)| Candidate::new(job, wants, rail, k, solved, probes))
                .collect()
        })
    }

    /// Whether a unit of `unit` ampere can be drawn, with `units` of them in the input leg.
    pub fn drawable(&self, unit: f64, units: u32) -> bool {
        let wide_enough = self.strips.iter().flatten().all(|s| {
            let width = s.width * unit + self.width_loss;
            width >= self.width_limits[0] * (1.0 - HAIR)
                && width <= self.width_limits[1] * (1.0 + HAIR)
        });
        let resistor = match (self.resistor, &self.resistor_card) {
            (Some(volts), Some(card)) => {
                let share = if self.resistor_in_input {
                    f64::from(units)
                } else {
                    1.0
                };
                volts / (unit * share) >= card.squares_min * card.sheet * (1.0 - HAIR)
            }
            _ => true,
        };
        wide_enough && resistor
    }

    /// What [`Candidate::drawable`] asks, as `ln(value / limit)`: at most 0 where it is kept.
    pub fn drawing_limits(&self, unit: f64, units: u32) -> Vec<f64> {
        let mut out = Vec::new();
        for s in self.strips.iter().flatten() {
            let width = s.width * unit + self.width_loss;
            out.push(ln(self.width_limits[0] / width));
            out.push(ln(width / self.width_limits[1]));
        }
        if let (Some(volts), Some(card)) = (self.resistor, &self.resistor_card) {
            let share = if self.resistor_in_input {
                f64::from(units)
            } else {
                1.0
            };
            let ohms = volts / (unit * share);
            out.push(ln(card.squares_min * card.sheet / ohms));
        }
        out
    }

    /// Area per ampere without any border, m^2/A: less than any drawn leg takes.
    pub fn density(&self) -> f64 {
        self.strips
            .iter()
            .flatten()
            .map(|s| s.width * s.length)
            .sum()
    }

    /// Area of a leg of `units` units of `unit` ampere each, m^2.
    #[inline]
    pub fn leg_area(&self, unit: f64, units: f64) -> f64 {
        let mut area = 0.0;
        for s in self.strips.iter().flatten() {
            area += strip_area(
                &self.rule,
                s.width * unit + self.width_loss,
                s.length,
                units,
            );
        }
        if let (Some(volts), Some(card), false) =
            (self.resistor, &self.resistor_card, self.resistor_in_input)
        {
            area += units * device::resistor_area(card, card.width, volts / unit, 1);
        }
        area
    }

    /// Area of the input leg, with the bias diode for `bias` ampere where the cell has one, m^2.
    pub fn input_area(&self, unit: f64, units: f64, bias: f64) -> f64 {
        let mut area = self.leg_area(unit, units);
        if let Some(b) = self.bias {
            let per_ampere = Size {
                width: b.width,
                length: b.length,
            };
            let drawn = bias_diode(per_ampere, bias, self.width_limits[0], self.width_loss);
            area += strip_area(&self.rule, drawn.width, drawn.length, 1.0);
        }
        if let (Some(volts), Some(card), true) =
            (self.resistor, &self.resistor_card, self.resistor_in_input)
        {
            area += device::resistor_area(card, card.width, volts / (unit * units), 1);
        }
        area
    }

    /// Whether the cell takes a bias current.
    pub fn needs_bias(&self) -> bool {
        self.bias.is_some()
    }

    /// A feeder leg with between `volts[0]` and `volts[1]` across it: least and largest error, and
    /// the variances at the low end. `None` below the ladder.
    pub fn feeder(&self, volts: [f64; 2]) -> Option<End> {
        let low = self.rung(volts[0])?;
        let high = self.rung(volts[1])?;
        Some(End {
            error: [
                low.error[0].min(high.error[0]),
                low.error[1].max(high.error[1]),
            ],
            variance_in: low.variance_in.max(high.variance_in),
            variance_out: low.variance_out.max(high.variance_out),
        })
    }

    /// The ladder at a voltage, linearly between rungs; beyond the top, the top.
    fn rung(&self, volts: f64) -> Option<Probe> {
        let k = self.ladder.partition_point(|(v, _)| *v <= volts);
        if k == 0 {
            return None;
        }
        let (v0, a) = &self.ladder[k - 1];
        let Some((v1, b)) = self.ladder.get(k) else {
            return Some(*a);
        };
        let t = (volts - v0) / (v1 - v0);
        let mix = |x: f64, y: f64| x + t * (y - x);
        Some(Probe {
            error: [mix(a.error[0], b.error[0]), mix(a.error[1], b.error[1])],
            early: mix(a.early, b.early),
            variance_in: mix(a.variance_in, b.variance_in),
            variance_out: mix(a.variance_out, b.variance_out),
        })
    }
}

fn strip_area(rule: &AreaRule, width: f64, length: f64, units: f64) -> f64 {
    let along = if rule.shared {
        units * length + (units + 1.0) * rule.border_length / 2.0
    } else {
        units * (length + rule.border_length)
    };
    (width + rule.border_width) * along
}

/// Both ends of an output's range, if a leg of this shape can live there at all.
fn fit<'p>(output: &Output, want: &Want, at: &impl Fn(f64) -> &'p Probe) -> Option<[End; 2]> {
    let end = |p: &Probe| End {
        error: p.error,
        variance_in: p.variance_in,
        variance_out: p.variance_out,
    };
    let (low, high) = (at(output.range.least.0), at(output.range.most.0));
    if low.early < want.early * (1.0 - HAIR) {
        return None;
    }
    if want.limit.is_finite() {
        let worst = low.error[0].abs().max(high.error[1].abs());
        return (worst < want.limit).then_some([end(low), end(high)]);
    }
    // Within 1 % of the current in the middle of the range: the definition of headroom where no
    // accuracy is asked.
    let middle = at((output.range.least.0 + output.range.most.0) / 2.0);
    let fall = (1.0 + low.error[0]) / (1.0 + middle.error[0]) - 1.0;
    (fall > -want.fall).then_some([end(low), end(high)])
}

/// Most units of a leg in a first estimate.
const UNITS_ALONE: u32 = 40;

/// Cells that can serve output `k` alone, with the least area of a leg, m^2; cheapest first.
pub fn cells_for(candidates: &[Candidate], k: usize, want: &Want) -> Vec<(String, f64)> {
    let mut best: Vec<Option<f64>> = vec![None; CELLS.len()];
    for c in candidates {
        let Some(ends) = &c.outputs[k] else { continue };
        // Alone on a perfect line: its own leg's mismatch is the least it must bear.
        let bears = ends.iter().all(|e| {
            let sigma = (e.variance_out / want.current).sqrt();
            e.error[0].abs().max(e.error[1].abs()) + want.sigma * sigma <= want.limit
        });
        // Large currents take several units, however wide one may be.
        let units = (1..=UNITS_ALONE).find(|&n| c.drawable(want.current / f64::from(n), n));
        if let (true, Some(n)) = (bears, units) {
            let n = f64::from(n);
            let area = c.leg_area(want.current / n, n);
            let least = best[c.cell].map_or(area, |b| b.min(area));
            best[c.cell] = Some(least);
        }
    }
    let mut list: Vec<(String, f64)> = best
        .into_iter()
        .enumerate()
        .filter_map(|(cell, area)| Some((CELLS[cell].name().to_owned(), area?)))
        .collect();
    list.sort_by(|a, b| a.1.total_cmp(&b.1));
    list
}
