//! `biasloom check`: what a spec says, and a first estimate.

use super::Ended;
use super::input::{self, Input};
use super::shell::Shell;
use crate::diag::Diagnostics;
use crate::explore::{self, Estimate, OutputEstimate};
use crate::network::Job;
use crate::report::{devices, format, words};
use crate::spec::{Effort, Spec};
use clap::Args;
use std::path::PathBuf;

/// Read a spec back and say at once whether it looks feasible.
///
/// Shows every fault of the spec and of its process card; without faults, the requirements as
/// understood with every default spelt out, and which cells could serve each output in a coarse
/// sweep. Ends with 1 where an output has no cell at all.
#[derive(Debug, Args)]
#[command(after_help = "Example: biasloom check specs/tern.yaml")]
pub struct Check {
    /// The spec, a YAML file.
    spec: PathBuf,
}

impl Check {
    /// Runs the command.
    pub fn run(self, shell: &Shell) -> Result<Ended, Diagnostics> {
        let Input {
            spec,
            card,
            warnings,
        } = input::read(&self.spec)?;
        shell.faults(&warnings);
        let estimate = explore::estimate(&Job {
            spec: &spec,
            card: &card,
        });
        let width = shell.width();
        let mut text = understood(&spec, &card.title, width);
        text.push('\n');
        text.push_str(&requirements(&spec, &estimate, width));
        text.push('\n');
        text.push_str(&first_look(&estimate, width));
        shell.data(&text)?;
        if estimate
            .outputs
            .iter()
            .all(|output| !output.cells.is_empty())
        {
            Ok(Ended::Well)
        } else {
            Ok(Ended::Nothing)
        }
    }
}

/// What holds for the whole network.
fn understood(spec: &Spec, card_title: &str, width: usize) -> String {
    let temperature = &spec.temperature;
    let labels: Vec<String> = spec.trade.iter().map(|name| words::label(name)).collect();
    let rows = [
        ("process card", format!("{} ({card_title})", spec.card)),
        (
            "supply",
            format!(
                "{} to {}, nominal {}",
                format::volts_number(spec.supply.least.0),
                format::volts(spec.supply.most.0),
                format::volts((spec.supply.least.0 + spec.supply.most.0) / 2.0)
            ),
        ),
        (
            "temperature",
            format!(
                "{} to {}, nominal {}",
                format::celsius(temperature.least.0),
                format::celsius(temperature.most.0),
                format::celsius(temperature.nominal.0)
            ),
        ),
        ("corners", spec.corners.join(", ")),
        ("reference", words::reference(&spec.reference)),
        ("limits", limits(spec)),
        ("trade", labels.join(", ")),
        (
            "search",
            format!("{} effort, seed {}", effort(spec), spec.search.seed),
        ),
    ];
    let mut text = format!("{}\n\n", spec.title);
    for (label, value) in rows {
        let mut label = label;
        for line in words::wrap(&value, width.saturating_sub(14).max(20)) {
            text.push_str(&format!("{label:<12}  {line}\n"));
            label = "";
        }
    }
    text
}

fn effort(spec: &Spec) -> &'static str {
    match spec.search.effort {
        Effort::Quick => "quick",
        Effort::Normal => "normal",
        Effort::Thorough => "thorough",
    }
}

fn limits(spec: &Spec) -> String {
    let limits = &spec.limits;
    let show = |label: &str, value: Option<f64>, unit: &str| match value {
        Some(value) => format!("{label} {}", format::quantity(value, unit)),
        None => format!("{label} not limited"),
    };
    [
        show("area", limits.area.map(|v| v.0), "m2"),
        show(
            "overhead current",
            limits.overhead_current.map(|v| v.0),
            "A",
        ),
        show("power", limits.power.map(|v| v.0), "W"),
    ]
    .join(", ")
}

/// One row per output, and below it what is asked of it and which cells can serve it.
fn requirements(spec: &Spec, estimate: &Estimate, width: usize) -> String {
    let header = ["output", "kind", "number", "current", "pin from its rail"];
    let right = [false, false, true, false, false];
    let mut rows = vec![header.map(str::to_owned).to_vec()];
    for output in &spec.outputs {
        let range = &output.range;
        rows.push(vec![
            output.name.clone(),
            words::rail(output.rail).to_owned(),
            output.count.to_string(),
            words::target(output, spec.target(output).0),
            format!(
                "{} to {}",
                format::volts_number(range.least.0),
                format::volts(range.most.0)
            ),
        ]);
    }
    let table = devices::columns(&rows, None, &right);
    let mut lines = table.lines();
    // The header and its rule come first.
    let mut text: String = lines
        .by_ref()
        .take(2)
        .map(|line| format!("{line}\n"))
        .collect();
    let asked = spec.outputs.iter().zip(&estimate.outputs);
    for (line, (output, found)) in lines.zip(asked) {
        text.push_str(&format!("{line}\n"));
        let resistance = output.output_resistance.map_or(String::new(), |ohms| {
            format!(
                "; resistance at least {}",
                format::engineering(ohms.0, "Ohm")
            )
        });
        let detail = format!(
            "error {}{resistance}; {}",
            words::accuracy(output),
            cells(found)
        );
        for line in words::wrap(&detail, width.max(40) - 6) {
            text.push_str(&format!("      {line}\n"));
        }
    }
    text
}

/// Cells that can serve an output, cheapest first.
fn cells(output: &OutputEstimate) -> String {
    match output.cells.first() {
        None => "no cell".to_owned(),
        Some((_, least)) => {
            let names: Vec<&str> = output.cells.iter().map(|(name, _)| name.as_str()).collect();
            format!("cells from {}: {}", format::area(*least), names.join(", "))
        }
    }
}

fn first_look(estimate: &Estimate, width: usize) -> String {
    let hopeless: Vec<&str> = estimate
        .outputs
        .iter()
        .filter(|output| output.cells.is_empty())
        .map(|output| output.name.as_str())
        .collect();
    let mut lines = vec![
        "A first estimate from a coarse sweep: single cells were solved, no network. An area \
         is the least of one leg."
            .to_owned(),
    ];
    if !hopeless.is_empty() {
        lines.push(format!(
            "No cell can serve {}: ease the range, the accuracy or the output resistance.",
            hopeless.join(", ")
        ));
    } else if let (Some(area), Some(overhead)) = (estimate.area, estimate.overhead) {
        let verdict = if estimate.fits {
            "keeps every limit"
        } else {
            "does not keep every limit yet; a search may do better"
        };
        lines.push(format!(
            "A quick network on paper takes {} and {} of overhead current, and {verdict}.",
            format::area(area),
            format::engineering(overhead, "A")
        ));
    } else {
        lines.push(
            "Every output has a cell, but no quick network on paper was found; a search may find \
             one."
                .to_owned(),
        );
    }
    let wrapped: Vec<String> = lines
        .iter()
        .flat_map(|line| words::wrap(line, width))
        .collect();
    wrapped.join("\n") + "\n"
}
