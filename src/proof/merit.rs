//! What area can buy at best: for every output, the least product of area density and mismatch
//! variance that any sizes of any allowed cell reach while the leg still serves the output.
//!
//! A leg of `I` ampere in a family of density `D` (m^2 of device per ampere, the same in the input
//! leg and in every output leg, since all are made of one unit) has area `D I` and relative
//! variance `v / I`. Both scale with the number of units, so the product `D v` belongs to the
//! shape alone. Pelgrom's law (IEEE JSSC 24, 1989) makes it nearly constant along length at a
//! given inversion; inversion is capped by headroom; so it has a floor for every output, and
//!
//! > leg area x leg variance >= floor
//!
//! holds for *every* network, whatever its cells, sizes, units and currents. The floors are found
//! by descent from the best shapes of the pool (the products are smooth in the logarithms of the
//! sizes) and lowered by [`SAFETY`]. That they are floors is a numerical statement, not a theorem:
//! a test draws a million random shapes per cell and finds none below.

use crate::assembly::candidates::Want;
use crate::assembly::desk;
use crate::cells::solved::{Climate, Solved, Solver};
use crate::cells::{CELLS, Shape};
use crate::network::Job;
use crate::network::corners::climates;
use crate::network::probes::{Pool, Probes};
use crate::numeric::lanes::Lanes;
use crate::numeric::scalar::{exp, ln};
use crate::spec::Rail;
use argmin::core::{CostFunction, Error, Executor};
use argmin::solver::neldermead::NelderMead;
use rayon::prelude::*;
use std::cell::RefCell;

/// Factor on every floor found: what descent may have left.
pub const SAFETY: f64 = 0.97;
/// The same for floors of lines: which voltages count hangs on the shape, and descents stop early.
pub const LINE_SAFETY: f64 = 0.9;
/// The same for families that only feed: nothing but the feeder above them bounds their inversion.
pub const BARE_SAFETY: f64 = 0.4;
/// Largest systematic error of a gate line that counts as one, fraction. Declared: a network whose
/// lines are further off and cancel by chance is outside what is proved.
pub const LINE: f64 = 0.02;
/// Largest systematic error of a feeder leg, fraction; see [`LINE`].
pub const FEEDER: f64 = 0.02;
/// Nelder-Mead iterations per descent.
const ITERATIONS: u64 = 140;
/// Pool shapes a descent starts from.
const STARTS: usize = 3;

/// Floors of one output, or of a family that serves none.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Merit {
    /// Density times variance-current product, of the output leg and of the input leg alike, over
    /// the room the leg's systematic error leaves, m^2.
    pub own: f64,
    /// Density times variance-current product of any leg of the family, whatever its room, m^2.
    pub line: f64,
    /// Density, m^2/A.
    pub density: f64,
}

/// Floors of every output and of families without outputs.
#[derive(Debug, Clone)]
pub struct Merits {
    /// Per output of the spec; `None` where no shape of the pool serves it.
    pub outputs: Vec<Option<Merit>>,
    /// Per rail: a family that only feeds.
    pub bare: [Option<Merit>; 2],
    /// DC solutions spent.
    pub solutions: u64,
}

/// One rail's yardstick: how a solved shape is read.
pub struct Gauge<'a> {
    job: Job<'a>,
    rail: Rail,
    probes: Probes,
    wants: &'a [Want],
    climates: usize,
    /// Climate whose variance is followed along paths.
    tracked: usize,
    /// Least ratio of a variance at each climate to that at the tracked one.
    ratios: Vec<f64>,
}

/// What one shape reaches, in the order of [`Merit`]'s fields.
pub type Marks = [f64; 3];

