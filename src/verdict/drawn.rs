//! What was noticed of loads as they are drawn, in words.

use super::{With, length, note};
use crate::drawing::Source;
use crate::model::{Drawn, Sense};
use crate::outcome::{Check, Finding};

/// Entities named in one sentence.
const NAMED: usize = 20;

/// The finding of a note.
pub fn finding(n: &Drawn) -> Finding {
    match n {
        Drawn::LineJoins { source } => note(
            Check::PassedOver,
            format!("{} runs from one load to another and was not taken as a load itself", source.named()),
        )
        .entity(source)
        .uncheck()
        .remedy("move it to another layer, or draw the loads as arrows without points"),
        Drawn::ShapeNoLoad { source } => {
            let finding = note(
                Check::PassedOver,
                format!(
                    "{} on layer {} is no arrow and was not taken as a load: arrows are straight",
                    source.named(),
                    source.layer
                ),
            )
            .entity(source);
            // A filled area is a symbol, hardly ever a load.
            if matches!(source.kind.as_str(), "SOLID" | "TRACE") {
                return finding;
            }
            finding
                .uncheck()
                .remedy("draw the load as a straight arrow or a point, or move this to another layer")
        }
        Drawn::TwoHeads { source } => note(
            Check::Sense,
            format!("{} has an arrowhead at both ends, which tell nothing of its sense", source.named()),
        )
        .entity(source),
        Drawn::LineUpright { source } => note(
            Check::PassedOver,
            format!("{} has a label per length and no length in plan, so it is no load", source.named()),
        )
        .entity(source)
        .uncheck()
        .remedy("draw it along the deck, or give the force itself"),
        Drawn::LineTurnsBack { source } => note(
            Check::Loads,
            format!(
                "{} runs back over itself; its load per length counts once over its extent in plan",
                source.named()
            ),
        )
        .entity(source),
        Drawn::LineOffSpan { source, text, length: part, force } => note(
            Check::OffSpan,
            format!(
                "{} of {} (\"{text}\", {force:.4} kN) stand over no span and are left out",
                length(*part),
                source.named()
            ),
        )
        .entity(source)
        .uncheck()
        .remedy("draw the line over the span alone"),
        Drawn::PartOfLine { line, count } => note(
            Check::PassedOver,
            format!(
                "{count} arrows without a figure show how the line load {} acts; they are no loads",
                line.named()
            ),
        )
        .entity(line),
        Drawn::NoPost { source, why } => note(
            Check::PassedOver,
            format!("{} on layer {} was not taken as a post: {why}", source.named(), source.layer),
        )
        .entity(source),
        Drawn::DownPosts { count, held, own } => {
            let deck = if *held > 0.0 {
                format!("; the deck has to hold up to {held:.4} sideways at a post, which is left out here")
            } else {
                String::new()
            };
            let finding = note(
                Check::Loads,
                format!(
                    "{count} loads stand on posts and act down them where they meet the rib, the posts pinned{deck}"
                ),
            );
            if *own > 0.0 {
                finding
                    .uncheck()
                    .remedy("draw loads that push the deck sideways where the deck is held, or on the rib")
            } else {
                finding
            }
        }
        Drawn::BetweenPosts { sources } => note(
            Check::Loads,
            format!(
                "{} loads stand between posts and were put straight on the rib: {}",
                sources.len(),
                named(sources)
            ),
        )
        .uncheck()
        .remedy("draw each load at the deck end of the post that carries it"),
        Drawn::Plan { span, assumed, missing, line_loads } => {
            let mut text = String::from("the roadway is drawn in plan");
            if *assumed {
                text.push_str("; the plane of the rib was taken through its points over the springings");
            }
            if *missing > 0 {
                text.push_str(&format!("; over {missing} loads it is not drawn"));
            }
            if *line_loads > 0 {
                text.push_str(&format!("; the couples of {line_loads} line loads are not told"));
            }
            note(Check::LeftOut, text).of(span)
        }
        Drawn::TextsByHand { sources } => note(
            Check::Dimension,
            format!(
                "{} dimensions of other parts have a text written in place of the measured length: {}",
                sources.len(),
                named(sources)
            ),
        ),
        Drawn::ExtendedUnclear { source, texts } => note(
            Check::Labels,
            format!(
                "the extended data of {} hold figures that differ ({}), and none was taken",
                source.named(),
                texts.join(", ")
            ),
        )
        .entity(source)
        .uncheck()
        .remedy("leave one figure, or give it as an attribute"),
        Drawn::SenseInferred { sources, sense } => {
            let why = match sense {
                Sense::Down => "act downward along lines within 30° of the vertical",
                _ => "act toward the rib along lines farther than 30° from the vertical",
            };
            let finding = note(
                Check::Sense,
                format!(
                    "{} loads drawn without an arrowhead were taken to {why}: {}",
                    sources.len(),
                    named(sources)
                ),
            )
            .uncheck()
            .remedy("draw arrowheads, or allow it: [accept] assumed = [\"sense\"]");
            match sources.as_slice() {
                [one] => finding.entity(one),
                _ => finding,
            }
        }
    }
}

/// The first entities by name, and how many more there are.
fn named(sources: &[Source]) -> String {
    let mut names: Vec<String> = sources.iter().take(NAMED).map(Source::named).collect();
    if sources.len() > NAMED {
        names.push(format!("{} more, which the list of loads shows", sources.len() - NAMED));
    }
    names.join(", ")
}
