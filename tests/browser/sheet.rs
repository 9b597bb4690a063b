//! The sheet: every demo is printed by the browser on A4 and on Letter paper, and what stands on the paper is held against
//! the record. The pages are written to `target/page/print/` as PDF and as pictures, to be looked at.

use crate::page::{Page, file, on_the_page};
use anyhow::{Context, Result, ensure};
use serde_json::{Value, json};
use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;
use thirtyfour::common::print::{PrintPage, PrintParameters};

/// Number of demos in the menu.
const DEMOS: usize = 5;

/// Width and height in cm.
const PAPERS: [(&str, f64, f64); 2] = [("A4", 21.0, 29.7), ("Letter", 21.59, 27.94)];

/// Dots per inch of the pictures.
const RESOLUTION: &str = "80";

/// A figure on paper has at least this many digits where it is to be checked by hand.
const DIGITS: i32 = 9;

/// Opens the sheet of a demo, and returns the record with it.
async fn open_sheet(page: &Page, demo: usize) -> Result<Value> {
    page.run("document.querySelectorAll('#demo-list button')[arguments[0]].click()", vec![json!(demo)]).await?;
    let opened = r##"
        const title = window.stayband.record()?.project.title ?? "";
        return title.startsWith(document.querySelectorAll("#demo-list strong")[arguments[0]].textContent.split(" ")[0]);
    "##;
    page.until("the demo is open", opened, vec![json!(demo)]).await?;
    page.run("document.getElementById('sheet').open = true", vec![]).await?;
    page.type_into("Machine", "Test bench 4").await?;
    page.type_into("Revision", "B").await?;
    page.type_into("Prepared by", "R. Okafor").await?;
    let drawn = r##"
        const dd = [...document.querySelectorAll("#sheet-page .identification dd")].map((one) => one.textContent);
        return dd.includes("R. Okafor") && document.getElementById("paper").getAttribute("aria-busy") === null;
    "##;
    page.until("the sheet is drawn", drawn, vec![]).await?;
    page.run_async("const done = arguments[0]; window.stayband.sheet().then(done)", vec![]).await
}

/// Prints the page and returns the PDF's path and its text.
async fn print(page: &Page, name: &str, (paper, width, height): (&str, f64, f64)) -> Result<(PathBuf, String)> {
    let folder = file()?.with_file_name("print");
    fs::create_dir_all(&folder)?;
    let parameters =
        PrintParameters { background: true, page: PrintPage { width, height }, ..PrintParameters::default() };
    let path = folder.join(format!("{name}-{paper}.pdf"));
    fs::write(&path, page.driver.print_page(parameters).await?)?;
    let text = output(Command::new("pdftotext").arg("-layout").arg(&path).arg("-"))?;
    Ok((path, text))
}

/// What a program writes.
fn output(command: &mut Command) -> Result<String> {
    let done = command.output().with_context(|| format!("{command:?}: on Debian: apt-get install poppler-utils"))?;
    ensure!(done.status.success(), "{command:?}: {}", String::from_utf8_lossy(&done.stderr));
    Ok(String::from_utf8(done.stdout)?)
}

/// Pictures of all pages.
fn draw(pdf: &Path) -> Result<()> {
    output(Command::new("pdftoppm").args(["-png", "-r", RESOLUTION]).arg(pdf).arg(pdf.with_extension("")))?;
    Ok(())
}

/// Every number in a text, with signs and powers of ten as the page prints them.
fn numbers(text: &str) -> Vec<f64> {
    let plain = text.replace('−', "-");
    let mut found = Vec::new();
    for word in plain.split(|c: char| !(c.is_ascii_digit() || matches!(c, '.' | '-' | 'e' | '+'))) {
        found.extend(word.trim_matches(|c| matches!(c, '.' | 'e' | '+')).parse::<f64>().ok());
        // A sign that joins two numbers is none of the second one's.
        found.extend(word.split('-').filter_map(|part| part.parse::<f64>().ok()));
    }
    found
}

