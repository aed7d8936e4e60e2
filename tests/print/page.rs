//! Prints a page with Chromium and reads the PDF back with the poppler tools.

use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};

/// The papers.
#[derive(Debug, Clone, Copy, PartialEq)]
#[allow(missing_docs)]
pub enum Paper {
    A4,
    Letter,
}

impl Paper {
    /// As the command line has it.
    pub fn word(self) -> &'static str {
        if self == Paper::A4 { "a4" } else { "letter" }
    }

    /// Width and height in points.
    pub fn points(self) -> (f64, f64) {
        if self == Paper::A4 { (595.28, 841.89) } else { (612.0, 792.0) }
    }

    /// True for the size of this paper, as far as a browser keeps it.
    pub fn is(self, (width, height): (f64, f64)) -> bool {
        (width - self.points().0).abs() < 1.0 && (height - self.points().1).abs() < 1.0
    }
}

/// A word and its box, in points from the top left corner.
#[derive(Debug)]
#[allow(missing_docs, dead_code)] // The text is there to be printed where a check fails.
pub struct Word {
    pub left: f64,
    pub top: f64,
    pub right: f64,
    pub bottom: f64,
    pub text: String,
}

/// A printed document.
pub struct Printed {
    /// The text of every page, blanks as single spaces.
    pub pages: Vec<String>,
    /// The words of every page.
    pub words: Vec<Vec<Word>>,
    /// The size of every page in points.
    pub sizes: Vec<(f64, f64)>,
    /// True where nothing is drawn within 13 mm of the left and right edges of any page.
    pub margins_are_white: bool,
}

/// The browser and the tools that read what it printed.
pub struct Printer {
    browser: PathBuf,
}

impl Printer {
    /// The browser of this machine; where something is missing, says so and gives nothing.
    pub fn find() -> Option<Self> {
        let browser = on_path("chromium");
        let missing: Vec<&str> = [("chromium", browser.is_none())]
            .into_iter()
            .chain(["pdftotext", "pdftoppm", "pdfinfo"].map(|tool| (tool, on_path(tool).is_none())))
            .filter_map(|(tool, is_missing)| is_missing.then_some(tool))
            .collect();
        if missing.is_empty() {
            return browser.map(|browser| Printer { browser });
        }
        let text = format!("LEFT OUT: printing in a browser; not found on this machine: {}", missing.join(", "));
        assert_ne!(std::env::var("PRINT_CHECK").as_deref(), Ok("required"), "{text}");
        say(&text);
        None
    }

    /// Prints HTML. `name` tells the files of one test from those of another.
    pub fn print(&self, html: &str, name: &str, paper: Paper) -> Printed {
        let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join(format!("print-{name}-{}", paper.word()));
        let _ = std::fs::remove_dir_all(&folder);
        std::fs::create_dir_all(&folder).expect("a folder");
        let (page, pdf) = (folder.join("page.html"), folder.join("page.pdf"));
        std::fs::write(&page, html).expect("a file");
        // The switches keep it from looking for anything on a network.
        let status = Command::new(&self.browser)
            .args(["--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run"])
            .args(["--disable-background-networking", "--disable-component-update", "--disable-sync"])
            .arg(format!("--user-data-dir={}", folder.join("profile").display()))
            .args(["--no-pdf-header-footer", &format!("--print-to-pdf={}", pdf.display())])
            .arg(format!("file://{}", page.display()))
            .stdout(Stdio::null())
            .stderr(Stdio::null())
            .status()
            .expect("the browser starts");
        assert!(status.success() && pdf.exists(), "{name}: the browser printed nothing");
        let printed = Printed {
            pages: text(&pdf),
            words: words(&pdf),
            sizes: sizes(&pdf),
            margins_are_white: margins_are_white(&pdf, &folder),
        };
        let _ = std::fs::remove_dir_all(folder.join("profile"));
        printed
    }
}

/// Past the capture of the test runner: a person who runs the tests has to see it.
fn say(text: &str) {
    use std::io::Write;
    let _ = writeln!(std::io::stderr(), "{text}");
}

