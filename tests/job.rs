//! The job file: every key, every refusal, sheets, and what a round trip keeps.

// Helpers of tests are not recognised as tests themselves.
#![allow(clippy::unwrap_used)]

use std::path::Path;

use proptest::prelude::*;
use thrustmark::job::{
    Assumption, Decimal, Draw, Govern, Job, LimitCheck, Pattern, Plane, RibDepth, Role, Settings, Support,
    TextHeight, best_match, keys,
};
use thrustmark::refusal::Refusal;
use thrustmark::units::{ForceUnit, LengthUnit};

/// The example of the contract, with every key.
const EVERY_KEY: &str = include_str!("data/every-key.toml");

/// Every key, with all of what is built and nothing else.
const BUILT: &str = r#"
[drawing]
unit = "mm"
scale = 2.0
plane = "xy"
[layers]
axis = "Achse"
loads = ["LAST*", "Lasten"]
[rib]
depth = ["450 mm", 0.3]
width = "12 ft"
tension = false
support = "three-hinged"
[loads]
unit = "tf"
unlabelled = "15 kip"
decimal = ","
[line]
govern = "through"
draw = ["closest"]
through = [[0.0, 0.0], ["10 m", 4.0], [20.0, 0.0]]
[limits]
offset = "50 mm"
ring = 1.0
kern = 1
geometric_factor = 2.0
[accept]
assumed = ["unit", "support"]
[[accept.finding]]
check = "offset"
span = "span 1"
case = "drawn"
up_to = "80 mm"
reason = "surveyed axis"
by = "checker"
until = 2027-06-30
[mark]
prefix = "LINE_"
frozen = true
text_height = "250 mm"
[report]
units = "si"
"#;

fn parse(text: &str) -> Result<Job, Refusal> {
    Job::parse(text.as_bytes(), Some(Path::new("set/thrustmark.toml")))
}

fn settings(text: &str) -> Settings {
    parse(text).unwrap().for_sheet(Path::new("a.dxf")).unwrap()
}

/// The refusal of a text, from the file itself or from the settings for a sheet.
fn refusal(text: &str) -> Refusal {
    match parse(text) {
        Err(refusal) => refusal,
        Ok(job) => match job.for_sheet(Path::new("a.dxf")) {
            Err(refusal) => refusal,
            Ok(_) => panic!("accepted: {text}"),
        },
    }
}

/// Settings without where they came from.
fn bare(mut settings: Settings) -> Settings {
    settings.origin = thrustmark::job::Origin::default();
    settings
}

#[test]
fn an_empty_job_is_the_defaults() {
    assert_eq!(bare(settings("")), Settings::default());
    let default = Settings::default();
    assert_eq!(default.drawing.unit, None);
    assert_eq!(default.drawing.plane, Plane::Auto);
    assert_eq!(default.layers.of(Role::Loads).0[0].as_str(), "ARCH-LOADS*");
    assert_eq!(default.line.govern, Govern::Auto);
    assert_eq!(default.mark.prefix, "THRUST-");
    assert_eq!(default.mark.text_height, TextHeight::Auto);
    assert_eq!(default.rib.depth, None);
    assert_eq!(default.rib.support, None);
    assert_eq!(default.limits, thrustmark::job::Limits::default());
    assert!(!default.states("rib.depth"));
}

