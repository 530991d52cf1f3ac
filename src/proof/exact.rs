//! The relaxed network with every output served exactly once: dynamic programming over sets of
//! outputs instead of prices for them. Exact, and affordable for a handful of outputs; what is left
//! to a price is overhead current alone.

use super::relaxed::{DEPTH, Kind, Relaxed, Table, costs, improve, least_of};
use rayon::prelude::*;
use std::collections::BTreeMap;

/// Most outputs that are told apart.
pub const MOST: usize = 4;

/// The cheapest relaxed network at a price of overhead current.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Cheapest {
    /// Area and priced overhead together, m^2.
    pub cost: f64,
    /// Its area, m^2.
    pub area: f64,
    /// Its overhead current, A.
    pub overhead: f64,
}

/// Where a subtree starts: what its top family takes, and which outputs it serves in all.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
struct State {
    rail: usize,
    set: usize,
    above: usize,
    current: usize,
    level: usize,
}

/// One kind of family, ready to be combined.
struct Desk {
    /// By input current: every number of units, with what it costs, and what it costs to serve each
    /// output of the rail (in bits of the set) and up to which level.
    inputs: Vec<Vec<Input>>,
    /// By set of outputs: what children that serve exactly these cost, by level of the gate line.
    kids: Vec<Vec<f64>>,
}

struct Input {
    base: f64,
    serves: Vec<Option<(f64, usize)>>,
    root: Vec<Option<f64>>,
}

/// All subtrees.
struct Tables {
    /// By set, then by relays above the family where its outputs part, then by rail.
    layers: Vec<Vec<[Table; 2]>>,
    /// By set and rail: the best over layers.
    best: Vec<[Vec<(f64, u8)>; 2]>,
}

impl Relaxed {
    /// Whether outputs are few enough for [`Relaxed::cheapest`].
    pub fn is_exact(&self) -> bool {
        self.amps.len() <= MOST && self.roots == 1
    }

    /// How many outputs have a price.
    pub fn priced(&self) -> usize {
        if self.is_exact() { 0 } else { self.amps.len() }
    }

    /// The cheapest relaxed network where an ampere of overhead current costs `price` m^2.
    pub fn cheapest(&self, price: f64) -> Cheapest {
        let n = self.amps.len();
        let full = (1usize << n) - 1;
        let mut desks: [Vec<Desk>; 2] = [0, 1].map(|r| {
            self.kinds[r]
                .par_iter()
                .map(|kind| self.spread(kind, r, price))
                .collect()
        });
        let slots = self.currents.len() * self.levels.values.len();
        let mut tables = Tables {
            layers: vec![Vec::new(); full + 1],
            best: (0..=full)
                .map(|_| [0, 1].map(|_| vec![(f64::INFINITY, 0u8); slots]))
                .collect(),
        };
        let mut sets: Vec<usize> = (1..=full).collect();
        sets.sort_by_key(|s| (s.count_ones(), *s));
        for set in sets {
            for desks in &mut desks {
                desks.par_iter_mut().for_each(|desk| part(desk, set));
            }
            for above in 0..DEPTH {
                let mut better = false;
                let layer = [0, 1].map(|r| {
                    let below = above
                        .checked_sub(1)
                        .map(|a| costs(&tables.layers[set][a][1 - r]));
                    self.parted(&desks[r], r, set, below.as_deref())
                });
                for (best, layer) in tables.best[set].iter_mut().zip(&layer) {
                    better |= improve(best, layer, above);
                }
                tables.layers[set].push(layer);
                if !better {
                    break;
                }
            }
            for (r, desks) in desks.iter_mut().enumerate() {
                let below: Vec<f64> = tables.best[set][1 - r].iter().map(|s| s.0).collect();
                desks
                    .par_iter_mut()
                    .zip(&self.hops[r])
                    .for_each(|(desk, hops)| {
                        let mut child = Vec::new();
                        hops.child(&below, &mut child);
                        for (kid, cost) in desk.kids[set].iter_mut().zip(&child) {
                            *kid = kid.min(*cost);
                        }
                    });
            }
        }
        // The root.
        let gate = self.reference * self.levels.values.len();
        let mut roots: Vec<(f64, usize)> = desks[self.root]
            .iter()
            .enumerate()
            .map(|(n, desk)| {
                let line = self.hops[self.root][n].lines[gate] as usize;
                let mut least = f64::INFINITY;
                for input in &desk.inputs[self.reference] {
                    for own in subsets(self.on(self.root, full)) {
                        let served: Option<f64> = bits(own).map(|k| input.root[k]).sum();
                        if let Some(served) = served {
                            let kids = desk.kids[full & !own][line];
                            least = least.min(input.base + served + kids);
                        }
                    }
                }
                (least, n)
            })
            .collect();
        roots.sort_by(|a, b| a.0.total_cmp(&b.0));
        let Some(&(cost, kind)) = roots.first().filter(|r| r.0.is_finite()) else {
            return Cheapest {
                cost: f64::INFINITY,
                area: f64::INFINITY,
                overhead: 0.0,
            };
        };
        let mut reader = Reader {
            relaxed: self,
            tables: &tables,
            price,
            known: BTreeMap::new(),
        };
        let (area, overhead) = reader.walk(None, full, kind);
        Cheapest {
            cost,
            area,
            overhead,
        }
    }

