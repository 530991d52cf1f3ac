//! Dominance, the filter and the hypervolume against brute force and published values.

use biasloom::front::hypervolume::hypervolume;
use biasloom::front::knee::knee;
use biasloom::front::{dominates, nondominated};
use proptest::prelude::*;
use rand::{Rng, SeedableRng};
use rand_pcg::Pcg64;
use std::f64::consts::PI;

fn close(ours: f64, truth: f64, absolute: f64) {
    assert!((ours - truth).abs() <= absolute, "{ours} {truth}");
}

/// Hypervolume (Zitzler & Thiele, IEEE Trans. Evolutionary Computation 3(4), 1999); the numbers are
/// areas of rectangles.
#[test]
fn hypervolumes_of_small_sets() {
    type Case = (&'static [&'static [f64]], &'static [f64], f64);
    let cases: [Case; 5] = [
        (&[&[1.0, 2.0], &[2.0, 1.0]], &[3.0, 3.0], 3.0),
        (&[&[2.0, 8.0], &[6.0, 3.0]], &[10.0, 10.0], 36.0),
        (&[&[0.0, 2.0], &[2.0, 0.0]], &[3.0, 3.0], 5.0),
        // One published page prints 2.75 here; the rectangles add up to 3.25.
        (&[&[0.0, 1.0], &[0.5, 0.5], &[1.0, 0.0]], &[2.0, 2.0], 3.25),
        // 1.1^3 less the cube that no point dominates: 1.331 - 1.
        (
            &[&[1.0, 0.0, 0.0], &[0.0, 1.0, 0.0], &[0.0, 0.0, 1.0]],
            &[1.1, 1.1, 1.1],
            0.331,
        ),
    ];
    for (points, reference, truth) in cases {
        let points: Vec<Vec<f64>> = points.iter().map(|p| p.to_vec()).collect();
        close(hypervolume(&points, reference), truth, 1e-12);
    }
}

#[test]
fn every_point_of_a_staircase_contributes_its_own_square() {
    let points: Vec<Vec<f64>> = (1..=5)
        .map(|i| vec![f64::from(i), f64::from(6 - i)])
        .collect();
    let whole = hypervolume(&points, &[6.0, 6.0]);
    close(whole, 15.0, 1e-12);
    for left in 0..points.len() {
        let mut others = points.clone();
        others.remove(left);
        close(whole - hypervolume(&others, &[6.0, 6.0]), 1.0, 1e-12);
    }
}

#[test]
fn edges() {
    assert_eq!(hypervolume(&[], &[1.0, 1.0]), 0.0);
    // On the reference, or beyond it in one direction: nothing is dominated.
    assert_eq!(hypervolume(&[vec![1.0, 0.0]], &[1.0, 1.0]), 0.0);
    assert_eq!(hypervolume(&[vec![2.0, 0.0]], &[1.0, 1.0]), 0.0);
    assert_eq!(hypervolume(&[vec![0.25], vec![0.5]], &[1.0]), 0.75);
    assert!(nondominated(&[]).is_empty());
    assert_eq!(nondominated(&[vec![1.0], vec![1.0], vec![2.0]]), [0]);
}

/// True fronts of Zitzler, Deb, Thiele, Evolutionary Computation 8(2), 2000, under reference (1, 1):
/// integrals of 1 - f2. With n + 1 samples of f1 the staircase falls short by less than the
/// fall of f2 over n.
#[test]
fn hypervolumes_of_true_fronts() {
    let n = 500;
    let front = |f2: fn(f64) -> f64| -> Vec<Vec<f64>> {
        (0..=n)
            .map(|i| {
                let x = f64::from(i) / f64::from(n);
                vec![x, f2(x)]
            })
            .collect()
    };
    let short = |points: &[Vec<f64>], truth: f64, fall: f64| {
        let ours = hypervolume(points, &[1.0, 1.0]);
        let most = fall / f64::from(n);
        assert!(
            ours <= truth + 1e-6 && truth - ours <= most,
            "{ours} {truth}"
        );
    };
    short(&front(|x| 1.0 - x.sqrt()), 2.0 / 3.0, 1.0);
    short(&front(|x| 1.0 - x * x), 1.0 / 3.0, 1.0);
    // Its lowest point is at -0.7734.
    short(
        &front(|x| 1.0 - x.sqrt() - x * (10.0 * PI * x).sin()),
        1.044426,
        1.7734,
    );
}

