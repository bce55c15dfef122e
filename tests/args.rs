//! The command line as it is parsed.

use std::path::{Path, PathBuf};

use clap::error::ErrorKind;
use clap::{CommandFactory, Parser};
use thrustmark::cli::args::{Args, Command, JsonTarget, SchemaArgs, SchemaOf};

fn parse(arguments: &[&str]) -> Result<Args, clap::Error> {
    Args::try_parse_from(std::iter::once("thrustmark").chain(arguments.iter().copied()))
}

#[test]
fn the_definition_is_consistent() {
    Args::command().debug_assert();
}

#[test]
fn mark_takes_all_options() {
    let arguments = "mark a.dxf set --job j.toml --output out --json r.json --force --verbose \
                     --report r.html --picture p.svg --csv s.csv --junit j.xml";
    let args = parse(&arguments.split_whitespace().collect::<Vec<_>>()).unwrap();
    let Command::Mark(mark) = args.command else { panic!("{args:?}") };
    assert_eq!(mark.check.drawings, [PathBuf::from("a.dxf"), PathBuf::from("set")]);
    assert_eq!(mark.check.job.as_deref(), Some(Path::new("j.toml")));
    assert_eq!(mark.output.as_deref(), Some(Path::new("out")));
    assert_eq!(mark.check.json, Some(JsonTarget::File("r.json".into())));
    assert!(mark.check.force && mark.check.verbose);
    for (given, name) in [
        (&mark.check.report, "r.html"),
        (&mark.check.picture, "p.svg"),
        (&mark.check.csv, "s.csv"),
        (&mark.check.junit, "j.xml"),
    ] {
        assert_eq!(given.as_deref(), Some(Path::new(name)));
    }
}

#[test]
fn check_unmark_list_and_schema() {
    let Command::Check(check) = parse(&["check", "--json", "-", "a.dxf"]).unwrap().command else { panic!() };
    assert!(!check.no_store);
    let check = check.check;
    assert_eq!(check.json, Some(JsonTarget::Stdout));
    assert_eq!((check.job, check.force, check.verbose), (None, false, false));
    let Command::Unmark(unmark) = parse(&["unmark", "a.thrust.dxf", "-f", "-o", "a.dxf"]).unwrap().command
    else {
        panic!()
    };
    assert_eq!(unmark.drawing, Path::new("a.thrust.dxf"));
    assert_eq!(unmark.output.as_deref(), Some(Path::new("a.dxf")));
    assert!(unmark.force);
    let Command::List(list) = parse(&["list", "a.dxf", "-j", "x.toml"]).unwrap().command else { panic!() };
    assert_eq!(list.job.as_deref(), Some(Path::new("x.toml")));
    for (given, of) in [
        (&["schema"][..], SchemaOf::Check),
        (&["schema", "verify"], SchemaOf::Verify),
        (&["schema", "compare"], SchemaOf::Compare),
    ] {
        assert_eq!(parse(given).unwrap().command, Command::Schema(SchemaArgs { of }));
    }
}

#[test]
fn wrong_usage_is_two_on_stderr() {
    for arguments in [
        &[][..],
        &["mark"],
        &["check"],
        &["unmark"],
        &["list"],
        &["verify"],
        &["watch"],
        &["compare", "a.dxf"],
        &["mark", "a.dxf", "--pdf", "x"],
        &["mark", "a.dxf", "--job"],
        &["mark", "--force"],
        &["check", "a.dxf", "--output", "b"],
        &["unmark", "a", "b"],
        &["list", "a", "--write-job"],
        &["mark", "a.dxf", "--no-store"],
        &["schema", "x"],
        &["mark", ""],
    ] {
        let error = parse(arguments).unwrap_err();
        assert_eq!(error.exit_code(), 2, "{arguments:?}");
        assert!(error.use_stderr(), "{arguments:?}");
    }
    let help = parse(&[]).unwrap_err();
    assert_eq!(help.kind(), ErrorKind::DisplayHelpOnMissingArgumentOrSubcommand);
    assert!(help.to_string().contains("Exit status:"));
}

#[test]
fn help_tells_examples_status_and_caution() {
    for command in [
        "mark",
        "check",
        "unmark",
        "list",
        "verify",
        "compare",
        "watch",
        "demo",
        "schema",
        "completions",
        "manual",
    ] {
        let help = parse(&[command, "--help"]).unwrap_err();
        assert_eq!((help.kind(), help.exit_code()), (ErrorKind::DisplayHelp, 0));
        let text = help.to_string();
        assert!(text.contains("Example") && text.contains("Exit status"), "{text}");
        assert!(text.lines().all(|line| line.chars().count() <= 100), "{text}");
        let judges = matches!(command, "mark" | "check");
        assert_eq!(text.contains("Caution: the results are a check by calculation"), judges, "{text}");
        assert_eq!(text.contains("3  unchecked"), judges, "{text}");
    }
    let version = parse(&["--version"]).unwrap_err();
    assert_eq!((version.kind(), version.exit_code()), (ErrorKind::DisplayVersion, 0));
}

/// Every example in the help is a command line that is accepted.
#[test]
fn examples_of_the_help_parse() {
    let mut found = 0;
    for command in [
        "",
        "mark",
        "check",
        "unmark",
        "list",
        "verify",
        "compare",
        "watch",
        "demo",
        "schema",
        "completions",
        "manual",
    ] {
        let arguments: Vec<&str> = [command, "--help"].into_iter().filter(|a| !a.is_empty()).collect();
        let text = parse(&arguments).unwrap_err().to_string();
        for line in text.lines().filter_map(|line| line.strip_prefix("  thrustmark ")) {
            // What follows two spaces explains; what follows > is the shell's.
            let line = line.split("  ").next().unwrap().split('>').next().unwrap();
            let words: Vec<&str> = line.split_whitespace().collect();
            parse(&words).unwrap_or_else(|error| panic!("{line}: {error}"));
            found += 1;
        }
    }
    assert!(found >= 12, "{found} examples");
}

#[cfg(unix)]
#[test]
fn paths_need_not_be_utf_8() {
    use std::ffi::OsStr;
    use std::os::unix::ffi::OsStrExt;
    let name = OsStr::from_bytes(b"br\xfccke.dxf");
    let words = ["thrustmark", "mark", "--json"].map(OsStr::new);
    let args = Args::try_parse_from(words.into_iter().chain([name, name])).unwrap();
    let Command::Mark(mark) = args.command else { panic!() };
    assert_eq!(mark.check.drawings, [PathBuf::from(name)]);
    assert_eq!(mark.check.json, Some(JsonTarget::File(name.into())));
}
