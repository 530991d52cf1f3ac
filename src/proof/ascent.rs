//! The best dual prices: a concave maximisation by cutting planes within a box that moves with the
//! best point (Kelley, J. SIAM 8, 1960; Marsten, Hogan & Blankenship, Operations Research 23, 1975).

use super::relaxed::{Prices, Relaxed, Tree};
use good_lp::{
    Expression, ProblemVariables, Solution, SolverModel, clarabel, constraint, variable,
};

/// Smallest box, as a share of the prices.
const FINE: f64 = 0.002;
/// Points in vain before the box shrinks.
const PATIENCE: usize = 4;
/// Areas in the program, m^2.
const UM2: f64 = 1e-12;
/// Currents in the program, A.
const UA: f64 = 1e-6;
/// Planes steeper than this serve nothing: far from them their networks are absurd.
const STEEP: f64 = 1e7;

/// Raises the bound at `budget` from `start` in at most `steps` steps of a first box of `radius`.
/// Planes are kept for the next call. Returns the prices and the bound.
pub fn ascend(
    relaxed: &Relaxed,
    budget: f64,
    start: &Prices,
    planes: &mut Vec<Tree>,
    steps: usize,
    mut radius: f64,
) -> (Prices, f64) {
    let (mut best, mut value) = (start.clone(), f64::NEG_INFINITY);
    // Prices a little too high are worth nothing at all: find the scale first.
    let mut scale = 1.0;
    for _ in 0..10 {
        let scaled = Prices {
            outputs: start.outputs.iter().map(|u| u * scale).collect(),
            overhead: start.overhead * scale,
        };
        let (reached, trees) = relaxed.planes(&scaled, budget);
        add(planes, trees);
        if reached > value {
            (best, value) = (scaled, reached);
        } else if value > 0.0 {
            break;
        }
        scale *= 0.8;
    }
    let mut vain = 0;
    for _ in 0..steps {
        let Some((next, promised)) = propose(&best, planes, budget, radius) else {
            break;
        };
        if promised - value <= 2e-3 * value.abs() * (radius / 0.1).min(1.0) {
            // Nothing more in this box: done if it was a wide one.
            if radius >= 0.1 {
                break;
            }
            radius *= 2.0;
            continue;
        }
        let (reached, trees) = relaxed.planes(&next, budget);
        add(planes, trees);
        if reached > value {
            if reached - value > 0.3 * (promised - value) {
                radius = (radius * 1.5).min(0.5);
            }
            (best, value) = (next, reached);
            vain = 0;
        } else {
            vain += 1;
            if vain >= PATIENCE {
                vain = 0;
                radius *= 0.6;
            }
        }
        if radius < FINE {
            break;
        }
    }
    (best, value)
}

fn add(planes: &mut Vec<Tree>, trees: Vec<Tree>) {
    for tree in trees {
        let steepest = tree.served.iter().copied().fold(0.0, f64::max);
        if steepest < STEEP && !planes.contains(&tree) {
            planes.push(tree);
        }
    }
}

/// The best prices within the box by the planes known, and the bound they promise.
fn propose(at: &Prices, planes: &[Tree], budget: f64, radius: f64) -> Option<(Prices, f64)> {
    let mean = at.outputs.iter().sum::<f64>() / at.outputs.len() as f64;
    let mut vars = ProblemVariables::new();
    let outputs: Vec<_> = at
        .outputs
        .iter()
        .map(|&u| {
            let r = radius * u.max(0.1 * mean);
            vars.add(variable().min((u - r).max(0.0) / UM2).max((u + r) / UM2))
        })
        .collect();
    let unit = UM2 / UA;
    let r = radius
        * at.overhead
            .max(0.02 * mean * at.outputs.len() as f64 / budget);
    let overhead = vars.add(
        variable()
            .min((at.overhead - r).max(0.0) / unit)
            .max((at.overhead + r) / unit),
    );
    let root = vars.add(variable());
    let mut objective = Expression::from(root);
    for &u in &outputs {
        objective += u;
    }
    objective.add_mul(-budget / UA, overhead);
    let mut model = vars.maximise(objective.clone()).using(clarabel);
    model.settings().max_threads(1);
    for plane in planes {
        let scale = plane.served.iter().copied().fold(1.0, f64::max);
        let mut row = Expression::from(plane.area / UM2 / scale);
        row.add_mul(plane.overhead / UA / scale, overhead);
        for (&u, &n) in outputs.iter().zip(&plane.served) {
            if n != 0.0 {
                row.add_mul(-n / scale, u);
            }
        }
        row.add_mul(-1.0 / scale, root);
        model.add_constraint(constraint!(row >= 0.0));
    }
    let solution = model.solve().ok()?;
    let prices = Prices {
        outputs: outputs
            .iter()
            .map(|&u| solution.value(u).max(0.0) * UM2)
            .collect(),
        overhead: solution.value(overhead).max(0.0) * unit,
    };
    Some((prices, solution.eval(objective) * UM2))
}
