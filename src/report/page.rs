//! `report.html`: the front and every network on one page that works from a local file.
//!
//! Style, script and data are inside; nothing is fetched. The tables of the first network are in
//! the page itself, so that it reads without its script; the script draws the charts and
//! exchanges the network shown. All text is laid out here, once: the script only places it.

use super::{Files, Format, chart, devices, format, view, words};
use crate::explore::{
    FamilyReport, LimitPrice, NetworkReport, Outcome, OutputReport, Prices, Proof, Step, Verdict,
};
use crate::spec::Rail;
use maud::{DOCTYPE, Markup, PreEscaped, html};
use serde::Serialize;

/// The format.
pub const FORMAT: Format = Format {
    name: "page",
    files: &["report.html"],
    about: "one page with the front, every network, its curves and error budgets; works offline",
    render,
};

const CSS: &str = include_str!("page.css");
const SCRIPT: &str = include_str!("page.js");

/// A table: headers, which columns hold numbers, rows, and a last row of sums.
#[derive(Debug, Serialize)]
struct Table {
    head: Vec<String>,
    /// Right-aligned columns.
    right: Vec<bool>,
    rows: Vec<Vec<String>>,
    sum: Option<Vec<String>>,
}

/// What the script gets: numbers for the charts, text for everything else.
#[derive(Debug, Serialize)]
struct Data {
    /// Figures that may span the front.
    figures: Vec<Figure>,
    axes: [String; 2],
    /// Whether the front is spanned by these two axes alone.
    two_axes: bool,
    networks: Vec<Network>,
}

#[derive(Debug, Serialize)]
struct Figure {
    name: String,
    label: String,
    unit: String,
    limit: Option<f64>,
}

#[derive(Debug, Serialize)]
struct Network {
    stem: String,
    title: String,
    rank: String,
    /// Value of every figure of [`Data::figures`], `null` where the network has none.
    values: Vec<Option<f64>>,
    summary: Vec<[String; 2]>,
    broken: Vec<String>,
    figures: Table,
    families: Table,
    outputs: Table,
    budgets: Table,
    devices: Table,
    files: Vec<[String; 2]>,
    tree: Vec<Branch>,
    legs: Vec<Leg>,
    reference: String,
}

/// A family in the tree.
#[derive(Debug, Serialize)]
struct Branch {
    name: String,
    source: bool,
    cell: String,
    fed_by: Option<String>,
    input: String,
    area: String,
    outputs: Vec<[String; 2]>,
}

/// An output with its curve and its budget.
#[derive(Debug, Serialize)]
struct Leg {
    name: String,
    head: String,
    source: bool,
    served: String,
    target: f64,
    error: f64,
    error_text: String,
    error_limit: Option<f64>,
    range: [f64; 2],
    headroom: Option<f64>,
    /// Name, value, what it is held against, corner.
    facts: Vec<[String; 4]>,
    /// Which of the facts break a limit.
    breaks: Vec<bool>,
    volts: Vec<f64>,
    nominal: Vec<f64>,
    least: Vec<f64>,
    most: Vec<f64>,
    budget: Vec<Part>,
}

#[derive(Debug, Serialize)]
struct Part {
    label: String,
    value: f64,
    text: String,
    random: bool,
}

/// A number for a chart: five significant digits are finer than any screen.
fn coarse(value: f64) -> f64 {
    if value.is_finite() {
        format!("{value:.4e}").parse().unwrap_or(value)
    } else {
        value
    }
}

fn coarse_all(values: &[f64]) -> Vec<f64> {
    values.iter().copied().map(coarse).collect()
}

/// Printed form of plain text.
fn print(text: impl AsRef<str>) -> String {
    format::typeset(text.as_ref())
}

impl Data {
    fn new(outcome: &Outcome) -> Data {
        let shown = view::networks(outcome);
        let axes = view::axes(outcome);
        let figures: Vec<Figure> = view::figure_names(&shown)
            .into_iter()
            .map(|(name, unit)| Figure {
                name: name.to_owned(),
                label: words::label(name),
                unit: unit.to_owned(),
                limit: match name {
                    "area" => outcome.spec.limits.area.map(|limit| limit.0),
                    "overhead_current" => outcome.spec.limits.overhead_current.map(|limit| limit.0),
                    "power" => outcome.spec.limits.power.map(|limit| limit.0),
                    _ => None,
                },
            })
            .collect();
        let networks = shown
            .iter()
            .map(|shown| Network::new(outcome, shown, &figures))
            .collect();
        Data {
            figures,
            axes,
            two_axes: outcome.spec.trade.len() <= 2,
            networks,
        }
    }
}

