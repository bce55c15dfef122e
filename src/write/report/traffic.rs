//! Traffic in the report: a diagram of the envelope and of the influence lines, and a table of what is worst where.

use super::html::{self, Page, figures, words};
use crate::outcome::{Direction, Run, Span, Status, Traffic, WorstValue};
use crate::write::text::{four_digits, metres, millimetres, signed_millimetres, three_digits};

/// Stations told in a table.
const MOST: usize = 24;
/// Size of a diagram.
const WIDTH: f64 = 640.0;
const HEIGHT: f64 = 170.0;

/// The section on traffic; nothing where the job has none.
pub fn section(run: &Run, page: &mut Page) {
    if run.spans.iter().flat_map(|s| &s.cases).all(|c| c.traffic.is_empty()) {
        return;
    }
    page.section("Traffic", "table");
    for span in &run.spans {
        for case in &span.cases {
            for train in &case.traffic {
                one(span, &case.name, train, page);
            }
        }
    }
    page.end();
}

fn one(span: &Span, case: &str, train: &Traffic, page: &mut Page) {
    let head = format!("{}, {} on case {case}", span.name, train.name);
    if train.status != Status::Found {
        page.paragraph(&html::sentence(&format!(
            "{head}: not computed: {}",
            train.reason.as_deref().unwrap_or("no reason is known")
        )));
        return;
    }
    let mut told = format!("{head}: {} positions", train.positions);
    if let (Some(step), Some(finest), Some(change)) = (train.step, train.finest_step, train.uncertainty) {
        told.push_str(&format!(
            ", {} m apart and down to {} m about the worst; the last halving changed the worst values by {} %",
            metres(step),
            metres(finest),
            three_digits(change * 100.0)
        ));
    }
    if let Some(scale) = train.scale {
        told.push_str(&format!(". Factor on the stated forces: {}", four_digits(scale)));
    }
    if let Some(at) = &train.at_worst
        && !at.axles.is_empty()
    {
        told.push_str(&format!(
            ". Where the offset is largest {} kN of {} kN reach the rib, {} kN go to the ground on the left and {} kN on \
             the right",
            four_digits(-at.on_rib[1]),
            four_digits(-at.applied[1]),
            four_digits(-at.beside[0][1]),
            four_digits(-at.beside[1][1])
        ));
    }
    page.paragraph(&html::sentence(&told));
    page.raw(&envelope(span, train, &head));
    for line in &train.influence {
        let points = |f: &dyn Fn(&crate::outcome::InfluenceOrdinate) -> Option<f64>| -> Vec<(f64, f64)> {
            line.ordinates.iter().filter_map(|o| Some((o.x, f(o)?))).collect()
        };
        for (what, curve) in [
            ("push, kN per kN", points(&|o| Some(o.push))),
            ("moment, kN·m per kN", points(&|o| Some(o.moment))),
            ("eccentricity, mm per kN", points(&|o| o.eccentricity.map(|e| e * 1000.0))),
        ] {
            let name =
                format!("{head}: influence line at {} of the span, {what}", four_digits(line.fraction));
            page.raw(&diagram(&name, &[("most", curve)]));
        }
    }
    page.table(&format!("{head}: worst values"), &columns(), &worst(train));
    let picked = train.envelope.len().div_ceil(MOST).max(1);
    let rows: Vec<Vec<String>> = train
        .envelope
        .iter()
        .step_by(picked)
        .map(|s| {
            let forces = |f: &Option<crate::outcome::Forces>| match f {
                Some(f) => [four_digits(f.thrust), four_digits(f.moment), metres(f.position)],
                None => Default::default(),
            };
            let e = |v: Option<f64>| v.map(signed_millimetres).unwrap_or_default();
            let x = |v: Option<f64>| v.map(metres).unwrap_or_default();
            let mut row = vec![
                metres(s.at[0]),
                e(s.eccentricity_min),
                x(s.position_min),
                e(s.eccentricity_max),
                x(s.position_max),
            ];
            row.extend(forces(&s.thrust_min));
            row.extend(forces(&s.thrust_max));
            row
        })
        .collect();
    page.table(
        &format!(
            "{head}: extremes in the joints, each with the x of the first axle; offset in mm, thrust N in kN with its \
             moment M in kN·m, for the check of the section by the code in force"
        ),
        &[
            figures("x, m"),
            figures("Offset least"),
            figures("axle x"),
            figures("most"),
            figures("axle x"),
            figures("N least"),
            figures("M"),
            figures("axle x"),
            figures("N most"),
            figures("M"),
            figures("axle x"),
        ],
        &rows,
    );
}

fn columns() -> [html::Column<'static>; 5] {
    [words("What"), figures("Value"), words("Unit"), figures("First axle at x, m"), words("Running")]
}

