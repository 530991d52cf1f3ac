//! A network on paper: families as pool shapes with unit counts, priced and checked by adding up
//! what solved shapes said, climate by climate. No circuit is solved here; what passes is solved
//! as a whole later.
//!
//! Along a path from the reference, relative errors of copies add up to first order and their
//! variances add up, leg by leg. A feeder's copy is read off its shape's ladder at the voltage
//! its child leaves it, at both ends of the supply.

use super::candidates::{Candidate, Want};
use crate::cells::solved::Mirrored;
use crate::network::Job;
use crate::network::probes::Pool;
use crate::numeric::dispatch::{Work, widest};
use crate::numeric::lanes::Lanes;
use crate::spec::{Rail, Reference};

/// Groups of eight climates a plan can hold: five corners at three temperatures need two.
const GROUPS: usize = 4;
/// Feeder pairs kept before the memory starts afresh.
const KEPT: usize = 1 << 16;

/// A family of a plan.
#[derive(Debug, Clone, PartialEq)]
pub struct Member {
    /// Rail.
    pub rail: Rail,
    /// Index among the candidates of the rail.
    pub candidate: usize,
    /// Nominal input current, A.
    pub current: f64,
    /// Units in the input leg.
    pub units: u32,
    /// Family that feeds it; `None` is the reference.
    pub parent: Option<usize>,
    /// Bias current, A, and the family that feeds it, for cells that take one.
    pub bias: Option<(f64, Option<usize>)>,
}

/// A whole network on paper; parents stand before children.
#[derive(Debug, Clone, PartialEq)]
pub struct Plan {
    /// Families.
    pub members: Vec<Member>,
    /// Family of each output.
    pub legs: Vec<usize>,
}

/// What a plan costs and how it stands against the limits.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Price {
    /// Area, m^2.
    pub area: f64,
    /// Overhead current, A (nominal).
    pub overhead: f64,
    /// Sum over all limits of how far each is exceeded, as a share of the limit; 0 is feasible.
    pub excess: f64,
    /// Largest error over its limit.
    pub error_share: f64,
}

/// What a plan has to stay below to be of interest.
#[derive(Debug, Clone, Copy)]
pub(super) struct Ceiling {
    /// Area charged for an excess of one limit by its own size, m^2.
    pub(super) charge: f64,
    /// A score, as [`charged`] counts, that a plan of interest does not reach.
    pub(super) score: f64,
}

/// What the search minimises: area with every excess charged, m^2. It never falls as either rises.
#[inline(always)]
pub(super) fn charged(area: f64, excess: f64, charge: f64) -> f64 {
    // More than a polish settles costs something at once: feasible beats nearly feasible.
    let step = if excess > 2e-3 { 0.02 } else { 0.0 };
    area + charge * (excess + step)
}

/// Everything a plan is measured against.
#[derive(Debug, Clone)]
pub struct Ledger<'a> {
    /// The job.
    pub job: Job<'a>,
    /// The pool.
    pub pool: &'a Pool,
    /// Candidates of both rails.
    pub candidates: &'a [Vec<Candidate>; 2],
    /// Outputs.
    pub wants: Vec<Want>,
    /// Probes of the low and the high end of each output's range.
    pub(super) ends: Vec<[usize; 2]>,
    /// Largest overhead current, A.
    pub budget: f64,
    /// Least and largest voltage the reference pin may have, from the root's rail.
    pub pin: [f64; 2],
    /// Copies of the reference.
    pub copies: usize,
    /// Factors on a resistor at every climate, for a reference the network makes itself.
    pub(super) resistor: Vec<Lanes>,
}

/// What has been collected up to the input of a family, per group of climates.
#[derive(Debug, Clone, Copy)]
pub struct Line {
    /// Variance.
    pub(super) variance: [Lanes; GROUPS],
    /// Systematic error at the lowest and at the highest supply.
    pub(super) error: [[Lanes; GROUPS]; 2],
}

const START: Line = Line {
    variance: [Lanes::ZERO; GROUPS],
    error: [[Lanes::ZERO; GROUPS]; 2],
};

impl Line {
    /// Variance collected at a climate.
    pub fn variance_at(&self, climate: usize) -> f64 {
        self.variance[climate / 8].0[climate % 8]
    }
}

