//! Published circuits in the square law: the numbers of the textbooks, each with its book.
//!
//! Where a book leaves channel-length modulation out of the bias point, so do the cards here; where a
//! book gives a device its ro = VA/I at the bias point, [`with_slopes`] makes a device of exactly
//! that gm and ro there.

use super::draft::{Draft, Solved};
use super::support::{at_temperature, device, mosfet, plain_charge};
use biasloom::circuit::dc::State;
use biasloom::device::constants::thermal_voltage;
use biasloom::device::{Device, mismatch_of};
use biasloom::numeric::lanes::Lanes;
use biasloom::process::{Law, Mismatch, Mosfet, SquareLaw};

fn close(ours: f64, truth: f64, relative: f64) {
    assert!(
        (ours - truth).abs() <= relative * truth.abs(),
        "{ours} instead of {truth}"
    );
}

fn law(threshold: f64, kp: f64, early: f64) -> SquareLaw {
    SquareLaw {
        width_loss: 0.0,
        length_loss: 0.0,
        threshold,
        threshold_tc: 0.0,
        gamma: 0.0,
        phi: 0.8,
        kp,
        kp_exponent: 0.0,
        // The devices below are 1 um long.
        early_per_length: early / 1e-6,
    }
}

/// A device of W/L = `aspect` with Early voltage `early`, no body effect.
fn square(threshold: f64, kp: f64, aspect: f64, early: f64) -> Device {
    let law = Law::Square(law(threshold, kp, early));
    device(law, 300.0, aspect * 1e-6, 1e-6, &at_temperature(300.0))
}

const NO_SLOPE: f64 = f64::INFINITY;

/// A device that carries `id` with exactly `gm` and `ro` at VGS and VDS, both positive and VDS beyond
/// saturation. With ID = beta/2 Vov^2 (1 + VDS/VA): gm = 2 ID/Vov and ro = (VA + VDS)/ID, so
/// Vov, VA, beta and the threshold follow one after the other.
fn with_slopes(id: f64, gm: f64, ro: f64, vgs: f64, vds: f64) -> Device {
    let vov = 2.0 * id / gm;
    assert!(vds > vov, "the device would leave saturation");
    let early = ro * id - vds;
    let beta = 2.0 * id / (vov * vov * (1.0 + vds / early));
    square(vgs - vov, beta, 1.0, early)
}

/// The device of the small-signal oracle: 100 uA, 632.4555 uS, 200 kOhm.
fn oracle(vgs: f64, vds: f64) -> Device {
    with_slopes(100e-6, 632.4555e-6, 200e3, vgs, vds)
}

// ---------------------------------------------------------------- output resistances

/// Checks that the solution stands where the devices were made for, and returns the output
/// resistance.
fn oracle_resistance(draft: &Draft, expected: &[(&str, f64)]) -> f64 {
    let solved = draft.solve();
    for &(node, volts) in expected {
        assert!((solved.volts(node) - volts).abs() < 1e-9, "{node}");
    }
    for p in &solved.state.points {
        close(p.gm.0[0], 632.4555e-6, 1e-9);
        close(1.0 / p.gds.0[0], 200e3, 1e-9);
    }
    close(solved.amps("out"), 100e-6, 1e-9);
    solved.resistance("out")
}

