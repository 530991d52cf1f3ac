//! Authorities: the charge-based model's own equations and the numbers that follow from them, 60-digit
//! roots, finite differences, and the symmetries any transistor has.

use super::support::*;
use biasloom::device::charge::charge_of;
use biasloom::device::constants::{BOLTZMANN, CHARGE, band_gap, thermal_voltage};
use biasloom::device::{Device, Point, inversion_of, width_for};
use biasloom::numeric::lanes::{Lanes, WIDTH};
use biasloom::process::{ChargeLaw, Curve, Law, SquareLaw};
use rand::{Rng, SeedableRng};
use rand_pcg::Pcg64;

fn close(ours: f64, truth: f64, relative: f64) {
    assert!(
        (ours - truth).abs() <= relative * truth.abs(),
        "{ours} instead of {truth}"
    );
}

/// One lane of a device at one bias point.
fn at(device: &Device, vg: f64, vd: f64, vs: f64) -> Point {
    device.at(Lanes::splat(vg), Lanes::splat(vd), Lanes::splat(vs))
}

#[test]
fn constants_are_those_of_the_si() {
    // SI 2019, exact.
    assert_eq!(BOLTZMANN, 1.380649e-23);
    assert_eq!(CHARGE, 1.602176634e-19);
    for (t, mv) in [
        (233.15, 20.0913),
        (298.15, 25.6926),
        (300.0, 25.8520),
        (350.0, 30.1607),
        (398.15, 34.3099),
    ] {
        close(thermal_voltage(t) * 1e3, mv, 1e-5);
    }
    close(thermal_voltage(300.0) * 10f64.ln() * 1e3, 59.526, 1e-5);
    close(thermal_voltage(300.0) * 2f64.ln() * 1e3, 17.919, 1e-4);
    close(4.0 * BOLTZMANN * 300.0, 1.65678e-20, 1e-5);
    // The form used with charge-based models (EPFL-EKV v2.6 report).
    close(band_gap(300.0), 1.11513, 1e-5);
}

#[test]
fn charge_equation_agrees_with_sixty_digits() {
    let mut rows = 0;
    for line in include_str!("truth/charge.csv").lines().skip(1) {
        let fields: Vec<f64> = line
            .split(',')
            .map(|f| f64::from_bits(u64::from_str_radix(f, 16).unwrap()))
            .collect();
        let [v, head, rest] = fields[..] else {
            panic!("{line}")
        };
        let error = ((charge_of(v) - head) - rest).abs() / head;
        // Two units in the last place.
        assert!(error < 2.0 * f64::EPSILON, "q({v}): {error}");
        rows += 1;
    }
    assert!(rows > 600, "the table has shrunk to {rows} rows");
}

/// i = q^2 + q, v = 2 q + ln q (Enz, Krummenacher, Vittoz 1995; Enz & Vittoz 2006).
#[test]
fn charge_equation_table() {
    for (ic, q, v) in [
        (0.01, 0.009902, -4.5952),
        (0.1, 0.091608, -2.2070),
        (0.24, 0.2, -1.2094),
        (1.0, 0.618034, 0.7549),
        (2.0, 1.0, 2.0),
        (10.0, 2.701562, 6.3970),
        (100.0, 9.512492, 21.2776),
    ] {
        let ours = charge_of(v);
        // Four decimals of v move q by q/(1 + 2q) times half a unit of the fourth.
        assert!(
            (ours - q).abs() < 0.6e-4 * q / (1.0 + 2.0 * q) + 0.6e-6,
            "{v}"
        );
        let exact = (f64::sqrt(1.0 + 4.0 * ic) - 1.0) / 2.0;
        close(q, exact, 1e-4);
        close(charge_of(2.0 * exact + exact.ln()), exact, 1e-14);
    }
    for (v, q) in [
        (-5.0, 0.0066489),
        (0.0, 0.4263028),
        (5.0, 2.1234734),
        (20.0, 8.9066035),
    ] {
        assert!((charge_of(v) - q).abs() < 0.6e-7, "{v}");
    }
}

/// The published example set for a 0.5 um process (Bucher et al., EPFL-EKV v2.6 report; the values
/// of the set from memory).
fn example_set() -> ChargeLaw {
    ChargeLaw {
        threshold_tc: Curve::constant(1.5e-3),
        kp_exponent: Curve::constant(-1.5),
        ..plain_charge(0.6, 0.71, 0.97, 150e-6)
    }
}

