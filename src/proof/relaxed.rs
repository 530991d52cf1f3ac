//! The relaxed network: families as a density and a most demanding output, lines as a level of
//! collected variance. Every network of the declared design space maps onto a relaxed one that
//! costs no more, so the least cost of these bounds all of those from below.
//!
//! What is given up, and why it only makes things cheaper:
//!
//! - *Sizes and cells.* A family of density `D` whose most demanding output is `g` has legs whose
//!   area times variance is at least the floor of `g` ([`super::merit`]); it is given exactly that.
//! - *Densities* come in steps: a family between two has the area of the lower and the variance of
//!   the upper.
//! - *Collected variance* comes in levels, rounded down.
//! - *Borders.* A leg of `m` units of width W and length L adds
//!   `W (m + 1) bl/2 + bw m L + bw (m + 1) bl/2`; the first two are at least twice the root of their
//!   product (arithmetic and geometric mean), which knows the unit's area only.
//! - *Coverage.* An output may be served twice or not at all, at a price: the dual prices of the
//!   rows "every output once" (Lagrangian relaxation; Geoffrion, Mathematical Programming Study 2,
//!   1974). Overhead current likewise. (A handful of outputs needs no prices: [`super::exact`].)
//!
//! What remains is a tree, and its least cost follows from the leaves up (dynamic programming). A
//! subtree is known by its *first* output, in a fixed order: children of one family have different
//! first outputs, and serve no output before their own first one, because every output sits in one
//! family only. The first output of all is in every network, and in a relaxed one just once.

use super::merit::{FEEDER, Floors, LINE, Merit, Merits, SHIFTS};
use crate::assembly::candidates::Want;
use crate::assembly::plan::units_for;
use crate::network::Job;
use crate::process::AreaRule;
use crate::spec::Rail;
use rayon::prelude::*;
use std::collections::BTreeMap;

/// Relative room on every error limit: what a whole circuit may differ from sums on paper.
pub const PAPER: f64 = 0.003;

/// Families in a row that share their first output at most. Declared.
pub const DEPTH: usize = 5;

/// How fine the relaxed network looks.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Resolution {
    /// Ratio of one density to the next.
    pub density: f64,
    /// Levels of variance in all, about: even shares of every limit that is asked for.
    pub levels: u32,
}

/// Dual prices: of every output and of overhead current.
#[derive(Debug, Clone, PartialEq)]
pub struct Prices {
    /// What serving each output (all its equal legs) is worth, m^2.
    pub outputs: Vec<f64>,
    /// What an ampere of overhead current is worth, m^2/A.
    pub overhead: f64,
}

/// A relaxed network.
#[derive(Debug, Clone, PartialEq)]
pub struct Tree {
    /// Area, m^2.
    pub area: f64,
    /// Overhead current, A.
    pub overhead: f64,
    /// How often each output is served.
    pub served: Vec<f64>,
}

/// Levels of variance: even shares of every limit, since what a limit leaves for an output's own leg
/// is what counts.
#[derive(Debug, Clone)]
pub(super) struct Levels {
    pub(super) values: Vec<f64>,
    /// Places of evenly spaced variances, to look a level up.
    places: Vec<u16>,
    step: f64,
}

impl Levels {
    fn new(limits: &[f64], shares: u32) -> Levels {
        let mut values: Vec<f64> = limits
            .iter()
            .flat_map(|l| (0..shares).map(move |n| l * f64::from(n) / f64::from(shares)))
            .collect();
        values.sort_by(f64::total_cmp);
        // Two limits' shares may lie closer than either is fine.
        let mut kept: Vec<f64> = Vec::new();
        for &v in &values {
            let next = limits
                .iter()
                .copied()
                .filter(|l| *l > v)
                .fold(f64::INFINITY, f64::min);
            let last = kept.last().copied().unwrap_or(f64::NEG_INFINITY);
            if v - last >= 0.7 * next / f64::from(shares) {
                kept.push(v);
            }
        }
        let most = kept.last().copied().unwrap_or(0.0);
        let step = kept
            .windows(2)
            .map(|w| w[1] - w[0])
            .fold(most.max(1e-12), f64::min);
        let mut levels = Levels {
            values: kept,
            places: Vec::new(),
            step,
        };
        let mut at = 0;
        for n in 0..=(most / step) as usize {
            while at + 1 < levels.values.len() && levels.values[at + 1] <= n as f64 * step {
                at += 1;
            }
            levels.places.push(at as u16);
        }
        levels
    }
    /// The level at or below a variance.
    #[inline(always)]
    pub(super) fn of(&self, variance: f64) -> usize {
        let place = ((variance / self.step) as usize).min(self.places.len() - 1);
        let mut at = self.places[place] as usize;
        while at + 1 < self.values.len() && self.values[at + 1] <= variance {
            at += 1;
        }
        at
    }
}

