//! Cells in a network against the hand formulas of the trade: where each stops working, and how stiff
//! it is.

use super::Task;
use super::build::one_family;
use biasloom::cells::{Shape, index_of};
use biasloom::device::{Conditions, Device};
use biasloom::network::bench::Bench;
use biasloom::network::corners::verified;
use biasloom::network::{Job, Network};
use biasloom::numeric::lanes::{Lanes, WIDTH};
use biasloom::spec::Rail;

fn close(ours: f64, truth: f64, relative: f64, what: &str) {
    assert!(
        (ours / truth - 1.0).abs() <= relative,
        "{what}: {ours:e} {truth:e} {:e}",
        ours / truth - 1.0
    );
}

/// One output of 10 uA on a rail of a card, two copies of the reference.
fn task(card: &str, rail: Rail, supply: f64) -> Task {
    let (kind, flows) = match rail {
        Rail::Sink => ("sink", "into network"),
        Rail::Source => ("source", "out of network"),
    };
    let text = format!(
        "
card: {card}
supply: {supply} V
temperature: 26.85 degC
corners: [TT]
reference: {{ current: 10 uA, flows: {flows}, range: 0 V to {supply} V, copies: 2 }}
outputs:
  - {{ name: copy, kind: {kind}, ratio: 1, range: 0.1 V to {supply} V }}
"
    );
    let mut task = Task::read("structure", &text);
    task.spec.temperature.nominal = task.card.temperature;
    task.spec.temperature.least = task.card.temperature;
    task.spec.temperature.most = task.card.temperature;
    task
}

/// One transistor of the output leg: index in the netlist, |VGS|, |VDS|, VDSsat.
type OnLeg = (usize, f64, f64, f64);

/// The transistors of the output leg at `volts`, from the pin down.
fn leg(bench: &mut Bench, volts: f64) -> Vec<OnLeg> {
    bench.solve(&[volts]).expect("it converges");
    let points = bench.operating_points(0);
    let mut out = Vec::new();
    for (k, origin) in bench.drawing().draw.mos_origin.iter().enumerate() {
        if origin.role.starts_with("output") {
            let [_, vgs, vds, sat] = points[k];
            out.push((k, vgs, vds, sat));
        }
    }
    out
}

/// Least output voltage at which no device of the output leg has left saturation, V.
fn least_output(job: &Job, network: &Network) -> f64 {
    let mut bench = Bench::new(*job, verified(job));
    bench.place(network);
    let (mut low, mut high) = (0.0, job.spec.supply.least.0);
    for _ in 0..40 {
        let middle = 0.5 * (low + high);
        let saturated = leg(&mut bench, middle)
            .iter()
            // Where the drop is nothing, the mirror device sits on the edge itself.
            .all(|&(_, _, vds, sat)| vds >= sat - 1e-9);
        if saturated {
            high = middle;
        } else {
            low = middle;
        }
    }
    high
}

fn shape(cell: &str, inversion: f64, cascode_inversion: f64, drop: f64) -> Shape {
    Shape {
        cell: index_of(cell).unwrap(),
        length: 2e-6,
        inversion,
        cascode_length: if cascode_inversion > 0.0 { 1e-6 } else { 0.0 },
        cascode_inversion,
        drop,
    }
}

/// Least output voltages in the square-law limit: Gray, Hurst, Lewis, Meyer, *Analysis and Design of
/// Analog Integrated Circuits*, table in ch. 4; Razavi, *Design of Analog CMOS Integrated
/// Circuits*, ch. 5 (stacked cascode VT + 2 Vov, wide swing 2 Vov); Johns & Martin, ch. 6 (wide
/// swing with a cascode of n times the overdrive: (n + 1) Vov, bias diode (W/L)/(n + 1)^2).
#[test]
fn least_output_voltages_in_the_square_law_limit() {
    for rail in [Rail::Sink, Rail::Source] {
        let task = task("textbook-ideal", rail, 3.0);
        let job = task.job();
        let ut = biasloom::device::constants::thermal_voltage(task.card.temperature.0);
        let (vt, vov, n) = (0.7, 0.2, 1.5);
        // For the square law IC = (Vov/2 UT)^2.
        let ic = (vov / (2.0 * ut)).powi(2);
        let margin = 0.03;
        for (cell, cascode, drop, truth) in [
            ("simple", 0.0, 0.0, vov),
            ("degenerated", 0.0, 0.1, 0.1 + vov),
            ("cascode", ic, 0.0, vt + 2.0 * vov),
            ("cascode", n * n * ic, 0.0, vt + (1.0 + n) * vov),
            ("wide_swing", ic, margin, 2.0 * vov + margin),
            ("wide_swing", n * n * ic, margin, (n + 1.0) * vov + margin),
            ("self_biased", ic, margin, 2.0 * vov + margin),
            ("self_biased", n * n * ic, margin, (n + 1.0) * vov + margin),
        ] {
            let network = one_family(&job, &shape(cell, ic, cascode, drop), 1);
            // Drawn on a grid of 5 nm, some 1e-3 of a width.
            close(least_output(&job, &network), truth, 3e-3, cell);
        }
        // Without a margin the bias diode is (W/L)/(n + 1)^2 of the mirror device.
        for n in [1.0, 1.5] {
            let network = one_family(&job, &shape("wide_swing", ic, n * n * ic, 0.0), 1);
            let family = &network.families[0];
            let diode = family.bias.as_ref().unwrap().size;
            let mirror = family.unit.mirror;
            close(
                diode.width / diode.length * (n + 1.0) * (n + 1.0),
                mirror.width / mirror.length,
                // The diode of the p-channel device is 2.5 um wide on a grid of 5 nm.
                5e-3,
                "bias diode",
            );
        }
    }
}