#[test]
fn every_built_key_arrives() {
    let settings = settings(BUILT);
    assert_eq!(settings.drawing.unit, Some(LengthUnit::Mm));
    assert_eq!(settings.drawing.scale.to_bits(), 2.0_f64.to_bits());
    assert_eq!(settings.drawing.plane, Plane::Xy);
    assert_eq!(settings.layers.role_of("ACHSE"), Ok(Some(Role::Axis)));
    assert_eq!(settings.layers.role_of("last-1"), Ok(Some(Role::Loads)));
    assert_eq!(settings.layers.role_of("arch-posts"), Ok(Some(Role::Posts)));
    assert_eq!(settings.layers.role_of("ARCH-AXIS"), Ok(None));
    assert_eq!(settings.rib.depth, Some(RibDepth::Linear([0.45, 0.3])));
    assert!((settings.rib.width.unwrap() - 3.6576).abs() < 1e-15);
    assert_eq!(settings.rib.support, Some(Support::ThreeHinged));
    assert_eq!(settings.loads.unit, Some(ForceUnit::Tf));
    assert!((settings.loads.unlabelled_kn().unwrap() - 66.723_324_228_907_5).abs() < 1e-12);
    assert_eq!(settings.loads.decimal, Decimal::Comma);
    assert_eq!(settings.line.govern, Govern::Through);
    assert_eq!(settings.line.draw, [Draw::Closest]);
    assert_eq!(settings.line.through, Some([[0.0, 0.0], [10.0, 4.0], [20.0, 0.0]]));
    assert_eq!(settings.limits.offset, Some(0.05));
    assert_eq!(settings.limits.kern, Some(1.0));
    assert_eq!(settings.limits.geometric_factor, Some(2.0));
    assert_eq!(settings.accept.assumed, [Assumption::Unit, Assumption::Support]);
    let finding = &settings.accept.finding[0];
    assert_eq!(finding.check, LimitCheck::Offset);
    assert_eq!(finding.up_to.to_bits(), 0.08_f64.to_bits());
    assert_eq!(finding.until.unwrap().to_string(), "2027-06-30");
    assert_eq!(settings.mark.prefix, "LINE_");
    assert!(settings.mark.frozen);
    assert_eq!(settings.mark.text_height, TextHeight::Metres(0.25));
    assert_eq!(settings.line_of("drawing.unit"), Some(3));
    assert_eq!(settings.line_of("accept.finding[0].up_to"), Some(33));
    assert_eq!(settings.origin.file.as_deref(), Some(Path::new("set/thrustmark.toml")));
}

#[test]
fn the_hash_is_that_of_the_bytes() {
    let job = Job::parse(b"", None).unwrap();
    // SHA-256 of nothing, FIPS 180-4 example values.
    let nothing = "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855";
    assert_eq!(job.sha256(), nothing);
    assert_eq!(job.for_sheet(Path::new("a.dxf")).unwrap().origin.sha256.unwrap(), nothing);
}

/// Every key of the contract's own example is known and of a good type; nothing stands against it but what is not built.
#[test]
fn the_contract_example_has_only_unbuilt_keys() {
    let problems = Job::problems(EVERY_KEY.as_bytes());
    for problem in &problems {
        assert_eq!(problem.check, "not-built", "{problem}");
        assert!(problem.line.is_some() && !problem.remedy.is_empty());
    }
    let named: Vec<&str> = problems.iter().map(|p| p.message.split('`').nth(1).unwrap()).collect();
    assert!(named.is_empty(), "{named:?}");
}

/// Each key of the list stands in the example of the contract or in a named exception beside it.
#[test]
fn the_example_states_every_known_key() {
    let table: toml::Table = EVERY_KEY.parse().unwrap();
    let beside =
        ["area.level", "traffic.share", "traffic.deck", "accept.finding.span", "accept.finding.case"];
    for path in keys() {
        let mut value = Some(&toml::Value::Table(table.clone())).cloned();
        for part in path.split('.') {
            value = value.and_then(|value| match value {
                toml::Value::Table(table) => table.get(part).cloned(),
                toml::Value::Array(tables) => tables[0].get(part).cloned(),
                _ => None,
            });
        }
        assert!(value.is_some() != beside.contains(&path.as_str()), "{path}");
    }
}

#[test]
fn what_is_not_built_is_refused_by_name() {
    for (text, key) in [
        ("[layers]\njoints = \"I\"", "layers.joints"),
        ("[rib]\njoint_loss = 0.01", "rib.joint_loss"),
        ("[[area]]\nname = \"fill\"\nlevel = 3\nunit_weight = 20\npassive = 3", "area.passive"),
        ("[[sheet]]\nmatch = \"b*\"\nrib.joint_loss = 2", "rib.joint_loss"),
    ] {
        let refusal = refusal(text);
        assert_eq!(refusal.check, "not-built", "{text}: {refusal}");
        assert!(refusal.message.contains(&format!("`{key}`")), "{text}: {refusal}");
        assert!(refusal.remedy.contains("Remove"), "{refusal}");
        let line = refusal.line.unwrap();
        let stated = text.lines().nth(usize::try_from(line).unwrap() - 1).unwrap();
        assert!(stated.contains(key.rsplit('.').next().unwrap()), "{text}: line {line}");
    }
}

