//! Fronts: plain vectors and directions; no electricity.

pub mod hypervolume;

/// Whether `a` is at least as good as `b` everywhere and better somewhere. All components are
/// minimised.
pub fn dominates(a: &[f64], b: &[f64]) -> bool {
    let mut better = false;
    for (x, y) in a.iter().zip(b) {
        if x > y {
            return false;
        }
        better |= x < y;
    }
    better
}

/// Indices of the points no other point dominates, in order; of equal points the first.
pub fn nondominated(points: &[Vec<f64>]) -> Vec<usize> {
    (0..points.len())
        .filter(|&i| {
            !points
                .iter()
                .enumerate()
                .any(|(j, p)| dominates(p, &points[i]) || (j < i && p == &points[i]))
        })
        .collect()
}
