//! Outside values of elastic arches, each with its source in the words of the list of check values.
#![allow(clippy::unwrap_used)]

mod support;

use std::f64::consts::{FRAC_1_PI, FRAC_PI_2, PI};

use support::{circle, close, down, parabola, problem};
use thrustmark::geometry::Path;
use thrustmark::statics::{
    Depth, Effects, Flexibility, Force, Line, LineKind, Place, Problem, Rule, Status, Support, analyse,
    elastic,
};

/// Agreement that is owed to an elastic line: 1e-6 relative.
#[track_caller]
fn near(found: f64, expected: f64) {
    // Ordinates of an influence line are held against a hundredth, the size of its larger ones.
    let off = (found - expected).abs() / expected.abs().max(0.01);
    assert!(off <= 1e-6, "found {found:.12}, expected {expected:.12}, relative difference {off:e}");
}

const SPAN: f64 = 40.0;
const RISE: f64 = 8.0;
/// Chords that stand for a parabola, and strips for a uniform load: their error is below 1e-7.
const CHORDS: usize = 4000;
const STRIPS: usize = 4000;

/// `I = I_c sec φ` with `E I_c = 1`, inextensible.
fn secant(p: &Place) -> Flexibility {
    Flexibility { bending: p.tangent.x, axial: 0.0 }
}

fn constant(_: &Place) -> Flexibility {
    Flexibility { bending: 1.0, axial: 0.0 }
}

fn arch(axis: Path, support: Support, forces: Vec<Force>) -> Problem {
    let mut p = problem(axis, forces);
    p.support = Some(support);
    p.govern = Some(LineKind::Elastic);
    p
}

#[track_caller]
fn line(p: &Problem, flexibility: &dyn Fn(&Place) -> Flexibility) -> Line {
    let a = elastic(p, flexibility).unwrap();
    let line = a.lines[0].clone();
    assert_eq!(line.status, Status::Found, "{:?}", line.reason);
    assert!(a.residual < 1e-9);
    line
}

fn parabolic(support: Support, forces: Vec<Force>) -> Problem {
    arch(parabola(SPAN, RISE, CHORDS), support, forces)
}

fn at(k: f64) -> Vec<Force> {
    down(&[(1.0, k * SPAN)], 20.0)
}

/// Uniform load `q` of plan from `from` to `to`, in strips at their centres.
fn uniform(q: f64, from: f64, to: f64) -> Vec<Force> {
    let width = (to - from) / STRIPS as f64;
    let strip = |k: usize| (q * width, from + width * (k as f64 + 0.5));
    down(&(0..STRIPS).map(strip).collect::<Vec<_>>(), 20.0)
}

fn push(line: &Line) -> f64 {
    line.left.unwrap().horizontal
}

#[track_caller]
fn moment_at(line: &Line, x: f64) -> f64 {
    line.stations.iter().find(|s| (s.at.x - x).abs() < 1e-6).unwrap().moment
}

#[test]
fn e02_e03_two_hinged_secant_parabola() {
    // E02 (from memory): two-hinged parabola, I=I_c sec(phi), inextensible: H=(5/8)(PL/f)(k-2k^3+k^4). Source: textbook
    // formula; Timoshenko & Young, Theory of Structures. E03 (from memory): same, load at the crown: H=25/128 PL/f.
    for (k, h) in [(0.1, 0.0613125), (0.25, 0.13916015625), (0.4, 0.186), (0.5, 25.0 / 128.0)] {
        near(push(&line(&parabolic(Support::TwoHinged, at(k)), &secant)) * RISE / SPAN, h);
    }
}

#[test]
fn e04_e05_distributed_loads() {
    // E04 (from memory): two-hinged secant parabola under UDL: full span wL^2/8f (no bending), half span wL^2/16f, triangle
    // 0..w: wL^2/16f. Source: textbook formula, from memory. E05 (derived): UDL on the length a from one springing:
    // H=(w a^2/(16 f L^3))(5L^3-5L a^2+2a^3). Source: integral of E02.
    let h = |forces| push(&line(&parabolic(Support::TwoHinged, forces), &secant));
    near(h(uniform(10.0, 0.0, SPAN)), 250.0);
    near(h(uniform(10.0, 0.0, SPAN / 2.0)), 125.0);
    near(h(uniform(10.0, 0.0, 12.0)), 51.795);
    let mut triangle = uniform(10.0, 0.0, SPAN);
    for f in &mut triangle {
        f.force.y *= f.at.x / SPAN;
    }
    near(h(triangle), 125.0);
}

