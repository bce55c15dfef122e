//! What the drawing says of itself: posts, dimensions, title block, notes about the scale, the roadway in plan.

use std::fmt::Write as _;

use thrustmark::outcome::{Check, Finding, FindingVerdict, Run, Verdict};

use super::{acts, arch, loads};
use crate::sheet::Sheet;

const JOB: &str = "[rib]\nsupport = \"none\"\ndepth = 0.8\n[limits]\noffset = 9\nring = 9\n";

/// Height of the axis at an abscissa.
fn axis(x: f64) -> f64 {
    (100.0 - x * x).sqrt()
}

#[test]
fn loads_at_the_deck_end_of_a_post_act_where_it_meets_the_rib() {
    let mut sheet = arch();
    // Upright, as a line to the extrados, with the load on its top and a hand's breadth above it; as an outline; leaning 3 in 10.
    sheet.line("ARCH-POSTS", [-6.0, 13.0], [-6.0, 8.6]);
    sheet.load("ARCH-LOADS", [-6.0, 13.1], "100 kN");
    sheet.polyline("ARCH-POSTS", &[[-3.2, 13.0], [-2.8, 13.0], [-2.8, 9.9], [-3.2, 9.9]], true, &[]);
    sheet.load("ARCH-LOADS", [-3.0, 13.0], "60 kN");
    let slope = 0.3;
    let lean = |y: f64| [4.0 + slope * (y - 13.0), y];
    sheet.polyline("ARCH-POSTS", &[lean(9.9), lean(13.0)], false, &[]);
    sheet.load("ARCH-LOADS", lean(13.0), "50 kN");
    let run = sheet.run(JOB);
    let all = loads(&run);
    acts(&all[0], [-6.0, axis(-6.0)], [0.0, -100.0]);
    acts(&all[1], [-3.0, axis(-3.0)], [0.0, -60.0]);
    // Down the leaning post: its upright part is the load, its line the post's.
    let (at, force) = (all[2].at, all[2].force);
    assert!((at[0] - lean(at[1])[0]).abs() < 1e-9 && (at[0].hypot(at[1]) - 10.0).abs() < 1e-9);
    assert!((force[1] + 50.0).abs() < 1e-9 && (force[0] + 50.0 * slope).abs() < 1e-9, "{force:?}");
    let posts: Vec<&str> = all.iter().map(|l| l.post.as_ref().unwrap().kind.as_str()).collect();
    assert_eq!(posts, ["LINE", "LWPOLYLINE", "LWPOLYLINE"]);
    let told = run.findings.iter().find(|f| f.message.contains("act down them")).unwrap();
    assert!(told.message.contains("15.0000 sideways") && !told.unchecks, "{}", told.message);
    assert_eq!(run.verdict, Some(Verdict::Within));
    assert!(!run.findings.iter().any(|f| f.message.contains("which is not read")));
}

#[test]
fn posts_that_carry_nothing_and_loads_between_posts_are_told() {
    let mut sheet = arch();
    for x in [-6.0, 6.0] {
        sheet.line("ARCH-POSTS", [x, 13.0], [x, axis(x)]);
        sheet.load("ARCH-LOADS", [x, 13.0], "100 kN");
    }
    // Between the posts at the deck, and on the rib itself.
    sheet.load("ARCH-LOADS", [2.0, 13.0], "7 kN");
    sheet.load("ARCH-LOADS", [-2.0, axis(-2.0)], "8 kN");
    // No posts: one that ends in the air, one that lies flat.
    sheet.line("ARCH-POSTS", [0.0, 20.0], [0.0, 14.0]);
    sheet.line("ARCH-POSTS", [3.0, axis(3.0)], [8.0, axis(3.0) + 0.5]);
    let run = sheet.run(JOB);
    assert_eq!(loads(&run).len(), 4);
    let told = |words: &str| run.findings.iter().filter(|f| f.message.contains(words)).collect::<Vec<_>>();
    assert!(told("1 loads stand between posts")[0].unchecks);
    assert_eq!((told("does not reach the rib").len(), told("flatter than 30°").len()), (1, 1));
    // A layer of posts that the job names and that is not there is refused.
    let error = arch().run("[layers]\nposts = \"PILLARS\"\n").error.unwrap();
    assert_eq!(error.check, "layer-missing");
}

