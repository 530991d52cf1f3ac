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
//!   1974). Overhead current likewise.
//!
//! What remains is a tree, and its least cost follows level by level from the leaves (dynamic
//! programming). A family may have several children on one input current, but children of one
//! family differ in their most demanding outputs, since every output sits in one family.

use super::merit::{LINE, Merit, Merits};
use crate::assembly::candidates::Want;
use crate::assembly::plan::units_for;
use crate::network::Job;
use crate::process::AreaRule;
use crate::spec::Rail;
use rayon::prelude::*;
use std::collections::BTreeMap;

/// Relative room on every error limit: what a whole circuit may differ from sums on paper.
pub const PAPER: f64 = 0.003;

/// Families in a chain from the reference at most. Declared.
pub const DEPTH: usize = 5;

/// How fine the relaxed network looks.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Resolution {
    /// Ratio of one density to the next.
    pub density: f64,
    /// Levels of variance per factor 2 (a power of two).
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

/// A feed: an input current for a family of one kind, on a line of at most some level.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub struct Feed {
    /// Rail of the family that takes it.
    pub rail: usize,
    /// Its kind.
    pub kind: usize,
    /// Index of the current.
    pub current: usize,
    /// Level of variance the line has collected.
    pub level: usize,
}

/// A relaxed family with what it serves.
#[derive(Debug, Clone, PartialEq)]
pub struct Column {
    /// What it gives, and how often.
    pub gives: Vec<(Feed, f64)>,
    /// Outputs it serves.
    pub serves: Vec<usize>,
    /// Area, m^2.
    pub area: f64,
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
    /// Variance its line has collected, at the tracked climate.
    pub variance: f64,
    /// Density, m^2/A.
    pub density: f64,
    /// Outputs it serves.
    pub serves: Vec<usize>,
}

/// Chains of so many families at most: least costs before the feed is paid for, and what feeds one
/// family shorter are worth.
struct Layer {
    tables: [Vec<Vec<(f64, u32, u32)>>; 2],
    feeds: Vec<f64>,
}

/// A kind of family on one rail: its most demanding output, or none.
#[derive(Debug, Clone)]
struct Label {
    leader: Option<usize>,
    line: f64,
    density: f64,
    /// How many children of this kind one family may have.
    copies: f64,
    /// Outputs a family of the kind may serve, the leader first.
    serves: Vec<Item>,
}

#[derive(Debug, Clone, Copy)]
struct Item {
    output: usize,
    own: f64,
    density: f64,
}

/// Levels of variance: zero, then steps with a few leading bits of the number, as they come.
#[derive(Debug, Clone)]
struct Levels {
    first: u64,
    shift: u32,
    values: Vec<f64>,
}

impl Levels {
    fn new(least: f64, most: f64, per_octave: u32) -> Levels {
        let shift = 52 - per_octave.trailing_zeros();
        let first = least.to_bits() >> shift;
        let last = most.to_bits() >> shift;
        let mut values = vec![0.0];
        values.extend((first..=last).map(|b| f64::from_bits(b << shift)));
        Levels {
            first,
            shift,
            values,
        }
    }
    /// The level at or below a variance.
    #[inline(always)]
    fn of(&self, variance: f64) -> usize {
        let bits = variance.to_bits() >> self.shift;
        if bits < self.first {
            return 0;
        }
        ((bits - self.first) as usize + 1).min(self.values.len() - 1)
    }
}

