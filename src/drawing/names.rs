//! Words in layer names that tell what a layer holds, in languages of the trade.
//!
//! A name is split at everything that is no letter. Words count only whole (`arc` is no part of `ARCHIVE`), except those of
//! languages that write compounds as one (`BOGENACHSE`).

/// Words for the load-bearing line itself.
const ARCH: [&str; 25] = [
    "arch", "arches", "arc", "bogen", "boegen", "bögen", "arco", "arcos", "archi", "boog", "bue", "łuk",
    "oblouk", "kemer", "rib", "ribs", "rippe", "vault", "gewölbe", "gewoelbe", "voûte", "voute", "bóveda",
    "cable", "kabel",
];

/// Words for an axis or a centre line.
const AXIS: [&str; 17] = [
    "axis",
    "axe",
    "achse",
    "eje",
    "asse",
    "eixo",
    "centreline",
    "centerline",
    "centre",
    "center",
    "systemlinie",
    "mittellinie",
    "schwerlinie",
    "hartlijn",
    "oś",
    "osa",
    "tengely",
];

/// Words for loads and forces.
const LOADS: [&str; 24] = [
    "load",
    "loads",
    "last",
    "lasten",
    "charge",
    "charges",
    "carga",
    "cargas",
    "carico",
    "carichi",
    "belasting",
    "force",
    "forces",
    "kraft",
    "kräfte",
    "kraefte",
    "fuerza",
    "fuerzas",
    "forza",
    "forze",
    "força",
    "forcas",
    "zatížení",
    "obciążenie",
];

/// Words for other parts of an arch drawing: a layer with one of them is no axis.
const OTHER: [&str; 30] = [
    "intrados",
    "extrados",
    "soffit",
    "ring",
    "fill",
    "road",
    "deck",
    "post",
    "posts",
    "joint",
    "joints",
    "hinge",
    "hinges",
    "hatch",
    "dim",
    "dims",
    "text",
    "grid",
    "raster",
    "ground",
    "level",
    "levels",
    "section",
    "reinf",
    "rebar",
    "bewehrung",
    "fuge",
    "fugen",
    "leibung",
    "rücken",
];

/// Words that also count inside a longer one.
const COMPOUND: [&str; 19] = [
    "bogen",
    "boegen",
    "bögen",
    "rippe",
    "gewölbe",
    "gewoelbe",
    "kabel",
    "achse",
    "systemlinie",
    "mittellinie",
    "schwerlinie",
    "hartlijn",
    "lasten",
    "kraft",
    "kräfte",
    "kraefte",
    "belasting",
    "bewehrung",
    "leibung",
];

fn word_in(name: &str, words: &[&'static str]) -> Option<&'static str> {
    let name = name.to_lowercase();
    let parts: Vec<&str> = name.split(|c: char| !c.is_alphabetic()).filter(|p| !p.is_empty()).collect();
    words.iter().find(|w| parts.iter().any(|p| p == *w || (COMPOUND.contains(w) && p.contains(**w)))).copied()
}

/// How well a name says "axis of the arch": 3 an arch and an axis, 2 an arch, 1 an axis; and the word that says so.
pub fn axis_word(name: &str) -> Option<(u8, &'static str)> {
    if word_in(name, &OTHER).is_some() || word_in(name, &LOADS).is_some() {
        return None;
    }
    match (word_in(name, &ARCH), word_in(name, &AXIS)) {
        (Some(word), Some(_)) => Some((3, word)),
        (Some(word), None) => Some((2, word)),
        (None, Some(word)) => Some((1, word)),
        (None, None) => None,
    }
}

/// The word that says "loads".
pub fn loads_word(name: &str) -> Option<&'static str> {
    word_in(name, &LOADS)
}

/// Whether a block is the paper space of a layout.
pub fn is_paper_space(block: &str) -> bool {
    block.get(..12).is_some_and(|b| b.eq_ignore_ascii_case("*PAPER_SPACE"))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn words_of_the_trade() {
        assert_eq!(axis_word("S-ARCH_AXIS").map(|w| w.0), Some(3));
        assert_eq!(axis_word("Bogenachse 1").map(|w| w.0), Some(3));
        assert_eq!(axis_word("ARC"), Some((2, "arc")));
        assert_eq!(axis_word("Eje"), Some((1, "eje")));
        for name in ["ARCHIVE", "ARCH-INTRADOS", "ARCH-LOADS", "0", "SEARCH", "ARCH-FILL", "Defpoints"] {
            assert_eq!(axis_word(name), None, "{name}");
        }
        assert_eq!(loads_word("B_Lasten"), Some("lasten"));
        assert_eq!(loads_word("CARGAS MUERTAS"), Some("cargas"));
        for name in ["BLAST", "LASTING", "PLASTER", "0", "UPLOAD", "REINFORCEMENT"] {
            assert_eq!(loads_word(name), None, "{name}");
        }
    }
}
