//! The words of a report, in one place: labels, sentences and cautions that several formats share.

use super::{format, view};
use crate::explore::{
    Advice, Broken, Change, Explanation, Impossible, NetworkReport, Outcome, Status,
};
use crate::spec::{AccuracyOf, Flow, Output, Rail, Reference, Target};
use crate::units;

/// Cautions that every report carries.
pub const CAUTIONS: [&str; 3] = [
    "Every figure here is a model-level estimate. It rests on the parameters of the process card \
     and on nothing else.",
    "Before layout, confirm with the foundry's qualified models, design rules, electromigration \
     limits and sign-off.",
    "Where a product's safety depends on one of these currents, the applicable standards and a \
     licensed engineer decide.",
];

/// A catalogue name as people read it: underscores become spaces.
pub fn label(name: &str) -> String {
    name.replace('_', " ")
}

/// "sink" or "source".
pub fn rail(rail: Rail) -> &'static str {
    match rail {
        Rail::Sink => "sink",
        Rail::Source => "source",
    }
}

/// "network" or "networks", and the like.
pub fn count(number: usize, noun: &str) -> String {
    format!("{number} {noun}{}", if number == 1 { "" } else { "s" })
}

/// How the exploration ended, as one sentence.
pub fn status(outcome: &Outcome) -> String {
    let found = outcome.front.len();
    match &outcome.status {
        Status::Found if found == 1 => {
            "Found: one network on the front; it meets every limit at every corner.".to_owned()
        }
        Status::Found => format!(
            "Found: {} on the front; each meets every limit at every corner.",
            count(found, "network")
        ),
        Status::Interrupted if found == 0 => {
            "Stopped early, before any network was found.".to_owned()
        }
        Status::Interrupted => format!(
            "Stopped early: {} found so far; each meets every limit at every corner, and a longer \
             run may find better ones.",
            count(found, "network")
        ),
        Status::NothingFits { broken, .. } if outcome.nearest.is_some() => format!(
            "Nothing fits: no network meets the spec. The nearest one breaks {}.",
            count(broken.len(), "limit")
        ),
        Status::NothingFits { .. } => {
            "Nothing fits: no network meets the spec, and none comes near enough to show."
                .to_owned()
        }
    }
}

/// Limits that the outcome reports as broken: those of `NothingFits`, or none.
pub fn broken(outcome: &Outcome) -> &[Broken] {
    match &outcome.status {
        Status::NothingFits { broken, .. } => broken,
        _ => &[],
    }
}

/// A broken limit as one sentence in the user's units.
pub fn broken_sentence(broken: &Broken) -> String {
    let subject = match &broken.output {
        Some(output) => format!("{output}: {}", label(&broken.figure)),
        None => label(&broken.figure),
    };
    let corner = broken
        .corner
        .as_ref()
        .map(|corner| format!(" at {corner}"))
        .unwrap_or_default();
    let way = if broken.value > broken.limit {
        "above"
    } else {
        "below"
    };
    let share = (broken.value - broken.limit).abs() / broken.limit.abs();
    let amount = if share.is_finite() {
        format!("{} {way}", format::percent(share))
    } else {
        way.to_owned()
    };
    format!(
        "{subject} is {}{corner}, {amount} its limit of {}.",
        format::quantity(broken.value, &broken.unit),
        format::quantity(broken.limit, &broken.unit),
    )
}

/// Why nothing fits and what would; `None` unless nothing does.
pub fn why(outcome: &Outcome) -> Option<&Explanation> {
    match &outcome.status {
        Status::NothingFits { why, .. } => Some(why),
        _ => None,
    }
}

/// A limit as a spec would state it, every digit kept: "5 210 um2", "1.4 %", "28.3 uA".
fn limit(value: f64, unit: &str) -> String {
    match unit {
        "m2" => format::area(value),
        "V" => format::volts(value),
        "1" => {
            let text = units::percent(value, 3);
            let number = text.trim_end_matches(" %");
            let short = if number.contains('.') {
                number.trim_end_matches('0').trim_end_matches('.')
            } else {
                number
            };
            format!("{short} %")
        }
        _ => units::exact(value, unit),
    }
}

/// The limit that a change is of: "area", "adc_ref accuracy", "reference range, high end".
fn limit_of(change: &Change) -> String {
    let owner = match (&change.output, &change.end) {
        (Some(output), _) => format!("{output} "),
        (None, Some(_)) => "reference ".to_owned(),
        (None, None) => String::new(),
    };
    let end = match &change.end {
        Some(end) => format!(", {end} end"),
        None => String::new(),
    };
    format!("{owner}{}{end}", change.key)
}

/// A change in the user's units: "area to 5 210 um2", "adc_ref accuracy to 1.4 %".
pub fn change(change: &Change) -> String {
    format!("{} to {}", limit_of(change), limit(change.to, &change.unit))
}

/// An advice as one sentence: what to change, from what, and what the network that shows it takes.
pub fn advice(advice: &Advice) -> String {
    let changes: Vec<String> = advice
        .changes
        .iter()
        .map(|c| format!("{} (from {})", change(c), limit(c.from, &c.unit)))
        .collect();
    let figure = |name: &str| {
        view::figure(&advice.network, name).map_or("-".to_owned(), |figure| {
            format::quantity(figure.value, &figure.unit)
        })
    };
    format!(
        "{}: a network of {} at {} of overhead current.",
        changes.join(" and "),
        figure("area"),
        figure("overhead_current"),
    )
}

