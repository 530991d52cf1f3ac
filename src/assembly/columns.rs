//! Column generation: which families pay their way at given prices.
//!
//! A *column* is a family with the legs it serves: a shape, an input current, a number of input
//! units, what it takes (a feed) and what it gives (outputs, and feeds for families on the other
//! rail). A *feed* is an input current on a rail whose line has collected at most so much variance
//! and so much systematic error, for inputs up to a certain voltage. Collected error comes in
//! levels, so the master problem stays linear, and since every mirror adds variance, no chain of
//! feeds can bite its tail. A scan over the whole pool finds, at the master's dual prices, the
//! columns of least reduced cost (Dantzig & Wolfe, Operations Research 8, 1960; Gilmore & Gomory,
//! Operations Research 9, 1961).

use super::candidates::{Candidate, End, Want};
use super::plan::{Ledger, units_for};
use crate::network::Job;
use crate::numeric::scalar::powf;
use crate::spec::Rail;
use rayon::prelude::*;
use std::collections::BTreeMap;

/// Input units tried for a family.
pub const UNITS: [u32; 13] = [1, 2, 3, 4, 5, 6, 8, 10, 12, 16, 20, 30, 40];
/// Largest number of units in one leg.
const UNITS_MOST: f64 = 400.0;
/// Candidates handed to one task.
const CHUNK: usize = 128;

/// Input currents of families that suit a job within a budget of overhead current, A, rising.
pub fn currents(job: &Job, wants: &[Want], budget: f64) -> Vec<f64> {
    let reference = job.spec.reference.current().0;
    let mut currents: Vec<f64> = [
        0.01, 0.02, 0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 0.8, 1.0, 1.5, 2.0, 4.0,
    ]
    .iter()
    .map(|r| r * reference)
    .collect();
    // A feed of an output's own current costs no rounding.
    let smallest = wants
        .iter()
        .map(|w| w.current)
        .fold(f64::INFINITY, f64::min);
    currents.retain(|&c| c <= budget && (c >= smallest * 0.99 || c >= reference * 0.2));
    if !currents.contains(&reference) {
        currents.push(reference);
    }
    currents.sort_by(f64::total_cmp);
    currents
}

/// Kinds of feed.
#[derive(Debug, Clone)]
pub struct Feeds {
    /// Input currents, A, rising.
    pub currents: Vec<f64>,
    /// Levels of collected variance, rising; the first is zero: the reference itself.
    pub variances: Vec<f64>,
    /// Levels of collected systematic error, rising; the first is zero.
    pub errors: Vec<f64>,
    /// Classes of input voltage: the largest voltage of an input leg, V from its rail, rising.
    pub inputs: Vec<f64>,
}

/// One kind of feed.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Feed {
    /// Rail of the family that takes it.
    pub rail: Rail,
    /// Index of the current.
    pub current: usize,
    /// Index of the variance level.
    pub variance: usize,
    /// Index of the error level.
    pub error: usize,
    /// Index of the input-voltage class.
    pub input: usize,
}

impl Feeds {
    /// Kinds of feed that suit a ledger's outputs.
    pub fn of(ledger: &Ledger, resolution: usize) -> Feeds {
        let currents = currents(&ledger.job, &ledger.wants, ledger.budget);
        // The square of limit over sigma is all the variance an output can bear.
        let bearable: Vec<f64> = ledger
            .wants
            .iter()
            .filter(|w| w.limit.is_finite())
            .map(|w| (w.limit / w.sigma).powi(2))
            .collect();
        let least = bearable
            .iter()
            .copied()
            .fold(f64::INFINITY, f64::min)
            .min(1e-2);
        let most = bearable.iter().copied().fold(0.0, f64::max).max(1e-6);
        let (start, end) = (0.04 * least, 0.8 * most.max(least));
        let mut variances = vec![0.0];
        let steps = resolution.max(2);
        for i in 0..steps {
            variances.push(start * powf(end / start, i as f64 / (steps - 1) as f64));
        }
        let errors = vec![
            0.0,
            0.2 * least.sqrt() * 3.0,
            0.25 * most.max(least).sqrt() * 3.0,
        ];
        let supply = ledger.job.spec.supply.least.0;
        let inputs = [0.5, 0.8].map(|s| s * supply).to_vec();
        Feeds {
            currents,
            variances,
            errors,
            inputs,
        }
    }

