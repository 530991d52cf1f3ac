//! Sparse LU over lanes: the elimination is planned once for a pattern, then replayed.
//!
//! Pivots are chosen by Markowitz's rule (Management Science 3, 1957) among those that are at
//! least a tenth of the largest entry of their column, in every lane; the same order then
//! serves every lane and every Newton iteration of the circuit, so the inner loop is a list of
//! multiply-subtracts with no search and no branch.

use super::lanes::{Lanes, Mask, WIDTH};

/// A pivot may be this much smaller than the largest entry of its column.
const THRESHOLD: f64 = 0.1;

/// A planned elimination of an n x n sparse matrix.
#[derive(Debug, Clone, Default)]
pub struct Plan {
    n: usize,
    slots: usize,
    /// Slot of each entry of the caller's pattern.
    input: Vec<u32>,
    /// Row and column of each pivot.
    rows: Vec<u32>,
    cols: Vec<u32>,
    steps: Vec<Step>,
    /// Flat lists the steps point into.
    upper: Vec<(u32, u32)>, // (slot, column)
    lower: Vec<(u32, u32)>, // (slot, row)
    updates: Vec<u32>,      // target slots, row by row: one per (lower, upper) pair
    /// Lanes in which every pivot was regular.
    serves: [bool; WIDTH],
}

#[derive(Debug, Clone, Copy, Default)]
struct Step {
    pivot: u32,
    upper: (u32, u32),
    lower: (u32, u32),
    updates: u32,
}

/// A possible next pivot.
struct Candidate {
    row: usize,
    column: usize,
    /// Markowitz's count of the entries it may fill.
    cost: usize,
    /// Its share of its column's largest entry, in the lane where that is least.
    worst: f64,
    /// Number of lanes in which it is not zero.
    usable: usize,
}

impl Candidate {
    /// Usable in more lanes; then large enough; then cheap; then large.
    fn beats(&self, other: &Candidate) -> bool {
        if self.usable != other.usable {
            return self.usable > other.usable;
        }
        match (self.worst >= THRESHOLD, other.worst >= THRESHOLD) {
            (true, true) if self.cost != other.cost => self.cost < other.cost,
            (true, false) => true,
            (false, true) => false,
            _ => self.worst > other.worst,
        }
    }
}

/// Factors of one matrix, in the slots of its plan: U's rows and L's multipliers, with the
/// pivots inverted.
#[derive(Debug, Clone, Default)]
pub struct Factors {
    slots: Vec<Lanes>,
}

