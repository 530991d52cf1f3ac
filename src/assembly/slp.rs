//! All sizes of a network together, by sequential linear programming: Griffith & Stewart,
//! Management Science 7, 1961, with a trust region and an exact penalty (Fletcher, *Practical
//! Methods of Optimization*, 1987, ch. 12).
//!
//! Area and error trade off along whole paths, so sizes must move together; one family at a time
//! stalls where the error budget is spent. Slopes are finite differences of solved shapes: a shape
//! is solved again for each of its variables, the rest is adding up.

use super::desk::{Desk, shape_of, variables};
use crate::cells::Shape;
use crate::numeric::scalar::ln;
use good_lp::{
    Expression, ProblemVariables, Solution, SolverModel, Variable, clarabel, constraint, variable,
};
use std::collections::BTreeMap;

/// Finite-difference step, in the variables' own units (about 1 %).
const STEP: f64 = 0.01;
/// Trust region at which the descent ends.
const FINE: f64 = 0.004;
/// A step this long or shorter leaves slopes good enough to go on with.
const NEAR: f64 = 0.02;
/// Bound of a variable at which it stands still.
const STILL: f64 = 2e-4;
/// Linearisations at most.
const ROUNDS: usize = 24;
/// Charge for exceeding a limit by a factor e, in units of ln(area). An exact penalty must exceed
/// every multiplier; area falls at most with the square of an error, so they add up to about 2.
const CHARGE: f64 = 5.0;

/// A change of every variable of every family.
type Step = Vec<Vec<f64>>;

/// A point of the descent.
struct Point {
    shapes: Vec<Shape>,
    area: f64,
    limits: Vec<(usize, f64)>,
    merit: f64,
}

impl Point {
    fn at(desk: &mut Desk, shapes: Vec<Shape>) -> Option<Point> {
        if !place(desk, &shapes) {
            return None;
        }
        let (area, limits) = desk.limits();
        let mut worst: Vec<f64> = Vec::new();
        for &(thing, value) in &limits {
            if worst.len() <= thing {
                worst.resize(thing + 1, 0.0);
            }
            worst[thing] = worst[thing].max(value);
        }
        let merit = ln(area) + CHARGE * worst.iter().sum::<f64>();
        Some(Point {
            shapes,
            area,
            limits,
            merit,
        })
    }
}

/// Descends from the desk's present shapes within a first trust region of `radius`.
pub(super) fn descend(desk: &mut Desk, radius: f64) {
    let start = desk.shapes();
    desk.snap = false;
    let mut radius = radius;
    let mut slopes: Option<Slopes> = None;
    if let Some(mut here) = Point::at(desk, start.clone()) {
        for _ in 0..ROUNDS {
            if radius < FINE {
                break;
            }
            let at = slopes.get_or_insert_with(|| differentiate(desk, &here));
            let most = alike(&here.shapes, radius);
            let Some((_, next)) = stepped(desk, &here, at, &most) else {
                break;
            };
            match next {
                Some(next) if next.merit < here.merit - 1e-6 => {
                    let gain = here.merit - next.merit;
                    here = next;
                    slopes = None;
                    // A small gain at this radius promises less at the same.
                    radius = if gain > 0.004 {
                        (radius * 1.5).min(0.4)
                    } else {
                        radius * 0.5
                    };
                }
                _ => radius *= 0.4,
            }
        }
        desk.snap = desk.on_grid;
        if place(desk, &here.shapes) {
            return;
        }
    }
    desk.snap = desk.on_grid;
    place(desk, &start);
}