    /// Every kind of feed.
    pub fn all(&self) -> Vec<Feed> {
        let mut out = Vec::new();
        for rail in [Rail::Sink, Rail::Source] {
            for current in 0..self.currents.len() {
                for variance in 1..self.variances.len() {
                    for error in 1..self.errors.len() {
                        for input in 0..self.inputs.len() {
                            out.push(Feed {
                                rail,
                                current,
                                variance,
                                error,
                                input,
                            });
                        }
                    }
                }
            }
        }
        out
    }

    /// Index of a feed in [`Feeds::all`].
    pub fn index(&self, feed: &Feed) -> usize {
        let (v, e, i) = (
            self.variances.len() - 1,
            self.errors.len() - 1,
            self.inputs.len(),
        );
        (((feed.rail as usize * self.currents.len() + feed.current) * v + feed.variance - 1) * e
            + feed.error
            - 1)
            * i
            + feed.input
    }

    /// Feeds one step looser than this one, which it can stand in for.
    pub fn looser(&self, feed: &Feed) -> Vec<Feed> {
        let mut out = Vec::new();
        if feed.variance + 1 < self.variances.len() {
            out.push(Feed {
                variance: feed.variance + 1,
                ..*feed
            });
        }
        if feed.error + 1 < self.errors.len() {
            out.push(Feed {
                error: feed.error + 1,
                ..*feed
            });
        }
        if feed.input > 0 {
            out.push(Feed {
                input: feed.input - 1,
                ..*feed
            });
        }
        out
    }

    /// Whether `given` can stand in for `taken`.
    pub fn covers(given: &Feed, taken: &Feed) -> bool {
        given.rail == taken.rail
            && given.current == taken.current
            && given.variance <= taken.variance
            && given.error <= taken.error
            && given.input >= taken.input
    }

    /// The class of an input voltage; `None` above the highest.
    pub fn class(&self, input: [f64; 2]) -> Option<usize> {
        self.inputs.iter().position(|&most| input[1] <= most)
    }
}

/// A family with the legs it serves.
#[derive(Debug, Clone, PartialEq)]
pub struct Column {
    /// Rail.
    pub rail: Rail,
    /// Candidate of the rail.
    pub candidate: usize,
    /// Input current, A.
    pub current: f64,
    /// Units in the input leg.
    pub units: u32,
    /// What its input takes; `None` is the reference.
    pub takes: Option<Feed>,
    /// Bias current and what it takes, where the cell has a bias leg.
    pub bias: Option<(f64, Option<Feed>)>,
    /// Outputs it serves, rising.
    pub outputs: Vec<usize>,
    /// Feeds it gives.
    pub gives: Vec<Feed>,
    /// Area of all of it, m^2.
    pub area: f64,
    /// Overhead current it adds, A.
    pub overhead: f64,
}

impl Column {
    /// Copies of the reference it takes.
    pub fn references(&self) -> usize {
        usize::from(self.takes.is_none()) + usize::from(matches!(self.bias, Some((_, None))))
    }
}

/// Dual prices of the master problem.
#[derive(Debug, Clone)]
pub struct Prices {
    /// Area an output is worth, m^2.
    pub outputs: Vec<f64>,
    /// Area a feed is worth, by [`Feeds::index`].
    pub feeds: Vec<f64>,
    /// Area a copy of the reference is worth.
    pub reference: f64,
    /// Area an ampere of overhead current is worth, m^2/A.
    pub overhead: f64,
}