/// The relaxed problem of a job.
pub struct Relaxed {
    labels: [Vec<Label>; 2],
    limits: Vec<f64>,
    tolerances: Vec<f64>,
    currents: Vec<f64>,
    units: Vec<u32>,
    amps: Vec<f64>,
    counts: Vec<f64>,
    rules: [AreaRule; 2],
    densities: Vec<f64>,
    levels: Levels,
    /// Finer levels, of a gate line behind the input leg: never handed on.
    lines: Levels,
    root: Rail,
    reference: usize,
    roots: usize,
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
        let merit: Vec<Merit> = merits.outputs.iter().copied().collect::<Option<_>>()?;
        let limits: Vec<f64> = wants
            .iter()
            .map(|w| (w.limit * (1.0 + PAPER) / w.sigma).powi(2))
            .collect();
        let labels = [Rail::Sink, Rail::Source].map(|rail| {
            let mut order: Vec<usize> = (0..wants.len())
                .filter(|&k| wants[k].rail == rail)
                .collect();
            order.sort_by(|&a, &b| merit[b].line.total_cmp(&merit[a].line).then(a.cmp(&b)));
            let mut labels: Vec<Label> = order
                .iter()
                .enumerate()
                .map(|(p, &g)| Label {
                    leader: Some(g),
                    line: merit[g].line,
                    density: merit[g].density,
                    copies: 1.0,
                    serves: order[p..]
                        .iter()
                        .map(|&k| Item {
                            output: k,
                            own: if limits[k].is_finite() {
                                merit[k].own.max(merit[g].line)
                            } else {
                                0.0
                            },
                            density: merit[k].density,
                        })
                        .collect(),
                })
                .collect();
            if let Some(bare) = merits.bare[rail as usize] {
                labels.push(Label {
                    leader: None,
                    line: bare.line,
                    density: bare.density,
                    // Below each of them some output is served, and every output only once.
                    copies: wants.len() as f64,
                    serves: Vec::new(),
                });
            }
            labels
        });
        let finite: Vec<f64> = limits.iter().copied().filter(|l| l.is_finite()).collect();
        let most = finite.iter().copied().fold(1e-9, f64::max) * 1.5;
        let least = finite.iter().copied().fold(most, f64::min) * 0.02;
        let reference = job.spec.reference.current().0;
        let mut currents = currents.to_vec();
        if !currents.contains(&reference) {
            currents.push(reference);
            currents.sort_by(f64::total_cmp);
        }
        let index = currents.iter().position(|&c| c == reference).unwrap_or(0);
        // From the least density any family can have to where mismatch is no more.
        let floor = labels
            .iter()
            .flatten()
            .map(|l| l.density)
            .fold(f64::INFINITY, f64::min);
        let largest = currents.iter().copied().fold(0.0, f64::max);
        let smallest = currents.iter().copied().fold(f64::INFINITY, f64::min);
        let (mut start, mut end) = (f64::INFINITY, floor * 4.0);
        for (k, want) in wants.iter().enumerate() {
            if limits[k].is_finite() {
                let need = |into: f64| merit[k].own * (1.0 / want.current + 1.0 / into) / limits[k];
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
        let copies = match job.spec.reference {
            crate::spec::Reference::Current { copies, .. } => copies as usize,
            crate::spec::Reference::Resistor { .. } => 1,
        };
        Some(Relaxed {
            labels,
            limits,
            tolerances: wants.iter().map(|w| w.limit + LINE).collect(),
            currents,
            units: units.to_vec(),
            amps: wants.iter().map(|w| w.current).collect(),
            counts: wants.iter().map(|w| w.count).collect(),
            rules: [Rail::Sink, Rail::Source].map(|r| job.tech(r).mosfet().area),
            densities,
            levels: Levels::new(least, most, resolution.levels),
            lines: Levels::new(least / 8.0, most, resolution.levels.max(4) * 4),
            root: job.spec.reference.rail(),
            reference: index,
            roots: copies,
        })
    }

    /// Least area of a leg of `m` units whose devices take `a` m^2 each.
    #[inline(always)]
    fn leg(&self, rail: usize, a: f64, m: f64) -> f64 {
        let rule = &self.rules[rail];
        if rule.shared {
            let beta = rule.border_width * rule.border_length / 2.0;
            let n = m + 1.0;
            a * m + 2.0 * (a * beta * m * n).sqrt() + beta * n
        } else {
            let beta = rule.border_width * rule.border_length;
            m * (a + 2.0 * (a * beta).sqrt() + beta)
        }
    }

    /// Place of a feed in a list of all.
    #[inline(always)]
    fn index(&self, feed: &Feed) -> usize {
        let (c, v) = (self.currents.len(), self.levels.values.len());
        let before = if feed.rail == 1 {
            self.labels[0].len()
        } else {
            0
        };
        ((before + feed.kind) * c + feed.current) * v + feed.level
    }

    /// Feeds in all.
    fn feeds(&self) -> usize {
        (self.labels[0].len() + self.labels[1].len())
            * self.currents.len()
            * self.levels.values.len()
    }

    /// Area of the leg that feeds a family with `current` from a family of a kind.
    #[inline(always)]
    fn feeder(&self, rail: usize, label: &Label, low: f64, current: f64) -> f64 {
        // As few units as may be: none larger than the leader's own current. Whole units may leave
        // the leg short of its current by as much as a line may err.
        let largest = label.leader.map_or(current, |g| {
            (self.amps[g] * (1.0 + self.tolerances[g].min(1.0))).min(current)
        });
        let units = current / largest;
        self.leg(rail, low * current * (1.0 - LINE) / units, units)
    }

    /// What children can bring to a family, by level of its gate line.
    fn kids(
        &self,
        rail: usize,
        label: &Label,
        low: f64,
        high: f64,
        feeds: &[f64],
        out: &mut [f64],
    ) {
        let levels = self.levels.values.len();
        out.fill(0.0);
        let legs: Vec<(f64, f64)> = self
            .currents
            .iter()
            .map(|&c| (self.feeder(rail, label, low, c), label.line / (high * c)))
            .collect();
        let mut best = vec![0.0f64; out.len()];
        for (kind, to) in self.labels[1 - rail].iter().enumerate() {
            best.fill(0.0);
            for (i, &(leg, own)) in legs.iter().enumerate() {
                let first = self.index(&Feed {
                    rail: 1 - rail,
                    kind,
                    current: i,
                    level: 0,
                });
                let worth = &feeds[first..first + levels];
                if worth[0] <= leg {
                    continue;
                }
                for (j, best) in best.iter_mut().enumerate() {
                    let gain = leg - worth[self.levels.of(self.lines.values[j] + own)];
                    if gain >= 0.0 {
                        break;
                    }
                    *best = best.min(gain);
                }
            }
            for (out, best) in out.iter_mut().zip(&best) {
                *out += to.copies * best;
            }
        }
    }

    fn upper(&self, d: usize) -> f64 {
        self.densities.get(d + 1).copied().unwrap_or(f64::INFINITY)
    }

    /// Least cost of one kind of family before it pays for its feed, by feed taken and (last) from
    /// the reference, with its step of density and index of units.
    fn family(
        &self,
        rail: usize,
        l: usize,
        prices: &Prices,
        feeds: &[f64],
    ) -> Vec<(f64, u32, u32)> {
        let label = &self.labels[rail][l];
        let levels = self.levels.values.len();
        let slots = self.currents.len() * levels;
        let mut best = vec![(f64::INFINITY, 0u32, 0u32); slots + 1];
        let mut kids = vec![0.0; self.lines.values.len()];
        let mut gains = vec![0.0; levels];
        for d in 0..self.densities.len() {
            let (low, high) = (self.densities[d], self.upper(d));
            if high < label.density {
                continue;
            }
            let low = low.max(label.density);
            let mut known = false;
            for (i, &into) in self.currents.iter().enumerate() {
                let own = label.line / (high * into);
                for (n, &units) in self.units.iter().enumerate() {
                    let unit = into / f64::from(units);
                    let Some(last) =
                        self.outputs(rail, label, low, high, into, unit, prices, &mut gains)
                    else {
                        continue;
                    };
                    if !known {
                        self.kids(rail, label, low, high, feeds, &mut kids);
                        known = true;
                    }
                    let base =
                        self.leg(rail, low * unit, f64::from(units)) + prices.overhead * into;
                    for j in 0..=last {
                        let line = self.lines.of(self.levels.values[j] + own);
                        let cost = base + gains[j] + kids[line];
                        let slot = &mut best[i * levels + j];
                        if cost < slot.0 {
                            *slot = (cost, d as u32, n as u32);
                        }
                    }
                }
            }
        }
        if rail == self.root as usize {
            best[slots] = best[self.reference * levels];
        }
        best
    }

    /// What all roots together cost at least at given prices: what feeds are worth follows from the
    /// leaves up (dynamic programming over chains of at most [`DEPTH`] families).
    pub fn root_cost(&self, prices: &Prices) -> f64 {
        let layers = self.climb(prices);
        self.roots_of(&layers[layers.len() - 1])
    }

    /// The bound that prices prove for an overhead current of at most `budget` ampere, once it is
    /// known what roots cost at these prices.
    pub fn bound(prices: &Prices, roots: f64, budget: f64) -> f64 {
        prices.outputs.iter().sum::<f64>() - prices.overhead * budget + roots
    }

    /// The bound and the relaxed networks it stands on, one per kind of root: each a plane that no
    /// price can rise above.
    pub fn planes(&self, prices: &Prices, budget: f64) -> (f64, Vec<Tree>) {
        let layers = self.climb(prices);
        let top = layers.len() - 1;
        let rail = self.root as usize;
        let slots = self.currents.len() * self.levels.values.len();
        let mut known = BTreeMap::new();
        let trees = (0..self.labels[rail].len())
            .filter(|&l| layers[top].tables[rail][l][slots].0.is_finite())
            .map(|l| self.tree(&layers, top, rail, l, slots, prices, &mut known))
            .collect();
        let bound = Relaxed::bound(prices, self.roots_of(&layers[top]), budget);
        (bound, trees)
    }

    fn roots_of(&self, layer: &Layer) -> f64 {
        let slots = self.currents.len() * self.levels.values.len();
        let tables = &layer.tables[self.root as usize];
        let least = tables
            .iter()
            .map(|t| t[slots].0)
            .fold(f64::INFINITY, f64::min);
        least + (self.roots as f64 - 1.0) * least.min(0.0)
    }

    /// From the leaves up: chains of one family, of two, and so on.
    fn climb(&self, prices: &Prices) -> Vec<Layer> {
        let slots = self.currents.len() * self.levels.values.len();
        let mut layers: Vec<Layer> = Vec::new();
        let mut feeds = vec![0.0; self.feeds()];
        for _ in 0..DEPTH {
            let tasks: Vec<(usize, usize)> = (0..2)
                .flat_map(|r| (0..self.labels[r].len()).map(move |l| (r, l)))
                .collect();
            let found: Vec<Vec<(f64, u32, u32)>> = tasks
                .par_iter()
                .map(|&(r, l)| self.family(r, l, prices, &feeds))
                .collect();
            let mut next = vec![0.0; self.feeds()];
            let mut tables = [Vec::new(), Vec::new()];
            for (&(rail, kind), table) in tasks.iter().zip(found) {
                let first = self.index(&Feed {
                    rail,
                    kind,
                    current: 0,
                    level: 0,
                });
                for (worth, slot) in next[first..first + slots].iter_mut().zip(&table) {
                    *worth = (-slot.0).max(0.0);
                }
                tables[rail].push(table);
            }
            let settled = next == feeds;
            layers.push(Layer {
                tables,
                feeds: std::mem::replace(&mut feeds, next),
            });
            if settled {
                break;
            }
        }
        layers
    }

    /// The tree from a state on.
    #[allow(clippy::too_many_arguments)]
    fn tree(
        &self,
        layers: &[Layer],
        depth: usize,
        rail: usize,
        l: usize,
        slot: usize,
        prices: &Prices,
        known: &mut BTreeMap<(usize, usize, usize, usize), Tree>,
    ) -> Tree {
        if let Some(tree) = known.get(&(depth, rail, l, slot)) {
            return tree.clone();
        }
        let levels = self.levels.values.len();
        let slots = self.currents.len() * levels;
        let (_, d, n) = layers[depth].tables[rail][l][slot];
        let (i, j) = if slot == slots {
            (self.reference, 0)
        } else {
            (slot / levels, slot % levels)
        };
        let family = self.column(
            rail,
            l,
            [i, j],
            [d as usize, n as usize],
            prices,
            &layers[depth].feeds,
        );
        let mut tree = Tree {
            area: family.area,
            overhead: self.currents[i],
            served: vec![0.0; self.amps.len()],
        };
        for &k in &family.serves {
            tree.served[k] += 1.0;
        }
        for (feed, times) in &family.gives {
            let below = self.tree(
                layers,
                depth - 1,
                feed.rail,
                feed.kind,
                feed.current * levels + feed.level,
                prices,
                known,
            );
            tree.area += times * below.area;
            tree.overhead += times * below.overhead;
            for (a, b) in tree.served.iter_mut().zip(&below.served) {
                *a += times * b;
            }
        }
        known.insert((depth, rail, l, slot), tree.clone());
        tree
    }

    /// What serving outputs brings, by level of the line before the input leg; the last level at
    /// which the leader still holds.
    #[allow(clippy::too_many_arguments)]
    fn outputs(
        &self,
        rail: usize,
        label: &Label,
        low: f64,
        high: f64,
        into: f64,
        unit: f64,
        prices: &Prices,
        gains: &mut [f64],
    ) -> Option<usize> {
        let levels = gains.len();
        let mut last = levels - 1;
        for (p, item) in label.serves.iter().enumerate() {
            let k = item.output;
            let taken = self.leg_of(rail, item, low, high, into, unit);
            let Some((area, most)) = taken else {
                if p == 0 {
                    return None;
                }
                continue;
            };
            let gain = area - prices.outputs[k];
            if p == 0 {
                last = most;
                gains[..=most].fill(gain);
            } else if gain < 0.0 {
                for g in &mut gains[..=most.min(last)] {
                    *g += gain;
                }
            }
        }
        if label.leader.is_none() {
            gains.fill(0.0);
        }
        Some(last)
    }

    /// Area of an output's legs and the last level of the line at which it holds.
    #[inline(always)]
    fn leg_of(
        &self,
        rail: usize,
        item: &Item,
        low: f64,
        high: f64,
        into: f64,
        unit: f64,
    ) -> Option<(f64, usize)> {
        let k = item.output;
        if high < item.density {
            return None;
        }
        let (m, rounding) = units_for(self.amps[k], unit);
        if rounding.abs() > self.tolerances[k] {
            return None;
        }
        let most = if self.limits[k].is_finite() {
            let left = self.limits[k] - item.own * (1.0 / self.amps[k] + 1.0 / into) / high;
            if left < 0.0 {
                return None;
            }
            self.levels.of(left)
        } else {
            self.levels.values.len() - 1
        };
        let area = self.counts[k] * self.leg(rail, low.max(item.density) * unit, f64::from(m));
        Some((area, most))
    }

    /// The family behind a state (current and level of its feed) with a step of density and an
    /// index of units, where feeds are worth so much.
    fn column(
        &self,
        rail: usize,
        l: usize,
        [i, j]: [usize; 2],
        [d, n]: [usize; 2],
        prices: &Prices,
        feeds: &[f64],
    ) -> Column {
        let label = &self.labels[rail][l];
        let (low, high) = (self.densities[d].max(label.density), self.upper(d));
        let into = self.currents[i];
        let units = f64::from(self.units[n]);
        let unit = into / units;
        let mut column = Column {
            gives: Vec::new(),
            serves: Vec::new(),
            area: self.leg(rail, low * unit, units),
        };
        for (p, item) in label.serves.iter().enumerate() {
            if let Some((area, most)) = self.leg_of(rail, item, low, high, into, unit)
                && j <= most
                && (p == 0 || area < prices.outputs[item.output])
            {
                column.area += area;
                column.serves.push(item.output);
            }
        }
        let line = self.lines.values[self
            .lines
            .of(self.levels.values[j] + label.line / (high * into))];
        for (kind, to) in self.labels[1 - rail].iter().enumerate() {
            let mut best: Option<(f64, f64, Feed)> = None;
            for (c, &current) in self.currents.iter().enumerate() {
                let leg = self.feeder(rail, label, low, current);
                let level = self.levels.of(line + label.line / (high * current));
                let feed = Feed {
                    rail: 1 - rail,
                    kind,
                    current: c,
                    level,
                };
                let gain = leg - feeds[self.index(&feed)];
                if gain < best.map_or(0.0, |b| b.0) {
                    best = Some((gain, leg, feed));
                }
            }
            if let Some((_, leg, feed)) = best {
                column.area += to.copies * leg;
                column.gives.push((feed, to.copies));
            }
        }
        column
    }

    /// The relaxed family that a real one maps onto: fed with `into` ampere in `units` units on a
    /// line that has collected `variance`, of `density` m^2/A, serving `serves` and feeding
    /// children (kind by their outputs, input current, collected variance). `None` where the real
    /// family is outside the declared design space.
    pub fn image(&self, rail: usize, family: &Real, children: &[&Real]) -> Option<Column> {
        let kind_of = |r: usize, serves: &[usize]| {
            self.labels[r].iter().position(|l| match l.leader {
                Some(g) => serves.contains(&g),
                None => true,
            })
        };
        let current_of = |amps: f64| {
            self.currents
                .iter()
                .position(|c| (c / amps - 1.0).abs() < 1e-9)
        };
        let l = kind_of(rail, &family.serves)?;
        let label = &self.labels[rail][l];
        let i = current_of(family.into)?;
        let n = self.units.iter().position(|&u| u == family.units)?;
        let d = self
            .densities
            .partition_point(|&d| d <= family.density)
            .checked_sub(1)?;
        let (low, high) = (self.densities[d].max(label.density), self.upper(d));
        let into = self.currents[i];
        let units = f64::from(self.units[n]);
        let unit = into / units;
        let level = self.levels.of(family.variance);
        let mut column = Column {
            gives: Vec::new(),
            serves: family.serves.clone(),
            area: self.leg(rail, low * unit, units),
        };
        for &k in &family.serves {
            let item = label.serves.iter().find(|item| item.output == k)?;
            let (area, most) = self.leg_of(rail, item, low, high, into, unit)?;
            if level > most {
                return None;
            }
            column.area += area;
        }
        let line = self.lines.values[self
            .lines
            .of(self.levels.values[level] + label.line / (high * into))];
        for child in children {
            let c = current_of(child.into)?;
            let kind = kind_of(1 - rail, &child.serves)?;
            let arrives = self
                .levels
                .of(line + label.line / (high * self.currents[c]));
            let level = self.levels.of(child.variance);
            if arrives > level {
                return None;
            }
            column.area += self.feeder(rail, label, low, self.currents[c]);
            column.gives.push((
                Feed {
                    rail: 1 - rail,
                    kind,
                    current: c,
                    level,
                },
                1.0,
            ));
        }
        Some(column)
    }

    /// A first guess of what an output is worth: alone, with half its limit left to its line.
    pub fn guess(&self) -> Vec<f64> {
        let mut outputs = vec![0.0; self.amps.len()];
        for r in 0..2 {
            for item in self.labels[r].iter().filter_map(|l| l.serves.first()) {
                let k = item.output;
                let d = if self.limits[k].is_finite() {
                    (2.5 * item.own / (self.limits[k] * self.amps[k])).max(item.density)
                } else {
                    item.density
                };
                outputs[k] = 2.0 * self.counts[k] * self.leg(r, d * self.amps[k], 1.0);
            }
        }
        outputs
    }
}
