//! Traffic as the results hold it, and against the stated limits.

use super::{With, length, note, spans};
use crate::job::Settings;
use crate::model::traffic::{Crossing, NotComputed};
use crate::outcome::{
    AtWorst, Axle, Check, Direction, EnvelopeStation, Finding, FindingVerdict, Forces, InfluenceLine,
    InfluenceOrdinate, PushRange, Span, Status, Traffic, Worst, WorstValue, Xy,
};
use crate::statics::traffic::{Extreme, Influence, Position, Tally, Traverse};
use crate::statics::{LineKind, Rule};
use crate::tolerance;
use crate::units::KN_PER_M2;

/// One train on one span.
#[derive(Debug, Clone)]
pub struct Ran {
    /// Its name.
    pub name: String,
    /// Index of the case that it stands on.
    pub case: usize,
    /// What came out, or why nothing did.
    pub ended: Result<Box<Computed>, NotComputed>,
}

/// What came out for one train on one span.
#[derive(Debug, Clone)]
pub struct Computed {
    /// Its ways across, and where its forces go.
    pub crossing: Crossing,
    /// The extremes.
    pub traverse: Traverse,
    /// Influence lines; `None` inside where the governing line has none, outside where none is asked for.
    pub influence: Option<Option<Vec<Influence>>>,
}

/// The train as the results hold it.
pub fn outcome(ran: &Ran) -> Traffic {
    let mut traffic = Traffic {
        name: ran.name.clone(),
        status: Status::Refused,
        reason: None,
        governs: None,
        positions: 0,
        step: None,
        finest_step: None,
        uncertainty: None,
        scale: None,
        taken: Vec::new(),
        envelope: Vec::new(),
        worst: None,
        push: None,
        hinges: Vec::new(),
        at_worst: None,
        influence: Vec::new(),
    };
    let computed = match &ran.ended {
        Ok(computed) => computed,
        Err(not) => {
            traffic.reason = Some(not.why.clone());
            return traffic;
        }
    };
    let Computed { crossing, traverse, influence } = &**computed;
    let tally = &traverse.tally;
    let told = Told { crossing };
    traffic.status = Status::Found;
    traffic.governs = Some(spans::kind(traverse.governs));
    traffic.positions = traverse.positions as u64;
    if !crossing.courses.is_empty() {
        traffic.step = Some(traverse.step);
        traffic.finest_step = Some(traverse.finest);
        traffic.uncertainty = Some(traverse.uncertainty);
    }
    traffic.scale = Some(crossing.scale);
    traffic.taken.clone_from(&crossing.taken);
    traffic.envelope = tally.envelope.iter().map(|s| told.station(s)).collect();
    traffic.worst = Some(Worst {
        offset: told.worst(&tally.offset, 1.0),
        kern: told.worst(&tally.depth_use, 6.0),
        ring: told.worst(&tally.depth_use, 2.0),
        stress: told.worst(&tally.stress, 1.0 / KN_PER_M2),
        load_factor: told.worst(&tally.load_factor, 1.0),
        load_factor_least: told.worst(&tally.load_factor_least, 1.0),
        multiple: told.worst(&tally.multiple, 1.0),
    });
    let pair = |e: &[Extreme; 2]| [told.worst(&e[0], 1.0), told.worst(&e[1], 1.0)];
    traffic.push = Some(PushRange {
        left: pair(&tally.push),
        right: pair(&tally.push_right),
        inside_ring: pair(&tally.range),
    });
    traffic.hinges = traverse
        .at_least_factor
        .iter()
        .filter_map(|a| a.safety.as_ref()?.mechanism.as_ref())
        .flat_map(|m| &m.hinges)
        .map(spans::hinge)
        .collect();
    traffic.at_worst = told.at_worst(traverse);
    traffic.influence = influence.iter().flatten().flatten().map(line).collect();
    traffic
}

fn line(from: &Influence) -> InfluenceLine {
    InfluenceLine {
        fraction: from.fraction,
        at: spans::xy(from.at),
        s: from.s,
        ordinates: from
            .ordinates
            .iter()
            .map(|o| InfluenceOrdinate {
                x: o.x,
                push: o.push,
                moment: o.moment,
                eccentricity: o.eccentricity,
            })
            .collect(),
    }
}