/// Settles at the least area from the desk's present shapes, a first step being at most `radius`;
/// two gains in a row below `gain` (in ln of area) are the end.
///
/// A descent within one trust region ends where the bent directions make it small, however far the
/// straight ones would still go. Here every variable has a bound of its own, wider after two steps
/// the same way and narrower after a turn: moving limits, as in Svanberg, Int. J. Numerical Methods
/// in Engineering 24, 1987.
pub(super) fn settle(desk: &mut Desk, radius: f64, gain: f64) {
    let start = desk.shapes();
    desk.snap = false;
    let Some(mut here) = Point::at(desk, start.clone()) else {
        desk.snap = desk.on_grid;
        place(desk, &start);
        return;
    };
    let mut most = alike(&here.shapes, radius);
    let mut last: Option<Step> = None;
    // Slopes cost most. Those of a point near by serve as long as they lead downhill well enough;
    // only fresh ones may say that there is nothing left to gain.
    let mut slopes: Option<Slopes> = None;
    let mut fresh = false;
    let mut small = 0;
    for _ in 0..ROUNDS {
        if most.iter().flatten().all(|&m| m < STILL) {
            break;
        }
        let at = slopes.get_or_insert_with(|| {
            fresh = true;
            differentiate(desk, &here)
        });
        let Some((step, next)) = stepped(desk, &here, at, &most) else {
            break;
        };
        let better = next.filter(|next| next.merit < here.merit);
        let gained = better.as_ref().map_or(0.0, |next| here.merit - next.merit);
        if gained < gain && !fresh {
            slopes = None;
        }
        let Some(next) = better else {
            if fresh {
                most.iter_mut().flatten().for_each(|m| *m *= 0.4);
            }
            continue;
        };
        here = next;
        if fresh {
            small = if gained < gain { small + 1 } else { 0 };
            if small > 1 {
                break;
            }
        }
        let longest = step.iter().flatten().fold(0.0, |a: f64, d| a.max(d.abs()));
        if longest > NEAR {
            slopes = None;
        }
        fresh = false;
        for (f, list) in most.iter_mut().enumerate() {
            for (i, m) in list.iter_mut().enumerate() {
                // A step well inside its bound is the model's own choice.
                if step[f][i].abs() < 0.5 * *m {
                    continue;
                }
                let before = last.as_ref().map_or(0.0, |last| last[f][i]);
                if before * step[f][i] > 0.0 {
                    *m = (*m * 1.6).min(0.3);
                } else if before * step[f][i] < 0.0 {
                    *m *= 0.5;
                }
            }
        }
        last = Some(step);
    }
    desk.snap = desk.on_grid;
    if !place(desk, &here.shapes) {
        place(desk, &start);
    }
}

/// The same bound for every variable of every shape.
fn alike(shapes: &[Shape], radius: f64) -> Vec<Vec<f64>> {
    let bounds = |shape: &Shape| vec![radius; variables(shape).len()];
    shapes.iter().map(bounds).collect()
}

/// The best step of the linearised network within bounds, and where it leads; `None` without one.
/// The step is the one taken: it was aimed again where that came out better.
fn stepped(
    desk: &mut Desk,
    here: &Point,
    at: &Slopes,
    most: &[Vec<f64>],
) -> Option<(Step, Option<Point>)> {
    let values: Vec<f64> = here.limits.iter().map(|l| l.1).collect();
    let mut step = propose(desk, here, at, &values, most)?;
    let mut next = Point::at(desk, moved(&here.shapes, &step));
    // The limits bend: shift them by what the linear model missed and aim again (second-order
    // correction, Fletcher 1987).
    if let Some(missed) = &next {
        let aim: Vec<f64> = missed
            .limits
            .iter()
            .enumerate()
            .map(|(j, l)| l.1 - at.limit(j, &step))
            .collect();
        if let Some(again) = propose(desk, here, at, &aim, most)
            && let Some(second) = Point::at(desk, moved(&here.shapes, &again))
            && second.merit < missed.merit
        {
            (step, next) = (again, Some(second));
        }
    }
    Some((step, next))
}

fn place(desk: &mut Desk, shapes: &[Shape]) -> bool {
    shapes.iter().enumerate().all(|(f, s)| desk.put(f, s))
}

/// Shapes after a step; lengths stay within the card.
fn moved(shapes: &[Shape], step: &[Vec<f64>]) -> Vec<Shape> {
    shapes
        .iter()
        .zip(step)
        .map(|(shape, step)| {
            let x: Vec<f64> = variables(shape)
                .iter()
                .zip(step)
                .map(|(x, d)| x + d)
                .collect();
            shape_of(shape, &x)
        })
        .collect()
}

/// Slopes of ln(area) and of every limit over every variable of every family.
struct Slopes {
    area: Vec<Vec<f64>>,
    limits: Vec<Vec<Vec<f64>>>,
}

impl Slopes {
    /// Change of limit `j` along a step.
    fn limit(&self, j: usize, step: &[Vec<f64>]) -> f64 {
        let mut sum = 0.0;
        for (slopes, step) in self.limits.iter().zip(step) {
            for (slope, d) in slopes.iter().zip(step) {
                sum += slope[j] * d;
            }
        }
        sum
    }
}

fn differentiate(desk: &mut Desk, here: &Point) -> Slopes {
    let Point {
        shapes,
        area,
        limits,
        ..
    } = here;
    let mut slopes = Slopes {
        area: Vec::new(),
        limits: Vec::new(),
    };
    for (f, shape) in shapes.iter().enumerate() {
        let x = variables(shape);
        let mut by_area = Vec::new();
        let mut by_limits = Vec::new();
        for i in 0..x.len() {
            let mut y = x.clone();
            y[i] += STEP;
            if desk.put(f, &shape_of(shape, &y)) {
                let (a, l) = desk.limits();
                by_area.push((ln(a) - ln(*area)) / STEP);
                let slopes = l.iter().zip(limits).map(|(b, a)| (b.1 - a.1) / STEP);
                by_limits.push(slopes.collect());
            } else {
                by_area.push(0.0);
                by_limits.push(vec![0.0; limits.len()]);
            }
        }
        desk.put(f, shape);
        slopes.area.push(by_area);
        slopes.limits.push(by_limits);
    }
    slopes
}

