//! `front.json`: everything in the outcome, for programs; and the JSON Schema of it.
//!
//! The types below *are* the format: serde writes them and schemars describes them. Values are
//! in SI base units (m, m2, A, V, Ohm, W, K) and fractions for errors. Every key is always there;
//! what does not apply is `null`.

use super::{Files, Format, words};
use crate::explore::{
    Advice, Broken, Change, Chosen, DeviceRow, Explanation, FamilyReport, FigureValue, LimitPrice,
    NetworkReport, Outcome, OutputReport, Prices, Proof, Status, Step, Verdict,
};
use crate::spec::{AccuracyOf, Effort, Flow, Output, Reference, Spec, Target};
use crate::units;
use schemars::{JsonSchema, Schema, SchemaGenerator, generate::SchemaSettings, json_schema};
use serde::Serialize;
use std::borrow::Cow;

/// The format.
pub const FORMAT: Format = Format {
    name: "json",
    files: &["front.json", "front.schema.json"],
    about: "everything the exploration knows, for programs, with its JSON Schema",
    render,
};

/// Name of the format, the value of the key `format`.
pub const NAME: &str = "biasloom-front";

/// Version of the format: raised when a key changes its meaning or goes away.
pub const VERSION: u32 = 1;

fn render(outcome: &Outcome) -> Files {
    // Serialising plain structs into memory cannot fail: no maps, no custom errors.
    let document = serde_json::to_string_pretty(&Document::new(outcome)).unwrap_or_default();
    let schema = serde_json::to_string_pretty(&schema()).unwrap_or_default();
    vec![
        ("front.json".into(), (rows(&document) + "\n").into_bytes()),
        ("front.schema.json".into(), (schema + "\n").into_bytes()),
    ]
}

/// Indented JSON with every list of plain numbers on one line: a curve is read, and compared, as
/// a row.
fn rows(indented: &str) -> String {
    let mut text = String::with_capacity(indented.len());
    let mut lines = indented.lines().peekable();
    while let Some(line) = lines.next() {
        if !text.is_empty() {
            text.push('\n');
        }
        text.push_str(line);
        let number = |line: &str| {
            let word = line.trim().trim_end_matches(',');
            word == "null" || word.starts_with(|c: char| c == '-' || c.is_ascii_digit())
        };
        if line.ends_with('[') && lines.peek().is_some_and(|next| number(next)) {
            // Lists are of one kind, so the rest is numbers up to the bracket.
            while let Some(line) = lines.next_if(|line| number(line)) {
                text.push_str(line.trim());
                if line.ends_with(',') {
                    text.push(' ');
                }
            }
            if let Some(end) = lines.next() {
                text.push_str(end.trim());
            }
        }
    }
    text
}

/// The JSON Schema of `front.json`, generated from the types that are serialised.
pub fn schema() -> Schema {
    SchemaSettings::draft2020_12()
        .for_serialize()
        .into_generator()
        .into_root_schema_for::<Document>()
}

/// A number, or `null` where the value is not finite (an unbounded resistance) or does not apply.
#[derive(Debug, Clone, Copy, Serialize)]
#[serde(transparent)]
struct Number(f64);

impl JsonSchema for Number {
    fn schema_name() -> Cow<'static, str> {
        "Number".into()
    }
    fn json_schema(_: &mut SchemaGenerator) -> Schema {
        json_schema!({
            "description": "SI value; null where it is not finite or does not apply",
            "type": ["number", "null"],
        })
    }
}

fn optional(value: Option<f64>) -> Number {
    Number(value.unwrap_or(f64::NAN))
}

fn numbers(values: &[f64]) -> Vec<Number> {
    values.iter().copied().map(Number).collect()
}

