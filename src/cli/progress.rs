//! How far a run over many drawings has come: one line that changes on a terminal, plain lines now and then elsewhere.

use std::io::{self, IsTerminal};
use std::time::{Duration, Instant};

use super::tell;

/// A run that ends sooner says nothing of its progress.
const MOMENT: Duration = Duration::from_secs(1);
/// Between two lines where each stays.
const PLAIN_EVERY: Duration = Duration::from_secs(10);
/// Between two changes of a line on a terminal.
const CHANGE_EVERY: Duration = Duration::from_millis(100);

/// The progress of one run.
pub struct Progress {
    all: usize,
    done: usize,
    refused: usize,
    begun: Instant,
    last: Option<Duration>,
    terminal: bool,
}

impl Progress {
    /// Of a run over so many drawings, told on standard error.
    pub fn new(all: usize) -> Self {
        let dumb = std::env::var_os("TERM").is_some_and(|t| t == "dumb");
        let terminal = io::stderr().is_terminal() && !dumb;
        Self { all, done: 0, refused: 0, begun: Instant::now(), last: None, terminal }
    }

    /// One more is done.
    pub fn step(&mut self, refused: bool) {
        self.done += 1;
        self.refused += usize::from(refused);
        self.tick();
    }

    /// Time has passed.
    pub fn tick(&mut self) {
        if let Some(text) = self.due(self.begun.elapsed()) {
            tell(&if self.terminal { format!("\r\u{1b}[K{text}") } else { format!("{text}\n") });
        }
    }

    /// Clears the line on a terminal; elsewhere what was said stays.
    pub fn end(&self) {
        if self.terminal && self.last.is_some() {
            tell("\r\u{1b}[K");
        }
    }

    /// What is to be said when so much time has passed.
    fn due(&mut self, passed: Duration) -> Option<String> {
        let every = if self.terminal { CHANGE_EVERY } else { PLAIN_EVERY };
        let waited = self.last.map_or(passed >= MOMENT, |last| passed.saturating_sub(last) >= every);
        if !waited || self.all < 2 || self.done == self.all {
            return None;
        }
        self.last = Some(passed);
        let refused = match self.refused {
            0 => String::new(),
            n => format!(", {n} not read"),
        };
        let left = match self.done {
            0 => String::new(),
            done => {
                let left = passed.as_secs_f64() * (self.all - done) as f64 / done as f64;
                format!(", about {} left", words(left))
            }
        };
        Some(format!("{} of {} drawings{refused}{left}", self.done, self.all))
    }
}

/// Seconds in words, no finer than one can use.
fn words(seconds: f64) -> String {
    if seconds < 90.0 { format!("{:.0} s", seconds.ceil()) } else { format!("{:.0} min", seconds / 60.0) }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn progress(terminal: bool) -> Progress {
        Progress { all: 100, done: 0, refused: 0, begun: Instant::now(), last: None, terminal }
    }

    #[test]
    fn says_how_much_time_is_left() {
        let mut p = progress(true);
        let at = Duration::from_millis;
        assert_eq!(p.due(at(500)), None);
        assert_eq!(p.due(at(1000)).unwrap(), "0 of 100 drawings");
        p.done = 10;
        p.refused = 1;
        assert_eq!(p.due(at(1050)), None);
        assert_eq!(p.due(at(2000)).unwrap(), "10 of 100 drawings, 1 not read, about 18 s left");
        p.done = 20;
        assert_eq!(p.due(at(60_000)).unwrap(), "20 of 100 drawings, 1 not read, about 4 min left");
        p.done = 100;
        assert_eq!(p.due(at(90_000)), None);
    }

    #[test]
    fn lines_that_stay_are_few() {
        let mut p = progress(false);
        p.done = 50;
        let said = (0..600).filter(|i| p.due(Duration::from_millis(i * 100)).is_some()).count();
        assert_eq!(said, 6);
    }
}
