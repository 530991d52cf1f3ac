//! From a spec's file to a [`Spec`]: fills in the defaults and checks what only shows when values
//! are seen together.

use super::file::{
    From, LimitsFile, OutputFile, ReferenceFile, SearchFile, SpecFile, TemperatureFile,
};
use super::quantities;
use super::{
    Accuracy, AccuracyOf, Limits, Output, Reference, Search, Spec, Target, Temperatures, defaults,
};
use crate::diag::{Diagnostics, closest, either, quote, read_text};
use crate::units::{Amp, Kelvin, Range, Volt, percent};
use crate::yaml::{At, Either, Measure, Read, Reader, Source};
use std::collections::BTreeMap;
use std::path::Path;

/// Words that a spec may use and that this module cannot know.
#[derive(Debug, Clone, Copy)]
pub struct Vocabulary<'a> {
    /// Names of the figures that may span the front.
    pub figures: &'a [&'a str],
    /// Names of the shipped process cards.
    pub cards: &'a [&'a str],
}

/// A checked spec that still knows its file, for the checks that need the card.
#[derive(Debug, Clone)]
pub struct Located {
    /// The spec. Its corners are empty if the file names none; [`super::check_against_card`] fills
    /// them in.
    pub spec: Spec,
    /// What can be used, but hardly as intended.
    pub warnings: Diagnostics,
    pub(super) source: Source,
    pub(super) ids: Ids,
}

/// Nodes that the checks against the card may have to point at.
#[derive(Debug, Clone)]
pub(super) struct Ids {
    pub(super) supply: u32,
    pub(super) corners: Vec<u32>,
    pub(super) corners_list: u32,
    pub(super) reference_from: u32,
}

/// Reads the spec in a file; its stem becomes the name of the spec.
///
/// # Errors
/// Why the file cannot be read, or every fault in it, in its order, each with its place.
pub fn load(path: &Path, vocabulary: &Vocabulary<'_>) -> Result<Located, Diagnostics> {
    let shown = path.display().to_string();
    let text = read_text(path).map_err(|fault| fault.at(&shown))?;
    let stem = path
        .file_stem()
        .map_or_else(String::new, |stem| stem.to_string_lossy().into_owned());
    read(&text, &stem, &shown, vocabulary)
}

/// Reads a spec.
///
/// `name` is the file's stem and becomes the name of the spec; `display_path` is what messages call
/// the file; `vocabulary` holds the words known elsewhere.
///
/// # Errors
/// Every fault of the file, in its order, each with its place.
pub fn read(
    text: &str,
    name: &str,
    display_path: &str,
    vocabulary: &Vocabulary<'_>,
) -> Result<Located, Diagnostics> {
    let source = Source::new(display_path, text);
    let root = source.parse()?;
    let mut reader = Reader::new(&source);
    let checked = SpecFile::read(&root, &mut reader)
        .and_then(|file| spec(name, &file, vocabulary, &mut reader));
    let good = !reader.has_errors();
    let diagnostics = reader.finish();
    match checked {
        Some((spec, ids)) if good => Ok(Located {
            spec,
            warnings: diagnostics,
            source,
            ids,
        }),
        _ => Err(diagnostics),
    }
}

