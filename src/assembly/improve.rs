//! Local search over plans: change one thing, keep it if the network gets cheaper.
//!
//! Where the linear programs above work with levels of collected error, a plan is priced exactly:
//! every path adds up its own variances and its own signed errors. Moves: another shape, another
//! input current, another parent, other units for a family; an output moved to another family; a
//! family opened for an output; a family closed. A descent tries them in a fixed order until none
//! helps; a perturbed restart (iterated local search, Lourenco, Martin, Stutzle 2003) leaves local
//! optima.

use super::candidates::{Candidate, Want};
use super::columns::{Feeds, UNITS, shortlist};
use super::plan::{Ceiling, Clerk, Ledger, Member, Plan, Price, Tally, charged, units_for};
use rand::Rng;
use rand_pcg::Pcg64Mcg;
use std::sync::atomic::{AtomicBool, Ordering};

/// What the search may use.
#[derive(Debug, Clone)]
pub struct Menu {
    /// Candidates of each rail worth trying anywhere.
    pub shapes: [Vec<usize>; 2],
    /// Candidates worth opening a family for one output with, per output.
    pub own: Vec<Vec<usize>>,
    /// Input currents, A.
    pub currents: Vec<f64>,
    /// Area charged for an excess of one limit by its own size, m^2.
    pub charge: f64,
}

impl Menu {
    /// The same menu for a shelf that holds just its shapes, in its order.
    pub fn renumbered(&self, wants: &[Want]) -> Menu {
        let place = |rail: usize, k: usize| self.shapes[rail].binary_search(&k).ok();
        Menu {
            shapes: [0, 1].map(|r| (0..self.shapes[r].len()).collect()),
            own: self
                .own
                .iter()
                .zip(wants)
                .map(|(list, w)| {
                    list.iter()
                        .filter_map(|&k| place(w.rail as usize, k))
                        .collect()
                })
                .collect(),
            currents: self.currents.clone(),
            charge: self.charge,
        }
    }

    /// A menu for a ledger: the candidates that win some contest, and per output a dozen of those
    /// that can serve it, from the smallest leg to the largest.
    pub fn of(ledger: &Ledger, feeds: &Feeds) -> Menu {
        const OWN: usize = 16;
        let mut shapes = shortlist(ledger, feeds);
        for (rail, list) in shapes.iter_mut().enumerate() {
            if list.is_empty() {
                // Nothing can serve here; the nearest network is still to be named.
                let n = ledger.candidates[rail].len();
                list.extend((0..n).step_by(n.div_ceil(64).max(1)));
            }
        }
        let mut charge = 0.0;
        let own = ledger
            .wants
            .iter()
            .enumerate()
            .map(|(k, want)| {
                let rail = want.rail as usize;
                let mut list: Vec<(f64, usize)> = shapes[rail]
                    .iter()
                    .filter(|&&i| ledger.candidates[rail][i].outputs[k].is_some())
                    .map(|&i| (ledger.candidates[rail][i].leg_area(want.current, 1.0), i))
                    .collect();
                list.sort_by(|a, b| a.0.total_cmp(&b.0));
                charge += want.count * list.get(list.len() / 2).map_or(0.0, |x| x.0);
                let step = list.len().div_ceil(OWN).max(1);
                list.into_iter().step_by(step).map(|(_, i)| i).collect()
            })
            .collect();
        // An excess of 1 % costs about a tenth of the whole.
        let charge = 10.0 * charge.max(1e-10);
        Menu {
            shapes,
            own,
            currents: feeds.currents.clone(),
            charge,
        }
    }
}

/// A plan with its score: area with every excess charged.
#[derive(Debug, Clone)]
pub struct Scored {
    /// The plan.
    pub plan: Plan,
    /// Its price.
    pub price: Price,
    /// What the search minimises, m^2.
    pub score: f64,
}

/// The search over one ledger.
pub struct Search<'s, 'a> {
    ledger: &'s Ledger<'a>,
    menu: &'s Menu,
    /// Area charged for an excess of one limit by its own size, m^2.
    charge: f64,
    stop: &'s AtomicBool,
    clerk: Clerk<'s, 'a>,
    /// Of the plan that changes are tried on.
    base: Tally,
    scratch: Tally,
}