const EXAMPLE_T: f64 = 298.15;

/// Pinch-off voltage by its meaning: at VS = VP the source charge is q(0), so that
/// gms UT/ID = 1/(1 + q(0)) in saturation.
fn pinch_off(device: &Device, vg: f64, ut: f64) -> f64 {
    let target = 1.0 / (1.0 + charge_of(0.0));
    let (mut low, mut high) = (-1.0, 3.0);
    for _ in 0..60 {
        let vs = 0.5 * (low + high);
        let p = at(device, vg, vs + 3.0, vs);
        // Less inversion means a larger gms/ID.
        if p.gms.0[0] * ut / p.id.0[0] < target {
            low = vs;
        } else {
            high = vs;
        }
    }
    0.5 * (low + high)
}

/// Derived from the example set at VS = 0, 298.15 K, long channel, W/L = 1.
#[test]
fn example_set_gives_its_pinch_off_slope_factor_and_current() {
    let device = device(
        Law::Charge(example_set()),
        EXAMPLE_T,
        1e-5,
        1e-5,
        &at_temperature(EXAMPLE_T),
    );
    let ut = thermal_voltage(EXAMPLE_T);
    for (vg, vp, n, microamp) in [
        (0.4, -0.14545, 1.36865, 0.00094),
        (0.6, 0.0, 1.34275, 0.16168),
        (0.8, 0.14841, 1.32125, 2.19896),
        (1.0, 0.29935, 1.30306, 7.79527),
        (1.5, 0.68569, 1.26771, 39.778),
        (2.0, 1.08217, 1.24183, 99.025),
    ] {
        let p = at(&device, vg, 3.0, 0.0);
        assert!(
            (p.id.0[0] * 1e6 - microamp).abs() < 1e-5 * microamp + 0.6e-5,
            "VG {vg}"
        );
        let ours = pinch_off(&device, vg, ut);
        assert!((ours - vp).abs() < 0.6e-5, "VG {vg}: VP {ours}");
        // n from the current there: ID = 2 n KP UT^2 (q^2 + q).
        let q = charge_of(0.0);
        let there = at(&device, vg, ours + 3.0, ours).id.0[0];
        close(there / (2.0 * 150e-6 * ut * ut * (q * q + q)), n, 5e-6);
    }
}

#[test]
fn example_set_at_125_degrees() {
    let hot = 398.15;
    let device = device(
        Law::Charge(example_set()),
        EXAMPLE_T,
        1e-5,
        1e-5,
        &at_temperature(hot),
    );
    let ut = thermal_voltage(hot);
    // VP is zero where VG is the threshold.
    assert!(pinch_off(&device, 0.450, ut).abs() < 1e-6);
    let q = charge_of(0.0);
    let id = at(&device, 0.450, 3.0, 0.0).id.0[0];
    // PHI by the band-gap law (EPFL-EKV v2.6 report).
    let r = hot / EXAMPLE_T;
    let phi = 0.97 * r - 3.0 * ut * r.ln() - band_gap(EXAMPLE_T) * r + band_gap(hot);
    let n = 1.0 + 0.71 / (2.0 * (phi + 4.0 * ut).sqrt());
    close(id / (2.0 * n * ut * ut * (q * q + q)), 97.20e-6, 1e-4);
}

/// VT falls by its coefficient, KP goes as (T/T0)^exponent: (T/300)^-1.5 = 1.45958 at -40 and
/// 0.65405 at 125 degrees.
#[test]
fn temperature_laws() {
    for (t, scale) in [(233.15, 1.45958), (300.0, 1.0), (398.15, 0.65405)] {
        let law = SquareLaw {
            width_loss: 0.0,
            length_loss: 0.0,
            threshold: 0.6,
            threshold_tc: 1.5e-3,
            gamma: 0.0,
            phi: 0.8,
            kp: 150e-6,
            kp_exponent: -1.5,
            early_per_length: f64::INFINITY,
        };
        let vt = 0.6 - 1.5e-3 * (t - 300.0);
        let square = device(Law::Square(law), 300.0, 1e-5, 1e-5, &at_temperature(t));
        let p = at(&square, vt + 0.4, 2.0, 0.0);
        close(p.id.0[0], 0.5 * 150e-6 * scale * 0.16, 1e-5);
        close(p.vdssat.0[0], 0.4, 1e-12);
        let charge = device(
            Law::Charge(ChargeLaw { ..example_set() }),
            300.0,
            1e-5,
            1e-5,
            &at_temperature(t),
        );
        assert!(pinch_off(&charge, vt, thermal_voltage(t)).abs() < 1e-6);
    }
}