#[test]
fn e06_temperature() {
    // E06 (from memory): temperature rise T: two-hinged H=15 E I_c alpha T/(8 f^2); hingeless H=45 E I_c alpha T/(4 f^2)
    // (secant I, inextensible). Source: textbook formulas.
    let bending = 1.0 / (3e7 * 0.1);
    let flexibility = |p: &Place| Flexibility { bending: bending * p.tangent.x, axial: 0.0 };
    for (support, expected) in [(Support::TwoHinged, 26.3671875), (Support::Hingeless, 158.203125)] {
        let mut p = parabolic(support, uniform(10.0, 0.0, SPAN));
        let cold = push(&line(&p, &flexibility));
        p.effects = Effects { strain: 1e-5 * 30.0, ..Effects::default() };
        near(push(&line(&p, &flexibility)) - cold, expected);
    }
}

#[test]
fn e07_e08_hingeless_influence_lines() {
    // E07 (published): hingeless parabola, I=I_c sec(phi): influence lines H=(15/4)(L/f)u^2(1-u)^2, R_A=(1-u)^2(1+2u),
    // M_A=L u(1-u)^2(5u/2-1), M_C=L(u^2/2)(1-(5/2)(1-u)^2) for u<=1/2. E08 (published): crown load H=15/64 PL/f,
    // M_A=PL/32, M_C=3PL/64; half-span UDL R_A=13/32 qL, H=qL^2/16f, M_A=-qL^2/64, M_B=+qL^2/64, M_C=0. Source: I.A.
    // Karnovsky, O. Lebed, Advanced Methods of Structural Analysis, Springer 2010 (title and authors from memory; page text
    // read), Fig.10.6 p.332, Table A.19 p.577.
    for (u, h, ma, ra, mc) in [
        (0.05, 0.0084609375, -0.039484375, 0.99275, -0.0015703125),
        (0.10, 0.030375, -0.06075, 0.972, -0.005125),
        (0.15, 0.0609609375, -0.067734375, 0.93925, -0.0090703125),
        (0.20, 0.096, -0.064, 0.896, -0.012),
        (0.25, 0.1318359375, -0.052734375, 0.84375, -0.0126953125),
        (0.30, 0.165375, -0.03675, 0.784, -0.010125),
        (0.35, 0.1940859375, -0.018484375, 0.71825, -0.0034453125),
        (0.40, 0.216, 0.0, 0.648, 0.008),
        (0.45, 0.2297109375, 0.017015625, 0.57475, 0.0246796875),
        (0.50, 0.234375, 0.03125, 0.5, 0.046875),
    ] {
        let l = line(&parabolic(Support::Hingeless, at(u)), &secant);
        near(push(&l) * RISE / SPAN, h);
        near(l.reaction.unwrap().moment / SPAN, ma);
        near(l.left.unwrap().vertical, ra);
        near(moment_at(&l, SPAN / 2.0) / SPAN, mc);
    }
    let l = line(&parabolic(Support::Hingeless, uniform(1.0, 0.0, SPAN / 2.0)), &secant);
    near(l.left.unwrap().vertical / SPAN, 0.40625);
    near(push(&l) * RISE / (SPAN * SPAN), 0.0625);
    near(l.reaction.unwrap().moment / (SPAN * SPAN), -0.015625);
    near(l.stations.last().unwrap().moment / (SPAN * SPAN), 0.015625);
}

#[test]
fn e09_e10_two_hinged_semicircle() {
    // E09 (from memory): two-hinged semicircle, constant EI: crown load H=P/pi. Source: textbook formula, from memory. E10
    // (from memory): load at angle a from the horizontal H=P sin^2(a)/pi; plan UDL H=4wR/(3pi); own weight q per arc
    // H=qR/2. Source: textbook formulas; own weight derived here.
    let h = |p: &Problem| push(&line(p, &constant));
    let semicircle = |forces| arch(circle(10.0, FRAC_PI_2), Support::TwoHinged, forces);
    close(h(&semicircle(down(&[(100.0, 0.0)], 20.0))) / 100.0, FRAC_1_PI);
    // On top of its own weight, for alone the load would leave a part of the arch in tension.
    let mut loaded = semicircle(down(&[(100.0, -10.0 * 40_f64.to_radians().cos())], 20.0));
    loaded.weight_on_axis = 10.0;
    close((h(&loaded) - 50.0) / 100.0, 0.131517977257);
    near(h(&semicircle(uniform(10.0, -10.0, 10.0))), 42.4413181578);
    let mut own = semicircle(Vec::new());
    own.weight_on_axis = 10.0;
    close(h(&own), 50.0);
}

