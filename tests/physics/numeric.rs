//! Authorities: mpmath to 60 digits for single arguments, the platform's own library for a million
//! random ones, dense elimination for the sparse one, the narrowest instruction set for the wider.

use super::support::{device, random_conditions, random_law};
use biasloom::device::{Device, Point};
use biasloom::numeric::dispatch::{self, Work};
use biasloom::numeric::lanes::{Lanes, WIDTH};
use biasloom::numeric::sparse::{Factors, Plan};
use rand::{Rng, SeedableRng};
use rand_pcg::Pcg64;

/// What `lanes.rs` promises, in units of the last place.
const PROMISED_ULP: f64 = 2.0;
/// What the platform's library may err by: glibc's manual states 1 ulp for both.
const PLATFORM_ULP: f64 = 1.0;

/// Distance between a double's neighbours.
fn ulp(x: f64) -> f64 {
    let x = x.abs();
    f64::from_bits(x.to_bits() + 1) - x
}

#[test]
fn exponential_and_logarithm_agree_with_sixty_digits() {
    let table = include_str!("truth/exp_ln.csv");
    let mut rows = 0;
    for line in table.lines().skip(1) {
        let fields: Vec<&str> = line.split(',').collect();
        let number = |i: usize| f64::from_bits(u64::from_str_radix(fields[i], 16).unwrap());
        let (x, head, rest) = (number(1), number(2), number(3));
        let ours = match fields[0] {
            "exp" => Lanes::splat(x).exp(),
            "ln" => Lanes::splat(x).ln(),
            other => panic!("unknown function {other}"),
        };
        let error = ((ours.0[0] - head) - rest).abs() / ulp(head);
        assert!(error <= PROMISED_ULP, "{line}: {error} ulp");
        rows += 1;
    }
    assert!(rows > 800, "the table has shrunk to {rows} rows");
}

#[test]
fn exponential_and_logarithm_agree_with_the_platform_a_million_times() {
    let mut rng = Pcg64::seed_from_u64(1);
    for round in 0..1_000_000 / WIDTH {
        let x = Lanes::from_fn(|_| match round % 3 {
            0 => rng.random_range(-700.0..700.0),
            1 => rng.random_range(-2.0..2.0),
            _ => rng.random_range(-40.0..40.0),
        });
        let y = x.exp();
        let back = Lanes::from_fn(|i| match round % 2 {
            0 => x.0[i].exp(),
            _ => rng.random_range(0.2..4.0),
        });
        let l = back.ln();
        for i in 0..WIDTH {
            let (e, truth) = (y.0[i], x.0[i].exp());
            let bound = (PROMISED_ULP + PLATFORM_ULP) * ulp(truth);
            assert!((e - truth).abs() <= bound, "exp({}) = {e} {truth}", x.0[i]);
            let (e, truth) = (l.0[i], back.0[i].ln());
            let bound = (PROMISED_ULP + PLATFORM_ULP) * ulp(truth);
            assert!(
                (e - truth).abs() <= bound,
                "ln({}) = {e} {truth}",
                back.0[i]
            );
        }
    }
}

/// The argument's range is part of the promise: outside it the ends hold.
#[test]
fn exponential_holds_its_ends() {
    let y = Lanes([
        -1e300,
        -700.0,
        700.0,
        1e300,
        f64::NEG_INFINITY,
        f64::INFINITY,
        0.0,
        -0.0,
    ])
    .exp();
    assert_eq!(y.0[0], y.0[1]);
    assert_eq!(y.0[2], y.0[3]);
    assert_eq!(y.0[4], y.0[1]);
    assert_eq!(y.0[5], y.0[2]);
    assert_eq!((y.0[6], y.0[7]), (1.0, 1.0));
}

/// Dense elimination with row exchanges: the slow truth. `None` for a singular matrix.
pub fn dense_solve(mut a: Vec<Vec<f64>>, mut b: Vec<f64>) -> Option<Vec<f64>> {
    let n = b.len();
    for k in 0..n {
        let p = (k..n).max_by(|&i, &j| a[i][k].abs().total_cmp(&a[j][k].abs()))?;
        if a[p][k] == 0.0 {
            return None;
        }
        a.swap(k, p);
        b.swap(k, p);
        let pivot = a[k].clone();
        for r in k + 1..n {
            let factor = a[r][k] / pivot[k];
            for (below, upper) in a[r][k..].iter_mut().zip(&pivot[k..]) {
                *below -= factor * upper;
            }
            b[r] -= factor * b[k];
        }
    }
    for k in (0..n).rev() {
        let tail: f64 = (k + 1..n).map(|c| a[k][c] * b[c]).sum();
        b[k] = (b[k] - tail) / a[k][k];
    }
    Some(b)
}