/// The front of bias networks that an exploration ended with. SI base units; errors are
/// fractions.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
#[schemars(title = "biasloom front")]
struct Document {
    /// Always "biasloom-front".
    format: &'static str,
    /// Version of this format.
    version: u32,
    /// How the exploration ended.
    status: Ending,
    /// The status as a sentence.
    sentence: String,
    /// Limits that the nearest network breaks, worst first; empty unless nothing fits.
    broken: Vec<BrokenLimit>,
    /// Why nothing fits and what would; null unless nothing fits.
    why: Option<Why>,
    /// Title of the process card.
    card_title: String,
    /// The spec as understood.
    spec: SpecAsUnderstood,
    /// The networks, ranked; the first has the least area.
    front: Vec<Network>,
    /// When nothing fits: the network that comes closest.
    nearest: Option<Network>,
    /// What a small step of each limit costs, for one network of the front; null where nothing is
    /// priced.
    prices: Option<PriceList>,
    /// How small any network could be at all; null where nothing is proved.
    proof: Option<Proved>,
    /// Counters of the work done.
    work: WorkDone,
    /// What to keep in mind before building on this.
    cautions: Vec<&'static str>,
}

/// Lower bounds on area. `biasloom audit SPEC front.json` checks them again.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Proved {
    /// The design space that the bounds cover.
    design_space: DesignSpace,
    /// What they do not cover.
    not_covered: Vec<String>,
    /// One bound per network of the front.
    bounds: Vec<Bound>,
}

/// The design space that bounds cover.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct DesignSpace {
    /// Cells a network may be made of.
    cells: Vec<String>,
    /// Least and most length of n-channel devices, m.
    sink_lengths: Vec<Number>,
    /// Least and most length of p-channel devices, m.
    source_lengths: Vec<Number>,
    /// Least and most inversion coefficient.
    inversions: Vec<Number>,
    /// Input currents of families, A.
    input_currents: Vec<Number>,
    /// Units in an input leg.
    input_units: Vec<u32>,
    /// Families in a chain from the reference at most.
    depth: usize,
}

/// A lower bound and the dual prices that prove it.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Bound {
    /// Rank of the network it belongs to.
    rank: usize,
    /// No network that meets the spec within the overhead current is smaller, m2.
    area: Number,
    /// How much larger the network is at most, fraction; null where nothing is proved.
    gap: Number,
    /// Overhead current that may be used, A.
    overhead_current: Number,
    /// Dual price of serving each output, m2, in the order of the spec; none where outputs are few
    /// enough to be told apart.
    output_prices: Vec<Number>,
    /// Dual price of overhead current, m2/A.
    overhead_price: Number,
}

impl Proved {
    fn new(proof: &Proof, front: &[NetworkReport]) -> Proved {
        let declared = &proof.declared;
        Proved {
            design_space: DesignSpace {
                cells: declared.cells.clone(),
                sink_lengths: numbers(&declared.lengths[0]),
                source_lengths: numbers(&declared.lengths[1]),
                inversions: numbers(&declared.inversions),
                input_currents: numbers(&declared.currents),
                input_units: declared.units.clone(),
                depth: declared.depth,
            },
            not_covered: words::not_covered(proof),
            bounds: front
                .iter()
                .zip(&proof.bounds)
                .map(|(network, bound)| Bound {
                    rank: network.rank,
                    area: Number(bound.area),
                    gap: Number(proof.gap(network)),
                    overhead_current: Number(bound.overhead),
                    output_prices: numbers(&bound.output_prices),
                    overhead_price: Number(bound.overhead_price),
                })
                .collect(),
        }
    }
}

/// How an exploration ended.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(rename_all = "snake_case")]
enum Ending {
    /// A front was found; every network on it meets the spec at every corner.
    Found,
    /// Stopped early; the front holds what was found so far.
    Interrupted,
    /// No network meets the spec.
    NothingFits,
}

/// A limit that a network breaks.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct BrokenLimit {
    /// Name of the figure.
    figure: String,
    /// Output it belongs to.
    output: Option<String>,
    /// The limit.
    limit: Number,
    /// The value reached.
    value: Number,
    /// SI unit of both, "1" for a fraction.
    unit: String,
    /// Corner at which it is worst.
    corner: Option<String>,
}