/// A dimension between two points, turned by an angle in degrees, with a text of its own.
fn dimension(sheet: &mut Sheet, p: [f64; 2], q: [f64; 2], angle: f64, text: &str) {
    sheet.add(
        "DIMENSION",
        "DIMS",
        &[(10, q[0]), (20, q[1]), (13, p[0]), (23, p[1]), (14, q[0]), (24, q[1]), (50, angle), (70, 32.0)],
    );
    sheet.more(1, text);
}

fn about(run: &Run) -> Vec<&Finding> {
    assert!(run.error.is_none(), "{:?}", run.error);
    run.findings.iter().filter(|f| f.check == Check::Dimension).collect()
}

#[test]
fn dimensions_are_held_against_the_drawn_arch() {
    let half = 75_f64.sqrt();
    let job = format!("{JOB}dimension = 0.005\n");
    let mut base = arch();
    base.load("ARCH-LOADS", [0.0, 11.0], "100 kN");
    // (points, angle, text, what, apart)
    let (springing, crown) = (5.0, 10.0);
    let normal = [-(60_f64.to_radians().sin()), 0.5];
    for (p, q, angle, text, what, apart) in [
        ([-half, springing], [half, springing], 0.0, "", "span", 0.0),
        ([half, springing], [-half, springing], 180.0, "<>", "span", 0.0),
        ([-half, springing], [half, springing], 0.0, "L = 17.30", "span", 2.0 * half - 17.30),
        ([-half, springing], [half, springing], 0.0, "17,320 m", "span", 2.0 * half - 17.32),
        ([-half, springing], [half, springing], 0.0, "\\A1;17 320", "span", 2.0 * half - 17.32),
        ([-half, springing], [half, springing], 0.0, "56'-10\"", "span", 56.0 * 0.3048 + 0.254 - 2.0 * half),
        // Drawn a little off, as after a change of the arch.
        ([-half, springing], [half + 0.1, springing], 0.0, "", "span", 0.1),
        ([-half, springing], [0.0, crown], 90.0, "f = 5000", "rise", 0.0),
        ([half + 1.0, springing], [0.0, crown], 90.0, "", "rise", 0.0),
        ([half, springing], [0.0, crown], 270.0, "4.90", "rise", 0.1),
        ([0.0, crown - 0.4], [0.0, crown + 0.4], 90.0, "80", "depth", 0.0),
        ([0.0, crown + 0.4], [0.0, crown - 0.4], 90.0, "750", "depth", 0.05),
    ] {
        let mut sheet = base.clone();
        dimension(&mut sheet, p, q, angle, text);
        let run = sheet.run(&job);
        let found = about(&run);
        assert_eq!(found.len(), 1, "{text} {what}: {found:#?}");
        let finding = found[0];
        assert!(finding.message.contains(&format!("for the {what}")), "{text}: {}", finding.message);
        assert!((finding.value.unwrap() - apart).abs() < 1e-9, "{text}: {:?} {apart}", finding.value);
        let by_hand = !text.is_empty() && text != "<>";
        assert_eq!(finding.message.contains("written in place"), by_hand);
        let holds = apart <= 0.005;
        assert_eq!(finding.verdict == FindingVerdict::Within, holds, "{text}");
        assert_eq!(run.verdict, Some(if holds { Verdict::Within } else { Verdict::Outside }), "{text}");
        assert_eq!(finding.limit, Some(0.005));
        // Without a limit it is told all the same.
        let run = sheet.run(JOB);
        assert_eq!(about(&run)[0].verdict, FindingVerdict::Note);
        assert_eq!(run.verdict, Some(Verdict::Within));
    }
    // Across the ring at the springing, measured along its points.
    let mut sheet = base.clone();
    let at = |off: f64| [-half + off * normal[0], springing + off * normal[1]];
    let (p, q) = (at(-0.4), at(0.4));
    sheet.add("DIMENSION", "DIMS", &[(13, p[0]), (23, p[1]), (14, q[0]), (24, q[1]), (70, 33.0)]);
    let run = sheet.run(&job);
    assert!(about(&run)[0].message.contains("for the depth") && about(&run)[0].value.unwrap() < 1e-9);
    // An exception covers it.
    let mut sheet = base.clone();
    dimension(&mut sheet, [-half, springing], [half, springing], 0.0, "17.30");
    let accepted = format!(
        "{job}[[accept.finding]]\ncheck = \"dimension\"\nup_to = \"30 mm\"\nreason = \"as built\"\nby = \"checker\"\n"
    );
    assert_eq!(about(&sheet.run(&accepted))[0].verdict, FindingVerdict::Accepted);
    // A limit with nothing to hold against is not judged; dimensions of other parts count nothing.
    let mut sheet = base.clone();
    dimension(&mut sheet, [-half, 0.0], [-half, springing], 90.0, "5.00");
    dimension(&mut sheet, [0.0, 0.0], [3.0, 0.0], 0.0, "");
    let run = sheet.run(&job);
    assert!(run.findings.iter().any(|f| f.check == Check::NotJudged && f.unchecks));
    assert!(about(&run)[0].message.starts_with("1 dimensions of other parts have a text"));
    // A text that says no length.
    let mut sheet = base;
    dimension(&mut sheet, [-half, springing], [half, springing], 0.0, "varies");
    let run = sheet.run(&job);
    assert!(about(&run)[0].message.contains("no length that could be meant") && about(&run)[0].unchecks);
}

