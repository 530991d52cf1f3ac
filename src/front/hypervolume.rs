//! Hypervolume: the volume a front dominates, up to a reference point (Zitzler & Thiele, IEEE
//! Trans. Evolutionary Computation 3, 1999).

use super::nondominated;

/// Hypervolume of points under `reference`, all components minimised. Points that do not beat the
/// reference everywhere contribute nothing.
pub fn hypervolume(points: &[Vec<f64>], reference: &[f64]) -> f64 {
    let inside: Vec<Vec<f64>> = points
        .iter()
        .filter(|p| p.iter().zip(reference).all(|(x, r)| x < r))
        .cloned()
        .collect();
    let kept: Vec<Vec<f64>> = nondominated(&inside)
        .into_iter()
        .map(|i| inside[i].clone())
        .collect();
    volume(kept, reference)
}

/// Slices along the last component (While et al., IEEE Trans. Evolutionary Computation 10, 2006).
fn volume(mut points: Vec<Vec<f64>>, reference: &[f64]) -> f64 {
    let Some(&last) = reference.last() else {
        return 0.0;
    };
    let depth = reference.len() - 1;
    if depth == 0 {
        let least = points.iter().map(|p| p[0]).fold(last, f64::min);
        return last - least;
    }
    points.sort_by(|a, b| a[depth].total_cmp(&b[depth]));
    let mut sum = 0.0;
    for i in 0..points.len() {
        let end = points.get(i + 1).map_or(last, |p| p[depth]);
        let thickness = end - points[i][depth];
        if thickness > 0.0 {
            let slice: Vec<Vec<f64>> = points[..=i].iter().map(|p| p[..depth].to_vec()).collect();
            let kept = nondominated(&slice)
                .into_iter()
                .map(|i| slice[i].clone())
                .collect();
            sum += thickness * volume(kept, &reference[..depth]);
        }
    }
    sum
}
