//! The chart's axes and the tables' alignment.

use super::fixture;
use biasloom::report::{FORMATS, chart::Axis, csv, format_named, terminal};
use proptest::prelude::*;

proptest! {
    /// Every value lies inside the axis; ticks rise evenly from end to end, and their number is
    /// what was asked for within the step from one round number to the next (2.5).
    #[test]
    fn axes_hold_their_values(values in prop::collection::vec(1e-9f64..1e-2, 1..30), count in 2usize..9) {
        let axis = Axis::around(values.iter().copied(), "A", count);
        for &value in &values {
            let place = axis.place(value);
            prop_assert!((0.0..=1.0).contains(&place), "{value} at {place} of {axis:?}");
        }
        let ticks = axis.ticks();
        prop_assert!(ticks.len() >= 2 && ticks.len() <= count + 3, "{} of {count}", ticks.len());
        prop_assert!((ticks[0].0 - axis.least).abs() <= 1e-9 * axis.step);
        prop_assert!((ticks[ticks.len() - 1].0 - axis.most).abs() <= 1e-6 * axis.step);
        let labels: std::collections::BTreeSet<&String> = ticks.iter().map(|(_, text)| text).collect();
        prop_assert_eq!(labels.len(), ticks.len(), "labels repeat: {:?}", ticks);
    }

    /// RFC 4180, read by its own grammar: fields come back as they went in.
    #[test]
    fn comma_separated_values_read_back(rows in prop::collection::vec(prop::collection::vec("[a-c,\"\r\n ]{0,6}", 1..5), 1..6)) {
        let text = csv::table(&rows);
        let mut read: Vec<Vec<String>> = Vec::new();
        let mut letters = text.chars().peekable();
        while letters.peek().is_some() {
            let mut row = Vec::new();
            loop {
                let mut field = String::new();
                if letters.next_if_eq(&'"').is_some() {
                    loop {
                        match letters.next().unwrap() {
                            '"' if letters.next_if_eq(&'"').is_some() => field.push('"'),
                            '"' => break,
                            letter => field.push(letter),
                        }
                    }
                } else {
                    while let Some(letter) = letters.next_if(|letter| !matches!(letter, ',' | '\r' | '\n' | '"')) {
                        field.push(letter);
                    }
                }
                row.push(field);
                if letters.next_if_eq(&',').is_none() {
                    break;
                }
            }
            prop_assert_eq!(letters.next(), Some('\r'));
            prop_assert_eq!(letters.next(), Some('\n'));
            read.push(row);
        }
        prop_assert_eq!(read, rows);
    }
}

/// One value, equal values, values that are not finite, and none at all still make an axis.
#[test]
fn degenerate_axes() {
    for values in [
        vec![5e-6],
        vec![5e-6; 4],
        vec![f64::INFINITY, 1e-6],
        vec![],
        vec![0.0],
        vec![-1e-3],
    ] {
        let axis = Axis::around(values.iter().copied(), "A", 5);
        assert!(
            axis.most > axis.least && axis.step > 0.0 && axis.ticks().len() >= 2,
            "{values:?} {axis:?}"
        );
        for value in values.into_iter().filter(|value| value.is_finite()) {
            assert!((0.0..=1.0).contains(&axis.place(value)), "{value} {axis:?}");
        }
    }
}

/// Every row of `front.csv` has the header's number of fields, and a known figure stands in it.
#[test]
fn csv_rows_are_complete() {
    let outcome = fixture::found();
    let files = (csv::FORMAT.render)(&outcome);
    let text = String::from_utf8(files[0].1.clone()).unwrap();
    let header: Vec<&str> = text.lines().next().unwrap().split(',').collect();
    let column = header
        .iter()
        .position(|name| *name == "overhead_current_uA")
        .unwrap();
    for (line, network) in text.lines().skip(1).zip(&outcome.front) {
        let fields: Vec<&str> = line.split(',').collect();
        let figure = network
            .figures
            .iter()
            .find(|figure| figure.name == "overhead_current")
            .unwrap();
        let read: f64 = fields[column].parse().unwrap();
        assert!((read * 1e-6 - figure.value).abs() < 1e-8 * figure.value);
    }
}

/// The device tables' sum lines agree with the network's area figure.
#[test]
fn device_tables_add_up() {
    for outcome in [fixture::found(), fixture::large()] {
        let files = (format_named("devices").unwrap().render)(&outcome);
        for (network, files) in outcome.front.iter().zip(files.chunks(2)) {
            let text = String::from_utf8(files[0].1.clone()).unwrap();
            let areas: Vec<f64> = text
                .lines()
                .skip(1)
                .map(|line| line.rsplit(',').next().unwrap().parse().unwrap())
                .collect();
            let (sum, areas) = areas.split_last().unwrap();
            assert_eq!(areas.len(), network.devices.len());
            let total: f64 = areas.iter().sum();
            assert!((sum - total).abs() < 1e-6 * total, "{sum} {total}");
            let figure = network
                .figures
                .iter()
                .find(|figure| figure.name == "area")
                .unwrap();
            assert!((sum * 1e-12 - figure.value).abs() < 1e-6 * figure.value);
        }
    }
}

/// No line is longer than the terminal, and no network is missing, at any width.
#[test]
fn the_terminal_is_respected() {
    for outcome in [fixture::found(), fixture::nothing_fits(), fixture::large()] {
        for width in 44..200 {
            let text = terminal::summary(&outcome, width);
            for line in text.lines() {
                assert!(
                    line.chars().count() <= width && line.trim_end() == line,
                    "{width}: {line:?}"
                );
            }
            for network in &outcome.front {
                let rank = format!("{} ", network.rank);
                assert!(
                    text.lines()
                        .any(|line| line.trim_start().starts_with(&rank))
                );
            }
        }
    }
}

/// Every file of every format is text that ends with a line end, in paths that stay inside.
#[test]
fn files_are_tidy() {
    for format in &FORMATS {
        for (path, bytes) in (format.render)(&fixture::large()) {
            assert!(path.is_relative() && path.components().count() == 1);
            let text = String::from_utf8(bytes).unwrap();
            assert!(
                text.ends_with('\n') || path.extension().unwrap() == "html",
                "{}",
                path.display()
            );
        }
    }
}
