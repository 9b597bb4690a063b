//! The projects kept in the browser: side by side, and nothing lost where the store is full, damaged, shared or refused.

use crate::answers::type_feed_drive;
use crate::page::{Page, file, on_the_page};
use anyhow::{Context, Result};
use serde_json::{Value, json};
use thirtyfour::prelude::*;

/// The titles in the list, from top to bottom; that of a damaged entry is its sign.
async fn titles(page: &Page) -> Result<Value> {
    let script = r##"
        return [...document.querySelectorAll("#project-rows tr")].map((row) =>
            row.querySelector("input")?.value ?? row.cells[0].innerText);
    "##;
    page.run(script, vec![]).await
}

async fn open_list(page: &Page) -> Result<()> {
    page.press("Projects").await?;
    page.shows("projects-heading", "Projects").await
}

/// Presses a button of the row of this project.
async fn press_in_row(page: &Page, label: &str) -> Result<()> {
    page.driver.find(By::Css(format!("#project-rows [aria-label='{label}']"))).await?.click().await?;
    Ok(())
}

/// Types a small loop with this title and plant, and waits until it is kept.
async fn keep_loop(page: &Page, title: &str, plant: &str) -> Result<()> {
    type_feed_drive(page).await?;
    page.type_into("Title", title).await?;
    page.type_into("Plant", plant).await?;
    let kept =
        "return Object.values(localStorage).some((text) => text.includes(arguments[0]) && text.includes(arguments[1]))";
    page.until("the project is kept", kept, vec![json!(title), json!(plant)]).await
}

const TWO_LAGS: &str = "1/(s (0.1 s + 1)(0.01 s + 1))";
const THREE_LAGS: &str = "1/(s (0.1 s + 1)(0.05 s + 1))";

#[test]
fn projects_are_kept_side_by_side_and_are_opened_renamed_duplicated_and_deleted_with_undo() {
    on_the_page(|page| async move {
        keep_loop(&page, "first", TWO_LAGS).await?;
        keep_loop(&page, "second", THREE_LAGS).await?;
        open_list(&page).await?;
        assert_eq!(titles(&page).await?, json!(["second", "first"]));

        press_in_row(&page, "Duplicate first").await?;
        assert_eq!(titles(&page).await?, json!(["first (copy)", "second", "first"]));
        let field = page.driver.find(By::Css("#project-rows [aria-label='Title of first (copy)']")).await?;
        field.send_keys(Key::Control + "a").await?;
        field.send_keys("third" + Key::Enter).await?;
        page.until("it is renamed", "return document.querySelector('[aria-label=\"Open third\"]') !== null", vec![])
            .await?;

        press_in_row(&page, "Delete first").await?;
        assert_eq!(titles(&page).await?, json!(["third", "second", "“first” is deleted."]));
        press_in_row(&page, "Undo deleting first").await?;
        assert_eq!(titles(&page).await?, json!(["third", "second", "first"]));

        press_in_row(&page, "Open third").await?;
        page.shows("answer", "to 110").await?;
        let title = page.run("return window.stayband.project().title", vec![]).await?;
        assert_eq!(title, "third");
        // Undo goes back to the project before, and what is typed then goes where it belongs.
        page.press("Undo").await?;
        page.shows("answer", "to 30").await?;
        page.type_into("Setting", "7").await?;
        page.shows("answer-setting", "7").await?;
        page.driver.refresh().await?;
        page.shows("answer-setting", "7").await?;
        open_list(&page).await?;
        assert_eq!(titles(&page).await?, json!(["second", "third", "first"]));
        Ok(())
    });
}

#[test]
fn a_file_that_is_opened_again_continues_its_entry_and_what_a_script_opens_is_kept_when_it_is_changed() {
    on_the_page(|page| async move {
        keep_loop(&page, "in a file", TWO_LAGS).await?;
        let drop_again = r#"
            const given = new DataTransfer();
            given.items.add(new File([JSON.stringify(window.stayband.project())], "again.json"));
            document.body.dispatchEvent(new DragEvent("drop", { dataTransfer: given, bubbles: true }));
        "#;
        page.run(drop_again, vec![]).await?;
        page.run_async("const done = arguments[0]; setTimeout(done, 500)", vec![]).await?;
        let script = r#"
            const done = arguments[0];
            const project = window.stayband.project();
            window.stayband.open({ ...project, title: "of a script" }).then(() => setTimeout(done, 500));
        "#;
        page.run_async(script, vec![]).await?;
        open_list(&page).await?;
        assert_eq!(titles(&page).await?, json!(["in a file"]));
        page.run("document.getElementById('projects-close').click()", vec![]).await?;
        page.type_into("Setting", "3").await?;
        page.until(
            "it is kept",
            "return Object.values(localStorage).some((text) => text.includes('of a script'))",
            vec![],
        )
        .await?;
        open_list(&page).await?;
        assert_eq!(titles(&page).await?, json!(["of a script", "in a file"]));
        Ok(())
    });
}