/// A most demanding output (or none) at one step of density.
#[derive(Debug, Clone)]
pub(super) struct Kind {
    /// The output; none in a family that only feeds.
    leader: Option<usize>,
    rail: usize,
    /// Density, m^2/A: of area, and (the next step) of variance.
    density: [f64; 2],
    /// Variance of an input or feeder leg times its current, A.
    pub(super) line: f64,
    /// Per output of the spec: variance over room, times current, A, by the way its current may be
    /// shifted, and the least density of a leg, m^2/A; none where it is more demanding.
    own: Vec<Option<([f64; SHIFTS], f64)>>,
}

/// Where a subtree starts: what its top family takes.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
struct State {
    rail: usize,
    /// Place of its first output in the order.
    first: usize,
    /// Families between the top one and the one that serves the first output.
    above: usize,
    current: usize,
    level: usize,
}

/// Least costs of subtrees by current and level of what their top family takes, with its kind.
pub(super) type Table = Vec<(f64, u32)>;

/// The costs alone.
pub(super) fn costs(table: &Table) -> Vec<f64> {
    table.iter().map(|s| s.0).collect()
}

/// The least of several tables, slot by slot; of equals the first.
pub(super) fn least_of(tables: Vec<Table>) -> Table {
    let mut tables = tables.into_iter();
    let mut least = tables.next().unwrap_or_default();
    for table in tables {
        for (slot, other) in least.iter_mut().zip(table) {
            if other.0 < slot.0 {
                *slot = other;
            }
        }
    }
    least
}

/// Takes the slots of a layer that are better than the best so far. Returns whether any was: where
/// none is, no layer of relays above can be either.
pub(super) fn improve(best: &mut [(f64, u8)], table: &Table, layer: usize) -> bool {
    let mut better = false;
    for (best, here) in best.iter_mut().zip(table) {
        if here.0 < best.0 {
            *best = (here.0, layer as u8);
            better = true;
        }
    }
    better
}

/// What lies between what a family takes and what its children take, for one kind.
pub(super) struct Hops {
    /// Level of the gate line, by input current and level of the line.
    pub(super) lines: Vec<u16>,
    /// Level of a child's line, by its input current and level of the gate line.
    drops: Vec<u16>,
    /// Area of a feeder, by current.
    feeders: Vec<f64>,
}

impl Hops {
    /// Levels of the gate line.
    pub(super) fn levels(&self) -> usize {
        self.drops.len() / self.feeders.len()
    }

    /// What the best child from a table (costs by current and level) costs, with its feeder, by
    /// level of the gate line.
    pub(super) fn child(&self, table: &[f64], out: &mut Vec<f64>) {
        let currents = self.feeders.len();
        let (v, w) = (table.len() / currents, self.levels());
        out.clear();
        out.resize(w, f64::INFINITY);
        let rows = table.chunks(v).zip(self.drops.chunks(w));
        for (&leg, (row, drops)) in self.feeders.iter().zip(rows) {
            if row[0].is_infinite() {
                continue;
            }
            for (out, &drop) in out.iter_mut().zip(drops) {
                let cost = leg + row[drop as usize];
                if cost < *out {
                    *out = cost;
                }
            }
        }
    }
}

/// A child as it is read back: what it takes, and what it costs.
#[derive(Debug, Clone, Copy)]
pub(super) struct Child {
    /// Its cost and its feeder's, m^2.
    pub(super) cost: f64,
    /// Area of the feeder, m^2.
    pub(super) leg: f64,
    pub(super) current: usize,
    pub(super) level: usize,
    /// The layer its cost stands in.
    pub(super) above: usize,
}

/// The relaxed problem of a job.
pub struct Relaxed {
    pub(super) kinds: [Vec<Kind>; 2],
    /// Outputs, the dearest first.
    order: Vec<usize>,
    pub(super) rails: Vec<usize>,
    limits: Vec<f64>,
    tolerances: Vec<f64>,
    pub(super) currents: Vec<f64>,
    units: Vec<u32>,
    pub(super) amps: Vec<f64>,
    counts: Vec<f64>,
    rules: [AreaRule; 2],
    pub(super) levels: Levels,
    /// Finer levels, of a gate line behind the input leg: never handed on.
    lines: Levels,
    pub(super) root: usize,
    pub(super) reference: usize,
    pub(super) roots: usize,
    /// No family takes more area than the spec allows, m^2.
    pub(super) cap: f64,
    /// What feeding on costs each kind; no price changes it.
    pub(super) hops: [Vec<Hops>; 2],
}