/// Maths: every device 632.4555 uS and 200 kOhm, no body effect, ideal current input. The numbers
/// are those of the linear network; each device below is made to have exactly these slopes where
/// the circuit puts it.
#[test]
fn output_resistances_of_seven_mirrors() {
    let mut simple = Draft::new();
    simple
        .voltage("out", 1.5)
        .current("0", "in", 100e-6)
        .nmos("in", "in", "0", oracle(1.0, 1.0))
        .nmos("out", "in", "0", oracle(1.0, 1.5));
    close(oracle_resistance(&simple, &[("in", 1.0)]), 200.000e3, 1e-6);

    let mut degenerated = Draft::new();
    degenerated
        .voltage("out", 1.5)
        .current("0", "in", 100e-6)
        .nmos("in", "in", "a", oracle(0.9, 0.9))
        .nmos("out", "in", "b", oracle(0.9, 1.4))
        .resistor("a", "0", 1e3)
        .resistor("b", "0", 1e3);
    let expected = [("in", 1.0), ("a", 0.1), ("b", 0.1)];
    close(oracle_resistance(&degenerated, &expected), 327.491e3, 1e-6);

    let mut cascode = Draft::new();
    cascode
        .voltage("out", 3.0)
        .current("0", "c", 100e-6)
        .nmos("c", "c", "g", oracle(1.0, 1.0))
        .nmos("g", "g", "0", oracle(1.0, 1.0))
        .nmos("out", "c", "y", oracle(1.0, 2.0))
        .nmos("y", "g", "0", oracle(1.0, 1.0));
    let expected = [("c", 2.0), ("g", 1.0), ("y", 1.0)];
    close(oracle_resistance(&cascode, &expected), 25.69822e6, 1e-6);

    let mut wide = Draft::new();
    wide.voltage("out", 2.0)
        .current("0", "g", 100e-6)
        .current("0", "c", 100e-6)
        .nmos("c", "c", "0", oracle(1.4, 1.4))
        .nmos("g", "c", "x", oracle(1.0, 0.6))
        .nmos("x", "g", "0", oracle(1.0, 0.4))
        .nmos("out", "c", "y", oracle(1.0, 1.6))
        .nmos("y", "g", "0", oracle(1.0, 0.4));
    let expected = [("c", 1.4), ("g", 1.0), ("x", 0.4), ("y", 0.4)];
    close(oracle_resistance(&wide, &expected), 25.69822e6, 1e-6);

    let mut wilson = Draft::new();
    wilson
        .voltage("out", 3.0)
        .current("0", "in", 100e-6)
        .nmos("in", "y", "0", oracle(1.0, 2.0))
        .nmos("y", "y", "0", oracle(1.0, 1.0))
        .nmos("out", "in", "y", oracle(1.0, 2.0));
    let expected = [("in", 2.0), ("y", 1.0)];
    close(oracle_resistance(&wilson, &expected), 25.49979e6, 1e-6);

    let mut improved = Draft::new();
    improved
        .voltage("out", 3.0)
        .current("0", "in", 100e-6)
        .nmos("in", "in", "x", oracle(1.0, 1.0))
        .nmos("x", "y", "0", oracle(1.0, 1.0))
        .nmos("y", "y", "0", oracle(1.0, 1.0))
        .nmos("out", "in", "y", oracle(1.0, 2.0));
    let expected = [("in", 2.0), ("x", 1.0), ("y", 1.0)];
    close(oracle_resistance(&improved, &expected), 25.49979e6, 1e-6);

    let mut regulated = Draft::new();
    regulated
        .voltage("out", 3.0)
        .current("0", "g", 100e-6)
        .current("0", "c", 100e-6)
        .nmos("g", "g", "0", oracle(1.0, 1.0))
        .nmos("y", "g", "0", oracle(1.0, 0.8))
        .nmos("c", "y", "0", oracle(0.8, 1.8))
        .nmos("out", "c", "y", oracle(1.0, 2.2));
    let expected = [("g", 1.0), ("y", 0.8), ("c", 1.8)];
    close(oracle_resistance(&regulated, &expected), 3.225698e9, 1e-6);
}

// ---------------------------------------------------------------- published mirrors

/// VDD 3 V, R from the supply into the diode, output at `out` volts.
fn resistor_fed(r: f64, out: f64, diode: Device, output: Device) -> Solved {
    let mut d = Draft::new();
    d.voltage("vdd", 3.0)
        .voltage("out", out)
        .resistor("vdd", "in", r)
        .nmos("in", "in", "0", diode)
        .nmos("out", "in", "0", output);
    d.solve()
}

/// Sedra & Smith, *Microelectronic Circuits*, mirror example: VDD 3 V, 100 uA, 10/1 um, VT 0.7 V,
/// 200 uA/V^2, 20 V/um. The book measures the slope from VO = VGS: the law's own VA is then
/// 20 V - VGS and the gain is less by the same share.
#[test]
fn basic_mirror_fed_by_a_resistor() {
    let vgs = 1.01623;
    let book = |va: f64| square(0.7, 200e-6 * (va - vgs) / va, 10.0, va - vgs);
    let s = resistor_fed(19.838e3, vgs, book(20.0), book(20.0));
    close(s.volts("in"), vgs, 1e-5);
    close(s.amps("out"), 100e-6, 1e-4);
    close(s.resistance("out"), 200e3, 1e-4);
    close(s.state.points[1].vdssat.0[0], 0.31623, 1e-4);
    let higher = resistor_fed(19.838e3, vgs + 1.0, book(20.0), book(20.0));
    close(higher.amps("out") - s.amps("out"), 5e-6, 1e-4);
    // Same book, exercise: at most 1 % per volt needs 5 um, and W 50 um keeps the ratio.
    let s = resistor_fed(19.838e3, vgs, book(100.0), book(100.0));
    let higher = resistor_fed(19.838e3, vgs + 1.0, book(100.0), book(100.0));
    close(higher.amps("out") / s.amps("out") - 1.0, 0.01, 1e-4);
}

