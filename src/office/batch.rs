//! Many drawings at once. Results stand in the order of the drawings, whatever the number of threads, and a fault of the
//! program in one drawing is an error of that drawing alone.

use std::cell::{Cell, RefCell};
use std::io;
use std::num::NonZeroUsize;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::atomic::{AtomicUsize, Ordering};
use std::sync::mpsc::{self, RecvTimeoutError};
use std::thread;
use std::time::Duration;

use crate::refusal::Refusal;

/// Stack of a thread that works on a drawing, bytes: that of a main thread with room to spare, since blocks nest.
const STACK: usize = 16 << 20;

/// How often a waiting caller is told that time goes on.
const TICK: Duration = Duration::from_millis(200);

/// What goes on in a batch.
#[derive(Debug)]
pub enum Event<'a, T> {
    /// One thing is done; things come in the order in which they end.
    Done(&'a T),
    /// A fifth of a second has passed.
    Tick,
}

/// One thread for each processor that the program may use.
pub fn processors() -> NonZeroUsize {
    thread::available_parallelism().unwrap_or(NonZeroUsize::MIN)
}

/// Does `work` for `0..count` on so many threads. `faulty` words a fault of the program (a panic) in one of them; `tell` is
/// called on the caller's own thread. The results are in order of the numbers and depend on no thread.
///
/// # Errors
/// When the system gives no thread at all.
pub fn in_order<T: Send>(
    count: usize,
    threads: NonZeroUsize,
    work: impl Fn(usize) -> T + Sync,
    faulty: impl Fn(usize, Refusal) -> T + Sync,
    mut tell: impl FnMut(Event<T>),
) -> Result<Vec<T>, Refusal> {
    let next = AtomicUsize::new(0);
    let (send, receive) = mpsc::channel();
    let mut results: Vec<Option<T>> = std::iter::repeat_with(|| None).take(count).collect();
    thread::scope(|scope| {
        let mut started = 0;
        for _ in 0..threads.get().min(count) {
            let (send, next, work, faulty) = (send.clone(), &next, &work, &faulty);
            let each = move || {
                loop {
                    let number = next.fetch_add(1, Ordering::Relaxed);
                    if number >= count {
                        return;
                    }
                    let done = guarded(|| work(number)).unwrap_or_else(|refusal| faulty(number, refusal));
                    if send.send((number, done)).is_err() {
                        return;
                    }
                }
            };
            match thread::Builder::new().stack_size(STACK).spawn_scoped(scope, each) {
                Ok(_) => started += 1,
                // With fewer threads than asked for it takes longer, and that is all.
                Err(_) if started > 0 => break,
                Err(error) => return Err(no_thread(&error)),
            }
        }
        drop(send);
        loop {
            match receive.recv_timeout(TICK) {
                Ok((number, done)) => {
                    tell(Event::Done(&done));
                    results[number] = Some(done);
                }
                Err(RecvTimeoutError::Timeout) => tell(Event::Tick),
                Err(RecvTimeoutError::Disconnected) => return Ok(()),
            }
        }
    })?;
    Ok(results.into_iter().flatten().collect())
}

fn no_thread(error: &io::Error) -> Refusal {
    Refusal::new(
        "threads",
        format!("The system gives no thread to work on: {error}"),
        "Close other programs, or raise the limit of processes.",
    )
}

thread_local! {
    /// Whether this thread is inside [`guarded`].
    static INSIDE: Cell<bool> = const { Cell::new(false) };
    /// What was said of the last panic inside.
    static SAID: RefCell<Option<String>> = const { RefCell::new(None) };
}

/// Keeps what a panic inside [`guarded`] says for the refusal made of it, where the default is to print it; other
/// panics are told as before. For programs; a library leaves the hook to its caller.
pub fn keep_panics() {
    let before = std::panic::take_hook();
    std::panic::set_hook(Box::new(move |info| {
        if INSIDE.get() {
            let place = info.location().map(|l| format!(" ({}:{})", l.file(), l.line())).unwrap_or_default();
            SAID.set(Some(format!("{}{place}", words(info.payload()))));
        } else {
            before(info);
        }
    }));
}

/// What a panic says.
fn words(payload: &(dyn std::any::Any + Send)) -> String {
    let text = payload.downcast_ref::<&str>().map(|s| (*s).to_owned());
    text.or_else(|| payload.downcast_ref::<String>().cloned()).unwrap_or_else(|| "no message".into())
}

/// Runs `work`; a panic in it becomes a refusal.
///
/// # Errors
/// A refusal with check `internal` when `work` panics.
pub fn guarded<T>(work: impl FnOnce() -> T) -> Result<T, Refusal> {
    let outer = INSIDE.replace(true);
    let done = catch_unwind(AssertUnwindSafe(work));
    INSIDE.set(outer);
    done.map_err(|payload| {
        let said = SAID.take().unwrap_or_else(|| words(payload.as_ref()));
        Refusal::new(
            "internal",
            format!("A fault of thrustmark itself stopped this drawing: {said}"),
            "Please report it with the drawing; other drawings are not touched by it.",
        )
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn threads(n: usize) -> NonZeroUsize {
        NonZeroUsize::new(n).unwrap()
    }

    #[test]
    fn results_stand_in_order_whatever_the_threads() {
        let slow_first = |i: usize| {
            thread::sleep(Duration::from_millis(if i.is_multiple_of(5) { 10 } else { 0 }));
            i * i
        };
        let expected: Vec<usize> = (0..40).map(|i| i * i).collect();
        for n in [1, 2, 7, 100] {
            let mut told = 0;
            let done = in_order(
                40,
                threads(n),
                slow_first,
                |_, _| 0,
                |e| {
                    told += usize::from(matches!(e, Event::Done(_)));
                },
            );
            assert_eq!(done.unwrap(), expected);
            assert_eq!(told, 40);
        }
        assert_eq!(in_order(0, threads(2), |i| i, |i, _| i, |_| ()).unwrap(), [0; 0]);
    }

    #[test]
    fn a_fault_in_one_leaves_the_others() {
        let work = |i: usize| {
            assert!(i != 3, "number {i} is bad");
            i.to_string()
        };
        let done = in_order(6, threads(2), work, |i, refusal| format!("{i}: {refusal}"), |_| ()).unwrap();
        assert_eq!(done[2], "2");
        assert_eq!(done[5], "5");
        assert!(
            done[3].starts_with("3: A fault of thrustmark itself") && done[3].contains("number 3 is bad")
        );
    }

    #[test]
    fn time_goes_on_while_one_waits() {
        let mut ticks = 0;
        let sleep = |_| thread::sleep(Duration::from_millis(700));
        in_order(1, threads(1), sleep, |_, _| (), |e| ticks += usize::from(matches!(e, Event::Tick)))
            .unwrap();
        assert!(ticks >= 1);
    }
}
