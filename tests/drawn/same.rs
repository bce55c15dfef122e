//! What must not change the answer: mirror, shift, scale, unit, splitting a load, the order of entities.

use proptest::prelude::*;
use thrustmark::outcome::Run;

use crate::sheet::Sheet;

/// One load as it is drawn: abscissa in parts of the half span, height over the springing, size, and how.
type Drawn = (f64, f64, f64, u8);

/// How an arch is drawn: what is done to its coordinates, and the order of its entities.
#[derive(Clone, Copy)]
struct How {
    mirror: bool,
    shift: [f64; 2],
    /// Drawing units in a metre, and the unit's name.
    unit: (f64, &'static str),
    /// Drawn at this scale.
    scale: f64,
    /// Every load in two of half the size.
    split: bool,
    /// Entities moved round by this many, and turned about.
    turn: usize,
    back: bool,
}

const PLAIN: How = How {
    mirror: false,
    shift: [0.0, 0.0],
    unit: (1.0, "m"),
    scale: 1.0,
    split: false,
    turn: 0,
    back: false,
};

/// Half the span of the arch, m: an arc of radius 10 m from 150° to 30°.
const HALF: f64 = 8.660_254_037_844_386;

fn draw(loads: &[Drawn], line: (f64, f64, f64), how: How) -> Sheet {
    let k = how.unit.0 / how.scale;
    let flip = if how.mirror { -1.0 } else { 1.0 };
    let to = |x: f64, y: f64| [(flip * x + how.shift[0]) * k, (y + how.shift[1]) * k];
    let mut sheet = Sheet::default();
    sheet.arc("ARCH-AXIS", to(0.0, 0.0), 10.0 * k, 30.0, 150.0);
    let part = if how.split { 0.5 } else { 1.0 };
    for (i, &(at, rise, size, kind)) in loads.iter().enumerate() {
        let (x, y) = (at * HALF, 11.0 + rise);
        for copy in 0..if how.split { 2 } else { 1 } {
            let label = format!("P{i} = {:?} kN", size * part);
            // Far enough apart, and each label close to its own load.
            let up = 0.8 * f64::from(copy);
            match kind {
                0 => sheet.point("ARCH-LOADS", to(x, y + up)),
                1 => sheet.leader("ARCH-LOADS", &[to(x, y + up), to(x, y + up + 0.5)], true),
                // Raking, from the left above.
                _ => {
                    let along = |s: f64| to(x - 0.4 * s - 0.5 * up, y + s + 1.25 * up);
                    sheet.leader("ARCH-LOADS", &[along(0.0), along(0.5)], true);
                }
            }
            let beside = if kind > 1 {
                to(x - 0.5 * up + flip * 0.02, y + 1.25 * up)
            } else {
                to(x + flip * 0.02, y + up)
            };
            sheet.text("ARCH-LOADS", beside, 0.05 * k, &label);
        }
    }
    let (from, to_x, q) = line;
    for _ in 0..if how.split { 2 } else { 1 } {
        // The two halves of a split line load lie over one another, a little apart in height.
        let y = 15.0 + 0.5 * sheet.0.len() as f64;
        sheet.line("ARCH-LOADS", to(from * HALF, y), to(to_x * HALF, y));
        sheet.text(
            "ARCH-LOADS",
            to(f64::midpoint(from, to_x) * HALF, y + 0.02),
            0.05 * k,
            &format!("{:?} kN/m", q * part),
        );
    }
    let turn = how.turn % sheet.0.len();
    sheet.0.rotate_left(turn);
    if how.back {
        sheet.0.reverse();
    }
    sheet
}

fn answer(sheet: &Sheet, how: How) -> Run {
    let job = format!(
        "[drawing]\nscale = {:?}\n[rib]\nsupport = \"two-hinged\"\ndepth = 0.9\nwidth = 2.0\nunit_weight = 20\n\
         elastic_modulus = 30000\ntension = true\n",
        how.scale
    );
    let run = sheet.run_in(how.unit.1, &job);
    assert!(run.error.is_none(), "{:?}", run.error);
    run
}

/// Numbers of the run that do not depend on how it is drawn.
fn numbers(run: &Run, how: How) -> Vec<f64> {
    let span = &run.spans[0];
    let case = &span.cases[0];
    let line = &case.lines[0];
    let (mut l, mut r) = (line.left.clone().unwrap(), line.right.clone().unwrap());
    if how.mirror {
        std::mem::swap(&mut l, &mut r);
    }
    let offset = line.offset.as_ref().unwrap();
    vec![
        span.axis.span,
        span.axis.rise,
        span.axis.length,
        case.total_load[1],
        l.horizontal,
        l.vertical,
        r.horizontal,
        r.vertical,
        offset.max_abs,
        offset.rms,
    ]
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 24, ..ProptestConfig::default() })]

    #[test]
    fn one_arch_has_one_answer(
        // Apart by more than the reach of a label.
        first in -0.9..-0.75f64,
        rises in prop::collection::vec(0.0..0.3f64, 5),
        sizes in prop::collection::vec(5.0..300.0f64, 5),
        kinds in prop::collection::vec(0u8..3, 5),
        line in (-0.9..0.0f64, 0.1..1.0f64, 1.0..40.0f64),
        shift in [-5e3..5e3f64, -5e3..5e3f64],
        unit in prop::sample::select(vec![(1.0, "m"), (1000.0, "mm"), (100.0, "cm"), (1.0 / 0.3048, "ft"), (1.0 / 0.0254, "in")]),
        scale in prop::sample::select(vec![0.5, 2.0, 50.0]),
        turn in 0usize..30,
    ) {
        let loads: Vec<Drawn> =
            (0..5).map(|i| (first + 0.4 * i as f64, rises[i], sizes[i], kinds[i])).collect();
        let plain = numbers(&answer(&draw(&loads, line, PLAIN), PLAIN), PLAIN);
        for how in [
            How { mirror: true, ..PLAIN },
            How { shift, ..PLAIN },
            How { unit, ..PLAIN },
            How { scale, ..PLAIN },
            How { split: true, ..PLAIN },
            How { turn, ..PLAIN },
            How { back: true, ..PLAIN },
            How { mirror: true, shift, unit, scale, split: true, turn, back: true },
        ] {
            // Raking loads are drawn from the left; their mirror image is drawn as such.
            let found = numbers(&answer(&draw(&loads, line, how), how), how);
            for (a, b) in plain.iter().zip(&found) {
                prop_assert!((a - b).abs() <= 1e-8 * a.abs().max(1.0), "{plain:?} {found:?}");
            }
        }
    }
}