impl Plan {
    /// Plans the elimination of a matrix with entries at `pattern` (row, column) and these
    /// `values`. A lane whose matrix is singular, or not finite, has no say in the order; `None`
    /// where every lane is one.
    pub fn new(n: usize, pattern: &[(usize, usize)], values: &[Lanes]) -> Option<Plan> {
        // Small dense bookkeeping: n is some hundreds at most, and a plan is made once a circuit.
        let mut slot_of = vec![u32::MAX; n * n];
        let mut dense = vec![Lanes::ZERO; n * n];
        let mut slots = 0u32;
        let mut input = Vec::with_capacity(pattern.len());
        for (&(r, c), &value) in pattern.iter().zip(values) {
            if slot_of[r * n + c] == u32::MAX {
                slot_of[r * n + c] = slots;
                slots += 1;
            }
            dense[r * n + c] += value;
            input.push(slot_of[r * n + c]);
        }
        let mut plan = Plan {
            n,
            input,
            serves: std::array::from_fn(|i| values.iter().all(|v| v.0[i].is_finite())),
            ..Plan::default()
        };
        let mut row_free = vec![true; n];
        let mut col_free = vec![true; n];
        let mut row_count = vec![0usize; n];
        let mut col_count = vec![0usize; n];
        for r in 0..n {
            for c in 0..n {
                if slot_of[r * n + c] != u32::MAX {
                    row_count[r] += 1;
                    col_count[c] += 1;
                }
            }
        }
        for _ in 0..n {
            let mut best: Option<Candidate> = None;
            for c in (0..n).filter(|&c| col_free[c]) {
                // A column that cannot beat the best cost found so far is passed over.
                if let Some(found) = &best
                    && found.worst >= THRESHOLD
                    && found.cost == 0
                    && col_count[c] > 1
                {
                    continue;
                }
                let rows = (0..n).filter(|&r| row_free[r] && slot_of[r * n + c] != u32::MAX);
                let largest = rows
                    .clone()
                    .fold(Lanes::ZERO, |most, r| most.max(dense[r * n + c].abs()));
                for r in rows {
                    let share = dense[r * n + c].abs() / largest;
                    let candidate = Candidate {
                        row: r,
                        column: c,
                        cost: (row_count[r] - 1) * (col_count[c] - 1),
                        worst: (0..WIDTH)
                            .filter(|&i| plan.serves[i])
                            // Zero by zero, in a column without entries, is no share.
                            .fold(1.0, |worst, i| share.0[i].max(0.0).min(worst)),
                        usable: (0..WIDTH)
                            .filter(|&i| plan.serves[i] && share.0[i] > 0.0)
                            .count(),
                    };
                    if best.as_ref().is_none_or(|found| candidate.beats(found)) {
                        best = Some(candidate);
                    }
                }
            }
            let Candidate {
                row: pr,
                column: pc,
                usable,
                ..
            } = best?;
            if usable == 0 {
                return None;
            }
            for i in 0..WIDTH {
                plan.serves[i] &= dense[pr * n + pc].0[i] != 0.0;
            }
            row_free[pr] = false;
            col_free[pc] = false;
            let upper_start = plan.upper.len() as u32;
            let lower_start = plan.lower.len() as u32;
            let update_start = plan.updates.len() as u32;
            for c in (0..n).filter(|&c| col_free[c] && slot_of[pr * n + c] != u32::MAX) {
                plan.upper.push((slot_of[pr * n + c], c as u32));
                col_count[c] -= 1;
            }
            for r in 0..n {
                if !row_free[r] || slot_of[r * n + pc] == u32::MAX {
                    continue;
                }
                plan.lower.push((slot_of[r * n + pc], r as u32));
                row_count[r] -= 1;
                let factor = dense[r * n + pc] / dense[pr * n + pc];
                for k in upper_start as usize..plan.upper.len() {
                    let c = plan.upper[k].1 as usize;
                    if slot_of[r * n + c] == u32::MAX {
                        slot_of[r * n + c] = slots;
                        slots += 1;
                        row_count[r] += 1;
                        col_count[c] += 1;
                    }
                    let update = factor * dense[pr * n + c];
                    dense[r * n + c] -= update;
                    plan.updates.push(slot_of[r * n + c]);
                }
            }
            plan.rows.push(pr as u32);
            plan.cols.push(pc as u32);
            plan.steps.push(Step {
                pivot: slot_of[pr * n + pc],
                upper: (upper_start, plan.upper.len() as u32),
                lower: (lower_start, plan.lower.len() as u32),
                updates: update_start,
            });
        }
        plan.slots = slots as usize;
        Some(plan)
    }

    /// Lanes in which the values the plan was made for were regular.
    pub fn serves(&self) -> Mask {
        Mask(self.serves)
    }

    /// Size of the matrix.
    pub fn size(&self) -> usize {
        self.n
    }

    /// Slot of the `entry`-th element of the pattern the plan was made for.
    #[inline(always)]
    pub fn slot(&self, entry: usize) -> usize {
        self.input[entry] as usize
    }

    /// Sets every slot to zero, ready for [`Factors::add`].
    #[inline(always)]
    pub fn clear(&self, factors: &mut Factors) {
        factors.slots.clear();
        factors.slots.resize(self.slots, Lanes::ZERO);
    }

