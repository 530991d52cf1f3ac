//! Outcomes made by hand: bias networks of *Tern*, an imaginary ocean buoy's hydrophone front end.
//!
//! The numbers are plausible and agree with each other (areas add up, rows match the netlist,
//! budgets sum to their errors), but nothing is solved here. Curves follow a simple formula: a
//! current that settles exponentially with voltage and then rises with a constant slope.

use biasloom::circuit::netlist::{GROUND, Mos, Netlist, Node, Polarity, Resistance};
use biasloom::explore::*;
use biasloom::spec::*;
use biasloom::units::{Amp, Kelvin, Ohm, Range, SquareMetre, Volt};

const SUPPLY: f64 = 1.8;
const SIGMA: f64 = 3.0;
const REFERENCE: f64 = 10e-6;

/// A wanted output: name, rail, current, count, range, error limit, output resistance.
type Wanted = (
    &'static str,
    Rail,
    f64,
    u32,
    [f64; 2],
    Option<f64>,
    Option<f64>,
);

/// A family: name, cell, fed by, input current, unit current, cascode, degenerated.
type Plan = (
    &'static str,
    &'static str,
    Option<&'static str>,
    f64,
    f64,
    bool,
    bool,
);

const WANTED: [Wanted; 4] = [
    (
        "preamp",
        Rail::Sink,
        20e-6,
        1,
        [0.30, 1.40],
        Some(0.02),
        Some(2e6),
    ),
    (
        "filter",
        Rail::Source,
        5e-6,
        2,
        [0.25, 1.50],
        Some(0.03),
        None,
    ),
    ("comparator", Rail::Sink, 2e-6, 1, [0.25, 1.60], None, None),
    (
        "oscillator",
        Rail::Source,
        500e-9,
        1,
        [0.40, 1.20],
        Some(0.025),
        Some(50e6),
    ),
];

fn rail_of(family: &str) -> Rail {
    if family.starts_with('n') {
        Rail::Sink
    } else {
        Rail::Source
    }
}

fn volts(least: f64, most: f64) -> Range<Volt> {
    Range {
        least: Volt(least),
        most: Volt(most),
    }
}

fn spec(name: &str, title: &str, wanted: &[Wanted]) -> Spec {
    let output = |&(name, rail, current, count, range, limit, resistance): &Wanted| Output {
        name: name.to_owned(),
        rail,
        target: if name == "filter" {
            Target::Ratio(current / REFERENCE)
        } else {
            Target::Current(Amp(current))
        },
        count,
        range: volts(range[0], range[1]),
        accuracy: limit.map(|limit| Accuracy {
            limit,
            sigma: SIGMA,
            of: if name == "filter" {
                AccuracyOf::Ratio
            } else {
                AccuracyOf::Current
            },
        }),
        output_resistance: resistance.map(Ohm),
    };
    Spec {
        name: name.to_owned(),
        title: title.to_owned(),
        card: "demo180".to_owned(),
        supply: volts(1.62, 1.98),
        temperature: Temperatures {
            least: Kelvin(233.15),
            nominal: Kelvin(300.15),
            most: Kelvin(358.15),
        },
        corners: ["TT", "SS", "FF", "SF", "FS"].map(str::to_owned).to_vec(),
        reference: Reference::Current {
            current: Amp(REFERENCE),
            flows: Flow::IntoNetwork,
            range: volts(0.4, 1.2),
            copies: 1,
            tolerance: 0.0,
        },
        outputs: wanted.iter().map(output).collect(),
        limits: Limits {
            area: Some(SquareMetre(6000e-12)),
            overhead_current: Some(Amp(60e-6)),
            power: None,
        },
        trade: vec!["area".to_owned(), "overhead_current".to_owned()],
        search: Search {
            effort: Effort::Normal,
            seed: 7,
            price_of: None,
        },
    }
}