impl Default for Line {
    fn default() -> Self {
        START
    }
}

/// A feeder into a certain child: error at both supplies, variances at the lower one.
#[derive(Debug, Clone, Copy)]
struct FeederEnd {
    error: [[Lanes; GROUPS]; 2],
    variance_in: [Lanes; GROUPS],
    variance_out: [Lanes; GROUPS],
    worst: f64,
}

/// A priced plan, part by part, so that a change can be priced from what it touches.
#[derive(Debug, Clone)]
pub struct Tally {
    lines: Vec<Line>,
    families: Vec<Share>,
    outputs: Vec<Share>,
    absolute: [[Lanes; GROUPS]; 2],
    /// Number of the pricing that filled this tally from scratch, 0 before any.
    stamp: u64,
    /// Where this tally differs from the one with the same stamp: families and outputs.
    changed: (Vec<usize>, Vec<usize>),
    /// The output whose error made the last plan too dear: the first to look at in the next.
    doubtful: usize,
}

/// What one family or one output adds to the price.
#[derive(Debug, Clone, Copy, Default)]
struct Share {
    area: f64,
    overhead: f64,
    excess: f64,
    error_share: f64,
    /// Of an output: error over limit at the low and the high end of its range.
    ends: [f64; 2],
    references: usize,
}

impl Tally {
    /// An empty tally, to be filled by [`Clerk::price`].
    pub fn new() -> Tally {
        Tally {
            lines: Vec::new(),
            families: Vec::new(),
            outputs: Vec::new(),
            absolute: [[Lanes::ZERO; GROUPS]; 2],
            stamp: 0,
            changed: (Vec::new(), Vec::new()),
            doubtful: 0,
        }
    }

    /// Becomes a copy of `base`: by undoing its own changes where it is one but for those.
    fn follow(&mut self, base: &Tally) {
        if self.stamp == base.stamp && base.changed.0.is_empty() && base.changed.1.is_empty() {
            for &f in &self.changed.0 {
                self.lines[f] = base.lines[f];
                self.families[f] = base.families[f];
            }
            for &k in &self.changed.1 {
                self.outputs[k] = base.outputs[k];
            }
        } else {
            self.lines.clone_from(&base.lines);
            self.families.clone_from(&base.families);
            self.outputs.clone_from(&base.outputs);
            self.stamp = base.stamp;
        }
        self.absolute = base.absolute;
        self.changed.0.clear();
        self.changed.1.clear();
    }
}

impl Tally {
    /// What every family's line has collected.
    pub fn lines(&self) -> &[Line] {
        &self.lines
    }

    /// Error of each output over its limit, at the low and the high end of its range.
    pub fn error_shares(&self) -> Vec<[f64; 2]> {
        self.outputs.iter().map(|o| o.ends).collect()
    }
}

impl Default for Tally {
    fn default() -> Self {
        Tally::new()
    }
}

/// Units of a leg of `current` in a family, and the relative error of rounding.
#[inline(always)]
pub fn units_for(current: f64, unit: f64) -> (u32, f64) {
    let units = (current / unit).round().max(1.0);
    (units as u32, units * unit / current - 1.0)
}