/// Conductances of a drawn transistor at its point: gds and gms, S.
fn slopes(job: &Job, rail: Rail, bench: &Bench, k: usize, gate: f64, at: [f64; 2]) -> [f64; 2] {
    let tech = job.tech(rail);
    let m = &bench.drawing().draw.netlist.mos[k];
    let conditions = [Conditions {
        temperature: tech.nominal(),
        threshold_shift: 0.0,
        gain: 1.0,
    }; WIDTH];
    let device = Device::new(
        tech.mosfet(),
        tech.nominal(),
        m.width,
        m.length,
        &conditions,
    )
    .widened(f64::from(m.units));
    let [source, drain] = at;
    let p = device.at(
        Lanes::splat(gate),
        Lanes::splat(drain),
        Lanes::splat(source),
    );
    [p.gds.0[0], p.gms.0[0]]
}

/// Output resistances by hand from each device's own slopes: ro, ro (1 + gms R) + R, and
/// ro1 + ro2 + gms2 ro1 ro2 for two stacked devices (Gray, Hurst, Lewis, Meyer, ch. 4; gms is gm and
/// gmb and gds together, seen from the source).
#[test]
fn output_resistances_by_hand() {
    let mut compared = 0;
    for card in [
        "generic-180",
        "generic-65",
        "textbook-basic",
        "textbook-050",
    ] {
        for rail in [Rail::Sink, Rail::Source] {
            let supply = if card == "generic-65" { 1.1 } else { 1.8 };
            let task = task(card, rail, supply);
            let job = task.job();
            for (cell, cascode, drop) in [
                ("simple", 0.0, 0.0),
                ("degenerated", 0.0, 0.1),
                ("cascode", 1.0, 0.0),
                ("wide_swing", 1.0, 0.05),
                ("self_biased", 1.0, 0.05),
            ] {
                for inversion in [0.3, 2.0, 8.0] {
                    let shape = shape(cell, inversion, cascode, drop);
                    let network = one_family(&job, &shape, 2);
                    let mut bench = Bench::new(job, verified(&job));
                    bench.place(&network);
                    let volts = supply - 0.2;
                    let devices = leg(&mut bench, volts);
                    let ours = bench.read().outputs[0][0].resistance;
                    let truth = match devices[..] {
                        [(top, gate, drain, _), (low, line, middle, _)] => {
                            let [g2, gms2] = slopes(
                                &job,
                                rail,
                                &bench,
                                top,
                                middle + gate,
                                [middle, middle + drain],
                            );
                            let [g1, _] = slopes(&job, rail, &bench, low, line, [0.0, middle]);
                            1.0 / g1 + 1.0 / g2 + (gms2 - g2) / (g1 * g2)
                        }
                        [(k, gate, drain, _)] => {
                            let foot = volts - drain;
                            let [g, gms] =
                                slopes(&job, rail, &bench, k, foot + gate, [foot, foot + drain]);
                            let r = foot / bench.currents()[0][0];
                            1.0 / g + r * gms / g
                        }
                        _ => panic!("one or two devices"),
                    };
                    let what = format!("{card} {rail:?} {cell} {inversion}");
                    close(ours, truth, 1e-6, &what);
                    compared += 1;
                }
            }
        }
    }
    assert_eq!(compared, 4 * 2 * 5 * 3);
}