/// gm n UT/ID = 2/(1 + sqrt(1 + 4 IC)) and VDSsat/UT = 2 sqrt(IC + 1/4) + 3 (Binkley 2008, from
/// memory); the source slope stands for gm n, which it equals at a fixed slope factor.
#[test]
fn efficiency_and_saturation_voltage_over_inversion() {
    let ut = thermal_voltage(300.0);
    let device = device(
        Law::Charge(plain_charge(0.5, 0.6, 0.8, 200e-6)),
        300.0,
        1e-5,
        1e-5,
        &at_temperature(300.0),
    );
    let vp = pinch_off(&device, 2.0, ut);
    for (ic, efficiency, vdssat) in [
        (0.01, 0.99020, 4.0198),
        (0.1, 0.91608, 4.1832),
        (0.24, 0.83333, 4.4000),
        (1.0, 0.61803, 5.2361),
        (2.0, 0.50000, 6.0000),
        (10.0, 0.27016, 9.4031),
        (100.0, 0.09512, 23.0250),
    ] {
        let q = (f64::sqrt(1.0 + 4.0 * ic) - 1.0) / 2.0;
        let vs = vp - ut * (2.0 * q + q.ln());
        let p = at(&device, 2.0, 4.0, vs);
        close(p.gms.0[0] * ut / p.id.0[0], efficiency, 6e-5);
        close(p.vdssat.0[0] / ut, vdssat, 1e-5);
    }
}

/// Enz, Chicco, Pezzotta, IEEE Solid-State Circuits Magazine 2017 (from memory; two forms of the
/// formula agree): IC = 4 (q^2 + q)/(2 + lc + sqrt(4 (1 + lc) + lc^2 (1 + 2q)^2)).
#[test]
fn velocity_saturated_current() {
    let ut = thermal_voltage(300.0);
    for (lc, q, ic, efficiency) in [
        (0.3, 1f64, 1.68367, 0.484547),
        (0.3, 5.0, 19.01371, 0.131116),
        (1.0, 1.0, 1.12311, 0.431902),
        (0.3, 0.01, f64::NAN, f64::NAN),
        (2.0, 12.0, f64::NAN, f64::NAN),
    ] {
        let length = 1e-6;
        let law = ChargeLaw {
            saturation_velocity: Curve::constant(2.0 * 0.04 * ut / (lc * length)),
            ..plain_charge(0.5, 0.6, 0.8, 200e-6)
        };
        let lanes = at_temperature(300.0);
        let fast = device(Law::Charge(law.clone()), 300.0, length, length, &lanes);
        let plain = device(
            Law::Charge(plain_charge(0.5, 0.6, 0.8, 200e-6)),
            300.0,
            length,
            length,
            &lanes,
        );
        let vp = pinch_off(&plain, 2.0, ut);
        let vs = vp - ut * (2.0 * q + q.ln());
        let p = at(&fast, 2.0, vs + 6.0, vs);
        // The plain device at the same bias carries q^2 + q.
        let ours = p.id.0[0] / at(&plain, 2.0, vs + 6.0, vs).id.0[0] * (q * q + q);
        let formula = 4.0 * (q * q + q)
            / (2.0 + lc + (4.0 * (1.0 + lc) + lc * lc * (1.0 + 2.0 * q) * (1.0 + 2.0 * q)).sqrt());
        close(ours, formula, 1e-9);
        if ic.is_finite() {
            close(formula, ic, 4e-6);
            close(p.gms.0[0] * ut / p.id.0[0], efficiency, 3e-6);
        }
    }
}

