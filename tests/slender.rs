//! Slender ribs: buckling push, imperfection, amplification, snap-through, and a deck that shares the bending.
// Helpers of tests stand outside of the test functions that the lints exempt.
#![allow(clippy::unwrap_used)]

#[path = "support/sheet.rs"]
mod sheet;
mod support;

use thrustmark::outcome::{Check, FindingVerdict, Run, Verdict};

use support::{close, down, parabola, problem, station};
use thrustmark::statics::slender::coefficient;
use thrustmark::statics::{Flexibility, Line, LineKind, Place, Problem, Slender, Status, Support, elastic};

/// Modulus of the closed forms, kN/m².
const E: f64 = 3e7;

/// A parabolic rib in chords with `I = I_c sec φ`, which does not shorten.
fn secant(inertia: f64) -> impl Fn(&Place) -> Flexibility {
    move |p| Flexibility { bending: p.tangent.x / (E * inertia), axial: 0.0 }
}

fn rib(span: f64, rise: f64, support: Support, loads: &[(f64, f64)]) -> Problem {
    let mut p = problem(parabola(span, rise, 120), down(loads, 2.0 * rise));
    p.support = Some(support);
    p.govern = Some(LineKind::Elastic);
    p
}

/// A load uniform in plan from `from` to `to`, lumped at the corners of the chords so that bending at the corners is exact.
fn uniform(q: f64, span: f64, from: f64, to: f64) -> Vec<(f64, f64)> {
    let step = span / 120.0;
    let corners = (1..120).map(|k| f64::from(k) * step);
    corners
        .filter(|x| *x > from - step / 2.0 && *x < to + step / 2.0)
        .map(|x| {
            let half = |edge: f64| (x - edge).abs() < step / 2.0 && edge > 0.0 && edge < span;
            (if half(from) || half(to) { q * step / 2.0 } else { q * step }, x)
        })
        .collect()
}

fn solved(p: &Problem, inertia: f64) -> Line {
    elastic(p, &secant(inertia)).unwrap().lines.remove(0)
}

#[test]
fn coefficients_of_the_table() {
    // S.P. Timoshenko and J.M. Gere, Theory of Elastic Stability, 2nd ed. 1961, Table 7-5 (from memory): q_cr = γ E I / l³ of
    // a parabolic arch of constant cross section under a load uniform in plan. tests/independent/buckling.py works the same
    // values out from a frame with its geometric stiffness.
    for (support, rise, gamma) in [
        (Support::Hingeless, 0.1, 60.7),
        (Support::Hingeless, 0.3, 115.0),
        (Support::TwoHinged, 0.1, 28.5),
        (Support::TwoHinged, 0.2, 45.4),
        (Support::TwoHinged, 0.5, 38.4),
        (Support::ThreeHinged, 0.2, 39.6),
        (Support::ThreeHinged, 1.0, 14.1),
    ] {
        close(8.0 * rise * coefficient(support, rise).unwrap(), gamma);
    }
    // Flatter ribs reach those of a straight bar in its antisymmetric shape: 4 π² and 4 · 4.4934².
    let flat = |support| coefficient(support, 0.01).unwrap();
    assert!(flat(Support::TwoHinged) < 4.0 * std::f64::consts::PI.powi(2));
    assert!(flat(Support::Hingeless) < 80.76);
    assert_eq!(coefficient(Support::TwoHinged, 1.2), None);
    assert_eq!(coefficient(Support::None, 0.2), None);
}

#[test]
fn imperfection_of_a_funicular_rib() {
    // Two-hinged parabola under a uniform load: no bending, so that all of it is that of the imperfection, H δ amplified by
    // 1 / (1 − H / H_cr). Source: closed form, derived.
    let (l, f, q, inertia, size) = (60.0, 12.0, 40.0, 0.05, 0.03);
    let mut p = rib(l, f, Support::TwoHinged, &uniform(q, l, 0.0, l));
    p.slender = Some(Slender { imperfection: size, deck: 0.0 });
    let line = solved(&p, inertia);
    let h = q * l * l / (8.0 * f);
    // The least stiffness along a rib whose inertia grows with the slope is that of the chord at the crown.
    let slope: f64 = 4.0 * f / l * (1.0 / 120.0);
    let critical = 45.4 / 1.6 * E * inertia * (1.0 + slope * slope).sqrt() / (l * l);
    let b = line.bending.as_ref().unwrap();
    close(b.push, h);
    close(b.critical.unwrap(), critical);
    let amplified = 1.0 / (1.0 - h / critical);
    close(b.amplification, amplified);
    let at = line.stations.iter().position(|s| (s.at.x - l / 4.0).abs() < 1e-9).unwrap();
    // Ends of chords lie on the parabola, where a uniform load lumped at them bends nothing.
    let [low, high] = b.moments[at];
    close(high, amplified * h * size);
    close(low, -high);
    // Moment over thrust is greatest a little nearer to the crown, as the thrust falls toward it.
    let greatest = (0..10_000)
        .map(|k| f64::from(k) / 20_000.0)
        .map(|u| (std::f64::consts::TAU * u).sin() / (4.0 * f / l * (1.0 - 2.0 * u)).hypot(1.0))
        .fold(0.0, f64::max);
    assert!((b.eccentricity.abs() / (amplified * size * greatest) - 1.0).abs() < 2e-3, "{}", b.eccentricity);
    // Without an imperfection a funicular rib has nothing to multiply.
    p.slender = Some(Slender::default());
    let line = solved(&p, inertia);
    assert!(line.bending.unwrap().moments.iter().all(|m| m[1].abs() < 1e-6));
    // At the buckling push there is no line.
    let line = solved(&p, inertia * h / critical * (1.0 - 1e-9));
    assert_eq!(line.status, Status::Refused);
    assert!(line.reason.unwrap().contains("buckles in its plane"));
    assert_eq!(solved(&p, inertia * h / critical * (1.0 + 1e-9)).status, Status::Found);
}

