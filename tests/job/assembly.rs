//! The assembly's MILP against exhaustive enumeration: every choice of open instances, every leg
//! where it is cheapest. The authority is the enumeration itself.

use super::Task;
use biasloom::assembly::milp::{Instance, SHARE_SLACK, VARIANCE_SLACK, assemble, instances};
use biasloom::assembly::plan::{Clerk, Plan, units_for};
use biasloom::assembly::workshop::Workshop;
use biasloom::network::work::Work;
use biasloom::search::pool::sweep;
use biasloom::spec::Effort;
use std::sync::atomic::AtomicBool;

/// Instances in a small problem: two to this power choices are enumerated.
const SMALL: usize = 10;
/// The solver counts an answer as proved within this relative gap.
const GAP: f64 = 1e-3;

/// Least area over all choices of open instances, m^2; infinite where none serves every output.
fn exhaustive(clerk: &mut Clerk, list: &[Instance], budget: f64) -> f64 {
    let ledger = clerk.ledger;
    let unit = |i: &Instance| i.member.current / f64::from(i.member.units);
    let leg = |i: &Instance, amps: f64| {
        let (units, _) = units_for(amps, unit(i));
        ledger
            .candidate(&i.member)
            .leg_area(unit(i), f64::from(units))
    };
    // Area of every leg that may be drawn.
    let serving: Vec<Vec<f64>> = (0..ledger.wants.len())
        .map(|k| {
            let want = &ledger.wants[k];
            list.iter()
                .map(|i| {
                    let may = i.member.rail == want.rail
                        && clerk.serves(&i.member, &i.line, k, SHARE_SLACK);
                    if may {
                        want.count * leg(i, want.current)
                    } else {
                        f64::INFINITY
                    }
                })
                .collect()
        })
        .collect();
    let mut feeding = vec![vec![f64::INFINITY; list.len()]; list.len()];
    let mut biasing = feeding.clone();
    for (t, taker) in list.iter().enumerate() {
        for (g, giver) in list.iter().enumerate() {
            if giver.member.rail == taker.member.rail {
                continue;
            }
            let (_, rounding) = units_for(taker.member.current, unit(giver));
            if rounding.abs() < 1e-3 && clerk.feeds(giver, taker, VARIANCE_SLACK) {
                feeding[t][g] = leg(giver, taker.member.current);
            }
            if let Some((amps, _)) = taker.member.bias
                && giver.line.less(&taker.line)
            {
                biasing[t][g] = leg(giver, amps);
            }
        }
    }
    let mut best = f64::INFINITY;
    for choice in 1u32..1 << list.len() {
        let open: Vec<usize> = (0..list.len()).filter(|&f| choice >> f & 1 == 1).collect();
        let least = |ways: &[f64]| open.iter().map(|&g| ways[g]).fold(f64::INFINITY, f64::min);
        let (mut area, mut overhead, mut references) = (0.0, 0.0, 0);
        for &f in &open {
            let i = &list[f];
            let bias = i.member.bias.map_or(0.0, |b| b.0);
            area +=
                ledger
                    .candidate(&i.member)
                    .input_area(unit(i), f64::from(i.member.units), bias);
            overhead += i.member.current + bias;
            if i.root {
                references += 1 + usize::from(i.member.bias.is_some());
            } else {
                area += least(&feeding[f]);
                if i.member.bias.is_some() {
                    area += least(&biasing[f]);
                }
            }
        }
        if references > ledger.copies || overhead > budget * (1.0 + 1e-9) {
            continue;
        }
        area += serving.iter().map(|ways| least(ways)).sum::<f64>();
        best = best.min(area);
    }
    best
}

#[test]
fn the_milp_finds_what_enumeration_finds() {
    let stop = AtomicBool::new(false);
    let (mut compared, mut solved) = (0, 0);
    for name in ["starter", "low-voltage", "nanoamp", "tern"] {
        let task = Task::shipped(name, Effort::Quick);
        let job = task.job();
        let pool = sweep(&job, &mut Work::default(), &|_, _| {}, &stop);
        let limit = job
            .spec
            .overhead_limit()
            .min(10.0 * job.spec.reference.current().0);
        let shop = Workshop::open(job, &pool, 1.0, limit, 5, &stop);
        // Families of networks for several budgets, mixed.
        let budgets: Vec<f64> = (0..5).map(|i| limit * 0.8_f64.powi(i)).collect();
        let plans: Vec<Plan> = budgets
            .iter()
            .enumerate()
            .map(|(i, &b)| shop.search(b, &[], true, 0, i as u64).plan)
            .collect();
        for (start, &budget) in budgets.iter().enumerate() {
            let ledger = shop.ledger(budget);
            let mut clerk = Clerk::new(&ledger);
            let mixed: Vec<Plan> = (0..plans.len())
                .map(|i| plans[(start + i) % plans.len()].clone())
                .collect();
            let mut list = instances(&mut clerk, &mixed);
            list.truncate(SMALL);
            let truth = exhaustive(&mut clerk, &list, budget);
            let answer = assemble(&mut clerk, &list, 100_000);
            compared += 1;
            match answer {
                Some(answer) => {
                    assert!(answer.proved, "{name}: not proved");
                    let off = answer.area / truth - 1.0;
                    assert!(
                        off.abs() <= GAP,
                        "{name}: {:e} against {truth:e}",
                        answer.area
                    );
                    solved += 1;
                }
                None => assert!(
                    truth.is_infinite(),
                    "{name}: no answer, but {truth:e} exists"
                ),
            }
        }
    }
    assert!(
        compared >= 20 && solved >= 8,
        "{solved} of {compared} had an answer"
    );
}
