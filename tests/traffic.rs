//! Loads that move across a span, against closed forms, influence lines of the books, and every position solved alone.
#![allow(clippy::unwrap_used, clippy::print_stdout, clippy::cast_possible_truncation, clippy::cast_sign_loss)]

mod support;

use std::f64::consts::PI;

use support::{circle, close, down, parabola, problem};
use thrustmark::geometry::{Point, Vec2};
use thrustmark::statics::traffic::{
    Cell, Course, Influence, Moving, Push, Section, Traverse, influence, traverse,
};
use thrustmark::statics::{
    Analysis, Depth, Flexibility, LineKind, Place, Problem, Status, Support, analyse, elastic,
};

const SPAN: f64 = 40.0;
const RISE: f64 = 8.0;

/// Loads that reach the ring at abscissae as a simply supported deck hands them on.
struct Deck {
    /// Abscissae of the posts, with both ends of the deck.
    posts: Vec<f64>,
    /// Lengths along the axis where they meet the ring.
    slots: Vec<f64>,
    /// Distance behind the first axle, and force.
    axles: Vec<(f64, f64)>,
}

impl Deck {
    fn new(p: &Problem, posts: Vec<f64>, axles: &[(f64, f64)]) -> Self {
        let slots = posts.iter().map(|&x| p.axis.crossings_of_vertical(x)[0]).collect();
        Self { posts, slots, axles: axles.to_vec() }
    }

    fn even(p: &Problem, parts: usize, axles: &[(f64, f64)]) -> Self {
        let (a, b) = (p.axis.start().x, p.axis.end().x);
        Self::new(p, (0..=parts).map(|k| a + (b - a) * k as f64 / parts as f64).collect(), axles)
    }

    /// Pushes of a force at an abscissa; none beyond the ends.
    fn hand_on(&self, x: f64, force: f64, into: &mut Vec<Push>) {
        let i = self.posts.partition_point(|p| *p <= x);
        if i == 0 || (i == self.posts.len() && x > self.posts[i - 1]) {
            return;
        }
        let i = i.min(self.posts.len() - 1);
        let (a, b) = (self.posts[i - 1], self.posts[i]);
        let right = (x - a) / (b - a);
        for (slot, part) in [(i - 1, 1.0 - right), (i, right)] {
            if part > 0.0 {
                let at = Point::new(self.posts[slot], 50.0);
                into.push(Push { slot, at, force: Vec2::new(0.0, -force * part), own: true });
            }
        }
    }

    fn train(&self, x: f64) -> Vec<Push> {
        let mut pushes = Vec::new();
        for &(behind, force) in &self.axles {
            self.hand_on(x - behind, force, &mut pushes);
        }
        pushes
    }

    fn unit(&self, x: f64) -> Vec<Push> {
        let mut pushes = Vec::new();
        self.hand_on(x, 1.0, &mut pushes);
        pushes
    }

    fn cells(&self, count: usize) -> Vec<Cell> {
        let (a, b) = (self.posts[0], self.posts[self.posts.len() - 1]);
        let at = |k: usize| a + (b - a) * k as f64 / count as f64;
        (0..count)
            .map(|k| Cell { between: (at(k), at(k + 1)), unit: self.unit((at(k) + at(k + 1)) / 2.0) })
            .collect()
    }

    fn course(&self) -> Course {
        let (a, b) = (self.posts[0], self.posts[self.posts.len() - 1]);
        let longest = self.axles.iter().map(|a| a.0).fold(0.0, f64::max);
        let corners = self.posts.iter().flat_map(|p| self.axles.iter().map(move |a| p + a.0)).collect();
        Course { between: (a, b + longest), corners }
    }
}

fn go<T>(p: &Problem, deck: &Deck, step: Option<f64>, threads: usize, then: impl Fn(&Moving) -> T) -> T {
    let courses = [deck.course()];
    let place = |_: usize, x: f64| deck.train(x);
    then(&Moving {
        problem: p,
        slots: &deck.slots,
        courses: &courses,
        place: &place,
        step,
        cells: &[],
        uniform: 0.0,
        knife: 0.0,
        section: Some(Section { width: 1.0, tension: p.tension }),
        stiffness: None,
        threads,
    })
}

fn secant(p: &Place) -> Flexibility {
    Flexibility { bending: p.tangent.x, axial: 0.0 }
}

