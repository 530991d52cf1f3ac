//! Prices: what a small step of each limit costs, for one network of the front.
//!
//! The network's structure is held and its sizes are solved for again, once for the limits as they
//! are and once for every limit stepped; a price is the difference of the two. Both sides go
//! through the same procedure from the same sizes, so that what re-solving finds is not mistaken
//! for what the step costs. Every answer is a network solved whole at every corner that keeps
//! every limit; a step without one has no price.

use super::{Limit, NetworkReport};
use crate::assembly::polish::Polished;
use crate::assembly::resize::Sized;
use crate::assembly::resolve::{Effort, Pace, Resolved, keeps, overhead, resolve};
use crate::network::bench::Bench;
use crate::network::work::Work;
use crate::network::{Job, Network, corners};
use crate::spec::{Reference, Spec};
use rayon::prelude::*;
use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};

/// How a network of the front comes to be priced.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Chosen {
    /// It is the knee of the front: see [`crate::front::knee::knee`].
    Knee,
    /// The spec or the command line names its rank.
    Asked,
    /// The rank named is not on the front; the knee stands in.
    Beyond {
        /// The rank named.
        asked: u32,
    },
}

/// What a step of a limit comes to.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Verdict {
    /// Nothing: the network as it stands keeps the stepped limit.
    Free,
    /// New sizes in the same structure.
    Resized {
        /// Change of area, m^2.
        area: f64,
        /// Change of overhead current, A.
        overhead: f64,
        /// The network drawn for it is larger than the spec's limit on area.
        over_area: bool,
    },
    /// The structure cannot, whatever its sizes; another network of the front does as it stands.
    Other {
        /// Its rank.
        rank: usize,
        /// Its area less that of the network priced, m^2.
        area: f64,
        /// Its overhead current less that of the network priced, A.
        overhead: f64,
    },
    /// Neither new sizes nor another network of the front were found that keep it.
    NotFound,
    /// A spec cannot ask for it: a range would reach past a rail, or be turned around.
    NotAllowed,
}

impl Verdict {
    /// Its name in files.
    pub fn name(&self) -> &'static str {
        match self {
            Verdict::Free => "free",
            Verdict::Resized { .. } => "resized",
            Verdict::Other { .. } => "other_network",
            Verdict::NotFound => "not_found",
            Verdict::NotAllowed => "not_allowed",
        }
    }
}

/// One step of a limit.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Step {
    /// Value of the limit after the step, SI.
    pub to: f64,
    /// What it comes to.
    pub verdict: Verdict,
}

/// A limit with its price.
#[derive(Debug, Clone, PartialEq)]
pub struct LimitPrice {
    /// The limit.
    pub limit: Limit,
    /// Name of the output it belongs to, if any.
    pub output: Option<String>,
    /// Its value, SI.
    pub value: f64,
    /// How far it could tighten with the network as it stands: three significant digits or whole
    /// millivolts, on the side of the limit. Equal to the value where nothing is free.
    pub free: f64,
    /// A small step tighter.
    pub tighter: Step,
    /// The same step looser, for the limits whose step tighter is dearest.
    pub looser: Option<Step>,
}

impl LimitPrice {
    /// What the step tighter costs in area, m^2: infinite where nothing was found that keeps it, 0
    /// where it is free or no spec can ask for it.
    pub fn cost(&self) -> f64 {
        match self.tighter.verdict {
            Verdict::NotFound => f64::INFINITY,
            Verdict::Resized { area, .. } | Verdict::Other { area, .. } => area,
            Verdict::Free | Verdict::NotAllowed => 0.0,
        }
    }

    /// Whether the step tighter costs no area that could be told from zero: by the network as it
    /// stands, or with new sizes.
    pub fn slack(&self, noise: f64) -> bool {
        match self.tighter.verdict {
            Verdict::Free => true,
            Verdict::Resized { area, .. } => area <= noise,
            _ => false,
        }
    }
}

/// A neighbour on the front.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Exchange {
    /// Its rank.
    pub rank: usize,
    /// Its area less that of the network priced, m^2.
    pub area: f64,
    /// Its overhead current less that of the network priced, A.
    pub overhead: f64,
}

