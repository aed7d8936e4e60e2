//! The temperature of a resistor's body over time, first-order.

use crate::circuit::ExpSum;

/// Thermal data of one element: K/W and s.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Thermal {
    pub kelvin_per_watt: f64,
    pub time_constant: f64,
}

impl Thermal {
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
    fn a_power_that_falls_with_the_bodys_own_time_constant_peaks_at_one_over_e() {
        // theta' = P0 exp(-t/tau) / C - theta / tau has theta = P0 t exp(-t/tau) / C, greatest at t = tau.
        let thermal = Thermal { kelvin_per_watt: 2.0, time_constant: 50.0 };
        let rise = thermal.rise(0.0, &ExpSum::new(0.0, [(30.0, 1.0 / 50.0)]));
        let (greatest, _) = rise.greatest_magnitude().expect("closes");
        approx::assert_relative_eq!(greatest, 30.0 * 2.0 * (-1f64).exp(), max_relative = 1e-6);
    }
}
