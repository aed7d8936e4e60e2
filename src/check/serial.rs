//! How typed quantities are written: SI base units, unrounded; `null` for "never" and "not given".

use crate::quantity::{Quantity, Temperature, celsius};
use serde::Serializer;

pub(crate) fn si<Q: Quantity, S: Serializer>(quantity: &Q, to: S) -> Result<S::Ok, S::Error> {
    to.serialize_f64(quantity.si())
}

pub(crate) fn si_or_null<Q: Quantity, S: Serializer>(quantity: &Option<Q>, to: S) -> Result<S::Ok, S::Error> {
    match quantity {
        Some(quantity) => to.serialize_f64(quantity.si()),
        None => to.serialize_none(),
    }
}

pub(crate) fn si_list<Q: Quantity, S: Serializer>(quantities: &[Q], to: S) -> Result<S::Ok, S::Error> {
    to.collect_seq(quantities.iter().map(|q| q.si()))
}

pub(crate) fn degrees<S: Serializer>(temperature: &Temperature, to: S) -> Result<S::Ok, S::Error> {
    to.serialize_f64(celsius(*temperature))
}

pub(crate) fn celsius_or_null<S: Serializer>(temperature: &Option<Temperature>, to: S) -> Result<S::Ok, S::Error> {
    match temperature {
        Some(temperature) => to.serialize_f64(celsius(*temperature)),
        None => to.serialize_none(),
    }
}
