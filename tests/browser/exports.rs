//! What leaves the page: files under a chosen name, the record, tables, pictures and the answer as text.

use crate::keeping::{open_file, saved_file};
use crate::page::{Page, on_the_page};
use crate::picture::show_demo;
use anyhow::{Context, Result};
use serde_json::{Value, json};
use std::fs;
use thirtyfour::prelude::*;

/// Opens a demo and waits for its answer and its pictures.
async fn open_demo(page: &Page, index: usize) -> Result<()> {
    show_demo(page, index).await?;
    // The pictures of the one before are replaced with the next frame.
    let settled = "const done = arguments[0]; requestAnimationFrame(() => requestAnimationFrame(() => done(true)))";
    page.run_async(settled, vec![]).await?;
    Ok(())
}

/// The text of the file that a line of the export menu saves.
async fn export(page: &Page, name: &str) -> Result<String> {
    for entry in fs::read_dir(&page.downloads)? {
        fs::remove_file(entry?.path())?;
    }
    page.driver.find(By::Css("#export summary")).await?.click().await?;
    page.press(name).await?;
    Ok(fs::read_to_string(saved_file(&page.downloads).await?)?)
}

/// The records of a CSV text (RFC 4180) without quoted line breaks, its head apart.
fn table(text: &str) -> Result<(Vec<&str>, Vec<Vec<&str>>)> {
    assert!(text.ends_with("\r\n") && !text.replace("\r\n", "").contains(['\r', '\n']), "records end with CR LF");
    let mut records = text.trim_end().split("\r\n").map(|record| record.split(',').collect::<Vec<_>>());
    let head = records.next().context("a head")?;
    let rows: Vec<Vec<&str>> = records.collect();
    assert!(rows.iter().all(|row| row.len() == head.len()), "every record has as many fields as the head");
    Ok((head, rows))
}

/// The finite numbers of a column, read by the same reader as those of the record, which may round the last bit.
fn column(rows: &[Vec<&str>], index: usize) -> Vec<f64> {
    rows.iter().filter_map(|row| serde_json::from_str(row[index]).ok()).collect()
}

fn numbers(value: &Value) -> Vec<f64> {
    value.as_array().into_iter().flatten().filter_map(Value::as_f64).collect()
}

#[test]
fn tables_hold_what_the_record_holds() {
    on_the_page(|page| async move {
        open_demo(&page, 0).await?;
        let record = page.record().await?;
        let mut exported: Value = serde_json::from_str(&export(&page, "Record, JSON").await?)?;
        assert!(exported["sheet"]["derivation"].is_object(), "the file holds the derivation");
        exported["sheet"] = Value::Null;
        assert_eq!(exported, record);

        let text = export(&page, "Open loop over frequency, CSV").await?;
        let (_, rows) = table(&text)?;
        for (index, name) in ["omega", "magnitude", "phase"].iter().enumerate() {
            assert_eq!(column(&rows, index), numbers(&record["margins"]["response"][name]), "{name}");
        }
        let text = export(&page, "Answers over time, CSV").await?;
        let (_, rows) = table(&text)?;
        let step: Vec<Vec<&str>> = rows.iter().filter(|row| row[0] == "output on a step").cloned().collect();
        assert_eq!(column(&step, 2), numbers(&record["step"]["curve"]["time"]));
        assert_eq!(column(&step, 3), numbers(&record["step"]["curve"]["value"]));
        let text = export(&page, "Locus, CSV").await?;
        let (head, rows) = table(&text)?;
        assert_eq!(head[2..4], ["real part in 1/s", "imaginary part in 1/s"]);
        assert!(rows.len() > 50, "{} vertices", rows.len());
        // Branches begin at the open loop's poles.
        for pole in record["poles"].as_array().context("poles")? {
            let re = pole["re"].as_f64().context("a real part")?;
            let at = |row: &Vec<&str>| row[2].parse::<f64>().is_ok_and(|x| (x - re).abs() < 1e-6 * re.abs().max(1.0));
            assert!(rows.iter().any(at), "no branch begins at {re}");
        }
        Ok(())
    });
}