/// Scans candidates and returns, per rail, input current and level of the line, the column of least
/// reduced cost where that is below `-threshold`, best first; and the least reduced cost of all.
/// `subset` lists the candidates of each rail to look at.
pub fn price(
    ledger: &Ledger,
    feeds: &Feeds,
    prices: &Prices,
    threshold: f64,
    subset: &[Vec<usize>; 2],
) -> (Vec<Column>, f64) {
    let scan = Scan {
        ledger,
        feeds,
        prices,
    };
    let tasks: Vec<(usize, &[usize])> = (0..2)
        .flat_map(|r| subset[r].chunks(CHUNK).map(move |c| (r, c)))
        .collect();
    let found: Vec<Vec<(f64, usize, Pick)>> = tasks
        .par_iter()
        .map(|&(rail, chunk)| scan.chunk(rail, chunk))
        .collect();
    let mut best: Vec<Option<(f64, Pick)>> = Vec::new();
    let mut least = 0.0f64;
    for (cost, slot, pick) in found.into_iter().flatten() {
        least = least.min(cost);
        if best.len() <= slot {
            best.resize(slot + 1, None);
        }
        if best[slot].as_ref().is_none_or(|(old, _)| cost < *old) {
            best[slot] = Some((cost, pick));
        }
    }
    let mut list: Vec<(f64, Pick)> = best
        .into_iter()
        .flatten()
        .filter(|(cost, _)| *cost < -threshold)
        .collect();
    list.sort_by(|a, b| a.0.total_cmp(&b.0));
    (
        list.into_iter()
            .map(|(_, pick)| scan.column(&pick))
            .collect(),
        least,
    )
}

struct Scan<'s, 'a> {
    ledger: &'s Ledger<'a>,
    feeds: &'s Feeds,
    prices: &'s Prices,
}

/// What identifies a column; the rest follows.
#[derive(Debug, Clone, Copy)]
struct Pick {
    rail: Rail,
    candidate: usize,
    current: usize,
    units: u32,
    error: usize,
    variance: usize,
}

/// An output a family could serve at a unit current.
#[derive(Clone, Copy)]
struct Offer {
    output: usize,
    gain: f64,
    /// Per error level of the line: number of variance levels at which it still holds.
    levels: [u8; LEVELS],
}

/// Feeders of one input current and one class of input voltage: by level of the family's line,
/// the level they deliver.
#[derive(Clone, Copy)]
struct Reach {
    current: usize,
    input: usize,
    variance: [u8; LEVELS],
    error: [u8; LEVELS],
}

/// Most levels of either kind.
const LEVELS: usize = 16;
/// A level that is not there.
const NOWHERE: u8 = u8::MAX;

/// How a family's bias leg is fed.
#[derive(Clone, Copy)]
struct Bias {
    amps: f64,
    takes: Option<Feed>,
    cost: f64,
}

impl Scan<'_, '_> {
    /// Best columns of a chunk of candidates, by slot.
    fn chunk(&self, rail: usize, chunk: &[usize]) -> Vec<(f64, usize, Pick)> {
        let mut best = Vec::new();
        let mut slots = BTreeMap::new();
        for &index in chunk {
            self.candidate(
                &self.ledger.candidates[rail][index],
                index,
                &mut |cost, slot, pick| {
                    let place = *slots.entry(slot).or_insert_with(|| {
                        best.push((f64::INFINITY, slot, pick));
                        best.len() - 1
                    });
                    if cost < best[place].0 {
                        best[place] = (cost, slot, pick);
                    }
                },
            );
        }
        best
    }

    fn pin_ok(&self, volts: [f64; 2]) -> bool {
        volts[0] >= self.ledger.pin[0] && volts[1] <= self.ledger.pin[1]
    }

    /// Input-voltage class, and how the bias leg is fed where there is one; `None` where either is
    /// impossible.
    fn feeding(&self, c: &Candidate) -> Option<(usize, Option<Bias>)> {
        let class = self.feeds.class(c.input)?;
        let bias = match c.bias_voltage {
            None => None,
            Some(volts) => Some(self.bias(c, self.feeds.class(volts)?, volts)),
        };
        Some((class, bias))
    }

