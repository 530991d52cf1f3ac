//! The knee of a front: where giving a little of one figure stops buying much of the other.

use crate::numeric::scalar::ln;

/// Index of the knee of a front of non-dominated points, all components minimised; the first of
/// equals, `None` without points.
///
/// Every component is put on a logarithmic scale (one that crosses zero stays as it is) and
/// stretched over the front to the range from 0 to 1. The knee is the point farthest from the chord
/// between the ends of the front, on the side of less: Das, On characterizing the "knee" of the
/// Pareto curve, Structural Optimization 18, 1999. With two components that is the least sum of
/// both; with more, the sum stands for the distance from the plane through the ends.
pub fn knee(points: &[Vec<f64>]) -> Option<usize> {
    let mut sums = vec![0.0; points.len()];
    for i in 0..points.first()?.len() {
        let column: Vec<f64> = points.iter().map(|p| p[i]).collect();
        let scaled: Vec<f64> = if column.iter().all(|&v| v > 0.0) {
            column.iter().map(|&v| ln(v)).collect()
        } else if column.iter().all(|&v| v < 0.0) {
            column.iter().map(|&v| -ln(-v)).collect()
        } else {
            column
        };
        let least = scaled.iter().copied().fold(f64::INFINITY, f64::min);
        let most = scaled.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        // A figure that all points share, or that is unbounded, tells none of them apart.
        if !(most - least).is_finite() || most == least {
            continue;
        }
        for (sum, v) in sums.iter_mut().zip(&scaled) {
            *sum += (v - least) / (most - least);
        }
    }
    (0..sums.len()).min_by(|&a, &b| sums[a].total_cmp(&sums[b]).then(a.cmp(&b)))
}