impl<'a> Ledger<'a> {
    /// A ledger for a job with candidates; `tighten` scales accuracy limits.
    pub fn new(
        job: Job<'a>,
        pool: &'a Pool,
        candidates: &'a [Vec<Candidate>; 2],
        tighten: f64,
        budget: f64,
    ) -> Ledger<'a> {
        let supply = job.spec.supply;
        let (pin, copies) = match job.spec.reference {
            Reference::Current { range, copies, .. } => {
                let pin = match job.spec.reference.rail() {
                    Rail::Sink => [range.least.0, range.most.0],
                    // Measured below the supply; the worst corner of each end.
                    Rail::Source => [supply.most.0 - range.most.0, supply.least.0 - range.least.0],
                };
                // A millivolt inside, for what snapping moves.
                let inside = 1e-3_f64.min(0.1 * (pin[1] - pin[0]));
                ([pin[0] + inside, pin[1] - inside], copies as usize)
            }
            // A resistor works at any pin voltage below the supply; it needs something across it.
            Reference::Resistor { .. } => ([0.0, 0.9 * supply.least.0], 1),
        };
        let wants = super::candidates::wants(&job, tighten);
        let ends = job
            .spec
            .outputs
            .iter()
            .map(|o| {
                let probes = &pool.probes[o.rail as usize];
                [probes.index(o.range.least.0), probes.index(o.range.most.0)]
            })
            .collect();
        let tech = job.tech(Rail::Sink);
        let climates = crate::network::corners::climates(&job);
        let resistor = climates
            .chunks(8)
            .map(|chunk| {
                Lanes::from_fn(|i| {
                    let climate = &chunk[i.min(chunk.len() - 1)];
                    crate::cells::solved::resistor_factor(&tech, climate)
                })
            })
            .collect();
        Ledger {
            job,
            pool,
            candidates,
            wants,
            ends,
            budget,
            pin,
            copies,
            resistor,
        }
    }

    /// The same ledger with another budget of overhead current, A.
    pub fn with_budget(&self, budget: f64) -> Ledger<'a> {
        Ledger {
            budget,
            ..self.clone()
        }
    }

    /// The candidate of a member.
    #[inline(always)]
    pub fn candidate(&self, member: &Member) -> &'a Candidate {
        &self.candidates[member.rail as usize][member.candidate]
    }

    /// Least and largest voltage the reference pin may have, V to ground, at any supply.
    pub fn pin_to_ground(&self) -> [f64; 2] {
        match self.job.spec.reference {
            Reference::Current { range, .. } => [range.least.0, range.most.0],
            Reference::Resistor { .. } => self.pin,
        }
    }

    fn groups(&self) -> usize {
        self.resistor.len().min(GROUPS)
    }

    /// The resistor that makes `current` at the nominal corner, and the reference's relative error
    /// at every climate at both ends of the supply.
    fn own_reference(&self, current: f64, root: &Candidate) -> (f64, [[Lanes; GROUPS]; 2]) {
        let supply = self.job.spec.supply;
        let middle = (supply.least.0 + supply.most.0) / 2.0;
        let solved = &self.pool.shapes[root.rail as usize][root.index];
        // Climates list the nominal process first, its temperatures rising.
        let temperatures = crate::network::corners::temperatures(&self.job);
        let nominal = temperatures
            .iter()
            .position(|&t| t == self.job.spec.temperature.nominal.0)
            .unwrap_or(0);
        let input = solved.input_lanes[0].0[nominal];
        let ohms = (middle - input).max(0.05) / current;
        let mut error = [[Lanes::ZERO; GROUPS]; 2];
        for (end, volts) in [supply.least.0, supply.most.0].into_iter().enumerate() {
            for (g, error) in error[end].iter_mut().enumerate().take(self.groups()) {
                *error =
                    (volts - solved.input_lanes[g]) / (ohms * current * self.resistor[g]) - 1.0;
            }
        }
        (ohms, error)
    }
}

/// What feeders do, by the family they are legs of and the child: tables by candidate.
#[derive(Default)]
struct Feeders {
    /// By rail of the parent, parent, and twice the child (plus one for its bias leg).
    rows: [Vec<Vec<Option<Box<FeederEnd>>>>; 2],
    count: usize,
}

impl Feeders {
    #[inline(always)]
    fn get(&self, from: &Member, child: usize, bias: bool) -> Option<&FeederEnd> {
        let row = self.rows[from.rail as usize].get(from.candidate)?;
        row.get(2 * child + usize::from(bias))?.as_deref()
    }

    fn put(&mut self, from: &Member, child: usize, bias: bool, end: FeederEnd) {
        let rows = &mut self.rows[from.rail as usize];
        if rows.len() <= from.candidate {
            rows.resize_with(from.candidate + 1, Vec::new);
        }
        let row = &mut rows[from.candidate];
        let place = 2 * child + usize::from(bias);
        if row.len() <= place {
            row.resize_with(place + 1, || None);
        }
        row[place] = Some(Box::new(end));
        self.count += 1;
    }
}

/// Prices plans, and remembers what every pair of feeder and child does.
pub struct Clerk<'l, 'a> {
    /// What plans are measured against.
    pub ledger: &'l Ledger<'a>,
    feeders: Feeders,
    /// Plans priced so far.
    pub priced: u64,
}