/// The sphere of Deb, Thiele, Laumanns, Zitzler, 2002, in three dimensions: 1 - pi/6. The shortfall
/// of a k by k grid shrinks as 1/k, so two grids extrapolate to the truth.
#[test]
fn hypervolume_of_the_unit_sphere() {
    let grid = |k: u32| {
        let mut points = Vec::new();
        for i in 0..=k {
            for j in 0..=k {
                let (a, b) = (
                    f64::from(i) / f64::from(k) * PI / 2.0,
                    f64::from(j) / f64::from(k) * PI / 2.0,
                );
                points.push(vec![a.cos() * b.cos(), a.cos() * b.sin(), a.sin()]);
            }
        }
        hypervolume(&points, &[1.0, 1.0, 1.0])
    };
    let (coarse, fine, truth) = (grid(8), grid(16), 1.0 - PI / 6.0);
    assert!(coarse < fine && fine < truth, "{coarse} {fine} {truth}");
    close(2.0 * fine - coarse, truth, 0.01);
}

/// Inclusion and exclusion over every subset of the boxes.
fn volume_by_subsets(points: &[Vec<f64>], reference: &[f64]) -> f64 {
    let mut sum = 0.0;
    for subset in 1u32..1 << points.len() {
        let mut volume = 1.0;
        for (d, r) in reference.iter().enumerate() {
            let corner = points
                .iter()
                .enumerate()
                .filter(|(i, _)| subset >> i & 1 == 1)
                .map(|(_, p)| p[d])
                .fold(f64::NEG_INFINITY, f64::max);
            volume *= (r - corner).max(0.0);
        }
        sum += if subset.count_ones() % 2 == 1 {
            volume
        } else {
            -volume
        };
    }
    sum
}

/// Points on a coarse grid, so that ties and repetitions are common.
fn points() -> impl Strategy<Value = Vec<Vec<f64>>> {
    (1usize..=4).prop_flat_map(|dimensions| {
        let point = prop::collection::vec((0u8..7).prop_map(f64::from), dimensions);
        prop::collection::vec(point, 1..9)
    })
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(2000))]

    #[test]
    fn hypervolume_agrees_with_inclusion_and_exclusion(points in points(), edge in 3u8..8) {
        let reference = vec![f64::from(edge); points[0].len()];
        let ours = hypervolume(&points, &reference);
        prop_assert!((ours - volume_by_subsets(&points, &reference)).abs() < 1e-9);
    }

    #[test]
    fn hypervolume_grows_with_every_point_that_nothing_dominates(points in points()) {
        let reference = vec![7.0; points[0].len()];
        let (last, others) = points.split_last().unwrap();
        let (before, after) = (hypervolume(others, &reference), hypervolume(&points, &reference));
        let useless = others.iter().any(|p| p == last || dominates(p, last));
        prop_assert_eq!(after > before, !useless);
    }

    #[test]
    fn dominance_is_a_strict_order(points in points()) {
        for a in &points {
            prop_assert!(!dominates(a, a));
            for b in &points {
                let by_hand = a.iter().zip(b).all(|(x, y)| x <= y) && a != b;
                prop_assert_eq!(dominates(a, b), by_hand);
                for c in &points {
                    prop_assert!(!(dominates(a, b) && dominates(b, c)) || dominates(a, c));
                }
            }
        }
    }

    #[test]
    fn the_filter_keeps_just_what_nothing_beats(points in points()) {
        let kept = nondominated(&points);
        prop_assert!(kept.windows(2).all(|w| w[0] < w[1]));
        for (i, p) in points.iter().enumerate() {
            let beaten = points.iter().any(|q| dominates(q, p));
            let first = points.iter().position(|q| q == p) == Some(i);
            prop_assert_eq!(kept.contains(&i), !beaten && first);
            // What was left out is beaten, or equalled, by something kept.
            prop_assert!(kept.iter().any(|&k| &points[k] == p || dominates(&points[k], p)) );
        }
        // Filtering again changes nothing.
        let again: Vec<Vec<f64>> = kept.iter().map(|&k| points[k].clone()).collect();
        prop_assert_eq!(nondominated(&again).len(), again.len());
    }
}