/// How far each variable may move down and up: its bound, lengths within the card.
fn boxes(desk: &Desk, shapes: &[Shape], bounds: &[Vec<f64>]) -> Vec<Vec<[f64; 2]>> {
    let of = |f: usize, shape: &Shape| {
        let tech = desk.ledger.job.tech(desk.plan.members[f].rail);
        let length = &tech.mosfet().length;
        let (least, most) = (ln(length.least.0), ln(length.most.0));
        let limited = |(i, &x): (usize, &f64)| {
            let bound = bounds[f][i];
            // Variables 0 and 2 are logarithms of lengths.
            if i == 0 || (i == 2 && shape.cascode_length > 0.0) {
                let low = (-bound).max(least - x).min(0.0);
                [low, bound.min(most - x).max(0.0)]
            } else {
                [-bound, bound]
            }
        };
        variables(shape).iter().enumerate().map(limited).collect()
    };
    shapes.iter().enumerate().map(|(f, s)| of(f, s)).collect()
}

/// Limits that can matter somewhere in the boxes: those that can be reached at all and that no
/// other limit on the same thing exceeds everywhere. The rest would change nothing but the time.
fn binding(here: &Point, slopes: &Slopes, limits: &[f64], boxes: &[Vec<[f64; 2]>]) -> Vec<usize> {
    // The most that limit `j`, less limit `i` where there is one, can rise.
    let rise = |j: usize, i: Option<usize>| -> f64 {
        let mut sum = 0.0;
        for (slopes, boxes) in slopes.limits.iter().zip(boxes) {
            for (slope, [low, high]) in slopes.iter().zip(boxes) {
                let slope = slope[j] - i.map_or(0.0, |i| slope[i]);
                sum += (slope * low).max(slope * high);
            }
        }
        sum
    };
    let mut reached: Vec<usize> = (0..limits.len())
        .filter(|&j| limits[j] + rise(j, None) > 0.0)
        .collect();
    reached.sort_by(|&a, &b| {
        let by_thing = here.limits[a].0.cmp(&here.limits[b].0);
        by_thing
            .then(limits[b].total_cmp(&limits[a]))
            .then(a.cmp(&b))
    });
    let mut kept: Vec<usize> = Vec::new();
    for j in reached {
        let same = |i: &&usize| here.limits[**i].0 == here.limits[j].0;
        let hidden = |&i: &usize| limits[i] - limits[j] >= rise(j, Some(i));
        if !kept.iter().rev().take_while(same).any(hidden) {
            kept.push(j);
        }
    }
    kept
}

/// The step that is best on the linearised network, every variable moving by at most its bound.
fn propose(
    desk: &Desk,
    here: &Point,
    slopes: &Slopes,
    limits: &[f64],
    bounds: &[Vec<f64>],
) -> Option<Step> {
    let mut vars = ProblemVariables::new();
    let boxes = boxes(desk, &here.shapes, bounds);
    let steps: Vec<Vec<Variable>> = boxes
        .iter()
        .map(|list| {
            list.iter()
                .map(|&[low, high]| vars.add(variable().min(low).max(high)))
                .collect()
        })
        .collect();
    let near = binding(here, slopes, limits, &boxes);
    // One excess for each thing that is limited: of its limits the worst counts.
    let mut over: BTreeMap<usize, Variable> = BTreeMap::new();
    for &j in &near {
        over.entry(here.limits[j].0)
            .or_insert_with(|| vars.add(variable().min(0.0)));
    }
    let mut objective = Expression::default();
    for (f, list) in steps.iter().enumerate() {
        for (i, &v) in list.iter().enumerate() {
            objective.add_mul(slopes.area[f][i], v);
        }
    }
    for &v in over.values() {
        objective.add_mul(CHARGE, v);
    }
    let mut model = vars.minimise(objective).using(clarabel);
    model.settings().max_threads(1);
    for &j in &near {
        let mut row = Expression::from(limits[j]);
        for (f, list) in steps.iter().enumerate() {
            for (i, &v) in list.iter().enumerate() {
                let slope = slopes.limits[f][i][j];
                if slope != 0.0 {
                    row.add_mul(slope, v);
                }
            }
        }
        row.add_mul(-1.0, over[&here.limits[j].0]);
        model.add_constraint(constraint!(row <= 0.0));
    }
    let solution = model.solve().ok()?;
    Some(
        steps
            .iter()
            .map(|l| l.iter().map(|&v| solution.value(v)).collect())
            .collect(),
    )
}
