//! Worst and best value of a factor over inputs that are only known to lie between two values.
//!
//! Where the extremes lie follows from how an input enters the program of the factor. A line of thrust is admissible when
//! `|M| ≤ N d / (2 g)`, `|S| ≤ μ N`, `|M| ≤ N d / 2 − N² / (2 f b)` in every joint, with `M`, `N`, `S` affine in the
//! reaction, in every weight and in the load factor:
//!
//! - A greater strength or coefficient of friction, and a greater depth of a weightless ring, leave every admissible line
//!   admissible: the factor *rises* with them, and its extremes lie at their ends.
//! - In a weight (unit weight, width, level of a fill) together with the reaction and the load factor the admissible set is
//!   convex (`N² / f b` is convex in `N` and `f b` together), so the factor is *quasi-concave* in it: it has no least value
//!   inside, and its worst value over a box lies at a corner [S. Boyd and L. Vandenberghe, Convex Optimization, 2004,
//!   sections 3.4 and 3.2.6]. Its best value may lie inside.
//! - Of all others (the depth of a ring that weighs) nothing is known, and they are sampled.
//!
//! An extreme that lies at a corner is exact; one that is sampled is the worst (or best) of the values looked at, refined
//! by golden sections about it.

/// How a factor answers to an input.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Effect {
    /// Not at all.
    None,
    /// It never falls when the input grows.
    Rising,
    /// It has no least value inside an interval.
    QuasiConcave,
    /// Nothing is known.
    Unknown,
}

/// An input between two values.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Input {
    /// Its least value.
    pub low: f64,
    /// Its greatest value.
    pub high: f64,
    /// How the factor answers to it.
    pub effect: Effect,
}

/// How an extreme was found.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Found {
    /// At a corner, where it must lie.
    Corners,
    /// By sampling between the ends.
    Sampling,
}

/// An extreme of a factor.
#[derive(Debug, Clone, PartialEq)]
pub struct Extreme {
    /// The factor; infinite where it has no bound, minus infinite where there is none.
    pub value: f64,
    /// The inputs that give it, in their order; one without effect has its low value.
    pub at: Vec<f64>,
    /// How it was found.
    pub found: Found,
}

/// Values of an unknown input in the first round: its ends and seven between.
const SAMPLES: u32 = 9;
/// Golden sections of one refinement, and rounds over all inputs.
const SECTIONS: u32 = 16;
const ROUNDS: u32 = 2;

/// Worst (least) and best (greatest) value of `factor` over the box of `inputs`.
///
/// `factor` gives infinity for a factor without bound and minus infinity where there is none; for a factor whose greatest
/// value is the worst, give its negative. It is called with one value for each input.
///
/// # Errors
///
/// The first error of `factor`.
pub fn extremes<E>(
    inputs: &[Input],
    factor: &mut dyn FnMut(&[f64]) -> Result<f64, E>,
) -> Result<(Extreme, Extreme), E> {
    let worst = extreme(inputs, &mut |x| factor(x).map(|v| -v), false)?;
    let best = extreme(inputs, factor, true)?;
    Ok((Extreme { value: -worst.value, ..worst }, best))
}

/// The greatest value of `score`: of the factor (`best`), or of its negative.
fn extreme<E>(
    inputs: &[Input],
    score: &mut dyn FnMut(&[f64]) -> Result<f64, E>,
    best: bool,
) -> Result<Extreme, E> {
    let inside = |input: &Input| match input.effect {
        Effect::None | Effect::Rising => false,
        Effect::QuasiConcave => best,
        Effect::Unknown => true,
    };
    // The values of each input that are tried with all those of the others.
    let tried: Vec<Vec<f64>> = inputs
        .iter()
        .map(|input| match input.effect {
            Effect::None => vec![input.low],
            Effect::Rising => vec![if best { input.high } else { input.low }],
            _ if inside(input) => {
                (0..SAMPLES).map(|i| at(input, f64::from(i) / f64::from(SAMPLES - 1))).collect()
            }
            _ => vec![input.low, input.high],
        })
        .collect();
    let mut place = vec![0; inputs.len()];
    let mut top: Option<(f64, Vec<f64>)> = None;
    loop {
        let x: Vec<f64> = place.iter().zip(&tried).map(|(&i, values)| values[i]).collect();
        let value = score(&x)?;
        if top.as_ref().is_none_or(|t| value > t.0) {
            top = Some((value, x));
        }
        let Some(next) = (0..inputs.len()).find(|&i| place[i] + 1 < tried[i].len()) else { break };
        place[next] += 1;
        place[..next].fill(0);
    }
    let (mut value, mut x) = top.unwrap_or((f64::NEG_INFINITY, Vec::new()));
    let sampled = inputs.iter().any(inside);
    if sampled && value.is_finite() {
        for _ in 0..ROUNDS {
            for (i, input) in inputs.iter().enumerate().filter(|(_, input)| inside(input)) {
                refine(i, input, &mut value, &mut x, score)?;
            }
        }
    }
    Ok(Extreme { value, at: x, found: if sampled { Found::Sampling } else { Found::Corners } })
}

