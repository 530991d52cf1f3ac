//! Speed of the search, from one shape to a whole spec: `cargo bench --bench search`.

mod spec_file;

use biasloom::assembly::build::{build, shapes};
use biasloom::assembly::candidates::{Candidate, wants};
use biasloom::assembly::columns::{Feeds, generate};
use biasloom::assembly::improve::{Menu, Search};
use biasloom::assembly::milp::{assemble, instances_of_columns};
use biasloom::assembly::plan::{Clerk, Ledger, Plan, Tally};
use biasloom::cells::solved::Solver;
use biasloom::cells::{CELLS, Shape, index_of};
use biasloom::explore::{Silent, explore};
use biasloom::network::bench::Bench;
use biasloom::network::corners::{climates, verified};
use biasloom::network::measure::measure;
use biasloom::network::probes::{Pool, Probes};
use biasloom::network::work::Work;
use biasloom::network::{Job, Network};
use biasloom::process::Card;
use biasloom::search::pool::sweep;
use biasloom::spec::{Effort, Rail, Spec};
use divan::counter::ItemsCount;
use divan::{Bencher, black_box};
use std::sync::OnceLock;
use std::sync::atomic::AtomicBool;

fn main() {
    divan::main();
}

/// A shipped spec with its card.
fn shipped(name: &str, effort: Effort) -> (Spec, Card) {
    let path = format!("{}/specs/{name}.yaml", env!("CARGO_MANIFEST_DIR"));
    let (mut spec, card) = spec_file::load(&path);
    spec.search.effort = effort;
    (spec, card)
}

/// Tern with its shelf of shapes, made once.
struct Table {
    job: Job<'static>,
    pool: Pool,
    candidates: [Vec<Candidate>; 2],
}

impl Table {
    fn ledger(&'static self) -> Ledger<'static> {
        let limit = self.job.spec.overhead_limit();
        Ledger::new(self.job, &self.pool, &self.candidates, 1.0, limit)
    }
}

fn table() -> &'static Table {
    static TABLE: OnceLock<Table> = OnceLock::new();
    TABLE.get_or_init(|| {
        let task: &'static (Spec, Card) = Box::leak(Box::new(shipped("tern", Effort::Quick)));
        let job = Job {
            spec: &task.0,
            card: &task.1,
        };
        let never = AtomicBool::new(false);
        let pool = sweep(&job, &mut Work::default(), &|_, _| {}, &never);
        let candidates = Candidate::all(&job, &wants(&job, 1.0), &pool);
        Table {
            job,
            pool,
            candidates,
        }
    })
}

/// A network of tern's as local search first finds it.
fn plan() -> &'static Plan {
    static PLAN: OnceLock<Plan> = OnceLock::new();
    PLAN.get_or_init(|| {
        let ledger = table().ledger();
        let feeds = Feeds::of(&ledger, 5);
        let menu = Menu::of(&ledger, &feeds);
        let never = AtomicBool::new(false);
        let mut search = Search::new(&ledger, &menu, &never);
        let first = search.first();
        search.descend(first).plan
    })
}

/// One shape at tern's fifteen climates, an output leg at every end of a range.
#[divan::bench(args = CELLS.iter().map(|c| c.name()))]
fn one_shape_at_all_climates(bencher: Bencher, name: &str) {
    let job = table().job;
    let tech = job.tech(Rail::Sink);
    let cell = index_of(name).expect("a name of the catalogue");
    let parts = CELLS[cell].parts();
    let probes = Probes::of(&job, Rail::Sink);
    let climates = climates(&job);
    let mut solver = Solver::new(tech, cell, 10e-6, &probes.volts, &climates);
    // Neighbours on a grid, so that no solution is simply found again.
    let shapes: Vec<Shape> = (0..64)
        .map(|i| Shape {
            cell,
            length: 1e-6 * 1.05f64.powi(i % 8),
            inversion: 1.1f64.powi(i / 8),
            cascode_length: if parts.cascode { 0.5e-6 } else { 0.0 },
            cascode_inversion: if parts.cascode { 1.0 } else { 0.0 },
            drop: if parts.drop { 0.08 } else { 0.0 },
        })
        .collect();
    let mut next = 0;
    bencher.counter(ItemsCount::new(1usize)).bench_local(|| {
        next = (next + 1) % shapes.len();
        solver.solve(black_box(&shapes[next]))
    });
}

/// Tern on paper, from scratch.
#[divan::bench]
fn price_a_plan(bencher: Bencher) {
    let ledger = table().ledger();
    let mut clerk = Clerk::new(&ledger);
    let mut tally = Tally::new();
    let plan = plan();
    bencher.bench_local(|| clerk.price(black_box(plan), &mut tally));
}

/// Tern's network as one circuit at all thirty corners, at both ends of every range.
#[divan::bench]
fn measure_a_network(bencher: Bencher) {
    let table = table();
    let plan = plan();
    let network: Network = build(&table.job, plan, &shapes(&table.ledger(), plan)).expect("drawn");
    let mut bench = Bench::new(table.job, verified(&table.job));
    bencher.bench_local(|| measure(&table.job, &mut bench, black_box(&network)).is_ok());
}

/// The MILP over so many of the columns that column generation suggests for a spec.
#[divan::bench(
    args = ["starter 20", "starter 40", "starter 80", "sixty-four 40", "sixty-four 80", "sixty-four 160"],
    sample_count = 3,
    sample_size = 1,
)]
fn assemble_columns(bencher: Bencher, which: &str) {
    let (name, count) = which.split_once(' ').expect("a spec and a number");
    let count: usize = count.parse().expect("a spec and a number");
    let (spec, card) = shipped(name, Effort::Quick);
    let job = Job {
        spec: &spec,
        card: &card,
    };
    let never = AtomicBool::new(false);
    let pool = sweep(&job, &mut Work::default(), &|_, _| {}, &never);
    let candidates = Candidate::all(&job, &wants(&job, 1.0), &pool);
    let ledger = Ledger::new(job, &pool, &candidates, 1.0, spec.overhead_limit());
    let feeds = Feeds::of(&ledger, 5);
    let menu = Menu::of(&ledger, &feeds);
    let (columns, _) = generate(&ledger, &feeds, &menu.shapes, menu.charge / 3.0, 8, &never);
    let instances = instances_of_columns(&feeds, &columns[..columns.len().min(count)]);
    let mut clerk = Clerk::new(&ledger);
    bencher.bench_local(|| assemble(&mut clerk, black_box(&instances), 60).map(|a| a.area));
}

/// All of it.
#[divan::bench(args = ["quick", "normal"], sample_count = 1, sample_size = 1)]
fn tern(bencher: Bencher, effort: &str) {
    let effort = match effort {
        "quick" => Effort::Quick,
        _ => Effort::Normal,
    };
    let (spec, card) = shipped("tern", effort);
    let job = Job {
        spec: &spec,
        card: &card,
    };
    let never = AtomicBool::new(false);
    bencher.bench_local(|| explore(&job, &Silent, &never).front.len());
}
