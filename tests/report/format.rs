//! Numbers as text: prefixes and powers of the SI (BIPM brochure, 9th edition, table 7), and the
//! round trip of what is written for programs.

use biasloom::report::format::*;
use proptest::prelude::*;

#[test]
fn engineering_notation() {
    for (value, unit, text) in [
        (10e-6, "A", "10.0 uA"),
        (2.5e6, "Ohm", "2.50 MOhm"),
        (999.96e-9, "A", "1.00 uA"),
        (999.4e-9, "A", "999 nA"),
        (-4.25e-3, "V", "-4.25 mV"),
        (0.0, "A", "0 A"),
        (1.0, "1", "1.00"),
        (5e12, "Ohm", "5000 GOhm"),
        (3e-19, "A", "0.30 aA"),
        (f64::INFINITY, "Ohm", "unbounded"),
        (f64::NAN, "Ohm", "undefined"),
    ] {
        assert_eq!(engineering(value, unit), text);
    }
}

#[test]
fn areas_lengths_voltages_and_shares() {
    assert_eq!(area(12_480e-12), "12 480 um2");
    assert_eq!(area(1_234_567.4e-12), "1 234 567 um2");
    assert_eq!(area(999.6e-12), "1 000 um2");
    assert_eq!(area(84e-12), "84.0 um2");
    assert_eq!(area(3.254e-12), "3.25 um2");
    assert_eq!(length(4.25e-6), "4.25 um");
    assert_eq!(length(180e-9), "0.18 um");
    assert_eq!(length(10e-6), "10 um");
    assert_eq!(volts(0.25), "0.250 V");
    assert_eq!(volts(-0.0001), "0.000 V");
    assert_eq!(millivolts(-0.0123), "-12 mV");
    assert_eq!(percent(0.0124), "1.24 %");
    assert_eq!(percent(0.125), "12.5 %");
    assert_eq!(percent(1.746), "175 %");
    assert_eq!(percent(0.00043), "0.043 %");
    assert_eq!(percent(-1e-9), "0 %");
    assert_eq!(percent(0.0), "0 %");
    assert_eq!(celsius(233.15), "-40 degC");
    assert_eq!(count(63_420), "63 420");
    assert_eq!(count(7), "7");
}

#[test]
fn text_for_print() {
    assert_eq!(typeset("10.0 uA"), "10.0\u{a0}µA");
    assert_eq!(
        typeset("12 480 um2, at least"),
        "12\u{202f}480\u{a0}µm², at least"
    );
    assert_eq!(
        typeset("SS 1.62 V -40 degC"),
        "SS 1.62\u{a0}V \u{2212}40\u{a0}°C"
    );
    assert_eq!(
        typeset("0.5 x reference (5.00 uA)"),
        "0.5 × reference (5.00\u{a0}µA)"
    );
    assert_eq!(typeset("2 networks, A and V"), "2 networks, A and V");
    assert_eq!(
        words("at 1 234 um2 or -40 degC."),
        ["at", "1 234 um2", "or", "-40 degC."]
    );
}

#[test]
fn numbers_on_netlist_cards() {
    for (value, text) in [
        (4.25e-6, "4.25u"),
        (180e-9, "180n"),
        (2.5e6, "2.5meg"),
        (125e3, "125k"),
        (0.9, "900m"),
        (1.8, "1.8"),
        (-0.25, "-250m"),
        (0.0, "0"),
    ] {
        assert_eq!(deck(value), text);
    }
}

/// The value of text in engineering notation.
fn value(text: &str) -> f64 {
    let (number, unit) = text.split_once(' ').unwrap();
    let scale = match unit.strip_suffix('A').unwrap() {
        "a" => 1e-18,
        "f" => 1e-15,
        "p" => 1e-12,
        "n" => 1e-9,
        "u" => 1e-6,
        "m" => 1e-3,
        "" => 1.0,
        "k" => 1e3,
        "M" => 1e6,
        "G" => 1e9,
        other => panic!("prefix {other}"),
    };
    number.parse::<f64>().unwrap() * scale
}

proptest! {
    /// Three significant digits: half a unit of the third is at most 0.5 % of the value.
    #[test]
    fn engineering_keeps_three_digits(mantissa in -9.999f64..9.999, power in -17i32..11) {
        let exact = mantissa * 10f64.powi(power);
        prop_assume!(mantissa.abs() >= 1.0);
        let read = value(&engineering(exact, "A"));
        prop_assert!((read - exact).abs() <= 0.005001 * exact.abs(), "{read} {exact}");
    }

    /// Nine significant digits: half a unit of the ninth is at most 5e-9 of the value.
    #[test]
    fn tables_keep_nine_digits(mantissa in -9.999f64..9.999, power in -20i32..15) {
        let exact = mantissa * 10f64.powi(power);
        prop_assume!(mantissa.abs() >= 1.0);
        let read: f64 = number(exact).parse().unwrap();
        prop_assert!((read - exact).abs() <= 5.001e-9 * exact.abs(), "{read} {exact}");
    }
}
