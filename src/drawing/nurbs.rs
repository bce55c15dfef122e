//! Splines: points and directions on a rational B-spline.

use super::entity::Source;
use super::lay::{self, Laid};
use crate::geometry::fit::Place;
use crate::geometry::{Affine, Point, Vec2};
use crate::refusal::Refusal;
use crate::tolerance;

/// A rational B-spline of the plane that is looked at.
pub struct Nurbs {
    degree: usize,
    knots: Vec<f64>,
    /// x and y times weight, and weight.
    points: Vec<[f64; 3]>,
    z: f64,
    size: f64,
    flat: bool,
}

impl Nurbs {
    /// The spline of an entity, through a map into the plane.
    ///
    /// # Errors
    /// When it has no control points, or its knots, weights and degree do not fit together.
    pub fn new(source: &Source, spline: &dxf::entities::Spline, map: &Affine) -> Result<Self, Refusal> {
        let refuse = |what: &str, remedy: &str| source.refuse("spline", format!("the SPLINE {what}"), remedy);
        let count = spline.control_points.len();
        let degree = usize::try_from(spline.degree_of_curve).unwrap_or(0);
        if count == 0 {
            return Err(refuse(
                "has only points that it was fitted through; its shape between them is up to the program that draws it",
                "Save the drawing from a CAD program again, which adds the control points, or redraw it as a polyline",
            ));
        }
        if count.max(spline.knot_values.len()) > tolerance::MOST_KNOTS {
            return Err(refuse(
                &format!("has more than {} knots", tolerance::MOST_KNOTS),
                "Redraw it as a polyline",
            ));
        }
        let knots = spline.knot_values.clone();
        let weights = match spline.weight_values.len() {
            0 => vec![1.0; count],
            n if n == count => spline.weight_values.clone(),
            _ => Vec::new(),
        };
        let in_order = knots.windows(2).all(|w| w[0] <= w[1]);
        let fits = (1..=25).contains(&degree) && count > degree && knots.len() == count + degree + 1;
        if !fits || !in_order || weights.len() != count || !weights.iter().all(|w| *w > 0.0) {
            return Err(refuse(
                &format!(
                    "of degree {} has {count} control points, {} knots and {} weights, which do not fit together",
                    spline.degree_of_curve,
                    knots.len(),
                    spline.weight_values.len()
                ),
                "Let the CAD program check and repair the drawing, or redraw it as a polyline",
            ));
        }
        let places: Vec<[f64; 3]> =
            spline.control_points.iter().map(|p| map.point([p.x, p.y, p.z])).collect();
        let extent = |i: usize| {
            let (low, high) = places
                .iter()
                .fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), p| (l.min(p[i]), h.max(p[i])));
            high - low
        };
        let size = extent(0).hypot(extent(1));
        Ok(Self {
            degree,
            flat: extent(2) <= tolerance::FLAT * size,
            z: places[0][2],
            points: places.iter().zip(&weights).map(|(p, w)| [p[0] * w, p[1] * w, *w]).collect(),
            knots,
            size,
        })
    }

    fn span(&self) -> (f64, f64) {
        (self.knots[self.degree], self.knots[self.points.len()])
    }

    /// Whether it ends where it begins.
    pub fn closes(&self) -> bool {
        let (from, to) = self.span();
        let last = self.points.len() - 1;
        match (self.at(self.degree, from), self.at(last, to)) {
            (Some(a), Some(b)) => (a.0 - b.0).hypot() <= tolerance::CURVE_FIT * self.size,
            _ => false,
        }
    }

    /// Arcs along it, from knot to knot.
    ///
    /// # Errors
    /// When it does not lie flat, or turns too sharply to be followed.
    pub fn laid(&self, source: &Source) -> Result<Laid, Refusal> {
        if !self.flat {
            return Err(lay::not_flat(source));
        }
        let distance = tolerance::CURVE_FIT * self.size;
        let mut pieces = Vec::new();
        for k in self.degree..self.points.len() {
            let (from, to) = (self.knots[k], self.knots[k + 1]);
            if to > from {
                pieces.extend(lay::fit_parts(source, &|t| self.at(k, t), from, to, distance)?);
            }
        }
        Ok(Laid { pieces, z: self.z, fitted: true })
    }

    /// Place and direction at a parameter between knots `k` and `k + 1` (de Boor, C., "A Practical Guide to Splines", 1978,
    /// chapter X), with the quotient rule for the weights.
    fn at(&self, k: usize, t: f64) -> Option<Place> {
        let p = self.degree;
        let mut d: Vec<[f64; 3]> = self.points[k - p..=k].to_vec();
        let mut slope = [0.0; 3];
        for r in 1..=p {
            if r == p {
                let width = self.knots[k + 1] - self.knots[k];
                slope = std::array::from_fn(|i| p as f64 * (d[p][i] - d[p - 1][i]) / width);
            }
            for j in (r..=p).rev() {
                let (low, high) = (self.knots[k - p + j], self.knots[k + 1 + j - r]);
                let a = if high > low { (t - low) / (high - low) } else { 0.0 };
                d[j] = std::array::from_fn(|i| (1.0 - a) * d[j - 1][i] + a * d[j][i]);
            }
        }
        let [x, y, w] = d[p];
        let at = Point::new(x / w, y / w);
        let along = Vec2::new(slope[0] - slope[2] * at.x, slope[1] - slope[2] * at.y) / w;
        (at.is_finite() && along.is_finite()).then_some((at, along))
    }
}
