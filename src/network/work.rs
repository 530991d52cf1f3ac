//! Counters of the work an exploration does.

use serde::Serialize;

/// Counters of the work done; all independent of time and threads.
#[derive(Debug, Clone, PartialEq, Default, Serialize)]
pub struct Work {
    /// Family shapes in the sweep.
    pub shapes: u64,
    /// Of these, excluded by closed forms before any solution.
    pub screened_out: u64,
    /// Of these, solved at every corner.
    pub solved: u64,
    /// DC solutions made (one per corner and circuit).
    pub dc_solutions: u64,
    /// Newton failures, by reason; a failed candidate is counted here and nowhere used.
    pub not_converged: Vec<(String, u64)>,
    /// Column-generation rounds.
    pub rounds: u64,
    /// Columns priced in.
    pub columns: u64,
    /// MILPs solved to proven optimality over their columns.
    pub milps_proved: u64,
    /// MILPs stopped at their limit.
    pub milps_stopped: u64,
    /// Evaluations spent polishing.
    pub polish_evaluations: u64,
    /// Whole networks verified as one circuit.
    pub networks_verified: u64,
}
