//! One output on its own: the best that any leg of any cell at any size of the card does, on a
//! perfect line. What no such leg can do, no network can, whatever its budgets.
//!
//! A leg hangs on a family whose input leg has as many units as a family may have, each as wide as
//! the card allows, fed by an exact current; its own error is then that input leg's mismatch, its
//! own, and the systematic error of the copy. Every network adds feeders to that. The search is a
//! compass search (Hooke & Jeeves, JACM 8, 1961) over all sizes of a shape, from the best shapes of
//! the pool: a leg that it finds is real, that it finds none is no proof.

use super::candidates::{Want, wants};
use super::columns::UNITS;
use super::desk::{shape_of, variables};
use crate::cells::solved::{Climate, Solved, Solver, resistor_factor};
use crate::cells::{CELLS, Shape, Tech};
use crate::device;
use crate::network::measure::{PLAIN_FALL, tolerance};
use crate::network::probes::Pool;
use crate::network::{Job, corners};
use crate::numeric::lanes::{Lanes, WIDTH};
use crate::numeric::scalar::ln;
use crate::spec::{Rail, Reference};
use std::sync::atomic::{AtomicBool, Ordering};

/// Shapes of each cell that a search starts from.
const STARTS: usize = 3;
/// First and last step of the search, in the variables' units (factors e, or 100 mV).
const COARSE: f64 = 0.5;
const FINE: f64 = 0.01;
/// Bisections of a range's end: a range of a volt to a millivolt.
const BISECTIONS: usize = 10;

/// What a leg does at both ends of a range, worst climate.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Leg {
    /// Error; where no accuracy is asked, the fall of the current towards the low end.
    error: f64,
    /// Output resistance at the low end, Ohm.
    resistance: f64,
}

/// What is sought.
#[derive(Debug, Clone, Copy, PartialEq)]
enum Aim {
    /// All limits of the output at once.
    All,
    /// The least error that its other limits allow.
    Error,
    /// The largest output resistance that its other limits allow.
    Resistance,
}

/// The least that an output's own limits would have to give, each alone, the others kept; `None`
/// where that limit is not set or cannot help.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Reach {
    /// Least error, fraction.
    pub accuracy: Option<f64>,
    /// Least low end of the range, V.
    pub low: Option<f64>,
    /// Largest high end of the range, V.
    pub high: Option<f64>,
    /// Largest output resistance, Ohm.
    pub resistance: Option<f64>,
}

/// One output's limits as the search sees them.
#[derive(Clone, Copy)]
struct Case {
    rail: Rail,
    want: Want,
    tolerance: f64,
    /// Low end, middle, high end, V.
    volts: [f64; 3],
    /// Least output resistance, Ohm; 0 where none is asked.
    resistance: f64,
    /// Error that the network's own reference leaves whatever the leg does, fraction.
    floor: f64,
}

/// Searches legs for one output.
struct Search<'a> {
    job: Job<'a>,
    climates: Vec<Climate>,
    stop: &'a AtomicBool,
    solutions: u64,
}

/// What keeps every output's own limits out of reach: per output, `None` where some leg serves it,
/// else how far its limits are out of reach; and the DC solutions spent. Once `stop` is set, what
/// is not yet known counts as within reach.
pub fn reach(job: &Job, pool: &Pool, stop: &AtomicBool) -> (Vec<Option<Reach>>, u64) {
    let mut search = Search {
        job: *job,
        climates: corners::climates(job),
        stop,
        solutions: 0,
    };
    let reach = wants(job, 1.0)
        .iter()
        .enumerate()
        .map(|(k, want)| search.output(pool, k, want))
        .collect();
    (reach, search.solutions)
}