/// Why nothing fits, and what would.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Why {
    /// What no network of any size can do, whatever its budgets; empty where every output can be
    /// served alone and the limits collide with each other.
    impossible: Vec<Demand>,
    /// Relaxations that a network was verified for at every corner, each the least found: of one
    /// limit each, or, where none suffices, one of several together.
    advice: Vec<Relaxation>,
    /// False where the run was stopped before every limit was tried.
    complete: bool,
}

/// A demand that no network of any size meets.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Demand {
    /// The output whose limits are out of reach; null for a limit of the whole network.
    output: Option<String>,
    /// The nearest possible values, each with all other limits kept.
    nearest: Vec<ChangedLimit>,
}

/// Changes that make the spec feasible.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Relaxation {
    /// The limits that give.
    changes: Vec<ChangedLimit>,
    /// Area of the network that shows it, m2.
    area: Number,
    /// Its overhead current, A.
    overhead_current: Number,
}

/// One limit with another value.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct ChangedLimit {
    /// Key of the spec.
    key: String,
    /// Which end of a range, "low" or "high"; null for other keys.
    end: Option<String>,
    /// Output it belongs to; null for budgets and the reference.
    output: Option<String>,
    /// Value in the spec.
    from: Number,
    /// Value that it would need.
    to: Number,
    /// SI unit of both, "1" for a fraction.
    unit: String,
}

/// A closed interval.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Interval {
    /// Lower end.
    least: Number,
    /// Upper end.
    most: Number,
}

/// A requirements table.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct SpecAsUnderstood {
    /// Stem of the spec file.
    name: String,
    /// One line for people.
    title: String,
    /// The process card as the spec names it.
    card: String,
    /// Supply range, V.
    supply: Interval,
    /// Temperatures at which everything is checked.
    temperature: TemperatureRange,
    /// Process corners; the first is nominal.
    corners: Vec<String>,
    /// Where the one current comes from.
    reference: ReferenceSource,
    /// The currents wanted.
    outputs: Vec<WantedOutput>,
    /// Budgets of the whole network.
    limits: Budgets,
    /// Figures that span the front.
    trade: Vec<String>,
    /// How hard the search looked.
    effort: SearchEffort,
    /// Seed of the search.
    seed: u64,
    /// Rank of the network to be priced; null is the knee of the front.
    price_of: Option<u32>,
}

/// Temperatures, K.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct TemperatureRange {
    /// Lowest.
    least: f64,
    /// Nominal.
    nominal: f64,
    /// Highest.
    most: f64,
}

/// The source of the reference current.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct ReferenceSource {
    /// What makes it.
    kind: ReferenceKind,
    /// Its current, A.
    current: f64,
    /// Which way it flows at the network's pin; null for a resistor.
    flows: Option<FlowDirection>,
    /// Pin voltage to ground over which it works, V; null for a resistor.
    range: Option<Interval>,
    /// How many equal currents are on offer; null for a resistor.
    copies: Option<u32>,
    /// Accuracy of the current itself; null for a resistor.
    tolerance: Option<f64>,
}

/// What makes the reference current.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(rename_all = "snake_case")]
enum ReferenceKind {
    /// A current made elsewhere.
    Current,
    /// A resistor from the supply.
    Resistor,
}

/// Direction of a current at a pin.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(rename_all = "snake_case")]
enum FlowDirection {
    /// Pushed into the network.
    IntoNetwork,
    /// Pulled out of the network.
    OutOfNetwork,
}

/// Which rail a leg hangs on.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(rename_all = "snake_case")]
enum Rail {
    /// n-channel legs to ground.
    Sink,
    /// p-channel legs to the supply.
    Source,
}

impl From<crate::spec::Rail> for Rail {
    fn from(rail: crate::spec::Rail) -> Rail {
        match rail {
            crate::spec::Rail::Sink => Rail::Sink,
            crate::spec::Rail::Source => Rail::Source,
        }
    }
}

/// One current wanted.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct WantedOutput {
    /// Its name.
    name: String,
    /// Sink or source.
    rail: Rail,
    /// Nominal current, A.
    current: f64,
    /// Multiple of the reference it is held to; null where it is held to a current.
    ratio: Option<f64>,
    /// How many equal ones.
    count: u32,
    /// Voltage from its own rail over which it must work, V.
    range: Interval,
    /// Permitted error; null where it does not matter.
    accuracy: Option<WantedAccuracy>,
    /// Least output resistance, Ohm; null where it does not matter.
    output_resistance: Option<f64>,
}