/// Prices of the limits of a spec, for one network of its front.
#[derive(Debug, Clone, PartialEq)]
pub struct Prices {
    /// Rank of the network.
    pub rank: usize,
    /// Why this one.
    pub chosen: Chosen,
    /// Scale of the accuracy limits at which the network stands, 1 unless accuracy is traded.
    pub held: f64,
    /// Area with the limits as they are, re-solved, off the manufacturing grid, m^2: what changes
    /// of area are counted from.
    pub area: f64,
    /// Overhead current of the same, A.
    pub overhead: f64,
    /// Changes of area up to this cannot be told from zero, m^2.
    pub noise: f64,
    /// Every limit, in the order of the spec.
    pub limits: Vec<LimitPrice>,
    /// The next networks of the front, one rank before and one behind.
    pub exchanges: Vec<Exchange>,
}

/// Sizes of the network to be priced are brought to rest by this.
const REST: Pace = Pace {
    radius: 0.06,
    rounds: 3,
    shrink: 1.0,
    gain: 1e-5,
};
/// How often, at most.
const RESTS: usize = 10;
/// Until one more gains less than this share of area.
const RESTED: f64 = 5e-5;
/// A step is solved from there by this.
const STEP: Pace = Pace {
    radius: 0.03,
    rounds: 2,
    shrink: 0.4,
    gain: 5e-5,
};
/// What cannot be reached that way is tried once more from further out.
const FAR: Pace = Pace {
    radius: 0.1,
    rounds: 5,
    shrink: 0.7,
    gain: 5e-5,
};
/// Limits that are also stepped the other way: those whose step tighter is dearest.
pub const DEAREST: usize = 8;
/// A step of voltage, V.
const VOLTS: f64 = 0.01;
/// Changes of area below this share are digits of the descent.
const DIGITS: f64 = 1e-4;

/// Prices every limit for network `chosen` of the front. `drawn` holds the networks of `front`.
/// `None` where the run was stopped, or re-solving the unchanged limits found nothing.
pub(super) fn prices(
    job: &Job,
    front: &[NetworkReport],
    drawn: &[&Polished],
    (at, chosen): (usize, Chosen),
    watch: &dyn super::Observer,
    stop: &AtomicBool,
    work: &mut Work,
) -> Option<Prices> {
    let network = drawn.get(at)?;
    let held = network.tighten;
    let mut spec = job.spec.clone();
    for accuracy in spec.outputs.iter_mut().filter_map(|o| o.accuracy.as_mut()) {
        accuracy.limit *= held;
    }
    let job = Job {
        spec: &spec,
        card: job.card,
    };
    let asked = Limit::all(&spec);
    let steps = 2 + asked.len() + asked.len().min(DEAREST);
    watch.stage("pricing limits", steps as u64);
    let done = AtomicU64::new(0);
    let step = || watch.advance(done.fetch_add(1, Ordering::Relaxed) + 1);
    let mut effort = Effort::default();
    let mut rest = resolve(&job, &Sized::of(&network.network), REST, &mut effort)?;
    for _ in 1..RESTS {
        let Some(next) = resolve(&job, &rest.exact, REST, &mut effort) else {
            break;
        };
        let gain = rest.area - next.area;
        if gain > 0.0 {
            rest = next;
        }
        if gain < RESTED * rest.area || stop.load(Ordering::Relaxed) {
            break;
        }
    }
    step();
    let base = resolve(&job, &rest.exact, STEP, &mut effort)?;
    step();
    let till = Till {
        job,
        drawn,
        at,
        base: &base,
        stop,
    };
    let priced: Vec<(LimitPrice, Effort)> = asked
        .par_iter()
        .map(|&limit| {
            let priced = till.price(limit);
            step();
            priced
        })
        .collect();
    let mut limits: Vec<LimitPrice> = Vec::with_capacity(priced.len());
    for (price, spent) in priced {
        effort.add(spent);
        limits.push(price);
    }
    let mut dearest: Vec<usize> = (0..limits.len())
        .filter(|&i| limits[i].cost() > 0.0)
        .collect();
    dearest.sort_by(|&a, &b| {
        limits[b]
            .cost()
            .total_cmp(&limits[a].cost())
            .then(a.cmp(&b))
    });
    dearest.truncate(DEAREST);
    let looser: Vec<(Option<Step>, Effort)> = dearest
        .par_iter()
        .map(|&i| {
            let looser = till.looser(&limits[i]);
            step();
            looser
        })
        .collect();
    for (i, (step, spent)) in dearest.into_iter().zip(looser) {
        effort.add(spent);
        limits[i].looser = step;
    }
    work.polish_evaluations += effort.evaluations;
    work.dc_solutions += effort.solutions;
    if stop.load(Ordering::Relaxed) {
        return None;
    }
    let noise = limits
        .iter()
        .map(doubt)
        .fold((rest.area - base.area).abs(), f64::max);
    let exchange = |i: usize| Exchange {
        rank: front[i].rank,
        area: drawn[i].measured.area - network.measured.area,
        overhead: overhead(&drawn[i].measured) - overhead(&network.measured),
    };
    let neighbours = [at.checked_sub(1), (at + 1 < front.len()).then_some(at + 1)];
    Some(Prices {
        rank: front[at].rank,
        chosen,
        held,
        area: base.area,
        overhead: base.overhead,
        noise: noise.max(DIGITS * base.area),
        limits,
        exchanges: neighbours.into_iter().flatten().map(exchange).collect(),
    })
}