impl<'l, 'a> Clerk<'l, 'a> {
    /// A clerk for a ledger.
    pub fn new(ledger: &'l Ledger<'a>) -> Clerk<'l, 'a> {
        Clerk {
            ledger,
            feeders: Feeders::default(),
            priced: 0,
        }
    }

    /// Prices a plan from scratch.
    pub fn price(&mut self, plan: &Plan, tally: &mut Tally) -> Price {
        self.priced += 1;
        tally.stamp = self.priced;
        tally.changed.0.clear();
        tally.changed.1.clear();
        self.remember(plan, None);
        let price = widest(Pricing {
            clerk: self,
            plan,
            tally,
            touched: None,
            ceiling: None,
        });
        price.expect("without a ceiling every plan has a price")
    }

    /// Makes a repriced tally the base of further ones.
    pub fn settle(&mut self, tally: &mut Tally) {
        self.priced += 1;
        tally.stamp = self.priced;
        tally.changed.0.clear();
        tally.changed.1.clear();
    }

    /// Prices a plan that differs from the one `base` was made for in family `touched` alone: its
    /// shape, current, units, feeds, or which outputs it serves.
    pub fn reprice(
        &mut self,
        plan: &Plan,
        base: &Tally,
        scratch: &mut Tally,
        touched: usize,
    ) -> Price {
        let price = self.repriced(plan, base, scratch, touched, None);
        price.expect("without a ceiling every plan has a price")
    }

    /// The same, given up with `None` as soon as what has been added up reaches the ceiling. The
    /// plan's true score then reaches it too, but for the rounding of sums.
    pub(super) fn repriced(
        &mut self,
        plan: &Plan,
        base: &Tally,
        scratch: &mut Tally,
        touched: usize,
        ceiling: Option<Ceiling>,
    ) -> Option<Price> {
        self.priced += 1;
        self.remember(plan, Some(touched));
        scratch.follow(base);
        widest(Pricing {
            clerk: self,
            plan,
            tally: scratch,
            touched: Some(touched),
            ceiling,
        })
    }

    /// Error over limit of every output that has one, at both ends of its range, at every climate,
    /// each with the number `2 * output + end`. The plan must have been priced into `tally`.
    pub fn every_share(&self, plan: &Plan, tally: &Tally) -> Vec<(usize, f64)> {
        let ledger = self.ledger;
        let climates = crate::network::corners::climates(&ledger.job).len();
        let groups = ledger.groups();
        let mut out = Vec::new();
        for (k, want) in ledger
            .wants
            .iter()
            .enumerate()
            .filter(|(_, w)| w.limit.is_finite())
        {
            for end in 0..2 {
                for g in 0..groups {
                    let errors = error(ledger, plan, tally, k, end, g) * (1.0 / want.limit);
                    let counted = errors.0.iter().take((climates - g * 8).min(8));
                    out.extend(counted.map(|e| (2 * k + end, *e)));
                }
            }
        }
        out
    }

    /// Whether a family on such a line could serve output `k` with at most `slack` times its limit.
    pub fn serves(&self, member: &Member, line: &Line, k: usize, slack: f64) -> bool {
        let ledger = self.ledger;
        let c = ledger.candidate(member);
        let want = &ledger.wants[k];
        if c.outputs[k].is_none() {
            return false;
        }
        if want.limit.is_infinite() {
            return true;
        }
        let absolute = [[Lanes::ZERO; GROUPS]; 2];
        (0..2).all(|end| {
            (0..ledger.groups()).all(|g| {
                leg_error(ledger, member, line, &absolute, k, end, g).largest()
                    <= slack * want.limit
            })
        })
    }

    /// Whether `giver` could feed `taker`: the line it makes has collected at most `slack` times
    /// the variance the taker's has, and the giver's own less than that.
    pub fn feeds(
        &mut self,
        giver: &super::milp::Instance,
        taker: &super::milp::Instance,
        slack: f64,
    ) -> bool {
        if !giver.line.less(&taker.line) {
            return false;
        }
        let end = self.feeder(&giver.member, &taker.member, false);
        if end.worst > 0.2 {
            return false;
        }
        (0..self.ledger.groups()).all(|g| {
            let made = giver.line.variance[g]
                + end.variance_in[g] * (1.0 / giver.member.current)
                + end.variance_out[g] * (1.0 / taker.member.current);
            (made - taker.line.variance[g] * slack).largest() <= 0.0
        })
    }