impl Network {
    fn new(outcome: &Outcome, shown: &view::Shown<'_>, figures: &[Figure]) -> Network {
        let network = shown.network;
        let stem = shown.stem();
        let values = figures.iter().map(|figure| {
            let value = network.figure(&figure.name).map(|figure| figure.value);
            value.filter(|value| value.is_finite())
        });
        let current = format::engineering(outcome.spec.reference.current().0, "A");
        Network {
            title: shown.title(),
            rank: shown.rank(),
            values: values.collect(),
            summary: summary(network),
            broken: network
                .broken
                .iter()
                .map(|b| print(words::broken_sentence(b)))
                .collect(),
            figures: figure_table(network),
            families: family_table(network),
            outputs: output_table(network),
            budgets: budget_table(network),
            devices: device_table(network),
            files: vec![
                [format!("{stem}.cir"), "netlist deck".to_owned()],
                [format!("{stem}-devices.csv"), "devices, CSV".to_owned()],
                [format!("{stem}-devices.txt"), "devices, text".to_owned()],
            ],
            tree: network
                .families
                .iter()
                .map(|family| Branch::new(network, family))
                .collect(),
            legs: network
                .outputs
                .iter()
                .map(|output| Leg::new(network, output))
                .collect(),
            reference: print(format!("reference {current}")),
            stem,
        }
    }
}

impl Branch {
    fn new(network: &NetworkReport, family: &FamilyReport) -> Branch {
        let output = |name: &String| {
            let output = network.outputs.iter().find(|output| output.name == *name);
            let current = output.map_or(String::new(), |output| {
                format!(
                    "{}{}",
                    format::engineering(output.target, "A"),
                    times(output.count)
                )
            });
            [name.clone(), print(current)]
        };
        let units = words::count(family.input_units as usize, "unit");
        Branch {
            name: family.name.clone(),
            source: family.rail == Rail::Source,
            cell: words::label(&family.cell),
            fed_by: family.fed_by.clone(),
            input: print(format!(
                "input {}, {units}",
                format::engineering(family.input_current, "A")
            )),
            area: print(format::area(family.area)),
            outputs: family.outputs.iter().map(output).collect(),
        }
    }
}

impl Leg {
    fn new(network: &NetworkReport, output: &OutputReport) -> Leg {
        let breaks = ["current_error", "headroom", "output_resistance"].map(|figure| {
            let mut broken = network.broken.iter();
            broken.any(|broken| {
                broken.figure == figure && broken.output.as_ref() == Some(&output.name)
            })
        });
        let limit = |word: &str, limit: Option<String>| {
            limit.map_or("no limit".to_owned(), |limit| {
                print(format!("{word} {limit}"))
            })
        };
        let fact = |name: &str, value: String, against: String, corner: &str| {
            [name.to_owned(), print(value), against, print(corner)]
        };
        let facts = vec![
            fact(
                "current error",
                format::percent(output.error),
                limit("limit", output.error_limit.map(format::percent)),
                &output.error_corner,
            ),
            fact(
                "headroom",
                format::volts(output.headroom),
                print(format!("range from {}", format::volts(output.range[0]))),
                &output.headroom_corner,
            ),
            fact(
                "output resistance",
                format::engineering(output.output_resistance, "Ohm"),
                limit(
                    "at least",
                    output
                        .output_resistance_limit
                        .map(|limit| format::engineering(limit, "Ohm")),
                ),
                &output.output_resistance_corner,
            ),
        ];
        Leg {
            name: output.name.clone(),
            head: print(format!(
                "{}{}",
                format::engineering(output.target, "A"),
                times(output.count)
            )),
            source: output.rail == Rail::Source,
            served: format!(
                "{} of {} in {}, {}",
                words::rail(output.rail),
                words::count(output.units as usize, "unit"),
                output.family,
                words::label(&output.cell)
            ),
            target: output.target,
            error: coarse(output.error),
            error_text: print(format::percent(output.error)),
            error_limit: output.error_limit,
            range: output.range,
            headroom: Some(coarse(output.headroom)).filter(|headroom| headroom.is_finite()),
            facts,
            breaks: breaks.to_vec(),
            volts: coarse_all(&output.curve.volts),
            nominal: coarse_all(&output.curve.nominal),
            least: coarse_all(&output.curve.least),
            most: coarse_all(&output.curve.most),
            budget: output
                .budget
                .iter()
                .map(|part| Part {
                    label: words::label(&part.name),
                    value: coarse(part.value),
                    text: print(format::percent(part.value)),
                    random: part.random,
                })
                .collect(),
        }
    }
}

