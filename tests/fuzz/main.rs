//! Every reader against files that went wrong: seeded changes of good and bad files, cut, spliced, nested, absurd.
//!
//! `WIDEFRONT_FUZZ=10000000 cargo test --test fuzz` runs as many cases (20,000 otherwise) on all cores. A case is its
//! number: one that fails is run again alone with `WIDEFRONT_FUZZ_FROM=number WIDEFRONT_FUZZ=1`.

mod damage;
mod readers;

use damage::Random;
use readers::{Answer, Readers};
use std::collections::BTreeMap;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::Mutex;
use std::sync::atomic::{AtomicU64, Ordering};
use std::time::Instant;

const CASES: u64 = 20_000;
/// Of the cases of every reader at least so many in a hundred must be read and as many refused, or the changes are too
/// coarse or too fine to find anything.
const LEAST_OF_EACH: u64 = 2;
/// Failures that are told.
const TOLD: usize = 10;

fn wanted(variable: &str, usual: u64) -> u64 {
    match std::env::var(variable) {
        Ok(text) => text
            .parse()
            .unwrap_or_else(|_| panic!("{variable}={text}: a whole number is wanted")),
        Err(_) => usual,
    }
}

/// What earlier cases found and was mended: reader and input.
const FOUND: &[(&str, &str)] = &[
    // The place of the fault, counted before the byte-order marks were taken away, lay within one.
    ("technology merged into", "\u{feff}\u{feff}\u{feff}\u{e9}"),
];

#[test]
fn regress_found_inputs_are_refused() {
    let readers = Readers::new();
    for (name, input) in FOUND {
        let answer = readers.ask(name, input.as_bytes(), &mut Random::new(0));
        assert!(matches!(answer, Answer::Refused), "{name}: {input}");
    }
}

#[derive(Default)]
struct Count {
    read: u64,
    refused: u64,
}

#[test]
fn law_no_file_breaks_a_reader() {
    let cases = wanted("WIDEFRONT_FUZZ", CASES);
    let first = wanted("WIDEFRONT_FUZZ_FROM", 0);
    let next = AtomicU64::new(first);
    let counts: Mutex<BTreeMap<&str, Count>> = Mutex::default();
    let failures: Mutex<Vec<String>> = Mutex::default();
    let slowest: Mutex<(f64, u64)> = Mutex::new((0.0, 0));
    let begin = Instant::now();
    let work = || {
        let readers = Readers::new();
        loop {
            let case = next.fetch_add(1, Ordering::Relaxed);
            if case >= first + cases {
                return;
            }
            let mut random = Random::new(case);
            let (name, input) = readers.input(&mut random);
            let start = Instant::now();
            let answer = catch_unwind(AssertUnwindSafe(|| readers.ask(name, &input, &mut random)));
            let spent_s = start.elapsed().as_secs_f64();
            {
                let mut slowest = slowest.lock().unwrap();
                if spent_s > slowest.0 {
                    *slowest = (spent_s, case);
                }
            }
            let failed = |what: &str| {
                let mut failures = failures.lock().unwrap();
                if failures.len() < TOLD {
                    failures.push(format!("case {case}, {name}: {what}\n{}", excerpt(&input)));
                }
            };
            match answer {
                Err(_) => failed("panics"),
                Ok(answer) => {
                    let mut counts = counts.lock().unwrap();
                    let count = counts.entry(name).or_default();
                    match answer {
                        Answer::Read => count.read += 1,
                        Answer::Refused => count.refused += 1,
                    }
                }
            }
        }
    };
    let threads = std::thread::available_parallelism().map_or(1, usize::from);
    std::thread::scope(|scope| {
        for _ in 0..threads {
            scope.spawn(work);
        }
    });
    let failures = failures.into_inner().unwrap();
    assert!(failures.is_empty(), "{}", failures.join("\n\n"));
    for (name, count) in counts.into_inner().unwrap() {
        println!("{name}: {} read, {} refused", count.read, count.refused);
        let all = count.read + count.refused;
        let few = all * LEAST_OF_EACH / 100;
        assert!(
            all < 1000 || (count.read >= few && count.refused >= few),
            "{name}: {} read, {} refused",
            count.read,
            count.refused
        );
    }
    let (slowest_s, case) = slowest.into_inner().unwrap();
    println!(
        "{cases} cases in {:.0} s on {threads} threads, the slowest {slowest_s:.2} s (case {case})",
        begin.elapsed().as_secs_f64()
    );
}

/// The beginning of an input, so that a failure can be seen.
fn excerpt(input: &[u8]) -> String {
    const LETTERS: usize = 2000;
    let text = String::from_utf8_lossy(input);
    text.chars().take(LETTERS).collect()
}
