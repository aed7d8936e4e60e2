//! The next phase of a network with sinks that draw.
//!
//! Constant currents: the phase lasts until the first of them stops. A constant power makes its current depend on the
//! voltage, `i = P / v`. The network stays linear in the current, so that over a step in which the current is a
//! polynomial of time every voltage is known in closed form; the polynomial is the one that draws the power exactly at
//! the Gauss points of the step. (Collocation: Hairer, Lubich and Wanner 2006, section II.1.2, with the linear part in
//! closed form as in exponential integrators, Hochbruck and Ostermann 2010. A strap of 1 mohm in the network therefore
//! costs no small steps, as it would with an explicit method.) A step is taken again with a shorter length until the
//! power between the Gauss points is right as well.

use super::drain::{Active, Draw, Next};
use super::grown::POWERS;
use super::quadrature::rule;
use super::{CircuitError, ExpSum, Response};
use std::sync::LazyLock;

/// Gauss points of a step.
const POINTS: usize = POWERS;

/// Relative error of the power between the Gauss points. What it does to a voltage is far smaller: its mean over a
/// step is zero to twice the order.
const TOLERANCE: f64 = 1e-10;

/// Where the power is looked at between the Gauss points, as shares of the step.
const LOOKED_AT: [f64; 4] = [0.0, 0.25, 0.55, 1.0];

/// (place in [0, 1], weight).
static GAUSS: LazyLock<[(f64, f64); POINTS]> = LazyLock::new(rule);

/// The phase that comes next from `rest`, the network let go without its sinks.
pub(super) fn next(rest: &Response, active: &[Active]) -> Result<Next, CircuitError> {
    let below = |volts: &dyn Fn(&Active) -> f64| -> Vec<usize> {
        active.iter().filter(|a| volts(a) <= a.sink.stops_below).map(|a| a.index).collect()
    };
    // Those whose voltage is too low even before they draw.
    let none = below(&|a| a.sign * rest.across(a.sink.a, a.sink.b).value(0.0));
    if !none.is_empty() {
        return Ok(Next::Stopped(none));
    }
    if active.iter().all(|a| matches!(a.sink.draw, Draw::Current(_))) {
        return constant(rest, active);
    }
    step(rest, active)
}

/// Constant currents: exact, until the first stop.
fn constant(rest: &Response, active: &[Active]) -> Result<Next, CircuitError> {
    let ampere = |a: &Active| match a.sink.draw {
        Draw::Current(ampere) | Draw::Power(ampere) => ampere,
    };
    let response = rest.drawing(active.iter().map(|a| a.drawn(std::iter::once(ampere(a)))).collect());
    let volts: Vec<ExpSum> = active.iter().map(|a| response.across(a.sink.a, a.sink.b)).collect();
    let at_once: Vec<usize> = active
        .iter()
        .zip(&volts)
        .filter(|(a, v)| a.sign * v.value(0.0) <= a.sink.stops_below)
        .map(|(a, _)| a.index)
        .collect();
    if !at_once.is_empty() {
        return Ok(Next::Stopped(at_once));
    }
    // The time that the current would take for all of the energy bounds the first look; it grows from there.
    let power: f64 = active.iter().zip(&volts).map(|(a, v)| ampere(a) * v.value(0.0).abs()).sum();
    let mut until = 2.0 * response.initial_energy() / power;
    let slowest = rest.modes().time_constants().first().copied().unwrap_or(0.0);
    const MOST_LOOKS: usize = 100;
    for _ in 0..MOST_LOOKS {
        let mut first: Option<f64> = None;
        for (a, v) in active.iter().zip(&volts) {
            let stop = v.first_inside(a.sink.stops_below, first.unwrap_or(until))?;
            first = stop.or(first);
        }
        if let Some(length) = first {
            let reached = |(a, v): &(&Active, &ExpSum)| {
                let stop = a.sink.stops_below;
                a.sign * v.value(length) <= stop * (1.0 + 1e-12) + 1e-14 * v.value(0.0).abs()
            };
            let stopped = active.iter().zip(&volts).filter(reached).map(|(a, _)| a.index).collect();
            return Ok(Next::Until { length, response, stopped });
        }
        let fed = !rest.network().sources.is_empty();
        if fed && until > 50.0 * slowest {
            return Ok(Next::Lasts(response));
        }
        until *= 4.0;
    }
    Err(CircuitError::SearchNotClosed)
}

