//! The series of IEC 60063 against a registry library's list, pinned as data with its version.

use ebbvolt::data::Series;
use ebbvolt::quantity::{Quantity, Resistance};

/// Python package `eseries` 1.2.1 from PyPI: every value of every series, in hundredths.
const PINNED: &str = include_str!("preferred_values/eseries.json");

fn pinned(series: Series) -> Vec<u32> {
    let list: serde_json::Value = serde_json::from_str(PINNED).expect("JSON");
    assert_eq!(list["version"], "1.2.1");
    let values = list["series"][series.name()].as_array().expect("a list").clone();
    values.iter().map(|v| u32::try_from(v.as_u64().expect("a number")).expect("small")).collect()
}

#[test]
fn every_value_of_every_series_is_that_of_the_registry_library() {
    for (series, count) in Series::ALL.into_iter().zip([6, 12, 24, 48, 96, 192]) {
        assert_eq!(series.hundredths(), pinned(series), "{}", series.name());
        assert_eq!(series.hundredths().len(), count);
    }
}

#[test]
fn values_between_two_ends_rise_over_the_decades_and_have_their_decimal_digits() {
    let ohm = |x: f64| Resistance::from_si(x);
    for series in Series::ALL {
        let found: Vec<f64> = series.between(ohm(4.7), ohm(68e3)).iter().map(|r| r.si()).collect();
        assert!(found.windows(2).all(|pair| pair[0] < pair[1]));
        let digits: f64 = "4.7".parse().expect("a number");
        if series != Series::E48 && series != Series::E96 && series != Series::E192 {
            assert_eq!(found[0].to_bits(), digits.to_bits());
        }
        let decade = found.iter().filter(|x| **x >= 100.0 && **x < 1000.0).count();
        assert_eq!(decade, pinned(series).len());
    }
    assert!(Series::E24.between(ohm(10.1e3), ohm(10.9e3)).is_empty());
    assert!(Series::E24.between(ohm(2.0), ohm(1.0)).is_empty());
}
