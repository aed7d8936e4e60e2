//! What the notice on the cabinet says: the delay before opening, and what one failed part does to it.

use super::{Recovery, Wait, si, si_or_null};
use crate::quantity::{Quantity, Time, Voltage, for_a_notice};
use serde::Serialize;

/// The delay for the notice on the cabinet, over all test points.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Notice {
    /// The longest wait to keep, every part healthy, rounded up for a notice: whole seconds up to 2 min, then whole
    /// minutes. `None` (null) where a test point never falls below, or where nothing was computed.
    #[serde(rename = "delay_s", serialize_with = "si_or_null")]
    pub delay: Option<Time>,
    /// The longest finite wait with one part failed, where it is longer than the delay.
    pub longest_fault: Option<NoticeFault>,
    /// Failures under which the wait never ends at some test point, in the order of the file.
    pub never_faults: Vec<String>,
    /// The greatest voltage at any test point from the end of the procedure on; `None` (null) without a procedure.
    #[serde(rename = "left_v", serialize_with = "si_or_null")]
    pub left: Option<Voltage>,
}

/// A wait with one part failed, rounded up in the same way.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct NoticeFault {
    /// The failure.
    pub fault: String,
    /// Its wait, rounded up for a notice.
    #[serde(rename = "delay_s", serialize_with = "si")]
    pub delay: Time,
}

/// The notice that follows from the waits.
pub(crate) fn notice(waits: &[Wait], recovery: &[Recovery]) -> Notice {
    let longest = waits.iter().map(|w| w.keep.map_or(f64::INFINITY, Quantity::si)).reduce(f64::max);
    let delay = longest.filter(|s| s.is_finite()).map(|s| for_a_notice(Time::from_si(s)));
    let mut never_faults: Vec<String> = Vec::new();
    let mut longest_fault: Option<NoticeFault> = None;
    // Every wait lists the same failures; taken one by one they keep the order of the file.
    let count = waits.first().map_or(0, |w| w.faults.len());
    for fault in (0..count).flat_map(|i| waits.iter().filter_map(move |w| w.faults.get(i))) {
        match fault.wait.map(for_a_notice) {
            None if !never_faults.contains(&fault.fault) => never_faults.push(fault.fault.clone()),
            Some(wait) if longest_fault.as_ref().is_none_or(|known| wait > known.delay) => {
                longest_fault = Some(NoticeFault { fault: fault.fault.clone(), delay: wait });
            }
            _ => {}
        }
    }
    let longest_fault = longest_fault.filter(|fault| delay.is_none_or(|delay| fault.delay > delay));
    let left = recovery.iter().map(|r| r.voltage.si()).reduce(f64::max).map(Voltage::from_si);
    Notice { delay, longest_fault, never_faults, left }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::check::FaultWait;

    fn wait(keep: Option<f64>, faults: &[(&str, Option<f64>)]) -> Wait {
        let fault = |(name, wait): &(&str, Option<f64>)| FaultWait {
            fault: (*name).into(),
            wait: wait.map(Time::from_si),
            settles_at: Voltage::from_si(0.0),
            opens: None,
            opens_at: None,
            settles_opens_at: None,
        };
        Wait {
            across: ["P".into(), "N".into()],
            nominal: keep.map(Time::from_si),
            slowest: keep.map(Time::from_si),
            keep: keep.map(Time::from_si),
            settles_at: Voltage::from_si(0.0),
            at_isolation: Voltage::from_si(750.0),
            worst_point: Vec::new(),
            interruption: None,
            found_by: String::new(),
            faults: faults.iter().map(fault).collect(),
            fault_pairs: Vec::new(),
        }
    }

    #[test]
    fn the_delay_is_the_longest_wait_in_whole_minutes() {
        let made = notice(&[wait(Some(248.0), &[]), wait(Some(120.5), &[])], &[]);
        assert_eq!(made.delay, Some(Time::from_si(300.0)));
        assert_eq!(notice(&[wait(Some(119.2), &[])], &[]).delay, Some(Time::from_si(120.0)));
    }

    #[test]
    fn one_test_point_that_never_falls_below_leaves_no_delay() {
        assert_eq!(notice(&[wait(Some(10.0), &[]), wait(None, &[])], &[]).delay, None);
        assert_eq!(notice(&[], &[]).delay, None);
    }

    #[test]
    fn failures_without_an_end_are_named_and_the_longest_with_one_is_kept() {
        let faults = [("R1 open", None), ("R2 open", Some(500.0)), ("C1 shorted", Some(20.0))];
        let made = notice(&[wait(Some(248.0), &faults), wait(Some(10.0), &faults)], &[]);
        assert_eq!(made.never_faults, ["R1 open"]);
        assert_eq!(made.longest_fault, Some(NoticeFault { fault: "R2 open".into(), delay: Time::from_si(540.0) }));
        let shorter = notice(&[wait(Some(248.0), &[("C1 shorted", Some(20.0))])], &[]);
        assert_eq!(shorter.longest_fault, None);
    }
}