fn spec(
    name: &str,
    file: &SpecFile,
    vocabulary: &Vocabulary<'_>,
    reader: &mut Reader<'_>,
) -> Option<(Spec, Ids)> {
    // Every part is looked at before any missing one ends the reading.
    let card = file.card.as_ref();
    if let Some(card) = card {
        check_card(card.id, &card.value.0, vocabulary, reader);
    }
    let supply = file.supply.map(|at| at.value.0);
    let temperature = temperatures(file, reader);
    let corners = file.corners.as_ref().map_or(&[][..], |at| &at.value.0);
    for (index, corner) in corners.iter().enumerate() {
        if let Some(first) = corners[..index].iter().find(|c| c.value == corner.value) {
            let message = format!("the corner {} appears twice", quote(&corner.value.0));
            reader.clash(corner.id, first.id, message, "it stands already");
        }
    }
    let reference = file
        .reference
        .as_ref()
        .and_then(|at| reference(&at.value, supply, reader));
    let outputs = outputs(file, supply, reader);
    let trade = trade(file, vocabulary, reader);
    let ids = Ids {
        supply: file.supply?.id,
        corners: corners.iter().map(|at| at.id).collect(),
        corners_list: file.corners.as_ref().map_or(0, |at| at.id),
        reference_from: file
            .reference
            .as_ref()
            .and_then(|at| at.value.from)
            .map_or(0, |at| at.id),
    };
    let spec = Spec {
        name: name.to_owned(),
        title: file
            .title
            .as_ref()
            .map_or_else(|| name.to_owned(), |at| at.value.0.clone()),
        card: card?.value.0.clone(),
        supply: supply?,
        temperature: temperature?,
        corners: corners.iter().map(|at| at.value.0.clone()).collect(),
        reference: reference?,
        outputs: outputs?,
        limits: file
            .limits
            .as_ref()
            .map_or_else(Limits::default, |at| limits(&at.value)),
        trade,
        search: search(file.search.as_ref().map(|at| &at.value)),
    };
    Some((spec, ids))
}

fn check_card(id: u32, name: &str, vocabulary: &Vocabulary<'_>, reader: &mut Reader<'_>) {
    let path = name.ends_with(".yaml") || name.ends_with(".yml");
    if path || vocabulary.cards.contains(&name) {
        return;
    }
    let mut hints = vec![match closest(name, vocabulary.cards.iter().copied()) {
        Some(meant) => format!("did you mean \"{meant}\"?"),
        None => format!("the shipped cards are {}", vocabulary.cards.join(", ")),
    }];
    hints.push("the path of a card of your own ends in .yaml".to_owned());
    reader.fault(id, format!("unknown card {}", quote(name)), hints);
}

fn temperatures(file: &SpecFile, reader: &mut Reader<'_>) -> Option<Temperatures> {
    let (range, nominal) = match &file.temperature.as_ref()?.value {
        Either::Short(range) => (range.0, None),
        Either::Long(TemperatureFile { range, nominal, .. }) => (range.as_ref()?.value.0, *nominal),
    };
    let Range { least, most } = range;
    let nominal = match nominal {
        None => Kelvin(defaults::NOMINAL_TEMPERATURE.0.clamp(least.0, most.0)),
        Some(at) => {
            if !range.contains(at.value.0) {
                let hints = vec![format!(
                    "the range is {} to {}",
                    least.exact(),
                    most.exact()
                )];
                reader.fault(
                    at.id,
                    "the nominal temperature lies outside the range",
                    hints,
                );
            }
            at.value.0
        }
    };
    Some(Temperatures {
        least,
        nominal,
        most,
    })
}

fn reference(
    file: &ReferenceFile,
    supply: Option<Range<Volt>>,
    reader: &mut Reader<'_>,
) -> Option<Reference> {
    if file.from.is_some_and(|at| at.value == From::Resistor) {
        let foreign = [
            ("flows", file.flows.map(|at| at.id)),
            ("range", file.range.map(|at| at.id)),
            ("copies", file.copies.map(|at| at.id)),
            ("tolerance", file.tolerance.map(|at| at.id)),
        ];
        for (key, id) in foreign {
            if let Some(id) = id {
                let message = format!("\"{key}\" has no meaning for a reference from a resistor");
                reader.fault(
                    id,
                    message,
                    vec!["it belongs to a reference from a pin".to_owned()],
                );
            }
        }
        return Some(Reference::Resistor {
            current: file.current?.value.0,
        });
    }
    // Reading reports a faulty key; only one that is not there at all is missing.
    for (key, needed) in [
        ("flows", file.flows.is_none()),
        ("range", file.range.is_none()),
    ] {
        if needed && !file.has_key(key) {
            reader.fault(
                file.owner,
                format!("the reference needs the key \"{key}\""),
                vec![
                    "only a reference made by a resistor, \"from: resistor\", goes without".into(),
                ],
            );
        }
    }
    if let (Some(range), Some(supply)) = (file.range, supply)
        && range.value.0.least >= supply.least
    {
        reader.fault(
            range.id,
            "the reference works only at voltages above the least supply",
            vec![format!("the least supply is {}", supply.least.exact())],
        );
    }
    Some(Reference::Current {
        current: file.current?.value.0,
        flows: file.flows?.value,
        range: file.range?.value.0,
        copies: file.copies.map_or(defaults::COPIES, |at| small(at.value.0)),
        tolerance: file.tolerance.map_or(defaults::TOLERANCE, |at| at.value.0),
    })
}