#[test]
fn neutral_values_of_what_is_not_built_are_accepted() {
    let text = "[layers]\nintrados = \"ARCH-INTRADOS\"\n[rib]\nunit_weight = 0\njoint_loss = 0.0\ncreep = 0\n\
        imperfection = 0\ndeck_inertia = 0.0\ntemperature = 0\nshrinkage = 0\n\
        movement = { left = [0, 0, 0], right = [0, 0, 0] }\n[mark]\nsuggest = false\n[line]\ndraw = []\nthrough = []\n";
    let settings = settings(text);
    assert_eq!(settings.rib.movement, thrustmark::job::Movement::default());
}

#[test]
fn unknown_keys_name_the_nearest() {
    for (text, line, unknown, known) in [
        ("[rib]\nwidth = 1\ndetph = 0.2", 3, "rib.detph", "depth"),
        ("[limit]\noffset = 1", 1, "limit", "limits"),
        ("[drawing]\nunits = \"m\"", 2, "drawing.units", "unit"),
        ("[rib]\noffset = 1", 2, "rib.offset", "[limits]"),
        ("[mark]\ntextheight = 1", 2, "mark.textheight", "text_height"),
        ("[[sheet]]\nmatch = \"a\"\nlimits.ofset = 1", 3, "limits.ofset", "offset"),
        ("[[sheet]]\nmtach = \"a\"\nmatch = \"b\"", 2, "mtach", "match"),
        ("[[accept.finding]]\nuntill = 2020-01-01", 2, "accept.finding.untill", "until"),
        ("[accept.findings]\ncheck = \"ring\"", 1, "accept.findings", "finding"),
        ("[rib]\nmovement.lift = [0, 0, 0]", 2, "rib.movement.lift", "left"),
    ] {
        let problems = Job::problems(text.as_bytes());
        let problem = problems.iter().find(|p| p.check == "job-key").unwrap_or_else(|| panic!("{text}"));
        assert_eq!(problem.line, Some(line), "{text}");
        assert!(problem.message.contains(&format!("`{unknown}`")), "{problem}");
        assert!(problem.remedy.contains(known), "{problem}");
        assert!(parse(text).is_err());
    }
}

