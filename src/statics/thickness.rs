//! Least thickness of a ring under its own weight and its loads.

use super::{Depth, Factor, LineKind, Problem, Proof, Status, Unsolved, analyse};
use crate::tolerance;

/// Steps of the search.
const STEPS: usize = 60;

/// Least thickness that a line of thrust still fits into: by what factor the drawn depth may shrink, everywhere alike,
/// with the weight of the ring shrinking with it (the other loads stay). The geometric factor, which leaves the weight as
/// it is, is another number.
///
/// The largest `|e| / d` of the closest line is ½ there; the factor is found by the secant rule. The proof is that of the
/// closest line at the least thickness, turned into factors.
///
/// # Errors
///
/// As [`analyse`]; [`Unsolved::Input`] where no depth is known.
pub fn least_thickness(problem: &Problem) -> Result<Factor, Unsolved> {
    let Some(depth) = &problem.depth else {
        return Err(Unsolved::Input(
            "the least thickness of a ring needs a drawn depth to start from".into(),
        ));
    };
    let mut thin = problem.clone();
    thin.govern = Some(LineKind::Closest);
    thin.draw.clear();
    thin.varying.clear();
    thin.weight_varies = false;
    let without =
        |status, reason: &str| Ok(Factor { status, value: None, reason: Some(reason.into()), proof: None });
    // What is left of the depth at the factor `k` when the line has taken its share: negative when it does not fit.
    let mut share = |k: f64| -> Result<Option<Proof>, Unsolved> {
        thin.depth = Some(scaled(depth, k));
        Ok(analyse(&thin)?.lines[0].proof)
    };
    let Some(first) = share(1.0)? else {
        return without(Status::None, "no line of thrust is closest to the axis");
    };
    if first.primal <= tolerance::FUNICULAR {
        return without(
            Status::Unbounded,
            "the axis is a funicular of the loads: any thickness holds the line",
        );
    }
    // `2 τ(k) = 1` is sought in the logarithms, where it is nearly a straight line of slope −1.
    let (mut a, mut fa) = (0.0_f64, (2.0 * first.primal).ln());
    let (mut b, mut last) = (fa, first);
    for _ in 0..STEPS {
        let Some(proof) = share(b.exp())? else {
            return without(Status::Refused, "the search for the closest line did not end");
        };
        last = proof;
        let fb = (2.0 * proof.primal).ln();
        if fb.abs() <= tolerance::THICKNESS {
            let k = b.exp();
            return Ok(Factor {
                status: Status::Found,
                value: Some(k),
                reason: None,
                proof: Some(Proof { primal: k, dual: k * 2.0 * proof.dual, gap: proof.gap }),
            });
        }
        let slope = if (b - a).abs() > 0.0 { (fb - fa) / (b - a) } else { -1.0 };
        let slope = if slope < -0.1 && slope.is_finite() { slope } else { -1.0 };
        (a, fa) = (b, fb);
        b -= fb / slope;
    }
    let reason = format!("the search ended at {:.6} of the room that the line may take", 2.0 * last.primal);
    without(Status::Refused, &reason)
}

fn scaled(depth: &Depth, k: f64) -> Depth {
    match depth {
        Depth::Constant(d) => Depth::Constant(d * k),
        Depth::Linear { springing, crown } => Depth::Linear { springing: springing * k, crown: crown * k },
        Depth::Table(table) => Depth::Table(table.iter().map(|&(s, d)| (s, d * k)).collect()),
    }
}