impl<'s, 'a> Search<'s, 'a> {
    /// A search over a ledger; it returns early once `stop` is set.
    pub fn new(ledger: &'s Ledger<'a>, menu: &'s Menu, stop: &'s AtomicBool) -> Search<'s, 'a> {
        Search {
            ledger,
            menu,
            charge: menu.charge,
            stop,
            clerk: Clerk::new(ledger),
            base: Tally::new(),
            scratch: Tally::new(),
        }
    }

    /// Scores a plan.
    pub fn score(&mut self, plan: Plan) -> Scored {
        let (price, score) = self.value(&plan);
        Scored { plan, price, score }
    }

    /// Plans priced so far.
    pub fn priced(&self) -> u64 {
        self.clerk.priced
    }

    fn value(&mut self, plan: &Plan) -> (Price, f64) {
        let price = self.clerk.price(plan, &mut self.scratch);
        (price, self.charged(&price))
    }

    fn charged(&self, price: &Price) -> f64 {
        charged(price.area, price.excess, self.charge)
    }

    /// Makes `plan` the one that changes are tried on.
    fn rebase(&mut self, plan: &Plan) {
        self.clerk.price(plan, &mut self.base);
    }

    /// A first plan: one family on the reference's rail, one on the other where outputs need it.
    pub fn first(&mut self) -> Scored {
        let reference = self.ledger.job.spec.reference;
        let root = reference.rail();
        let current = reference.current().0;
        let mut best: Option<Scored> = None;
        for &candidate in &self.menu.shapes[root as usize] {
            if self.candidate(root as usize, candidate).needs_bias() && self.ledger.copies < 2 {
                continue;
            }
            let bias = self
                .candidate(root as usize, candidate)
                .needs_bias()
                .then_some((current, None));
            let mut members = vec![Member {
                rail: root,
                candidate,
                current,
                units: 2,
                parent: None,
                bias,
            }];
            let needs_other = self.ledger.wants.iter().any(|w| w.rail != root);
            if needs_other {
                members.push(Member {
                    rail: root.opposite(),
                    candidate: self.menu.shapes[root.opposite() as usize][0],
                    current: self.menu.currents[self.menu.currents.len() / 2],
                    units: 2,
                    parent: Some(0),
                    bias: None,
                });
                if self
                    .candidate(members[1].rail as usize, members[1].candidate)
                    .needs_bias()
                {
                    members[1].bias = Some((self.menu.currents[0], Some(0)));
                }
            }
            let legs = self
                .ledger
                .wants
                .iter()
                .map(|w| usize::from(w.rail != root))
                .collect();
            let scored = self.score(Plan { members, legs });
            if best.as_ref().is_none_or(|b| scored.score < b.score) {
                best = Some(scored);
            }
        }
        best.expect("the menu offers shapes on the reference's rail")
    }

