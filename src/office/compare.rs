//! x
/// y
pub const HOLDS: &str = "changes";
