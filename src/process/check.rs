//! From a card's file to a [`Card`]: completes what was left out and checks what only shows when
//! values are seen together.

use super::file::{
    CardFile, ChargeFile, Convention, CornerFile, MismatchFile, Model, MosfetFile, Over,
    ResistorFile, Sourced, SquareFile, one,
};
use super::{
    AreaRule, Card, ChargeLaw, Corner, Curve, Law, Mismatch, Mosfet, Noise, Resistor, SquareLaw,
};
use crate::diag::{Diagnostics, quote};
use crate::units::{Kelvin, Metre, Range, Volt};
use crate::yaml::{At, Either, Measure, Node, Read, Reader, Source, Value};

/// A value of a card as it stands in the file.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Line {
    /// Keys that lead to it: `nmos.parameters.threshold`.
    pub path: String,
    /// The value as written.
    pub value: String,
    /// Where it comes from.
    pub source: String,
}

/// A card with what its file says about itself.
#[derive(Debug, Clone, PartialEq)]
pub struct Loaded {
    /// The card.
    pub card: Card,
    /// Every value with its source, in file order.
    pub lines: Vec<Line>,
}

/// Reads a card. `name` is its shipped name or file stem, `display_path` what messages call the
/// file.
///
/// # Errors
/// Every fault of the file, with its place.
pub fn read(text: &str, name: &str, display_path: &str) -> Result<Loaded, Diagnostics> {
    let source = Source::new(display_path, text);
    let root = source.parse()?;
    let mut reader = Reader::new(&source);
    let card = CardFile::read(&root, &mut reader).and_then(|file| card(name, &file, &mut reader));
    match card {
        Some(card) if !reader.has_errors() => {
            let mut lines = Vec::new();
            collect(&root, "", &mut lines);
            Ok(Loaded { card, lines })
        }
        _ => Err(reader.finish()),
    }
}

fn card(name: &str, file: &CardFile, reader: &mut Reader<'_>) -> Option<Card> {
    // All parts are looked at before any missing one ends the reading.
    let nmos = file.nmos.as_ref().and_then(|at| mosfet(&at.value, reader));
    let pmos = file.pmos.as_ref().and_then(|at| mosfet(&at.value, reader));
    let resistor = file.resistor.as_ref().map(|at| resistor(&at.value));
    let corners = corners(file, reader);
    Some(Card {
        name: name.to_owned(),
        title: file.title.as_ref()?.value.0.clone(),
        temperature: Kelvin(one(&file.temperature)?),
        supply_max: Volt(one(&file.supply_max)?),
        nmos: nmos?,
        pmos: pmos?,
        resistor: match resistor {
            Some(resistor) => Some(resistor?),
            None => None,
        },
        corners: corners?,
    })
}

fn corners(file: &CardFile, reader: &mut Reader<'_>) -> Option<Vec<Corner>> {
    let list = &file.corners.as_ref()?.value.0;
    let mut corners: Vec<(Corner, u32)> = Vec::new();
    for (index, At { value, .. }) in list.iter().enumerate() {
        let Some(name) = &value.name else { continue };
        let corner = corner(&name.value.0, value);
        if let Some((_, first)) = corners.iter().find(|(c, _)| c.name == corner.name) {
            let message = format!("the corner {} appears twice", quote(&corner.name));
            reader.clash(name.id, *first, message, "it stands already");
        }
        let nominal = Corner {
            name: corner.name.clone(),
            nmos_threshold: 0.0,
            nmos_gain: 1.0,
            pmos_threshold: 0.0,
            pmos_gain: 1.0,
            resistor: 1.0,
        };
        if index == 0 && corner != nominal {
            reader.fault(
                name.id,
                format!(
                    "the first corner {} must be the nominal one",
                    quote(&corner.name)
                ),
                vec!["the nominal corner shifts nothing; put it first in the list".to_owned()],
            );
        }
        corners.push((corner, name.id));
    }
    Some(corners.into_iter().map(|(corner, _)| corner).collect())
}

