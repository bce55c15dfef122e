//! Looks for numbers that JSON cannot hold. The JSON writer turns them into null without a word, so a value of nought
//! meaning would pass for "not found".

use serde::ser::{self, Serialize};

use crate::refusal::Refusal;

/// Refuses a value that holds an infinite number or something that is no number, and says where.
pub fn check<T: Serialize>(value: &T) -> Result<(), Refusal> {
    let mut walk = Walk { path: Vec::new() };
    value.serialize(&mut walk).map_err(|NotFinite(place)| {
        Refusal::new(
            "not-finite",
            format!("a result is infinite or not a number: {place}"),
            "This is a fault of the program; please report it with the drawing.",
        )
    })
}

/// Where the first such number stands.
#[derive(Debug)]
struct NotFinite(String);

impl std::fmt::Display for NotFinite {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(&self.0)
    }
}

impl std::error::Error for NotFinite {}

impl ser::Error for NotFinite {
    fn custom<T: std::fmt::Display>(message: T) -> Self {
        Self(message.to_string())
    }
}

/// Walks through a value and remembers the way.
struct Walk {
    path: Vec<String>,
}

impl Walk {
    fn number(&self, value: f64) -> Result<(), NotFinite> {
        if value.is_finite() {
            Ok(())
        } else {
            Err(NotFinite(self.path.concat().trim_start_matches('.').to_owned()))
        }
    }

    fn at<T: Serialize + ?Sized>(&mut self, step: String, value: &T) -> Result<(), NotFinite> {
        self.path.push(step);
        value.serialize(&mut *self)?;
        self.path.pop();
        Ok(())
    }
}

/// The items of a list, counted.
struct Items<'a> {
    walk: &'a mut Walk,
    next: usize,
}

/// The entries of a map or the fields of a record.
struct Fields<'a> {
    walk: &'a mut Walk,
    key: String,
}

macro_rules! passes {
    ($($name:ident($kind:ty)),* $(,)?) => {
        $(fn $name(self, _: $kind) -> Result<(), NotFinite> { Ok(()) })*
    };
}

impl<'a> ser::Serializer for &'a mut Walk {
    type Ok = ();
    type Error = NotFinite;
    type SerializeSeq = Items<'a>;
    type SerializeTuple = Items<'a>;
    type SerializeTupleStruct = Items<'a>;
    type SerializeTupleVariant = Items<'a>;
    type SerializeMap = Fields<'a>;
    type SerializeStruct = Fields<'a>;
    type SerializeStructVariant = Fields<'a>;

    passes!(
        serialize_bool(bool),
        serialize_i8(i8),
        serialize_i16(i16),
        serialize_i32(i32),
        serialize_i64(i64),
        serialize_u8(u8),
        serialize_u16(u16),
        serialize_u32(u32),
        serialize_u64(u64),
        serialize_char(char),
        serialize_str(&str),
        serialize_bytes(&[u8]),
        serialize_unit_struct(&'static str),
    );

    fn serialize_f32(self, value: f32) -> Result<(), NotFinite> {
        self.number(f64::from(value))
    }

    fn serialize_f64(self, value: f64) -> Result<(), NotFinite> {
        self.number(value)
    }

    fn serialize_none(self) -> Result<(), NotFinite> {
        Ok(())
    }

    fn serialize_unit(self) -> Result<(), NotFinite> {
        Ok(())
    }

    fn serialize_some<T: Serialize + ?Sized>(self, value: &T) -> Result<(), NotFinite> {
        value.serialize(self)
    }

    fn serialize_unit_variant(self, _: &'static str, _: u32, _: &'static str) -> Result<(), NotFinite> {
        Ok(())
    }

    fn serialize_newtype_struct<T: Serialize + ?Sized>(
        self,
        _: &'static str,
        value: &T,
    ) -> Result<(), NotFinite> {
        value.serialize(self)
    }

    fn serialize_newtype_variant<T: Serialize + ?Sized>(
        self,
        _: &'static str,
        _: u32,
        variant: &'static str,
        value: &T,
    ) -> Result<(), NotFinite> {
        self.at(format!(".{variant}"), value)
    }

    fn serialize_seq(self, _: Option<usize>) -> Result<Items<'a>, NotFinite> {
        Ok(Items { walk: self, next: 0 })
    }

    fn serialize_tuple(self, _: usize) -> Result<Items<'a>, NotFinite> {
        self.serialize_seq(None)
    }

    fn serialize_tuple_struct(self, _: &'static str, _: usize) -> Result<Items<'a>, NotFinite> {
        self.serialize_seq(None)
    }

    fn serialize_tuple_variant(
        self,
        _: &'static str,
        _: u32,
        _: &'static str,
        _: usize,
    ) -> Result<Items<'a>, NotFinite> {
        self.serialize_seq(None)
    }

    fn serialize_map(self, _: Option<usize>) -> Result<Fields<'a>, NotFinite> {
        Ok(Fields { walk: self, key: String::new() })
    }

    fn serialize_struct(self, _: &'static str, _: usize) -> Result<Fields<'a>, NotFinite> {
        self.serialize_map(None)
    }

    fn serialize_struct_variant(
        self,
        _: &'static str,
        _: u32,
        _: &'static str,
        _: usize,
    ) -> Result<Fields<'a>, NotFinite> {
        self.serialize_map(None)
    }
}

macro_rules! items {
    ($($which:ident::$method:ident),* $(,)?) => {
        $(impl ser::$which for Items<'_> {
            type Ok = ();
            type Error = NotFinite;

            fn $method<T: Serialize + ?Sized>(&mut self, value: &T) -> Result<(), NotFinite> {
                let step = format!("[{}]", self.next);
                self.next += 1;
                self.walk.at(step, value)
            }

            fn end(self) -> Result<(), NotFinite> {
                Ok(())
            }
        })*
    };
}

items!(
    SerializeSeq::serialize_element,
    SerializeTuple::serialize_element,
    SerializeTupleStruct::serialize_field,
    SerializeTupleVariant::serialize_field,
);

impl ser::SerializeMap for Fields<'_> {
    type Ok = ();
    type Error = NotFinite;

    fn serialize_key<T: Serialize + ?Sized>(&mut self, key: &T) -> Result<(), NotFinite> {
        self.key =
            serde_json::to_value(key).ok().and_then(|k| k.as_str().map(str::to_owned)).unwrap_or_default();
        Ok(())
    }

    fn serialize_value<T: Serialize + ?Sized>(&mut self, value: &T) -> Result<(), NotFinite> {
        let step = format!(".{}", self.key);
        self.walk.at(step, value)
    }

    fn end(self) -> Result<(), NotFinite> {
        Ok(())
    }
}

macro_rules! fields {
    ($($which:ident),*) => {
        $(impl ser::$which for Fields<'_> {
            type Ok = ();
            type Error = NotFinite;

            fn serialize_field<T: Serialize + ?Sized>(
                &mut self,
                key: &'static str,
                value: &T,
            ) -> Result<(), NotFinite> {
                self.walk.at(format!(".{key}"), value)
            }

            fn end(self) -> Result<(), NotFinite> {
                Ok(())
            }
        })*
    };
}

fields!(SerializeStruct, SerializeStructVariant);
