//! Networks from elsewhere, priced as the search prices its own: `library.py` hands a general
//! optimiser's networks to this binary and gets area, overhead and violation back.
//!
//! `price SPEC [--families N] [--threads N]` writes one line of JSON about the genes, then reads
//! networks, one per line, genes separated by spaces; an empty line ends a batch. Each is answered
//! by a line `area overhead violation` (m^2, A, share of the limits): a plan on paper, priced by
//! the search's own clerk against the spec's own limits. A line that begins with `whole` is drawn,
//! snapped and solved as one circuit at every corner instead, and its violation is the one a
//! polished network is judged by.
//!
//! Genes that make no network are repaired: a family nothing hangs on is left out, a feed from a
//! family that is not there goes to one that is.

mod spec_file;

use biasloom::assembly::build::{build, shapes};
use biasloom::assembly::candidates::{Candidate, Want, wants};
use biasloom::assembly::columns::Feeds;
use biasloom::assembly::plan::{Clerk, Ledger, Member, Plan, Tally};
use biasloom::assembly::polish::excess;
use biasloom::cells::solved::{Climate, Solved, Solver};
use biasloom::cells::{CELLS, Shape};
use biasloom::network::Job;
use biasloom::network::bench::Bench;
use biasloom::network::corners::{climates, verified};
use biasloom::network::measure::{measure, trim_reference};
use biasloom::network::probes::{Pool, Probes};
use biasloom::numeric::scalar::{exp, ln};
use biasloom::spec::Rail;
use rayon::prelude::*;
use std::collections::{BTreeSet, HashMap};
use std::io::{BufRead, Write};
use std::sync::Mutex;

/// Shapes kept solved; beyond this the memory starts afresh.
const KEPT: usize = 30_000;
/// Shapes or networks of one task.
const CHUNK: usize = 16;
/// Violation of a network with a family that has no size, per such family: worse than any that
/// can be priced.
const NO_SIZE: f64 = 100.0;
/// Genes of one family, in the order of the line.
const PER_FAMILY: usize = 11;
/// Most units in an input leg, as in the search's own list.
const UNITS: f64 = 40.0;

/// A shape as a key: rail, cell and the bits of its sizes.
type Key = (usize, usize, [u64; 5]);

fn key(rail: Rail, shape: &Shape) -> Key {
    let sizes = [
        shape.length,
        shape.inversion,
        shape.cascode_length,
        shape.cascode_inversion,
        shape.drop,
    ];
    (rail as usize, shape.cell, sizes.map(f64::to_bits))
}

/// A network as its genes say, before its shapes are solved.
struct Draft {
    members: Vec<Member>,
    shapes: Vec<Shape>,
    legs: Vec<usize>,
}

/// What genes mean for one spec.
struct Encoding<'a> {
    job: Job<'a>,
    /// Families a network may have, root first, rails in turn: a family is fed by one before it.
    slots: Vec<Rail>,
    cells: Vec<usize>,
    /// Cells the root may be: without a bias leg where there is only one reference.
    root_cells: Vec<usize>,
    /// Input currents the search itself chooses among, A.
    currents: Vec<f64>,
}

