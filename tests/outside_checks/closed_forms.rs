//! The engine against closed forms that are worked out here and nowhere in it.

use crate::banks::{head, planned, si};
use ebbvolt::plan::Plan;
use ebbvolt::quantity::Quantity;

/// One resistance and one capacitance: t = R C ln(V0 / V), tolerances at their high ends. From 1 mohm and 1 nF to
/// 1 Tohm and 100 F the engine has to agree to 1e-12, and must not be early by more than roundings.
#[test]
fn one_capacitance_and_one_resistance_follow_tau_times_the_logarithm_over_the_whole_range() {
    let values = |exponents: std::ops::RangeInclusive<i32>| {
        exponents.flat_map(|e| ["1", "4.7"].map(|digits| format!("{digits}e{e}")))
    };
    let number = |text: &str| text.parse::<f64>().expect("a number");
    let (mut checked, mut farthest) = (0, 0f64);
    for r in values(-3..=11).chain(["1e12".to_string()]) {
        for c in values(-9..=1).chain(["1e2".to_string()]) {
            let plan = planned(&format!(
                "{}capacitors: [{{id: C1, value: {c} F, tolerance: 20 %}}]\n\
                 resistors: [{{id: R1, role: bleeder, value: {r} ohm, tolerance: 5 %}}]\n",
                head("{nominal: 565 V, highest: 750 V}", "50 V")
            ));
            let tau = number(&r) * number(&c);
            let expected = [tau * (565.0f64 / 50.0).ln(), 1.05 * 1.2 * tau * (750.0f64 / 50.0).ln()];
            let found = [&plan.waits[0].nominal, &plan.waits[0].slowest].map(|t| t.expect("it ends").si());
            for (found, expected) in found.iter().zip(expected) {
                let off = found / expected - 1.0;
                assert!(off.abs() <= 1e-12, "{r} ohm, {c} F: {found} s for {expected} s");
                assert!(off >= -5e-15, "{r} ohm, {c} F: early, {found} s for {expected} s");
                farthest = farthest.max(off.abs());
            }
            let time_constant = plan.time_constants[0].si();
            assert!((time_constant / tau - 1.0).abs() < 1e-14, "{r} ohm, {c} F: {time_constant}");
            checked += 1;
        }
    }
    assert_eq!(checked, 31 * 23);
    assert!(farthest > 0.0, "a difference of nothing at all would mean that nothing was compared");
}

/// C1 with R1 and C2 with R2, joined by RS.
struct TwoSections {
    c: [f64; 2],
    r: [f64; 2],
    rs: f64,
}

impl TwoSections {
    /// Rates from the characteristic polynomial, the slower first. With v1' = (-(g1 + gs) v1 + gs v2) / C1 and
    /// likewise v2: s^2 - T s + D = 0 for the rates s, T = (g1 + gs)/C1 + (g2 + gs)/C2 and
    /// D = (g1 g2 + g1 gs + g2 gs) / (C1 C2). The slower root is 2 D / (T + sqrt(T^2 - 4 D)), where nothing cancels.
    fn rates(&self) -> [f64; 2] {
        let (g1, g2, gs) = (1.0 / self.r[0], 1.0 / self.r[1], 1.0 / self.rs);
        let t = (g1 + gs) / self.c[0] + (g2 + gs) / self.c[1];
        let d = (g1 * g2 + g1 * gs + g2 * gs) / (self.c[0] * self.c[1]);
        // T^2 - 4 D as a sum of squares: the difference of the diagonal and the product of the others.
        let apart = (g1 + gs) / self.c[0] - (g2 + gs) / self.c[1];
        let root = (apart * apart + 4.0 * gs * gs / (self.c[0] * self.c[1])).sqrt();
        [2.0 * d / (t + root), 0.5 * (t + root)]
    }

    /// The voltages of both sections after `t`, charged to `volts` at the first for long. With v(0) and v'(0):
    /// v = ((s2 v0 + v0') exp(-s1 t) - (s1 v0 + v0') exp(-s2 t)) / (s2 - s1).
    fn voltages(&self, volts: f64, t: f64) -> [f64; 2] {
        let [s1, s2] = self.rates();
        let second = volts * self.r[1] / (self.rs + self.r[1]);
        // Before isolation the second section carries no current into its capacitor.
        let slopes = [-(volts / self.r[0] + (volts - second) / self.rs) / self.c[0], 0.0];
        let decay = (-(s2 - s1) * t).exp();
        [0, 1].map(|i| {
            let v0 = [volts, second][i];
            (-s1 * t).exp() * ((s2 * v0 + slopes[i]) - (s1 * v0 + slopes[i]) * decay) / (s2 - s1)
        })
    }

    /// When section `i` falls to `level`, by halving: both fall all the time.
    fn wait(&self, i: usize, volts: f64, level: f64) -> f64 {
        let (mut low, mut high) = (0.0, (volts / level).ln() * 1.1 / self.rates()[0]);
        while high - low > 1e-15 * high {
            let middle = 0.5 * (low + high);
            if middle <= low || middle >= high {
                break;
            }
            if self.voltages(volts, middle)[i] > level { low = middle } else { high = middle }
        }
        high
    }