/// Positions in terms of the train.
struct Told<'a> {
    crossing: &'a Crossing,
}

impl Told<'_> {
    fn place(&self, position: Position) -> Option<(f64, Direction)> {
        let course = self.crossing.courses.get(position.course)?;
        Some((position.at, if course.rightward { Direction::Right } else { Direction::Left }))
    }

    fn worst(&self, extreme: &Extreme, unit: f64) -> WorstValue {
        let status = match extreme.status() {
            _ if *extreme == Extreme::default() => Status::NotAsked,
            crate::statics::Status::Found => Status::Found,
            crate::statics::Status::None => Status::None,
            crate::statics::Status::Unbounded => Status::Unbounded,
            crate::statics::Status::Refused => Status::Refused,
        };
        let found = extreme.found.filter(|_| status == Status::Found);
        let position = found.map(|f| f.position).or(extreme.missing.map(|m| m.1));
        let place = position.and_then(|p| self.place(p));
        WorstValue {
            status,
            value: found.map(|f| f.value * unit),
            position: place.map(|p| p.0),
            direction: place.map(|p| p.1),
            at: found.map(|f| spans::xy(f.at)),
        }
    }

    fn station(&self, s: &crate::statics::traffic::Station) -> EnvelopeStation {
        let at = |p: Position| self.place(p).map(|p| p.0);
        let forces = |f: (f64, f64, Position)| {
            let place = self.place(f.2);
            Forces {
                thrust: f.0,
                moment: f.1,
                position: place.map_or(0.0, |p| p.0),
                direction: place.map_or(Direction::Right, |p| p.1),
            }
        };
        EnvelopeStation {
            at: spans::xy(s.at),
            s: s.s,
            depth: s.depth,
            eccentricity_min: s.eccentricity_min.map(|e| e.0),
            eccentricity_max: s.eccentricity_max.map(|e| e.0),
            position_min: s.eccentricity_min.and_then(|e| at(e.1)),
            position_max: s.eccentricity_max.and_then(|e| at(e.1)),
            thrust_min: s.thrust_min.map(forces),
            thrust_max: s.thrust_max.map(forces),
        }
    }

    fn at_worst(&self, traverse: &Traverse) -> Option<AtWorst> {
        let crossing = self.crossing;
        let worst = traverse.tally.offset.found?;
        let line = traverse.at_worst.as_ref()?;
        let line = line.lines.get(line.governs)?;
        let (mut axles, mut carried) = (Vec::new(), crate::model::traffic::Carried::default());
        if !crossing.courses.is_empty() {
            let Position { course, at } = worst.position;
            axles = crossing
                .axles_at(course, at)
                .into_iter()
                .map(|(at, force)| Axle { at: spans::xy(at), force })
                .collect();
            carried = crossing.carried(course, at);
        }
        let pair = |v: crate::geometry::Vec2| [v.x, v.y];
        let ends = |pick: fn(f64, f64) -> f64, from: f64| {
            axles.iter().map(|a| a.at[0]).chain(line.vertices.iter().map(|p| p.x)).fold(from, pick)
        };
        let (from, to) = (ends(f64::min, f64::INFINITY), ends(f64::max, f64::NEG_INFINITY));
        Some(AtWorst {
            road: crossing.road.between(from, to).into_iter().map(spans::xy).collect(),
            line: line.vertices.iter().copied().map(spans::xy).collect(),
            axles,
            applied: pair(carried.applied),
            on_rib: pair(carried.on_rib),
            beside: carried.beside.map(pair),
        })
    }

    /// A position in words.
    fn words(&self, name: &str, position: Position) -> String {
        match self.place(position) {
            None => format!("under {name}"),
            Some((x, way)) => {
                let way = match way {
                    Direction::Right => "to the right",
                    Direction::Left => "to the left",
                };
                format!("with {name} running {way}, its first axle at x = {x:.2} m,")
            }
        }
    }
}

/// The findings of one train on one span.
pub fn findings(ran: &Ran, span: &Span, settings: &Settings, findings: &mut Vec<Finding>) {
    let computed = match &ran.ended {
        Ok(computed) => computed,
        Err(not) => {
            findings.push(
                note(Check::NotJudged, format!("{} was not computed: {}", ran.name, not.why))
                    .of(&span.name)
                    .uncheck()
                    .remedy(not.remedy.clone()),
            );
            return;
        }
    };
    let judge = Judge {
        ran,
        told: Told { crossing: &computed.crossing },
        traverse: &computed.traverse,
        tally: &computed.traverse.tally,
        span,
        settings,
    };
    findings.extend(judge.about(computed));
    findings.extend(judge.ranges());
    findings.extend(judge.limits().into_iter().map(|f| f.of(&span.name)));
}

