//! A process card as it stands in its YAML file. The tables below are what a card may say: the
//! reader, the JSON Schema and the messages all come from them.

use super::quantities::*;
use crate::yaml::{
    At, Either, Entry, List, Measure, Name, Node, Quantity, Read, Reader, Span, Text, Value,
    choice, described, record,
};
use schemars::{JsonSchema, Schema, SchemaGenerator, json_schema};
use std::borrow::Cow;

/// A value and where it comes from; "from memory" and "invented for the demo" are sources too.
#[derive(Debug, Clone, PartialEq)]
pub struct Sourced<T> {
    /// The value, if it could be read.
    pub value: Option<At<T>>,
}

impl<T> Sourced<T> {
    const ENTRIES: &'static [Entry] = &[
        Entry {
            key: "value",
            required: true,
        },
        Entry {
            key: "source",
            required: true,
        },
    ];
}

impl<T: Read> Read for Sourced<T> {
    fn read(node: &Node, reader: &mut Reader<'_>) -> Option<Self> {
        if !matches!(node.value, Value::Map(_)) {
            reader.wrong_type(node, "a value with its source, {value: ..., source: ...}");
            return None;
        }
        let slots = reader.slots(node, "a value", Self::ENTRIES)?;
        let value = reader.field(slots.values[0]);
        reader.field::<Text>(slots.values[1]);
        Some(Sourced { value })
    }
}

impl<T: Read> JsonSchema for Sourced<T> {
    fn inline_schema() -> bool {
        true
    }

    fn schema_name() -> Cow<'static, str> {
        format!("sourced {}", T::schema_name()).into()
    }

    fn json_schema(generator: &mut SchemaGenerator) -> Schema {
        let value = generator.subschema_for::<T>();
        let source = described(
            generator.subschema_for::<Text>(),
            "Where the value comes from; \"from memory\" is a source too.",
        );
        json_schema!({
            "type": "object",
            "properties": { "value": value, "source": source },
            "required": ["value", "source"],
            "additionalProperties": false,
        })
    }
}

/// Most lengths of a table.
pub const MOST_LENGTHS: usize = 64;

/// One value of a quantity with its source.
pub type One<M> = Sourced<Quantity<M>>;

/// A parameter over drawn length: one value, or a list with an entry for each of `lengths`.
pub type Over<M> = Sourced<Either<Quantity<M>, List<Quantity<M>, MOST_LENGTHS>>>;

/// Value of an [`One`], if it was read.
pub fn one<M: Measure>(field: &Option<At<One<M>>>) -> Option<M::Value> {
    Some(field.as_ref()?.value.value.as_ref()?.value.0)
}

/// Which current law a device has.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Model {
    /// Charge-based, all regions.
    Charge,
    /// Square law.
    Square,
}

choice! {
    Model = "model" {
        "charge" => Model::Charge,
        "square" => Model::Square,
    }
}

/// Whether mismatch coefficients describe a pair's difference or one device.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Convention {
    /// The standard deviation of the difference of two devices, as in Pelgrom's paper.
    Pair,
    /// The standard deviation of one device: smaller by the square root of two.
    Device,
}

choice! {
    Convention = "mismatch convention" {
        "pair" => Convention::Pair,
        "device" => Convention::Device,
    }
}

/// Parameters whose table depends on the model: kept as a node until the model is known.
#[derive(Debug, Clone, PartialEq)]
pub struct Parameters(
    /// The node.
    pub Node,
);

impl Read for Parameters {
    fn read(node: &Node, _: &mut Reader<'_>) -> Option<Self> {
        Some(Parameters(node.clone()))
    }
}

impl JsonSchema for Parameters {
    fn inline_schema() -> bool {
        true
    }

    fn schema_name() -> Cow<'static, str> {
        "parameters".into()
    }

    fn json_schema(generator: &mut SchemaGenerator) -> Schema {
        let charge = generator.subschema_for::<ChargeFile>();
        let square = generator.subschema_for::<SquareFile>();
        json_schema!({ "anyOf": [charge, square] })
    }
}

