#![allow(clippy::float_cmp, reason = "whole numbers that come out exactly")]

use proptest::prelude::*;

use super::fill::Fill;
use super::posts::Posts;
use super::{Parts, Road};
use crate::geometry::{Path, Point, Segment, Vec2};
use crate::model::Span;

fn span(axis: Path) -> Span {
    Span {
        name: String::new(),
        axis,
        sources: vec![],
        ring: None,
        hinges: vec![],
        loads: vec![],
        line_loads: vec![],
    }
}

/// A ring of radius 6.25 m about (0, −3.75), span 10, rise 2.5, its extrados 0.3 m outside.
fn arc() -> Path {
    let (a, b) = (Point::new(-5.0, 0.0), Point::new(5.0, 0.0));
    Path::new([Segment::bulge(a, b, -0.5)]).unwrap()
}

fn fill(dispersal: f64) -> Fill {
    Fill::new(&span(arc()), &[(0.0, 0.6)], Some(40), dispersal).unwrap()
}

fn total(parts: &Parts) -> Vec2 {
    parts.pushes.iter().map(|p| p.force).chain(parts.beside).fold(Vec2::ZERO, |a, b| a + b)
}

/// By hand: the edge of the spread from (0.15, 3.9) down 0.5 : 1 meets the circle of radius 6.55 about (0, −3.75) where
/// `(0.15 + t / 2)² + (7.65 − t)² = 6.55²`: 1.25 t² − 15.15 t + 15.6425 = 0, t = 1.139675, x = 0.719837.
#[test]
fn a_wheel_at_the_crown_spreads_as_far_as_by_hand() {
    let t = (15.15 - (15.15_f64.powi(2) - 4.0 * 1.25 * 15.6425).sqrt()) / 2.5;
    let x = 0.15 + t / 2.0;
    assert!((x - 0.719_837).abs() < 1e-6, "{x}");
    let fill = fill(0.5);
    let mut parts = Parts::default();
    fill.hand_on(Point::new(0.0, 3.9), 0.3, 100.0, 0.0, &mut parts);
    assert!((total(&parts) - Vec2::new(0.0, -100.0)).hypot() < 1e-12);
    assert_eq!(parts.beside, [Vec2::ZERO; 2]);
    // The outermost parts end at the edge: their middles lie half their width inside, by an even pressure.
    let pressure = 100.0 / (2.0 * x);
    let last = parts.pushes.last().unwrap();
    assert!((last.at.x + -last.force.y / pressure / 2.0 - x).abs() < 1e-9);
    let first = parts.pushes.first().unwrap();
    assert!((first.at.x - -first.force.y / pressure / 2.0 + x).abs() < 1e-9);
    // Moment about the middle: an even pressure has none.
    assert!(parts.pushes.iter().map(|p| p.at.x * p.force.y).sum::<f64>().abs() < 1e-9);
}

#[test]
fn a_steeper_side_reaches_less_far() {
    // On the left haunch the extrados falls away to the left, so the left edge of the spread goes farther.
    let mut parts = Parts::default();
    fill(0.5).hand_on(Point::new(-3.0, 3.9), 0.0, 10.0, 2.0, &mut parts);
    let ends = (parts.pushes.first().unwrap().at.x, parts.pushes.last().unwrap().at.x);
    assert!(-3.0 - ends.0 > ends.1 + 3.0, "{ends:?}");
    assert!((total(&parts) - Vec2::new(2.0, -10.0)).hypot() < 1e-12);
    // A force along the road acts at the level of the road.
    assert!(parts.pushes.iter().all(|p| (p.at.y - 3.9).abs() < 1e-12));
}

#[test]
fn a_load_on_a_line_presses_on_one_piece() {
    let mut parts = Parts::default();
    fill(0.0).hand_on(Point::new(1.0, 3.9), 0.0, 10.0, 0.0, &mut parts);
    assert_eq!(parts.pushes.len(), 1);
    let mut parts = Parts::default();
    fill(0.0).hand_on(Point::new(9.0, 3.9), 0.0, 10.0, 0.0, &mut parts);
    assert_eq!(parts.beside[1], Vec2::new(0.0, -10.0));
}

