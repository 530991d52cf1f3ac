//! When nothing fits: what is advised is solved again by other code, from the netlist of the network
//! that is to show it; what is called impossible is told from what merely collides.

use super::Task;
use super::remeasure::remeasure;
use biasloom::explore::{Advice, Explanation, Limit, Outcome, Status};
use biasloom::spec::{Effort, Reference, Spec};

/// Two outputs, one on either rail, with something changed.
fn spec(reference: &str, sink: &str, source: &str, limits: &str) -> String {
    format!(
        "title: Too much asked\ncard: generic-180\nsupply: 1.62 V to 1.98 V\n\
         temperature: -40 degC to 125 degC\nreference: {{ {reference} }}\noutputs:\n  \
         - {{ name: low, kind: sink, {sink} }}\n  \
         - {{ name: high, kind: source, {source} }}\n\
         limits: {{ {limits} }}\nsearch: {{ effort: quick }}\n"
    )
}

const REFERENCE: &str = "current: 10 uA, flows: into network, range: 0 V to 1.2 V";
const SINK: &str = "current: 20 uA, range: 0.3 V to 1.3 V, accuracy: 3 %";
const SOURCE: &str = "current: 5 uA, range: 0.3 V to 1.3 V, accuracy: 3 %";
const LIMITS: &str = "area: 10000 um2, overhead_current: 40 uA";

/// A failed exploration.
struct Failed {
    task: Task,
    why: Explanation,
}

fn failed(name: &str, text: &str) -> Failed {
    let task = Task::read(name, text);
    let outcome = task.explore();
    failed_from(task, outcome)
}

fn failed_from(task: Task, outcome: Outcome) -> Failed {
    let Status::NothingFits { broken, why } = outcome.status else {
        panic!("{}: {:?}", task.spec.name, outcome.status);
    };
    assert!(!broken.is_empty(), "{}", task.spec.name);
    assert!(why.complete);
    Failed { task, why }
}

/// Limits by name, "low accuracy" or "area", of an advice.
fn named(advice: &Advice) -> Vec<String> {
    let changes = advice.changes.iter();
    changes
        .map(|c| {
            let parts = [c.output.as_deref(), Some(c.key.as_str()), c.end.as_deref()];
            parts.into_iter().flatten().collect::<Vec<_>>().join(" ")
        })
        .collect()
}

/// Every limit of a spec as another code measures a network against it; a hair for its rounding.
fn keeps(task: &Task, advice: &Advice) -> Result<(), String> {
    let found = remeasure(task, &advice.network);
    let spec = &task.spec;
    let within = |what: &str, value: f64, limit: f64| {
        if value <= limit * (1.0 + 1e-9) {
            Ok(())
        } else {
            Err(format!("{what}: {value:e} against {limit:e}"))
        }
    };
    for (output, (error, resistance)) in spec.outputs.iter().zip(&found.outputs) {
        if let Some(accuracy) = output.accuracy {
            within(&output.name, *error, accuracy.limit)?;
        }
        if let Some(least) = output.output_resistance {
            within(&output.name, least.0, *resistance)?;
        }
    }
    let limits = &spec.limits;
    limits
        .area
        .map_or(Ok(()), |l| within("area", found.area, l.0))?;
    let overhead = found.overhead;
    limits
        .overhead_current
        .map_or(Ok(()), |l| within("overhead", overhead, l.0))?;
    let power = overhead * spec.supply.most.0;
    limits
        .power
        .map_or(Ok(()), |l| within("power", power, l.0))?;
    if let Reference::Current { range, .. } = spec.reference {
        within("pin", found.pin[1], range.most.0)?;
        within("pin", range.least.0, found.pin[0])?;
    }
    Ok(())
}

impl Failed {
    fn at(&self, spec: Spec) -> Task {
        Task {
            spec,
            card: self.task.card.clone(),
        }
    }