fn at(input: &Input, part: f64) -> f64 {
    // Exact at both ends.
    input.low * (1.0 - part) + input.high * part
}

/// Golden sections on one input, between the neighbours of where the best value stands.
fn refine<E>(
    i: usize,
    input: &Input,
    value: &mut f64,
    x: &mut [f64],
    score: &mut dyn FnMut(&[f64]) -> Result<f64, E>,
) -> Result<(), E> {
    const GOLDEN: f64 = 0.618_033_988_749_894_9;
    let step = (input.high - input.low) / f64::from(SAMPLES - 1);
    let (mut a, mut b) = ((x[i] - step).max(input.low), (x[i] + step).min(input.high));
    let mut probe = |u: f64, value: &mut f64, x: &mut [f64]| -> Result<f64, E> {
        let mut y = x.to_vec();
        y[i] = u;
        let found = score(&y)?;
        if found > *value {
            *value = found;
            x[i] = u;
        }
        Ok(found)
    };
    let (mut c, mut d) = (b - GOLDEN * (b - a), a + GOLDEN * (b - a));
    let (mut fc, mut fd) = (probe(c, value, x)?, probe(d, value, x)?);
    for _ in 0..SECTIONS {
        if fc >= fd {
            (b, d, fd) = (d, c, fc);
            c = b - GOLDEN * (b - a);
            fc = probe(c, value, x)?;
        } else {
            (a, c, fc) = (c, d, fd);
            d = a + GOLDEN * (b - a);
            fd = probe(d, value, x)?;
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn over(inputs: &[Input], mut f: impl FnMut(&[f64]) -> f64) -> (Extreme, Extreme) {
        extremes::<()>(inputs, &mut |x| Ok(f(x))).unwrap()
    }

    fn input(low: f64, high: f64, effect: Effect) -> Input {
        Input { low, high, effect }
    }

    #[test]
    fn corners_and_samples() {
        let rising = input(1.0, 3.0, Effect::Rising);
        let concave = input(-1.0, 2.0, Effect::QuasiConcave);
        let (worst, best) = over(&[rising, concave], |x| x[0] - (x[1] - 0.3).powi(2));
        assert_eq!((worst.at, worst.found), (vec![1.0, 2.0], Found::Corners));
        assert!((worst.value - (1.0 - 1.7 * 1.7)).abs() < 1e-12);
        assert_eq!(best.found, Found::Sampling);
        assert!((best.value - 3.0).abs() < 1e-7 && (best.at[1] - 0.3).abs() < 1e-3, "{best:?}");
        // An unknown one is searched between the ends for the worst too.
        let (worst, _) = over(&[input(0.0, 2.0, Effect::Unknown)], |x| (x[0] - 1.1).powi(2));
        assert_eq!(worst.found, Found::Sampling);
        assert!(worst.value < 1e-7, "{worst:?}");
        // One without effect is not varied.
        let mut calls = 0;
        let (worst, best) = over(&[input(0.0, 1.0, Effect::None)], |_| {
            calls += 1;
            7.0
        });
        assert_eq!((calls, worst.value, best.value), (2, 7.0, 7.0));
    }

    #[test]
    fn no_line_is_worst_and_no_bound_is_best() {
        let (worst, best) = over(&[input(0.0, 1.0, Effect::QuasiConcave)], |x| {
            if x[0] > 0.9 {
                f64::NEG_INFINITY
            } else if x[0] < 0.1 {
                f64::INFINITY
            } else {
                x[0]
            }
        });
        assert!(worst.value < 0.0 && worst.value.is_infinite());
        assert_eq!(worst.at, [1.0]);
        assert!(best.value > 0.0 && best.value.is_infinite());
    }
}
