//! Sheet number and revision from the attributes of a title block.

use super::entity::Source;
use super::note::Note;
use super::{convert, text};
use crate::job::{Pattern, Settings};
use crate::tags::{Decoder, Record};

/// What the title block says.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Title {
    /// The sheet number.
    pub sheet: Option<String>,
    /// The revision.
    pub revision: Option<String>,
}

/// Tags that say "sheet number" in drawings of the trade, capitals and digits only, the surest first.
const SHEET: [&str; 56] = [
    "SHEETNO",
    "SHEETNUMBER",
    "SHEETNUM",
    "SHEETNR",
    "DRAWINGNO",
    "DRAWINGNUMBER",
    "DRAWINGNR",
    "DRAWINGNUM",
    "DRGNO",
    "DWGNO",
    "DWGNUMBER",
    "DWGNUM",
    "DWGNR",
    "BLATTNR",
    "BLATTNUMMER",
    "PLANNR",
    "PLANNUMMER",
    "PLANNO",
    "ZEICHNUNGSNR",
    "ZEICHNUNGSNUMMER",
    "ZEICHNR",
    "NPLAN",
    "ZNR",
    "NOPLAN",
    "NUMEROPLAN",
    "NUMPLAN",
    "NOFEUILLE",
    "NUMEROFEUILLE",
    "NUMPLANO",
    "NOPLANO",
    "NUMEROPLANO",
    "NUMDESENHO",
    "NDESENHO",
    "NUMERODESENHO",
    "NUMTAVOLA",
    "NTAVOLA",
    "NUMEROTAVOLA",
    "TEKENINGNR",
    "TEKENINGNUMMER",
    "BLADNR",
    "BLADNUMMER",
    "RITNINGSNR",
    "RITNINGSNUMMER",
    "TEGNINGSNR",
    "TEGNINGSNUMMER",
    "NRRYSUNKU",
    "SHEET",
    "SHT",
    "BLATT",
    "FEUILLE",
    "PLANCHE",
    "HOJA",
    "LAMINA",
    "FOLHA",
    "TAVOLA",
    "BLAD",
];

/// Tags that say "revision".
const REVISION: [&str; 24] = [
    "REVISIONNO",
    "REVISIONNUMBER",
    "REVNO",
    "REVNUMBER",
    "REVNR",
    "REV",
    "REVISION",
    "CURRENTREV",
    "CURRENTREVISION",
    "AENDERUNGSINDEX",
    "ANDERUNGSINDEX",
    "PLANINDEX",
    "INDEX",
    "INDICE",
    "IND",
    "REVISIE",
    "WIJZIGING",
    "REVISAO",
    "REVISIONE",
    "REVIZE",
    "REWIZJA",
    "ANDRING",
    "ISSUE",
    "VERSION",
];

/// The title block of a drawing: of all references with attributes outside of blocks. What the job names counts; else the
/// usual tags, of which the surest counts. Of blocks that say different things none is believed, and that is told.
pub fn title<'r>(
    records: impl Iterator<Item = &'r Record>,
    settings: &Settings,
    decoder: &Decoder,
    notes: &mut Vec<Note>,
) -> Title {
    let blocks: Vec<(Source, Vec<(String, String)>)> = records
        .filter(|r| r.kind == "INSERT" && !r.ours && r.children.iter().any(|c| c.kind == "ATTRIB"))
        .map(|r| (convert::source(r), attributes(r, decoder)))
        .collect();
    let mut read = |what: &'static str, key: &'static str, stated: Option<&String>, usual: &[&str]| {
        let mut found: Vec<(usize, &Source, &String)> = Vec::new();
        for (source, attributes) in &blocks {
            for (tag, value) in attributes.iter().filter(|a| !a.1.is_empty()) {
                let rank = match stated {
                    Some(pattern) => Pattern::new(pattern).matches(tag.trim()).then_some(0),
                    None => usual.iter().position(|u| *u == bare(tag)),
                };
                found.extend(rank.map(|rank| (rank, source, value)));
            }
        }
        let best = found.iter().map(|f| f.0).min();
        found.retain(|f| Some(f.0) == best);
        let Some(&(_, _, first)) = found.first() else {
            if let Some(pattern) = stated {
                notes.push(Note::TitleMissing { key, pattern: pattern.clone() });
            }
            return None;
        };
        if found.iter().any(|f| f.2 != first) {
            let mut values: Vec<String> = found.iter().map(|f| f.2.clone()).collect();
            values.sort();
            values.dedup();
            notes.push(Note::TitleUnclear { what, key, values });
            return None;
        }
        Some(first.clone())
    };
    Title {
        sheet: read("sheet number", "sheet", settings.title.sheet.as_ref(), &SHEET),
        revision: read("revision", "revision", settings.title.revision.as_ref(), &REVISION),
    }
}

/// Tags and values of a reference's attributes.
fn attributes(record: &Record, decoder: &Decoder) -> Vec<(String, String)> {
    let read = |of: &Record, code| {
        of.tags.first(code).map_or_else(String::new, |t| decoder.text(t.trimmed()).trim().to_owned())
    };
    record
        .children
        .iter()
        .filter(|c| c.kind == "ATTRIB")
        .map(|c| (read(c, 2), text::plain_line(&read(c, 1)).trim().to_owned()))
        .collect()
}

/// A tag in capitals, without accents and without what is no letter or digit.
fn bare(tag: &str) -> String {
    tag.chars()
        .flat_map(char::to_uppercase)
        .filter_map(|c| {
            Some(match c {
                'Ä' | 'À' | 'Á' | 'Â' | 'Ã' | 'Å' => 'A',
                'É' | 'È' | 'Ê' | 'Ë' => 'E',
                'Í' | 'Ì' | 'Î' | 'Ï' => 'I',
                'Ö' | 'Ó' | 'Ò' | 'Ô' | 'Õ' | 'Ø' => 'O',
                'Ü' | 'Ú' | 'Ù' | 'Û' => 'U',
                'Ç' => 'C',
                'Ñ' => 'N',
                // The sign for "number", and its ordinal.
                '°' | 'º' => return None,
                c if c.is_alphanumeric() => c,
                _ => return None,
            })
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn tags_in_several_languages() {
        for (tag, list) in [
            ("SHEET_NO", &SHEET[..]),
            ("Dwg-No.", &SHEET),
            ("Plan-Nr.", &SHEET),
            ("Número plano", &SHEET),
            ("Rev", &REVISION),
            ("Änderungsindex", &REVISION),
            ("RÉVISION", &REVISION),
            ("Índice", &REVISION),
        ] {
            assert!(list.contains(&bare(tag).as_str()), "{tag} {}", bare(tag));
        }
        assert!(!SHEET.contains(&bare("SHEET_TITLE").as_str()));
    }
}