/// Razavi, *Design of Analog CMOS Integrated Circuits*, problem 2.2: W/L 100 drawn, 0.5 mA,
/// L 0.5 um; the trap is the effective length, which gives 4.444 mS.
#[test]
fn single_device_of_a_textbook_card() {
    for (vt, kp, gamma, phi, lambda, gm, ro) in [
        (0.7, 134.29e-6, 0.45, 0.9, 0.1, 3.665e-3, 20e3),
        (0.8, 38.37e-6, 0.4, 0.8, 0.2, 1.959e-3, 10e3),
    ] {
        let law = SquareLaw {
            width_loss: 0.0,
            length_loss: 0.0,
            threshold: vt,
            threshold_tc: 0.0,
            gamma,
            phi,
            kp,
            kp_exponent: 0.0,
            early_per_length: 1.0 / (lambda * 0.5e-6),
        };
        let device = device(
            Law::Square(law),
            300.0,
            50e-6,
            0.5e-6,
            &at_temperature(300.0),
        );
        // The book leaves channel-length modulation out of the bias point: VDS at its smallest.
        let vov = f64::sqrt(2.0 * 0.5e-3 / (kp * 100.0));
        let p = at(&device, vt + vov, vov + 1e-9, 0.0);
        let share = 1.0 + lambda * vov;
        close(p.gm.0[0] / share, gm, 1e-3);
        close(1.0 / p.gds.0[0], ro, 1e-2);
    }
}

#[test]
fn sizing_by_inversion_coefficient_is_its_own_inverse_and_hits_the_device() {
    let mut rng = Pcg64::seed_from_u64(4);
    for _ in 0..200 {
        let card = mosfet(Law::Charge(ChargeLaw {
            width_loss: 0.03e-6,
            length_loss: 0.04e-6,
            ..plain_charge(
                0.5,
                rng.random_range(0.2..0.9),
                rng.random_range(0.6..1.0),
                2e-4,
            )
        }));
        let (length, ic) = (
            rng.random_range(0.2e-6..10e-6),
            10f64.powf(rng.random_range(-2.0..2.0)),
        );
        let current = 10f64.powf(rng.random_range(-8.0..-4.0));
        let width = width_for(&card, 300.0, current, ic, length);
        close(
            inversion_of(&card, 300.0, current, width, length),
            ic,
            1e-12,
        );
        // The device so sized, at VP = 0, carries that current where its charge says IC.
        let d = Device::new(&card, 300.0, width, length, &at_temperature(300.0));
        let q = ((1.0 + 4.0 * ic).sqrt() - 1.0) / 2.0;
        let ut = thermal_voltage(300.0);
        let vs = -ut * (2.0 * q + q.ln());
        close(at(&d, 0.5, vs + 6.0, vs).id.0[0], current, 1e-6);
    }
}

/// A bias point and the five corrections' kinks that a difference must not straddle.
fn random_bias(rng: &mut Pcg64) -> (f64, f64, f64) {
    let vs = rng.random_range(-0.15..1.5);
    let vd = rng.random_range(-0.15..3.0);
    (rng.random_range(-0.1..3.0), vd, vs)
}

/// Central difference with one step of Richardson's extrapolation.
fn slope(f: impl Fn(f64) -> f64, h: f64) -> f64 {
    let coarse = (f(h) - f(-h)) / (2.0 * h);
    let fine = (f(0.5 * h) - f(-0.5 * h)) / h;
    (4.0 * fine - coarse) / 3.0
}