    /// The cheapest way to feed a bias leg.
    fn bias(&self, c: &Candidate, class: usize, volts: [f64; 2]) -> Bias {
        let (variance, error) = (self.feeds.variances.len() - 1, self.feeds.errors.len() - 1);
        let by_feed = self.feeds.currents.iter().enumerate().map(|(j, &amps)| {
            let feed = Feed {
                rail: c.rail,
                current: j,
                variance,
                error,
                input: class,
            };
            let cost = self.prices.feeds[self.feeds.index(&feed)] + self.prices.overhead * amps;
            Bias {
                amps,
                takes: Some(feed),
                cost,
            }
        });
        let reference = self.ledger.job.spec.reference.current().0;
        let by_reference = (self.ledger.copies > 1
            && c.rail == self.ledger.job.spec.reference.rail()
            && self.pin_ok(volts))
        .then_some(Bias {
            amps: reference,
            takes: None,
            cost: self.prices.reference + self.prices.overhead * reference,
        });
        by_feed
            .chain(by_reference)
            .reduce(|a, b| if b.cost < a.cost { b } else { a })
            .expect("there is at least the reference's own current")
    }

    fn candidate(&self, c: &Candidate, index: usize, found: &mut impl FnMut(f64, usize, Pick)) {
        let Some((class, bias)) = self.feeding(c) else {
            return;
        };
        let bias_cost = bias.map_or(0.0, |b| b.cost);
        let bias_amps = bias.map_or(0.0, |b| b.amps);
        let reference = self.ledger.job.spec.reference.current().0;
        let root_rail = c.rail == self.ledger.job.spec.reference.rail() && self.pin_ok(c.input);
        let density = c.density();
        let mut offers: Vec<Offer> = Vec::new();
        let mut reaches: Vec<Reach> = Vec::new();
        for (j, &current) in self.feeds.currents.iter().enumerate() {
            // What the family could gain at best, against what it costs at least: no borders, the
            // loosest line, the tightest feeds.
            let mut most = 0.0;
            for (k, want) in self.ledger.wants.iter().enumerate() {
                if c.outputs[k].is_some() {
                    let gain = self.prices.outputs[k] - want.count * want.current * density;
                    most += gain.max(0.0);
                }
            }
            for (i, &amps) in self.feeds.currents.iter().enumerate() {
                most += (self.tightest(c.rail.opposite(), i) - amps * density).max(0.0);
            }
            let at_reference = root_rail && current == reference;
            let paid_least = if at_reference {
                0.0
            } else {
                self.loosest(c.rail, j, class)
            };
            let fixed = bias_cost + self.prices.overhead * current;
            if current * density + fixed + paid_least >= most {
                continue;
            }
            self.reaches(c, current, &mut reaches);
            for &units in &UNITS {
                let unit = current / f64::from(units);
                if !c.drawable(unit, units) {
                    continue;
                }
                let base = c.input_area(unit, f64::from(units), bias_amps) + fixed;
                if base + paid_least >= most {
                    continue;
                }
                self.offers(c, current, unit, &mut offers);
                for error in 0..self.feeds.errors.len() {
                    for variance in 0..self.feeds.variances.len() {
                        let root = error == 0 && variance == 0;
                        if root != (error == 0 || variance == 0) || (root && !at_reference) {
                            continue;
                        }
                        let paid = if root {
                            self.prices.reference
                        } else {
                            let feed = Feed {
                                rail: c.rail,
                                current: j,
                                variance,
                                error,
                                input: class,
                            };
                            self.prices.feeds[self.feeds.index(&feed)]
                        };
                        let mut cost = base + paid;
                        for o in &offers {
                            if usize::from(o.levels[error]) > variance {
                                cost -= o.gain;
                            }
                        }
                        self.feeds_given(c, unit, error, variance, &reaches, |gain, _| {
                            cost -= gain
                        });
                        if cost < 0.0 {
                            let slot = ((c.rail as usize * self.feeds.currents.len() + j)
                                * self.feeds.variances.len()
                                + variance)
                                * self.feeds.errors.len()
                                + error;
                            let rail = c.rail;
                            let pick = Pick {
                                rail,
                                candidate: index,
                                current: j,
                                units,
                                error,
                                variance,
                            };
                            found(cost, slot, pick);
                        }
                    }
                }
            }
        }
    }

    /// Largest price of any feed of a current on a rail: that of the tightest level.
    fn tightest(&self, rail: Rail, current: usize) -> f64 {
        let input = self.feeds.inputs.len() - 1;
        self.prices.feeds[self.feeds.index(&Feed {
            rail,
            current,
            variance: 1,
            error: 1,
            input,
        })]
    }