/// A sparse matrix in eight lanes: a shuffled, amplified diagonal so that it is regular, random
/// other entries, some places hit twice.
fn random_matrix(rng: &mut Pcg64) -> (usize, Vec<(usize, usize)>, Vec<Lanes>) {
    let n = rng.random_range(1..=24);
    let mut column: Vec<usize> = (0..n).collect();
    for i in (1..n).rev() {
        column.swap(i, rng.random_range(0..=i));
    }
    let mut pattern: Vec<(usize, usize)> = (0..n).map(|r| (r, column[r])).collect();
    let mut values: Vec<f64> = (0..n)
        .map(|_| rng.random_range(1.0..4.0) * if rng.random() { 1.0 } else { -1.0 })
        .collect();
    for _ in 0..rng.random_range(0..=3 * n) {
        pattern.push((rng.random_range(0..n), rng.random_range(0..n)));
        values.push(rng.random_range(-1.0..1.0));
    }
    let values = values
        .into_iter()
        .map(|v| Lanes::from_fn(|_| v * rng.random_range(0.9..1.1)))
        .collect();
    (n, pattern, values)
}

#[test]
fn sparse_solution_agrees_with_dense_elimination() {
    let mut rng = Pcg64::seed_from_u64(2);
    let mut compared = 0;
    for _ in 0..2000 {
        let (n, pattern, values) = random_matrix(&mut rng);
        let Some(plan) = Plan::new(n, &pattern, &values) else {
            continue;
        };
        assert_eq!(plan.size(), n);
        let mut factors = Factors::default();
        plan.clear(&mut factors);
        for (e, v) in values.iter().enumerate() {
            factors.add(plan.slot(e), *v);
        }
        assert_eq!(plan.factor(&mut factors), plan.serves());
        let b: Vec<Lanes> = (0..n)
            .map(|_| Lanes::from_fn(|_| rng.random_range(-1.0..1.0)))
            .collect();
        let (mut x, mut y) = (vec![Lanes::ZERO; n], vec![Lanes::ZERO; n]);
        plan.solve(&factors, &mut b.clone(), &mut x);
        plan.solve_transposed(&factors, &mut b.clone(), &mut y);
        for lane in 0..WIDTH {
            let mut a = vec![vec![0.0; n]; n];
            for (&(r, c), v) in pattern.iter().zip(&values) {
                a[r][c] += v.0[lane];
            }
            let t: Vec<Vec<f64>> = (0..n).map(|r| (0..n).map(|c| a[c][r]).collect()).collect();
            let b: Vec<f64> = b.iter().map(|v| v.0[lane]).collect();
            for (matrix, ours) in [(a, &x), (t, &y)] {
                let Some(truth) = dense_solve(matrix.clone(), b.clone()) else {
                    continue;
                };
                let size = truth.iter().fold(1.0, |m: f64, v| m.max(v.abs()));
                // A nearly singular matrix magnifies rounding: its answers are large.
                for (o, t) in ours.iter().zip(&truth) {
                    assert!(
                        (o.0[lane] - t).abs() <= 1e-12 * size * size,
                        "{n}: {} {t}",
                        o.0[lane]
                    );
                }
                compared += 1;
            }
        }
    }
    assert!(compared > 20_000, "only {compared} systems were compared");
}

/// The same number in every lane.
fn splat(values: &[f64]) -> Vec<Lanes> {
    values.iter().map(|&v| Lanes::splat(v)).collect()
}

#[test]
fn singular_matrices_get_no_plan() {
    let full = [(0, 0), (0, 1), (1, 0), (1, 1)];
    let plan = |values: &[f64]| Plan::new(2, &full, &splat(values));
    assert!(plan(&[1.0, 2.0, 1.0, 3.0]).is_some());
    // Two equal rows: found only after the first elimination.
    assert!(plan(&[1.0, 2.0, 1.0, 2.0]).is_none());
    assert!(plan(&[1.0, 2.0, 1.0, f64::NAN]).is_none());
    assert!(Plan::new(2, &[(0, 0), (1, 1)], &splat(&[1.0, 0.0])).is_none());
    assert!(Plan::new(0, &[], &[]).is_some());
}