/// How the voltage of one sink answers to the current of another: its jump and its growth, per ampere and power of
/// time in units of the step.
struct Answers {
    /// `[of sink][by sink][power]`, as sums that can be asked for any time.
    unit: Vec<Vec<Vec<ExpSum>>>,
    /// The voltages with no power drawn.
    idle: Vec<ExpSum>,
}

/// A step with constant powers.
fn step(rest: &Response, active: &[Active]) -> Result<Next, CircuitError> {
    let currents: Vec<&Active> = active.iter().filter(|a| matches!(a.sink.draw, Draw::Current(_))).collect();
    let powers: Vec<(&Active, f64)> = active
        .iter()
        .filter_map(|a| if let Draw::Power(watt) = a.sink.draw { Some((a, watt)) } else { None })
        .collect();
    let steady: Vec<_> = currents
        .iter()
        .filter_map(|a| if let Draw::Current(i) = a.sink.draw { Some(a.drawn(std::iter::once(i))) } else { None })
        .collect();
    let base = rest.drawing(steady.clone());
    let idle: Vec<ExpSum> = powers.iter().map(|(a, _)| base.across(a.sink.a, a.sink.b).times(a.sign)).collect();
    let nothing = rest.uncharged();
    let unit = |of: &Active, by: &Active, power: usize| {
        let ampere = (0..=power).map(|j| if j == power { 1.0 } else { 0.0 });
        nothing.drawing(vec![by.drawn(ampere)]).across(of.sink.a, of.sink.b).times(of.sign)
    };
    let unit = powers
        .iter()
        .map(|(of, _)| powers.iter().map(|(by, _)| (0..POINTS).map(|j| unit(of, by, j)).collect()).collect())
        .collect();
    let answers = Answers { unit, idle };

    // The voltage falls at about this rate; a sink that can't be drawn on at all has collapsed.
    let Some(start) = instant(&answers, &powers, 0.0) else {
        return Ok(Next::Stopped(powers.iter().map(|(a, _)| a.index).collect()));
    };
    let low = |v: f64, a: &Active| v <= a.sink.stops_below;
    let at_once: Vec<usize> =
        powers.iter().zip(&start).filter(|((a, _), (v, _))| low(*v, a)).map(|((a, _), _)| a.index).collect();
    if !at_once.is_empty() {
        return Ok(Next::Stopped(at_once));
    }
    let mut length = first_length(&answers, &start);
    const MOST_TRIES: usize = 100;
    for _ in 0..MOST_TRIES {
        if let Some(coefficients) = collocate(&answers, &powers, &start, length) {
            let drawn = powers.iter().zip(&coefficients).map(|((a, _), c)| {
                // From powers of the share of the step to powers of time.
                a.drawn(c.iter().enumerate().map(|(j, c)| c / length.powi(j as i32)))
            });
            let response = rest.drawing(steady.iter().cloned().chain(drawn).collect());
            let miss = miss(&response, &coefficients, &powers, length);
            if miss <= TOLERANCE {
                return taken(response, active, &coefficients, length);
            }
            // The error goes with the length to the power of the points; what is no error of this kind halves.
            let wanted = 0.9 * (TOLERANCE / miss).powf(1.0 / POINTS as f64);
            length *= if wanted > 0.1 && wanted < 0.9 { wanted } else { 0.5 };
        } else {
            length *= 0.5;
        }
    }
    // The voltage collapses within no time at all: the power can't be drawn any more.
    Ok(Next::Stopped(powers.iter().map(|(a, _)| a.index).collect()))
}

