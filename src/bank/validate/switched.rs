//! The contact of a bleeder: only a bleeder has one, and a cycle has room for a discharge.

use super::super::description::{Description, Role, Switched};
use super::super::problem::{Path, Sink};
use super::figures::{above_zero, at_least_zero};
use crate::quantity::Quantity;

/// More discharges in a row than this are a slip of the pen.
pub(super) const MOST_DISCHARGES: u32 = 1_000_000;

pub(super) fn check(d: &Description, sink: &mut Sink) {
    for (i, r) in d.resistors.iter().enumerate() {
        let path = Path::of("resistors").then(i).then("switched");
        let Some(switched) = r.switched else { continue };
        if r.role == Role::Bleeder {
            contact(&switched, &path, sink);
        } else {
            sink.push("switched-is-no-bleeder", path, || {
                (
                    format!("a resistor of role `{}` can't be `switched`", r.role.word()),
                    String::from(
                        "only a bleeder has a contact that closes at isolation: write `role: bleeder`, or leave \
                         `switched` out; a tool, a strap or a meter is connected by a step",
                    ),
                )
            });
        }
    }
}

fn contact(switched: &Switched, path: &Path, sink: &mut Sink) {
    at_least_zero(switched.closes_after, "closes_after", path, sink);
    at_least_zero(switched.opens_after, "opens_after", path, sink);
    if !(1..=MOST_DISCHARGES).contains(&switched.discharges) {
        sink.push("count-out-of-range", path.then("discharges"), || {
            (
                format!("`discharges` is {}", switched.discharges),
                format!("write a whole number from 1 to {MOST_DISCHARGES}"),
            )
        });
    }
    let Some(every) = switched.every else {
        if switched.discharges > 1 {
            sink.push("missing-key", path.clone(), || {
                (
                    format!("{} `discharges` in a row, but not how far apart", switched.discharges),
                    String::from("add `every`, the time from one isolation to the next, such as `every: 10 min`"),
                )
            });
        }
        return;
    };
    above_zero(every, "every", path, sink);
    let taken = switched.closes_after.si() + switched.opens_after.si();
    if every.si() > 0.0 && taken >= every.si() {
        sink.push("cycle-too-short", path.then("every"), || {
            (
                format!("`every` ({} s) leaves no time between the contact's delays ({taken} s)", every.si()),
                String::from("`every` is the time from one isolation to the next: longer than both delays together"),
            )
        });
    }
}

#[cfg(test)]
mod tests {
    use super::super::samples::*;
    use super::*;
    use crate::quantity::Time;

    fn with(change: impl FnOnce(&mut Switched)) -> Description {
        let mut d = plain();
        let mut switched = Switched::default();
        change(&mut switched);
        d.resistors[0].switched = Some(switched);
        d
    }

    fn seconds(t: f64) -> Time {
        Time::from_si(t)
    }

    #[test]
    fn a_bleeder_may_have_a_contact_with_every_key_left_out() {
        assert_eq!(problems(&with(|_| {})), []);
    }

    #[test]
    fn only_a_bleeder_has_a_contact() {
        for role in Role::ALL.into_iter().filter(|role| *role != Role::Bleeder) {
            let mut d = with(|_| {});
            d.resistors.push(resistor("R2", role, "P", "N"));
            d.resistors[1].switched = d.resistors[0].switched.take();
            assert_problem(&d, "switched-is-no-bleeder", "resistors[1].switched");
        }
    }

    #[test]
    fn delays_are_finite_and_not_negative() {
        let late = with(|s| s.closes_after = seconds(-1.0));
        assert_problem(&late, "bad-figure", "resistors[0].switched.closes_after");
        let late = with(|s| s.opens_after = seconds(f64::NAN));
        assert_problem(&late, "bad-figure", "resistors[0].switched.opens_after");
    }

    #[test]
    fn several_discharges_say_how_far_apart_they_are() {
        assert_problem(&with(|s| s.discharges = 5), "missing-key", "resistors[0].switched");
        assert_problem(&with(|s| s.discharges = 0), "count-out-of-range", "resistors[0].switched.discharges");
        let many = with(|s| {
            s.discharges = MOST_DISCHARGES + 1;
            s.every = Some(seconds(60.0));
        });
        assert_problem(&many, "count-out-of-range", "resistors[0].switched.discharges");
    }

    #[test]
    fn a_cycle_has_room_for_a_discharge() {
        let short = |every: f64| {
            with(|s| {
                (s.closes_after, s.opens_after) = (seconds(2.0), seconds(1.0));
                s.every = Some(seconds(every));
            })
        };
        assert_eq!(problems(&short(3.5)), []);
        assert_problem(&short(3.0), "cycle-too-short", "resistors[0].switched.every");
        assert_problem(&short(0.0), "not-above-zero", "resistors[0].switched.every");
    }
}
