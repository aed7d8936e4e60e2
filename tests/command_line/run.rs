//! Runs the program that cargo built, and banks (invented) to run it on.

use std::io::Write;
use std::path::PathBuf;
use std::process::{Command, Stdio};
use std::sync::atomic::{AtomicU32, Ordering};

/// What one run left behind.
pub struct Run {
    pub status: i32,
    pub out: String,
    pub err: String,
}

impl Run {
    /// Whether standard error says this, wherever its lines break: where they do depends on how long a path is.
    pub fn tells(&self, part: &str) -> bool {
        let solid = |text: &str| text.split_whitespace().collect::<String>();
        solid(&self.err).contains(&solid(part))
    }
}

/// The program with these words, its environment without anything that changes colours.
pub fn program(words: &[&str]) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_ebbvolt"));
    command.args(words).env_remove("NO_COLOR").env_remove("COLUMNS").current_dir(env!("CARGO_TARGET_TMPDIR"));
    command
}

/// Runs it with nothing on standard input.
pub fn run(words: &[&str]) -> Run {
    run_with(words, b"")
}

/// Runs it with these bytes on standard input.
pub fn run_with(words: &[&str], stdin: &[u8]) -> Run {
    let mut command = program(words);
    command.stdin(Stdio::piped()).stdout(Stdio::piped()).stderr(Stdio::piped());
    let mut child = command.spawn().expect("the program starts");
    let mut pipe = child.stdin.take().expect("standard input is a pipe");
    // A program that refuses its input need not read it all.
    let bytes = stdin.to_vec();
    let writer = std::thread::spawn(move || {
        let _ = pipe.write_all(&bytes);
    });
    let output = child.wait_with_output().expect("the program ends");
    writer.join().expect("the writer ends");
    let text = |bytes: Vec<u8>| String::from_utf8(bytes).expect("output is UTF-8");
    Run {
        status: output.status.code().expect("the program ends by itself"),
        out: text(output.stdout),
        err: text(output.stderr),
    }
}

/// A name for a file that no other test uses; nothing is there yet.
pub fn unused_file() -> PathBuf {
    static NEXT: AtomicU32 = AtomicU32::new(0);
    let number = NEXT.fetch_add(1, Ordering::Relaxed);
    let path = PathBuf::from(env!("CARGO_TARGET_TMPDIR")).join(format!("cli-{}-{number}.yaml", std::process::id()));
    let _ = std::fs::remove_file(&path);
    path
}

/// The example banks of the data folder, by file name.
pub fn demo_banks() -> Vec<PathBuf> {
    let folder = concat!(env!("CARGO_MANIFEST_DIR"), "/data/banks");
    let entries = std::fs::read_dir(folder).expect("the data folder is there").map(|e| e.expect("an entry").path());
    let mut banks: Vec<PathBuf> = entries.filter(|path| path.extension().is_some_and(|e| e == "yaml")).collect();
    banks.sort();
    banks
}

/// One capacitance and one bleeder, everything given, everything met.
pub const MET: &str = "\
ebbvolt: 1
tag: PU-09
ambient: 40 °C
touch_voltage: 50 V
charged_to: {nominal: 565 V, highest: 750 V}
capacitors:
  - {id: C1, value: 3300 uF, tolerance: 20 %, across: [P, N], rated: 800 V}
resistors:
  - id: R1
    role: bleeder
    value: 22 kohm
    tolerance: 5 %
    across: [P, N]
    rating: {power: 50 W, full_to: 70 °C, zero_at: 155 °C, voltage: 1 kV}
limits:
  - {id: site-rule, voltage: 50 V, within: 5 min}
";

/// `MET` with one text replaced by another.
pub fn met_but(old: &str, new: &str) -> String {
    assert!(MET.contains(old), "{old}");
    MET.replace(old, new)
}

/// A bank of three phases (invented). With 268 kohm it is just in time from the crest, and late from what poles leave.
pub const THREE_PHASES: &str = "\
ebbvolt: 1
tag: PF-02
ambient: 40 °C
touch_voltage: 50 V
terminals: [A, B, C]
charged_to: {ac_rms: 400 V, rise: 10 %, phases: 3, neutral: isolated}
capacitors:
  - {id: CB, kvar: {power: 50 kvar, voltage: 400 V, frequency: 50 Hz}, tolerance: 10 %, phases: 3, connection: delta}
resistors:
  - {id: RD, role: bleeder, value: 268 kohm, tolerance: 5 %, phases: 3, connection: delta}
limits:
  - {use: iec-60831-1}
  - {use: iec-60831-1-switching-in}
";

/// `MET` with a procedure from locking out to a strap that stays on.
pub fn met_with_procedure() -> String {
    let parts = r"  - {id: M1, role: meter, value: 10 Mohm, tolerance: 2 %, across: [P, N], rating: {voltage: 1 kV}}
  - id: T1
    role: tool
    value: 1 kohm
    tolerance: 5 %
    across: [P, N]
    rating: {power: 50 W, full_to: 70 °C, zero_at: 155 °C, voltage: 1 kV}
  - {id: ST1, role: strap, value: 10 mohm, tolerance: 50 %, across: [P, N]}
limits:";
    let procedure = r"procedure:
  - {step: Lock out and isolate, for: 0 s}
  - {step: Wait for the bleeder, until: {below: 50 V, at: [P, N]}}
  - {step: Test the bus, connect: [M1], for: 60 s, measure: [[P, N]], hold: {below: 49.97 V, at: [P, N]}}
  - {step: Apply the tool, connect: [T1], disconnect: [M1], for: 30 s, measure: [[P, N]], hold: {below: 5 V}}
  - {step: Put the strap on, connect: [ST1], for: 60 s}
  - {step: Take the tool off, disconnect: [T1], for: 60 s}
  - {step: Work begins, touch: true, for: 0 s}
";
    met_but("limits:", parts) + procedure
}