/// A masonry ring of a hundred joints under its own weight and a fill, invented.
fn ring(voussoirs: Option<usize>) -> Problem {
    let axis = circle(6.0, 65.0 * PI / 180.0);
    let loads: Vec<(f64, f64)> = (0..20)
        .map(|k| {
            let x = axis.start().x + (f64::from(k) + 0.5) / 20.0 * (axis.end().x - axis.start().x);
            (9.0 + 0.4 * x * x, x)
        })
        .collect();
    Problem {
        govern: None,
        depth: Some(Depth::Constant(0.6)),
        ring_weight: 22.0,
        voussoirs,
        ..problem(axis, down(&loads, 8.0))
    }
}

const TRAIN: [(f64, f64); 5] = [(0.0, 60.0), (1.6, 110.0), (2.9, 110.0), (6.0, 90.0), (7.3, 90.0)];

/// Every position solved on its own by the general program.
fn alone(moving: &Moving, x: f64) -> Analysis {
    let problem = Problem {
        draw: vec![LineKind::LeastThrust, LineKind::GreatestThrust],
        ..moving.problem_at(&(moving.place)(0, x))
    };
    analyse(&problem).unwrap()
}

#[test]
fn the_envelope_of_a_ring_is_that_of_all_positions_solved_alone() {
    for (voussoirs, friction) in [(Some(99), None), (None, None), (Some(60), Some(0.5))] {
        let p = Problem { friction, ..ring(voussoirs) };
        let deck = Deck::even(&p, 12, &TRAIN);
        go(&p, &deck, Some(0.5), 2, |moving| {
            let found = traverse(moving).unwrap();
            let course = &moving.courses[0];
            let length = course.between.1 - course.between.0;
            let parts = 2.0 * (length / 0.5 / 2.0).ceil();
            let mut places: Vec<f64> =
                (0..=parts as usize).map(|k| course.between.0 + length * k as f64 / parts).collect();
            places.extend(course.corners.iter().filter(|x| **x <= course.between.1));
            let all: Vec<Analysis> = places.iter().map(|&x| alone(moving, x)).collect();
            let most = |f: &dyn Fn(&Analysis) -> f64| all.iter().map(f).fold(f64::NEG_INFINITY, f64::max);
            let tally = &found.tally;
            let line = |a: &Analysis, i: usize| a.lines[i].clone();
            close(tally.offset.found.unwrap().value, most(&|a| line(a, 0).offset.unwrap().max_abs));
            close(tally.depth_use.found.unwrap().value, most(&|a| line(a, 0).depth_use.unwrap().ratio));
            close(tally.range[0].found.unwrap().value, -most(&|a| -support::push(&line(a, 1))));
            close(tally.range[1].found.unwrap().value, most(&|a| support::push(&line(a, 2))));
            let factor = |a: &Analysis| {
                // The train has left the span.
                let Some(f) = a.safety.as_ref().unwrap().load.clone() else { return f64::INFINITY };
                match f.status {
                    Status::Found => f.value.unwrap(),
                    Status::Unbounded => f64::INFINITY,
                    other => panic!("{other:?} {:?}", f.reason),
                }
            };
            close(tally.load_factor.found.unwrap().value, -most(&|a| -factor(a)));
            let least = |a: &Analysis| {
                let f = a.safety.as_ref().unwrap().load_least.clone();
                f.and_then(|f| f.value).unwrap_or(0.0)
            };
            close(tally.load_factor_least.found.unwrap().value, most(&least));
            let again = found.at_least_factor.unwrap().safety.unwrap();
            close(again.load.unwrap().value.unwrap(), tally.load_factor.found.unwrap().value);
            let m = again.mechanism.unwrap();
            assert!(m.hinges.len() >= 4 && m.residual < 1e-9);
            // The stations of all positions lie in the envelope, and touch it.
            let mut checked = 0;
            for station in &tally.envelope {
                // Both sides of a load have one length along the axis.
                let near = |s: f64| (s - station.s).abs() < 1e-9;
                let same = || tally.envelope.iter().filter(|o| near(o.s));
                let low = same().map(|o| o.eccentricity_min.unwrap().0).fold(f64::INFINITY, f64::min);
                let high = same().map(|o| o.eccentricity_max.unwrap().0).fold(f64::NEG_INFINITY, f64::max);
                // A joint that only some positions are told of cannot be compared.
                if !all.iter().all(|a| a.lines[0].stations.iter().any(|s| near(s.s))) {
                    continue;
                }
                let all = all.iter().flat_map(|a| &a.lines[0].stations).filter(|s| near(s.s));
                let (least, most) = all
                    .filter_map(|s| s.eccentricity)
                    .fold((f64::INFINITY, f64::NEG_INFINITY), |(a, b), e| (a.min(e), b.max(e)));
                if least.is_finite() {
                    close(low, least);
                    close(high, most);
                    checked += 1;
                }
            }
            assert!(checked >= 4, "{checked}");
        });
    }
}

