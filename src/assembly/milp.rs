//! Families into a network as a mixed-integer program: facility location with chains. The choice
//! of the solver stands in this file alone.
//!
//! What may be built is a list of *instances*: families with an input current, unit counts, and the
//! error their line may have collected. Opening one costs its input leg; it must be fed by an open
//! instance on the other rail whose line is good enough, or by the reference; every output is a
//! leg of an open instance. Which instance can feed which, and serve which output, is known
//! beforehand, pair by pair, so the program is linear; since a feeder's line must have collected
//! less than its child's, no chain can close on itself. Only the openings are integer: with them
//! fixed, every leg goes where it is cheapest.
//!
//! The solver is stopped by a count of nodes, never by the clock, so that equal runs give equal
//! answers.

use super::columns::{Column, Feeds};
use super::master::{MICROAMP, SQUARE_MICRON};
use super::plan::{Clerk, Line, Member, Plan, Tally, units_for};
use crate::numeric::lanes::Lanes;
use good_lp::{Expression, ProblemVariables, SolverModel, Variable, constraint, microlp, variable};

/// Relative gap at which an answer counts as proved.
const GAP: f64 = 1e-3;
/// A line may bring this much more variance than the instance was made for: sizes are refined
/// afterwards.
pub const VARIANCE_SLACK: f64 = 1.2;
/// Likewise an output's error over its limit.
pub const SHARE_SLACK: f64 = 1.05;

/// A family that may be built.
#[derive(Debug, Clone)]
pub struct Instance {
    /// The family; its parents are what the program chooses.
    pub member: Member,
    /// What its line may have collected.
    pub line: Line,
    /// It takes the reference.
    pub root: bool,
}

/// What the program answered.
#[derive(Debug, Clone, PartialEq)]
pub struct Assembled {
    /// The network.
    pub plan: Plan,
    /// Area of it as the program adds it up, m^2.
    pub area: f64,
    /// Whether no better choice among these instances exists (within the gap), or the solver was
    /// stopped before it could tell.
    pub proved: bool,
}

/// Every different family of some plans, each with the line it has there.
pub fn instances(clerk: &mut Clerk, plans: &[Plan]) -> Vec<Instance> {
    let mut out: Vec<Instance> = Vec::new();
    let mut tally = Tally::new();
    for plan in plans {
        clerk.price(plan, &mut tally);
        for (member, line) in plan.members.iter().zip(tally.lines()) {
            let same = |i: &Instance| {
                let (a, b) = (&i.member, member);
                (a.rail, a.candidate, a.units) == (b.rail, b.candidate, b.units)
                    && a.current == b.current
                    && i.root == b.parent.is_none()
            };
            if !out.iter().any(same) {
                let root = member.parent.is_none();
                out.push(Instance {
                    member: member.clone(),
                    line: *line,
                    root,
                });
            }
        }
    }
    out
}

/// Instances of priced columns: their lines are as good as the level of the feed they take.
pub fn instances_of_columns(feeds: &Feeds, columns: &[Column]) -> Vec<Instance> {
    columns
        .iter()
        .map(|c| Instance {
            member: Member {
                rail: c.rail,
                candidate: c.candidate,
                current: c.current,
                units: c.units,
                parent: None,
                bias: c.bias.as_ref().map(|b| (b.0, None)),
            },
            line: Line::level(c.takes.map_or(0.0, |f| feeds.variances[f.variance])),
            root: c.takes.is_none(),
        })
        .collect()
}

/// A leg that could be drawn: from an instance, at an area.
struct Way {
    from: usize,
    area: f64,
    x: Variable,
}