/// " x4" for four equal outputs, nothing for one.
fn times(count: u32) -> String {
    if count == 1 {
        String::new()
    } else {
        format!(" \u{d7}{count}")
    }
}

fn figure_text(network: &NetworkReport, name: &str) -> String {
    network.figure(name).map_or("-".to_owned(), |figure| {
        print(format::quantity(figure.value, &figure.unit))
    })
}

/// What a point of the front tells at a glance.
fn summary(network: &NetworkReport) -> Vec<[String; 2]> {
    let mut lines = vec![
        ["area".to_owned(), figure_text(network, "area")],
        [
            "overhead current".to_owned(),
            figure_text(network, "overhead_current"),
        ],
    ];
    if let Some(output) = view::worst_error(network) {
        let text = format!("{}, {}", print(format::percent(output.error)), output.name);
        lines.push(["worst error".to_owned(), text]);
    }
    if let Some(output) = view::worst_headroom(network) {
        let margin = print(format::millivolts(output.headroom_margin));
        lines.push([
            "headroom margin".to_owned(),
            format!("{margin}, {}", output.name),
        ]);
    }
    lines.push(["cells".to_owned(), words::cells(network)]);
    lines
}

fn table<const N: usize>(columns: [(&str, bool); N], rows: Vec<Vec<String>>) -> Table {
    Table {
        head: columns.map(|(name, _)| name.to_owned()).to_vec(),
        right: columns.map(|(_, right)| right).to_vec(),
        rows,
        sum: None,
    }
}

fn figure_table(network: &NetworkReport) -> Table {
    let dash = || "\u{2013}".to_owned();
    let mut rows: Vec<Vec<String>> = network
        .figures
        .iter()
        .map(|figure| {
            vec![
                words::label(&figure.name),
                print(format::quantity(figure.value, &figure.unit)),
                figure.output.clone().unwrap_or_else(dash),
                figure.corner.as_ref().map_or_else(dash, print),
            ]
        })
        .collect();
    let [least, most] = network.reference_pin;
    rows.push(vec![
        "reference pin".to_owned(),
        print(format!(
            "{} to {}",
            format::volts_number(least),
            format::volts(most)
        )),
        dash(),
        "over all corners".to_owned(),
    ]);
    table(
        [
            ("figure", false),
            ("worst value", true),
            ("output", false),
            ("corner", false),
        ],
        rows,
    )
}

fn family_table(network: &NetworkReport) -> Table {
    let rows = network
        .families
        .iter()
        .map(|family| {
            vec![
                family.name.clone(),
                words::rail(family.rail).to_owned(),
                words::label(&family.cell),
                family
                    .fed_by
                    .clone()
                    .unwrap_or_else(|| "reference".to_owned()),
                print(format::engineering(family.input_current, "A")),
                family.input_units.to_string(),
                print(format::engineering(family.unit_current, "A")),
                family.outputs.join(", "),
                print(format::area(family.area)),
            ]
        })
        .collect();
    let columns = [
        ("family", false),
        ("rail", false),
        ("cell", false),
        ("fed by", false),
        ("input", true),
        ("units", true),
        ("unit current", true),
        ("outputs", false),
        ("area", true),
    ];
    table(columns, rows)
}

fn output_table(network: &NetworkReport) -> Table {
    let dash = || "\u{2013}".to_owned();
    let rows = network
        .outputs
        .iter()
        .map(|output| {
            vec![
                format!("{}{}", output.name, times(output.count)),
                words::rail(output.rail).to_owned(),
                print(format::engineering(output.target, "A")),
                output.family.clone(),
                words::label(&output.cell),
                output.units.to_string(),
                print(format::percent(output.error)),
                output
                    .error_limit
                    .map_or_else(dash, |limit| print(format::percent(limit))),
                print(format::volts(output.headroom)),
                print(format::millivolts(output.headroom_margin)),
                print(format::engineering(output.output_resistance, "Ohm")),
                output
                    .output_resistance_limit
                    .map_or_else(dash, |limit| print(format::engineering(limit, "Ohm"))),
            ]
        })
        .collect();
    let columns = [
        ("output", false),
        ("rail", false),
        ("current", true),
        ("family", false),
        ("cell", false),
        ("units", true),
        ("worst error", true),
        ("limit", true),
        ("headroom", true),
        ("margin", true),
        ("output resistance", true),
        ("at least", true),
    ];
    table(columns, rows)
}