#[test]
fn bad_values_are_refused_at_their_line() {
    for (text, line, words) in [
        ("rib = 3", 1, "must be a table, not a number"),
        ("[area]\nname = \"x\"", 1, "array of tables"),
        ("sheet = 1", 1, "array of tables"),
        ("[drawing]\nunit = \"yd\"", 2, "\"mm\", \"cm\", \"m\", \"in\", \"ft\""),
        ("[drawing]\nunit = 3", 2, "must be a text"),
        ("[drawing]\nscale = 0", 2, "greater than 0"),
        ("[drawing]\nscale = nan", 2, "finite"),
        ("[drawing]\nscale = inf", 2, "finite"),
        ("[drawing]\nscale = 1e999", 2, "finite"),
        ("[drawing]\nplane = \"zz\"", 2, "\"auto\", \"xy\", \"xz\", \"yz\""),
        ("[layers]\naxis = \"\"", 2, "empty"),
        ("[layers]\naxis = []", 2, "no layer"),
        ("[layers]\naxis = [\"A\", 3]", 2, "must be a text"),
        ("[layers]\naxis = \"A\"\nloads = \"a\"", 3, "both name"),
        ("[layers]\naxis = \"arch-loads*\"", 2, "both name"),
        ("[rib]\ndepth = -0.2", 2, "greater than 0"),
        ("[rib]\ndepth = [0.2]", 2, "2 numbers"),
        ("[rib]\ndepth = [0.2,\n\"3 kN\"]", 3, "no unit"),
        ("[rib]\ndepth = \"0,2\"", 2, "comma"),
        ("[rib]\nwidth = true", 2, "not true or false"),
        ("[rib]\ntension = \"yes\"", 2, "true or false"),
        ("[rib]\nvoussoirs = 0", 2, "whole number"),
        ("[rib]\nvoussoirs = 4.5", 2, "whole number"),
        ("[rib]\nsupport = \"none\"\ntension = true", 2, "without tension"),
        ("[rib]\nsupport = \"fixed\"", 2, "\"hingeless\", \"two-hinged\", \"three-hinged\", \"none\""),
        ("[rib]\nfriction = \"0.6 m\"", 2, "no number"),
        ("[loads]\nunit = \"kg\"", 2, "\"kgf\""),
        ("[loads]\nunlabelled = 3", 2, "loads.unit"),
        ("[loads]\nunlabelled = \"3 m\"", 2, "no unit"),
        ("[loads]\nunlabelled = 0", 2, "greater than 0"),
        ("[loads]\ndecimal = \";\"", 2, "\"auto\", \",\", \".\""),
        ("[line]\ngovern = \"nearest\"", 2, "\"closest\""),
        ("[line]\ndraw = [\"closest\", \"closest\"]", 2, "twice"),
        ("[line]\ndraw = \"closest\"", 2, "array"),
        ("[line]\nthrough = [[0, 0], [1, 1]]", 2, "three points"),
        ("[line]\nthrough = [[0, 0], [1, 1], [3, 3]]", 2, "straight line"),
        ("[line]\nthrough = [[1, 1], [1, 1], [1, 1]]", 2, "straight line"),
        ("[line]\nthrough = [[0, 0], [1, 1], [3]]", 2, "2 numbers"),
        ("[line]\nthrough = [[-1e308, 0], [1e308, 1e308], [1e308, 0]]", 2, "straight line"),
        ("[limits]\noffset = 0", 2, "greater than 0"),
        ("[accept]\nassumed = [\"all\"]", 2, "\"encoding\""),
        ("[accept]\nassumed = [\"gaps\", \"gaps\"]", 2, "twice"),
        ("[[accept.finding]]\nup_to = 1\nreason = \"r\"\nby = \"b\"", 1, "no `check`"),
        ("[[accept.finding]]\ncheck = \"kern\"\nreason = \"r\"\nby = \"b\"", 1, "no `up_to`"),
        ("[[accept.finding]]\ncheck = \"kern\"\nup_to = 1\nby = \"b\"", 1, "no `reason`"),
        ("[[accept.finding]]\ncheck = \"kern\"\nup_to = 1\nreason = \"r\"", 1, "no `by`"),
        ("[[accept.finding]]\ncheck = \"kern\"\nup_to = \"1 m\"\nreason = \"r\"\nby = \"b\"", 3, "no number"),
        (
            "[[accept.finding]]\ncheck = \"kern\"\nup_to = 1\nreason = \"r\"\nby = \"b\"\nuntil = \"2027-02-30\"",
            6,
            "day of the calendar",
        ),
        (
            "[[accept.finding]]\ncheck = \"kern\"\nup_to = 1\nreason = \"r\"\nby = \"b\"\nuntil = 2027-02-03T10:00:00",
            6,
            "day of the calendar",
        ),
        (
            "[[accept.finding]]\ncheck = \"kern\"\nup_to = 1\nreason = \"r\"\nby = \"b\"\ncase = \"dead\"",
            6,
            "no [[case]] named",
        ),
        ("[mark]\nprefix = \"A/B\"", 2, "layer name"),
        ("[mark]\nprefix = \"\"", 2, "empty"),
        ("[mark]\nprefix = \"AAAAAAAAAAAAAAAAA\"", 2, "layer name"),
        ("[mark]\ntext_height = \"automatic\"", 2, "begin with a number"),
        ("[mark]\ntext_height = 0", 2, "greater than 0"),
        ("[report]\nunits = \"metric\"", 2, "\"si\", \"us\""),
        ("[[sheet]]\nrib.depth = 1", 1, "no `match`"),
        ("[[sheet]]\nmatch = 3", 2, "must be a text"),
        ("[[sheet]]\nmatch = \"a/b.dxf\"", 2, "without folders"),
        ("[[sheet]]\nmatch = \"b\"\n[[sheet.sheet]]\nmatch = \"c\"", 3, "cannot stand"),
        ("[[sheet]]\nmatch = \"b\"\nrib.depth = -1", 3, "greater than 0"),
    ] {
        let refusal = refusal(text);
        assert_eq!(refusal.line, Some(line), "{text}: {refusal}");
        assert!(refusal.to_string().contains(words), "{text}: {refusal}");
        assert!(refusal.to_string().starts_with("set/thrustmark.toml: line "), "{refusal}");
    }
}