/// Ten thousand arrows with a label each, read and matched: seconds at most in this build, a fraction of one in a release.
#[test]
#[ignore = "measures"]
fn ten_thousand_labelled_arrows() {
    let mut sheet = Sheet::default();
    sheet.arc("ARCH-AXIS", [0.0, 0.0], 1000.0, 30.0, 150.0);
    for i in 0..10_000 {
        let x = -860.0 + 0.172 * f64::from(i);
        sheet.leader("ARCH-LOADS", &[[x, 1010.0], [x, 1011.0]], true);
        sheet.text("ARCH-LOADS", [x + 0.01, 1010.5], 0.03, &format!("P{i} = {} kN", 1 + i % 7));
    }
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("many.dxf");
    std::fs::write(&file, sheet.file()).unwrap();
    let settings =
        thrustmark::job::Job::parse(b"[drawing]\nunit = \"m\"\n", None).unwrap().for_sheet(&file).unwrap();
    let bytes = thrustmark::tags::Source::open(&file).unwrap();
    let outline = thrustmark::drawing::scan(&bytes, &settings).unwrap();
    let drawing = thrustmark::drawing::read_outlined(&bytes, &outline, &settings).unwrap();
    let start = std::time::Instant::now();
    let model = thrustmark::model::build(&drawing, &(&settings).into()).unwrap();
    let took = start.elapsed();
    assert_eq!(model.spans[0].loads.len(), 10_000);
    for (i, load) in model.spans[0].loads.iter().enumerate() {
        assert_eq!(load.label, format!("P{i}"));
    }
    println!("ten thousand arrows and labels matched in {took:?}");
    assert!(took.as_secs_f64() < 1.0, "{took:?}");
}
