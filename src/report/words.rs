//! The words of a report, in one place: labels, sentences and cautions that several formats share.

use super::{format, view};
use crate::explore::{
    Advice, Broken, Change, Chosen, Explanation, Impossible, Limit, LimitPrice, NetworkReport,
    Outcome, Prices, Proof, Status, Step, Verdict,
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
pub fn limit(value: f64, unit: &str) -> String {
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
        advice
            .network
            .figure(name)
            .map_or("-".to_owned(), |figure| {
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

/// Why a front has no prices, as one sentence; `None` where it has, or where there is no front.
pub fn no_prices(outcome: &Outcome) -> Option<&'static str> {
    match outcome.status {
        _ if outcome.prices.is_some() || outcome.front.is_empty() => None,
        Status::Interrupted => Some("Stopped before the limits were priced."),
        _ => Some(
            "The limits have no prices: the sizes of the network to be priced did not come to rest \
             within them.",
        ),
    }
}

/// Which network is priced and why, and how.
pub fn prices_of(prices: &Prices) -> String {
    let rank = prices.rank;
    let why = match prices.chosen {
        Chosen::Knee => format!("network {rank}, the knee of the front"),
        Chosen::Asked => format!("network {rank}, as asked"),
        Chosen::Beyond { asked } => {
            format!("network {rank}, the knee of the front (there is no network {asked})")
        }
    };
    let held = if prices.held == 1.0 {
        String::new()
    } else {
        let share = format::percent(prices.held);
        format!(" Accuracy is held at {share} of the spec's limits, as this network was made.")
    };
    format!(
        "Prices of the limits, at {why}: its structure is held and its sizes are solved for again \
         with one limit stepped, against the same with no limit stepped. Changes of area below {} \
         cannot be told from zero.{held}",
        format::area(prices.noise)
    )
}

/// What is limited: "accuracy on preamp_tail", "overhead current". A low end of a range is the
/// headroom left to an output.
pub fn limited(price: &LimitPrice) -> String {
    let what = match price.limit {
        Limit::Accuracy(_) => "accuracy",
        Limit::LowEnd(_) => "headroom",
        Limit::HighEnd(_) => "top of the range",
        Limit::OutputResistance(_) => "output resistance",
        Limit::Area => "area",
        Limit::OverheadCurrent => "overhead current",
        Limit::Power => "power",
        Limit::PinLeast => "bottom of the reference's range",
        Limit::PinMost => "top of the reference's range",
    };
    match &price.output {
        Some(output) => format!("{what} on {output}"),
        None => what.to_owned(),
    }
}

/// A step of a limit: "1 % tighter", "10 mV less".
pub fn step(price: &LimitPrice, step: &Step) -> String {
    let change = step.to - price.value;
    let (up, down) = match price.limit {
        Limit::Accuracy(_) => ("looser", "tighter"),
        Limit::HighEnd(_) | Limit::PinLeast | Limit::PinMost => ("higher", "lower"),
        _ => ("more", "less"),
    };
    let way = if change > 0.0 { up } else { down };
    let amount = if price.limit.unit() == "V" {
        format::millivolts(change.abs())
    } else {
        let share = change.abs() / price.value * 100.0;
        format!("{share:.0} %")
    };
    format!("{amount} {way}")
}

/// A price as one sentence: "1 % tighter accuracy on adc_ref costs 210 um2."
pub fn price_sentence(prices: &Prices, price: &LimitPrice) -> String {
    let what = format!("{} {}", step(price, &price.tighter), limited(price));
    let amps = |overhead: f64| {
        // Held currents move by what is systematic in them: a hair, or worth saying.
        let told = overhead.abs() > 1e-3 * prices.overhead;
        let sign = if overhead < 0.0 { "less" } else { "more" };
        let amount = format::engineering(overhead.abs(), "A");
        told.then(|| format!("{amount} {sign} overhead current"))
    };
    let mut text = match price.tighter.verdict {
        Verdict::Free => return format!("{what} costs nothing{}.", free(price)),
        Verdict::Resized { area, .. } if area <= prices.noise => {
            return format!(
                "{what} costs nothing that could be told from zero{}.",
                free(price)
            );
        }
        Verdict::Resized {
            area,
            overhead,
            over_area,
        } => {
            let more = amps(overhead)
                .map(|a| format!(" and {a}"))
                .unwrap_or_default();
            let limit = if over_area {
                ", more than the area limit allows"
            } else {
                ""
            };
            format!("{what} costs {}{more}{limit}", format::area(area))
        }
        Verdict::Other {
            rank,
            area,
            overhead,
        } => {
            let sign = if area < 0.0 { "less" } else { "more" };
            let more = amps(overhead).map(|a| format!(", {a}")).unwrap_or_default();
            let area = format::area(area.abs());
            format!("{what} takes network {rank}: {area} {sign} area{more}")
        }
        Verdict::NotFound => {
            format!("{what} is kept neither by new sizes nor by another network of the front")
        }
        Verdict::NotAllowed => format!("{what} is no limit a spec can ask for"),
    };
    if let Some(looser) = &price.looser
        && let Verdict::Resized { area, .. } = looser.verdict
        && -area > prices.noise
    {
        let saved = format::area(-area);
        text.push_str(&format!("; {} saves {saved}", step(price, looser)));
    }
    text.push_str(&free(price));
    text.push('.');
    text
}

/// ", free to 0.243 V": how far a limit tightens for nothing; empty where it does not.
fn free(price: &LimitPrice) -> String {
    // Less than that is what drawing on the grid happened to leave.
    if (price.free - price.value).abs() < 0.3 * (price.tighter.to - price.value).abs() {
        return String::new();
    }
    format!(", free to {}", limit(price.free, price.limit.unit()))
}

/// Slack limits by kind, each with the value it could tighten to for nothing; one paragraph.
pub fn slack(prices: &Prices, slack: &[&LimitPrice]) -> String {
    let mut groups: Vec<(&str, Vec<String>)> = Vec::new();
    for name in [
        "accuracy: ",
        "bottom of the range: ",
        "top of the range: ",
        "output resistance: ",
        "",
    ] {
        groups.push((name, Vec::new()));
    }
    for price in slack {
        // Where only new sizes make the step free, the step is how far it is known to go.
        let value = match price.tighter.verdict {
            Verdict::Free => price.free,
            _ => price.tighter.to,
        };
        let value = limit(value, price.limit.unit());
        let item = match &price.output {
            Some(output) => format!("{output} {value}"),
            None => format!("{} {value}", limited(price)),
        };
        let group = match price.limit {
            Limit::Accuracy(_) => 0,
            Limit::LowEnd(_) => 1,
            Limit::HighEnd(_) => 2,
            Limit::OutputResistance(_) => 3,
            _ => 4,
        };
        groups[group].1.push(item);
    }
    let parts: Vec<String> = groups
        .iter()
        .filter(|(_, items)| !items.is_empty())
        .map(|(name, items)| format!("{name}{}", items.join(", ")))
        .collect();
    format!(
        "Slack: {} of {} limits. Each, one at a time, could tighten for nothing to: {}.",
        slack.len(),
        prices.limits.len(),
        parts.join("; ")
    )
}

/// What the neighbours on the front would change: one sentence for each.
pub fn exchanges(prices: &Prices) -> Vec<String> {
    let sentence = |e: &crate::explore::Exchange| {
        let way = |value: f64| if value < 0.0 { "less" } else { "more" };
        format!(
            "Network {} instead: {} {} area, {} {} overhead current.",
            e.rank,
            format::area(e.area.abs()),
            way(e.area),
            format::engineering(e.overhead.abs(), "A"),
            way(e.overhead),
        )
    };
    prices.exchanges.iter().map(sentence).collect()
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

/// How much larger than the smallest possible a shown network is at most, for a table.
pub fn gap(outcome: &Outcome, shown: &view::Shown<'_>) -> String {
    match &outcome.proof {
        Some(proof) if shown.fits && proof.gap(shown.network).is_finite() => {
            format::percent(proof.gap(shown.network))
        }
        _ => "-".to_owned(),
    }
}

/// A network's bound as a sentence.
pub fn bound(proof: &Proof, network: &NetworkReport) -> String {
    let Some(bound) = proof.bounds.get(network.rank.wrapping_sub(1)) else {
        return String::new();
    };
    let gap = proof.gap(network);
    if !gap.is_finite() {
        return "No lower bound on its area was found.".to_owned();
    }
    format!(
        "Within {} of the smallest possible: no network of the declared design space that meets \
         the spec with at most {} of overhead current is smaller than {}.",
        format::percent(gap),
        format::quantity(bound.overhead, "A"),
        format::quantity(bound.area, "m2"),
    )
}

/// What the column of gaps says.
pub fn gap_note(proof: &Proof) -> String {
    format!(
        "Gap: so much larger than the smallest possible network within the same overhead current, \
         at most. Proved over {}. `biasloom explain gap` says what is not covered.",
        design_space(proof)
    )
}

/// The design space that bounds cover.
pub fn design_space(proof: &Proof) -> String {
    let declared = &proof.declared;
    let cells: Vec<String> = declared.cells.iter().map(|c| label(c)).collect();
    let [sink, source] = declared.lengths;
    let lengths = |[least, most]: [f64; 2]| {
        format!(
            "{} to {}",
            format::quantity(least, "m"),
            format::quantity(most, "m")
        )
    };
    let both = if sink == source {
        lengths(sink)
    } else {
        format!("{} (sinks), {} (sources)", lengths(sink), lengths(source))
    };
    format!(
        "cells {}, lengths {both}, inversion coefficients {} to {}, {} input currents, up to {} \
         units in an input leg, chains of up to {} families",
        cells.join(", "),
        declared.inversions[0],
        declared.inversions[1],
        declared.currents.len(),
        declared.units.iter().copied().max().unwrap_or(0),
        declared.depth,
    )
}

/// What a bound does not cover.
pub fn not_covered(proof: &Proof) -> Vec<String> {
    let declared = &proof.declared;
    vec![
        format!(
            "Networks that meet the spec only because gate lines off by more than {} of an output's \
             error limit, or feeders off by more than {}, cancel.",
            format::percent(declared.line_error),
            format::percent(declared.feeder_error)
        ),
        format!(
            "Errors of a whole circuit that differ from the sum along its path by more than {} of \
             a limit.",
            format::percent(declared.paper)
        ),
        "The mismatch of a degeneration resistor is that of a unit at the reference current.".to_owned(),
        "The floors under area times variance are the least that descents found, less a margin of 3 % and more; they \
         are tested on random sizes, not derived."
            .to_owned(),
        "Other cells, other input currents, and anything the process card does not say.".to_owned(),
    ]
}