    /// Least price of any feed of a current on a rail for an input class: that of the loosest level.
    fn loosest(&self, rail: Rail, current: usize, input: usize) -> f64 {
        let (variance, error) = (self.feeds.variances.len() - 1, self.feeds.errors.len() - 1);
        self.prices.feeds[self.feeds.index(&Feed {
            rail,
            current,
            variance,
            error,
            input,
        })]
    }

    /// Outputs worth serving at this unit current, whatever the line's level.
    fn offers(&self, c: &Candidate, current: f64, unit: f64, offers: &mut Vec<Offer>) {
        offers.clear();
        for (k, want) in self.ledger.wants.iter().enumerate() {
            let Some(both) = &c.outputs[k] else { continue };
            let (units, rounding) = units_for(want.current, unit);
            if f64::from(units) > UNITS_MOST || rounding.abs() > 0.3 * want.limit.min(0.1) {
                continue;
            }
            let gain = self.prices.outputs[k] - want.count * c.leg_area(unit, f64::from(units));
            if gain <= 0.0 {
                continue;
            }
            let levels = self.output_levels(both, rounding, current, want);
            offers.push(Offer {
                gain,
                output: k,
                levels,
            });
        }
    }

    /// How many variance levels of the line an output bears, per error level.
    fn output_levels(
        &self,
        both: &[End; 2],
        rounding: f64,
        current: f64,
        want: &Want,
    ) -> [u8; LEVELS] {
        let mut levels = [0u8; LEVELS];
        for (level, &error) in levels.iter_mut().zip(&self.feeds.errors) {
            let mut room_least = f64::INFINITY;
            for end in both {
                let own = end.variance_in / current + end.variance_out / want.current;
                let low = error - end.error[0] - rounding;
                let high = error + end.error[1] + rounding;
                let room = (want.limit - low.abs().max(high.abs())) / want.sigma;
                let bears = if room <= 0.0 { -1.0 } else { room * room - own };
                room_least = room_least.min(bears);
            }
            *level = self.feeds.variances.partition_point(|&v| v <= room_least) as u8;
        }
        levels
    }

    /// What a feeder of each current and class would deliver from each level of the line.
    fn reaches(&self, c: &Candidate, current: f64, reaches: &mut Vec<Reach>) {
        reaches.clear();
        let supply = self.ledger.job.spec.supply;
        for (input, &most) in self.feeds.inputs.iter().enumerate() {
            let volts = [supply.least.0 - most, supply.most.0 - 0.1 * supply.least.0];
            let Some(end) = c.feeder(volts) else { continue };
            let add = end.error[0].abs().max(end.error[1].abs());
            for (i, &amps) in self.feeds.currents.iter().enumerate() {
                let own = end.variance_in / current + end.variance_out / amps;
                // Levels round to what lies below: columns are suggestions, priced exactly
                // afterwards, and rounding up at every feeder would forbid chains that work. A
                // feeder always adds at least one level of variance, so chains cannot close.
                let step = |levels: &[f64], own: f64, least: usize| {
                    let mut out = [NOWHERE; LEVELS];
                    for (k, &level) in levels.iter().enumerate() {
                        let to = levels.partition_point(|&l| l <= level + own);
                        let to = to.saturating_sub(1).max(k + least);
                        let far = level + own > 1.5 * levels[levels.len() - 1];
                        out[k] = if to < levels.len() && !far {
                            to as u8
                        } else {
                            NOWHERE
                        };
                    }
                    out
                };
                let variance = step(&self.feeds.variances, own, 1);
                let error = step(&self.feeds.errors, add, 0);
                if variance[0] != NOWHERE && error[0] != NOWHERE {
                    reaches.push(Reach {
                        current: i,
                        input,
                        variance,
                        error,
                    });
                }
            }
        }
    }

