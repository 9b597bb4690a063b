//! Work is never lost: files, links, reloading, undo.

use crate::answers::type_feed_drive;
use crate::page::{Page, on_the_page};
use anyhow::{Context, Result};
use serde_json::{Value, json};
use std::fs;
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant};
use thirtyfour::By;

/// How long a download may take.
const DOWNLOAD: Duration = Duration::from_secs(10);

/// The one file in the folder, when it is complete.
pub(crate) async fn saved_file(folder: &Path) -> Result<PathBuf> {
    let start = Instant::now();
    while start.elapsed() < DOWNLOAD {
        let saved = fs::read_dir(folder)?.filter_map(Result::ok).map(|entry| entry.path()).find(|path| {
            path.extension().is_some_and(|ending| ["json", "csv", "svg"].iter().any(|whole| ending == *whole))
        });
        if let Some(path) = saved {
            return Ok(path);
        }
        tokio::time::sleep(Duration::from_millis(50)).await;
    }
    anyhow::bail!("nothing was saved in {}", folder.display())
}

/// Opens a file as a user does; only the browser's own dialogue, which WebDriver does not reach, is replaced: the
/// picker that the page makes is put where the driver can hand it the file.
pub(crate) async fn open_file(page: &Page, path: &Path) -> Result<()> {
    page.run("HTMLInputElement.prototype.click = function () { document.body.append(this); }", vec![]).await?;
    page.press("Open").await?;
    let picker = page.driver.find(By::Css("input[type=file]")).await?;
    picker.send_keys(path.to_str().context("a path in Unicode")?).await?;
    page.run("document.querySelector('input[type=file]').remove()", vec![]).await?;
    Ok(())
}

async fn project(page: &Page) -> Result<Value> {
    page.run("return window.stayband.project()", vec![]).await
}

#[test]
fn a_saved_project_opens_again_as_it_was() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.type_into("Setting", "12.50").await?;
        page.shows("answer-setting", "12.50").await?;
        let before = project(&page).await?;
        page.press("Save").await?;
        let path = saved_file(&page.downloads).await?;
        let saved: Value = serde_json::from_str(&fs::read_to_string(&path)?)?;
        assert_eq!(saved["format"], "stayband-project/1");
        assert_eq!(saved["setting"]["value"], "12.50", "numbers are kept as typed");

        page.press("New").await?;
        page.shows("answer", "Type a loop").await?;
        open_file(&page, &path).await?;
        page.shows("answer", "Stable for K from 0 to 60").await?;
        assert_eq!(project(&page).await?, before);
        Ok(())
    });
}

#[test]
fn a_broken_file_changes_nothing_and_says_what_is_wrong_with_it() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        let before = project(&page).await?;
        let loop_text = json!({ "controller": "K", "plant": "1/s" });
        let broken = [
            ("no JSON at all {".to_owned(), "JSON"),
            (json!({ "format": "stayband-project/2", "loop": loop_text, "knob": "K" }).to_string(), "version 2"),
            (
                json!({ "format": "stayband-project/1", "loop": loop_text, "knob": "K", "colour": 1 }).to_string(),
                "colour",
            ),
        ];
        for (number, (text, reason)) in broken.iter().enumerate() {
            let path = page.downloads.join(format!("broken {number}.json"));
            fs::write(&path, text)?;
            open_file(&page, &path).await?;
            page.shows("message", reason).await?;
            assert_eq!(project(&page).await?, before, "{text} changed the project");
        }
        Ok(())
    });
}

#[test]
fn a_link_carries_the_whole_project() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.type_into("Setting", "21").await?;
        page.shows("answer-setting", "21").await?;
        let before = project(&page).await?;
        // Without a window there is no clipboard to read; what the page hands to it is kept instead.
        page.run("navigator.clipboard.writeText = async (text) => { window.copied = text; }", vec![]).await?;
        page.press("Link").await?;
        page.shows("message", "link").await?;
        let link = page.run("return window.copied", vec![]).await?;
        let part = link.as_str().and_then(|link| link.find('#').map(|at| link[at..].trim().to_owned()));
        let part = part.with_context(|| format!("no link in {link:?}"))?;

        page.press("New").await?;
        page.shows("answer", "Type a loop").await?;
        page.driver.goto("about:blank").await?;
        page.open(&part).await?;
        page.shows("answer", "Stable for K from 0 to 60").await?;
        assert_eq!(project(&page).await?, before);
        Ok(())
    });
}

#[test]
fn a_cut_link_changes_nothing_and_says_so() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        let before = project(&page).await?;
        page.run("location.hash = '#project=zq1'", vec![]).await?;
        page.shows("message", "link").await?;
        assert_eq!(project(&page).await?, before);
        Ok(())
    });
}

#[test]
fn the_project_survives_a_reload() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.type_into("Setting", "33").await?;
        page.shows("answer-setting", "33").await?;
        let before = project(&page).await?;
        page.driver.refresh().await?;
        page.shows("answer-setting", "33").await?;
        assert_eq!(project(&page).await?, before);
        Ok(())
    });
}

#[test]
fn undo_takes_the_last_change_back_and_redo_makes_it_again() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.type_into("Plant", "1/(s (0.1 s + 1)(0.01 s + 1))").await?;
        page.shows("answer", "to 110").await?;
        page.press("Undo").await?;
        page.shows("answer", "to 60").await?;
        page.press("Redo").await?;
        page.shows("answer", "to 110").await
    });
}

/// Changes every input and choice of the form that is shown, one after the other, and takes each change back.
const CHANGE_AND_UNDO: &str = r##"
    const before = JSON.stringify(window.stayband.project());
    for (const part of document.querySelectorAll("#scale, #add-requirement")) part.open = true;
    const labelled = (control) => control.labels?.[0]?.textContent.trim() || control.getAttribute("aria-label") || control.id;
    const names = [...document.querySelectorAll("#title, #loop input, #loop select:not(#conversion)")]
        .filter((control) => control.checkVisibility()).map(labelled);
    const find = (name) => [...document.querySelectorAll("#title, #loop input, #loop select")].find((one) => labelled(one) === name);
    const wrong = [];
    for (const name of names) {
        const control = find(name);
        if (!control) {
            wrong.push(`${name} is gone`);
            continue;
        }
        if (control.type === "checkbox") control.click();
        else {
            if (control.tagName === "SELECT") control.selectedIndex = (control.selectedIndex + 1) % control.options.length;
            else control.value += "7";
            for (const kind of ["input", "change"]) control.dispatchEvent(new Event(kind, { bubbles: true }));
        }
        if (JSON.stringify(window.stayband.project()) === before) wrong.push(`${name} changes nothing`);
        document.getElementById("undo").click();
        if (JSON.stringify(window.stayband.project()) !== before) wrong.push(`${name} is not undone`);
        document.getElementById("redo").click();
        if (JSON.stringify(window.stayband.project()) === before) wrong.push(`${name} is not redone`);
        document.getElementById("undo").click();
    }
    return { wrong, count: names.length };
"##;

#[test]
fn a_change_of_every_input_is_undone_and_redone() {
    on_the_page(|page| async move {
        // The pump has two names besides its knob, a scale and requirements.
        page.run("document.querySelectorAll('#demo-list button')[2].click()", vec![]).await?;
        page.shows("answer", "646").await?;
        let found = page.run(CHANGE_AND_UNDO, vec![]).await?;
        assert_eq!(found["wrong"], json!([]));
        assert!(found["count"].as_u64() > Some(40), "few inputs were tried: {found}");
        Ok(())
    });
}
