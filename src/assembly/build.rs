//! From paper to drawing: a plan's shapes sized, snapped to the manufacturing grid, and joined.

use super::plan::{Ledger, Member, Plan, units_for};
use crate::cells::{CELLS, Shape};
use crate::network::{BiasLeg, Family, Job, Leg, Network, Source};
use crate::spec::Reference;

/// Draws a plan whose member `k` has shape `shapes[k]`. `None` where a shape cannot be sized.
pub fn build(job: &Job, plan: &Plan, shapes: &[Shape]) -> Option<Network> {
    sized(job, plan, shapes, true)
}

/// The same with every size as it is, off the manufacturing grid: no drawing, but what two
/// networks differ by is then not what rounding made of it.
pub fn build_exact(job: &Job, plan: &Plan, shapes: &[Shape]) -> Option<Network> {
    sized(job, plan, shapes, false)
}

fn sized(job: &Job, plan: &Plan, shapes: &[Shape], on_grid: bool) -> Option<Network> {
    let mut families: Vec<Family> = Vec::with_capacity(plan.members.len());
    for (member, shape) in plan.members.iter().zip(shapes) {
        let tech = job.tech(member.rail);
        let shape = if on_grid {
            shape.snapped(&tech)
        } else {
            *shape
        };
        let unit_current = member.current / f64::from(member.units);
        let mut unit = CELLS[shape.cell].unit(&tech, &shape, unit_current)?;
        if on_grid {
            unit = unit.snapped(&tech);
        }
        let source = |parent: Option<usize>, current: f64| match parent {
            None => Source::Reference,
            Some(parent) => {
                let from = &plan.members[parent];
                let unit = from.current / f64::from(from.units);
                Source::Family {
                    parent,
                    units: units_for(current, unit).0,
                }
            }
        };
        let bias = member.bias.and_then(|(current, parent)| {
            let mut size = unit.bias_size(&tech, current)?;
            if on_grid {
                size = size.snapped(&tech);
            }
            Some(BiasLeg {
                feed: source(parent, current),
                current,
                size,
            })
        });
        families.push(Family {
            rail: member.rail,
            shape,
            unit,
            input_units: member.units,
            input_current: member.current,
            feed: source(member.parent, member.current),
            bias,
        });
    }
    let legs = plan
        .legs
        .iter()
        .zip(&job.spec.outputs)
        .map(|(&family, output)| {
            let unit = families[family].unit_current();
            Leg {
                family,
                units: units_for(job.spec.target(output).0, unit).0,
            }
        })
        .collect();
    let reference_resistor = match job.spec.reference {
        Reference::Current { .. } => None,
        Reference::Resistor { current } => {
            let supply = crate::network::corners::nominal_supply(job);
            Some((supply - families[0].unit.expected.input).max(0.05) / current.0)
        }
    };
    Some(Network {
        families,
        legs,
        reference_resistor,
    })
}

/// Shapes of a plan's members as the pool has them.
pub fn shapes(ledger: &Ledger, plan: &Plan) -> Vec<Shape> {
    plan.members
        .iter()
        .map(|m| ledger.pool.shapes[m.rail as usize][ledger.candidate(m).index].shape)
        .collect()
}

/// The plan and the shapes a network was drawn from. Its members name no candidates: only a desk,
/// which gives every member a shape of its own, can use it.
pub fn plan_of(network: &Network) -> (Plan, Vec<Shape>) {
    let parent = |source: Source| match source {
        Source::Reference => None,
        Source::Family { parent, .. } => Some(parent),
    };
    let members = network
        .families
        .iter()
        .map(|family| Member {
            rail: family.rail,
            candidate: 0,
            current: family.input_current,
            units: family.input_units,
            parent: parent(family.feed),
            bias: family.bias.as_ref().map(|b| (b.current, parent(b.feed))),
        })
        .collect();
    let legs = network.legs.iter().map(|leg| leg.family).collect();
    let shapes = network.families.iter().map(|f| f.shape).collect();
    (Plan { members, legs }, shapes)
}