#[test]
fn antisymmetric_bending_alone_is_multiplied() {
    // Half-span load on a two-hinged secant parabola, E04 (from memory): H = w l²/16 f, and all bending is antisymmetric,
    // ± w l²/64 at the quarters.
    let (l, f, q, inertia) = (40.0, 8.0, 10.0, 0.02);
    let mut p = rib(l, f, Support::TwoHinged, &uniform(q, l, 0.0, l / 2.0));
    p.slender = Some(Slender::default());
    let line = solved(&p, inertia);
    let b = line.bending.as_ref().unwrap();
    let h = q * l * l / (16.0 * f);
    let quarter = line.stations.iter().position(|s| (s.at.x - l / 4.0).abs() < 1e-9).unwrap();
    assert!((b.push / h - 1.0).abs() < 1e-3);
    assert!((line.stations[quarter].moment / (q * l * l / 64.0) - 1.0).abs() < 1e-3);
    assert!((b.moments[quarter][1] / line.stations[quarter].moment / b.amplification - 1.0).abs() < 1e-3);
    // A load at the crown bends alike on both sides, and is not multiplied.
    let mut p = rib(l, f, Support::TwoHinged, &[(500.0, l / 2.0)]);
    p.slender = Some(Slender::default());
    let line = solved(&p, inertia);
    let b = line.bending.as_ref().unwrap();
    assert!(b.amplification > 1.01);
    for (s, m) in line.stations.iter().zip(&b.moments) {
        assert!((s.moment - m[0]).abs() < 1e-6 && (s.moment - m[1]).abs() < 1e-6);
    }
}

#[test]
fn a_built_in_rib_takes_its_share_of_the_imperfection() {
    // The redundants answer the imperfection, so that its bending is orthogonal to what they can do.
    let (l, f, q) = (60.0, 12.0, 40.0);
    let mut p = rib(l, f, Support::Hingeless, &uniform(q, l, 0.0, l));
    p.slender = Some(Slender { imperfection: 0.03, deck: 0.0 });
    let line = solved(&p, 0.05);
    let b = line.bending.as_ref().unwrap();
    assert!((b.critical.unwrap() / (101.0 / 1.6 * E * 0.05 / 3600.0) - 1.0).abs() < 1e-4);
    let h = q * l * l / (8.0 * f);
    // −H (δ − a ξ): with the first shape of a bar with built-in ends, ξ − sin(k ξ)/sin k over its top, the part of ξ is
    // what least energy takes off: ∫ ξ (ξ − sin k ξ / sin k) / ∫ ξ², so that what is left is a sine with a part of ξ.
    let k: f64 = 4.493_409_457_909_064;
    let top = {
        let xi = std::f64::consts::TAU / k - 1.0;
        xi - (k * xi).sin() / k.sin()
    };
    // ∫₀¹ ξ sin kξ dξ = (sin k − k cos k) / k² = 0, as tan k = k: the whole of ξ is taken off.
    let expected = |xi: f64| b.amplification * h * 0.03 * ((k * xi).sin() / k.sin() / top).abs();
    for (s, m) in line.stations.iter().zip(&b.moments) {
        let xi = 1.0 - 2.0 * s.at.x / l;
        assert!((m[1] - m[0] - 2.0 * expected(xi)).abs() < 2e-3 * h * 0.03, "{xi} {m:?} {}", expected(xi));
    }
}