/// Tables whose mechanics are not built are still read in full, so a job written now does not break later.
#[test]
fn bad_values_of_unbuilt_tables() {
    let area = "[[area]]\nname = \"fill\"\nunit_weight = 20\n";
    for (text, words) in [
        (area.to_owned(), "exactly one"),
        (format!("{area}layer = \"F\"\nlevel = 3"), "exactly one"),
        (format!("{area}level = 3\npassive = -1"), "0 or greater"),
        ("[[area]]\nname = \"rib\"\nlevel = 1\nunit_weight = 1".into(), "the rib itself"),
        ("[[area]]\nname = \"Self\"\nlevel = 1\nunit_weight = 1".into(), "the rib itself"),
        ("[[area]]\nname = \"a\"\nlevel = 1".into(), "no `unit_weight`"),
        (format!("{area}level = 3\n{area}level = 4"), "given twice"),
        ("[[case]]\nfactors = { A = 1 }".into(), "no `name`"),
        ("[[case]]\nname = \"x\"\nfactors = { A = 1, a = 2 }".into(), "twice"),
        ("[[case]]\nname = \"x\"\nfactors = { A = -1 }".into(), "0 or greater"),
        ("[[case]]\nname = \"x\"\nfactors = [1]".into(), "table of factors"),
        ("[[case]]\nname = \"x\"\nvary = \"A\"".into(), "an array"),
        ("[[traffic]]\nname = \"t\"\nthrough = \"posts\"\nbraking = 0.2".into(), "top of a post"),
        ("[[traffic]]\nname = \"t\"\nshare = 0.5\neffective_width = 3".into(), "twice"),
        ("[[traffic]]\nname = \"t\"\nshare = 1.5".into(), "at most 1"),
        ("[[traffic]]\nname = \"t\"\naxles = [[0, 1, 2]]".into(), "2 numbers"),
        ("[[traffic]]\nname = \"t\"\naxles = [[0, \"2 m\"]]".into(), "no unit"),
        ("[[traffic]]\nname = \"t\"\nstep = 0".into(), "greater than 0"),
        ("[[traffic]]\nname = \"t\"\ninfluence = [2]".into(), "at most 1"),
        ("[[range]]\nwhat = \"rib.support\"\nlow = 1\nhigh = 2".into(), "nothing that can"),
        ("[[range]]\nwhat = \"rib.depth\"\nlow = 2\nhigh = 1".into(), "greater than `range.high`"),
        ("[[range]]\nwhat = \"rib.depth\"\nlow = 2".into(), "no `high`"),
    ] {
        let problems = Job::problems(text.as_bytes());
        let found = problems.iter().any(|p| p.check != "not-built" && p.message.contains(words));
        assert!(found, "{text}: {problems:?}");
    }
}