impl Encoding<'_> {
    fn of_rail(&self, rail: Rail) -> usize {
        self.slots.iter().filter(|&&r| r == rail).count()
    }

    /// The genes as JSON: kind, least and largest value each. A `choice` has no order; a `whole` is
    /// an integer that has.
    fn header(&self) -> serde_json::Value {
        let mut genes = Vec::new();
        let mut gene = |name: String, kind: &str, least: f64, most: f64| {
            genes.push(serde_json::json!({
                "name": name, "kind": kind, "least": least, "most": most,
            }));
        };
        let last = |n: usize| n.saturating_sub(1) as f64;
        for (f, &rail) in self.slots.iter().enumerate() {
            let length = &self.job.tech(rail).mosfet().length;
            let (least, most) = (ln(length.least.0), ln(length.most.0));
            let name = |what: &str| format!("{what} {f}");
            let cells = if f == 0 {
                &self.root_cells
            } else {
                &self.cells
            };
            let feeders = last(self.of_rail(rail.opposite()));
            gene(name("cell"), "choice", 0.0, last(cells.len()));
            gene(name("length"), "real", least, most);
            gene(name("inversion"), "real", ln(0.01), ln(100.0));
            gene(name("cascode length"), "real", least, most);
            gene(name("cascode inversion"), "real", ln(0.01), ln(100.0));
            gene(name("drop"), "real", 0.0, 1.0);
            gene(name("current"), "whole", 0.0, last(self.currents.len()));
            gene(name("units"), "whole", 1.0, UNITS);
            gene(name("parent"), "choice", 0.0, feeders);
            gene(
                name("bias current"),
                "whole",
                0.0,
                last(self.currents.len()),
            );
            gene(name("bias parent"), "choice", 0.0, feeders);
        }
        for output in &self.job.spec.outputs {
            let homes = last(self.of_rail(output.rail));
            gene(format!("family of {}", output.name), "choice", 0.0, homes);
        }
        let limits = &self.job.spec.limits;
        serde_json::json!({
            "genes": genes,
            "per_family": PER_FAMILY,
            "families": self.slots.len(),
            "limits": [limits.area.map(|l| l.0), self.job.spec.overhead_limit()],
        })
    }

    /// Slots of `rail` before slot `before`.
    fn earlier(&self, rail: Rail, before: usize) -> Vec<usize> {
        (0..before).filter(|&s| self.slots[s] == rail).collect()
    }

    fn shape(&self, f: usize, genes: &[f64]) -> Shape {
        let rail = self.slots[f];
        let cells = if f == 0 {
            &self.root_cells
        } else {
            &self.cells
        };
        let cell = cells[(genes[0] as usize).min(cells.len() - 1)];
        let parts = CELLS[cell].parts();
        let cascode = |x: f64| if parts.cascode { exp(x) } else { 0.0 };
        let supply = self.job.spec.supply.least.0;
        let shape = Shape {
            cell,
            length: exp(genes[1]),
            inversion: exp(genes[2]),
            cascode_length: cascode(genes[3]),
            cascode_inversion: cascode(genes[4]),
            // The range a descent of the search has: a little less than the saturation voltage, or
            // something across a resistor; up to a third of the supply.
            drop: match (parts.drop, parts.cascode) {
                (false, _) => 0.0,
                (true, true) => -0.05 + genes[5] * (0.05 + supply / 3.0),
                (true, false) => 0.01 + genes[5] * (supply / 3.0 - 0.01),
            },
        };
        shape.snapped(&self.job.tech(rail))
    }

    fn draft(&self, genes: &[f64]) -> Draft {
        let of = |f: usize| &genes[f * PER_FAMILY..(f + 1) * PER_FAMILY];
        let reference = self.job.spec.reference.current().0;
        let pick = |list: &[usize], gene: f64| list[gene as usize % list.len()];
        let amps = |gene: f64| self.currents[(gene as usize).min(self.currents.len() - 1)];
        // Every slot as if it were there.
        let slots: Vec<(Member, Shape)> = (0..self.slots.len())
            .map(|f| {
                let (rail, genes) = (self.slots[f], of(f));
                let shape = self.shape(f, genes);
                let feeders = self.earlier(rail.opposite(), f);
                let parent = (f > 0).then(|| pick(&feeders, genes[8]));
                let takes_bias = CELLS[shape.cell].parts().bias_leg;
                let bias = takes_bias.then(|| match parent {
                    Some(_) => (amps(genes[9]), Some(pick(&feeders, genes[10]))),
                    None => (reference, None),
                });
                let member = Member {
                    rail,
                    candidate: 0,
                    current: if f == 0 { reference } else { amps(genes[6]) },
                    units: genes[7].clamp(1.0, UNITS) as u32,
                    parent,
                    bias,
                };
                (member, shape)
            })
            .collect();
        let legs: Vec<usize> = self
            .job
            .spec
            .outputs
            .iter()
            .zip(&genes[self.slots.len() * PER_FAMILY..])
            .map(|(o, &gene)| pick(&self.earlier(o.rail, self.slots.len()), gene))
            .collect();
        // Of these, what outputs hang on, directly or through others.
        let mut used = vec![false; slots.len()];
        used[0] = true;
        legs.iter().for_each(|&f| used[f] = true);
        for f in (0..slots.len()).rev().filter(|&f| f > 0) {
            if used[f] {
                let m = &slots[f].0;
                let feeds = [m.parent, m.bias.and_then(|b| b.1)];
                feeds.into_iter().flatten().for_each(|p| used[p] = true);
            }
        }
        let place: Vec<usize> = used
            .iter()
            .scan(0, |next, &used| {
                let here = *next;
                *next += usize::from(used);
                Some(here)
            })
            .collect();
        let mut draft = Draft {
            members: Vec::new(),
            shapes: Vec::new(),
            legs: legs.iter().map(|&f| place[f]).collect(),
        };
        for (f, (mut member, shape)) in slots.into_iter().enumerate() {
            if used[f] {
                member.parent = member.parent.map(|p| place[p]);
                member.bias = member.bias.map(|(a, p)| (a, p.map(|p| place[p])));
                draft.members.push(member);
                draft.shapes.push(shape);
            }
        }
        draft
    }
}