/// What one kind of family has gathered while the order is walked from its end.
struct Desk {
    /// Per input current and number of units: area and price of the input leg, and what serving
    /// the outputs behind the present one brings, by level of the line.
    inputs: Vec<Vec<Input>>,
    /// The least of these over the numbers of units, by input current and level of the line.
    least: Vec<f64>,
    /// What children behind the present one bring, by level of the gate line.
    kids: Vec<f64>,
}

struct Input {
    units: u32,
    base: f64,
    gains: Vec<f64>,
    /// The same for a family that the reference feeds.
    root: f64,
}

impl Desk {
    fn settle(&mut self, levels: usize) {
        self.least.clear();
        self.least.resize(self.inputs.len() * levels, f64::INFINITY);
        for (inputs, least) in self.inputs.iter().zip(self.least.chunks_mut(levels)) {
            for input in inputs {
                for (least, gain) in least.iter_mut().zip(&input.gains) {
                    *least = least.min(input.base + gain);
                }
            }
        }
    }
}

/// All tables, by place in the order.
struct Tables {
    /// By place, then by families above: the rail follows from both.
    layers: Vec<Vec<Table>>,
    /// By place and rail: the best over layers, with the layer.
    best: Vec<[Vec<(f64, u8)>; 2]>,
    /// By place: the cheapest networks that start at the reference.
    roots: Vec<Vec<(f64, u32)>>,
}

impl Relaxed {
    /// The relaxed problem; `None` where some output has no floor: nothing can serve it.
    pub fn new(
        job: &Job,
        wants: &[Want],
        merits: &Merits,
        currents: &[f64],
        units: &[u32],
        resolution: Resolution,
    ) -> Option<Relaxed> {
        let merit: Vec<&Floors> = merits
            .outputs
            .iter()
            .map(Option::as_ref)
            .collect::<Option<_>>()?;
        let limits: Vec<f64> = wants
            .iter()
            .map(|w| (w.limit * (1.0 + PAPER) / w.sigma).powi(2))
            .collect();
        let finite: Vec<f64> = limits.iter().copied().filter(|l| l.is_finite()).collect();
        let mut distinct = if finite.is_empty() {
            vec![1e-4]
        } else {
            finite
        };
        distinct.sort_by(f64::total_cmp);
        distinct.dedup_by(|a, b| *a <= *b * 1.05);
        let shares = (resolution.levels / distinct.len() as u32).max(8);
        let reference = job.spec.reference.current().0;
        let mut currents = currents.to_vec();
        if !currents.contains(&reference) {
            currents.push(reference);
            currents.sort_by(f64::total_cmp);
        }
        let index = currents.iter().position(|&c| c == reference).unwrap_or(0);
        let copies = match job.spec.reference {
            crate::spec::Reference::Current { copies, .. } => copies as usize,
            crate::spec::Reference::Resistor { .. } => 1,
        };
        // Dearest first, by area times variance over the limit.
        let worth = |k: usize| wants[k].count * merit[k].all().own[1] / limits[k];
        let mut order: Vec<usize> = (0..wants.len()).collect();
        order.sort_by(|&a, &b| worth(b).total_cmp(&worth(a)).then(a.cmp(&b)));
        let kinds = [Rail::Sink, Rail::Source]
            .map(|rail| kinds(rail, wants, &limits, &currents, merits, &merit, resolution));
        let mut relaxed = Relaxed {
            kinds,
            order,
            rails: wants.iter().map(|w| w.rail as usize).collect(),
            tolerances: wants
                .iter()
                .map(|w| w.limit.min(1.0) * (1.0 + LINE))
                .collect(),
            limits,
            currents,
            units: units.to_vec(),
            amps: wants.iter().map(|w| w.current).collect(),
            counts: wants.iter().map(|w| w.count).collect(),
            rules: [Rail::Sink, Rail::Source].map(|r| job.tech(r).mosfet().area),
            levels: Levels::new(&distinct, shares),
            lines: Levels::new(&distinct, shares * 2),
            root: job.spec.reference.rail() as usize,
            reference: index,
            roots: copies,
            cap: job.spec.limits.area.map_or(f64::INFINITY, |a| a.0),
            hops: [Vec::new(), Vec::new()],
        };
        relaxed.hops = relaxed
            .kinds
            .each_ref()
            .map(|kinds| kinds.par_iter().map(|kind| relaxed.hop(kind)).collect());
        Some(relaxed)
    }

    fn hop(&self, kind: &Kind) -> Hops {
        let mut hops = Hops {
            lines: Vec::new(),
            drops: Vec::new(),
            feeders: Vec::new(),
        };
        for &into in &self.currents {
            let own = kind.line / into;
            let at = |to: &Levels, from: &Levels| -> Vec<u16> {
                from.values.iter().map(|l| to.of(l + own) as u16).collect()
            };
            hops.lines.extend(at(&self.lines, &self.levels));
            hops.drops.extend(at(&self.levels, &self.lines));
            hops.feeders.push(self.feeder(kind, into));
        }
        hops
    }

