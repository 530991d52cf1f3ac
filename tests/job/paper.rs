//! A network on paper against the same network solved as one circuit, and a change of one family
//! against the whole priced anew.

use super::Task;
use biasloom::assembly::build::{build, shapes};
use biasloom::assembly::candidates::{Candidate, wants};
use biasloom::assembly::plan::{Clerk, Ledger, Member, Plan, Tally};
use biasloom::cells::CELLS;
use biasloom::network::Job;
use biasloom::network::bench::Bench;
use biasloom::network::corners::verified;
use biasloom::network::measure::measure;
use biasloom::network::probes::Pool;
use biasloom::network::work::Work;
use biasloom::search::pool::sweep;
use biasloom::spec::{Effort, Rail};
use biasloom::units::Metre;
use rand::{Rng, SeedableRng};
use rand_pcg::Pcg64;
use std::sync::atomic::AtomicBool;

const UNITS: [u32; 8] = [1, 2, 3, 4, 5, 8, 10, 20];

fn swept(job: &Job) -> Pool {
    let stop = AtomicBool::new(false);
    sweep(job, &mut Work::default(), &|_, _| {}, &stop)
}

/// Random plans over a ledger.
struct Dice<'l, 'a> {
    ledger: &'l Ledger<'a>,
    rng: Pcg64,
    /// Only shapes that some output of the rail could use.
    sober: bool,
}

impl Dice<'_, '_> {
    fn candidate(&mut self, rail: Rail) -> usize {
        let all = &self.ledger.candidates[rail as usize];
        loop {
            let k = self.rng.random_range(0..all.len());
            if !self.sober || all[k].outputs.iter().any(Option::is_some) {
                return k;
            }
        }
    }

    fn current(&mut self) -> f64 {
        let reference = self.ledger.job.spec.reference.current().0;
        reference * [0.1, 0.2, 0.5, 1.0, 2.0][self.rng.random_range(0..5)]
    }

    /// A family fed by an earlier one on the other rail, or by the reference.
    fn member(&mut self, before: &[Member]) -> Member {
        let spec = self.ledger.job.spec;
        let root = spec.reference.rail();
        let parent = (!before.is_empty()).then(|| self.rng.random_range(0..before.len()));
        let rail = parent.map_or(root, |p| before[p].rail.opposite());
        let candidate = loop {
            let k = self.candidate(rail);
            let needs = self.ledger.candidates[rail as usize][k].needs_bias();
            if !(needs && parent.is_none() && self.ledger.copies < 2) {
                break k;
            }
        };
        let needs = self.ledger.candidates[rail as usize][candidate].needs_bias();
        let bias = needs.then(|| match parent {
            Some(p) => (self.current(), Some(p)),
            None => (spec.reference.current().0, None),
        });
        Member {
            rail,
            candidate,
            current: match parent {
                Some(_) => self.current(),
                None => spec.reference.current().0,
            },
            units: UNITS[self.rng.random_range(0..UNITS.len())],
            parent,
            bias,
        }
    }

    fn home(&mut self, members: &[Member], k: usize) -> Option<usize> {
        let homes: Vec<usize> = (0..members.len())
            .filter(|&f| members[f].rail == self.ledger.wants[k].rail)
            .collect();
        (!homes.is_empty()).then(|| homes[self.rng.random_range(0..homes.len())])
    }

    fn plan(&mut self, most: usize) -> Plan {
        loop {
            let mut members = Vec::new();
            for _ in 0..self.rng.random_range(2..=most) {
                let member = self.member(&members);
                members.push(member);
            }
            let legs: Option<Vec<usize>> = (0..self.ledger.wants.len())
                .map(|k| self.home(&members, k))
                .collect();
            if let Some(legs) = legs {
                return Plan { members, legs };
            }
        }
    }

    /// Changes what belongs to one family, and says which.
    fn change(&mut self, plan: &mut Plan) -> usize {
        let f = self.rng.random_range(0..plan.members.len());
        for _ in 0..self.rng.random_range(1..=3) {
            match self.rng.random_range(0..5) {
                0 => plan.members[f].units = UNITS[self.rng.random_range(0..UNITS.len())],
                1 if plan.members[f].parent.is_some() => plan.members[f].current = self.current(),
                2 => {
                    // Another shape, with a bias feed where it needs one.
                    let m = &plan.members[f];
                    let (rail, parent) = (m.rail, m.parent);
                    let k = self.candidate(rail);
                    let needs = self.ledger.candidates[rail as usize][k].needs_bias();
                    let bias = needs.then(|| match parent {
                        Some(p) => (self.current(), Some(p)),
                        None => (self.ledger.job.spec.reference.current().0, None),
                    });
                    plan.members[f].candidate = k;
                    plan.members[f].bias = bias;
                }
                3 if plan.members[f].parent.is_some() => {
                    let rail = plan.members[f].rail;
                    let others: Vec<usize> =
                        (0..f).filter(|&p| plan.members[p].rail != rail).collect();
                    let p = others[self.rng.random_range(0..others.len())];
                    plan.members[f].parent = Some(p);
                }
                _ => {
                    // An output comes to this family.
                    let k = self.rng.random_range(0..plan.legs.len());
                    if self.ledger.wants[k].rail == plan.members[f].rail {
                        plan.legs[k] = f;
                    }
                }
            }
        }
        f
    }
}

/// The spec's pool with sizes that snap to nothing coarser than a femtometre.
fn finely_drawn(name: &str) -> (Task, impl Fn(&Task) -> Pool) {
    let mut task = Task::shipped(name, Effort::Quick);
    task.card.nmos.grid = Metre(1e-15);
    task.card.pmos.grid = Metre(1e-15);
    (task, |task: &Task| swept(&task.job()))
}

