//! Mirrors and single devices against a second implementation in another language: the tables under
//! `tests/golden`, made by `make_cells.py` there from the equations and the card files alone.

use super::support::device;
use biasloom::cells::draw::{Draw, Feed};
use biasloom::cells::solved::{Climate, conditions, resistor_factor};
use biasloom::cells::{Body, CELLS, Expected, Size, Tech, Unit, index_of};
use biasloom::circuit::dc::{Circuit, State};
use biasloom::circuit::netlist::VoltageSource;
use biasloom::device::{Conditions, Device};
use biasloom::numeric::lanes::{Lanes, WIDTH};
use biasloom::process::{Card, ChargeLaw, Curve, Law};
use biasloom::spec::Rail;
use std::collections::BTreeMap;
use std::path::Path;

/// Agreement asked of every voltage and current. Where the values of a card have changed on purpose, the
/// tables must be made anew.
const RELATIVE: f64 = 1e-6;

/// The columns of a table, and its rows as maps from column to text.
fn read(name: &str) -> (Vec<String>, Vec<BTreeMap<String, String>>) {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let text = std::fs::read_to_string(root.join(format!("tests/golden/{name}.csv"))).unwrap();
    let mut lines = text.lines();
    let head: Vec<String> = lines.next().unwrap().split(',').map(String::from).collect();
    let rows = lines
        .map(|line| {
            let fields = line.split(',').map(String::from);
            head.iter().cloned().zip(fields).collect()
        })
        .collect();
    (head, rows)
}

fn number(row: &BTreeMap<String, String>, key: &str) -> f64 {
    row[key].parse().unwrap()
}

/// Draws and solves the mirror of one row; returns its node voltages by name and the output current.
fn solve(card: &Card, cell: usize, row: &BTreeMap<String, String>) -> (BTreeMap<String, f64>, f64) {
    let get = |key: &str| number(row, key);
    let rail = match row["rail"].as_str() {
        "sink" => Rail::Sink,
        "source" => Rail::Source,
        other => panic!("{other}"),
    };
    let tech = Tech { card, rail };
    let corner = card.corners.iter().position(|c| c.name == row["corner"]);
    let climate = Climate {
        corner: corner.expect("the card has the corner"),
        temperature: get("kelvin"),
    };
    let (units_in, units_out) = (get("units_in") as u32, get("units_out") as u32);
    let parts = CELLS[cell].parts();
    let size = |prefix: &str| Size {
        width: get(&format!("{prefix}width")),
        length: get(&format!("{prefix}length")),
    };
    let expected = Expected {
        line: 0.5,
        drain: 0.2,
        cascode: 0.8,
        input: 0.6,
    };
    let unit = Unit {
        current: get("current"),
        mirror: size(""),
        cascode: parts.cascode.then(|| size("cascode_")),
        bias: None,
        resistor: parts.resistor.then(|| Body {
            ohms: get("ohms"),
            width: 1e-6,
        }),
        expected,
    };
    let mut draw = Draw::new();
    draw.rail = rail;
    draw.tag = "in".into();
    let input = draw.node("in", expected.input);
    draw.current(input, get("current"));
    let bias = parts.bias_leg.then(|| {
        let node = draw.node("bias", expected.cascode);
        draw.current(node, get("bias_current"));
        (node, size("bias_"))
    });
    let lines = CELLS[cell].input(&mut draw, &unit, units_in, &Feed { input, bias });
    draw.tag = "out".into();
    let pin = draw.node("pin", 0.0);
    CELLS[cell].output(&mut draw, &unit, units_out, &lines, pin);
    let supply = get("supply");
    let from_rail = |v: f64| match rail {
        Rail::Sink => v,
        Rail::Source => supply - v,
    };
    let mut netlist = draw.netlist;
    for (name, plus, volts) in [
        ("supply", draw.supply, supply),
        ("pin", pin, from_rail(get("vout"))),
    ] {
        netlist.voltages.push(VoltageSource {
            name: name.into(),
            plus,
            minus: 0,
            volts,
        });
    }
    let lanes = [conditions(&tech, &climate); WIDTH];
    let mut circuit = Circuit::new(&netlist, |k| {
        let m = &netlist.mos[k];
        Device::new(tech.mosfet(), tech.nominal(), m.width, m.length, &lanes)
            .widened(f64::from(m.units))
    })
    .unwrap();
    for r in &mut circuit.resistors {
        r.conductance = r.conductance / Lanes::splat(resistor_factor(&tech, &climate));
    }
    let mut state = State::start(vec![Lanes::splat(from_rail(0.5)); netlist.nodes.len()]);
    assert!(circuit.solve(&mut state), "{row:?} does not converge");
    let volts = netlist
        .nodes
        .iter()
        .cloned()
        .zip(state.volts.iter().map(|v| v.0[0]))
        .collect();
    let sign = if rail == Rail::Sink { 1.0 } else { -1.0 };
    (volts, circuit.current_from(&state, pin).0[0] * sign)
}