/// Draws an SVG text as a picture of its own, outside the page's style sheet, and answers with its size and how many of
/// its points differ from the first one.
const DRAW: &str = r#"
    const [text, done] = arguments;
    const picture = new Image();
    picture.onerror = () => done("cannot be drawn");
    picture.onload = () => {
        const canvas = Object.assign(document.createElement("canvas"), { width: picture.naturalWidth, height: picture.naturalHeight });
        const pen = canvas.getContext("2d");
        pen.drawImage(picture, 0, 0);
        const { data } = pen.getImageData(0, 0, canvas.width, canvas.height);
        let inked = 0;
        for (let at = 4; at < data.length; at += 4) inked += data[at] !== data[0] || data[at + 1] !== data[1];
        done([canvas.width, canvas.height, inked, data[0]]);
    };
    picture.src = `data:image/svg+xml,${encodeURIComponent(text)}`;
"#;

#[test]
fn pictures_are_files_that_look_the_same_without_the_page() {
    on_the_page(|page| async move {
        page.prefer("prefers-color-scheme", "dark").await?;
        open_demo(&page, 0).await?;
        for (name, id) in [("Ruler, SVG", "ruler"), ("Locus, SVG", "plane"), ("The answer shown, SVG", "response")] {
            let text = export(&page, name).await?;
            for part in ["class=", "style=", "var(--", "http://localhost", "role=", "<script"] {
                assert!(!text.contains(part), "{name} holds {part}");
            }
            let size = page.run("const { width, height } = document.getElementById(arguments[0]).viewBox.baseVal; return [width, height]", vec![json!(id)]).await?;
            let drawn = page.run_async(DRAW, vec![json!(text)]).await?;
            assert_eq!(drawn[0].as_f64().map(f64::round), size[0].as_f64().map(f64::round), "{name}: {drawn}");
            assert!(drawn[2].as_u64() > Some(2000), "{name} is empty: {drawn}");
            assert!(drawn[3].as_u64() > Some(240), "{name} is not on light ground: {drawn}");
        }
        Ok(())
    });
}

#[test]
fn the_answer_is_copied_as_text() {
    on_the_page(|page| async move {
        open_demo(&page, 0).await?;
        page.run("navigator.clipboard.writeText = async (text) => { window.copied = text; }", vec![]).await?;
        page.driver.find(By::Css("#export summary")).await?.click().await?;
        page.press("Copy the answer as text").await?;
        page.shows("message", "copied").await?;
        let text = page.run("return window.copied", vec![]).await?;
        let text = text.as_str().context("a text")?;
        for part in [
            "Levitated roller",
            "Use 30 to 44",
            "Suggested: 3",
            "14/((s - 3)",
            "damping ratio at least 0.5",
            "Stayband 0.",
        ] {
            assert!(text.contains(part), "{part:?} is not in\n{text}");
        }
        Ok(())
    });
}

#[test]
fn save_as_asks_for_the_name_and_save_keeps_it() {
    on_the_page(|page| async move {
        open_demo(&page, 2).await?;
        let before = page.run("return window.stayband.project()", vec![]).await?;
        page.press("Save as").await?;
        page.type_into("File name", "axis 7/rev*3").await?;
        page.press("Save file").await?;
        let path = saved_file(&page.downloads).await?;
        assert_eq!(path.file_name().and_then(|name| name.to_str()), Some("axis 7 rev 3.stayband.json"));
        fs::remove_file(&path)?;
        page.press("Save").await?;
        let again = saved_file(&page.downloads).await?;
        assert_eq!(again, path);

        page.press("New").await?;
        page.shows("answer", "Type a loop").await?;
        open_file(&page, &again).await?;
        page.shows("answer", "Use ").await?;
        assert_eq!(page.run("return window.stayband.project()", vec![]).await?, before);
        Ok(())
    });
}

#[test]
fn nothing_is_exported_of_a_loop_without_an_answer() {
    on_the_page(|page| async move {
        page.type_into("Plant", "1/(s").await?;
        page.shows("stale", "Stale").await?;
        page.driver.find(By::Css("#export summary")).await?.click().await?;
        page.press("Record, JSON").await?;
        page.shows("message", "no answer to this loop yet").await
    });
}