/// The same circuit with channel-length modulation in the diode, which the book leaves out: derived.
#[test]
fn basic_mirror_with_the_diode_s_own_slope() {
    let m = || square(0.7, 200e-6, 10.0, 20.0);
    let s = resistor_fed(19.915e3, 1.00854, m(), m());
    close(s.volts("in"), 1.00854, 1e-5);
    close(s.amps("out"), 100e-6, 5e-5);
}

/// (dI/I)/(dVDD/VDD) = (VDD/I)/(R + 1/gm) = 1.4006: derived.
#[test]
fn supply_sensitivity_of_the_basic_mirror() {
    let m = || square(0.7, 200e-6, 10.0, NO_SLOPE);
    let s = resistor_fed(19.838e3, 1.0, m(), m());
    close(s.transfer("out", "vdd") / s.amps("out") * 3.0, 1.4006, 1e-4);
}

/// Sedra & Smith ch. 8: p-channel cascode source, VDD 1.8 V, Vtp -0.5 V, 6 V/um, 100 uA/V^2, 50 uA,
/// 1 MOhm, Vov 0.2 V: VA 2.236 V, L 0.3727 um, W/L 25, gates at 1.1 and 0.9 V, output up to 1.4 V.
#[test]
fn p_channel_cascode_source() {
    let cascode = |out: f64, top: Device, low: Device| {
        let mut d = Draft::new();
        d.voltage("vdd", 1.8)
            .voltage("g1", 1.1)
            .voltage("g2", 0.9)
            .voltage("out", out)
            .pmos("x", "g1", "vdd", top)
            .pmos("out", "g2", "x", low);
        d.solve_from(1.5)
    };
    let flat = || square(0.5, 100e-6, 25.0, NO_SLOPE);
    let s = cascode(1.0, flat(), flat());
    close(s.amps("out"), -50e-6, 1e-9);
    close(s.volts("x"), 1.6, 1e-6);
    // At 1.4 V the output device stands at the border of saturation, and just beyond its drain
    // begins to matter: x follows it.
    let s = cascode(1.4, flat(), flat());
    close(s.volts("x") - 1.4, s.state.points[1].vdssat.0[0], 1e-6);
    assert_eq!(
        cascode(1.4 - 1e-3, flat(), flat()).state.points[1].gds.0[0],
        0.0
    );
    assert!(cascode(1.4 + 1e-3, flat(), flat()).state.points[1].gds.0[0] > 1e-7);
    // ro = VA/I and gm = 2 I/Vov at the bias point; the book's Ro is gm ro^2.
    let (gm, ro) = (2.0 * 50e-6 / 0.2, 0.3727e-6 * 6e6 / 50e-6);
    let (top, low) = (
        with_slopes(50e-6, gm, ro, 0.7, 0.2 + 1e-9),
        with_slopes(50e-6, gm, ro, 0.7, 0.6),
    );
    let s = cascode(1.0, top, low);
    let p = s.state.points[1];
    close(p.gm.0[0] / (p.gds.0[0] * p.gds.0[0]), 1e6, 1e-2);
    // The whole circuit: ro (2 + gm ro).
    close(s.resistance("out"), ro * (2.0 + gm * ro), 1e-6);
}

