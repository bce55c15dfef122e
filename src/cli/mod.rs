//! The command line.

pub mod args;
