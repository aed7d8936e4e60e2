//! The temperature of a resistor's body over time, first-order.

use crate::circuit::{CircuitError, Course, ExpSum};

/// Thermal data of one element: K/W and s.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Thermal {
    pub kelvin_per_watt: f64,
    pub time_constant: f64,
}

/// How a body got through a time: its greatest rise in K over the air, and the one at the end.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Heated {
    pub greatest: f64,
    pub end: f64,
}

impl Thermal {
    /// The body from `start` K over the air, with `volts` across `ohms` for `until` seconds (infinite for ever).
    pub fn heated(&self, start: f64, volts: &Course, ohms: f64, until: f64) -> Result<Heated, CircuitError> {
        let mut body = Heated { greatest: start, end: start };
        if ohms.is_infinite() && until.is_infinite() {
            return Ok(body);
        }
        let mut left = until;
        for (length, piece) in volts.pieces() {
            let time = length.min(left);
            body = self.through(body, piece, ohms, time)?;
            left -= time;
        }
        if left > 0.0 {
            body = self.through(body, volts.last(), ohms, left)?;
        }
        Ok(body)
    }

    /// The greatest rise during the last of several equal runs: `volts` across `ohms` for `time` seconds each, one
    /// starting `every` seconds after the other, the first from the air's temperature, nothing in between.
    ///
    /// The body is linear, so what earlier runs left adds up: with `left` the rise that one run leaves at the start of
    /// the next, the last of n starts from left (1 + a + ... + a^(n-2)), a = exp(-every / time constant).
    pub fn repeated(&self, volts: &Course, ohms: f64, time: f64, runs: u32, every: f64) -> Result<f64, CircuitError> {
        let first = self.heated(0.0, volts, ohms, time)?;
        if runs < 2 {
            return Ok(first.greatest);
        }
        let left = first.end * (-(every - time) / self.time_constant).exp();
        let per_run = every / self.time_constant;
        let start = left * (-per_run * f64::from(runs - 1)).exp_m1() / (-per_run).exp_m1();
        Ok(self.heated(start, volts, ohms, time)?.greatest)
    }

    fn through(&self, before: Heated, volts: &ExpSum, ohms: f64, time: f64) -> Result<Heated, CircuitError> {
        if volts.is_driven() {
            return Ok(self.while_a_sink_draws(before, volts, ohms, time));
        }
        let power = if ohms.is_finite() { volts.squared().times(ohms.recip()) } else { ExpSum::default() };
        let course = self.rise(before.end, &power);
        let greatest = course.greatest_magnitude_within(before.greatest, time)?.0;
        let end = if time.is_finite() { course.value(time) } else { course.constant() };
        Ok(Heated { greatest, end })
    }

    /// The square of such a voltage is no sum of exponentials: the heat is integrated numerically, from mark to mark,
    /// and the greatest rise is looked for between the marks around the highest one. (The power falls while a sink
    /// draws, so the rise has one maximum.)
    fn while_a_sink_draws(&self, before: Heated, volts: &ExpSum, ohms: f64, time: f64) -> Heated {
        const MARKS: usize = 64;
        let own = self.time_constant.recip();
        let gain = self.kelvin_per_watt * own / ohms;
        let after = |start: f64, volts: &ExpSum, t: f64| {
            start * (-own * t).exp() + gain * volts.lagging_integral_of_square(own, t)
        };
        let step = time / MARKS as f64;
        let mut marks = vec![before.end];
        for k in 0..MARKS {
            let piece = volts.after(step * k as f64);
            marks.push(after(marks[k], &piece, step));
        }
        let end = marks[MARKS];
        let top = (0..=MARKS).max_by(|x, y| marks[*x].total_cmp(&marks[*y])).unwrap_or(MARKS);
        let mut greatest = before.greatest.max(marks[top]);
        for left in [top.saturating_sub(1), top.min(MARKS - 1)] {
            let piece = volts.after(step * left as f64);
            let (mut low, mut high) = (0.0, step);
            for _ in 0..40 {
                let (x, y) = (low + (high - low) / 3.0, high - (high - low) / 3.0);
                let (at_x, at_y) = (after(marks[left], &piece, x), after(marks[left], &piece, y));
                greatest = greatest.max(at_x).max(at_y);
                if at_x < at_y { low = x } else { high = y }
            }
        }
        Heated { greatest, end }
    }