fn worst(train: &Traffic) -> Vec<Vec<String>> {
    let mut rows = Vec::new();
    let mut row = |name: &str, value: &WorstValue, factor: f64, unit: &str| {
        if value.status == Status::NotAsked {
            return;
        }
        let told = match (value.status, value.value) {
            (_, Some(v)) if unit == "mm" => millimetres(v),
            (_, Some(v)) => four_digits(v * factor),
            (Status::Unbounded, None) => "no bound".into(),
            (Status::None, None) => "none".into(),
            _ => "not told".into(),
        };
        rows.push(vec![
            name.to_owned(),
            told,
            unit.to_owned(),
            value.position.map(metres).unwrap_or_default(),
            match value.direction {
                Some(Direction::Right) => "to the right".into(),
                Some(Direction::Left) => "to the left".into(),
                None => String::new(),
            },
        ]);
    };
    if let Some(w) = &train.worst {
        row("Largest offset", &w.offset, 1.0, "mm");
        row("Largest eccentricity over d/6", &w.kern, 1.0, "1");
        row("Largest eccentricity over d/2", &w.ring, 1.0, "1");
        row("Largest edge stress", &w.stress, 1.0, "MPa");
        row("Least load factor", &w.load_factor, 1.0, "1");
        row("Greatest lower end of the load factor", &w.load_factor_least, 1.0, "1");
        row("Least permitted multiple of the train", &w.multiple, 1.0, "1");
    }
    if let Some(p) = &train.push {
        for (name, pair) in [
            ("push of the governing line, left", &p.left),
            ("push of the governing line, right", &p.right),
            ("push of any line inside the ring, left", &p.inside_ring),
        ] {
            row(&format!("Least {name}"), &pair[0], 1.0, "kN");
            row(&format!("Greatest {name}"), &pair[1], 1.0, "kN");
        }
    }
    rows
}

/// The band of offsets along the span.
fn envelope(span: &Span, train: &Traffic, head: &str) -> String {
    let curve = |f: &dyn Fn(&crate::outcome::EnvelopeStation) -> Option<f64>| -> Vec<(f64, f64)> {
        train.envelope.iter().filter_map(|s| Some((s.at[0], f(s)? * 1000.0))).collect()
    };
    let mut curves =
        vec![("most", curve(&|s| s.eccentricity_max)), ("least", curve(&|s| s.eccentricity_min))];
    if span.ring.is_some() {
        curves.push(("edge", curve(&|s| s.depth.map(|d| d / 2.0))));
        curves.push(("edge", curve(&|s| s.depth.map(|d| -d / 2.0))));
    }
    diagram(
        &format!("{head}: offset of the lines of thrust from the axis, mm, toward the extrados upward"),
        &curves,
    )
}

/// Curves over the span, with their extremes in figures.
fn diagram(name: &str, curves: &[(&str, Vec<(f64, f64)>)]) -> String {
    let all = || curves.iter().flat_map(|c| &c.1);
    let fold =
        |f: fn(f64, f64) -> f64, from: f64, pick: fn(&(f64, f64)) -> f64| all().map(pick).fold(from, f);
    let (x0, x1) = (fold(f64::min, f64::INFINITY, |p| p.0), fold(f64::max, f64::NEG_INFINITY, |p| p.0));
    let (y0, y1) = (fold(f64::min, 0.0, |p| p.1), fold(f64::max, 0.0, |p| p.1));
    if !(x1 > x0 && y1 > y0) {
        return String::new();
    }
    let (left, right, top, bottom) = (70.0, WIDTH - 10.0, 14.0, HEIGHT - 24.0);
    let place = |p: &(f64, f64)| {
        (left + (p.0 - x0) / (x1 - x0) * (right - left), bottom - (p.1 - y0) / (y1 - y0) * (bottom - top))
    };
    let mut svg = format!(
        "<figure>\n<svg viewBox=\"0 0 {WIDTH} {HEIGHT}\" role=\"img\" aria-label=\"{0}\" fill=\"none\" stroke=\"currentColor\" \
         font-size=\"11\">\n",
        html::escape(name)
    );
    let zero = place(&(x0, 0.0)).1;
    svg.push_str(&format!("<path d=\"M{left} {zero:.1}H{right}\" stroke-width=\"0.6\"/>\n"));
    for (class, curve) in curves {
        let mut path = String::new();
        for (i, p) in curve.iter().enumerate() {
            let (x, y) = place(p);
            path.push_str(&format!("{}{x:.1} {y:.1}", if i == 0 { "M" } else { "L" }));
        }
        let look = match *class {
            "edge" => "stroke-width=\"0.8\" stroke-dasharray=\"2 4\"",
            "least" => "stroke-width=\"1.6\" stroke-dasharray=\"8 3\"",
            _ => "stroke-width=\"1.6\"",
        };
        svg.push_str(&format!("<path d=\"{path}\" {look}/>\n"));
    }
    let mut figure = |x: f64, y: f64, anchor: &str, text: &str| {
        svg.push_str(&format!(
            "<text x=\"{x:.1}\" y=\"{y:.1}\" text-anchor=\"{anchor}\" fill=\"currentColor\" stroke=\"none\">{}</text>\n",
            html::escape(text)
        ));
    };
    figure(left - 4.0, top + 4.0, "end", &three_digits(y1));
    figure(left - 4.0, bottom + 4.0, "end", &three_digits(y0));
    if zero > top + 12.0 && zero < bottom - 12.0 {
        figure(left - 4.0, zero + 4.0, "end", "0");
    }
    figure(left, HEIGHT - 6.0, "start", &format!("x {} m", metres(x0)));
    figure(right, HEIGHT - 6.0, "end", &format!("{} m", metres(x1)));
    svg.push_str(&format!("</svg>\n<figcaption>{}</figcaption>\n</figure>\n", html::escape(name)));
    svg
}
