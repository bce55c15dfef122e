//! Stress in a rectangular section from thrust and moment.
//!
//! Uncracked: `σ = N / (b d) (1 ± 6 e / d)`; tension begins at `|e| = d / 6`, the edge of the kern. Without tension the stress
//! is a triangle of length `3 (d / 2 − |e|)` with its peak `σ = 2 N / (3 b (d / 2 − |e|))` at the edge [Navier 1826 for both].

/// Stress at the two edges of a section, compression positive, in units of force over length squared of the arguments.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct EdgeStress {
    /// At the extrados.
    pub extrados: f64,
    /// At the intrados.
    pub intrados: f64,
    /// Length of the part in compression; the depth when all of it is.
    pub block: f64,
}

/// Stress of a rectangle of `depth` and `width` that can take tension: thrust and moment in kN and kN·m, lengths in m give
/// kN/m². `None` when depth or width is not positive.
pub fn uncracked(thrust: f64, moment: f64, depth: f64, width: f64) -> Option<EdgeStress> {
    sound(depth, width)?;
    let (mean, bent) = (thrust / (width * depth), 6.0 * moment / (width * depth * depth));
    let (extrados, intrados) = (mean + bent, mean - bent);
    let block = if extrados >= 0.0 && intrados >= 0.0 {
        depth
    } else if extrados <= 0.0 && intrados <= 0.0 {
        0.0
    } else {
        depth * extrados.max(intrados) / (extrados - intrados).abs()
    };
    Some(EdgeStress { extrados, intrados, block })
}

/// The same without tension. `None` too when the thrust is no compression or passes at or beyond an edge: no stress can
/// balance it.
pub fn without_tension(thrust: f64, moment: f64, depth: f64, width: f64) -> Option<EdgeStress> {
    sound(depth, width)?;
    let e = moment / thrust;
    if thrust <= 0.0 || !e.is_finite() || e.abs() >= depth / 2.0 {
        return None;
    }
    if e.abs() <= depth / 6.0 {
        return uncracked(thrust, moment, depth, width);
    }
    let block = 3.0 * (depth / 2.0 - e.abs());
    let peak = 2.0 * thrust / (width * block);
    let (extrados, intrados) = if e > 0.0 { (peak, 0.0) } else { (0.0, peak) };
    Some(EdgeStress { extrados, intrados, block })
}

/// Largest moment that a rectangle without tension carries beside a thrust, at a uniform block of stress `strength` (kN/m²):
/// `M = N (d / 2 − N / (2 b f))`, in kN·m; the same law as `N = f b d (1 − 2 e / d)` [EN 1992-1-1:2004, 12.6.1 (3), Eq.
/// (12.2) with η = 1]. `None` when the thrust is no compression or above the strength of the whole section.
pub fn moment_capacity(thrust: f64, depth: f64, width: f64, strength: f64) -> Option<f64> {
    sound(depth, width)?;
    let moment = thrust * (depth / 2.0 - thrust / (2.0 * width * strength));
    (thrust >= 0.0 && strength > 0.0 && moment >= 0.0).then_some(moment)
}

/// Largest thrust that a rectangle without tension carries at eccentricity `e`, kN: `N = f b (d − 2 |e|)`.
pub fn thrust_capacity(e: f64, depth: f64, width: f64, strength: f64) -> Option<f64> {
    sound(depth, width)?;
    let thrust = strength * width * (depth - 2.0 * e.abs());
    (strength > 0.0 && thrust >= 0.0).then_some(thrust)
}

fn sound(depth: f64, width: f64) -> Option<()> {
    (depth > 0.0 && width > 0.0 && depth.is_finite() && width.is_finite()).then_some(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn blocks() {
        // At the edge of the kern both laws meet; beyond it the block's centroid is where the thrust is.
        let (a, b) =
            (uncracked(100.0, 10.0, 0.6, 1.0).unwrap(), without_tension(100.0, 10.0, 0.6, 1.0).unwrap());
        assert!((a.extrados - b.extrados).abs() < 1e-9 && a.intrados.abs() < 1e-9);
        let c = without_tension(100.0, -24.0, 0.6, 1.0).unwrap();
        assert!(c.extrados.abs() < 1e-12 && (0.3 - c.block / 3.0 - 0.24).abs() < 1e-12);
        assert!((c.intrados * c.block / 2.0 - 100.0).abs() < 1e-9);
        assert!(without_tension(100.0, 30.0, 0.6, 1.0).is_none());
        assert!(without_tension(-1.0, 0.0, 0.6, 1.0).is_none());
        let d = uncracked(0.0, 6.0, 0.6, 1.0).unwrap();
        assert!((d.extrados - 100.0).abs() < 1e-9 && (d.block - 0.3).abs() < 1e-12);
    }
}
