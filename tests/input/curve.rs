//! Authority: the interpolation conditions and the theorem of Fritsch & Carlson, SIAM J. Numer.
//! Anal. 17 (1980): the curve passes through its entries and is monotone wherever they are.

use biasloom::process::Curve;
use proptest::prelude::*;

/// Rising lengths between 0.1 um and 100 um with arbitrary values.
fn tables() -> impl Strategy<Value = Curve> {
    prop::collection::vec((0.3f64..1.5, -10.0f64..10.0), 2..9).prop_map(|rows| {
        let mut log_length = (0.1e-6f64).ln();
        let mut curve = Curve {
            lengths: vec![],
            values: vec![],
        };
        for (step, value) in rows {
            curve.lengths.push(log_length.exp());
            curve.values.push(value);
            log_length += step;
        }
        curve
    })
}

proptest! {
    #[test]
    fn passes_through_its_entries_and_holds_the_ends(curve in tables()) {
        for (length, value) in curve.lengths.iter().zip(&curve.values) {
            prop_assert!((curve.at(*length) - value).abs() <= 1e-12 * (1.0 + value.abs()));
        }
        prop_assert_eq!(curve.at(1e-9), curve.values[0]);
        prop_assert_eq!(curve.at(1.0), *curve.values.last().unwrap());
    }

    #[test]
    fn is_monotone_between_neighbours(curve in tables(), a in 0.0f64..1.0, b in 0.0f64..1.0) {
        let (a, b) = (a.min(b), a.max(b));
        for i in 0..curve.values.len() - 1 {
            let at = |t: f64| curve.at(curve.lengths[i] * (curve.lengths[i + 1] / curve.lengths[i]).powf(t));
            let rise = curve.values[i + 1] - curve.values[i];
            prop_assert!((at(b) - at(a)) * rise >= -1e-12, "{} {}", at(a), at(b));
        }
    }

    #[test]
    fn has_a_continuous_slope_at_its_entries(curve in tables()) {
        for i in 1..curve.values.len() - 1 {
            let at = |log_step: f64| curve.at(curve.lengths[i] * log_step.exp());
            let h = 1e-6;
            let (left, right) = ((at(0.0) - at(-h)) / h, (at(h) - at(0.0)) / h);
            prop_assert!((left - right).abs() < 1e-2 * (1.0 + left.abs()), "{left} {right}");
        }
    }
}

#[test]
fn a_straight_line_over_ln_l_is_reproduced() {
    // A cubic with exact tangents reproduces a straight line: any monotone scheme that failed here
    // would bend the law it interpolates.
    let curve = Curve {
        lengths: vec![0.2e-6, 0.5e-6, 1e-6, 5e-6],
        values: [0.2f64, 0.5, 1.0, 5.0]
            .iter()
            .map(|l| 3.0 + 2.0 * l.ln())
            .collect(),
    };
    for l in [0.21, 0.3, 0.7, 2.0, 4.9] {
        assert!((curve.at(l * 1e-6) - (3.0 + 2.0 * f64::ln(l))).abs() < 1e-12);
    }
}

#[test]
fn one_entry_is_the_same_everywhere_even_when_infinite() {
    let curve = Curve::constant(f64::INFINITY);
    assert_eq!(curve.at(1e-6), f64::INFINITY);
    assert_eq!(Curve::constant(2.0).at(f64::NAN), 2.0);
}