    /// Input legs that can take a current: units, current of a unit, and area.
    pub(super) fn input_legs(
        &self,
        kind: &Kind,
        into: f64,
    ) -> impl Iterator<Item = (u32, f64, f64)> {
        let legs = self.units.iter().map(move |&units| {
            let unit = into / f64::from(units);
            (units, unit, self.input_leg(kind, unit, f64::from(units)))
        });
        legs.filter(|(_, _, area)| *area <= self.cap)
    }

    /// Variance at the gate line of a family that takes a current at a level.
    pub(super) fn gate(&self, kind: &Kind, current: usize, level: usize) -> f64 {
        let collected = self.levels.values[level] + kind.line / self.currents[current];
        self.lines.values[self.lines.of(collected)]
    }

    /// The cheapest child below a gate line, where `known` tells the cost of a subtree by current
    /// and level, and the layer it stands in.
    pub(super) fn cheapest_child(
        &self,
        kind: &Kind,
        line: f64,
        known: impl Fn(usize) -> (f64, usize),
    ) -> Option<Child> {
        let mut best: Option<Child> = None;
        for (c, &current) in self.currents.iter().enumerate() {
            let level = self.levels.of(line + kind.line / current);
            let (cost, above) = known(c * self.levels.values.len() + level);
            let leg = self.feeder(kind, current);
            let cost = cost + leg;
            if cost < best.map_or(f64::INFINITY, |b| b.cost) {
                best = Some(Child {
                    cost,
                    leg,
                    current: c,
                    level,
                    above,
                });
            }
        }
        best
    }

    /// Least area of a leg of `m` units of `unit` ampere each.
    #[inline(always)]
    fn leg_area(&self, rail: usize, density: f64, unit: f64, m: f64) -> f64 {
        let rule = &self.rules[rail];
        let a = density * unit;
        if rule.shared {
            let beta = rule.border_width * rule.border_length / 2.0;
            let n = m + 1.0;
            a * m + 2.0 * (a * beta * m * n).sqrt() + beta * n
        } else {
            let beta = rule.border_width * rule.border_length;
            m * (a + 2.0 * (a * beta).sqrt() + beta)
        }
    }

    /// Least area of an input leg.
    fn input_leg(&self, kind: &Kind, unit: f64, m: f64) -> f64 {
        self.leg_area(kind.rail, kind.density[0], unit, m)
    }

    /// Area of the leg that feeds a family with `current`: as few units as may be, none larger than
    /// the leader's own current. Whole units may leave it short by as much as a feeder may err.
    #[inline(always)]
    fn feeder(&self, kind: &Kind, current: f64) -> f64 {
        let largest = kind.leader.map_or(current, |g| {
            (self.amps[g] * (1.0 + self.tolerances[g])).min(current)
        });
        let m = current / largest;
        let unit = current * (1.0 - FEEDER) / m;
        self.leg_area(kind.rail, kind.density[0], unit, m)
    }

    /// Area of an output's legs and the last level of the line at which it holds.
    #[inline(always)]
    pub(super) fn leg_of(
        &self,
        kind: &Kind,
        k: usize,
        root: bool,
        into: f64,
        unit: f64,
    ) -> Option<(f64, usize)> {
        let (own, density) = kind.own[k].as_ref()?;
        let (m, rounding) = units_for(self.amps[k], unit);
        if rounding.abs() > self.tolerances[k] {
            return None;
        }
        let own = own[match (root, rounding.abs() <= 1e-9) {
            (true, true) => 0,
            (false, true) => 1,
            _ => 2,
        }];
        let most = if self.limits[k].is_finite() {
            let left = self.limits[k] - own * (1.0 / self.amps[k] + 1.0 / into);
            // Less than nothing as well where no shape serves the leg so shifted.
            if left.is_nan() || left < 0.0 {
                return None;
            }
            self.levels.of(left)
        } else {
            self.levels.values.len() - 1
        };
        let density = kind.density[0].max(*density);
        let leg = self.leg_area(kind.rail, density, unit, f64::from(m));
        Some((self.counts[k] * leg, most))
    }

    fn desk(&self, kind: &Kind, prices: &Prices) -> Desk {
        let v = self.levels.values.len();
        let inputs = self.currents.iter().map(|&into| {
            self.input_legs(kind, into)
                .map(|(units, _, area)| Input {
                    units,
                    base: area + prices.overhead * into,
                    gains: vec![0.0; v],
                    root: 0.0,
                })
                .collect()
        });
        let mut desk = Desk {
            inputs: inputs.collect(),
            least: Vec::new(),
            kids: vec![0.0; self.lines.values.len()],
        };
        desk.settle(v);
        desk
    }

