//! `front.csv`: one row per network, for spreadsheets and scripts (RFC 4180).

use super::{Files, Format, format, view, words};
use crate::explore::Outcome;

/// The format.
pub const FORMAT: Format = Format {
    name: "csv",
    files: &["front.csv"],
    about: "the ranked networks with every figure, one row each",
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
            let value = view::figure(network, name).map(|figure| figure.value * scale);
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
        rows.push(row);
    }
    vec![("front.csv".into(), table(&rows).into_bytes())]
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