    /// What every advice must be: verified, looser where it says so and nowhere else, of one limit
    /// or of several of which none can be spared.
    fn check(&self, impossible: &[Option<&str>], advised: &[&str]) {
        let own = &self.task.spec;
        let found: Vec<Option<&str>> = self
            .why
            .impossible
            .iter()
            .map(|i| i.output.as_deref())
            .collect();
        let names: Vec<Vec<String>> = self.why.advice.iter().map(named).collect();
        assert_eq!(found, impossible, "{}", own.name);
        assert!(!names.is_empty(), "{}", own.name);
        for name in advised {
            let among = names.iter().flatten().any(|n| n == name);
            assert!(among, "{}: {name} not among {names:?}", own.name);
        }
        for advice in &self.why.advice {
            let relaxed = advice.applied(own);
            let changed: Vec<Limit> = Limit::all(own)
                .into_iter()
                .filter(|limit| limit.value(own) != limit.value(&relaxed))
                .collect();
            assert_eq!(changed.len(), advice.changes.len(), "{:?}", named(advice));
            for limit in changed {
                let (from, to) = (limit.value(own).unwrap(), limit.value(&relaxed).unwrap());
                assert!(limit.looser(to, from), "{limit:?} from {from} to {to}");
            }
            if matches!(own.reference, Reference::Current { .. }) {
                let kept = keeps(&self.at(relaxed), advice);
                assert_eq!(kept, Ok(()), "{}: {:?}", own.name, named(advice));
                // The same network breaks the spec as it was: the limit matters.
                for change in &advice.changes {
                    let output = own
                        .outputs
                        .iter()
                        .find(|o| Some(&o.name) == change.output.as_ref());
                    if output.is_some_and(|o| o.accuracy.is_none()) && change.key == "range" {
                        // The headroom rule without an accuracy is not measured by the other code.
                        continue;
                    }
                    let rest = advice.changes.iter().filter(|c| *c != change);
                    let without = rest.fold(own.clone(), |spec, c| c.applied(&spec));
                    let kept = keeps(&self.at(without), advice);
                    assert!(kept.is_err(), "{}: {change:?} is not needed", own.name);
                }
            }
        }
    }

    /// An ordinary exploration of each relaxed spec finds networks. At normal effort: advice rests on
    /// a longer search than a quick exploration makes, and is the least that search found.
    fn fits_when_relaxed(&self) {
        for advice in &self.why.advice {
            let mut relaxed = advice.applied(&self.task.spec);
            relaxed.search.effort = Effort::Normal;
            let outcome = self.at(relaxed).explore();
            assert_eq!(outcome.status, Status::Found, "{:?}", named(advice));
        }
    }

    /// With a limit given only half of what is advised, an ordinary exploration finds nothing.
    fn half_is_not_enough(&self) {
        let own = &self.task.spec;
        for advice in self.why.advice.iter().filter(|a| a.changes.len() == 1) {
            let relaxed = advice.applied(own);
            let limit = Limit::all(own)
                .into_iter()
                .find(|l| l.value(own) != l.value(&relaxed))
                .unwrap();
            let [from, to] = [own, &relaxed].map(|s| limit.place(limit.value(s).unwrap()));
            let half = limit.set(own, limit.at((from + to) / 2.0));
            let outcome = self.at(half).explore();
            let nothing = matches!(outcome.status, Status::NothingFits { .. });
            assert!(nothing, "{limit:?}: half of the way is enough");
        }
    }
}

#[test]
fn the_impossible_demo_collides_in_its_area() {
    let task = Task::shipped("impossible", Effort::Quick);
    let outcome = task.explore();
    let failed = failed_from(task, outcome);
    failed.check(&[], &["area"]);
    failed.fits_when_relaxed();
    failed.half_is_not_enough();
}

#[test]
fn too_little_area() {
    let limits = "area: 480 um2, overhead_current: 40 uA";
    let failed = failed("area", &spec(REFERENCE, SINK, SOURCE, limits));
    failed.check(&[], &["area", "low accuracy", "high accuracy"]);
}

#[test]
fn too_little_current() {
    let limits = "area: 10000 um2, overhead_current: 11 uA";
    let failed = failed("current", &spec(REFERENCE, SINK, SOURCE, limits));
    failed.check(&[], &["overhead_current"]);
    failed.fits_when_relaxed();
}

#[test]
fn less_current_than_the_reference() {
    let limits = "area: 10000 um2, overhead_current: 8 uA";
    let failed = failed("starved", &spec(REFERENCE, SINK, SOURCE, limits));
    failed.check(&[None], &["overhead_current"]);
    let nearest = &failed.why.impossible[0].nearest;
    assert_eq!((nearest.len(), nearest[0].to), (1, 10e-6));
}

#[test]
fn too_little_power() {
    let failed = failed(
        "power",
        &spec(REFERENCE, SINK, SOURCE, "area: 10000 um2, power: 21 uW"),
    );
    failed.check(&[], &["power"]);
    failed.fits_when_relaxed();
}

