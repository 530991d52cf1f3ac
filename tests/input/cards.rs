//! Every shipped card loads, and holds what its sources say.

use biasloom::process::{self, Card, ChargeLaw, Law, Loaded, Mosfet, SHIPPED, SquareLaw};
use std::path::Path;

fn load(name: &str) -> Card {
    Card::load(name).unwrap_or_else(|faults| panic!("{}", faults.render(false)))
}

fn square(device: &Mosfet) -> &SquareLaw {
    match &device.law {
        Law::Square(law) => law,
        Law::Charge(_) => panic!("a square law was expected"),
    }
}

fn charge(device: &Mosfet) -> &ChargeLaw {
    match &device.law {
        Law::Charge(law) => law,
        Law::Square(_) => panic!("a charge law was expected"),
    }
}

#[test]
fn every_shipped_card_loads_with_a_source_for_every_value() {
    for (name, _) in SHIPPED {
        let card = load(name);
        assert_eq!(card.name, *name);
        assert_eq!(card.corners[0].name, "TT");
        assert!(card.resistor.is_some());
        let lines = Loaded::load(name, Path::new("")).unwrap().lines;
        assert!(lines.len() > 25);
        for line in lines {
            assert!(
                !line.source.is_empty() && !line.value.is_empty(),
                "{line:?}"
            );
        }
    }
}

/// Published tables, as quoted beside each value in the cards.
#[test]
fn textbook_cards_hold_their_tables() {
    let micro = |x: f64| x * 1e-6;
    // Vt, k', gamma, Early voltage per metre; n then p.
    let tables = [
        // Sedra & Smith, Microelectronic Circuits, mirror example: 0.7 V, 200 uA/V2, 20 V/um.
        (
            "textbook-basic",
            [
                [0.7, micro(200.0), 0.0, 20e6],
                [0.7, micro(80.0), 0.0, 20e6],
            ],
        ),
        (
            "textbook-ideal",
            [
                [0.7, micro(200.0), 0.0, f64::INFINITY],
                [0.7, micro(80.0), 0.0, f64::INFINITY],
            ],
        ),
        // Razavi, Design of Analog CMOS Integrated Circuits, table 2.1; lambda 0.1, 0.2 at 0.5 um.
        (
            "textbook-050",
            [
                [0.7, micro(134.29), 0.45, 1.0 / 0.1 / 0.5e-6],
                [0.8, micro(38.37), 0.4, 1.0 / 0.2 / 0.5e-6],
            ],
        ),
        // Allen & Holberg, CMOS Analog Circuit Design, table 3.1-2; lambda 0.04, 0.05 at 1 um.
        (
            "textbook-080",
            [
                [0.7, micro(110.0), 0.4, 1.0 / 0.04 / 1e-6],
                [0.7, micro(50.0), 0.57, 1.0 / 0.05 / 1e-6],
            ],
        ),
        // University course card; lambda 0.08, 0.1 at 1 um.
        (
            "textbook-100",
            [
                [0.8, micro(67.14), 0.5, 1.0 / 0.08 / 1e-6],
                [0.85, micro(28.78), 0.6, 1.0 / 0.1 / 1e-6],
            ],
        ),
    ];
    for (name, devices) in tables {
        let card = load(name);
        for (device, wanted) in [&card.nmos, &card.pmos].into_iter().zip(devices) {
            let law = square(device);
            let found = [law.threshold, law.kp, law.gamma, law.early_per_length];
            for (found, wanted) in found.into_iter().zip(wanted) {
                assert!(
                    found == wanted || (found / wanted - 1.0).abs() < 1e-9,
                    "{name} {found} {wanted}"
                );
            }
        }
    }
    // Razavi table 2.1 gives mobilities: 350 and 100 cm2/Vs with Cox = 3.9 eps0/9 nm (SI 2019 eps0).
    let cox = 3.9 * 8.854_187_812_8e-12 / 9e-9;
    let card = load("textbook-050");
    assert!((square(&card.nmos).kp / (350e-4 * cox) - 1.0).abs() < 1e-4);
    assert!((square(&card.pmos).kp / (100e-4 * cox) - 1.0).abs() < 1e-4);
    assert!((card.nmos.noise.oxide_capacitance / cox - 1.0).abs() < 1e-4);
    // University course card: source and drain 1.5 um on each side.
    assert_eq!(load("textbook-100").nmos.area.border_length, 3e-6);
}

#[test]
fn the_bare_charge_card_is_the_published_example_without_corrections() {
    // Bucher et al., EPFL-EKV v2.6 report, example set of a 0.5 um process; from memory.
    let card = load("charge-ideal");
    let law = charge(&card.nmos);
    assert_eq!(card.temperature.0, 298.15);
    let at = |curve: &process::Curve| curve.at(1e-6);
    assert_eq!(
        [at(&law.threshold), at(&law.gamma), at(&law.phi)],
        [0.6, 0.71, 0.97]
    );
    assert_eq!(
        [at(&law.kp), at(&law.threshold_tc), at(&law.kp_exponent)],
        [150e-6, 1.5e-3, -1.5]
    );
    assert_eq!(law.body_gamma, law.gamma);
    for device in [&card.nmos, &card.pmos] {
        let law = charge(device);
        for off in [
            &law.theta,
            &law.mobility_rise,
            &law.clm_strength,
            &law.dibl,
            &law.impact_strength,
        ] {
            assert_eq!(at(off), 0.0);
        }
        assert_eq!(at(&law.saturation_velocity), f64::INFINITY);
        // Partners of what is off must not make 0/0.
        for partner in [&law.clm_voltage, &law.dibl_voltage, &law.impact_voltage] {
            assert_eq!(at(partner), 1.0);
        }
        assert_eq!(
            (device.mismatch.threshold, device.mismatch.gain),
            (5e-9, 1e-8)
        );
    }
}