/// Allen & Holberg, *CMOS Analog Circuit Design*, sec. 4.4 (from memory, the arithmetic fits): edges
/// 0.05 um off on 5 and 20 um; from four equal units the ratio is exact.
#[test]
fn ratio_with_wrong_edges() {
    let ratio = |loss: f64, width: f64, units: f64| {
        let make = |w: f64| {
            let law = SquareLaw {
                width_loss: loss,
                ..law(0.7, 110e-6, NO_SLOPE)
            };
            device(Law::Square(law), 300.0, w, 1e-6, &at_temperature(300.0))
        };
        let mut d = Draft::new();
        d.voltage("out", 1.5)
            .current("0", "in", 50e-6)
            .nmos("in", "in", "0", make(5e-6))
            .nmos("out", "in", "0", make(width).widened(units));
        d.solve().amps("out") / 50e-6
    };
    close(ratio(0.05e-6, 20e-6, 1.0), 4.0303, 2e-5);
    close(ratio(-0.05e-6, 20e-6, 1.0), 3.9703, 2e-5);
    close(ratio(0.05e-6, 5e-6, 4.0), 4.0, 1e-12);
}

/// A 1:1 mirror at 100 uA whose diode stands at `vgs` and whose output at `out`.
fn one_to_one(vgs: f64, out: f64, vov: f64, early: f64, shift: f64) -> Solved {
    let beta = 2.0 * 100e-6 / (vov * vov * (1.0 + vgs / early));
    let mut d = Draft::new();
    d.voltage("out", out)
        .current("0", "in", 100e-6)
        .nmos("in", "in", "0", square(vgs - vov, beta, 1.0, early))
        .nmos(
            "out",
            "in",
            "0",
            square(vgs - vov + shift, beta, 1.0, early),
        );
    d.solve()
}

/// Allen & Holberg fig. 4.4-2: the ratio's error from a VDS difference.
#[test]
fn ratio_with_unequal_drains() {
    for lambda in [0.01, 0.015, 0.02] {
        let s = one_to_one(1.0, 2.0, 0.3, 1.0 / lambda, 0.0);
        // The linear figure takes the current at VDS = 0 as the base.
        let base = 100e-6 / (1.0 + lambda);
        close((s.amps("out") - 100e-6) / base, lambda, 1e-6);
    }
    let s = one_to_one(1.0, 2.0, 0.3, 25.0, 0.0);
    close(s.amps("out") / 100e-6, 1.08 / 1.04, 1e-9);
    close(s.amps("out") / 100e-6, 1.03846, 2e-6);
}

/// Gray, Hurst, Lewis, Meyer: the ratio's error from a threshold difference, (1 - dVT/Vov)^2 - 1.
#[test]
fn ratio_with_unequal_thresholds() {
    for (shift, vov, error, linear) in
        [(0.010, 0.5, -0.0396, -0.04), (0.005, 0.2, -0.049375, -0.05)]
    {
        let s = one_to_one(1.2, 1.2, vov, NO_SLOPE, shift);
        close(s.amps("out") / 100e-6 - 1.0, error, 1e-6);
        // Linear, by the adjoint solution of the ideal mirror.
        let s = one_to_one(1.2, 1.2, vov, NO_SLOPE, 0.0);
        let by = s.circuit.sensitivity(&s.state, s.node("out"));
        close(by.threshold[1].0[0] * shift / 100e-6, linear, 1e-6);
        close(by.threshold[0].0[0], -by.threshold[1].0[0], 1e-9);
    }
}

/// Allen & Holberg sec. 4.3 (from memory): 100 uA, lambda 0.04, 110 uA/V^2, W/L 1.
#[test]
fn simple_and_cascode_sink() {
    let vov = (2.0 * 100e-6 / 110e-6_f64).sqrt();
    // ro = 1/(lambda I), gm = sqrt(2 k' W/L I): the book's slopes, at the bias point.
    let (gm, ro) = ((2.0 * 110e-6 * 100e-6_f64).sqrt(), 250e3);
    close(gm, 148.3e-6, 1e-3);
    let mut d = Draft::new();
    d.voltage("out", 5.0)
        .voltage("g", 0.7 + vov)
        .voltage("c", 1.4 + vov + vov)
        .nmos(
            "y",
            "g",
            "0",
            with_slopes(100e-6, gm, ro, 0.7 + vov, 0.7 + vov),
        )
        .nmos(
            "out",
            "c",
            "y",
            with_slopes(100e-6, gm, ro, 0.7 + vov, 4.3 - vov),
        );
    let s = d.solve();
    close(s.amps("out"), 100e-6, 1e-9);
    let p = s.state.points[1];
    close(1.0 / p.gds.0[0], ro, 1e-9);
    close(p.gm.0[0] / (p.gds.0[0] * p.gds.0[0]), 9.27e6, 1e-2);
    close(s.resistance("out"), ro * (2.0 + gm * ro), 1e-6);
}