    /// What all roots together cost at least at given prices.
    pub fn root_cost(&self, prices: &Prices) -> f64 {
        self.roots_of(&self.climb(prices))
    }

    /// The bound that prices prove for an overhead current of at most `budget` ampere, once it is
    /// known what roots cost at these prices.
    pub fn bound(prices: &Prices, roots: f64, budget: f64) -> f64 {
        prices.outputs.iter().sum::<f64>() - prices.overhead * budget + roots
    }

    /// The bound and the relaxed networks it stands on: each a plane that no price can rise above.
    pub fn planes(&self, prices: &Prices, budget: f64) -> (f64, Vec<Tree>) {
        let tables = self.climb(prices);
        let bound = Relaxed::bound(prices, self.roots_of(&tables), budget);
        let mut known = BTreeMap::new();
        let mut trees = Vec::new();
        // One per leader, so that planes differ.
        let mut leaders = Vec::new();
        for kind in cheapest(&tables.roots[0]) {
            let leader = self.kinds[self.root][kind].leader;
            if leaders.contains(&leader) {
                continue;
            }
            leaders.push(leader);
            if let Some((_, top)) = self.family(&tables, prices, None, 0, kind) {
                trees.push(self.tree(&tables, prices, &top, &mut known));
            }
        }
        (bound, trees)
    }

    fn roots_of(&self, tables: &Tables) -> f64 {
        let least = |p: usize| {
            let roots = tables.roots[p].iter();
            roots.map(|r| r.0).fold(f64::INFINITY, f64::min)
        };
        // One network has the first output; copies of the reference may start others.
        let mut others: Vec<f64> = (1..self.order.len()).map(|p| least(p).min(0.0)).collect();
        others.sort_by(f64::total_cmp);
        least(0) + others.iter().take(self.roots - 1).sum::<f64>()
    }

    /// From the last output to the first: all subtrees.
    fn climb(&self, prices: &Prices) -> Tables {
        let slots = self.currents.len() * self.levels.values.len();
        let mut desks: [Vec<Desk>; 2] = [0, 1].map(|r| {
            let kinds: &[Kind] = &self.kinds[r];
            kinds.par_iter().map(|k| self.desk(k, prices)).collect()
        });
        let n = self.order.len();
        let mut tables = Tables {
            layers: (0..n).map(|_| Vec::new()).collect(),
            best: (0..n)
                .map(|_| [0, 1].map(|_| vec![(f64::INFINITY, 0); slots]))
                .collect(),
            roots: vec![Vec::new(); n],
        };
        for p in (0..n).rev() {
            let k = self.order[p];
            let home = self.rails[k];
            // The family that serves it, and those above.
            let mut children: [Vec<Vec<f64>>; 2] =
                [0, 1].map(|r| vec![vec![f64::INFINITY; self.lines.values.len()]; desks[r].len()]);
            for above in 0..DEPTH {
                let rail = (home + above) % 2;
                let below = above.checked_sub(1).map(|a| costs(&tables.layers[p][a]));
                let table = self.layer(
                    &desks[rail],
                    &mut children[rail],
                    rail,
                    k,
                    prices,
                    below.as_deref(),
                );
                let better = improve(&mut tables.best[p][rail], &table, above);
                tables.layers[p].push(table);
                if !better {
                    break;
                }
            }
            // One more layer to hang below a family that is the last of its row.
            let made = tables.layers[p].len();
            let last = costs(&tables.layers[p][made - 1]);
            let rail = (home + made) % 2;
            let mut scratch = Vec::new();
            for (hops, child) in self.hops[rail].iter().zip(&mut children[rail]) {
                hops.child(&last, &mut scratch);
                for (a, b) in child.iter_mut().zip(&scratch) {
                    *a = a.min(*b);
                }
            }
            tables.roots[p] = self.roots_at(&desks[self.root], &children[self.root], k, prices);
            for r in 0..2 {
                let kinds = &self.kinds[r];
                desks[r]
                    .par_iter_mut()
                    .zip(&children[r])
                    .zip(kinds)
                    .for_each(|((desk, child), kind)| {
                        for (kid, cost) in desk.kids.iter_mut().zip(child) {
                            *kid += cost.min(0.0);
                        }
                        if r == home {
                            self.gather(desk, kind, k, prices);
                        }
                    });
            }
        }
        tables
    }