/// Shapes solved so far, digested.
struct Shelf<'a> {
    job: Job<'a>,
    wants: Vec<Want>,
    climates: Vec<Climate>,
    pool: Pool,
    candidates: [Vec<Candidate>; 2],
    /// Place on its rail's shelf; `None` where a shape has no solution.
    known: HashMap<Key, Option<usize>>,
    /// One set of solvers per thread: each starts from the last shape it solved.
    solvers: Vec<Mutex<HashMap<(usize, usize), Solver<'a>>>>,
}

impl<'a> Shelf<'a> {
    fn new(job: Job<'a>) -> Shelf<'a> {
        let threads = rayon::current_num_threads();
        Shelf {
            job,
            wants: wants(&job, 1.0),
            climates: climates(&job),
            pool: Pool {
                probes: [Rail::Sink, Rail::Source].map(|r| Probes::of(&job, r)),
                shapes: [Vec::new(), Vec::new()],
            },
            candidates: [Vec::new(), Vec::new()],
            known: HashMap::new(),
            solvers: (0..threads).map(|_| Mutex::new(HashMap::new())).collect(),
        }
    }

    fn ledger(&self) -> Ledger<'_> {
        // As in the search: nominal currents are a little less than those of the worst corner.
        let budget = self.job.spec.overhead_limit() * 0.997;
        Ledger::new(self.job, &self.pool, &self.candidates, 1.0, budget)
    }

    fn solve(&self, rail: Rail, shape: &Shape) -> Option<Solved> {
        let thread = rayon::current_thread_index().unwrap_or(0);
        let mut solvers = self.solvers[thread].lock().expect("no solver panics");
        let solver = solvers
            .entry((rail as usize, shape.cell))
            .or_insert_with(|| {
                Solver::new(
                    self.job.tech(rail),
                    shape.cell,
                    self.job.spec.reference.current().0,
                    &self.pool.probes[rail as usize].volts,
                    &self.climates,
                )
            });
        solver.solve(shape).ok()
    }

    /// Solves every shape of some drafts that is not known yet.
    fn learn(&mut self, drafts: &[Draft]) {
        if self.known.len() > KEPT {
            self.known.clear();
            self.pool.shapes = [Vec::new(), Vec::new()];
            self.candidates = [Vec::new(), Vec::new()];
        }
        let mut seen = BTreeSet::new();
        let mut new: Vec<(Key, Rail, Shape)> = drafts
            .iter()
            .flat_map(|d| d.members.iter().zip(&d.shapes))
            .map(|(m, s)| (key(m.rail, s), m.rail, *s))
            .filter(|(k, ..)| !self.known.contains_key(k) && seen.insert(*k))
            .collect();
        // Neighbours in size one after the other: positive numbers sort as their bits do.
        new.sort_by_key(|n| n.0);
        let shelf = &*self;
        let solved: Vec<Option<(Solved, Candidate)>> = new
            .par_iter()
            .with_min_len(CHUNK)
            .map(|(_, rail, shape)| {
                let solved = shelf.solve(*rail, shape)?;
                let probes = &shelf.pool.probes[*rail as usize];
                let digest = Candidate::new(&shelf.job, &shelf.wants, *rail, 0, &solved, probes);
                Some((solved, digest))
            })
            .collect();
        for ((key, rail, _), answer) in new.into_iter().zip(solved) {
            let place = answer.map(|(solved, mut candidate)| {
                let shapes = &mut self.pool.shapes[rail as usize];
                candidate.index = shapes.len();
                shapes.push(solved);
                self.candidates[rail as usize].push(candidate);
                shapes.len() - 1
            });
            self.known.insert(key, place);
        }
    }

    /// The draft as a plan over the shelf, or how many of its shapes have no solution.
    fn plan(&self, draft: &Draft) -> Result<Plan, usize> {
        let mut members = draft.members.clone();
        let mut missing = 0;
        for (member, shape) in members.iter_mut().zip(&draft.shapes) {
            match self.known[&key(member.rail, shape)] {
                Some(place) => member.candidate = place,
                None => missing += 1,
            }
        }
        if missing > 0 {
            return Err(missing);
        }
        Ok(Plan {
            members,
            legs: draft.legs.clone(),
        })
    }

    /// Area, overhead and violation on paper.
    fn on_paper(&self, clerk: &mut Clerk, tally: &mut Tally, draft: &Draft) -> [f64; 3] {
        match self.plan(draft) {
            Err(missing) => [1.0, 1.0, NO_SIZE * missing as f64],
            Ok(plan) => {
                let price = clerk.price(&plan, tally);
                let area = self.job.spec.limits.area;
                let over = area.map_or(0.0, |l| (price.area / l.0 - 1.0).max(0.0));
                [price.area, price.overhead, price.excess + over]
            }
        }
    }