#[test]
fn files_that_are_no_job() {
    let syntax = refusal("[rib]\ndepth = 0,2\n");
    assert_eq!((syntax.check.as_str(), syntax.line), ("job-syntax", Some(2)));
    let twice = refusal("[rib]\nwidth = 1\nwidth = 2\n");
    assert_eq!((twice.check.as_str(), twice.line), ("job-syntax", Some(3)));
    let latin = Job::parse(b"[layers]\naxis = \"B\xf6gen\"\n", None).unwrap_err();
    assert_eq!((latin.check.as_str(), latin.line), ("job-file", Some(2)));
    let large = vec![b'#'; usize::try_from(thrustmark::job::LARGEST).unwrap() + 1];
    assert!(Job::parse(&large, None).unwrap_err().message.contains("1 MiB"));
    let deep = format!("a = {}{}", "[".repeat(100_000), "]".repeat(100_000));
    assert_eq!(refusal(&deep).check, "job-syntax");
    let deep_key = format!("{}a = 1", "a.".repeat(100_000));
    assert!(parse(&deep_key).is_err());
    let missing = Job::load(Path::new("no/such/job.toml")).unwrap_err();
    assert_eq!(missing.check, "job-file");
    assert!(missing.to_string().contains("job.toml"));
}

#[test]
fn a_byte_order_mark_and_crlf_are_no_trouble() {
    let settings = settings("\u{feff}[rib]\r\ndepth = 0.2\r\n");
    assert_eq!(settings.rib.depth, Some(RibDepth::Constant(0.2)));
    assert_eq!(settings.line_of("rib.depth"), Some(2));
}

#[test]
fn all_problems_are_told_at_once() {
    let refusal = refusal("[rib]\nwidth = -1\ndetph = 2\njoint_loss = 3\n");
    assert_eq!(refusal.line, Some(2));
    assert!(refusal.message.contains("line 3: `rib.detph`"), "{refusal}");
    assert!(refusal.message.contains("line 4: `rib.joint_loss`"), "{refusal}");
    let many: String = (0..30).map(|n| format!("k{n} = 1\n")).collect();
    assert!(parse(&many).unwrap_err().message.contains("and 21 more"));
}

#[test]
fn sheets_apply_in_order() {
    let text = r#"
[rib]
depth = [0.5, 0.3]
width = 4.0
[limits]
offset = 0.05
[accept]
assumed = ["unit", "layers"]
[[sheet]]
match = "*-EXISTING.dxf"
rib.depth = 0.45
accept.assumed = []
[[sheet]]
match = "b1-*"
[sheet.rib]
width = 5.0
[sheet.limits]
ring = 0.9
[[sheet]]
match = "b?-existing.dxf"
rib.depth = [0.4, 0.35]
"#;
    let job = parse(text).unwrap();
    let plain = job.for_sheet(Path::new("out/a.dxf")).unwrap();
    assert_eq!(plain.rib.depth, Some(RibDepth::Linear([0.5, 0.3])));
    assert_eq!(plain.accept.assumed.len(), 2);
    assert!(plain.origin.sheets.is_empty());
    let one = job.for_sheet(Path::new("b1-existing.dxf/a-Existing.DXF")).unwrap();
    assert_eq!(one.rib.depth, Some(RibDepth::Constant(0.45)));
    assert_eq!(one.rib.width, Some(4.0));
    assert!(one.accept.assumed.is_empty());
    assert_eq!(one.line_of("rib.depth"), Some(11));
    let all = job.for_sheet(Path::new("b1-existing.dxf")).unwrap();
    assert_eq!(all.rib.depth, Some(RibDepth::Linear([0.4, 0.35])));
    assert_eq!(all.rib.width, Some(5.0));
    assert_eq!(all.limits.offset, Some(0.05));
    assert_eq!(all.limits.ring, Some(0.9));
    assert_eq!(all.origin.sheets, ["*-EXISTING.dxf", "b1-*", "b?-existing.dxf"]);
}

#[test]
fn a_contradiction_that_a_sheet_brings_is_told_for_that_sheet() {
    let text = "[rib]\ntension = true\n[[sheet]]\nmatch = \"old*\"\nrib.support = \"none\"\n";
    let job = parse(text).unwrap();
    assert!(job.for_sheet(Path::new("new.dxf")).is_ok());
    let refusal = job.for_sheet(Path::new("old.dxf")).unwrap_err();
    assert_eq!(refusal.line, Some(5));
}

