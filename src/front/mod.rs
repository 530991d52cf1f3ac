//! Fronts: plain vectors and directions; no electricity.

pub mod hypervolume;
pub mod knee;

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

/// The non-dominated points, rising in their first component, without those that another one kept
/// before them comes within `share` of in every component: a front that people can tell apart.
pub fn distinct(points: &[Vec<f64>], share: f64) -> Vec<usize> {
    let mut order = nondominated(points);
    order.sort_by(|&a, &b| points[a][0].total_cmp(&points[b][0]).then(a.cmp(&b)));
    let mut kept: Vec<usize> = Vec::new();
    for i in order {
        let near = |&j: &usize| {
            points[j]
                .iter()
                .zip(&points[i])
                .all(|(a, b)| *a <= b + share * b.abs())
        };
        if !kept.iter().any(near) {
            kept.push(i);
        }
    }
    kept
}