/// A network in the making.
struct Maker {
    netlist: Netlist,
    rows: Vec<DeviceRow>,
    supply: Node,
}

impl Maker {
    fn node(&mut self, name: &str) -> Node {
        self.netlist.nodes.push(name.to_owned());
        self.netlist.nodes.len() - 1
    }

    /// One leg of a family from its rail to `pin`: mirror, cascode if any, resistor if any.
    fn leg(&mut self, leg: &Leg<'_>, pin: Node, gates: [Node; 2]) {
        let source_rail = rail_of(leg.family) == Rail::Source;
        let rail = if source_rail { self.supply } else { GROUND };
        let polarity = if source_rail {
            Polarity::P
        } else {
            Polarity::N
        };
        let model = if source_rail { "pch" } else { "nch" };
        let base = format!("M{}_{}", leg.family, leg.name);
        let bottom = if leg.degenerated {
            self.node(&format!("{}_{}_s", leg.family, leg.name))
        } else {
            rail
        };
        let middle = if leg.cascode {
            self.node(&format!("{}_{}_x", leg.family, leg.name))
        } else {
            pin
        };
        let row = |name: String, role: &str, width, length, units, vds| DeviceRow {
            name,
            family: leg.family.to_owned(),
            role: format!("{} {role}", leg.role),
            output: leg.output.map(str::to_owned),
            model: model.to_owned(),
            width,
            length,
            units,
            ohms: None,
            current: leg.current,
            inversion: Some(leg.current / f64::from(units) / (0.5e-6 * width / length)),
            vgs: Some(0.612),
            vds: Some(vds),
            vdssat: Some(0.137),
            area: f64::from(units) * (width + 0.6e-6) * (length + 0.5e-6),
        };
        let mos = |maker: &mut Maker,
                   name: String,
                   role,
                   [drain, gate, source]: [Node; 3],
                   width,
                   length,
                   vds| {
            maker
                .rows
                .push(row(name.clone(), role, width, length, leg.units, vds));
            maker.netlist.mos.push(Mos {
                name,
                polarity,
                drain,
                gate,
                source,
                bulk: rail,
                width,
                length,
                units: leg.units,
            });
        };
        mos(
            self,
            base.clone(),
            "mirror",
            [middle, gates[0], bottom],
            leg.width,
            leg.length,
            0.241,
        );
        if leg.cascode {
            let drains = [pin, gates[1], middle];
            mos(
                self,
                format!("{base}_c"),
                "cascode",
                drains,
                leg.width,
                0.5e-6,
                0.310,
            );
        }
        if leg.degenerated {
            let name = format!("R{}_{}", leg.family, leg.name);
            let ohms = 0.1 / (leg.current / f64::from(leg.units));
            self.rows.push(DeviceRow {
                name: name.clone(),
                model: "resistor".to_owned(),
                role: "degeneration resistor".to_owned(),
                width: 1e-6,
                length: 1e-6 * ohms / 20_000.0,
                ohms: Some(ohms),
                inversion: None,
                vgs: None,
                vds: None,
                vdssat: None,
                area: f64::from(leg.units) * 1.6e-6 * (1e-6 * ohms / 20_000.0 + 1e-6),
                ..self.rows[self.rows.len() - 1].clone()
            });
            let (a, b) = (bottom, rail);
            self.netlist.resistors.push(Resistance {
                name,
                a,
                b,
                ohms,
                width: 1e-6,
                units: leg.units,
            });
        }
    }
}

/// What a leg is made of.
struct Leg<'a> {
    family: &'a str,
    name: String,
    role: &'a str,
    output: Option<&'a str>,
    current: f64,
    units: u32,
    width: f64,
    length: f64,
    cascode: bool,
    degenerated: bool,
}

