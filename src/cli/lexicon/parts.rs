//! Parts of an error budget.

use super::{Entry, Kind};

/// Names of the parts, in reporting order; a test compares them with what explorations report.
pub const PARTS: [&str; 9] = [
    "threshold_mismatch",
    "gain_mismatch",
    "resistor_mismatch",
    "output_conductance",
    "ratio_rounding",
    "process",
    "temperature",
    "supply",
    "reference",
];

pub(super) fn entries() -> Vec<Entry> {
    PARTS.iter().map(|&name| entry(name)).collect()
}

const PELGROM: &str = "Pelgrom, Duinmaijer, Welbers, IEEE JSSC 24, 1989";

fn entry(name: &'static str) -> Entry {
    let part = |summary: &str| Entry::new(Kind::ErrorParts, name, summary);
    let random = "It adds in squares with the other mismatch parts, each at k standard deviations \
                  (k from the spec, 3 unless said).";
    let signed = "It adds with its sign to the other systematic parts.";
    match name {
        "threshold_mismatch" => part("random differences of the threshold voltages")
            .says(
                "Their standard deviation is A_VT / sqrt(W L); seen in the current it is larger \
                   the weaker the inversion, as gm/ID times the voltage. Area helps, and so does \
                   strong inversion, which costs headroom.",
            )
            .says(random)
            .from(PELGROM),
        "gain_mismatch" => part("random differences of the gain factors")
            .says(
                "Their standard deviation is A_beta / sqrt(W L), at every inversion. Only area \
                   helps.",
            )
            .says(random)
            .from(PELGROM),
        "resistor_mismatch" => part("random differences of the resistors")
            .says("Their standard deviation is A_R / sqrt(W L), where a cell has resistors.")
            .says(random)
            .from(PELGROM),
        "output_conductance" => part("the current follows the voltage at the output")
            .says(
                "What the output's finite resistance adds between the input leg's drain voltage \
                   and the end of the output's range. Length or a cascode helps.",
            )
            .says(signed),
        "ratio_rounding" => part("the ratio of whole units is not the ratio wanted")
            .says(
                "Legs are whole numbers of equal units; more units, or another unit current, \
                   bring the ratio closer.",
            )
            .says(signed),
        "process" => {
            part("what changes from the nominal corner to the worst process corner").says(signed)
        }
        "temperature" => {
            part("what changes from the nominal temperature to the worst one").says(signed)
        }
        "supply" => part("what changes from the nominal supply to the worst one").says(signed),
        _ => part("the error of the reference current itself")
            .says(
                "It counts against outputs held to their current, not against those held to \
                   their ratio. Nothing in the network helps; see the key reference.tolerance.",
            )
            .says(signed),
    }
}