/// Permitted current error.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct WantedAccuracy {
    /// Limit, fraction.
    limit: f64,
    /// Standard deviations of mismatch that count.
    sigma: f64,
    /// What the error is measured against.
    of: ErrorBase,
}

/// What an error is measured against.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(rename_all = "snake_case")]
enum ErrorBase {
    /// The stated current.
    Current,
    /// The ratio to the actual reference current.
    Ratio,
}

/// Budgets; null is unlimited.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Budgets {
    /// Total area, m2.
    area: Option<f64>,
    /// Supply current of everything that is not an output, A.
    overhead_current: Option<f64>,
    /// Overhead current times the largest supply, W.
    power: Option<f64>,
}

/// Search effort.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(rename_all = "snake_case")]
enum SearchEffort {
    /// A coarse sweep.
    Quick,
    /// The default.
    Normal,
    /// A fine sweep and long polishing.
    Thorough,
}

/// One network.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Network {
    /// 1 is the least area.
    rank: usize,
    /// Figures of the whole network.
    figures: Vec<Figure>,
    /// Families, parents before children.
    families: Vec<Family>,
    /// Every drawn device.
    devices: Vec<Device>,
    /// Every output of the spec, in its order.
    outputs: Vec<NetworkOutput>,
    /// The reference pin over all corners, V to ground.
    reference_pin: Interval,
    /// Limits this network breaks.
    broken: Vec<BrokenLimit>,
}

/// One figure of merit.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Figure {
    /// Name.
    name: String,
    /// SI unit, "1" for a fraction.
    unit: String,
    /// Worst value over corners.
    value: Number,
    /// Corner where it is worst.
    corner: Option<String>,
    /// Output where it is worst.
    output: Option<String>,
}

/// One gate line: an input leg and the legs that share it.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Family {
    /// Name within the network.
    name: String,
    /// Rail.
    rail: Rail,
    /// Cell.
    cell: String,
    /// Family that feeds it; null for the reference.
    fed_by: Option<String>,
    /// Input current, A.
    input_current: Number,
    /// Units in the input leg.
    input_units: u32,
    /// Current of one unit, A.
    unit_current: Number,
    /// Area of its devices, m2.
    area: Number,
    /// Outputs it serves.
    outputs: Vec<String>,
}

/// One drawn device.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Device {
    /// Element name.
    name: String,
    /// Family.
    family: String,
    /// What it does.
    role: String,
    /// Output its leg serves.
    output: Option<String>,
    /// Model name, or "resistor".
    model: String,
    /// Drawn width of one unit, m.
    width: Number,
    /// Drawn length of one unit, m.
    length: Number,
    /// Units in parallel.
    units: u32,
    /// Resistance of one unit, Ohm (resistors only).
    ohms: Number,
    /// Current of all units at the nominal corner, A.
    current: Number,
    /// Inversion coefficient at the nominal corner.
    inversion: Number,
    /// |VGS| at the nominal corner, V.
    vgs: Number,
    /// |VDS| at the nominal corner, V.
    vds: Number,
    /// Saturation voltage at the nominal corner, V.
    vdssat: Number,
    /// Area of all units, m2.
    area: Number,
}

/// One output of the spec as a network serves it.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct NetworkOutput {
    /// Name.
    name: String,
    /// Rail.
    rail: Rail,
    /// How many equal ones.
    count: u32,
    /// Family that serves it.
    family: String,
    /// Cell of that family.
    cell: String,
    /// Units in each leg.
    units: u32,
    /// Target current, A.
    target: Number,
    /// Worst current error, fraction.
    error: Number,
    /// Its limit.
    error_limit: Number,
    /// Standard deviations of mismatch in the error.
    sigma: Number,
    /// Corner of the worst error.
    error_corner: String,
    /// Parts of the worst error.
    budget: Vec<Part>,
    /// Required range, V from its own rail.
    range: Interval,
    /// Least voltage from the rail at which it still meets its error limit, V.
    headroom: Number,
    /// Start of the range minus headroom, V.
    headroom_margin: Number,
    /// Corner of the worst headroom.
    headroom_corner: String,
    /// Output resistance at the low end of the range, worst corner, Ohm.
    output_resistance: Number,
    /// Its limit, Ohm.
    output_resistance_limit: Number,
    /// Corner of the least output resistance.
    output_resistance_corner: String,
    /// Output current against voltage.
    curve: Curve,
}