/// Chooses among instances; `None` where no choice serves every output, or none was found within
/// `nodes` branch-and-bound nodes.
pub fn assemble(clerk: &mut Clerk, instances: &[Instance], nodes: u64) -> Option<Assembled> {
    let ledger = clerk.ledger;
    let mut vars = ProblemVariables::new();
    let open: Vec<Variable> = instances
        .iter()
        .map(|_| vars.add(variable().binary()))
        .collect();
    let mut objective = Expression::default();
    let mut overhead = Expression::default();
    let mut references = Expression::default();
    for (i, &y) in instances.iter().zip(&open) {
        let m = &i.member;
        let c = ledger.candidate(m);
        let unit = m.current / f64::from(m.units);
        let bias = m.bias.map_or(0.0, |b| b.0);
        objective.add_mul(
            c.input_area(unit, f64::from(m.units), bias) / SQUARE_MICRON,
            y,
        );
        overhead.add_mul((m.current + bias) / MICROAMP, y);
        let copies = u8::from(i.root) + u8::from(i.root && m.bias.is_some());
        references.add_mul(f64::from(copies), y);
    }
    let mut link = Vec::new();
    let mut way =
        |vars: &mut ProblemVariables, objective: &mut Expression, from: usize, area: f64| {
            let x = vars.add(variable().min(0.0).max(1.0));
            objective.add_mul(area / SQUARE_MICRON, x);
            link.push((x, open[from]));
            Way { from, area, x }
        };
    // Outputs.
    let mut serving: Vec<Vec<Way>> = Vec::new();
    for (k, want) in ledger.wants.iter().enumerate() {
        let mut ways = Vec::new();
        for (f, i) in instances.iter().enumerate() {
            if i.member.rail != want.rail || !clerk.serves(&i.member, &i.line, k, SHARE_SLACK) {
                continue;
            }
            let unit = i.member.current / f64::from(i.member.units);
            let (units, _) = units_for(want.current, unit);
            let area = want.count * ledger.candidate(&i.member).leg_area(unit, f64::from(units));
            ways.push(way(&mut vars, &mut objective, f, area));
        }
        if ways.is_empty() {
            return None;
        }
        serving.push(ways);
    }
    // Feeds and bias feeds.
    let mut feeding: Vec<[Option<Vec<Way>>; 2]> = Vec::new();
    for taker in instances {
        let mut both = [None, None];
        if !taker.root {
            let currents = [Some(taker.member.current), taker.member.bias.map(|b| b.0)];
            for (which, amps) in currents.into_iter().enumerate() {
                let Some(amps) = amps else { continue };
                let mut ways = Vec::new();
                for (g, giver) in instances.iter().enumerate() {
                    if giver.member.rail == taker.member.rail {
                        continue;
                    }
                    let unit = giver.member.current / f64::from(giver.member.units);
                    let (units, rounding) = units_for(amps, unit);
                    let good = if which == 0 {
                        rounding.abs() < 1e-3 && clerk.feeds(giver, taker, VARIANCE_SLACK)
                    } else {
                        giver.line.less(&taker.line)
                    };
                    if good {
                        let area = ledger
                            .candidate(&giver.member)
                            .leg_area(unit, f64::from(units));
                        ways.push(way(&mut vars, &mut objective, g, area));
                    }
                }
                both[which] = Some(ways);
            }
        }
        feeding.push(both);
    }
    let mut model = vars.minimise(objective).using(microlp);
    let sum = |ways: &[Way]| {
        let mut e = Expression::with_capacity(ways.len());
        for w in ways {
            e.add_mul(1.0, w.x);
        }
        e
    };
    for ways in &serving {
        let e = sum(ways);
        model.add_constraint(constraint!(e >= 1.0));
    }
    for (both, &y) in feeding.iter().zip(&open) {
        for ways in both.iter().flatten() {
            let e = sum(ways);
            model.add_constraint(constraint!(e >= y));
        }
    }
    for &(x, y) in &link {
        model.add_constraint(constraint!(x <= y));
    }
    let budget = ledger.budget / MICROAMP;
    if budget.is_finite() {
        model.add_constraint(constraint!(overhead <= budget));
    }
    let copies = ledger.copies as f64;
    model.add_constraint(constraint!(references <= copies));
    // The node limit is the solver's own option; good_lp passes on a time limit only.
    let mut options = ::microlp::SolveOptions::default();
    options.node_limit = Some(nodes as _);
    options.mip_gap = GAP;
    let solution = model
        .as_inner()
        .solve_with(options)
        .ok()?
        .into_solution()
        .ok()?;
    let proved = solution.gap().is_some_and(|g| g <= GAP * 1.001);
    let values: Vec<f64> = solution.iter().map(|(_, v)| v).collect();
    let is_open: Vec<bool> = (0..open.len()).map(|f| values[f] > 0.5).collect();
    let plan = draw_up(instances, &is_open, &serving, &feeding)?;
    Some(Assembled {
        plan,
        area: solution.objective() * SQUARE_MICRON,
        proved,
    })
}

/// The plan of the open instances, every leg where it is cheapest.
fn draw_up(
    instances: &[Instance],
    is_open: &[bool],
    serving: &[Vec<Way>],
    feeding: &[[Option<Vec<Way>>; 2]],
) -> Option<Plan> {
    let cheapest = |ways: &[Way]| {
        ways.iter()
            .filter(|w| is_open[w.from])
            .min_by(|a, b| a.area.total_cmp(&b.area))
            .map(|w| w.from)
    };
    // Feeders first: a giver's line has collected less than its taker's.
    let mut order: Vec<usize> = (0..instances.len()).filter(|&f| is_open[f]).collect();
    order.sort_by(|&a, &b| {
        let key = |f: usize| (!instances[f].root, instances[f].line.collected());
        let (x, y) = (key(a), key(b));
        x.0.cmp(&y.0).then(x.1.total_cmp(&y.1)).then(a.cmp(&b))
    });
    let place = |f: usize| order.iter().position(|&o| o == f);
    let mut members = Vec::new();
    for &f in &order {
        let mut member = instances[f].member.clone();
        let [feed, bias] = &feeding[f];
        member.parent = match feed {
            Some(ways) => Some(place(cheapest(ways)?)?),
            None => None,
        };
        if let Some((amps, _)) = member.bias {
            let from = match bias {
                Some(ways) => Some(place(cheapest(ways)?)?),
                None => None,
            };
            member.bias = Some((amps, from));
        }
        // Slack in the variances could put a giver after its taker.
        let own = members.len();
        let late = |p: Option<usize>| p.is_some_and(|p| p >= own);
        if late(member.parent) || late(member.bias.and_then(|b| b.1)) {
            return None;
        }
        members.push(member);
    }
    let legs = serving
        .iter()
        .map(|ways| place(cheapest(ways)?))
        .collect::<Option<Vec<usize>>>()?;
    Some(Plan { members, legs })
}

impl Line {
    /// A line that has collected `variance` everywhere and no systematic error.
    pub fn level(variance: f64) -> Line {
        let mut line = Line::default();
        line.variance.fill(Lanes::splat(variance));
        line
    }

    /// Largest collected variance.
    pub fn collected(&self) -> f64 {
        self.variance
            .iter()
            .map(|v| v.largest())
            .fold(0.0, f64::max)
    }

    /// Whether this line has collected less than another.
    pub fn less(&self, other: &Line) -> bool {
        self.collected() < other.collected()
    }
}