fn curve(target: f64, settle: f64, slope: f64, spread: f64) -> OutputCurve {
    let volts: Vec<f64> = (0..=64)
        .map(|index| f64::from(index) * SUPPLY / 64.0)
        .collect();
    let at = |factor: f64, settle: f64| {
        let current = |&v: &f64| {
            target * factor * (1.0 - (-5.0 * v / settle).exp()) * (1.0 + slope * (v - 0.9))
        };
        volts.iter().map(current).collect::<Vec<f64>>()
    };
    OutputCurve {
        nominal: at(1.0, settle),
        least: at(1.0 - spread, 1.12 * settle),
        most: at(1.0 + spread, 0.93 * settle),
        volts: volts.clone(),
    }
}

/// One network: `size` scales the length of every unit, `plans` are its families, parents first.
fn network(
    rank: usize,
    size: f64,
    wanted: &[Wanted],
    plans: &[Plan],
    serves: &[&str],
) -> NetworkReport {
    let mut maker = Maker {
        netlist: Netlist {
            nodes: vec!["0".to_owned()],
            ..Netlist::default()
        },
        rows: Vec::new(),
        supply: 1,
    };
    maker.node("vdd");
    let mut inputs: Vec<Node> = Vec::new();
    for plan in plans {
        let name = plan
            .2
            .map_or("iref".to_owned(), |_| format!("{}_in", plan.0));
        inputs.push(maker.node(&name));
    }
    let pins: Vec<Vec<Node>> = wanted
        .iter()
        .map(|want| match want.3 {
            1 => vec![maker.node(want.0)],
            count => (1..=count)
                .map(|copy| maker.node(&format!("{}_{copy}", want.0)))
                .collect(),
        })
        .collect();

    let mut families = Vec::new();
    let mut overhead = 0.0;
    for (index, &(family, cell, fed_by, input, unit, cascode, degenerated)) in
        plans.iter().enumerate()
    {
        let first_row = maker.rows.len();
        let width = (unit / 1e-6 * 2e-6 * size).clamp(0.5e-6, 20e-6);
        let width = (width / 5e-9).round() * 5e-9;
        let length = (6e-6 * size / 5e-9).round() * 5e-9;
        let units = |current: f64| (current / unit).round().max(1.0) as u32;
        let leg = |name: String, role, output, current: f64| Leg {
            family,
            name,
            role,
            output,
            current,
            units: units(current),
            width,
            length,
            cascode,
            degenerated,
        };
        // Gate lines: the mirror's hangs on the input pin of a simple cell, and on the diode
        // under it in a cascode.
        let pin = inputs[index];
        let gate = if cascode {
            maker.node(&format!("{family}_g"))
        } else {
            pin
        };
        maker.leg(
            &leg("in".to_owned(), "input", None, input),
            pin,
            [gate, pin],
        );
        if cascode {
            let diode = maker.netlist.mos.len() - 2;
            let drain = maker.netlist.mos[diode].drain;
            maker.netlist.mos[diode].gate = drain;
            for mos in &mut maker.netlist.mos {
                if mos.gate == gate {
                    mos.gate = drain;
                }
            }
        }
        let gate = if cascode {
            maker.netlist.mos[maker.netlist.mos.len() - 2].gate
        } else {
            pin
        };
        overhead += input;
        for (child, plan) in plans.iter().enumerate() {
            if plan.2 == Some(family) {
                maker.leg(
                    &leg(format!("to_{}", plan.0), "feeder", None, plan.3),
                    inputs[child],
                    [gate, pin],
                );
            }
        }
        let mut names = Vec::new();
        for ((want, &serving), pins) in wanted.iter().zip(serves).zip(&pins) {
            if serving != family {
                continue;
            }
            names.push(want.0.to_owned());
            for (copy, &out) in pins.iter().enumerate() {
                let name = if pins.len() == 1 {
                    want.0.to_owned()
                } else {
                    format!("{}_{}", want.0, copy + 1)
                };
                maker.leg(&leg(name, "output", Some(want.0), want.2), out, [gate, pin]);
            }
        }
        families.push(FamilyReport {
            name: family.to_owned(),
            rail: rail_of(family),
            cell: cell.to_owned(),
            fed_by: fed_by.map(str::to_owned),
            input_current: input,
            input_units: units(input),
            unit_current: unit,
            area: maker.rows[first_row..].iter().map(|row| row.area).sum(),
            outputs: names,
        });
    }

    let outputs: Vec<OutputReport> = wanted
        .iter()
        .zip(serves)
        .map(
            |(&(name, rail, target, count, range, limit, resistance), &family)| {
                let plan = plans.iter().find(|plan| plan.0 == family).unwrap();
                let (cascode, unit) = (plan.5, plan.4);
                let settle =
                    if cascode { 0.21 } else { 0.16 } * (1.0 + 0.1 * (target / 1e-5).min(1.0));
                let slope = if cascode { 0.0008 } else { 0.012 / size };
                let mismatch = 0.0075 / size / (target / unit).max(1.0).sqrt();
                let part = |name: &str, value: f64, random| BudgetPart {
                    name: name.to_owned(),
                    value,
                    random,
                };
                let budget = vec![
                    part("threshold_mismatch", mismatch, true),
                    part("gain_mismatch", 0.31 * mismatch, true),
                    part("output_conductance", 0.55 * slope, false),
                    part("ratio_rounding", -0.0004, false),
                    part("process", 0.0011, false),
                    part("temperature", 0.0009, false),
                    part("supply", 0.0003, false),
                ];
                let signed: f64 = budget
                    .iter()
                    .filter(|part| !part.random)
                    .map(|part| part.value)
                    .sum();
                let squares: f64 = budget
                    .iter()
                    .filter(|part| part.random)
                    .map(|part| part.value * part.value)
                    .sum();
                OutputReport {
                    name: name.to_owned(),
                    rail,
                    count,
                    family: family.to_owned(),
                    cell: plan.1.to_owned(),
                    units: (target / unit).round().max(1.0) as u32,
                    target,
                    error: signed.abs() + squares.sqrt(),
                    error_limit: limit,
                    sigma: SIGMA,
                    error_corner: "FF 1.98 V 85 degC".to_owned(),
                    budget,
                    range,
                    headroom: 1.06 * settle,
                    headroom_margin: range[0] - 1.06 * settle,
                    headroom_corner: "SS 1.62 V -40 degC".to_owned(),
                    output_resistance: 1.0 / (slope * target),
                    output_resistance_limit: resistance,
                    output_resistance_corner: "FF 1.62 V 85 degC".to_owned(),
                    curve: curve(target, settle, slope, 0.003),
                }
            },
        )
        .collect();

    let area: f64 = maker.rows.iter().map(|row| row.area).sum();
    let worst = outputs
        .iter()
        .max_by(|a, b| a.error.total_cmp(&b.error))
        .unwrap();
    let tight = outputs
        .iter()
        .max_by(|a, b| b.headroom_margin.total_cmp(&a.headroom_margin))
        .unwrap();
    let stiff = outputs
        .iter()
        .min_by(|a, b| a.output_resistance.total_cmp(&b.output_resistance))
        .unwrap();
    let figure =
        |name: &str, unit: &str, value, corner: Option<&String>, output: Option<&String>| {
            FigureValue {
                name: name.to_owned(),
                unit: unit.to_owned(),
                value,
                corner: corner.cloned(),
                output: output.cloned(),
            }
        };
    let hot = "FF 1.98 V 85 degC".to_owned();
    let figures = vec![
        figure("area", "m2", area, None, None),
        figure("overhead_current", "A", overhead, Some(&hot), None),
        figure("power", "W", overhead * 1.98, Some(&hot), None),
        figure(
            "current_error",
            "1",
            worst.error,
            Some(&worst.error_corner),
            Some(&worst.name),
        ),
        figure(
            "headroom",
            "V",
            tight.headroom,
            Some(&tight.headroom_corner),
            Some(&tight.name),
        ),
        figure(
            "output_resistance",
            "Ohm",
            stiff.output_resistance,
            Some(&stiff.output_resistance_corner),
            Some(&stiff.name),
        ),
    ];
    let family_of = |name: &str| {
        let row = maker.rows.iter().find(|r| r.name == name);
        row.map_or_else(String::new, |r| r.family.clone())
    };
    let mos_families = maker
        .netlist
        .mos
        .iter()
        .map(|m| family_of(&m.name))
        .collect();
    NetworkReport {
        rank,
        figures,
        families,
        devices: maker.rows,
        outputs,
        reference_pin: [0.512, 0.744],
        deck: DeckSource {
            netlist: maker.netlist,
            families: mos_families,
            supply: 1,
            references: vec![inputs[0]],
            outputs: pins,
            reference_current: REFERENCE,
            nominal_supply: SUPPLY,
            nominal_temperature: 300.15,
            models: ["nch".to_owned(), "pch".to_owned()],
        },
        broken: Vec::new(),
    }
}