#[test]
fn e11_hingeless_semicircle() {
    // E11 (from memory): hingeless semicircle, constant EI, crown load: H=P(4-pi)/(pi^2-8); M_end=+0.1106 PR, M_crown=0.1514/
    // 0.1515 PR. Source: W.C. Young, R.G. Budynas, Roark's Formulas for Stress and Strain, 7th ed. 2002, Table 9.3
    // (formerly Table 18) cases for both ends fixed, 0.4591.
    let l = line(&arch(circle(10.0, FRAC_PI_2), Support::Hingeless, down(&[(1.0, 0.0)], 20.0)), &constant);
    close(push(&l), 0.459138492566);
    close(push(&l), (4.0 - PI) / (PI * PI - 8.0));
    close(l.reaction.unwrap().moment / 10.0, 0.110606528806);
    close(moment_at(&l, 0.0) / 10.0, 0.15146803624);
}

#[test]
fn e13_two_hinged_segmental() {
    // E13 (derived): two-hinged segmental arch, constant EI, 200 kN at the crown; L=60, f=10. Source: closed form, derived.
    let radius = (30.0 * 30.0 + 10.0 * 10.0) / 20.0;
    let axis = circle(radius, (30.0_f64 / radius).asin());
    let l = line(&arch(axis, Support::TwoHinged, down(&[(200.0, 0.0)], 90.0)), &constant);
    close(push(&l), 228.966693043);
    close(moment_at(&l, 0.0), 710.333069574);
}

#[test]
fn e15_constant_stiffness() {
    // E15 (derived): constant EI instead of secant I: crown-load thrust of the two-hinged parabola f/L=0.2 (the two textbook
    // conventions differ by ~0.6%). Source: closed form, derived.
    let h = push(&line(&parabolic(Support::TwoHinged, at(0.5)), &constant)) * RISE / SPAN;
    near(h, 0.194030287862);
    near(h / (25.0 / 128.0), 0.993435073856);
}

#[test]
fn e17_rib_shortening() {
    // E17 (derived): rib shortening, hingeless, UDL (elastic centre at 2f/3); w=10, L=40, f=8, I=I_c sec(phi), constant area
    // A, I_c/A=1/12 m2. Source: closed form, derived.
    let flexibility = |p: &Place| Flexibility { bending: p.tangent.x, axial: 1.0 / 12.0 };
    let l = line(&parabolic(Support::Hingeless, uniform(10.0, 0.0, SPAN)), &flexibility);
    near(push(&l), 246.031402261);
}

#[test]
fn e18_movement_of_abutments() {
    // E18 (derived): support movement, hingeless secant parabola: spread D gives H=-45 E I_c D/(4 f^2 L); right abutment
    // rotation th gives H=... (elastic centre). E=3e7, I_c=0.1; D=0.01; th=0.001 (counter-clockwise, right abutment).
    let bending = 1.0 / (3e7 * 0.1);
    let flexibility = |p: &Place| Flexibility { bending: bending * p.tangent.x, axial: 0.0 };
    let mut p = parabolic(Support::Hingeless, uniform(100.0, 0.0, SPAN));
    let still = push(&line(&p, &flexibility));
    p.effects.right = [0.01, 0.0, 0.0];
    near(push(&line(&p, &flexibility)) - still, -131.8359375);
    p.effects.right = [0.0, 0.0, 0.001];
    near(push(&line(&p, &flexibility)) - still, 70.3125);
    // The left abutment moved the other way is the same spread.
    p.effects = Effects { left: [-0.01, 0.0, 0.0], ..Effects::default() };
    near(push(&line(&p, &flexibility)) - still, -131.8359375);
    // Both moved and turned alike, as one rigid body: nothing happens.
    p.effects = Effects {
        left: [0.002, 0.003, 0.001],
        right: [0.002, 0.003 + 0.001 * SPAN, 0.001],
        ..Effects::default()
    };
    near(push(&line(&p, &flexibility)), still);
}