fn corner(name: &str, file: &CornerFile) -> Corner {
    Corner {
        name: name.to_owned(),
        nmos_threshold: file.nmos_threshold.map_or(0.0, |at| at.value.0),
        nmos_gain: 1.0 + file.nmos_gain.map_or(0.0, |at| at.value.0),
        pmos_threshold: file.pmos_threshold.map_or(0.0, |at| at.value.0),
        pmos_gain: 1.0 + file.pmos_gain.map_or(0.0, |at| at.value.0),
        resistor: 1.0 + file.resistor.map_or(0.0, |at| at.value.0),
    }
}

/// Pelgrom's coefficients describe a pair's difference, whose deviation is sqrt(2) times that of
/// one device.
fn pair(value: f64, convention: Convention) -> f64 {
    match convention {
        Convention::Pair => value,
        Convention::Device => value * std::f64::consts::SQRT_2,
    }
}

fn resistor(file: &ResistorFile) -> Option<Resistor> {
    Some(Resistor {
        sheet: one(&file.sheet)?,
        tc1: one(&file.tc1)?,
        tc2: one(&file.tc2).unwrap_or(0.0),
        mismatch: pair(one(&file.mismatch)?, file.convention?.value),
        width: one(&file.width)?,
        squares_min: one(&file.squares_min)?,
        border_width: one(&file.border_width)?,
        border_length: one(&file.border_length)?,
    })
}

fn mismatch(file: &MismatchFile) -> Option<Mismatch> {
    let convention = file.convention?.value;
    Some(Mismatch {
        threshold: pair(file.threshold?.value.0, convention),
        gain: pair(file.gain?.value.0, convention),
    })
}

fn mosfet(file: &MosfetFile, reader: &mut Reader<'_>) -> Option<Mosfet> {
    let size = |field: &Option<At<Sourced<crate::yaml::Span<super::quantities::Size>>>>| {
        let at = field.as_ref()?.value.value?;
        Some((
            Range {
                least: Metre(at.value.0.least),
                most: Metre(at.value.0.most),
            },
            at.id,
        ))
    };
    let (length, width) = (size(&file.length), size(&file.width));
    let grid = one(&file.grid);
    for (what, found) in [("length", length), ("width", width)] {
        let (Some((range, id)), Some(grid)) = (found, grid) else {
            continue;
        };
        for end in [range.least, range.most] {
            let steps = end.0 / grid;
            if (steps - steps.round()).abs() > 1e-6 * steps {
                reader.fault(
                    id,
                    format!(
                        "the {what} limit {} lies off the manufacturing grid",
                        end.exact()
                    ),
                    vec![format!("the grid is {}", Metre(grid).exact())],
                );
            }
        }
    }
    let law = match (&file.model, &file.parameters) {
        (Some(model), Some(parameters)) => match model.value {
            Model::Charge => charge(&parameters.value.0, reader)
                .map(|law| (law.width_loss, law.length_loss, Law::Charge(law))),
            Model::Square => square(&parameters.value.0, reader)
                .map(|law| (law.width_loss, law.length_loss, Law::Square(law))),
        },
        _ => None,
    };
    if let Some((width_loss, length_loss, _)) = &law {
        for (what, found, loss) in [
            ("width", width, width_loss),
            ("length", length, length_loss),
        ] {
            let Some((range, id)) = found else { continue };
            if range.least.0 - loss <= 0.0 {
                reader.fault(
                    id,
                    format!(
                        "the least {what} {} leaves no effective {what}",
                        range.least.exact()
                    ),
                    vec![format!("the {what}_loss is {}", Metre(*loss).exact())],
                );
            }
        }
    }
    let area = file.area.as_ref().map(|at| &at.value);
    let noise = file.noise.as_ref().map(|at| &at.value);
    Some(Mosfet {
        deck_model: file.deck_model.as_ref()?.value.0.clone(),
        length: length?.0,
        width: width?.0,
        grid: Metre(grid?),
        vds_max: Volt(one(&file.vds_max)?),
        vgs_max: Volt(one(&file.vgs_max)?),
        law: law?.2,
        mismatch: mismatch(&file.mismatch.as_ref()?.value)?,
        area: AreaRule {
            border_width: area?.border_width?.value.0,
            border_length: area?.border_length?.value.0,
            shared: area?.shared?.value,
        },
        noise: Noise {
            oxide_capacitance: noise?.oxide_capacitance?.value.0,
            flicker: noise?.flicker?.value.0,
            flicker_exponent: noise?.flicker_exponent?.value.0,
        },
    })
}