    /// Makes sure every feeder pair of the plan is known.
    fn remember(&mut self, plan: &Plan, mut touched: Option<usize>) {
        if self.feeders.count > KEPT {
            self.feeders = Feeders::default();
            touched = None;
        }
        for (f, member) in plan.members.iter().enumerate() {
            let feeds = [
                (member.parent, false),
                (member.bias.and_then(|b| b.1), true),
            ];
            for (parent, bias) in feeds {
                let Some(parent) = parent else { continue };
                if touched.is_some_and(|t| t != f && t != parent) {
                    continue;
                }
                let from = &plan.members[parent];
                let known = self.feeders.get(from, member.candidate, bias).is_some();
                if !known {
                    let end = self.feeder(from, member, bias);
                    self.feeders.put(from, member.candidate, bias, end);
                }
            }
        }
    }

    /// The feeder of `child` made of `from`'s units.
    fn feeder(&self, from: &Member, child: &Member, bias: bool) -> FeederEnd {
        let ledger = self.ledger;
        let by = ledger.candidate(from);
        let solved = &ledger.pool.shapes[by.rail as usize][by.index];
        let probes = &ledger.pool.probes[by.rail as usize];
        let fed = ledger.candidate(child);
        let below = &ledger.pool.shapes[fed.rail as usize][fed.index];
        let input = if bias {
            &below.bias_lanes
        } else {
            &below.input_lanes
        };
        let supply = ledger.job.spec.supply;
        let zero = [Lanes::ZERO; GROUPS];
        let mut out = FeederEnd {
            error: [zero; 2],
            variance_in: zero,
            variance_out: zero,
            worst: 0.0,
        };
        for (g, input) in input.iter().enumerate().take(ledger.groups()) {
            for (end, volts) in [supply.least.0, supply.most.0].into_iter().enumerate() {
                for (i, input) in input.0.iter().enumerate() {
                    let Some((rung, t)) = probes.rung(volts - input) else {
                        // Hardly any voltage left: as good as no current.
                        out.error[end][g].0[i] = -1.0;
                        out.worst = 1.0;
                        continue;
                    };
                    let a: &Mirrored = &solved.at(probes.ladder[rung])[g];
                    let b: &Mirrored = &solved.at(probes.ladder[rung + 1])[g];
                    let mix = |x: &Lanes, y: &Lanes| x.0[i] + t * (y.0[i] - x.0[i]);
                    let error = mix(&a.error, &b.error);
                    out.error[end][g].0[i] = error;
                    out.worst = out.worst.max(error.abs());
                    if end == 0 {
                        out.variance_in[g].0[i] = mix(&a.variance_in, &b.variance_in).max(0.0);
                        out.variance_out[g].0[i] = mix(&a.variance_out, &b.variance_out).max(0.0);
                    }
                }
            }
        }
        out
    }
}

/// One pricing, compiled for the widest lanes.
struct Pricing<'w, 'l, 'a> {
    clerk: &'w Clerk<'l, 'a>,
    plan: &'w Plan,
    tally: &'w mut Tally,
    touched: Option<usize>,
    ceiling: Option<Ceiling>,
}