/// By how much the prices of a limit contradict each other, m^2. A tighter limit cannot make a
/// smaller network, and area is convex in a limit near its optimum: a step tighter costs at least
/// what the same step looser saves. What is against that was left in the unchanged network.
fn doubt(price: &LimitPrice) -> f64 {
    let Verdict::Resized { area: more, .. } = price.tighter.verdict else {
        return 0.0;
    };
    let less = price.looser.map_or(more, |step| match step.verdict {
        Verdict::Resized { area, .. } => area,
        _ => more,
    });
    (-more).max(-(more + less) / 2.0).max(0.0)
}

/// The value of a limit a step tighter (`1.0`) or looser (`-1.0`): voltages by a step of their own,
/// all others by a share.
fn stepped(limit: Limit, value: f64, way: f64) -> f64 {
    let up = if limit.rises() { -way } else { way };
    let share = match limit {
        Limit::Accuracy(_) | Limit::Area => 0.01,
        Limit::OverheadCurrent | Limit::Power => 0.02,
        Limit::OutputResistance(_) => 0.05,
        _ => return millivolts(value, up * VOLTS),
    };
    value * (1.0 + up * share)
}

/// The spec with a limit at `value`; `None` where no spec could say so.
fn put(limit: Limit, spec: &Spec, value: f64) -> Option<Spec> {
    let stepped = limit.set(spec, value);
    let supply = spec.supply.least.0;
    let sound = match (limit, stepped.reference) {
        (Limit::PinLeast | Limit::PinMost, Reference::Current { range, .. }) => {
            range.least.0 >= 0.0 && range.least < range.most && range.least.0 < supply
        }
        (Limit::LowEnd(k) | Limit::HighEnd(k), _) => {
            let range = stepped.outputs[k].range;
            // A spec's least voltage between an output and its rail.
            range.least.0 >= 0.01 && range.least < range.most && range.most.0 <= supply
        }
        _ => value > 0.0,
    };
    sound.then_some(stepped)
}

/// Where prices are made.
struct Till<'a> {
    job: Job<'a>,
    drawn: &'a [&'a Polished],
    at: usize,
    base: &'a Resolved,
    stop: &'a AtomicBool,
}

