//! Real networks as the relaxed problem sees them: the mapping that a bound rests on, by which its
//! claim to cost no more is tested.

use super::merit::Gauge;
use super::relaxed::{Real, Relaxed};
use crate::assembly::plan::{Clerk, Ledger, Plan, Tally};

/// The families of a plan.
pub fn families(ledger: &Ledger, plan: &Plan, gauges: &[Gauge; 2]) -> Vec<Real> {
    let mut tally = Tally::new();
    Clerk::new(ledger).price(plan, &mut tally);
    plan.members
        .iter()
        .enumerate()
        .map(|(f, member)| {
            let gauge = &gauges[member.rail as usize];
            let candidate = ledger.candidate(member);
            let solved = &ledger.pool.shapes[member.rail as usize][candidate.index];
            Real {
                root: member.parent.is_none(),
                into: member.current,
                units: member.units,
                variance: gauge.even(|c| tally.lines()[f].variance_at(c)),
                density: gauge.density(solved),
                serves: (0..plan.legs.len())
                    .filter(|&k| plan.legs[k] == f)
                    .collect(),
            }
        })
        .collect()
}

/// Areas of the relaxed families that a plan maps onto; `None` for those outside the declared design
/// space.
pub fn areas(relaxed: &Relaxed, plan: &Plan, families: &[Real]) -> Vec<Option<f64>> {
    plan.members
        .iter()
        .enumerate()
        .map(|(f, member)| {
            let children: Vec<&Real> = plan
                .members
                .iter()
                .zip(families)
                .filter(|(m, _)| m.parent == Some(f))
                .map(|(_, real)| real)
                .collect();
            relaxed.image(member.rail as usize, &families[f], &children)
        })
        .collect()
}