/// Allen & Holberg sec. 4.5 (from memory): VDD 5 V, W/L 2, R 100 kOhm, 110 uA/V^2, VT 0.7 V.
#[test]
fn diode_and_resistor_reference() {
    let at = |vdd: f64| {
        let mut d = Draft::new();
        d.voltage("vdd", vdd).resistor("vdd", "ref", 100e3).nmos(
            "ref",
            "ref",
            "0",
            square(0.7, 110e-6, 2.0, NO_SLOPE),
        );
        d.solve().volts("ref")
    };
    close(at(5.0), 1.2814, 5e-5);
    let slope = (at(5.001) - at(4.999)) / 0.002;
    close(slope * 5.0 / at(5.0), 0.283, 1e-3);
}

/// Allen & Holberg sec. 4.5 (formula from memory): I R = VT + sqrt(2 I/beta), 8.2227 uA at 100 kOhm,
/// 1.1 mA/V^2, 0.7 V.
#[test]
fn threshold_referenced_source() {
    let n = || square(0.7, 1.1e-3, 1.0, NO_SLOPE);
    let p = || square(0.7, 0.5e-3, 1.0, NO_SLOPE);
    let mut d = Draft::new();
    d.voltage("vdd", 5.0)
        .nmos("a", "r", "0", n())
        .nmos("m", "a", "r", n())
        .resistor("r", "0", 100e3)
        .pmos("m", "m", "vdd", p())
        .pmos("a", "m", "vdd", p())
        .voltage("out", 2.0)
        .pmos("out", "m", "vdd", p());
    // The dead point has every device off: start alive.
    let circuit = d.circuit();
    let mut volts = vec![Lanes::splat(1.0); d.netlist.nodes.len()];
    for (name, v) in [("a", 1.7), ("m", 4.1), ("r", 0.82)] {
        volts[d.node(name)] = Lanes::splat(v);
    }
    let mut state = State::start(volts);
    assert!(circuit.solve(&mut state));
    let out = circuit.current_from(&state, d.node("out")).0[0];
    let (r, beta, vt) = (100e3, 1.1e-3, 0.7);
    let root = |i: f64| vt + (2.0 * i / beta).sqrt() - i * r;
    assert!(root(8.22265e-6) > 0.0 && root(8.22275e-6) < 0.0);
    close(-out, 8.2227e-6, 6e-6);
    assert!(root(-out * (1.0 - 1e-8)) > 0.0 && root(-out * (1.0 + 1e-8)) < 0.0);
}

/// Sooch, US patent 4,550,284 (1985); Gray et al. fig. 4.12: with equal currents a triode device of
/// one third of W/L (level-shift version: a diode of one quarter) biases the cascode gate so that
/// the output works down to exactly 2 Vov. Johns & Martin ch. 6 (from memory): cascode
/// (W/L)/n^2, bias diode (W/L)/(n+1)^2, output down to (n+1) Vov.
#[test]
fn wide_swing_bias_devices() {
    let vov = 0.2;
    let beta = 2.0 * 10e-6 / (vov * vov);
    let m = |share: f64| square(0.5, beta, share, NO_SLOPE);
    let wide = |out: f64, third: bool, n: f64| {
        let mut d = Draft::new();
        d.voltage("out", out)
            .current("0", "g", 10e-6)
            .current("0", "c", 10e-6)
            .nmos("g", "c", "x", m(1.0 / (n * n)))
            .nmos("x", "g", "0", m(1.0))
            .nmos("out", "c", "y", m(1.0 / (n * n)))
            .nmos("y", "g", "0", m(1.0));
        if third {
            d.nmos("c", "c", "t", m(1.0))
                .nmos("t", "c", "0", m(1.0 / 3.0));
        } else {
            d.nmos("c", "c", "0", m(1.0 / ((n + 1.0) * (n + 1.0))));
        }
        d.solve()
    };
    for (third, n) in [(true, 1.0), (false, 1.0), (false, 2.0), (false, 0.5)] {
        let limit = (n + 1.0) * vov;
        let above = wide(limit + 1e-6, third, n);
        close(above.volts("c"), 0.5 + limit, 1e-6);
        close(above.amps("out"), 10e-6, 1e-6);
        for (upper, lower) in [(2, 3), (0, 1)] {
            // Both devices of the leg stand at the border of saturation; the input's upper one
            // above it, since its drain is a gate.
            let p = &above.state.points;
            let y = above.volts(if lower == 3 { "y" } else { "x" });
            close(y, p[lower].vdssat.0[0], 1e-5);
            if upper == 2 {
                close(limit + 1e-6 - y, p[upper].vdssat.0[0], 1e-4);
            }
        }
        assert!(above.conductance("out").abs() < 1e-9);
        let below = wide(limit - 0.05, third, n);
        assert!(
            below.conductance("out") > 1e-7,
            "{}",
            below.conductance("out")
        );
    }
}

