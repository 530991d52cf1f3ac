//! A measured network as a report shows it: error budgets, output curves, device table, deck.

use super::{
    Broken, BudgetPart, DeckSource, DeviceRow, FamilyReport, FigureValue, NetworkReport,
    OutputCurve, OutputReport,
};
use crate::cells::CELLS;
use crate::cells::draw::Serves;
use crate::device;
use crate::figures::{FIGURES, Subject};
use crate::network::bench::{Bench, NotConverged, Reading};
use crate::network::corners::{self, Corner};
use crate::network::drawing::draw;
use crate::network::measure::{Measured, tolerance, total_error};
use crate::network::{Job, Network, Source};
use crate::process::Law;
use crate::spec::Reference;

/// Points of an output curve.
const CURVE_POINTS: usize = 49;

/// Describes a network that was measured, headroom included, at `corners`. The fine bench also
/// holds the corners at the nominal supply.
pub fn describe(
    job: &Job,
    fine: &mut Bench,
    network: &Network,
    measured: &Measured,
    measured_corners: &[Corner],
) -> Result<NetworkReport, NotConverged> {
    fine.place(network);
    let spec = job.spec;
    let outputs = &spec.outputs;
    let curves = curves(job, fine)?;
    // Both ends at all corners with the nominal supply among them: what budgets are cut from.
    let high: Vec<f64> = outputs.iter().map(|o| o.range.most.0).collect();
    fine.solve(&high)?;
    let high = fine.read();
    let low: Vec<f64> = outputs.iter().map(|o| o.range.least.0).collect();
    fine.solve(&low)?;
    let low = fine.read();
    let nominal = nominal_index(job, fine.corners());
    let name = |c: usize| corners::name(job, &measured_corners[c]);
    let drawing = draw(job, network, false);
    let reports = outputs
        .iter()
        .enumerate()
        .map(|(k, output)| {
            let leg = network.legs[k];
            let worst = measured.worst[k];
            let readings = [&low.outputs[k], &high.outputs[k]][worst.error_end];
            let at = measured_corners[worst.error_corner];
            OutputReport {
                name: output.name.clone(),
                rail: output.rail,
                count: output.count,
                family: drawing.names[leg.family].clone(),
                cell: CELLS[network.families[leg.family].shape.cell]
                    .name()
                    .to_owned(),
                units: leg.units,
                target: spec.target(output).0,
                error: worst.error,
                error_limit: worst.limit,
                sigma: output.accuracy.map_or(3.0, |a| a.sigma),
                error_corner: name(worst.error_corner),
                budget: budget(job, network, k, readings, fine.corners(), &at),
                range: [output.range.least.0, output.range.most.0],
                headroom: worst.headroom,
                headroom_margin: output.range.least.0 - worst.headroom,
                headroom_corner: name(worst.headroom_corner),
                output_resistance: worst.resistance,
                output_resistance_limit: output.output_resistance.map(|r| r.0),
                output_resistance_corner: name(worst.resistance_corner),
                curve: curves[k].clone(),
            }
        })
        .collect();
    let subject = Subject {
        job,
        area: measured.area,
        corners: measured_corners,
        overhead: &measured.overhead,
        outputs: &measured.worst,
    };
    let figures = FIGURES
        .iter()
        .map(|f| {
            let v = f.of(&subject);
            FigureValue {
                name: f.name().to_owned(),
                unit: f.unit().to_owned(),
                value: v.value,
                corner: v.corner.map(name),
                output: v.output.map(|k| outputs[k].name.clone()),
            }
        })
        .collect();
    let families = families(job, network, &drawing.names);
    let pins = &measured.pin;
    Ok(NetworkReport {
        rank: 0,
        figures,
        families,
        devices: devices(job, network, fine, nominal),
        outputs: reports,
        reference_pin: [
            pins.iter().copied().fold(f64::INFINITY, f64::min),
            pins.iter().copied().fold(f64::NEG_INFINITY, f64::max),
        ],
        deck: deck(job, network),
        broken: broken(job, measured, measured_corners),
    })
}

/// Index of the nominal corner: first process, nominal temperature, nominal supply.
fn nominal_index(job: &Job, corners: &[Corner]) -> usize {
    let first = corners[0].climate.corner;
    let (t, v) = (job.spec.temperature.nominal.0, corners::nominal_supply(job));
    corners
        .iter()
        .position(|c| c.climate.corner == first && c.climate.temperature == t && c.supply == v)
        .unwrap_or(0)
}