impl Search<'_> {
    fn output(&mut self, pool: &Pool, k: usize, want: &Want) -> Option<Reach> {
        let output = &self.job.spec.outputs[k];
        let (low, high) = (output.range.least.0, output.range.most.0);
        let case = Case {
            rail: output.rail,
            want: *want,
            tolerance: tolerance(&self.job, output),
            volts: [low, (low + high) / 2.0, high],
            resistance: output.output_resistance.map_or(0.0, |r| r.0),
            floor: if want.absolute {
                reference_spread(&self.job, pool)
            } else {
                0.0
            },
        };
        let probes = &pool.probes[case.rail as usize];
        let at = [0, 1, 2].map(|i| {
            // The middle is probed where it matters.
            if i == 1 && want.limit.is_finite() {
                probes.index(low)
            } else {
                probes.index(case.volts[i])
            }
        });
        let mut ranked: Vec<(f64, Shape)> = pool.shapes[case.rail as usize]
            .iter()
            .map(|solved| {
                let leg = self.leg(&case, solved, at);
                (merit(&case, Aim::All, leg), solved.shape)
            })
            .collect();
        ranked.sort_by(|a, b| a.0.total_cmp(&b.0));
        if ranked.first().is_some_and(|best| best.0 <= 0.0) {
            return None;
        }
        let mut starts: Vec<Shape> = Vec::new();
        for cell in 0..CELLS.len() {
            let own = ranked.iter().filter(|r| r.1.cell == cell);
            starts.extend(own.take(STARTS).map(|r| r.1));
        }
        let (all, _) = self.best(&case, Aim::All, &starts);
        if all <= 0.0 || self.stopped() {
            return None;
        }
        let mut reach = Reach::default();
        if want.limit.is_finite() {
            let (score, leg) = self.best(&case, Aim::Error, &starts);
            let kept = case.resistance == 0.0 || leg.resistance >= case.resistance * 0.9999;
            reach.accuracy = (score.is_finite() && kept && leg.error < 1.0).then_some(leg.error);
        }
        if case.resistance > 0.0 {
            let (score, leg) = self.best(&case, Aim::Resistance, &starts);
            let kept = leg.error <= case.limit() * 1.0001;
            reach.resistance = (score.is_finite() && kept).then_some(leg.resistance);
        }
        reach.low = self.end(&case, 0, high - 0.02, &starts);
        reach.high = self.end(&case, 2, low + 0.02, &starts);
        Some(reach)
    }

    /// The least move of one end of the range towards `furthest` that brings everything within
    /// reach.
    fn end(&mut self, case: &Case, end: usize, furthest: f64, starts: &[Shape]) -> Option<f64> {
        let moved = |volts: f64| {
            let mut case = *case;
            case.volts[end] = volts;
            case.volts[1] = (case.volts[0] + case.volts[2]) / 2.0;
            case
        };
        if (end == 0) != (furthest > case.volts[end]) {
            return None;
        }
        if self.best(&moved(furthest), Aim::All, starts).0 > 0.0 {
            return None;
        }
        let (mut dead, mut alive) = (case.volts[end], furthest);
        for _ in 0..BISECTIONS {
            let middle = (dead + alive) / 2.0;
            if self.best(&moved(middle), Aim::All, starts).0 <= 0.0 {
                alive = middle;
            } else {
                dead = middle;
            }
        }
        (!self.stopped()).then_some(alive)
    }

    fn stopped(&self) -> bool {
        self.stop.load(Ordering::Relaxed)
    }

    /// The best merit over all starts, and its leg.
    fn best(&mut self, case: &Case, aim: Aim, starts: &[Shape]) -> (f64, Leg) {
        let tech = self.job.tech(case.rail);
        let nothing = Leg {
            error: f64::INFINITY,
            resistance: 0.0,
        };
        let mut best = (f64::INFINITY, nothing);
        let mut last: Option<(usize, Solver)> = None;
        for start in starts {
            if self.stopped() || (aim == Aim::All && best.0 <= 0.0) {
                break;
            }
            if last.as_ref().is_none_or(|l| l.0 != start.cell) {
                let current = self.job.spec.reference.current().0;
                let solver = Solver::new(tech, start.cell, current, &case.volts, &self.climates);
                last = Some((start.cell, solver));
            }
            let Some((_, solver)) = &mut last else {
                continue;
            };
            let found = self.descend(case, aim, solver, start);
            if found.0 < best.0 {
                best = found;
            }
        }
        best
    }

    fn descend(&mut self, case: &Case, aim: Aim, solver: &mut Solver, start: &Shape) -> (f64, Leg) {
        let before = solver.solutions;
        let leg = |search: &Self, solver: &mut Solver, shape: &Shape| {
            let solved = solver.solve(shape).ok()?;
            search.leg(case, &solved, [0, 1, 2])
        };
        let tech = self.job.tech(case.rail);
        let enough = |value: f64| (aim == Aim::All && value <= 0.0) || self.stopped();
        let (score, shape) = compass(&tech, start, enough, |shape| {
            merit(case, aim, leg(self, solver, shape))
        });
        let found = leg(self, solver, &shape);
        self.solutions += solver.solutions - before;
        let nothing = Leg {
            error: f64::INFINITY,
            resistance: 0.0,
        };
        (score, found.unwrap_or(nothing))
    }

    /// What a solved shape does as a leg; `None` where it cannot be drawn for the current. `at`
    /// are the probes of the low end, the middle and the high end.
    fn leg(&self, case: &Case, solved: &Solved, at: [usize; 3]) -> Option<Leg> {
        let tech = self.job.tech(case.rail);
        let [least, most] = unit_currents(&tech, solved);
        let want = &case.want;
        if least > want.current * (1.0 + 1e-3) || most < least {
            return None;
        }
        let input = most * f64::from(UNITS[UNITS.len() - 1]);
        let low = &solved.probes[at[0]];
        let mut error: f64 = 0.0;
        if want.limit.is_finite() {
            for end in [at[0], at[2]] {
                for lanes in solved.at(end) {
                    let variance = lanes.variance_in * (1.0 / input)
                        + lanes.variance_out * (1.0 / want.current);
                    let total: Lanes = lanes.error.abs() + variance.sqrt() * want.sigma;
                    error = error.max(total.largest());
                }
            }
            error = error.max(case.floor) + case.tolerance;
        } else {
            for (low, middle) in solved.at(at[0]).iter().zip(solved.at(at[1])) {
                let fall = ((low.error + 1.0) / (middle.error + 1.0) - 1.0).abs();
                error = error.max(fall.largest());
            }
        }
        Some(Leg {
            error,
            resistance: low.early / want.current,
        })
    }
}