/// Gray et al., table in ch. 4; Razavi ch. 5: least output voltage of the stacked cascode and of the
/// Wilson mirror is VT + 2 Vov.
#[test]
fn least_output_voltage_of_stacked_cascode_and_wilson() {
    let (vt, vov) = (0.5, 0.2);
    let m = || square(vt, 2.0 * 10e-6 / (vov * vov), 1.0, NO_SLOPE);
    let stacked = |out: f64| {
        let mut d = Draft::new();
        d.voltage("out", out)
            .current("0", "c", 10e-6)
            .nmos("c", "c", "g", m())
            .nmos("g", "g", "0", m())
            .nmos("out", "c", "y", m())
            .nmos("y", "g", "0", m());
        d.solve()
    };
    let limit = vt + 2.0 * vov;
    let s = stacked(limit);
    close(s.amps("out"), 10e-6, 1e-6);
    close(limit - s.volts("y"), s.state.points[2].vdssat.0[0], 1e-6);
    assert_eq!(stacked(limit + 1e-3).state.points[2].gds.0[0], 0.0);
    assert!(stacked(limit - 1e-3).state.points[2].gds.0[0] > 1e-7);
    let wilson = |out: f64| {
        let mut d = Draft::new();
        d.voltage("out", out)
            .current("0", "in", 10e-6)
            .nmos("in", "y", "0", m())
            .nmos("y", "y", "0", m())
            .nmos("out", "in", "y", m());
        d.solve()
    };
    let s = wilson(limit + 1e-6);
    close(s.amps("out"), 10e-6, 1e-6);
    close(s.volts("in"), 2.0 * (vt + vov), 1e-6);
    // Below the limit the output device leaves saturation: its gate must rise to keep the current.
    assert!(wilson(limit - 1e-3).volts("in") > 2.0 * (vt + vov) + 1e-7);
    assert!((wilson(limit + 1e-3).volts("in") - 2.0 * (vt + vov)).abs() < 1e-7);
}

// ---------------------------------------------------------------- self-biased references

/// Two branches with equal currents from a p-channel mirror, an n-channel pair 1:K and a resistor.
fn beta_multiplier(unit: Device, ratio: f64, p: Device, r: f64, guess: [f64; 3]) -> Solved {
    let mut d = Draft::new();
    d.voltage("vdd", 4.0)
        .voltage("out", 2.0)
        .nmos("g", "g", "0", unit)
        .nmos("m", "g", "s", unit.widened(ratio))
        .resistor("s", "0", r)
        .pmos("m", "m", "vdd", p)
        .pmos("g", "m", "vdd", p)
        .pmos("out", "m", "vdd", p);
    let circuit = d.circuit();
    let lane = Lanes::splat;
    let mut volts = vec![lane(0.0); d.netlist.nodes.len()];
    for (name, v) in ["g", "m", "s"].into_iter().zip(guess) {
        volts[d.node(name)] = lane(v);
    }
    let mut state = State::start(volts);
    assert!(circuit.solve(&mut state), "{:?}", state.residual);
    circuit.linearise(&mut state);
    Solved {
        draft: d,
        circuit,
        state,
    }
}

