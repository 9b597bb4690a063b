//! A loop is typed, and its ranges are read: on the page and in the record.

use crate::page::{Page, on_the_page};
use anyhow::{Context, Result};
use serde_json::Value;

/// A feed drive of our own invention: F(s) = 0.002 s³ + 0.12 s² + s + K, stable for K from 0 to 0.12/0.002 = 60 by the
/// third-order condition a2 a1 > a3 a0 (common practice, no source); the pair is then at ω² = 1/0.002.
pub(crate) async fn type_feed_drive(page: &Page) -> Result<()> {
    page.press("New").await?;
    page.type_into("Controller", "K").await?;
    page.type_into("Plant", "1/(s (0.1 s + 1)(0.02 s + 1))").await?;
    page.type_into("Sensor", "1").await?;
    page.shows("answer", "60").await
}

/// An end of a range as JSON holds it, near `value`.
fn assert_edge(edge: &Value, value: f64, kind: &str) {
    let found = edge["value"].as_f64().expect("an edge has a value");
    // The decimal strings of the bracket are proven; the value only prints it. 1e-12 is far above its rounding.
    assert!((found - value).abs() <= 1e-12 * value.abs(), "{found} is not {value}");
    let bracket: Vec<f64> = edge["bracket"]
        .as_array()
        .expect("an edge has a bracket")
        .iter()
        .map(|end| end.as_str().expect("decimal strings").parse().expect("a decimal number"))
        .collect();
    assert!(bracket[0] <= value && value <= bracket[1], "{value} is not in {bracket:?}");
    assert_eq!(edge["kind"], kind);
    assert_eq!(edge["proven"], true);
}

#[test]
fn a_typed_loop_shows_its_stable_range_on_the_page_and_in_the_record() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.shows("answer", "Stable for K from 0 to 60").await?;
        page.shows("answer", "proven").await?;

        let record = page.record().await?;
        let ranges = record["stability"].as_array().context("a list of ranges")?;
        let counts: Vec<u64> = ranges.iter().filter_map(|range| range["unstablePoles"].as_u64()).collect();
        assert_eq!(counts, [1, 0, 2], "unstable poles below, in and above the stable range");
        assert_edge_at_origin(&ranges[1]["from"]);
        assert_edge(&ranges[1]["to"], 60.0, "axis crossing");
        let omega = ranges[1]["to"]["omega"].as_f64().context("a frequency")?;
        assert!((omega - 500.0_f64.sqrt()).abs() < 1e-9, "{omega} is not √500 rad/s");
        assert!(ranges[0]["from"].is_null() && ranges[2]["to"].is_null(), "the ends of the line are open");
        Ok(())
    });
}

/// K = 0 leaves the open loop's pole at the origin.
fn assert_edge_at_origin(edge: &Value) {
    assert_edge(edge, 0.0, "origin crossing");
}

#[test]
fn the_lanes_of_the_ruler_say_the_same_as_the_record() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.shows("ruler-place", "stable").await?;
        page.shows("ruler-place", "2 unstable poles").await?;
        page.shows("ruler-place", "underdamped").await
    });
}

#[test]
fn a_quantity_gets_a_row_and_its_value_moves_the_range() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.type_into("Plant", "1/(s (0.1 s + 1)(tau s + 1))").await?;
        page.shows("problem-quantity-tau", "tau").await?;
        // 0.01: a3 = 0.001, a2 = 0.11, so the end is 110.
        page.type_into("value of tau", "0.01").await?;
        page.shows("answer", "Stable for K from 0 to 110").await
    });
}

#[test]
fn any_quantity_may_be_the_knob() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.type_into("Plant", "1/(s (0.1 s + 1)(tau s + 1))").await?;
        page.type_into("value of tau", "0.02").await?;
        page.choose("Knob", "tau").await?;
        page.type_into("value of K", "60").await?;
        // Stable while 0.1 + tau > 60 · 0.1 tau, so for tau below 0.02.
        page.shows("answer", "to 0.02").await
    });
}

#[test]
fn the_sign_of_the_feedback_mirrors_the_ranges() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.choose("Feedback", "positive").await?;
        page.shows("answer", "Stable for K from −60 to 0").await
    });
}

#[test]
fn every_demo_opens_and_has_a_stable_range() {
    on_the_page(|page| async move {
        let count = page.run("return document.querySelectorAll('#demo-list button').length", vec![]).await?;
        let count = usize::try_from(count.as_u64().context("a number of demos")?)?;
        assert!(count >= 3, "{count} demos");
        for demo in 0..count {
            page.press("New").await?;
            page.shows("answer", "Type a loop").await?;
            page.run("document.querySelectorAll('#demo-list button')[arguments[0]].click()", vec![demo.into()]).await?;
            page.shows("answer", "Use ").await?;
            page.shows("answer-stable", "Stable for").await?;
            let record = page.record().await?;
            let title = record["project"]["title"].as_str().context("a title")?;
            assert!(title.contains("invented"), "{title} is not marked as invented");
            let ranges = record["stability"].as_array().context("a list of ranges")?;
            assert!(ranges.iter().any(|range| range["stable"] == true), "{title} has no stable range");
        }
        Ok(())
    });
}

#[test]
fn scripts_open_a_project_and_get_a_promise_of_its_record() {
    on_the_page(|page| async move {
        let script = r#"
            const done = arguments[arguments.length - 1];
            window.stayband.open({
                format: "stayband-project/1",
                title: "invented",
                loop: { controller: "K", plant: "(s + 4)/(s (s - 1))" },
                knob: "K",
            }).then((record) => done(record), (error) => done(String(error)));
        "#;
        let record = page.run_async(script, vec![]).await?;
        // F = s² + (K − 1) s + 4 K: stable from K = 1, where ω² = 4.
        let ranges = record["stability"].as_array().with_context(|| format!("{record:#}"))?;
        let last = ranges.last().context("at least one range")?;
        assert_eq!(last["stable"], true);
        assert_edge(&last["from"], 1.0, "axis crossing");
        assert_eq!(page.record().await?["stability"], record["stability"]);
        Ok(())
    });
}