#[test]
fn another_projects_ranges_are_compared_on_the_same_ruler() {
    on_the_page(|page| async move {
        keep_loop(&page, "weak", TWO_LAGS).await?;
        keep_loop(&page, "strong", THREE_LAGS).await?;
        page.shows("answer", "to 30").await?;
        open_list(&page).await?;
        press_in_row(&page, "Compare weak").await?;
        page.shows("comparison", "“Other” is weak").await?;
        let lanes = "return [...document.querySelectorAll('#ruler .lane-name, #ruler .lane-text')].map((one) => one.textContent)";
        let found = page.run(lanes, vec![]).await?.to_string();
        assert!(found.contains("Other: stability") && found.contains("0 … 110"), "{found}");
        assert!(found.contains("0 … 30"), "the present project's own lane stays: {found}");
        page.press("End comparison").await?;
        page.hides("comparison").await?;
        assert!(!page.run(lanes, vec![]).await?.to_string().contains("Other"));
        Ok(())
    });
}

#[test]
fn a_damaged_entry_is_said_shown_and_kept() {
    on_the_page(|page| async move {
        keep_loop(&page, "whole", TWO_LAGS).await?;
        let damage = r#"
            const key = Object.keys(localStorage).find((name) => name.startsWith("stayband.project."));
            localStorage.setItem(key, '{"changed": "2026-01-05T10:00:00Z", "project": {"title": "wh');
        "#;
        page.run(damage, vec![]).await?;
        page.driver.refresh().await?;
        page.shows("message", "the entry is damaged").await?;
        open_list(&page).await?;
        assert_eq!(titles(&page).await?, json!(["Damaged entry"]));
        press_in_row(&page, "Show text damaged entry").await?;
        let shown = page.run("return document.querySelector('#message-text input').value", vec![]).await?;
        assert!(shown.as_str().is_some_and(|text| text.ends_with("\"wh")), "{shown}");
        // Typing goes on, beside the damaged entry.
        keep_loop(&page, "new", THREE_LAGS).await?;
        open_list(&page).await?;
        assert_eq!(titles(&page).await?, json!(["Damaged entry", "new"]));
        Ok(())
    });
}

#[test]
fn a_full_store_is_said_until_there_is_room_again() {
    on_the_page(|page| async move {
        keep_loop(&page, "kept", TWO_LAGS).await?;
        keep_loop(&page, "open", TWO_LAGS).await?;
        let fill = r#"
            for (let size = 2 ** 20; size >= 1; size /= 2) {
                try { for (let count = 0; ; count += 1) localStorage.setItem(`filler ${size} ${count}`, "x".repeat(size)); } catch { /* full */ }
            }
        "#;
        page.run(fill, vec![]).await?;
        page.type_into("Title", "open, and now far longer than it was before, so that it cannot fit").await?;
        page.shows("message", "store is full").await?;
        page.shows("unkept", "Not kept").await?;
        let room = "Object.keys(localStorage).filter((name) => name.startsWith('filler')).forEach((name) => localStorage.removeItem(name))";
        page.run(room, vec![]).await?;
        page.type_into("Setting", "5").await?;
        page.hides("unkept").await?;
        page.driver.refresh().await?;
        page.shows("answer-setting", "5").await
    });
}

#[test]
fn without_a_store_the_page_works_and_says_that_nothing_is_kept() {
    on_the_page(|page| async move {
        let refuse = r#"for (const name of ["localStorage", "sessionStorage"])
            Object.defineProperty(window, name, { get() { throw new DOMException("refused", "SecurityError"); } });"#;
        page.driver.cdp().send_raw("Page.addScriptToEvaluateOnNewDocument", json!({ "source": refuse })).await?;
        page.open("").await?;
        type_feed_drive(&page).await?;
        page.shows("message", "does not let the page keep").await?;
        page.shows("unkept", "Not kept").await?;
        page.press("Save").await?;
        page.hides("unkept").await?;
        open_list(&page).await?;
        page.shows("projects-none", "Nothing is kept").await
    });
}

#[test]
fn two_tabs_with_the_same_project_lose_nothing_of_either() {
    on_the_page(|page| async move {
        keep_loop(&page, "shared", TWO_LAGS).await?;
        let first = page.driver.window().await?;
        let second = page.driver.new_tab().await?;
        page.driver.switch_to_window(second).await?;
        page.driver.goto(&format!("file://{}", file()?.display())).await?;
        page.shows("answer", "to 110").await?;
        page.type_into("Title", "of the second tab").await?;
        let kept = "return Object.values(localStorage).some((text) => text.includes(arguments[0]))";
        page.until("the second tab's title is kept", kept, vec![json!("of the second tab")]).await?;

        page.driver.switch_to_window(first).await?;
        page.shows("message", "another tab").await?;
        page.type_into("Title", "of the first tab").await?;
        page.until("the first tab's title is kept", kept, vec![json!("of the first tab")]).await?;
        page.shows("message", "a project of its own").await?;
        open_list(&page).await?;
        let found = titles(&page).await?;
        let found: Vec<&str> = found.as_array().context("a list")?.iter().filter_map(Value::as_str).collect();
        assert!(found.contains(&"of the first tab") && found.contains(&"of the second tab"), "{found:?}");
        Ok(())
    });
}