#[test]
fn every_slope_agrees_with_a_finite_difference() {
    let mut rng = Pcg64::seed_from_u64(5);
    let (mut reversed, mut ionising) = (0, 0);
    for round in 0..4000 {
        let law = random_law(&mut rng);
        let lanes = random_conditions(&mut rng);
        let square = matches!(law, Law::Square(_));
        let device = device(law, 300.0, 5e-6, 0.5e-6, &lanes);
        let (vg, vd, vs) = random_bias(&mut rng);
        let h = 2e-4;
        if (vd - vs).abs() < 2.0 * h {
            continue;
        }
        let here = at(&device, vg, vd, vs);
        let shifted = |d: [f64; 3]| at(&device, vg + d[0], vd + d[1], vs + d[2]);
        let pick = |p: &Point, ib: bool, i: usize| if ib { p.ib.0[i] } else { p.id.0[i] };
        for lane in 0..WIDTH {
            if square {
                // The square law's second derivative jumps at both borders of saturation.
                let edge = (vd - vs).abs() - here.vdssat.0[lane];
                if edge.abs() < 4.0 * h || here.vdssat.0[lane] < 4.0 * h {
                    continue;
                }
            }
            for ib in [false, true] {
                let by = |which: usize| {
                    slope(
                        |step| {
                            let mut d = [0.0; 3];
                            d[which] = step;
                            pick(&shifted(d), ib, lane)
                        },
                        h,
                    )
                };
                let ours = if ib {
                    here.ib_slopes.map(|s| s.0[lane])
                } else {
                    [here.gm.0[lane], here.gds.0[lane], -here.gms.0[lane]]
                };
                // Rounding of the current over the step, and the fourth-order term h^4/UT^5; an
                // impact current far below any other is steeper than the step resolves.
                let size =
                    pick(&here, ib, lane).abs() / 0.02 + ours.iter().map(|s| s.abs()).sum::<f64>();
                for (which, ours) in ours.into_iter().enumerate() {
                    let truth = by(which);
                    assert!(
                        (ours - truth).abs() <= 2e-8 * size + 1e-18,
                        "round {round} ib {ib} slope {which} at {vg} {vd} {vs}: {ours} {truth} of {size}"
                    );
                }
            }
            reversed += usize::from(vd < vs && here.id.0[lane] < -1e-12);
            ionising += usize::from(here.ib.0[lane] > 1e-12);
        }
    }
    assert!(reversed > 1000 && ionising > 1000, "{reversed} {ionising}");
}

/// Along a line of bias points, the current is continuous, and it never falls with VDS or VGS.
///
/// The impact current only adds. Mobility that rises with charge by more
/// than a factor of two (`mobility_rise` above 1) is outside: there the falling drain charge
/// takes more mobility than it adds current.
#[test]
fn current_is_continuous_and_rises_with_drain_and_gate() {
    let mut rng = Pcg64::seed_from_u64(6);
    for _ in 0..12_500 {
        let device = device(
            random_law(&mut rng),
            300.0,
            5e-6,
            0.5e-6,
            &random_conditions(&mut rng),
        );
        let (vg, vd, vs) = random_bias(&mut rng);
        let here = at(&device, vg, vd, vs);
        let h = 1e-7;
        let drain = at(&device, vg, vd + h, vs);
        let gate = at(&device, vg + h, vd, vs);
        let source = at(&device, vg, vd, vs + h);
        for lane in 0..WIDTH {
            let id = here.id.0[lane];
            let size = here.gms.0[lane].abs() + here.gds.0[lane].abs() + here.gm.0[lane].abs();
            // A jump would show as a difference far above slope times step.
            for p in [&drain, &gate, &source] {
                let jump = (p.id.0[lane] - id).abs();
                assert!(
                    jump <= 1.5 * size * h + 1e-14 * id.abs() + 1e-24,
                    "{vg} {vd} {vs}: {jump}"
                );
            }
            assert!(
                here.gds.0[lane] >= 0.0,
                "gds {} at {vg} {vd} {vs}",
                here.gds.0[lane]
            );
            assert!(
                here.gms.0[lane] >= 0.0,
                "gms {} at {vg} {vd} {vs}",
                here.gms.0[lane]
            );
            let forward = if vd < vs { -1.0 } else { 1.0 };
            assert!(
                here.gm.0[lane] * forward >= 0.0,
                "gm {} at {vg} {vd} {vs}",
                here.gm.0[lane]
            );
            assert!(id * forward >= 0.0, "id {id} at {vg} {vd} {vs}");
            assert!(here.ib.0[lane] >= 0.0);
        }
    }
}

/// The same over long steps: values, not slopes.
#[test]
fn current_never_falls_along_a_sweep() {
    let mut rng = Pcg64::seed_from_u64(7);
    for _ in 0..400 {
        let device = device(
            random_law(&mut rng),
            300.0,
            5e-6,
            0.5e-6,
            &random_conditions(&mut rng),
        );
        let (vg, _, vs) = random_bias(&mut rng);
        let (mut by_drain, mut by_gate) = ([f64::NEG_INFINITY; WIDTH], [f64::NEG_INFINITY; WIDTH]);
        for step in 0..200 {
            let v = -0.3 + 0.02 * f64::from(step);
            let drain = at(&device, vg, vs + v, vs);
            let gate = at(&device, v, vs + 1.0, vs);
            for lane in 0..WIDTH {
                let slack = 1e-13 * drain.id.0[lane].abs() + 1e-24;
                assert!(
                    drain.id.0[lane] >= by_drain[lane] - slack,
                    "VG {vg} VS {vs} VDS {v}"
                );
                assert!(gate.id.0[lane] >= by_gate[lane] - 1e-13 * gate.id.0[lane] - 1e-24);
                by_drain[lane] = drain.id.0[lane];
                by_gate[lane] = gate.id.0[lane];
            }
        }
    }
}

