//! `[layers]`: which layer holds what.

use serde::{Serialize, Serializer};

use super::choice::{Choice, choice};
use super::pattern::{Ambiguous, Pattern, best_match};

/// One or more names or patterns of layers. Serialised as a text when there is one, else as an array.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Patterns(pub Vec<Pattern>);

impl Patterns {
    fn one(text: &str) -> Self {
        Self(vec![Pattern::new(text)])
    }
}

impl Serialize for Patterns {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        match &self.0[..] {
            [one] => one.serialize(serializer),
            several => several.serialize(serializer),
        }
    }
}

choice! {
    /// What a layer holds.
    Role {
        /// The axis.
        Axis = "axis",
        /// The inner line of the ring.
        Intrados = "intrados",
        /// The outer line of the ring.
        Extrados = "extrados",
        /// Loads and their labels.
        Loads = "loads",
        /// Spandrel posts.
        Posts = "posts",
        /// Joints of the ring.
        Joints = "joints",
        /// Hinges.
        Hinges = "hinges",
        /// The road line.
        Road = "road",
        /// The roadway in plan.
        Plan = "plan",
    }
}

/// `[layers]`
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct Layers {
    /// The axis.
    pub axis: Patterns,
    /// The inner line of the ring.
    pub intrados: Patterns,
    /// The outer line of the ring.
    pub extrados: Patterns,
    /// Loads and their labels.
    pub loads: Patterns,
    /// Spandrel posts.
    pub posts: Patterns,
    /// Joints of the ring.
    pub joints: Patterns,
    /// Hinges.
    pub hinges: Patterns,
    /// The road line.
    pub road: Patterns,
    /// The roadway in plan.
    pub plan: Patterns,
}

impl Default for Layers {
    fn default() -> Self {
        Self {
            axis: Patterns::one("ARCH-AXIS"),
            intrados: Patterns::one("ARCH-INTRADOS"),
            extrados: Patterns::one("ARCH-EXTRADOS"),
            loads: Patterns::one("ARCH-LOADS*"),
            posts: Patterns::one("ARCH-POSTS"),
            joints: Patterns::one("ARCH-JOINTS"),
            hinges: Patterns::one("ARCH-HINGES"),
            road: Patterns::one("ARCH-ROAD"),
            plan: Patterns::one("ARCH-PLAN"),
        }
    }
}

impl Layers {
    /// The patterns of a role.
    pub fn of(&self, role: Role) -> &Patterns {
        match role {
            Role::Axis => &self.axis,
            Role::Intrados => &self.intrados,
            Role::Extrados => &self.extrados,
            Role::Loads => &self.loads,
            Role::Posts => &self.posts,
            Role::Joints => &self.joints,
            Role::Hinges => &self.hinges,
            Role::Road => &self.road,
            Role::Plan => &self.plan,
        }
    }

    /// What the layer `name` holds: an exact name beats a pattern; `None` when nothing matches.
    ///
    /// # Errors
    /// The two roles whose patterns match with equal right.
    pub fn role_of(&self, name: &str) -> Result<Option<Role>, [Role; 2]> {
        let mut roles = Vec::new();
        let mut patterns = Vec::new();
        for &(_, role) in Role::NAMES {
            // Two patterns of one role do not contend with each other, so each role sends its best one only.
            let matching = || self.of(role).0.iter().filter(|p| p.matches(name));
            if let Some(best) = matching().find(|p| p.is_exact()).or_else(|| matching().next()) {
                roles.push(role);
                patterns.push(best);
            }
        }
        match best_match(name, patterns) {
            Ok(place) => Ok(place.map(|place| roles[place])),
            Err(Ambiguous { entries }) => Err(entries.map(|place| roles[place])),
        }
    }
}
