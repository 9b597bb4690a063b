//! WCAG 2.2 AA as far as a program can check it (axe-core), and small windows.

use crate::answers::type_feed_drive;
use crate::page::{Page, on_the_page, on_the_page_with};
use anyhow::{Context, Result};
use serde_json::json;
use std::fs;
use std::path::Path;

/// Runs axe-core in the page; answers with what it found, a line each.
const CHECK: &str = r#"
    const done = arguments[arguments.length - 1];
    const levels = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa", "best-practice"];
    axe.run(document, { runOnly: { type: "tag", values: levels } }).then(
        ({ violations, passes }) => done({
            passes: passes.length,
            violations: violations.flatMap(({ id, nodes }) =>
                nodes.map(({ target, failureSummary }) => `${id}: ${target.join(" ")}: ${failureSummary}`)),
        }),
        (error) => done({ violations: [String(error)] }),
    );
"#;

async fn assert_accessible(page: &Page) -> Result<()> {
    let source = Path::new(env!("CARGO_MANIFEST_DIR")).join("../www/node_modules/axe-core/axe.min.js");
    let axe = fs::read_to_string(&source).with_context(|| format!("{}: cargo page installs it", source.display()))?;
    page.run(&axe, vec![]).await?;
    let found = page.run_async(CHECK, vec![]).await?;
    assert_eq!(found["violations"], json!([]), "{found:#}");
    assert!(found["passes"].as_u64().is_some_and(|passes| passes > 20), "axe looked at little: {found:#}");
    Ok(())
}

#[test]
fn the_page_with_an_answer_has_no_accessibility_fault() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        assert_accessible(&page).await
    });
}

#[test]
fn the_page_with_a_mistake_has_no_accessibility_fault() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.type_into("Plant", "1/(s").await?;
        page.shows("plant-problem", "bracket").await?;
        assert_accessible(&page).await
    });
}

#[test]
fn the_lists_and_dialogs_have_no_accessibility_fault() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.type_into("Title", "kept").await?;
        page.press("New").await?;
        type_feed_drive(&page).await?;
        page.press("Projects").await?;
        page.until("both are listed", "return document.querySelectorAll('#project-rows tr').length === 2", vec![])
            .await?;
        assert_accessible(&page).await?;
        page.run("document.getElementById('projects-close').click()", vec![]).await?;
        page.press("Save as").await?;
        assert_accessible(&page).await?;
        page.run("document.getElementById('save-as-close').click()", vec![]).await?;
        page.run("document.getElementById('export').open = true", vec![]).await?;
        assert_accessible(&page).await
    });
}

#[test]
fn dark_colours_have_no_accessibility_fault() {
    on_the_page(|page| async move {
        let colour = "return getComputedStyle(document.body).backgroundColor";
        let light = page.run(colour, vec![]).await?;
        page.prefer("prefers-color-scheme", "dark").await?;
        assert_ne!(page.run(colour, vec![]).await?, light, "the page is the same in the dark");
        type_feed_drive(&page).await?;
        assert_accessible(&page).await
    });
}

#[test]
fn a_phone_shows_everything_without_scrolling_sideways() {
    on_the_page_with((390, 844), |page| async move {
        type_feed_drive(&page).await?;
        let script = "return [document.documentElement.scrollWidth, window.innerWidth]";
        let widths = page.run(script, vec![]).await?;
        assert_eq!(widths, json!([390, 390]), "width of the page and of the window");
        assert_accessible(&page).await
    });
}