fn curves(job: &Job, fine: &mut Bench) -> Result<Vec<OutputCurve>, NotConverged> {
    let outputs = &job.spec.outputs;
    let top = job.spec.supply.least.0;
    let nominal = nominal_index(job, fine.corners());
    let mut curves: Vec<OutputCurve> = outputs
        .iter()
        .map(|_| OutputCurve {
            volts: Vec::new(),
            nominal: Vec::new(),
            least: Vec::new(),
            most: Vec::new(),
        })
        .collect();
    for step in (0..CURVE_POINTS).rev() {
        // Squared spacing: dense where the output leaves saturation.
        let share = step as f64 / (CURVE_POINTS - 1) as f64;
        let volts: Vec<f64> = outputs
            .iter()
            .map(|o| o.range.most.0.max(top) * share * share)
            .collect();
        fine.solve(&volts)?;
        let currents = fine.currents();
        for (k, curve) in curves.iter_mut().enumerate() {
            let counted = currents[k]
                .iter()
                .zip(fine.corners())
                .filter(|(_, c)| c.counts)
                .map(|(&i, _)| i);
            curve.volts.push(volts[k]);
            curve.nominal.push(currents[k][nominal]);
            curve
                .least
                .push(counted.clone().fold(f64::INFINITY, f64::min));
            curve.most.push(counted.fold(f64::NEG_INFINITY, f64::max));
        }
    }
    for curve in &mut curves {
        for list in [
            &mut curve.volts,
            &mut curve.nominal,
            &mut curve.least,
            &mut curve.most,
        ] {
            list.reverse();
        }
    }
    Ok(curves)
}

/// Parts of the worst error. The systematic part is walked from the nominal corner to the worst
/// one, a step at a time: what each step adds is its share, and the shares sum to the whole.
fn budget(
    job: &Job,
    network: &Network,
    k: usize,
    readings: &[Reading],
    corners: &[Corner],
    worst: &Corner,
) -> Vec<BudgetPart> {
    let output = &job.spec.outputs[k];
    let nominal = &corners[nominal_index(job, corners)];
    let at = |corner: usize, temperature: f64, supply: f64| -> &Reading {
        let found = corners.iter().position(|c| {
            c.climate.corner == corner && c.climate.temperature == temperature && c.supply == supply
        });
        &readings[found.expect("the fine corners hold every combination")]
    };
    let (process, temperature) = (worst.climate.corner, worst.climate.temperature);
    let (t0, v0) = (nominal.climate.temperature, nominal.supply);
    let start = at(nominal.climate.corner, t0, v0).systematic;
    let after_process = at(process, t0, v0).systematic;
    let after_temperature = at(process, temperature, v0).systematic;
    let last = at(process, temperature, worst.supply);
    let rounding = rounding(job, network, k);
    let sigma = output.accuracy.map_or(3.0, |a| a.sigma);
    let part = |name: &str, value: f64, random: bool| BudgetPart {
        name: name.to_owned(),
        value,
        random,
    };
    let mut parts = vec![
        part("threshold_mismatch", sigma * last.variance[0].sqrt(), true),
        part("gain_mismatch", sigma * last.variance[1].sqrt(), true),
    ];
    if last.variance[2] > 0.0 {
        parts.push(part(
            "resistor_mismatch",
            sigma * last.variance[2].sqrt(),
            true,
        ));
    }
    parts.extend([
        part("ratio_rounding", rounding, false),
        part("output_conductance", start - rounding, false),
        part("process", after_process - start, false),
        part("temperature", after_temperature - after_process, false),
        part("supply", last.systematic - after_temperature, false),
    ]);
    let reference = tolerance(job, output);
    if reference > 0.0 {
        // Of either sign; it takes that of the rest, the worse one.
        parts.push(part(
            "reference",
            reference.copysign(last.systematic),
            false,
        ));
    }
    debug_assert!(
        (total_error(job, output, last)
            - parts
                .iter()
                .filter(|p| !p.random)
                .map(|p| p.value)
                .sum::<f64>()
                .abs()
            - parts
                .iter()
                .filter(|p| p.random)
                .map(|p| p.value * p.value)
                .sum::<f64>()
                .sqrt())
        .abs()
            < 1e-9
    );
    parts
}

/// Error of the unit counts alone: what the output would be off by with ideal mirrors.
fn rounding(job: &Job, network: &Network, k: usize) -> f64 {
    let actual = actual_currents(job, network);
    let leg = network.legs[k];
    let family = &network.families[leg.family];
    let unit = actual[leg.family] / f64::from(family.input_units);
    f64::from(leg.units) * unit / job.spec.target(&job.spec.outputs[k]).0 - 1.0
}

