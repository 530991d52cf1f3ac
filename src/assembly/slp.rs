//! All sizes of a network together, by sequential linear programming: Griffith & Stewart,
//! Management Science 7, 1961, with a trust region and an exact penalty (Fletcher, *Practical
//! Methods of Optimization*, 1987, ch. 12).
//!
//! Area and error trade off along whole paths, so sizes must move together; one family at a time
//! stalls where the error budget is spent. Slopes are finite differences of solved shapes: a shape
//! is solved again for each of its variables, the rest is adding up.

use super::desk::{Desk, shape_of, variables};
use crate::cells::Shape;
use good_lp::{
    Expression, ProblemVariables, Solution, SolverModel, Variable, clarabel, constraint, variable,
};

/// Finite-difference step, in the variables' own units (about 1 %).
const STEP: f64 = 0.01;
/// Trust region at which the descent ends.
const FINE: f64 = 0.004;
/// Linearisations at most.
const ROUNDS: usize = 24;
/// Charge for exceeding a limit by a factor e, in units of ln(area).
const CHARGE: f64 = 20.0;
/// Limits further inside than this cannot matter within a step.
const FAR: f64 = -0.7;

/// Descends from the desk's present shapes within a first trust region of `radius`.
pub(super) fn descend(desk: &mut Desk, radius: f64) {
    desk.snap = false;
    let mut shapes = desk.shapes();
    let (mut area, mut limits) = desk.limits();
    let mut radius = radius;
    let mut slopes: Option<Slopes> = None;
    for _ in 0..ROUNDS {
        if radius < FINE {
            break;
        }
        let at = slopes.get_or_insert_with(|| differentiate(desk, &shapes, area, &limits));
        let Some(step) = propose(desk, &shapes, at, &limits, radius) else {
            break;
        };
        let next = moved(&shapes, &step);
        let (new_area, new_limits) = if place(desk, &next) {
            desk.limits()
        } else {
            (f64::INFINITY, limits.clone())
        };
        if merit(new_area, &new_limits) < merit(area, &limits) - 1e-6 {
            let gain = merit(area, &limits) - merit(new_area, &new_limits);
            (shapes, area, limits) = (next, new_area, new_limits);
            slopes = None;
            // A small gain at this radius promises less at the same.
            radius = if gain > 0.002 {
                (radius * 1.5).min(0.4)
            } else {
                radius * 0.5
            };
        } else {
            radius *= 0.35;
        }
    }
    desk.snap = true;
    place(desk, &shapes);
}

fn merit(area: f64, limits: &[f64]) -> f64 {
    area.ln() + CHARGE * limits.iter().map(|g| g.max(0.0)).sum::<f64>()
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

fn differentiate(desk: &mut Desk, shapes: &[Shape], area: f64, limits: &[f64]) -> Slopes {
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
                by_area.push((a.ln() - area.ln()) / STEP);
                by_limits.push(l.iter().zip(limits).map(|(b, a)| (b - a) / STEP).collect());
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

/// The step that is best on the linearised network within the trust region.
fn propose(
    desk: &Desk,
    shapes: &[Shape],
    slopes: &Slopes,
    limits: &[f64],
    radius: f64,
) -> Option<Vec<Vec<f64>>> {
    let mut vars = ProblemVariables::new();
    let steps: Vec<Vec<Variable>> = shapes
        .iter()
        .enumerate()
        .map(|(f, shape)| {
            let length = &desk
                .ledger
                .job
                .tech(desk.plan.members[f].rail)
                .mosfet()
                .length;
            let (least, most) = (length.least.0.ln(), length.most.0.ln());
            variables(shape)
                .iter()
                .enumerate()
                .map(|(i, &x)| {
                    // Variables 0 and 2 are logarithms of lengths.
                    let (mut low, mut high) = (-radius, radius);
                    if i == 0 || (i == 2 && shape.cascode_length > 0.0) {
                        low = low.max(least - x).min(0.0);
                        high = high.min(most - x).max(0.0);
                    }
                    vars.add(variable().min(low).max(high))
                })
                .collect()
        })
        .collect();
    let near: Vec<usize> = (0..limits.len()).filter(|&j| limits[j] > FAR).collect();
    let over: Vec<Variable> = near.iter().map(|_| vars.add(variable().min(0.0))).collect();
    let mut objective = Expression::default();
    for (f, list) in steps.iter().enumerate() {
        for (i, &v) in list.iter().enumerate() {
            objective.add_mul(slopes.area[f][i], v);
        }
    }
    for &v in &over {
        objective.add_mul(CHARGE, v);
    }
    let mut model = vars.minimise(objective).using(clarabel);
    model.settings().max_threads(1);
    for (&j, &slack) in near.iter().zip(&over) {
        let mut row = Expression::from(limits[j]);
        for (f, list) in steps.iter().enumerate() {
            for (i, &v) in list.iter().enumerate() {
                let slope = slopes.limits[f][i][j];
                if slope != 0.0 {
                    row.add_mul(slope, v);
                }
            }
        }
        row.add_mul(-1.0, slack);
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