    fn spread(&self, kind: &Kind, rail: usize, price: f64) -> Desk {
        let n = self.amps.len();
        let inputs = self.currents.iter().map(|&into| {
            self.input_legs(kind, into)
                .map(|(_, unit, area)| {
                    let serve = |k: usize, root: bool| {
                        (self.rails[k] == rail)
                            .then(|| self.leg_of(kind, k, root, into, unit))
                            .flatten()
                            .filter(|(leg, _)| area + leg <= self.cap)
                    };
                    Input {
                        base: area + price * into,
                        serves: (0..n).map(|k| serve(k, false)).collect(),
                        root: (0..n).map(|k| serve(k, true).map(|s| s.0)).collect(),
                    }
                })
                .collect()
        });
        let mut kids = vec![vec![f64::INFINITY; self.hops[rail][0].levels()]; 1 << n];
        kids[0].fill(0.0);
        Desk {
            inputs: inputs.collect(),
            kids,
        }
    }

    /// The outputs of a set that are on a rail.
    fn on(&self, rail: usize, set: usize) -> usize {
        let mine = bits(set).filter(|&k| self.rails[k] == rail);
        mine.map(|k| 1 << k).sum()
    }

    /// Subtrees that serve exactly a set: families that serve some of it and part the rest among
    /// children, or (with a table of what stands below) relays.
    fn parted(&self, desks: &[Desk], rail: usize, set: usize, below: Option<&[f64]>) -> Table {
        let (c, v) = (self.currents.len(), self.levels.values.len());
        let mine = self.on(rail, set);
        let chunk = desks.len().div_ceil(16).max(1);
        let parts: Vec<Table> = desks
            .par_chunks(chunk)
            .enumerate()
            .map(|(part, desks)| {
                let mut table = vec![(f64::INFINITY, 0u32); c * v];
                let mut child = Vec::new();
                let mut costs = vec![0.0; v];
                for (n, desk) in desks.iter().enumerate() {
                    let number = part * chunk + n;
                    let hops = &self.hops[rail][number];
                    if let Some(below) = below {
                        hops.child(below, &mut child);
                    }
                    for i in 0..c {
                        let lines = &hops.lines[i * v..(i + 1) * v];
                        let slots = &mut table[i * v..(i + 1) * v];
                        if below.is_some() {
                            let base = desk.inputs[i]
                                .iter()
                                .map(|input| input.base)
                                .fold(f64::INFINITY, f64::min);
                            for (&line, slot) in lines.iter().zip(slots) {
                                let total = base + child[line as usize];
                                if total < slot.0 {
                                    *slot = (total, number as u32);
                                }
                            }
                            continue;
                        }
                        for own in subsets(mine) {
                            // What children serve besides; a single child is a relay's.
                            let kids = &desk.kids[set & !own];
                            costs.fill(f64::INFINITY);
                            for input in &desk.inputs[i] {
                                let (mut cost, mut most) = (input.base, v - 1);
                                for k in bits(own) {
                                    match input.serves[k] {
                                        Some((area, last)) => {
                                            cost += area;
                                            most = most.min(last);
                                        }
                                        None => cost = f64::INFINITY,
                                    }
                                }
                                if cost.is_finite() {
                                    for c in &mut costs[..=most] {
                                        *c = c.min(cost);
                                    }
                                }
                            }
                            let both = costs.iter().zip(lines);
                            for ((cost, &line), slot) in both.zip(slots.iter_mut()) {
                                let total = cost + kids[line as usize];
                                if total < slot.0 {
                                    *slot = (total, number as u32);
                                }
                            }
                        }
                    }
                }
                table
            })
            .collect();
        least_of(parts)
    }
}

/// Two or more children that part a set: the one with its lowest output, and the others.
fn part(desk: &mut Desk, set: usize) {
    let low = set & set.wrapping_neg();
    let mut best = std::mem::take(&mut desk.kids[set]);
    for rest in subsets(set & !low) {
        if rest == 0 {
            continue;
        }
        let first = set & !rest;
        let pairs = desk.kids[first].iter().zip(&desk.kids[rest]);
        for (best, (a, b)) in best.iter_mut().zip(pairs) {
            *best = best.min(a + b);
        }
    }
    desk.kids[set] = best;
}

/// Members of a set.
fn bits(set: usize) -> impl Iterator<Item = usize> {
    (0..usize::BITS as usize).filter(move |k| set >> k & 1 == 1)
}

/// All subsets of a set, itself and the empty one among them.
fn subsets(set: usize) -> impl Iterator<Item = usize> {
    let mut next = Some(set);
    std::iter::from_fn(move || {
        let here = next?;
        next = (here != 0).then(|| (here - 1) & set);
        Some(here)
    })
}