/// Below some four thermal voltages no device saturates (Enz & Vittoz 2006): at 125 degC 0.14 V.
#[test]
fn headroom_below_saturation() {
    let sink = "current: 20 uA, range: 0.04 V to 1.3 V, accuracy: 3 %";
    let failed = failed("headroom", &spec(REFERENCE, sink, SOURCE, LIMITS));
    failed.check(&[Some("low")], &["low range low"]);
    let low = failed.why.impossible[0]
        .nearest
        .iter()
        .find(|c| c.end.as_deref() == Some("low"))
        .unwrap();
    assert!(low.to > 0.08 && low.to < 0.2, "{low:?}");
}

/// Without an accuracy the headroom rule alone decides.
#[test]
fn headroom_of_an_output_without_accuracy() {
    let sink = "current: 20 uA, range: 0.05 V to 1.3 V";
    let failed = failed("plain", &spec(REFERENCE, sink, SOURCE, LIMITS));
    failed.check(&[Some("low")], &["low range low"]);
}

#[test]
fn output_resistance_beyond_any_cell() {
    let sink = "current: 20 uA, range: 0.3 V to 1.3 V, output_resistance: 1 TOhm";
    let failed = failed("stiff", &spec(REFERENCE, sink, SOURCE, LIMITS));
    failed.check(&[Some("low")], &["low output_resistance"]);
}

/// A_VT and A_beta over the root of forty of the card's largest devices is all there is.
#[test]
fn accuracy_beyond_the_largest_device() {
    let sink = "current: 20 uA, range: 0.3 V to 1.3 V, accuracy: 0.005 %";
    let limits = "overhead_current: 40 uA";
    let failed = failed("mismatch", &spec(REFERENCE, sink, SOURCE, limits));
    failed.check(&[Some("low")], &["low accuracy"]);
}

#[test]
fn accuracy_beyond_the_reference_itself() {
    let reference = "current: 10 uA, flows: into network, range: 0 V to 1.2 V, tolerance: 4 %";
    let failed = failed(
        "tolerance",
        &spec(
            reference,
            SINK,
            "ratio: 1/2, range: 0.3 V to 1.3 V, accuracy: 3 %",
            LIMITS,
        ),
    );
    failed.check(&[Some("low")], &["low accuracy"]);
    let nearest = &failed.why.impossible[0].nearest;
    assert!(
        nearest.iter().all(|c| c.key == "accuracy" && c.to > 0.04),
        "{nearest:?}"
    );
}

#[test]
fn a_reference_pin_below_any_gate() {
    let reference = "current: 10 uA, flows: into network, range: 0 V to 0.2 V";
    let failed = failed("pin", &spec(reference, SINK, SOURCE, LIMITS));
    failed.check(&[None], &["range high"]);
}

/// Each can be had alone: low headroom wants wide devices, and the area has no room for them.
#[test]
fn headroom_against_area() {
    let sink = "current: 200 uA, range: 0.18 V to 1.3 V, accuracy: 2 %";
    let limits = "area: 3000 um2, overhead_current: 40 uA";
    let failed = failed("collide", &spec(REFERENCE, sink, SOURCE, limits));
    failed.check(&[], &["area", "low range low", "low accuracy"]);
}

#[test]
fn two_outputs_out_of_reach() {
    let sink = "current: 20 uA, range: 0.04 V to 1.3 V, accuracy: 3 %";
    let source = "current: 5 uA, range: 0.04 V to 1.3 V, accuracy: 3 %";
    let failed = failed("both", &spec(REFERENCE, sink, source, LIMITS));
    failed.check(
        &[Some("low"), Some("high")],
        &["low range low", "high range low"],
    );
    assert_eq!(failed.why.advice.len(), 1);
}

/// The spread of a resistor is a matter of the process, not of budgets.
#[test]
fn an_own_reference_that_spreads_too_far() {
    let reference = "current: 10 uA, from: resistor";
    let source = "ratio: 1/2, range: 0.3 V to 1.3 V, accuracy: 5 %";
    let failed = failed("own", &spec(reference, SINK, source, LIMITS));
    failed.check(&[Some("low")], &["low accuracy"]);
}

/// The same spec, the same explanation, on any number of threads.
#[test]
fn the_same_advice_on_any_number_of_threads() {
    let text = spec(
        REFERENCE,
        SINK,
        SOURCE,
        "area: 480 um2, overhead_current: 40 uA",
    );
    let on = |threads: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads);
        let task = Task::read("threads", &text);
        let outcome = pool.build().unwrap().install(|| task.explore());
        failed_from(task, outcome).why
    };
    assert_eq!(on(1), on(3));
}