/// Early voltage of the card's own terms in saturation: channel-length modulation
/// 1 + A ln(1 + (VDS - VDSsat)/VE) and barrier lowering -sigma Vx ln(1 + VDS/Vx) at gm/ID = 8 1/V,
/// the terms that fit measured devices.
fn early(law: &ChargeLaw, length: f64, vds: f64) -> f64 {
    let (strength, voltage) = (law.clm_strength.at(length), law.clm_voltage.at(length));
    let over = vds - 0.2;
    let modulation = strength / (voltage + over) / (1.0 + strength * (1.0 + over / voltage).ln());
    let lowering = law.dibl.at(length) / (1.0 + vds / law.dibl_voltage.at(length));
    1.0 / (modulation + 8.0 * lowering)
}

/// The manners of measured devices that the generic cards claim in their comments.
#[test]
fn generic_cards_behave_as_they_say() {
    for (name, vds, ends, claims) in [
        (
            "generic-180",
            0.9,
            [0.18e-6, 20e-6],
            [
                [(0.5e-6, 7.0), (10e-6, 100.0)],
                [(0.5e-6, 8.0), (10e-6, 110.0)],
            ],
        ),
        (
            "generic-65",
            0.5,
            [0.06e-6, 10e-6],
            [
                [(0.25e-6, 3.0), (10e-6, 11.0)],
                [(0.25e-6, 4.0), (10e-6, 35.0)],
            ],
        ),
    ] {
        let card = load(name);
        for (device, claims) in [&card.nmos, &card.pmos].into_iter().zip(claims) {
            let law = charge(device);
            assert_eq!([device.length.least.0, device.length.most.0], ends);
            for (length, claimed) in claims {
                let found = early(law, length, vds);
                assert!(
                    (found / claimed - 1.0).abs() < 0.2,
                    "{name} {length} {found} {claimed}"
                );
            }
            // It rises with length, but less than in proportion.
            let lengths = &law.threshold.lengths;
            for pair in lengths.windows(2) {
                let growth = early(law, pair[1], vds) / early(law, pair[0], vds);
                assert!(
                    growth > 1.0 && growth < pair[1] / pair[0] * 1.001,
                    "{name} {pair:?} {growth}"
                );
            }
            // EKV: n = 1 + gamma / (2 sqrt(phi + VP + 4 UT)), at VP = 0.
            let slope =
                1.0 + law.gamma.at(1e-6) / (2.0 * (law.phi.at(1e-6) + 4.0 * 0.02585).sqrt());
            assert!((1.24..1.36).contains(&slope), "{name} {slope}");
            assert!(law.body_gamma.at(1e-6) < law.gamma.at(1e-6));
        }
        assert_eq!(card.corner_names(), ["TT", "SS", "FF", "SF", "FS"]);
        let slow = card.corner("SF").unwrap();
        assert!(slow.nmos_threshold > 0.0 && slow.nmos_gain < 1.0 && slow.pmos_gain > 1.0);
        assert!(card.nmos.area != card.pmos.area);
    }
}

#[test]
fn a_device_convention_becomes_a_pair_convention() {
    // Pelgrom, Duinmaijer, Welbers, JSSC 24 (1989): the difference of two equal independent devices
    // deviates by sqrt(2) times one of them.
    let (_, text) = SHIPPED
        .iter()
        .find(|(name, _)| *name == "generic-180")
        .unwrap();
    let text = text.replace("convention: pair", "convention: device");
    let device = process::read(&text, "x", "x").unwrap().card;
    let pair = load("generic-180");
    let root = 2f64.sqrt();
    let close = |a: f64, b: f64| assert!((a / b - 1.0).abs() < 1e-12, "{a} {b}");
    close(
        device.nmos.mismatch.threshold,
        pair.nmos.mismatch.threshold * root,
    );
    close(device.pmos.mismatch.gain, pair.pmos.mismatch.gain * root);
    close(
        device.resistor.unwrap().mismatch,
        pair.resistor.unwrap().mismatch * root,
    );
}

#[test]
fn values_reach_their_si_units() {
    let card = load("generic-180");
    let n = charge(&card.nmos);
    assert_eq!(card.temperature.0, 300.15);
    assert_eq!(card.nmos.mismatch.threshold, 4.5e-9);
    assert_eq!(card.nmos.mismatch.gain, 1e-8);
    assert_eq!(n.threshold.at(0.18e-6), 0.455);
    assert_eq!(n.mobility.at(1e-6), 0.035);
    assert_eq!(card.nmos.noise.oxide_capacitance, 8.5e-3);
    assert_eq!(card.nmos.grid.0, 5e-9);
    assert_eq!(card.resistor.unwrap().tc1, -150e-6);
    assert_eq!(card.corner("SS").unwrap().nmos_threshold, 0.04);
    assert_eq!(card.corner("SS").unwrap().nmos_gain, 0.9);
    assert_eq!(card.corner("FF").unwrap().resistor, 0.85);
}