/// Error budgets as numbers: an output a row, a part a column.
fn budget_table(network: &NetworkReport) -> Table {
    let mut parts: Vec<&str> = Vec::new();
    for part in network.outputs.iter().flat_map(|output| &output.budget) {
        if !parts.contains(&part.name.as_str()) {
            parts.push(&part.name);
        }
    }
    let mut head = vec!["output".to_owned()];
    head.extend(parts.iter().map(|part| words::label(part)));
    head.extend(["worst error".to_owned(), "corner".to_owned()]);
    let mut right = vec![true; head.len()];
    right[0] = false;
    right[head.len() - 1] = false;
    let row = |output: &OutputReport| {
        let mut row = vec![output.name.clone()];
        for name in &parts {
            let part = output.budget.iter().find(|part| part.name == *name);
            row.push(part.map_or("\u{2013}".to_owned(), |part| {
                print(format::percent(part.value))
            }));
        }
        row.push(print(format::percent(output.error)));
        row.push(print(&output.error_corner));
        row
    };
    let rows = network.outputs.iter().map(row).collect();
    Table {
        head,
        right,
        rows,
        sum: None,
    }
}

fn device_table(network: &NetworkReport) -> Table {
    let printed = |cells: [String; devices::COLUMNS.len()]| {
        cells
            .map(|cell| {
                if cell == "-" {
                    "\u{2013}".to_owned()
                } else {
                    print(cell)
                }
            })
            .to_vec()
    };
    let mut devices_ = table(
        devices::COLUMNS,
        network
            .devices
            .iter()
            .map(devices::cells)
            .map(printed)
            .collect(),
    );
    for head in &mut devices_.head {
        if let Some((name, unit)) = head.rsplit_once(' ') {
            *head = format!("{name}, {}", format::printed_unit(unit));
        }
    }
    devices_.sum = Some(printed(devices::sum_cells(network)));
    devices_
}

/// The ranked networks.
fn ranked_table(outcome: &Outcome) -> Table {
    let shown = view::networks(outcome);
    // The figures of the trade that have no column of their own.
    let own = ["area", "overhead_current", "current_error", "headroom"];
    let extra: Vec<&str> = view::figure_names(&shown)
        .into_iter()
        .map(|(name, _)| name)
        .filter(|name| !own.contains(name) && outcome.spec.trade.iter().any(|trade| trade == name))
        .collect();
    let row = |shown: &view::Shown<'_>| {
        let network = shown.network;
        let error = view::worst_error(network);
        let headroom = view::worst_headroom(network);
        let mut row = vec![
            shown.rank(),
            figure_text(network, "area"),
            print(words::gap(outcome, shown)),
            figure_text(network, "overhead_current"),
        ];
        row.extend(extra.iter().map(|name| figure_text(network, name)));
        row.extend([
            error.map_or(String::new(), |output| print(format::percent(output.error))),
            headroom.map_or(String::new(), |output| {
                print(format::millivolts(output.headroom_margin))
            }),
            words::cells(network),
        ]);
        row
    };
    let mut head = vec![
        "rank".to_owned(),
        "area".to_owned(),
        "gap".to_owned(),
        "overhead current".to_owned(),
    ];
    head.extend(extra.iter().map(|name| words::label(name)));
    head.extend(["worst error", "headroom margin", "cells"].map(str::to_owned));
    let mut right = vec![true; head.len()];
    right[head.len() - 1] = false;
    Table {
        head,
        right,
        rows: shown.iter().map(row).collect(),
        sum: None,
    }
}