impl Case {
    /// Limit of the error as [`Leg`] counts it.
    fn limit(&self) -> f64 {
        if self.want.limit.is_finite() {
            self.want.limit + self.tolerance
        } else {
            PLAIN_FALL
        }
    }
}

/// How far a leg misses its aim; at most 0 is a hit for [`Aim::All`].
fn merit(case: &Case, aim: Aim, leg: Option<Leg>) -> f64 {
    let Some(leg) = leg else {
        return f64::INFINITY;
    };
    let error = ln(leg.error.max(1e-12) / case.limit().max(1e-12));
    let short = ln(case.resistance.max(1e-12) / leg.resistance.max(1e-12));
    /// What a kept limit costs beyond the one that is sought.
    const KEPT: f64 = 100.0;
    match aim {
        Aim::All => error.max(short),
        Aim::Error => error + KEPT * short.max(0.0),
        Aim::Resistance => short + KEPT * error.max(0.0),
    }
}

/// Least and largest current of a unit that can be drawn, A.
fn unit_currents(tech: &Tech, solved: &Solved) -> [f64; 2] {
    let mosfet = tech.mosfet();
    let loss = device::width_loss(mosfet);
    let mut range = [0.0_f64, f64::INFINITY];
    let unit = &solved.unit;
    for size in [Some(unit.mirror), unit.cascode].into_iter().flatten() {
        let per_ampere = (size.width - loss) / unit.current;
        range[0] = range[0].max((mosfet.width.least.0 - loss) / per_ampere);
        range[1] = range[1].min((mosfet.width.most.0 - loss) / per_ampere);
    }
    range
}

