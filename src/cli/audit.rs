//! `biasloom audit`: the bounds of a front.json, checked again.

use super::Ended;
use super::input::{self, Input};
use super::shell::Shell;
use crate::diag::{Diagnostic, Diagnostics};
use crate::network::Job;
use crate::network::work::Work;
use crate::proof::Prover;
use crate::proof::relaxed::Prices;
use crate::report::{format, json};
use crate::search::pool::sweep;
use crate::spec::Effort;
use clap::Args;
use serde_json::Value;
use std::path::{Path, PathBuf};
use std::sync::atomic::AtomicBool;

/// Check the lower bounds of a front.json again, from the spec and the dual prices alone.
///
/// Finds the floors of the spec anew and scans the whole declared design space once per bound, at
/// the prices that stand in the file. Ends with 1 where a bound claims more than its prices prove,
/// or the file holds none.
#[derive(Debug, Args)]
#[command(after_help = "Example: biasloom audit specs/tern.yaml results/tern/front.json")]
pub struct Audit {
    /// The spec, a YAML file.
    spec: PathBuf,
    /// The front.json that was written for it.
    front: PathBuf,
}

/// How far a bound may exceed what its prices prove: the digits of the file.
const DIGITS: f64 = 1e-9;

impl Audit {
    /// Runs the command.
    pub fn run(self, shell: &Shell) -> Result<Ended, Diagnostics> {
        let Input {
            mut spec,
            card,
            warnings,
        } = input::read(&self.spec)?;
        shell.faults(&warnings);
        let file = Front::read(&self.front)?;
        spec.search.effort = file.effort;
        let job = Job {
            spec: &spec,
            card: &card,
        };
        let mut work = Work::default();
        let pool = sweep(&job, &mut work, &|_, _| {}, &AtomicBool::new(false));
        let Some(prover) = Prover::new(&job, &pool) else {
            return Err(
                file.fault("is for another spec: an output of this one can be served by nothing")
            );
        };
        let mut text = String::new();
        let mut well = !file.bounds.is_empty();
        if !well {
            text.push_str("There is no bound in the file.\n");
        }
        for bound in &file.bounds {
            if bound.prices.outputs.len() != prover.priced() {
                return Err(file.fault("is for another spec: it prices another number of outputs"));
            }
            let proved = prover.certificate(&bound.prices, bound.overhead).area;
            let holds = bound.area <= proved * (1.0 + DIGITS);
            well &= holds;
            text.push_str(&format!(
                "network {}: at least {} within {} of overhead current {}\n",
                bound.rank,
                format::quantity(bound.area, "m2"),
                format::quantity(bound.overhead, "A"),
                if holds {
                    "holds".to_owned()
                } else {
                    format!(
                        "does not hold: the prices prove {}",
                        format::quantity(proved, "m2")
                    )
                }
            ));
        }
        shell.data(&text)?;
        Ok(if well { Ended::Well } else { Ended::Nothing })
    }
}

/// What an audit needs of a front.json.
struct Front {
    path: PathBuf,
    effort: Effort,
    bounds: Vec<Claim>,
}

/// A bound as the file claims it.
struct Claim {
    rank: u64,
    area: f64,
    overhead: f64,
    prices: Prices,
}

impl Front {
    fn read(path: &Path) -> Result<Front, Diagnostics> {
        let shown = path.display();
        let text = std::fs::read_to_string(path).map_err(|error| {
            Diagnostic::error(format!("{shown} cannot be read: {error}"))
                .hint("name the front.json that `biasloom explore` wrote")
        })?;
        let value: Value = serde_json::from_str(&text).map_err(|error| {
            Diagnostic::error(format!(
                "{shown}:{}:{}: this is no JSON: {error}",
                error.line(),
                error.column()
            ))
            .hint("name the front.json that `biasloom explore` wrote")
        })?;
        let mut front = Front {
            path: path.to_owned(),
            effort: Effort::Normal,
            bounds: Vec::new(),
        };
        if value["format"] != json::NAME {
            return Err(front.fault("is not a front of biasloom"));
        }
        front.effort = match value["spec"]["effort"].as_str() {
            Some("quick") => Effort::Quick,
            Some("normal") => Effort::Normal,
            Some("thorough") => Effort::Thorough,
            _ => return Err(front.fault("does not say at which effort it was made")),
        };
        let list = value["proof"]["bounds"]
            .as_array()
            .cloned()
            .unwrap_or_default();
        for item in &list {
            let number = |key: &str| item[key].as_f64().filter(|v| v.is_finite() && *v >= 0.0);
            let outputs: Option<Vec<f64>> = item["output_prices"]
                .as_array()
                .and_then(|list| list.iter().map(Value::as_f64).collect());
            let (Some(rank), Some(area), Some(overhead), Some(outputs), Some(price)) = (
                item["rank"].as_u64(),
                number("area"),
                number("overhead_current"),
                outputs,
                number("overhead_price"),
            ) else {
                return Err(front.fault("holds a bound without all of its numbers"));
            };
            front.bounds.push(Claim {
                rank,
                area,
                overhead,
                prices: Prices {
                    outputs,
                    overhead: price,
                },
            });
        }
        Ok(front)
    }

    fn fault(&self, what: &str) -> Diagnostics {
        Diagnostic::error(format!("{} {what}", self.path.display()))
            .hint("name the front.json that `biasloom explore` wrote for this spec")
            .into()
    }
}