#[test]
fn notes_that_it_is_not_to_scale_are_told() {
    for (says, told) in [
        ("ELEVATION (N.T.S.)", true),
        ("nicht ma\\U+00DFst\\U+00E4blich", true),
        ("Do not scale", false),
        ("1:50", false),
    ] {
        let mut sheet = arch();
        sheet.load("ARCH-LOADS", [0.0, 11.0], "100 kN");
        sheet.text("NOTES", [0.0, 0.0], 0.2, says);
        let run = sheet.run(JOB);
        let found = about(&run);
        assert_eq!(found.len(), usize::from(told), "{says}");
        assert_eq!(run.verdict, Some(if told { Verdict::Unchecked } else { Verdict::Within }));
    }
}

/// A reference with attributes, in paper space or not.
fn block(sheet: &mut Sheet, paper: bool, attributes: &[(&str, &str)]) {
    sheet.add("INSERT", "SHEET", &[(10, 1.0), (20, 1.0), (66, 1.0), (67, f64::from(u8::from(paper)))]);
    sheet.more(2, "TITLE");
    let text = sheet.0.last_mut().unwrap();
    for (tag, value) in attributes {
        write!(text, "  0\nATTRIB\n  8\nSHEET\n 10\n0\n 20\n0\n 40\n2.5\n  1\n{value}\n  2\n{tag}\n")
            .unwrap();
    }
    text.push_str("  0\nSEQEND\n");
}

#[test]
fn sheet_and_revision_stand_in_the_title_block() {
    let mut base = arch();
    base.load("ARCH-LOADS", [0.0, 11.0], "100 kN");
    let told = |sheet: &Sheet, job: &str| {
        let run = sheet.run(job);
        assert!(run.error.is_none());
        let unclear = run.findings.iter().any(|f| f.message.contains("title block"));
        (run.drawing.sheet, run.drawing.revision, unclear)
    };
    let some = |s: &str| Some(s.to_owned());
    for (attributes, sheet, revision) in [
        (&[("SHEET_NO", "B-204"), ("REV", "C"), ("TITLE", "Arch")][..], "B-204", "C"),
        (&[("PLAN-NR.", "17/3"), ("INDEX", "b")], "17/3", "b"),
        (&[("NUMERO_PLAN", "A12"), ("INDICE", "0")], "A12", "0"),
        (&[("Hoja", "3"), ("Revision", "2")], "3", "2"),
        (&[("DWG_NO", "S-100"), ("SHEET", "1 of 4"), ("REVISION", "P02")], "S-100", "P02"),
    ] {
        let mut drawing = base.clone();
        block(&mut drawing, true, attributes);
        assert_eq!(told(&drawing, JOB), (some(sheet), some(revision), false), "{attributes:?}");
    }
    // By a pattern of the job where the guess fails or is wrong; two blocks that differ; a pattern that meets nothing.
    let mut drawing = base.clone();
    block(&mut drawing, true, &[("X_NUMBER_7", "B-9"), ("REV", ""), ("X_STATE", "D"), ("SHEET", "wrong")]);
    let job = format!("{JOB}[title]\nsheet = \"x_num*\"\nrevision = \"X_STATE\"\n");
    assert_eq!(told(&drawing, &job), (some("B-9"), some("D"), false));
    block(&mut drawing, false, &[("SHEET", "other")]);
    assert_eq!(told(&drawing, JOB), (None, None, true));
    assert_eq!(told(&drawing, &format!("{JOB}[title]\nsheet = \"NUMMER\"\n")), (None, None, true));
    // In the note block of the marked copy.
    let mut drawing = base;
    block(&mut drawing, true, &[("SHEET_NO", "B-204"), ("REV", "C")]);
    let (_, copy) = drawing.marked(JOB);
    assert!(copy.contains("B-204, revision C"));
}

