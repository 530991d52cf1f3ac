//! The master problem over the columns at hand: a linear program for prices.

use super::columns::{Column, Feeds, Prices};
use super::plan::Ledger;
use good_lp::{
    DualValues, Expression, ProblemVariables, SolutionWithDual, SolverModel, Variable, clarabel,
    constraint, variable,
};

/// Scale of areas inside the linear programs, m^2: numbers of order one to ten thousand.
pub(super) const SQUARE_MICRON: f64 = 1e-12;
/// Scale of currents, A.
pub(super) const MICROAMP: f64 = 1e-6;

/// A solved master problem.
#[derive(Debug, Clone)]
pub struct Relaxed {
    /// Its value, m^2; includes what unserved outputs are charged.
    pub value: f64,
    /// Dual prices.
    pub prices: Prices,
    /// Value of each column.
    pub weights: Vec<f64>,
    /// Share of outputs that no column serves.
    pub unserved: f64,
}

/// Solves the relaxation. An output that no column serves is charged `charge` m^2, a feed that
/// nobody gives a quarter of it, so that the problem always has a solution.
pub fn relax(ledger: &Ledger, feeds: &Feeds, columns: &[Column], charge: f64) -> Option<Relaxed> {
    let all = feeds.all();
    // Rows only for feeds that somebody gives or takes, or that lie between.
    let mut vars = ProblemVariables::new();
    let x: Vec<Variable> = columns
        .iter()
        .map(|_| vars.add(variable().min(0.0)))
        .collect();
    let missing: Vec<Variable> = ledger
        .wants
        .iter()
        .map(|_| vars.add(variable().min(0.0)))
        .collect();
    let charge = charge / SQUARE_MICRON;
    let mut objective = Expression::with_capacity(columns.len());
    for (c, &v) in columns.iter().zip(&x) {
        objective.add_mul(c.area / SQUARE_MICRON, v);
    }
    for &v in &missing {
        objective.add_mul(charge, v);
    }
    let mut balance: Vec<Expression> = all.iter().map(|_| Expression::default()).collect();
    for (c, &v) in columns.iter().zip(&x) {
        for feed in &c.gives {
            balance[feeds.index(feed)].add_mul(1.0, v);
        }
        let bias = c.bias.as_ref().and_then(|b| b.1);
        for feed in [c.takes, bias].iter().flatten() {
            balance[feeds.index(feed)].add_mul(-1.0, v);
        }
    }
    for (k, feed) in all.iter().enumerate() {
        for looser in feeds.looser(feed) {
            let step = vars.add(variable().min(0.0));
            balance[k].add_mul(-1.0, step);
            balance[feeds.index(&looser)].add_mul(1.0, step);
        }
        let absent = vars.add(variable().min(0.0));
        balance[k].add_mul(1.0, absent);
        objective.add_mul(0.25 * charge, absent);
    }
    let mut serve: Vec<Expression> = missing
        .iter()
        .map(|&v| Expression::from_other_affine(v))
        .collect();
    let mut overhead = Expression::default();
    let mut references = Expression::default();
    for (c, &v) in columns.iter().zip(&x) {
        for &k in &c.outputs {
            serve[k].add_mul(1.0, v);
        }
        overhead.add_mul(c.overhead / MICROAMP, v);
        if c.references() > 0 {
            references.add_mul(c.references() as f64, v);
        }
    }
    let mut model = vars.minimise(objective).using(clarabel);
    model.settings().max_threads(1);
    let serve: Vec<_> = serve
        .into_iter()
        .map(|e| model.add_constraint(constraint!(e >= 1.0)))
        .collect();
    let balance: Vec<_> = balance
        .into_iter()
        .map(|e| model.add_constraint(constraint!(e >= 0.0)))
        .collect();
    let budget = ledger.budget / MICROAMP;
    let overhead = budget
        .is_finite()
        .then(|| model.add_constraint(constraint!(overhead <= budget)));
    let copies = ledger.copies as f64;
    let references = model.add_constraint(constraint!(references <= copies));
    let mut solution = model.solve().ok()?;
    use good_lp::Solution;
    let weights: Vec<f64> = x.iter().map(|&v| solution.value(v)).collect();
    let missing: f64 = missing.iter().map(|&v| solution.value(v)).sum();
    let value = solution.inner().obj_val * SQUARE_MICRON;
    let dual = solution.compute_dual();
    let price = |c| (dual.dual(c) * SQUARE_MICRON).max(0.0);
    let prices = Prices {
        outputs: serve.into_iter().map(price).collect(),
        feeds: balance.into_iter().map(price).collect(),
        // At-most rows: their shadow price is negative.
        reference: (-dual.dual(references) * SQUARE_MICRON).max(0.0),
        overhead: overhead.map_or(0.0, |c| (-dual.dual(c) * SQUARE_MICRON / MICROAMP).max(0.0)),
    };
    Some(Relaxed {
        value,
        prices,
        weights,
        unserved: missing,
    })
}