    /// An output becomes one that families of the kind may serve besides their first.
    fn gather(&self, desk: &mut Desk, kind: &Kind, k: usize, prices: &Prices) {
        for (i, &into) in self.currents.iter().enumerate() {
            for input in &mut desk.inputs[i] {
                let unit = into / f64::from(input.units);
                if let Some((area, most)) = self.leg_of(kind, k, false, into, unit) {
                    let gain = area - prices.outputs[k];
                    if gain < 0.0 {
                        for g in &mut input.gains[..=most] {
                            *g += gain;
                        }
                    }
                }
                if i == self.reference
                    && let Some((area, _)) = self.leg_of(kind, k, true, into, unit)
                {
                    input.root += (area - prices.outputs[k]).min(0.0);
                }
            }
        }
        desk.settle(self.levels.values.len());
    }

    /// Subtrees with first output `k`: served by the top family itself, or by a child from a table.
    /// Keeps the least costs of children.
    fn layer(
        &self,
        desks: &[Desk],
        children: &mut [Vec<f64>],
        rail: usize,
        k: usize,
        prices: &Prices,
        below: Option<&[f64]>,
    ) -> Table {
        let (c, v) = (self.currents.len(), self.levels.values.len());
        let chunk = desks.len().div_ceil(16).max(1);
        let parts: Vec<Table> = desks
            .par_chunks(chunk)
            .zip(children.par_chunks_mut(chunk))
            .enumerate()
            .map(|(part, (desks, children))| {
                let mut table = vec![(f64::INFINITY, 0u32); c * v];
                let mut child = Vec::new();
                let mut costs = vec![0.0; v];
                for (n, desk) in desks.iter().enumerate() {
                    let number = part * chunk + n;
                    let kind = &self.kinds[rail][number];
                    let hops = &self.hops[rail][number];
                    if let Some(below) = below {
                        hops.child(below, &mut child);
                        for (kept, new) in children[n].iter_mut().zip(&child) {
                            *kept = kept.min(*new);
                        }
                    }
                    for (i, &into) in self.currents.iter().enumerate() {
                        costs.fill(f64::INFINITY);
                        if below.is_some() {
                            costs.copy_from_slice(&desk.least[i * v..(i + 1) * v]);
                        } else {
                            for input in &desk.inputs[i] {
                                let unit = into / f64::from(input.units);
                                let Some((area, most)) = self.leg_of(kind, k, false, into, unit)
                                else {
                                    continue;
                                };
                                let first = input.base + area - prices.outputs[k];
                                for (cost, gain) in costs[..=most].iter_mut().zip(&input.gains) {
                                    *cost = cost.min(first + gain);
                                }
                            }
                        }
                        let lines = &hops.lines[i * v..(i + 1) * v];
                        let slots = &mut table[i * v..(i + 1) * v];
                        for ((cost, &line), slot) in costs.iter().zip(lines).zip(slots) {
                            let mut total = cost + desk.kids[line as usize];
                            if below.is_some() {
                                total += child[line as usize];
                            }
                            if total < slot.0 {
                                *slot = (total, number as u32);
                            }
                        }
                    }
                }
                table
            })
            .collect();
        least_of(parts)
    }

    /// Networks that start at the reference with first output `k`, by kind of their root.
    fn roots_at(
        &self,
        desks: &[Desk],
        children: &[Vec<f64>],
        k: usize,
        prices: &Prices,
    ) -> Vec<(f64, u32)> {
        let v = self.levels.values.len();
        let into = self.currents[self.reference];
        let mut out = Vec::new();
        let kinds = &self.kinds[self.root];
        for (n, ((desk, child), kind)) in desks.iter().zip(children).zip(kinds).enumerate() {
            let line = self.hops[self.root][n].lines[self.reference * v] as usize;
            let mut least = f64::INFINITY;
            for input in &desk.inputs[self.reference] {
                let unit = into / f64::from(input.units);
                let mut first = child[line];
                if self.rails[k] == self.root
                    && let Some((area, _)) = self.leg_of(kind, k, true, into, unit)
                {
                    first = first.min(area - prices.outputs[k]);
                }
                least = least.min(input.base + input.root + desk.kids[line] + first);
            }
            if least.is_finite() {
                out.push((least, n as u32));
            }
        }
        out
    }
}

/// Kinds of roots, the cheapest first.
fn cheapest(roots: &[(f64, u32)]) -> impl Iterator<Item = usize> {
    let mut sorted = roots.to_vec();
    sorted.sort_by(|a, b| a.0.total_cmp(&b.0));
    sorted.into_iter().map(|(_, kind)| kind as usize)
}

/// A family of a relaxed network.
#[derive(Debug, Clone)]
struct Family {
    area: f64,
    overhead: f64,
    serves: Vec<usize>,
    gives: Vec<State>,
}

