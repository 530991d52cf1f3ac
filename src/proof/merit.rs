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
use crate::numeric::scalar::ln;
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
pub const BARE_SAFETY: f64 = 0.7;
/// Largest systematic error of a gate line that counts as one, as a share of the error limit of an
/// output it serves. Declared: a network whose lines are further off and cancel by chance is outside
/// what is proved.
pub const LINE: f64 = 0.25;
/// Largest systematic error of a feeder leg, the rounding of its units included, fraction; see
/// [`LINE`].
pub const FEEDER: f64 = 0.01;
/// Ways in which a leg's current may be shifted as a whole: not at all (its family takes the
/// reference, its units come out even), by its line, by its line and the rounding of its units.
pub const SHIFTS: usize = 3;
/// Nelder-Mead iterations per descent.
const ITERATIONS: u64 = 110;
/// Starts whose mark is more than so many times the best known are left out.
const FAR: f64 = 1.6;
/// Pool shapes a descent starts from.
const STARTS: usize = 2;

/// Floors of one output, or of a family that serves none.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Merit {
    /// Density times variance-current product, of the output leg and of the input leg alike, over
    /// the room the leg's systematic error leaves, m^2, by the way its current may be shifted.
    pub own: [f64; SHIFTS],
    /// Density times variance-current product of any leg of the family, whatever its room, m^2.
    pub line: f64,
    /// Density, m^2/A.
    pub density: f64,
}

/// Floors that tighten as density shrinks: short channels leave larger systematic errors, so small
/// devices are worth less than their area.
#[derive(Debug, Clone, PartialEq)]
pub struct Floors {
    /// Largest density for which each holds, m^2/A, rising to infinity, and the floors.
    steps: Vec<(f64, Merit)>,
}

impl Floors {
    /// The floors of every shape whatever its density.
    pub fn all(&self) -> &Merit {
        &self.steps[self.steps.len() - 1].1
    }

    /// The floors of shapes whose density is at most so much, m^2/A.
    pub fn up_to(&self, density: f64) -> &Merit {
        let step = self.steps.partition_point(|(most, _)| *most < density);
        &self.steps[step.min(self.steps.len() - 1)].1
    }
}

/// Floors of every output and of families without outputs.
#[derive(Debug, Clone)]
pub struct Merits {
    /// Per output of the spec; `None` where no shape of the pool serves it.
    pub outputs: Vec<Option<Floors>>,
    /// Per rail: a family that only feeds.
    pub bare: [Option<Floors>; 2],
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
    /// How variance goes with climate; see [`calibrate`].
    ratios: Vec<f64>,
}

/// What one shape reaches, in the order of [`Merit`]'s fields.
pub type Marks = [f64; SHIFTS + 2];
/// Place of a line's mark.
pub const OF_LINE: usize = SHIFTS;
/// Place of the density.
const OF_DENSITY: usize = SHIFTS + 1;