/// Razavi ch. 12; Steininger 1990: I = 2/(k' W/L R^2) (1 - 1/sqrt K)^2, gm = (2/R)(1 - 1/sqrt K).
#[test]
fn beta_multiplier_in_strong_inversion() {
    for ratio in [2.0, 4.0, 9.0] {
        let (beta, r) = (200e-6, 20e3);
        let share = 1.0 - 1.0 / f64::sqrt(ratio);
        let i = 2.0 / (beta * r * r) * share * share;
        let unit = square(0.6, beta, 1.0, NO_SLOPE);
        let p = square(0.6, beta, 1.0, NO_SLOPE);
        let vgs = 0.6 + (2.0 * i / beta).sqrt();
        let s = beta_multiplier(unit, ratio, p, r, [vgs + 0.05, 4.0 - vgs - 0.05, i * r]);
        close(-s.amps("out"), i, 1e-9);
        close(s.state.points[0].gm.0[0], 2.0 / r * share, 1e-9);
    }
}

/// Vittoz & Fellrath, JSSC 12(3), 1977, in every region: with a common gate and a common bulk,
/// I R/UT = v(IC) - v(IC/K), v = 2q + ln q; K = 4 from weak to strong inversion. Derived.
#[test]
fn beta_multiplier_in_every_region() {
    let ut = thermal_voltage(300.0);
    for (ic, swing) in [
        (0.01, 1.3937),
        (0.1, f64::NAN),
        (1.0, 1.9152),
        (10.0, 3.9334),
        (100.0, 10.718),
    ] {
        let law = plain_charge(0.5, 0.6, 0.8, 200e-6);
        let q = |ic: f64| ((1.0 + 4.0 * ic).sqrt() - 1.0) / 2.0;
        let v = |ic: f64| 2.0 * q(ic) + q(ic).ln();
        let target = v(ic) - v(ic / 4.0);
        if swing.is_finite() {
            close(target, swing, 1e-4);
        }
        // A device with W/L 10 in that inversion: pinch-off by v(IC), the current by the model.
        let unit = device(Law::Charge(law), 300.0, 10e-6, 1e-6, &at_temperature(300.0));
        let vp = ut * v(ic);
        let root = (0.8 + vp).sqrt();
        let vg = 0.5 + vp + 0.6 * (root - 0.8f64.sqrt());
        let n = 1.0 + 0.6 / (2.0 * (0.8 + vp + 4.0 * ut).sqrt());
        let i = 2.0 * n * 200e-6 * 10.0 * ut * ut * ic;
        let p = square(0.6, 2.0 * i / 0.04, 1.0, NO_SLOPE);
        let s = beta_multiplier(unit, 4.0, p, target * ut / i, [vg, 3.2, target * ut]);
        // The diode's drain stands at VGS, over 13 UT: saturated to 3e-6.
        close(-s.amps("out"), i, 2e-5);
    }
}

// ---------------------------------------------------------------- matching

/// Relative sigma of the output current of a mirror whose transistors all vary on their own: the
/// devices' sigmas through the adjoint sensitivities.
fn spread(s: &Solved, sigma: impl Fn(usize) -> (f64, f64)) -> f64 {
    let by = s.circuit.sensitivity(&s.state, s.node("out"));
    let mut sum = 0.0;
    for k in 0..s.draft.devices.len() {
        let (threshold, gain) = sigma(k);
        sum += (by.threshold[k].0[0] * threshold).powi(2) + (by.gain[k].0[0] * gain).powi(2);
    }
    sum.sqrt() / s.amps("out").abs()
}

fn card(a_vt: f64, a_beta: f64) -> Mosfet {
    Mosfet {
        mismatch: Mismatch {
            threshold: a_vt,
            gain: a_beta,
        },
        ..mosfet(Law::Square(law(0.5, 200e-6, NO_SLOPE)))
    }
}

/// Pelgrom, Duinmaijer, Welbers, JSSC 24(5), 1989 (a coefficient speaks of a pair) and Lakshmikumar,
/// Hadaway, Copeland, JSSC 21(6), 1986: sigma_I^2 = sigma_beta^2 + (gm/ID)^2 sigma_VT^2.
#[test]
fn mismatch_of_a_one_to_one_mirror() {
    // A_VT 5 mV um, A_beta 1 % um, 10 x 1 um, Vov 0.2 V: derived.
    let m = card(5e-9, 1e-8);
    let (vt, beta) = mismatch_of(&m, 10e-6, 1e-6);
    close(vt * 2f64.sqrt(), 1.5811e-3, 1e-4);
    close(beta * 2f64.sqrt(), 0.3162e-2, 1e-4);
    let s = one_to_one(0.9, 0.9, 0.2, NO_SLOPE, 0.0);
    close(spread(&s, |_| (vt, beta)), 1.6125e-2, 1e-4);
    // Kinget, JSSC 40(6), 2005: both shares are equal at Vov = 2 A_VT/A_beta.
    let s = one_to_one(1.5, 1.5, 2.0 * 5e-9 / 1e-8, NO_SLOPE, 0.0);
    close(spread(&s, |_| (vt, 0.0)), spread(&s, |_| (0.0, beta)), 1e-9);
}

