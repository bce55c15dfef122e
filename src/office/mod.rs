//! Sets of drawings in a drawing office, day after day: many at once, and what comes before and after a mark.

pub mod batch;
pub mod compare;
pub mod demo;
pub mod starter;
pub mod store;
pub mod verify;
pub mod watch;