#[test]
fn patterns_and_roles() {
    let patterns = ["DEAD*", "*-LIVE", "DEAD-LIVE"].map(Pattern::new);
    assert_eq!(best_match("dead-live", &patterns), Ok(Some(2)));
    assert_eq!(best_match("dead-load", &patterns), Ok(Some(0)));
    assert_eq!(best_match("wind", &patterns), Ok(None));
    assert_eq!(best_match("dead-x-live", &patterns).unwrap_err().entries, [0, 1]);
    assert!(Pattern::new("BÖGEN?").matches("bögen1"));
    assert!(!Pattern::new("A?").matches("A"));
    let layers = settings("[layers]\naxis = \"S-*\"\nloads = [\"S-L*\", \"S-*-L\", \"S-X\"]").layers;
    assert_eq!(layers.role_of("s-x"), Ok(Some(Role::Loads)));
    assert_eq!(layers.role_of("S-AXIS"), Ok(Some(Role::Axis)));
    assert_eq!(layers.role_of("S-LIVE"), Err([Role::Axis, Role::Loads]));
    assert_eq!(layers.role_of("0"), Ok(None));
}

#[test]
fn the_nearest_file_on_the_way_up_is_found() {
    let folder = tempfile::tempdir().unwrap();
    let deep = folder.path().join("set/part");
    std::fs::create_dir_all(&deep).unwrap();
    let job = folder.path().join("set/thrustmark.toml");
    std::fs::write(&job, "[rib]\ndepth = 0.3\n").unwrap();
    let found = Job::find(&deep.join("a.dxf")).unwrap().unwrap();
    assert_eq!(found.file().unwrap().canonicalize().unwrap(), job.canonicalize().unwrap());
    // By way of a folder and back: the parent of `part/..` is not `part`.
    std::fs::write(deep.join("thrustmark.toml"), "").unwrap();
    let roundabout = Job::locate(&deep.join("../a.dxf")).unwrap();
    assert_eq!(roundabout, job.canonicalize().unwrap());
    assert_eq!(Job::locate(&folder.path().join("nowhere/a.dxf")), None);
    // A file that is there and no job is an error, not passed over.
    std::fs::write(deep.join("thrustmark.toml"), "[").unwrap();
    assert_eq!(Job::find(&deep.join("a.dxf")).unwrap_err().check, "job-syntax");
    std::fs::remove_file(deep.join("thrustmark.toml")).unwrap();
    std::fs::create_dir(deep.join("thrustmark.toml")).unwrap();
    assert_eq!(Job::find(&deep.join("a.dxf")).unwrap_err().check, "job-file");
}

#[test]
fn settings_in_force_are_a_job_again() {
    for text in ["", BUILT] {
        let settings = bare(settings(text));
        let written = settings.to_toml();
        let again = bare(self::settings(&written));
        assert_eq!(again, settings, "{written}");
        assert_eq!(again.to_toml(), written);
    }
    // A layer that is stated stays stated, one that is not does not become so.
    let stated = "[layers]\naxis = \"ARCH-AXIS\"\n";
    let again = settings(&settings(stated).to_toml());
    assert!(again.states("layers.axis") && !again.states("layers.loads"));
    let json = settings(BUILT).to_json();
    assert_eq!(json["rib"]["depth"], serde_json::json!([0.45, 0.3]));
    assert_eq!(json["drawing"]["unit"], "mm");
    assert_eq!(json["accept"]["finding"][0]["until"], "2027-06-30");
    assert_eq!(json["loads"]["unlabelled"], "15 kip");
    assert!(json["rib"].get("strength").is_none());
    assert!(json.get("origin").is_none());
}

fn number() -> impl Strategy<Value = f64> {
    prop_oneof![
        1e-6..1e6_f64,
        Just(1.0),
        Just(0.1),
        any::<f64>().prop_filter("usable", |x| x.is_finite() && *x > 0.0)
    ]
}

fn word() -> impl Strategy<Value = String> {
    // No control characters: those are refused.
    "[A-Za-z0-9äß\"'\\\\#=*? _.-]{0,8}[A-Za-z]"
}

fn quoted(text: &str) -> String {
    toml::Value::String(text.to_owned()).to_string()
}

