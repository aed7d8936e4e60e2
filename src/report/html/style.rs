//! How the sheet looks: black on white, ruled like a form, large figures for the few that matter.

use super::{Page, Paper};

/// The whole style sheet of a page.
pub(super) fn sheet(page: &Page) -> String {
    let size = match page.paper {
        Paper::A4 => "A4",
        Paper::Letter => "letter",
    };
    let foot = css_string(&page.foot);
    format!(
        "@page {{ size: {size} portrait; margin: 15mm 15mm 18mm 18mm;\
         @bottom-left {{ content: {foot}; font: 10pt sans-serif; }}\
         @bottom-right {{ content: \"page \" counter(page) \" of \" counter(pages); font: 10pt sans-serif; }} }}\n{STYLE}"
    )
}

/// A text as a CSS string: every character that is no letter, digit or space is written by its number, so that
/// nothing in it can end the string or the style element.
fn css_string(text: &str) -> String {
    let mut out = String::from("\"");
    for c in text.chars() {
        if c.is_ascii_alphanumeric() || c == ' ' {
            out.push(c);
        } else {
            out.push_str(&format!("\\{:x} ", u32::from(c)));
        }
    }
    out.push('"');
    out
}

const STYLE: &str = "
* { box-sizing: border-box; }
html { font: 10.5pt/1.38 'Liberation Sans', 'DejaVu Sans', Arial, Helvetica, sans-serif; color: #000; background: #fff; }
body { margin: 0; }
main { max-width: 180mm; margin: 0 auto; padding: 6mm 4mm; }
h1, h2, h3, p, ul, dl, dd, dt, figure { margin: 0; padding: 0; }
h1, h2, h3, p, li, dd, dt, figcaption { overflow-wrap: anywhere; }
header { margin-bottom: 4mm; }
.short { break-inside: avoid; }
.columns { columns: 2; column-gap: 7mm; break-before: page; }
.introduced > p { break-after: avoid; break-inside: avoid; }
.columns h2 { column-span: all; }
.kind { font-size: 12pt; letter-spacing: .14em; text-transform: uppercase; }
h1 { font-size: 21pt; line-height: 1.15; margin-bottom: 3mm; }
h2 { font-size: 13pt; margin: 6mm 0 2mm; padding-top: 1mm; border-top: 1.5pt solid #000; break-after: avoid; }
h3 { font-size: 11.5pt; margin: 4mm 0 1.5mm; break-after: avoid; }
p { margin-bottom: 1.5mm; orphans: 3; widows: 3; }
ul { padding-left: 5mm; margin-bottom: 2mm; }
li { margin-bottom: 1mm; break-inside: avoid; }
dl > div { display: grid; grid-template-columns: 27mm 1fr; column-gap: 3mm; break-inside: avoid; margin-bottom: 1.2mm; }
dt { font-weight: bold; }
dd p { margin-bottom: .6mm; }
dl { margin-bottom: 2mm; }
.large { display: grid; grid-template-columns: repeat(auto-fit, minmax(38mm, 1fr)); gap: 0; border: 1.5pt solid #000; margin: 2mm 0 0; break-inside: avoid; }
.large > div { display: block; padding: 2mm 3mm; margin: 0; border-right: .75pt solid #000; }
.large > div:last-child { border-right: 0; }
.large dt { font-size: 10pt; font-weight: normal; }
.large .figure { display: block; font-size: 22pt; line-height: 1.15; font-weight: bold; }
.large .under { display: block; font-size: 10pt; line-height: 1.25; }
.framed, .stop { border: 2.5pt solid #000; padding: 2mm 3mm; margin: 2mm 0; break-inside: avoid; }
.stop .word { font-size: 16pt; font-weight: bold; letter-spacing: .08em; }
.panel { display: grid; grid-template-columns: 31mm 1fr; border: 1.25pt solid #000; margin: 1.5mm 0 2.5mm; break-inside: avoid; }
.panel .word { margin: 0; padding: 1.2mm 2mm; font-weight: bold; font-size: 11pt; border-right: 1.25pt solid #000; display: flex; align-items: center; gap: 1.5mm; print-color-adjust: exact; -webkit-print-color-adjust: exact; }
.panel .said { padding: 1.2mm 2.5mm .4mm; }
.danger .word { background: #b00020; color: #fff; }
.warning .word { background: #ff8c1a; color: #000; }
.caution .word { background: #ffd800; color: #000; }
.triangle { width: 5mm; height: 4.6mm; flex: none; }
.triangle path { fill: #fff; stroke: #000; stroke-width: 1.4; }
.triangle rect, .triangle circle { fill: #000; }
table { border-collapse: collapse; width: 100%; margin: 1.5mm 0 3mm; font-size: 10pt; line-height: 1.3; }
thead { display: table-header-group; }
tr { break-inside: avoid; }
th, td { border-bottom: .5pt solid #555; padding: .9mm 1.6mm; text-align: left; vertical-align: top; }
thead th { border-bottom: 1.25pt solid #000; vertical-align: bottom; }
tbody th { font-weight: bold; }
th.figure, td.figure { text-align: right; }
td.figure { white-space: nowrap; font-variant-numeric: tabular-nums; }
td.room { border: .75pt solid #000; min-width: 18mm; height: 8mm; }
.signatures td { border: .75pt solid #000; height: 11mm; width: 27%; }
.signatures { break-inside: avoid; }
.formula { font-family: 'Liberation Mono', 'DejaVu Sans Mono', monospace; font-size: 10pt; margin-left: 4mm; }
.ticks { list-style: none; padding: 0; break-inside: avoid; }
.ticks li { display: grid; grid-template-columns: 7mm 1fr; }
.tick { display: inline-block; width: 4.2mm; height: 4.2mm; border: 1pt solid #000; background: #fff; vertical-align: -.7mm; margin-right: 2.5mm; }
.blanks { break-inside: avoid; }
.blanks p, .done { display: flex; align-items: flex-end; gap: 2mm; break-inside: avoid; }
.blanks p { min-height: 8mm; }
.blanks .label { max-width: 90mm; }
.line { flex: 1; border-bottom: .75pt solid #000; min-width: 16mm; height: 6mm; }
.step { border: 1pt solid #000; border-left-width: 4pt; padding: 2mm 3mm 2mm; margin: 3mm 0; break-inside: avoid; }
.step h3 { margin: 0 0 1.5mm; }
.step table { margin: 1mm 0; }
.done { margin: 1mm 0 0; }
figure { break-inside: avoid; margin: 2mm 0 4mm; }
figure svg { display: block; width: 100%; height: auto; }
figcaption { font-size: 10pt; margin-top: 1mm; }
@media print { main { max-width: none; padding: 0; } a { color: inherit; } }
@media screen and (max-width: 150mm) { dl > div, .panel { grid-template-columns: 1fr; } .panel .word { border-right: 0; } }
";

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn nothing_in_a_foot_can_end_its_string_or_the_style() {
        assert_eq!(css_string("PU-07 \"}</style>\n"), "\"PU\\2d 07 \\22 \\7d \\3c \\2f style\\3e \\a \"");
    }
}