/// Half the spread over climates and supplies of the current that the network's own resistor makes,
/// with the best root of the pool: a ratio may centre it, nothing makes it less.
fn reference_spread(job: &Job, pool: &Pool) -> f64 {
    let rail = job.spec.reference.rail();
    let tech = job.tech(rail);
    let supply = job.spec.supply;
    let factors: Vec<f64> = corners::climates(job)
        .iter()
        .map(|climate| resistor_factor(&tech, climate))
        .collect();
    let spread = |solved: &Solved| {
        let mut range = [f64::INFINITY, 0.0_f64];
        for (c, factor) in factors.iter().enumerate() {
            let input = solved.input_lanes[c / WIDTH].0[c % WIDTH];
            for volts in [supply.least.0, supply.most.0] {
                let current = (volts - input) / factor;
                range = [range[0].min(current), range[1].max(current)];
            }
        }
        (range[1] - range[0]) / (range[1] + range[0])
    };
    let spreads = pool.shapes[rail as usize].iter().map(spread);
    spreads.filter(|s| *s > 0.0).fold(1.0, f64::min)
}

/// The lowest that the highest voltage of the reference pin can be, V from the root's rail, over
/// all roots that can be drawn for the reference's current, and the DC solutions spent. `None` for a
/// reference that the network makes itself, and where no root can be drawn.
pub fn lowest_pin(job: &Job, pool: &Pool) -> (Option<f64>, u64) {
    let Reference::Current { copies, .. } = job.spec.reference else {
        return (None, 0);
    };
    let rail = job.spec.reference.rail();
    let tech = job.tech(rail);
    let current = job.spec.reference.current().0;
    let volts = |solved: &Solved| {
        let [least, most] = unit_currents(&tech, solved);
        let bias = CELLS[solved.shape.cell].parts().bias_leg;
        let drawable = UNITS
            .iter()
            .any(|&n| (least..=most).contains(&(current / f64::from(n))));
        if drawable && (!bias || copies > 1) {
            solved.input[1]
        } else {
            f64::INFINITY
        }
    };
    let shapes = &pool.shapes[rail as usize];
    let Some(start) = shapes
        .iter()
        .min_by(|a, b| volts(a).total_cmp(&volts(b)))
        .filter(|best| volts(best).is_finite())
    else {
        return (None, 0);
    };
    let probe = [pool.probes[rail as usize].volts[0]];
    let climates = corners::climates(job);
    let mut solver = Solver::new(tech, start.shape.cell, current, &probe, &climates);
    let (lowest, _) = compass(
        &tech,
        &start.shape,
        |_| false,
        |shape| solver.solve(shape).map_or(f64::INFINITY, |s| volts(&s)),
    );
    (lowest.is_finite().then_some(lowest), solver.solutions)
}

/// Compass search over a shape's sizes for the least `value`, until that is `enough`.
fn compass(
    tech: &Tech,
    start: &Shape,
    enough: impl Fn(f64) -> bool,
    mut value: impl FnMut(&Shape) -> f64,
) -> (f64, Shape) {
    let length = tech.mosfet().length;
    let (shortest, longest) = (ln(length.least.0), ln(length.most.0));
    let mut x = variables(start);
    let mut best = value(start);
    let mut step = COARSE;
    while step > FINE && !enough(best) {
        let mut moved = false;
        for i in 0..x.len() {
            for way in [step, -step] {
                let mut y = x.clone();
                y[i] += way;
                // Variables 0 and 2 are logarithms of lengths.
                if i == 0 || (i == 2 && start.cascode_length > 0.0) {
                    y[i] = y[i].clamp(shortest, longest);
                }
                let trial = value(&shape_of(start, &y));
                if trial < best - 1e-6 {
                    (best, x, moved) = (trial, y, true);
                    break;
                }
            }
        }
        if !moved {
            step /= 2.0;
        }
    }
    (best, shape_of(start, &x))
}