    /// Area, worst overhead and violation of the drawn network, solved whole.
    fn whole(&self, bench: &mut Bench<'a>, draft: &Draft) -> Option<[f64; 3]> {
        let plan = self.plan(draft).ok()?;
        let ledger = self.ledger();
        let mut network = build(&self.job, &plan, &shapes(&ledger, &plan))?;
        trim_reference(&self.job, &mut network).ok()?;
        let measured = measure(&self.job, bench, &network).ok()?;
        let overhead = measured.overhead.iter().copied().fold(0.0, f64::max);
        let area = self.job.spec.limits.area;
        let over = area.map_or(0.0, |l| (measured.area / l.0 - 1.0).max(0.0));
        let excess = excess(&self.job, &measured, ledger.pin_to_ground(), 1.0);
        Some([measured.area, overhead, excess + over])
    }
}

fn encoding(job: Job<'_>, families: usize) -> Encoding<'_> {
    let root = job.spec.reference.rail();
    let wanted = |rail: Rail| job.spec.outputs.iter().filter(|o| o.rail == rail).count();
    let most = |rail: Rail| (wanted(rail) + 1).min(families);
    let mut slots = Vec::new();
    for k in 0..families {
        for rail in [root, root.opposite()] {
            if k < most(rail) {
                slots.push(rail);
            }
        }
    }
    let empty = Pool {
        probes: [Rail::Sink, Rail::Source].map(|r| Probes::of(&job, r)),
        shapes: [Vec::new(), Vec::new()],
    };
    let none = [Vec::new(), Vec::new()];
    let ledger = Ledger::new(job, &empty, &none, 1.0, job.spec.overhead_limit());
    let cells: Vec<usize> = (0..CELLS.len())
        .filter(|&c| job.card.resistor.is_some() || !CELLS[c].parts().resistor)
        .collect();
    Encoding {
        job,
        slots,
        root_cells: cells
            .iter()
            .copied()
            .filter(|&c| ledger.copies > 1 || !CELLS[c].parts().bias_leg)
            .collect(),
        cells,
        currents: Feeds::of(&ledger, 5).currents,
    }
}

fn main() {
    // `cargo bench` hands its own flag to every bench.
    let args: Vec<String> = std::env::args()
        .skip(1)
        .filter(|a| a != "--bench")
        .collect();
    let option = |name: &str, usual: usize| {
        let at = args.iter().position(|a| a == name);
        at.map_or(usual, |k| args[k + 1].parse().expect("a whole number"))
    };
    let Some(path) = args.first().filter(|a| !a.starts_with('-')) else {
        // Run with all other benches: nothing to price.
        return;
    };
    let threads = option("--threads", 0);
    rayon::ThreadPoolBuilder::new()
        .num_threads(threads)
        .build_global()
        .expect("threads can be started");
    let (spec, card) = spec_file::load(path);
    let job = Job {
        spec: &spec,
        card: &card,
    };
    serve(&encoding(job, option("--families", 6)));
}

fn serve(encoding: &Encoding) {
    let mut shelf = Shelf::new(encoding.job);
    let mut out = std::io::stdout().lock();
    let mut say = |text: String| {
        out.write_all(text.as_bytes())
            .and_then(|()| out.flush())
            .expect("somebody listens");
    };
    say(format!("{}\n", encoding.header()));
    let mut batch: Vec<String> = Vec::new();
    for line in std::io::stdin().lock().lines() {
        let line = line.expect("text");
        if !line.is_empty() {
            batch.push(line);
            continue;
        }
        let drafts: Vec<Draft> = batch
            .par_iter()
            .with_min_len(CHUNK)
            .map(|line| {
                let genes = line.trim_start_matches("whole");
                let genes: Vec<f64> = genes
                    .split_whitespace()
                    .map(|g| g.parse().expect("a number"))
                    .collect();
                encoding.draft(&genes)
            })
            .collect();
        shelf.learn(&drafts);
        let shelf = &shelf;
        let answers: Vec<[f64; 3]> = batch
            .par_chunks(CHUNK)
            .zip(drafts.par_chunks(CHUNK))
            .flat_map_iter(|(lines, drafts)| {
                let ledger = shelf.ledger();
                let (mut clerk, mut tally) = (Clerk::new(&ledger), Tally::new());
                let mut bench = None;
                let answers: Vec<[f64; 3]> = lines
                    .iter()
                    .zip(drafts)
                    .map(|(line, draft)| {
                        if line.starts_with("whole") {
                            let job = encoding.job;
                            let bench =
                                bench.get_or_insert_with(|| Bench::new(job, verified(&job)));
                            shelf.whole(bench, draft).unwrap_or([1.0, 1.0, NO_SIZE])
                        } else {
                            shelf.on_paper(&mut clerk, &mut tally, draft)
                        }
                    })
                    .collect();
                answers
            })
            .collect();
        let text: String = answers
            .iter()
            .map(|[a, o, v]| format!("{a:e} {o:e} {v:e}\n"))
            .collect();
        say(text);
        batch.clear();
    }
}