#[test]
fn threads_change_nothing() {
    let p = ring(Some(99));
    let deck = Deck::even(&p, 12, &TRAIN);
    let one = go(&p, &deck, Some(0.1), 1, |m| traverse(m).unwrap());
    for threads in [2, 3, 7] {
        assert_eq!(one, go(&p, &deck, Some(0.1), threads, |m| traverse(m).unwrap()));
    }
    assert!(one.positions > 200);
}

/// D01 (from memory): three-hinged parabola, one rolling load: greatest moment PL/(6 sqrt3)=0.0962 PL at k=(3-sqrt3)/6=0.2113;
/// least -PL/16 at the quarters with the load at the crown; with dead UDL the offsets are these over H_dead+H_live. Source:
/// e.g. rolling-load chapters (0.0962, 0.211 L).
#[test]
fn one_load_rolls_over_a_three_hinged_parabola() {
    const P: f64 = 100.0;
    let worst = (3.0 - 3.0_f64.sqrt()) / 6.0 * SPAN;
    let mut posts: Vec<f64> = (0..=400).map(|k| SPAN * f64::from(k) / 400.0).collect();
    posts.extend([worst, SPAN - worst]);
    posts.sort_by(f64::total_cmp);
    let strips: Vec<(f64, f64)> =
        (0..400).map(|k| (10.0 * SPAN / 400.0, SPAN * (f64::from(k) + 0.5) / 400.0)).collect();
    let p = Problem {
        support: Some(Support::ThreeHinged),
        govern: None,
        ..problem(parabola(SPAN, RISE, 400), down(&strips, 20.0))
    };
    let deck = Deck::new(&p, posts, &[(0.0, P)]);
    let found = go(&p, &deck, None, 2, |m| traverse(m).unwrap());
    // Dead H = w L² / 8 f = 250, live H = P k L / 2 f.
    let near = |found: f64, expected: f64, slack: f64| {
        assert!((found - expected).abs() <= slack * expected.abs(), "found {found}, expected {expected}");
    };
    let at = |x: f64| *found.tally.envelope.iter().find(|s| (s.at.x - x).abs() < 1e-9).unwrap();
    // The axis is of chords and the dead load of strips, each with a sagitta of (0.1 m)² · 8 f / 8 L² = 5e-5 m.
    let under = at(worst);
    let h = 250.0 + P * worst / (2.0 * RISE);
    let vertical = 1.271_005_625_17;
    near(0.096_225_044_864_9 * P * SPAN / h, vertical, 1e-9);
    let slope = 4.0 * RISE * (SPAN - 2.0 * worst) / (SPAN * SPAN);
    // e = M / N with N = H cos φ + S sin φ: taken from the station itself, M = H v.
    let greatest = found
        .tally
        .envelope
        .iter()
        .filter_map(|s| Some((s.thrust_max?, s.eccentricity_max?)))
        .map(|(_, e)| e.0)
        .fold(0.0, f64::max);
    assert!((under.eccentricity_max.unwrap().0 - greatest).abs() < 0.02 && slope > 0.0);
    let alone = go(&p, &deck, None, 1, |m| analyse(&m.problem_at(&deck.train(worst))).unwrap());
    let line = &alone.lines[0];
    let v = line.stations.iter().filter(|s| (s.at.x - worst).abs() < 1e-9);
    let v = v.filter_map(|s| s.vertical_offset).fold(0.0, f64::max);
    near(v, vertical, 1e-4);
    // The load at the crown leaves the quarters lowest.
    let quarter = at(SPAN / 4.0);
    let (e, position) = quarter.eccentricity_min.unwrap();
    near(position.at, SPAN / 2.0, 1e-6);
    let alone = go(&p, &deck, None, 1, |m| analyse(&m.problem_at(&deck.train(SPAN / 2.0))).unwrap());
    let s = *alone.lines[0].stations.iter().find(|s| (s.at.x - SPAN / 4.0).abs() < 1e-9).unwrap();
    near(s.vertical_offset.unwrap(), -0.666_666_666_667, 1e-4);
    near(s.moment, -P * SPAN / 16.0, 1e-4);
    close(e, s.eccentricity.unwrap());
    assert!(found.uncertainty <= 1e-4 && found.finest < 0.1, "{} {}", found.uncertainty, found.finest);
}

