//! One element of an array on its own.
//!
//! An array's elements have their own tolerances: the greatest figure of ONE element comes where it and the others
//! lie at different ends (of three and more in series, one high and the rest low is worse than all low). So the
//! array is written as the element, the rest of its string, and the other strings, each with a value of its own.

use super::model::{Model, Part, PartKind};
use crate::bank::description::Resistor;
use crate::quantity::Quantity;

/// The model with array `resistor` opened up; gives it with the number of the element. An array of one element is
/// the model as it is.
pub(crate) fn element_model(model: &Model, resistor: &Resistor) -> Option<(Model, usize)> {
    let index = model.find_resistor(&resistor.id)?;
    let mut opened = model.clone();
    let loose_before = opened.parameters.len();
    if resistor.series == 1 && resistor.parallel == 1 {
        return Some((opened, index));
    }
    // Other resistors keep their numbers: the array's own place becomes the element at the end.
    let whole = opened.resistors[index].clone();
    let unit = resistor.value.si();
    let spread = model.spreads.resistor(resistor).total();
    let together = matches!(whole.kind, PartKind::Switched | PartKind::Contact);
    let kind = if together { PartKind::With(index) } else { whole.kind };
    let add = |opened: &mut Model, a, b, nominal, parameter| {
        opened.resistors.push(Part { id: whole.id.clone(), a, b, nominal, parameter, kind });
        opened.resistors.len() - 1
    };
    // The lumped array's own loose value now stands for the other strings; it is used by nothing else.
    let middle = if resistor.series > 1 { opened.new_node(&format!("{} between elements", whole.id)) } else { whole.b };
    if resistor.parallel > 1 {
        let strings = f64::from(resistor.parallel - 1);
        add(&mut opened, whole.a, whole.b, unit * f64::from(resistor.series) / strings, whole.parameter);
    }
    if resistor.series > 1 {
        let parameter = if resistor.parallel > 1 { opened.parameter(&resistor.id, spread) } else { whole.parameter };
        add(&mut opened, middle, whole.b, unit * f64::from(resistor.series - 1), parameter);
    }
    let parameter = opened.parameter(&resistor.id, spread);
    opened.resistors[index] = Part { b: middle, nominal: unit, parameter, ..whole };
    if model.passive == loose_before {
        opened.passive = opened.parameters.len();
    }
    Some((opened, index))
}