impl<'a> Gauge<'a> {
    /// A gauge for a rail, calibrated on the pool.
    pub fn new(
        job: Job<'a>,
        rail: Rail,
        pool: &Pool,
        wants: &'a [Want],
        tracked: usize,
        ratios: &[f64],
    ) -> Gauge<'a> {
        Gauge {
            job,
            rail,
            probes: pool.probes[rail as usize].clone(),
            wants,
            climates: climates(&job).len(),
            tracked,
            ratios: ratios.to_vec(),
        }
    }

    /// Area of devices per ampere, m^2/A: effective width times drawn length, which no drawing
    /// undercuts.
    pub fn density(&self, solved: &Solved) -> f64 {
        let tech = self.job.tech(self.rail);
        let loss = crate::device::width_loss(tech.mosfet());
        let unit = &solved.unit;
        let strip = |s: crate::cells::Size| (s.width - loss) * s.length;
        let mut area = strip(unit.mirror) + unit.cascode.map_or(0.0, strip);
        let parts = CELLS[solved.shape.cell].parts();
        if let (Some(body), Some(card), false) = (unit.resistor, &tech.card.resistor, parts.cascode)
        {
            // A degeneration resistor's own body, without its border.
            area += crate::device::resistor_length(card, body.width, body.ohms) * body.width;
        }
        area / unit.current
    }

    /// Least variance of an input or output leg over the voltages at which it copies well, at the
    /// tracked climate.
    fn line(&self, solved: &Solved) -> f64 {
        let (g, i) = (self.tracked / 8, self.tracked % 8);
        (0..self.probes.volts.len())
            .map(|p| &solved.at(p)[g])
            .filter(|m| m.error.0[i].abs() <= FEEDER)
            .map(|m| m.variance_out.0[i].min(m.variance_in.0[i]))
            .fold(f64::INFINITY, f64::min)
    }

    /// Whether the input leg can hang between the rails with a feeder above it.
    fn hangs(&self, solved: &Solved) -> bool {
        let supply = self.job.spec.supply;
        let room = self.probes.volts[self.probes.ladder[0]];
        solved.input[1] + room <= supply.most.0
    }

    /// Marks of a shape for output `k`; `None` where it cannot serve it.
    pub fn marks(&self, solved: &Solved, k: usize) -> Option<Marks> {
        let want = &self.wants[k];
        if want.rail != self.rail {
            return None;
        }
        let output = &self.job.spec.outputs[k];
        let (low, high) = (
            self.probes.index(output.range.least.0),
            self.probes.index(output.range.most.0),
        );
        if solved.probes[low].early < want.early * 0.99 {
            return None;
        }
        let density = self.density(solved);
        let (g, i) = (self.tracked / 8, self.tracked % 8);
        let pick = |m: &crate::cells::solved::Mirrored| [m.variance_out.0[i], m.variance_in.0[i]];
        let ends = [pick(&solved.at(low)[g]), pick(&solved.at(high)[g])];
        let line = density * self.line(solved);
        if want.limit.is_infinite() {
            let middle = self
                .probes
                .index((output.range.least.0 + output.range.most.0) / 2.0);
            let (low, middle) = (&solved.probes[low], &solved.probes[middle]);
            let fall = (1.0 + low.error[0]) / (1.0 + middle.error[0]) - 1.0;
            return (fall > -1.2 * want.fall).then_some([0.0, line, density]);
        }
        // |x + low| + k s_low and |x + high| + k s_high both keep the limit A, whatever the line's
        // own error x: added up, half the difference of the two systematic errors plus k times the
        // smaller deviation is at most A. At another climate variances are at least `ratio` times
        // those of the tracked one.
        let mut room = f64::INFINITY;
        for c in 0..self.climates {
            let (g, i) = (c / 8, c % 8);
            let (a, b) = (solved.at(low)[g].error.0[i], solved.at(high)[g].error.0[i]);
            let (half, centre) = ((b - a).abs() / 2.0, (a + b) / 2.0);
            // The line's own error may centre the two ends, as far as it goes.
            let left = 1.0 - (half + (centre.abs() - LINE - want.limit).max(0.0)) / want.limit;
            if left <= 0.0 {
                return None;
            }
            let mut ratio = self.ratios[c];
            for (end, at) in [low, high].into_iter().zip(&ends) {
                let here = &solved.at(end)[g];
                ratio = ratio
                    .min(here.variance_out.0[i] / at[0])
                    .min(here.variance_in.0[i] / at[1]);
            }
            room = room.min(left * left / ratio);
        }
        let own = ends.iter().flatten().copied().fold(f64::INFINITY, f64::min);
        Some([density * own / room, line, density])
    }

    /// Marks of a shape for a family without outputs.
    pub fn bare(&self, solved: &Solved) -> Option<Marks> {
        let density = self.density(solved);
        let line = density * self.line(solved);
        (line.is_finite() && self.hangs(solved)).then_some([0.0, line, density])
    }
}