fn elastic_lines(support: Support, places: &[f64], fractions: &[f64]) -> Vec<Influence> {
    let mut posts: Vec<f64> = places.iter().map(|u| u * SPAN).collect();
    posts.extend([0.0, SPAN]);
    posts.sort_by(f64::total_cmp);
    let p = Problem {
        support: Some(support),
        govern: Some(LineKind::Elastic),
        ..problem(parabola(SPAN, RISE, 4000), down(&[(1000.0, 10.0), (1000.0, 30.0)], 20.0))
    };
    let deck = Deck::new(&p, posts, &[(0.0, 1.0)]);
    let units: Vec<_> = places.iter().map(|u| (u * SPAN, deck.unit(u * SPAN))).collect();
    go(&p, &deck, None, 1, |moving| {
        let moving = Moving { stiffness: Some(&secant), ..*moving };
        influence(&moving, fractions, &units).unwrap().unwrap()
    })
}

/// E02 (from memory): two-hinged parabola, I=I_c sec(phi), inextensible: H=(5/8)(PL/f)(k-2k^3+k^4). Textbook formula;
/// Timoshenko & Young, Theory of Structures.
#[test]
fn influence_lines_of_a_two_hinged_parabola() {
    let places = [0.1, 0.25, 0.4, 0.5, 0.75];
    let line = &elastic_lines(Support::TwoHinged, &places, &[0.25])[0];
    for (o, k) in line.ordinates.iter().zip(places) {
        let expected = 0.625 * SPAN / RISE * (k - 2.0 * k.powi(3) + k.powi(4));
        assert!((o.push - expected).abs() <= 1e-6 * expected, "k = {k}: {} {expected}", o.push);
        // M at the quarter: that of the beam less H y.
        let beam = if k > 0.25 { 0.25 * (1.0 - k) } else { 0.75 * k } * SPAN;
        let m = beam - expected * 0.75 * RISE;
        assert!((o.moment - m).abs() < 1e-5, "k = {k}: {} {m}", o.moment);
    }
}

/// E07 (published): hingeless parabola, I=I_c sec(phi): influence lines H=(15/4)(L/f)u^2(1-u)^2,
/// M_A=L u(1-u)^2(5u/2-1), M_C=L(u^2/2)(1-(5/2)(1-u)^2) for u<=1/2. I.A. Karnovsky, O. Lebed, Advanced Methods of Structural
/// Analysis, Springer 2010 (title and authors from memory; page text read), Fig.10.6 p.332, Table A.19 p.577.
#[test]
fn influence_lines_of_a_hingeless_parabola() {
    let places = [0.05, 0.1, 0.15, 0.2, 0.25, 0.3, 0.35, 0.4, 0.45, 0.5];
    let lines = elastic_lines(Support::Hingeless, &places, &[0.0, 0.5]);
    for (i, u) in places.iter().enumerate() {
        let v = 1.0 - u;
        let h = 3.75 * SPAN / RISE * u * u * v * v;
        let at_springing = SPAN * u * v * v * (2.5 * u - 1.0);
        let at_crown = SPAN * u * u / 2.0 * (1.0 - 2.5 * v * v);
        for (found, expected) in [
            (lines[0].ordinates[i].push, h),
            (lines[0].ordinates[i].moment, at_springing),
            (lines[1].ordinates[i].moment, at_crown),
        ] {
            let off = (found - expected).abs() / expected.abs().max(0.01 * SPAN);
            assert!(off <= 1e-6, "u = {u}: found {found}, expected {expected}");
        }
    }
}