/// A job with any part of the built keys.
fn job_text() -> impl Strategy<Value = String> {
    let part = |strategy: BoxedStrategy<String>| proptest::option::of(strategy);
    let drawing = prop_oneof![
        Just("unit = \"in\"".to_owned()),
        number().prop_map(|x| format!("scale = {x:e}")),
        Just("plane = \"xy\"".to_owned()),
    ];
    let rib = (number(), number(), any::<bool>())
        .prop_map(|(a, b, tension)| format!("depth = [{a:e}, {b:e}]\nwidth = {b:e}\ntension = {tension}"));
    let units = ["N", "kN", "MN", "kgf", "tf", "lbf", "kip"];
    let loads =
        (number(), proptest::sample::select(units.to_vec()), proptest::sample::select(units.to_vec()))
            .prop_filter_map("overflows", |(x, unit, own)| {
                (x < 1e300).then(|| format!("unit = \"{unit}\"\nunlabelled = \"{x} {own}\""))
            });
    let line = (number(), number())
        .prop_map(|(x, y)| format!("govern = \"closest\"\nthrough = [[0, 0], [{x:e}, {y:e}], [0, {y:e}]]"))
        .prop_filter("three points", |text| parse(&format!("[line]\n{text}")).is_ok());
    let limits = (number(), number()).prop_map(|(a, b)| format!("offset = {a:e}\nring = {b:e}"));
    let finding = (number(), word(), word()).prop_map(|(x, reason, by)| {
        let (reason, by) = (quoted(&reason), quoted(&by));
        format!("check = \"ring\"\nup_to = {x:e}\nreason = {reason}\nby = {by}\nuntil = 2030-01-31")
    });
    let axis = word().prop_map(|axis| format!("axis = {}", quoted(&format!("x{axis}"))));
    let parts = (
        part(drawing.boxed()),
        part(axis.boxed()),
        part(rib.boxed()),
        part(loads.boxed()),
        part(line.boxed()),
        part(limits.boxed()),
        part(finding.boxed()),
    );
    parts.prop_map(|(drawing, layers, rib, loads, line, limits, finding)| {
        [
            ("[drawing]", drawing),
            ("[layers]", layers),
            ("[rib]", rib),
            ("[loads]", loads),
            ("[line]", line),
            ("[limits]", limits),
            ("[[accept.finding]]", finding),
        ]
        .into_iter()
        .filter_map(|(header, body)| body.map(|body| format!("{header}\n{body}\n")))
        .collect()
    })
}

proptest! {
    #[test]
    fn any_bytes_are_read_or_refused(bytes in proptest::collection::vec(any::<u8>(), 0..200)) {
        let _ = Job::parse(&bytes, None);
    }

    #[test]
    fn any_text_is_read_or_refused(text in "[a-z\\[\\]{}=.,\"'\n 0-9-]{0,120}") {
        let _ = Job::parse(text.as_bytes(), None);
    }

    /// Each value of the contract's example in turn replaced by any other: never a panic, and a problem has its line.
    #[test]
    fn any_value_for_any_key(line in 0..200_usize, value in "(-?[0-9]{1,3}(\\.[0-9])?|\"[a-z0-9 ]{0,6}\"|true|\\[\\]|\\[[0-9], \"[a-z]\"\\]|\\{ a = [0-9] \\}|1979-05-27|nan|-inf|9{30})") {
        let text: Vec<String> = EVERY_KEY.lines().enumerate().map(|(number, text)| match text.split_once(" = ") {
            Some((key, _)) if number == line % EVERY_KEY.lines().count() => format!("{key} = {value}"),
            _ => text.to_owned(),
        }).collect();
        let lines = text.len() as u64;
        for problem in Job::problems(text.join("\n").as_bytes()) {
            prop_assert!(problem.line.is_some_and(|line| (1..=lines).contains(&line)));
        }
    }

    #[test]
    fn settings_survive_a_round_trip(text in job_text()) {
        let settings = bare(settings(&text));
        let written = settings.to_toml();
        prop_assert_eq!(bare(self::settings(&written)), settings, "{}", written);
    }
}