/// Hears of a variance as a function of the climate.
type Reader<'r> = dyn FnMut(&dyn Fn(usize) -> f64) + 'r;

/// Climate of the largest mismatch, and how much smaller variance can be at each of the others.
pub fn calibrate(job: &Job, pool: &Pool) -> (usize, Vec<f64>) {
    let n = climates(job).len();
    let mut votes = vec![0usize; n];
    let lane = |m: &Lanes, c: usize| m.0[c % 8];
    let each = |solved: &Solved, f: &mut Reader| {
        let groups = solved.groups();
        for p in 0..solved.probes.len() {
            let at = &solved.lanes[p * groups..(p + 1) * groups];
            if (0..n).all(|c| lane(&at[c / 8].error, c).abs() <= FEEDER) {
                f(&|c| lane(&at[c / 8].variance_out, c));
                f(&|c| lane(&at[c / 8].variance_in, c));
            }
        }
    };
    for solved in pool.shapes.iter().flatten() {
        each(solved, &mut |v| {
            let top = (0..n).fold(0, |t, c| if v(c) > v(t) { c } else { t });
            votes[top] += 1;
        });
    }
    let tracked = (0..n).fold(0, |t, c| if votes[c] > votes[t] { c } else { t });
    let mut ratios = vec![1.0f64; n];
    for solved in pool.shapes.iter().flatten() {
        each(solved, &mut |v| {
            for (c, ratio) in ratios.iter_mut().enumerate() {
                *ratio = ratio.min(v(c) / v(tracked));
            }
        });
    }
    for (c, ratio) in ratios.iter_mut().enumerate() {
        if c != tracked {
            *ratio *= 0.97;
        }
    }
    (tracked, ratios)
}

/// A descent of one mark of one output.
struct Descent<'d, 'a> {
    gauge: &'d Gauge<'a>,
    solver: &'d RefCell<Solver<'a>>,
    like: Shape,
    output: Option<usize>,
    mark: usize,
}

impl CostFunction for Descent<'_, '_> {
    type Param = Vec<f64>;
    type Output = f64;
    fn cost(&self, x: &Vec<f64>) -> Result<f64, Error> {
        let shape = declared(&self.gauge.job, self.gauge.rail, &self.like, x);
        let Ok(solved) = self.solver.borrow_mut().solve(&shape) else {
            return Ok(f64::INFINITY);
        };
        let marks = match self.output {
            Some(k) => self.gauge.marks(&solved, k),
            None => self.gauge.bare(&solved),
        };
        Ok(marks.map_or(f64::INFINITY, |m| ln(m[self.mark])))
    }
}

/// Least and largest inversion coefficient of the declared design space.
pub const INVERSION: [f64; 2] = [0.01, 100.0];
/// Least voltage across a degeneration resistor, V.
pub const DROP: f64 = desk::DROP;
/// Least and largest margin of a cascoded mirror device, V; the larger also bounds a degeneration
/// resistor's voltage.
pub const MARGIN: [f64; 2] = [desk::MARGIN, 0.6];

/// The nearest shape of the declared design space.
fn declared(job: &Job, rail: Rail, like: &Shape, x: &[f64]) -> Shape {
    let length = job.tech(rail).mosfet().length;
    let parts = CELLS[like.cell].parts();
    let within = |l: f64| l.clamp(length.least.0, length.most.0);
    let inverted = |i: f64| i.clamp(INVERSION[0], INVERSION[1]);
    let mut shape = desk::shape_of(like, x);
    shape.length = within(shape.length);
    shape.inversion = inverted(shape.inversion);
    if parts.cascode {
        shape.cascode_length = within(shape.cascode_length);
        shape.cascode_inversion = inverted(shape.cascode_inversion);
    }
    if parts.drop {
        shape.drop = shape.drop.min(MARGIN[1]);
    }
    shape
}