/// Whether a number stands in the list, to so many digits.
fn stands(printed: &[f64], value: f64, digits: i32) -> bool {
    printed.iter().any(|p| (p - value).abs() <= value.abs() * 10f64.powi(-digits))
}

/// All numbers at a place of the record; `path` has `*` for every entry of a list.
fn values(record: &Value, path: &[&str]) -> Vec<f64> {
    match (path, record) {
        ([], value) => value.as_f64().into_iter().collect(),
        (["*", rest @ ..], Value::Array(list)) => list.iter().flat_map(|entry| values(entry, rest)).collect(),
        ([key, rest @ ..], value) => values(&value[*key], rest),
    }
}

fn check_figures(text: &str, record: &Value) -> Result<()> {
    let printed = numbers(text);
    let by_hand: [&[&str]; 5] = [
        &["sheet", "derivation", "edges", "*", "value"],
        &["sheet", "derivation", "edges", "*", "omega"],
        &["sheet", "derivation", "conditions", "*", "candidates", "*", "knob"],
        &["sheet", "derivation", "breakaway", "candidates", "*", "knob"],
        &["sheet", "derivation", "requirements", "*", "edges", "*", "knob"],
    ];
    for path in by_hand {
        for value in values(record, path) {
            ensure!(stands(&printed, value, DIGITS), "{path:?}: {value} is not on the sheet");
        }
    }
    let predicted: [&[&str]; 4] = [
        &["sheet", "stepUp", "rows", "*", "overshoot"],
        &["sheet", "stepUp", "rows", "*", "period"],
        &["step", "overshoot"],
        &["margins", "phase"],
    ];
    for path in predicted {
        for value in values(record, path) {
            // Three digits, rounded.
            ensure!(
                printed.iter().any(|p| (p - value).abs() <= 6e-3 * value.abs()),
                "{path:?}: {value} is not on the sheet"
            );
        }
    }
    Ok(())
}

fn check_words(text: &str, record: &Value) -> Result<()> {
    // Long words break at the ends of lines.
    let joined: String = text.chars().filter(|c| !c.is_whitespace()).collect();
    let has = |what: &str| joined.contains(&what.chars().filter(|c| !c.is_whitespace()).collect::<String>());
    let sheet = &record["sheet"];
    let mut wanted = vec![
        record["project"]["title"].as_str().context("a title")?.to_owned(),
        record["program"]["version"].as_str().context("a version")?.to_owned(),
        record["program"]["hash"].as_str().context("a hash")?.to_owned(),
        sheet["projectHash"].as_str().context("a hash")?.to_owned(),
    ];
    let headings = [
        "Test bench 4",
        "R. Okafor",
        "Checked by",
        "Answer",
        "The loop",
        "Requirements",
        "Ranges",
        "Root locus",
        "Derivation for a check by hand",
        "Step-up plan",
        "What this rests on",
        "proven",
        "computed",
        "sudden motion",
    ];
    wanted.extend(headings.map(str::to_owned));
    let plain = |text: &Value| text.as_str().map(|text| text.replace('-', "−"));
    let derivation = &sheet["derivation"];
    match derivation["ranges"].as_array() {
        Some(ranges) => {
            wanted.extend(["Routh array", "Edges of stability", "Breakaway", "Asymptotes"].map(str::to_owned));
            wanted.extend(ranges.iter().filter_map(|range| plain(&range["sample"])));
        }
        None => wanted.push(sheet["remark"].as_str().context("why there is no derivation")?.to_owned()),
    }
    // With and without a derivation the edges stand there with their brackets.
    for range in record["stability"].as_array().context("ranges")? {
        wanted.extend(range["to"]["bracket"].as_array().into_iter().flatten().filter_map(plain));
    }
    let rows = sheet["stepUp"]["rows"].as_array().context("rows")?;
    wanted.extend(rows.iter().filter_map(|row| plain(&row["setting"])));
    if !rows.is_empty() {
        wanted.push("Stop, and go back one row".to_owned());
    }
    for what in wanted {
        ensure!(has(&what), "{what:?} is not on the sheet");
    }
    Ok(())
}