/// What an influence line of eccentricity says is the slope of the eccentricity itself.
#[test]
fn influence_of_eccentricity_is_its_slope() {
    let p = Problem { support: Some(Support::Hingeless), ..ring(None) };
    let deck = Deck::even(&p, 10, &[(0.0, 1.0)]);
    let x = deck.posts[3] + 0.3;
    let load = 1e-3;
    go(&p, &deck, None, 1, |moving| {
        let line = influence(moving, &[0.5], &[(x, deck.unit(x))]).unwrap().unwrap();
        let e = |factor: f64| {
            let mut pushes = deck.unit(x);
            pushes.iter_mut().for_each(|p| p.force *= factor);
            let a = analyse(&moving.problem_at(&pushes)).unwrap();
            let s = a.lines[0].stations.iter().find(|s| (s.s - line[0].s).abs() < 1e-9).unwrap();
            s.eccentricity.unwrap()
        };
        let slope = (e(load) - e(-load)) / (2.0 * load);
        let told = line[0].ordinates[0].eccentricity.unwrap();
        assert!((slope - told).abs() <= 1e-6 * told.abs(), "{slope} {told}");
    });
}

/// Solves the elastic ring for every interval of a uniform load and every place of a knife edge; the patch found from the signs
/// of the influence lines is the worst.
#[test]
fn patches_are_the_worst_of_all_intervals() {
    const CELLS: usize = 36;
    let uniform = 12.0;
    for support in [Some(Support::Hingeless), Some(Support::ThreeHinged), None] {
        let p = Problem { support, tension: support.is_some(), ..ring(Some(24)) };
        let deck = Deck::even(&p, CELLS, &[]);
        let cells = deck.cells(CELLS);
        let place = |_: usize, _: f64| Vec::new();
        let moving = Moving {
            problem: &p,
            slots: &deck.slots,
            courses: &[],
            place: &place,
            step: None,
            cells: &cells,
            uniform,
            knife: 0.0,
            section: None,
            stiffness: None,
            threads: 1,
        };
        let found = traverse(&moving).unwrap();
        let mut worst = (0.0_f64, f64::INFINITY);
        for from in 0..CELLS {
            for to in from + 1..=CELLS {
                let mut pushes = Vec::new();
                for cell in &cells[from..to] {
                    let q = uniform * (cell.between.1 - cell.between.0);
                    pushes.extend(cell.unit.iter().map(|u| Push { force: u.force * q, ..*u }));
                }
                let a = analyse(&moving.problem_at(&pushes)).unwrap();
                worst.0 = worst.0.max(a.lines[0].depth_use.unwrap().ratio);
                let factor = a.safety.and_then(|s| s.load).and_then(|f| f.value);
                worst.1 = worst.1.min(factor.unwrap_or(f64::INFINITY));
            }
        }
        assert_eq!(found.tally.depth_use.missing, None);
        let told = found.tally.depth_use.found.unwrap().value;
        // More than one stretch may be adverse, so it can be worse than any one interval, and never better.
        assert!(told >= worst.0 * (1.0 - 1e-9), "{support:?}: {told} {}", worst.0);
        assert!(told <= worst.0 * 1.2, "{support:?}: {told} {}", worst.0);
        // The loading of the largest offset, solved on its own, has that offset.
        let again = found.at_worst.unwrap().lines[0].offset.unwrap().max_abs;
        let offset = found.tally.offset.found.unwrap().value;
        assert!((again - offset).abs() <= 1e-9 * offset, "{support:?}: {again} {offset}");
        if support.is_none() {
            let factor = found.tally.load_factor.found.unwrap().value;
            assert!(factor <= worst.1 * (1.0 + 1e-9), "{factor} {}", worst.1);
            assert!(factor >= worst.1 * 0.9, "{factor} {}", worst.1);
        }
    }
}

/// E08 (published): hingeless secant parabola, crown load: H=15/64 PL/f; a knife edge finds the crown for the greatest push.
/// E04 (from memory): two-hinged secant parabola under UDL: full span H=wL^2/8f, the greatest push that a uniform load makes.
#[test]
fn a_knife_edge_finds_the_worst_ordinate() {
    for (support, uniform, knife, expected) in [
        (Support::Hingeless, 0.0, 1.0, 15.0 / 64.0 * SPAN / RISE),
        (Support::TwoHinged, 10.0, 0.0, 10.0 * SPAN * SPAN / (8.0 * RISE)),
    ] {
        let p = Problem {
            support: Some(support),
            govern: Some(LineKind::Elastic),
            tension: true,
            ..problem(parabola(SPAN, RISE, 800), down(&[(4000.0, 10.0), (4000.0, 30.0)], 20.0))
        };
        let deck = Deck::even(&p, 400, &[]);
        let cells = deck.cells(399);
        let place = |_: usize, _: f64| Vec::new();
        let moving = Moving {
            problem: &p,
            slots: &deck.slots,
            courses: &[],
            place: &place,
            step: None,
            cells: &cells,
            uniform,
            knife,
            section: None,
            stiffness: Some(&secant),
            threads: 1,
        };
        let dead = elastic(&p, &secant).unwrap();
        let found = traverse(&moving).unwrap().tally.push[1].found.unwrap().value;
        let live = found - support::push(&dead.lines[0]);
        assert!((live - expected).abs() <= 2e-5 * expected, "{support:?}: {live} {expected}");
    }
}