/// A number whose range the file's table keeps far below `u32`.
fn small(value: u64) -> u32 {
    u32::try_from(value).unwrap_or(u32::MAX)
}

fn outputs(
    file: &SpecFile,
    supply: Option<Range<Volt>>,
    reader: &mut Reader<'_>,
) -> Option<Vec<Output>> {
    let list = &file.outputs.as_ref()?.value.0;
    unique_names(list, reader);
    let reference = file.reference.as_ref();
    let current = reference
        .and_then(|at| at.value.current)
        .map(|at| at.value.0);
    let tolerance = reference
        .and_then(|at| at.value.tolerance)
        .map_or(defaults::TOLERANCE, |at| at.value.0);
    let mut outputs = Some(Vec::new());
    for At { value, .. } in list {
        let one = output(value, supply, current, tolerance, reader);
        outputs = match (outputs, one) {
            (Some(mut list), Some(one)) => {
                list.push(one);
                Some(list)
            }
            _ => None,
        };
    }
    outputs
}

/// Names must stay apart in a netlist, where capitals do not count and the legs of a counted output
/// are called name_1, name_2 and so on.
fn unique_names(list: &[At<OutputFile>], reader: &mut Reader<'_>) {
    let mut seen: BTreeMap<String, (u32, String)> = BTreeMap::new();
    for At { value, .. } in list {
        let Some(name) = &value.name else { continue };
        let count = value.count.map_or(defaults::COUNT, |at| small(at.value.0));
        let plain = name.value.0.to_lowercase();
        let mut legs = vec![plain.clone()];
        if count > 1 {
            legs.extend((1..=count).map(|leg| format!("{plain}_{leg}")));
        }
        let taken = legs.iter().find_map(|leg| seen.get(leg).cloned());
        if let Some((first, owner)) = taken {
            let message = if owner.to_lowercase() == plain {
                format!("the output {} appears twice", quote(&name.value.0))
            } else {
                format!(
                    "the output {} collides with {}, whose legs are numbered _1, _2, ...",
                    quote(&name.value.0),
                    quote(&owner)
                )
            };
            reader.clash(name.id, first, message, "the other one stands");
        }
        for leg in legs {
            seen.entry(leg)
                .or_insert_with(|| (name.id, name.value.0.clone()));
        }
    }
}

fn output(
    file: &OutputFile,
    supply: Option<Range<Volt>>,
    reference: Option<Amp>,
    tolerance: f64,
    reader: &mut Reader<'_>,
) -> Option<Output> {
    let target = target(file, reference, reader);
    if let (Some(range), Some(supply)) = (file.range, supply)
        && range.value.0.most > supply.least
    {
        let rail = match file.kind.map(|at| at.value) {
            Some(super::Rail::Source) => "ground",
            Some(super::Rail::Sink) => "the supply",
            None => "the other rail",
        };
        reader.fault(
            range.id,
            format!("the range of the output reaches past {rail}"),
            vec![format!(
                "ranges count from the output's own rail, and the least supply is {}",
                supply.least.exact()
            )],
        );
    }
    let accuracy = file.accuracy.as_ref().map(|at| {
        let given = match target {
            Some(Target::Ratio(_)) => AccuracyOf::Ratio,
            _ => AccuracyOf::Current,
        };
        match &at.value {
            Either::Short(limit) => Some(Accuracy {
                limit: limit.0,
                sigma: defaults::SIGMA,
                of: given,
            }),
            Either::Long(long) => Some(Accuracy {
                limit: long.limit?.value.0,
                sigma: long.sigma.map_or(defaults::SIGMA, |at| at.value.0),
                of: long.of.map_or(given, |at| at.value),
            }),
        }
    });
    if let (Some(at), Some(Some(accuracy))) = (&file.accuracy, accuracy)
        && accuracy.of == AccuracyOf::Current
        && accuracy.limit <= tolerance
        && tolerance > 0.0
    {
        let message = format!(
            "no network can hold this: the reference itself may be off by {}",
            percent(tolerance, 3)
        );
        let hint = "loosen it, or hold the output to its ratio: {limit: ..., of: ratio}";
        reader.warn(at.id, message, vec![hint.to_owned()]);
    }
    Some(Output {
        name: file.name.as_ref()?.value.0.clone(),
        rail: file.kind?.value,
        target: target?,
        count: file.count.map_or(defaults::COUNT, |at| small(at.value.0)),
        range: file.range?.value.0,
        accuracy: match accuracy {
            Some(accuracy) => Some(accuracy?),
            None => None,
        },
        output_resistance: file.output_resistance.map(|at| at.value.0),
    })
}