#[test]
fn no_current_without_drain_source_voltage() {
    let mut rng = Pcg64::seed_from_u64(8);
    for _ in 0..2000 {
        let device = device(
            random_law(&mut rng),
            300.0,
            5e-6,
            0.5e-6,
            &random_conditions(&mut rng),
        );
        let (vg, _, v) = random_bias(&mut rng);
        let p = at(&device, vg, v, v);
        for lane in 0..WIDTH {
            let (gds, gms) = (p.gds.0[lane], p.gms.0[lane]);
            // Zero to the rounding of the charges, which UT makes a rounding of the voltage.
            let rounding = 4.0 * f64::EPSILON * gds;
            assert!(
                p.id.0[lane].abs() <= rounding,
                "{} {rounding}",
                p.id.0[lane]
            );
            assert!(p.ib.0[lane] <= rounding);
            assert!(p.gm.0[lane].abs() <= rounding / 0.02);
            assert!((gds - gms).abs() <= 1e-12 * gds, "{gds} {gms}");
        }
    }
}

/// Drain and source of a transistor are the same thing: exchanging their voltages turns the current round.
#[test]
fn drain_and_source_exchange_roles() {
    let mut rng = Pcg64::seed_from_u64(9);
    for _ in 0..2000 {
        let device = device(
            random_law(&mut rng),
            300.0,
            5e-6,
            0.5e-6,
            &random_conditions(&mut rng),
        );
        let (vg, vd, vs) = random_bias(&mut rng);
        let (p, r) = (at(&device, vg, vd, vs), at(&device, vg, vs, vd));
        assert_eq!(p.id, -r.id);
        assert_eq!(p.gm, -r.gm);
        assert_eq!((p.gms, p.gds), (r.gds, r.gms));
        assert_eq!(p.vdssat, r.vdssat);
    }
}

/// Lanes do not see each other: eight lanes at once give what each gives alone.
#[test]
fn lanes_are_independent() {
    let mut rng = Pcg64::seed_from_u64(10);
    for _ in 0..500 {
        let law = random_law(&mut rng);
        let lanes = random_conditions(&mut rng);
        let together = device(law.clone(), 300.0, 5e-6, 0.5e-6, &lanes);
        let v: [Lanes; 3] =
            std::array::from_fn(|_| Lanes::from_fn(|_| rng.random_range(-0.2..2.5)));
        let all = together.at(v[0], v[1], v[2]);
        for (lane, &conditions) in lanes.iter().enumerate() {
            let alone = device(law.clone(), 300.0, 5e-6, 0.5e-6, &[conditions; WIDTH]);
            let one = at(&alone, v[0].0[lane], v[1].0[lane], v[2].0[lane]);
            assert_eq!(all.id.0[lane], one.id.0[0]);
            assert_eq!(all.gms.0[lane], one.gms.0[0]);
            assert_eq!(all.ib.0[lane], one.ib.0[0]);
        }
    }
}

#[test]
fn width_scales_the_current() {
    let mut rng = Pcg64::seed_from_u64(11);
    for _ in 0..200 {
        let device = device(
            random_law(&mut rng),
            300.0,
            5e-6,
            0.5e-6,
            &random_conditions(&mut rng),
        );
        let (vg, vd, vs) = random_bias(&mut rng);
        let (one, four) = (
            at(&device, vg, vd, vs),
            at(&device.widened(4.0), vg, vd, vs),
        );
        assert_eq!(one.id * 4.0, four.id);
        assert_eq!(one.gm * 4.0, four.gm);
        for lane in 0..WIDTH {
            // Numbers below the smallest normal one are rounded coarsely.
            let (four, one) = (four.ib.0[lane], one.ib.0[lane]);
            assert!((4.0 * one - four).abs() <= 1e-15 * four + 1e-300);
        }
        assert_eq!(one.vdssat, four.vdssat);
    }
}
