//! Worst and best factors over ranges, and the least depth, from a drawing to the results.
// Helpers of tests stand outside of the test functions that the lints exempt.
#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

#[path = "support/sheet.rs"]
mod sheet;

use sheet::{drawing, run};
use thrustmark::outcome::{Check, FindingVerdict, RangedFactor, Run, Status, Verdict};

fn factor<'a>(run: &'a Run, name: &str) -> &'a RangedFactor {
    assert!(run.error.is_none(), "{:?}", run.error);
    let ranges = run.spans[0].cases[0].ranges.as_ref().unwrap();
    ranges.factors.iter().find(|f| f.name == name).unwrap()
}

fn near(found: Option<f64>, expected: f64, within: f64) {
    let found = found.unwrap();
    assert!((found / expected - 1.0).abs() < within, "{found} for {expected}");
}

const CASE: &str = "[[case]]\nname = \"live\"\nfactors = { \"ARCH-LOADS*\" = 1.0, self = 1.0 }\nvary = [\"ARCH-LOADS-LIVE\"]\n";

#[test]
fn a_flat_arch_over_strength_depth_and_width() {
    // M14 (derived): crushing, closed form: weightless flat (jack) arch of depth d between rigid abutments, one load at
    // mid-span: H(d-H/(bf))=PL/4, greatest P=f b d^2/L at H=f b d/2. Source: closed form, derived. All three ranges
    // raise it, so worst and best stand at corners.
    let flat = drawing(
        &[[0.0, 0.0, 0.0], [2.0, 4e-8, 0.0], [4.0, 0.0, 0.0]],
        &[("ARCH-LOADS-LIVE", [2.0, 1.0], "1 kN")],
    );
    let job = format!(
        "[rib]\ndepth = 0.6\nwidth = 1.0\nstrength = 5.0\nsupport = \"none\"\n[limits]\nload_factor = 400\n{CASE}\
         [[range]]\nwhat = \"rib.strength\"\nlow = 4.0\nhigh = 6.0\n\
         [[range]]\nwhat = \"rib.depth\"\nlow = 0.5\nhigh = 0.7\n\
         [[range]]\nwhat = \"rib.width\"\nlow = 0.9\nhigh = 1.1\n"
    );
    let run = run(&flat, &job);
    let load = factor(&run, "load_factor");
    near(load.worst.value, 4000.0 * 0.9 * 0.5 * 0.5 / 4.0, 1e-6);
    near(load.best.value, 6000.0 * 1.1 * 0.7 * 0.7 / 4.0, 1e-6);
    assert_eq!((load.worst.found.as_str(), load.best.found.as_str()), ("corners", "corners"));
    let worst: Vec<_> = load.worst.inputs.iter().map(|(k, v)| (k.as_str(), *v)).collect();
    assert_eq!(worst, [("rib.depth", 0.5), ("rib.strength", 4.0), ("rib.width", 0.9)]);
    // The geometric factor of a weightless ring does not know strength and width.
    assert_eq!(factor(&run, "geometric_factor").worst.inputs.keys().collect::<Vec<_>>(), ["rib.depth"]);
    // 450 at the values stated would hold; the worst does not, and the verdict is by the worst.
    let safety = run.spans[0].cases[0].safety.as_ref().unwrap();
    near(safety.load_factor, 450.0, 1e-6);
    assert_eq!(run.verdict, Some(Verdict::Outside));
    let told = run.findings.iter().find(|f| f.check == Check::LoadFactor && f.limit == Some(400.0)).unwrap();
    near(told.value, 225.0, 1e-6);
    assert_eq!(told.verdict, FindingVerdict::Outside);
    assert!(
        told.message.contains("at worst (rib.depth = 0.5 m, rib.strength = 4 MPa, rib.width = 0.9 m)"),
        "{}",
        told.message
    );
}

const HALF: [[f64; 3]; 2] = [[-10.0, 0.0, -1.0], [10.0, 0.0, 0.0]];

#[test]
fn a_half_ring_over_its_depth() {
    // M03b (derived): Milankovitch value [least t/R of the semicircle under self weight] to 12 digits: 0.107478038107.
    // Source: closed form, derived. A depth that weighs is sampled.
    let ring = drawing(&HALF, &[]);
    let job = "[rib]\ndepth = 2.0\nwidth = 2.0\nunit_weight = 24.0\nsupport = \"none\"\n[limits]\ngeometric_factor = 1.2\n\
        [[range]]\nwhat = \"rib.depth\"\nlow = 1.07478038107\nhigh = 2.5\n\
        [[range]]\nwhat = \"rib.temperature\"\nlow = -20\nhigh = 20\n";
    let run = run(&ring, job);
    let geometric = factor(&run, "geometric_factor");
    near(geometric.worst.value, 1.0, 1e-9);
    assert_eq!(geometric.worst.found, "sampling");
    assert!(geometric.best.value.unwrap() > 1.8);
    assert_eq!(run.verdict, Some(Verdict::Outside));
    let ranges = run.spans[0].cases[0].ranges.as_ref().unwrap();
    assert!(ranges.inputs[0].idle.is_none());
    // The temperature changes no factor, which is said and keeps the run from being judged.
    assert!(ranges.inputs[1].idle.is_some());
    assert!(
        run.findings.iter().any(|f| f.unchecks && f.message.contains("rib.temperature changes no factor"))
    );
    // Least depth of the contract, by the same source.
    let safety = run.spans[0].cases[0].safety.as_ref().unwrap();
    near(safety.least_depth, 1.07478038107, 1e-9);
    assert_eq!(safety.status["least_depth"], Status::Found);
    assert!(run.findings.iter().any(|f| f.message.contains("1075 mm where it is thinnest")));
}

