//! Many replicates in parallel.

use std::sync::atomic::{AtomicBool, AtomicU32, Ordering};

use rayon::{ThreadPool, ThreadPoolBuilder};

use super::model::Model;
use super::replicate::State;
use super::tally::Tallies;

/// Replicates of a batch where a rule decides how many are run.
const BATCH: u32 = 500;
/// The least that is run before a rule is asked.
const LEAST: u32 = 1_000;
/// The most that a rule can ask for, and the most totals by replicate and year that are kept for it.
const MOST: u32 = 10_000_000;
const MOST_TOTALS: u64 = 1 << 30;

/// How many replicates are run.
pub enum Stopping<'a> {
    /// this many
    After(u32),
    /// batches until the rule says that the sum so far is enough
    Once(&'a dyn Fn(&Tallies) -> bool),
}

/// Told after each replicate: how many are done, and how many are planned if that is known.
pub type Progress<'a> = &'a (dyn Fn(u32, Option<u32>) + Sync);

/// What a run left behind.
#[derive(Debug)]
pub struct Run {
    /// the sums over the replicates that are done
    pub tallies: Tallies,
    /// whether all that were asked for are done
    pub complete: bool,
}

/// Runs replicates 1, 2, ... on `threads` threads (0: as many as there are processors) until `stopping` is met or
/// `stop` is set; replicates that have begun by then are finished.
///
/// The tallies are the same for any number of threads: every draw is keyed by its own identity, and sums of integers do
/// not depend on their order.
///
/// # Panics
/// If the system cannot start threads.
pub fn run(model: &Model, stopping: &Stopping<'_>, threads: usize, stop: &AtomicBool, progress: Progress<'_>) -> Run {
    let pool = ThreadPoolBuilder::new().num_threads(threads).build().expect("the system can start threads");
    let mut tallies = Tallies::empty(model.horizon, model.n_patches(), model.n_links());
    let most = MOST.min((MOST_TOTALS / (u64::from(model.horizon) + 1)) as u32).max(LEAST);
    let mut done = 0;
    loop {
        let (to, planned) = match stopping {
            Stopping::After(replicates) => (*replicates, Some(*replicates)),
            Stopping::Once(_) => ((done + BATCH).clamp(LEAST, most), None),
        };
        let batch = run_batch(model, &pool, done + 1, to, stop, &|more| progress(done + more, planned));
        done += u32::try_from(batch.n_replicates()).unwrap_or(u32::MAX);
        tallies.merge(batch);
        if done < to {
            return Run { tallies, complete: false };
        }
        let complete = match stopping {
            Stopping::After(_) => true,
            Stopping::Once(rule) => rule(&tallies),
        };
        if complete || done >= most {
            return Run { tallies, complete };
        }
    }
}

/// Runs replicates `from` to `to`; if stopped, those up to some number before `to`.
fn run_batch(
    model: &Model,
    pool: &ThreadPool,
    from: u32,
    to: u32,
    stop: &AtomicBool,
    progress: &(dyn Fn(u32) + Sync),
) -> Tallies {
    let next = AtomicU32::new(from);
    let finished = AtomicU32::new(0);
    let parts = pool.broadcast(|_| {
        let mut state = State::new(model);
        while !stop.load(Ordering::Relaxed) {
            let replicate = next.fetch_add(1, Ordering::Relaxed);
            if replicate > to {
                break;
            }
            state.run(model, replicate);
            progress(finished.fetch_add(1, Ordering::Relaxed) + 1);
        }
        state.tallies
    });
    let mut sum = Tallies::empty(model.horizon, model.n_patches(), model.n_links());
    for part in parts {
        sum.merge(part);
    }
    sum
}
