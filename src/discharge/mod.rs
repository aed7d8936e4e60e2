//! A bank as circuits through time: operating point, scenarios, worst cases.
//!
//! [`Model`] is the bank as numbered nodes and parts whose values follow from a point of the tolerance box;
//! [`Scenario`] says what is different under a fault; [`Case`] is one scenario at one point, solved; [`Figure`]
//! is a question to a case; [`worst`] finds the point of the box at which a figure is greatest.
//!
//! Inside this room figures are `f64` in SI base units, as they come from `circuit`; the rooms above see them as
//! typed quantities only.

mod absorption;
mod ascent;
mod at_point;
mod body;
mod case;
mod contact;
mod element;
mod figure;
mod flips;
mod gradient;
mod later;
mod model;
mod moment;
mod pinned;
mod poles;
mod repeated;
mod scenario;
mod sharing;
mod spread;
mod step_figure;
mod study;
mod timeline;
mod worst;

pub(crate) use at_point::{slopes_at, values_at};
pub(crate) use case::Case;
pub(crate) use element::element_model;
pub(crate) use figure::{Body, Figure};
pub(crate) use later::{LaterStudy, asked_later};
pub(crate) use model::{Model, Parameter, Part, PartKind, Variation, absorption};
pub(crate) use moment::{CourseStudy, Load, Moment, capacitor_load, load, sink_load};
pub(crate) use repeated::{InARow, rise_per_kelvin_per_watt};
pub(crate) use scenario::{CONTACT_FAULT, Fault, Scenario, faults, healthy, pairs_of_faults};
pub(crate) use sharing::{Risen, RisenFigure, Settled, SettledFigure, Strung, Unit};
pub(crate) use spread::{Spread, Spreads};
pub(crate) use step_figure::{ProcedureStudy, StepFigure};
pub(crate) use study::Study;
pub(crate) use timeline::{Setting, Stage, Timeline};
pub(crate) use worst::{MOST_CORNERS, Method, Worst, nominal, worst};