fn square(node: &Node, reader: &mut Reader<'_>) -> Option<SquareLaw> {
    let file = SquareFile::read(node, reader)?;
    together(reader, ("gamma", &file.gamma), ("phi", &file.phi));
    Some(SquareLaw {
        width_loss: one(&file.width_loss).unwrap_or(0.0),
        length_loss: one(&file.length_loss).unwrap_or(0.0),
        threshold: one(&file.threshold)?,
        threshold_tc: one(&file.threshold_tc).unwrap_or(0.0),
        gamma: one(&file.gamma).unwrap_or(0.0),
        // Without a body factor the value has no effect; it must only be a number.
        phi: one(&file.phi).unwrap_or(0.7),
        kp: one(&file.kp)?,
        kp_exponent: one(&file.kp_exponent).unwrap_or(0.0),
        early_per_length: one(&file.early_per_length).unwrap_or(f64::INFINITY),
    })
}

fn charge(node: &Node, reader: &mut Reader<'_>) -> Option<ChargeLaw> {
    let file = ChargeFile::read(node, reader)?;
    let velocity = ("saturation_velocity", &file.saturation_velocity);
    together(reader, velocity, ("mobility", &file.mobility));
    let clm = ("clm_strength", &file.clm_strength);
    together(reader, clm, ("clm_voltage", &file.clm_voltage));
    together(
        reader,
        ("dibl", &file.dibl),
        ("dibl_voltage", &file.dibl_voltage),
    );
    let impact = ("impact_strength", &file.impact_strength);
    together(reader, impact, ("impact_voltage", &file.impact_voltage));
    let lengths = lengths(&file, reader);
    let lengths = lengths.as_deref();
    // `off` is what a missing parameter means: its effect is gone, its partner harmless.
    let gamma = curve(&file.gamma, None, lengths, reader);
    let body_gamma = match &file.body_gamma {
        Some(_) => curve(&file.body_gamma, None, lengths, reader),
        None => gamma.clone(),
    };
    let threshold = curve(&file.threshold, None, lengths, reader);
    let phi = curve(&file.phi, None, lengths, reader);
    let kp = curve(&file.kp, None, lengths, reader);
    let threshold_tc = curve(&file.threshold_tc, Some(0.0), lengths, reader);
    let kp_exponent = curve(&file.kp_exponent, Some(0.0), lengths, reader);
    let theta = curve(&file.theta, Some(0.0), lengths, reader);
    let mobility_rise = curve(&file.mobility_rise, Some(0.0), lengths, reader);
    let saturation_velocity = curve(
        &file.saturation_velocity,
        Some(f64::INFINITY),
        lengths,
        reader,
    );
    let mobility = curve(&file.mobility, Some(0.0), lengths, reader);
    let clm_strength = curve(&file.clm_strength, Some(0.0), lengths, reader);
    let clm_voltage = curve(&file.clm_voltage, Some(1.0), lengths, reader);
    let dibl = curve(&file.dibl, Some(0.0), lengths, reader);
    let dibl_voltage = curve(&file.dibl_voltage, Some(1.0), lengths, reader);
    let impact_strength = curve(&file.impact_strength, Some(0.0), lengths, reader);
    let impact_voltage = curve(&file.impact_voltage, Some(1.0), lengths, reader);
    Some(ChargeLaw {
        width_loss: one(&file.width_loss).unwrap_or(0.0),
        length_loss: one(&file.length_loss).unwrap_or(0.0),
        threshold: threshold?,
        threshold_tc: threshold_tc?,
        gamma: gamma?,
        body_gamma: body_gamma?,
        phi: phi?,
        kp: kp?,
        kp_exponent: kp_exponent?,
        theta: theta?,
        mobility_rise: mobility_rise?,
        saturation_velocity: saturation_velocity?,
        mobility: mobility?,
        clm_strength: clm_strength?,
        clm_voltage: clm_voltage?,
        dibl: dibl?,
        dibl_voltage: dibl_voltage?,
        impact_strength: impact_strength?,
        impact_voltage: impact_voltage?,
    })
}

