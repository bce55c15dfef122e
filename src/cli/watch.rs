//! `watch`: tells on the terminal what became of each drawing that is saved.

use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::thread;

use super::args::WatchArgs;
use super::{compare, say, tell};
use crate::office::watch::{LOOK, Saved, Watch};
use crate::refusal::Refusal;
use crate::write::annotate::heading;
use crate::write::terminal::{self, Style};
use crate::write::text::plain;

/// Runs the command until it is interrupted: 0.
pub fn watch(args: &WatchArgs) -> Result<u8, Refusal> {
    let ended = Arc::new(AtomicBool::new(false));
    let flag = Arc::clone(&ended);
    ctrlc::set_handler(move || flag.store(true, Ordering::Relaxed)).map_err(|error| {
        Refusal::new(
            "signal",
            format!("An interruption cannot be waited for: {error}"),
            "Run it in another terminal.",
        )
    })?;
    let mut watch = Watch::begin(&args.folder, args.job.as_deref())?;
    let drawings = match watch.drawings() {
        1 => "1 drawing".to_owned(),
        n => format!("{n} drawings"),
    };
    say(&format!("watching {}: {drawings}; interrupt to end\n", plain(&args.folder.display().to_string())));
    while !ended.load(Ordering::Relaxed) {
        watch.look(|saved| told(&saved))?;
        thread::sleep(LOOK);
    }
    Ok(0)
}

fn told(saved: &Saved) {
    if let Some(error) = &saved.run.error {
        return tell(&format!("{}: {}\n", plain(&saved.run.drawing.file), plain(&error.to_string())));
    }
    match &saved.changes {
        None => {
            let document = super::document(vec![saved.run.clone()]);
            say(&terminal::summary(&document, &Style { width: super::width(true), ..Style::default() }));
        }
        Some(changes) => {
            let head = heading(saved.run);
            let mut lines = vec![format!("{head}  {}", plain(&saved.run.drawing.file))];
            if changes.is_empty() {
                lines.push("  same       as at the last save".into());
            }
            lines.extend(compare::changes(changes));
            if let Some(output) = &saved.run.output {
                lines.push(format!("  copy       {}", plain(output)));
            }
            say(&(lines.join("\n") + "\n"));
        }
    }
}
