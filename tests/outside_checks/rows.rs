//! A stated figure and what the tool finds for it, and the three ways in which one is held against the other.

/// One figure of a source.
pub struct Row {
    /// Who states it.
    pub source: &'static str,
    /// What it is.
    pub figure: &'static str,
    /// As stated, in SI base units with the digits of the source: `24.0e-3` is 24.0 ms.
    pub stated: &'static str,
    /// What the tool finds, in SI base units.
    pub found: f64,
}

/// The stated value and half a unit of its last digit.
pub fn stated(text: &str) -> (f64, f64) {
    let value: f64 = text.parse().expect("a number");
    let (mantissa, exponent) = text.split_once(['e', 'E']).unwrap_or((text, "0"));
    let decimals = mantissa.split_once('.').map_or(0, |(_, fraction)| fraction.len());
    let last = exponent.parse::<i32>().expect("an exponent") - i32::try_from(decimals).expect("few digits");
    (value, 0.5 * 10f64.powi(last))
}

fn agrees(row: &Row) -> bool {
    let (value, half) = stated(row.stated);
    (row.found - value).abs() <= half
}

fn told(row: &Row) -> String {
    format!("{}, {}: {} is stated, {} was found", row.source, row.figure, row.stated, row.found)
}

/// Every row holds to half a unit of its last stated digit; all that do not are told together.
pub fn confirm(rows: &[Row]) {
    let missed: Vec<String> = rows.iter().filter(|row| !agrees(row)).map(told).collect();
    assert!(!rows.is_empty() && missed.is_empty(), "{}", missed.join("\n"));
}

/// The source is wrong in every one of these rows: the tool must not find its figure.
pub fn refute(rows: &[Row]) {
    let found: Vec<String> = rows.iter().filter(|row| agrees(row)).map(told).collect();
    assert!(!rows.is_empty() && found.is_empty(), "{}", found.join("\n"));
}

/// A source states what has to be put IN for `target` to come out: half a unit below and above it, `found` lies on
/// either side of the target.
pub fn confirm_input(source: &str, figure: &str, input: &str, target: f64, found: impl Fn(f64) -> f64) {
    let (value, half) = stated(input);
    let ends = [found(value - half), found(value + half)];
    let between = ends[0].min(ends[1]) <= target && target <= ends[0].max(ends[1]);
    assert!(between, "{source}, {figure}: {input} is stated for {target}; around it {ends:?} was found");
}

#[test]
fn half_a_unit_of_the_last_digit_is_read_from_the_figure() {
    for (text, half) in [("24.0e-3", 0.05e-3), ("498", 0.5), ("1.3e-4", 0.05e-4), ("0.255", 0.0005), ("8e3", 500.0)] {
        assert!((stated(text).1 / half - 1.0).abs() < 1e-12, "{text}");
    }
}

#[test]
fn a_figure_off_by_more_than_half_a_unit_is_not_confirmed() {
    let row = |found| Row { source: "none", figure: "none", stated: "498", found };
    assert!(agrees(&row(498.4)) && !agrees(&row(498.6)) && !agrees(&row(497.4)) && !agrees(&row(f64::NAN)));
}