/// Input current of every family as the unit counts make it from the reference, A.
fn actual_currents(job: &Job, network: &Network) -> Vec<f64> {
    let mut actual: Vec<f64> = Vec::with_capacity(network.families.len());
    for family in &network.families {
        actual.push(match family.feed {
            Source::Reference => job.spec.reference.current().0,
            Source::Family { parent, units } => {
                actual[parent] / f64::from(network.families[parent].input_units) * f64::from(units)
            }
        });
    }
    actual
}

fn families(job: &Job, network: &Network, names: &[String]) -> Vec<FamilyReport> {
    let actual = actual_currents(job, network);
    network
        .families
        .iter()
        .enumerate()
        .map(|(f, family)| {
            let mut area = family.input_area(job.card);
            for child in &network.families {
                let bias = child.bias.as_ref().map(|b| b.feed);
                for feed in [Some(child.feed), bias].into_iter().flatten() {
                    if let Source::Family { parent, units } = feed
                        && parent == f
                    {
                        area += family.leg_area(job.card, units);
                    }
                }
            }
            let mut outputs = Vec::new();
            for (leg, output) in network.legs.iter().zip(&job.spec.outputs) {
                if leg.family == f {
                    area += f64::from(output.count) * family.leg_area(job.card, leg.units);
                    outputs.push(output.name.clone());
                }
            }
            FamilyReport {
                name: names[f].clone(),
                rail: family.rail,
                cell: CELLS[family.shape.cell].name().to_owned(),
                fed_by: match family.feed {
                    Source::Reference => None,
                    Source::Family { parent, .. } => Some(names[parent].clone()),
                },
                input_current: actual[f],
                input_units: family.input_units,
                unit_current: actual[f] / f64::from(family.input_units),
                area,
                outputs,
            }
        })
        .collect()
}

fn devices(job: &Job, network: &Network, fine: &Bench, nominal: usize) -> Vec<DeviceRow> {
    let drawing = fine.drawing();
    let points = fine.operating_points(nominal);
    let through = fine.resistor_currents(nominal);
    let outputs = &job.spec.outputs;
    let served = |serves: Serves| match serves {
        Serves::Output(k) => (Some(outputs[k].name.clone()), outputs[k].count),
        _ => (None, 1),
    };
    let role = |role: &str, serves: Serves| match serves {
        Serves::Feeds(child) => format!("{role}, feeds {}", drawing.names[child]),
        Serves::Biases(child) => format!("{role}, biases {}", drawing.names[child]),
        _ => role.to_owned(),
    };
    let mut rows = Vec::new();
    let netlist = &drawing.draw.netlist;
    for ((m, origin), point) in netlist.mos.iter().zip(&drawing.draw.mos_origin).zip(points) {
        let family = &network.families[origin.family];
        let tech = job.tech(family.rail);
        let mosfet = tech.mosfet();
        let (output, count) = served(origin.serves);
        let [current, vgs, vds, vdssat] = point;
        let inversion = matches!(mosfet.law, Law::Charge(_)).then(|| {
            let unit = current / f64::from(m.units);
            device::inversion_of(mosfet, tech.nominal(), unit, m.width, m.length)
        });
        rows.push(DeviceRow {
            name: m.name.clone(),
            family: drawing.names[origin.family].clone(),
            role: role(origin.role, origin.serves),
            output,
            model: mosfet.deck_model.clone(),
            width: m.width,
            length: m.length,
            units: m.units * count,
            ohms: None,
            current: current * f64::from(count),
            inversion,
            vgs: Some(vgs),
            vds: Some(vds),
            vdssat: Some(vdssat),
            area: f64::from(count) * device::area_of(mosfet, m.width, m.length, m.units),
        });
    }
    if let Some(card) = &job.card.resistor {
        for ((r, origin), current) in netlist
            .resistors
            .iter()
            .zip(&drawing.draw.resistor_origin)
            .zip(through)
        {
            let (output, count) = served(origin.serves);
            rows.push(DeviceRow {
                name: r.name.clone(),
                family: drawing.names[origin.family].clone(),
                role: role(origin.role, origin.serves),
                output,
                model: "resistor".to_owned(),
                width: r.width,
                length: device::resistor_length(card, r.width, r.ohms),
                units: r.units * count,
                ohms: Some(r.ohms),
                current: current * f64::from(count),
                inversion: None,
                vgs: None,
                vds: None,
                vdssat: None,
                area: f64::from(count) * device::resistor_area(card, r.width, r.ohms, r.units),
            });
        }
    }
    rows
}