/// Voltage and current of every power sink at a moment with nothing drawn before: `v (v - idle) = -P jump`.
fn instant(answers: &Answers, powers: &[(&Active, f64)], t: f64) -> Option<Vec<(f64, f64)>> {
    let mut volts: Vec<f64> = answers.idle.iter().map(|v| v.value(t)).collect();
    const MOST_ROUNDS: usize = 200;
    for _ in 0..MOST_ROUNDS {
        let before = volts.clone();
        for of in 0..powers.len() {
            let by = powers.iter().enumerate();
            let pulled: f64 = by.map(|(k, (_, watt))| answers.unit[of][k][0].value(t) * watt / volts[k]).sum();
            volts[of] = answers.idle[of].value(t) + pulled;
            if volts[of].is_nan() || volts[of] <= 0.0 {
                return None;
            }
        }
        let moved = volts.iter().zip(&before).map(|(x, y)| (x - y).abs() / y).fold(0.0, f64::max);
        if moved < 1e-13 {
            break;
        }
    }
    Some(volts.iter().zip(powers).map(|(v, (_, watt))| (*v, watt / v)).collect())
}

/// A share of the time in which the voltages fall to nothing at their first slope.
fn first_length(answers: &Answers, start: &[(f64, f64)]) -> f64 {
    let fall = |of: usize| {
        let by = start.iter().enumerate();
        let drawn: f64 = by.map(|(k, (_, ampere))| ampere * answers.unit[of][k][0].value_and_slope(0.0).1).sum();
        let slope = answers.idle[of].value_and_slope(0.0).1 + drawn;
        (start[of].0 / slope).abs()
    };
    let shortest = (0..start.len()).map(fall).fold(f64::INFINITY, f64::min);
    if shortest.is_finite() { 0.15 * shortest } else { 1.0 }
}

/// The polynomials of the currents, in powers of the share of the step, that draw the powers at the Gauss points.
fn collocate(answers: &Answers, powers: &[(&Active, f64)], start: &[(f64, f64)], length: f64) -> Option<Vec<Vec<f64>>> {
    let count = powers.len();
    // Voltage per coefficient at each Gauss point.
    let row = |of: usize, by: usize, place: f64| -> Vec<f64> {
        let scaled = |j: usize| answers.unit[of][by][j].value(place * length) / length.powi(j as i32);
        (0..POINTS).map(scaled).collect()
    };
    let mut coefficients: Vec<Vec<f64>> =
        start.iter().map(|(_, i)| (0..POINTS).map(|j| if j == 0 { *i } else { 0.0 }).collect()).collect();
    let rows: Vec<Vec<Vec<Vec<f64>>>> = (0..count)
        .map(|of| GAUSS.iter().map(|(place, _)| (0..count).map(|by| row(of, by, *place)).collect()).collect())
        .collect();
    let idle: Vec<Vec<f64>> =
        answers.idle.iter().map(|v| GAUSS.iter().map(|(place, _)| v.value(place * length)).collect()).collect();
    const MOST_ROUNDS: usize = 40;
    for _ in 0..MOST_ROUNDS {
        let mut jacobian = vec![vec![0.0; count * POINTS]; count * POINTS];
        let mut miss = vec![0.0; count * POINTS];
        let mut worst = 0.0f64;
        for of in 0..count {
            for (l, (place, _)) in GAUSS.iter().enumerate() {
                let basis: Vec<f64> = (0..POINTS).map(|j| place.powi(j as i32)).collect();
                let ampere: f64 = basis.iter().zip(&coefficients[of]).map(|(x, c)| x * c).sum();
                let pulled = rows[of][l].iter().zip(&coefficients);
                let volts =
                    idle[of][l] + pulled.map(|(r, c)| r.iter().zip(c).map(|(x, y)| x * y).sum::<f64>()).sum::<f64>();
                if volts.is_nan() || volts <= 0.0 {
                    return None;
                }
                let at = of * POINTS + l;
                miss[at] = powers[of].1 - volts * ampere;
                worst = worst.max((miss[at] / powers[of].1).abs());
                for by in 0..count {
                    for j in 0..POINTS {
                        jacobian[at][by * POINTS + j] = rows[of][l][by][j] * ampere;
                    }
                }
                for (j, x) in basis.iter().enumerate() {
                    jacobian[at][of * POINTS + j] += volts * x;
                }
            }
        }
        if worst < 1e-14 {
            return Some(coefficients);
        }
        let change = solve(jacobian, miss)?;
        let size: f64 = coefficients.iter().flatten().map(|c| c.abs()).fold(0.0, f64::max);
        let moved = change.iter().map(|c| c.abs()).fold(0.0, f64::max);
        for (of, c) in coefficients.iter_mut().enumerate() {
            c.iter_mut().zip(&change[of * POINTS..]).for_each(|(c, d)| *c += d);
        }
        if worst < 1e-12 || moved < 1e-15 * size {
            return Some(coefficients);
        }
    }
    None
}

