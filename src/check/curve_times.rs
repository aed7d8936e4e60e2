//! Moments at which a curve is sampled: close together where it bends.

use crate::circuit::Course;

/// How far a straight line between two moments may be off: in powers of ten of the voltage, and as a share of the
/// greatest voltage of the step. Both are less than the width of a line in print.
const OFF_DECADES: f64 = 0.012;
const OFF_SHARE: f64 = 0.004;

/// Candidates: evenly over the step, and by equal factors from a ten-millionth of it on, since a strap empties in
/// microseconds what then rests for an hour.
const EVEN: usize = 40;
const BY_FACTORS: usize = 80;
const SHORTEST: f64 = 1e-7;

/// A course of so many phases bends where they meet; with more (a power is taken in steps) they are no bends.
const MOST_BENDS: usize = 16;

/// Where phases meet: sinks stop, contacts close.
fn bends(course: &Course) -> Vec<f64> {
    let mut end = 0.0;
    let ends = course.pieces().iter().map(|(length, _)| {
        end += length;
        end
    });
    if course.pieces().len() <= MOST_BENDS { ends.collect() } else { Vec::new() }
}

/// Moments in second from the start of a step of length `duration`, its start and end included. `floor` is the
/// voltage below which a curve is of no interest.
pub(super) fn chosen(courses: &[Course], duration: f64, floor: f64) -> Vec<f64> {
    if duration <= 0.0 {
        return vec![0.0];
    }
    let mut times: Vec<f64> = (0..=EVEN).map(|k| duration * k as f64 / EVEN as f64).collect();
    times.extend((0..BY_FACTORS).map(|k| duration * SHORTEST.powf(1.0 - k as f64 / BY_FACTORS as f64)));
    times.extend(courses.iter().flat_map(bends).filter(|t| *t < duration));
    times.sort_by(f64::total_cmp);
    times.dedup();
    let values: Vec<Vec<f64>> = courses.iter().map(|c| times.iter().map(|t| c.value(*t).abs()).collect()).collect();
    let mut kept = vec![false; times.len()];
    let last = times.len() - 1;
    (kept[0], kept[last]) = (true, true);
    let mut open = vec![(0, last)];
    while let Some((from, to)) = open.pop() {
        if let Some(worst) = most_off(&times, &values, from, to, floor) {
            kept[worst] = true;
            open.extend([(from, worst), (worst, to)]);
        }
    }
    times.into_iter().zip(kept).filter(|(_, kept)| *kept).map(|(t, _)| t).collect()
}

/// The moment between two others at which a straight line is furthest off, where it is off by more than allowed
/// (Douglas and Peucker 1973).
fn most_off(times: &[f64], values: &[Vec<f64>], from: usize, to: usize, floor: f64) -> Option<usize> {
    let mut worst = (1.0, None);
    for course in values {
        let greatest = course.iter().copied().fold(floor, f64::max);
        let decades = |i: usize| course[i].max(floor).log10();
        for i in from + 1..to {
            let share = (times[i] - times[from]) / (times[to] - times[from]);
            let between = |x: f64, y: f64| x + share * (y - x);
            let off = (decades(i) - between(decades(from), decades(to))).abs() / OFF_DECADES;
            let off = off.max((course[i] - between(course[from], course[to])).abs() / (OFF_SHARE * greatest));
            // A plot with a logarithmic axis of time sees the same curve stretched.
            let stretched = if times[from] > 0.0 {
                let share = (times[i] / times[from]).ln() / (times[to] / times[from]).ln();
                (decades(i) - (decades(from) + share * (decades(to) - decades(from)))).abs() / (3.0 * OFF_DECADES)
            } else {
                0.0
            };
            let off = off.max(stretched);
            if off > worst.0 {
                worst = (off, Some(i));
            }
        }
    }
    worst.1
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::circuit::ExpSum;

    #[test]
    fn a_straight_line_on_a_logarithmic_axis_still_shows_its_bend_on_an_even_one() {
        let course = Course::from(ExpSum::new(0.0, [(100.0, 1.0)]));
        let times = chosen(std::slice::from_ref(&course), 10.0, 1e-3);
        assert!((5..60).contains(&times.len()), "{}", times.len());
        for pair in times.windows(2) {
            let middle = 0.5 * (pair[0] + pair[1]);
            let straight = 0.5 * (course.value(pair[0]) + course.value(pair[1]));
            assert!((straight - course.value(middle)).abs() < 1.0, "at {middle}");
        }
    }

    #[test]
    fn a_fast_fall_before_a_long_rest_is_not_missed() {
        let course = Course::from(ExpSum::new(5.0, [(745.0, 1e4)]));
        let times = chosen(&[course], 60.0, 1e-2);
        assert!(times.iter().filter(|t| **t > 0.0 && **t < 1e-3).count() > 5, "{times:?}");
    }

    #[test]
    fn a_step_without_length_has_one_moment() {
        assert_eq!(chosen(&[], 0.0, 1.0), [0.0]);
        assert_eq!(chosen(&[Course::default()], 60.0, 1.0), [0.0, 60.0]);
    }
}
