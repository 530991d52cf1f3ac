//! How far a network is from the smallest possible: a lower bound on the area of every network of
//! the declared design space that meets the spec within the same overhead current.
//!
//! Floors of what area can buy ([`merit`]), a relaxed network that every real one maps onto
//! ([`relaxed`]), the best prices for its rows ([`ascent`]), and the mapping itself ([`image`]).
//! A certificate is the prices alone: whoever has the spec can check the bound with one pass over
//! the relaxed networks.

pub mod ascent;
pub mod exact;
pub mod image;
pub mod merit;
pub mod relaxed;

use crate::assembly::candidates::wants;
use crate::assembly::columns::{UNITS, currents};
use crate::cells::CELLS;
use crate::network::Job;
use crate::network::probes::Pool;
use crate::spec::Effort;
use relaxed::{Prices, Relaxed, Resolution};
use serde::Serialize;

/// Most prices of overhead current tried for a network where every output is told apart.
const STEPS: usize = 12;
/// What a nominal overhead current may differ from that of the worst corner, fraction.
const CORNERS: f64 = 0.01;

/// A proven lower bound and what proves it.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Certificate {
    /// No network of the declared design space that meets the spec within [`Certificate::overhead`]
    /// is smaller, m^2.
    pub area: f64,
    /// Overhead current that may be used, A.
    pub overhead: f64,
    /// Dual price of serving each output, m^2, in the order of the spec; none where outputs are few
    /// enough to be told apart.
    pub output_prices: Vec<f64>,
    /// Dual price of overhead current, m^2/A.
    pub overhead_price: f64,
}

/// What the bound covers, and what it does not.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Declared {
    /// Cells a network may be made of.
    pub cells: Vec<String>,
    /// Lengths, m, least and most, per rail (sink, source).
    pub lengths: [[f64; 2]; 2],
    /// Inversion coefficients, least and most.
    pub inversions: [f64; 2],
    /// Input currents of families, A.
    pub currents: Vec<f64>,
    /// Units in an input leg.
    pub units: Vec<u32>,
    /// Families in a chain from the reference at most.
    pub depth: usize,
    /// Largest systematic error of a gate line, as a share of the error limit of an output it serves.
    pub line_error: f64,
    /// Largest systematic error of a feeder leg, fraction.
    pub feeder_error: f64,
    /// How much an error on paper may differ from the whole circuit's, as a share of its limit.
    pub paper: f64,
}

/// The proof of a spec: its relaxed problem, ready to price.
pub struct Prover {
    relaxed: Relaxed,
    steps: usize,
    /// What is covered.
    pub declared: Declared,
    /// DC solutions spent on the floors.
    pub solutions: u64,
}

impl Prover {
    /// Finds the floors and sets up the relaxed problem; `None` where some output is served by no
    /// shape of the pool.
    pub fn new(job: &Job, pool: &Pool) -> Option<Prover> {
        let wants = wants(job, 1.0);
        let (density, levels, steps) = match (job.spec.search.effort, wants.len()) {
            (Effort::Thorough, ..=2) => (1.01, 300, 30),
            (_, ..=2) => (1.02, 100, 30),
            (Effort::Thorough, ..=exact::MOST) => (1.02, 200, 30),
            (_, ..=exact::MOST) => (1.05, 100, 30),
            (Effort::Quick | Effort::Normal, 31..) => (1.5, 40, 8),
            (Effort::Quick, _) => (1.2, 70, 30),
            (Effort::Normal, _) => (1.2, 70, 24),
            (Effort::Thorough, _) => (1.05, 280, 200),
        };
        let currents = currents(job, &wants, job.spec.overhead_limit());
        // Floors for every density are dear where outputs are many.
        let merits = merit::merits(job, pool, &wants, wants.len() <= exact::MOST);
        let relaxed = Relaxed::new(
            job,
            &wants,
            &merits,
            &currents,
            &UNITS,
            Resolution { density, levels },
        )?;
        let allowed = CELLS
            .iter()
            .enumerate()
            .filter(|(index, _)| pool.shapes.iter().flatten().any(|s| s.shape.cell == *index));
        Some(Prover {
            relaxed,
            steps,
            declared: Declared {
                cells: allowed.map(|(_, c)| c.name().to_owned()).collect(),
                lengths: [&job.card.nmos, &job.card.pmos]
                    .map(|m| [m.length.least.0, m.length.most.0]),
                inversions: merit::INVERSION,
                currents,
                units: UNITS.to_vec(),
                depth: relaxed::DEPTH,
                line_error: merit::LINE,
                feeder_error: merit::FEEDER,
                paper: relaxed::PAPER,
            },
            solutions: merits.solutions,
        })
    }