fn work() -> Work {
    Work {
        shapes: 63_420,
        screened_out: 51_203,
        solved: 12_198,
        dc_solutions: 365_940,
        not_converged: vec![("no descent after halving the step".to_owned(), 19)],
        rounds: 48,
        columns: 1_310,
        milps_proved: 11,
        milps_stopped: 1,
        polish_evaluations: 9_600,
        networks_verified: 34,
    }
}

/// Three networks, four outputs on both rails.
pub fn found() -> Outcome {
    let simple: [Plan; 2] = [
        ("n1", "simple", None, 10e-6, 2e-6, false, false),
        ("p1", "simple", Some("n1"), 5e-6, 0.5e-6, false, false),
    ];
    let mixed: [Plan; 3] = [
        ("n1", "cascode", None, 10e-6, 2e-6, true, false),
        ("p1", "simple", Some("n1"), 2e-6, 1e-6, false, false),
        ("p2", "degenerated", Some("n1"), 1e-6, 0.5e-6, false, true),
    ];
    let lean: [Plan; 3] = [
        ("n1", "cascode", None, 10e-6, 2e-6, true, false),
        ("p1", "simple", Some("n1"), 1e-6, 0.5e-6, false, false),
        ("n2", "simple", Some("p1"), 0.5e-6, 0.5e-6, false, false),
    ];
    Outcome {
        spec: spec(
            "tern_front_end",
            "Tern: bias of the hydrophone front end",
            &WANTED,
        ),
        card_title: "Demo process, 180 nm, 1.8 V".to_owned(),
        status: Status::Found,
        front: vec![
            network(1, 1.0, &WANTED, &simple, &["n1", "p1", "n1", "p1"]),
            network(2, 1.1, &WANTED, &mixed, &["n1", "p1", "n1", "p2"]),
            network(3, 1.6, &WANTED, &lean, &["n1", "p1", "n2", "p1"]),
        ],
        nearest: None,
        prices: Some(prices()),
        proof: Some(proof()),
        work: work(),
    }
}