/// Gaussian elimination with the greatest pivot of the column.
fn solve(mut a: Vec<Vec<f64>>, mut b: Vec<f64>) -> Option<Vec<f64>> {
    let n = b.len();
    for k in 0..n {
        let pivot = (k..n).max_by(|x, y| a[*x][k].abs().total_cmp(&a[*y][k].abs()))?;
        a.swap(k, pivot);
        b.swap(k, pivot);
        if a[k][k] == 0.0 {
            return None;
        }
        for i in k + 1..n {
            let factor = a[i][k] / a[k][k];
            let (above, below) = a.split_at_mut(i);
            below[0][k..].iter_mut().zip(&above[k][k..]).for_each(|(x, y)| *x -= factor * y);
            b[i] -= factor * b[k];
        }
    }
    for k in (0..n).rev() {
        let known: f64 = (k + 1..n).map(|j| a[k][j] * b[j]).sum();
        b[k] = (b[k] - known) / a[k][k];
    }
    Some(b)
}

/// The greatest relative error of a power between the Gauss points.
fn miss(response: &Response, coefficients: &[Vec<f64>], powers: &[(&Active, f64)], length: f64) -> f64 {
    let mut greatest = 0.0f64;
    for ((a, watt), c) in powers.iter().zip(coefficients) {
        let volts = response.across(a.sink.a, a.sink.b).times(a.sign);
        for share in LOOKED_AT {
            let ampere = c.iter().rev().fold(0.0, |sum, c| sum * share + c);
            let miss = (volts.value(share * length) * ampere / watt - 1.0).abs();
            if miss.is_nan() {
                return f64::INFINITY;
            }
            greatest = greatest.max(miss);
        }
    }
    greatest
}

/// The step, cut where a sink stops.
fn taken(response: Response, active: &[Active], coefficients: &[Vec<f64>], length: f64) -> Result<Next, CircuitError> {
    let mut end = length;
    let mut stopped = Vec::new();
    for a in active {
        let volts = response.across(a.sink.a, a.sink.b);
        if let Some(stop) = volts.first_inside(a.sink.stops_below, end)? {
            if stop < end {
                stopped.clear();
            }
            end = stop;
            stopped.push(a.index);
        }
    }
    // Where nothing changes any more, a source feeds the sinks for ever.
    let fed = !response.network().sources.is_empty();
    let still = |c: &Vec<f64>| c[1..].iter().all(|x| x.abs() < 1e-13 * c[0].abs());
    let slowest = response.modes().time_constants().first().copied().unwrap_or(0.0);
    if fed && stopped.is_empty() && coefficients.iter().all(still) && length > slowest {
        return Ok(Next::Lasts(response));
    }
    Ok(Next::Until { length: end, response, stopped })
}
