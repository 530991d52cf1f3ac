//! The faults of a spec that show only beside its process card.

use super::check::Located;
use super::{Reference, Spec};
use crate::diag::{Diagnostics, closest, either, quote};
use crate::units::Volt;
use crate::yaml::Reader;

/// What a spec has to know of its card.
#[derive(Debug, Clone, PartialEq)]
pub struct CardFacts {
    /// Name of the card, for messages.
    pub name: String,
    /// Names of its corners; the first is nominal.
    pub corners: Vec<String>,
    /// Largest supply the devices stand.
    pub supply_max: Volt,
    /// Whether the process has a resistor.
    pub has_resistor: bool,
}

/// Checks a spec against its card, and completes its corners: all of the card if the file names
/// none, and the nominal one always first.
///
/// # Errors
/// Every such fault, in the file's order, each with its place.
pub fn check_against_card(located: Located, card: &CardFacts) -> Result<Spec, Diagnostics> {
    let Located {
        mut spec,
        source,
        ids,
        ..
    } = located;
    let mut reader = Reader::new(&source);
    let known = || card.corners.iter().map(String::as_str);
    let named = quote(&card.name);
    for (corner, id) in spec.corners.iter().zip(&ids.corners) {
        if !card.corners.contains(corner) {
            let hint = match closest(corner, known()) {
                Some(meant) => format!("did you mean \"{meant}\"?"),
                None => format!("its corners are {}", either(known())),
            };
            let message = format!("the card {named} has no corner {}", quote(corner));
            reader.fault(*id, message, vec![hint]);
        }
    }
    if spec.corners.is_empty() {
        spec.corners = card.corners.clone();
    } else if let Some(nominal) = card.corners.first() {
        match spec.corners.iter().position(|corner| corner == nominal) {
            Some(at) => spec.corners[..=at].rotate_right(1),
            None => reader.fault(
                ids.corners_list,
                format!("the nominal corner {} is missing", quote(nominal)),
                vec!["errors are counted from the nominal corner".to_owned()],
            ),
        }
    }
    if spec.supply.most > card.supply_max {
        reader.fault(
            ids.supply,
            format!("the supply is more than the devices of the card {named} stand"),
            vec![format!("they stand {}", card.supply_max.exact())],
        );
    }
    if matches!(spec.reference, Reference::Resistor { .. }) && !card.has_resistor {
        let message = format!("the card {named} has no resistor to make the reference with");
        reader.fault(ids.reference_from, message, vec![]);
    }
    if reader.has_errors() {
        Err(reader.finish())
    } else {
        Ok(spec)
    }
}