fn deck(job: &Job, network: &Network) -> DeckSource {
    let drawing = draw(job, network, true);
    let mut references = Vec::new();
    if let Reference::Current { .. } = job.spec.reference {
        for (f, family) in network.families.iter().enumerate() {
            if family.feed == Source::Reference {
                references.push(drawing.inputs[f]);
            }
            if let (Some(bias), Some(node)) = (&family.bias, drawing.biases[f])
                && bias.feed == Source::Reference
            {
                references.push(node);
            }
        }
    }
    let current = job.spec.reference.current().0;
    let origins = drawing.draw.mos_origin.iter();
    DeckSource {
        families: origins.map(|o| drawing.names[o.family].clone()).collect(),
        supply: drawing.draw.supply,
        references,
        outputs: drawing.pins,
        netlist: drawing.draw.netlist,
        reference_current: match job.spec.reference.rail() {
            crate::spec::Rail::Sink => current,
            crate::spec::Rail::Source => -current,
        },
        nominal_supply: corners::nominal_supply(job),
        nominal_temperature: job.spec.temperature.nominal.0,
        models: [
            job.card.nmos.deck_model.clone(),
            job.card.pmos.deck_model.clone(),
        ],
    }
}

/// Limits a measured network breaks, by how much of the limit, most first.
pub fn broken(job: &Job, measured: &Measured, corners: &[Corner]) -> Vec<Broken> {
    let spec = job.spec;
    let name = |c: usize| Some(corners::name(job, &corners[c]));
    let mut list: Vec<(f64, Broken)> = Vec::new();
    let mut over = |share: f64, broken: Broken| {
        if share > 0.0 {
            list.push((share, broken));
        }
    };
    for (output, worst) in spec.outputs.iter().zip(&measured.worst) {
        if let Some(limit) = worst.limit {
            over(
                worst.error / limit - 1.0,
                Broken {
                    figure: "current_error".into(),
                    output: Some(output.name.clone()),
                    limit,
                    value: worst.error,
                    unit: "1".into(),
                    corner: name(worst.error_corner),
                },
            );
        }
        if worst.limit.is_none() && worst.headroom > output.range.least.0 {
            over(
                worst.headroom / output.range.least.0 - 1.0,
                Broken {
                    figure: "headroom".into(),
                    output: Some(output.name.clone()),
                    limit: output.range.least.0,
                    value: worst.headroom,
                    unit: "V".into(),
                    corner: name(worst.headroom_corner),
                },
            );
        }
        if let Some(least) = output.output_resistance {
            over(
                least.0 / worst.resistance - 1.0,
                Broken {
                    figure: "output_resistance".into(),
                    output: Some(output.name.clone()),
                    limit: least.0,
                    value: worst.resistance,
                    unit: "Ohm".into(),
                    corner: name(worst.resistance_corner),
                },
            );
        }
    }
    let (at, overhead) = measured
        .overhead
        .iter()
        .enumerate()
        .fold(
            (0, 0.0),
            |best, (c, &amps)| if amps > best.1 { (c, amps) } else { best },
        );
    let power = overhead * spec.supply.most.0;
    let totals = [
        (
            "area",
            "m2",
            spec.limits.area.map(|l| l.0),
            measured.area,
            None,
        ),
        (
            "overhead_current",
            "A",
            spec.limits.overhead_current.map(|l| l.0),
            overhead,
            name(at),
        ),
        (
            "power",
            "W",
            spec.limits.power.map(|l| l.0),
            power,
            name(at),
        ),
    ];
    for (figure, unit, limit, value, corner) in totals {
        if let Some(limit) = limit {
            over(
                value / limit - 1.0,
                Broken {
                    figure: figure.into(),
                    output: None,
                    limit,
                    value,
                    unit: unit.into(),
                    corner,
                },
            );
        }
    }
    if let Reference::Current { range, .. } = spec.reference {
        for (c, &volts) in measured.pin.iter().enumerate() {
            let (limit, share) = if volts > range.most.0 {
                (range.most.0, volts - range.most.0)
            } else {
                (range.least.0, range.least.0 - volts)
            };
            over(
                share,
                Broken {
                    figure: "reference_voltage".into(),
                    output: None,
                    limit,
                    value: volts,
                    unit: "V".into(),
                    corner: name(c),
                },
            );
        }
    }
    list.sort_by(|a, b| b.0.total_cmp(&a.0));
    // One line per limit: the reference pin is reported where it is worst.
    let mut out: Vec<Broken> = Vec::new();
    for (_, b) in list {
        if !out
            .iter()
            .any(|o| o.figure == b.figure && o.output == b.output)
        {
            out.push(b);
        }
    }
    out
}
