//! Figures that others have published, found again with the tool: textbooks, courses, standards, and closed forms.
//!
//! Every row names its source. A found figure has to lie within half a unit of the last digit that the source states;
//! a figure that a source itself gets wrong is kept as one that the tool must NOT find. Facts and figures only.
//!
//! Where a source charges, the row is found twice: by a supply that a step connects (`charging`), and as a *complement*
//! of a discharge: what is across the resistor falls, and the capacitor has the rest of the source's voltage.

mod banks;
mod charging;
mod closed_forms;
mod courses;
mod published_limits;
mod rows;
mod sizing;
mod textbook_energies;
mod textbook_times;
mod three_phase;
