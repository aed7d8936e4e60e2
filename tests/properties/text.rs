//! Quantities as text: what is shown is never on the wrong side of what was computed, and what is written is read again.

use ebbvolt::quantity::{
    Capacitance, Charge, Current, Direction, Energy, Frequency, Power, Quantity, Ratio, Resistance, Temperature, Time,
    Voltage, duration, exact, keepable, parse, show, show_digits,
};
use proptest::prelude::*;

/// Figures that differ in the thirteenth digit are one: that is below what the engine promises.
const SAME: f64 = 1e-12;

/// A shown figure as a number of SI base units, by a reader of this test's own.
fn read(text: &str, unit: &str) -> f64 {
    let (number, suffix) = text.split_once(' ').expect("a blank before the unit");
    let prefix = suffix.strip_suffix(unit).expect("the unit at the end");
    let exponent = match prefix {
        "p" => -12,
        "n" => -9,
        "u" => -6,
        "m" => -3,
        "" => 0,
        "k" => 3,
        "M" => 6,
        "G" => 9,
        "T" => 12,
        other => panic!("`{other}` in `{text}` is no prefix"),
    };
    format!("{number}e{exponent}").parse().expect("a number")
}

/// A time as `duration` shows it, in second.
fn read_duration(text: &str) -> f64 {
    let words: Vec<&str> = text.split(' ').collect();
    let unit = |word: &str| match word {
        "d" => 86_400.0,
        "h" => 3600.0,
        "min" => 60.0,
        "s" => 1.0,
        "ms" => 1e-3,
        "us" => 1e-6,
        "ns" => 1e-9,
        other => panic!("`{other}` in `{text}` is no unit of time"),
    };
    words.chunks(2).map(|pair| pair[0].parse::<f64>().expect("a number") * unit(pair[1])).sum()
}

/// A value of any size, `10^low` to `10^high`.
fn size(low: f64, high: f64) -> impl Strategy<Value = f64> {
    (low..high).prop_map(|decade| 10f64.powf(decade))
}

fn bounded<Q: Quantity>(value: f64, unit: &str, digits: u32) -> Result<(), TestCaseError> {
    let quantity = Q::from_si(value);
    for (up, down) in [
        (show(quantity, Direction::Up), show(quantity, Direction::Down)),
        (show_digits(quantity, digits, Direction::Up), show_digits(quantity, digits, Direction::Down)),
    ] {
        prop_assert!(read(&up, unit) >= value * (1.0 - SAME), "{value} is shown as {up}, rounded up");
        prop_assert!(read(&down, unit) <= value * (1.0 + SAME), "{value} is shown as {down}, rounded down");
    }
    Ok(())
}

/// Three digits are at most one part in a hundred off, where the unit has a prefix for them.
fn close<Q: Quantity>(value: f64, unit: &str) -> Result<(), TestCaseError> {
    for direction in [Direction::Up, Direction::Down] {
        let shown = show(Q::from_si(value), direction);
        prop_assert!((read(&shown, unit) / value - 1.0).abs() <= 0.01 * (1.0 + SAME), "{value} is shown as {shown}");
    }
    Ok(())
}

