//! Every shipped card loads, and says what the sources beside its values say.

use biasloom::process::{Card, SHIPPED};

#[test]
fn every_shipped_card_loads() {
    for (name, _) in SHIPPED {
        let card = Card::load(name).unwrap_or_else(|faults| panic!("{}", faults.render(false)));
        assert_eq!(card.name, *name);
        assert_eq!(card.corners[0].name, "TT");
        assert!(card.resistor.is_some());
    }
}
