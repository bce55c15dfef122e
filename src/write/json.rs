//! The results as JSON, and the JSON Schema they keep to.

use crate::outcome::Document;
use crate::refusal::Refusal;

mod finite;

/// The document as JSON: two blanks of indent, keys in the order of the contract, shortest figures that read back the
/// same, a newline at the end.
///
/// # Errors
///
/// When a number in it is infinite or not a number, which JSON cannot hold; the refusal names its place. That is a
/// fault of the program and not of the drawing.
pub fn to_json(document: &Document) -> Result<String, Refusal> {
    finite::check(document)?;
    let mut text = serde_json::to_string_pretty(document).map_err(|e| {
        Refusal::new(
            "json",
            format!("the results could not be written as JSON: {e}"),
            "This is a fault of the program; please report it with the drawing.",
        )
    })?;
    text.push('\n');
    Ok(text)
}

/// The JSON Schema of the document (draft 2020-12), as JSON with a newline at the end.
///
/// # Errors
///
/// Only when the schema cannot be put into JSON, a fault of the program.
pub fn schema() -> Result<String, Refusal> {
    schema_of::<Document>()
}

/// The JSON Schema of another type that is written as JSON.
///
/// # Errors
/// As [`schema`].
pub fn schema_of<T: schemars::JsonSchema>() -> Result<String, Refusal> {
    let schema = schemars::schema_for!(T);
    let mut text = serde_json::to_string_pretty(&schema).map_err(|e| {
        Refusal::new(
            "json",
            format!("the schema could not be written: {e}"),
            "This is a fault of the program; please report it.",
        )
    })?;
    text.push('\n');
    Ok(text)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::write::sample;

    #[test]
    fn sample_keeps_to_the_schema() {
        let document = sample::document(vec![
            sample::arch(9, 30.0, 5.0).run(),
            sample::arch(3, 12.0, 6.0).unit_loads().run(),
            sample::refused(),
        ]);
        let schema: serde_json::Value = serde_json::from_str(&schema().unwrap()).unwrap();
        let validator = jsonschema::draft202012::new(&schema).unwrap();
        let text = to_json(&document).unwrap();
        let json: serde_json::Value = serde_json::from_str(&text).unwrap();
        let faults: Vec<String> = validator.iter_errors(&json).map(|e| e.to_string()).collect();
        assert!(faults.is_empty(), "{faults:?}");
        assert!(text.ends_with("}\n") && text.starts_with("{\n  \"contract\": 1,\n"));
        let back: Document = serde_json::from_str(&text).unwrap();
        assert_eq!(back.runs.len(), 3);

        // The schema can say no: closed lists are closed.
        for (at, wrong) in [
            ("/runs/0/findings/0/check", serde_json::json!("offsets")),
            ("/runs/0/spans/0/loads/0/magnitude_from", serde_json::json!("guess")),
            ("/runs/0/spans/0/cases/0/lines/0/vertices/0", serde_json::json!([1.0])),
            ("/contract", serde_json::json!("one")),
        ] {
            let mut bad = json.clone();
            *bad.pointer_mut(at).unwrap() = wrong;
            assert!(!validator.is_valid(&bad), "{at}");
        }
    }

    #[test]
    fn closed_lists_stand_in_the_schema() {
        let text = schema().unwrap();
        for word in
            ["geometric-factor", "not-judged", "extended-data", "arrow-length", "self-weight", "least-thrust"]
        {
            assert!(text.contains(&format!("\"{word}\"")), "{word}");
        }
    }

    #[test]
    fn not_a_number_is_refused_with_its_place() {
        let mut run = sample::arch(3, 12.0, 6.0).run();
        run.spans[0].cases[0].lines[0].stations[1].moment = f64::NAN;
        let refusal = to_json(&sample::document(vec![run])).unwrap_err();
        assert!(
            refusal.message.contains("runs[0].spans[0].cases[0].lines[0].stations[1].moment"),
            "{refusal}"
        );
        // One that would otherwise silently become null.
        let mut run = sample::arch(3, 12.0, 6.0).run();
        run.findings[0].value = Some(f64::INFINITY);
        let refusal = to_json(&sample::document(vec![run])).unwrap_err();
        assert!(refusal.message.contains("runs[0].findings[0].value"), "{refusal}");
    }
}
