//! What a check comes to.

use serde::Serialize;

/// What a check or a whole plan comes to.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
pub enum Verdict {
    /// A comparison of finite numbers holds.
    #[serde(rename = "met")]
    Met,
    /// It does not hold.
    #[serde(rename = "not met")]
    NotMet,
    /// Nothing was given to check against, or it is not computed yet.
    #[serde(rename = "not checked")]
    NotChecked,
    /// Only for a whole plan: the file has parts that this version does not compute.
    #[serde(rename = "incomplete")]
    Incomplete,
}

impl Verdict {
    /// `found <= allowed`, of finite numbers; NaN never passes.
    pub fn at_most(found: f64, allowed: f64) -> Self {
        if found.is_finite() && allowed.is_finite() && found <= allowed { Verdict::Met } else { Verdict::NotMet }
    }

    /// The words of the JSON.
    pub fn word(self) -> &'static str {
        match self {
            Verdict::Met => "met",
            Verdict::NotMet => "not met",
            Verdict::NotChecked => "not checked",
            Verdict::Incomplete => "incomplete",
        }
    }
}

#[cfg(test)]
mod tests {
    use super::Verdict;

    #[test]
    fn only_finite_numbers_pass() {
        assert_eq!(Verdict::at_most(1.0, 1.0), Verdict::Met);
        assert_eq!(Verdict::at_most(1.1, 1.0), Verdict::NotMet);
        assert_eq!(Verdict::at_most(f64::NAN, 1.0), Verdict::NotMet);
        assert_eq!(Verdict::at_most(1.0, f64::NAN), Verdict::NotMet);
        assert_eq!(Verdict::at_most(1.0, f64::INFINITY), Verdict::NotMet);
        assert_eq!(Verdict::at_most(f64::NEG_INFINITY, 1.0), Verdict::NotMet);
    }
}
