//! Authority: the SI prefixes and the definitions of the units (BIPM, The International System of
//! Units, 2019: degC = K - 273.15), and the rule that what is written reads back as what it was.

use biasloom::units::{self, Amp, Fault, Kelvin, Metre, Ohm, Permitted, SquareMetre, Volt, Watt};
use biasloom::{process, spec};
use proptest::prelude::*;

#[test]
fn quantities_read_as_people_write_them() {
    let cases: &[(&str, f64)] = &[
        ("20 uA", 20e-6),
        ("20uA", 20e-6),
        ("20 \u{b5}A", 20e-6),
        ("20 \u{3bc}A", 20e-6),
        ("+20. uA", 20e-6),
        (".5 nA", 0.5e-9),
        ("2e-5 A", 2e-5),
        ("2.5 MOhm", 2.5e6),
        ("2.5 M\u{3a9}", 2.5e6),
        ("2.5 M\u{2126}", 2.5e6),
        ("2.5 Mohm", 2.5e6),
        ("1 %", 0.01),
        ("100 ppm", 1e-4),
        ("-40 degC", 233.15),
        ("\u{2212}40 degC", 233.15),
        ("27 \u{b0}C", 300.15),
        ("27 \u{2103}", 300.15),
        ("300 K", 300.0),
        ("5 mV um", 5e-9),
        ("1 % um", 1e-8),
        ("110 uA/V^2", 110e-6),
        ("110 uA/V2", 110e-6),
        ("110 uA / V\u{b2}", 110e-6),
        ("0.45 sqrt(V)", 0.45),
        ("0.45 V^0.5", 0.45),
        ("0.8 mV/K", 0.8e-3),
        ("0.8 mV/degC", 0.8e-3),
        ("0.25 1/V", 0.25),
        ("0.25 /V", 0.25),
        ("0.25 V^-1", 0.25),
        ("350 cm2/Vs", 350e-4),
        ("350 cm^2/(V s)", 350e-4),
        ("9e4 m/s", 9e4),
        ("20 V/um", 20e6),
        ("8.5 fF/um2", 8.5e-3),
        ("1e-25 V^2 F", 1e-25),
        ("310 Ohm/sq", 310.0),
        ("-150 ppm/K", -150e-6),
        ("0.5 ppm/K^2", 0.5e-6),
        ("12 mV/V", 12e-3),
        ("20000 um2", 2e-8),
        ("20000 um^2", 2e-8),
        ("20000 um\u{b2}", 2e-8),
        ("3 sigma", 3.0),
        ("4 kHz", 4e3),
        ("1/200", f64::NAN),
        ("-1.5", -1.5),
    ];
    for (text, value) in cases {
        match units::parse(text) {
            // Correctly rounded, so equal and not merely close.
            Ok((found, _)) => assert_eq!(found, *value, "{text}"),
            Err(fault) => assert!(value.is_nan(), "{text}: {fault:?}"),
        }
    }
}

#[test]
fn faults_are_told_apart() {
    let current = Permitted {
        name: "tail current",
        least: "1 pA",
        most: "1 mA",
        example: "20 uA",
        note: "",
    };
    let unknown = |unit: &str| Fault::UnknownUnit {
        unit: unit.to_owned(),
        hint: None,
    };
    let cases: &[(&str, Fault)] = &[
        ("", Fault::Empty),
        ("   ", Fault::Empty),
        ("lots", Fault::NotANumber),
        (".", Fault::NotANumber),
        ("-", Fault::NotANumber),
        ("nan A", Fault::NotFinite),
        ("-inf A", Fault::NotFinite),
        (".inf", Fault::NotFinite),
        ("1e999 A", Fault::NotFinite),
        ("1e99999999999 A", Fault::NotFinite),
        ("1e-999 A", Fault::OutOfRange),
        ("1,5 uA", Fault::DecimalComma),
        ("20", Fault::MissingUnit),
        ("20 furlongs", unknown("furlongs")),
        ("20 uA/", unknown("uA/")),
        ("20 (uA", unknown("(uA")),
        ("20 sqrt(mA)", unknown("sqrt(mA)")),
        ("20 uA^", unknown("uA^")),
        ("2 mA", Fault::OutOfRange),
        ("-20 uA", Fault::OutOfRange),
        ("0 A", Fault::OutOfRange),
        ("1 uA to 2 uA", Fault::NotASingle),
    ];
    for (text, fault) in cases {
        assert_eq!(current.read(text).as_ref(), Err(fault), "{text}");
    }
    assert!(matches!(
        current.read("20 uV"),
        Err(Fault::WrongUnit { .. })
    ));
    assert!(matches!(
        current.read("20 UA"),
        Err(Fault::UnknownUnit { hint: Some(_), .. })
    ));
    assert_eq!(current.read_range("2 uA", false), Err(Fault::NotARange));
    assert_eq!(current.read_range("2 uA", true), Ok((2e-6, 2e-6)));
    assert_eq!(current.read_range("2 to 3 uA", false), Ok((2e-6, 3e-6)));
    assert_eq!(
        current.read_range("3 uA to 2 uA", false),
        Err(Fault::Reversed)
    );
    assert_eq!(
        current.read_range("2 uA to 2 uA", false),
        Err(Fault::EmptyRange)
    );
    assert_eq!(
        current.read_range("2 uA to nan A", false),
        Err(Fault::NotFinite)
    );
}