/// Bounds of the three networks: a near one, a far one, and nothing.
fn proof() -> Proof {
    let bound = |area: f64, overhead: f64| Certificate {
        area,
        overhead,
        output_prices: vec![area / 4.0; 4],
        overhead_price: 1e-4,
    };
    Proof {
        declared: Declared {
            cells: vec!["simple".to_owned(), "self_biased".to_owned()],
            lengths: [[0.18e-6, 20e-6]; 2],
            inversions: [0.01, 100.0],
            currents: vec![1e-6, 10e-6],
            units: vec![1, 2, 4],
            depth: 5,
            line_error: 0.25,
            feeder_error: 0.01,
            paper: 0.003,
        },
        bounds: vec![bound(1e-9, 30e-6), bound(2e-10, 33e-6), bound(0.0, 48e-6)],
    }
}

/// Prices at network 2, one of every kind of verdict.
fn prices() -> Prices {
    let price = |limit: Limit, output: Option<&str>, value, free, to, verdict, looser| LimitPrice {
        limit,
        output: output.map(str::to_owned),
        value,
        free,
        tighter: Step { to, verdict },
        looser,
    };
    let resized = |area, overhead| Verdict::Resized {
        area,
        overhead,
        over_area: false,
    };
    let looser = |to, area| {
        Some(Step {
            to,
            verdict: resized(area, 0.0),
        })
    };
    let preamp = Some("preamp");
    Prices {
        rank: 2,
        chosen: Chosen::Knee,
        held: 1.0,
        area: 1.1e-9,
        overhead: 13e-6,
        noise: 0.2e-12,
        limits: vec![
            price(
                Limit::Accuracy(0),
                preamp,
                0.02,
                0.02,
                0.0198,
                resized(21e-12, 1e-9),
                looser(0.0202, -20.2e-12),
            ),
            price(
                Limit::LowEnd(0),
                preamp,
                0.3,
                0.296,
                0.29,
                resized(84e-12, 120e-9),
                None,
            ),
            price(
                Limit::HighEnd(0),
                preamp,
                1.4,
                1.51,
                1.41,
                Verdict::Free,
                None,
            ),
            price(
                Limit::OutputResistance(0),
                preamp,
                2e6,
                2e6,
                2.1e6,
                resized(0.1e-12, 0.0),
                looser(1.9e6, 0.0),
            ),
            price(
                Limit::HighEnd(2),
                Some("comparator"),
                1.62,
                1.62,
                1.63,
                Verdict::NotAllowed,
                None,
            ),
            price(
                Limit::LowEnd(3),
                Some("oscillator"),
                0.4,
                0.4,
                0.39,
                Verdict::NotFound,
                None,
            ),
            price(
                Limit::OverheadCurrent,
                None,
                13.1e-6,
                13e-6,
                12.84e-6,
                Verdict::Other {
                    rank: 3,
                    area: 400e-12,
                    overhead: -2e-6,
                },
                None,
            ),
        ],
        exchanges: vec![
            Exchange {
                rank: 1,
                area: -100e-12,
                overhead: 4e-6,
            },
            Exchange {
                rank: 3,
                area: 400e-12,
                overhead: -2e-6,
            },
        ],
    }
}

