//! A guard for machine formats: walks everything that would be written and refuses a number that is not finite.
//!
//! serde_json writes NaN as `null`, which in a plan means "never" or "not given"; after that it is too late to tell.

use serde::ser::{self, Serialize};
use std::fmt;

/// A figure is not a finite number; this names the key.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct NotFinite(String);

impl NotFinite {
    /// An error with this text.
    pub(in crate::report) fn new(text: String) -> Self {
        NotFinite(text)
    }
}

impl fmt::Display for NotFinite {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0)
    }
}

impl std::error::Error for NotFinite {}

impl ser::Error for NotFinite {
    fn custom<T: fmt::Display>(text: T) -> Self {
        NotFinite(text.to_string())
    }
}

/// Looks at every number that `value` would write.
///
/// # Errors
/// Where one is NaN or infinite; the error names its key.
pub fn check_finite<T: Serialize>(value: &T) -> Result<(), NotFinite> {
    value.serialize(&mut Walk::default())
}

/// Where the walk stands: the keys from the outside in, and how many elements of each open list were seen.
#[derive(Default)]
struct Walk {
    path: Vec<String>,
    counts: Vec<usize>,
}

impl Walk {
    fn number(&self, value: f64) -> Result<(), NotFinite> {
        let place = || self.path.concat().trim_start_matches('.').to_string();
        if value.is_finite() { Ok(()) } else { Err(NotFinite(format!("{} is not a finite number", place()))) }
    }

    fn inside<T: Serialize + ?Sized>(&mut self, step: String, value: &T) -> Result<(), NotFinite> {
        self.path.push(step);
        value.serialize(&mut *self)?;
        self.path.pop();
        Ok(())
    }

    fn element<T: Serialize + ?Sized>(&mut self, value: &T) -> Result<(), NotFinite> {
        let index = self.counts.last().copied().unwrap_or(0);
        self.inside(format!("[{index}]"), value)?;
        if let Some(count) = self.counts.last_mut() {
            *count += 1;
        }
        Ok(())
    }

    fn open(&mut self) -> Result<&mut Self, NotFinite> {
        self.counts.push(0);
        Ok(self)
    }

    fn close(&mut self) -> Result<(), NotFinite> {
        self.counts.pop();
        Ok(())
    }
}

/// Types that hold no floating-point number.
macro_rules! nothing_to_check {
    ($($method:ident($($type:ty),*);)*) => {$(
        fn $method(self, $(_: $type),*) -> Result<(), NotFinite> {
            Ok(())
        }
    )*};
}

impl ser::Serializer for &mut Walk {
    type Ok = ();
    type Error = NotFinite;
    type SerializeSeq = Self;
    type SerializeTuple = Self;
    type SerializeTupleStruct = Self;
    type SerializeTupleVariant = Self;
    type SerializeMap = Self;
    type SerializeStruct = Self;
    type SerializeStructVariant = Self;

    fn serialize_f32(self, value: f32) -> Result<(), NotFinite> {
        self.number(f64::from(value))
    }

    fn serialize_f64(self, value: f64) -> Result<(), NotFinite> {
        self.number(value)
    }

    nothing_to_check! {
        serialize_bool(bool);
        serialize_i8(i8);
        serialize_i16(i16);
        serialize_i32(i32);
        serialize_i64(i64);
        serialize_u8(u8);
        serialize_u16(u16);
        serialize_u32(u32);
        serialize_u64(u64);
        serialize_char(char);
        serialize_str(&str);
        serialize_bytes(&[u8]);
        serialize_none();
        serialize_unit();
        serialize_unit_struct(&'static str);
        serialize_unit_variant(&'static str, u32, &'static str);
    }

    fn serialize_some<T: Serialize + ?Sized>(self, value: &T) -> Result<(), NotFinite> {
        value.serialize(self)
    }

    fn serialize_newtype_struct<T: Serialize + ?Sized>(self, _: &'static str, value: &T) -> Result<(), NotFinite> {
        value.serialize(self)
    }

    fn serialize_newtype_variant<T: Serialize + ?Sized>(
        self,
        _: &'static str,
        _: u32,
        variant: &'static str,
        value: &T,
    ) -> Result<(), NotFinite> {
        self.inside(format!(".{variant}"), value)
    }

    fn serialize_seq(self, _: Option<usize>) -> Result<Self, NotFinite> {
        self.open()
    }

    fn serialize_tuple(self, _: usize) -> Result<Self, NotFinite> {
        self.open()
    }

    fn serialize_tuple_struct(self, _: &'static str, _: usize) -> Result<Self, NotFinite> {
        self.open()
    }

    fn serialize_tuple_variant(self, _: &'static str, _: u32, _: &'static str, _: usize) -> Result<Self, NotFinite> {
        self.open()
    }

    fn serialize_map(self, _: Option<usize>) -> Result<Self, NotFinite> {
        self.open()
    }

    fn serialize_struct(self, _: &'static str, _: usize) -> Result<Self, NotFinite> {
        self.open()
    }

    fn serialize_struct_variant(self, _: &'static str, _: u32, _: &'static str, _: usize) -> Result<Self, NotFinite> {
        self.open()
    }
}

/// Lists, whatever serde calls them.
macro_rules! elements {
    ($($part:ident: $method:ident;)*) => {$(
        impl ser::$part for &mut Walk {
            type Ok = ();
            type Error = NotFinite;
            fn $method<T: Serialize + ?Sized>(&mut self, value: &T) -> Result<(), NotFinite> {
                self.element(value)
            }
            fn end(self) -> Result<(), NotFinite> {
                self.close()
            }
        }
    )*};
}

elements! {
    SerializeSeq: serialize_element;
    SerializeTuple: serialize_element;
    SerializeTupleStruct: serialize_field;
    SerializeTupleVariant: serialize_field;
}

/// Structs, whatever serde calls them.
macro_rules! fields {
    ($($part:ident;)*) => {$(
        impl ser::$part for &mut Walk {
            type Ok = ();
            type Error = NotFinite;
            fn serialize_field<T: Serialize + ?Sized>(&mut self, key: &'static str, value: &T) -> Result<(), NotFinite> {
                self.inside(format!(".{key}"), value)
            }
            fn end(self) -> Result<(), NotFinite> {
                self.close()
            }
        }
    )*};
}

fields! {
    SerializeStruct;
    SerializeStructVariant;
}

impl ser::SerializeMap for &mut Walk {
    type Ok = ();
    type Error = NotFinite;

    fn serialize_key<T: Serialize + ?Sized>(&mut self, _: &T) -> Result<(), NotFinite> {
        Ok(())
    }

    fn serialize_value<T: Serialize + ?Sized>(&mut self, value: &T) -> Result<(), NotFinite> {
        self.element(value)
    }

    fn end(self) -> Result<(), NotFinite> {
        self.close()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::collections::BTreeMap;

    #[test]
    fn every_shape_of_data_is_walked() {
        assert!(check_finite(&(1.0, [2.0], Some(3.0), "x", ())).is_ok());
        assert!(check_finite(&(1.0, [f64::NAN])).is_err());
        assert!(check_finite(&Some(f32::INFINITY)).is_err());
        assert!(check_finite(&BTreeMap::from([("a", f64::NEG_INFINITY)])).is_err());
    }
}
