//! The device table of every network: for programs as CSV, for people as aligned text.

use super::{Files, Format, csv, format, view, words};
use crate::explore::{DeviceRow, NetworkReport, Outcome};

/// The format.
pub const FORMAT: Format = Format {
    name: "devices",
    files: &["network-NN-devices.csv", "network-NN-devices.txt"],
    about: "every drawn device of each network, with its size and operating point",
    render,
};

fn render(outcome: &Outcome) -> Files {
    let mut files = Files::new();
    for shown in view::networks(outcome) {
        let stem = shown.stem();
        files.push((
            format!("{stem}-devices.csv").into(),
            comma(shown.network).into_bytes(),
        ));
        files.push((
            format!("{stem}-devices.txt").into(),
            aligned(outcome, &shown).into_bytes(),
        ));
    }
    files
}

fn comma(network: &NetworkReport) -> String {
    let header = [
        "element",
        "family",
        "role",
        "output",
        "model",
        "W_um",
        "L_um",
        "units",
        "unit_Ohm",
        "current_uA",
        "IC",
        "VGS_V",
        "VDS_V",
        "VDSsat_V",
        "area_um2",
    ];
    let optional = |value: Option<f64>| value.map(format::number).unwrap_or_default();
    let mut rows = vec![header.map(str::to_owned).to_vec()];
    for device in &network.devices {
        rows.push(vec![
            device.name.clone(),
            device.family.clone(),
            device.role.clone(),
            device.output.clone().unwrap_or_default(),
            device.model.clone(),
            format::number(device.width * 1e6),
            format::number(device.length * 1e6),
            device.units.to_string(),
            optional(device.ohms),
            format::number(device.current * 1e6),
            optional(device.inversion),
            optional(device.vgs),
            optional(device.vds),
            optional(device.vdssat),
            format::number(device.area * 1e12),
        ]);
    }
    let mut sum = vec![String::new(); header.len()];
    sum[0] = "sum".to_owned();
    sum[7] = units(network).to_string();
    sum[header.len() - 1] = format::number(area(network) * 1e12);
    rows.push(sum);
    csv::table(&rows)
}

/// Units of all devices together.
pub fn units(network: &NetworkReport) -> u64 {
    network
        .devices
        .iter()
        .map(|device| u64::from(device.units))
        .sum()
}

/// Area of all devices together, m^2, added in the order of the table.
pub fn area(network: &NetworkReport) -> f64 {
    network.devices.iter().map(|device| device.area).sum()
}

/// Headers of the readable table, and whether a column is of numbers.
pub const COLUMNS: [(&str, bool); 13] = [
    ("element", false),
    ("family", false),
    ("role", false),
    ("output", false),
    ("W um", true),
    ("L um", true),
    ("units", true),
    ("current", true),
    ("IC", true),
    ("VGS V", true),
    ("VDS V", true),
    ("VDSsat V", true),
    ("area um2", true),
];

/// One device as the readable table shows it; a resistor shows its resistance under `role`.
pub fn cells(device: &DeviceRow) -> [String; COLUMNS.len()] {
    let volts = |value: Option<f64>| value.map_or("-".to_owned(), format::volts_number);
    let role = match device.ohms {
        Some(ohms) => format!("{}, {} each", device.role, format::engineering(ohms, "Ohm")),
        None => device.role.clone(),
    };
    [
        device.name.clone(),
        device.family.clone(),
        role,
        device.output.clone().unwrap_or_else(|| "-".to_owned()),
        format::length_number(device.width),
        format::length_number(device.length),
        device.units.to_string(),
        format::engineering(device.current, "A"),
        device.inversion.map_or("-".to_owned(), format::plain),
        volts(device.vgs),
        volts(device.vds),
        volts(device.vdssat),
        format::area_number(device.area),
    ]
}

/// The sum line of the readable table.
pub fn sum_cells(network: &NetworkReport) -> [String; COLUMNS.len()] {
    let mut sum = [const { String::new() }; COLUMNS.len()];
    sum[0] = "sum".to_owned();
    sum[6] = units(network).to_string();
    sum[COLUMNS.len() - 1] = format::area_number(area(network));
    sum
}

fn aligned(outcome: &Outcome, shown: &view::Shown<'_>) -> String {
    let header = COLUMNS.map(|(name, _)| name.to_owned()).to_vec();
    let mut rows = vec![header];
    rows.extend(
        shown
            .network
            .devices
            .iter()
            .map(|device| cells(device).to_vec()),
    );
    let sum = sum_cells(shown.network).to_vec();
    let right = COLUMNS.map(|(_, right)| right);
    let mut text = format!("{}: devices of {}\n", outcome.spec.title, shown.title());
    text.push_str(
        "Sizes of one unit; currents, IC and voltages of all units at the nominal corner.\n",
    );
    text.push_str(&format!("Process card: {}\n\n", outcome.card_title));
    text.push_str(&columns(&rows, Some(&sum), &right));
    text.push('\n');
    for caution in words::CAUTIONS {
        for line in words::wrap(caution, 78) {
            text.push_str(&line);
            text.push('\n');
        }
    }
    text
}

/// Rows as aligned columns two spaces apart; a rule under the first row and above the last one
/// if there is a `sum`. `right[i]` aligns column i to the right. No trailing spaces.
pub fn columns(rows: &[Vec<String>], sum: Option<&Vec<String>>, right: &[bool]) -> String {
    let widths: Vec<usize> = (0..right.len())
        .map(|column| {
            let lengths = rows.iter().chain(sum).filter_map(|row| row.get(column));
            lengths.map(|cell| cell.chars().count()).max().unwrap_or(0)
        })
        .collect();
    let line = |row: &Vec<String>| {
        let mut text = String::new();
        for (index, ((cell, &width), &right)) in row.iter().zip(&widths).zip(right).enumerate() {
            if index > 0 {
                text.push_str("  ");
            }
            if right {
                text.push_str(&format!("{cell:>width$}"));
            } else {
                text.push_str(&format!("{cell:<width$}"));
            }
        }
        text.truncate(text.trim_end().len());
        text.push('\n');
        text
    };
    let rule = "-".repeat(widths.iter().sum::<usize>() + 2 * widths.len().saturating_sub(1)) + "\n";
    let mut text = String::new();
    for (index, row) in rows.iter().enumerate() {
        text.push_str(&line(row));
        if index == 0 {
            text.push_str(&rule);
        }
    }
    if let Some(sum) = sum {
        text.push_str(&rule);
        text.push_str(&line(sum));
    }
    text
}