impl Relaxed {
    /// The cheapest family of a kind at a state, or at the reference.
    fn family(
        &self,
        tables: &Tables,
        prices: &Prices,
        state: Option<State>,
        first: usize,
        kind_index: usize,
    ) -> Option<(f64, Family)> {
        let rail = state.map_or(self.root, |s| s.rail);
        let kind = &self.kinds[rail][kind_index];
        let (i, j) = state.map_or((self.reference, 0), |s| (s.current, s.level));
        let into = self.currents[i];
        let root = state.is_none();
        let line = self.gate(kind, i, j);
        // The cheapest child with a first output.
        let child = |p: usize, layer: Option<usize>| {
            let known = |slot: usize| match layer {
                Some(above) => (tables.layers[p][above][slot].0, above),
                None => {
                    let (cost, above) = tables.best[p][1 - rail][slot];
                    (cost, above as usize)
                }
            };
            let child = self.cheapest_child(kind, line, known)?;
            let state = State {
                rail: 1 - rail,
                first: p,
                above: child.above,
                current: child.current,
                level: child.level,
            };
            Some((child.cost, child.leg, state))
        };
        let mut best: Option<(f64, Family)> = None;
        let below = match state {
            Some(s) if s.above > 0 => child(first, Some(s.above - 1)),
            Some(_) => None,
            None => child(first, None),
        };
        for (_, unit, area) in self.input_legs(kind, into) {
            let mut family = Family {
                area,
                overhead: into,
                serves: Vec::new(),
                gives: Vec::new(),
            };
            let mut cost = area + prices.overhead * into;
            let k = self.order[first];
            let own = (self.rails[k] == rail && state.is_none_or(|s| s.above == 0))
                .then(|| self.leg_of(kind, k, root, into, unit))
                .flatten()
                .filter(|(_, most)| root || j <= *most)
                .map(|(area, _)| area);
            let gain = own.map(|area| area - prices.outputs[k]);
            match (gain, below) {
                (Some(gain), other) if other.is_none_or(|b| gain <= b.0) => {
                    cost += gain;
                    family.area += own.unwrap_or_default();
                    family.serves.push(k);
                }
                (_, Some((least, leg, child))) => {
                    cost += least;
                    family.area += leg;
                    family.gives.push(child);
                }
                _ => continue,
            }
            for p in first + 1..self.order.len() {
                let k = self.order[p];
                if self.rails[k] == rail
                    && let Some((area, most)) = self.leg_of(kind, k, root, into, unit)
                    && (root || j <= most)
                    && area < prices.outputs[k]
                {
                    cost += area - prices.outputs[k];
                    family.area += area;
                    family.serves.push(k);
                }
            }
            if cost < best.as_ref().map_or(f64::INFINITY, |b| b.0) {
                best = Some((cost, family));
            }
        }
        let (mut cost, mut family) = best?;
        for p in first + 1..self.order.len() {
            if let Some((least, leg, state)) = child(p, None)
                && least < 0.0
            {
                cost += least;
                family.area += leg;
                family.gives.push(state);
            }
        }
        Some((cost, family))
    }

    /// The tree below a family.
    fn tree(
        &self,
        tables: &Tables,
        prices: &Prices,
        family: &Family,
        known: &mut BTreeMap<State, Tree>,
    ) -> Tree {
        let mut tree = Tree {
            area: family.area,
            overhead: family.overhead,
            served: vec![0.0; self.amps.len()],
        };
        for &k in &family.serves {
            tree.served[k] += 1.0;
        }
        let v = self.levels.values.len();
        for state in &family.gives {
            let below = match known.get(state) {
                Some(below) => below.clone(),
                None => {
                    let slot = state.current * v + state.level;
                    let kind = tables.layers[state.first][state.above][slot].1 as usize;
                    let found = self.family(tables, prices, Some(*state), state.first, kind);
                    let (_, top) = found.expect("a state is known where a family reaches it");
                    let below = self.tree(tables, prices, &top, known);
                    known.insert(*state, below.clone());
                    below
                }
            };
            tree.area += below.area;
            tree.overhead += below.overhead;
            for (a, b) in tree.served.iter_mut().zip(&below.served) {
                *a += b;
            }
        }
        tree
    }
}