/// What is written for a bank file reads back as the same double.
fn reads_back<Q: Quantity>(value: f64) -> Result<(), TestCaseError> {
    let text = exact(Q::from_si(value));
    let read = parse::<Q>(&text).map(|reading| reading.value.si());
    prop_assert_eq!(read.as_ref().map(|x| x.to_bits()).ok(), Some(value.to_bits()), "{} is {:?}", text, read);
    Ok(())
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 512, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn a_shown_figure_is_never_on_the_wrong_side_of_the_computed_one(value in size(-14.0, 14.0), digits in 1u32..13) {
        bounded::<Voltage>(value, "V", digits)?;
        bounded::<Current>(value, "A", digits)?;
        bounded::<Energy>(value, "J", digits)?;
        bounded::<Power>(value, "W", digits)?;
        bounded::<Charge>(value, "C", digits)?;
        bounded::<Capacitance>(value, "F", digits)?;
        bounded::<Resistance>(value, "ohm", digits)?;
        bounded::<Time>(value, "s", digits)?;
    }

    #[test]
    fn a_shown_figure_is_close_to_the_computed_one(value in size(-3.0, 6.0)) {
        close::<Voltage>(value, "V")?;
        close::<Current>(value, "A")?;
        close::<Energy>(value, "J")?;
        close::<Power>(value, "W")?;
        close::<Resistance>(value, "ohm")?;
    }

    #[test]
    fn temperatures_and_shares_are_rounded_to_the_side_that_was_asked_for(celsius in -200f64..2000.0, share in 1e-4f64..3.0) {
        let degrees = |direction| {
            let text = show(Temperature::from_si(celsius + 273.15), direction);
            text.strip_suffix(" °C").expect("a temperature").parse::<f64>().expect("a number")
        };
        let percent = |direction| {
            let text = show(Ratio::from_si(share), direction);
            text.strip_suffix(" %").expect("a share").parse::<f64>().expect("a number") / 100.0
        };
        prop_assert!(degrees(Direction::Up) >= celsius - 1e-9 && degrees(Direction::Down) <= celsius + 1e-9);
        prop_assert!(degrees(Direction::Up) - degrees(Direction::Down) <= 1.0);
        prop_assert!(percent(Direction::Up) >= share * (1.0 - SAME) && percent(Direction::Down) <= share * (1.0 + SAME));
    }

    #[test]
    fn a_time_as_people_say_it_is_on_the_side_that_was_asked_for(seconds in size(-8.0, 9.0)) {
        let text = |direction| duration(Time::from_si(seconds), direction);
        let (up, down) = (read_duration(&text(Direction::Up)), read_duration(&text(Direction::Down)));
        prop_assert!(up >= seconds * (1.0 - SAME), "{seconds} s is shown as {}", text(Direction::Up));
        prop_assert!(down <= seconds * (1.0 + SAME), "{seconds} s is shown as {}", text(Direction::Down));
        prop_assert!(up - down <= 0.03 * seconds + 1e-10, "{down} s to {up} s");
    }

    #[test]
    fn a_time_to_keep_is_never_shorter_and_less_than_one_step_longer(seconds in size(-3.0, 9.0)) {
        let kept = keepable(Time::from_si(seconds)).si();
        // Whole seconds under 2 min, 10 s under 20 min, else 1 min.
        let step = if seconds < 120.0 { 1.0 } else if seconds < 1200.0 { 10.0 } else { 60.0 };
        prop_assert!(kept >= seconds * (1.0 - SAME) && kept < seconds + step, "{seconds} s is kept as {kept} s");
        prop_assert!((kept / step).fract().abs() < 1e-9, "{kept} s is no multiple of {step} s");
    }

    #[test]
    fn what_is_written_for_a_bank_file_reads_back_as_the_same_value(share in 0f64..1.0) {
        // Every size that the reader accepts.
        let between = |low: f64, high: f64| 10f64.powf(low + share * (high - low));
        reads_back::<Capacitance>(between(-14.9, 5.9))?;
        reads_back::<Resistance>(between(-8.9, 17.9))?;
        reads_back::<Voltage>(between(-9.0, 8.9))?;
        reads_back::<Current>(between(-12.0, 11.9))?;
        reads_back::<Frequency>(between(-5.9, 8.9))?;
        reads_back::<Time>(between(-9.0, 11.9))?;
    }

    #[test]
    fn energies_powers_and_charges_of_any_size_read_back_as_well(share in 0f64..1.0) {
        let between = |low: f64, high: f64| 10f64.powf(low + share * (high - low));
        reads_back::<Energy>(between(-9.0, 14.9))?;
        reads_back::<Power>(between(-9.0, 14.9))?;
        reads_back::<Charge>(between(-12.0, 11.9))?;
    }

    /// Shares and temperatures go through a factor or an offset: nine decimals are kept.
    #[test]
    fn shares_and_temperatures_read_back_to_nine_decimals(share in 0f64..3.0, celsius in -273f64..9000.0) {
        let ratio = parse::<Ratio>(&exact(Ratio::from_si(share))).map(|r| r.value.si());
        prop_assert!(ratio.as_ref().is_ok_and(|x| (x - share).abs() <= 1e-11), "{ratio:?} for {share}");
        let kelvin = parse::<Temperature>(&exact(Temperature::from_si(celsius + 273.15))).map(|r| r.value.si());
        prop_assert!(kelvin.as_ref().is_ok_and(|x| (x - celsius - 273.15).abs() <= 1e-9), "{kelvin:?} for {celsius}");
    }

    #[test]
    fn no_text_makes_the_reader_panic_and_what_it_reads_is_finite(text in "\\PC{0,12}", number in any::<f64>(), unit in "[a-zA-Z°% ]{0,5}") {
        for text in [text.clone(), format!("{number}{unit}"), format!("{number:e} {unit}")] {
            for value in [
                parse::<Voltage>(&text).map(|r| r.value.si()),
                parse::<Resistance>(&text).map(|r| r.value.si()),
                parse::<Capacitance>(&text).map(|r| r.value.si()),
                parse::<Time>(&text).map(|r| r.value.si()),
                parse::<Ratio>(&text).map(|r| r.value.si()),
            ]
            .into_iter()
            .flatten()
            {
                prop_assert!(value.is_finite() && value >= 0.0, "{text}: {value}");
            }
        }
    }
}