#[test]
fn e20_a_deck_shares_the_bending() {
    // E20 (from memory): deck-stiffened arch: the live-load bending is shared I_a/(I_a+I_d) to the arch (posts inextensible,
    // many, pinned); I_a=0.02 (secant), I_d=0.06, L=60, f=9, half-span load q=10; arch share at quarter point 0.25, total M =
    // qL^2/64 = 562.5. Source: classical deck-stiffening rule, from memory.
    let (l, f) = (60.0, 9.0);
    let mut p = rib(l, f, Support::TwoHinged, &uniform(10.0, l, 0.0, l / 2.0));
    p.varying = (0..p.forces.len()).collect();
    p.slender = Some(Slender { imperfection: 0.0, deck: E * 0.06 });
    let line = solved(&p, 0.02);
    let b = line.bending.as_ref().unwrap();
    let (low, high) = b.share.unwrap();
    close(low, 0.25);
    close(high, 0.25);
    let quarter = station(&line, l / 4.0);
    assert!((quarter.moment / 562.5 - 1.0).abs() < 1e-3, "{}", quarter.moment);
    let at = line.stations.iter().position(|s| (s.at.x - l / 4.0).abs() < 1e-9).unwrap();
    assert!((b.moments[at][0] / (0.25 * quarter.moment * b.amplification) - 1.0).abs() < 1e-3);
    // Loads that stay bend the rib alone, and together they add up.
    let dead = uniform(25.0, l, 0.0, l);
    let live = uniform(10.0, l, 0.0, l / 2.0);
    let mut both = rib(l, f, Support::TwoHinged, &[dead.clone(), live].concat());
    both.varying = (dead.len()..both.forces.len()).collect();
    both.slender = p.slender;
    let line = solved(&both, 0.02);
    let second = line.bending.as_ref().unwrap();
    let there = line.stations.iter().position(|s| (s.at.x - l / 4.0).abs() < 1e-9).unwrap();
    let plain = |b: &thrustmark::statics::Bending, i: usize| b.moments[i][0] / b.amplification;
    assert!(
        (plain(second, there) / plain(b, at) - 1.0).abs() < 1e-6,
        "dead load of a funicular rib bends nothing"
    );
    // Nothing varies: the deck takes no part.
    both.varying.clear();
    let line = solved(&both, 0.02);
    assert_eq!(line.bending.as_ref().unwrap().share, None);
    close(station(&line, l / 4.0).moment, plain(line.bending.as_ref().unwrap(), there));
}

#[test]
fn a_flat_rib_may_snap_through() {
    // (f / 2 i)² < 5.5 for a sinusoidal rib on hinges: Timoshenko and Gere, section 7.8 (from memory). With a rectangle of
    // depth d, i = d / √12: f < 1.354 d.
    let shallow = |rise: f64, support| {
        let mut p = rib(40.0, rise, support, &[(1.0, 20.0)]);
        p.depth = Some(thrustmark::statics::Depth::Constant(1.0));
        p.stiffness = Some(E);
        p.slender = Some(Slender::default());
        let line = thrustmark::statics::analyse(&p).unwrap().lines.remove(0);
        line.bending.unwrap().shallow.is_some()
    };
    assert!(shallow(1.35, Support::TwoHinged) && !shallow(1.36, Support::TwoHinged));
    assert!(shallow(1.85, Support::Hingeless) && !shallow(1.86, Support::Hingeless));
}

/// A two-hinged parabola of span 40 and rise 8 under equal loads, and one load more on the left half.
fn arch(job: &str) -> Run {
    let axis: Vec<[f64; 3]> =
        (0..=16).map(|k| 2.5 * f64::from(k)).map(|x| [x, 0.02 * x * (40.0 - x), 0.0]).collect();
    let mut loads: Vec<(&str, [f64; 2], &str)> =
        (1..16).map(|k| ("ARCH-LOADS-DEAD", [2.5 * f64::from(k), 12.0], "100 kN")).collect();
    loads.push(("ARCH-LOADS-LIVE", [11.0, 12.0], "40 kN"));
    let cases = "[[case]]\nname = \"dead\"\nfactors = { \"ARCH-LOADS-DEAD\" = 1.0 }\n\
                 [[case]]\nname = \"live\"\nfactors = { \"ARCH-LOADS*\" = 1.0 }\nvary = [\"ARCH-LOADS-LIVE\"]\n";
    sheet::run(&sheet::drawing(&axis, &loads), &format!("{job}{cases}"))
}

const RIB: &str =
    "[rib]\ndepth = 0.5\nwidth = 1.0\nsupport = \"two-hinged\"\ntension = true\nelastic_modulus = 30000\n";

