//! What the page looks like: every demo on a notebook and on a telephone, by day and by night. The pictures are written
//! to `target/page/screens/` to be looked at; what can be checked without eyes is checked here.
//!
//! The README's is `roller-1440-light.png`, copied to `tests/browser/screenshot.png` by hand.

use crate::page::{Page, file, on_the_page_with};
use anyhow::{Context, Result};
use serde_json::{Value, json};
use std::fs;

/// The demos in the order of the menu, as their pictures are called.
const DEMOS: [&str; 3] = ["roller", "winch", "pump"];
const NOTEBOOK: (u32, u32) = (1440, 900);
const TELEPHONE: (u32, u32) = (390, 844);

/// A full page is a larger picture than this; an empty one is smaller.
const LEAST_BYTES: usize = 20_000;

/// Opens a demo and waits until its pictures are drawn.
pub(crate) async fn show_demo(page: &Page, index: usize) -> Result<()> {
    page.run("document.querySelectorAll('#demo-list button')[arguments[0]].click()", vec![json!(index)]).await?;
    let drawn = r##"
        const title = window.stayband.record()?.project.title ?? "";
        const picked = document.querySelectorAll("#demo-list strong")[arguments[0]].textContent.split(" ")[0];
        return title.startsWith(picked) && document.querySelectorAll("#plane path").length > 5
            && document.querySelector("#response .curve") !== null;
    "##;
    page.until("the demo is drawn", drawn, vec![json!(index)]).await
}

/// Takes a picture in both schemes, as high as the page.
async fn take(page: &Page, name: &str, (width, height): (u32, u32)) -> Result<()> {
    let folder = file()?.with_file_name("screens");
    fs::create_dir_all(&folder)?;
    let whole = page.run("return document.documentElement.scrollHeight", vec![]).await?;
    let height = if width == TELEPHONE.0 { whole } else { json!(height) };
    resize(page, width, &height).await?;
    for scheme in ["light", "dark"] {
        page.prefer("prefers-color-scheme", scheme).await?;
        let picture = page.driver.screenshot_as_png().await?;
        assert!(picture.len() > LEAST_BYTES, "{} bytes are no picture of a full page", picture.len());
        fs::write(folder.join(format!("{name}-{width}-{scheme}.png")), picture)?;
    }
    Ok(())
}

async fn resize(page: &Page, width: u32, height: &Value) -> Result<()> {
    let metrics = json!({ "width": width, "height": height, "deviceScaleFactor": 1, "mobile": false });
    page.driver.cdp().send_raw("Emulation.setDeviceMetricsOverride", metrics).await?;
    Ok(())
}

/// The lowest point of what must be seen, and the width of the page, in CSS pixels.
async fn extent(page: &Page) -> Result<(f64, f64)> {
    let script = r##"
        window.scrollTo(0, 0);
        const seen = [...document.querySelectorAll("#headline, #ruler, #plane, .legend, #response, #response-choice")];
        return [Math.max(...seen.map((one) => one.getBoundingClientRect().bottom)), document.documentElement.scrollWidth];
    "##;
    let found: Value = page.run(script, vec![]).await?;
    Ok((found[0].as_f64().context("a height")?, found[1].as_f64().context("a width")?))
}

#[test]
fn on_a_notebook_answer_ruler_locus_and_step_are_seen_without_scrolling() {
    on_the_page_with(NOTEBOOK, |page| async move {
        for (index, name) in DEMOS.iter().enumerate() {
            show_demo(&page, index).await?;
            let (bottom, width) = extent(&page).await?;
            assert!(bottom <= f64::from(NOTEBOOK.1), "{name}: the pictures end at {bottom} px");
            assert!(width <= f64::from(NOTEBOOK.0), "{name}: the page is {width} px wide");
            take(&page, name, NOTEBOOK).await?;
        }
        Ok(())
    });
}

#[test]
fn on_a_telephone_nothing_is_wider_than_the_screen() {
    on_the_page_with(TELEPHONE, |page| async move {
        for (index, name) in DEMOS.iter().enumerate() {
            resize(&page, TELEPHONE.0, &json!(TELEPHONE.1)).await?;
            show_demo(&page, index).await?;
            let (_, width) = extent(&page).await?;
            assert!(width <= f64::from(TELEPHONE.0), "{name}: the page is {width} px wide");
            take(&page, name, TELEPHONE).await?;
        }
        Ok(())
    });
}

#[test]
fn the_list_of_projects_the_menu_and_a_comparison_fit_on_both_screens() {
    for window in [NOTEBOOK, TELEPHONE] {
        on_the_page_with(window, move |page| async move {
            for index in 0..DEMOS.len() {
                show_demo(&page, index).await?;
                // A demo is kept once something is changed.
                page.type_into("Setting", "25").await?;
                page.shows("answer-setting", "= 25").await?;
            }
            page.press("Projects").await?;
            let fits = r#"
                const inside = ({ left, right }) => left >= 0 && right <= document.documentElement.clientWidth;
                const parts = [...document.querySelectorAll(arguments[0])];
                return parts.length >= arguments[1] && parts.every((part) => inside(part.getBoundingClientRect()));
            "#;
            page.until("three projects fit", fits, vec![json!("#projects, #project-rows button"), json!(12)]).await?;
            take(&page, "projects", window).await?;
            page.run("document.querySelectorAll('#project-rows [aria-label^=Compare]')[1].click()", vec![]).await?;
            page.shows("comparison", "Other").await?;
            page.run("document.getElementById('export').open = true", vec![]).await?;
            page.until("the menu fits", fits, vec![json!("#export-list, #export-list button"), json!(9)]).await?;
            take(&page, "comparison", window).await
        });
    }
}