fn on_path(tool: &str) -> Option<PathBuf> {
    let path = std::env::var_os("PATH")?;
    std::env::split_paths(&path).map(|folder| folder.join(tool)).find(|file| file.is_file())
}

/// What a tool prints.
fn output(tool: &str, words: &[&str], pdf: &Path) -> String {
    let output = Command::new(tool).args(words).arg(pdf).arg("-").output().expect("the tool starts");
    assert!(output.status.success(), "{tool}: {}", String::from_utf8_lossy(&output.stderr));
    String::from_utf8_lossy(&output.stdout).into_owned()
}

fn text(pdf: &Path) -> Vec<String> {
    let whole = output("pdftotext", &["-layout"], pdf);
    let pages = whole.trim_end_matches('\u{c}').split('\u{c}');
    pages.map(|page| page.split_whitespace().collect::<Vec<_>>().join(" ")).collect()
}

fn words(pdf: &Path) -> Vec<Vec<Word>> {
    let whole = output("pdftotext", &["-bbox"], pdf);
    let drawing = roxmltree::Document::parse_with_options(
        &whole,
        roxmltree::ParsingOptions { allow_dtd: true, ..roxmltree::ParsingOptions::default() },
    )
    .expect("XML");
    let pages = drawing.descendants().filter(|n| n.tag_name().name() == "page");
    let word = |node: roxmltree::Node| {
        let number = |key: &str| node.attribute(key).and_then(|v| v.parse().ok()).expect("a number");
        Word {
            left: number("xMin"),
            top: number("yMin"),
            right: number("xMax"),
            bottom: number("yMax"),
            text: node.text().unwrap_or_default().to_string(),
        }
    };
    pages.map(|page| page.children().filter(|n| n.tag_name().name() == "word").map(word).collect()).collect()
}

fn sizes(pdf: &Path) -> Vec<(f64, f64)> {
    let output = Command::new("pdfinfo").args(["-f", "1", "-l", "999"]).arg(pdf).output().expect("pdfinfo starts");
    let text = String::from_utf8_lossy(&output.stdout).into_owned();
    let lines = text.lines().filter(|line| line.starts_with("Page") && line.contains("size:"));
    let size = |line: &str| {
        let mut parts = line.split("size:").nth(1)?.split_whitespace();
        let width = parts.next()?.parse().ok()?;
        let height = parts.nth(1)?.parse().ok()?;
        Some((width, height))
    };
    lines.filter_map(size).collect()
}

/// Looks at the pages as pictures, in grey at 50 dots to the inch.
fn margins_are_white(pdf: &Path, folder: &Path) -> bool {
    let status = Command::new("pdftoppm").args(["-gray", "-r", "50"]).arg(pdf).arg(folder.join("p")).status();
    assert!(status.is_ok_and(|status| status.success()), "pdftoppm");
    let entries = std::fs::read_dir(folder).expect("the folder").filter_map(|e| Some(e.ok()?.path()));
    let pictures: Vec<PathBuf> = entries.filter(|path| path.extension().is_some_and(|e| e == "pgm")).collect();
    assert!(!pictures.is_empty());
    pictures.iter().all(|path| {
        let bytes = std::fs::read(path).expect("a picture");
        let mut fields = bytes.splitn(4, |b| b.is_ascii_whitespace());
        assert_eq!(fields.next(), Some(&b"P5"[..]));
        let number = |field: Option<&[u8]>| -> usize {
            std::str::from_utf8(field.unwrap_or_default()).ok().and_then(|s| s.parse().ok()).expect("a number")
        };
        let (width, height) = (number(fields.next()), number(fields.next()));
        let pixels = &bytes[bytes.len() - width * height..];
        // 13 mm at 50 dots to the inch.
        let margin = 25;
        pixels.chunks(width).all(|row| row[..margin].iter().chain(&row[width - margin..]).all(|grey| *grey > 250))
    })
}