#[test]
fn a_hundred_joints_take_a_thousand_positions() {
    let p = ring(Some(99));
    let deck = Deck::even(&p, 12, &TRAIN);
    let course = deck.course();
    let step = (course.between.1 - course.between.0) / 1000.0;
    let start = std::time::Instant::now();
    let found: Traverse = go(&p, &deck, Some(step), 1, |m| traverse(m).unwrap());
    println!("{} positions of {} axles on one thread: {:?}", found.positions, TRAIN.len(), start.elapsed());
    assert!(found.positions >= 1000);
    // Memory: what is kept is one envelope of the joints, whatever the number of positions.
    assert_eq!(
        found.tally.envelope.len(),
        go(&p, &deck, Some(1.0), 1, |m| traverse(m).unwrap()).tally.envelope.len()
    );
}

/// Measures a thousand positions of a five-axle train over a ring of a hundred joints, and writes the linear programs of some of
/// them for `tests/bench/traffic.py`, which solves the same ones with another solver. Run by that script.
#[test]
#[ignore = "a measurement, run by tests/bench/traffic.py in release"]
fn programs_for_another_solver() {
    let out = std::env::var_os("THRUSTMARK_BENCH").unwrap();
    let axis = circle(6.0, 65.0 * PI / 180.0);
    let (a, b) = (axis.start().x, axis.end().x);
    let dead: Vec<(f64, f64)> = (0..40)
        .map(|k| {
            let x = a + (f64::from(k) + 0.5) / 40.0 * (b - a);
            (7.0 + 0.4 * x * x, x)
        })
        .collect();
    let p = Problem {
        govern: None,
        depth: Some(Depth::Constant(0.6)),
        voussoirs: Some(99),
        ..problem(axis, down(&dead, 8.0))
    };
    let deck = Deck::even(&p, 12, &TRAIN);
    let course = deck.course();
    let length = course.between.1 - course.between.0;
    let mut times = Vec::new();
    let mut positions = 0;
    for _ in 0..9 {
        let start = std::time::Instant::now();
        let found = go(&p, &deck, Some(length / 1000.0), 1, |m| traverse(m).unwrap());
        times.push(start.elapsed().as_secs_f64());
        positions = found.positions;
    }
    times.sort_by(f64::total_cmp);
    let whole = p.axis.length();
    let joints: Vec<_> = (0..=99)
        .map(|k| {
            let s = whole * f64::from(k) / 99.0;
            let (at, t) = (p.axis.point_at(s), p.axis.tangent_at(s, true));
            serde_json::json!([s, at.x, at.y, t.x, t.y, 0.6])
        })
        .collect();
    let foot = |x: f64| p.axis.crossings_of_vertical(x)[0];
    let force = |x: f64, f: f64| serde_json::json!([foot(x), x, -f]);
    let chosen: Vec<f64> = (1..40).map(|k| course.between.0 + length * f64::from(k) / 40.0).collect();
    let solved: Vec<_> = go(&p, &deck, None, 1, |moving| {
        chosen
            .iter()
            .map(|&x| {
                let a = alone(moving, x);
                let safety = a.safety.unwrap();
                let pushes = deck.train(x);
                serde_json::json!({
                    "live": pushes.iter().map(|p| force(p.at.x, -p.force.y)).collect::<Vec<_>>(),
                    "least": support::push(&a.lines[1]),
                    "greatest": support::push(&a.lines[2]),
                    "closest": a.lines[0].depth_use.unwrap().ratio,
                    "factor": safety.load.and_then(|f| f.value),
                    "factor_least": safety.load_least.and_then(|f| f.value),
                })
            })
            .collect()
    });
    let told = serde_json::json!({
        "positions": positions,
        "seconds": times,
        "joints": joints,
        "dead": dead.iter().map(|&(w, x)| force(x, w)).collect::<Vec<_>>(),
        "solved": solved,
    });
    std::fs::write(out, told.to_string()).unwrap();
}
