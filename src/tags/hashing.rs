//! The SHA-256 of a source, computed beside other work.

use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::thread::{Builder, JoinHandle};

use crate::refusal::Refusal;
use crate::tags::source::Source;

/// Below this many bytes a thread costs more than it saves.
const SMALL: u64 = 512 << 10;

/// A hash on its way. Dropping it stops the work.
#[derive(Debug)]
pub struct Hashing {
    source: Source,
    stop: Arc<AtomicBool>,
    thread: Option<JoinHandle<Result<String, Refusal>>>,
}

impl Hashing {
    /// Begins to hash a source.
    pub fn start(source: &Source) -> Self {
        let stop = Arc::new(AtomicBool::new(false));
        let spawn = || {
            let (source, stop) = (source.clone(), Arc::clone(&stop));
            // Where no thread is to be had, the work is done when its result is asked for.
            Builder::new().name("hash".to_owned()).spawn(move || source.sha256_unless(&stop)).ok()
        };
        let thread = if source.len() > SMALL { spawn() } else { None };
        Self { source: source.clone(), stop, thread }
    }

    /// Whether it is being computed at this moment, beside other work.
    pub fn runs(&self) -> bool {
        self.thread.as_ref().is_some_and(|thread| !thread.is_finished())
    }

    /// Waits for the hash: lower-case hexadecimal digits.
    ///
    /// # Errors
    /// When the file cannot be read.
    pub fn finish(mut self) -> Result<String, Refusal> {
        match self.thread.take().map(JoinHandle::join) {
            Some(Ok(result)) => result,
            // A thread that came to nothing is made up for here.
            Some(Err(_)) | None => self.source.sha256(),
        }
    }
}

impl Drop for Hashing {
    fn drop(&mut self) {
        self.stop.store(true, Ordering::Relaxed);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn beside_other_work_or_not_it_is_the_same() {
        for length in [0, 1, 511 << 10, (3 << 20) + 5] {
            let source = Source::from_bytes(vec![b'a'; length]);
            assert_eq!(Hashing::start(&source).finish().unwrap(), source.sha256().unwrap());
            drop(Hashing::start(&source));
        }
    }
}