/// The least area of a 1:1 mirror, 3 sigma = 1 %, Vov 0.2 V, 10 uA, 200 uA/V^2: derived, the method
/// is Hershenson, Boyd, Lee, IEEE TCAD 20(1), 2001.
#[test]
fn least_area_of_a_mirror() {
    let (w, l) = (24.187e-6, 9.675e-6);
    let (vt, beta) = mismatch_of(&card(5e-9, 1e-8), w, l);
    let m = || {
        let law = Law::Square(law(0.5, 200e-6, NO_SLOPE));
        device(law, 300.0, w, l, &at_temperature(300.0))
    };
    let mut d = Draft::new();
    d.voltage("out", 0.9)
        .current("0", "in", 10e-6)
        .nmos("in", "in", "0", m())
        .nmos("out", "in", "0", m());
    let s = d.solve();
    close(s.state.points[0].vdssat.0[0], 0.2, 1e-4);
    close(3.0 * spread(&s, |_| (vt, beta)), 0.01, 1e-4);
    close(w * l, 234.0e-12, 1e-4);
}

/// A current of N equal units against one: sigma(ratio)/sigma(pair) = sqrt((1 + 1/N)/2): derived.
#[test]
fn mismatch_of_one_to_n() {
    let (vt, beta) = mismatch_of(&card(5e-9, 1e-8), 10e-6, 1e-6);
    let m = || square(0.5, 200e-6, 2.5, NO_SLOPE);
    let mut pair = 0.0;
    for (n, share) in [(1, 1.0), (2, 0.8660254), (4, 0.7905694), (10, 0.7416198)] {
        let mut d = Draft::new();
        d.voltage("out", 0.9)
            .current("0", "in", 10e-6)
            .nmos("in", "in", "0", m());
        for _ in 0..n {
            d.nmos("out", "in", "0", m());
        }
        let sigma = spread(&d.solve(), |_| (vt, beta));
        if n == 1 {
            pair = sigma;
        }
        close(sigma / pair, share, 1e-6);
    }
}

/// In weak inversion the mismatch is A_VT/(n UT) whatever the current: 14.88 % for 5 mV and n 1.3.
#[test]
fn mismatch_in_weak_inversion() {
    let ut = thermal_voltage(300.0);
    let make = |gamma: f64| {
        let law = plain_charge(0.5, gamma, 0.8, 200e-6);
        device(Law::Charge(law), 300.0, 1e-6, 1e-6, &at_temperature(300.0))
    };
    let mirror = |gamma: f64, amps: f64| {
        let mut d = Draft::new();
        d.voltage("out", 0.5)
            .current("0", "in", amps)
            .nmos("in", "in", "0", make(gamma))
            .nmos("out", "in", "0", make(gamma));
        d.solve_from(0.2)
    };
    // The body factor that makes the swing n = 1.3 at 10 pA. (The diode, at VDS of 8 UT, is short of
    // saturation by a thousandth.)
    let swing = |s: &Solved| s.state.points[1].id.0[0] / (s.state.points[1].gm.0[0] * ut);
    let (mut low, mut high) = (0.1, 1.5);
    for _ in 0..50 {
        let gamma = 0.5 * (low + high);
        if swing(&mirror(gamma, 10e-12)) < 1.3 {
            low = gamma;
        } else {
            high = gamma;
        }
    }
    let one = 5e-3 / 2f64.sqrt();
    for amps in [5e-12, 10e-12, 20e-12] {
        let s = mirror(low, amps);
        close(
            spread(&s, |_| (one, 0.0)),
            0.1488,
            if amps == 10e-12 { 2e-3 } else { 2e-2 },
        );
    }
}