/// Every leader of a rail, and none, at every step of density.
fn kinds(
    rail: Rail,
    wants: &[Want],
    limits: &[f64],
    currents: &[f64],
    merits: &Merits,
    merit: &[&Floors],
    resolution: Resolution,
) -> Vec<Kind> {
    let mut order: Vec<usize> = (0..wants.len())
        .filter(|&k| wants[k].rail == rail)
        .collect();
    let line = |k: usize| merit[k].all().line;
    order.sort_by(|&a, &b| line(b).total_cmp(&line(a)).then(a.cmp(&b)));
    let mut labels: Vec<(Option<usize>, &Floors, &[usize])> = Vec::new();
    for (p, &g) in order.iter().enumerate() {
        labels.push((Some(g), merit[g], &order[p..]));
    }
    if let Some(bare) = &merits.bare[rail as usize] {
        labels.push((None, bare, &[]));
    }
    // From the least density any family can have to where mismatch is no more.
    let largest = currents.iter().copied().fold(0.0, f64::max);
    let smallest = currents.iter().copied().fold(f64::INFINITY, f64::min);
    let floor = labels
        .iter()
        .map(|l| l.1.all().density)
        .fold(f64::INFINITY, f64::min);
    let (mut start, mut end) = (f64::INFINITY, floor * 4.0);
    for (k, want) in wants.iter().enumerate() {
        if limits[k].is_finite() {
            let need =
                |into: f64| merit[k].all().own[1] * (1.0 / want.current + 1.0 / into) / limits[k];
            start = start.min(need(largest));
            end = end.max(6.0 * need(smallest.max(want.current * 0.05)));
        }
    }
    let mut densities = vec![floor];
    if start.is_finite() && start > floor {
        densities.push(start);
    }
    while densities[densities.len() - 1] < end {
        densities.push(densities[densities.len() - 1] * resolution.density);
    }
    let mut out = Vec::new();
    for (leader, floors, serves) in labels {
        for (d, &low) in densities.iter().enumerate() {
            let high = densities.get(d + 1).copied().unwrap_or(f64::INFINITY);
            let &Merit { line, density, .. } = floors.up_to(high);
            if high < density || line.is_infinite() {
                continue;
            }
            let mut own = vec![None; wants.len()];
            for &k in serves {
                let merit = merit[k].up_to(high);
                if high >= merit.density {
                    let over = merit.own.map(|own| {
                        if limits[k].is_finite() {
                            own.max(line) / high
                        } else {
                            0.0
                        }
                    });
                    own[k] = Some((over, merit.density));
                }
            }
            out.push(Kind {
                leader,
                rail: rail as usize,
                density: [low.max(density), high],
                line: line / high,
                own,
            });
        }
    }
    out
}

/// A family of a real network, as the relaxed one sees it.
#[derive(Debug, Clone, PartialEq)]
pub struct Real {
    /// Fed by the reference.
    pub root: bool,
    /// Input current, A.
    pub into: f64,
    /// Units in the input leg.
    pub units: u32,
    /// Even part of the variance its line has collected.
    pub variance: f64,
    /// Density, m^2/A.
    pub density: f64,
    /// Outputs it serves.
    pub serves: Vec<usize>,
}

impl Relaxed {
    /// Area of the relaxed family that a real one maps onto. `None` where the real family is outside
    /// the declared design space, or does what the relaxed one cannot.
    pub fn image(&self, rail: usize, family: &Real, children: &[&Real]) -> Option<f64> {
        let leads = |leader: Option<usize>| match leader {
            Some(g) => family.serves.contains(&g),
            None => true,
        };
        let kind = self.kinds[rail].iter().find(|kind| {
            leads(kind.leader)
                && kind.density[0] <= family.density
                && family.density < kind.density[1]
        })?;
        let known = |amps: f64| self.currents.iter().any(|c| (c / amps - 1.0).abs() < 1e-9);
        if !known(family.into) || !self.units.contains(&family.units) {
            return None;
        }
        let unit = family.into / f64::from(family.units);
        let mut area = self.input_leg(kind, unit, f64::from(family.units));
        let level = self.levels.of(family.variance);
        for &k in &family.serves {
            let (leg, most) = self.leg_of(kind, k, family.root, family.into, unit)?;
            if level > most {
                return None;
            }
            area += leg;
        }
        let line = self.lines.values[self
            .lines
            .of(self.levels.values[level] + kind.line / family.into)];
        for child in children {
            let arrives = self.levels.of(line + kind.line / child.into);
            if !known(child.into) || arrives > self.levels.of(child.variance) {
                return None;
            }
            area += self.feeder(kind, child.into);
        }
        Some(area)
    }

    /// A first guess of what an output is worth: alone, with half its limit left to its line.
    pub fn guess(&self) -> Vec<f64> {
        (0..self.amps.len())
            .map(|k| {
                let holds = |kind: &&Kind| {
                    kind.leader == Some(k)
                        && kind.own[k].is_some_and(|(own, _)| {
                            !self.limits[k].is_finite()
                                || 2.5 * own[1] / self.amps[k] <= self.limits[k]
                        })
                };
                let least = self.kinds[self.rails[k]]
                    .iter()
                    .filter(holds)
                    .map(|kind| self.input_leg(kind, self.amps[k], 1.0))
                    .fold(f64::INFINITY, f64::min);
                2.0 * self.counts[k] * if least.is_finite() { least } else { 1e-12 }
            })
            .collect()
    }
}