/// One part of an error budget.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Part {
    /// Name.
    name: String,
    /// Fraction of the target.
    value: Number,
    /// True where it adds in squares (mismatch), false where it adds with its sign.
    random: bool,
}

/// Output current over the pin's voltage from its own rail.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Curve {
    /// Voltages, V, rising.
    volts: Vec<Number>,
    /// Current at the nominal corner, A.
    nominal: Vec<Number>,
    /// Least current over all corners, A.
    least: Vec<Number>,
    /// Largest current over all corners, A.
    most: Vec<Number>,
}

/// Prices of the limits. Changes count from the network's structure solved for the limits as they
/// are; what takes another network counts from the network itself.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct PriceList {
    /// Rank of the network priced.
    rank: usize,
    /// Why this network.
    chosen: PricedBecause,
    /// Scale of the accuracy limits at which it stands; 1 unless accuracy is traded.
    held: f64,
    /// Area with the limits as they are, off the manufacturing grid, m2.
    area: Number,
    /// Overhead current of the same, A.
    overhead_current: Number,
    /// Changes of area up to this cannot be told from zero, m2.
    noise: Number,
    /// Every limit, in the order of the spec.
    limits: Vec<PricedLimit>,
    /// The next networks of the front, against the one priced.
    exchanges: Vec<Neighbour>,
}

/// Why a network is the one priced.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(rename_all = "snake_case")]
enum PricedBecause {
    /// It is the knee of the front.
    Knee,
    /// Its rank was asked for.
    Asked,
    /// The rank asked for is not on the front; this is the knee.
    AskedBeyondTheFront,
}

/// A limit with its price.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct PricedLimit {
    /// Key of the spec.
    key: &'static str,
    /// Which end of a range, "low" or "high"; null for other keys.
    end: Option<&'static str>,
    /// Output it belongs to; null for budgets and the reference.
    output: Option<String>,
    /// SI unit of its values, "1" for a fraction.
    unit: &'static str,
    /// The limit.
    value: Number,
    /// How far it could tighten with the network as it stands; null is without bound.
    free_to: Number,
    /// Whether the step tighter costs nothing that could be told from zero.
    slack: bool,
    /// A small step tighter.
    tighter: PricedStep,
    /// The same step looser, for the limits whose step tighter is dearest.
    looser: Option<PricedStep>,
    /// The price as a sentence.
    sentence: String,
}

/// One step of a limit.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct PricedStep {
    /// The limit after the step.
    to: Number,
    /// What the step comes to: free (the network as it stands keeps it), resized (new sizes in the
    /// same structure), other_network (of the front), not_found, or not_allowed (no spec can ask
    /// for it).
    verdict: &'static str,
    /// Change of area, m2; null where there is none to tell.
    area: Number,
    /// Change of overhead current, A; null where there is none to tell.
    overhead_current: Number,
    /// Rank of the other network.
    network: Option<usize>,
    /// Whether the network drawn for it is larger than the spec's limit on area.
    over_area: bool,
}

/// A neighbour on the front.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Neighbour {
    /// Its rank.
    rank: usize,
    /// Its area less that of the network priced, m2.
    area: Number,
    /// Its overhead current less that of the network priced, A.
    overhead_current: Number,
}