/// Page numbers and the running head on every page.
fn check_pages(text: &str, record: &Value) -> Result<()> {
    let pages: Vec<&str> = text.split('\u{c}').filter(|page| !page.trim().is_empty()).collect();
    ensure!(pages.len() > 2, "{} pages hold no sheet", pages.len());
    let title = record["project"]["title"].as_str().context("a title")?;
    for (index, page) in pages.iter().enumerate() {
        // The number ends the page; how wide its spaces are is not told.
        let number = format!("{}/{}", index + 1, pages.len());
        let joined: String = page.chars().filter(|c| !c.is_whitespace()).collect();
        ensure!(joined.ends_with(&number), "page {} has no number {number}", index + 1);
        ensure!(page.contains(title) && page.contains("revision B"), "page {} has no head", index + 1);
    }
    Ok(())
}

#[test]
fn the_printed_sheet_of_every_demo_holds_the_figures_of_the_record() {
    on_the_page(|page| async move {
        for demo in 0..DEMOS {
            let record = open_sheet(&page, demo).await?;
            for paper in PAPERS {
                let (pdf, text) = print(&page, &format!("demo-{demo}"), paper).await?;
                let checked = check_words(&text, &record)
                    .and_then(|()| check_figures(&text, &record))
                    .and_then(|()| check_pages(&text, &record));
                checked.with_context(|| format!("{}", pdf.display()))?;
                draw(&pdf)?;
            }
        }
        Ok(())
    });
}

#[test]
fn the_hash_on_the_sheet_is_that_of_the_saved_file() {
    use sha2::{Digest, Sha256};
    on_the_page(|page| async move {
        let record = open_sheet(&page, 0).await?;
        let project = page.run("return JSON.stringify(window.stayband.project(), null, 2) + '\\n'", vec![]).await?;
        let text = project.as_str().context("a project")?;
        let hash: String = Sha256::digest(text.as_bytes()).iter().map(|byte| format!("{byte:02x}")).collect();
        assert_eq!(record["sheet"]["projectHash"], json!(hash));
        Ok(())
    });
}

#[test]
fn the_plan_follows_its_ratio_and_the_site_check_offers_a_corrected_project() {
    on_the_page(|page| async move {
        page.run_async(
            r#"const done = arguments[0];
            window.stayband.open({ format: "stayband-project/1", title: "Lag",
                loop: { controller: "K", plant: "1/(s (s + 7)(s + 11))" }, knob: "K", setting: { value: "690" } }).then(() => done());"#,
            vec![],
        )
        .await?;
        page.run(
            "document.getElementById('step-up').open = true; document.getElementById('site-check').open = true",
            vec![],
        )
        .await?;
        page.type_into("Ratio from row to row", "2").await?;
        page.until(
            "the plan has four rows",
            r##"return [...document.querySelectorAll("#step-up-plan tbody th")].map((one) => one.textContent).join() === "172,344,688,690""##,
            vec![],
        )
        .await?;
        page.shows("step-up-plan", "sudden motion").await?;
        // At 1386/1.2 the model's edge is reached with the gain 1.2 times as large, at the same frequency.
        page.choose("Seen on the machine", "oscillation").await?;
        page.type_into("At the setting", "1155").await?;
        page.type_into("Period, peak to peak, s", "0.716036").await?;
        page.shows("site-check-result", "a loop gain of 1.2 times").await?;
        page.shows("site-check-result", "Never drive an energised machine").await?;
        page.shows("site-check-result", "stable for K 0 to 1155").await?;
        page.press("Open the corrected project").await?;
        page.until(
            "the corrected project is open",
            r#"return window.stayband.project().loop.plant === "1.2 (1/(s (s + 7)(s + 11)))""#,
            vec![],
        )
        .await
    });
}