fn spec_table(outcome: &Outcome) -> Table {
    let spec = &outcome.spec;
    let dash = "\u{2013}";
    let rows = spec
        .outputs
        .iter()
        .map(|output| {
            vec![
                format!("{}{}", output.name, times(output.count)),
                words::rail(output.rail).to_owned(),
                print(words::target(output, spec.target(output).0)),
                print(format!(
                    "{} to {}",
                    format::volts_number(output.range.least.0),
                    format::volts(output.range.most.0)
                )),
                print(words::accuracy(output)),
                output.output_resistance.map_or(dash.to_owned(), |limit| {
                    print(format::engineering(limit.0, "Ohm"))
                }),
            ]
        })
        .collect();
    let columns = [
        ("output", false),
        ("rail", false),
        ("current", true),
        ("range from its rail", true),
        ("accuracy", false),
        ("output resistance, at least", true),
    ];
    table(columns, rows)
}

/// The spec's remaining lines.
fn spec_facts(outcome: &Outcome) -> Vec<(&'static str, String)> {
    let spec = &outcome.spec;
    let mut limits = Vec::new();
    if let Some(limit) = spec.limits.area {
        limits.push(format!("area {}", format::area(limit.0)));
    }
    if let Some(limit) = spec.limits.overhead_current {
        limits.push(format!(
            "overhead current {}",
            format::engineering(limit.0, "A")
        ));
    }
    if let Some(limit) = spec.limits.power {
        limits.push(format!("power {}", format::engineering(limit.0, "W")));
    }
    let limits = if limits.is_empty() {
        "none".to_owned()
    } else {
        limits.join(", ")
    };
    let trade: Vec<String> = spec.trade.iter().map(|name| words::label(name)).collect();
    let temperature = spec.temperature;
    vec![
        ("process card", outcome.card_title.clone()),
        (
            "supply",
            print(format!(
                "{} to {}",
                format::volts_number(spec.supply.least.0),
                format::volts(spec.supply.most.0)
            )),
        ),
        (
            "temperature",
            print(format!(
                "{} to {}, nominal {}",
                format::celsius(temperature.least.0),
                format::celsius(temperature.most.0),
                format::celsius(temperature.nominal.0)
            )),
        ),
        ("corners", spec.corners.join(" ")),
        ("reference", print(words::reference(&spec.reference))),
        ("limits", print(limits)),
        ("trade", trade.join(", ")),
        ("seed", spec.search.seed.to_string()),
    ]
}

fn head_and_rows(table: &Table) -> Markup {
    let class = |index: usize| {
        table
            .right
            .get(index)
            .copied()
            .unwrap_or(false)
            .then_some("n")
    };
    html! {
        thead { tr {
            @for (index, name) in table.head.iter().enumerate() { th scope="col" class=[class(index)] { (name) } }
        } }
        tbody {
            @for row in &table.rows {
                tr { @for (index, cell) in row.iter().enumerate() { td class=[class(index)] { (cell) } } }
            }
        }
        @if let Some(sum) = &table.sum {
            tfoot { tr { @for (index, cell) in sum.iter().enumerate() { td class=[class(index)] { (cell) } } } }
        }
    }
}

fn render(outcome: &Outcome) -> Files {
    vec![(
        "report.html".into(),
        page(outcome).into_string().into_bytes(),
    )]
}