#[test]
fn e21_worked_sheet() {
    // E21 (published): published worked sheet, hingeless parabolic masonry arch, 16 slices: H=176.20461, V=184.63376,
    // M_abutment=-7.1. The printed depths follow h=0.4 (sec phi)^(1/3), i.e. I=I_c sec(phi), so the exact solution is the
    // influence-line integral: 176.280882384, 184.684388129, -6.82654098083. Source: M.M. Reda Taha, N.G. Shrive, 'Analysis
    // of Fixed End Arches', Example 1 (course sheet). L=16, f=4, key depth 0.4, brick 23 kN/m3, q_L=12 kN/m, width 1.
    let chords = 4000;
    let axis = parabola(16.0, 4.0, chords);
    let mut forces = uniform(12.0, 0.0, 16.0);
    // Slices of the drawn depth on the axis: the sheet counts weight per length of axis.
    for w in 0..chords {
        let (a, b) = (16.0 * w as f64 / chords as f64, 16.0 * (w as f64 + 1.0) / chords as f64);
        let x = f64::midpoint(a, b);
        let slope = 1.0 - x / 8.0;
        let secant = (1.0 + slope * slope).sqrt();
        forces.extend(down(&[(23.0 * 0.4 * secant.cbrt() * secant * (b - a), x)], 20.0));
    }
    let l = line(&arch(axis, Support::Hingeless, forces), &secant);
    near(push(&l), 176.280882384);
    near(l.left.unwrap().vertical, 184.684388129);
    assert!((l.reaction.unwrap().moment + 6.82654098083).abs() < 1e-4, "{:?}", l.reaction);
}

#[test]
fn governs_where_a_support_is_declared() {
    let mut p = problem(circle(10.0, 1.0), down(&[(10.0, -4.0), (30.0, 2.0)], 20.0));
    p.govern = None;
    p.depth = Some(Depth::Linear { springing: 0.8, crown: 0.5 });
    p.support = Some(Support::Hingeless);
    let a = analyse(&p).unwrap();
    assert_eq!(a.rule, Rule::ElasticSupport);
    assert_eq!(a.lines[0].status, Status::Found);
    // Three hinges leave nothing to choose by stiffness.
    p.support = Some(Support::ThreeHinged);
    p.draw = vec![LineKind::Elastic];
    let a = analyse(&p).unwrap();
    close(push(&a.lines[1]), push(&a.lines[0]));
    // Temperature needs the modulus; a missing support is named.
    p.support = Some(Support::TwoHinged);
    p.effects.strain = 1e-4;
    let a = analyse(&p).unwrap();
    assert_eq!(a.lines[0].status, Status::Refused);
    assert!(a.lines[0].reason.as_ref().unwrap().contains("modulus"));
    p.stiffness = Some(3e7);
    assert_eq!(analyse(&p).unwrap().lines[0].status, Status::Found);
}

#[test]
fn loads_add_up_and_reciprocity_holds() {
    // Maxwell 1864: what a load does to the push is what a spread of the abutments does to the place of the load. The
    // spread's line has moments M(s); the work of the load on the bending that they cause is the change of the push times
    // the spread.
    let mut p = arch(circle(10.0, 1.1), Support::Hingeless, Vec::new());
    p.weight_on_axis = 50.0;
    let reaction = |p: &Problem| line(p, &constant).reaction.unwrap();
    let dead = reaction(&p);
    let under = |loads: &[(f64, f64)]| {
        let mut q = p.clone();
        q.forces = down(loads, 30.0);
        let r = reaction(&q);
        [r.horizontal - dead.horizontal, r.vertical - dead.vertical, r.moment - dead.moment]
    };
    let (first, second) = (under(&[(100.0, -6.0)]), under(&[(100.0, 1.5)]));
    let both = under(&[(100.0, -6.0), (100.0, 1.5)]);
    for i in 0..3 {
        close(first[i] + second[i], both[i]);
    }
    // Bending of the cut rib under the load, times the spread's moments, summed along the axis by the mid-point rule.
    let mut q = p.clone();
    q.effects.right = [1.0, 0.0, 0.0];
    let spread = reaction(&q);
    let (h, v, m) =
        (spread.horizontal - dead.horizontal, spread.vertical - dead.vertical, spread.moment - dead.moment);
    let (length, count) = (p.axis.length(), 200_000);
    let mut work = 0.0;
    for k in 0..count {
        let at = p.axis.point_at(length * (f64::from(k) + 0.5) / f64::from(count)) - p.axis.start();
        let of_spread = m + v * at.x - h * at.y;
        let of_load = -100.0 * (at.x + p.axis.start().x + 6.0).max(0.0);
        work += of_spread * of_load * length / f64::from(count);
    }
    // Energies are stationary: of the reactions only the right push works on the spread, by minus one.
    near(first[0], work);
}
