//! The columns at hand as a mixed-integer program, and a plan from its answer. The choice of the
//! solver stands in this file alone.
//!
//! Every column is built or not; every output is served, every feed taken is given, the overhead
//! keeps its budget, the reference its copies. The solver is stopped by a count of nodes, never by
//! the clock, so that equal runs give equal answers.

use super::columns::{Column, Feeds};
use super::master::{MICROAMP, SQUARE_MICRON};
use super::plan::{Ledger, Member, Plan};
use good_lp::{Expression, ProblemVariables, SolverModel, Variable, constraint, microlp, variable};

/// Branch-and-bound nodes before the solver is stopped.
const NODES: u64 = 400;
/// Relative gap at which an answer counts as proved.
const GAP: f64 = 1e-3;

/// What the program answered.
#[derive(Debug, Clone, PartialEq)]
pub struct Assembled {
    /// Indices of the columns to build.
    pub columns: Vec<usize>,
    /// Their area, m^2.
    pub area: f64,
    /// Whether no better choice among these columns exists (within the gap), or the solver was
    /// stopped before it could tell.
    pub proved: bool,
}

/// Chooses among `columns`; `None` where no choice serves every output, or none was found within
/// the node limit.
pub fn assemble(ledger: &Ledger, columns: &[Column]) -> Option<Assembled> {
    let mut vars = ProblemVariables::new();
    let x: Vec<Variable> = columns
        .iter()
        .map(|_| vars.add(variable().binary()))
        .collect();
    let mut objective = Expression::with_capacity(columns.len());
    let mut overhead = Expression::default();
    let mut references = Expression::default();
    let mut serve = vec![Expression::default(); ledger.wants.len()];
    for (c, &v) in columns.iter().zip(&x) {
        objective.add_mul(c.area / SQUARE_MICRON, v);
        overhead.add_mul(c.overhead / MICROAMP, v);
        if c.references() > 0 {
            references.add_mul(c.references() as f64, v);
        }
        for &k in &c.outputs {
            serve[k].add_mul(1.0, v);
        }
    }
    // Feeds that are taken must be given by something at least as good. A looser feed may be
    // carried by a tighter one: flows between the feeds in use.
    let mut used: Vec<super::columns::Feed> = columns
        .iter()
        .flat_map(|c| {
            let bias = c.bias.as_ref().and_then(|b| b.1);
            c.gives.iter().copied().chain(c.takes).chain(bias)
        })
        .collect();
    used.sort_unstable();
    used.dedup();
    let place = |f: &super::columns::Feed| used.binary_search(f).expect("listed just above");
    let mut balance = vec![Expression::default(); used.len()];
    for (c, &v) in columns.iter().zip(&x) {
        for feed in &c.gives {
            balance[place(feed)].add_mul(1.0, v);
        }
        let bias = c.bias.as_ref().and_then(|b| b.1);
        for feed in [c.takes, bias].iter().flatten() {
            balance[place(feed)].add_mul(-1.0, v);
        }
    }
    for (i, given) in used.iter().enumerate() {
        for (j, taken) in used.iter().enumerate() {
            if i != j && Feeds::covers(given, taken) {
                let flow = vars.add(variable().min(0.0));
                balance[i].add_mul(-1.0, flow);
                balance[j].add_mul(1.0, flow);
            }
        }
    }
    let mut model = vars.minimise(objective).using(microlp);
    for row in serve {
        model.add_constraint(constraint!(row >= 1.0));
    }
    for row in balance {
        model.add_constraint(constraint!(row >= 0.0));
    }
    let budget = ledger.budget / MICROAMP;
    if budget.is_finite() {
        model.add_constraint(constraint!(overhead <= budget));
    }
    let copies = ledger.copies as f64;
    model.add_constraint(constraint!(references <= copies));
    // The node limit is the solver's own option; good_lp passes on a time limit only.
    let mut options = ::microlp::SolveOptions::default();
    options.node_limit = Some(NODES as _);
    options.mip_gap = GAP;
    let solution = model
        .as_inner()
        .solve_with(options)
        .ok()?
        .into_solution()
        .ok()?;
    let proved = solution.gap().is_some_and(|g| g <= GAP * 1.001);
    let values: Vec<f64> = solution.iter().map(|(_, v)| v).collect();
    let chosen: Vec<usize> = x
        .iter()
        .enumerate()
        .filter(|(k, _)| values[*k] > 0.5)
        .map(|(k, _)| k)
        .collect();
    let area = chosen.iter().map(|&k| columns[k].area).sum();
    Some(Assembled {
        columns: chosen,
        area,
        proved,
    })
}

/// Joins chosen columns into a plan: feeds are matched to what covers them, tightest first; an
/// output served twice goes where it costs less. `None` where a feed finds no giver.
pub fn join(ledger: &Ledger, columns: &[Column]) -> Option<Plan> {
    // By rising collected variance: a giver always stands before its takers.
    let level = |c: &Column| c.takes.map_or(0, |f| f.variance);
    let mut order: Vec<usize> = (0..columns.len()).collect();
    order.sort_by_key(|&k| (level(&columns[k]), k));
    let mut members: Vec<Member> = Vec::new();
    // Legs not yet taken: (feed, family).
    let mut free: Vec<(super::columns::Feed, usize)> = Vec::new();
    let mut waiting: Vec<(usize, super::columns::Feed)> = Vec::new();
    for &k in &order {
        let c = &columns[k];
        let f = members.len();
        let parent = match &c.takes {
            None => None,
            Some(taken) => Some(take(&mut free, taken)?),
        };
        let bias = c.bias.as_ref().map(|(amps, feed)| {
            if let Some(feed) = feed {
                waiting.push((f, *feed));
            }
            (*amps, None)
        });
        members.push(Member {
            rail: c.rail,
            candidate: c.candidate,
            current: c.current,
            units: c.units,
            parent,
            bias,
        });
        free.extend(c.gives.iter().map(|feed| (*feed, f)));
    }
    // Bias legs ask for nothing but a current; only a giver that stands before its taker will do.
    for (f, feed) in waiting {
        let giver = free
            .iter()
            .position(|(g, from)| *from < f && Feeds::covers(g, &feed));
        let from = match giver {
            Some(at) => free.swap_remove(at).1,
            // Any earlier family on the other rail can grow a leg for it.
            None => (0..f).find(|&g| members[g].rail != members[f].rail)?,
        };
        if let Some(bias) = &mut members[f].bias {
            bias.1 = Some(from);
        }
    }
    let legs = (0..ledger.wants.len())
        .map(|k| {
            order
                .iter()
                .enumerate()
                .filter(|(_, c)| columns[**c].outputs.contains(&k))
                .map(|(f, _)| f)
                .min_by(|&a, &b| {
                    let area = |f: usize| {
                        let m: &Member = &members[f];
                        let unit = m.current / f64::from(m.units);
                        ledger
                            .candidate(m)
                            .leg_area(unit, ledger.wants[k].current / unit)
                    };
                    area(a).total_cmp(&area(b))
                })
        })
        .collect::<Option<Vec<usize>>>()?;
    Some(Plan { members, legs })
}

fn take(
    free: &mut Vec<(super::columns::Feed, usize)>,
    taken: &super::columns::Feed,
) -> Option<usize> {
    let at = free
        .iter()
        .enumerate()
        .filter(|(_, (given, _))| Feeds::covers(given, taken))
        // The loosest that will do leaves the tighter ones to others.
        .max_by_key(|(_, (given, _))| (given.variance, given.error))?
        .0;
    Some(free.swap_remove(at).1)
}
