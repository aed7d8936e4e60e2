//! The data folder, compiled in: published limits, dielectrics, energy bands, example banks.
//!
//! The files are part of the program and are read once, on first use. A malformed one is a bug of ours, not of the
//! user's; the unit tests below read every file and fail on it, so that the accessors never have to.

mod bands;
mod banks;
mod dielectrics;
mod limits;
mod raw;
mod series;

pub use bands::{EnergyBand, energy_bands};
pub use banks::{demo_banks, draft, example_bank, generic_stock};
pub use dielectrics::{Dielectric, LeakageRule, Range, dielectric, dielectrics};
pub use limits::{Alternative, LimitKind, PublishedLimit, published_limit, published_limits};
pub use series::Series;