fn page(outcome: &Outcome) -> Markup {
    let data = Data::new(outcome);
    // Serialising plain structs into memory cannot fail; `<` is escaped so that no text of the
    // spec can end the block.
    let json = serde_json::to_string(&data)
        .unwrap_or_default()
        .replace('<', "\\u003c");
    let first = data.networks.first();
    let title = &outcome.spec.title;
    let fits = words::broken(outcome).is_empty();
    html! {
        (DOCTYPE)
        html lang="en" {
            head {
                meta charset="utf-8";
                meta name="viewport" content="width=device-width, initial-scale=1";
                // The page asks nobody for anything; this line holds it to that.
                meta http-equiv="Content-Security-Policy" content="default-src 'none'; style-src 'unsafe-inline'; script-src 'unsafe-inline'; img-src data:";
                meta name="color-scheme" content="light dark";
                link rel="icon" href="data:,";
                title { (title) " \u{2013} bias networks" }
                style { (PreEscaped(chart::COLOURS)) (PreEscaped(chart::STYLE)) "\n" (PreEscaped(CSS)) }
            }
            body {
                header {
                    h1 { (title) }
                    p.status.bad[!fits] { (words::status(outcome)) }
                    nav aria-label="Sections" {
                        @if words::why(outcome).is_some() { a href="#advice" { "Advice" } }
                        @if first.is_some() {
                            a href="#front" { @if outcome.front.is_empty() { "Nearest" } @else { "Front" } }
                            a href="#network" { "Network" }
                            a href="#outputs" { "Outputs" }
                            a href="#devices" { "Devices" }
                        }
                        @if outcome.proof.is_some() { a href="#bounds" { "Bounds" } }
                        @if outcome.prices.is_some() { a href="#prices" { "Prices" } }
                        a href="#spec" { "Spec" }
                        a href="#work" { "Work" }
                        a href="#cautions" { "Cautions" }
                    }
                }
                main {
                    @if !words::broken(outcome).is_empty() {
                        section #broken {
                            h2 { "What does not fit" }
                            ol.broken {
                                @for broken in words::broken(outcome) {
                                    li { (print(words::broken_sentence(broken))) }
                                }
                            }
                        }
                    }
                    @if let Some(why) = words::why(outcome) {
                        section #advice {
                            h2 { "What would fit" }
                            p { (words::cause(why)) }
                            @if !why.impossible.is_empty() {
                                ul.broken {
                                    @for impossible in &why.impossible {
                                        li { (print(words::impossible(impossible))) }
                                    }
                                }
                            }
                            p { (words::advice_title(why)) }
                            @if !why.advice.is_empty() {
                                ul {
                                    @for advice in &why.advice {
                                        li { (print(words::advice(advice))) }
                                    }
                                }
                            }
                        }
                    }
                    @if let Some(first) = first {
                        (front(outcome, &data))
                        (network(first))
                    }
                    @if let Some(proof) = &outcome.proof { (bounds(outcome, proof)) }
                    @if let Some(prices) = &outcome.prices { (price_list(prices)) }
                    @if let Some(why) = words::no_prices(outcome) { p.note { (why) } }
                    (spec(outcome))
                    (work(outcome))
                    section #cautions {
                        h2 { "Cautions" }
                        ul { @for caution in words::CAUTIONS { li { (caution) } } }
                    }
                }
                @if first.is_some() {
                    script #data type="application/json" { (PreEscaped(json)) }
                    script { (PreEscaped(SCRIPT)) }
                }
            }
        }
    }
}

fn front(outcome: &Outcome, data: &Data) -> Markup {
    let ranked = ranked_table(outcome);
    html! {
        section #front {
            h2 { @if outcome.front.is_empty() { "The nearest network" } @else { "The front" } }
            div.pair {
                figure.front-chart {
                    div #axes hidden {
                        @for (id, text) in [("axis-y", "up"), ("axis-x", "across")] {
                            label { (text) " "
                                select id=(id) {
                                    @for figure in &data.figures {
                                        option value=(figure.name) { (figure.label) }
                                    }
                                }
                            }
                        }
                    }
                    div #chart { (chart::front(outcome, 560.0, 340.0, Some(0))) }
                    div #hint role="status" hidden {}
                }
                div.scroll.list tabindex="0" { table #ranked { (head_and_rows(&ranked)) } }
            }
        }
    }
}

fn network(first: &Network) -> Markup {
    html! {
        section #network {
            div.bar {
                h2 #network-title tabindex="-1" { (first.title) }
                span.steps hidden {
                    button #previous type="button" { "previous" }
                    button #next type="button" { "next" }
                }
                ul #files.files {
                    @for [path, text] in &first.files { li { a href=(path) { (text) } } }
                }
            }
            ul #network-broken.broken hidden[first.broken.is_empty()] {
                @for sentence in &first.broken { li { (sentence) } }
            }
            div #tree.scroll {}
            div.pair.narrow-right {
                div.scroll { table #families { (head_and_rows(&first.families)) } }
                div.scroll { table #figures { (head_and_rows(&first.figures)) } }
            }
        }
        section #outputs {
            h2 { "Outputs" }
            div.scroll { table #output-table { (head_and_rows(&first.outputs)) } }
            div.legend hidden {
                fieldset {
                    legend { "current axis" }
                    label { input type="radio" name="zoom" value="near" checked; " around the target" }
                    label { input type="radio" name="zoom" value="zero"; " from zero" }
                }
                ul {
                    li.k-nominal { "nominal corner" }
                    li.k-band { "all corners" }
                    li.k-range { "required range" }
                    li.k-limit { "error limit" }
                    li.k-headroom { "headroom" }
                    li.k-systematic { "systematic, adds with sign" }
                    li.k-mismatch { "mismatch, adds in squares" }
                }
            }
            div #legs {}
            noscript { p.note { "The curves of the outputs are drawn by this page's script; their numbers are in front.json." } }
            details {
                summary { "Error budgets as numbers" }
                div.scroll { table #budget-table { (head_and_rows(&first.budgets)) } }
            }
        }
        section #devices {
            h2 { "Devices" }
            p.note { "Sizes of one unit; currents, inversion coefficient IC and voltages at the nominal corner." }
            div.scroll { table #device-table { (head_and_rows(&first.devices)) } }
        }
    }
}