impl Till<'_> {
    fn network(&self) -> &Polished {
        self.drawn[self.at]
    }

    fn price(&self, limit: Limit) -> (LimitPrice, Effort) {
        let spec = self.job.spec;
        // Only limits that are set are asked for.
        let value = limit.value(spec).unwrap_or_default();
        let mut effort = Effort::default();
        let mut bench = Bench::new(self.job, corners::verified(&self.job));
        let free = self.free(limit, value, &mut bench);
        let to = stepped(limit, value, 1.0);
        let verdict = match put(limit, spec, to) {
            None => Verdict::NotAllowed,
            Some(_) if !limit.looser(free, to) => Verdict::Free,
            Some(spec) => self
                .resized(limit, &spec, &mut effort)
                .unwrap_or_else(|| self.other(limit, &spec, &mut bench)),
        };
        effort.solutions += bench.solutions;
        let priced = LimitPrice {
            limit,
            output: limit.output().map(|k| spec.outputs[k].name.clone()),
            value,
            free,
            tighter: Step { to, verdict },
            looser: None,
        };
        (priced, effort)
    }

    /// The step of a priced limit the other way.
    fn looser(&self, price: &LimitPrice) -> (Option<Step>, Effort) {
        let mut effort = Effort::default();
        let to = stepped(price.limit, price.value, -1.0);
        let step = put(price.limit, self.job.spec, to)
            .and_then(|spec| self.resized(price.limit, &spec, &mut effort))
            .map(|verdict| Step { to, verdict });
        (step, effort)
    }

    /// New sizes in the same structure.
    fn resized(&self, limit: Limit, spec: &Spec, effort: &mut Effort) -> Option<Verdict> {
        if self.stop.load(Ordering::Relaxed) {
            return None;
        }
        let most = spec.limits.area.map_or(f64::INFINITY, |l| l.0);
        let job = Job {
            spec,
            card: self.job.card,
        };
        let found = match limit {
            // Currents are the structure's, and the least area has been found already.
            Limit::OverheadCurrent | Limit::Power => return None,
            Limit::Area => (self.base.drawn_area <= most).then(|| self.base.clone())?,
            _ => [STEP, FAR]
                .into_iter()
                .find_map(|pace| resolve(&job, &self.base.exact, pace, effort))?,
        };
        Some(Verdict::Resized {
            area: found.area - self.base.area,
            overhead: found.overhead - self.base.overhead,
            over_area: found.drawn_area > most,
        })
    }

    /// The network of the front that keeps the stepped limit as it stands, for the least area; for
    /// the least overhead current where the area is what is stepped.
    fn other(&self, limit: Limit, spec: &Spec, bench: &mut Bench) -> Verdict {
        let job = Job {
            spec,
            card: self.job.card,
        };
        let mut best: Option<(f64, usize)> = None;
        for (i, other) in self.drawn.iter().enumerate().filter(|(i, _)| *i != self.at) {
            if !fits(&job, bench, &other.network) {
                continue;
            }
            let cost = match limit {
                Limit::Area => overhead(&other.measured),
                _ => other.measured.area,
            };
            if best.is_none_or(|b| cost < b.0) {
                best = Some((cost, i));
            }
        }
        match best {
            None => Verdict::NotFound,
            Some((_, i)) => Verdict::Other {
                rank: i + 1,
                area: self.drawn[i].measured.area - self.network().measured.area,
                overhead: overhead(&self.drawn[i].measured) - overhead(&self.network().measured),
            },
        }
    }

    /// How far the limit could tighten with the network as it stands.
    fn free(&self, limit: Limit, value: f64, bench: &mut Bench) -> f64 {
        let measured = &self.network().measured;
        let pins = || measured.pin.iter().copied();
        let amps = overhead(measured);
        let reached = match limit {
            Limit::LowEnd(_) | Limit::HighEnd(_) => return self.free_end(limit, value, bench),
            Limit::Accuracy(k) => measured.worst[k].error,
            Limit::OutputResistance(k) => measured.worst[k].resistance,
            Limit::Area => measured.area,
            Limit::OverheadCurrent => amps,
            Limit::Power => amps * self.job.spec.supply.most.0,
            Limit::PinLeast => pins().fold(f64::INFINITY, f64::min),
            Limit::PinMost => pins().fold(f64::NEG_INFINITY, f64::max),
        };
        if !reached.is_finite() {
            return reached;
        }
        let rounded = limit.outward(reached);
        // Rounding may pass the limit itself.
        if limit.looser(value, rounded) && self.keeps(limit, rounded, bench) {
            rounded
        } else {
            value
        }
    }

    fn keeps(&self, limit: Limit, value: f64, bench: &mut Bench) -> bool {
        put(limit, self.job.spec, value).is_some_and(|spec| {
            let job = Job {
                spec: &spec,
                card: self.job.card,
            };
            fits(&job, bench, &self.network().network)
        })
    }

    /// The same for an end of a range, by bisection over whole millivolts.
    fn free_end(&self, limit: Limit, value: f64, bench: &mut Bench) -> f64 {
        let step = if limit.rises() { -1e-3 } else { 1e-3 };
        let at = |n: u32| millivolts(value, step * f64::from(n));
        let (mut kept, mut broken) = (0, 1);
        while self.keeps(limit, at(broken), bench) {
            kept = broken;
            broken *= 4;
        }
        while broken - kept > 1 {
            let middle = (kept + broken) / 2;
            if self.keeps(limit, at(middle), bench) {
                kept = middle;
            } else {
                broken = middle;
            }
        }
        at(kept)
    }
}

/// Whether a network keeps every limit of a job.
fn fits(job: &Job, bench: &mut Bench, network: &Network) -> bool {
    let area = job.spec.limits.area.map_or(f64::INFINITY, |l| l.0);
    keeps(job, bench, network).is_some_and(|m| m.area <= area)
}

/// A voltage moved, without the dust that decimal fractions leave.
fn millivolts(value: f64, by: f64) -> f64 {
    ((value + by) * 1e6).round() / 1e6
}