/// Two parameters that make sense only together.
fn together<A, B>(
    reader: &mut Reader<'_>,
    (a, a_field): (&str, &Option<At<A>>),
    (b, b_field): (&str, &Option<At<B>>),
) {
    let (there, id, missing) = match (a_field, b_field) {
        (Some(at), None) => (a, at.id, b),
        (None, Some(at)) => (b, at.id, a),
        _ => return,
    };
    reader.fault(id, format!("{there} needs {missing} beside it"), vec![]);
}

fn lengths(file: &ChargeFile, reader: &mut Reader<'_>) -> Option<Vec<f64>> {
    let list = &file.lengths.as_ref()?.value.0;
    for pair in list.windows(2) {
        if pair[1].value.0 <= pair[0].value.0 {
            reader.fault(pair[1].id, "the lengths must rise", vec![]);
        }
    }
    Some(list.iter().map(|at| at.value.0).collect())
}

fn curve<M: Measure<Value = f64>>(
    field: &Option<At<Over<M>>>,
    off: Option<f64>,
    lengths: Option<&[f64]>,
    reader: &mut Reader<'_>,
) -> Option<Curve> {
    let Some(field) = field else {
        return off.map(Curve::constant);
    };
    let at = field.value.value.as_ref()?;
    match (&at.value, lengths) {
        (Either::Short(value), _) => Some(Curve::constant(value.0)),
        (Either::Long(list), Some(lengths)) if list.0.len() == lengths.len() => Some(Curve {
            lengths: lengths.to_vec(),
            values: list.0.iter().map(|at| at.value.0).collect(),
        }),
        (Either::Long(list), Some(lengths)) => {
            let (given, wanted) = (list.0.len(), lengths.len());
            // A list that lost an entry to a fault of its own is not blamed for its length.
            if !reader.has_errors() {
                let message = format!("{given} values for {wanted} lengths");
                reader.fault(
                    at.id,
                    message,
                    vec!["give one value for each length".to_owned()],
                );
            }
            None
        }
        (Either::Long(_), None) => {
            let hint = "say at which lengths: lengths: [0.18 um, 1 um, ...]";
            reader.fault(
                at.id,
                "a list of values without lengths",
                vec![hint.to_owned()],
            );
            None
        }
    }
}

/// Gathers every value that has a source beside it.
fn collect(node: &Node, path: &str, lines: &mut Vec<Line>) {
    let join = |key: &str| match (path.is_empty(), key) {
        (_, "value") => path.to_owned(),
        (true, _) => key.to_owned(),
        (false, _) => format!("{path}.{key}"),
    };
    match &node.value {
        Value::Map(pairs) => {
            let find = |wanted: &str| {
                pairs
                    .iter()
                    .find_map(|(key, value)| match (&key.value, &value.value) {
                        (Value::Text(key), Value::Text(text)) if key == wanted => {
                            Some(text.clone())
                        }
                        _ => None,
                    })
            };
            let source = find("source");
            for (key, value) in pairs {
                let Value::Text(key) = &key.value else {
                    continue;
                };
                match (&source, written(value)) {
                    (Some(source), Some(value)) if key != "source" && key != "name" => {
                        lines.push(Line {
                            path: join(key),
                            value,
                            source: source.clone(),
                        })
                    }
                    _ => collect(value, &join(key), lines),
                }
            }
        }
        Value::List(items) => {
            for item in items {
                let name = match &item.value {
                    Value::Map(pairs) => {
                        pairs
                            .iter()
                            .find_map(|(key, value)| match (&key.value, &value.value) {
                                (Value::Text(key), Value::Text(name)) if key == "name" => {
                                    Some(name)
                                }
                                _ => None,
                            })
                    }
                    _ => None,
                };
                if let Some(name) = name {
                    collect(item, &join(name), lines);
                }
            }
        }
        _ => {}
    }
}

/// A scalar or a list of scalars as text.
fn written(node: &Node) -> Option<String> {
    match &node.value {
        Value::Text(text) => Some(text.clone()),
        Value::Bool(value) => Some(value.to_string()),
        Value::Number {
            whole: Some(whole), ..
        } => Some(whole.to_string()),
        Value::Number { value, .. } => Some(value.to_string()),
        Value::List(items) => Some(
            items
                .iter()
                .map(written)
                .collect::<Option<Vec<_>>>()?
                .join(", "),
        ),
        _ => None,
    }
}
