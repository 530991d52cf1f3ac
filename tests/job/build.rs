//! Networks and plans put together by a test.

use biasloom::assembly::build;
use biasloom::assembly::plan::{Member, Plan};
use biasloom::cells::{CELLS, Shape};
use biasloom::network::{Job, Network};

/// A family that takes the reference itself, with the bias leg on another copy of it.
pub fn root(job: &Job, shape: &Shape, units: u32) -> Member {
    let current = job.spec.reference.current().0;
    Member {
        rail: job.spec.reference.rail(),
        candidate: 0,
        current,
        units,
        parent: None,
        bias: CELLS[shape.cell]
            .parts()
            .bias_leg
            .then_some((current, None)),
    }
}

/// The network of one family that serves every output.
pub fn one_family(job: &Job, shape: &Shape, units: u32) -> Network {
    let plan = Plan {
        members: vec![root(job, shape, units)],
        legs: vec![0; job.spec.outputs.len()],
    };
    build::build(job, &plan, &[*shape]).expect("the shape can be sized")
}