    /// Temperature rise in K over the air, from `start` K at the beginning, under `power` in W:
    /// theta' = (P(t) - theta / R_th) / C_th in closed form, C_th = time constant / R_th.
    pub fn rise(&self, start: f64, power: &ExpSum) -> ExpSum {
        let own = self.time_constant.recip();
        let gain = self.kelvin_per_watt * own;
        let steady = self.kelvin_per_watt * power.constant();
        let mut own_amplitude = start - steady;
        let mut terms = Vec::with_capacity(power.terms().len() + 1);
        for (amplitude, rate) in power.terms() {
            // At equal rates the limit is t exp(-t/tau); a rate moved by 1e-7 of itself stands for it, which moves
            // the temperature by less than 1e-7 of the rise.
            let gap = own - rate;
            let rate = if gap.abs() < 1e-7 * own { own * (1.0 - 1e-7) } else { *rate };
            let share = gain * amplitude / (own - rate);
            terms.push((share, rate));
            own_amplitude -= share;
        }
        terms.push((own_amplitude, own));
        ExpSum::new(steady, terms)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_constant_power_heats_towards_power_times_thermal_resistance() {
        let thermal = Thermal { kelvin_per_watt: 4.0, time_constant: 90.0 };
        let rise = thermal.rise(0.0, &ExpSum::new(10.0, []));
        approx::assert_relative_eq!(rise.value(90.0), 40.0 * (1.0 - (-1f64).exp()), max_relative = 1e-14);
    }

    #[test]
    fn repeated_runs_heat_as_a_body_that_is_followed_from_run_to_run() {
        let thermal = Thermal { kelvin_per_watt: 3.0, time_constant: 40.0 };
        // 100 V falling with 0.5 s, on 20 ohm, for 2 s; seven runs, 15 s apart.
        let volts = Course::from(ExpSum::new(0.0, [(100.0, 2.0)]));
        let (mut start, mut greatest) = (0.0, 0.0f64);
        for _ in 0..7 {
            let run = thermal.heated(start, &volts, 20.0, 2.0).expect("closes");
            greatest = greatest.max(run.greatest);
            start = run.end * (-13.0f64 / 40.0).exp();
        }
        let found = thermal.repeated(&volts, 20.0, 2.0, 7, 15.0).expect("closes");
        approx::assert_relative_eq!(found, greatest, max_relative = 1e-12);
        // After very many the start is that of the whole series: left / (1 - a).
        let first = thermal.heated(0.0, &volts, 20.0, 2.0).expect("closes");
        let settled = first.end * (-13.0f64 / 40.0).exp() / (1.0 - (-15.0f64 / 40.0).exp());
        let last = thermal.heated(settled, &volts, 20.0, 2.0).expect("closes").greatest;
        let found = thermal.repeated(&volts, 20.0, 2.0, 1_000_000, 15.0).expect("closes");
        approx::assert_relative_eq!(found, last, max_relative = 1e-12);
    }

    #[test]
    fn a_power_that_falls_with_the_bodys_own_time_constant_peaks_at_one_over_e() {
        // theta' = P0 exp(-t/tau) / C - theta / tau has theta = P0 t exp(-t/tau) / C, greatest at t = tau.
        let thermal = Thermal { kelvin_per_watt: 2.0, time_constant: 50.0 };
        let rise = thermal.rise(0.0, &ExpSum::new(0.0, [(30.0, 1.0 / 50.0)]));
        let (greatest, _) = rise.greatest_magnitude().expect("closes");
        approx::assert_relative_eq!(greatest, 30.0 * 2.0 * (-1f64).exp(), max_relative = 1e-6);
    }
}