    fn candidate(&self, rail: usize, index: usize) -> &'a Candidate {
        &self.ledger.candidates[rail][index]
    }

    /// Descends until no move helps.
    pub fn descend(&mut self, start: Scored) -> Scored {
        let mut best = start;
        loop {
            let before = best.score;
            for f in (0..best.plan.members.len()).rev() {
                if f < best.plan.members.len() {
                    self.reshape(&mut best, f);
                }
            }
            self.move_outputs(&mut best);
            self.reparent(&mut best);
            self.open(&mut best);
            self.close(&mut best);
            if self.stopped() {
                return best;
            }
            if best.score >= before * (1.0 - 1e-4)
                // Dear, and of most use where nothing fits yet.
                && (best.price.excess == 0.0 || !self.refeed(&mut best))
            {
                return best;
            }
        }
    }

    fn stopped(&self) -> bool {
        self.stop.load(Ordering::Relaxed)
    }

    /// Iterated local search: `rounds` perturbations of the best plan.
    pub fn explore(&mut self, start: Scored, rounds: usize, rng: &mut Pcg64Mcg) -> Scored {
        let mut best = self.descend(start);
        for _ in 0..rounds {
            if self.stopped() {
                break;
            }
            let shaken = self.shake(&best, rng);
            let next = self.descend(shaken);
            if next.score < best.score {
                best = next;
            }
        }
        best
    }

    /// Keeps a plan if it is cheaper. It differs from the base plan in family `touched` alone.
    fn offer(&mut self, best: &mut Scored, plan: &Plan, touched: usize) -> bool {
        let ceiling = Ceiling {
            charge: self.charge,
            score: best.score,
        };
        let (base, scratch) = (&self.base, &mut self.scratch);
        let Some(price) = self
            .clerk
            .repriced(plan, base, scratch, touched, Some(ceiling))
        else {
            return false;
        };
        let score = self.charged(&price);
        let better = score < best.score * (1.0 - 1e-9);
        if better {
            best.plan.clone_from(plan);
            best.price = price;
            best.score = score;
            std::mem::swap(&mut self.base, &mut self.scratch);
            self.clerk.settle(&mut self.base);
        }
        better
    }

    /// Best shape, current and units of one family, the rest as it is.
    fn reshape(&mut self, best: &mut Scored, f: usize) {
        self.rebase(&best.plan);
        let rail = best.plan.members[f].rail as usize;
        let mut plan = best.plan.clone();
        // Units and currents with the present shape first: few and often enough.
        for &units in &UNITS {
            plan.members[f].units = units;
            self.offer(best, &plan, f);
        }
        plan.clone_from(&best.plan);
        if plan.members[f].parent.is_some() {
            for &current in &self.menu.currents {
                for &units in &UNITS {
                    plan.members[f].current = current;
                    plan.members[f].units = units;
                    self.offer(best, &plan, f);
                }
            }
        }
        plan.clone_from(&best.plan);
        let menu = self.menu;
        for &candidate in &menu.shapes[rail] {
            if !self.place(&mut plan, f, candidate) {
                continue;
            }
            self.offer(best, &plan, f);
        }
        plan.clone_from(&best.plan);
        for &units in &UNITS {
            plan.members[f].units = units;
            self.offer(best, &plan, f);
        }
    }

    /// Gives a family another shape, with a bias feed where it now needs one. False where it
    /// cannot have one.
    fn place(&self, plan: &mut Plan, f: usize, candidate: usize) -> bool {
        let member = &mut plan.members[f];
        let needs = self.candidate(member.rail as usize, candidate).needs_bias();
        member.candidate = candidate;
        if !needs {
            member.bias = None;
            return true;
        }
        if member.bias.is_none() {
            let smallest = self.menu.currents[0];
            member.bias = match member.parent {
                Some(p) => Some((smallest, Some(p))),
                None if self.ledger.copies > 1 => {
                    Some((self.ledger.job.spec.reference.current().0, None))
                }
                None => return false,
            };
        }
        true
    }

    fn move_outputs(&mut self, best: &mut Scored) {
        self.rebase(&best.plan);
        for k in 0..best.plan.legs.len() {
            let mut plan = best.plan.clone();
            for f in 0..plan.members.len() {
                if plan.members[f].rail == self.ledger.wants[k].rail {
                    plan.legs[k] = f;
                    self.offer(best, &plan, f);
                }
            }
        }
    }

    /// Other parents and bias feeds for every family.
    fn reparent(&mut self, best: &mut Scored) {
        self.rebase(&best.plan);
        for f in 1..best.plan.members.len() {
            let mut plan = best.plan.clone();
            let rail = plan.members[f].rail;
            for p in 0..f {
                if plan.members[p].rail == rail {
                    continue;
                }
                if plan.members[f].parent.is_some() {
                    plan.members[f].parent = Some(p);
                    self.offer(best, &plan, f);
                }
            }
            plan.clone_from(&best.plan);
            if plan.members[f].bias.is_some() {
                for p in 0..f {
                    if plan.members[p].rail == rail {
                        continue;
                    }
                    for &current in &self.menu.currents {
                        plan.members[f].bias = Some((current, Some(p)));
                        self.offer(best, &plan, f);
                    }
                }
            }
        }
    }

    /// Another input current for a family, with units in it and in its parent that divide all their
    /// legs evenly, and shapes to suit: changes that help only together, since each alone leaves a
    /// leg that is no whole number of units. True where one helped.
    fn refeed(&mut self, best: &mut Scored) -> bool {
        /// A plan whose shapes do not suit yet may be worse by this factor.
        const UNSUITED: f64 = 1.5;
        let before = best.score;
        let menu = self.menu;
        for f in 1..best.plan.members.len() {
            let Some(p) = best.plan.members[f].parent else {
                continue;
            };
            let old = best.plan.clone();
            for &current in &menu.currents {
                if current == old.members[f].current {
                    continue;
                }
                let mut plan = old.clone();
                plan.members[f].current = current;
                plan.members[f].units = self.evenly(&plan, f);
                plan.members[p].units = self.evenly(&plan, p);
                let mut trial = self.score(plan);
                if trial.score < UNSUITED * best.score {
                    self.reshape(&mut trial, f);
                    self.reshape(&mut trial, p);
                }
                if trial.score < best.score * (1.0 - 1e-9) {
                    *best = trial;
                }
            }
        }
        best.score < before * (1.0 - 1e-4)
    }

    /// Units in a family's input leg that leave its legs least rounded, for what they may err;
    /// the fewest of equally good ones.
    fn evenly(&self, plan: &Plan, f: usize) -> u32 {
        /// What a feeder may err, fraction.
        const FEEDER: f64 = 0.01;
        let member = &plan.members[f];
        let c = self.candidate(member.rail as usize, member.candidate);
        let rounded = |units: u32| -> f64 {
            let unit = member.current / f64::from(units);
            let outputs = (0..plan.legs.len())
                .filter(|&k| plan.legs[k] == f)
                .map(|k| {
                    let want = &self.ledger.wants[k];
                    units_for(want.current, unit).1.abs() / want.limit
                });
            let feeders = plan.members.iter().filter(|m| m.parent == Some(f));
            let feeders = feeders.map(|m| units_for(m.current, unit).1.abs() / FEEDER);
            let drawn = if c.drawable(unit, units) { 0.0 } else { 1.0 };
            drawn + outputs.chain(feeders).sum::<f64>()
        };
        let mut best = (f64::INFINITY, UNITS[0]);
        for &units in &UNITS {
            let cost = rounded(units);
            if cost < best.0 - 1e-6 {
                best = (cost, units);
            }
        }
        best.1
    }

    /// Opens a family for one output where that pays.
    fn open(&mut self, best: &mut Scored) {
        let menu = self.menu;
        for k in 0..best.plan.legs.len() {
            let rail = self.ledger.wants[k].rail;
            let old = best.plan.clone();
            let parents: Vec<usize> = (0..old.members.len())
                .filter(|&p| old.members[p].rail != rail)
                .collect();
            let mut plan = old.clone();
            let f = plan.members.len();
            plan.legs[k] = f;
            plan.members.push(Member {
                rail,
                candidate: menu.own[k].first().copied().unwrap_or(0),
                current: menu.currents[0],
                units: 1,
                parent: None,
                bias: None,
            });
            let Some(&first) = parents.first() else {
                continue;
            };
            plan.members[f].parent = Some(first);
            self.rebase(&plan);
            for &p in &parents {
                for &current in &menu.currents {
                    for &candidate in &menu.own[k] {
                        let c = self.candidate(rail as usize, candidate);
                        let member = &mut plan.members[f];
                        member.parent = Some(p);
                        member.current = current;
                        member.candidate = candidate;
                        member.bias = c.needs_bias().then_some((menu.currents[0], Some(p)));
                        let Some(&units) = UNITS.iter().find(|&&n| {
                            let unit = current / f64::from(n);
                            unit <= self.ledger.wants[k].current * 1.001 && c.drawable(unit, n)
                        }) else {
                            continue;
                        };
                        member.units = units;
                        self.offer(best, &plan, f);
                    }
                }
            }
            // Others on the rail may like the new family too.
            if best.plan.members.len() > f {
                self.move_outputs(best);
            }
        }
        self.prune(best);
    }

    /// Drops families that serve nothing.
    fn prune(&mut self, best: &mut Scored) {
        while let Some(idle) = (1..best.plan.members.len())
            .rev()
            .find(|&f| !serves(&best.plan, f))
        {
            let plan = without(&best.plan, idle);
            *best = self.score(plan);
        }
    }

    /// Closes families whose legs others can carry cheaper.
    fn close(&mut self, best: &mut Scored) {
        let mut f = best.plan.members.len();
        while f > 1 {
            f -= 1;
            if f >= best.plan.members.len() {
                continue;
            }
            if let Some(plan) = self.closed(&best.plan, f) {
                let mut trial = self.score(plan);
                // The families that took over may want another shape.
                if trial.score < best.score * 1.3 {
                    for g in 0..trial.plan.members.len() {
                        self.reshape(&mut trial, g);
                    }
                }
                if trial.score < best.score * (1.0 - 1e-9) {
                    *best = trial;
                }
            }
        }
    }

    /// The plan without family `f`: its outputs and children go where they cost least.
    fn closed(&mut self, plan: &Plan, f: usize) -> Option<Plan> {
        let mut next = plan.clone();
        let rail = plan.members[f].rail;
        let heirs: Vec<usize> = (0..plan.members.len())
            .filter(|&g| g != f && plan.members[g].rail == rail)
            .collect();
        if heirs.is_empty() {
            return None;
        }
        for k in 0..next.legs.len() {
            if next.legs[k] == f {
                next.legs[k] = self.cheapest(&next, &heirs, |p, g| p.legs[k] = g);
            }
        }
        for g in 0..next.members.len() {
            let earlier: Vec<usize> = heirs.iter().copied().filter(|&h| h < g).collect();
            if next.members[g].parent == Some(f) {
                if earlier.is_empty() {
                    return None;
                }
                next.members[g].parent =
                    Some(self.cheapest(&next, &earlier, |p, h| p.members[g].parent = Some(h)));
            }
            if let Some((amps, Some(from))) = next.members[g].bias
                && from == f
            {
                if earlier.is_empty() {
                    return None;
                }
                let heir = self.cheapest(&next, &earlier, |p, h| {
                    p.members[g].bias = Some((amps, Some(h)));
                });
                next.members[g].bias = Some((amps, Some(heir)));
            }
        }
        Some(without(&next, f))
    }

    fn cheapest(&mut self, plan: &Plan, among: &[usize], set: impl Fn(&mut Plan, usize)) -> usize {
        let mut trial = plan.clone();
        let mut best = (f64::INFINITY, among[0]);
        for &g in among {
            set(&mut trial, g);
            let (_, score) = self.value(&trial);
            if score < best.0 {
                best = (score, g);
            }
        }
        best.1
    }

    /// A random change: close a family or throw several outputs and shapes about.
    fn shake(&mut self, best: &Scored, rng: &mut Pcg64Mcg) -> Scored {
        let mut plan = best.plan.clone();
        if plan.members.len() > 2 && rng.random_bool(0.5) {
            let f = rng.random_range(1..plan.members.len());
            if let Some(next) = self.closed(&plan, f) {
                plan = next;
            }
        }
        for _ in 0..2 {
            let f = rng.random_range(0..plan.members.len());
            let shapes = &self.menu.shapes[plan.members[f].rail as usize];
            let candidate = shapes[rng.random_range(0..shapes.len())];
            let before = plan.members[f].clone();
            if !self.place(&mut plan, f, candidate) {
                plan.members[f] = before;
            }
            if plan.members[f].parent.is_some() {
                let currents = &self.menu.currents;
                plan.members[f].current = currents[rng.random_range(0..currents.len())];
            }
        }
        let k = rng.random_range(0..plan.legs.len());
        let homes: Vec<usize> = (0..plan.members.len())
            .filter(|&f| plan.members[f].rail == self.ledger.wants[k].rail)
            .collect();
        plan.legs[k] = homes[rng.random_range(0..homes.len())];
        self.score(plan)
    }
}

/// Whether anything hangs on a family.
fn serves(plan: &Plan, f: usize) -> bool {
    plan.legs.contains(&f)
        || plan
            .members
            .iter()
            .any(|m| m.parent == Some(f) || matches!(m.bias, Some((_, Some(from))) if from == f))
}

/// A plan without a family that nothing hangs on.
fn without(plan: &Plan, f: usize) -> Plan {
    let down = |g: usize| if g > f { g - 1 } else { g };
    let mut next = plan.clone();
    next.members.remove(f);
    for m in &mut next.members {
        m.parent = m.parent.map(down);
        m.bias = m.bias.map(|(amps, from)| (amps, from.map(down)));
    }
    for leg in &mut next.legs {
        *leg = down(*leg);
    }
    next
}