/// Couples by hand: a road on a circle of 50 m in plan whose chord over the springings is the plane of the rib.
#[test]
fn a_roadway_curved_in_plan_gives_couples() {
    let half = 75_f64.sqrt();
    let mut sheet = arch();
    for (x, p) in [(-6.0, 30.0), (0.0, 50.0), (4.0, 20.0)] {
        sheet.load("ARCH-LOADS", [x, 11.5], &format!("{p} kN"));
    }
    // Drawn 40 m below the elevation.
    sheet.arc("ARCH-PLAN", [0.0, -40.0 - 50.0], 50.0, 60.0, 120.0);
    let run = sheet.run(JOB);
    let beside = |x: f64| (2500.0 - x * x).sqrt() - (2500.0 - half * half).sqrt();
    let all = loads(&run);
    let mut sum = 0.0;
    for load in all {
        let y = load.sideways.unwrap();
        assert!((y - beside(load.at[0])).abs() < 1e-9);
        sum -= y * load.force[1];
    }
    let finding = run.findings.iter().find(|f| f.message.starts_with("couples of the loads")).unwrap();
    assert!((finding.value.unwrap() - sum).abs() < 1e-9 && finding.check == Check::LeftOut);
    assert!(finding.message.contains(&format!("{:.3} m beside the rib", sum / 100.0)), "{}", finding.message);
    assert!(finding.message.contains("leaves this part out"));
    assert!(
        run.findings.iter().any(|f| f.message.contains("was taken through its points over the springings"))
    );
    // With the rib drawn in plan its line counts, and the numbers of the plane analysis are the same as without a plan.
    sheet.line("ARCH-PLAN", [-20.0, -39.0], [20.0, -39.0]);
    let with = sheet.run(JOB);
    assert!((loads(&with)[1].sideways.unwrap() + 1.0).abs() < 1e-9);
    assert!(!with.findings.iter().any(|f| f.message.contains("was taken through")));
    let bare = {
        let mut sheet = sheet.clone();
        sheet.0.truncate(sheet.0.len() - 2);
        sheet.run(JOB)
    };
    assert!(loads(&bare).iter().all(|l| l.sideways.is_none()));
    assert_eq!(bare.spans[0].cases[0].lines[0].left, with.spans[0].cases[0].lines[0].left);
}

/// A deck hands its load to the posts, and the moments between them are not those of a load spread over the rib.
#[test]
fn a_line_load_over_posts_is_told_as_spread_over_the_rib() {
    let deck = |posts: bool, y: [f64; 2]| {
        let mut sheet = arch();
        sheet.line("ARCH-LOADS", [-5.0, y[0]], [5.0, y[1]]);
        sheet.text("ARCH-LOADS", [0.0, f64::midpoint(y[0], y[1]) + 0.1], 0.2, "12 kN/m");
        for x in [-4.0, 0.0, 4.0].into_iter().filter(|_| posts) {
            sheet.line("ARCH-POSTS", [x, 11.0], [x, axis(x)]);
        }
        let run = sheet.run(JOB);
        assert!(run.error.is_none(), "{:?}", run.error);
        run
    };
    assert_eq!(deck(false, [11.0, 11.0]).verdict, Some(Verdict::Within));
    let told = deck(true, [11.0, 11.0]);
    assert!(told.findings.iter().any(|f| f.unchecks && f.message.starts_with("1 loads stand between posts")));
    assert_eq!(told.verdict, Some(Verdict::Unchecked));
}
