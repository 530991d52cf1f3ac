//! Process corners of the shipped cards.

use super::{Entry, Kind};
use crate::process::{Card, Corner, Loaded, SHIPPED};
use crate::report::format;
use std::path::Path;

pub(super) fn entries() -> Vec<Entry> {
    let cards: Vec<Card> = SHIPPED
        .iter()
        .filter_map(|(name, _)| Loaded::load(name, Path::new("")).ok())
        .map(|loaded| loaded.card)
        .collect();
    let mut entries: Vec<Entry> = Vec::new();
    for card in &cards {
        for corner in &card.corners {
            let line = format!("{}: {}.", card.name, shifts(corner));
            match entries.iter_mut().find(|entry| entry.word == corner.name) {
                Some(entry) => entry.text.push(line),
                None => entries.push(
                    Entry::new(Kind::Corners, &*corner.name, devices(&corner.name)).says(line),
                ),
            }
        }
    }
    entries
}

/// By convention the first letter stands for the n-channel device, the second for the p-channel
/// device: T typical, S slow, F fast (common practice, no source).
fn devices(name: &str) -> String {
    let speed = |letter| match letter {
        'T' => Some("typical"),
        'S' => Some("slow"),
        'F' => Some("fast"),
        _ => None,
    };
    let letters: Vec<Option<&str>> = name.chars().map(speed).collect();
    match letters.as_slice() {
        [Some(n), Some(p)] => format!("{n} n-channel and {p} p-channel devices"),
        _ => "a corner of its card's own naming".to_owned(),
    }
}

fn shifts(corner: &Corner) -> String {
    let volts = |what: &str, value: f64| {
        (value != 0.0).then(|| format!("{what} {}{}", sign(value), format::millivolts(value)))
    };
    let share = |what: &str, factor: f64| {
        let value = factor - 1.0;
        (value != 0.0).then(|| format!("{what} {}{}", sign(value), format::percent(value)))
    };
    let shifts: Vec<String> = [
        volts("n-channel threshold", corner.nmos_threshold),
        share("n-channel gain", corner.nmos_gain),
        volts("p-channel threshold", corner.pmos_threshold),
        share("p-channel gain", corner.pmos_gain),
        share("resistors", corner.resistor),
    ]
    .into_iter()
    .flatten()
    .collect();
    if shifts.is_empty() {
        "shifts nothing".to_owned()
    } else {
        shifts.join(", ")
    }
}

fn sign(value: f64) -> &'static str {
    if value > 0.0 { "+" } else { "" }
}
