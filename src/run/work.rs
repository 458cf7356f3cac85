//! Cells dealt to threads in their order; what several of them share is made for the first and dropped after the last.
//!
//! The threads are no pool's: a pool's thread that waits takes up other work in the meantime, and a cell taken up while its
//! shared tables are under way would wait for itself.

use std::collections::BTreeMap;
use std::sync::atomic::{AtomicBool, AtomicUsize, Ordering};
use std::sync::{Arc, Mutex, OnceLock, PoisonError};

/// What the items of one key share, and how many of them are not done yet.
struct Shared<S> {
    value: Arc<OnceLock<S>>,
    left: usize,
}

/// Calls `work` once for every item on `threads` threads; items begin in their order. Items of the same `key` share what
/// `make` gives for the first of them, made when that item's turn comes. Ends early, with what has begun, when `stop` is
/// raised.
pub fn in_order<T: Sync, K: Ord + Clone + Send, S: Send + Sync>(
    threads: usize,
    items: &[T],
    stop: &AtomicBool,
    key: impl Fn(&T) -> K + Sync,
    make: impl Fn(&T) -> S + Sync,
    work: impl Fn(&S, &T) + Sync,
) {
    let mut shared: BTreeMap<K, Shared<S>> = BTreeMap::new();
    for item in items {
        let entry = shared.entry(key(item)).or_insert_with(|| Shared {
            value: Arc::default(),
            left: 0,
        });
        entry.left += 1;
    }
    let shared = Mutex::new(shared);
    let next = AtomicUsize::new(0);
    let busy = || {
        while !stop.load(Ordering::Relaxed)
            && let Some(item) = items.get(next.fetch_add(1, Ordering::Relaxed))
        {
            let key = key(item);
            let lock = || shared.lock().unwrap_or_else(PoisonError::into_inner);
            let Some(value) = lock().get(&key).map(|s| Arc::clone(&s.value)) else {
                continue;
            };
            work(value.get_or_init(|| make(item)), item);
            drop(value);
            let mut shared = lock();
            if let Some(entry) = shared.get_mut(&key) {
                entry.left -= 1;
                if entry.left == 0 {
                    shared.remove(&key);
                }
            }
        }
    };
    std::thread::scope(|scope| {
        for _ in 0..threads.max(1) {
            scope.spawn(busy);
        }
    });
}

#[cfg(test)]
mod tests {
    use super::*;
    use rayon::prelude::*;

    /// Counts how many of it live.
    struct Counted<'a>(&'a AtomicUsize);

    impl Drop for Counted<'_> {
        fn drop(&mut self) {
            self.0.fetch_sub(1, Ordering::SeqCst);
        }
    }

    #[test]
    fn law_every_item_is_worked_on_once_with_few_shared_values_alive() {
        const ITEMS: usize = 2000;
        const A_KEY: usize = 20;
        for threads in [1, 2, 7] {
            let items: Vec<usize> = (0..ITEMS).collect();
            let (alive, most, made) = (
                AtomicUsize::new(0),
                AtomicUsize::new(0),
                AtomicUsize::new(0),
            );
            let times: Vec<AtomicUsize> = items.iter().map(|_| AtomicUsize::new(0)).collect();
            in_order(
                threads,
                &items,
                &AtomicBool::new(false),
                |item| item / A_KEY,
                |_| {
                    made.fetch_add(1, Ordering::SeqCst);
                    most.fetch_max(1 + alive.fetch_add(1, Ordering::SeqCst), Ordering::SeqCst);
                    Counted(&alive)
                },
                |_, &item| {
                    times[item].fetch_add(1, Ordering::SeqCst);
                },
            );
            assert!(times.iter().all(|t| t.load(Ordering::SeqCst) == 1));
            assert_eq!(made.into_inner(), ITEMS / A_KEY);
            assert_eq!(alive.into_inner(), 0);
            // One that is being dropped may still be counted beside each thread's own.
            assert!(most.into_inner() <= 2 * threads);
        }
    }

    #[test]
    fn law_making_on_all_cores_waits_for_no_item() {
        let items: Vec<u64> = (0..400).collect();
        let sum = Mutex::new(0);
        let value = |key: u64| (0..1000u64).map(move |i| i ^ key);
        in_order(
            4,
            &items,
            &AtomicBool::new(false),
            |item| item / 8,
            |item| value(item / 8).collect::<Vec<_>>().into_par_iter().max(),
            |most, _| *sum.lock().unwrap() += most.unwrap(),
        );
        let expected: u64 = items.iter().filter_map(|i| value(i / 8).max()).sum();
        assert_eq!(sum.into_inner().unwrap(), expected);
    }

    #[test]
    fn law_nothing_begins_once_stopped() {
        let stop = AtomicBool::new(false);
        let begun = AtomicUsize::new(0);
        let items = [(); 1000];
        in_order(
            3,
            &items,
            &stop,
            |_| 0,
            |_| (),
            |(), ()| {
                begun.fetch_add(1, Ordering::SeqCst);
                stop.store(true, Ordering::Relaxed);
            },
        );
        assert!((1..=3).contains(&begun.into_inner()));
    }
}