/// Finds every floor.
pub fn merits(job: &Job, pool: &Pool, wants: &[Want]) -> (Merits, usize) {
    let (tracked, ratios) = calibrate(job, pool);
    let all: Vec<Climate> = climates(job);
    let mut tasks: Vec<(Rail, Option<usize>)> = Vec::new();
    for (k, want) in wants.iter().enumerate() {
        tasks.push((want.rail, Some(k)));
    }
    tasks.push((Rail::Sink, None));
    tasks.push((Rail::Source, None));
    let found: Vec<(Option<Merit>, u64)> = tasks
        .par_iter()
        .map(|&(rail, output)| {
            let gauge = Gauge::new(*job, rail, pool, wants, tracked, &ratios);
            let read = |solved: &Solved| match output {
                Some(k) => gauge.marks(solved, k),
                None => gauge.bare(solved),
            };
            let marks: Vec<(Marks, Shape)> = pool.shapes[rail as usize]
                .iter()
                .filter_map(|s| Some((read(s)?, s.shape)))
                .collect();
            if marks.is_empty() {
                return (None, 0);
            }
            let mut evaluations = 0;
            let mut best = [0.0f64; 3];
            for (mark, best) in best.iter_mut().enumerate() {
                let key = |m: &Marks| m[mark];
                *best = marks
                    .iter()
                    .map(|m| m.0[mark])
                    .fold(f64::INFINITY, f64::min);
                // Where accuracy is asked, density follows from it.
                let slack =
                    output.is_none_or(|k| wants[k].limit.is_finite() && wants[k].early == 0.0);
                if *best == 0.0 || (mark == 2 && slack) {
                    if mark == 2 {
                        *best *= 0.1;
                    }
                    continue;
                }
                for cell in 0..CELLS.len() {
                    let mut starts: Vec<&(Marks, Shape)> =
                        marks.iter().filter(|m| m.1.cell == cell).collect();
                    starts.sort_by(|a, b| key(&a.0).total_cmp(&key(&b.0)));
                    if starts.is_empty() {
                        continue;
                    }
                    let solver = RefCell::new(Solver::new(
                        job.tech(rail),
                        cell,
                        job.spec.reference.current().0,
                        &gauge.probes.volts,
                        &all,
                    ));
                    for start in starts.iter().take(STARTS) {
                        // A cell far from the best will not come near it.
                        if key(&start.0) > 1.6 * *best {
                            continue;
                        }
                        let descent = Descent {
                            gauge: &gauge,
                            solver: &solver,
                            like: start.1,
                            output,
                            mark,
                        };
                        let x = desk::variables(&start.1);
                        let mut simplex = vec![x.clone()];
                        for i in 0..x.len() {
                            let mut y = x.clone();
                            y[i] += if i == 1 || i == 3 { 0.3 } else { -0.25 };
                            simplex.push(y);
                        }
                        let Ok(nm) = NelderMead::new(simplex).with_sd_tolerance(1e-4) else {
                            continue;
                        };
                        let run = Executor::new(descent, nm)
                            .configure(|s| s.max_iters(ITERATIONS))
                            .timer(false)
                            .run();
                        if let Ok(run) = run {
                            let cost = run.state().get_best_cost();
                            if cost.is_finite() {
                                *best = best.min(exp(cost));
                            }
                        }
                    }
                    evaluations += solver.borrow().solutions;
                }
            }
            let [own, line, density] = best;
            let merit = Merit {
                own: own * SAFETY,
                line: line
                    * if output.is_some() {
                        LINE_SAFETY
                    } else {
                        BARE_SAFETY
                    },
                density: density * SAFETY,
            };
            (Some(merit), evaluations)
        })
        .collect();
    let solutions = found.iter().map(|f| f.1).sum();
    let mut outputs: Vec<Option<Merit>> = found.into_iter().map(|f| f.0).collect();
    let source = outputs.pop().flatten();
    let sink = outputs.pop().flatten();
    (
        Merits {
            outputs,
            bare: [sink, source],
            solutions,
        },
        tracked,
    )
}