/// The same spec, impossible: an empty front and a nearest network that breaks two limits.
pub fn nothing_fits() -> Outcome {
    let mut outcome = found();
    let mut nearest = outcome.front.swap_remove(0);
    nearest.outputs[0].error_limit = Some(0.004);
    nearest.outputs[3].output_resistance_limit = Some(250e6);
    let broken = vec![
        Broken {
            figure: "current_error".to_owned(),
            output: Some("preamp".to_owned()),
            limit: 0.004,
            value: nearest.outputs[0].error,
            unit: "1".to_owned(),
            corner: Some("FF 1.98 V 85 degC".to_owned()),
        },
        Broken {
            figure: "output_resistance".to_owned(),
            output: Some("oscillator".to_owned()),
            limit: 250e6,
            value: nearest.outputs[3].output_resistance,
            unit: "Ohm".to_owned(),
            corner: Some("FF 1.62 V 85 degC".to_owned()),
        },
    ];
    nearest.broken = broken.clone();
    let change =
        |key: &str, end: Option<&str>, output: Option<&str>, limits: [f64; 2], unit: &str| Change {
            key: key.to_owned(),
            end: end.map(str::to_owned),
            output: output.map(str::to_owned),
            from: limits[0],
            to: limits[1],
            unit: unit.to_owned(),
        };
    let resistance = change(
        "output_resistance",
        None,
        Some("oscillator"),
        [250e6, 182e6],
        "Ohm",
    );
    let low = change("range", Some("low"), Some("oscillator"), [0.3, 0.412], "V");
    let error = change("accuracy", None, Some("preamp"), [0.004, 0.0124], "1");
    let area = change("area", None, None, [2e-9, 5.21e-9], "m2");
    let proof = Box::new(outcome.front[0].clone());
    let why = Explanation {
        impossible: vec![Impossible {
            output: Some("oscillator".to_owned()),
            nearest: vec![resistance.clone(), low],
        }],
        advice: vec![Advice {
            changes: vec![area, error, resistance],
            network: proof,
        }],
        complete: true,
    };
    outcome.front.clear();
    outcome.prices = None;
    outcome.nearest = Some(Box::new(nearest));
    outcome.status = Status::NothingFits { broken, why };
    outcome
}