    /// Factorises in place. Returns the lanes in which every pivot was a number other than zero:
    /// only those can be solved.
    #[inline(always)]
    pub fn factor(&self, factors: &mut Factors) -> Mask {
        let a = &mut factors.slots[..];
        let mut poison = Lanes::ZERO;
        for step in &self.steps {
            let inverse = 1.0 / a[step.pivot as usize];
            // Zero times a number is zero unless the number is infinite or none.
            poison += inverse * 0.0;
            a[step.pivot as usize] = inverse;
            let upper = &self.upper[step.upper.0 as usize..step.upper.1 as usize];
            let mut next = step.updates as usize;
            for &(slot, _) in &self.lower[step.lower.0 as usize..step.lower.1 as usize] {
                let l = a[slot as usize] * inverse;
                a[slot as usize] = l;
                for &(u, _) in upper {
                    let target = self.updates[next] as usize;
                    next += 1;
                    a[target] -= l * a[u as usize];
                }
            }
        }
        poison.abs().lt(Lanes::ONE)
    }

    /// Largest multiplier of the elimination in each lane. Rounding grows with it: the order is good
    /// while it stays near the tens that [`Plan::new`] aims for.
    pub fn growth(&self, factors: &Factors) -> Lanes {
        let multipliers = self.lower.iter();
        multipliers.fold(Lanes::ZERO, |most, &(slot, _)| {
            most.max(factors.slots[slot as usize].abs())
        })
    }

    /// Solves `A x = b`; `b` is destroyed, the answer is written to `x` by column.
    #[inline(always)]
    pub fn solve(&self, factors: &Factors, b: &mut [Lanes], x: &mut [Lanes]) {
        let a = &factors.slots[..];
        for (k, step) in self.steps.iter().enumerate() {
            let value = b[self.rows[k] as usize];
            for &(slot, row) in &self.lower[step.lower.0 as usize..step.lower.1 as usize] {
                b[row as usize] -= a[slot as usize] * value;
            }
        }
        for (k, step) in self.steps.iter().enumerate().rev() {
            let mut value = b[self.rows[k] as usize];
            for &(slot, col) in &self.upper[step.upper.0 as usize..step.upper.1 as usize] {
                value -= a[slot as usize] * x[col as usize];
            }
            x[self.cols[k] as usize] = value * a[step.pivot as usize];
        }
    }

    /// Solves `A^T y = c`; `c` is destroyed, the answer is written to `y` by row.
    #[inline(always)]
    pub fn solve_transposed(&self, factors: &Factors, c: &mut [Lanes], y: &mut [Lanes]) {
        let a = &factors.slots[..];
        // U^T z = c, forwards through the pivots.
        for (k, step) in self.steps.iter().enumerate() {
            let z = c[self.cols[k] as usize] * a[step.pivot as usize];
            y[self.rows[k] as usize] = z;
            for &(slot, col) in &self.upper[step.upper.0 as usize..step.upper.1 as usize] {
                c[col as usize] -= a[slot as usize] * z;
            }
        }
        // L^T y = z, backwards.
        for (k, step) in self.steps.iter().enumerate().rev() {
            let mut value = y[self.rows[k] as usize];
            for &(slot, row) in &self.lower[step.lower.0 as usize..step.lower.1 as usize] {
                value -= a[slot as usize] * y[row as usize];
            }
            y[self.rows[k] as usize] = value;
        }
    }
}

impl Factors {
    /// `slots` zeros.
    pub fn zeroed(slots: usize) -> Factors {
        Factors {
            slots: vec![Lanes::ZERO; slots],
        }
    }

    /// The value in a slot.
    #[inline(always)]
    pub fn value(&self, slot: usize) -> Lanes {
        self.slots[slot]
    }

    /// Adds to a slot before factorising.
    #[inline(always)]
    pub fn add(&mut self, slot: usize, value: Lanes) {
        self.slots[slot] += value;
    }
}
