//! The manual page and the completions of shells, both from the definition of the command line.

use clap::CommandFactory;
use clap_complete::Shell;
use clap_mangen::Man;

use super::args::Args;
use super::say;
use crate::refusal::Refusal;

/// Prints the completions of a shell.
pub fn completions(shell: Shell) -> u8 {
    let mut script = Vec::new();
    clap_complete::generate(shell, &mut Args::command(), env!("CARGO_PKG_NAME"), &mut script);
    say(&String::from_utf8_lossy(&script));
    0
}

/// Prints the manual page: the program, then a section for each command.
///
/// # Errors
/// Never in practice: writing to memory does not fail.
pub fn manual() -> Result<u8, Refusal> {
    let failed = |error: std::io::Error| {
        Refusal::new("manual", format!("The manual could not be made: {error}"), "Please report it.")
    };
    let mut command = Args::command();
    command.build();
    let mut page = Vec::new();
    let main = Man::new(command.clone());
    main.render(&mut page).map_err(failed)?;
    for sub in command.get_subcommands().filter(|s| s.get_name() != "help") {
        let mut part = Vec::new();
        let name = sub.get_name().to_uppercase();
        let man = Man::new(sub.clone());
        man.render_synopsis_section(&mut part).map_err(failed)?;
        man.render_description_section(&mut part).map_err(failed)?;
        man.render_options_section(&mut part).map_err(failed)?;
        man.render_extra_section(&mut part).map_err(failed)?;
        // The parts of a command stand below its own heading.
        let part = String::from_utf8_lossy(&part).replace("\n.SH ", "\n.SS ");
        let part = part.strip_prefix(".SH ").map_or(part.clone(), |rest| format!(".SS {rest}"));
        page.extend_from_slice(format!(".SH \"COMMAND {name}\"\n{part}").as_bytes());
    }
    say(&String::from_utf8_lossy(&page).replace("EXTRA", "EXAMPLES AND STATUS"));
    Ok(0)
}
