//! Trains of the job over the spans of a drawing: which stands on which case, and what came out.

use super::problem;
use crate::job::{Settings, Step, Traffic, same_name};
use crate::model::{self, Case, Model, Span, cases, traffic::Crossing, traffic::NotComputed};
use crate::refusal::Refusal;
use crate::statics::traffic::{Cell, Course, Moving, Push, Section, influence, traverse};
use crate::verdict::traffic::{Computed, Ran};

/// Every train on every span, with the index of its case.
///
/// # Errors
/// As [`problem::problem`].
pub fn run(model: &Model, cases: &[Case], settings: &Settings) -> Result<Vec<Vec<Ran>>, Refusal> {
    model
        .spans
        .iter()
        .map(|span| {
            settings
                .traffic
                .iter()
                .map(|train| {
                    let named = train.case.as_deref().unwrap_or(cases::DRAWN);
                    let case = cases.iter().position(|c| same_name(&c.name, named)).unwrap_or(0);
                    let ended = match model::traffic::crossing(model, span, settings, train) {
                        Ok(crossing) => cross(model, span, &cases[case], settings, train, crossing)?,
                        Err(not) => Err(not),
                    };
                    Ok(Ran { name: train.name.clone(), case, ended })
                })
                .collect()
        })
        .collect()
}

fn cross(
    model: &Model,
    span: &Span,
    case: &Case,
    settings: &Settings,
    train: &Traffic,
    crossing: Crossing,
) -> Result<Result<Box<Computed>, NotComputed>, Refusal> {
    let problem = problem::problem(model, span, case, settings)?;
    let stated = |p: model::traffic::Push, own| Push { slot: p.slot, at: p.at, force: p.force, own };
    let place = |course: usize, x: f64| -> Vec<Push> {
        crossing.place(course, x).into_iter().map(|(p, own)| stated(p, own)).collect()
    };
    let courses: Vec<Course> =
        crossing.courses.iter().map(|c| Course { between: c.between, corners: c.corners.clone() }).collect();
    let unit = |pushes: Vec<model::traffic::Push>| pushes.into_iter().map(|p| stated(p, true)).collect();
    let stretches = crossing.stretches();
    let cells: Vec<Cell> = if crossing.uniform + crossing.knife > 0.0 {
        stretches.iter().map(|(between, p)| Cell { between: *between, unit: unit(p.clone()) }).collect()
    } else {
        Vec::new()
    };
    let moving = Moving {
        problem: &problem,
        slots: &crossing.slots,
        courses: &courses,
        place: &place,
        step: match train.step {
            Step::Auto => None,
            Step::Metres(step) => Some(step),
        },
        cells: &cells,
        uniform: crossing.uniform,
        knife: crossing.knife,
        section: settings.rib.width.map(|width| Section { width, tension: settings.rib.tension }),
        stiffness: None,
        threads: std::thread::available_parallelism().map_or(1, std::num::NonZero::get),
    };
    let not = |error: crate::statics::Unsolved| NotComputed {
        why: error.to_string(),
        remedy: "look at the axis, its hinges and support, and the loads of the case".into(),
    };
    let traverse = match traverse(&moving) {
        Ok(found) => found,
        Err(error) => return Ok(Err(not(error))),
    };
    let lines = if train.influence.is_empty() {
        None
    } else {
        let units: Vec<(f64, Vec<Push>)> = stretches
            .iter()
            .flat_map(|((a, b), _)| [*a, f64::midpoint(*a, *b)])
            .chain(stretches.last().map(|s| s.0.1))
            .map(|x| (x, unit(crossing.unit(x, 0.0))))
            .collect();
        match influence(&moving, &train.influence, &units) {
            Ok(lines) => Some(lines),
            Err(error) => return Ok(Err(not(error))),
        }
    };
    Ok(Ok(Box::new(Computed { crossing, traverse, influence: lines })))
}