/// Counters of the work done; independent of time and threads.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct WorkDone {
    /// Family shapes in the sweep.
    shapes: u64,
    /// Of these, excluded by closed forms.
    screened_out: u64,
    /// Of these, solved at every corner.
    solved: u64,
    /// DC solutions made.
    dc_solutions: u64,
    /// Newton failures by reason.
    not_converged: Vec<Failure>,
    /// Column-generation rounds.
    rounds: u64,
    /// Columns priced in.
    columns: u64,
    /// MILPs solved to proven optimality over their columns.
    milps_proved: u64,
    /// MILPs stopped at their limit.
    milps_stopped: u64,
    /// Evaluations spent polishing.
    polish_evaluations: u64,
    /// Whole networks verified as one circuit.
    networks_verified: u64,
}

/// Candidates that did not converge, by reason.
#[derive(Debug, Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Failure {
    /// Reason.
    reason: String,
    /// How many.
    count: u64,
}

impl Document {
    fn new(outcome: &Outcome) -> Document {
        let work = &outcome.work;
        Document {
            format: NAME,
            version: VERSION,
            status: match outcome.status {
                Status::Found => Ending::Found,
                Status::Interrupted => Ending::Interrupted,
                Status::NothingFits { .. } => Ending::NothingFits,
            },
            sentence: words::status(outcome),
            broken: words::broken(outcome)
                .iter()
                .map(BrokenLimit::from)
                .collect(),
            why: words::why(outcome).map(Why::from),
            card_title: outcome.card_title.clone(),
            spec: SpecAsUnderstood::from(&outcome.spec),
            front: outcome.front.iter().map(Network::from).collect(),
            nearest: outcome.nearest.as_deref().map(Network::from),
            prices: outcome.prices.as_ref().map(PriceList::from),
            proof: outcome
                .proof
                .as_ref()
                .map(|proof| Proved::new(proof, &outcome.front)),
            work: WorkDone {
                shapes: work.shapes,
                screened_out: work.screened_out,
                solved: work.solved,
                dc_solutions: work.dc_solutions,
                not_converged: work
                    .not_converged
                    .iter()
                    .map(|(reason, count)| Failure {
                        reason: reason.clone(),
                        count: *count,
                    })
                    .collect(),
                rounds: work.rounds,
                columns: work.columns,
                milps_proved: work.milps_proved,
                milps_stopped: work.milps_stopped,
                polish_evaluations: work.polish_evaluations,
                networks_verified: work.networks_verified,
            },
            cautions: words::CAUTIONS.to_vec(),
        }
    }
}

impl From<&Prices> for PriceList {
    fn from(prices: &Prices) -> PriceList {
        PriceList {
            rank: prices.rank,
            chosen: match prices.chosen {
                Chosen::Knee => PricedBecause::Knee,
                Chosen::Asked => PricedBecause::Asked,
                Chosen::Beyond { .. } => PricedBecause::AskedBeyondTheFront,
            },
            held: prices.held,
            area: Number(prices.area),
            overhead_current: Number(prices.overhead),
            noise: Number(prices.noise),
            limits: prices
                .limits
                .iter()
                .map(|price| PricedLimit::new(prices, price))
                .collect(),
            exchanges: prices
                .exchanges
                .iter()
                .map(|e| Neighbour {
                    rank: e.rank,
                    area: Number(e.area),
                    overhead_current: Number(e.overhead),
                })
                .collect(),
        }
    }
}

impl PricedLimit {
    fn new(prices: &Prices, price: &LimitPrice) -> PricedLimit {
        PricedLimit {
            key: price.limit.key(),
            end: price.limit.end(),
            output: price.output.clone(),
            unit: price.limit.unit(),
            value: Number(price.value),
            free_to: Number(price.free),
            slack: price.slack(prices.noise),
            tighter: PricedStep::from(&price.tighter),
            looser: price.looser.as_ref().map(PricedStep::from),
            sentence: words::price_sentence(prices, price),
        }
    }
}

impl From<&Step> for PricedStep {
    fn from(step: &Step) -> PricedStep {
        let (area, overhead, network, over) = match step.verdict {
            Verdict::Free => (0.0, 0.0, None, false),
            Verdict::Resized {
                area,
                overhead,
                over_area,
            } => (area, overhead, None, over_area),
            Verdict::Other {
                rank,
                area,
                overhead,
            } => (area, overhead, Some(rank), false),
            Verdict::NotFound | Verdict::NotAllowed => (f64::NAN, f64::NAN, None, false),
        };
        PricedStep {
            to: Number(step.to),
            verdict: step.verdict.name(),
            area: Number(area),
            overhead_current: Number(overhead),
            network,
            over_area: over,
        }
    }
}

