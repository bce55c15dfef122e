//! Comparisons of made-up runs.

use super::spans::{apart, path};
use super::*;
use crate::write::sample;

fn whats(changes: &[Change]) -> Vec<What> {
    changes.iter().map(|c| c.what).collect()
}

#[test]
fn a_run_is_the_same_as_itself() {
    let run = sample::arch(7, 30.0, 6.0).limited(0.05).run();
    assert_eq!(changes(&run, &run), []);
    // Rounding by another program is no change.
    let mut rounded = run.clone();
    for load in &mut rounded.spans[0].loads {
        load.at[0] += 1e-9;
        load.force[1] *= 1.0 + 1e-10;
    }
    assert_eq!(changes(&run, &rounded), []);
}

#[test]
fn loads_are_matched_by_place_and_label() {
    let old = sample::arch(5, 30.0, 6.0).run();
    let mut new = old.clone();
    let loads = &mut new.spans[0].loads;
    loads.iter_mut().for_each(|l| l.text = Some(format!("{} = 1 kN", l.label)));
    let mut named = old.clone();
    named.spans[0].loads.clone_from(loads);
    // Moved far, found by its name; heavier where it stands; another gone and one new.
    let mut changed = named.clone();
    let loads = &mut changed.spans[0].loads;
    loads[1].at[0] += 2.0;
    loads[2].force[1] *= 2.0;
    let gone = loads.remove(4);
    let mut added = gone.clone();
    added.label = "Q".into();
    added.at[0] -= 1.5;
    loads.push(added);
    let found = changes(&named, &changed);
    assert_eq!(whats(&found), [What::LoadAdded, What::LoadRemoved, What::LoadChanged, What::LoadChanged]);
    assert!(found[0].message.contains("load Q"), "{found:#?}");
    assert_eq!(found[1].at, Some(gone.at));
    assert!(found[2].message.contains("moved by 2000 mm"), "{found:#?}");
    assert!(found[3].message.contains("now, was"), "{found:#?}");
    // Numbers that only count the loads are no names: one taken out at the left leaves the others as they were.
    let mut bare = old.clone();
    bare.spans[0].loads.iter_mut().for_each(|l| l.text = None);
    let mut fewer = bare.clone();
    fewer.spans[0].loads.remove(0);
    for (i, load) in fewer.spans[0].loads.iter_mut().enumerate() {
        load.label.clone_from(&bare.spans[0].loads[i].label);
    }
    assert_eq!(whats(&changes(&bare, &fewer)), [What::LoadRemoved]);
}

#[test]
fn an_axis_that_moved_is_measured_where_it_moved_most() {
    let old = sample::arch(5, 30.0, 6.0).run();
    let mut new = old.clone();
    let axis = &mut new.spans[0].axis;
    axis.curve.iter_mut().for_each(|c| c[1] += 0.25);
    let found = changes(&old, &new);
    assert_eq!(found[0].what, What::Axis);
    assert!(found[0].message.contains("upward"), "{found:#?}");
    let distance = found[0].new.as_f64().unwrap();
    // Somewhere it is moved square to itself.
    assert!(distance > 0.2 && distance <= 0.25 + 1e-9, "{distance}");
    let (a, b) = (path(&old.spans[0].axis).unwrap(), path(&new.spans[0].axis).unwrap());
    let (forth, back) = (apart(&a, &b), apart(&b, &a));
    assert!((forth.distance - back.distance).abs() < 1e-9);
}

/// Two arcs over one chord: the rises differ by exactly the largest distance, at the crown.
#[test]
fn the_largest_distance_of_two_arcs_is_exact() {
    use crate::geometry::{Path, Point, Segment};
    let arc = |rise: f64| {
        let bulge = -rise / 15.0;
        Path::new([Segment::bulge(Point::new(0.0, 0.0), Point::new(30.0, 0.0), bulge)]).unwrap()
    };
    let found = apart(&arc(6.0), &arc(6.5));
    assert!((found.distance - 0.5).abs() < 1e-9, "{found:?}");
    assert!((found.new.x - 15.0).abs() < 1e-3 && (found.new.y - 6.5).abs() < 1e-6, "{found:?}");
}

#[test]
fn verdicts_settings_and_ring_are_told() {
    let old = sample::arch(5, 30.0, 6.0).limited(9.0).run();
    let mut new = sample::arch(5, 30.0, 6.0).limited(0.0001).run();
    new.settings = serde_json::json!({"limits": {"offset": 0.0001}, "rib": {"depth": 0.4}});
    let mut old = old;
    old.settings = serde_json::json!({"limits": {"offset": 9.0}});
    if let Some(ring) = &mut new.spans[0].ring {
        ring.depth_min -= 0.1;
    }
    let found = changes(&old, &new);
    assert_eq!(found[0].what, What::Verdict);
    assert_eq!(found[1].what, What::Finding);
    let settings: Vec<&str> =
        found.iter().filter(|c| c.what == What::Setting).filter_map(|c| c.name.as_deref()).collect();
    assert_eq!(settings, ["limits.offset", "rib.depth"]);
    if new.spans[0].ring.is_some() {
        assert!(found.iter().any(|c| c.what == What::Ring && c.message.contains("thinner")));
    }
}

#[test]
fn spans_that_come_and_go_are_told() {
    let one = sample::arch(5, 30.0, 6.0).run();
    let two = sample::run_of(vec![sample::arch(5, 30.0, 6.0), sample::arch(5, 30.0, 6.0)]);
    let mut old = two.clone();
    old.spans.truncate(1);
    let added = changes(&old, &two);
    // Whether both stand on one ground in the sample or side by side, one is new.
    assert_eq!(added.iter().filter(|c| c.what == What::Span).count(), 1, "{added:#?}");
    let gone = changes(&two, &old);
    assert!(gone.iter().any(|c| c.what == What::Span && c.message.contains("is gone")));
    assert_eq!(changes(&one, &one), []);
}