#[test]
fn nothing_between_is_worse_than_the_corners() {
    // Unit weight and width enter as weights: the factors have no least value inside their ranges.
    let ring = drawing(
        &HALF,
        &[
            ("ARCH-LOADS-DEAD", [-5.0, 11.0], "60 kN"),
            ("ARCH-LOADS-DEAD", [4.0, 11.0], "90 kN"),
            ("ARCH-LOADS-LIVE", [-3.0, 11.0], "40 kN"),
        ],
    );
    let job = |weight: f64, strength: f64, friction: f64| {
        format!(
            "[rib]\ndepth = 2.2\nwidth = 1.0\nunit_weight = {weight}\nstrength = {strength}\nfriction = {friction}\n\
             support = \"none\"\n[limits]\nload_factor = 1.1\n{CASE}"
        )
    };
    let ranges = "[[range]]\nwhat = \"rib.unit_weight\"\nlow = 16\nhigh = 28\n\
                  [[range]]\nwhat = \"rib.strength\"\nlow = 0.8\nhigh = 2.0\n\
                  [[range]]\nwhat = \"rib.friction\"\nlow = 0.45\nhigh = 0.7\n";
    let all = run(&ring, &(job(20.0, 1.5, 0.6) + ranges));
    let names = ["geometric_factor", "load_factor", "load_factor_least"];
    let [geometric, load, least] = names.map(|name| factor(&all, name).clone());
    assert_eq!((load.worst.found.as_str(), load.best.found.as_str()), ("corners", "sampling"));
    let at = |weight, strength, friction| {
        let run = run(&ring, &job(weight, strength, friction));
        let s = run.spans[0].cases[0].safety.clone().unwrap();
        (s.geometric_factor.unwrap(), s.load_factor.unwrap(), s.load_factor_least.unwrap())
    };
    let worst = &load.worst.inputs;
    let there = at(worst["rib.unit_weight"], worst["rib.strength"], worst["rib.friction"]);
    near(load.worst.value, there.1, 1e-12);
    for i in 0..5 {
        let weight = 16.0 + 3.0 * f64::from(i);
        for (strength, friction) in [(0.8, 0.45), (1.3, 0.5), (2.0, 0.7)] {
            let here = at(weight, strength, friction);
            let slack = 1e-9;
            assert!(
                here.0 >= geometric.worst.value.unwrap() - slack
                    && here.0 <= geometric.best.value.unwrap() + slack
            );
            assert!(
                here.1 >= load.worst.value.unwrap() - slack && here.1 <= load.best.value.unwrap() + slack
            );
            assert!(
                here.2 <= least.worst.value.unwrap() + slack && here.2 >= least.best.value.unwrap() - slack
            );
        }
    }
}

#[test]
fn ranges_that_cannot_be_worked_out_are_refused() {
    let ring = drawing(&HALF, &[("ARCH-LOADS", [-5.0, 11.0], "60 kN")]);
    let range = |what: &str| format!("[[range]]\nwhat = \"{what}\"\nlow = 1\nhigh = 2\n");
    let twice = range("rib.depth") + &range("rib.depth");
    let many: String = [
        "depth",
        "width",
        "unit_weight",
        "strength",
        "friction",
        "creep",
        "shrinkage",
        "temperature",
        "joint_loss",
    ]
    .map(|key| range(&format!("rib.{key}")))
    .concat();
    for (job, words) in [
        (format!("[rib]\ndepth = 1.0\n{}", range("rib.strength")), "no value of its own"),
        (format!("[rib]\ndepth = [1.0, 0.8]\n{}", range("rib.depth")), "two values"),
        (format!("[rib]\ndepth = 1.0\n{twice}"), "two ranges"),
        (format!("[rib]\ndepth = 1.0\n{many}"), "9 ranges"),
    ] {
        let error = run(&ring, &job).error.unwrap();
        assert_eq!(error.check, "job-range");
        assert!(error.message.contains(words) && error.line.is_some(), "{error:?}");
    }
    // A range over the depth where ring lines give it, and one over what counts for no ring: said, and not judged.
    let tension = run(&ring, &format!("[rib]\ndepth = 1.0\ntension = true\n{}", range("rib.depth")));
    assert!(tension.findings.iter().any(|f| f.unchecks && f.message.contains("ring without tension")));
}
