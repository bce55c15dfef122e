//! Closed lists of values.

/// A type whose values have names in the job file.
pub trait Choice: Copy + Sized + 'static {
    /// Every value with its name, in the order in which they are listed to the user.
    const NAMES: &'static [(&'static str, Self)];
}

/// Defines an enumeration of named values, which prints and serialises as its name.
macro_rules! choice {
    ($(#[$meta:meta])* $name:ident { $($(#[$variant_meta:meta])* $variant:ident = $text:literal,)+ }) => {
        $(#[$meta])*
        #[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
        pub enum $name { $($(#[$variant_meta])* $variant,)+ }

        impl $name {
            /// Its name in the job file.
            pub fn name(self) -> &'static str {
                match self { $(Self::$variant => $text,)+ }
            }
        }

        impl $crate::job::choice::Choice for $name {
            const NAMES: &'static [(&'static str, Self)] = &[$(($text, Self::$variant)),+];
        }

        impl std::fmt::Display for $name {
            fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
                f.write_str(self.name())
            }
        }

        impl serde::Serialize for $name {
            fn serialize<S: serde::Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
                serializer.serialize_str(self.name())
            }
        }
    };
}
pub(super) use choice;