/// What is impossible at any size, as one sentence.
pub fn impossible(impossible: &Impossible) -> String {
    let subject = match &impossible.output {
        Some(output) => format!("{output}: no network of any size can serve this output"),
        None => "No network of any size can keep this limit".to_owned(),
    };
    let nearest: Vec<String> = impossible.nearest.iter().map(change).collect();
    if nearest.is_empty() {
        format!("{subject}; none of its limits alone could give enough.")
    } else {
        format!(
            "{subject}; the nearest possible is {}.",
            nearest.join(", or ")
        )
    }
}

/// Whether something is impossible in itself or the limits collide, as one sentence.
pub fn cause(why: &Explanation) -> &'static str {
    if why.impossible.is_empty() {
        "Every output can be served alone: the limits collide with each other."
    } else {
        "Not a matter of budgets:"
    }
}

/// What introduces the advice: one limit at a time, several together, or none.
pub fn advice_title(why: &Explanation) -> &'static str {
    let together = why.advice.iter().any(|a| a.changes.len() > 1);
    match (why.advice.is_empty(), together) {
        (true, _) if !why.complete => "Stopped before it was known what would fit.",
        (true, _) => "No relaxation was found that a network could be verified for.",
        (false, true) => {
            "No limit alone is enough. Together these would do, the least found, verified at every \
             corner:"
        }
        (false, false) if !why.complete => {
            "Any one of these would do, the least found before the run was stopped, verified at \
             every corner:"
        }
        (false, false) => {
            "Any one of these would do, each the least found, verified at every corner:"
        }
    }
}

/// What an output is held to: "20.0 uA" or "2 x reference (20.0 uA)".
pub fn target(output: &Output, amps: f64) -> String {
    let current = format::engineering(amps, "A");
    match output.target {
        Target::Current(_) => current,
        Target::Ratio(ratio) => format!("{} x reference ({current})", format::number(ratio)),
    }
}

/// The accuracy asked of an output: "2.00 % of current, 3 sigma", or "not limited".
pub fn accuracy(output: &Output) -> String {
    match &output.accuracy {
        None => "not limited".to_owned(),
        Some(accuracy) => format!(
            "{} of {}, {} sigma",
            format::percent(accuracy.limit),
            match accuracy.of {
                AccuracyOf::Current => "current",
                AccuracyOf::Ratio => "ratio",
            },
            format::number(accuracy.sigma)
        ),
    }
}

/// The reference as the spec understands it, one sentence without its full stop.
pub fn reference(reference: &Reference) -> String {
    match *reference {
        Reference::Current {
            current,
            flows,
            range,
            copies,
            tolerance,
        } => {
            let flows = match flows {
                Flow::IntoNetwork => "into the network",
                Flow::OutOfNetwork => "out of the network",
            };
            let copies = if copies == 1 {
                String::new()
            } else {
                format!("{copies} x ")
            };
            let tolerance = if tolerance == 0.0 {
                "exact".to_owned()
            } else {
                format!("within {}", format::percent(tolerance))
            };
            format!(
                "{copies}{} {flows}, {tolerance}, pin at {} to {}",
                format::engineering(current.0, "A"),
                format::volts_number(range.least.0),
                format::volts(range.most.0),
            )
        }
        Reference::Resistor { current } => format!(
            "{} through a resistor from the supply",
            format::engineering(current.0, "A")
        ),
    }
}

/// Cells of a network with how many families use each, in order of first use:
/// "2 simple, 1 cascode".
pub fn cells(network: &NetworkReport) -> String {
    let mut counts: Vec<(&str, usize)> = Vec::new();
    for family in &network.families {
        match counts.iter_mut().find(|(cell, _)| *cell == family.cell) {
            Some((_, number)) => *number += 1,
            None => counts.push((&family.cell, 1)),
        }
    }
    let parts: Vec<String> = counts
        .iter()
        .map(|(cell, number)| format!("{number} {}", label(cell)))
        .collect();
    parts.join(", ")
}

/// Counters of the work done, each with its label; zero counters that say nothing are left out.
pub fn work(outcome: &Outcome) -> Vec<(String, u64)> {
    let work = &outcome.work;
    let mut rows: Vec<(String, u64)> = [
        ("family shapes in the sweep", work.shapes),
        ("excluded by closed forms", work.screened_out),
        ("solved at every corner", work.solved),
        ("DC solutions", work.dc_solutions),
        ("column-generation rounds", work.rounds),
        ("columns priced in", work.columns),
        ("MILPs proved optimal over their columns", work.milps_proved),
        ("MILPs stopped at their limit", work.milps_stopped),
        ("evaluations spent polishing", work.polish_evaluations),
        ("networks verified whole", work.networks_verified),
    ]
    .into_iter()
    .map(|(name, number)| (name.to_owned(), number))
    .collect();
    for (reason, number) in &work.not_converged {
        rows.push((format!("not converged: {reason}"), *number));
    }
    rows
}

/// Wraps text at spaces to lines of at most `width` characters; a longer word keeps its own line,
/// and a number stays with its unit.
pub fn wrap(text: &str, width: usize) -> Vec<String> {
    let mut lines = Vec::new();
    let mut line = String::new();
    for word in format::words(text) {
        let needed = line.chars().count() + usize::from(!line.is_empty()) + word.chars().count();
        if !line.is_empty() && needed > width {
            lines.push(std::mem::take(&mut line));
        }
        if !line.is_empty() {
            line.push(' ');
        }
        line.push_str(&word);
    }
    if !line.is_empty() {
        lines.push(line);
    }
    lines
}
