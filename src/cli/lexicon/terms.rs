//! Words of the trade, and the few of our own, used the same way everywhere.

use super::{Entry, Kind};

const TEXTBOOK: &str =
    "Gray, Hurst, Lewis, Meyer, Analysis and Design of Analog Integrated Circuits, ch. 4";
const INVERSION: &str = "Enz, Vittoz, Charge-based MOS Transistor Modeling, Wiley, 2006";

/// Word, one sentence, the rest, and where it is published (ours have no source).
const TERMS: &[(&str, &str, &str, Option<&str>)] = &[
    (
        "accuracy_limit",
        "the largest current error an output may show",
        "The systematic part over every corner and the whole range of the pin, plus k standard \
         deviations of mismatch. Held to the stated current, or to the ratio to the actual \
         reference.",
        None,
    ),
    (
        "card",
        "a YAML file that describes a process",
        "Devices, spread, mismatch and area rules, each value with its source. `biasloom list \
         cards` shows those that come with the program; `biasloom list card_keys` what one holds.",
        None,
    ),
    (
        "cascode",
        "a second transistor on top of the mirror device that keeps its drain voltage still",
        "It multiplies the output resistance by its own intrinsic gain and needs another \
         saturation voltage of headroom.",
        Some(TEXTBOOK),
    ),
    (
        "cell",
        "one kind of mirror circuit",
        "`biasloom list cells` shows them all.",
        None,
    ),
    (
        "corner",
        "a combination of process, supply and temperature at which everything must hold",
        "Process corners come from the card, supply and temperature ends from the spec. Every \
         network of a front was solved at all of their combinations.",
        None,
    ),
    (
        "deck",
        "a netlist with its sources, ready for detailed simulation",
        "Netlist element cards; the device models are left to the foundry's own files.",
        None,
    ),
    (
        "diode_connected",
        "a transistor whose gate is tied to its drain, so that its current sets its gate voltage",
        "The input leg of a mirror.",
        Some(TEXTBOOK),
    ),
    (
        "family",
        "one gate line: an input leg and all outputs that share it",
        "All of its legs are whole numbers of one unit transistor, built as one cell.",
        None,
    ),
    (
        "feeder",
        "the leg of one family that supplies the input of another",
        "It turns a current around from the sink side to the source side or back, and passes its \
         own error on.",
        None,
    ),
    (
        "front",
        "the networks that no other network beats in every figure of the trade",
        "All of them meet the spec; which one to take is the designer's decision.",
        Some("Pareto, Manuel d'economie politique, 1909"),
    ),
    (
        "gap",
        "how much larger than the smallest possible network a network is at most",
        "Proved for every network of the declared design space that meets the spec within the same \
         overhead current: floors under the product of a leg's area and its mismatch variance, a \
         relaxed network that every real one maps onto at no more cost, and dual prices for it. Not \
         covered: networks that meet the spec only because systematic errors of lines beyond the \
         stated size cancel; effects that a whole circuit shows and the sum along a path does not, \
         beyond the stated share; other cells and input currents; and the floors themselves are the \
         least that descents found, tested on random sizes. `biasloom audit` checks the bounds of \
         a front.json again.",
        Some("Lagrangian relaxation: Geoffrion, Mathematical Programming Study 2, 1974"),
    ),
    (
        "gate_line",
        "the wire that carries a gate voltage to all legs of a family",
        "What the input leg makes of its current, every leg on the line turns back into a current.",
        None,
    ),
    (
        "headroom",
        "the least voltage between an output and its rail at which it still does its work",
        "Here: at which it still meets its own error limit at every corner; where no accuracy is \
         asked, at which its current is within 1 % of the current in the middle of its range. \
         Weak inversion lowers it, cascodes raise it. The figure headroom_margin says how far the \
         low end of the range lies above it.",
        None,
    ),
    (
        "inversion_coefficient",
        "how strongly a transistor is inverted: its current over its specific current",
        "Below 0.1 weak inversion: least headroom, most gain per current, worst current matching. \
         Above 10 strong inversion: the other way round. In between, moderate inversion.",
        Some(INVERSION),
    ),
    (
        "knee",
        "the network of a front where giving a little of one figure stops buying much of the other",
        "Every traded figure is put on a logarithmic scale and stretched over the front to the \
         range from 0 to 1; the knee is the network farthest from the chord between the ends of \
         the front. It is the network whose limits are priced, unless a rank is asked for.",
        Some(
            "Das, On characterizing the knee of the Pareto curve, Structural Optimization 18, 1999",
        ),
    ),
    (
        "leg",
        "one branch of a family: equal units in parallel on its gate line",
        "Input legs take a current, output legs deliver one.",
        None,
    ),
    (
        "mirror",
        "a circuit that copies a current from its input leg to its output legs",
        "The ratio is that of the numbers of units.",
        Some(TEXTBOOK),
    ),
    (
        "mismatch",
        "random differences between transistors drawn alike",
        "Threshold and gain differ with standard deviations A_VT / sqrt(W L) and A_beta / \
         sqrt(W L): the Pelgrom coefficients of the card over the root of the area.",
        Some("Pelgrom, Duinmaijer, Welbers, IEEE JSSC 24, 1989"),
    ),
    (
        "network",
        "the families and feeders that together serve a spec",
        "A tree: the reference feeds the root, feeders the rest.",
        None,
    ),
    (
        "output_resistance",
        "how stiff an output is: the change of its voltage over the change of its current",
        "Taken at the low end of the range, at the worst corner, from the solved network.",
        Some(TEXTBOOK),
    ),
    (
        "overhead",
        "supply current of everything that is not an output",
        "Input legs, bias legs and feeders; a feeder and the input leg it feeds carry the same \
         current, which counts once.",
        None,
    ),
    (
        "price",
        "what a small step of a limit costs in area and overhead current",
        "The structure of one network is held and its sizes are solved for again, once for the \
         limits as they are and once for each limit stepped: 1 % of an accuracy, 10 mV of a range, \
         5 % of an output resistance, 1 % of the area, 2 % of overhead current or power. The \
         price is the difference. Every answer is solved whole at every corner, off the \
         manufacturing grid for the difference and drawn on it to show that it can be built. \
         Where the structure cannot follow, the price is another network of the front.",
        None,
    ),
    (
        "saturation_voltage",
        "the drain-source voltage from which a transistor's current hardly changes any more",
        "About four times the thermal voltage in weak inversion, and near the overdrive in strong \
         inversion.",
        Some(INVERSION),
    ),
    (
        "sink",
        "an output that takes current from its load to ground",
        "Its pin voltage counts from ground; its devices are n-channel.",
        None,
    ),
    (
        "slack",
        "said of a limit that could be tighter at no cost",
        "The network as it stands keeps it with room to spare; the report says how far it could \
         tighten, one limit at a time.",
        None,
    ),
    (
        "source",
        "an output that delivers current from the supply to its load",
        "Its pin voltage counts downwards from the supply; its devices are p-channel.",
        None,
    ),
    (
        "source_degeneration",
        "a resistor between a transistor's source and its rail",
        "It trades headroom for matching and output resistance: the threshold's mismatch counts \
         less, the resistor's own takes part.",
        Some(TEXTBOOK),
    ),
    (
        "trade",
        "the figures that span the front",
        "Area and overhead current unless the spec says otherwise.",
        None,
    ),
    (
        "unit_transistor",
        "the one transistor that all legs of a family repeat",
        "Ratios of whole units survive process, temperature and layout; ratios of drawn widths \
         do not (common practice, no source).",
        None,
    ),
    (
        "wide_swing",
        "said of a cascode whose upper gate stands just high enough",
        "The output then works down to two saturation voltages. Two cells do it: wide_swing with \
         a bias leg, self_biased with a resistor.",
        Some("Sooch, US patent 4,550,284, 1985"),
    ),
];

pub(super) fn entries() -> Vec<Entry> {
    TERMS
        .iter()
        .map(|&(word, summary, rest, source)| {
            let entry = Entry::new(Kind::Terms, word, summary).says(rest);
            match source {
                Some(source) => entry.from(source),
                None => entry,
            }
        })
        .collect()
}