fn compare(name: &str) {
    let (head, rows) = read(name);
    let cell = index_of(name).expect("a cell of that name");
    let nodes = &head[head.iter().position(|h| h == "amps").unwrap() + 1..];
    let cards: BTreeMap<&str, Card> = ["generic-180", "generic-65"]
        .into_iter()
        .map(|name| (name, Card::load(name).unwrap()))
        .collect();
    let mut per_rail = BTreeMap::new();
    for row in &rows {
        let (volts, amps) = solve(&cards[row["card"].as_str()], cell, row);
        for node in nodes {
            let (ours, truth) = (volts[node], number(row, node));
            assert!(
                (ours - truth).abs() <= RELATIVE * truth.abs() + 1e-10,
                "{node} {ours} {truth} in {row:?}"
            );
        }
        let truth = number(row, "amps");
        // At VDS = 0 the current itself is rounding.
        let floor = 1e-12 * number(row, "current");
        assert!(
            (amps - truth).abs() <= RELATIVE * truth.abs() + floor,
            "{amps} {truth} in {row:?}"
        );
        *per_rail.entry(row["rail"].clone()).or_insert(0) += 1;
    }
    assert!(
        per_rail.len() == 2 && per_rail.values().all(|&n| n >= 500),
        "{per_rail:?}"
    );
}

#[test]
fn simple() {
    compare("simple");
}

#[test]
fn degenerated() {
    compare("degenerated");
}

#[test]
fn cascode() {
    compare("cascode");
}

#[test]
fn wide_swing() {
    compare("wide_swing");
}

#[test]
fn self_biased() {
    compare("self_biased");
}

/// Single devices with every correction on, impact ionisation included.
#[test]
fn devices() {
    let (_, rows) = read("devices");
    let mut ionising = 0;
    for row in &rows {
        let get = |key: &str| number(row, key);
        let curve = |key: &str| Curve::constant(get(key));
        let law = ChargeLaw {
            width_loss: 0.0,
            length_loss: 0.0,
            threshold: curve("threshold"),
            threshold_tc: curve("threshold_tc"),
            gamma: curve("gamma"),
            body_gamma: curve("body_gamma"),
            phi: curve("phi"),
            kp: curve("kp"),
            kp_exponent: curve("kp_exponent"),
            theta: curve("theta"),
            mobility_rise: curve("mobility_rise"),
            saturation_velocity: curve("saturation_velocity"),
            mobility: curve("mobility"),
            clm_strength: curve("clm_strength"),
            clm_voltage: curve("clm_voltage"),
            dibl: curve("dibl"),
            dibl_voltage: curve("dibl_voltage"),
            impact_strength: curve("impact_strength"),
            impact_voltage: curve("impact_voltage"),
        };
        let lanes = [Conditions {
            temperature: get("kelvin"),
            threshold_shift: get("shift"),
            gain: get("gain"),
        }; WIDTH];
        let d = device(Law::Charge(law), 300.15, 5e-6, 0.5e-6, &lanes);
        let [vg, vd, vs] = ["vg", "vd", "vs"].map(|key| Lanes::splat(get(key)));
        let p = d.at(vg, vd, vs);
        for (ours, truth) in [(p.id.0[0], get("channel")), (p.ib.0[0], get("impact"))] {
            assert!(
                (ours - truth).abs() <= 1e-11 * truth.abs() + 1e-27,
                "{ours} {truth} in {row:?}"
            );
        }
        ionising += usize::from(get("impact") > 1e-12);
    }
    assert!(
        rows.len() >= 1000 && ionising > 200,
        "{} {ionising}",
        rows.len()
    );
}
