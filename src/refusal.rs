//! Why a drawing or a job was not read: what, where and how to mend it.

use std::path::Path;

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

/// A refused input. Nothing is written for it; the exit status is 2.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize, JsonSchema)]
pub struct Refusal {
    /// Short stable name of the refusal, in kebab case, such as `tag-code` or `no-axis`.
    pub check: String,
    /// What is wrong, as a sentence.
    pub message: String,
    /// The file that is wrong, when it is not the drawing itself (a job file).
    #[serde(default)]
    pub file: Option<String>,
    /// Line of the file, counted from 1 (ASCII files); byte offset for binary ones is told in the message.
    pub line: Option<u64>,
    /// Handle of the entity concerned, as it is spelled in the drawing.
    pub handle: Option<String>,
    /// Layer of the entity concerned.
    pub layer: Option<String>,
    /// What the user can do about it.
    pub remedy: String,
}

impl Refusal {
    /// A refusal with no place yet; add places with the `at_…` methods.
    pub fn new(check: impl Into<String>, message: impl Into<String>, remedy: impl Into<String>) -> Self {
        Self {
            check: check.into(),
            message: message.into(),
            file: None,
            line: None,
            handle: None,
            layer: None,
            remedy: remedy.into(),
        }
    }

    /// Adds the line number, counted from 1.
    #[must_use]
    pub fn at_line(mut self, line: u64) -> Self {
        self.line = Some(line);
        self
    }

    /// Adds the handle of the entity.
    #[must_use]
    pub fn at_handle(mut self, handle: Option<impl Into<String>>) -> Self {
        self.handle = handle.map(Into::into);
        self
    }

    /// Adds the layer of the entity.
    #[must_use]
    pub fn on_layer(mut self, layer: impl Into<String>) -> Self {
        self.layer = Some(layer.into());
        self
    }

    /// Adds the file, when it is another one than the drawing.
    #[must_use]
    pub fn in_file(mut self, file: impl AsRef<Path>) -> Self {
        self.file = Some(file.as_ref().display().to_string());
        self
    }
}

impl std::fmt::Display for Refusal {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        if let Some(file) = &self.file {
            write!(f, "{file}: ")?;
        }
        if let Some(line) = self.line {
            write!(f, "line {line}: ")?;
        }
        f.write_str(&self.message)?;
        if let Some(layer) = &self.layer {
            write!(f, " [layer {layer}]")?;
        }
        if let Some(handle) = &self.handle {
            write!(f, " [handle {handle}]")?;
        }
        write!(f, ". {}", self.remedy)
    }
}

impl std::error::Error for Refusal {}