record! {
    /// A process card: what the silicon does, with the source of every value.
    CardFile = "a process card" {
        /// One line that says which process this is.
        required title: Text,
        /// Temperature at which all parameters hold.
        required temperature: One<Temperature>,
        /// Largest supply the devices stand.
        required supply_max: One<Supply>,
        /// n-channel device.
        required nmos: MosfetFile,
        /// p-channel device: every value as for an n-channel device, thresholds positive.
        required pmos: MosfetFile,
        /// Resistor, where the process has one.
        optional resistor: ResistorFile,
        /// Process corners; the first is nominal and shifts nothing.
        required corners: List<CornerFile, 64>,
    }
}

record! {
    /// A transistor type.
    MosfetFile = "a transistor" {
        /// Model name in a netlist deck.
        required deck_model: Name,
        /// Permitted drawn length.
        required length: Sourced<Span<Size>>,
        /// Permitted drawn width of one unit.
        required width: Sourced<Span<Size>>,
        /// Manufacturing grid of drawn sizes.
        required grid: One<Grid>,
        /// Largest drain-source voltage.
        required vds_max: One<Limit>,
        /// Largest gate-source voltage.
        required vgs_max: One<Limit>,
        /// Current law: charge (all regions, Enz & Vittoz 2006) or square (Shichman & Hodges 1968).
        required model: Model,
        /// Parameters of the current law.
        required parameters: Parameters,
        /// Pelgrom coefficients.
        required mismatch: MismatchFile,
        /// Area of a unit.
        required area: AreaFile,
        /// Noise and gate capacitance.
        required noise: NoiseFile,
    }
}

record! {
    /// Parameters of the charge-based law. What is left out is switched off.
    ChargeFile = "the charge-law parameters" {
        /// Drawn lengths of the tables, rising.
        optional lengths: List<Quantity<Length>, MOST_LENGTHS>,
        /// Drawn minus effective width; 0 if left out.
        optional width_loss: One<Loss>,
        /// Drawn minus effective length; 0 if left out.
        optional length_loss: One<Loss>,
        /// Threshold voltage at zero source-bulk voltage.
        required threshold: Over<Threshold>,
        /// Fall of the threshold per kelvin; 0 if left out.
        optional threshold_tc: Over<ThresholdTc>,
        /// Body factor that sets the slope factor.
        required gamma: Over<Gamma>,
        /// Body factor that sets the rise of the threshold with source-bulk voltage; gamma if left out.
        optional body_gamma: Over<Gamma>,
        /// Twice the Fermi potential.
        required phi: Over<Phi>,
        /// Transconductance parameter mu Cox.
        required kp: Over<Kp>,
        /// Exponent of kp over absolute temperature, negative; 0 if left out.
        optional kp_exponent: Over<KpExponent>,
        /// Vertical-field mobility reduction; 0 if left out.
        optional theta: Over<Theta>,
        /// Rise of mobility with charge at low charge; 0 if left out.
        optional mobility_rise: Over<MobilityRise>,
        /// Saturation velocity, together with mobility; no velocity saturation if left out.
        optional saturation_velocity: Over<SaturationVelocity>,
        /// Low-field mobility that goes with the saturation velocity.
        optional mobility: Over<Mobility>,
        /// Strength of logarithmic channel-length modulation; 0 if left out.
        optional clm_strength: Over<ClmStrength>,
        /// Voltage of logarithmic channel-length modulation, together with its strength.
        optional clm_voltage: Over<ClmVoltage>,
        /// Drain-induced barrier lowering; 0 if left out.
        optional dibl: Over<Dibl>,
        /// Drain-source voltage at which barrier lowering saturates, together with dibl.
        optional dibl_voltage: Over<DiblVoltage>,
        /// Strength of impact ionisation; 0 if left out.
        optional impact_strength: Over<ImpactStrength>,
        /// Voltage of impact ionisation, together with its strength.
        optional impact_voltage: Over<ImpactVoltage>,
    }
}

