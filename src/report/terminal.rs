//! The summary for a terminal: plain text, as wide as the terminal allows, no colour.

use super::devices::columns;
use super::{format, view, words};
use crate::explore::{Outcome, Status};

/// Least width that a summary is laid out for; narrower terminals wrap.
const NARROWEST: usize = 40;

/// The ranked networks and how the exploration ended, at most `width` columns wide.
///
/// The table loses its columns from the least important one (cells, then the headroom margin,
/// then the error's corner) until it fits; what is lost stands in every file format. When nothing
/// fits, the nearest network's line is followed by one sentence per broken limit.
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
        text.push_str(&table(&networks, width));
    }
    if let Status::NothingFits { broken } = &outcome.status {
        if !broken.is_empty() {
            text.push('\n');
            let limits = if broken.len() == 1 { "Limit" } else { "Limits" };
            paragraph(&mut text, &format!("{limits} the nearest network breaks, worst first:"), 0);
            for broken in broken {
                paragraph(&mut text, &format!("- {}", words::broken_sentence(broken)), 2);
            }
        }
    }
    let failures: u64 = outcome.work.not_converged.iter().map(|(_, number)| number).sum();
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

/// One column: its header, whether it is right-aligned, and its importance (0 always stays).
const COLUMNS: [(&str, bool, u8); 7] = [
    ("rank", true, 0),
    ("area", true, 0),
    ("overhead current", true, 0),
    ("worst error", true, 0),
    ("at output, corner", false, 1),
    ("headroom margin", true, 2),
    ("cells", false, 3),
];

fn table(networks: &[view::Shown<'_>], width: usize) -> String {
    let rows: Vec<[String; COLUMNS.len()]> = networks.iter().map(row).collect();
    let mut text = String::new();
    // Most columns first; the last layout is the narrowest there is.
    for least_important in (0..=3).rev() {
        let kept: Vec<usize> =
            (0..COLUMNS.len()).filter(|&column| COLUMNS[column].2 <= least_important).collect();
        let mut lines = vec![kept.iter().map(|&c| COLUMNS[c].0.to_owned()).collect::<Vec<_>>()];
        lines.extend(rows.iter().map(|row| kept.iter().map(|&c| row[c].clone()).collect()));
        let right: Vec<bool> = kept.iter().map(|&column| COLUMNS[column].1).collect();
        text = columns(&lines, None, &right);
        if text.lines().all(|line| line.chars().count() <= width) {
            break;
        }
    }
    text
}

fn row(shown: &view::Shown<'_>) -> [String; COLUMNS.len()] {
    let network = shown.network;
    let figure = |name: &str| {
        view::figure(network, name)
            .map_or("-".to_owned(), |figure| format::quantity(figure.value, &figure.unit))
    };
    let error = view::worst_error(network);
    let headroom = view::worst_headroom(network);
    [
        shown.rank(),
        figure("area"),
        figure("overhead_current"),
        error.map_or("-".to_owned(), |output| format::percent(output.error)),
        error.map_or("-".to_owned(), |output| format!("{}, {}", output.name, output.error_corner)),
        headroom.map_or("-".to_owned(), |output| format::millivolts(output.headroom_margin)),
        words::cells(network),
    ]
}