#[test]
fn limits_are_held_against_the_bending_of_the_rib() {
    let limits = "[limits]\noffset = 0.08\nstress = 20\n";
    let plain = arch(&format!("{RIB}{limits}"));
    assert!(plain.error.is_none(), "{:?}", plain.error);
    let bent = arch(&format!("{RIB}imperfection = 0.03\n{limits}"));
    let offset = |run: &Run, case: &str| {
        let found = run
            .findings
            .iter()
            .find(|f| f.check == Check::Offset && f.limit.is_some() && f.case.as_deref() == Some(case));
        found.unwrap().value.unwrap()
    };
    // The dead load bends the rib by its imperfection alone: at least that, and at most amplified.
    let b = bent.spans[0].cases[0].lines[0].buckling.clone().unwrap();
    assert!(b.amplification > 1.2 && b.amplification < 2.0, "{b:?}");
    assert!(offset(&plain, "dead") < 0.01);
    assert!(offset(&bent, "dead") > 0.03 && offset(&bent, "dead") < 0.03 * b.amplification + 0.01);
    assert!((offset(&bent, "dead") - b.eccentricity.abs()).abs() < 1e-12);
    assert!(offset(&bent, "live") > offset(&plain, "live") + 0.03);
    // Stresses take both extremes of the moment.
    let least = |run: &Run| {
        let stations = &run.spans[0].cases[1].lines[0].stations;
        stations.iter().map(|s| s.stress_min.unwrap()).fold(f64::INFINITY, f64::min)
    };
    assert!(least(&bent) < least(&plain) - 0.5, "{} {}", least(&bent), least(&plain));
    let station = &bent.spans[0].cases[1].lines[0].stations[5];
    assert!(station.moment_min.unwrap() < station.moment && station.moment < station.moment_max.unwrap());
    // Both extremes of thrust and of moment, each with what goes with it.
    let forces = &bent.spans[0].cases[1].section_forces;
    let named: Vec<_> = forces.iter().map(|f| f.what.as_str()).collect();
    assert_eq!(named, ["greatest-thrust", "least-thrust", "greatest-moment", "least-moment"]);
    assert!(forces[0].thrust > forces[1].thrust && forces[2].moment > 0.0 && forces[3].moment < 0.0);
    // Creep halves the stiffness: the buckling push is halved.
    let crept = arch(&format!("{RIB}imperfection = 0.03\ncreep = 1.0\n{limits}"));
    let half = crept.spans[0].cases[0].lines[0].buckling.clone();
    if let Some(half) = half {
        assert!((half.critical.unwrap() / b.critical.unwrap() - 0.5).abs() < 1e-9);
    } else {
        assert_eq!(crept.verdict, Some(Verdict::Outside));
    }
    // So soft that it buckles: no elastic line, outside.
    let soft = arch(&format!("{}{limits}", RIB.replace("30000", "3000")));
    assert_eq!(soft.verdict, Some(Verdict::Outside));
    let told = soft.findings.iter().find(|f| f.check == Check::NoLine).unwrap();
    assert!(
        told.verdict == FindingVerdict::Outside && told.message.contains("buckles in its plane"),
        "{}",
        told.message
    );
}

#[test]
fn a_deck_in_the_job_takes_its_part_of_the_live_load() {
    let alone = arch(RIB);
    let shared = arch(&format!("{RIB}deck_inertia = 0.03125\ndeck_modulus = 30000\n"));
    let (a, b) = (&alone.spans[0].cases, &shared.spans[0].cases);
    // I_a = 1/96 m4 and I_d three times that: a quarter at the crown, less where the rib is steep.
    let [low, high] = b[1].lines[0].buckling.as_ref().unwrap().share.unwrap();
    assert!(high < 0.2501 && high > 0.2489 && low < high && low > 0.2, "{low} {high}");
    let greatest = |case: &thrustmark::outcome::Case| {
        let s = &case.lines[0].stations;
        s.iter().map(|s| s.moment_max.unwrap()).fold(0.0, f64::max)
    };
    assert!(greatest(&b[1]) < 0.45 * greatest(&a[1]), "{} {}", greatest(&b[1]), greatest(&a[1]));
    assert!(
        shared
            .findings
            .iter()
            .any(|f| f.message.contains("not those of a line of thrust of the drawn loads"))
    );
    // Nothing varies in the dead case, and there the deck takes no part: said.
    let dead = |f: &&thrustmark::outcome::Finding| {
        f.case.as_deref() == Some("dead") && f.message.contains("deck_inertia was not counted")
    };
    assert!(shared.findings.iter().find(dead).unwrap().unchecks);
    let missing = arch(&format!("{RIB}deck_inertia = 0.03\n")).error.unwrap();
    assert!(missing.message.contains("rib.deck_modulus"), "{missing:?}");
    let missing = arch("[rib]\ndepth = 0.5\nsupport = \"hingeless\"\nimperfection = 0.02\n").error.unwrap();
    assert!(missing.message.contains("rib.elastic_modulus"), "{missing:?}");
    // For a ring without tension neither counts, which is said.
    let ring = arch("[rib]\ndepth = 0.5\nsupport = \"none\"\nimperfection = 0.02\n");
    assert!(ring.findings.iter().any(|f| f.unchecks && f.message.contains("imperfection was not counted")));
}