/// The paper adds up relative errors and variances along a path, to first order, and reads feeders
/// off a ladder with straight rungs. Its area is that of the drawing to the last digits. Where an
/// output keeps its limit, its error is the circuit's within 5 % of the limit; up to three times
/// the limit it is never rosier than the circuit by more than 2 %. It may be gloomier where a
/// feeder lives on its last millivolts, below the lowest rung; that must stay rare.
#[test]
fn paper_agrees_with_the_whole_circuit() {
    let (mut compared, mut gloomy, mut near, mut rosy) = (0u32, 0u32, 0.0f64, 0.0f64);
    for (name, seed) in [
        ("starter", 21),
        ("low-voltage", 22),
        ("nanoamp", 23),
        ("tern", 24),
    ] {
        let (task, pool) = finely_drawn(name);
        let pool = pool(&task);
        let job = task.job();
        let all = Candidate::all(&job, &wants(&job, 1.0), &pool);
        let ledger = Ledger::new(job, &pool, &all, 1.0, f64::INFINITY);
        let unasked = Candidate::all(&job, &wants(&job, 1e6), &pool);
        let loose = Ledger::new(job, &pool, &unasked, 1e6, f64::INFINITY);
        let mut loose_clerk = Clerk::new(&loose);
        let mut clerk = Clerk::new(&ledger);
        let mut tally = Tally::new();
        let mut bench = Bench::new(job, verified(&job));
        let mut dice = Dice {
            ledger: &ledger,
            rng: Pcg64::seed_from_u64(seed),
            sober: true,
        };
        let mut measured_here = 0;
        for _ in 0..200_000 {
            if measured_here == 30 {
                break;
            }
            let plan = dice.plan(4);
            let price = clerk.price(&plan, &mut tally);
            let shares: Vec<f64> = tally
                .error_shares()
                .iter()
                .map(|e| e[0].max(e[1]))
                .collect();
            // Every limit but those of the outputs is kept: bias legs fed well, units drawable, the
            // pin in its range.
            let kept = loose_clerk.price(&plan, &mut Tally::new()).excess == 0.0;
            if !kept || shares.iter().all(|&s| s > 3.0 || s == 0.0) {
                continue;
            }
            // The mismatch of a degeneration resistor is read at the unit current of the sweep, so
            // it belongs to units of that size.
            if plan
                .members
                .iter()
                .any(|m| CELLS[ledger.candidate(m).cell].name() == "degenerated")
            {
                continue;
            }
            let network =
                build(&job, &plan, &shapes(&ledger, &plan)).expect("its shapes are solved");
            let Ok(measured) = measure(&job, &mut bench, &network) else {
                continue;
            };
            // A bias diode is sized for its own current when it is drawn, and snaps to the grid then.
            let drawn_later = plan.members.iter().any(|m| m.bias.is_some());
            let tolerance = if drawn_later { 1e-3 } else { 1e-9 };
            assert!(
                (price.area / measured.area - 1.0).abs() < tolerance,
                "{name}: {:e} {:e}",
                price.area,
                measured.area
            );
            measured_here += 1;
            for (k, &share) in shares.iter().enumerate() {
                let Some(limit) = measured.worst[k].limit.filter(|_| share > 0.0) else {
                    continue;
                };
                let circuit = measured.worst[k].error / limit;
                if share.max(circuit) <= 1.0 {
                    near = near.max((share - circuit).abs());
                } else if share.min(circuit) <= 3.0 {
                    rosy = rosy.max(circuit / share - 1.0);
                    gloomy += u32::from(share > 1.1 * circuit);
                } else {
                    continue;
                }
                compared += 1;
            }
        }
    }
    assert!(compared > 150, "{compared}");
    assert!(near < 0.05, "{near}");
    assert!(rosy < 0.02, "{rosy}");
    assert!(gloomy * 10 < compared, "{gloomy} of {compared}");
}

/// Pricing what a change touches must give, to the last bit, what pricing everything gives.
#[test]
fn a_change_of_one_family_is_priced_exactly() {
    for (name, resistor, seed) in [
        ("tern", false, 31),
        ("starter", true, 32),
        ("nanoamp", false, 33),
    ] {
        let mut task = Task::shipped(name, Effort::Quick);
        if resistor {
            task.spec.reference = biasloom::spec::Reference::Resistor {
                current: task.spec.reference.current(),
            };
        }
        let job = task.job();
        let pool = swept(&job);
        let all = Candidate::all(&job, &wants(&job, 1.0), &pool);
        let ledger = Ledger::new(job, &pool, &all, 1.0, 3.0 * job.spec.reference.current().0);
        let mut dice = Dice {
            ledger: &ledger,
            rng: Pcg64::seed_from_u64(seed),
            sober: false,
        };
        let mut clerk = Clerk::new(&ledger);
        let (mut base, mut scratch) = (Tally::new(), Tally::new());
        let mut different = 0;
        for _ in 0..60 {
            let mut plan = dice.plan(8);
            let mut price = clerk.price(&plan, &mut base);
            for _ in 0..60 {
                let mut next = plan.clone();
                let f = dice.change(&mut next);
                let quick = clerk.reprice(&next, &base, &mut scratch, f);
                let mut whole = Tally::new();
                let slow = Clerk::new(&ledger).price(&next, &mut whole);
                assert_eq!(quick, slow, "{name}: {plan:?} to {next:?}");
                assert_eq!(scratch.error_shares(), whole.error_shares());
                different += u32::from(quick != price);
                // Walk on from half of them.
                if dice.rng.random() {
                    (plan, price) = (next, quick);
                    std::mem::swap(&mut base, &mut scratch);
                }
            }
        }
        assert!(different > 2000, "{name}: {different}");
    }
}