fn target(file: &OutputFile, reference: Option<Amp>, reader: &mut Reader<'_>) -> Option<Target> {
    match (file.current, file.ratio) {
        (Some(current), Some(ratio)) => {
            let (first, second) = (current.id.min(ratio.id), current.id.max(ratio.id));
            let message = "the output has both a current and a ratio";
            reader.clash(
                second,
                first,
                message,
                "keep one of the two: the other stands",
            );
            None
        }
        (Some(current), None) => Some(Target::Current(current.value.0)),
        (None, Some(ratio)) => {
            let permitted = quantities::OutputCurrent::PERMITTED;
            let (least, most) = permitted.ends();
            if let Some(reference) = reference {
                let current = Amp(ratio.value.0 * reference.0);
                if !(least..=most).contains(&current.0) {
                    let (message, _) = permitted.explain(&crate::units::Fault::OutOfRange, "");
                    reader.fault(
                        ratio.id,
                        message,
                        vec![format!("this ratio of the reference makes {current}")],
                    );
                }
            }
            Some(Target::Ratio(ratio.value.0))
        }
        (None, None) => {
            if !file.has_key("current") && !file.has_key("ratio") {
                let hint = "write current: 20 uA, or ratio: 2";
                let message = "the output has neither a current nor a ratio";
                reader.fault(file.owner, message, vec![hint.to_owned()]);
            }
            None
        }
    }
}

fn limits(file: &LimitsFile) -> Limits {
    Limits {
        area: file.area.map(|at| at.value.0),
        overhead_current: file.overhead_current.map(|at| at.value.0),
        power: file.power.map(|at| at.value.0),
    }
}

fn search(file: Option<&SearchFile>) -> Search {
    Search {
        effort: file
            .and_then(|f| f.effort)
            .map_or(defaults::EFFORT, |at| at.value),
        seed: file
            .and_then(|f| f.seed)
            .map_or(defaults::SEED, |at| at.value.0),
        price_of: file.and_then(|f| f.price_of).map(|at| small(at.value.0)),
    }
}

fn trade(file: &SpecFile, vocabulary: &Vocabulary<'_>, reader: &mut Reader<'_>) -> Vec<String> {
    let Some(list) = &file.trade else {
        return defaults::TRADE.map(str::to_owned).to_vec();
    };
    let list = &list.value.0;
    for (index, At { value, id }) in list.iter().enumerate() {
        if !vocabulary.figures.contains(&value.0.as_str()) {
            let hint = match closest(&value.0, vocabulary.figures.iter().copied()) {
                Some(meant) => format!("did you mean \"{meant}\"?"),
                None => format!(
                    "the figures are {}",
                    either(vocabulary.figures.iter().copied())
                ),
            };
            reader.fault(
                *id,
                format!("unknown figure {}", quote(&value.0)),
                vec![hint],
            );
        }
        if let Some(first) = list[..index].iter().find(|other| other.value == *value) {
            let message = format!("the figure {} appears twice", quote(&value.0));
            reader.clash(*id, first.id, message, "it stands already");
        }
    }
    list.iter().map(|at| at.value.0.clone()).collect()
}