/// How small a network could be at all: a sentence per network, and what is and is not covered.
fn bounds(outcome: &Outcome, proof: &Proof) -> Markup {
    html! {
        section #bounds {
            h2 { "How small it could be" }
            p.note { (print(words::gap_note(proof))) }
            ul {
                @for network in &outcome.front {
                    li { "Network " (network.rank) ": " (print(words::bound(proof, network))) }
                }
            }
            p { "The bounds do not cover:" }
            ul { @for line in words::not_covered(proof) { li { (print(line)) } } }
        }
    }
}

/// What every limit costs: sentences for what costs something, the slack ones, all as numbers.
fn price_list(prices: &Prices) -> Markup {
    let slack = view::slack(prices);
    html! {
        section #prices {
            h2 { "Prices of the limits" }
            p.note { (print(words::prices_of(prices))) }
            ul {
                @for price in view::dear(prices) { li { (print(words::price_sentence(prices, price))) } }
                @for sentence in words::exchanges(prices) { li { (print(sentence)) } }
            }
            @if !slack.is_empty() { p { (print(words::slack(prices, &slack))) } }
            details {
                summary { "Every limit as numbers" }
                div.scroll { table #price-table { (head_and_rows(&price_table(prices))) } }
            }
        }
    }
}

fn price_table(prices: &Prices) -> Table {
    let dash = || "\u{2013}".to_owned();
    let signed = |text: String, value: f64| {
        if value > 0.0 {
            format!("+{text}")
        } else {
            text
        }
    };
    let changes = |step: &Step| match step.verdict {
        Verdict::Free => ["0".to_owned(), "0".to_owned()],
        Verdict::Resized { area, overhead, .. } | Verdict::Other { area, overhead, .. } => [
            signed(print(format::area(area)), area),
            signed(print(format::engineering(overhead, "A")), overhead),
        ],
        Verdict::NotFound | Verdict::NotAllowed => [dash(), dash()],
    };
    let row = |price: &LimitPrice| {
        let unit = price.limit.unit();
        let value = |value: f64| print(words::limit(value, unit));
        let [area, overhead] = changes(&price.tighter);
        let by = match price.tighter.verdict {
            Verdict::Free => "as it stands".to_owned(),
            Verdict::Resized { .. } => "new sizes".to_owned(),
            Verdict::Other { rank, .. } => format!("network {rank}"),
            Verdict::NotFound => "nothing found".to_owned(),
            Verdict::NotAllowed => "no such limit".to_owned(),
        };
        let looser = match &price.looser {
            Some(step) => {
                let [area, _] = changes(step);
                [value(step.to), area]
            }
            None => [dash(), dash()],
        };
        let free = if price.free == price.value {
            dash()
        } else {
            value(price.free)
        };
        let mut row = vec![
            words::limited(price),
            value(price.value),
            free,
            value(price.tighter.to),
            by,
            area,
            overhead,
        ];
        row.extend(looser);
        row
    };
    let columns = [
        ("limit", false),
        ("value", true),
        ("free to", true),
        ("a step tighter", true),
        ("kept by", false),
        ("area", true),
        ("overhead current", true),
        ("a step looser", true),
        ("area", true),
    ];
    table(columns, prices.limits.iter().map(row).collect())
}

fn spec(outcome: &Outcome) -> Markup {
    html! {
        section #spec {
            h2 { "The spec as understood" }
            div.pair.narrow-left {
                dl { @for (name, text) in spec_facts(outcome) { div { dt { (name) } dd { (text) } } } }
                div.scroll { table { (head_and_rows(&spec_table(outcome))) } }
            }
        }
    }
}

fn work(outcome: &Outcome) -> Markup {
    html! {
        section #work {
            h2 { "Work done" }
            dl.counters {
                @for (name, number) in words::work(outcome) {
                    div { dt { (name) } dd { (print(format::count(number))) } }
                }
            }
        }
    }
}