impl From<&Broken> for BrokenLimit {
    fn from(broken: &Broken) -> BrokenLimit {
        BrokenLimit {
            figure: broken.figure.clone(),
            output: broken.output.clone(),
            limit: Number(broken.limit),
            value: Number(broken.value),
            unit: broken.unit.clone(),
            corner: broken.corner.clone(),
        }
    }
}

impl From<&Explanation> for Why {
    fn from(why: &Explanation) -> Why {
        let changes = |list: &[Change]| list.iter().map(ChangedLimit::from).collect();
        let figure =
            |advice: &Advice, name: &str| optional(advice.network.figure(name).map(|f| f.value));
        Why {
            impossible: why
                .impossible
                .iter()
                .map(|demand| Demand {
                    output: demand.output.clone(),
                    nearest: changes(&demand.nearest),
                })
                .collect(),
            advice: why
                .advice
                .iter()
                .map(|advice| Relaxation {
                    changes: changes(&advice.changes),
                    area: figure(advice, "area"),
                    overhead_current: figure(advice, "overhead_current"),
                })
                .collect(),
            complete: why.complete,
        }
    }
}

impl From<&Change> for ChangedLimit {
    fn from(change: &Change) -> ChangedLimit {
        ChangedLimit {
            key: change.key.clone(),
            end: change.end.clone(),
            output: change.output.clone(),
            from: Number(change.from),
            to: Number(change.to),
            unit: change.unit.clone(),
        }
    }
}

impl From<units::Range<units::Volt>> for Interval {
    fn from(range: units::Range<units::Volt>) -> Interval {
        Interval {
            least: Number(range.least.0),
            most: Number(range.most.0),
        }
    }
}

impl From<[f64; 2]> for Interval {
    fn from([least, most]: [f64; 2]) -> Interval {
        Interval {
            least: Number(least),
            most: Number(most),
        }
    }
}

impl From<&Spec> for SpecAsUnderstood {
    fn from(spec: &Spec) -> SpecAsUnderstood {
        SpecAsUnderstood {
            name: spec.name.clone(),
            title: spec.title.clone(),
            card: spec.card.clone(),
            supply: spec.supply.into(),
            temperature: TemperatureRange {
                least: spec.temperature.least.0,
                nominal: spec.temperature.nominal.0,
                most: spec.temperature.most.0,
            },
            corners: spec.corners.clone(),
            reference: spec.reference.into(),
            outputs: spec
                .outputs
                .iter()
                .map(|output| WantedOutput::new(spec, output))
                .collect(),
            limits: Budgets {
                area: spec.limits.area.map(|limit| limit.0),
                overhead_current: spec.limits.overhead_current.map(|limit| limit.0),
                power: spec.limits.power.map(|limit| limit.0),
            },
            trade: spec.trade.clone(),
            effort: match spec.search.effort {
                Effort::Quick => SearchEffort::Quick,
                Effort::Normal => SearchEffort::Normal,
                Effort::Thorough => SearchEffort::Thorough,
            },
            seed: spec.search.seed,
            price_of: spec.search.price_of,
        }
    }
}

impl From<Reference> for ReferenceSource {
    fn from(reference: Reference) -> ReferenceSource {
        match reference {
            Reference::Current {
                current,
                flows,
                range,
                copies,
                tolerance,
            } => ReferenceSource {
                kind: ReferenceKind::Current,
                current: current.0,
                flows: Some(match flows {
                    Flow::IntoNetwork => FlowDirection::IntoNetwork,
                    Flow::OutOfNetwork => FlowDirection::OutOfNetwork,
                }),
                range: Some(range.into()),
                copies: Some(copies),
                tolerance: Some(tolerance),
            },
            Reference::Resistor { current } => ReferenceSource {
                kind: ReferenceKind::Resistor,
                current: current.0,
                flows: None,
                range: None,
                copies: None,
                tolerance: None,
            },
        }
    }
}