#[test]
fn every_quantity_of_the_files_is_consistent_with_itself() {
    for permitted in spec::QUANTITIES.iter().chain(process::QUANTITIES) {
        let (least, most) = permitted.ends();
        assert!(least < most, "{permitted:?}");
        let end = |text: &str| units::parse(text).unwrap().1.dimension;
        assert_eq!(end(permitted.least), end(permitted.most), "{permitted:?}");
        let single = permitted.read(permitted.example).is_ok();
        let range = permitted.read_range(permitted.example, false).is_ok();
        assert!(single || range, "{permitted:?}");
    }
}

#[test]
fn engineering_notation_reads_well() {
    let cases = [
        (Amp(1e-5).to_string(), "10.0 uA"),
        (Amp(9.9996e-6).to_string(), "10.0 uA"),
        (format!("{:.4}", Amp(1e-5)), "10.00 uA"),
        (Amp(-5e-8).to_string(), "-50.0 nA"),
        (Amp(0.0).to_string(), "0.00 A"),
        (Amp(1e-18).to_string(), "1.00e-18 A"),
        (Ohm(2.5e6).to_string(), "2.50 MOhm"),
        (Volt(0.25).to_string(), "250 mV"),
        (Volt(1.62).to_string(), "1.62 V"),
        (Metre(0.18e-6).to_string(), "0.180 um"),
        (Metre(24.187e-6).to_string(), "24.2 um"),
        (SquareMetre(2.345_6e-8).to_string(), "23500 um2"),
        (SquareMetre(2.34e-10).to_string(), "234 um2"),
        (Watt(1.2e-4).to_string(), "120 uW"),
        (Kelvin(233.15).to_string(), "-40 degC"),
        (Kelvin(300.15).to_string(), "27 degC"),
        (Kelvin(300.0).to_string(), "26.85 degC"),
        (units::percent(0.015, 3), "1.50 %"),
        (units::percent(-0.000_123_4, 2), "-0.012 %"),
        (Amp(2e-5).exact(), "20 uA"),
        (Ohm(2.5e6).exact(), "2.5 MOhm"),
        (Volt(1.62).exact(), "1.62 V"),
        (SquareMetre(2e-8).exact(), "20000 um2"),
        (Kelvin(398.15).exact(), "125 degC"),
        (format!("[{:>9}]", Volt(1.8)), "[   1.80 V]"),
        (format!("[{:9}]", Volt(1.8)), "[1.80 V   ]"),
    ];
    for (found, wanted) in cases {
        assert_eq!(found, wanted);
    }
}

/// Finite values over the range of magnitudes that circuits have, and far beyond.
fn magnitudes() -> impl Strategy<Value = f64> {
    (-1.0f64..1.0, -30i32..20).prop_map(|(digits, power)| digits * 10f64.powi(power))
}

proptest! {
    #[test]
    fn exact_text_reads_back_as_the_same_bits(value in magnitudes(), kelvin in 1.0f64..500.0) {
        for symbol in ["V", "A", "Ohm", "m", "m2", "W", "F", "Hz", "1", "A/V^2"] {
            let text = units::exact(value, symbol);
            // "1" stands for a bare number.
            let (back, _) = units::parse(&text).unwrap_or_else(|fault| panic!("{text}: {fault:?}"));
            prop_assert_eq!(back, value, "{}", text);
        }
        let text = Kelvin(kelvin).exact();
        prop_assert_eq!(units::parse(&text).unwrap().0, kelvin, "{}", text);
    }

    #[test]
    fn engineering_text_reads_back_within_its_digits(value in magnitudes(), digits in 1usize..9) {
        for symbol in ["V", "A", "Ohm", "m", "m2", "W"] {
            let text = units::engineering(value, symbol, digits);
            let (back, _) = units::parse(&text).unwrap();
            let tolerance = 0.500_001 * 10f64.powi(1 - digits as i32);
            prop_assert!((back - value).abs() <= tolerance * value.abs(), "{value} {text}");
        }
        let (back, _) = units::parse(&units::percent(value, digits)).unwrap();
        prop_assert!((back - value).abs() <= 0.500_001 * 10f64.powi(1 - digits as i32) * value.abs());
    }

    #[test]
    fn no_text_panics(text in ".{0,60}", unit in "[uµmkMG%°/^()*. 0-9VAOhmsKqrt-]{0,30}") {
        let _ = units::parse(&text);
        let _ = units::parse(&format!("1 {unit}"));
        for permitted in spec::QUANTITIES {
            if let Err(fault) = permitted.read_range(&text, true) {
                permitted.explain(&fault, &text);
            }
        }
    }
}