/// An archive filled one by one holds the front of everything it was ever shown.
#[test]
fn an_archive_filled_one_by_one_is_the_front_of_all() {
    let mut rng = Pcg64::seed_from_u64(7);
    for _ in 0..200 {
        let dimensions = rng.random_range(1..=4);
        let all: Vec<Vec<f64>> = (0..40)
            .map(|_| {
                (0..dimensions)
                    .map(|_| f64::from(rng.random_range(0u8..10)))
                    .collect()
            })
            .collect();
        let mut archive: Vec<Vec<f64>> = Vec::new();
        for point in &all {
            archive.push(point.clone());
            archive = nondominated(&archive)
                .into_iter()
                .map(|i| archive[i].clone())
                .collect();
        }
        let front: Vec<Vec<f64>> = nondominated(&all)
            .into_iter()
            .map(|i| all[i].clone())
            .collect();
        assert_eq!(archive, front);
    }
}

/// On a curve, the point farthest from the chord has the chord's slope (mean value theorem). With
/// logarithms on a quarter circle that bends towards less, that is its middle, whatever the units.
#[test]
fn the_knee_of_an_arc_is_its_middle() {
    const N: i32 = 40;
    let arc: Vec<Vec<f64>> = (0..=N)
        .map(|i| {
            let angle = PI / 2.0 * f64::from(i) / f64::from(N);
            let (u, v) = (1.0 - angle.cos(), 1.0 - angle.sin());
            // A factor of 3 in one figure, of 50 in the other.
            vec![1e-8 * 3f64.powf(u), 1e-5 * 50f64.powf(v)]
        })
        .collect();
    assert_eq!(knee(&arc), Some(N as usize / 2));
    // Figures of which more is better come in negative; their logarithms bend the other way.
    let more: Vec<Vec<f64>> = arc.iter().map(|p| vec![p[0], -1.0 / p[1]]).collect();
    assert_eq!(knee(&more), Some(N as usize / 2));
}

/// Against the distance from the chord as geometry has it: of every point of random fronts.
#[test]
fn the_knee_is_farthest_from_the_chord() {
    let mut rng = Pcg64::seed_from_u64(18);
    for _ in 0..200 {
        let mut points: Vec<Vec<f64>> = (0..rng.random_range(3..30))
            .map(|_| vec![rng.random_range(1.0..9.0), rng.random_range(1.0..9.0)])
            .collect();
        points = nondominated(&points)
            .into_iter()
            .map(|i| points[i].clone())
            .collect();
        points.sort_by(|a, b| a[0].total_cmp(&b[0]));
        let n = points.len();
        let at: Vec<[f64; 2]> = points.iter().map(|p| [p[0].ln(), p[1].ln()]).collect();
        let ([x0, y0], [x1, y1]) = (at[0], at[n - 1]);
        let scaled = |p: &[f64; 2]| [(p[0] - x0) / (x1 - x0), (p[1] - y1) / (y0 - y1)];
        // A point's distance from a line is the cross product with the line's direction; positive
        // on the side of the origin.
        let distance = |p: &[f64; 2]| {
            let ([a, b], [c, d], [u, v]) = (scaled(&at[0]), scaled(&at[n - 1]), scaled(p));
            let along = [c - a, d - b];
            let cross = along[1] * (u - a) - along[0] * (v - b);
            cross / (along[0] * along[0] + along[1] * along[1]).sqrt()
        };
        if n < 3 {
            continue;
        }
        let found = knee(&points).expect("there are points");
        let most = at.iter().map(distance).fold(f64::NEG_INFINITY, f64::max);
        close(distance(&at[found]), most, 1e-12);
    }
}

#[test]
fn a_knee_of_few_points_is_the_first() {
    assert_eq!(knee(&[]), None);
    assert_eq!(knee(&[vec![2.0, 3.0]]), Some(0));
    assert_eq!(knee(&[vec![1.0, 5.0], vec![2.0, 3.0]]), Some(0));
    // A figure that no two of them differ in, and one that crosses zero.
    let flat = [vec![1.0, 7.0], vec![1.0, 7.0]];
    assert_eq!(knee(&flat), Some(0));
    let crossing = [vec![-1.0, 4.0], vec![0.1, 1.1], vec![1.0, 1.0]];
    assert_eq!(knee(&crossing), Some(1));
}