    /// Certificates for networks with these overhead currents (A, at the worst corner) and areas
    /// (m^2): the best prices found for each, shared among them.
    pub fn prove(&self, networks: &[(f64, f64)]) -> Vec<Certificate> {
        if self.relaxed.is_exact() {
            return self.prove_exact(networks);
        }
        let mut planes = Vec::new();
        let mut found: Vec<Prices> = Vec::new();
        let mut start = Prices {
            outputs: self.relaxed.guess(),
            overhead: 0.0,
        };
        if let Some((overhead, area)) = networks.first() {
            start.overhead = 0.2 * area / overhead;
        }
        for (i, (overhead, _)) in networks.iter().enumerate() {
            // The first climbs from afar, the others start where it ended.
            let (steps, radius) = if i == 0 {
                (self.steps, 0.3)
            } else {
                (self.steps / 10, 0.1)
            };
            let (prices, _) = ascent::ascend(
                &self.relaxed,
                overhead * (1.0 + CORNERS),
                &start,
                &mut planes,
                steps,
                radius,
            );
            start = prices.clone();
            found.push(prices);
        }
        // What roots cost does not hang on the budget: one pass per prices serves every network.
        let roots: Vec<f64> = found.iter().map(|p| self.relaxed.root_cost(p)).collect();
        networks
            .iter()
            .map(|&(overhead, _)| {
                let priced = found.iter().zip(&roots);
                priced
                    .map(|(prices, &roots)| certificate(prices, roots, overhead))
                    .reduce(|a, b| if b.area > a.area { b } else { a })
                    .expect("there are prices for every network")
            })
            .collect()
    }

    /// Certificates where every output is told apart: a price of overhead current for each network,
    /// by cutting planes in one dimension. A plane is the area and the overhead current of a
    /// relaxed network, and serves every budget.
    fn prove_exact(&self, networks: &[(f64, f64)]) -> Vec<Certificate> {
        let mut planes: Vec<(f64, f64)> = Vec::new();
        networks
            .iter()
            .map(|&(overhead, _)| {
                let budget = overhead * (1.0 + CORNERS);
                let promise = |planes: &[(f64, f64)], price: f64| {
                    planes
                        .iter()
                        .map(|(area, overhead)| area + price * (overhead - budget))
                        .fold(f64::INFINITY, f64::min)
                };
                let (mut best, mut price) = ((f64::NEG_INFINITY, 0.0), 0.0);
                for _ in 0..STEPS {
                    let cheapest = self.relaxed.cheapest(price);
                    let bound = cheapest.cost - price * budget;
                    if bound > best.0 {
                        best = (bound, price);
                    }
                    planes.push((cheapest.area, cheapest.overhead));
                    // The best price by the planes: where two of them meet, or none at all.
                    let mut places = vec![0.0, 100.0 * cheapest.area / budget];
                    for (n, a) in planes.iter().enumerate() {
                        let meets = planes[..n].iter().map(|b| (a.0 - b.0) / (b.1 - a.1));
                        places.extend(meets.filter(|p| p.is_finite() && *p > 0.0));
                    }
                    let next = places
                        .into_iter()
                        .map(|place| (promise(&planes, place), place))
                        .fold(
                            (f64::NEG_INFINITY, 0.0),
                            |a, b| if b.0 > a.0 { b } else { a },
                        );
                    if next.0 <= best.0 + 1e-4 * best.0.abs() {
                        break;
                    }
                    price = next.1;
                }
                Certificate {
                    area: best.0.max(0.0),
                    overhead,
                    output_prices: Vec::new(),
                    overhead_price: best.1,
                }
            })
            .collect()
    }

    /// How many outputs have a price: all, or none where they are few enough to be told apart.
    pub fn priced(&self) -> usize {
        self.relaxed.priced()
    }

    /// What prices prove at an overhead current, A. No prices of outputs: each is told apart.
    pub fn certificate(&self, prices: &Prices, overhead: f64) -> Certificate {
        if !prices.outputs.is_empty() {
            return certificate(prices, self.relaxed.root_cost(prices), overhead);
        }
        let cheapest = self.relaxed.cheapest(prices.overhead);
        Certificate {
            area: (cheapest.cost - prices.overhead * (overhead * (1.0 + CORNERS))).max(0.0),
            overhead,
            output_prices: Vec::new(),
            overhead_price: prices.overhead,
        }
    }
}

/// What prices prove at an overhead current, where roots cost so much.
fn certificate(prices: &Prices, roots: f64, overhead: f64) -> Certificate {
    Certificate {
        area: Relaxed::bound(prices, roots, overhead * (1.0 + CORNERS)).max(0.0),
        overhead,
        output_prices: prices.outputs.clone(),
        overhead_price: prices.overhead,
    }
}
