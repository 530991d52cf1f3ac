//! Real networks as the relaxed problem sees them: the mapping that a bound rests on, by which its
//! claim to cost no more is tested.

use super::merit::Gauge;
use super::relaxed::{Column, Real, Relaxed};
use crate::assembly::plan::{Clerk, Ledger, Plan, Tally};

/// The families of a plan. `tracked` is the climate whose variance is followed.
pub fn families(ledger: &Ledger, plan: &Plan, gauges: &[Gauge; 2], tracked: usize) -> Vec<Real> {
    let mut tally = Tally::new();
    Clerk::new(ledger).price(plan, &mut tally);
    plan.members
        .iter()
        .enumerate()
        .map(|(f, member)| {
            let candidate = ledger.candidate(member);
            let solved = &ledger.pool.shapes[member.rail as usize][candidate.index];
            Real {
                root: member.parent.is_none(),
                into: member.current,
                units: member.units,
                variance: tally.lines()[f].variance_at(tracked),
                density: gauges[member.rail as usize].density(solved),
                serves: (0..plan.legs.len())
                    .filter(|&k| plan.legs[k] == f)
                    .collect(),
            }
        })
        .collect()
}

/// The relaxed families that a plan maps onto; those outside the declared design space are left
/// out.
pub fn columns(relaxed: &Relaxed, plan: &Plan, families: &[Real]) -> Vec<Option<Column>> {
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