    /// The feeds worth giving from a line: at most one per current.
    fn feeds_given(
        &self,
        c: &Candidate,
        unit: f64,
        error: usize,
        variance: usize,
        reaches: &[Reach],
        mut give: impl FnMut(f64, Feed),
    ) {
        let rail = c.rail.opposite();
        let mut best: [Option<(f64, Feed)>; LEVELS] = [None; LEVELS];
        for r in reaches {
            let (v, e) = (r.variance[variance], r.error[error]);
            if v == NOWHERE || e == NOWHERE {
                continue;
            }
            let feed = Feed {
                rail,
                current: r.current,
                variance: usize::from(v).max(1),
                error: usize::from(e).max(1),
                input: r.input,
            };
            let worth = self.prices.feeds[self.feeds.index(&feed)];
            if worth > best[r.current].map_or(0.0, |b| b.0) {
                best[r.current] = Some((worth, feed));
            }
        }
        for (worth, feed) in best.into_iter().flatten() {
            let (units, rounding) = units_for(self.feeds.currents[feed.current], unit);
            if f64::from(units) > UNITS_MOST || rounding.abs() > 1e-3 {
                continue;
            }
            let gain = worth - c.leg_area(unit, f64::from(units));
            if gain > 0.0 {
                give(gain, feed);
            }
        }
    }

    /// The whole column of a pick.
    fn column(&self, pick: &Pick) -> Column {
        let c = &self.ledger.candidates[pick.rail as usize][pick.candidate];
        let (class, bias) = self.feeding(c).expect("a picked family can be fed");
        let current = self.feeds.currents[pick.current];
        let unit = current / f64::from(pick.units);
        let bias_amps = bias.map_or(0.0, |b| b.amps);
        let mut area = c.input_area(unit, f64::from(pick.units), bias_amps);
        let mut offers = Vec::new();
        let mut reaches = Vec::new();
        self.offers(c, current, unit, &mut offers);
        self.reaches(c, current, &mut reaches);
        let mut outputs = Vec::new();
        for o in offers
            .iter()
            .filter(|o| usize::from(o.levels[pick.error]) > pick.variance)
        {
            let want = &self.ledger.wants[o.output];
            let (m, _) = units_for(want.current, unit);
            area += want.count * c.leg_area(unit, f64::from(m));
            outputs.push(o.output);
        }
        let mut gives = Vec::new();
        self.feeds_given(c, unit, pick.error, pick.variance, &reaches, |_, feed| {
            let (m, _) = units_for(self.feeds.currents[feed.current], unit);
            area += c.leg_area(unit, f64::from(m));
            gives.push(feed);
        });
        let takes = (pick.variance > 0).then_some(Feed {
            rail: pick.rail,
            current: pick.current,
            variance: pick.variance,
            error: pick.error,
            input: class,
        });
        Column {
            rail: pick.rail,
            candidate: pick.candidate,
            current,
            units: pick.units,
            takes,
            bias: bias.map(|b| (b.amps, b.takes)),
            outputs,
            gives,
            area,
            overhead: current + bias_amps,
        }
    }
}

/// A contest: kind (0 an output, else a level delivered to a class of input), which output or
/// current, line, weight of the input leg.
type Contest = (usize, usize, usize, usize);