impl<'a> Gauge<'a> {
    /// A gauge for a rail, calibrated on the pool.
    pub fn new(
        job: Job<'a>,
        rail: Rail,
        pool: &Pool,
        wants: &'a [Want],
        ratios: &[f64],
    ) -> Gauge<'a> {
        Gauge {
            job,
            rail,
            probes: pool.probes[rail as usize].clone(),
            wants,
            climates: climates(&job).len(),
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

    /// The even part of a variance that goes with climate: the largest number whose multiple by
    /// the ratios is nowhere above it. Even parts add up along a path to no more than the even part
    /// of the sum.
    pub fn even(&self, variance: impl Fn(usize) -> f64) -> f64 {
        (0..self.climates)
            .map(|c| variance(c) / self.ratios[c])
            .fold(f64::INFINITY, f64::min)
    }

    /// Even part of the least variance of an input or feeder leg: a feeder sits at another voltage
    /// at every climate, and copies well at all of them.
    fn line(&self, solved: &Solved) -> f64 {
        let least = |c: usize| {
            (0..self.probes.volts.len())
                .filter(|&p| solved.at(p)[c / 8].error.0[c % 8].abs() <= FEEDER)
                .map(|p| lesser(solved, p, c))
                .fold(f64::INFINITY, f64::min)
        };
        if (0..self.climates).any(|c| least(c).is_infinite()) {
            return f64::INFINITY;
        }
        self.even(least)
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
        let line = density * self.line(solved);
        if want.limit.is_infinite() {
            let middle = self
                .probes
                .index((output.range.least.0 + output.range.most.0) / 2.0);
            let (low, middle) = (&solved.probes[low], &solved.probes[middle]);
            let fall = (1.0 + low.error[0]) / (1.0 + middle.error[0]) - 1.0;
            return (fall > -1.2 * want.fall).then_some([0.0, 0.0, 0.0, line, density]);
        }
        // |x + low| + k s_low and |x + high| + k s_high both keep the limit A for some common shift
        // x: added up, half the difference of the two systematic errors, and what of their centre x
        // cannot undo, plus k times the smaller deviation is at most A. Every variance on the way,
        // and so their sum, is at least `ratio` times its even part.
        let mut room = [f64::INFINITY; SHIFTS];
        for c in 0..self.climates {
            let at = |probe: usize| solved.at(probe)[c / 8].error.0[c % 8];
            let (half, centre) = ((at(high) - at(low)).abs() / 2.0, (at(low) + at(high)) / 2.0);
            for (class, room) in room.iter_mut().enumerate() {
                let reach = shift(class, want.limit);
                let left = 1.0 - (half + (centre.abs() - reach).max(0.0)) / want.limit;
                *room = room.min(left.max(0.0).powi(2) / self.ratios[c]);
            }
        }
        let own = [low, high]
            .map(|probe| self.even(|c| lesser(solved, probe, c)))
            .into_iter()
            .fold(f64::INFINITY, f64::min);
        let [none, lined, rounded] = room.map(|room| density * own / room);
        rounded
            .is_finite()
            .then_some([none, lined, rounded, line, density])
    }

    /// Marks of a shape for a family without outputs.
    pub fn bare(&self, solved: &Solved) -> Option<Marks> {
        let density = self.density(solved);
        let line = density * self.line(solved);
        (line.is_finite() && self.hangs(solved)).then_some([0.0, 0.0, 0.0, line, density])
    }
}

/// The lesser variance of an input and an output leg at a probe and a climate, times its current, A.
fn lesser(solved: &Solved, probe: usize, climate: usize) -> f64 {
    let m = &solved.at(probe)[climate / 8];
    m.variance_out.0[climate % 8].min(m.variance_in.0[climate % 8])
}

/// How far a class of shifts reaches for an output with an accuracy limit, fraction.
fn shift(class: usize, limit: f64) -> f64 {
    [0.0, LINE * limit, (LINE + 1.0) * limit][class]
}

/// How variance goes with climate, by the shapes of the pool: at each climate the lower quartile of
/// its ratio to the largest. Any positive numbers would do (see [`Gauge::marks`]); these are near
/// what good shapes have.
pub fn calibrate(job: &Job, pool: &Pool) -> Vec<f64> {
    let n = climates(job).len();
    let mut ratios: Vec<Vec<f64>> = vec![Vec::new(); n];
    for solved in pool.shapes.iter().flatten() {
        let good = (0..solved.probes.len())
            .find(|&p| (0..n).all(|c| solved.at(p)[c / 8].error.0[c % 8].abs() <= FEEDER));
        let Some(p) = good else { continue };
        let v = |c: usize| solved.at(p)[c / 8].variance_out.0[c % 8];
        let most = (0..n).map(v).fold(0.0, f64::max);
        for (c, ratios) in ratios.iter_mut().enumerate() {
            ratios.push(v(c) / most);
        }
    }
    ratios
        .into_iter()
        .map(|mut r| {
            r.sort_by(f64::total_cmp);
            r.get(r.len() / 4).copied().unwrap_or(1.0).max(1e-3)
        })
        .collect()
}

/// A descent of one mark of one output.
struct Descent<'d, 'a> {
    gauge: &'d Gauge<'a>,
    solver: &'d RefCell<Solver<'a>>,
    like: Shape,
    output: Option<usize>,
    mark: usize,
    /// Largest density that counts, m^2/A.
    cap: f64,
    /// The least mark found within it.
    least: &'d RefCell<f64>,
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
        let Some(marks) = marks else {
            return Ok(f64::INFINITY);
        };
        let over = (marks[OF_DENSITY] / self.cap).max(1.0);
        if over <= 1.0 {
            let mut least = self.least.borrow_mut();
            *least = least.min(marks[self.mark]);
        }
        // Density falls as the square of length, marks far slower: this slope leads back.
        Ok(ln(marks[self.mark].min(1e300)) + 2.0 * ln(over))
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

/// Steps of density for which an output has floors of its own, over the least at which it can keep
/// its limit.
const CAPS: [f64; 6] = [1.5, 3.0, 6.0, 12.0, 24.0, 48.0];

/// Finds every floor; `stepwise`, those of small densities too.
pub fn merits(job: &Job, pool: &Pool, wants: &[Want], stepwise: bool) -> Merits {
    let ratios = calibrate(job, pool);
    let mut tasks: Vec<(Rail, Option<usize>)> = Vec::new();
    for (k, want) in wants.iter().enumerate() {
        tasks.push((want.rail, Some(k)));
    }
    tasks.push((Rail::Sink, None));
    tasks.push((Rail::Source, None));
    let found: Vec<(Option<Floors>, u64)> = tasks
        .par_iter()
        .map(|&(rail, output)| {
            let gauge = Gauge::new(*job, rail, pool, wants, &ratios);
            let search = Search::new(&gauge, pool, output);
            let Some(all) = search.floors(f64::INFINITY, STARTS) else {
                return (None, search.solutions());
            };
            let mut steps = vec![(f64::INFINITY, all)];
            let asked = output.map(|k| &wants[k]).filter(|w| w.limit.is_finite());
            if let (Some(want), true) = (asked, stepwise) {
                let limit = (want.limit / want.sigma).powi(2);
                let into = job.spec.reference.current().0;
                let need = all.own[1] * (1.0 / want.current + 1.0 / into) / limit;
                for cap in CAPS.iter().rev().map(|c| c * need) {
                    let above = steps[steps.len() - 1].1;
                    // What holds for more shapes holds for fewer.
                    let floor = search.floors(cap, 1).map_or(above, |f| f.max(&above));
                    steps.push((cap, floor));
                }
                steps.reverse();
            }
            (Some(Floors { steps }), search.solutions())
        })
        .collect();
    let solutions = found.iter().map(|f| f.1).sum();
    let mut outputs: Vec<Option<Floors>> = found.into_iter().map(|f| f.0).collect();
    let source = outputs.pop().flatten();
    let sink = outputs.pop().flatten();
    Merits {
        outputs,
        bare: [sink, source],
        solutions,
    }
}

impl Merit {
    /// The higher of two floors, each by each.
    fn max(&self, other: &Merit) -> Merit {
        Merit {
            own: std::array::from_fn(|n| self.own[n].max(other.own[n])),
            line: self.line.max(other.line),
            density: self.density.max(other.density),
        }
    }
}

/// The search for the floors of one output, or of a family that serves none.
struct Search<'s, 'a> {
    gauge: &'s Gauge<'a>,
    output: Option<usize>,
    /// What the pool's shapes reach.
    marks: Vec<(Marks, Shape)>,
    solvers: Vec<RefCell<Solver<'a>>>,
}

impl<'s, 'a> Search<'s, 'a> {
    fn new(gauge: &'s Gauge<'a>, pool: &Pool, output: Option<usize>) -> Search<'s, 'a> {
        let read = |solved: &Solved| match output {
            Some(k) => gauge.marks(solved, k),
            None => gauge.bare(solved),
        };
        let all: Vec<Climate> = climates(&gauge.job);
        let current = gauge.job.spec.reference.current().0;
        let tech = gauge.job.tech(gauge.rail);
        Search {
            gauge,
            output,
            marks: pool.shapes[gauge.rail as usize]
                .iter()
                .filter_map(|s| Some((read(s)?, s.shape)))
                .collect(),
            solvers: (0..CELLS.len())
                .map(|cell| {
                    let volts = &gauge.probes.volts;
                    RefCell::new(Solver::new(tech, cell, current, volts, &all))
                })
                .collect(),
        }
    }