/// One order must do for lanes whose zeros stand in different places, and a singular lane must not
/// spoil the others.
#[test]
fn one_order_serves_every_regular_lane() {
    let full = [(0, 0), (0, 1), (1, 0), (1, 1)];
    let mut values = splat(&[0.0, 1.0, 1.0, 1.0]);
    // Lane 1 has its zero on the other diagonal place, lane 2 is singular, lane 3 not finite.
    for (lane, column) in [
        (1, [1.0, 1.0, 1.0, 0.0]),
        (2, [0.0, 0.0, 1.0, 1.0]),
        (3, [f64::INFINITY, 1.0, 1.0, 1.0]),
    ] {
        for (value, new) in values.iter_mut().zip(column) {
            value.0[lane] = new;
        }
    }
    let plan = Plan::new(2, &full, &values).expect("six lanes are regular");
    let expected: [bool; WIDTH] = std::array::from_fn(|i| i != 2 && i != 3);
    assert_eq!(plan.serves().0, expected);
    let mut factors = Factors::default();
    plan.clear(&mut factors);
    for (e, v) in values.iter().enumerate() {
        factors.add(plan.slot(e), *v);
    }
    let sound = plan.factor(&mut factors);
    let mut x = [Lanes::ZERO; 2];
    plan.solve(&factors, &mut splat(&[2.0, 3.0]), &mut x);
    for lane in (0..WIDTH).filter(|&i| expected[i]) {
        assert!(sound.0[lane]);
        let [a, b] = [x[0].0[lane], x[1].0[lane]];
        let truth = if lane == 1 { [3.0, -1.0] } else { [1.0, 2.0] };
        assert_eq!([a, b], truth);
    }
}

/// Everything the inner loops do, on given numbers.
#[derive(Clone)]
struct Mixture {
    devices: Vec<Device>,
    volts: Vec<[Lanes; 3]>,
    plan: Plan,
    matrix: Vec<Lanes>,
}

impl Work for Mixture {
    type Answer = Vec<u64>;
    #[inline(always)]
    fn run(self) -> Vec<u64> {
        let mut out = Vec::new();
        let mut put = |l: Lanes| out.extend(l.0.map(f64::to_bits));
        for (device, [vg, vd, vs]) in self.devices.iter().zip(&self.volts) {
            let Point {
                id,
                gm,
                gms,
                gds,
                ib,
                ib_slopes,
                vdssat,
            } = device.at(*vg, *vd, *vs);
            for l in [id, gm, gms, gds, ib, vdssat].into_iter().chain(ib_slopes) {
                put(l);
            }
            put(vg.exp());
            put((vd.abs() + 1e-3).ln());
            put((vs.abs() + 1e-3).powf(*vg));
        }
        let n = self.plan.size();
        let mut factors = Factors::default();
        self.plan.clear(&mut factors);
        for (e, v) in self.matrix.iter().enumerate() {
            factors.add(self.plan.slot(e), *v);
        }
        self.plan.factor(&mut factors);
        let (mut x, mut y) = (vec![Lanes::ZERO; n], vec![Lanes::ZERO; n]);
        self.plan.solve(&factors, &mut vec![Lanes::ONE; n], &mut x);
        self.plan
            .solve_transposed(&factors, &mut vec![Lanes::ONE; n], &mut y);
        x.into_iter().chain(y).for_each(put);
        out
    }
}

#[test]
fn every_instruction_set_gives_the_same_bytes() {
    let mut rng = Pcg64::seed_from_u64(3);
    for _ in 0..300 {
        let devices: Vec<Device> = (0..6)
            .map(|_| {
                let law = random_law(&mut rng);
                let lanes = random_conditions(&mut rng);
                device(law, 300.0, 5e-6, 1e-6, &lanes)
            })
            .collect();
        let volts = devices
            .iter()
            .map(|_| std::array::from_fn(|_| Lanes::from_fn(|_| rng.random_range(-0.5..2.5))))
            .collect();
        let (plan, matrix) = loop {
            let (n, pattern, matrix) = random_matrix(&mut rng);
            if let Some(plan) = Plan::new(n, &pattern, &matrix) {
                break (plan, matrix);
            }
        };
        let work = Mixture {
            devices,
            volts,
            plan,
            matrix,
        };
        let reference = dispatch::narrowest(work.clone());
        for (name, answer) in dispatch::each(&work) {
            assert!(answer == reference, "{name} differs");
        }
        assert!(dispatch::widest(work) == reference, "the widest differs");
    }
}