struct Judge<'a> {
    ran: &'a Ran,
    told: Told<'a>,
    traverse: &'a Traverse,
    tally: &'a Tally,
    span: &'a Span,
    settings: &'a Settings,
}

/// What a limit is held against.
struct Measured<'a> {
    check: Check,
    key: &'a str,
    unit: &'a str,
    limit: f64,
    /// Value in the unit of the limit.
    value: f64,
    at: Xy,
    position: Position,
    /// Whether the limit is a least value.
    least: bool,
}

impl Judge<'_> {
    /// What was taken to be so, what goes beside the span, how sure the worst is.
    fn about(&self, computed: &Computed) -> Vec<Finding> {
        let name = &self.ran.name;
        let mut all = Vec::new();
        let mut say = |text: String| all.push(note(Check::Traffic, text).of(&self.span.name));
        for taken in &computed.crossing.taken {
            say(format!("{name}: {taken}"));
        }
        if computed.crossing.courses.is_empty() {
            say(format!("{name}: its uniform load and knife edge stand where they make things worst"));
        } else {
            say(format!(
                "{name}: {} positions, {} apart and down to {} about the worst; when the distance was last halved the worst \
                 values changed by {:.2} %",
                self.traverse.positions,
                length(self.traverse.step),
                length(self.traverse.finest),
                self.traverse.uncertainty * 100.0
            ));
        }
        if let Some((push, critical, growth)) = self.buckling() {
            say(format!(
                "{name}: the push of up to {push:.1} kN is {:.1} % of the {critical:.1} kN at which the rib buckles in its plane; \
                 bending under the train was not multiplied, and could be {growth:.3} times that told at most",
                100.0 * push / critical
            ));
        }
        if let Some(worst) = self.tally.offset.found
            && !computed.crossing.courses.is_empty()
        {
            let carried = computed.crossing.carried(worst.position.course, worst.position.at);
            // Half of the last digit told: no "-0.0".
            let beside = carried.beside.map(|f| if f.y.abs() < 0.05 { 0.0 } else { -f.y });
            say(format!(
                "{} {:.1} kN of {:.1} kN reach the rib; {:.1} kN go to the ground on the left and {:.1} kN on the right",
                self.told.words(name, worst.position),
                -carried.on_rib.y,
                -carried.applied.y,
                beside[0],
                beside[1]
            ));
        }
        if computed.influence == Some(None) {
            let why = "the governing line is an optimum, which does not answer in proportion to a load";
            all.push(
                note(Check::Traffic, format!("{name}: no influence lines: {why}"))
                    .of(&self.span.name)
                    .remedy("declare the support of the rib, or take `influence` out"),
            );
        }
        all
    }

    /// Positions of a train are worked out at the values stated alone.
    fn ranges(&self) -> Option<Finding> {
        let stated: Vec<&str> = self.settings.range.iter().map(|r| r.what.as_str()).collect();
        (!stated.is_empty()).then(|| {
            note(
                Check::NotJudged,
                format!(
                    "the limits under {} were judged at the values stated, not over the ranges of {}",
                    self.ran.name,
                    stated.join(", ")
                ),
            )
            .of(&self.span.name)
            .uncheck()
            .remedy("state the worst value itself in a job for the check under traffic, and take the range out of it")
        })
    }

    fn limits(&self) -> Vec<Finding> {
        let limits = &self.settings.limits;
        let mut all = Vec::new();
        if let Some((status, position)) = self.tally.offset.missing {
            let mut finding = note(
                Check::NoLine,
                format!("{} there is no governing line of thrust", self.told.words(&self.ran.name, position)),
            );
            finding.basis = Some("equilibrium".into());
            if status == crate::statics::Status::None {
                finding.verdict = FindingVerdict::Outside;
            } else {
                finding.unchecks = true;
            }
            all.push(finding);
        }
        let ring = self.settings.limits.ring;
        let built_in = !self.settings.rib.tension
            && !super::limits::elastic_support(self.settings)
            && self.span.kind == "arch";
        let wanted = [
            (Check::Offset, "offset", "m", limits.offset, &self.tally.offset, 1.0, false),
            (
                Check::Ring,
                "ring",
                "of half depth",
                ring.or(built_in.then_some(1.0)),
                &self.tally.depth_use,
                2.0,
                false,
            ),
            (Check::Kern, "kern", "of d/6", limits.kern, &self.tally.depth_use, 6.0, false),
            (Check::Stress, "stress", "MPa", limits.stress, &self.tally.stress, 1.0 / KN_PER_M2, false),
            (Check::LoadFactor, "load_factor", "1", limits.load_factor, &self.tally.load_factor, 1.0, true),
        ];
        for (check, key, unit, limit, extreme, factor, least) in wanted {
            let Some(limit) = limit else { continue };
            match extreme.found {
                Some(found) if extreme.status() == crate::statics::Status::Found => {
                    let value = found.value * factor;
                    let measured = Measured {
                        check,
                        key,
                        unit,
                        limit,
                        value,
                        at: spans::xy(found.at),
                        position: found.position,
                        least,
                    };
                    all.push(self.judge(&measured));
                }
                _ => all.extend(self.without(check, key, limit, extreme)),
            }
        }
        if let Some(limit) = limits.geometric_factor {
            all.push(self.geometric(limit));
        }
        if self.tally.cracked {
            all.push(
                note(
                    Check::NotJudged,
                    format!(
                        "{}: at some position the elastic line leaves the kern of a ring without tension: joints would open \
                         there, and the line of the uncracked rib is not valid",
                        self.ran.name
                    ),
                )
                .uncheck()
                .remedy("judge it as a ring ([rib] support = \"none\"), or declare a section that takes tension"),
            );
        }
        all
    }

    /// The geometric factor is that of the closest line.
    fn geometric(&self, limit: f64) -> Finding {
        match self.tally.depth_use.found {
            Some(found) if self.traverse.governs == LineKind::Closest && found.value > 0.0 => {
                self.judge(&Measured {
                    check: Check::GeometricFactor,
                    key: "geometric_factor",
                    unit: "1",
                    limit,
                    value: 0.5 / found.value,
                    at: spans::xy(found.at),
                    position: found.position,
                    least: true,
                })
            }
            _ => self.not_judged(
                "geometric_factor",
                "under traffic it is told where the closest line governs and the depth is known",
            ),
        }
    }

    fn not_judged(&self, key: &str, why: &str) -> Finding {
        note(
            Check::NotJudged,
            format!("the stated limit `{key}` was not judged under {}: {why}", self.ran.name),
        )
        .uncheck()
    }

    /// A limit without a value.
    fn without(&self, check: Check, key: &str, limit: f64, extreme: &Extreme) -> Option<Finding> {
        let built_in = check == Check::Ring && self.settings.limits.ring.is_none();
        match extreme.missing {
            Some((crate::statics::Status::None, position)) if check == Check::LoadFactor => {
                let mut finding = note(
                    check,
                    format!(
                        "{} no line of thrust lies inside the ring at any factor; limit {limit:.2}",
                        self.told.words(&self.ran.name, position)
                    ),
                );
                finding.verdict = FindingVerdict::Outside;
                finding.limit = Some(limit);
                finding.basis = Some(format!("[limits] {key}"));
                Some(finding)
            }
            Some((crate::statics::Status::Unbounded, _)) if check == Check::LoadFactor => {
                let mut finding = note(
                    check,
                    format!("the ring carries any multiple of {}; limit {limit:.2}", self.ran.name),
                );
                finding.verdict = FindingVerdict::Within;
                finding.limit = Some(limit);
                finding.basis = Some(format!("[limits] {key}"));
                Some(finding)
            }
            // That there is no line is told already.
            Some((crate::statics::Status::None, _)) => None,
            _ if built_in => None,
            _ => Some(self.not_judged(key, "it needs a ring of known depth (and width, for stress)")),
        }
    }

    /// Greatest push under the train, the push at which the rib buckles, and the most by which bending can grow: the factor on
    /// its antisymmetric part, taken on the whole. For moments s + a and s - a at a joint and at its mirror image,
    /// |s + k a| <= k max(|s + a|, |s - a|) for k >= 1. None where buckling was not looked at.
    fn buckling(&self) -> Option<(f64, f64, f64)> {
        let buckling = self.span.cases.get(self.ran.case)?.lines.first()?.buckling.as_ref()?;
        let critical = buckling.critical?;
        let pushes = self.tally.push.iter().chain(&self.tally.push_right).filter_map(|e| e.found);
        let push = pushes.map(|f| f.value.abs()).fold(buckling.push, f64::max);
        let growth = if push < critical { 1.0 / (1.0 - push / critical) } else { f64::INFINITY };
        Some((push, critical, growth))
    }

    /// Why a value that holds is still no proof.
    fn doubt(&self, measured: &Measured) -> Option<&'static str> {
        let best = matches!(self.traverse.rule, Rule::RingWithoutTension | Rule::AxisOnly);
        let grows = self.buckling().is_some_and(|(_, _, growth)| {
            measured.value * growth > measured.limit * (1.0 + tolerance::LIMIT_MET)
        });
        match measured.check {
            Check::Offset | Check::Ring | Check::Kern | Check::Stress if grows => Some(
                "bending under moving loads is not multiplied for buckling, and with the most that it can grow by the limit \
                 would not hold",
            ),
            Check::Kern | Check::Stress if best => {
                Some("the closest line is the most favourable one, not the state of the rib")
            }
            Check::Stress if self.tally.stress_incomplete => {
                Some("the line leaves the section, or its kern, at some joints")
            }
            _ => None,
        }
    }

    fn judge(&self, m: &Measured) -> Finding {
        let slack = tolerance::LIMIT_MET;
        let stands = m.check != Check::LoadFactor
            || self.tally.load_factor_least.found.is_none_or(|v| v.value <= 1.0 + slack);
        let holds = if m.least {
            m.value >= m.limit * (1.0 - slack) && stands
        } else {
            m.value <= m.limit * (1.0 + slack)
        };
        let place = self.told.words(&self.ran.name, m.position);
        let (value, limit) = match m.check {
            Check::Offset => (length(m.value), length(m.limit)),
            Check::Stress => (format!("{:.2} MPa", m.value), format!("{:.2} MPa", m.limit)),
            _ => (format!("{:.2}", m.value), format!("{:.2}", m.limit)),
        };
        let best = matches!(self.traverse.rule, Rule::RingWithoutTension | Rule::AxisOnly);
        let head = match m.check {
            Check::Kern | Check::Stress if best => "best case: ",
            _ => "",
        };
        let text = match m.check {
            Check::Offset => format!("the line of thrust strays {value} from the axis; limit {limit}"),
            Check::Ring => format!("the line of thrust uses {value} of the half depth; limit {limit}"),
            Check::Kern => {
                format!("the line of thrust reaches {value} times a sixth of the depth; limit {limit}")
            }
            Check::Stress => format!("the greatest edge stress is {value}; limit {limit}"),
            Check::GeometricFactor => {
                format!("the geometric factor of safety is {value}; at least {limit} is wanted")
            }
            _ => format!(
                "what varies can be multiplied by {:.2} to {value} before the ring becomes a mechanism; up to at least \
                 {limit} is wanted",
                self.tally.load_factor_least.found.map_or(0.0, |v| v.value)
            ),
        };
        let message = format!("{head}{place} {text}");
        let built_in = m.check == Check::Ring && self.settings.limits.ring.is_none();
        let mut finding = match self.doubt(m).filter(|_| holds) {
            Some(why) => {
                let message = format!("{message}. The stated limit `{}` was not judged: {why}", m.key);
                note(Check::NotJudged, message).uncheck()
            }
            None => {
                let mut finding = note(m.check, message);
                finding.verdict = match holds {
                    true if built_in => FindingVerdict::Note,
                    true => FindingVerdict::Within,
                    false => FindingVerdict::Outside,
                };
                finding
            }
        };
        finding = finding.value(m.value, m.unit).at(m.at);
        finding.limit = Some(m.limit);
        finding.basis = Some(if built_in {
            "built in: no tension, so inside the ring".into()
        } else {
            format!("[limits] {}", m.key)
        });
        if !holds {
            finding =
                finding.remedy("a deeper ring, an axis nearer to the lines of thrust, or a lighter train");
        }
        finding
    }
}