    fn solutions(&self) -> u64 {
        self.solvers.iter().map(|s| s.borrow().solutions).sum()
    }

    /// Floors of all shapes whose density is at most `cap`; `None` where the pool has none.
    fn floors(&self, cap: f64, starts: usize) -> Option<Merit> {
        let within = |m: &&(Marks, Shape)| m.0[OF_DENSITY] <= cap;
        if !self.marks.iter().any(|m| within(&m)) {
            return None;
        }
        let want = self.output.map(|k| &self.gauge.wants[k]);
        // Where accuracy is asked, density follows from it.
        let slack = want.is_none_or(|w| w.limit.is_finite() && w.early == 0.0);
        let bounded = cap.is_finite();
        let mut best: Marks = [0.0; SHIFTS + 2];
        for (mark, best) in best.iter_mut().enumerate() {
            let pooled = self.marks.iter().filter(within).map(|m| m.0[mark]);
            *best = pooled.fold(f64::INFINITY, f64::min);
            if *best == 0.0 || best.is_infinite() {
                continue;
            }
            if mark == OF_DENSITY && (slack || bounded) {
                *best *= 0.1;
                continue;
            }
            // Rounded legs are rare: half of what the pool has will do for them.
            if mark == SHIFTS - 1 {
                *best *= if bounded { 0.0 } else { 0.5 };
                continue;
            }
            // The reference feeds families of one rail only.
            if mark == 0 && self.gauge.rail != self.gauge.job.spec.reference.rail() {
                *best = 0.0;
                continue;
            }
            for cell in 0..CELLS.len() {
                let found = self.descend(cell, mark, cap, starts, *best);
                *best = best.min(found);
            }
        }
        let bare = if self.output.is_some() {
            LINE_SAFETY
        } else {
            BARE_SAFETY
        };
        Some(Merit {
            own: [best[0], best[1], best[2]].map(|own| own * SAFETY),
            line: best[OF_LINE] * bare,
            density: best[OF_DENSITY] * SAFETY,
        })
    }

