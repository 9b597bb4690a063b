//! The pointer of the ruler, moved by keys.

use crate::answers::type_feed_drive;
use crate::page::{Page, on_the_page};
use anyhow::{Context, Result};
use thirtyfour::prelude::*;

/// The setting as the form holds it.
async fn setting(page: &Page) -> Result<f64> {
    let value = page.run("return window.stayband.project().setting.value", vec![]).await?;
    value.as_str().context("a setting")?.parse().with_context(|| format!("{value} is no number"))
}

/// Presses a key on the pointer and returns the setting it leads to.
async fn after(page: &Page, key: Key) -> Result<f64> {
    page.driver.find(By::Css("[role=slider]")).await?.send_keys(key + "").await?;
    setting(page).await
}

#[test]
fn arrows_move_the_pointer_by_steps_and_home_and_end_go_to_the_ends_of_the_stable_range() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.type_into("Setting", "20").await?;
        page.shows("answer-setting", "20").await?;

        let right = after(&page, Key::Right).await?;
        assert!(right > 20.0 && right < 22.0, "one step right of 20 is {right}");
        let left = after(&page, Key::Left).await?;
        assert!((left - 20.0).abs() < 1e-9, "and back is {left}");

        let end = after(&page, Key::End).await?;
        assert!(end < 60.0 && end > 59.0, "the upper end of 0 to 60 is {end}");
        page.shows("answer-setting", "stable").await?;
        let start = after(&page, Key::Home).await?;
        assert!(start > 0.0 && start <= 1.0, "the lower end of 0 to 60 is {start}");
        Ok(())
    });
}

#[test]
fn the_poles_follow_the_setting() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.type_into("Setting", "60").await?;
        page.shows("answer-setting", "marginally stable").await?;
        page.type_into("Setting", "61").await?;
        page.shows("answer-setting", "unstable: 2 poles").await?;
        page.type_into("Setting", "59").await?;
        page.shows("answer-setting", "stable, underdamped").await
    });
}

#[test]
fn an_edge_opens_its_reason_by_the_keyboard() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        let edge = page.driver.find(By::Css("#ruler [role=button][aria-label*='60']")).await?;
        edge.send_keys(Key::Enter + "").await?;
        page.shows("why", "60").await?;
        // √500 rad/s.
        page.shows("why", "22.36").await
    });
}