impl Work for Pricing<'_, '_, '_> {
    type Answer = Option<Price>;

    #[inline(always)]
    fn run(self) -> Option<Price> {
        let Pricing {
            clerk,
            plan,
            tally,
            touched,
            ceiling,
        } = self;
        let ledger = clerk.ledger;
        let groups = ledger.groups();
        let n = plan.members.len();
        if touched.is_none() {
            tally.lines.clear();
            tally.lines.resize(n, START);
            tally.families.clear();
            tally.families.resize(n, Share::default());
            tally.outputs.clear();
            tally.outputs.resize(plan.legs.len(), Share::default());
            tally.absolute = [[Lanes::ZERO; GROUPS]; 2];
        }
        // Families whose lines may have changed: the touched one and all below it.
        let mut dirty = [0u64; 4];
        let is = |set: &[u64; 4], f: usize| set[f >> 6 & 3] >> (f & 63) & 1 == 1;
        for f in 0..n {
            let member = &plan.members[f];
            let below = member.parent.is_some_and(|p| is(&dirty, p));
            if touched.is_none() || touched == Some(f) || below {
                dirty[f >> 6 & 3] |= 1 << (f & 63);
            }
            let feeds_changed = |p: Option<usize>| p.is_some() && p == touched;
            let price_changed = touched.is_none()
                || touched == Some(f)
                || feeds_changed(member.parent)
                || feeds_changed(member.bias.and_then(|b| b.1));
            if price_changed || below {
                if touched.is_some() {
                    tally.changed.0.push(f);
                }
                family(clerk, plan, tally, f, groups);
            }
        }
        for (k, &leg) in plan.legs.iter().enumerate() {
            if is(&dirty, leg) {
                if touched.is_some() {
                    tally.changed.1.push(k);
                }
                output(ledger, plan, tally, k, leg);
            }
        }
        // Area and currents are quickly added up; errors are most of the work, and one of them may
        // be enough to know that the rest does not matter.
        let too_dear =
            |area, excess| ceiling.is_some_and(|c| charged(area, excess, c.charge) >= c.score);
        let quick = ceiling.map_or(Price::default(), |_| tally.sum(ledger));
        if too_dear(quick.area, quick.excess) {
            return None;
        }
        let (mut excess, outputs) = (quick.excess, plan.legs.len());
        let first = if ceiling.is_some() { tally.doubtful } else { 0 };
        for k in (first.min(outputs)..outputs).chain(0..first.min(outputs)) {
            if is(&dirty, plan.legs[k]) {
                excess += output_error(ledger, plan, tally, k, groups);
                if too_dear(quick.area, excess) {
                    tally.doubtful = k;
                    return None;
                }
            }
        }
        Some(tally.sum(ledger))
    }
}

impl Tally {
    /// Adds up the shares, always in the same order.
    #[inline(always)]
    fn sum(&self, ledger: &Ledger) -> Price {
        let mut price = Price::default();
        let mut references = 0;
        for share in self.families.iter().chain(&self.outputs) {
            price.area += share.area;
            price.overhead += share.overhead;
            price.excess += share.excess;
            price.error_share = price.error_share.max(share.error_share);
            references += share.references;
        }
        price.excess += references.max(ledger.copies) as f64 - ledger.copies as f64;
        price.excess += (price.overhead / ledger.budget - 1.0 - 1e-9).max(0.0);
        price
    }
}

/// Prices family `f` and collects its line.
#[inline(always)]
fn family(clerk: &Clerk, plan: &Plan, tally: &mut Tally, f: usize, groups: usize) {
    let ledger = clerk.ledger;
    let member = &plan.members[f];
    let c = ledger.candidate(member);
    let unit = member.current / f64::from(member.units);
    let bias_amps = member.bias.map_or(0.0, |b| b.0);
    let mut share = Share {
        area: c.input_area(unit, f64::from(member.units), bias_amps),
        ..Share::default()
    };
    if !c.drawable(unit, member.units) {
        share.excess += 1.0;
    }
    let mut line = START;
    let feeds = [
        Some((member.parent, member.current, c.input)),
        member
            .bias
            .map(|(amps, from)| (from, amps, c.bias_voltage.unwrap_or_default())),
    ];
    for (which, feed) in feeds.into_iter().enumerate() {
        let Some((parent, current, input)) = feed else {
            continue;
        };
        share.overhead += current;
        let Some(parent) = parent else {
            share.references += 1;
            share.excess += outside(input, ledger.pin);
            if let Reference::Resistor { .. } = ledger.job.spec.reference {
                let (ohms, error) = ledger.own_reference(current, c);
                tally.absolute = error;
                if let Some(card) = &ledger.job.card.resistor {
                    share.area += crate::device::resistor_area(card, card.width, ohms, 1);
                }
            }
            continue;
        };
        let from = &plan.members[parent];
        let by = ledger.candidate(from);
        let from_unit = from.current / f64::from(from.units);
        let (units, rounding) = units_for(current, from_unit);
        share.area += by.leg_area(from_unit, f64::from(units));
        let end = clerk
            .feeders
            .get(from, member.candidate, which == 1)
            .expect("every pair of the plan is remembered before it is priced");
        if which == 0 {
            let up = &tally.lines[parent];
            for g in 0..groups {
                line.variance[g] = up.variance[g]
                    + end.variance_in[g] * (1.0 / from.current)
                    + end.variance_out[g] * (1.0 / current);
                for s in 0..2 {
                    line.error[s][g] = up.error[s][g] + end.error[s][g] + rounding;
                }
            }
        } else {
            // A bias leg only has to be there: a tenth off moves its gate by little.
            share.excess += (end.worst + rounding.abs() - 0.1).max(0.0);
        }
    }
    tally.lines[f] = line;
    tally.families[f] = share;
}

