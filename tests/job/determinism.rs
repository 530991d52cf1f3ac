//! The same spec and seed give the same bytes in every file, whatever the number of threads.

use super::Task;
use biasloom::report::{FORMATS, render};
use biasloom::spec::Effort;
use rayon::ThreadPoolBuilder;
use std::collections::BTreeMap;
use std::path::PathBuf;

fn files(seed: u64, threads: usize) -> BTreeMap<PathBuf, Vec<u8>> {
    let mut task = Task::shipped("starter", Effort::Quick);
    task.spec.search.seed = seed;
    let pool = ThreadPoolBuilder::new().num_threads(threads).build();
    let outcome = pool.expect("a pool of threads").install(|| task.explore());
    render(&outcome, &FORMATS).into_iter().collect()
}

#[test]
fn the_number_of_threads_changes_no_byte() {
    let one = files(1, 1);
    assert!(one.len() >= FORMATS.len());
    assert!(one.values().all(|bytes| !bytes.is_empty()));
    for threads in [2, 8] {
        let other = files(1, threads);
        assert_eq!(
            one.keys().collect::<Vec<_>>(),
            other.keys().collect::<Vec<_>>()
        );
        for (path, bytes) in &one {
            assert!(
                bytes == &other[path],
                "{} with {threads} threads",
                path.display()
            );
        }
    }
}

/// The seed is part of the answer: it is printed, so its files differ where the networks may not.
#[test]
fn the_seed_is_named() {
    let one = files(1, 2);
    let other = files(2, 2);
    assert!(one != other);
}

#[test]
fn a_spec_read_twice_is_the_same() {
    for name in ["starter", "tern", "sixty-four"] {
        let [a, b] = [0, 1].map(|_| Task::shipped(name, Effort::Quick));
        assert_eq!(a.spec, b.spec);
        assert_eq!(a.card, b.card);
    }
}