/// Candidates that are the cheapest for some output or some feeder at some input current and some
/// level of the line: the ones worth pricing in every round. The full pool is priced at the end.
pub fn shortlist(ledger: &Ledger, feeds: &Feeds) -> [Vec<usize>; 2] {
    const KEPT: usize = 2;
    const INPUT_WEIGHTS: [f64; 3] = [0.2, 1.0, 4.0];
    let nothing = Prices {
        outputs: vec![0.0; ledger.wants.len()],
        feeds: vec![0.0; feeds.all().len()],
        reference: 0.0,
        overhead: 0.0,
    };
    let scan = Scan {
        ledger,
        feeds,
        prices: &nothing,
    };
    let lines: Vec<(usize, usize)> = {
        let v = feeds.variances.len();
        vec![
            (0, 0),
            (1, 1),
            (1, v / 2),
            (2.min(feeds.errors.len() - 1), v / 2),
        ]
    };
    [0, 1].map(|rail| {
        let candidates = &ledger.candidates[rail];
        // One task per input current; each returns the winners of its contests.
        let winners: Vec<Vec<usize>> = feeds
            .currents
            .par_iter()
            .with_max_len(1)
            .map(|&current| {
                let mut contests: BTreeMap<Contest, Vec<(f64, usize)>> = BTreeMap::new();
                let mut enter = |key, cost: f64, index: usize| {
                    let list = contests.entry(key).or_default();
                    let place = list.partition_point(|(c, _)| *c <= cost);
                    if place < KEPT {
                        list.insert(place, (cost, index));
                        list.truncate(KEPT);
                    }
                };
                let mut reaches = Vec::new();
                for (index, c) in candidates.iter().enumerate() {
                    if scan.feeding(c).is_none() {
                        continue;
                    }
                    let Some(&units) = UNITS
                        .iter()
                        .rev()
                        .find(|&&n| n <= 4 && c.drawable(current / f64::from(n), n))
                    else {
                        continue;
                    };
                    let unit = current / f64::from(units);
                    let input = c.input_area(unit, f64::from(units), current.min(1e-6));
                    for (k, want) in ledger.wants.iter().enumerate() {
                        let Some(both) = &c.outputs[k] else { continue };
                        let levels = scan.output_levels(both, 0.0, current, want);
                        let leg = want.count * c.leg_area(unit, want.current / unit);
                        for (l, &(error, variance)) in lines.iter().enumerate() {
                            if usize::from(levels[error]) > variance {
                                for (w, weight) in INPUT_WEIGHTS.iter().enumerate() {
                                    enter((0, k, l, w), leg + weight * input, index);
                                }
                            }
                        }
                    }
                    scan.reaches(c, current, &mut reaches);
                    for r in &reaches {
                        let amps = feeds.currents[r.current];
                        let leg = c.leg_area(unit, amps / unit);
                        for (l, &(error, variance)) in lines[..2].iter().enumerate() {
                            let (v, e) = (r.variance[variance], r.error[error]);
                            if v == NOWHERE || e == NOWHERE {
                                continue;
                            }
                            // By the level delivered: cheap ones and accurate ones both count.
                            let kind = 1 + r.input * 64 + usize::from(v) * 4 + usize::from(e);
                            for (w, weight) in INPUT_WEIGHTS.iter().enumerate() {
                                enter((kind, r.current, l, w), leg + weight * input, index);
                            }
                        }
                    }
                }
                contests
                    .into_values()
                    .flatten()
                    .map(|(_, index)| index)
                    .collect()
            })
            .collect();
        let mut list: Vec<usize> = winners.into_iter().flatten().collect();
        list.sort_unstable();
        list.dedup();
        list
    })
}

/// Column generation over `subset` of the pool: rounds of master and scan until no column of
/// reduced cost below a five-hundredth of the value is left, or `rounds` are over. Returns the
/// columns with those of the master's own choice first, and the number of rounds.
pub fn generate(
    ledger: &Ledger,
    feeds: &Feeds,
    subset: &[Vec<usize>; 2],
    charge: f64,
    rounds: usize,
    stop: &std::sync::atomic::AtomicBool,
) -> (Vec<Column>, usize) {
    const TAKEN: usize = 60;
    let mut columns: Vec<Column> = Vec::new();
    let mut weights: Vec<f64> = Vec::new();
    let mut done = 0;
    while done < rounds && !stop.load(std::sync::atomic::Ordering::Relaxed) {
        let Some(relaxed) = super::master::relax(ledger, feeds, &columns, charge) else {
            break;
        };
        done += 1;
        weights = relaxed.weights;
        let (new, least) = price(ledger, feeds, &relaxed.prices, 1e-12, subset);
        if new.is_empty() || -least < 0.002 * relaxed.value {
            break;
        }
        columns.extend(new.into_iter().take(TAKEN));
    }
    weights.resize(columns.len(), 0.0);
    let mut order: Vec<usize> = (0..columns.len()).collect();
    order.sort_by(|&a, &b| weights[b].total_cmp(&weights[a]).then(a.cmp(&b)));
    (
        order.into_iter().map(|k| columns[k].clone()).collect(),
        done,
    )
}