/// Area of output `k` on family `leg`, and whether the leg can live there; its error comes later.
#[inline(always)]
fn output(ledger: &Ledger, plan: &Plan, tally: &mut Tally, k: usize, leg: usize) {
    let want = &ledger.wants[k];
    let member = &plan.members[leg];
    let c = ledger.candidate(member);
    let unit = member.current / f64::from(member.units);
    let (units, _) = units_for(want.current, unit);
    let mut share = Share {
        area: want.count * c.leg_area(unit, f64::from(units)),
        ..Share::default()
    };
    if c.outputs[k].is_none() {
        // Worse than an output served at twice its limit, whatever the error on paper: a search
        // should not spend on the accuracy of a leg that cannot live here.
        share.excess += 1.5;
    }
    tally.outputs[k] = share;
}

/// Adds the error of output `k` to its share, where it has a limit and a leg; returns the excess it
/// adds.
#[inline(always)]
fn output_error(ledger: &Ledger, plan: &Plan, tally: &mut Tally, k: usize, groups: usize) -> f64 {
    let want = &ledger.wants[k];
    let served = ledger.candidate(&plan.members[plan.legs[k]]).outputs[k].is_some();
    if want.limit.is_infinite() || !served {
        return 0.0;
    }
    let mut ends = [0.0; 2];
    for (end, share) in ends.iter_mut().enumerate() {
        let mut worst = Lanes::ZERO;
        for g in 0..groups {
            worst = worst.max(error(ledger, plan, tally, k, end, g));
        }
        *share = worst.largest() / want.limit;
    }
    let share = &mut tally.outputs[k];
    share.ends = ends;
    share.error_share = ends[0].max(ends[1]);
    let excess = compressed(share.error_share - 1.0);
    share.excess += excess;
    excess
}

/// An excess as the search counts it: itself while it is small; beyond the limit's own size only
/// its logarithm, lest one hopeless output drown what the others say.
#[inline(always)]
fn compressed(excess: f64) -> f64 {
    if excess <= 0.0 {
        0.0
    } else if excess <= 1.0 {
        excess
    } else {
        1.0 + crate::numeric::scalar::ln(excess)
    }
}

/// Error of output `k` at one end of its range in one group of climates, at the worse supply.
#[inline(always)]
fn error(ledger: &Ledger, plan: &Plan, tally: &Tally, k: usize, end: usize, g: usize) -> Lanes {
    let leg = plan.legs[k];
    leg_error(
        ledger,
        &plan.members[leg],
        &tally.lines[leg],
        &tally.absolute,
        k,
        end,
        g,
    )
}

/// The same for a leg of any family on any line.
#[inline(always)]
fn leg_error(
    ledger: &Ledger,
    member: &Member,
    line: &Line,
    absolute: &[[Lanes; GROUPS]; 2],
    k: usize,
    end: usize,
    g: usize,
) -> Lanes {
    let want = &ledger.wants[k];
    let c = ledger.candidate(member);
    let unit = member.current / f64::from(member.units);
    let (_, rounding) = units_for(want.current, unit);
    let solved = &ledger.pool.shapes[c.rail as usize][c.index];
    let copy = &solved.at(ledger.ends[k][end])[g];
    let variance = line.variance[g]
        + copy.variance_in * (1.0 / member.current)
        + copy.variance_out * (1.0 / want.current);
    let own = copy.error + rounding;
    let mut a = line.error[0][g] + own;
    let mut b = line.error[1][g] + own;
    if want.absolute {
        a += absolute[0][g];
        b += absolute[1][g];
    }
    a.abs().max(b.abs()) + variance.sqrt() * want.sigma
}

/// How far a range sticks out of another, V.
fn outside(range: [f64; 2], limits: [f64; 2]) -> f64 {
    (limits[0] - range[0]).max(0.0) + (range[1] - limits[1]).max(0.0)
}
