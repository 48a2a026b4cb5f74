//! Runs the numbered items of a campaign and says how far it is, for a person who watches it with `--nocapture`.

use std::collections::BTreeMap;
use std::panic::resume_unwind;
use std::sync::Mutex;
use std::sync::mpsc::{Receiver, RecvTimeoutError, channel};
use std::time::{Duration, Instant};

/// An item that took longer gets a line of its own [s].
const SECONDS_WORTH_A_LINE: f64 = 2.0;

/// Time between two lines that say how far it is.
const BEAT: Duration = Duration::from_secs(10);

/// The items below `n` that were begun, by the time of their beginning, and how many are done.
struct State {
    next: u64,
    at_work: BTreeMap<u64, Instant>,
    n_done: u64,
}

/// `work` of every number below `n`, in the order of the numbers; `size` says in the line of a slow one how large it was.
///
/// One after the other on each of a few threads (`RAYON_NUM_THREADS` says how many), every one with a pool of its own. In one
/// shared pool a worker that waits for the inner loops of its item would take up a whole other item, and so on downwards:
/// seconds turn into minutes and every item begun stays in memory.
pub fn all<T: Send>(
    name: &str,
    n: u64,
    work: impl Fn(u64) -> T + Sync,
    size: impl Fn(&T) -> String + Sync,
) -> Vec<T> {
    let state = Mutex::new(State { next: 0, at_work: BTreeMap::new(), n_done: 0 });
    let take = || {
        let mut state = state.lock().unwrap();
        let item = state.next;
        if item == n {
            return None;
        }
        state.next += 1;
        state.at_work.insert(item, Instant::now());
        Some(item)
    };
    let one = |item: u64| {
        let start = Instant::now();
        let made = work(item);
        let seconds = start.elapsed().as_secs_f64();
        if seconds > SECONDS_WORTH_A_LINE {
            println!("{name} {item}: {seconds:.1} s, {}", size(&made));
        }
        let mut state = state.lock().unwrap();
        state.at_work.remove(&item);
        state.n_done += 1;
        (item, made)
    };
    let thread = || {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(1).build().unwrap();
        pool.install(|| std::iter::from_fn(take).map(one).collect::<Vec<_>>())
    };
    let (end, ended) = channel::<()>();
    let mut made: Vec<(u64, T)> = std::thread::scope(|scope| {
        scope.spawn(|| beat(name, n, &state, ended));
        let threads: Vec<_> =
            (0..rayon::current_num_threads()).map(|_| scope.spawn(thread)).collect();
        let made: Result<Vec<_>, _> = threads.into_iter().map(|thread| thread.join()).collect();
        drop(end);
        made.unwrap_or_else(|panic| resume_unwind(panic)).into_iter().flatten().collect()
    });
    made.sort_by_key(|&(item, _)| item);
    made.into_iter().map(|(_, made)| made).collect()
}

/// A line every few seconds until the sender at the other end is dropped: how many are done, and the item at work for longest.
fn beat(name: &str, n: u64, state: &Mutex<State>, ended: Receiver<()>) {
    let start = Instant::now();
    while ended.recv_timeout(BEAT) == Err(RecvTimeoutError::Timeout) {
        let state = state.lock().unwrap();
        let oldest = state.at_work.iter().min_by_key(|(_, begun)| **begun);
        let now = oldest.map_or_else(String::new, |(item, begun)| {
            format!(", at {name} {item} for {:.1} s", begun.elapsed().as_secs_f64())
        });
        println!("{} of {n} done in {:.0} s{now}", state.n_done, start.elapsed().as_secs_f64());
    }
}