record! {
    /// Parameters of the square law. What is left out is switched off.
    SquareFile = "the square-law parameters" {
        /// Drawn minus effective width; 0 if left out.
        optional width_loss: One<Loss>,
        /// Drawn minus effective length; 0 if left out.
        optional length_loss: One<Loss>,
        /// Threshold voltage at zero source-bulk voltage.
        required threshold: One<Threshold>,
        /// Fall of the threshold per kelvin; 0 if left out.
        optional threshold_tc: One<ThresholdTc>,
        /// Body factor, together with phi; 0 if left out.
        optional gamma: One<Gamma>,
        /// Surface potential 2 phi_F, together with gamma.
        optional phi: One<Phi>,
        /// Transconductance parameter mu Cox.
        required kp: One<Kp>,
        /// Exponent of kp over absolute temperature, negative; 0 if left out.
        optional kp_exponent: One<KpExponent>,
        /// Early voltage per drawn length; no output conductance if left out.
        optional early_per_length: One<EarlyPerLength>,
    }
}

record! {
    /// Pelgrom coefficients (JSSC 24, 1989).
    MismatchFile = "the mismatch" {
        /// Whether the coefficients are those of a pair's difference or of one device.
        required convention: Convention,
        /// A_VT.
        required threshold: Quantity<ThresholdMismatch>,
        /// A_beta.
        required gain: Quantity<GainMismatch>,
        /// Where both come from.
        required source: Text,
    }
}

record! {
    /// Area of a unit: (W + border_width) times (L + border_length).
    AreaFile = "the area rule" {
        /// Added to the drawn width.
        required border_width: Quantity<Border>,
        /// Added to the drawn length.
        required border_length: Quantity<Border>,
        /// Whether neighbouring units share a diffusion.
        required shared: bool,
        /// Where the rule comes from.
        required source: Text,
    }
}

record! {
    /// Noise and gate capacitance.
    NoiseFile = "the noise" {
        /// Gate capacitance per area.
        required oxide_capacitance: Quantity<OxideCapacitance>,
        /// Flicker coefficient KF in KF / (Cox W L f^AF).
        required flicker: Quantity<Flicker>,
        /// Flicker exponent AF.
        required flicker_exponent: Quantity<FlickerExponent>,
        /// Where these come from.
        required source: Text,
    }
}

record! {
    /// A resistor type.
    ResistorFile = "a resistor" {
        /// Sheet resistance at the card's temperature.
        required sheet: One<Sheet>,
        /// First temperature coefficient.
        required tc1: One<Tc1>,
        /// Second temperature coefficient; 0 if left out.
        optional tc2: One<Tc2>,
        /// Whether the mismatch is that of a pair's difference or of one resistor.
        required convention: Convention,
        /// Mismatch coefficient A_R.
        required mismatch: One<ResistorMismatch>,
        /// Least drawn width.
        required width: One<Length>,
        /// Least length in squares.
        required squares_min: One<Squares>,
        /// Added to the drawn width.
        required border_width: One<Border>,
        /// Added to the drawn length.
        required border_length: One<Border>,
    }
}

record! {
    /// A process corner. What is left out does not shift.
    CornerFile = "a corner" {
        /// Name, such as TT, SS, FF, SF, FS: the first letter is the n-channel device, the second
        /// the p-channel device.
        required name: Name,
        /// Shift of the n-channel threshold.
        optional nmos_threshold: Quantity<ThresholdShift>,
        /// Deviation of the n-channel gain.
        optional nmos_gain: Quantity<GainShift>,
        /// Shift of the p-channel threshold.
        optional pmos_threshold: Quantity<ThresholdShift>,
        /// Deviation of the p-channel gain.
        optional pmos_gain: Quantity<GainShift>,
        /// Deviation of resistors.
        optional resistor: Quantity<ResistorShift>,
        /// Where the shifts come from.
        required source: Text,
    }
}