impl WantedOutput {
    fn new(spec: &Spec, output: &Output) -> WantedOutput {
        WantedOutput {
            name: output.name.clone(),
            rail: output.rail.into(),
            current: spec.target(output).0,
            ratio: match output.target {
                Target::Current(_) => None,
                Target::Ratio(ratio) => Some(ratio),
            },
            count: output.count,
            range: output.range.into(),
            accuracy: output.accuracy.map(|accuracy| WantedAccuracy {
                limit: accuracy.limit,
                sigma: accuracy.sigma,
                of: match accuracy.of {
                    AccuracyOf::Current => ErrorBase::Current,
                    AccuracyOf::Ratio => ErrorBase::Ratio,
                },
            }),
            output_resistance: output.output_resistance.map(|limit| limit.0),
        }
    }
}

impl From<&NetworkReport> for Network {
    fn from(network: &NetworkReport) -> Network {
        Network {
            rank: network.rank,
            figures: network.figures.iter().map(Figure::from).collect(),
            families: network.families.iter().map(Family::from).collect(),
            devices: network.devices.iter().map(Device::from).collect(),
            outputs: network.outputs.iter().map(NetworkOutput::from).collect(),
            reference_pin: network.reference_pin.into(),
            broken: network.broken.iter().map(BrokenLimit::from).collect(),
        }
    }
}

impl From<&FigureValue> for Figure {
    fn from(figure: &FigureValue) -> Figure {
        Figure {
            name: figure.name.clone(),
            unit: figure.unit.clone(),
            value: Number(figure.value),
            corner: figure.corner.clone(),
            output: figure.output.clone(),
        }
    }
}

impl From<&FamilyReport> for Family {
    fn from(family: &FamilyReport) -> Family {
        Family {
            name: family.name.clone(),
            rail: family.rail.into(),
            cell: family.cell.clone(),
            fed_by: family.fed_by.clone(),
            input_current: Number(family.input_current),
            input_units: family.input_units,
            unit_current: Number(family.unit_current),
            area: Number(family.area),
            outputs: family.outputs.clone(),
        }
    }
}

impl From<&DeviceRow> for Device {
    fn from(device: &DeviceRow) -> Device {
        Device {
            name: device.name.clone(),
            family: device.family.clone(),
            role: device.role.clone(),
            output: device.output.clone(),
            model: device.model.clone(),
            width: Number(device.width),
            length: Number(device.length),
            units: device.units,
            ohms: optional(device.ohms),
            current: Number(device.current),
            inversion: optional(device.inversion),
            vgs: optional(device.vgs),
            vds: optional(device.vds),
            vdssat: optional(device.vdssat),
            area: Number(device.area),
        }
    }
}

impl From<&OutputReport> for NetworkOutput {
    fn from(output: &OutputReport) -> NetworkOutput {
        let part = |part: &crate::explore::BudgetPart| Part {
            name: part.name.clone(),
            value: Number(part.value),
            random: part.random,
        };
        NetworkOutput {
            name: output.name.clone(),
            rail: output.rail.into(),
            count: output.count,
            family: output.family.clone(),
            cell: output.cell.clone(),
            units: output.units,
            target: Number(output.target),
            error: Number(output.error),
            error_limit: optional(output.error_limit),
            sigma: Number(output.sigma),
            error_corner: output.error_corner.clone(),
            budget: output.budget.iter().map(part).collect(),
            range: output.range.into(),
            headroom: Number(output.headroom),
            headroom_margin: Number(output.headroom_margin),
            headroom_corner: output.headroom_corner.clone(),
            output_resistance: Number(output.output_resistance),
            output_resistance_limit: optional(output.output_resistance_limit),
            output_resistance_corner: output.output_resistance_corner.clone(),
            curve: Curve {
                volts: numbers(&output.curve.volts),
                nominal: numbers(&output.curve.nominal),
                least: numbers(&output.curve.least),
                most: numbers(&output.curve.most),
            },
        }
    }
}
