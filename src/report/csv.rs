//! `front.csv`: one row per network, and `prices.csv`: one row per limit, for spreadsheets and
//! scripts (RFC 4180).

use super::{Files, Format, format, view, words};
use crate::explore::{Outcome, Step, Verdict};

/// The format.
pub const FORMAT: Format = Format {
    name: "csv",
    files: &["front.csv", "prices.csv"],
    about: "the ranked networks with every figure, one row each; and what every limit costs",
    render,
};

fn render(outcome: &Outcome) -> Files {
    let networks = view::networks(outcome);
    let names = view::figure_names(&networks);
    let mut header = vec!["rank".to_owned(), "meets_spec".to_owned()];
    for (name, unit) in &names {
        header.push(match *unit {
            "" => (*name).to_owned(),
            unit => format!("{name}_{}", format::column_unit(unit).1),
        });
    }
    header.extend(
        [
            "worst_error_percent",
            "worst_error_output",
            "worst_error_corner",
            "worst_headroom_margin_V",
            "worst_headroom_output",
            "worst_headroom_corner",
            "families",
            "cells",
            "least_possible_area_um2",
            "gap_percent",
        ]
        .map(str::to_owned),
    );
    let mut rows = vec![header];
    for shown in &networks {
        let network = shown.network;
        let mut row = vec![
            if shown.fits {
                network.rank.to_string()
            } else {
                String::new()
            },
            if network.broken.is_empty() {
                "yes"
            } else {
                "no"
            }
            .to_owned(),
        ];
        for (name, unit) in &names {
            let scale = format::column_unit(unit).0;
            let value = network.figure(name).map(|figure| figure.value * scale);
            row.push(value.map(format::number).unwrap_or_default());
        }
        match view::worst_error(network) {
            Some(output) => row.extend([
                format::number(output.error * 100.0),
                output.name.clone(),
                output.error_corner.clone(),
            ]),
            None => row.extend([const { String::new() }; 3]),
        }
        match view::worst_headroom(network) {
            Some(output) => row.extend([
                format::number(output.headroom_margin),
                output.name.clone(),
                output.headroom_corner.clone(),
            ]),
            None => row.extend([const { String::new() }; 3]),
        }
        row.push(network.families.len().to_string());
        row.push(words::cells(network));
        let proof = outcome.proof.as_ref().filter(|_| shown.fits);
        let bound = proof.and_then(|p| p.bounds.get(network.rank - 1));
        row.push(
            bound
                .map(|b| format::number(b.area * 1e12))
                .unwrap_or_default(),
        );
        row.push(
            proof
                .map(|p| format::number(p.gap(network) * 100.0))
                .unwrap_or_default(),
        );
        rows.push(row);
    }
    vec![
        ("front.csv".into(), table(&rows).into_bytes()),
        ("prices.csv".into(), table(&prices(outcome)).into_bytes()),
    ]
}

/// Every limit with its price; the header alone where nothing is priced. Limits stand in their SI
/// unit, which a column names.
fn prices(outcome: &Outcome) -> Vec<Vec<String>> {
    let header = [
        "network",
        "limit",
        "end",
        "output",
        "unit",
        "value",
        "free_to",
        "slack",
        "tighter_to",
        "tighter",
        "tighter_area_um2",
        "tighter_overhead_current_uA",
        "tighter_network",
        "looser_to",
        "looser_area_um2",
        "looser_overhead_current_uA",
    ];
    let mut rows = vec![header.map(str::to_owned).to_vec()];
    let Some(prices) = &outcome.prices else {
        return rows;
    };
    let changes = |step: &Step| -> [String; 3] {
        let told = |area: f64, overhead: f64, rank: Option<usize>| {
            [
                format::number(area * 1e12),
                format::number(overhead * 1e6),
                rank.map(|rank| rank.to_string()).unwrap_or_default(),
            ]
        };
        match step.verdict {
            Verdict::Free => told(0.0, 0.0, None),
            Verdict::Resized { area, overhead, .. } => told(area, overhead, None),
            Verdict::Other {
                rank,
                area,
                overhead,
            } => told(area, overhead, Some(rank)),
            Verdict::NotFound | Verdict::NotAllowed => [const { String::new() }; 3],
        }
    };
    for price in &prices.limits {
        let limit = price.limit;
        let mut row = vec![
            prices.rank.to_string(),
            limit.key().to_owned(),
            limit.end().unwrap_or_default().to_owned(),
            price.output.clone().unwrap_or_default(),
            limit.unit().to_owned(),
            format::number(price.value),
            format::number(price.free),
            if price.slack(prices.noise) {
                "yes"
            } else {
                "no"
            }
            .to_owned(),
            format::number(price.tighter.to),
            price.tighter.verdict.name().to_owned(),
        ];
        row.extend(changes(&price.tighter));
        match &price.looser {
            Some(looser) => {
                let [area, overhead, _] = changes(looser);
                row.extend([format::number(looser.to), area, overhead]);
            }
            None => row.extend([const { String::new() }; 3]),
        }
        rows.push(row);
    }
    rows
}

/// A table as RFC 4180 text: CRLF after every record; fields with a comma, a quote or a line
/// break are quoted, quotes in them doubled.
pub fn table(rows: &[Vec<String>]) -> String {
    let mut text = String::new();
    for row in rows {
        for (index, field) in row.iter().enumerate() {
            if index > 0 {
                text.push(',');
            }
            if field.contains([',', '"', '\r', '\n']) {
                text.push('"');
                text.push_str(&field.replace('"', "\"\""));
                text.push('"');
            } else {
                text.push_str(field);
            }
        }
        text.push_str("\r\n");
    }
    text
}
