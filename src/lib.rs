//! x
/// q
pub mod quantity;
/// f
pub mod finding;