/// As a simply supported beam: 40 kN a quarter on from one post gives it three quarters.
#[test]
fn a_deck_hands_on_by_the_lever() {
    let axis = arc();
    let posts = Posts::new(&axis, &[-2.0, 2.0], false).unwrap();
    assert_eq!(posts.supports(), [-5.0, -2.0, 2.0, 5.0]);
    assert_eq!(posts.end_spans(), [true, true]);
    let mut parts = Parts::default();
    posts.hand_on(-1.0, 40.0, &mut parts);
    assert_eq!(
        parts.pushes.iter().map(|p| (p.slot, p.force.y)).collect::<Vec<_>>(),
        [(0, -30.0), (1, -10.0)]
    );
    let mut parts = Parts::default();
    posts.hand_on(-4.0, 30.0, &mut parts);
    assert!((parts.beside[0].y + 20.0).abs() < 1e-12 && (parts.pushes[0].force.y + 10.0).abs() < 1e-12);
    let mut parts = Parts::default();
    posts.hand_on(7.0, 30.0, &mut parts);
    assert_eq!(parts.beside, [Vec2::ZERO, Vec2::new(0.0, -30.0)]);
}

/// Two equal spans with the load in the middle of the first: 13/32, 11/16 and −3/32 [handbook case, from memory; it follows from
/// the three moments: M = −3 P L / 32].
#[test]
fn a_continuous_deck_hands_on_by_its_influence_lines() {
    let axis = arc();
    let posts = Posts::new(&axis, &[0.0], true).unwrap();
    assert_eq!(posts.supports(), [-5.0, 0.0, 5.0]);
    let mut parts = Parts::default();
    posts.hand_on(-2.5, 32.0, &mut parts);
    assert!((parts.beside[0].y + 13.0).abs() < 1e-12, "{parts:?}");
    assert!((parts.pushes[0].force.y + 22.0).abs() < 1e-12);
    assert!((parts.beside[1].y - 3.0).abs() < 1e-12);
    // A load over a post goes into it alone.
    let mut parts = Parts::default();
    posts.hand_on(0.0, 32.0, &mut parts);
    assert!((parts.pushes[0].force.y + 32.0).abs() < 1e-12 && parts.pushes.len() == 1);
}

#[test]
fn distances_run_along_a_sloping_road() {
    let path = Path::polyline(&[Point::new(0.0, 0.0), Point::new(4.0, 3.0)]).unwrap();
    let road = Road::over(&[path], 0.0, 4.0).unwrap();
    assert!((road.length_at(-4.0) + 5.0).abs() < 1e-12 && (road.length_at(8.0) - 10.0).abs() < 1e-12);
    assert!((road.over_x(8.0) - Point::new(8.0, 6.0)).hypot() < 1e-12);
    let p = road.point_at(road.length_at(2.0) - 5.0);
    assert!((p - Point::new(-2.0, -1.5)).hypot() < 1e-12);
}

proptest! {
    /// No force is lost, and a deck loses no moment either.
    #[test]
    fn no_force_is_lost(
        x in -12.0..12.0_f64,
        contact in 0.0..2.0_f64,
        dispersal in 0.0..2.0_f64,
        down in 0.1..1000.0_f64,
        along in -200.0..200.0_f64,
        level in 2.9..6.0_f64,
        posts in prop::collection::vec(-5.0..5.0_f64, 1..9),
        continuous: bool,
    ) {
        let mut parts = Parts::default();
        fill(dispersal).hand_on(Point::new(x, level), contact, down, along, &mut parts);
        let whole = Vec2::new(along, -down);
        prop_assert!((total(&parts) - whole).hypot() <= 1e-9 * whole.hypot(), "{parts:?}");
        prop_assert!(parts.pushes.iter().all(|p| p.slot < 40 && p.force.y <= 0.0));
        let axis = arc();
        let posts = Posts::new(&axis, &posts, continuous).unwrap();
        let mut parts = Parts::default();
        posts.hand_on(x, down, &mut parts);
        prop_assert!((total(&parts) + Vec2::new(0.0, down)).hypot() <= 1e-9 * down);
        let (first, last) = (posts.supports()[0], posts.supports()[posts.supports().len() - 1]);
        if (first..=last).contains(&x) {
            let ends = -parts.beside[0].y * first - parts.beside[1].y * last;
            let moment: f64 = parts.pushes.iter().map(|p| -p.force.y * p.at.x).sum::<f64>() + ends;
            prop_assert!((moment - down * x).abs() <= 1e-9 * down * 12.0);
        }
    }
}