    /// The least of a mark that descents of one cell find within a density.
    fn descend(&self, cell: usize, mark: usize, cap: f64, starts: usize, best: f64) -> f64 {
        let key = |m: &Marks| m[mark] * (m[OF_DENSITY] / cap).max(1.0).powi(2);
        let mut from: Vec<&(Marks, Shape)> =
            self.marks.iter().filter(|m| m.1.cell == cell).collect();
        from.sort_by(|a, b| key(&a.0).total_cmp(&key(&b.0)));
        let least = RefCell::new(f64::INFINITY);
        for start in from.into_iter().take(starts) {
            // A cell far from the best will not come near it.
            if key(&start.0) > FAR * best {
                continue;
            }
            let descent = Descent {
                gauge: self.gauge,
                solver: &self.solvers[cell],
                like: start.1,
                output: self.output,
                mark,
                cap,
                least: &least,
            };
            let x = desk::variables(&start.1);
            let mut simplex = vec![x.clone()];
            for i in 0..x.len() {
                let mut y = x.clone();
                y[i] += if i == 1 || i == 3 { 0.3 } else { -0.25 };
                simplex.push(y);
            }
            if let Ok(nm) = NelderMead::new(simplex).with_sd_tolerance(1e-4) {
                let run = Executor::new(descent, nm)
                    .configure(|s| s.max_iters(ITERATIONS))
                    .timer(false)
                    .run();
                // What counts was noted on the way.
                drop(run);
            }
        }
        least.into_inner()
    }
}