/// Many of everything: sixteen outputs, nine families three deep, twenty-four networks.
pub fn large() -> Outcome {
    const NAMES: [&str; 16] = [
        "preamp_left",
        "preamp_right",
        "filter_stage_1",
        "filter_stage_2",
        "comparator",
        "oscillator",
        "adc_reference",
        "adc_input",
        "adc_latch",
        "wake_up",
        "clock_buffer",
        "sensor_bridge",
        "temperature",
        "battery_watch",
        "radio_bias",
        "self_test",
    ];
    let wanted: Vec<Wanted> = NAMES
        .iter()
        .enumerate()
        .map(|(index, &name)| {
            let rail = if index % 3 == 1 {
                Rail::Source
            } else {
                Rail::Sink
            };
            let current = [20e-6, 5e-6, 2e-6, 500e-9, 50e-9, 200e-6, 10e-6, 1e-6][index % 8];
            let limit = [Some(0.02), Some(0.05), None, Some(0.01)][index % 4];
            (
                name,
                rail,
                current,
                1 + (index % 5 == 4) as u32,
                [0.3, 1.4],
                limit,
                None,
            )
        })
        .collect();
    let plans: [Plan; 9] = [
        (
            "n1",
            "self_biased_wide_swing",
            None,
            10e-6,
            2e-6,
            true,
            false,
        ),
        ("p1", "cascode", Some("n1"), 10e-6, 1e-6, true, false),
        ("p2", "simple", Some("n1"), 2e-6, 0.5e-6, false, false),
        ("p3", "degenerated", Some("n1"), 1e-6, 0.5e-6, false, true),
        ("n2", "simple", Some("p1"), 5e-6, 5e-6, false, false),
        ("n3", "simple", Some("p2"), 0.5e-6, 0.5e-6, false, false),
        ("n4", "simple", Some("p2"), 0.1e-6, 0.05e-6, false, false),
        ("n5", "cascode", Some("p3"), 1e-6, 1e-6, true, false),
        ("p4", "simple", Some("n2"), 0.2e-6, 0.05e-6, false, false),
    ];
    let (mut sinks, mut sources) = (0, 0);
    let serves: Vec<&str> = wanted
        .iter()
        .map(|want| {
            let next = match want.1 {
                Rail::Sink => &mut sinks,
                Rail::Source => &mut sources,
            };
            *next += 1;
            match want.1 {
                Rail::Sink => ["n1", "n2", "n3", "n4", "n5"][*next % 5],
                Rail::Source => ["p1", "p2", "p3", "p4"][*next % 4],
            }
        })
        .collect();
    let mut outcome = found();
    outcome.spec = spec("tern_full", "Tern: every bias current of the chip", &wanted);
    outcome.spec.limits.area = None;
    outcome.front = (1..=24)
        .map(|rank| {
            let step = rank as f64 - 1.0;
            let mut plans = plans;
            // Larger networks of the front get by with less current.
            for plan in &mut plans[1..] {
                plan.3 *= 1.0 - 0.03 * step;
            }
            network(rank, 1.0 + 0.02 * step, &wanted, &plans, &serves)
        })
        .collect();
    outcome
}