/// A family as it is read back from the tables.
struct Family {
    area: f64,
    overhead: f64,
    gives: Vec<State>,
}

/// Reads the cheapest network back.
struct Reader<'t> {
    relaxed: &'t Relaxed,
    tables: &'t Tables,
    price: f64,
    known: BTreeMap<State, (f64, f64)>,
}

impl Reader<'_> {
    /// Area and overhead current of the cheapest subtree at a state.
    fn walk(&mut self, state: Option<State>, set: usize, kind: usize) -> (f64, f64) {
        if let Some(found) = state.and_then(|s| self.known.get(&s)) {
            return *found;
        }
        let found = self.relaxed.read(self.tables, self.price, state, set, kind);
        let (_, family) = found.expect("a state is known where a family reaches it");
        let v = self.relaxed.levels.values.len();
        let (mut area, mut overhead) = (family.area, family.overhead);
        for below in &family.gives {
            let slot = below.current * v + below.level;
            let kind = self.tables.layers[below.set][below.above][below.rail][slot].1;
            let (a, o) = self.walk(Some(*below), below.set, kind as usize);
            area += a;
            overhead += o;
        }
        if let Some(state) = state {
            self.known.insert(state, (area, overhead));
        }
        (area, overhead)
    }
}

impl Relaxed {
    /// The cheapest family of a kind at a state, or at the reference.
    fn read(
        &self,
        tables: &Tables,
        price: f64,
        state: Option<State>,
        set: usize,
        number: usize,
    ) -> Option<(f64, Family)> {
        let rail = state.map_or(self.root, |s| s.rail);
        let kind = &self.kinds[rail][number];
        let (i, j) = state.map_or((self.reference, 0), |s| (s.current, s.level));
        let into = self.currents[i];
        let root = state.is_none();
        let line = self.gate(kind, i, j);
        // The cheapest child that serves a set alone.
        let child = |set: usize, layer: Option<usize>| {
            let known = |slot: usize| match layer {
                Some(above) => (tables.layers[set][above][1 - rail][slot].0, above),
                None => {
                    let (cost, above) = tables.best[set][1 - rail][slot];
                    (cost, above as usize)
                }
            };
            let child = self.cheapest_child(kind, line, known)?;
            let state = State {
                rail: 1 - rail,
                set,
                above: child.above,
                current: child.current,
                level: child.level,
            };
            Some((child.cost, child.leg, state))
        };
        // The cheapest children that part a set.
        let mut alone: BTreeMap<usize, Option<(f64, f64, State)>> = BTreeMap::new();
        for part in subsets(set) {
            // Below a relay the tables of its own set are not all known when it is made.
            let whole = part == set && !root;
            let layer = match state {
                Some(s) if whole => s.above.checked_sub(1),
                _ => None,
            };
            let known = if part == 0 || (whole && layer.is_none()) {
                None
            } else {
                child(part, layer)
            };
            alone.insert(part, known);
        }
        let mut groups: BTreeMap<usize, (f64, Vec<usize>)> = BTreeMap::new();
        groups.insert(0, (0.0, Vec::new()));
        let mut parts: Vec<usize> = subsets(set).filter(|s| *s != 0).collect();
        parts.sort_by_key(|s| (s.count_ones(), *s));
        for part in parts {
            let low = part & part.wrapping_neg();
            let mut best = (f64::INFINITY, Vec::new());
            for rest in subsets(part & !low) {
                let first = part & !rest;
                let (Some(Some(one)), Some(others)) = (alone.get(&first), groups.get(&rest)) else {
                    continue;
                };
                let cost = one.0 + others.0;
                if cost < best.0 {
                    let mut list = others.1.clone();
                    list.push(first);
                    best = (cost, list);
                }
            }
            groups.insert(part, best);
        }
        let relay = state.is_some_and(|s| s.above > 0);
        if relay && let Some(Some(only)) = alone.get(&set) {
            groups.insert(set, (only.0, vec![set]));
        }
        let mut best: Option<(f64, Family)> = None;
        let mine = if relay { 0 } else { self.on(rail, set) };
        for (_, unit, area) in self.input_legs(kind, into) {
            for own in subsets(mine) {
                let (kids, list) = &groups[&(set & !own)];
                let mut legs = 0.0;
                let mut holds = kids.is_finite();
                for k in bits(own) {
                    match self.leg_of(kind, k, root, into, unit) {
                        Some((leg, most)) if (root || j <= most) && area + leg <= self.cap => {
                            legs += leg;
                        }
                        _ => holds = false,
                    }
                }
                let cost = area + price * into + legs + kids;
                if !holds || cost >= best.as_ref().map_or(f64::INFINITY, |b| b.0) {
                    continue;
                }
                let children: Vec<&(f64, f64, State)> = list
                    .iter()
                    .filter_map(|part| alone[part].as_ref())
                    .collect();
                best = Some((
                    cost,
                    Family {
                        area: area + legs + children.iter().map(|c| c.1).sum::<f64>(),
                        overhead: into,
                        gives: children.iter().map(|c| c.2).collect(),
                    },
                ));
            }
        }
        best
    }
}
