//! The summary for a terminal: plain text, as wide as the terminal allows, no colour.

use super::devices::columns;
use super::{format, view, words};
use crate::explore::{DEAREST, Outcome};

/// Least width that a summary is laid out for; narrower terminals wrap.
const NARROWEST: usize = 40;

/// The ranked networks and how the exploration ended, at most `width` columns wide.
///
/// Where a network's line is too long for the terminal, the error's corner and the cells stand on
/// lines below it. When nothing fits, the nearest network's line is followed by one
/// sentence per broken limit, by what is impossible, and by what would fit.
pub fn summary(outcome: &Outcome, width: usize) -> String {
    let width = width.max(NARROWEST);
    let mut text = String::new();
    let paragraph = |text: &mut String, words_: &str, hang: usize| {
        for (index, line) in words::wrap(words_, width - hang).iter().enumerate() {
            let indent = if index == 0 { 0 } else { hang };
            text.push_str(&format!("{:indent$}{line}\n", ""));
        }
    };
    paragraph(&mut text, &outcome.spec.title, 0);
    paragraph(&mut text, &words::status(outcome), 0);
    let networks = view::networks(outcome);
    if !networks.is_empty() {
        text.push('\n');
        text.push_str(&table(outcome, &networks, width));
    }
    if let Some(proof) = &outcome.proof {
        text.push('\n');
        paragraph(&mut text, &words::gap_note(proof), 0);
    }
    if let Some(prices) = &outcome.prices {
        text.push('\n');
        paragraph(&mut text, &words::prices_of(prices), 0);
        let dear = view::dear(prices);
        for price in dear.iter().take(DEAREST) {
            let sentence = words::price_sentence(prices, price);
            paragraph(&mut text, &format!("- {sentence}"), 2);
        }
        if dear.len() > DEAREST {
            let more = words::count(dear.len() - DEAREST, "limit");
            let rest = format!("- {more} more cost less each; prices.csv holds them all.");
            paragraph(&mut text, &rest, 2);
        }
        for sentence in words::exchanges(prices) {
            paragraph(&mut text, &format!("- {sentence}"), 2);
        }
        let slack = view::slack(prices);
        if !slack.is_empty() {
            paragraph(&mut text, &words::slack(prices, &slack), 0);
        }
    }
    if let Some(why) = words::no_prices(outcome) {
        text.push('\n');
        paragraph(&mut text, why, 0);
    }
    let broken = words::broken(outcome);
    if !broken.is_empty() {
        text.push('\n');
        let limits = if broken.len() == 1 { "Limit" } else { "Limits" };
        paragraph(
            &mut text,
            &format!("{limits} the nearest network breaks, worst first:"),
            0,
        );
        for broken in broken {
            paragraph(
                &mut text,
                &format!("- {}", words::broken_sentence(broken)),
                2,
            );
        }
    }
    if let Some(why) = words::why(outcome) {
        text.push('\n');
        paragraph(&mut text, words::cause(why), 0);
        for impossible in &why.impossible {
            paragraph(
                &mut text,
                &format!("- {}", words::impossible(impossible)),
                2,
            );
        }
        paragraph(&mut text, words::advice_title(why), 0);
        for advice in &why.advice {
            paragraph(&mut text, &format!("- {}", words::advice(advice)), 2);
        }
    }
    let failures: u64 = outcome
        .work
        .not_converged
        .iter()
        .map(|(_, number)| number)
        .sum();
    let work = &outcome.work;
    text.push('\n');
    paragraph(
        &mut text,
        &format!(
            "{} of {} family shapes solved at every corner, {} excluded by closed forms, {} not \
             converged; {} networks verified whole. Seed {}.",
            work.solved,
            work.shapes,
            work.screened_out,
            failures,
            work.networks_verified,
            outcome.spec.search.seed
        ),
        0,
    );
    text.push('\n');
    for caution in words::CAUTIONS {
        paragraph(&mut text, caution, 0);
    }
    text
}

/// Columns of the wide layout, and whether each is aligned to the right.
const WIDE: [(&str, bool); 8] = [
    ("rank", true),
    ("area", true),
    ("gap", true),
    ("overhead current", true),
    ("worst error", true),
    ("at output, corner", false),
    ("headroom margin", true),
    ("cells", false),
];

/// Columns of the narrow layout; what is missing stands on a line of its own below each row.
const NARROW: [(&str, bool); 6] = [
    ("rank", true),
    ("area", true),
    ("gap", true),
    ("overhead", true),
    ("error", true),
    ("margin", true),
];

/// Place of the gap among the narrow columns: where even those are too wide it goes below.
const GAP: usize = 2;

fn table(outcome: &Outcome, networks: &[view::Shown<'_>], width: usize) -> String {
    let rows: Vec<[String; WIDE.len()]> = networks.iter().map(|n| row(outcome, n)).collect();
    let mut lines = vec![WIDE.map(|(name, _)| name.to_owned()).to_vec()];
    lines.extend(rows.iter().map(|row| row.to_vec()));
    let wide = columns(&lines, None, &WIDE.map(|(_, right)| right));
    if wide.lines().all(|line| line.chars().count() <= width) {
        return wide;
    }
    let narrow = |with_gap: bool| {
        let cut = |cells: [String; NARROW.len()]| -> Vec<String> {
            let all = cells.into_iter().enumerate();
            all.filter(|(i, _)| with_gap || *i != GAP)
                .map(|(_, c)| c)
                .collect()
        };
        let mut lines = vec![cut(NARROW.map(|(name, _)| name.to_owned()))];
        lines.extend(
            rows.iter()
                .map(|[rank, area, gap, overhead, error, _, margin, _]| {
                    cut([rank, area, gap, overhead, error, margin].map(String::clone))
                }),
        );
        columns(&lines, None, &vec![true; lines[0].len()])
    };
    let fits = |text: &str| text.lines().all(|line| line.chars().count() <= width);
    let (narrow, gap_below) = match narrow(true) {
        text if fits(&text) => (text, false),
        _ => (narrow(false), true),
    };
    let mut text = String::new();
    for (index, line) in narrow.lines().enumerate() {
        text.push_str(line);
        text.push('\n');
        // The header and its rule come first.
        if let Some([_, _, gap, .., at, _, cells]) =
            index.checked_sub(2).and_then(|index| rows.get(index))
        {
            let gap = if gap_below {
                format!("gap {gap}; ")
            } else {
                String::new()
            };
            let detail = format!("{gap}error at {at}; cells: {cells}");
            for line in words::wrap(&detail, width - 6) {
                text.push_str(&format!("      {line}\n"));
            }
        }
    }
    text
}

fn row(outcome: &Outcome, shown: &view::Shown<'_>) -> [String; WIDE.len()] {
    let network = shown.network;
    let figure = |name: &str| {
        network.figure(name).map_or("-".to_owned(), |figure| {
            format::quantity(figure.value, &figure.unit)
        })
    };
    let error = view::worst_error(network);
    let headroom = view::worst_headroom(network);
    [
        shown.rank(),
        figure("area"),
        words::gap(outcome, shown),
        figure("overhead_current"),
        error.map_or("-".to_owned(), |output| format::percent(output.error)),
        error.map_or("-".to_owned(), |output| {
            format!("{}, {}", output.name, output.error_corner)
        }),
        headroom.map_or("-".to_owned(), |output| {
            format::millivolts(output.headroom_margin)
        }),
        words::cells(network),
    ]
}
