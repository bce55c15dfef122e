//! What the program is made of: licences as `.deny.toml` allows them, one registry, nothing that speaks to a network.

#![allow(clippy::unwrap_used, clippy::print_stderr)]

use std::collections::BTreeSet;
use std::fs;
use std::path::Path;
use std::process::Command;

use serde_json::Value;

fn settings() -> toml::Table {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(".deny.toml");
    fs::read_to_string(path).unwrap().parse().unwrap()
}

fn names(settings: &toml::Table, table: &str, key: &str) -> BTreeSet<String> {
    let list = settings[table][key].as_array().unwrap();
    list.iter().map(|n| n.as_str().unwrap().to_owned()).collect()
}

/// All packages and what is switched on in them, for the machine that runs this.
fn metadata() -> Value {
    let target = Command::new("rustc").arg("-vV").output().unwrap();
    let target = String::from_utf8(target.stdout).unwrap();
    let target = target.lines().find_map(|l| l.strip_prefix("host: ")).unwrap().to_owned();
    let output = Command::new(env!("CARGO"))
        .args(["metadata", "--format-version", "1", "--locked", "--offline", "--filter-platform", &target])
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .output()
        .unwrap();
    assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
    serde_json::from_slice(&output.stdout).unwrap()
}

/// Whether an expression of licences can be met by those allowed: one of each group of alternatives.
fn met(licence: &str, allowed: &BTreeSet<String>) -> bool {
    let licence = licence.replace(" / ", " OR ").replace('/', " OR ");
    let group = |part: &str| {
        part.trim_matches(['(', ')', ' '])
            .split(" OR ")
            .any(|l| allowed.contains(l.trim_matches(['(', ')', ' '])))
    };
    licence.split(" AND ").all(group)
}

#[test]
fn expressions_of_licences() {
    let allowed: BTreeSet<String> = ["MIT", "BSD-3-Clause"].map(String::from).into();
    assert!(met("MIT", &allowed) && met("GPL-3.0 OR MIT", &allowed) && met("MIT/Apache-2.0", &allowed));
    assert!(met("(Apache-2.0 OR MIT) AND BSD-3-Clause", &allowed));
    assert!(!met("GPL-3.0", &allowed) && !met("(MIT OR Zlib) AND GPL-3.0", &allowed));
}

#[test]
fn every_package_has_a_licence_that_is_allowed_and_comes_from_the_registry() {
    let (settings, metadata) = (settings(), metadata());
    let allowed = names(&settings, "licenses", "allow");
    let packages = metadata["packages"].as_array().unwrap();
    assert!(packages.len() > 50, "{}", packages.len());
    for package in packages {
        let name = package["name"].as_str().unwrap();
        let licence = package["license"].as_str().unwrap_or_default();
        assert!(met(licence, &allowed), "{name}: {licence:?}");
        let ours = name == env!("CARGO_PKG_NAME");
        let registry = package["source"].as_str().is_some_and(|s| s.starts_with("registry+"));
        assert!(ours || registry, "{name}: {}", package["source"]);
    }
}

#[test]
fn no_package_speaks_to_a_network() {
    let (settings, metadata) = (settings(), metadata());
    let denied = names(&settings, "bans", "deny");
    assert!(denied.contains("reqwest"));
    for package in metadata["packages"].as_array().unwrap() {
        let name = package["name"].as_str().unwrap();
        assert!(!denied.contains(name), "{name} is linked");
    }
    for node in metadata["resolve"]["nodes"].as_array().unwrap() {
        let features = node["features"].as_array().unwrap();
        let net = features
            .iter()
            .any(|f| f.as_str().is_some_and(|f| ["net", "network", "tcp", "udp"].contains(&f)));
        assert!(!net, "{}: {features:?}", node["id"]);
    }
}

/// What the program asks of the system's libraries, as `nm` lists it.
#[cfg(target_os = "linux")]
#[test]
fn the_program_asks_the_system_for_no_socket() {
    let listed =
        Command::new("nm").args(["-D", "--undefined-only", env!("CARGO_BIN_EXE_thrustmark")]).output();
    let Ok(listed) = listed else {
        return eprintln!("skipped: there is no nm here to list what the program asks of the system");
    };
    let listed = String::from_utf8(listed.stdout).unwrap();
    let asked: BTreeSet<&str> =
        listed.split_whitespace().map(|n| n.split('@').next().unwrap_or_default()).collect();
    assert!(
        asked.contains("write") && asked.contains("malloc"),
        "names are not found where they are looked for"
    );
    for name in
        ["socket", "connect", "bind", "listen", "accept", "accept4", "getaddrinfo", "sendto", "recvfrom"]
    {
        assert!(!asked.contains(name), "{name}");
    }
}