    fn plan(&self, volts: f64, level: f64) -> Plan {
        let [c, r] = [self.c.map(|c| si(c, "F")), self.r.map(|r| si(r, "ohm"))];
        planned(&format!(
            "{}capacitors:\n  - {{id: C1, value: {}, across: [P, N]}}\n  - {{id: C2, value: {}, across: [Q, N]}}\n\
             resistors:\n  - {{id: R1, role: bleeder, value: {}, across: [P, N]}}\n  \
             - {{id: R2, role: bleeder, value: {}, across: [Q, N]}}\n  \
             - {{id: RS, role: series, value: {}, across: [P, Q]}}\n",
            head(&si(volts, "V"), &si(level, "V")),
            c[0],
            c[1],
            r[0],
            r[1],
            si(self.rs, "ohm")
        ))
    }
}

#[test]
fn two_sections_follow_the_roots_of_their_quadratic() {
    let cases = [
        TwoSections { c: [47e-6, 47e-6], r: [39e3, 39e3], rs: 1e3 },
        TwoSections { c: [10e-6, 330e-6], r: [1e6, 4.7e3], rs: 22e3 },
        TwoSections { c: [3300e-6, 1e-6], r: [22e3, 10e6], rs: 0.1 },
        // The slow rate is 1e-11 of the fast one.
        TwoSections { c: [1e-3, 1e-3], r: [1e9, 1e12], rs: 1e-3 },
    ];
    for case in cases {
        let plan = case.plan(565.0, 50.0);
        let found: Vec<f64> = plan.time_constants.iter().map(|t| t.si()).collect();
        assert_eq!(found.len(), 2);
        for (found, rate) in found.iter().zip(case.rates()) {
            assert!((found * rate - 1.0).abs() < 1e-12, "{found} s for {} s", 1.0 / rate);
        }
        for (i, wait) in plan.waits.iter().enumerate() {
            let expected = case.wait(i, 565.0, 50.0);
            let found = wait.nominal.expect("it ends").si();
            assert!((found / expected - 1.0).abs() < 1e-11, "{:?}: {found} s for {expected} s", wait.across);
        }
    }
}

/// Two capacitors in series, bled at the ends, charged from empty: the same charge is on both, so the second has
/// V0 C1 / (C1 + C2) at first and falls with R C1 C2 / (C1 + C2). More C2 slows it and lowers where it starts: the
/// longest wait is inside the tolerance of C2.
#[test]
fn the_longest_wait_of_a_string_bled_at_its_ends_is_inside_the_tolerances() {
    let wait = |c1: f64, c2: f64| 1.1e5 * c1 * c2 / (c1 + c2) * (900.0 / 50.0 * c1 / (c1 + c2)).ln();
    let plan = planned(&format!(
        "{}capacitors:\n  - {{id: C1, value: 10 uF, tolerance: 10 %, across: [P, M]}}\n  \
         - {{id: C2, value: 22 uF, tolerance: 10 %, across: [M, N]}}\n\
         resistors: [{{id: R1, role: bleeder, value: 100 kohm, tolerance: 10 %}}]\n",
        head("{nominal: 850 V, highest: 900 V}", "50 V")
    ));
    let found = plan.waits.iter().find(|w| w.across == ["M", "N"]).expect("C2's pair");
    let slowest = found.slowest.expect("it ends").si();

    let (c1, c2) = ([9e-6, 11e-6], [19.8e-6, 24.2e-6]);
    let corner = c1.iter().flat_map(|x| c2.iter().map(|y| wait(*x, *y))).fold(0.0, f64::max);
    // A scan of the whole box, 2001 by 2001, then of the neighbourhood of its best point, as fine again.
    let scan = |c1: [f64; 2], c2: [f64; 2]| {
        const POINTS: u32 = 2000;
        let at = |range: [f64; 2], k: u32| range[0] + (range[1] - range[0]) * f64::from(k) / f64::from(POINTS);
        let points = (0..=POINTS).flat_map(|i| (0..=POINTS).map(move |j| (i, j)));
        let tried = points.map(|(i, j)| (at(c1, i), at(c2, j))).map(|(x, y)| (wait(x, y), x, y));
        tried.max_by(|x, y| x.0.total_cmp(&y.0)).expect("points")
    };
    let coarse = scan(c1, c2);
    let near = |x: f64, range: [f64; 2]| {
        let step = (range[1] - range[0]) / 1000.0;
        [(x - step).max(range[0]), (x + step).min(range[1])]
    };
    let (greatest, at_c1, at_c2) = scan(near(coarse.1, c1), near(coarse.2, c2));

    assert!((at_c1 / 11e-6 - 1.0).abs() < 1e-12 && at_c2 > 20e-6 && at_c2 < 24e-6, "{at_c1} F, {at_c2} F");
    assert!(slowest >= greatest * (1.0 - 1e-12), "{slowest} s is shorter than {greatest} s");
    assert!(slowest <= greatest * (1.0 + 1e-11), "{slowest} s is longer than {greatest} s");
    // 1.4e-4 above the best corner.
    let above = slowest / corner - 1.0;
    assert!((above - 1.4e-4).abs() < 0.05e-4, "{above}");
    let factor = found.worst_point.iter().find(|w| w.id == "C2").expect("C2 is loose").factor;
    assert!((factor * 22e-6 / at_c2 - 1.0).abs() < 1e-4, "{factor}");
}
